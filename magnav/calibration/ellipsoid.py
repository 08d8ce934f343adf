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


@dataclasses.dataclass(frozen=True)
class Ellipsoid:
    """hard_iron_uT (3,), soft_iron (3, 3), residual_uT (n,) the distances e, jacobian (n, 9), converged."""

    hard_iron_uT: np.ndarray
    soft_iron: np.ndarray
    residual_uT: np.ndarray
    jacobian: np.ndarray
    converged: bool


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
    w = symmetric(parameters[3:])
    reading = mag_uT - parameters[:3]
    u = reading @ w
    size = np.linalg.norm(u, axis=1)
    unit = u / size[:, None]
    across = unit @ w
    gain = np.linalg.norm(across, axis=1)
    bias = noise_uT**2 * (np.sum(w * w) - gain**2) / (2 * field_uT)
    residual = (size - bias - field_uT) / gain
    lever = across / gain[:, None]
    turned = lever @ w
    sideways = (turned - unit * np.sum(turned * unit, axis=1)[:, None]) / size[:, None]
    d_size, d_gain, d_square = np.empty((len(mag_uT), 9)), np.empty((len(mag_uT), 9)), np.zeros(9)
    d_size[:, :3], d_gain[:, :3] = -across, -(sideways @ w)
    for k, (i, j) in enumerate(PAIRS, 3):
        d_size[:, k] = unit[:, i] * reading[:, j]
        d_gain[:, k] = lever[:, i] * unit[:, j] + sideways[:, i] * reading[:, j]
        d_square[k] = w[i, j]
        if i != j:
            d_size[:, k] += unit[:, j] * reading[:, i]
            d_gain[:, k] += lever[:, j] * unit[:, i] + sideways[:, j] * reading[:, i]
            d_square[k] *= 2
    d_bias = noise_uT**2 / field_uT * (d_square - gain[:, None] * d_gain)
    return residual, (d_size - d_bias - residual[:, None] * d_gain) / gain[:, None]


def fit_ellipsoid(mag_uT, field_uT):
    """Fit readings (n, 3) to a field of magnitude `field_uT`; starts from the closest sphere."""
    centre, radius = fit_sphere(mag_uT)
    parameters = np.concatenate([centre, np.full(3, field_uT / max(radius, 1e-9)), np.zeros(3)])
    scale = np.array([1.0] * 3 + [1.0 / max(radius, 1e-9)] * 6)
    noise = 0.0
    residual, jacobian = residual_and_jacobian(parameters, mag_uT, field_uT, noise)
    damping, converged = 1e-3, False
    for _ in range(ROUNDS):
        scaled = jacobian * scale
        normal, right = scaled.T @ scaled, -scaled.T @ residual
        step = np.linalg.solve(normal + damping * np.diag(np.diag(normal) + 1e-12), right)
        trial = parameters + scale * step
        trial_residual, trial_jacobian = residual_and_jacobian(trial, mag_uT, field_uT, noise)
        if np.all(np.isfinite(trial_residual)) and trial_residual @ trial_residual <= residual @ residual:
            parameters, residual, jacobian = trial, trial_residual, trial_jacobian
            damping = max(damping / 10, 1e-12)
            if np.max(np.abs(step)) < SMALLEST_STEP * max(radius, 1.0):
                converged = True
                break
            # the bias follows the noise as it becomes known
            noise = np.sqrt(residual @ residual / max(len(residual) - 9, 1))
            residual, jacobian = residual_and_jacobian(parameters, mag_uT, field_uT, noise)
        elif np.max(np.abs(step)) < SMALLEST_STEP * max(radius, 1.0):
            converged = True
            break
        else:
            damping *= 10
    return Ellipsoid(parameters[:3], symmetric(parameters[3:]), residual, jacobian, converged)
