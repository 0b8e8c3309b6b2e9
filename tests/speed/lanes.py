"""Times the batch kernel against a C kernel of the same work and against scipy, in the same run on one core.

    python -m tests.speed.lanes

Needs gcc. Times are those of the process (other load does not count), the shortest of several; ratios travel better.
"""

from __future__ import annotations

import ctypes
import shutil
import subprocess
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path

import numpy as np
from scipy.integrate import solve_ivp

from balance.kernel import lane_rows as rows
from balance.kernel import layout, sensing
from balance.kernel.bundles import Events, LawArrays
from balance.kernel.drive import unit_input
from balance.kernel.equations import derivative
from balance.kernel.sensing import GYRO, TILT
from balance.simulate.batch import Batch, Recoveries, recoveries
from balance.simulate.blocks import motor_rows
from tests.kernel import batches, rigs

GAINS = (-60.0, -10.3, -0.008)
"""Of `batches.control`: v = −gains · y."""
LIMIT = 0.9
STEP = 0.5e-3
SAMPLE = 0.002
OF_GYRO = 0.995
"""Share of the gyro in the filter: a time constant of 0.4 s."""
MOTOR = (rows.COUPLING, rows.PER_OWN, rows.SHARE, rows.MOMENT, rows.COULOMB, rows.VISCOUS, rows.TORQUE_LIMIT,
         rows.SPEED_LIMIT, rows.SPEED_GAIN, rows.PER_TORQUE, rows.PER_AMP, rows.EMF, rows.OHMS, rows.PER_OHM, rows.VOLTS,
         rows.AMPS, rows.LAG)


@dataclass(frozen=True)
class Case:
    """One batch in the form of each kernel."""

    batch: Batch
    law: LawArrays
    events: Events
    noisy: bool


def case(n: int, lasts: float, noisy: bool, wheels: int = 1) -> Case:
    """Return n starts near the upright, none of which falls: every kernel makes every step."""
    sensor = batches.noisy_sensor() if noisy else rigs.ideal_sensor()
    sensor[[sensing.ACROSS, sensing.GYRO_BIAS, sensing.GYRO_STEP]] = 0.0
    batch = batches.many(n, wheels, spread=0.01)
    body, states = rigs.body(fell=batches.FELL), batch.states.copy()
    states[:, 0] -= rigs.body(side=0.3)[layout.BALANCED]
    batch = replace(batch, bodies=np.tile(body, (n, 1)), states=states * 0.2, scale=np.ones(n))
    law = batches.control(wheels, (TILT, GYRO, 2) if noisy else (0, 1, 2), SAMPLE)
    if noisy:
        law, batch = filtered(law), replace(batch, memory=batch.states[:, :1].copy())
    return Case(batch, law, rigs.events(lasts, longest=STEP, sensor=sensor), noisy)


def filtered(law: LawArrays) -> LawArrays:
    """Return the law on a lean from a complementary filter: e⁺ = a (e + T gyro) + (1 − a) tilt, e⁺ in the tilt's place."""
    into = np.array([[1.0 - OF_GYRO, OF_GYRO * SAMPLE, 0.0]])
    return law._replace(A=np.array([[OF_GYRO]]), B=into, C=law.D[0] * np.array([OF_GYRO]),
                        D=law.D * np.array([0.0, 1.0, 1.0]) + law.D[0] * into[0])


def shortest(run: Callable[[], object], times: int) -> float:
    """Return the shortest process time in s."""
    best = np.inf
    for _ in range(times):
        start = time.process_time()
        run()
        best = min(best, time.process_time() - start)
    return float(best)


@cache
def built() -> ctypes.CDLL:
    """Build the C kernel for this processor."""
    folder = Path(tempfile.mkdtemp())
    compiler = shutil.which("gcc")
    assert compiler is not None, "the C kernel needs gcc"
    wide = ["-mprefer-vector-width=512"] if "avx512f" in instruction_set() else []
    subprocess.run([compiler, "-O3", "-march=native", "-ffp-contract=fast", "-fno-math-errno", "-fno-trapping-math", *wide,
                    "-shared", "-fPIC", str(Path(__file__).with_name("lanes.c")), "-o", str(folder / "lanes.so"), "-lm"],
                   check=True)
    return ctypes.CDLL(str(folder / "lanes.so"))


def instruction_set() -> str:
    """Return the widest vector instructions of this processor."""
    flags = Path("/proc/cpuinfo").read_text(encoding="utf-8").split() if Path("/proc/cpuinfo").exists() else []
    return next((name for name in ("avx512f", "avx2", "avx", "sse2", "asimd") if name in flags), "unknown")


def by_c(given: Case) -> tuple[np.ndarray, np.ndarray]:
    """Return (end states (4, n), alive and metrics (9, n)) from the C kernel."""
    batch, motors = given.batch, motor_rows(given.batch.units[:, 0])
    body, n = batch.bodies, len(batch.scale)
    mass = body[:, layout.INERTIA] - motors[:, rows.MOMENT]
    numbers = np.array([body[:, layout.STIFF_SIN], 1.0 / mass, *[motors[:, k] for k in MOTOR], body[:, layout.FELL]])
    sensor = given.events.sensor
    law = np.array([*(-np.array(GAINS)), LIMIT, *(sensor[[sensing.GYRO_NOISE, sensing.ACCEL_NOISE, sensing.UP]]),
                    body[0, layout.GRAVITY], OF_GYRO])
    states, out = np.ascontiguousarray(batch.states.T), np.zeros((9, n))
    call = built().run
    call.restype, call.argtypes = None, [*[ctypes.c_void_p] * 3, ctypes.c_long, ctypes.c_long, ctypes.c_int,
                                         ctypes.c_double, ctypes.c_void_p, ctypes.c_long]
    call(numbers.ctypes.data, states.ctypes.data, out.ctypes.data, n, round(given.events.lasts / SAMPLE),
         round(SAMPLE / STEP), STEP, law.ctypes.data, int(batch.seeds[0]))
    return states, out


def by_scipy(given: Case, which: int) -> float:
    """Return the end lean of one trial by scipy's RK45 (1e-6), restarted at each sample; without noise."""
    body, units, law = given.batch.bodies[which], given.batch.units[which], given.law
    X, asked, out = given.batch.states[which].copy(), 0.0, np.zeros(4)

    def rate(_: float, x: np.ndarray) -> np.ndarray:
        torque, slope, _met = unit_input(units, 0, x[2], x[3], x[1], asked)
        derivative(x, np.array([torque]), 0.0, body, units, out)
        out[3] = slope
        return out.copy()

    for _ in range(round(given.events.lasts / law.sample_time)):
        following = float(np.clip(law.D @ X[:3], -law.output_limit, law.output_limit))
        X = solve_ivp(rate, (0.0, law.sample_time), X, rtol=1e-6).y[:, -1]
        asked = following
    return float(X[0])


def by_lanes(given: Case, threads: int = 1) -> Recoveries:
    """Run the batch kernel."""
    return recoveries(given.batch, given.law, given.events, 0.0, threads=threads)


def ratios(n: int, lasts: float, times: int) -> dict[str, float]:
    """Return the ratios of the batch kernel: to C without and with noise, two wheels to C, and solve_ivp to it."""
    found: dict[str, float] = {}
    for noisy, word in ((False, "lanes / C"), (True, "lanes / C, noise")):
        given = case(n, lasts, noisy)
        by_lanes(given)
        found[word] = shortest(lambda g=given: by_lanes(g), times) / shortest(lambda g=given: by_c(g), times)
    plain, two = case(n, lasts, False), case(n, lasts, False, wheels=2)
    c_time, mine = shortest(lambda: by_c(plain), times), shortest(lambda: by_lanes(plain), times)
    found["C ns per step"] = 1e9 * c_time / (n * lasts / STEP)
    found["two wheels / one in C"] = shortest(lambda: by_lanes(two), times) / c_time
    by_scipy(case(1, SAMPLE, False), 0)                      # its rates are compiled
    found["solve_ivp / lanes"] = shortest(lambda: by_scipy(plain, 0), 1) / (mine / n)
    return found


if __name__ == "__main__":
    print(f"instruction set: {instruction_set()}")
    for word, ratio in ratios(1024, 2.0, 9).items():
        print(f"{word:<24} {ratio:10.2f}")
    large = case(100_000, 5.0, True)
    began = time.perf_counter()
    done = by_lanes(large, 2)
    print(f"100,000 recoveries of 5 s with noise: {time.perf_counter() - began:.1f} s on two threads; {done.counts}")
