"""Carries the steps out on a model of the panel that knows nothing of how they were found."""

from collections import Counter
from dataclasses import dataclass, field

from hypothesis import event, given
from hypothesis import strategies as st

from balancer.arrange.steps import build_work
from balancer.arrange.work import How, PartKind, Step, Work
from balancer.panel import Arrangement, Circuit, Installation, Panel, Role, Terminal, Volts, Wire, ordinary_spaces
from balancer.rules import conductor_limit_a

Pole = tuple[float | None, str]
"""Rating and type of one breaker pole."""


@dataclass
class Wall:
    """What hangs on the wall: breaker poles and conductors by terminal, and what is held aside."""

    installation: Installation
    poles: dict[Terminal, Pole] = field(default_factory=dict)
    conductors: dict[Terminal, str] = field(default_factory=dict)
    aside: dict[str, list[Pole]] = field(default_factory=dict)
    thrown_away: list[Pole] = field(default_factory=list)
    bought: list[Pole] = field(default_factory=list)
    most_loose: int = 0

    def __post_init__(self) -> None:
        for circuit in self.installation.circuits:
            for terminal in circuit.landing:
                self.poles[terminal] = (circuit.breaker_a, circuit.breaker_type)
                if circuit.role is not Role.SPARE:
                    self.conductors[terminal] = circuit.label

    def circuit(self, label: str) -> Circuit:
        return self.installation.by_label[label]

    def carry_out(self, work: Work) -> None:
        by_label = {step.circuit: step for step in work.steps}
        for step in work.steps:
            for label in step.lift_first:
                self.lift(by_label[label])
            self.count_loose()
            self.do(step)

    def count_loose(self, extra: int = 0) -> None:
        loose = sum(self.circuit(label).hot_conductors for label in self.aside)
        self.most_loose = max(self.most_loose, loose + extra)

    def lift(self, step: Step) -> None:
        for terminal in step.from_:
            if step.circuit in self.conductors.values():
                assert self.conductors.pop(terminal) == step.circuit
        taken = [self.poles.pop(terminal) for terminal in step.from_ if step.with_breaker or step.is_new_breaker]
        self.aside[step.circuit] = taken

    def do(self, step: Step) -> None:
        assert step.was_lifted == (step.circuit in self.aside)
        is_turned_alone = step.how is How.TURN and len(step.to) == 2
        if is_turned_alone:
            self.count_loose(extra=1)
        if not step.was_lifted:
            self.lift(step)
        taken = self.aside.pop(step.circuit)
        if step.how is How.TAKE_OUT:
            self.thrown_away += taken
            return
        if step.is_new_breaker:
            self.thrown_away += taken
            taken = [(step.breaker_a, self.circuit(step.circuit).breaker_type)] * len(step.to)
            self.bought += taken
        if step.with_breaker or step.is_new_breaker:
            self.seat(step, taken)
        self.land(step)

    def seat(self, step: Step, taken: list[Pole]) -> None:
        for terminal, pole in zip(step.to, taken, strict=True):
            assert not any(set(terminal.parts) & set(there.parts) for there in self.poles), "a breaker is in the way"
            self.poles[terminal] = pole

    def land(self, step: Step) -> None:
        for terminal in step.to:
            assert terminal in self.poles, "no breaker to land on"
            assert terminal not in self.conductors, "a conductor is in the way"
            if self.circuit(step.circuit).role is not Role.SPARE:
                self.conductors[terminal] = step.circuit


EVERY_KIND = ("single", "single", "single", "single", "single", "spare", "pair", "tandem", "range")


@st.composite
def reworks(draw: st.DrawFn, allowed=EVERY_KIND) -> tuple[Installation, Arrangement, tuple[str, ...]]:
    """A panel of 12 spaces and the same circuits at random elsewhere, pairs and tandem bodies whole."""
    kinds = draw(st.lists(st.sampled_from(allowed), max_size=9))
    panel = Panel(spaces=ordinary_spaces(12))
    circuits: list[Circuit] = []
    as_left: Arrangement = {}
    before, after = set(range(1, 13)), set(range(1, 13))
    for number, kind in enumerate(sorted(kinds, key=lambda kind: kind not in ("pair", "range"))):
        size = 2 if kind in ("pair", "range") else 1
        start, end = _free(panel, before, size), _free(panel, after, size)
        if not start or not end:
            continue
        here = draw(st.sampled_from(start))
        there = (
            here if here in end and (kind == "range" or draw(st.integers(0, 3)) == 0) else draw(st.sampled_from(end))
        )
        before -= set(here)
        after -= set(there)
        if size == 2 and draw(st.booleans()):
            there = there[::-1]
        for circuit, landing in _members(draw, f"c{number}", kind, here, there):
            circuits.append(circuit)
            as_left[circuit.label] = landing
    removed = tuple(c.label for c in circuits if c.role is Role.SPARE and draw(st.integers(0, 2)) == 0)
    return (
        Installation(panel=panel, circuits=tuple(circuits)),
        {label: landing for label, landing in as_left.items() if label not in removed},
        removed,
    )


def _free(panel: Panel, spaces: set[int], size: int) -> list[tuple[int, ...]]:
    if size == 1:
        return [(space,) for space in sorted(spaces)]
    return [seat for seat in panel.two_pole_seats if set(seat) <= spaces]


def _members(draw, name, kind, here, there):
    rating, breaker_type = draw(st.sampled_from([(20.0, "standard"), (20.0, "standard"), (15.0, "gfci"), (None, "")]))
    wire = draw(st.sampled_from([None, None, None, Wire("14", "cu")]))
    common = {"breaker_a": rating, "breaker_type": breaker_type, "wire": wire}
    if kind == "range":
        yield Circuit(label=name, landing=_full(here), volts=Volts.V120_240, **common), _full(there)
    elif kind == "pair":
        for index, suffix in enumerate("xy"):
            single = Circuit(
                label=name + suffix, landing=_full(here)[index:][:1], volts=Volts.V120, shared_neutral=name, **common
            )
            yield single, _full(there)[index:][:1]
    elif kind == "tandem":
        for half in "ab":
            single = Circuit(label=name + half, landing=(Terminal(here[0], half),), volts=Volts.V120, **common)
            yield single, (Terminal(there[0], half),)
    elif kind == "spare":
        yield Circuit(label=name, landing=_full(here), volts=Volts.V120, role=Role.SPARE, **common), _full(there)
    else:
        is_new = draw(st.integers(0, 5)) == 0
        yield Circuit(label=name, landing=() if is_new else _full(here), volts=Volts.V120, **common), _full(there)


def _full(spaces: tuple[int, ...]) -> tuple[Terminal, ...]:
    return tuple(map(Terminal, spaces))


@given(reworks())
def test_carrying_out_the_steps_gives_the_panel_as_left(rework):
    installation, as_left, removed = rework
    work = build_work(installation, as_left, removed)
    wall = Wall(installation)
    poles_before = Counter(wall.poles.values())
    wall.carry_out(work)

    expected = {
        terminal: label
        for label, landing in as_left.items()
        for terminal in landing
        if installation.by_label[label].role is not Role.SPARE
    }
    assert wall.conductors == expected
    assert not wall.aside
    assert wall.poles.keys() == {terminal for landing in as_left.values() for terminal in landing}
    assert Counter(wall.poles.values()) == poles_before - Counter(wall.thrown_away) + Counter(wall.bought)
    assert wall.most_loose == work.max_loose
    bought = sum(step.is_new_breaker for step in work.steps)
    assert bought == sum(len(part.circuits) for part in work.parts if part.kind is PartKind.BREAKER)
    for how in {step.how for step in work.steps}:
        event(how)


@given(reworks())
def test_no_moved_conductor_ends_on_a_breaker_above_its_old_one_or_its_limit(rework):
    installation, as_left, removed = rework
    work = build_work(installation, as_left, removed)
    wall = Wall(installation)
    wall.carry_out(work)
    for step in work.steps:
        circuit = installation.by_label[step.circuit]
        limits = [limit for limit in (circuit.breaker_a, conductor_limit_a(circuit)) if limit is not None]
        for terminal in step.to:
            rating, breaker_type = wall.poles[terminal]
            assert (rating, breaker_type) == (step.breaker_a, circuit.breaker_type)
            is_its_own = terminal in circuit.landing
            assert is_its_own or rating is None or circuit.breaker_a is None or rating <= min(limits)


@given(reworks())
def test_only_closed_rounds_of_equal_breakers_exchange_conductors(rework):
    installation, as_left, removed = rework
    steps = build_work(installation, as_left, removed).steps
    kept = {terminal for step in steps if step.how is How.EXCHANGE for terminal in step.to}
    left_behind = {terminal for step in steps if step.how is How.EXCHANGE for terminal in step.from_}
    spares = {t for label in removed for t in installation.by_label[label].landing}
    turned = {t for step in steps if step.how is How.TURN for t in step.from_}
    new = {t for step in steps if step.how is How.NEW for t in step.to}
    assert left_behind - turned - new <= kept
    assert kept - left_behind <= spares | turned


@given(reworks())
def test_every_circuit_that_moves_has_one_step(rework):
    installation, as_left, removed = rework
    steps = build_work(installation, as_left, removed).steps
    assert len({step.circuit for step in steps}) == len(steps)
    moved = {label for label, landing in as_left.items() if landing != installation.as_found.get(label)}
    assert {step.circuit for step in steps if step.to} == moved


@given(reworks(allowed=("single", "spare")))
def test_single_conductors_never_need_more_than_one_aside(rework):
    assert build_work(*rework).max_loose <= 1
