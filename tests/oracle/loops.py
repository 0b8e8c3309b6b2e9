"""Loops of published examples as state space, for the margins under test."""

from __future__ import annotations

import control
import numpy as np
from scipy.signal import cont2discrete

from balance.design.ideal import continuous_view
from balance.design.loop import BrokenLoop
from balance.design.margins import BrokenView, Margins, margins_of
from balance.design.sampled_margins import view


def continuous(num, den) -> BrokenView:
    """Return a continuous loop given by its transfer function (realised once; the margins see matrices only)."""
    A, B, C, _ = control.ssdata(control.tf2ss(control.tf(num, den)))
    return continuous_view(np.asarray(A), np.asarray(B)[:, 0], np.asarray(C)[0])


def sampled(num, den, T) -> BrokenView:
    """Return the zero-order-hold sampled loop of a transfer function."""
    A, B, C, _ = control.ssdata(control.tf2ss(control.tf(num, den)))
    return held(np.asarray(A), np.asarray(B)[:, 0], np.asarray(C)[0], T)


def held(A, b, c, T) -> BrokenView:
    """Return the loop with its input held; an added delay is a fractional one, re-discretised."""
    def late(delay):
        whole, rest = int(delay // T), delay % T
        A1, b_new = _hold(A, b, T - rest)
        A0, b_old = _hold(A, b, rest)
        n, k = len(b), whole + 1
        big, inp = np.zeros((n + k, n + k)), np.zeros(n + k)
        big[:n, :n] = A1 @ A0
        big[:n, n + k - 1] = A1 @ b_old
        if whole:
            big[:n, n + k - 2] += b_new
        else:
            inp[:n] = b_new
        for i in range(1, k):
            big[n + i, n + i - 1] = 1.0
        inp[n] = 1.0
        return BrokenLoop(big, inp, np.concatenate([c, np.zeros(k)]), T)

    Ad, bd = _hold(A, b, T)
    return view(BrokenLoop(Ad, bd, np.asarray(c, float), T), late)


def _hold(A, b, T):
    if T == 0.0:
        return np.eye(len(b)), np.zeros(len(b))
    Ad, Bd, *_ = cont2discrete((A, np.asarray(b)[:, None], np.eye(len(b)), np.zeros((len(b), 1))), T)
    return Ad, Bd[:, 0]


def of(view_: BrokenView) -> Margins:
    """Return the margins."""
    return margins_of(view_)


def phases(m: Margins) -> list[tuple[float, float]]:
    """Return (frequency in rad/s, signed phase margin in degrees), lowest frequency first."""
    return [(c.frequency, float(np.rad2deg(c.value))) for c in m.crossings if c.kind == "phase"]
