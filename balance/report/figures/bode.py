"""The loop's frequency response drawn as magnitude and phase, margins marked where they are measured."""

from __future__ import annotations

import math

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, MultipleLocator, NullLocator
from numpy.typing import ArrayLike, NDArray

from balance.report.figures.palette import DASHED, INK, NAVY, PINE, PLUM, RUST, SLATE, ink, sheet
from balance.report.loops import LoopPicture

HERTZ = 1.0 / math.tau


def to_hertz(frequency: ArrayLike) -> NDArray[np.float64]:
    """Turn rad/s into Hz."""
    return np.asarray(frequency, dtype=np.float64) * HERTZ


def from_hertz(frequency: ArrayLike) -> NDArray[np.float64]:
    """Turn Hz into rad/s."""
    return np.asarray(frequency, dtype=np.float64) / HERTZ


def draw_bode(picture: LoopPicture) -> Figure:
    """Draw |L| in dB and its phase in degrees over rad/s, with Hz along the top; margins only of a stable loop."""
    with ink():
        figure, (gain, phase) = sheet(4.6, rows=2, share=True)
        figure.subplots_adjust(left=0.145, right=0.955, top=0.875, bottom=0.105, hspace=0.14)
        gain.semilogx(picture.frequency, picture.magnitude, color=NAVY, label="as stated")
        phase.semilogx(picture.frequency, picture.phase, color=NAVY)
        if picture.worst is not None:
            worst = picture.worst
            gain.semilogx(worst.frequency, worst.magnitude, color=PINE, ls=DASHED, zorder=3, label="worst case")
            phase.semilogx(worst.frequency, worst.phase, color=PINE, ls=DASHED, zorder=3)
            gain.legend(loc="lower left", fontsize=7)
        gain.set_ylabel("Magnitude (dB)")
        phase.set_ylabel("Phase (°)")
        phase.set_xlabel("Angular frequency (rad/s)")
        phase.set_xlim(picture.frequency[0], 1.15 * picture.nyquist)
        hertz = gain.secondary_xaxis("top", functions=(to_hertz, from_hertz))
        hertz.set_xlabel("Frequency (Hz)")
        for axis in (phase.xaxis, hertz.xaxis):
            axis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
            axis.set_minor_locator(NullLocator())
        frame(gain, phase, picture)
        mark_half_sampling(gain, phase, picture)
        if picture.stable:
            mark_phase(gain, phase, picture)
            mark_gain(gain, phase, picture)
        for one in (gain, phase):
            one.yaxis.set_label_coords(-0.125, 0.5)
    return figure


def frame(gain: Axes, phase: Axes, picture: LoopPicture) -> None:
    """Cut the far ends of the magnitude; rule the phase in steps of 45° or 90°."""
    low, high = float(np.min(picture.magnitude)), float(np.max(picture.magnitude))
    gain.set_ylim(max(low, -50.0) - 4.0, min(high, 60.0) + 6.0)
    gain.axhline(0.0, color=SLATE, lw=0.9)
    seen = picture.phase
    reach = float(np.max(seen)) - float(np.min(seen))
    step = 45.0 if reach < 300.0 else 90.0 if reach < 700.0 else 180.0
    phase.yaxis.set_major_locator(MultipleLocator(step))
    lowest = min(float(np.min(seen)), -180.0)
    if picture.worst is not None:
        lowest = max(min(lowest, float(np.min(picture.worst.phase))), lowest - 90.0)
    phase.set_ylim(lowest - 18.0, max(float(np.max(seen)), -180.0) + 30.0)
    for turn in (-180.0, 180.0, -540.0):
        if phase.get_ylim()[0] < turn < phase.get_ylim()[1]:
            phase.axhline(turn, color=SLATE, lw=0.9)


def mark_half_sampling(gain: Axes, phase: Axes, picture: LoopPicture) -> None:
    """Show where the sampled loop ends."""
    for axes in (gain, phase):
        axes.axvline(picture.nyquist, color=SLATE, ls=DASHED, lw=0.9)
    gain.annotate("half the\nsampling\nfrequency", (picture.nyquist, 1.0), (-3, -3), textcoords="offset points",
                  xycoords=gain.get_xaxis_transform(), ha="right", va="top", fontsize=6.5, color=SLATE)


def mark_phase(gain: Axes, phase: Axes, picture: LoopPicture) -> None:
    """Phase margin of the crossing that has the least: an upright between the curve and the nearest −180° line."""
    if not picture.phase_crossings:
        return
    crossing = min(picture.phase_crossings, key=lambda c: abs(c.value))
    here = float(np.interp(math.log(crossing.frequency), np.log(picture.frequency), picture.phase))
    critical = here - math.degrees(crossing.value)
    phase.plot([crossing.frequency] * 2, [critical, here], color=RUST, lw=2.2, solid_capstyle="butt")
    phase.plot([crossing.frequency], [here], "o", color=RUST, ms=4)
    gain.plot([crossing.frequency], [0.0], "o", color=RUST, ms=4)
    phase.annotate(f"phase margin {math.degrees(crossing.value):.1f}° at {crossing.frequency:.3g} rad/s",
                   (crossing.frequency, min(critical, here)), (0, -5), textcoords="offset points", fontsize=7.5,
                   ha="center", va="top", bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.9})


def mark_gain(gain: Axes, phase: Axes, picture: LoopPicture) -> None:
    """Gain margins: uprights between 0 dB and the curve where the phase crosses −180°."""
    below = [c for c in picture.gain_crossings if c.value < 1.0]
    above = [c for c in picture.gain_crossings if c.value >= 1.0]
    chosen = ([max(below, key=lambda c: c.value)] if below else []) + ([min(above, key=lambda c: c.value)] if above else [])
    for crossing in chosen:
        level = -20.0 * math.log10(crossing.value)
        at = max(crossing.frequency, picture.frequency[0])
        gain.plot([at] * 2, [0.0, level], color=PLUM, lw=2.2, solid_capstyle="butt")
        gain.plot([at], [level], "s", color=PLUM, ms=4)
        here = float(np.interp(math.log(at), np.log(picture.frequency), picture.phase))
        phase.plot([at], [here], "s", color=PLUM, ms=4)
        later = at > math.sqrt(picture.frequency[0] * picture.nyquist)
        gain.annotate(f"× {crossing.value:.3g}", (at, level / 2), (-5 if later else 5, 0), color=INK, fontsize=7.5,
                      textcoords="offset points", ha="right" if later else "left", va="center",
                      bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.9})
