"""The float32 arithmetic in Python, operation by operation: what the C must give bit for bit.

Written from the program's description, not from the C text: numpy's float32 rounds every operation once, as C does where
no multiply-add is fused.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.firmware.atan import SERIES
from balance.firmware.fields import fields_of
from balance.firmware.flags import BIT
from balance.firmware.program import DIRECT, LINE, MEMORY, TILT, Program, Row

Floats = NDArray[np.float32]
F = np.float32
ZERO, ONE = F(0.0), F(1.0)


class FloatModel:
    """One instance of the firmware's state; `raw` is float32 in the order of `fields_of`."""

    def __init__(self, program: Program, stance: int = 0) -> None:
        self.program = program
        self.most = [F(field.most) for field in fields_of(program)]
        self.init(stance)

    def init(self, stance: int) -> None:
        """Choose a stance and forget everything."""
        self.stance = stance if stance < len(self.program.stances) else 0
        self.reset()

    def reset(self) -> None:
        """Forget everything, keep the stance."""
        self.memory = [ZERO for _ in self.program.memory]
        self.last = [ZERO for _ in self.program.readings]
        self.refused = 255

    def update(self, raw: Floats, held: bool = False) -> tuple[int, list[np.float32]]:
        """Return (flags, commands) of one sample and move the memory on; `held`: the machine cannot fall yet."""
        with np.errstate(all="ignore"):
            flags = self._take(raw)
            if self.refused > self.program.patience:
                self.memory = [ZERO for _ in self.memory]
                return flags | BIT["SAFE"], [ZERO for _ in self.program.units]
            more, line = (0, ZERO) if held else self._line()
            commands = [self._sum(row, line) for row in self.program.inputs]
            moves = self.program.held_moves if held and self.program.held_moves else self.program.moves
            self.memory = [self._sum(row, line) for row in moves]
            if held:
                return flags | BIT["HELD"], [ZERO for _ in self.program.units]
            return flags | more | self._share(commands) | self._short(commands), commands

    def _take(self, raw: Floats) -> int:
        """Take the reading if every number of it is believed."""
        if not all(-most <= value <= most for value, most in zip(raw, self.most, strict=True)):
            self.refused = min(self.refused + 1, 255)
            return BIT["STALE"] if self.refused <= self.program.patience else 0
        flags, direct = 0, 0
        for j, reading in enumerate(self.program.readings):
            if reading.kind == DIRECT:
                value, direct = raw[direct], direct + 1
            elif reading.kind == TILT:
                value, limited = self._tilt(raw)
                flags |= BIT["TILT_LIMITED"] if limited else 0
            else:
                value = self._along(0, raw[-3:])
            self.last[j] = value - F(reading.rest[self.stance])
        self.refused = 0
        return flags

    def _along(self, which: int, vector: Floats) -> np.float32:
        """Return a vector's part along the stance's e (0), u (1) or w (2)."""
        total = ZERO
        for axis, value in zip(self.program.axes[self.stance][which], vector, strict=True):
            total = total + F(axis) * value
        return total

    def _tilt(self, raw: Floats) -> tuple[np.float32, bool]:
        """Return (tilt in rad, was it held at 45 degrees)."""
        up, across = self._along(1, raw[-6:-3]), -self._along(2, raw[-6:-3])
        limited = not (abs(across) <= up and up > ZERO)
        ratio = (ONE if across >= ZERO else -ONE) if limited else across / up
        square, series = ratio * ratio, ZERO
        for coefficient in reversed(SERIES):
            series = (series + F(coefficient)) * square
        return ratio + ratio * series, limited

    def _sum(self, row: Row, line: np.float32) -> np.float32:
        total = ZERO
        for term in row.terms:
            value = line if term.source == LINE else (self.memory if term.source == MEMORY else self.last)[term.place]
            total = total + F(term.gains[self.stance]) * value
        return total

    def _line(self) -> tuple[int, np.float32]:
        """Return (flag, line command within its limit)."""
        wanted, most = self._sum(self.program.line, ZERO), F(self.program.line.limits[self.stance])
        held = min(max(wanted, -most), most)
        return (BIT["LINE_LIMITED"] if held != wanted else 0), held

    def _share(self, commands: list[np.float32]) -> int:
        """Clip each command in place; several units share out what is missing about the line."""
        share = [F(row[self.stance]) for row in self.program.line_share]
        limits = [F(row.limits[self.stance]) for row in self.program.inputs]
        missing, flags = ZERO, 0
        for i, wanted in enumerate(commands):
            commands[i] = min(max(wanted, -limits[i]), limits[i])
            if commands[i] != wanted:
                flags |= BIT["UNIT_LIMITED"]
                missing = missing + share[i] * (wanted - commands[i])
        if missing == ZERO or len(commands) < 2:
            return flags
        rooms, room = [], ZERO
        for i, given in enumerate(commands):
            toward = given if missing * share[i] >= ZERO else -given
            rooms.append(abs(share[i]) * (limits[i] - toward))
            room = room + rooms[i]
        if not room > ZERO:
            return flags
        part = min(abs(missing) / room, ONE)
        for i, given in enumerate(commands):
            back = F(1.0 / self.program.line_share[i][self.stance]) if share[i] != ZERO else ZERO
            more = part * rooms[i] * back
            commands[i] = min(max(given + (more if missing > ZERO else -more), -limits[i]), limits[i])
        return flags | BIT["SHARED_OUT"]

    def _short(self, commands: list[np.float32]) -> int:
        """Tell whether a motor cannot give what is asked of it; each end is clipped, never intersected."""
        for command, window in zip(commands, self.program.windows, strict=True):
            if window is None:
                continue
            sag, stall, most = F(window.slope) * self.last[window.reading], F(window.stall), F(window.most)
            high, low = min(max(stall - sag, -most), most), min(max(-stall - sag, -most), most)
            if command > high or command < low:
                return BIT["VOLTAGE_SHORT"]
        return 0
