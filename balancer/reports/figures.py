"""The figures of a panel side by side, what they rest on, and what makes them."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from rich.table import Table
from rich.text import Text

from balancer.arrange.explain import Contribution, PeakExplanation
from balancer.electrical.phasors import Peaks
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.panel import Installation, SupplySystem
from balancer.reports.text import count_of, figures_table, format_amps, format_number, visible

_KINDS = {
    ScenarioKind.CONNECTED: "connected loads, everything on (planning assumptions)",
    ScenarioKind.PROFILES: "use profiles (planning assumptions)",
    ScenarioKind.SCENARIOS: "the scenario file, shares of full load as given there",
    ScenarioKind.READINGS: "readings, measured",
}

_SYSTEMS = {
    SupplySystem.SPLIT: "120/240 V, legs 180 degrees apart",
    SupplySystem.WYE: "120/208 V, two legs of a wye, 120 degrees apart: the neutral cancels only partly",
    SupplySystem.IN_PHASE: "one 120 V source on both legs, in phase: the neutral carries the sum",
}


def basis_lines(installation: Installation, scenarios: Scenarios) -> list[str]:
    """Say what the figures rest on."""
    averages = " All figures are averages over an interval, not moments." if scenarios.are_averages else ""
    supply = installation.panel.supply
    system = _SYSTEMS[supply.system]
    if supply.system is SupplySystem.WYE and supply.leading_leg is None:
        system += "; rotation not known, the worse of both counts"
    noun = "interval" if scenarios.kind is ScenarioKind.READINGS else "scenario"
    return [
        f"Supply: {system}.",
        f"Loads: {_KINDS[scenarios.kind]}; {count_of(len(scenarios), noun)}.{averages}",
        *scenarios.notes,
        *installation.notices,
    ]


@dataclass(frozen=True)
class PeaksColumn:
    """One column of the figures: its heading, its peaks and, where there are any, the averages' own peak [A]."""

    heading: str
    peaks: Peaks
    averages_peak_a: float | None


def peaks_table(columns: Sequence[PeaksColumn]) -> Table:
    """Show the figures as found and as left side by side, or those there are."""
    table = figures_table("", *(column.heading for column in columns))
    for cells in zip(*(_peak_rows(column) for column in columns), strict=True):
        table.add_row(cells[0][0], *(figure for _, figure in cells))
    return table


def _peak_rows(column: PeaksColumn) -> Iterator[tuple[str, str]]:
    peaks = column.peaks
    yield "Peak leg A", format_amps(peaks.leg_a.value_a)
    yield "Peak leg B", format_amps(peaks.leg_b.value_a)
    yield "Peak heavy leg", format_amps(peaks.heavy_leg.value_a)
    yield "Peak imbalance of the legs", format_amps(peaks.imbalance.value_a)
    yield "  when the heavy leg peaks, of the legs' mean", f"{peaks.imbalance_pct:.0f} %"
    yield "Peak neutral", format_amps(peaks.neutral.value_a)
    if column.averages_peak_a is not None:
        yield "  of the averages alone", format_amps(column.averages_peak_a)
    yield "Mean neutral", format_amps(peaks.mean_neutral_a)
    yield "Largest possible neutral", format_amps(peaks.largest_possible_neutral_a)


def largest_possible_text(installation: Installation) -> str:
    """Explain the largest possible neutral, beside the main's rating where that is known."""
    main_a = installation.panel.main_a
    beside = "" if main_a is None else f" (main: {main_a:g} A)"
    return (
        f"Largest possible neutral{beside}: any choice of the loads running at full load. It is an upper bound; the "
        "size the code asks of a neutral is the calculated load of NEC 2023, 220.61, another matter."
    )


def when_lines(scenarios: Scenarios, name: str, peaks: Peaks) -> list[str]:
    """Say in which scenarios the neutral and the heavy leg peak."""
    neutral, heavy = (scenarios.names[peak.scenario] for peak in (peaks.neutral, peaks.heavy_leg))
    if neutral == heavy:
        return [f"{name}, the neutral and the heavy leg peak in: {neutral}."]
    return [f"{name}, the neutral peaks in: {neutral}.", f"{name}, the heavy leg peaks in: {heavy}."]


def contributions_table(explanation: PeakExplanation) -> Table:
    """Show which circuits make the peak neutral, leg beside leg."""
    table = Table(box=None, padding=(0, 2, 0, 0), pad_edge=False, header_style="bold")
    for leg in "AB":
        table.add_column(Text(f"on leg {leg}"), overflow="fold", ratio=1)
        table.add_column(Text("A", justify="right"), justify="right", no_wrap=True)
    left = list(_contribution_rows(explanation.leg_a, explanation.rest_count_a, explanation.rest_a_a))
    right = list(_contribution_rows(explanation.leg_b, explanation.rest_count_b, explanation.rest_b_a))
    empty = ("", "")
    for index in range(max(len(left), len(right))):
        cells = (left[index] if index < len(left) else empty) + (right[index] if index < len(right) else empty)
        table.add_row(*(Text(cell) for cell in cells))
    return table


def _contribution_rows(listed: tuple[Contribution, ...], rest_count: int, rest_a: float) -> Iterator[tuple[str, str]]:
    for contribution in listed:
        yield visible(contribution.circuit), format_number(contribution.current_a)
    if rest_count:
        yield f"{rest_count} more", format_number(rest_a)
    if not listed and not rest_count:
        yield "nothing", ""
