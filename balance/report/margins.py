"""The stability margins as a table, every stance a column, and what no law can beat."""

from __future__ import annotations

import math
from collections.abc import Callable

from balance.design.at_rest import noise_rms
from balance.design.records import Design, Margins
from balance.report.amounts import MINUS, amount, figure
from balance.report.loops import LoopPicture
from balance.report.tables import Row, Table

NOTE = ("Measured on the sampled loop with its delay, broken at the physical torque, after the controller's memory. The "
        "delay margin is the smallest added delay that puts an eigenvalue on the unit circle. These margins are linear: no "
        "limit of torque, speed or angle is in them. A gain that falls: battery low, motor hot; a gain that rises: less "
        "inertia than thought.")


def factor(value: float, none: float) -> str:
    """Write a gain factor; `none` is the value that means no such limit."""
    return "no limit" if value == none else f"× {figure(value)}" if math.isfinite(value) else "–"


def margin_table(designs: tuple[Design, ...], pictures: tuple[LoopPicture | None, ...]) -> Table:
    """Margins of every stance; dashes where the closed loop is not stable, for then they mean nothing."""
    def row(label: str, words: Callable[[Margins], str]) -> Row:
        return Row(label, tuple(words(d.margins) if d.margins.stable else "–" for d in designs))

    rows = (
        Row("closed loop", tuple(loop_words(d) for d in designs)),
        Row("turns about −1, needed and found", tuple(turns(p) for p in pictures)),
        row("gain may fall to", lambda m: factor(m.gain_lower, 0.0)),
        row("gain may rise to", lambda m: factor(m.gain_upper, math.inf)),
        row("phase margin", lambda m: amount(m.phase, "rad")),
        row("at", lambda m: f"{figure(m.phase_crossover)} rad/s ({figure(m.phase_crossover / math.tau)} Hz)"),
        row("delay margin", lambda m: amount(m.delay, "s")),
        Row("in samples", tuple(figure(d.margins.delay / d.law.sample_time) if d.margins.stable else "–" for d in designs)),
        row("textbook estimate, phase ÷ frequency", lambda m: amount(m.delay_estimate, "s")),
        row("modulus margin", lambda m: figure(m.modulus)),
        row("balanced disk margin α", lambda m: figure(m.disk)),
        row("peak sensitivity Ms", lambda m: figure(m.peak_sensitivity)),
        row("peak complementary sensitivity Mt", lambda m: figure(m.peak_complementary)),
        Row("least Mt of any law, e^(p·delay)", tuple(figure(d.limits.least_peak_complementary) for d in designs)),
        Row("largest disk margin of any law", tuple(figure(d.limits.largest_disk) for d in designs)),
        Row("Bode's integral of ln |S|, found and due", tuple(_integral(d) for d in designs)),
        Row("residual of the Riccati equation", tuple(
            figure(d.law.residual, 2) if d.law.residual is not None else "–" for d in designs)),
        *_noise(designs),
        Row("delay from sample to torque", tuple(amount(d.limits.total_delay, "s") for d in designs)),
        Row("pole × delay", tuple(figure(d.limits.pole_times_delay) for d in designs)),
        Row("phase margin without sampling and delay",
            tuple(amount(d.ideal.margins.phase, "rad") if d.ideal is not None else "–" for d in designs)),
    )
    told = tuple(one for one in rows if set(one.cells) != {"–"})
    return Table("Stability margins", ("Margin", *(d.plant.stance.name for d in designs)), told, NOTE)


def _integral(design: Design) -> str:
    """Both sides of Bode's integral in nepers per sample: the loop's check of itself."""
    if design.integral is None:
        return "–"
    both = f"{figure(design.integral.found)}, {figure(design.integral.due)}"
    return both if design.integral.holds else f"{both}: they differ, trust no margin of this loop"


def _noise(designs: tuple[Design, ...]) -> tuple[Row, ...]:
    """What sensor noise alone keeps in motion, RMS."""
    found = [noise_rms(d) for d in designs]
    said = (("lean", "lean", "rad"), ("torque", "torque about the line", "N*m"), ("momentum", "stored momentum", "N*m*s"))
    return tuple(Row(f"sensor noise keeps in {label}, RMS", tuple(
        amount(getattr(one, name), unit) if one is not None else "–" for one in found)) for name, label, unit in said)


def loop_words(design: Design) -> str:
    """Say whether there is a loop, and whether it is stable."""
    return "no law" if design.refused else "stable" if design.margins.stable else "NOT stable"


def turns(picture: LoopPicture | None) -> str:
    """Say Nyquist's count of one loop."""
    if picture is None:
        return "–"
    found = str(picture.count.found).replace("-", MINUS) if picture.count.sure else "not countable"
    return f"{picture.count.needed}, {found}"
