"""Text with a unit into SI, behind a guard.

pint holds the units (`units.txt`), but never sees a whole expression from a file: plain pint takes `0.35 Nm`
for number·meter, knows no sqrt(Hz), evaluates Python-like arithmetic and so hangs on `9**9**9 m`.  Here the
expression is taken apart first (`base.expression`, bounded in length, depth and exponents) and pint is asked
for single names only.
"""

from __future__ import annotations

import math
import re
import sys
from functools import cache
from importlib.resources import files

from balance.base.dimensions import DIMENSIONS, IN_GRAVITIES, Dimension
from balance.base.expression import NAME, ExpressionError, Power, expression
from balance.base.words import nearest

# Reading a file must not wait for numpy (and scipy with it, where the package `uncertainties` is about), yet
# pint takes numpy whenever it can be imported.  A None in sys.modules is Python's own documented way to
# make an import fail.  It stands only while pint is imported, and only where numpy is not loaded already:
# whoever uses numpy and pint together has numpy loaded and keeps the complete pint; the command line reads
# files first and wants plain floats only.  (Twice as fast as well: 0.14 s against 0.30 s measured.)
_HIDDEN = "numpy" not in sys.modules
if _HIDDEN:
    sys.modules["numpy"] = None  # type: ignore[assignment]
try:
    import pint
finally:
    if _HIDDEN:
        del sys.modules["numpy"]

LONGEST = 80
"""Characters a quantity may have."""

_NUMBER = re.compile(r"\s*([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)(?![0-9.])\s*")
_DEFINITIONS = str(files("balance.base") / "units.txt")
_REGISTRY = pint.UnitRegistry(_DEFINITIONS, cache_folder=None, on_redefinition="raise")
_NAMES = tuple(str(name) for name in _REGISTRY)
_PREFIXES = (
    "n", "u", "\u00b5", "m", "c", "d", "k", "M", "nano", "micro", "milli", "centi", "deci", "kilo", "mega",
)
_PREFIXED = (
    "meter", "second", "ampere", "radian", "gram", "rpm", "hertz", "g_n", "newton", "gram_force",
    "newton_meter", "newton_meter_second", "newton_second", "joule", "watt", "pascal", "volt", "ohm",
    "farad", "henry", "ampere_hour", "watt_hour",
)
_COMMON = ("m", "g", "s", "A", "N", "Nm", "V", "W", "Hz", "ohm")
_FORCES = {"kg": "kgf", "g": "gf", "lb": "lbf", "oz": "ozf"}

Content = tuple[tuple[str, float], ...]
"""Base dimensions and their exponents, sorted, none of them zero."""


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
            raise ExpressionError(_unknown(name))
        # dividing keeps `/ 60` exact where `* 60**-1` would round once more
        factor = factor * known[0] ** power if power > 0 else factor / known[0] ** -power
        for base, exponent in known[1]:
            content[base] = content.get(base, 0.0) + exponent * power
    return factor, tuple(sorted((base, exponent) for base, exponent in content.items() if exponent))


@cache
def known_unit(name: str) -> tuple[float, Content] | None:
    """Return one unit name's SI factor and base dimensions; None where it is not known."""
    if not NAME.fullmatch(name) or not _spelled(name):
        return None
    factor, unit = _REGISTRY.get_root_units(name)
    return float(factor), tuple((str(base), float(exponent)) for base, exponent in dict(unit._units).items())


def _spelled(name: str) -> bool:
    """Refuse what pint would stretch too far: `kkg`, `mmin`, the plural of a symbol (`Vs` is not volts)."""
    for known in _NAMES:
        prefixes = ("", *_PREFIXES) if _REGISTRY.get_name(known) in _PREFIXED else ("",)
        plural = f"{known}s" if len(known) > 3 else known
        if any(name in (prefix + known, prefix + plural) for prefix in prefixes):
            return True
    return False


def _unknown(name: str) -> str:
    names = [*_NAMES, *(f"{prefix}{unit}" for prefix in "mukM" for unit in _COMMON), "cm", "kgf", "mAh"]
    near = nearest(name, names)
    return f"unknown unit `{name}`" + (f"; nearest known: `{near}`" if near else "")


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
