"""What the data of a calibration can tell: predicted heading error, directions left undetermined, the verdict.

Residuals do not reveal a motion that covers too little: an ellipsoid far away fits a small patch as well. What does is
the information that is left when the patch counts once: one observation for each cell of the sphere that was seen, with
the error of a field that is not quite the same everywhere. Its covariance must still give a heading.
"""

import numpy as np

from .coverage import CELLS, cell_of
from .ellipsoid import PAIRS

# Every limit is our choice; the reason stands beside it.
SMALLEST_MISFIT = 0.01  # of the field: indoors and near vehicles the field differs by more from place to place
LARGEST_HEADING_SIGMA_DEG = 5.0  # twice this is 10 degrees: no better than an uncalibrated sensor in a clean mounting
WEAK = 0.02  # of the field: a direction less certain than this is for the motion to mend, not for the noise
LARGEST_CONDITION = 1.8  # soft iron stretches one axis against another by some ten per cent, seldom by half
LARGEST_OFFSET = 4.0  # of the field: beyond, the sensor's range and its scale error, not iron, are in question
LARGEST_RESIDUAL = 0.05  # of the field: beyond, the iron or the field changed during the recording
LARGEST_DRIFT = 0.04  # of the field: the same, seen in the mean of a tenth of the recording
LARGEST_CHANGE = 0.08  # of the field: a change of iron leaves half of itself wrong, which is LARGEST_DRIFT again
SURE_CHANGE = 30.0  # chi-square, 3 degrees: noise alone exceeds it once in 700,000, and some 200 stretches are tried
LARGEST_SCALE = 2.0  # against the model's field: buildings and sensors differ by tenths, not by half
HARDLY_TURNED = 0.05  # of the field: turning must show more than what may be left unexplained, LARGEST_RESIDUAL
FLAT = 1e-7  # thickness over extent: a real sensor's noise and steps are ten thousand times that
LARGEST_READING_UT = 1e6  # 1 T: a hundred times what compass sensors measure
REST_ACCELERATION_MPS2, REST_TURN_RADPS = 0.2, 0.2  # a fiftieth of gravity; a turn of 11 degrees in a second
FEWEST_SAMPLES = 50
USE_TILT_DEG = 30.0  # how far from level headings are still asked for: a small craft in a turn
DEFAULT_INCLINATION_DEG = 60.0  # where no field is given: a middle latitude
MAGNITUDE_MARGIN = 0.05  # a sensor's scale error by its data sheet; beyond, the place is in question
DIP_MARGIN_DEG = 2.0  # what an accelerometer's own offset (a fiftieth of gravity) and a hand at rest make of the dip

KINDS = (("offset along", ["x", "y", "z"]), ("scale along", ["x", "y", "z"]), ("skew of", ["x-y", "x-z", "y-z"]))
NAMED = 0.6  # of the largest part: what is named of the direction left undetermined


def effective_count(residual):
    """How many independent residuals a series of correlated ones is worth (initial positive sequence: C. J. Geyer,
    Statistical Science 7, 473-483, 1992)."""
    n = len(residual)
    r = residual - residual.mean()
    spectrum = np.fft.rfft(r, 2 * n)
    correlation = np.fft.irfft(spectrum * np.conj(spectrum))[:n]
    if not correlation[0] > 0:
        return float(n)
    pairs = correlation[1:n - n % 2 - 1:2] + correlation[2:n - n % 2:2] if n > 3 else np.zeros(0)
    pairs = pairs / correlation[0]
    stop = int(np.argmax(pairs < 0)) if np.any(pairs < 0) else len(pairs)
    return n / (1.0 + 2.0 * float(np.sum(pairs[:stop])))


def _attitudes():
    """North, east and down in the body frame, (n, 3) each: every 10 degrees of heading, level and at USE_TILT_DEG."""
    heading = np.radians(np.arange(0.0, 360.0, 10.0))
    zero, one = np.zeros_like(heading), np.ones_like(heading)
    level = np.stack([np.stack([np.cos(heading), -np.sin(heading), zero], 1),
                      np.stack([np.sin(heading), np.cos(heading), zero], 1), np.stack([zero, zero, one], 1)])
    c, s = np.cos(np.radians(USE_TILT_DEG)), np.sin(np.radians(USE_TILT_DEG))
    turns = [np.eye(3)]
    for sine in (s, -s):
        turns.append(np.array([[1, 0, 0], [0, c, -sine], [0, sine, c]]))
        turns.append(np.array([[c, 0, sine], [0, 1, 0], [-sine, 0, c]]))
    return np.concatenate([level @ turn.T for turn in turns], axis=1)


def worst_heading_sigma_deg(covariance, soft_iron, field_uT, inclination_deg):
    """Largest heading error (one sigma) that the parameters' covariance causes, level and tilted by USE_TILT_DEG."""
    north, east, down = _attitudes()
    dip = np.radians(inclination_deg)
    reading = field_uT * (np.cos(dip) * north + np.sin(dip) * down) @ np.linalg.inv(soft_iron)
    gradient = np.empty((len(north), 9))
    gradient[:, :3] = -east @ soft_iron
    for k, (i, j) in enumerate(PAIRS, 3):
        gradient[:, k] = east[:, i] * reading[:, j] + (east[:, j] * reading[:, i] if i != j else 0.0)
    variance = np.einsum("ni,ij,nj->n", gradient, covariance, gradient)
    return float(np.degrees(np.sqrt(max(variance.max(), 0.0)) / (field_uT * np.cos(dip))))


def covariance_by_cells(fit, direction, misfit_uT):
    """Covariance (9, 9) of the parameters where each cell seen counts as one observation with the error `misfit_uT`."""
    cell = cell_of(direction)
    weight = 1.0 / np.bincount(cell, minlength=CELLS)[cell]
    return inverse((fit.jacobian * weight[:, None]).T @ fit.jacobian) * misfit_uT**2


def covariance_of(fit):
    """Covariance (9, 9) of a fit's parameters: of the likelihood with the noise that the residuals show, widened by how
    far they are correlated in the order of the recording."""
    count = len(fit.residual_uT)
    variance = float(fit.residual_uT @ fit.residual_uT) / (count - 9)
    return inverse(fit.jacobian.T @ fit.jacobian) * variance * count / effective_count(fit.residual_uT)


def inverse(information):
    """Inverse of an information matrix; what it does not determine gets a very large variance, not an error."""
    size = np.sqrt(np.maximum(np.diag(information), 1e-30))
    values, vectors = np.linalg.eigh(information / np.outer(size, size))
    values = np.maximum(values, 1e-14)
    return (vectors / values) @ vectors.T / np.outer(size, size)


def weakest(covariance, field_uT):
    """Error in uT of the direction least determined, and in plain words what it is and which motion would help."""
    scale = np.array([1.0] * 3 + [field_uT] * 6)
    values, vectors = np.linalg.eigh(covariance * np.outer(scale, scale))
    large = np.abs(vectors[:, -1]) > NAMED * np.abs(vectors[:, -1]).max()
    parts, motions, count = [], [], int(large.sum())
    for kind, ((name, labels), chosen) in enumerate(zip(KINDS, large.reshape(3, 3), strict=True)):
        labels = [label for label, is_large in zip(labels, chosen, strict=True) if is_large]
        if labels:
            parts.append(f"{name} {listed(labels)}")
            motions += [f"midway between {label[0]} and {label[2]}" if kind == 2 else label for label in labels]
    axes = sorted({motion for motion in motions if len(motion) == 1})
    skews = [motion for motion in motions if len(motion) > 1]
    error_uT, verb = float(np.sqrt(values[-1])), "is" if count == 1 else "are"
    return error_uT, (f"{listed(parts)} {verb} not determined (error about {error_uT:.0f} uT): turn the "
                      f"sensor so that the field points along and against {listed(axes + skews)}")


def listed(words):
    """The words as in a sentence: a; a and b; a, b and c."""
    return " and ".join([", ".join(words[:-1]), words[-1]] if len(words) > 1 else words)


def drift_uT(residual):
    """Largest mean residual of a tenth of the recording, in its order."""
    if len(residual) < 100:
        return 0.0
    return float(max(abs(part.mean()) for part in np.array_split(residual, 10)))
