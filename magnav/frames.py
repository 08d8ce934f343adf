"""The only place where a frame is changed. Inside: body FRD (forward, right, down), local NED (north, east, down)."""

import numpy as np

from .errors import InputError

BODY_FRAMES = ("FRD", "FLU")
LOCAL_FRAMES = ("NED", "ENU")
ACCELERATION_SENSES = ("specific-force", "gravity")

# each is its own inverse
_TO_FRD = {"FRD": np.array([1.0, 1.0, 1.0]), "FLU": np.array([1.0, -1.0, -1.0])}


def _known(name, accepted, what):
    upper = str(name).upper() if accepted[0].isupper() else str(name)
    if upper not in accepted:
        raise InputError(f"{what} {name!r} is not known; accepted: {', '.join(accepted)}")
    return upper


def body_to_frd(vector, body):
    """Vectors (..., 3) of the body frame named, FRD or FLU (forward, left, up), in FRD; the same call turns back."""
    return np.asarray(vector, dtype=np.float64) * _TO_FRD[_known(body, BODY_FRAMES, "body frame")]


def local_to_ned(vector, local):
    """Vectors (..., 3) of the local frame named, NED or ENU (east, north, up), in NED; the same call turns back."""
    vector = np.asarray(vector, dtype=np.float64)
    if _known(local, LOCAL_FRAMES, "local frame") == "NED":
        return vector.copy()
    return vector[..., [1, 0, 2]] * np.array([1.0, 1.0, -1.0])


def to_specific_force(acc_mps2, sense):
    """Accelerometer readings as specific force (at rest it points up); `sense` "gravity": a device that shows down."""
    acc_mps2 = np.asarray(acc_mps2, dtype=np.float64)
    return -acc_mps2 if _known(sense, ACCELERATION_SENSES, "acceleration sense") == "gravity" else acc_mps2.copy()


def calibration_to_frd(hard_iron_uT, soft_iron, covariance, body):
    """Hard iron (3,), symmetric soft iron (3, 3) and their covariance (9, 9) of a body frame, in FRD.

    Order of the nine: b_x b_y b_z W_xx W_yy W_zz W_xy W_xz W_yz.
    """
    sign = _TO_FRD[_known(body, BODY_FRAMES, "body frame")]
    x, y, z = sign
    nine = np.array([x, y, z, 1.0, 1.0, 1.0, x * y, x * z, y * z])
    return hard_iron_uT * sign, soft_iron * np.outer(sign, sign), covariance * np.outer(nine, nine)
