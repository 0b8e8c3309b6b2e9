"""What `balance gains` prints: the laws, their margins, and what cannot be beaten at this delay."""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import partial

from balance.base.tables import text_table
from balance.check.records import Verdict
from balance.cli.show_forms import show_forms
from balance.cli.show_robust import show_one_gain_set, show_robust
from balance.cli.words import closing, failures, folded, side_by_side, verdict_table
from balance.design.at_rest import noise_rms
from balance.design.records import Design
from balance.design.robustness.one_law import OneLaw
from balance.design.steady import standing
from balance.report.amounts import amount, figure, spelt

ROUNDING = 1e-12
"""Share of the largest gain below which a gain is the arithmetic's own rounding, not a gain."""


def show_gains(designs: tuple[Design, ...], verdicts: tuple[Verdict, ...], shared: OneLaw | None) -> str:
    """Return the text of the answer; `shared`: one gain set for all stances beside one per stance."""
    refused = [folded(f"{d.plant.stance.name}: no law: {d.refused}") for d in designs if d.refused]
    made = tuple(d for d in designs if not d.refused)
    parts = [_head(designs[0]), *_out_of_reach(verdicts), *refused]
    if made:
        parts += [_laws(made), _margins(made), MEANING, *(_crossings(d) for d in made), _steady(made), _at_rest(made)]
        parts += [*(show_robust(d) for d in made), show_one_gain_set(shared), *(show_forms(d) for d in made)]
    if verdicts:
        parts += [verdict_table(verdicts), failures(verdicts)]
    return "\n\n".join(p for p in [*parts, closing(verdicts)] if p)


MEANING = """\
Margins are those of the loop broken at the physical torque, with sampling and
delay in it. Times the gain may fall to, may rise to: factors at which
stability is lost. Ms and Mt: the highest peaks of sensitivity and of
complementary sensitivity; no law can bring Mt below the least one. The Bode
integral checks the response against the unstable poles."""


def _head(design: Design) -> str:
    law = design.law
    return folded(
        f"{design.plant.machine}: {law.kind} every {amount(law.sample_time, 's')}, "
        f"{amount(law.latency, 's')} from sample to command"
    )


def _laws(designs: tuple[Design, ...]) -> str:
    law = designs[0].law
    if law.kind == "pid":
        rows = [(name, partial(_pid_gain, name)) for name in law.gains]
        return side_by_side("gain (SI)", designs, lambda d: d.plant.stance.name, rows)
    return "\n\n".join(_feedback(d) for d in designs)


def _pid_gain(name: str, design: Design) -> str:
    return figure(design.law.gains[name], 5)


def _feedback(design: Design) -> str:
    law = design.law
    dust = ROUNDING * max((abs(gain) for gain in law.K), default=0.0)
    rows = [[state, figure(gain, 6) if abs(gain) > dust else "0"] for state, gain in zip(law.states, law.K, strict=True)]
    title = f"{design.plant.stance.name}: u = −K x, u in {spelt(law.unit)}, SI"
    return f"{title}\n{text_table(['state', 'K'], rows, 'lr')}"


def _margins(designs: tuple[Design, ...]) -> str:
    return side_by_side(
        "margin",
        designs,
        lambda d: d.plant.stance.name,
        [
            ("closed loop", lambda d: "stable" if d.margins.stable else "UNSTABLE"),
            ("phase margin", lambda d: amount(d.margins.phase, "rad")),
            ("  at", lambda d: amount(d.margins.phase_crossover, "1/s")),
            ("  that is", lambda d: amount(d.margins.phase_crossover / math.tau, "Hz")),
            ("times the gain may fall to", lambda d: figure(d.margins.gain_lower)),
            ("times the gain may rise to", lambda d: figure(d.margins.gain_upper)),
            ("delay margin", lambda d: amount(d.margins.delay, "s")),
            ("  in samples", lambda d: figure(d.margins.delay / d.law.sample_time)),
            ("modulus margin", lambda d: figure(d.margins.modulus)),
            ("disk margin", lambda d: figure(d.margins.disk)),
            ("Ms", lambda d: figure(d.margins.peak_sensitivity)),
            ("Mt", lambda d: figure(d.margins.peak_complementary)),
            ("phase margin, no delay", _ideal_phase),
            ("pole × delay", lambda d: figure(d.limits.pole_times_delay)),
            ("least Mt of any law", lambda d: figure(d.limits.least_peak_complementary)),
            ("largest disk of any law", lambda d: figure(d.limits.largest_disk)),
            ("Bode integral, checked", _integral),
            ("Riccati residual", lambda d: figure(d.law.residual, 2) if d.law.residual is not None else ""),
        ],
    )


def _out_of_reach(verdicts: tuple[Verdict, ...]) -> list[str]:
    """What is asked for and no law can give: said before the design."""
    return [folded(f"{v.stance}, {v.name}: {v.reason}.") for v in verdicts if v.reason.startswith("no law can")]


def _crossings(design: Design) -> str:
    """Every frequency at which the loop crosses the unit circle or the negative real axis."""
    rows = [[figure(c.frequency), figure(c.frequency / math.tau),
             "|L| = 1" if c.kind == "phase" else "L < 0, real",
             amount(c.value, "rad") if c.kind == "phase" else f"× {figure(c.value)}"] for c in design.margins.crossings]
    if not rows:
        return ""
    title = f"{design.plant.stance.name}: every crossing, and the phase or gain factor left there"
    return f"{title}\n{text_table(['rad/s', 'Hz', 'crosses', 'margin'], rows, 'rrlr')}"


def _integral(design: Design) -> str:
    """Bode's sensitivity integral in nepers per sample, as found, if it is what the unstable poles ask for."""
    if design.integral is None:
        return ""
    return figure(design.integral.found) if design.integral.holds else f"FAILS: {design.integral.found:.4g}"


def _at_rest(designs: tuple[Design, ...]) -> str:
    """What sensor noise alone keeps in motion; empty where nothing is read that has noise."""
    found = {d.plant.stance.name: noise_rms(d) for d in designs}
    if not any(found.values()):
        return ""

    def of(name: str, unit: str) -> tuple[str, Callable[[Design], str]]:
        def cell(design: Design) -> str:
            rms = found[design.plant.stance.name]
            return amount(getattr(rms, name), unit) if rms is not None else ""

        return name.replace("_", " "), cell

    rows = [of("lean", "rad"), of("lean_rate", "rad/s"), of("torque", "N*m"), of("momentum", "N*m*s")]
    return side_by_side("sensor noise keeps, RMS", designs, lambda d: d.plant.stance.name, rows)


def _steady(designs: tuple[Design, ...]) -> str:
    """What a constant error does for ever."""
    found = {d.plant.stance.name: standing(d) for d in designs}
    return side_by_side(
        "for ever",
        designs,
        lambda d: d.plant.stance.name,
        [
            ("bears a mass off by", lambda d: amount(found[d.plant.stance.name].offset, "m")),
            ("bears a tilt misread by", lambda d: amount(found[d.plant.stance.name].tilt, "rad")),
            ("1 mm off leaves stored", lambda d: amount(abs(found[d.plant.stance.name].momentum), "N*m*s")),
            ("  and takes, against drag", lambda d: amount(found[d.plant.stance.name].power, "W")),
            ("1 mm not answered fills it in", lambda d: amount(found[d.plant.stance.name].full_in, "s")),
        ],
    )


def _ideal_phase(design: Design) -> str:
    """The phase margin of the continuous design: what sampling and delay have not yet taken."""
    return amount(design.ideal.margins.phase, "rad") if design.ideal else ""
