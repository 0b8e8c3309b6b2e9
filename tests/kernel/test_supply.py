"""The supply all motors share: sag, limits and what braking gives back, against closed forms and DOP853."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.integrate import longest_step
from balance.kernel.supply import (
    brake_power,
    capacitor_voltage,
    most_power,
    power_taken_back,
    sagging_voltage,
    scale_to,
)
from tests.kernel.rigs import body, bus, events, law, run, wheel

STILL = {"inertia": 1e6, "stiffness": 1e-300, "mass": 1.0, "height": 1.0}
"""A body that does not move."""


@pytest.mark.parametrize("power", [-400.0, 0.0, 300.0, 2400.0])
def test_the_bus_stands_where_source_and_load_agree(power):
    """V = V₀ − R P/V; at the most a source can give, V₀²/(4R), it stands at half."""
    volts = sagging_voltage(power, 24.0, 0.06)
    assert volts == pytest.approx(24.0 - 0.06 * power / volts, rel=1e-12)
    assert (volts > 24.0) == (power < 0.0)


def test_no_load_draws_more_than_a_source_can_give():
    assert sagging_voltage(1e5, 24.0, 0.06) == 12.0
    assert most_power(24.0, 0.06, np.inf) == pytest.approx(24.0**2 / (4 * 0.06), rel=1e-12)
    assert most_power(24.0, 0.06, 20.0) == pytest.approx(20.0 * (24.0 - 0.06 * 20.0), rel=1e-12)
    assert most_power(24.0, 0.0, np.inf) == np.inf
    assert most_power(24.0, 0.06, 1e4) == most_power(24.0, 0.06, np.inf)            # beyond the match more amps give less


def test_the_share_of_the_current_that_fits():
    """A s² + B s + rest = power with 0 ≤ s ≤ 1, drawing and braking; none fits where the others use it up."""
    rng = np.random.default_rng(5)
    for _ in range(300):
        A, B = rng.uniform(1, 300), rng.uniform(-250, 400)
        rest, whole = rng.uniform(-50, 50), A + B
        power = rest + rng.uniform(0.05, 0.95) * whole
        s = scale_to(A, B, rest, power)
        left = A * s * s + B * s + rest - power
        assert 0.0 <= s <= 1.0
        assert left == pytest.approx(0.0, abs=1e-9 * (A + abs(B)))
        assert whole > 0.0 or s <= -B / (2 * A)                   # braking: the branch that leaves zero
    assert scale_to(10.0, 5.0, 40.0, 30.0) == 0.0
    assert scale_to(0.0, 0.0, 0.0, 1.0) == 0.0
    assert scale_to(10.0, -90.0, 0.0, -0.0) == 0.0                # nothing can be given back: no braking at all


def test_capacitor_and_brake_resistor():
    assert 0.5 * 2e-3 * (capacitor_voltage(0.3, 24.0, 2e-3) ** 2 - 24.0**2) == pytest.approx(0.3, rel=1e-12)
    assert brake_power(30.0, 30.0, 5.0) == pytest.approx(180.0)
    assert brake_power(29.4 - 1e-6, 30.0, 5.0) == 0.0             # comes on 2 % below
    assert brake_power(29.7, 30.0, 5.0) == pytest.approx(0.5 * 29.7**2 / 5.0)
    assert brake_power(35.0, 30.0, 0.0) == 0.0
    assert power_taken_back(30.0, 30.0, 5.0, 2e-3) == pytest.approx(180.0)
    assert power_taken_back(30.0, 30.0, 0.0, 2e-3) == 0.0
    assert power_taken_back(99.0, np.inf, 0.0, 2e-3) == np.inf


def spun_up(source, lasts=0.5):
    """Return a run of one wheel all out from rest on a still body."""
    units = np.vstack([wheel(inertia=1e-3, lag=4000.0, torque=np.inf, speed=np.inf, volts=0.0, ohms=0.3, amps=1e3), source])
    return run(body(**STILL), units, law(hold=True), events(lasts, longest=5e-5), memory=1e3)


def test_a_wheel_all_out_sees_the_sources_resistance_in_series():
    """At full duty (V₀ − K Ω)/(R + R_b): Ω = (V₀/K)(1 − e^{−t/τ}), τ = I (R + R_b)/K², once the current lag is over."""
    ran = spun_up(bus(volts=12.0, ohms=0.15))
    tau = 1e-3 * 0.45 / 0.06**2
    assert ran.X[2] == pytest.approx(200.0 * (1.0 - np.exp(-0.5 / tau)), rel=1e-3)   # the lag: 0.25 of 125 ms behind
    assert ran.metrics[outcome.DEEPEST_SAG] == pytest.approx(12.0 * 0.15 / 0.45, rel=0.02)
    assert spun_up(bus(volts=12.0)).X[2] > 1.005 * ran.X[2]       # the twin: no sag


def test_the_supplys_current_limit_holds_the_power():
    """20 W at most: ½ I Ω² grows by what is left of it after the winding's heat, and it is said which limit that was."""
    limited, free = spun_up(bus(volts=12.0, amps=5.0), 0.05), spun_up(bus(volts=12.0), 0.05)
    assert limited.metrics[outcome.PEAK_SUPPLY] == pytest.approx(5.0, rel=0.01)     # the current lags 0.25 ms behind
    assert np.isfinite(limited.first[1, outcome.SUPPLY, 0])
    assert not np.isfinite(free.first[1, outcome.SUPPLY, 0])
    assert free.metrics[outcome.PEAK_SUPPLY] > 20.0
    assert limited.X[2] < 0.6 * free.X[2]


def braking(source, start=300.0, lasts=0.3):
    """Return a run of one wheel braked from `start` rad/s with 0.5 N·m."""
    units = np.vstack([wheel(inertia=1e-3, lag=2000.0, torque=np.inf, speed=np.inf, volts=0.0, ohms=0.3, amps=30.0), source])
    return run(body(**STILL), units, law(hold=True), events(lasts, longest=longest_step(units)), memory=-0.5,
               X=[0, 0, start, 0, 0, 0])


def test_a_braked_wheel_pumps_a_bus_that_takes_nothing_back():
    """Energy: ½ C (V² − V₀²) + heat = ½ I ΔΩ². The same wheel on a battery that takes it back pumps nothing."""
    ran = braking(bus(back=False, farads=5e-3), lasts=0.1)
    speed, current = ran.trace[:, outcome.TRACE_SIZE], ran.trace[:, outcome.TRACE_SIZE + 1]
    heat = np.trapezoid(0.3 * current**2, ran.trace[:, outcome.TIME])
    given = 0.5 * 1e-3 * (speed[0] ** 2 - speed[-1] ** 2) - heat
    assert ran.X[4] == pytest.approx(given, rel=2e-3)             # trapezoids of 2 ms over a current that rises in 0.5 ms
    assert ran.metrics[outcome.PEAK_BUS] == pytest.approx(np.sqrt(24.0**2 + 2 * ran.X[4] / 5e-3), rel=1e-3)
    assert braking(bus(back=True), lasts=0.1).metrics[outcome.PEAK_BUS] == pytest.approx(24.0)


def test_the_brake_resistor_burns_it_and_without_one_the_drive_stops_braking():
    burns = braking(bus(back=False, farads=1e-3, over=30.0, brake=4.0))
    stops = braking(bus(back=False, farads=1e-3, over=30.0))
    for ran in (burns, stops):                                    # above only by what the current's lag of 0.5 ms brings
        assert 29.0 < ran.metrics[outcome.PEAK_BUS] < 31.5
    assert burns.X[5] > 10.0                                      # J in the resistor, of ½ I Ω² = 45 J
    assert np.isfinite(stops.first[1, outcome.OVERVOLTAGE, 0])
    assert np.isfinite(burns.first[1, outcome.OVERVOLTAGE, 0])    # it comes on only as the voltage gets there
    assert stops.X[2] > 250.0                                     # hardly braked
    assert burns.X[2] < 200.0


def test_a_supply_that_breaks_down_brakes_the_wheel_by_itself():
    """60 mV·s × 300 rad/s = 18 V; at 12 V left the wheel is braked whatever is asked, and it is said when."""
    units = np.vstack([wheel(inertia=1e-3, lag=2000.0, torque=np.inf, speed=np.inf, volts=0.0, ohms=0.3, amps=30.0), bus()])
    happens = events(0.2, spells=[[0.05, 0.1, outcome.SUPPLY_LEFT, 0.5]], longest=longest_step(units))
    ran = run(body(**STILL), units, law(), happens, X=[0, 0, 300.0, 0, 0, 0])
    speed = ran.trace[:, outcome.TRACE_SIZE]
    assert ran.first[0, outcome.FORCED, 0] == pytest.approx(0.05, abs=1e-9)
    assert speed[25] == pytest.approx(300.0, rel=1e-6)
    tau = 1e-3 * 0.3 / 0.06**2                                    # toward 12/0.06 = 200 rad/s, from 0.5 ms of lag on
    assert speed[50] == pytest.approx(200.0 + 100.0 * np.exp(-(0.05 - 0.5e-3) / tau), rel=2e-3)
    assert speed[-1] == pytest.approx(speed[51], rel=2e-3)        # healthy again: it rolls on
    healthy = run(body(**STILL), units, law(), events(0.2), X=[0, 0, 300.0, 0, 0, 0])
    assert not np.isfinite(healthy.first[0, outcome.FORCED, 0])


@pytest.mark.parametrize(("amps", "flag", "other"), [(30.0, outcome.FORCED, outcome.UNREGULATED),
                                                     (10.0, outcome.UNREGULATED, outcome.FORCED)])
def test_beyond_bus_voltage_and_what_the_limit_drops_the_current_is_out_of_control(amps, flag, other):
    """18 V of back-EMF on 12 V that are left: 30 A × 0.3 ohm hold 6 V more than that, 10 A do not (V + R i_max = 15 V)."""
    units = np.vstack([wheel(inertia=1e-2, lag=2000.0, torque=np.inf, speed=np.inf, volts=0.0, ohms=0.3, amps=amps), bus()])
    happens = events(0.06, spells=[[0.05, 0.1, outcome.SUPPLY_LEFT, 0.5]], longest=longest_step(units))
    ran = run(body(**STILL), units, law(), happens, X=[0, 0, 300.0, 0, 0, 0])
    assert ran.first[0, flag, 0] == pytest.approx(0.05, abs=1e-9)
    assert not np.isfinite(ran.first[0, other, 0])


def by_scipy(units, source, commands, start, lasts):
    """Run motors on a still body with DOP853; the bus written anew: fixed point for the sag, bisection for limits."""
    V0, Rb, amps = source[0, at.BUS_VOLTAGE], source[0, at.SOURCE_OHMS], source[0, at.SOURCE_AMPS]
    C, over, brake = (source[0, p] for p in (at.CAPACITANCE, at.OVERVOLTAGE, at.BRAKE_OHMS))
    n = len(units)
    K, R, lag = units[:, at.BACK_EMF], units[:, at.RESISTANCE], units[:, at.CURRENT_LAG]

    def rate(_, x):
        speed, current, E = x[:n], x[n:2 * n], x[2 * n]
        power = np.sum(current * (R * current + K * speed))
        blocked = source[0, at.TAKES_BACK] == 0 and (E > 0 or power < 0)
        V = V0
        for _ in range(200 if not blocked else 0):
            V = V0 - Rb * power / V
        if blocked:
            V = np.sqrt(V0**2 + 2 * max(E, 0.0) / C)
        most = units[:, at.CURRENT_LIMIT]
        ends = [np.clip((s * V - K * speed) / R, -most, most) for s in (-1, 1)]
        target = np.clip(commands / units[:, at.TORQUE_PER_AMP], *ends)
        burns = V**2 / brake * np.clip((V - 0.98 * over) / (0.02 * over), 0, 1) if brake else 0.0
        give = min(amps, V0 / (2 * Rb) if Rb else np.inf)
        limits = (give * (V0 - Rb * give) if np.isfinite(give) else np.inf,
                  max(burns + C * over * 2000.0 * (over - V), 0.0) if not source[0, at.TAKES_BACK] else np.inf)
        asked = target * (R * target + K * speed)
        for way, most_of in zip((1, -1), limits, strict=True):
            if way * asked.sum() > most_of:
                mine = (asked >= 0) if way > 0 else (asked < 0)
                low, high = 0.0, 1.0
                for _ in range(60):
                    s = 0.5 * (low + high)
                    cut = np.where(mine, s * target, target)
                    low, high = (low, s) if way * np.sum(cut * (R * cut + K * speed)) > most_of else (s, high)
                target = np.where(mine, low * target, target)
        gained = 0.0 if not blocked else (-power - burns if E > 0 else max(-power - burns, 0.0))
        return [*(units[:, at.TORQUE_PER_AMP] * current / units[:, at.OWN_INERTIA]), *(lag * (target - current)), gained]

    return solve_ivp(rate, (0, lasts), start, "DOP853", rtol=1e-11, atol=1e-11, max_step=1e-4).y[:, -1]


@pytest.mark.parametrize(("source", "commands", "speeds"), [
    (bus(ohms=0.2, amps=6.0), (0.9, 0.6), (50.0, 20.0)),                          # sag and the supply's limit
    (bus(ohms=0.2, back=False, farads=4e-3), (-0.6, 0.3), (280.0, 100.0)),         # one pumps, one draws
    (bus(back=False, farads=2e-3, over=30.0, brake=6.0), (-0.6, -0.5), (280.0, 300.0)),
    (bus(volts=15.0, ohms=0.1), (0.0, 0.2), (300.0, 250.0)),                       # forced braking
])
def test_two_motors_on_one_bus_against_dop853(source, commands, speeds):
    """Speeds, currents and the bus's energy within 2e-6 of their size after 60 ms: limits are kinks for both."""
    each = [wheel(inertia=i, lag=1500.0, torque=np.inf, speed=np.inf, volts=0.0, ohms=r, amps=25.0)
            for i, r in ((1.2e-3, 0.3), (0.8e-3, 0.5))]
    units = np.vstack([*each, source])
    units[:2, at.COUPLING] = 0.0
    control = law(hold=True, sample_time=0.02)._replace(
        allotment=np.array(commands), levelling=np.zeros((2, 3)), input_limits=np.full(2, np.inf), line_share=np.zeros(2),
        input_steps=np.zeros(2))
    ran = run(body(**STILL), units, control, events(0.06, longest=2e-5), memory=1.0,
              X=[0, 0, speeds[0], 0, speeds[1], 0, 0, 0])
    other = by_scipy(np.vstack(each), source, np.array(commands), [*speeds, 0, 0, 0], 0.06)
    ours = ran.X[[2, 4, 3, 5, 6]]
    np.testing.assert_allclose(ours, other, rtol=2e-6, atol=2e-6)
    strong = run(body(**STILL), np.vstack([*each, bus(volts=100.0)]), control, events(0.06, longest=2e-5), memory=1.0,
                 X=[0, 0, speeds[0], 0, speeds[1], 0, 0, 0])
    assert np.abs(strong.X[[2, 4]] / ours[:2] - 1.0).max() > 1e-3 or ours[4] > 0.1  # the twin: the bus does matter
