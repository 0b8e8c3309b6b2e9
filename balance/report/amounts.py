"""Numbers and units as a person reads them: degrees, millimetres and milliseconds instead of bare SI."""

from __future__ import annotations

import math

NBSP = "\u00a0"
MINUS = "\u2212"
SUPERSCRIPTS = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")
RPM = 60.0 / math.tau


def figure(value: float, digits: int = 3) -> str:
    """Write a bare number with `digits` significant figures; NaN and infinity in words."""
    if math.isnan(value):
        return "not defined"
    if math.isinf(value):
        return "no limit" if value > 0 else f"{MINUS}∞"
    if value == 0.0:
        return "0"
    power = math.floor(math.log10(abs(float(f"{value:.{digits - 1}e}"))))
    if -4 <= power < 6:
        written = f"{value:.{max(0, digits - 1 - power)}f}"
        return written.replace("-", MINUS)
    head = f"{value / 10.0**power:.{digits - 1}f}".replace("-", MINUS)
    return f"{head}{NBSP}×{NBSP}10{str(power).translate(SUPERSCRIPTS)}"


def spelt(unit: str) -> str:
    """Write a unit with dots and raised figures: `kg*m^2` becomes `kg·m²`."""
    return unit.replace("*", "·").replace("^2", "²").replace("^3", "³").replace("deg", "°").replace("°/", "deg/")


def scale_for(value: float, unit: str) -> tuple[float, str]:
    """Return the factor and the unit in which an SI value of this size is read most easily."""
    size = abs(value) if math.isfinite(value) else 0.0
    if unit in ("rad", "rad/s"):
        return 180.0 / math.pi, "°" if unit == "rad" else "deg/s"
    if unit == "s" and size < 0.1:
        return 1e3, "ms"
    if unit == "m" and size < 10.0:
        return 1e3, "mm"
    return 1.0, spelt(unit)


def in_unit(value: float, scale: tuple[float, str], digits: int = 3) -> str:
    """Write `value` in the unit chosen by `scale_for`, so that several numbers can share one unit."""
    factor, unit = scale
    written = figure(value * factor, digits)
    if not math.isfinite(value) or not unit:
        return written
    return f"{written}°" if unit == "°" else f"{written}{NBSP}{unit}"


def amount(value: float, unit: str, digits: int = 3) -> str:
    """Write one SI value in the unit a person reads it in."""
    return in_unit(value, scale_for(value, unit), digits)


def fixed(value: float, unit: str, decimals: int) -> str:
    """Write a value that is measured from zero: with so many decimals in the unit a person reads, tiny ones as 0."""
    factor, name = scale_for(value, unit)
    written = f"{value * factor:.{decimals}f}".replace("-", MINUS)
    number = written if written.strip(f"{MINUS}0.") else "0"
    return f"{number}°" if name == "°" else f"{number}{NBSP}{name}"


def speed(value: float) -> str:
    """Write a wheel's speed in rpm (SI: rad/s)."""
    return in_unit(value, (RPM, "rpm"))


def share(value: float) -> str:
    """Write a share as a percentage."""
    return figure(100.0 * value, 3 if abs(value) >= 1.0 else 2) + (f"{NBSP}%" if math.isfinite(value) else "")


def listed(words: tuple[str, ...]) -> str:
    """Join words as in a sentence: a, b and c."""
    if len(words) < 2:
        return "".join(words)
    return ", ".join(words[:-1]) + " and " + words[-1]
