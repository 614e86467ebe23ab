"""The sentences of the steps."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from balancer.arrange.breakers import BreakerPlan, Source, needed_rating_a
from balancer.arrange.work import How, Splice, Step
from balancer.panel import Arrangement, Circuit, Installation, Landing, Panel, Role, format_landing


@dataclass(frozen=True)
class Lifted:
    """A circuit that is set aside before a step."""

    circuit: Circuit
    with_breaker: bool


def space_words(landing: Landing) -> str:
    """Name a landing: ``space 7`` or ``spaces 5-7``."""
    return f"space{'s' if len(landing) > 1 else ''} {format_landing(landing)}"


def breaker_words(circuit: Circuit, rating_a: float | None) -> str:
    """Name a breaker: ``20 A gfci breaker``."""
    rating = "" if rating_a is None else f"{rating_a:g} A "
    kind = f"{circuit.breaker_type} " if circuit.breaker_type else ""
    is_said = "pole" in circuit.breaker_type.casefold()
    poles = "two-pole " if circuit.poles == 2 and not is_said else ""
    return f"{rating}{kind}{poles}breaker"


def action_text(step: Step, circuit: Circuit, lifted: Sequence[Lifted]) -> str:
    """Say what to lift first and what to do with the circuit itself."""
    lifts = [_lift_text(each, "First" if index == 0 else "Then") for index, each in enumerate(lifted)]
    return " ".join([*lifts, _move_text(step, circuit)])


def _lift_text(lifted: Lifted, adverb: str) -> str:
    circuit = lifted.circuit
    place = space_words(circuit.landing)
    if circuit.role is Role.SPARE:
        return f"{adverb} take the spare breaker {circuit.label} off {place} and lay it aside."
    breaker = "with its breaker " if lifted.with_breaker else ""
    return f"{adverb} lift {circuit.label} {breaker}off {place} and set it aside."


def _move_text(step: Step, circuit: Circuit) -> str:
    if circuit.role is Role.SPARE:
        return _spare_text(step, circuit)
    if step.how is How.TURN:
        return _turn_text(step, circuit)
    if step.how is How.NEW:
        return _new_text(step, circuit)
    breaker = breaker_words(circuit, step.breaker_a)
    start, end = space_words(step.from_), space_words(step.to)
    if step.with_breaker:
        if step.was_lifted:
            return f"Set the {breaker}, lifted with its {_conductor(circuit)} off {start} before, in at {end}."
        return f"Move the {breaker} with its {_conductor(circuit)} from {start} to {end}."
    onto = f"on a new {breaker}" if step.is_new_breaker else f"on the {breaker} that stays there"
    if step.was_lifted:
        return f"Land the {_conductor(circuit)}, lifted off {start} before, at {end}, {onto}."
    return f"Move the {_conductor(circuit)} from {start} to {end}, {onto}."


def _conductor(circuit: Circuit, which: str = "") -> str:
    return f"{which}conductor" if circuit.poles == 1 else f"two {which}conductors"


def _spare_text(step: Step, circuit: Circuit) -> str:
    breaker = f"spare {breaker_words(circuit, step.breaker_a)}"
    end = space_words(step.to)
    if step.how is How.TAKE_OUT:
        return f"Take the {breaker} out of {space_words(step.from_)} to make room."
    if step.how is How.NEW or step.is_new_breaker:
        return f"Fit the {breaker} at {end}."
    if not step.with_breaker:
        return f"Move nothing: the {breaker_words(circuit, step.breaker_a)} left free at {end} is the spare now."
    if step.was_lifted:
        return f"Set the {breaker}, laid aside before, in at {end}."
    return f"Move the {breaker} from {space_words(step.from_)} to {end}."


def _turn_text(step: Step, circuit: Circuit) -> str:
    start, end = space_words(step.from_), space_words(step.to)
    if circuit.poles == 2:
        first, second = step.from_
        return (
            f"Exchange its two conductors on the breaker: the one on {first} goes to {second}, the one on {second}"
            f" to {first}."
        )
    if step.with_breaker:
        end += "; on a two-pole breaker, move the conductor alone"
        if step.was_lifted:
            return f"Set its breaker, lifted with the conductor off {start} before, in at {end}."
        return f"Move its breaker with the conductor from {start} to {end}."
    if step.was_lifted:
        return f"Land the conductor, lifted off {start} before, at {end}, the other pole of its pair."
    return f"Move the conductor from {start} to {end}, the other pole of its pair."


def _new_text(step: Step, circuit: Circuit) -> str:
    breaker, end = breaker_words(circuit, step.breaker_a), space_words(step.to)
    if step.is_new_breaker:
        return f"Fit a {breaker} at {end} and land the {_conductor(circuit, 'new ')} on it."
    return f"Land the {_conductor(circuit, 'new ')} on the {breaker} already at {end}."


def went_along_text(carrier: str) -> str:
    """Say that a circuit is where it belongs already."""
    return f"It went along with {carrier}: its conductor stays on the same breaker."


@dataclass(frozen=True)
class AlongView:
    """What a step has around it: the work as a whole, the circuits that are done, and whose breaker it rode on."""

    installation: Installation
    as_left: Arrangement
    breakers: BreakerPlan
    done: Sequence[str] = ()
    carrier: str = ""


def along_texts(step: Step, view: AlongView) -> tuple[str, ...]:
    """List what moves or changes with a circuit."""
    circuit = view.installation.by_label[step.circuit]
    if circuit.role is Role.SPARE or not step.to:
        return ()
    texts = [
        _rating_text(step, circuit),
        _neutral_text(step, circuit),
        _bars_text(step, circuit),
        *_partner_texts(step, circuit, view),
        *_body_texts(step, circuit, view),
        _metering_text(step, view.installation.panel),
        _bolt_text(step, view.installation.panel),
    ]
    return tuple(text for text in texts if text)


def _rating_text(step: Step, circuit: Circuit) -> str:
    needed_a = needed_rating_a(circuit)
    if not (step.from_ and step.is_new_breaker) or needed_a == circuit.breaker_a:
        return ""
    return f"Its old {circuit.breaker_a:g} A breaker is above its conductor's limit of {needed_a:g} A and comes out."


def _neutral_text(step: Step, circuit: Circuit) -> str:
    if not circuit.has_gfci_or_afci:
        return ""
    own = "its own neutral (pigtail or clip) goes back on the neutral bar"
    if step.with_breaker:
        return f"Its load neutral stays on the breaker; {own}."
    if step.how is How.NEW:
        return f"Its load neutral goes on the breaker too; {own.replace('goes back', 'goes')}."
    new = "new " if step.is_new_breaker else ""
    return f"Its load neutral goes along, onto the {new}breaker at {space_words(step.to)}."


def _bars_text(step: Step, circuit: Circuit) -> str:
    """Name the other conductors of a circuit that was not landed before."""
    if step.how is not How.NEW:
        return ""
    has_neutral_on_bar = circuit.volts.has_neutral and not circuit.has_gfci_or_afci
    return (
        f"Land its {'neutral and ' if has_neutral_on_bar else ''}equipment ground on the bar{'s' * has_neutral_on_bar}."
    )


def _partner_texts(step: Step, circuit: Circuit, view: AlongView) -> list[str]:
    """Say where the partners are; the handles are tied when the last of them is landed."""
    texts = []
    for other in view.installation.circuits:
        bond = _bond_words(circuit, other)
        end = view.as_left.get(other.label, other.landing)
        if other.label == circuit.label or not bond or not end or _is_on_same_body(step, other, view.breakers):
            continue
        is_there = end == other.landing or other.label in view.done
        verb = "stays on" if end == other.landing else "is now on" if is_there else "goes later to"
        tie = frozenset((circuit.label, other.label))
        is_new_tie = is_there and tie in view.breakers.ties_left and tie not in view.breakers.ties_found
        texts.append(f"{bond}, {other.label}, {verb} {space_words(end)}.{' Tie their handles.' if is_new_tie else ''}")
    return texts


def _is_on_same_body(step: Step, other: Circuit, breakers: BreakerPlan) -> bool:
    goes_along = step.with_breaker and breakers.source.get(other.label) is Source.GOES_ALONG
    return goes_along and bool({t.space for t in step.from_} & {t.space for t in other.landing})


def _body_texts(step: Step, circuit: Circuit, view: AlongView) -> list[str]:
    """Name what else hangs on the breaker body that is taken up, once."""
    if view.carrier:
        return []
    others = [c for c in view.installation.circuits if c is not circuit and _is_on_same_body(step, c, view.breakers)]
    return [f"{other.label}, on the same breaker body, goes along." for other in others]


def _bond_words(one: Circuit, other: Circuit) -> str:
    if one.shared_neutral and one.shared_neutral.casefold() == other.shared_neutral.casefold():
        return "Its partner on the shared neutral"
    if one.tied and one.tied.casefold() == other.tied.casefold():
        return "Tied to it"
    return ""


def _metering_text(step: Step, panel: Panel) -> str:
    if not step.from_:
        return ""
    changes = [
        panel.leg(new.space)
        for old, new in zip(step.from_, step.to, strict=True)
        if panel.leg(old.space) is not panel.leg(new.space)
    ]
    if not changes:
        return ""
    if len(changes) > 1:
        return "CTs on it, if any: both change legs."
    return f"CT on it, if any: now leg {changes[0]}."


def _bolt_text(step: Step, panel: Panel) -> str:
    is_fitted = step.with_breaker or step.is_new_breaker
    if not is_fitted or not all(terminal.space in panel.bolt_on for terminal in step.to):
        return ""
    return "Bolt-on breaker: fit its screw and torque it to the label."


def splice_text(step: Step, circuit: Circuit) -> str:
    """Say whether the conductor may be too short for its new terminal."""
    if step.splice is Splice.MAY_BE_NEEDED:
        return f"A splice may be needed: reach {step.reach_in:g} in, slack not measured."
    if step.splice is Splice.NEEDED:
        return f"Splice: reach {step.reach_in:g} in, slack {circuit.slack_in:g} in."
    return ""
