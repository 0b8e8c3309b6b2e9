"""The written C compiled on this machine, as a controller the simulator can ask."""

from __future__ import annotations

import ctypes
import os
import shutil
import subprocess
import tempfile
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from balance.design.complementary import ESTIMATE
from balance.design.kalman import PREDICTED
from balance.firmware.dialect import commands_of
from balance.firmware.fields import fields_of
from balance.firmware.flags import BIT
from balance.firmware.package import Package
from balance.firmware.program import DIRECT, RATE, TILT

Array = NDArray[np.float64]

COMPILERS = ("cc", "gcc", "clang")
CLIPPED = BIT["LINE_LIMITED"] | BIT["UNIT_LIMITED"]


class NoCompilerError(RuntimeError):
    """There is no C compiler here, or it refused the sources."""


class HostFirmware:
    """One variant of a firmware package, compiled and loaded; a `simulate.stepped.Controller`."""

    def __init__(self, package: Package, fixed: bool) -> None:
        """Compile it; raises NoCompilerError where that fails and ValueError where there is no fixed-point variant."""
        if fixed and package.fixed is None:
            raise ValueError(package.refused)
        self.package, self.program, self.fixed = package, package.program, package.fixed if fixed else None
        self.prefix = self.program.prefix + ("_fixed" if fixed else "")
        number = ctypes.c_int32 if fixed else ctypes.c_float
        names = [field.name for field in fields_of(self.program)]
        self.reading = _struct("Reading", [(n, number) for n in names] + [("held", ctypes.c_uint8)])()
        self.answer = _struct("Answer", [(n, number) for n in commands_of(self.program)])()
        self.state = _struct(
            "State",
            [
                ("memory", number * max(len(self.program.memory), 1)),
                ("last", number * len(self.program.readings)),
                ("stance", ctypes.c_uint8),
                ("refused", ctypes.c_uint8),
            ],
        )()
        library = _compiled(package, self.prefix)
        self._init, self._update = library[f"{self.prefix}_init"], library[f"{self.prefix}_update"]
        self._init.argtypes, self._init.restype = [ctypes.c_void_p, ctypes.c_uint8, ctypes.c_uint8], None
        self._update.argtypes, self._update.restype = [ctypes.c_void_p] * 3, ctypes.c_uint16

    def begin(self, stance: str, lean: float) -> None:
        """Forget everything and stand on `stance`; the estimator has settled at `lean` (rad)."""
        self._init(ctypes.byref(self.state), self.program.stances.index(stance), 1)
        for i, memory in enumerate(self.program.memory):
            if memory.name in (ESTIMATE, PREDICTED):
                self.state.memory[i] = round(lean * 2.0 ** self.fixed.memory[i]) if self.fixed else lean

    def command(self, measured: Array, held: bool) -> tuple[Array, bool]:
        """Return (the units' inputs, was anything clipped) for one sample's measurements, SI."""
        places = self.fixed.fields if self.fixed else None
        for k, (field, value) in enumerate(zip(fields_of(self.program), self._raw(measured), strict=True)):
            setattr(self.reading, field.name, _whole(value, places[k]) if places else value)
        self.reading.held = int(held)
        flags = int(self._update(ctypes.byref(self.state), ctypes.byref(self.reading), ctypes.byref(self.answer)))
        given = [getattr(self.answer, name) for name in commands_of(self.program)]
        if self.fixed:
            given = [value / 2.0**row.places for value, row in zip(given, self.fixed.inputs, strict=True)]
        return np.array(given, dtype=np.float64), bool(flags & CLIPPED)

    def _raw(self, measured: Array) -> list[float]:
        """Return what a caller would fill in: direct readings, then specific force and turn rate in trunk axes."""
        stance = int(self.state.stance)
        e, u, w = (np.array(axis) for axis in self.program.axes[stance])
        direct, force, rate = [], np.zeros(3), np.zeros(3)
        for value, reading in zip(measured, self.program.readings, strict=True):
            whole = float(value) + reading.rest[stance]
            if reading.kind == DIRECT:
                direct.append(whole)
            elif reading.kind == TILT:
                force = self.program.gravity * (np.cos(whole) * u - np.sin(whole) * w)
            elif reading.kind == RATE:
                rate = whole * e
        return [*direct, *force, *rate] if self.program.inertial else direct


def _whole(value: float, places: int) -> int:
    """Return a value as a 32-bit whole number; what does not fit is the largest, as a careful caller has it."""
    return int(min(max(round(value * 2.0**places), -(2**31) + 1), 2**31 - 1))


def _struct(name: str, fields: Sequence[tuple[str, object]]) -> type[ctypes.Structure]:
    return type(name, (ctypes.Structure,), {"_fields_": list(fields)})


def _compiled(package: Package, prefix: str) -> ctypes.CDLL:
    """Return the loaded library; the folder it was built in is gone afterwards where the system allows that."""
    compiler = next((found for name in COMPILERS if (found := shutil.which(name))), None)
    if compiler is None:
        raise NoCompilerError(f"no C compiler on this machine (looked for {', '.join(COMPILERS)})")
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as folder:
        for path in (f"src/{prefix}.c", f"src/{prefix}.h"):
            with open(os.path.join(folder, os.path.basename(path)), "w", encoding="utf-8", newline="\n") as file:
                file.write(package.files[path])
        made = os.path.join(folder, f"{prefix}.so")
        words = [
            compiler,
            "-std=c99",
            "-O2",
            "-ffp-contract=off",
            "-fPIC",
            "-shared",
            f"-I{folder}",
            os.path.join(folder, f"{prefix}.c"),
            "-o",
            made,
        ]
        done = subprocess.run(words, capture_output=True, text=True, check=False, stdin=subprocess.DEVNULL)
        if done.returncode:
            raise NoCompilerError(f"the compiler refused the firmware: {done.stderr.strip()[-500:]}")
        return ctypes.CDLL(made)
