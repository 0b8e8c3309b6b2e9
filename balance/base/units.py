"""Text with a unit into SI, behind a guard.

The number and the unit expression are taken apart here and in `base.expression`, bounded in length, depth and
exponents; `base.registry` is asked for single unit names only.
"""

from __future__ import annotations

import math
import re
from functools import cache

from balance.base.dimensions import DIMENSIONS, IN_GRAVITIES, Dimension
from balance.base.expression import ExpressionError, Power, expression
from balance.base.registry import Content, known_unit, unknown_unit

LONGEST = 80
"""Characters a quantity may have."""

_NUMBER = re.compile(r"\s*([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)(?![0-9.])\s*")
_FORCES = {"kg": "kgf", "g": "gf", "lb": "lbf", "oz": "ozf"}

class UnitError(ValueError):
    """A text that is no quantity of the dimension asked for: what was given, what is allowed, a hint."""

    def __init__(self, allowed: str, hint: str = "", given: str = "") -> None:
        self.allowed, self.hint, self.given = allowed, hint, given
        super().__init__(f"allowed: {allowed}" + (f". Hint: {hint}" if hint else ""))


def to_si(text: str, dimension: str) -> float:
    """Return the SI value of a text such as ``"120 mm"``.

    Parameters
    ----------
    text
        A number and a unit; products, quotients, whole and half powers, ``sqrt()``.
    dimension
        A name in `base.dimensions.DIMENSIONS`.

    Raises
    ------
    UnitError
        With what is allowed instead, and a hint.
    """
    wanted = DIMENSIONS[dimension]
    allowed = f"{wanted.article} with its unit, such as `{wanted.example}`"
    value, rest = _number(text, allowed)
    if not rest.strip():
        unit = wanted.example.split(" ")[1]
        raise UnitError(allowed, f"add the unit, as in `{text.strip()} {unit}`")
    factor, content = _measure(rest, wanted, allowed)
    if content in _contents(wanted.units):
        result = value * factor
    elif content in _contents(wanted.inverse):
        if value == 0.0:
            raise UnitError(allowed, "the reciprocal of zero is not finite")
        result = 1.0 / (value * factor)
    else:
        raise _wrong_dimension(value, factor, rest.strip(), content, wanted, allowed)
    if not math.isfinite(result):
        raise UnitError(allowed, "the number is too large")
    return result


def factor_of(unit: str) -> float:
    """Return how many SI units one `unit` is: ``factor_of("rpm")`` is 0.1047… rad/s.  For showing values."""
    return _reduce(expression(unit), gravities=False)[0]


def unit_of(dimension: str) -> str:
    """Return the SI unit of a dimension, as written in files: ``unit_of("torque")`` is ``"N*m"``."""
    return DIMENSIONS[dimension].units[0]


def example(dimension: str) -> str:
    """Return a well-written quantity of a dimension: ``example("length")`` is ``"120 mm"``."""
    return DIMENSIONS[dimension].example


def _number(text: str, allowed: str) -> tuple[float, str]:
    """Split a text into its leading number and the rest."""
    if len(text) > LONGEST:
        given = f"`{text[:20]}…`, {len(text)} characters"
        raise UnitError(f"{allowed}, at most {LONGEST} characters", given=given)
    if re.match(r"\s*[+-]?[0-9]+,[0-9]", text):
        raise UnitError(allowed, "write the decimal point as `.`")
    found = _NUMBER.match(text)
    if found is None:
        raise UnitError(allowed, "begin with a number")
    value = float(found.group(1))
    if not math.isfinite(value):
        raise UnitError(allowed, "the number is too large")
    return value, text[found.end():]


def _measure(unit: str, wanted: Dimension, allowed: str) -> tuple[float, Content]:
    try:
        return _reduce(expression(unit), gravities=wanted.name in IN_GRAVITIES)
    except ExpressionError as error:
        raise UnitError(allowed, str(error)) from None
    except (OverflowError, ZeroDivisionError):
        raise UnitError(allowed, "the number is too large") from None


def _reduce(powers: tuple[Power, ...], *, gravities: bool) -> tuple[float, Content]:
    """Multiply out named powers: the SI factor and the base dimensions.

    `gravities`: `g` means standard gravity, not the gram.
    """
    factor, content = 1.0, dict[str, float]()
    for name, power in powers:
        known = known_unit(f"{name}_n" if gravities and name in ("g", "mg", "ug", "\u00b5g") else name)
        if known is None:
            raise ExpressionError(unknown_unit(name))
        # dividing keeps `/ 60` exact where `* 60**-1` would round once more
        factor = factor * known[0] ** power if power > 0 else factor / known[0] ** -power
        for base, exponent in known[1]:
            content[base] = content.get(base, 0.0) + exponent * power
    return factor, tuple(sorted((base, exponent) for base, exponent in content.items() if exponent))


@cache
def _contents(units: tuple[str, ...]) -> tuple[Content, ...]:
    return tuple(_reduce(expression(unit), gravities=False)[1] for unit in units)


def _wrong_dimension(value: float, factor: float, unit: str, content: Content, wanted: Dimension,
                     allowed: str) -> UnitError:
    """Say which dimension was given instead, and which slip of the pen is likely."""
    met = [dimension for dimension in DIMENSIONS.values() if content in _contents(dimension.units)]
    names = [dimension.name for dimension in met]
    if "frequency" in names and wanted.name == "angular speed":
        hint = f"Hz counts cycles; for turns write `{value * factor * 60:g} rpm`"
    elif "angular speed" in names and wanted.name == "frequency":
        hint = f"a frequency is in Hz: `{value * factor / (2 * math.pi):g} Hz`"
    else:
        hint = _force_for_mass(unit, wanted)
    return UnitError(allowed, hint, f"`{value:g} {unit}`" + (f" ({met[0].article})" if met else ""))


def _force_for_mass(unit: str, wanted: Dimension) -> str:
    """`20 kg*cm` for a torque, `5 ozf*in^2` for an inertia: in the workshop mass and force share a name."""
    swaps = {**_FORCES, **{force: mass for mass, force in _FORCES.items()}}
    powers = expression(unit)
    for name, _ in powers:
        swapped = tuple((swaps[n] if n == name else n, power) for n, power in powers) if name in swaps else ()
        if swapped and _reduce(swapped, gravities=False)[1] in _contents(wanted.units):
            kind = "mass" if name in _FORCES else "force"
            return f"`{name}` is a {kind}; write `{swaps[name]}` here"
    return ""
