"""What an update says beside its commands: one bit each."""

from __future__ import annotations

FLAGS: dict[str, tuple[int, str]] = {
    "LINE_LIMITED": (1, "the line command was clipped"),
    "UNIT_LIMITED": (2, "a unit's command was clipped"),
    "SHARED_OUT": (4, "other units took over what a clipped one could not give"),
    "TILT_LIMITED": (8, "the accelerometer's tilt was beyond 45 degrees, or it felt no gravity"),
    "VOLTAGE_SHORT": (16, "at its speed a motor cannot give the torque asked of it at the nominal voltage"),
    "STALE": (32, "the reading was refused; the last good one stood in"),
    "HELD": (128, "the machine is held, as the reading said: all commands are zero, the estimator goes on"),
    "SAFE": (64, "no good reading for too long, or none yet: all commands are zero and the memory is empty"),
}

BIT = {name: bit for name, (bit, _) in FLAGS.items()}
