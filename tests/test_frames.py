"""Frames: each conversion against its definition (REP 103 names FLU and ENU; SAE/AIAA R-004 names FRD and NED)."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

import magnav
from magnav.errors import InputError
from magnav.frames import body_to_frd, calibration_to_frd, local_to_ned, to_specific_force


def test_flu_to_frd_is_half_a_turn_about_forward():
    v = np.array([[1.0, 2.0, 3.0], [-4.0, 5.0, -6.0]])
    assert np.allclose(body_to_frd(v, "FLU"), Rotation.from_euler("x", 180, degrees=True).apply(v))
    assert np.array_equal(body_to_frd(v, "frd"), v)
    assert np.array_equal(body_to_frd(body_to_frd(v, "FLU"), "FLU"), v)


def test_enu_to_ned_swaps_east_and_north_and_turns_up_to_down():
    assert np.array_equal(local_to_ned([1.0, 2.0, 3.0], "ENU"), [2.0, 1.0, -3.0])
    assert np.array_equal(local_to_ned(local_to_ned([[1.0, 2.0, 3.0]], "ENU"), "ENU"), [[1.0, 2.0, 3.0]])
    assert np.array_equal(local_to_ned([1.0, 2.0, 3.0], "NED"), [1.0, 2.0, 3.0])
    # a proper rotation: handedness is kept
    assert np.linalg.det(local_to_ned(np.eye(3), "ENU")) == pytest.approx(1.0)


def test_the_fields_vector_in_either_frame():
    field = magnav.load_model("WMM2025").field([10.0, 20.0], 30.0, when=2026)
    assert np.array_equal(field.vector_nT(), np.stack([field.north_nT, field.east_nT, field.down_nT], -1))
    assert np.array_equal(field.vector_nT("enu"), np.stack([field.east_nT, field.north_nT, -field.down_nT], -1))
    with pytest.raises(InputError, match="accepted: NED, ENU"):
        field.vector_nT("FRD")


def test_acceleration_sense():
    assert np.array_equal(to_specific_force([0.0, 0.0, 9.8], "gravity"), [0.0, 0.0, -9.8])
    assert np.array_equal(to_specific_force([0.0, 0.0, -9.8], "specific-force"), [0.0, 0.0, -9.8])


@pytest.mark.parametrize("call", [lambda: body_to_frd([1, 2, 3], "XYZ"), lambda: local_to_ned([1, 2, 3], "FRD"),
                                  lambda: to_specific_force([1, 2, 3], "down"),
                                  lambda: calibration_to_frd(np.zeros(3), np.eye(3), np.eye(9), "NED")])
def test_an_unknown_frame_is_refused_with_the_accepted_names(call):
    with pytest.raises(InputError, match="accepted: "):
        call()


def test_a_calibration_changes_frame_with_its_readings():
    rng = np.random.default_rng(3)
    hard = rng.normal(size=3)
    soft = np.eye(3) + 0.1 * rng.normal(size=(3, 3))
    soft = (soft + soft.T) / 2
    root = rng.normal(size=(9, 9))
    covariance = root @ root.T
    hard_frd, soft_frd, covariance_frd = calibration_to_frd(hard, soft, covariance, "FLU")
    reading = rng.normal(size=3) * 40
    assert np.allclose(soft_frd @ (body_to_frd(reading, "FLU") - hard_frd),
                       body_to_frd(soft @ (reading - hard), "FLU"), rtol=0, atol=1e-12)

    # the covariance of a calibrated component is the same whichever way it is reached
    def gradient(w, x, axis):
        e = np.eye(3)[axis]
        return np.concatenate([-w[axis], e * x, [e[0] * x[1] + e[1] * x[0], e[0] * x[2] + e[2] * x[0],
                                                 e[1] * x[2] + e[2] * x[1]]])

    for axis in range(3):
        here = gradient(soft, reading - hard, axis)
        there = gradient(soft_frd, body_to_frd(reading - hard, "FLU"), axis)
        assert here @ covariance @ here == pytest.approx(there @ covariance_frd @ there)
