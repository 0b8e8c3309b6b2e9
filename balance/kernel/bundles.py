"""The flat arrays of one trial, bundled by what they are for: named tuples that compiled code takes apart."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.layout import BUS, BUS_VOLTAGE, KIND, ROLE, SOURCE_AMPS, SOURCE_OHMS, SOURCE_POWER, WHEEL
from balance.kernel.supply import most_power

Array = NDArray[np.float64]
Places = NDArray[np.int64]


class LawArrays(NamedTuple):
    """The law (`design.law.Law`) with m measurements, k places of memory, u units."""

    A: Array              # (k, k)
    B: Array              # (k, m)
    E: Array              # (k,)
    C: Array              # (k,)
    D: Array              # (m,)
    output_limit: float
    allotment: Array      # (u,)
    levelling: Array      # (u, m)
    input_limits: Array   # (u,)
    line_share: Array     # (u,) torque about the line per input; 0: takes nothing over
    input_steps: Array    # (u,) what an input is rounded to; 0: not rounded
    resting: Array        # (m,) what each measurement is counted from (lean: from the balanced lean anyhow)
    places: Places        # (m,) where each measurement stands in X, 0 is read as lean; below 0: `sensing`
    sample_time: float    # s
    latency: float        # s
    A_held: Array         # (k, k) A and B while the machine is held
    B_held: Array         # (k, m)


class Events(NamedTuple):
    """What happens to the machine. `breaks` holds every instant of sudden change, ascending."""

    torques: Array        # (s, TORQUE_SIZE)
    jumps: Array          # (j, JUMP_SIZE) by time
    breaks: Array         # (b,) s
    release: float        # s: held until then; 0: free from the start
    release_rate: float   # rad/s at release
    lasts: float          # s
    longest: float        # s: longest sub-step
    sensor: Array         # (SENSOR_SIZE,) layout: `sensing`
    seed: int             # of the sensor noise
    changes: Array        # (c, CHANGED + BODY_SIZE) by time
    spells: Array         # (k, SPELL_SIZE)


class Output(NamedTuple):
    """What a trial fills."""

    history: Array        # (samples + 1, 2): lean, line momentum at each sample and at the end
    trace: Array          # (samples + 1, TRACE_SIZE + 2 u), or no rows: nothing recorded
    metrics: Array        # (METRIC_SIZE,) given as `fresh_metrics`
    first: Array          # (u + 1, LIMITS, 2) given as inf


class Work(NamedTuple):
    """Working arrays of one trial. Few, since every array in a bundle costs time at each compilation and call."""

    numbers: Array        # (NUMBERS, width) one purpose per row, see below
    flags: Places         # (FLAGS, width)
    body: Array           # copy: what varies over time is in it
    base: Array           # the same without what varies over time; a shift or a load changes both
    live: Array           # copy of the units: a gimbal on its stop changes it
    queue: Array          # (rows, u + 1) inputs computed, newest first; last column: s, from when they act
    active: Array         # (s, TORQUE_SIZE) torques that act in this piece
    spare_first: Array    # like Output.first, for steps that only look ahead


# rows of Work.numbers
RATE = 0          # rates of the states at the stage at hand
TOTAL = 1         # a step's sum
PROBE = 2         # a stage's state
KEPT = 3          # a state to come back to
INPUTS = 4        # inputs of the equations of motion
SLOPES = 5        # rates of the motor currents
ASKED = 6         # what the law asks of each unit now
COMMANDS = 7      # the same, standing still for a gimbal on its stop
MEMORY = 8        # of the law
SPARE = 9         # its next memory
MEASURED = 10
LINE = 11         # first: the law's limited line command; second: time reached
SPARE_METRICS = 12
SERVO_ASKED = 13  # rad: angle a servo has been asked for, from its start
SERVO_SENT = 14   # rad: angle its drive has followed to
NUMBERS = 15

# rows of Work.flags
HELD = 0          # 1, -1: the unit's gimbal is on its upper, lower stop
MET = 1           # limit met in this sub-step
AT = 2            # the four places below
FLAGS = 3

# places in Work.flags[AT]
NEXT_JUMP = 0
NEXT_BREAK = 1
TORQUES_ON = 2    # how many rows of Work.active count
CLIPPED = 3       # 1: the law's own limits were met at this sample
VARYING = 4       # 1: a row of Work.active changes the body over time
NEXT_CHANGE = 5


def fresh_metrics() -> Array:
    """Return the metrics of a trial that has not begun, (METRIC_SIZE,)."""
    out = np.zeros(outcome.METRIC_SIZE)
    for foot in range(2):
        at = outcome.FEET + foot * outcome.FOOT_SIZE
        out[[at + outcome.LEAST_LOAD, at + outcome.LIFT_OFF, at + outcome.SLIP]] = np.inf
    return out


def fresh_work(body: Array, units: Array, law: LawArrays, events: Events) -> Work:
    """Return working arrays for one trial."""
    n, count = 2 + 2 * units.shape[0], units.shape[0]
    width = max(n, law.A.shape[0], law.D.size, outcome.METRIC_SIZE)
    late = [row[outcome.VALUE] for row in events.spells if row[outcome.WHAT] == outcome.LATE]
    whole = int(np.floor((law.latency + max(late, default=0.0)) / law.sample_time + 1e-9))
    queue = np.zeros((whole + 2, count + 1))
    queue[:, count] = -np.inf
    live, last = units.copy(), units[-1]
    if last[KIND] == WHEEL and last[ROLE] == BUS:
        live[-1, SOURCE_POWER] = most_power.py_func(last[BUS_VOLTAGE], last[SOURCE_OHMS], last[SOURCE_AMPS])
    return Work(np.zeros((NUMBERS, width)), np.zeros((FLAGS, width), np.int64), body.copy(), body.copy(), live, queue,
                np.zeros((events.torques.shape[0], outcome.TORQUE_SIZE)),
                np.full((count + 1, outcome.LIMITS, 2), np.inf))
