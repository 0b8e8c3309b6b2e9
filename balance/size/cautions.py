"""What is printed with every answer, because someone can be hurt. Common practice; local codes prevail."""

from __future__ import annotations

from balance.size.answer import SizeAnswer
from balance.size.rotor import dropped

PRESENT = (
    "Burst: prove every rotor by a spin test above its overspeed behind a guard that holds a burst rotor, and keep it "
    "contained in use. Hub or spider of a ring, fillets, keys, glue and balancing holes are not in the stress given here.",
    "A full battery turns rotors faster than a nominal one: hold the speed limit in the drive, not only in the law.",
    "A full battery cannot take what braked wheels give back: leave room, or fit a brake resistor rated for the energy.",
    "Gimbals, wheels and legs pinch and pull in; a rotor or gimbal at rest may start at any time. Guard them, and disarm "
    "before reaching in.",
    "First tests: tethered from above, rotors slow, a stop within reach that cuts the drives.",
    "Local codes and licensed practice prevail over anything printed here.",
)


def cautions(answer: SizeAnswer) -> tuple[str, ...]:
    """Return the sentences, each candidate's own energy first."""
    own = tuple(f"{c.candidate.family}: each rotor stores {r.energy:.3g} J, as one kilogram dropped from "
                f"{dropped(r.energy):.3g} m; it turns on after the power is cut."
                for c, r in zip(answer.best, answer.rotors, strict=True))
    return own + PRESENT
