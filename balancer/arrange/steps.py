"""The steps from as-found to as-left, with the fewest conductors loose at any time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

from balancer.arrange.breakers import BreakerPlan, Source, breaker_bodies, needed_rating_a, plan_breakers
from balancer.arrange.order import Item, Operation, order_moves
from balancer.arrange.parts import list_parts
from balancer.arrange.placements import longest_reach_in
from balancer.arrange.step_words import (
    AlongView,
    Lifted,
    action_text,
    along_texts,
    space_words,
    splice_text,
    went_along_text,
)
from balancer.arrange.work import How, PreMoveTest, Splice, Step, Work
from balancer.panel import Arrangement, Circuit, Installation, Landing, Role, Volts

_SHORT_REACH_IN = 6.0
"""A re-landing up to here [in] needs no splice where nobody measured the slack."""


def build_work(installation: Installation, as_left: Arrangement, removed_spares: Sequence[str] = ()) -> Work:
    """Work out the steps, the parts and the tests before, that take the panel as found to `as_left`.

    Parameters
    ----------
    installation
        The panel as found.
    as_left
        A landing for every circuit that has a place afterwards; a circuit that is absent stays as it is.
    removed_spares
        Spare breakers that come out to make room.
    """
    rework = _Rework(installation, as_left, tuple(removed_spares))
    items = rework.items()
    order = order_moves(items)
    steps: tuple[Step, ...] = ()
    for operation in order.operations:
        steps += rework.steps(items, operation, done=[step.circuit for step in steps])
    parts = list_parts(installation, as_left, rework.breakers, steps)
    return Work(steps=steps, parts=parts, pre_moves=_pre_move_tests(installation, steps), max_loose=order.max_loose)


@dataclass(frozen=True)
class _Rework:
    """One panel before and after."""

    installation: Installation
    as_left: Arrangement
    removed: tuple[str, ...]

    @cached_property
    def breakers(self) -> BreakerPlan:
        return plan_breakers(self.installation, self.as_left)

    @cached_property
    def moved(self) -> tuple[Circuit, ...]:
        """Circuits whose landing differs, by their place as found, new ones last."""
        changed = [circuit for circuit in self.installation.circuits if self._is_changed(circuit)]
        return tuple(sorted(changed, key=lambda c: (not c.landing, c.landing or self.to(c))))

    def _is_changed(self, circuit: Circuit) -> bool:
        if circuit.label in self.removed:
            return circuit.is_landed and not self._is_taken_over(circuit)
        return self.to(circuit) not in ((), circuit.landing)

    def _is_taken_over(self, spare: Circuit) -> bool:
        """Whether the breaker of a spare that gives way stays for the circuit that arrives there."""
        stays = (label for label, source in self.breakers.source.items() if source is Source.STAYS)
        return any(set(spare.landing) & set(self.as_left[label]) for label in stays)

    def to(self, circuit: Circuit) -> Landing:
        return () if circuit.label in self.removed else self.as_left.get(circuit.label, ())

    def _source(self, circuit: Circuit) -> Source:
        return self.breakers.source.get(circuit.label, Source.GOES_ALONG)

    def items(self) -> list[Item]:
        """Group the moved circuits into what is lifted and landed in one go."""
        groups: list[list[Circuit]] = []
        for circuit in self.moved:
            group = next((each for each in groups if any(self._go_together(circuit, c) for c in each)), None)
            if group is None:
                groups.append([circuit])
            else:
                group.append(circuit)
        return [self._item(group) for group in groups]

    def _go_together(self, one: Circuit, other: Circuit) -> bool:
        """Under one screw before and after, or on bodies that are one or tied and go along with both."""
        if one.landing and one.landing == other.landing and self.to(one) == self.to(other):
            return True
        if {self._source(one), self._source(other)} != {Source.GOES_ALONG} or self._is_turned(one):
            return False
        pair = frozenset((one.label, other.label))
        is_tied = pair in self.breakers.ties_found and pair in self.breakers.ties_left
        return is_tied or any(pair <= body for body in self._bodies_left)

    @cached_property
    def _bodies_left(self) -> tuple[frozenset[str], ...]:
        bodies = breaker_bodies({label: landing for label, landing in self.as_left.items() if landing})
        return tuple(frozenset(body.circuits) for body in bodies)

    def _item(self, group: Sequence[Circuit]) -> Item:
        return Item(
            circuits=tuple(circuit.label for circuit in group),
            source=frozenset(t for circuit in group for t in circuit.landing if self._blocks(circuit)),
            target=frozenset(t for circuit in group for t in self.to(circuit)),
            conductors=sum(circuit.hot_conductors for circuit in group if circuit.is_landed),
        )

    def _blocks(self, circuit: Circuit) -> bool:
        """Whether anything of it is in the way: a spare whose breaker stays has no conductor."""
        return circuit.hot_conductors > 0 or self._source(circuit) is not Source.STAYS

    def _is_turned(self, circuit: Circuit) -> bool:
        """Whether only the two conductors of a two-pole breaker or of a tied pair change places."""
        if circuit.poles == 2:
            return self.to(circuit) == circuit.landing[::-1]
        partners = (label for tie in self.breakers.ties_found if circuit.label in tie for label in tie)
        by_label = self.installation.by_label
        return any(
            by_label[label].landing == self.to(circuit) and self.to(by_label[label]) == circuit.landing
            for label in partners
            if label != circuit.label
        )

    def _keeps_breaker(self, circuit: Circuit) -> bool:
        return self._source(circuit) is Source.GOES_ALONG or set(self.to(circuit)) == set(circuit.landing)

    def _how(self, circuit: Circuit) -> How:
        if not circuit.is_landed:
            return How.NEW
        if circuit.label in self.removed:
            return How.TAKE_OUT
        if self._is_turned(circuit):
            return How.TURN
        return How.EXCHANGE if self._source(circuit) is Source.STAYS else How.MOVE_BREAKER

    def steps(self, items: Sequence[Item], operation: Operation, done: Sequence[str]) -> tuple[Step, ...]:
        """Write the steps of one operation, a circuit each; what was lifted before belongs to the first of them."""
        lifted = [label for index in operation.lifted_before for label in items[index].circuits]
        steps: tuple[Step, ...] = ()
        for label in self._landing_order(items[operation.item]):
            before = [step.circuit for step in steps]
            step = self._step(label, () if steps else lifted, was_lifted=operation.was_lifted)
            steps += (self._with_words(step, [*done, *before], carriers=before),)
        return steps

    def _with_words(self, step: Step, done: Sequence[str], carriers: Sequence[str]) -> Step:
        """Put a step into words, knowing which circuits are done and which of them were in the same hand."""
        circuit = self.installation.by_label[step.circuit]
        carrier = next((label for label in carriers if self._is_one_breaker(step.circuit, label)), "")
        lifted = [self._lifted(each) for each in step.lift_first]
        return replace(
            step,
            action=went_along_text(carrier) if carrier else action_text(step, circuit, lifted),
            goes_along=along_texts(step, AlongView(self.installation, self.as_left, self.breakers, done, carrier)),
            splice_text=splice_text(step, circuit),
        )

    def _is_one_breaker(self, label: str, other: str) -> bool:
        """Whether two circuits of one item sit on one breaker body that goes along."""
        if {self.breakers.source.get(each) for each in (label, other)} != {Source.GOES_ALONG}:
            return False
        return any({label, other} <= body for body in self._bodies_left)

    def _landing_order(self, item: Item) -> list[str]:
        """Whatever stands in another's way within one body goes first."""
        by_label = self.installation.by_label
        held = {terminal: label for label in item.circuits for terminal in by_label[label].landing}
        ordered: list[str] = []

        def place(label: str, waiting: tuple[str, ...]) -> None:
            if label in ordered or label in waiting:
                return
            for terminal in self.to(by_label[label]):
                place(held.get(terminal, label), (*waiting, label))
            ordered.append(label)

        for label in item.circuits:
            place(label, ())
        return ordered

    def _step(self, label: str, lifted: Sequence[str], *, was_lifted: bool) -> Step:
        circuit = self.installation.by_label[label]
        source, to = self._source(circuit), self.to(circuit)
        reach_in = longest_reach_in(self.installation.panel, circuit.landing, to) if circuit.landing and to else 0.0
        return Step(
            circuit=label,
            description=circuit.description,
            from_=circuit.landing,
            to=to,
            how=self._how(circuit),
            lift_first=tuple(lifted),
            was_lifted=was_lifted,
            with_breaker=source is Source.GOES_ALONG,
            is_new_breaker=source is Source.NEW,
            breaker_a=circuit.breaker_a if self._keeps_breaker(circuit) else needed_rating_a(circuit),
            reach_in=reach_in,
            splice=_splice(circuit, reach_in),
        )

    def _lifted(self, label: str) -> Lifted:
        circuit = self.installation.by_label[label]
        return Lifted(circuit, with_breaker=self._source(circuit) is Source.GOES_ALONG)


def _splice(circuit: Circuit, reach_in: float) -> Splice:
    if circuit.hot_conductors == 0:
        return Splice.NONE
    if circuit.slack_in is None:
        return Splice.MAY_BE_NEEDED if reach_in > _SHORT_REACH_IN else Splice.NONE
    return Splice.NEEDED if reach_in > circuit.slack_in else Splice.NONE


def _pre_move_tests(installation: Installation, steps: Sequence[Step]) -> tuple[PreMoveTest, ...]:
    """One test for every moved 120 V circuit of which nobody knows whether it shares its neutral."""
    moved = [installation.by_label[step.circuit] for step in steps if step.from_ and step.to]
    return tuple(
        PreMoveTest(
            circuit=circuit.label, landing=circuit.landing, text=f"{circuit.label}, {space_words(circuit.landing)}"
        )
        for circuit in sorted(moved, key=lambda each: each.landing)
        if circuit.volts is Volts.V120
        and circuit.role is not Role.SPARE
        and not circuit.shared_neutral
        and not circuit.is_neutral_checked
    )
