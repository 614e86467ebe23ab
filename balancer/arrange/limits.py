"""What the panel, a breaker and its conductor allow: where single circuits may be landed at all."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from enum import StrEnum

from balancer.arrange.placements import longest_reach_in
from balancer.arrange.results import Options
from balancer.panel import Circuit, Installation, Landing, Panel


class Hold(StrEnum):
    """Kinds of constraints that keep a unit from a seat; the report names them when nothing fits."""

    FIXED = "fixed"
    REACH = "slack_in"
    RESERVED = "reserved"
    TANDEM = "tandem_spaces"
    PLUG_ON = "plug_on_neutral"
    BOLT_ON = "bolt_on"
    STAB = "stab_a"


@dataclass
class Limits:
    """Judges landings by one installation's constraints, but for those that are left aside as `ignored`."""

    installation: Installation
    options: Options
    ignored: frozenset[tuple[Hold, str]]
    _tandem_spaces: frozenset[int] = field(init=False)

    def __post_init__(self) -> None:
        halves = {t.space for c in self.installation.circuits for t in c.landing if t.half}
        # Nobody said where half-width breakers fit: only where one is already is it known to.
        allowed = self.panel.tandem_spaces
        self._tandem_spaces = frozenset(halves) if allowed is None else allowed

    @property
    def panel(self) -> Panel:
        """The panel that it is about."""
        return self.installation.panel

    def is_fixed(self, circuit: Circuit) -> bool:
        """Whether a circuit stays where it is landed."""
        return (circuit.is_fixed or circuit.role.is_device) and (Hold.FIXED, circuit.label) not in self.ignored

    def tandems_fit(self, landings: Mapping[str, Landing]) -> bool:
        """Keep half-width breakers where they fit; one found elsewhere must go, where it can."""
        halves = [t.space for landing in landings.values() for t in landing if t.half]
        return self._spaces_hold(halves, self._tandem_spaces, Hold.TANDEM)

    def may_land(self, circuit: Circuit, landing: Landing) -> bool:
        """Whether a circuit that moves may be landed there."""
        spaces = [terminal.space for terminal in landing]
        return (
            self._is_open(spaces)
            and self._is_within_reach(circuit, landing)
            and self._plug_on_fits(circuit, spaces)
            and self._bolt_on_fits(circuit, spaces)
        )

    def _is_open(self, spaces: Sequence[int]) -> bool:
        if (Hold.RESERVED, "") in self.ignored:
            return True
        return not any(space in self.panel.reserved for space in spaces)

    def _spaces_hold(self, spaces: Sequence[int], allowed: frozenset[int], hold: Hold) -> bool:
        return (hold, "") in self.ignored or all(space in allowed for space in spaces)

    def _is_within_reach(self, circuit: Circuit, landing: Landing) -> bool:
        if self.options.splice or (Hold.REACH, circuit.label) in self.ignored:
            return True
        if circuit.slack_in is None or not circuit.landing or circuit.hot_conductors == 0:
            return True
        return longest_reach_in(self.panel, circuit.landing, landing) <= circuit.slack_in

    def _plug_on_fits(self, circuit: Circuit, spaces: Sequence[int]) -> bool:
        """Keep a plug-on-neutral breaker beside the neutral bar.

        A GFCI or AFCI breaker found at the bar is taken for one unless its type says ``pigtail``.
        """
        allowed = self.panel.plug_on_neutral
        kind = circuit.breaker_type.casefold()
        was_at_bar = circuit.is_landed and all(t.space in allowed for t in circuit.landing)
        needs_bar = "plug-on" in kind or "plug on" in kind
        needs_bar = needs_bar or (circuit.has_gfci_or_afci and was_at_bar and "pigtail" not in kind)
        return not (needs_bar and allowed) or self._spaces_hold(spaces, allowed, Hold.PLUG_ON)

    def _bolt_on_fits(self, circuit: Circuit, spaces: Sequence[int]) -> bool:
        """Keep bolted breakers on bolted spaces and plugged ones on the others; a new one is bought to fit."""
        if not circuit.is_landed or (Hold.BOLT_ON, "") in self.ignored:
            return True
        was_bolted = circuit.landing[0].space in self.panel.bolt_on
        return all((space in self.panel.bolt_on) == was_bolted for space in spaces)
