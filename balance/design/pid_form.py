"""The lean PID with momentum desaturation, as algebra and as a law.

About the line the plant is  J θ̈ = G θ + d − T,  q̇ = T  (θ lean, T the torque taken from the body, q the momentum stored;
a wheel's drag only adds small terms).  Whatever the controller does, a steady state without runaway has q̇ = T = 0, so under
a constant torque d **the lean must go to −d/G**, not to zero.  An integral of the lean alone asks for zero lean for ever,
that is for T = d for ever: the wheel runs away behind a cancelled zero at the origin (references 1.07).  The momentum has
to move the set-point::

    e = θ − θ_ref,   θ_ref = −m q          stored outward momentum asks for a small inward lean, which brings it back
    T = kp e + ki ∫e dt + kd θ̇_f           positive gains catch a fall

The integral acts on e, so it holds ∫θ and m ∫q together: it takes up wheel drag and torque errors and cannot ask for
a lean that empties no momentum.  The closed loop (no delay, no filter) has the characteristic polynomial ::

    J s⁴ + (kd − J m kp) s³ + (kp − G − J m ki) s² + (ki + G m kp) s + G m ki

whose last term vanishes with m: the root at the origin that m removes.  Far below the lean loop e ≈ 0, so q̇ = G θ + d
= −G m q + d: momentum decays with the **desaturation time 1/(G m)**, and a standing torque d leaves the standing
momentum d/(G m) and the lean −d/G (the balanced pose moved).

The derivative is the **measured lean rate** behind a first-order filter, not a filtered difference of lean: every machine
here carries a gyro or an estimator that gives the rate, it costs no extra half sample of delay, and differencing amplifies
the lean's noise and quantisation by 2/T at the Nyquist frequency.  It does not act on θ_ref.

The torque T is turned into the unit's own command v: wheel torque T/α, gimbal rate T/c (c = ∂q/∂γ), or, for a torque-driven
gimbal, an inner loop on the torque itself (dT/dt = g v + g_θ θ̇: T is proportional to gimbal *rate*), which also feeds the
flywheel's own push-back through the gimbal forward:  v = (ω_r (T_wanted − T) − g_θ θ̇)/g.

Anti-windup is back-calculation (Åström & Hägglund, "PID Controllers", from memory): the integral sees what the limited
command left out, divided by the tracking time T_t; in steady saturation the command stands T_t ki e beyond the limit.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.command import command_unit, output_limit
from balance.design.law import Law
from balance.plant.record import Plant

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True)
class PidForm:
    """Gains about the line, parallel form, per second."""

    kp: float           # N·m/rad
    ki: float           # N·m/(rad·s)
    kd: float           # N·m·s/rad
    momentum: float     # m, rad per N·m·s
    filter: float       # rad/s, pole of the derivative's filter
    tracking: float     # s, T_t of the anti-windup


@dataclass(frozen=True)
class Actuation:
    """v = scale · T − trim · x: how a wanted torque about the line becomes the law's line command."""

    scale: float        # [unit of v] per N·m
    trim: Array         # (n,) inner loop of torque-driven gimbals, zeros otherwise
    inner: float        # rad/s, bandwidth of that loop; 0: none


def actuation(plant: Plant, inner: float) -> Actuation:
    """Return how this plant's line command makes torque about the line; `inner` (rad/s) is used by torque-driven gimbals.

    Direct torque: ∂q̇/∂v.  Rate-driven gimbals: q moves with the gimbal angle and the servo follows its command, so
    T = Σ ∂q/∂γ · rate.  Torque-driven gimbals: T follows as an integral of v, see the module's text.
    """
    model, row = plant.model, plant.momentum_row
    push = model.B @ plant.allotment                                     # (n,) ẋ per v
    direct = float(row @ push)
    rates = [i for i, name in enumerate(model.states) if name.endswith("gimbal_rate")]
    angles = [i for i, name in enumerate(model.states) if name.endswith("gimbal_angle")]
    nothing = np.zeros(len(model.states))
    drives = [unit.drive for unit in plant.units]
    if not rates or (direct != 0.0 and "rate" not in drives):
        return Actuation(1.0 / direct, nothing, 0.0)
    if "rate" in drives:
        served = [u for u, unit in enumerate(plant.units) if unit.kind != "reaction wheel"]
        gain = direct + sum(float(row[angle] * plant.allotment[u]) for angle, u in zip(angles, served, strict=True))
        return Actuation(1.0 / gain, nothing, 0.0)
    torque = np.zeros(len(model.states))                                 # (n,) T = torque · x
    for angle, rate in zip(angles, rates, strict=True):
        torque[rate] = row[angle]
    growth = float(torque @ push)                                        # g, (N·m/s) per v
    trim = inner / growth * torque                                       # (n,)
    trim[1] += float(torque @ model.A[:, 1]) / growth
    return Actuation(inner / growth, trim, inner)


def error_row(plant: Plant, momentum: float) -> Array:
    """Return (n,): e = lean + m q as a row on the model's states."""
    row = momentum * plant.momentum_row
    row[0] += 1.0
    return row


def pid_law(plant: Plant, form: PidForm, act: Actuation, sample_time: float, latency: float) -> Law:
    """Return the sampled law: integral by backward Euler (the newest error counts), filter by its exact pole.

    Memory: `integral` in N·m about the line (only where ki is not zero) and `filtered_rate` in rad/s.
    """
    T, n = sample_time, len(plant.model.states)
    a = float(np.exp(-form.filter * T))
    error = error_row(plant, form.momentum)
    rate = np.eye(n)[1]
    C = np.array([act.scale, act.scale * form.kd * a])
    D = act.scale * ((form.kp + form.ki * T) * error + form.kd * (1 - a) * rate) - act.trim     # (n,)
    track = T / (max(form.tracking, T) * act.scale)
    A = np.array([[1.0 - track * C[0], -track * C[1]], [0.0, a]])
    B = np.vstack([form.ki * T * error - track * D, (1 - a) * rate])                            # (2, n)
    E = np.array([track, 0.0])
    kept = slice(0, 2) if form.ki != 0.0 else slice(1, 2)
    return Law(
        kind="pid", sample_time=T, latency=latency, measurements=plant.model.states,
        memory=tuple(("integral", "filtered_rate")[kept]), A=A[kept, kept], B=B[kept], E=E[kept], C=C[kept], D=D,
        output_limit=output_limit(plant), allotment=plant.allotment, levelling=plant.levelling,
        input_limits=np.array([unit.input_limit for unit in plant.units]),
        unit=command_unit(plant), K=np.zeros(0), states=plant.model.states,
        gains={"kp": form.kp, "ki": form.ki, "kd": form.kd, "momentum": form.momentum,
               "derivative_filter_rad_s": form.filter, "tracking_time_s": max(form.tracking, T),
               "command_per_torque": act.scale, "inner_bandwidth_rad_s": act.inner})


def loop_terms(plant: Plant, form: PidForm, act: Actuation, z: Complex, outputs: Complex, T: float) -> Complex:
    """Return (4, f): L = kp·L₁ + ki·L₂ + kd·L₃ + L₄ at the points z (f,) of the unit circle, negative feedback.

    `outputs` (f, n) is the response of the measured states to v.  The loop is linear in the gains for a given momentum gain
    and filter, which is what makes the search cheap.
    """
    a = np.exp(-form.filter * T)
    error = outputs @ error_row(plant, form.momentum)
    proportional = -act.scale * error
    integral = proportional * T * z / (z - 1)
    derivative = -act.scale * outputs[:, 1] * (1 - a) * z / (z - a)
    return np.stack([proportional, integral, derivative, outputs @ act.trim])
