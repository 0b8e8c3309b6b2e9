"""A machine file into a `Machine`, with everything that must hold across its sections."""

from __future__ import annotations

from collections.abc import Iterator

from balance.base.errors import InputError, Problem
from balance.base.words import did_you_mean, listed
from balance.files.document import load
from balance.files.node import Node, Tree
from balance.files.reader import attempt
from balance.files.walk import Fault, Marks
from balance.machine.machine import Machine
from balance.machine.rules import RULES


def read_machine(path: str) -> Machine:
    """Return the machine a file describes, SI throughout.

    Raises
    ------
    InputError
        With all problems of the file: unreadable, wrong values, and values that do not go together.
    """
    tree = load(path)
    reading = attempt(tree, Machine, RULES)
    problems = [*reading.problems, *_across(tree, reading.marks)]
    if problems:
        raise InputError(problems)
    assert isinstance(reading.record, Machine)
    return reading.record


def _across(tree: Tree, marks: Marks) -> Iterator[Problem]:
    """Rules across sections, read off the tree so that they speak up beside other problems of the file."""
    root = tree.root
    for fault in (*_kind_of_body(root), *_motors(root), *_rotors(root), *_legs(root), *_measured(root), *_compliance(root)):
        place = marks.get(fault.key) or root.place(fault.key)
        yield Problem(tree.path, *place, fault.key or "(file)", fault.given, fault.allowed, fault.hint)


def _kind_of_body(root: Node) -> Iterator[Fault]:
    """Three numbers, or parts and stances."""
    if root.kind != "mapping":
        return
    if root.get("lumped"):
        for word in ("body", "legs", "stances", "measured"):
            if root.get(word):
                yield Fault(word, f"`{word}` beside `lumped`", "`lumped` alone, or `body` and `stances`",
                            "three numbers stand for the whole body and its one stance")
    else:
        for word in ("body", "stances"):
            if not root.get(word):
                yield Fault("", f"neither `lumped` nor `{word}`", "`lumped`, or `body` and `stances`",
                            f"add `{word}:`, or `lumped:` with mass, height and inertia")


def _entries(root: Node, table: str) -> tuple[tuple[str, Node], ...]:
    found = root.get(table)
    return tuple((name, node) for name, _, node in found.pairs) if found else ()


def _motors(root: Node) -> Iterator[Fault]:
    """Motor names lead to entries under `motors`."""
    known = root.get("motors")
    names = known.names() if known else ()
    for unit, node in _entries(root, "stabilisers"):
        for word in ("motor", "spin_motor"):
            motor = node.get(word)
            if motor is not None and motor.text and motor.text not in names:
                yield Fault(f"stabilisers.{unit}.{word}", f"the motor `{motor.text}`",
                            f"a name under `motors`: {listed(names)}" if names else "a name under `motors`",
                            did_you_mean(motor.text, names) or f"add `{motor.text}:` under `motors:`")


def _rotors(root: Node) -> Iterator[Fault]:
    """A stated spin inertia needs mass and transverse inertia where the body is built from parts."""
    if root.get("lumped"):
        return
    for unit, node in _entries(root, "stabilisers"):
        rotor = node.get("rotor")
        for word in ("mass", "transverse"):
            if rotor is not None and rotor.get("spin") and not rotor.get(word):
                yield Fault(f"stabilisers.{unit}.rotor", f"`spin` without `{word}`",
                            "`spin`, `transverse` and `mass`",
                            "the rotor is a part of the body too; only `lumped` holds it already")


def _legs(root: Node) -> Iterator[Fault]:
    """Every foot of a stance is a leg's, and every leg stands or is lifted."""
    legs = root.get("legs")
    if legs is None:
        return
    for stance, plan in _entries(root, "stances"):
        seen = set[str]()
        for word in ("down", "lifted"):
            for foot, _ in _entries(plan, word):
                seen.add(foot)
                if foot not in legs.names():
                    allowed = f"a name under `legs`: {listed(legs.names())}"
                    yield Fault(f"stances.{stance}.{word}.{foot}", f"the foot `{foot}`", allowed,
                                did_you_mean(foot, legs.names()))
        for leg, _ in _entries(plan, "poses"):
            if leg not in legs.names():
                yield Fault(f"stances.{stance}.poses.{leg}", f"the leg `{leg}`",
                            f"a name under `legs`: {listed(legs.names())}", did_you_mean(leg, legs.names()))
        for leg in legs.names():
            if leg not in seen and plan.get("down"):
                yield Fault(f"stances.{stance}", f"no place for the leg `{leg}`",
                            "every leg under `down` or `lifted`", f"add `{leg}:` to `lifted:`")


def _compliance(root: Node) -> Iterator[Fault]:
    """Legs that give stand on points: a ball that rolls under a hinge is not modelled."""
    feet = root.get("feet")
    radius = feet.get("radius") if feet is not None and feet.kind == "mapping" else None
    if root.get("leg_compliance") is not None and radius is not None and radius.text.split()[:1] not in (["0"], ["0.0"]):
        yield Fault("leg_compliance", "`leg_compliance` beside `feet: {radius: …}`", "one of the two",
                    "rolling feet and legs that give are not modelled together: leave the radius out")


def _measured(root: Node) -> Iterator[Fault]:
    """The pose of a bench test is a stance, and something was measured."""
    measured, stances = root.get("measured"), root.get("stances")
    if measured is None or stances is None or measured.kind != "mapping":
        return
    pose = measured.get("pose")
    if pose is not None and pose.text and pose.text not in stances.names():
        yield Fault("measured.pose", f"the stance `{pose.text}`", listed(stances.names()),
                    did_you_mean(pose.text, stances.names()))
    if not measured.get("weighings") and not measured.get("swings"):
        yield Fault("measured", "neither `weighings` nor `swings`", "one of them, or both")
