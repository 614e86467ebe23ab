"""The panel's directory as left, with what each circuit carries."""

from __future__ import annotations

from collections.abc import Mapping

from rich.table import Table
from rich.text import Text

from balancer.panel import Circuit, Installation, Landing, Role, format_landing
from balancer.reports.text import figures_table, format_number, paragraph

ASSUMED = "~"


def directory_table(installation: Installation, arrangement: Mapping[str, Landing]) -> Table:
    """List every circuit of an arrangement by its space; assumed loads carry a sign."""
    table = figures_table("space", "leg", "circuit", "wording", "breaker", "load A", "was", names=4)
    for column in (0, 1):
        table.columns[column].no_wrap = True
    for circuit in sorted(installation.circuits, key=lambda c: _order(arrangement.get(c.label, ()))):
        landing = arrangement.get(circuit.label, ())
        if landing:
            table.add_row(*_cells(installation, circuit, landing))
    return table


def directory_legend(installation: Installation) -> str:
    """Explain the signs of the load column."""
    parts = ["Load: running amps at full use; of a 120/240 V circuit its 240 V part + its 120 V part."]
    if any(circuit.load.is_assumed for circuit in installation.circuits):
        parts.append(f"{ASSUMED} marks an assumed load: measure or look up the nameplate.")
    return " ".join(parts)


def _order(landing: Landing) -> tuple[int, str]:
    first = min(landing, default=None)
    return (0, "") if first is None else (first.space, first.half)


def _cells(installation: Installation, circuit: Circuit, landing: Landing) -> tuple[Text, ...]:
    found = installation.as_found.get(circuit.label, ())
    was = "" if found == landing else format_landing(found) or "new"
    legs = sorted({installation.panel.leg(terminal.space) for terminal in landing})
    return (
        Text(format_landing(landing)),
        Text("".join(legs)),
        paragraph(circuit.label),
        paragraph(circuit.description or ("spare" if circuit.role is Role.SPARE else "")),
        Text("" if circuit.breaker_a is None else f"{circuit.breaker_a:g}"),
        Text(_load(circuit)),
        Text(was),
    )


def _load(circuit: Circuit) -> str:
    parts = [amps for amps in (circuit.load.line_a, circuit.load.neutral_a) if amps]
    text = "+".join(format_number(amps) for amps in parts)
    return f"{ASSUMED}{text}" if text and circuit.load.is_assumed else text
