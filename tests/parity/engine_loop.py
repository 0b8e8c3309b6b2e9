"""A trial run by an independent multibody engine (MuJoCo) under the same sampled law, written anew in plain Python.

The engine gives accelerations only; time stepping (RK4, 0.25 ms), the law, the latency, motors and servos are written
here from the definitions and the design's record, without the kernel.
"""

from __future__ import annotations

from dataclasses import dataclass

import mujoco
import numpy as np

from balance.machine.stabilisers import ReactionWheel
from balance.stance.facing import faced_axes
from tests.parity.multibody import multibody, rotor_moments

STEP = 2.5e-4


def spin_of(wheel, motor):
    """Return what turns with a directly driven wheel, kg·m²."""
    return (wheel.rotor.spin or rotor_moments(wheel.rotor)[0]) + motor.rotor_inertia


def rig(machine):
    """Return three numbers and a wheel as a hinged body; the wheel's mass is part of the body's numbers."""
    lumped, (name, wheel) = machine.lumped, next(iter(machine.stabilisers.items()))
    own, spin = lumped.inertia - lumped.mass * lumped.height**2, spin_of(wheel, machine.motors[wheel.motor])
    return mujoco.MjModel.from_xml_string(f"""
    <mujoco><option gravity="0 0 -{machine.gravity}"/><compiler inertiafromgeom="false"/><worldbody>
    <body name="body"><joint name="line" type="hinge" axis="1 0 0"/>
    <inertial mass="{lumped.mass}" pos="0 0 {lumped.height}" diaginertia="{own} {own} {own}"/>
    <body name="wheel"><joint name="{name}" type="hinge" axis="1 0 0"/>
    <inertial mass="1e-9" pos="0 0 0" diaginertia="{spin} {spin} {spin}"/></body></body></worldbody></mujoco>""")


@dataclass
class EngineRun:
    """Histories, one row per sample: time, lean, stored momentum about the line; and how it ended."""

    time: np.ndarray
    lean: np.ndarray
    momentum: np.ndarray
    verdict: str


class Loop:
    """The machine on the engine, its motors, and the law."""

    def __init__(self, machine, design, torque_scale=1.0):
        self.machine, self.design, self.plant, self.law = machine, design, design.plant, design.law
        self.model = rig(machine) if machine.lumped else multibody(machine, design.plant.stance)
        self.data = mujoco.MjData(self.model)
        names = [mujoco.mj_id2name(self.model, mujoco.mjtObj.mjOBJ_JOINT, j) for j in range(self.model.njnt)]
        self.at = dict(zip(names, self.model.jnt_dofadr, strict=True))
        self.units = list(machine.stabilisers.items())
        self.wheels = isinstance(self.units[0][1], ReactionWheel)
        self.scale = torque_scale
        self.e_T = design.plant.stance.R_WT.T @ design.plant.stance.e_W
        self.supply = machine.supply
        self.held = False                       # the pair's gimbals rest on their stop

    # state y: lean angle θ, θ̇, then per wheel (Ω, i), or for the pair (γ, γ̇)
    def accelerate(self, y, forces, torque):
        """Return the engine's accelerations with `forces` on the units' joints and `torque` on the line."""
        d, at = self.data, self.at
        mujoco.mj_resetData(self.model, d)
        d.qpos[at["line"]], d.qvel[at["line"]] = y[0], y[1]
        d.qfrc_applied[at["line"]] = torque - (self.machine.lumped.drag * y[1] if self.machine.lumped else 0.0)
        if self.wheels:
            for i, (name, _) in enumerate(self.units):
                d.qvel[at[name]], d.qfrc_applied[at[name]] = y[2 + 2 * i], forces[i]
        else:
            name, pair = self.units[0]
            for k, side in enumerate((1.0, -1.0)):
                gimbal = at[f"{name}.gimbal.{k}"]
                d.qpos[gimbal], d.qvel[gimbal] = side * y[2], side * y[3]
                d.qfrc_applied[gimbal] = side * (forces[0] - pair.gimbal.damping * y[3])
                d.qvel[at[f"{name}.spin.{k}"]] = side * (pair.spin_speed - np.sin(y[2]) * y[1])
        mujoco.mj_forward(self.model, d)
        return d.qacc

    def rates(self, y, commands, torque):
        """Return dy/dt: motors or servo, then the engine."""
        if self.wheels:
            return self.wheel_rates(y, commands, torque)
        name, pair = self.units[0]
        gimbal = self.at[f"{name}.gimbal.0"]
        drive = pair.gimbal
        wanted = (np.clip(commands[0], -drive.rate_limit, drive.rate_limit) - y[3]) * 2 * np.pi * drive.bandwidth
        still = self.accelerate(y, [0.0], torque).copy()
        change = self.accelerate(y, [1.0], torque) - still                     # affine in the drive's torque
        given = np.clip((wanted - still[gimbal]) / change[gimbal], -drive.torque_limit, drive.torque_limit)
        q = still + given * change
        if self.held:
            q = still - still[gimbal] / change[gimbal] * change            # the stop lets it turn no further
        return np.array([y[1], q[self.at["line"]], y[3], q[gimbal]])

    def wheel_rates(self, y, commands, torque):
        """Return dy/dt with every wheel's motor: current loop, voltage and current limits, speed limiter, drag."""
        forces, targets = [], []
        volts = self.bus_voltage(y)
        for i, (_, wheel) in enumerate(self.units):
            motor = self.machine.motors[wheel.motor]
            speed, current = y[2 + 2 * i], y[3 + 2 * i]
            bandwidth = 2 * np.pi * motor.bandwidth
            kt = motor.torque_constant
            inertia = spin_of(wheel, motor)
            most = motor.peak_current * kt * self.scale
            cut = min(bandwidth / 4, 500.0) * inertia
            ask = np.clip(commands[i], -most, most)
            ask = min(ask, max(cut * (wheel.speed_limit - speed), 0.0)) if ask > 0 else \
                max(ask, -max(cut * (wheel.speed_limit + speed), 0.0))
            ends = [np.clip((s * volts - kt * speed) / motor.resistance, -most / kt, most / kt) for s in (-1, 1)]
            targets.append(np.clip(ask / kt, *ends))
            fade = np.clip(speed, -1.0, 1.0)
            forces.append(kt * current - wheel.drag.coulomb * fade - wheel.drag.viscous * speed)
        q = self.accelerate(y, forces, torque)
        out = [y[1], q[self.at["line"]]]
        for i, ((name, _), target) in enumerate(zip(self.units, self.within_supply(targets, y), strict=True)):
            bandwidth = 2 * np.pi * self.machine.motors[self.units[i][1].motor].bandwidth
            out += [q[self.at[name]], bandwidth * (target - y[3 + 2 * i])]
        return np.array(out)

    def electrical(self, i, current, speed):
        """Return the power motor i takes from the bus, R i² + K i Ω."""
        motor = self.machine.motors[self.units[i][1].motor]
        return current * (motor.resistance * current + motor.torque_constant * speed)

    def bus_voltage(self, y):
        """Return V behind the supply's resistance under the power of all motors: V² − V₀ V + R P = 0."""
        power = sum(self.electrical(i, y[3 + 2 * i], y[2 + 2 * i]) for i in range(len(self.units)))
        return 0.5 * (self.supply.voltage + max(self.supply.voltage**2 - 4.0 * self.supply.resistance * power, 0.0) ** 0.5)

    def within_supply(self, targets, y):
        """Scale down the drawing motors' targets, by bisection, where the supply's current limit asks for it."""
        amps, powers = self.supply.peak_current, [self.electrical(i, t, y[2 + 2 * i]) for i, t in enumerate(targets)]
        most = amps * (self.supply.voltage - self.supply.resistance * amps)
        if sum(powers) <= most:
            return targets
        low, high = 0.0, 1.0
        for _ in range(50):
            part = 0.5 * (low + high)
            cut = [t * part if p >= 0.0 else t for t, p in zip(targets, powers, strict=True)]
            too_much = sum(self.electrical(i, t, y[2 + 2 * i]) for i, t in enumerate(cut)) > most
            low, high = (low, part) if too_much else (part, high)
        return [t * low if p >= 0.0 else t for t, p in zip(targets, powers, strict=True)]

    def momentum(self, y):
        """Return what is stored about the line, from the definition: Σ I α (Ω + α θ̇), or 2 H e·(g × s₀) sin γ."""
        if not self.wheels:
            _, pair = self.units[0]
            s, g, _ = faced_axes(pair, self.e_T)
            return 2 * rotor_moments(pair.rotor)[0] * pair.spin_speed * (self.e_T @ np.cross(g, s)) * np.sin(y[2])
        total = 0.0
        for i, (_, wheel) in enumerate(self.units):
            share = np.dot(wheel.axis, self.e_T) / np.linalg.norm(wheel.axis)
            inertia = spin_of(wheel, self.machine.motors[wheel.motor])
            total += inertia * share * (y[2 + 2 * i] + share * y[1])
        return total

    def command(self, memory, y):
        """Return (inputs, next memory) of the law: matrices of the record, numpy arithmetic."""
        law, measured = self.law, y[[0, 1, *range(2, len(y), 2)]] if self.wheels else y.copy()
        measured = np.array(measured)
        measured[0] -= self.plant.balanced_lean
        cut = float(np.clip(law.C @ memory + law.D @ measured, -law.output_limit, law.output_limit))
        inputs = self.share_out(law.allotment * cut - law.levelling @ measured)
        return inputs, law.A @ memory + law.B @ measured + law.E * cut

    def share_out(self, asked):
        """Clip the inputs; what one wheel cannot give about the line the others take over, by the room they have."""
        most = self.law.input_limits
        given = np.clip(asked, -most, most)
        if not self.wheels or len(self.units) == 1:
            return given
        share = np.array([np.dot(wheel.axis, self.e_T) / np.linalg.norm(wheel.axis) for _, wheel in self.units])
        missing = float(share @ (asked - given))
        room = np.abs(share) * (most - np.sign(missing) * np.sign(share) * given)
        if missing == 0.0 or room.sum() == 0.0:
            return given
        more = np.sign(missing) * min(abs(missing), room.sum()) * room / room.sum()
        return given + np.divide(more, share, out=np.zeros_like(more), where=room > 0.0)

    def run(self, lasts, lean=0.0, push=0.0, at=0.0, fell=np.pi / 6, step=STEP):
        """Run: start at a lean; an angular impulse about the line at `at` (a sampling instant, seen one sample later)."""
        T, late = self.law.sample_time, self.law.latency
        whole, part = int(late // T + 1e-9), late - int(late // T + 1e-9) * T
        y = np.zeros(2 + 2 * len(self.units))
        y[0] = self.plant.balanced_lean + lean
        memory, queue = np.zeros(len(self.law.C)), [np.zeros(len(self.units))] * (whole + 2)
        rows, verdict = [], "caught"
        for k in range(round(lasts / T)):
            inputs, memory = self.command(memory, y)
            queue = [inputs, *queue[:-1]]
            if abs(k * T - at) < 1e-9 and push:
                self.push(y, push)
            rows.append((k * T, y[0] - self.plant.balanced_lean, self.momentum(y)))
            for span, asked in ((part, queue[whole + 1]), (T - part, queue[whole])):
                steps = int(np.ceil(span / step - 1e-9))
                for _ in range(steps):
                    y = self.step(y, asked, span / steps)
            if abs(rows[-1][1]) > fell:
                verdict = "fell outward" if rows[-1][1] > 0 else "fell inward"
                break
            down = self.plant.stance.touch_down_lean
            if down is not None and y[0] < -down:
                verdict = "touched down"
                break
        time, lean, momentum = np.array(rows).T
        return EngineRun(time, lean, momentum, verdict)

    def push(self, y, impulse):
        """Let an impulse act: the change of all rates is the engine's acceleration per torque times the impulse."""
        none = np.zeros(len(self.units))
        change = self.accelerate(y, none, 1.0).copy() - self.accelerate(y, none, 0.0)
        y[1] += impulse * change[self.at["line"]]
        if self.wheels:
            for i, (name, _) in enumerate(self.units):
                y[2 + 2 * i] += impulse * change[self.at[name]]

    def step(self, y, commands, h):
        """Make one step; where a gimbal meets its stop within it, the rest is made from there."""
        self.held = False
        if not self.wheels and abs(y[2]) >= self.units[0][1].gimbal.angle_limit - 1e-12 and y[3] == 0.0:
            self.held = self.rates(y, commands, 0.0)[3] * y[2] >= 0.0       # it may leave at the beginning of a step
        new = self.runge_kutta(y, commands, h)
        if self.wheels or abs(new[2]) <= self.units[0][1].gimbal.angle_limit:
            return new
        low, high = 0.0, h
        for _ in range(40):
            middle = 0.5 * (low + high)
            over = abs(self.runge_kutta(y, commands, middle)[2]) > self.units[0][1].gimbal.angle_limit
            low, high = (low, middle) if over else (middle, high)
        return self.step(self.meet_stop(self.runge_kutta(y, commands, low)), commands, h - low)

    def meet_stop(self, y):
        """Stop the gimbal dead: the impulse acts between gimbal and body, in the ratio of the engine's accelerations."""
        gimbal = self.at[f"{self.units[0][0]}.gimbal.0"]
        change = self.accelerate(y, [1.0], 0.0).copy() - self.accelerate(y, [0.0], 0.0)
        limit = self.units[0][1].gimbal.angle_limit
        return np.array([y[0], y[1] - y[3] * change[self.at["line"]] / change[gimbal], np.sign(y[2]) * limit, 0.0])

    def runge_kutta(self, y, commands, h):
        """Classic Runge-Kutta."""
        a = self.rates(y, commands, 0.0)
        b = self.rates(y + h / 2 * a, commands, 0.0)
        c = self.rates(y + h / 2 * b, commands, 0.0)
        d = self.rates(y + h * c, commands, 0.0)
        return y + h / 6 * (a + 2 * b + 2 * c + d)
