"""Made-up circuits, panels, installations and scenarios for property tests.

Amps come in tenths, as a clamp meter shows them, so that a failing example is easy to read and to draw.
"""

from dataclasses import dataclass, field

import numpy as np
from hypothesis import strategies as st

from balancer.electrical.scenario_sets import share_scenarios
from balancer.electrical.scenarios import Scenarios
from balancer.panel import (
    Circuit,
    Installation,
    Landing,
    Leg,
    Load,
    Panel,
    Pole,
    PowerFactor,
    Role,
    Supply,
    SupplySystem,
    Terminal,
    Volts,
    ordinary_spaces,
)

BREAKERS = ((15.0, "standard"), (20.0, "standard"), (20.0, "gfci"), (None, ""))
SHARES = (0.0, 0.25, 0.5, 0.75, 1.0)


def amps(highest: float = 16.0) -> st.SearchStrategy[float]:
    """Load amps in tenths, from 0.1 A."""
    return st.integers(1, round(highest * 10)).map(lambda tenths: tenths / 10)


def power_factors() -> st.SearchStrategy[PowerFactor]:
    lagging = st.sampled_from([1.0, 0.98, 0.95, 0.9, 0.85, 0.8, 0.7]).map(PowerFactor)
    return st.one_of(lagging, st.just(PowerFactor(0.95, is_leading=True)))


@st.composite
def loads(draw: st.DrawFn, volts: Volts) -> Load:
    if volts is Volts.V120:
        return Load(neutral_a=draw(amps()), neutral_pf=draw(power_factors()))
    line_a, line_pf = draw(amps(30.0)), draw(power_factors())
    if volts is not Volts.V120_240:
        return Load(line_a=line_a, line_pf=line_pf)
    pole = draw(st.sampled_from([Pole.FIRST, Pole.SECOND, None]))
    return Load(line_a=line_a, line_pf=line_pf, neutral_a=draw(amps(6.0)), neutral_pole=pole)


@st.composite
def circuits(draw: st.DrawFn, label: str, landing: Landing = (), volts: Volts = Volts.V120) -> Circuit:
    breaker_a, breaker_type = draw(st.sampled_from(BREAKERS))
    return Circuit(
        label=label,
        landing=landing,
        volts=volts,
        load=draw(loads(volts)),
        breaker_a=breaker_a,
        breaker_type=breaker_type,
        is_neutral_checked=draw(st.booleans()),
        is_fixed=bool(landing) and draw(st.integers(0, 5)) == 0,
    )


def supplies() -> st.SearchStrategy[Supply]:
    return st.sampled_from(
        [
            Supply(),
            Supply(system=SupplySystem.WYE),
            Supply(system=SupplySystem.WYE, leading_leg=Leg.A),
            Supply(system=SupplySystem.IN_PHASE),
        ]
    )


@st.composite
def panels(draw: st.DrawFn, *, supply: Supply | None = None, most_spaces: int = 12) -> Panel:
    """Ordinary panels; the supply is 120/240 V unless another is asked for."""
    spaces = 2 * draw(st.integers(2, most_spaces // 2))
    return Panel(spaces=ordinary_spaces(spaces), supply=supply or Supply())


@dataclass
class _Wall:
    """A panel that is being filled."""

    panel: Panel
    circuits: list[Circuit] = field(default_factory=list)
    taken: set[int] = field(default_factory=set)

    @property
    def next_label(self) -> str:
        return f"c{len(self.circuits) + 1}"

    def pair_from(self, space: int) -> tuple[int, int] | None:
        """The two-pole seat whose upper space this is, where it is free."""
        seat = next((seat for seat in self.panel.two_pole_seats if seat[0] == space), None)
        return None if seat is None or self.taken & set(seat) else seat

    def add(self, circuit: Circuit) -> None:
        self.circuits.append(circuit)
        self.taken.update(terminal.space for terminal in circuit.landing)


@st.composite
def installations(draw: st.DrawFn, *, supply: Supply | None = None, most_spaces: int = 12) -> Installation:
    """Panels with single-pole and two-pole circuits, tandem bodies, spares and vacant spaces, all landed."""
    wall = _Wall(draw(panels(supply=supply, most_spaces=most_spaces)))
    system = wall.panel.supply.system
    volts_of_two_poles = [Volts.V240, Volts.V120_240] if system is SupplySystem.SPLIT else []
    if system is SupplySystem.WYE:
        volts_of_two_poles = [Volts.V208]
    for space in draw(st.permutations(range(1, len(wall.panel.spaces) + 1))):
        if space not in wall.taken:
            _fill(draw, wall, space, volts_of_two_poles)
    if not wall.circuits:
        wall.add(draw(circuits(wall.next_label, (Terminal(1),))))
    return Installation(panel=wall.panel, circuits=tuple(wall.circuits))


def _fill(draw: st.DrawFn, wall: _Wall, space: int, volts_of_two_poles: list[Volts]) -> None:
    kind = draw(st.sampled_from(["single", "single", "single", "two-pole", "tandem", "spare", "vacant"]))
    seat = wall.pair_from(space)
    if kind == "two-pole" and seat and volts_of_two_poles:
        landing = tuple(Terminal(number) for number in seat)
        wall.add(draw(circuits(wall.next_label, landing, draw(st.sampled_from(volts_of_two_poles)))))
    elif kind == "tandem":
        for half in "ab":
            wall.add(draw(circuits(wall.next_label, (Terminal(space, half),))))
    elif kind == "spare":
        wall.add(Circuit(label=wall.next_label, landing=(Terminal(space),), volts=Volts.V120, role=Role.SPARE))
    elif kind != "vacant":
        wall.add(draw(circuits(wall.next_label, (Terminal(space),))))


@st.composite
def scenario_sets(draw: st.DrawFn, installation: Installation, most: int = 5) -> Scenarios:
    """Up to `most` scenarios of random shares of full load."""
    count = draw(st.integers(1, most))
    row = st.lists(st.sampled_from(SHARES), min_size=len(installation.circuits), max_size=len(installation.circuits))
    shares = draw(st.lists(row, min_size=count, max_size=count))
    names = [f"scenario {number}" for number in range(1, count + 1)]
    return share_scenarios(installation, names, np.array(shares))
