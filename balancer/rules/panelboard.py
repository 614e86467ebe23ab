"""The panelboard itself: what its spaces, stabs, bus and main are made for."""

from __future__ import annotations

from collections.abc import Iterator

from balancer.panel import Circuit, Role, Terminal
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel
from balancer.rules.rule import Observation, Rule

_BUS_SHARE_WITH_SOURCE = 1.2
"""Main and source breakers at opposite ends of the bus, as a share of the bus: NEC 2023, 705.12, from memory."""


def _tandem_not_allowed(landed: LandedPanel) -> Iterator[Observation]:
    allowed = landed.panel.tandem_spaces
    if allowed is None:
        return
    for space, circuits in _halves_by_space(landed).items():
        if space not in allowed:
            message = (
                f"space {space}: half-width breakers ({landed.names(circuits)}) in a space that does not take them. "
                "The panel's label says where tandems fit (tandem_spaces): move them there, or use full-size breakers."
            )
            yield Observation(circuits, message)


def _halves_by_space(landed: LandedPanel) -> dict[int, tuple[Circuit, ...]]:
    spaces: dict[int, tuple[Circuit, ...]] = {}
    for terminal, circuits in landed.by_terminal.items():
        if terminal.half:
            spaces[terminal.space] = spaces.get(terminal.space, ()) + circuits
    return spaces


def _above_stab_limit(landed: LandedPanel) -> Iterator[Observation]:
    limit_a = landed.panel.stab_a
    if limit_a is None:
        return
    for row in range(1, landed.panel.rows + 1):
        handles = _handles_in_row(landed, row)
        total_a = sum(_handle_rating_a(circuits) for circuits in handles.values())
        if total_a > limit_a:
            spaces = " and ".join(str(space.number) for space in landed.panel.spaces if space.row == row)
            circuits = tuple(dict.fromkeys(circuit for circuits in handles.values() for circuit in circuits))
            message = (
                f"spaces {spaces}: the handle ratings of {landed.names(circuits)} add up to {total_a:g} A on one stab; "
                f"the panel's maker allows {limit_a:g} A (stab_a). Move one of them to another row."
            )
            yield Observation(circuits, message)


def _handles_in_row(landed: LandedPanel, row: int) -> dict[Terminal, tuple[Circuit, ...]]:
    by_number = landed.panel.by_number
    return {
        terminal: circuits for terminal, circuits in landed.by_terminal.items() if by_number[terminal.space].row == row
    }


def _handle_rating_a(circuits: tuple[Circuit, ...]) -> float:
    # Two circuits under one breaker have one handle.
    return max(circuit.breaker_a or 0.0 for circuit in circuits)


def _more_than_it_holds(landed: LandedPanel) -> Iterator[Observation]:
    """Count poles; a spare breaker is left out, since it can make room."""
    panel = landed.panel
    half_spaces = panel.tandem_spaces
    if half_spaces is None:
        half_spaces = frozenset(_halves_by_space(landed))
    capacity = sum(1 + (space.number in half_spaces) for space in panel.spaces if space.number not in panel.reserved)
    in_use = sum(any(c.role is not Role.SPARE for c in circuits) for circuits in landed.by_terminal.values())
    waiting = tuple(circuit for circuit in landed.waiting if circuit.role is not Role.SPARE)
    needed = in_use + sum(circuit.poles for circuit in waiting)
    if needed <= capacity:
        return
    message = (
        f"{needed} poles, but the panel holds {capacity}: {len(panel.spaces)} spaces, {len(panel.reserved)} of them "
        f"reserved, and {len(half_spaces)} that take two half-width breakers. A two-pole breaker counts as two. "
        "Leave circuits out, or feed some from a subpanel."
    )
    yield Observation(waiting, message, None if panel.tandem_spaces is not None else Severity.WARNING)


def _main_above_bus(landed: LandedPanel) -> Iterator[Observation]:
    panel = landed.panel
    if panel.bus_a is None:
        return
    if panel.main_a is not None and panel.main_a > panel.bus_a:
        message = (
            f"the main breaker (main_a) is {panel.main_a:g} A on a bus of {panel.bus_a:g} A (bus_a), which it cannot "
            f"protect. Check both labels; the breaker ahead of the bus may be {panel.bus_a:g} A at most."
        )
        yield Observation((), message)
    if panel.main_a is None:
        yield from _backfed_above_bus(landed, panel.bus_a)


def _backfed_above_bus(landed: LandedPanel, bus_a: float) -> Iterator[Observation]:
    for circuit, rating_a in _backfed(landed):
        if rating_a > bus_a:
            message = (
                f"{landed.name(circuit)}: a backfed breaker of {rating_a:g} A on a bus of {bus_a:g} A (bus_a). If it "
                "is the main, it does not protect the bus: check both labels, and enter main_a where it is not."
            )
            yield Observation((circuit,), message, Severity.NOTICE)


def _sources_on_bus(landed: LandedPanel) -> Iterator[Observation]:
    """Notice a source beside the main; behind an interlock it never runs together with it."""
    main_a, bus_a = landed.panel.main_a, landed.panel.bus_a
    if main_a is None or bus_a is None or any(circuit.role is Role.INTERLOCK for circuit in landed.circuits):
        return
    # A backfed breaker of the main's own rating is taken for the main itself.
    sources = [(circuit, rating_a) for circuit, rating_a in _backfed(landed) if rating_a != main_a]
    total_a = main_a + sum(rating_a for _, rating_a in sources)
    if sources and total_a > bus_a:
        circuits = tuple(circuit for circuit, _ in sources)
        message = (
            f"{landed.names(circuits)}: main and backfed breakers add up to {total_a:g} A on a bus of {bus_a:g} A. For "
            "a source that runs together with the utility (solar, battery) up to "
            f"{_BUS_SHARE_WITH_SOURCE * bus_a:g} A is allowed, with its breaker at the end opposite the main, and "
            "125 % of its output may count in place of the breaker. Behind an interlock this does not matter."
        )
        yield Observation(circuits, message)


def _backfed(landed: LandedPanel) -> list[tuple[Circuit, float]]:
    return [(c, c.breaker_a) for c in landed.circuits if c.role is Role.BACKFED and c.breaker_a is not None]


def _off_the_neutral_bar(landed: LandedPanel) -> Iterator[Observation]:
    allowed = landed.panel.plug_on_neutral
    for circuit in landed.landed:
        is_plug_on = "plug on neutral" in circuit.breaker_type.casefold().replace("-", " ")
        if allowed and is_plug_on and not all(terminal.space in allowed for terminal in landed.landing(circuit)):
            message = (
                f"{landed.name(circuit)}: a plug-on neutral breaker away from the plug-on bar (plug_on_neutral): its "
                "neutral clip hangs free and its protection does not work. Move it to the bar, or use one with a "
                "pigtail."
            )
            yield Observation((circuit,), message)


PANELBOARD_RULES = (
    Rule("tandem-not-allowed", Severity.ERROR, "NEC 2023, 110.3(B) (from memory) and 408.54", _tandem_not_allowed),
    Rule("stab-limit", Severity.ERROR, "Manufacturer's limit; NEC 2023, 110.3(B) (from memory)", _above_stab_limit),
    Rule("more-poles-than-the-panel-holds", Severity.ERROR, "NEC 2023, 408.54", _more_than_it_holds),
    Rule("main-above-bus", Severity.ERROR, "NEC 2023, 408.36", _main_above_bus),
    Rule("plug-on-neutral-away-from-bar", Severity.WARNING, "NEC 2023, 110.3(B) (from memory)", _off_the_neutral_bar),
    Rule(
        "sources-on-the-bus",
        Severity.NOTICE,
        "NEC 2023, 705.12(B)(2) (from memory); 2020: 705.12(B)(3); 2017: 705.12(B)(2)(3)",
        _sources_on_bus,
    ),
)
