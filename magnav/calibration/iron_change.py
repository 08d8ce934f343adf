"""Did the iron change while the log was taken? A change of offset, fitted in each stretch of the recording.

The fit of one calibration takes half of a change upon itself and spreads the rest, so that neither the residuals' size
nor their mean shows it. A hard iron of its own for a stretch does: the score test of C. R. Rao (Proc. Cambridge
Philosophical Society 44, 50-57, 1948), all nine parameters free; the change is kept to about a tenth of the field where
a stretch does not determine it.
"""

import numpy as np

PARTS, SHORTEST = 20, 2  # twentieths of the recording; a stretch of one alone is mostly a single attitude
EXPECTED_CHANGE = 0.1  # of the field: spread of changes beforehand, keeps what a stretch does not determine at zero


def largest_change(fit, field_uT):
    """The change of offset (3,), uT, in the stretch where it explains most, and how much it explains: by how much it
    lowers the squares of the residuals over the noise's (for white noise, chi-square with three degrees of freedom)."""
    residual, jacobian = fit.residual_uT, fit.jacobian
    variance = max(float(residual @ residual) / max(len(residual) - 9, 1), np.finfo(float).tiny)
    edges = np.linspace(0, len(residual), PARTS + 1).astype(int)
    normal, right = np.zeros((PARTS + 1, 9, 9)), np.zeros((PARTS + 1, 9))
    for k in range(PARTS):
        part = slice(edges[k], edges[k + 1])
        normal[k + 1] = normal[k] + jacobian[part].T @ jacobian[part] / variance
        right[k + 1] = right[k] - jacobian[part].T @ residual[part] / variance
    first, last = np.triu_indices(PARTS + 1, SHORTEST)
    keep = last - first <= PARTS - SHORTEST
    first, last = first[keep], last[keep]
    aside = (normal[last] - normal[first])[:, :, :3]
    # pinv: what the whole recording does not determine is for other checks to say
    taken = np.linalg.pinv(normal[-1], hermitian=True) @ aside
    own = aside[:, :3] - np.swapaxes(aside, 1, 2) @ taken + np.eye(3) / (EXPECTED_CHANGE * field_uT) ** 2
    pull = (right[last] - right[first])[:, :3] - np.swapaxes(taken, 1, 2) @ right[-1]
    change = np.linalg.solve(own, pull[:, :, None])[:, :, 0]
    explained = np.sum(pull * change, axis=1)
    best = int(np.argmax(explained))
    return change[best], float(explained[best])
