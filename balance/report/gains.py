"""The law as it goes to firmware: gains in SI with sign and order, how the command is shared, where the poles lie."""

from __future__ import annotations

import math

import numpy as np

from balance.design.records import Design
from balance.report.amounts import MINUS, amount, figure, spelt
from balance.report.tables import Row, Table

PID_WORDS = {
    "kp": ("kp", "N·m/rad"), "ki": ("ki", "N·m/(rad·s)"), "kd": ("kd", "N·m·s/rad"),
    "momentum": ("momentum gain m", "rad/(N·m·s)"), "derivative_filter_rad_s": ("pole of the lean rate's filter", "rad/s"),
    "tracking_time_s": ("tracking time of the anti-windup", "s"),
    "command_per_torque": ("command per torque about the line", ""), "inner_bandwidth_rad_s": ("inner torque loop", "rad/s"),
}


def timing(design: Design) -> str:
    """Say how the loop is sampled."""
    law = design.law
    return (f"Sampled every {amount(law.sample_time, 's')} ({figure(1.0 / law.sample_time)} Hz); the command leaves "
            f"{amount(law.latency, 's')} after the sample and is limited to ±{amount(law.output_limit, law.unit)}.")


def gain_table(design: Design) -> Table:
    """One stance's gains with their order and sign."""
    return pid_table(design) if design.law.kind == "pid" else row_table(design)


def row_table(design: Design) -> Table:
    """The state-feedback row beside the ideal without sampling and delay."""
    law, ideal = design.law, design.ideal
    dust = 1e-9 * max((abs(float(k)) for k in law.K), default=0.0)
    rows = []
    for i, (name, k) in enumerate(zip(law.states, law.K, strict=True)):
        pure = figure(float(ideal.K[i]), 6) if ideal is not None and i < len(ideal.K) else "–"
        rows.append(Row(name, (figure(float(k), 6) if abs(k) > dust else "0", pure)))
    what = "torque about the line" if law.unit == "N*m" and len(design.plant.units) > 1 else "the unit's own input"
    note = (f"u = −K x, x in this order and in SI (rad, rad/s, …), u in {spelt(law.unit)}: {what}. Rows named _lag and _ago "
            "are past commands the controller keeps itself. The last column is the same design without sampling and delay.")
    return Table("State feedback (LQR)", ("State", "K", "K, ideal"), tuple(rows), f"{timing(design)} {note}")


def pid_table(design: Design) -> Table:
    """The PID's gains about the line."""
    rows = []
    for name, value in design.law.gains.items():
        words, unit = PID_WORDS.get(name, (name.replace("_", " "), ""))
        if value or name in ("kp", "ki", "kd", "momentum"):
            rows.append(Row(words, (figure(float(value), 6), unit or "–")))
    note = ("T = kp e + ki ∫e dt + kd·(filtered lean rate), e = lean + m × stored momentum; T is the torque taken from the "
            "body about the line, parallel form, per second. Positive gains catch a fall.")
    return Table("PID on the lean, with momentum brought back", ("Gain", "Value", "Unit"), tuple(rows),
                 f"{timing(design)} {note}")


def share_table(design: Design) -> Table | None:
    """How the line command is shared between several units; None for one."""
    plant, law = design.plant, design.law
    if len(plant.units) < 2:
        return None
    rows = []
    for i, unit in enumerate(plant.units):
        terms = [f"{figure(-float(k), 4)} · {name}"
                 for k, name in zip(law.levelling[i], plant.for_law.model.states, strict=False) if k]
        level = " + ".join(terms).replace(f"+ {MINUS}", f"{MINUS} ") or "–"
        limit = amount(float(law.input_limits[i]), "N*m" if unit.drive == "torque" else "rad/s")
        rows.append(Row(unit.name, (figure(float(law.allotment[i]), 5), level, f"±{limit}")))
    head = ("Unit", "Times the command", "Plus, to level what is stored", "Limit")
    return Table("How the command is shared", head, tuple(rows),
                 "The levelling moves momentum between the units and leaves the torque about the line as it is.")


def pole_table(design: Design) -> Table:
    """The closed loop's modes that a person can see: slower than a fifth of half the sampling frequency."""
    fastest = 0.2 * math.pi / design.law.sample_time
    seen = [(z, s) for z, s in zip(design.poles, design.equivalent, strict=True)
            if s.imag >= 0.0 and np.isfinite(s) and abs(s) < fastest]
    rows = []
    for z, s in sorted(seen, key=lambda pair: abs(pair[1])):
        rate = figure(float(s.real)) + (f" ± {figure(float(s.imag))}j" if s.imag else "")
        spot = figure(float(z.real), 5) + (f" ± {figure(float(z.imag), 3)}j" if s.imag else "")
        damping = figure(float(-s.real / abs(s))) if s.imag else "–"
        rows.append(Row(f"{rate} rad/s", (spot, damping, amount(-1.0 / s.real, "s") if s.real < 0.0 else "grows")))
    hidden = len(design.poles) - sum(2 if s.imag else 1 for _, s in seen)
    note = f"{hidden} faster ones (delay, lag and filter) are left out." if hidden else ""
    return Table("Closed-loop poles", ("Equivalent", "z", "Damping ratio", "Time constant"), tuple(rows), note)
