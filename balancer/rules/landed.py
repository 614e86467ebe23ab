"""The circuits on their terminals in one arrangement: what the rules look at."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from functools import cached_property

from balancer.panel import Circuit, Installation, Landing, Leg, Panel, Role, Terminal, format_landing

_QUAD_HANDLES = (("b", "a"), ("a", "b"))


class LandedPanel:
    """A panel with its circuits landed as an arrangement says.

    Circuits stand in the order of their terminals, those without a place last by label, so that no finding depends on
    the order of the inventory's rows. A circuit that was landed as found and is absent from the arrangement has been
    taken out and is left aside.
    """

    def __init__(self, installation: Installation, arrangement: Mapping[str, Landing]) -> None:
        self.panel: Panel = installation.panel
        self._arrangement = arrangement
        ordered = sorted(installation.circuits, key=lambda circuit: (self.landing(circuit), circuit.label))
        self.landed = tuple(circuit for circuit in ordered if self.landing(circuit))
        self.waiting = tuple(circuit for circuit in ordered if not self.landing(circuit) and not circuit.is_landed)

    @property
    def circuits(self) -> tuple[Circuit, ...]:
        """Every circuit that is landed or waits for a place."""
        return self.landed + self.waiting

    @property
    def loads(self) -> tuple[Circuit, ...]:
        """Every load and feeder that is landed or waits for a place."""
        return tuple(circuit for circuit in self.circuits if circuit.role in (Role.LOAD, Role.FEEDER))

    def landing(self, circuit: Circuit) -> Landing:
        """Terminals of a circuit; empty while it has no place."""
        return self._arrangement.get(circuit.label, ())

    def leg(self, circuit: Circuit) -> Leg:
        """Leg of a circuit's first conductor."""
        return self.panel.leg(self.landing(circuit)[0].space)

    @cached_property
    def by_terminal(self) -> dict[Terminal, tuple[Circuit, ...]]:
        """The circuits on every terminal in use, by space."""
        terminals = sorted({terminal for circuit in self.landed for terminal in self.landing(circuit)})
        return {
            terminal: tuple(circuit for circuit in self.landed if terminal in self.landing(circuit))
            for terminal in terminals
        }

    def are_handles_adjacent(self, upper: Terminal, lower: Terminal) -> bool:
        """Whether two single poles, either way round, can be tied: full-size ones in line or halves of one quad."""
        return self._is_next_down(upper, lower) or self._is_next_down(lower, upper)

    def _is_next_down(self, upper: Terminal, lower: Terminal) -> bool:
        below = self.panel.below(upper.space)
        halves = (upper.half, lower.half)
        return below is not None and below.number == lower.space and (halves == ("", "") or halves in _QUAD_HANDLES)

    def name(self, circuit: Circuit) -> str:
        """Name a circuit and where it is landed, for messages."""
        landing = self.landing(circuit)
        if not landing:
            return f"{circuit.label} (not landed)"
        return f"{circuit.label} (space{'s' if len(landing) > 1 else ''} {format_landing(landing)})"

    def names(self, circuits: Iterable[Circuit]) -> str:
        """Name several circuits: one, two and three."""
        return join_words([self.name(circuit) for circuit in circuits])


def groups_by(circuits: Iterable[Circuit], label: Callable[[Circuit], str]) -> tuple[tuple[Circuit, ...], ...]:
    """Collect circuits that carry the same label in a column, whatever its case; blank ones are left aside."""
    groups: dict[str, list[Circuit]] = {}
    for circuit in circuits:
        if label(circuit):
            groups.setdefault(label(circuit).casefold(), []).append(circuit)
    return tuple(tuple(group) for group in groups.values())


def join_words(words: list[str]) -> str:
    """Join words as one writes them: one, two and three."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"
