"""Unit expressions taken apart: ``deg/s/sqrt(Hz)`` into names with powers.

Grammar (bounded in depth and exponents, so that no text can hang or overflow it)::

    product  = term { ("*" | "/" | nothing) term }        left to right: a/b*c is (a/b)*c
    term     = atom [ ("^" | "**") exponent ] [ ² | ³ ]
    atom     = name | "1" | "(" product ")" | ("sqrt" "(" product ")" | "√" atom)
    exponent = whole or half number within ±4, as 2, -1, 0.5, (1/2)
"""

from __future__ import annotations

import re

Power = tuple[str, float]

DEEPEST = 4
LARGEST_EXPONENT = 4.0
MOST_NAMES = 12

NAME = re.compile(r"[A-Za-z\u00b5\u03a9_]+|°")
_LOOKALIKES = str.maketrans({"\u03bc": "\u00b5", "\u2126": "\u03a9"})  # Greek mu, ohm sign
_TOKEN = re.compile(rf"\s*(?:{NAME.pattern}|[0-9]+(?:\.[0-9]+)?|\*\*|[-*/^()²³√·⋅×])")
_EXPONENT = re.compile(r"(-?[0-9](?:\.[05])?)(/2)?")
_WRONG_EXPONENT = "an exponent is a whole or half number within ±4"
_SAME = {"**": "^", "·": "*", "⋅": "*", "×": "*"}


class ExpressionError(ValueError):
    """The text is no unit expression; the message says why."""


def expression(text: str) -> tuple[Power, ...]:
    """Return the names and powers of a unit expression, in the order written.

    Raises
    ------
    ExpressionError
        On anything outside the grammar.
    """
    tokens = _tokens(text)
    powers, rest = _product(tokens, 0)
    if rest:
        raise ExpressionError(f"`{rest[0]}` is out of place in the unit")
    if len(powers) > MOST_NAMES:
        raise ExpressionError(f"a unit has at most {MOST_NAMES} names")
    return powers


def _tokens(text: str) -> list[str]:
    tokens, at, text = list[str](), 0, text.rstrip().translate(_LOOKALIKES)
    while at < len(text):
        found = _TOKEN.match(text, at)
        if found is None:
            raise ExpressionError(f"`{text[at:at + 1]}` does not belong in a unit")
        token = found.group().strip()
        tokens.append(_SAME.get(token, token))
        at = found.end()
    return tokens


def _product(tokens: list[str], depth: int) -> tuple[tuple[Power, ...], list[str]]:
    powers, tokens = _term(tokens, depth)
    while tokens and tokens[0] != ")":
        sign = -1.0 if tokens[0] == "/" else 1.0
        more, tokens = _term(tokens[1:] if tokens[0] in "*/" else tokens, depth)
        powers += _raised(more, sign)
    return powers, tokens


def _term(tokens: list[str], depth: int) -> tuple[tuple[Power, ...], list[str]]:
    powers, tokens = _atom(tokens, depth)
    if tokens and tokens[0] == "^":
        exponent, tokens = _exponent(tokens[1:])
        powers = _raised(powers, exponent)
    elif tokens and tokens[0] in "²³":
        powers, tokens = _raised(powers, 2.0 if tokens[0] == "²" else 3.0), tokens[1:]
    return powers, tokens


def _atom(tokens: list[str], depth: int) -> tuple[tuple[Power, ...], list[str]]:
    if not tokens:
        raise ExpressionError("the unit ends too early")
    if depth > DEEPEST:
        raise ExpressionError("too many parentheses or roots")
    first, rest = tokens[0], tokens[1:]
    if first == "√":
        inner, rest = _atom(rest, depth + 1)
        return _raised(inner, 0.5), rest
    if first == "(" or (first == "sqrt" and rest[:1] == ["("]):
        inner, rest = _product(rest if first == "(" else rest[1:], depth + 1)
        if rest[:1] != [")"]:
            raise ExpressionError("a parenthesis is not closed")
        return _raised(inner, 1.0 if first == "(" else 0.5), rest[1:]
    if first == "1":
        return (), rest
    if NAME.fullmatch(first):
        return ((first, 1.0),), rest
    raise ExpressionError(f"`{first}` is out of place in the unit")


def _exponent(tokens: list[str]) -> tuple[float, list[str]]:
    if tokens[:1] == ["("]:
        if ")" not in tokens:
            raise ExpressionError("a parenthesis is not closed")
        end = tokens.index(")")
        inside, rest = tokens[1:end], tokens[end + 1:]
    else:
        end = 2 if tokens[:1] == ["-"] else 1
        inside, rest = tokens[:end], tokens[end:]
    found = _EXPONENT.fullmatch("".join(inside))
    if found is None:
        raise ExpressionError(_WRONG_EXPONENT)
    return float(found.group(1)) / (2.0 if found.group(2) else 1.0), rest


def _raised(powers: tuple[Power, ...], exponent: float) -> tuple[Power, ...]:
    raised = tuple((name, power * exponent) for name, power in powers)
    if any(abs(power) > LARGEST_EXPONENT or not (2.0 * power).is_integer() for _, power in raised):
        raise ExpressionError(_WRONG_EXPONENT)
    return raised
