"""Voltages at the panel when the neutral peaks, where the panel file describes the service."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from rich.console import Group, RenderableType

from balancer.electrical.network import LostNeutral, lost_neutral, service_voltages
from balancer.electrical.scenarios import Scenarios
from balancer.electrical.three_wire import ServiceVoltages
from balancer.errors import InfeasibleError
from balancer.panel import Installation, Landing
from balancer.reports.text import figures_table, format_number, paragraph

LOST_NEUTRAL_CAUTION = (
    "Balancing does not make a lost neutral safe: one small load opposite a large one sees nearly full line voltage."
)


@dataclass(frozen=True)
class PanelVoltages:
    """Voltages of one arrangement in one scenario; `problem` says why there are none."""

    service: ServiceVoltages | None
    lost: LostNeutral | None
    problem: str = ""


def panel_voltages(
    installation: Installation, scenarios: Scenarios, arrangement: Mapping[str, Landing], scenario: int
) -> PanelVoltages | None:
    """Work out the voltages of one scenario; None where the panel file gives no impedances."""
    try:
        service = service_voltages(installation, scenarios, arrangement, scenario)
    except InfeasibleError as error:
        return PanelVoltages(None, None, str(error))
    if service is None:
        return None
    return PanelVoltages(service, lost_neutral(installation, scenarios, arrangement, scenario))


def voltages_block(columns: Sequence[tuple[str, PanelVoltages | None]]) -> Group | None:
    """Show voltages side by side under their headings; None where there are none."""
    known = [(heading, each.service, each.lost) for heading, each in columns if each is not None and each.service]
    blocks: list[RenderableType] = [
        paragraph(f"{heading.capitalize()}: {each.problem}.") for heading, each in columns if each and each.problem
    ]
    if known:
        table = figures_table("", *(heading for heading, _, _ in known))
        for cells in zip(*(_rows(service, lost) for _, service, lost in known), strict=True):
            table.add_row(cells[0][0], *(figure for _, figure in cells))
        blocks += [table, paragraph(LOST_NEUTRAL_CAUTION)]
    return Group(*blocks) if blocks else None


def _rows(service: ServiceVoltages, lost: LostNeutral | None) -> Iterator[tuple[str, str]]:
    yield "Leg A to neutral", f"{service.leg_a_v:.1f} V"
    yield "Leg B to neutral", f"{service.leg_b_v:.1f} V"
    yield "Light leg above (below: -) 120 V", f"{service.light_leg_rise_v:+.1f} V"
    yield "Neutral's shift", f"{format_number(service.neutral_shift_v)} V"
    yield "Heat in the neutral conductor", f"{format_number(service.neutral_loss_w)} W"
    yield "If the neutral is lost, highest on a 120 V load", "-" if lost is None else f"{lost.highest_on_load_v:.0f} V"
