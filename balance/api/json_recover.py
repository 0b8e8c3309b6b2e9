"""The answer of `balance recover` as a dictionary (SI, unit in the key)."""

from __future__ import annotations

from balance.api.json_numbers import Tree, number
from balance.simulate.records import FootLoad, TrialResult


def json_recover(trials: tuple[TrialResult, ...]) -> Tree:
    """Write every trial, one entry per direction."""
    return {"trials": [_trial(t) for t in trials]}


def _trial(trial: TrialResult) -> Tree:
    return {
        "name": trial.name,
        "stance": trial.stance,
        "toward": trial.toward,
        "verdict": trial.verdict,
        "reason": trial.reason,
        "peak_lean_rad": number(trial.peak_lean),
        "peak_lean_rate_rad_s": number(trial.peak_lean_rate),
        "settling_time_s": number(trial.settling_time),
        "peak_torque_n_m": number(trial.peak_torque),
        "torque_saturated_s": number(trial.torque_saturated),
        "peak_momentum_n_m_s": number(trial.peak_momentum),
        "momentum_used": number(trial.momentum_used),
        "rms_torque_n_m": number(trial.rms_torque),
        "peak_current_a": number(trial.peak_current),
        "peak_bus_power_w": number(trial.peak_bus_power),
        "peak_bus_voltage_v": number(trial.peak_bus_voltage),
        "deepest_sag_v": number(trial.deepest_sag),
        "peak_supply_current_a": number(trial.peak_supply_current),
        "friction_needed": number(trial.friction_needed),
        "lift_off": trial.lift_off,
        "feet": [_foot(foot) for foot in trial.feet],
        "standing_swing_rad": number(trial.standing_swing),
        "end_lean_rad": number(trial.end_lean),
        "end_momentum_n_m_s": number(trial.end_momentum),
    }


def _foot(foot: FootLoad) -> Tree:
    return {
        "foot": foot.foot,
        "least_load_n": number(foot.least_load),
        "friction_needed": number(foot.friction_needed),
        "lift_off_s": number(foot.lift_off),
        "slip_s": number(foot.slip),
    }
