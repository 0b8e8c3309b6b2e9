"""Verdicts on the loop: stable or not, and every margin the design file asks for."""

from __future__ import annotations

import math

import numpy as np

from balance.check.records import Verdict
from balance.check.tolerances import judge_tolerances
from balance.design.limits import beyond
from balance.design.loop import close, sample_plant
from balance.design.records import Design, Margins
from balance.design.steady import tolerable_offset
from balance.goal.goal import Requirements

UNSTABLE = "the closed loop is unstable, so it has no margins"


def judge_loop(require: Requirements, design: Design) -> list[Verdict]:
    """Return one verdict per margin asked for; the loop's stability is always judged, first."""
    stance, margins = design.plant.stance.name, design.margins
    verdicts = [_stability(design)]
    out_of_reach = beyond(require, design.plant, design.law.latency, design.limits)
    for name, limit, value, unit, sense in _asked(require, margins):
        if not margins.stable:
            verdicts.append(Verdict(name, stance, math.nan, unit, limit, sense, False, UNSTABLE))
            continue
        passed = bool(value <= limit if sense == "at most" else value >= limit)
        reason = "" if passed else out_of_reach.get(name) or _why(name, value, limit)
        verdicts.append(Verdict(name, stance, value, unit, limit, sense, passed, reason))
    if require.offset_error is not None:
        verdicts.append(_offset(require.offset_error, design))
    return verdicts + judge_tolerances(require, design)


def _stability(design: Design) -> Verdict:
    """Return whether the closed loop is stable, with the eigenvalue that decides."""
    largest = max((abs(z) for z in design.poles), default=0.0)
    stable = design.margins.stable
    reason = "" if stable else (f"the largest closed-loop eigenvalue is {largest:.4f}, outside the unit circle; "
                                f"pole × delay is {design.limits.pole_times_delay:.2f}{_because_of_legs(design)}")
    return Verdict("stable_loop", design.plant.stance.name, "stable" if stable else "unstable", "", "stable", "is",
                   stable, reason)


def _because_of_legs(design: Design) -> str:
    """Say what the give of the legs has to do with a lost loop; "" where they are stiff or do not matter."""
    legs, stiff = design.plant.legs, design.plant.stiff
    if legs is None or stiff is None or design.refused:
        return ""
    if len(legs.unstable) > 1:
        return (f"; the legs buckle: {legs.stiffness:.3g} N·m/rad is below the critical {legs.critical:.3g} N·m/rad, so the "
                "machine falls in two ways at once")
    sampled = sample_plant(stiff, design.law.sample_time, design.law.latency)
    if np.abs(np.linalg.eigvals(close(sampled, design.law))).max() >= 1.0:
        return ""
    return (f"; on stiff legs the same law holds: it is their give that loses it (without a law trunk and legs swing at "
            f"{legs.mode / (2.0 * math.pi):.3g} Hz, damping ratio {legs.damping:.2g})")


def _asked(require: Requirements, margins: Margins) -> list[tuple[str, float, float, str, str]]:
    """Return (name, limit, value, unit, sense) of the margins asked for, in the order of the design file's record."""
    table = [
        ("phase_margin", require.phase_margin, margins.phase, "rad", "at least"),
        ("gain_margin_lower", require.gain_margin_lower, margins.gain_lower, "", "at most"),
        ("gain_margin_upper", require.gain_margin_upper, margins.gain_upper, "", "at least"),
        ("delay_margin", require.delay_margin, margins.delay, "s", "at least"),
        ("modulus_margin", require.modulus_margin, margins.modulus, "", "at least"),
        ("disk_margin", require.disk_margin, margins.disk, "", "at least"),
        ("peak_sensitivity", require.peak_sensitivity, margins.peak_sensitivity, "", "at most"),
    ]
    return [(name, limit, float(value), unit, sense) for name, limit, value, unit, sense in table if limit is not None]


def _why(name: str, value: float, limit: float) -> str:
    """Return what a margin that is missed means, and by how much."""
    told = {
        "phase_margin": lambda: f"{math.degrees(limit - value):.1f}° short: more delay or a faster pole than allowed "
                                "for would make it swing",
        "gain_margin_lower": lambda: f"the machine is lost once the torque falls to {value:.0%} of what the law asks "
                                     f"(weak battery, hot motor); {limit:.0%} is asked for",
        "gain_margin_upper": lambda: f"the loop swings once the torque is {value:.2f} times what the law asks",
        "delay_margin": lambda: f"the loop bears {1e3 * value:.1f} ms more delay, "
                                f"{1e3 * (limit - value):.1f} ms too little",
        "modulus_margin": lambda: f"the loop passes {value:.2f} from the critical point, {limit - value:.2f} too near",
        "disk_margin": lambda: f"gain and phase may not both move as far as asked: {limit - value:.2f} short",
        "peak_sensitivity": lambda: f"disturbances are amplified {value:.2f} times at worst, "
                                    f"{value - limit:.2f} too much",
    }
    return told[name]()


def _offset(limit: float, design: Design) -> Verdict:
    """Return whether a steady error of the centre of mass is tolerable for ever."""
    value = tolerable_offset(design)
    passed = value >= limit
    reason = "" if passed else (f"a centre of mass {1e3 * value:.1f} mm off fills the momentum in the long run; "
                                f"{1e3 * limit:.1f} mm is asked for")
    return Verdict("offset_error", design.plant.stance.name, value, "m", limit, "at least", passed, reason)
