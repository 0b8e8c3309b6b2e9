"""The fixed-point arithmetic in Python's whole numbers: what the C must give, number by number.

Every product and every sum is checked to stay within 32 bits: the model raises OverflowError where C would be undefined.
"""

from __future__ import annotations

from collections.abc import Sequence

from balance.firmware.atan import SERIES
from balance.firmware.flags import BIT
from balance.firmware.program import DIRECT, LINE, MEMORY, TILT
from balance.firmware.scaling import Fixed, FixedRow, FixedTerm

RATIO = 20
"""Binary places of the accelerometer's ratio."""
AXIS = 14
"""Binary places of a unit vector's parts."""


def inside(number: int) -> int:
    """Return the number; raises OverflowError where it does not fit 32 bits."""
    if not -(2**31) <= number < 2**31:
        raise OverflowError(f"{number} does not fit 32 bits")
    return number


def product(x: int, gain: int) -> int:
    """Return (x · gain) >> 16 from two 16 × 16 products, each within 32 bits."""
    high, low = inside((x >> 16) * gain), inside((x & 0xFFFF) * gain)
    return inside(high + (low >> 16))


def shifted(x: int, shift: int) -> int:
    """Return x · 2^shift, rounded down."""
    return inside(x << shift) if shift > 0 else x >> -shift


def ratio(part: int, whole: int, places: int) -> int:
    """Return part · 2^places / whole, rounded down, for 0 <= part < whole: one bit at a time, without a division."""
    out = 0
    for _ in range(places):
        part, out = inside(2 * part), 2 * out
        if part >= whole:
            part, out = part - whole, out + 1
    return out


class FixedModel:
    """One instance of the firmware's state; `raw` are whole numbers in the order of `fields_of`."""

    def __init__(self, fixed: Fixed, stance: int = 0) -> None:
        self.fixed, self.program = fixed, fixed.program
        self.init(stance)

    def init(self, stance: int) -> None:
        """Choose a stance and forget everything."""
        self.stance = stance if stance < len(self.program.stances) else 0
        self.reset()

    def reset(self) -> None:
        """Forget everything, keep the stance."""
        self.memory = [0 for _ in self.program.memory]
        self.last = [0 for _ in self.program.readings]
        self.refused = 255

    def update(self, raw: Sequence[int], held: bool = False) -> tuple[int, list[int]]:
        """Return (flags, commands) of one sample and move the memory on; `held`: the machine cannot fall yet."""
        flags = self._take(raw)
        if self.refused > self.program.patience:
            self.memory = [0 for _ in self.memory]
            return flags | BIT["SAFE"], [0 for _ in self.program.units]
        row = self.fixed.line
        wanted, most = self._sum(row, 0), 0 if held else row.limits[self.stance]
        line = min(max(wanted, -most), most)
        flags |= BIT["LINE_LIMITED"] if line != wanted and not held else 0
        commands = [self._sum(each, line) for each in self.fixed.inputs]
        moves = self.fixed.held_moves if held and self.fixed.held_moves else self.fixed.moves
        self.memory = [self._sum(each, line, old) for each, old in zip(moves, self.memory, strict=True)]
        if held:
            return flags | BIT["HELD"], [0 for _ in self.program.units]
        return flags | self._share(commands) | self._short(commands), commands

    def _take(self, raw: Sequence[int]) -> int:
        if not all(-most <= value <= most for value, most in zip(raw, self.fixed.believed, strict=True)):
            self.refused = min(self.refused + 1, 255)
            return BIT["STALE"] if self.refused <= self.program.patience else 0
        flags, direct = 0, 0
        for j, reading in enumerate(self.program.readings):
            places = self.fixed.readings[j]
            if reading.kind == DIRECT:
                value = shifted(raw[direct], places - self.fixed.fields[direct])
                direct += 1
            elif reading.kind == TILT:
                value, limited = self._tilt(raw, places)
                flags |= BIT["TILT_LIMITED"] if limited else 0
            else:
                value = self._along(0, raw[-3:])
            self.last[j] = inside(value - self.fixed.rests[j][self.stance])
        self.refused = 0
        return flags

    def axis(self, which: int, k: int) -> int:
        """Return one part of a unit vector as a 16-bit number of AXIS places."""
        part: float = self.program.axes[self.stance][which][k]
        return round(part * 2.0**AXIS)

    def _along(self, which: int, vector: Sequence[int]) -> int:
        """Return a vector's part along e, u or w at one binary place less than the vector's own."""
        total = 0
        for k, value in enumerate(vector):
            total = inside(total + shifted(product(value, self.axis(which, k)), 1))
        return total

    def _tilt(self, raw: Sequence[int], places: int) -> tuple[int, bool]:
        up, across = self._along(1, raw[-6:-3]), -self._along(2, raw[-6:-3])
        size = abs(across)
        limited = not (size <= up and up > 0)
        r = 2**RATIO if limited or size == up else ratio(size, up, RATIO)
        narrow = min(r >> (RATIO - 15), 2**15 - 1)
        square = min((narrow * narrow) >> 15, 2**15 - 1)
        series = 0
        for coefficient in reversed(SERIES):
            series = ((series + round(coefficient * 2**15)) * square) >> 15
        angle = inside(r + shifted(product(r, series), 1))
        value = shifted(angle, places - RATIO)
        return (value if across >= 0 else -value), limited

    def _sum(self, row: FixedRow, line: int, old: int = 0) -> int:
        total = old if row.keeps else 0
        for term in row.terms:
            value = line if term.source == LINE else (self.memory if term.source == MEMORY else self.last)[term.place]
            total = inside(total + self._term(term, value))
        return total

    def _term(self, term: FixedTerm, value: int) -> int:
        return shifted(product(value, term.gains[self.stance]), term.shift)

    def _share(self, commands: list[int]) -> int:
        missing, flags, limits = 0, 0, [row.limits[self.stance] for row in self.fixed.inputs]
        alone = len(commands) < 2
        for i, wanted in enumerate(commands):
            commands[i] = min(max(wanted, -limits[i]), limits[i])
            if commands[i] != wanted:
                flags |= BIT["UNIT_LIMITED"]
                if not alone:
                    missing = inside(missing + self._term(self.fixed.share[i], inside(wanted - commands[i])))
        if missing == 0 or alone:
            return flags
        rooms, room = [], 0
        for i, given in enumerate(commands):
            way = self.fixed.share[i].gains[self.stance] >= 0
            toward = given if way == (missing > 0) else -given
            rooms.append(abs(self._term(self.fixed.share[i], inside(limits[i] - toward))))
            room = inside(room + rooms[i])
        if room <= 0:
            return flags
        size = abs(missing)
        part = 2**15 - 1 if size >= room else ratio(size, room, 15)
        for i, given in enumerate(commands):
            more = abs(self._term(self.fixed.back[i], shifted(product(rooms[i], part), 1)))
            rising = (self.fixed.share[i].gains[self.stance] >= 0) == (missing > 0)
            commands[i] = min(max(inside(given + (more if rising else -more)), -limits[i]), limits[i])
        return flags | BIT["SHARED_OUT"]

    def _short(self, commands: list[int]) -> int:
        for command, window in zip(commands, self.fixed.windows, strict=True):
            if window is None:
                continue
            value, most = self.last[window.reading], window.most
            sag = shifted(product(value, window.gain), window.shift)
            high, low = (
                min(max(inside(window.stall - sag), -most), most),
                min(max(inside(-window.stall - sag), -most), most),
            )
            if not low <= shifted(command, window.drop) <= high:
                return BIT["VOLTAGE_SHORT"]
        return 0
