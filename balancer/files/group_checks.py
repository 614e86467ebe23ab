"""What must fit between rows: labels that are unique, and labels that join circuits."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from balancer.files.columns import CIRCUIT, NOT_WITH, SHARED_NEUTRAL, TIED, VOLTS, Column
from balancer.files.inventory_row import InventoryRow

ReadLabel = Callable[[InventoryRow], str]


def neutral_label(row: InventoryRow) -> str:
    """Label of the shared neutral; "" where there is none."""
    shared = row.get(SHARED_NEUTRAL)
    return shared.label if shared is not None else ""


def check_unique_labels(rows: Sequence[InventoryRow]) -> None:
    """Report a label that an earlier row has, in whatever case."""
    first_lines: dict[str, int] = {}
    for row in rows:
        if not row.label:
            continue
        line = first_lines.setdefault(row.label.casefold(), row.line)
        if line != row.line:
            row.report(CIRCUIT, f"line {line} has this label already", "give every circuit a label of its own")


def check_shared_neutrals(rows: Sequence[InventoryRow], *, are_all: bool = True) -> None:
    """Report a shared neutral on a two-pole circuit, and, where these are all rows, one with a single circuit."""
    for label_rows in _groups(rows, neutral_label):
        for row in label_rows:
            volts = row.get(VOLTS)
            if volts is not None and volts.poles == 2:
                problem = "a two-pole circuit has its own neutral"
                row.report(SHARED_NEUTRAL, problem, "label the 120 V circuits that share one, or correct volts")
        if are_all and len(label_rows) == 1 and not label_rows[0].is_faulty(SHARED_NEUTRAL):
            problem = "no other circuit has this label"
            remedy = "give the partner the same label, or write none where it has its own neutral"
            label_rows[0].report(SHARED_NEUTRAL, problem, remedy)


def lone_label_notices(rows: Sequence[InventoryRow]) -> tuple[str, ...]:
    """Tell of labels that join nothing: most likely the other circuit's label is spelt another way."""
    return tuple(
        f"{column.name} {row.text(column)} stands on one circuit only, {row.label} (line {row.line}): it joins nothing."
        for column in (TIED, NOT_WITH)
        for row in _lone_rows(rows, column)
    )


def _lone_rows(rows: Sequence[InventoryRow], column: Column[str]) -> list[InventoryRow]:
    groups = _groups(rows, lambda row: row.text(column))
    return [group[0] for group in groups if len(group) == 1]


def _groups(rows: Sequence[InventoryRow], label: ReadLabel) -> list[list[InventoryRow]]:
    groups: dict[str, list[InventoryRow]] = {}
    for row in rows:
        if label(row):
            groups.setdefault(label(row).casefold(), []).append(row)
    return list(groups.values())


def joined_spelling(rows: Sequence[InventoryRow], label: ReadLabel) -> dict[str, str]:
    """Give one spelling, the first, to labels that differ in case only: folded label to label."""
    spellings: dict[str, str] = {}
    for row in rows:
        spellings.setdefault(label(row).casefold(), label(row))
    return spellings
