"""What can hurt someone, with this machine's own numbers where they are known. Common practice; local codes prevail."""

from __future__ import annotations

import math

from balance.check.records import CheckResult
from balance.machine.machine import Machine
from balance.report.amounts import amount, figure, speed
from balance.report.rotors import GRADES, RotorFact, rotor_facts

KILOGRAM = 9.80665
"""N: one kilogram, to compare with: energy ÷ this is the height from which it would have to drop."""
TURN = math.radians(60.0)
"""rad/s: how fast a person may turn a gimbal frame by hand."""


def cautions(result: CheckResult) -> tuple[tuple[str, str], ...]:
    """Return (what it is about, sentences) pairs; the machine's own numbers first."""
    rotors = rotor_facts(result.machine, result.designs[0].plant) if result.designs else ()
    return (*(("Stored energy", stored(one)) for one in rotors),
            ("Burst and containment", burst(rotors)), ("Unbalance", unbalance(rotors)),
            *(("Gimbals", gimbals(one)) for one in rotors if one.gimballed),
            ("Pinch and entanglement", PINCH), ("First tests", first_tests(result)),
            ("Battery and regeneration", battery(result, rotors)), ("Law", LAW))


def stored(rotor: RotorFact) -> str:
    """Say what a rotor holds, and what that is like."""
    pair = "each of the two rotors" if rotor.count == 2 else "the rotor"
    words = (f"{rotor.name}: {pair} holds ½Iω² = {amount(rotor.energy, 'J')} at {speed(rotor.top_speed)}, as much as one "
             f"kilogram dropped from {figure(rotor.energy / KILOGRAM)} m.")
    if math.isfinite(rotor.rim_speed):
        words += f" Its rim runs at {amount(rotor.rim_speed, 'm/s')} ({figure(3.6 * rotor.rim_speed)} km/h)."
    return words + " It keeps turning after the power is cut: wait until it stands still."


def burst(rotors: tuple[RotorFact, ...]) -> str:
    """Say what stress to prove, and that nobody has proved it here."""
    known = [r for r in rotors if math.isfinite(r.ring_stress)]
    words = "Rotor strength is not checked by this program."
    if known:
        worst = max(known, key=lambda r: r.ring_stress)
        words += (f" At top speed a thin ring of {worst.name}'s density would carry {figure(worst.ring_stress / 1e6)} MPa "
                  "(ρv²); a plain disc or rim of one material stays below that, but holes, keyways, glue joints, spokes and "
                  "printed layers do not.")
    return words + (" Prove every rotor by calculation and by a spin test above its top speed behind a guard that holds a "
                    "burst rotor, and keep it contained in use.")


def unbalance(rotors: tuple[RotorFact, ...]) -> str:
    """Say what balance grades mean for these rotors."""
    words = ["Unbalance shakes the bearings and blinds the gyroscope."]
    for rotor in rotors:
        fine, coarse = (1e6 * rotor.eccentricity(grade) for grade in GRADES)
        words.append(f"{rotor.name} at {speed(rotor.top_speed)}: grade G2.5 of ISO 21940-11 allows the centre of mass "
                     f"{figure(fine, 2)} µm off the axis, G6.3 {figure(coarse, 2)} µm{shakes(rotor)}.")
    return " ".join(words)


def shakes(rotor: RotorFact) -> str:
    """Say the turning force of the coarser grade, where the rotor's mass is stated."""
    return f", which shakes with {figure(rotor.shaking(GRADES[1]), 2)} N" if math.isfinite(rotor.mass) else ""


def gimbals(rotor: RotorFact) -> str:
    """Say what a hand feels that turns a spinning rotor's frame."""
    push = rotor.spin * rotor.top_speed * TURN
    return (f"{rotor.name}: a hand that turns the frame of a spinning rotor at 60 deg/s is pushed aside with "
            f"{amount(push, 'N*m')}, square to the turn. Do not handle it, or carry the machine, while it spins; the drive "
            "may also swing a gimbal to its stop without warning.")


def first_tests(result: CheckResult) -> str:
    """Say how to test, and what a fall releases."""
    words = ("Tether the machine from above, slack enough to lean and short enough that neither it nor a rotor reaches the "
             "floor or a person; keep a stop within reach that cuts the drives. Begin with slow rotors and a small lean.")
    if result.designs:
        stance = max((d.plant.stance for d in result.designs), key=lambda s: s.mass * s.height)
        energy = stance.mass * stance.gravity * stance.height
        words += (f" A fall releases up to {amount(energy, 'J')} ({amount(stance.mass, 'kg')} from "
                  f"{amount(stance.height, 'm')}): the tether and whatever it hangs from must hold that.")
    return words


def battery(result: CheckResult, rotors: tuple[RotorFact, ...]) -> str:
    """Say what the battery must give and take back."""
    words = ["Fuse the battery and charge it under watch."]
    power = max((t.peak_bus_power for t in result.trials), default=0.0)
    current = max((t.peak_current for t in result.trials), default=0.0)
    if power > 0.0:
        most = f", {amount(current, 'A')} in one motor" if current else ""
        words.append(f"The trials draw up to {amount(power, 'W')}{most}.")
    wheels = [r for r in rotors if not r.gimballed]
    if wheels:
        words.append(f"Braked from top speed the wheels give back up to {amount(sum(r.energy for r in wheels), 'J')}; "
                     + takes_back(result.machine, sum(r.energy for r in wheels)))
    return " ".join(words)


def takes_back(machine: Machine, energy: float) -> str:
    """Say where braking energy goes."""
    supply = machine.supply
    if supply is None:
        return "the machine file states no supply that could take it."
    if supply.regenerates:
        return "a full battery or a mains supply cannot take it: leave room, or fit a brake resistor."
    if supply.brake_resistor > 0.0:
        return "the brake resistor must be rated for it."
    if supply.capacitance > 0.0:
        volts = math.sqrt(supply.voltage**2 + 2.0 * energy / supply.capacitance)
        return f"the supply does not take it, and the bus would rise to {amount(volts, 'V')}: fit a brake resistor."
    return "the supply does not take it and no brake resistor is stated: the bus voltage would rise until something fails."


PINCH = ("Legs, gimbals and wheels pinch, cut and pull in cables, hair and cloth; a wheel or gimbal at rest may start at "
         "any time. Guard them, and disarm the drives before reaching in.")
LAW = "Local codes and licensed practice prevail over anything printed here."
