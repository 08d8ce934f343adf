"""Maximum-likelihood fit of hard and soft iron: readings of a field of constant magnitude lie on an ellipsoid.

m = W^-1 B + b + noise, |B| = F, noise isotropic and Gaussian. To first order in the noise the likelihood is that of the
distance of each reading to the ellipsoid, e = (|W (m - b)| - F) / |W u|, u the unit vector of W (m - b) (P. D. Sampson,
Computer Graphics and Image Processing 18, 97-108, 1982). The mean of |W (m - b)| lies above F by the noise across it,
sigma^2 (tr W^2 - |W u|^2) / (2 F): taken off. Damped Gauss-Newton (Levenberg-Marquardt) with the analytic Jacobian.

Parameters in the order b_x b_y b_z W_xx W_yy W_zz W_xy W_xz W_yz.
"""

import dataclasses

import numpy as np

PAIRS = ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))
ROUNDS = 100
SMALLEST_STEP = 1e-10
REFITS = 2  # with the bias of the noise found; what a third would change is far below the noise


@dataclasses.dataclass(frozen=True)
class Ellipsoid:
    """hard_iron_uT (3,), soft_iron (3, 3), residual_uT (n,) the distances e, jacobian (n, 9), converged; noise_uT,
    whose bias was taken off."""

    hard_iron_uT: np.ndarray
    soft_iron: np.ndarray
    residual_uT: np.ndarray
    jacobian: np.ndarray
    converged: bool
    noise_uT: float

    def directions(self, mag_uT):
        """Unit vectors (n, 3) of the calibrated field of readings (n, 3)."""
        field = (mag_uT - self.hard_iron_uT) @ self.soft_iron
        return field / np.maximum(np.linalg.norm(field, axis=1), np.finfo(float).tiny)[:, None]


def symmetric(six):
    """The symmetric matrix of (W_xx, W_yy, W_zz, W_xy, W_xz, W_yz)."""
    xx, yy, zz, xy, xz, yz = six
    return np.array([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]])


def six_of(matrix):
    return np.array([matrix[i, j] for i, j in PAIRS])


def fit_sphere(mag_uT):
    """Centre and radius of the sphere closest in the algebraic sense: |m|^2 = 2 c m + k, linear least squares."""
    middle = mag_uT.mean(axis=0)
    m = mag_uT - middle
    design = np.column_stack([2 * m, np.ones(len(m))])
    solution, *_ = np.linalg.lstsq(design, np.sum(m * m, axis=1), rcond=None)
    return solution[:3] + middle, float(np.sqrt(max(solution[3] + solution[:3] @ solution[:3], 0.0)))


def residual_and_jacobian(parameters, mag_uT, field_uT, noise_uT):
    """Distances e (n,) and their derivatives (n, 9)."""
    # one row for each component: long rows are what numpy is fast on
    w = symmetric(parameters[3:])
    reading = mag_uT.T - parameters[:3, None]
    u = w @ reading
    # a reading in the very centre has no direction
    size = np.maximum(np.sqrt(np.einsum("in,in->n", u, u)), 1e-9 * field_uT)
    unit = u / size
    across = w @ unit
    gain = np.sqrt(np.einsum("in,in->n", across, across))
    bias = noise_uT**2 * (np.sum(w * w) - gain**2) / (2 * field_uT)
    residual = (size - bias - field_uT) / gain
    lever = across / gain
    turned = w @ lever
    sideways = (turned - unit * np.einsum("in,in->n", turned, unit)) / size
    # of the distance to first order: d_size / gain, less what the gain and the bias change
    by_gain = noise_uT**2 / field_uT - residual / gain
    ahead = unit / gain + by_gain * sideways
    aside = by_gain * lever
    jacobian = np.empty((9, len(mag_uT)))
    jacobian[:3] = -(w @ ahead)
    for k, (i, j) in enumerate(PAIRS, 3):
        jacobian[k] = ahead[i] * reading[j] + aside[i] * unit[j]
        if i != j:
            jacobian[k] += ahead[j] * reading[i] + aside[j] * unit[i]
        jacobian[k] -= noise_uT**2 / field_uT * w[i, j] * (1 if i == j else 2) / gain
    return residual, jacobian.T


def fit_ellipsoid(mag_uT, field_uT):
    """Fit readings (n, 3) to a field of magnitude `field_uT`; starts from the closest sphere."""
    centre, radius = fit_sphere(mag_uT)
    radius = max(radius, 1e-9)
    start = np.concatenate([centre, np.full(3, field_uT / radius), np.zeros(3)])
    fit = _descend(start, radius, mag_uT, field_uT, 0.0)
    for _ in range(REFITS):
        noise = float(np.sqrt(fit.residual_uT @ fit.residual_uT / max(len(mag_uT) - 9, 1)))
        found = np.concatenate([fit.hard_iron_uT, six_of(fit.soft_iron)])
        fit = _descend(found, radius, mag_uT, field_uT, noise)
    return fit


def _descend(parameters, radius, mag_uT, field_uT, noise_uT):
    """Levenberg-Marquardt from `parameters`, the noise given."""
    scale = np.array([1.0] * 3 + [1.0 / radius] * 6)
    residual, jacobian = residual_and_jacobian(parameters, mag_uT, field_uT, noise_uT)
    damping, converged = 1e-3, False
    for _ in range(ROUNDS):
        scaled = jacobian * scale
        normal, right = scaled.T @ scaled, -scaled.T @ residual
        try:
            step = np.linalg.solve(normal + damping * np.diag(np.diag(normal) + 1e-12), right)
        except np.linalg.LinAlgError:
            damping *= 10
            continue
        trial = parameters + scale * step
        trial_residual, trial_jacobian = residual_and_jacobian(trial, mag_uT, field_uT, noise_uT)
        if np.all(np.isfinite(trial_residual)) and trial_residual @ trial_residual <= residual @ residual:
            parameters, residual, jacobian = trial, trial_residual, trial_jacobian
            damping = max(damping / 10, 1e-12)
        else:
            damping *= 10
        if np.max(np.abs(step)) < SMALLEST_STEP * max(radius, 1.0):
            converged = True
            break
    return Ellipsoid(parameters[:3], symmetric(parameters[3:]), residual, jacobian, converged, noise_uT)
