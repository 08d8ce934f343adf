"""The result of a calibration: what it is, how good it is, how it is applied, and its file."""

import dataclasses
import json
import math

import numpy as np

from ..caution import CAUTION
from ..errors import CalibrationRefused, InputError

SCHEMA, SCHEMA_VERSION = "magnav-calibration", 1
VERDICTS = ("good", "refused")
PARAMETERS = ("b_x", "b_y", "b_z", "W_xx", "W_yy", "W_zz", "W_xy", "W_xz", "W_yz")


@dataclasses.dataclass(frozen=True, eq=False)
class Calibration:
    """Earth field B = soft_iron (m - hard_iron_uT) from a reading m, both in the frame `body`.

    hard_iron_uT (3,); soft_iron (3, 3), symmetric, no unit; covariance (9, 9) of the parameters in the order b_x b_y
    b_z W_xx W_yy W_zz W_xy W_xz W_yz (uT, uT and none); noise_uT, one axis, one sample, what the model does not explain
    included. verdict: "good" or "refused", with `reasons` in plain words; `warnings` for what a good one leaves open.
    scale: "model total field" or "relative" (determinant of soft_iron 1). coverage: fraction of the sphere seen;
    predicted_heading_sigma_deg: worst level heading's error from the calibration alone.
    """

    hard_iron_uT: np.ndarray
    soft_iron: np.ndarray
    covariance: np.ndarray
    noise_uT: float
    verdict: str
    reasons: tuple
    warnings: tuple
    body: str
    scale: str
    samples: int
    coverage: float
    predicted_heading_sigma_deg: float | None
    total_uT: float
    date_yr: float | None = None
    model: str | None = None
    lat_deg: float | None = None
    lon_deg: float | None = None
    height_m: float | None = None

    @property
    def residual_rms_uT(self):
        """RMS distance of the readings to the fitted ellipsoid, uT: below the noise, nine parameters being fitted."""
        return self.noise_uT * float(np.sqrt(max(self.samples - len(PARAMETERS), 0) / max(self.samples, 1)))

    @property
    def condition_number(self):
        """How much more the soft iron stretches one direction than another: ratio of its singular values, no unit."""
        return float(np.linalg.cond(self.soft_iron))

    def check_usable(self):
        """Raise CalibrationRefused, with the reasons, if the verdict is `refused`."""
        if self.verdict == "refused":
            raise CalibrationRefused("the calibration was refused: " + "; ".join(self.reasons))

    def apply(self, mag_uT, force=False):
        """Calibrated field of readings (..., 3), uT, in the same shape; a NaN stays a NaN.

        Raises CalibrationRefused for a refused calibration, unless forced; InputError for another shape.
        """
        if not force:
            self.check_usable()
        mag = np.asarray(mag_uT, dtype=np.float64)
        if mag.shape[-1:] != (3,):
            raise InputError(f"mag_uT has shape {mag.shape}; accepted: (..., 3)")
        return (mag - self.hard_iron_uT) @ self.soft_iron

    def to_json(self):
        """The calibration as JSON text; units in the keys, schema and version first."""
        content = {"schema": SCHEMA, "schema_version": SCHEMA_VERSION, "parameters": list(PARAMETERS)}
        for field in dataclasses.fields(self):
            value = getattr(self, field.name)
            content[field.name] = value.tolist() if isinstance(value, np.ndarray) else value
        return json.dumps(content | {"caution": CAUTION}, indent=2, allow_nan=False)

    @classmethod
    def from_json(cls, text):
        """Read `to_json`'s text. Raises InputError naming the key that is missing or wrong."""
        try:
            content = json.loads(text)
        except (ValueError, RecursionError) as error:  # ValueError: no JSON, no text, a number of thousands of digits
            raise InputError(f"no calibration file: not JSON ({error})") from None
        if not isinstance(content, dict) or content.get("schema") != SCHEMA:
            raise InputError(f"no calibration file: key schema must be {SCHEMA!r}")
        if content.get("schema_version") != SCHEMA_VERSION or type(content["schema_version"]) is not int:
            raise InputError(f"key schema_version is {content.get('schema_version')!r}; accepted: {SCHEMA_VERSION}")
        names = [field.name for field in dataclasses.fields(cls)]
        missing = [name for name in names if name not in content]
        if missing:
            raise InputError(f"key {missing[0]} is missing")
        values = {name: content[name] for name in names}
        for name, shape in (("hard_iron_uT", (3,)), ("soft_iron", (3, 3)), ("covariance", (9, 9))):
            values[name] = _array(name, values[name], shape)
        for name in ("noise_uT", "coverage", "total_uT"):
            _real(name, values[name], lowest=0.0)
        if values["coverage"] > 1:
            raise InputError("key coverage must be a fraction from 0 to 1")
        for name in ("predicted_heading_sigma_deg", "date_yr", "lat_deg", "lon_deg", "height_m"):
            if values[name] is not None:
                _real(name, values[name])
        if not isinstance(values["samples"], int) or isinstance(values["samples"], bool) or values["samples"] < 0:
            raise InputError("key samples must be a whole number from 0")
        for name, accepted in (("verdict", VERDICTS), ("body", ("FRD", "FLU")),
                               ("scale", ("model total field", "relative"))):
            if values[name] not in accepted:
                raise InputError(f"key {name} is {values[name]!r}; accepted: {', '.join(accepted)}")
        for name in ("reasons", "warnings"):
            if not isinstance(values[name], list) or not all(isinstance(line, str) for line in values[name]):
                raise InputError(f"key {name} must be a list of texts")
            values[name] = tuple(values[name])
        if values["model"] is not None and not isinstance(values["model"], str):
            raise InputError("key model must be a text or null")
        _check_matrices(values)
        return cls(**values)

    def save(self, path):
        """Write the JSON file."""
        with open(path, "w", encoding="utf-8", newline="\n") as file:
            file.write(self.to_json() + "\n")

    @classmethod
    def load(cls, path):
        """Read a file of `save`. Raises InputError naming the file and the key, OSError where there is none."""
        with open(path, encoding="utf-8", errors="replace") as file:
            text = file.read()
        try:
            return cls.from_json(text)
        except InputError as error:
            raise InputError(f"{path}: {error}") from None


def _is_real(value):
    """Is it a finite number, as JSON knows numbers? Neither true nor "1", nor an integer beyond a float."""
    try:
        return isinstance(value, (int, float)) and not isinstance(value, bool) and math.isfinite(value)
    except OverflowError:
        return False


def _real(name, value, lowest=-math.inf):
    if not _is_real(value) or value < lowest:
        raise InputError(f"key {name} must be a finite number" + (f" from {lowest:g}" if lowest > -math.inf else ""))


def _array(name, value, shape):
    try:
        array = np.array(value, dtype=object)
    except ValueError:
        array = np.empty(0, dtype=object)
    if array.shape != shape or not all(_is_real(number) for number in array.flat):
        raise InputError(f"key {name} must be finite numbers of shape {shape}")
    return array.astype(np.float64)


def _check_matrices(values):
    if values["verdict"] == "refused":
        return
    for name in ("soft_iron", "covariance"):
        matrix = values[name]
        if not np.allclose(matrix, matrix.T, rtol=1e-9, atol=1e-15):
            raise InputError(f"key {name} must be symmetric")
    if np.linalg.eigvalsh(values["soft_iron"]).min() <= 0:
        raise InputError("key soft_iron must be positive definite")
    spread = np.sqrt(np.abs(np.diag(values["covariance"]))) + 1e-300
    if np.linalg.eigvalsh(values["covariance"] / np.outer(spread, spread)).min() < -1e-6:
        raise InputError("key covariance must have no negative eigenvalue")
