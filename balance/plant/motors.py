"""Motors as the wheel feels them: constants through the gear, corner and no-load speeds, the torque-speed line."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, log, sqrt

from balance.machine.motors import Gear, Motor, Supply

DIRECT = Gear()


@dataclass(frozen=True)
class Drive:
    """One motor with its gear and supply, referred to the wheel; current counted positive in the wheel's sense.

    V = R i + K_e Ω,  τ = K_t i,  |i| ≤ i_max.
    """

    torque_per_amp: float    # N·m/A at the wheel: η N K_t
    back_emf: float          # V·s/rad of wheel speed: N K_e
    resistance: float        # ohm, line
    voltage: float           # V, open circuit
    current_limit: float     # A
    bandwidth: float         # rad/s of the current loop

    @property
    def stall_torque(self) -> float:
        """Largest torque at standstill in N·m: by the current limit or by V/R."""
        return self.torque_per_amp * min(self.current_limit, self.voltage / self.resistance)

    @property
    def no_load_speed(self) -> float:
        """Wheel speed in rad/s at which the motor's own voltage equals the supply's."""
        return self.voltage / self.back_emf

    @property
    def corner_speed(self) -> float:
        """Wheel speed in rad/s up to which the current limit, and beyond which the voltage, holds the torque."""
        return max((self.voltage - self.resistance * self.current_limit) / self.back_emf, 0.0)

    @property
    def slope(self) -> float:
        """Wheel speed lost per torque at a fixed voltage in rad/s per N·m: R/(K_t K_e)."""
        return self.resistance / (self.torque_per_amp * self.back_emf)

    @property
    def most_power(self) -> float:
        """Largest mechanical power in W without a current limit: V²/(4R) times the gear's efficiency."""
        return 0.25 * self.torque_per_amp * self.voltage / self.resistance * self.no_load_speed

    @property
    def motor_constant(self) -> float:
        """Torque per square root of the winding's heat in N·m/√W: K_t/√R."""
        return self.torque_per_amp / sqrt(self.resistance)

    def time_constant(self, inertia: float) -> float:
        """Return how fast speed settles at a fixed voltage in s, for the `inertia` that turns with the wheel (kg·m²)."""
        return inertia * self.slope

    def spin_up(self, inertia: float, speed: float) -> float:
        """Return the time from rest to `speed` (rad/s) in s with `inertia` (kg·m²), drag left out; inf where it cannot.

        All the current there is, then down the line of torque against speed.
        """
        if self.voltage == inf:
            return inertia * speed / self.stall_torque
        kink = self.no_load_speed - self.slope * self.stall_torque
        time = inertia * min(speed, kink) / self.stall_torque
        if speed <= kink:
            return time
        left = (self.no_load_speed - speed) / (self.no_load_speed - kink)
        return time - self.time_constant(inertia) * log(left) if left > 0.0 else inf

    def torque_at(self, speed: float) -> float:
        """Return the torque in N·m still available in the sense of turning at `speed` ≥ 0 (rad/s)."""
        current = (self.voltage - self.back_emf * speed) / self.resistance
        return self.torque_per_amp * min(max(current, 0.0), self.current_limit)


def drive_of(motor: Motor, gear: Gear | None, supply: Supply | None) -> Drive:
    """Refer a motor through its gear to the wheel.

    K_t = K_e in SI.  Values stated per phase (star, sinusoidal): line K = √3 × phase, line R = 2 × phase.  Stated per
    RMS ampere: K is per ampere of amplitude after division by √2, and the stated currents are multiplied by it.
    Without a supply the voltage is no limit; the supply's own current limit is the bus's, shared by all
    (`kernel.supply`).
    """
    gear = gear or DIRECT
    constant = motor.torque_constant * (sqrt(3.0) if motor.values == "phase" else 1.0)
    resistance = motor.resistance * (2.0 if motor.values == "phase" else 1.0)
    amplitude = sqrt(2.0) if motor.amplitude == "rms" else 1.0
    constant /= amplitude
    return Drive(
        torque_per_amp=gear.efficiency * gear.ratio * constant,
        back_emf=gear.ratio * constant,
        resistance=resistance,
        voltage=supply.voltage if supply else inf,
        current_limit=motor.peak_current * amplitude,
        bandwidth=2.0 * 3.141592653589793 * motor.bandwidth,
    )
