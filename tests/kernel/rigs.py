"""Bare machines and laws for the kernel, as flat arrays: a pendulum with a wheel, a pendulum with a pair."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from balance.kernel import layout as at
from balance.kernel import outcome, sensing
from balance.kernel.bundles import MEMORY, Events, LawArrays, Output, fresh_metrics, fresh_work
from balance.kernel.run import run_trial


def body(inertia=0.354, stiffness=12.0, side=0.0, mass=3.0, height=0.4, fell=0.6, touch_down=np.inf,
         lands_outward=np.inf):
    """Return a body about its line: J, G_s, G_c; lean counts from its balanced lean."""
    out = np.zeros(at.BODY_SIZE)
    out[at.INERTIA], out[at.STIFF_SIN], out[at.STIFF_COS] = inertia, stiffness, side
    out[at.MASS], out[at.HEIGHT], out[at.GRAVITY] = mass, height, stiffness / (mass * height)
    out[at.BALANCED], out[at.TOUCH_DOWN], out[at.FELL] = -np.arctan2(side, stiffness), touch_down, fell
    out[at.LANDS_OUTWARD] = lands_outward
    return out


def wheel(inertia=4e-3, share=1.0, lag=np.inf, torque=0.8, speed=400.0, volts=1e6, ohms=0.4, amps=1e6, per_amp=0.06,
          emf=0.06, coulomb=0.0, viscous=0.0):
    """Return one direct-drive wheel; without arguments an ideal motor with only a torque and a speed limit."""
    out = np.zeros((1, at.UNIT_SIZE))
    row = out[0]
    row[at.KIND], row[at.COUPLING], row[at.OWN_INERTIA], row[at.AXIS_SHARE] = at.WHEEL, share * inertia, inertia, share
    row[at.COULOMB], row[at.VISCOUS], row[at.TORQUE_PER_AMP], row[at.BACK_EMF] = coulomb, viscous, per_amp, emf
    row[at.RESISTANCE], row[at.BUS_VOLTAGE], row[at.CURRENT_LIMIT] = ohms, volts, amps
    row[at.CURRENT_LAG], row[at.SPEED_LIMIT], row[at.TORQUE_LIMIT] = lag, speed, torque
    return out


def bus(volts=24.0, ohms=0.0, amps=np.inf, back=True, farads=1e-3, over=np.inf, brake=0.0):
    """Return a supply's row; it stands below the wheels' rows."""
    out = np.zeros((1, at.UNIT_SIZE))
    row = out[0]
    row[at.KIND], row[at.ROLE], row[at.OWN_INERTIA], row[at.BUS_VOLTAGE] = at.WHEEL, at.BUS, 1.0, volts
    row[at.SOURCE_OHMS], row[at.SOURCE_AMPS], row[at.TAKES_BACK] = ohms, amps, float(back)
    row[at.CAPACITANCE], row[at.OVERVOLTAGE], row[at.BRAKE_OHMS] = farads, over, brake
    return out


def pair(kind=at.GIMBAL_SERVO, momentum=0.5, stop=1.0471975511965976, rate=4.0, drive=np.inf, lag=100.0, inertia=2e-3,
         kappa=0.0, count=2, transverse=0.0):
    """Return one gimballed unit: e·s₀ = 0, e·(g × s₀) = 1."""
    out = np.zeros((1, at.UNIT_SIZE))
    row = out[0]
    row[at.KIND], row[at.E_GXS0], row[at.KAPPA], row[at.MOMENTUM] = kind, 1.0, kappa, momentum
    row[at.TRANSVERSE], row[at.GIMBAL_INERTIA], row[at.ANGLE_STOP], row[at.RATE_LIMIT] = transverse, inertia, stop, rate
    row[at.DRIVE_TORQUE], row[at.RATE_LAG], row[at.COUNT] = drive, lag, count
    return out


def law(gains=(0.0, 0.0, 0.0), sample_time=0.002, latency=0.0, limit=np.inf, places=(0, 1, 2), hold=False):
    """Return v = -gains·y for one unit; with `hold` v is the law's memory, which stands where `run` put it."""
    m = len(places)
    stays = 1.0 if hold else 0.0
    return LawArrays(np.full((1, 1), stays), np.zeros((1, m)), np.zeros(1), np.full(1, stays), -np.array(gains, float),
                     limit, np.ones(1), np.zeros((1, m)), np.array([np.inf]), np.zeros(1), np.zeros(1), np.zeros(m),
                     np.array(places), sample_time, latency, np.full((1, 1), stays), np.zeros((1, m)))


def ideal_sensor():
    """Return a sensor at the line without any error."""
    out = np.zeros(sensing.SENSOR_SIZE)
    out[[sensing.GYRO_RANGE, sensing.ACCEL_RANGE]] = np.inf
    return out


def events(lasts, torques=(), jumps=(), release=(0.0, 0.0), longest=1e-4, sensor=None, seed=1, changes=(), spells=()):
    """Return what happens; breaks are gathered here. A row of torques may end early: zeros follow, and it is a couple."""
    spans = [r for r in (*torques, *spells)]
    times = {r[0] for r in spans} | {r[1] for r in spans} | {r[0] for r in (*jumps, *changes)} | {release[0]}
    breaks = sorted(t for t in times if 0 < t < lasts)
    rows = [[*r, *[0.0] * (outcome.LEVER - len(r)), np.inf][:outcome.TORQUE_SIZE] for r in torques]
    return Events(np.array(rows, float).reshape(-1, outcome.TORQUE_SIZE),
                  np.array(jumps, float).reshape(-1, outcome.JUMP_SIZE), np.array(breaks, float), *release, lasts, longest,
                  ideal_sensor() if sensor is None else sensor, seed,
                  np.array(changes, float).reshape(-1, outcome.CHANGED + at.BODY_SIZE),
                  np.array(spells, float).reshape(-1, outcome.SPELL_SIZE))


@dataclass
class Ran:
    """What one run left."""

    end: int
    X: np.ndarray
    metrics: np.ndarray
    history: np.ndarray
    trace: np.ndarray
    first: np.ndarray = field(repr=False)


def run(b, units, control, happens, X=None, memory=0.0):
    """Run a trial with full recording; `memory` is put into the law's first place of memory."""
    X = np.zeros(2 + 2 * len(units)) if X is None else np.array(X, float)
    samples = int(np.ceil(happens.lasts / control.sample_time - 1e-9))
    out = Output(np.zeros((samples + 1, 2)), np.zeros((samples + 1, outcome.TRACE_SIZE + 2 * len(units))),
                 fresh_metrics(), np.full((len(units) + 1, outcome.LIMITS, 2), np.inf))
    work = fresh_work(b, units, control, happens)
    work.numbers[MEMORY, 0] = memory
    end = run_trial(X, units, control, happens, work, out)
    taken = int(out.metrics[outcome.SAMPLES])
    return Ran(end, X, out.metrics, out.history[:taken], out.trace[:taken], out.first)
