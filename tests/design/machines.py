"""Small machines for the design's tests: a body by three numbers and one wheel, or a pair of gyros on legs."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from balance.api.load import load
from balance.design.loop import close, sample_plant
from balance.design.records import Design
from balance.goal.goal import Allow, Goal, Loop, LqrControl
from balance.machine.machine import Lumped, Machine
from balance.machine.motors import Motor, Supply
from balance.machine.stabilisers import Drag, ReactionWheel, Rotor
from balance.plant.build import build_plant
from balance.plant.record import Plant
from balance.stance.build import build_stance


def wheel_machine(mass=3.2, height=0.28, inertia=0.33, spin=2.2e-3, viscous=8e-6, bandwidth=300.0, drag=0.0) -> Machine:
    """Return a bench rig."""
    wheel = ReactionWheel(rotor=Rotor(spin=spin), motor="m", speed_limit=380.0, drag=Drag(viscous=viscous))
    motor = Motor(torque_constant=0.055, resistance=0.25, peak_current=15.0, continuous_current=6.0, bandwidth=bandwidth)
    return Machine(1, "rig", {"wheel": wheel}, lumped=Lumped(mass, height, inertia, drag=drag), motors={"m": motor},
                   supply=Supply(24.0))


def plant_of(machine: Machine, stance: str = "line") -> Plant:
    """Return the plant of one stance."""
    return build_plant(machine, build_stance(machine, stance))


def goal(rate=500.0, latency=0.002, control=None, **more) -> Goal:
    """Return a design goal without trials."""
    allowed = LqrControl(allow=Allow(np.radians(3), np.radians(40), 0.25, 0.7))
    return Goal(1, "test", "", Loop(rate, latency), control or allowed, {}, **more)


def random_goal(rng: np.random.Generator) -> Goal:
    """Return a random loop: 50 Hz to 2 kHz, latency from none to three samples, random weights."""
    rate = float(np.exp(rng.uniform(np.log(50), np.log(2000))))
    allow = Allow(*np.exp(rng.uniform(np.log([0.01, 0.05, 0.05, 0.1]), np.log([0.2, 3.0, 2.0, 3.0]))))
    return goal(rate, float(rng.uniform(0, 3) / rate), LqrControl(allow=allow))


def random_plant(rng: np.random.Generator) -> Plant:
    """Return a random wheel machine with a pole between about 2 and 9 rad/s."""
    height = rng.uniform(0.12, 0.8)
    mass = float(np.exp(rng.uniform(np.log(0.5), np.log(40))))
    inertia = mass * height**2 * rng.uniform(1.1, 2.5)
    spin = inertia * float(np.exp(rng.uniform(np.log(2e-3), np.log(5e-2))))
    return plant_of(wheel_machine(mass, height, inertia, spin, rng.choice([0.0, 1e-5, 1e-3]), rng.uniform(50, 1000)))


def linear_leans(design: Design, start: dict[str, float], count: int) -> np.ndarray:
    """Return the lean at `count` samples of the linear closed loop from the named plant states and memory places."""
    sampled = sample_plant(design.plant, design.law.sample_time, design.law.latency)
    A, names = close(sampled, design.law), (*sampled.states, *design.law.memory)
    x = np.zeros(len(A))
    for name, value in start.items():
        x[names.index(name)] = value
    leans = []
    for _ in range(count):
        leans.append(x[0])
        x = A @ x
    return np.array(leans)


def shipped(design: str, stance: str, **changes) -> tuple[Plant, Goal]:
    """Return plant and goal of a shipped design."""
    job = load(f"designs/{design}.yaml", stance)
    return plant_of(job.machine, stance), replace(job.goal, **changes)
