"""The answer of `balance size` as `--json`: SI, the unit in the key."""

from __future__ import annotations

from dataclasses import asdict

from balance.api.json_numbers import Tree, number
from balance.size.answer import SizeAnswer
from balance.size.cautions import cautions
from balance.size.confirm import Confirmed
from balance.size.ledger import Ledger
from balance.size.need import Need
from balance.size.rotor import RotorCheck


def json_size(found: SizeAnswer) -> Tree:
    """Return the whole answer."""
    return {
        "machine": found.question.machine.machine, "design": found.question.goal.design, "passed": found.passed,
        "needs": [_need(n) for n in found.needs],
        "families": [{"family": s.grid.family, "candidates": len(s.grid), "able_by_closed_forms": len(s.enough)}
                     for s in found.surveys],
        "confirmed": [_confirmed(c) for c in found.confirmed],
        "front_push": [found.confirmed.index(c) for c in found.by_push],
        "front_power": [found.confirmed.index(c) for c in found.by_power],
        "best": [{**_confirmed(c), "rotor": _rotor(r)} for c, r in zip(found.best, found.rotors, strict=True)],
        "sensitivity": [{"family": s.family, "what": s.what, "before_kg": number(s.before), "after_kg": number(s.after),
                         "words": s.words()} for s in found.sensitivities],
        "relax": [{"what": r.what, "factor": number(r.factor), "words": r.words()} for r in found.relax],
        "cautions": list(cautions(found)),
    }


def _need(n: Need) -> Tree:
    return {"stance": n.stance, "stabiliser_mass_kg": number(n.added), "pole_rad_s": number(n.pole),
            "torque_n_m": number(n.torque), "momentum_n_m_s": number(n.momentum),
            "momentum_at_twice_the_torque_n_m_s": number(n.both), "power_w": number(n.power),
            "bandwidth_hz": number(n.bandwidth), "trial": n.trial, "reasons": list(n.reasons)}


def _confirmed(c: Confirmed) -> Tree:
    one = c.candidate
    return {"family": one.family, "shape": one.shape, "material": one.material, "diameter_m": number(one.diameter),
            "length_m": number(one.length), "motor": one.motor, "gear_ratio": number(one.ratio), "gimbal_drive": one.drive,
            "speed_rad_s": number(one.speed), "words": one.words(), "added_mass_kg": number(c.added), "passed": c.passed,
            "refused": c.refused, "binding": c.binding, "limited_by": c.limited_by, "push_n_s": number(c.push),
            "best_possible_push_n_s": number(c.best_possible), "push_stance": c.push_stance, "push_toward": c.push_toward,
            "peak_power_w": number(c.power), "momentum_used": number(c.momentum_used),
            "momentum_capacity_n_m_s": number(c.capacity), "torque_limit_n_m": number(c.torque),
            "rms_torque_n_m": number(c.rms_torque), "gimbal_push_back": number(c.push_back),
            "simulated_over_closed_form": number(c.ledger.ratio) if c.ledger else None,
            "difference": _ledger(c.ledger) if c.ledger else None}


def _ledger(told: Ledger) -> Tree:
    return {"stance": told.stance, "trial": told.trial, "toward": told.toward,
            "best_possible_over_closed_form": number(told.possible),
            "lines": [{"what": e.what, "closed_form": number(e.closed), "simulated": number(e.simulated),
                       "simulated_over_closed_form": number(e.ratio)} for e in told.entries]}


UNITS = {"stress": "stress_pa", "burst_speed": "burst_speed_rad_s", "burst_ductile": "burst_ductile_rad_s",
         "energy": "energy_j", "rim_speed": "rim_speed_m_s", "offset": "permissible_offset_m",
         "unbalance": "permissible_unbalance_kg_m", "shaking": "shaking_force_n", "vibration": "vibration_m_s2",
         "seen_at": "seen_at_hz", "bearing_load": "bearing_load_n_m", "spin_up": "spin_up_s", "windage": "windage_w",
         "winding_rise": "winding_rise_k", "winding_allowed": "winding_allowed_k", "runtime": "runtime_s",
         "crossing": "mode_crossing_rad_s"}


def _rotor(r: RotorCheck) -> Tree:
    return {UNITS.get(name, name): number(value) for name, value in asdict(r).items()}
