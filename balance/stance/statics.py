"""What stands behind the dynamics of one stance: joint angles, all feet down, and how far the trunk is from balance."""

from __future__ import annotations

from dataclasses import dataclass

from balance.base.errors import InputError
from balance.machine.machine import Machine
from balance.stance.record import Stance
from balance.stance.shift import BalanceShift, shift_to_balance
from balance.stance.support import Support, all_down


@dataclass(frozen=True)
class Statics:
    """One stance at rest, with the bench's numbers where there are any.

    `support` is None, and `unsupported` says why, where a leg cannot reach its lowered foot.
    """

    stance: Stance
    support: Support | None
    unsupported: str
    shift: BalanceShift


def statics_of(machine: Machine, stance: Stance) -> Statics:
    """Return the statics of one stance; what cannot be reached is said in words, never raised."""
    shift = shift_to_balance(machine, stance)
    try:
        return Statics(stance, all_down(machine, stance), "", shift)
    except InputError as gap:
        return Statics(stance, None, str(gap.problems[0]), shift)
