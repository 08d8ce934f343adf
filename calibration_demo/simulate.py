"""Makes the demo's log: an invented survey drone, "Heron 2", over an invented gravel pit. Everything here is simulated.

Run: python calibration_demo/simulate.py     (rewrites log.csv and truth.csv beside this file; seeded)

For 80 s two hands turn the drone through all orientations, then it flies a pattern of legs for 80 s. Its magnetometer
carries hard iron, soft iron and noise; its accelerometer feels the drone's own acceleration; its gyroscope is biased.
The Earth's field is WMM2025's at the place plus a small crustal part that no main-field model knows.
"""

import pathlib

import numpy as np

import magnav

HERE = pathlib.Path(__file__).parent
PLACE = {"lat_deg": 46.62, "lon_deg": 12.91, "height_m": 640.0}
DATE = "2026-05-12"
RATE_HZ, HAND_S, FLIGHT_S = 20.0, 80.0, 80.0

HARD_IRON_UT = np.array([17.5, -9.2, 23.8])
SOFT_IRON_DISTORTION = np.array([[1.09, 0.045, -0.03], [0.045, 0.94, 0.02], [-0.03, 0.02, 1.02]])
CRUST_NT = np.array([45.0, -60.0, 80.0])
MAG_NOISE_UT, ACC_NOISE_MPS2, GYR_NOISE_RADPS = 0.35, 0.04, 0.004
GYR_BIAS_RADPS = np.array([0.006, -0.004, 0.005])
GRAVITY_MPS2 = 9.807


def attitude(t_s):
    """Yaw, pitch, roll in degrees over time: tumbling in the hands, then legs with banked turns."""
    hand = t_s < HAND_S
    yaw = np.where(hand, 11.3 * t_s, 0.0)
    pitch = np.where(hand, 78 * np.sin(2 * np.pi * t_s / 13.7), 0.0)
    roll = np.where(hand, 7.9 * t_s + 40 * np.sin(2 * np.pi * t_s / 9.1), 0.0)
    # hands put it down over the last two seconds, so that the flight starts level
    settle = np.clip((HAND_S - t_s) / 2.0, 0.0, 1.0)
    pitch = pitch * np.where(hand, settle, 1.0)
    roll_end = np.round(7.9 * HAND_S / 360.0) * 360.0
    roll = np.where(hand, settle * roll + (1 - settle) * roll_end, roll_end)
    u = np.clip(t_s - HAND_S, 0.0, None)
    leg = 20.0
    turning = np.clip((np.mod(u, leg) - 15.0) / 5.0, 0.0, 1.0)
    turn = 3 * turning**2 - 2 * turning**3
    yaw = np.where(hand, yaw, 11.3 * HAND_S + 90.0 * (np.floor(u / leg) + turn))
    bank = 18.0 * np.sin(np.pi * turning)
    pitch = np.where(hand, pitch, -4.0 * np.clip(u / 3.0, 0.0, 1.0) + 2.0 * np.sin(2 * np.pi * u / 6.3))
    roll = np.where(hand, roll, roll + bank + 1.5 * np.sin(2 * np.pi * u / 4.1))
    return yaw, pitch, roll


def rotation(yaw_deg, pitch_deg, roll_deg):
    """Body FRD to NED, (n, 3, 3), from the aerospace sequence yaw, pitch, roll."""
    (cy, cp, cr), (sy, sp, sr) = ([f(np.radians(a)) for a in (yaw_deg, pitch_deg, roll_deg)] for f in (np.cos, np.sin))
    return np.stack([np.stack([cy * cp, cy * sp * sr - sy * cr, cy * sp * cr + sy * sr], -1),
                     np.stack([sy * cp, sy * sp * sr + cy * cr, sy * sp * cr - cy * sr], -1),
                     np.stack([-sp, cp * sr, cp * cr], -1)], -2)


def smooth_noise(rng, count, correlation_s):
    """A random acceleration that keeps its sign for about `correlation_s`, unit variance, three axes."""
    keep = np.exp(-1 / (RATE_HZ * correlation_s))
    white = rng.normal(size=(count, 3)) * np.sqrt(1 - keep**2)
    out = np.zeros((count, 3))
    for i in range(1, count):
        out[i] = keep * out[i - 1] + white[i]
    return out


def simulate(seed=20260512):
    """The log as an array of columns (t, acc, gyr, mag) and the true heading of each sample, degrees."""
    rng = np.random.default_rng(seed)
    t = np.arange(int(RATE_HZ * (HAND_S + FLIGHT_S))) / RATE_HZ
    body_to_ned = rotation(*attitude(t))
    ned_to_body = np.swapaxes(body_to_ned, 1, 2)
    step = 1e-4
    turned = np.einsum("nij,njk->nik", ned_to_body, rotation(*attitude(t + step)))
    rates = np.stack([turned[:, 2, 1] - turned[:, 1, 2], turned[:, 0, 2] - turned[:, 2, 0],
                      turned[:, 1, 0] - turned[:, 0, 1]], -1) / (2 * step)

    field = magnav.load_model("WMM2025").field(**PLACE, when=DATE)
    earth_uT = (field.vector_nT() + CRUST_NT) / 1000
    mag = np.einsum("nij,j->ni", ned_to_body, earth_uT) @ SOFT_IRON_DISTORTION.T + HARD_IRON_UT
    mag += MAG_NOISE_UT * rng.normal(size=mag.shape)

    shaking = np.where(t < HAND_S, 0.8, 0.5)[:, None] * smooth_noise(rng, len(t), 0.4)
    acc = np.einsum("nij,nj->ni", ned_to_body, shaking - np.array([0, 0, GRAVITY_MPS2]))
    acc += ACC_NOISE_MPS2 * rng.normal(size=acc.shape)
    gyr = rates + GYR_BIAS_RADPS + GYR_NOISE_RADPS * rng.normal(size=rates.shape)
    heading = np.mod(np.degrees(np.arctan2(body_to_ned[:, 1, 0], body_to_ned[:, 0, 0])), 360)
    return np.column_stack([t, acc, gyr, mag]), heading


def main():
    log, heading = simulate()
    place = f"{PLACE['lat_deg']} N {PLACE['lon_deg']} E, {PLACE['height_m']:g} m"
    about = f"# simulated: drone Heron 2 (invented), {place}, {DATE}; body FRD\n"
    units = {"acc": "mps2", "gyr": "radps", "mag": "uT"}
    names = "t_s," + ",".join(f"{sensor}_{axis}_{unit}" for sensor, unit in units.items() for axis in "xyz")
    formats = ["%.2f"] + ["%.3f"] * 3 + ["%.4f"] * 3 + ["%.2f"] * 3
    with open(HERE / "log.csv", "w", encoding="utf-8", newline="\n") as file:
        file.write(about)
        np.savetxt(file, log, fmt=formats, delimiter=",", header=names, comments="")
    with open(HERE / "truth.csv", "w", encoding="utf-8", newline="\n") as file:
        file.write(about)
        np.savetxt(file, np.column_stack([log[:, 0], heading]), fmt=["%.2f", "%.4f"], delimiter=",",
                   header="t_s,true_deg", comments="")


if __name__ == "__main__":
    main()
