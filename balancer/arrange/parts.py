"""The parts that a plan needs: filler plates, handle ties, breakers and splices."""

from __future__ import annotations

import math
from collections.abc import Sequence

from balancer.arrange.breakers import BreakerPlan, Tie
from balancer.arrange.step_words import breaker_words, space_words
from balancer.arrange.work import How, Part, PartKind, Splice, Step
from balancer.panel import Arrangement, Circuit, Installation, Landing


def list_parts(
    installation: Installation, as_left: Arrangement, breakers: BreakerPlan, steps: Sequence[Step]
) -> tuple[Part, ...]:
    """List what to bring along, in the order of use."""
    by_label = {step.circuit: step for step in steps}
    new_pairs = [tie for tie in _in_order(breakers.ties_left) if all(_is_new(by_label.get(label)) for label in tie)]
    paired = {label for tie in new_pairs for label in tie}
    singles = [step for step in steps if step.is_new_breaker and step.circuit not in paired]
    return (
        *(_pair_part(installation, [by_label[label] for label in sorted(tie)]) for tie in new_pairs),
        *(_breaker_part(installation, step) for step in singles),
        *(
            _tie_part(as_left, tie)
            for tie in _in_order(breakers.ties_left - breakers.ties_found)
            if tie not in new_pairs
        ),
        *(_splice_part(installation.by_label[step.circuit], step) for step in steps if step.splice is not Splice.NONE),
        *_filler_parts(installation, as_left, steps),
    )


def _in_order(ties: frozenset[Tie]) -> list[Tie]:
    return sorted(ties, key=sorted)


def _is_new(step: Step | None) -> bool:
    return step is not None and step.is_new_breaker


def _mounting(installation: Installation, landing: Landing) -> str:
    words = []
    if any(terminal.half for terminal in landing):
        words.append("half-width")
    if all(terminal.space in installation.panel.bolt_on for terminal in landing):
        words.append("bolt-on")
    return f"{', '.join(words)} " if words else ""


def _breaker_part(installation: Installation, step: Step) -> Part:
    circuit = installation.by_label[step.circuit]
    name = f"{_mounting(installation, step.to)}{breaker_words(circuit, step.breaker_a)}"
    size = "" if step.breaker_a is not None else "; size it to its conductor and load"
    return Part(
        kind=PartKind.BREAKER,
        quantity=1,
        circuits=(step.circuit,),
        text=f"{name} for {step.circuit} at {space_words(step.to)}{size}{_reason(step)}",
    )


def _reason(step: Step) -> str:
    return "" if step.how is How.NEW else "; the old one cannot go along"


def _pair_part(installation: Installation, steps: Sequence[Step]) -> Part:
    """Give a pair on new breakers its common disconnect (NEC 2023, 210.4(B))."""
    first, second = (installation.by_label[step.circuit] for step in steps)
    ratings = [step.breaker_a for step in steps]
    place = " and ".join(str(t) for t in sorted(t for step in steps for t in step.to))
    names = f"{first.label} and {second.label}"
    mounting = _mounting(installation, steps[0].to)
    if ratings[0] is None or ratings[0] != ratings[1]:
        text = f"two {mounting}single-pole breakers with a listed handle tie for {names} at spaces {place}; size each"
    else:
        text = (
            f"{ratings[0]:g} A {mounting}two-pole breaker, or two single-pole ones with a listed handle tie,"
            f" for {names} at spaces {place}"
        )
    return Part(kind=PartKind.BREAKER, quantity=1, circuits=(first.label, second.label), text=text + _reason(steps[0]))


def _tie_part(as_left: Arrangement, tie: Tie) -> Part:
    labels = sorted(tie, key=lambda label: as_left[label])
    place = " and ".join(f"{label} ({space_words(as_left[label])})" for label in labels)
    return Part(
        kind=PartKind.HANDLE_TIE,
        quantity=1,
        circuits=tuple(labels),
        text=f"listed handle tie for {place}, or a two-pole breaker in place of the two (NEC 2023, 210.4(B))",
    )


def _splice_part(circuit: Circuit, step: Step) -> Part:
    wire = f" of {circuit.wire}" if circuit.wire else " of the same size and metal"
    short_in = math.ceil(step.reach_in - (circuit.slack_in or 0.0))
    length = f"at least {short_in} in" if step.splice is Splice.NEEDED else f"up to {short_in} in"
    text = f"for {circuit.label}: listed connector and conductor{wire}, {length} and what making it up takes"
    return Part(
        kind=PartKind.SPLICE,
        quantity=circuit.hot_conductors,
        circuits=(circuit.label,),
        text=text,
        is_certain=step.splice is Splice.NEEDED,
    )


def _filler_parts(installation: Installation, as_left: Arrangement, steps: Sequence[Step]) -> tuple[Part, ...]:
    found = {terminal.space for landing in installation.as_found.values() for terminal in landing}
    emptied = {terminal.space for step in steps for terminal in step.from_}
    left = {terminal.space for landing in as_left.values() for terminal in landing}
    opened, closed = sorted(emptied - left), sorted(left - found)
    if not opened:
        return ()
    plural = "s" if len(opened) > 1 else ""
    text = f"filler plate{plural} for space{plural} {_listed(opened)}, left open"
    if closed:
        text += f" (plates that come off {_listed(closed)} may fit)"
    return (Part(kind=PartKind.FILLER, quantity=len(opened), circuits=(), text=text),)


def _listed(spaces: Sequence[int]) -> str:
    return ", ".join(map(str, spaces))
