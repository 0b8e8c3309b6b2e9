"""The units the project knows, one name at a time.

pint holds them (`units.txt`), but never sees a whole expression from a file: plain pint takes `0.35 Nm` for
number·meter, knows no sqrt(Hz), evaluates Python-like arithmetic and so hangs on `9**9**9 m`.
"""

from __future__ import annotations

import sys
from functools import cache
from importlib.resources import files

from balance.base.expression import NAME
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

Content = tuple[tuple[str, float], ...]
"""Base dimensions and their exponents, sorted, none of them zero."""


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


def unknown_unit(name: str) -> str:
    """Return the message for a unit that is not known, with the nearest that is."""
    names = [*_NAMES, *(f"{prefix}{unit}" for prefix in "mukM" for unit in _COMMON), "cm", "kgf", "mAh"]
    near = nearest(name, names)
    return f"unknown unit `{name}`" + (f"; nearest known: `{near}`" if near else "")
