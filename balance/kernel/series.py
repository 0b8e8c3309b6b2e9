"""Functions of angles and numbers as short sums: a call of the library's own costs a lane more than a whole sub-step.

All are Taylor's series; their errors are bounded by the first term left out and measured in the tests.
"""

from __future__ import annotations

import numpy as np

from balance.kernel.compiled import inlined


@inlined
def sine(x: float) -> float:
    """Return sin x to 2e-14 for |x| < 0.75 and 7e-10 up to a quarter turn; past that it is wrong.

    Trials end where the machine fell, long before.
    """
    q = x * x
    s = -1.0 / 5040.0 + q * (1.0 / 362880.0 + q * (-1.0 / 39916800.0 + q * (1.0 / 6227020800.0)))
    return x + x * q * (-1.0 / 6.0 + q * (1.0 / 120.0 + q * s))


@inlined
def cosine(x: float) -> float:
    """Return cos x to 1e-15 for |x| < 0.75 and 7e-11 up to a quarter turn."""
    q = x * x
    c = 1.0 / 40320.0 + q * (-1.0 / 3628800.0 + q * (1.0 / 479001600.0 + q * (-1.0 / 87178291200.0)))
    return 1.0 + q * (-0.5 + q * (1.0 / 24.0 + q * (-1.0 / 720.0 + q * c)))


@inlined
def logarithm(x: float) -> float:
    """Return ln x of an ordinary positive number, to 2e-15 of it or absolutely.

    x = 2^k m with m from √½ to √2: ln m = 2 artanh((m − 1)/(m + 1)). The bits are those of IEEE 754's double.
    """
    bits = np.float64(x).view(np.int64) - np.int64(0x3FE6A09E667F3BCD)
    power = bits >> np.int64(52)
    part = np.int64(bits - (power << np.int64(52)) + np.int64(0x3FE6A09E667F3BCD)).view(np.float64)
    s = (part - 1.0) / (part + 1.0)
    q = s * s
    tail = 1.0 / 13.0 + q * (1.0 / 15.0 + q * (1.0 / 17.0 + q * (1.0 / 19.0)))
    tail = 1.0 / 3.0 + q * (1.0 / 5.0 + q * (1.0 / 7.0 + q * (1.0 / 9.0 + q * (1.0 / 11.0 + q * tail))))
    return power * 0.6931471805599453 + 2.0 * s * (1.0 + q * tail)


@inlined
def cosine_of_turns(turns: float) -> float:
    """Return cos(2π turns) for 0 to 1, to 4e-15: 2 cos²(π (turns − ½)) − 1 with the sign that makes of it."""
    x = np.pi * (turns - 0.5)
    q = x * x
    c = 1.0 / 20922789888000.0 + q * (-1.0 / 6402373705728000.0 + q * (1.0 / 2432902008176640000.0))
    c = -1.0 / 3628800.0 + q * (1.0 / 479001600.0 + q * (-1.0 / 87178291200.0 + q * c))
    half = 1.0 + q * (-0.5 + q * (1.0 / 24.0 + q * (-1.0 / 720.0 + q * (1.0 / 40320.0 + q * c))))   # sin(π turns)
    return 1.0 - 2.0 * half * half


@inlined
def tilt_of(across: float, up: float) -> float:
    """Return atan2(across, up) to 2e-15 for up > 0, and to 1e-11 up to 2.6 rad either way.

    Twice halved: tan(a/2) = sin a/(1 + cos a); the rest is the series of arctan below tan(π/8).
    """
    first = across / (up + np.sqrt(across * across + up * up))
    second = first / (1.0 + np.sqrt(1.0 + first * first))
    z = second / (1.0 + np.sqrt(1.0 + second * second))
    q = z * z
    tail = -1.0 / 15.0 + q * (1.0 / 17.0 + q * (-1.0 / 19.0 + q * (1.0 / 21.0)))
    tail = -1.0 / 7.0 + q * (1.0 / 9.0 + q * (-1.0 / 11.0 + q * (1.0 / 13.0 + q * tail)))
    return float(8.0 * z * (1.0 + q * (-1.0 / 3.0 + q * (1.0 / 5.0 + q * tail))))
