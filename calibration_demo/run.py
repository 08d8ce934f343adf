"""The main job on the demo's log, with pictures: python calibration_demo/run.py

Calibrates on the first half of the log, in which the drone is turned by hand, gives the heading of every sample from
magnetic, true and grid north, and holds it against the truth that only a simulation knows. Pictures and tables go to
calibration_demo/output/.
"""

import pathlib

import numpy as np
from simulate import DATE, HAND_S, PLACE

import magnav
from magnav.caution import CAUTION
from magnav.pictures import calibration_picture, heading_error_picture

HERE = pathlib.Path(__file__).parent


def main():
    output = HERE / "output"
    output.mkdir(exist_ok=True)
    log = magnav.read_log(HERE / "log.csv")
    truth_deg = np.loadtxt(HERE / "truth.csv", delimiter=",", skiprows=2)[:, 1]
    field = magnav.load_model("auto").field(**PLACE, when=DATE)
    hand = log.t_s < HAND_S
    calibration = magnav.calibrate(log.mag_uT[hand], log.acc_mps2[hand], log.gyr_radps[hand], log.t_s[hand], field)
    calibration.save(output / "calibration.json")
    calibration_picture(log.mag_uT[hand], calibration, output / "sphere.png")

    errors = []
    flight = ~hand
    for label, used in (("as read", None), ("calibrated", calibration)):
        headings = magnav.compute_heading(log.mag_uT, log.acc_mps2, log.gyr_radps, log.t_s, field=field,
                                          calibration=used, crs="utm")
        error = np.mod(headings.true_deg - truth_deg + 180, 360) - 180
        inside = np.mean(np.abs(error[flight]) <= 1.96 * headings.sigma_deg[flight])
        print(f"{label:10}: heading error in flight {np.sqrt(np.mean(error[flight] ** 2)):6.2f} deg RMS, "
              f"{100 * inside:.1f} % inside the stated 95 % interval")
        errors.append((label, error[flight], headings.sigma_deg[flight]))
    heading_error_picture(log.t_s[flight], errors, output / "heading_error.png",
                          "Heading error in flight against the simulated truth")
    print(f"calibration {calibration.verdict}; grid {headings.grid}, convergence {headings.convergence_deg:+.2f} deg; "
          f"declination {field.declination_deg:+.2f} deg")
    print("pictures: calibration_demo/output/sphere.png and heading_error.png")
    print(CAUTION)


if __name__ == "__main__":
    main()
