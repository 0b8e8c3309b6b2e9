"""What `balance gains` prints beside law and margins: the loop cut at each sensor, and the gains in actuator units."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from balance.base.tables import text_table
from balance.cli.words import folded
from balance.design.forms import actuator_gains, pid_forms
from balance.design.records import Design, Margins
from balance.design.sensors import all_sensors, sensor_margins
from balance.report.amounts import amount, figure


def show_forms(design: Design) -> str:
    """Return both tables of one stance; empty where there is no law."""
    if design.refused:
        return ""
    return "\n\n".join(part for part in (_sensors(design), _actuators(design), _pid(design)) if part)


def _sensors(design: Design) -> str:
    rows = [[name, *_margins(m)] for name, m in sensor_margins(design)]
    head = ["cut at the sensor of", "gain down", "up", "phase", "at", "delay", "Ms"]
    at_once = all_sensors(design)
    if not math.isfinite(at_once):
        return f"{design.plant.stance.name}: margins at each sensor\n{text_table(head, rows, 'lrrrrrr')}"
    most = (2.0 + at_once) / (2.0 - at_once) if at_once < 2.0 else math.inf
    words = (f"all sensors off at once, each in its own way: disk margin {figure(at_once)}, gains within "
             f"{figure(1.0 / most)} to {figure(most)}, phases within {amount(2.0 * math.atan(0.5 * at_once), 'rad')}")
    return (f"{design.plant.stance.name}: margins at each sensor\n{text_table(head, rows, 'lrrrrrr')}\n\n{folded(words)}")


def _margins(m: Margins) -> Sequence[str]:
    if not m.stable:
        return ["unstable", "", "", "", "", ""]
    crossing = f"{m.phase_crossover / math.tau:.3g} Hz" if math.isfinite(m.phase_crossover) else "never 1"
    delay = amount(m.delay, "s") if math.isfinite(m.delay) else "any"
    phase = amount(m.phase, "rad") if math.isfinite(m.phase_crossover) else "any"
    return [figure(m.gain_lower), figure(m.gain_upper), phase, crossing, delay, figure(m.peak_sensitivity)]


def _actuators(design: Design) -> str:
    units = actuator_gains(design)
    rows = []
    for unit in units:
        for i, name in enumerate(design.law.measurements):
            if unit.si[i] != 0.0:
                rows.append([unit.unit, name, figure(unit.si[i], 5), _cell(unit.current, i), _cell(unit.duty, i)])
    head = ["unit", "per SI unit of", "input (SI)", "A", "duty"]
    return (f"{design.plant.stance.name}: what each unit is asked for, per SI unit of a measurement\n"
            "(without the law's memory; duty: share of the supply voltage at standstill)\n"
            f"{text_table(head, rows, 'llrrr')}")


def _cell(row: NDArray[np.float64] | None, i: int) -> str:
    return "" if row is None else figure(float(row[i]), 5)


def _pid(design: Design) -> str:
    forms = pid_forms(design)
    if forms is None:
        return ""
    rows = [["kp", figure(forms.kp, 5), "kp", figure(forms.kp, 5)],
            ["ki, per s", figure(forms.ki, 5), "ki T", figure(forms.ki_sample, 5)],
            ["kd, s", figure(forms.kd, 5), "kd (1 − a)", figure(forms.kd_new, 5)],
            ["Ti = kp/ki", amount(forms.integral_time, "s"), "a", figure(forms.filter_keep, 5)],
            ["Td = kd/kp", amount(forms.derivative_time, "s"), "", ""]]
    return f"PID about the line\n{text_table(['parallel', 'value', 'folded per sample', 'value'], rows, 'lrlr')}"
