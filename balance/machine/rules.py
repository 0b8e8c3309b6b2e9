"""What must hold between the values of one part, rotor, motor or stance of a machine file."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import combinations

from balance.base.words import listed
from balance.files.walk import Fault, Rules
from balance.machine.machine import Lumped, StancePlan
from balance.machine.motors import Gear, Motor, Supply
from balance.machine.solids import (
    Cylinder,
    Disc,
    Part,
    PointMass,
    RimAndWeb,
    RimWebSize,
    Ring,
    Rod,
    Sphere,
    Tensor,
    Tube,
    TubeSize,
)
from balance.machine.stabilisers import Drag, GimballedFlywheel, ReactionWheel, Rotor, ScissoredPair
from balance.machine.tensors import SLACK, check_tensor

_ROUND = ("cylinder", "disc", "tube", "ring", "rim_and_web")
CLOSEST = 1e-3
"""m: feet nearer than this, seen from above, are in one place: no line runs through them."""


def exactly_one(record: object, words: tuple[str, ...], hint: str = "") -> Iterator[Fault]:
    """Fault unless exactly one of the named members is given."""
    given = [word for word in words if getattr(record, word) is not None]
    if len(given) != 1:
        yield Fault(given[1] if given else "", " and ".join(f"`{word}`" for word in given) or "neither",
                    "exactly one of " + " and ".join(f"`{word}`" for word in words), hint)


def check_part(part: Part) -> Iterator[Fault]:
    """A mass or a density, a solid or a tensor; a density needs a volume."""
    yield from exactly_one(part, ("mass", "density", "material"), "a density needs a `solid` whose volume it fills")
    yield from exactly_one(part, ("solid", "inertia"))
    yield from _volume_for(part)


def _volume_for(record: Part | Rotor) -> Iterator[Fault]:
    """A density or a material fills a volume: rods, points and stated tensors have none."""
    word = "material" if record.material is not None else "density"
    if getattr(record, word) is None or (record.solid is not None and not isinstance(record.solid, Rod | PointMass)):
        return
    without = "`solid`" if record.solid is None else "a volume"
    yield Fault(word, f"`{word}` without {without}", "`mass`", "a rod, a point and a tensor have no volume to fill")


def check_tube(tube: TubeSize) -> Iterator[Fault]:
    """A wall must remain."""
    if tube.inner >= tube.outer:
        yield Fault("inner", f"inner diameter {_mm(tube.inner)}", f"less than the outer, {_mm(tube.outer)}")


def check_rim(wheel: RimWebSize) -> Iterator[Fault]:
    """Bore, rim and web nest."""
    if wheel.inner >= wheel.outer:
        yield Fault("inner", f"inner diameter {_mm(wheel.inner)}", f"less than the outer, {_mm(wheel.outer)}")
    if wheel.bore >= wheel.inner:
        yield Fault("bore", f"bore {_mm(wheel.bore)}", f"less than the rim's inner, {_mm(wheel.inner)}")
    if wheel.web > wheel.length:
        yield Fault("web", f"web {_mm(wheel.web)}", f"at most the rim's axial length, {_mm(wheel.length)}")


def check_rotor(rotor: Rotor) -> Iterator[Fault]:
    """A round solid about z with a mass or density, or a stated spin inertia."""
    yield from exactly_one(rotor, ("solid", "spin"))
    if rotor.solid is not None:
        yield from exactly_one(rotor, ("mass", "density", "material"))
        if rotor.transverse is not None:
            yield Fault("transverse", "`transverse` beside `solid`", "`transverse` only with `spin`")
        yield from _round_about_z(rotor)
    else:
        yield from _volume_for(rotor)
    spin, transverse = rotor.spin or 0.0, rotor.transverse
    if transverse is not None and spin > 2.0 * transverse * (1.0 + SLACK):
        yield Fault("transverse", f"{transverse:g} kg*m^2", f"at least half of `spin`, {spin / 2:g} kg*m^2",
                    "a flat disc has exactly half (triangle inequality)")


def _round_about_z(rotor: Rotor) -> Iterator[Fault]:
    solid = rotor.solid
    if not isinstance(solid, Cylinder | Disc | Tube | Ring | RimAndWeb | Sphere):
        yield Fault("solid", "a solid that is not round", f"one of {listed((*_ROUND, 'sphere'))}")
        return
    for size in (getattr(solid, word) for word in _ROUND if hasattr(solid, word)):
        if size.along != "z":
            yield Fault("solid", f"a rotor along {size.along}", "along z, the rotor's own spin axis",
                        "turn the wheel with the stabiliser's axis")


def check_gimbal_axes(unit: GimballedFlywheel) -> Iterator[Fault]:
    """The spin axis turns in the plane square to the gimbal axis."""
    cosine = sum(s * g for s, g in zip(unit.spin_axis, unit.gimbal_axis, strict=True))
    if abs(cosine) > 1e-6:
        angle = math.degrees(math.acos(max(-1.0, min(1.0, cosine))))
        yield Fault("gimbal_axis", f"{angle:.4g} deg from the spin axis", "square to the spin axis")


SKEW = 0.01
"""Products of inertia of a gimbal's frame that are left out, as a share of its largest moment: less than a part states."""


def check_gimballed(unit: GimballedFlywheel) -> Iterator[Fault]:
    """Axes square to each other; a frame whose principal axes are they and their normal: what else it had would be lost."""
    yield from check_gimbal_axes(unit)
    t = unit.frame_inertia
    if t is None:
        return
    rows = ((t.xx, t.xy, t.xz), (t.xy, t.yy, t.yz), (t.xz, t.yz, t.zz))
    s, g = (tuple(x / math.hypot(*axis) for x in axis) for axis in (unit.spin_axis, unit.gimbal_axis))
    n = (g[1] * s[2] - g[2] * s[1], g[2] * s[0] - g[0] * s[2], g[0] * s[1] - g[1] * s[0])

    def moment(a: tuple[float, ...], b: tuple[float, ...]) -> float:
        return sum(a[i] * rows[i][j] * b[j] for i in range(3) for j in range(3))

    largest = max(moment(axis, axis) for axis in (s, g, n))
    skew = max(abs(moment(s, g)), abs(moment(s, n)), abs(moment(g, n)))
    if skew > SKEW * largest:
        yield Fault("frame_inertia", f"a product of {skew:.3g} kg*m^2 between gimbal axis, spin axis and their normal",
                    f"at most {SKEW * largest:.2g} kg*m^2, 1 % of the largest moment",
                    "its principal axes must be those three: balance the frame, or check the axes of the tensor")


def check_motor(motor: Motor) -> Iterator[Fault]:
    """What it stands for ever is no more than what it stands for a moment."""
    if motor.continuous_current > motor.peak_current:
        yield Fault("continuous_current", f"{motor.continuous_current:g} A",
                    f"at most the peak current, {motor.peak_current:g} A", "are the two exchanged?")


def check_supply(supply: Supply) -> Iterator[Fault]:
    """The clamp acts above the working voltage."""
    if supply.overvoltage <= supply.voltage:
        yield Fault("overvoltage", f"{supply.overvoltage:g} V", f"more than `voltage`, {supply.voltage:g} V")
    if not supply.regenerates and supply.capacitance == 0.0:
        yield Fault("capacitance", "a supply that takes no current back, on a bus without a capacitor",
                    "`capacitance` above 0 F", "a braked wheel pumps the bus: say what it holds, such as `470 uF`")
    if supply.brake_resistor > 0.0 and math.isinf(supply.overvoltage):
        yield Fault("brake_resistor", "a brake resistor that never comes on", "`overvoltage`: where it acts")


def check_drag(drag: Drag) -> Iterator[Fault]:
    """Breaking loose takes at least what turning takes."""
    if 0.0 < drag.stiction < drag.coulomb:
        yield Fault("stiction", f"{drag.stiction:g} N*m", f"at least `coulomb`, {drag.coulomb:g} N*m",
                    "it counts from nothing, not on top")


def check_wheel(wheel: ReactionWheel) -> Iterator[Fault]:
    """A wheel kept turning needs room on both sides."""
    if abs(wheel.bias_speed) >= wheel.speed_limit:
        yield Fault("bias_speed", f"{wheel.bias_speed:.4g} rad/s", f"below `speed_limit`, {wheel.speed_limit:.4g} rad/s")


def check_gear(gear: Gear) -> Iterator[Fault]:
    """Flanks without play touch always: their stiffness is not modelled."""
    if gear.tooth_stiffness is not None and gear.backlash == 0.0:
        yield Fault("tooth_stiffness", "`tooth_stiffness` without `backlash`", "both, or neither")


def check_lumped(body: Lumped) -> Iterator[Fault]:
    """About the line a body has at least its mass at its centre (parallel-axis theorem)."""
    least = body.mass * (body.height**2 + body.offset**2)
    if body.inertia < least * (1.0 - 1e-6):
        yield Fault("inertia", f"{body.inertia:g} kg*m^2",
                    f"at least mass*(height^2 + offset^2) = {least:.4g} kg*m^2",
                    "it is meant about the line; add that to an inertia about the centre of mass")


def check_stance(plan: StancePlan) -> Iterator[Fault]:
    """Two feet down, apart, and no foot both down and lifted."""
    if len(plan.down) != 2:
        yield Fault("down", f"{len(plan.down)} feet ({', '.join(plan.down)})", "exactly two feet")
    for (a, p), (b, q) in combinations(plan.down.items(), 2):
        if math.dist(p[:2], q[:2]) < CLOSEST:
            yield Fault(f"down.{b}", f"`{a}` and `{b}` in one place, seen from above", "two feet apart",
                        "the contact line runs through both feet")
    for name in set(plan.lifted or {}) & set(plan.down):
        yield Fault(f"lifted.{name}", f"`{name}` both down and lifted", "each foot once")


def _mm(length: float) -> str:
    return f"{length * 1e3:.4g} mm"


RULES: Rules = {
    Tensor: check_tensor, Part: check_part, TubeSize: check_tube, RimWebSize: check_rim, Rotor: check_rotor,
    GimballedFlywheel: check_gimballed, ScissoredPair: check_gimballed, Motor: check_motor,
    Supply: check_supply, Drag: check_drag, ReactionWheel: check_wheel, Gear: check_gear,
    Lumped: check_lumped, StancePlan: check_stance,
}
