"""The only place that draws: pictures of a calibration and of headings, as PNG or SVG (the extra magnav[pictures])."""

import numpy as np

from .errors import InputError

BEFORE, AFTER, REFERENCE, BAND = "#b5651d", "#1f6f8b", "#444444", "#c9dfe6"
PLANES = ((0, 1), (0, 2), (1, 2))


def _plt():
    try:
        import matplotlib
    except ImportError:
        raise InputError("pictures need matplotlib: pip install 'magnav[pictures]'") from None
    matplotlib.use("Agg")
    import matplotlib.pyplot as plt

    return plt


def calibration_picture(mag_uT, calibration, path):
    """Readings before and after the calibration in the three planes of the sensor, and where on the sphere they lie.

    mag_uT: (n, 3). A refused calibration is drawn without its `after`.
    """
    plt = _plt()
    usable = calibration.verdict != "refused"
    figure, axes = plt.subplots(1, 4, figsize=(15, 4.2), gridspec_kw={"width_ratios": [1, 1, 1, 1.7]},
                                layout="constrained")
    after = calibration.apply(mag_uT) if usable else None
    radius = np.median(np.linalg.norm(mag_uT if after is None else after, axis=1))
    turn = np.linspace(0, 2 * np.pi, 200)
    for axis, (i, j) in zip(axes, PLANES, strict=False):
        axis.plot(mag_uT[:, i], mag_uT[:, j], ".", ms=2, color=BEFORE, label="before")
        if after is not None:
            axis.plot(after[:, i], after[:, j], ".", ms=2, color=AFTER, label="after")
        axis.plot(radius * np.cos(turn), radius * np.sin(turn), "-", lw=1, color=REFERENCE, label=f"{radius:.1f} uT")
        axis.axhline(0, lw=0.5, color=REFERENCE)
        axis.axvline(0, lw=0.5, color=REFERENCE)
        axis.set(xlabel=f"{'xyz'[i]}, uT", ylabel=f"{'xyz'[j]}, uT", aspect="equal")
    axes[0].legend(loc="upper right", fontsize=8, markerscale=4)
    directions = mag_uT if after is None else after
    unit = directions / np.linalg.norm(directions, axis=1)[:, None]
    azimuth_deg = np.degrees(np.arctan2(unit[:, 1], unit[:, 0]))
    axes[3].plot(azimuth_deg, unit[:, 2], ".", ms=2, color=AFTER if usable else BEFORE)
    heights = (-90, -60, -30, 0, 30, 60, 90)
    axes[3].set(xlim=(-180, 180), ylim=(-1, 1), xticks=range(-180, 181, 60), yticks=np.sin(np.radians(heights)),
                yticklabels=heights, xlabel="azimuth of the field in the sensor, deg", ylabel="height above xy, deg",
                title=f"directions seen: {100 * calibration.coverage:.0f} % of the sphere (equal areas)")
    axes[3].grid(lw=0.3)
    figure.suptitle(f"Calibration {calibration.verdict}, {calibration.body} axes, {len(mag_uT)} samples")
    figure.savefig(path, dpi=120)
    plt.close(figure)


def heading_error_picture(t_s, errors, path, title="Heading error against the truth"):
    """Heading errors over time, one panel each: `errors` is a list of (label, error_deg (n,), sigma_deg (n,))."""
    plt = _plt()
    figure, axes = plt.subplots(len(errors), 1, figsize=(11, 2.8 * len(errors)), sharex=True, layout="constrained",
                                squeeze=False)
    for axis, (label, error, sigma), color in zip(axes[:, 0], errors, (BEFORE, AFTER, REFERENCE), strict=False):
        axis.fill_between(t_s, -1.96 * sigma, 1.96 * sigma, color=BAND, lw=0, label="stated 95 % interval")
        axis.plot(t_s, error, ".", ms=2, color=color, label=f"{label}: {np.sqrt(np.mean(error**2)):.1f} deg RMS")
        axis.axhline(0, lw=0.5, color=REFERENCE)
        axis.set_ylabel("error, deg")
        top = 1.15 * max(np.quantile(np.abs(error), 0.999), np.quantile(1.96 * sigma, 0.95))
        axis.set_ylim(-top, top)
        axis.legend(loc="upper right", fontsize=8, markerscale=4)
    axes[-1, 0].set_xlabel("time, s")
    figure.suptitle(title)
    figure.savefig(path, dpi=120)
    plt.close(figure)


def deviation_picture(curve, compass_deg, magnetic_deg, path):
    """A deviation curve with its 95 % band and the readings it was fitted to."""
    plt = _plt()
    figure, axis = plt.subplots(figsize=(9, 4.5), layout="constrained")
    around = np.arange(0.0, 360.5, 1.0)
    value, wide = curve.deviation_deg(around), 1.96 * curve.deviation_sigma_deg(around)
    axis.fill_between(around, value - wide, value + wide, color=BAND, lw=0, label="95 % of the curve")
    axis.plot(around, value, color=AFTER, label="deviation")
    found = np.mod(magnetic_deg - compass_deg + 180.0, 360.0) - 180.0
    axis.plot(np.mod(compass_deg, 360.0), found, "o", ms=4, color=BEFORE, label="readings")
    axis.axhline(0, lw=0.5, color=REFERENCE)
    axis.set(xlim=(0, 360), xticks=range(0, 361, 45), xlabel="compass heading, deg", ylabel="deviation, deg (east +)")
    axis.set_title("   ".join(f"{name} {value:+.2f}" for name, (value, _) in curve.named.items()))
    axis.grid(lw=0.3)
    axis.legend(fontsize=8)
    figure.savefig(path, dpi=120)
    plt.close(figure)
