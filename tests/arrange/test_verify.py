"""The solver-free re-check: for every check an arrangement that passes and one that does not."""

import subprocess
import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

import pytest

from balancer.arrange.results import Options
from balancer.arrange.verify import verify_arrangement
from balancer.panel import Circuit, Installation, Role, parse_landing

AS_USUAL = Options()
TURNING = Options(turn_240=True)
SPLICING = Options(splice=True)


@dataclass(frozen=True)
class Row:
    """A circuit of a made-up panel: place as found and as left ("" for none)."""

    found: str
    left: str
    volts: str = "120"
    cells: dict[str, Any] = field(default_factory=dict)


def row(found: str, left: str, volts: str = "120", **cells: Any) -> Row:
    return Row(found, left, volts, cells)


@dataclass(frozen=True)
class Judge:
    """Judges rows of a made-up panel; circuits are called c1, c2, ... in their order."""

    circuit: Callable[..., Circuit]
    installation: Callable[..., Installation]

    def __call__(
        self, rows: Sequence[Row], options: Options = AS_USUAL, taken_out: Sequence[str] = (), **panel: Any
    ) -> list[str]:
        labels = [f"c{number}" for number in range(1, len(rows) + 1)]
        circuits = [self.circuit(label, r.found, r.volts, **r.cells) for label, r in zip(labels, rows, strict=True)]
        as_left = {label: parse_landing(r.left) for label, r in zip(labels, rows, strict=True) if r.left}
        return verify_arrangement(self.installation(*circuits, **panel), options, as_left, taken_out)


@pytest.fixture
def judge(circuit, installation) -> Judge:
    return Judge(circuit, installation)


SPARE = {"role": Role.SPARE}
FIXED = {"is_fixed": True}
PAIR = {"shared_neutral": "m"}
TIED = {"tied": "t"}
GFCI = {"breaker_type": "gfci"}
PLUG_ON = {"breaker_type": "plug-on neutral"}

GOOD = {
    "a single pole moved": [row("1", "4")],
    "two that exchange": [row("1", "3"), row("3", "1")],
    "a new single pole": [row("", "4")],
    "a new two-pole": [row("", "4-6", "240")],
    "a new one turned": [row("", "6-4", "120/240")],
    "a new spare left out": [row("", "", **SPARE)],
    "a spare moved": [row("1", "4", **SPARE)],
    "a two-pole that stays": [row("1-3", "1-3", "240")],
    "a fixed one that stays": [row("1", "1", **FIXED)],
    "a device that stays": [row("1-3", "1-3", "240", role=Role.BACKFED)],
    "a double tap that moves whole": [row("1", "3"), row("1", "3")],
    "a tandem that moves whole": [row("1a", "4a"), row("1b", "4b"), row("4a", "1a")],
    "a quad that moves not": [row("1b-3a", "1b-3a", "240"), row("1a", "1a"), row("3b", "3b")],
    "tied ones that move together": [row("1", "4", **TIED), row("5", "8", **TIED)],
    "tied ones that come together": [row("1", "4", **TIED), row("", "6", **TIED)],
    "a pair turned over": [row("1", "3", **PAIR), row("3", "1", **PAIR)],
    "a tied pair turned over": [row("1", "3", **PAIR, **TIED), row("3", "1", **PAIR, **TIED)],
    "a pair moved whole": [row("1", "6", **PAIR), row("3", "8", **PAIR)],
    "a pair apart that stays": [row("1", "1", **PAIR), row("4", "4", **PAIR)],
    "a pair brought together": [row("1", "1", **PAIR), row("4", "3", **PAIR)],
    "a new pair": [row("", "6", **PAIR), row("", "8", **PAIR)],
    "a pair on one leg, mended": [row("1", "1", **PAIR), row("5", "3", **PAIR)],
    "a pair on one leg in a tandem, mended": [row("1a", "1", **PAIR), row("1b", "3", **PAIR)],
    "a pair on one leg, one fixed": [row("1", "1", **PAIR, **FIXED), row("5", "5", **PAIR)],
    "a pair on one leg, one on a fixed body": [
        row("1a", "1a", **PAIR),
        row("1b", "1b", **FIXED),
        row("5", "5", **PAIR),
    ],
    "a pair on one leg, one tied to three on one neutral": [
        row("1", "1", **PAIR, **TIED),
        row("5", "5", **PAIR),
        row("3", "3", shared_neutral="n", **TIED),
        row("4", "4", shared_neutral="n"),
        row("8", "8", shared_neutral="n"),
    ],
    "three on one neutral, all new": [row("", "1", **PAIR), row("", "3", **PAIR), row("", "5", **PAIR)],
}


@pytest.mark.parametrize("rows", GOOD.values(), ids=GOOD)
def test_what_may_be_done_passes(judge: Judge, rows: list[Row]) -> None:
    assert judge(rows) == []


BAD = {
    "a load left out": ([row("1", "")], "c1 (1 as found, no place as left) is left without a place"),
    "a new load left out": ([row("", "")], "c1 (not landed as found, no place as left) is left without a place"),
    "a spare gone and not told": ([row("1", "", **SPARE)], "is left without a place"),
    "one pole too few": ([row("1-3", "1", "240")], "has 2 poles and 1 terminals"),
    "one pole too many": ([row("1", "1-3")], "has 1 poles and 2 terminals"),
    "outside the panel": ([row("1", "13")], "the panel has no terminal 13"),
    "a full width and a half": ([row("1", "4"), row("4a", "4a")], "space 4: a full-width breaker and a half"),
    "two full widths": ([row("1", "4"), row("4", "4")], "terminal 4: two breakers in one place"),
    "two halves of one kind": ([row("1a", "4a"), row("4a", "4a")], "terminal 4a: two breakers in one place"),
    "halves of two bodies": ([row("1a", "4a"), row("4b", "4b")], "space 4: halves of two breaker bodies"),
    "a new two-pole across the panel": ([row("", "1-4", "240")], "no two-pole breaker fits"),
    "a new two-pole with a gap": ([row("", "1-7", "240")], "no two-pole breaker fits"),
    "a new half": ([row("", "1a"), row("1b", "1b")], "is not of the width"),
    "a full width on a half": ([row("1", "3a")], "is not of the width"),
    "a half on a full width": ([row("1a", "1")], "is not of the width"),
    "a two-pole turned without a neutral": ([row("1-3", "3-1", "240")], "has no neutral, so that turning it"),
    "a fixed one moved": ([row("1", "3", **FIXED)], "stays where it is landed and was moved"),
    "a device moved": ([row("1", "3", role=Role.SURGE)], "stays where it is landed and was moved"),
    "a two-pole moved": ([row("1-3", "2-4", "240")], "a landed two-pole circuit was moved"),
    "a two-pole turned without leave": ([row("1-3", "3-1", "120/240")], "without --turn-240"),
    "a tandem taken apart": ([row("1a", "1a"), row("1b", "4b"), row("4a", "4a")], "one breaker body was taken apart"),
    "a tandem turned over": ([row("1a", "1b"), row("1b", "1a")], "one breaker body was taken apart"),
    "a double tap taken apart": ([row("1", "1"), row("1", "3")], "one breaker body was taken apart"),
    "a half where none was": ([row("1a", "3a")], "a half-width breaker in a space that is not known to take one"),
    "tied ones that part": ([row("1", "4", **TIED), row("5", "12", **TIED)], "are tied and did not move together"),
    "one of two tied": ([row("1", "1", **TIED), row("3", "5", **TIED)], "are tied and did not move together"),
    "tied ones not brought together": ([row("1", "1", **TIED), row("", "4", **TIED)], "do not stand in one line"),
    "tied ones with a gap": ([row("1", "1", **TIED), row("", "5", **TIED)], "do not stand in one line"),
    "a pair put on one leg": (
        [row("1", "1", **PAIR), row("3", "5", **PAIR)],
        "the plan creates an error (shared-neutral-one-leg)",
    ),
    "a pair parted": ([row("1", "1", **PAIR), row("3", "4", **PAIR)], "are not next to each other in one column"),
    "a pair apart that moves": ([row("1", "2", **PAIR), row("4", "3", **PAIR)], "are not next to each other"),
    "a new pair on one leg": ([row("", "1", **PAIR), row("", "2", **PAIR)], "both hots are on one leg"),
    "a pair on one leg, not mended": ([row("1", "1", **PAIR), row("5", "5", **PAIR)], "both hots are on one leg"),
}


@pytest.mark.parametrize(("rows", "words"), BAD.values(), ids=BAD)
def test_what_may_not_be_done_is_named(judge: Judge, rows: list[Row], words: str) -> None:
    assert any(words in each for each in judge(rows))


def test_every_fault_is_told_at_once(judge: Judge) -> None:
    assert len(judge([row("1", "2", **FIXED), row("3", "6", is_fixed=True), row("5-7", "8-10", "240")])) == 3


@pytest.mark.parametrize(
    ("rows", "taken_out", "words"),
    [
        ([row("1", "", **SPARE)], ["c1"], ""),
        ([row("1", "")], ["c1"], "is listed as taken out and is no spare breaker"),
        ([row("", "", **SPARE)], ["c1"], "is listed as taken out and is no spare breaker"),
        ([row("1", "1", **SPARE)], ["c1"], "is listed as taken out and has a place all the same"),
        ([row("1", "", role=Role.SPARE, is_fixed=True)], ["c1"], "is fixed and is taken out"),
        ([row("1a", "", **SPARE), row("1b", "1b")], ["c1"], "one breaker body was taken apart"),
        ([row("1", "1")], ["c9"], "c9 is no circuit of the inventory"),
    ],
    ids=["a spare", "a load", "a spare not landed", "one with a place", "a fixed one", "half a tandem", "a stranger"],
)
def test_only_spares_that_were_there_are_taken_out(judge: Judge, rows, taken_out, words) -> None:
    details = judge(rows, taken_out=taken_out)
    assert len(details) == bool(words)
    assert words in "".join(details)


def test_a_landing_of_no_circuit_is_named(installation, circuit) -> None:
    as_left = {"c1": parse_landing("1"), "c2": parse_landing("3")}
    details = verify_arrangement(installation(circuit("c1", "1")), Options(), as_left)
    assert details == ["c2 is no circuit of the inventory"]


@dataclass(frozen=True)
class Limit:
    """One landing that a panel or a wish allows and forbids: passes with `allowed`, fails with `forbidden`."""

    rows: list[Row]
    allowed: dict[str, Any]
    forbidden: dict[str, Any]
    words: str


LIMITS = {
    "reserved": Limit([row("1", "4")], {"reserved": frozenset({6})}, {"reserved": frozenset({4})}, "4 is reserved"),
    "turning": Limit(
        [row("1-3", "3-1", "120/240")], {"options": TURNING}, {"options": Options()}, "was turned over without"
    ),
    "tandem spaces": Limit(
        [row("1a", "3a")],
        {"tandem_spaces": frozenset({1, 3})},
        {"tandem_spaces": frozenset({1, 4})},
        "not known to take one",
    ),
    "in phase": Limit([row("", "1", **PAIR), row("", "2", **PAIR)], {"system": "120"}, {}, "both hots are on one leg"),
    "plug-on": Limit(
        [row("1", "4", **PLUG_ON)],
        {"plug_on_neutral": frozenset({1, 4})},
        {"plug_on_neutral": frozenset({1, 3})},
        "away from the neutral bar",
    ),
    "plug-on, new": Limit(
        [row("", "4", **PLUG_ON)],
        {"plug_on_neutral": frozenset({4})},
        {"plug_on_neutral": frozenset({1})},
        "away from the neutral bar",
    ),
    "gfci found at the bar": Limit(
        [row("1", "4", **GFCI)],
        {"plug_on_neutral": frozenset({3})},
        {"plug_on_neutral": frozenset({1})},
        "away from the neutral bar",
    ),
    "bolt-on": Limit(
        [row("1", "4")], {"bolt_on": frozenset({1, 4})}, {"bolt_on": frozenset({1})}, "do not fit each other's spaces"
    ),
    "plugged": Limit([row("1", "4")], {}, {"bolt_on": frozenset({4})}, "do not fit each other's spaces"),
    "crossing": Limit(
        [row("1", "4", slack_in=13.0)], {}, {"crossing_in": 12.5}, "13.5 in away, and its conductor reaches 13 in"
    ),
    "short": Limit(
        [row("1", "3", slack_in=0.0)], {"options": SPLICING}, {"options": Options()}, "1 in away, and its conductor"
    ),
    "landings": Limit(
        [row("1", "3"), row("3", "1")],
        {"options": Options(max_landings=2)},
        {"options": Options(max_landings=1)},
        "2 landings are changed and at most 1 may be",
    ),
    "stab": Limit(
        [row("1", "4", breaker_a=60.0), row("3", "3", breaker_a=50.0)],
        {"stab_a": 110.0},
        {"stab_a": 109.0},
        "row 2: handle ratings of 110 A where stab_a allows 109 A, with c2 (3), c1 (1 as found, 4 as left) there",
    ),
}


@pytest.mark.parametrize("limit", LIMITS.values(), ids=LIMITS)
def test_a_limit_is_kept(judge: Judge, limit: Limit) -> None:
    assert judge(limit.rows, **limit.allowed) == []
    assert [limit.words in each for each in judge(limit.rows, **limit.forbidden)].count(True) == 1


def test_what_stood_in_a_reserved_space_may_stay(judge: Judge) -> None:
    assert judge([row("1", "1")], reserved=frozenset({1})) == []


def test_a_pair_in_phase_may_be_split(judge: Judge) -> None:
    assert judge([row("1", "1", **PAIR), row("3", "4", **PAIR)], system="120") == []


@pytest.mark.parametrize(
    ("second", "is_well"),
    [
        (row("2", "2", breaker_a=60.0), True),
        (row("2", "4", breaker_a=60.0), True),
        (row("4", "2", breaker_a=60.0), False),
    ],
    ids=["as it was", "lighter", "arrived"],
)
def test_a_row_above_the_stab_limit_may_not_get_heavier(judge: Judge, second: Row, is_well: bool) -> None:
    details = judge([row("1", "1", breaker_a=60.0, is_fixed=True), second], stab_a=100.0)
    assert (not any("stab_a allows 100 A" in each for each in details)) == is_well


def test_a_row_above_the_stab_limit_may_get_lighter(judge: Judge) -> None:
    rows = [row("1", "1", breaker_a=110.0, is_fixed=True), row("2", "4", breaker_a=20.0)]
    assert judge(rows, stab_a=100.0) == []


def test_a_breaker_of_unknown_rating_adds_nothing_to_a_stab(judge: Judge) -> None:
    rows = [row("1", "1", breaker_a=110.0, is_fixed=True), row("4", "2", breaker_a=None)]
    assert judge(rows, stab_a=100.0) == []


def test_an_error_that_strikes_fewer_circuits_than_before_is_not_new(judge: Judge) -> None:
    # Two halves stand where none may; one of them is taken out to mend a pair.
    rows = [row("1a", "3", **PAIR), row("1b", "1b"), row("5", "5", **PAIR)]
    assert judge(rows, tandem_spaces=frozenset({2})) == []


def test_two_circuits_under_one_breaker_have_one_handle(judge: Judge) -> None:
    rows = [row("1", "3", breaker_a=60.0), row("1", "3", breaker_a=60.0), row("4", "4", breaker_a=40.0)]
    assert judge(rows, stab_a=100.0) == []


def test_a_spare_and_a_new_circuit_count_no_landing(judge: Judge) -> None:
    rows = [row("1", "4", **SPARE), row("", "6"), row("3", "3")]
    assert judge(rows, Options(max_landings=0)) == []


def test_the_re_check_knows_nothing_of_the_model_that_it_judges() -> None:
    code = "import balancer.arrange.verify, sys; print(*sys.modules)"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    assert "balancer.arrange.verify_moves" in loaded
    model = ("ortools", *(f"balancer.arrange.{name}" for name in ("seats", "seating", "legs", "search", "leg_model")))
    assert [name for name in model if name in loaded] == []
