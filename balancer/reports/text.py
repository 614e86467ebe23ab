"""Names and numbers as the reader sees them, and the few blocks that every report is made of."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable, Sequence

from rich.cells import cell_len, set_cell_size
from rich.console import Group, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

_HIDDEN_CATEGORIES = ("Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp")
"""Control and format characters, surrogates, private and unassigned ones, line and paragraph separators."""

ELLIPSIS = "\u2026"


def visible(text: str) -> str:
    r"""Show data as text: control and invisible characters become escapes such as ``\x1b``."""
    if text.isascii() and text.isprintable():
        return text
    return "".join(
        sign.encode("unicode_escape").decode() if unicodedata.category(sign) in _HIDDEN_CATEGORIES else sign
        for sign in text
    )


def crop(text: str, width: int) -> str:
    """Cut text to a width in terminal cells, with an ellipsis, or pad it to that width."""
    if cell_len(text) > width:
        text = set_cell_size(text, max(0, width - 1)).rstrip() + ELLIPSIS
    return set_cell_size(text, width)


def format_amps(current_a: float) -> str:
    """Print amperes: one decimal, two below 1 A, where a clamp meter on its low range still tells them apart."""
    return f"{format_number(current_a)} A"


def format_number(value: float) -> str:
    """Print a figure with one decimal, or two below 1 unless it is nothing."""
    is_small = 0.005 <= abs(value) < 1
    return f"{value:.2f}" if is_small else f"{round(value, 1) + 0.0:.1f}"


def count_of(number: int, noun: str) -> str:
    """Print a count with its noun: ``1 landing``, ``6 landings``."""
    return f"{number} {noun}{'' if number == 1 else 's'}"


def list_of(names: Sequence[str], *, most: int = 6) -> str:
    """Join names in a sentence: ``a, b and c``; the rest beyond `most` is counted."""
    shown = [visible(name) for name in names]
    if len(shown) > most:
        shown = [*shown[: most - 1], f"{len(names) - most + 1} more"]
    return " and ".join(filter(None, [", ".join(shown[:-1]), shown[-1]])) if shown else ""


def section(title: str, *body: RenderableType) -> Group:
    """Put a heading over blocks, with a blank line before; capitals, so that it stands out in a pipe as well."""
    return Group(Text(""), Text(title.upper(), style="bold"), *body)


def paragraph(text: str, *, style: str = "") -> Text:
    """Make wrapped text out of words that may hold data."""
    return Text(visible(text), style=style, overflow="fold")


def bullets(items: Iterable[str], sign: str = "-") -> Table:
    """List sentences, hanging behind a sign."""
    return _hanging((sign, paragraph(item)) for item in items)


def numbered(items: Iterable[RenderableType]) -> Table:
    """List blocks behind their numbers, from 1."""
    return _hanging((f"{number}.", item) for number, item in enumerate(items, start=1))


def indented(block: RenderableType, by: int = 2) -> Padding:
    """Move a block to the right."""
    return Padding(block, (0, 0, 0, by))


def _hanging(rows: Iterable[tuple[str, RenderableType]]) -> Table:
    grid = Table.grid(padding=(0, 1))
    grid.add_column(justify="right", no_wrap=True)
    grid.add_column(overflow="fold")
    for sign, block in rows:
        grid.add_row(Text(sign), block)
    return grid


def figures_table(*headers: str, names: int = 1) -> Table:
    """Start a table whose first `names` columns hold words and the rest right-aligned figures."""
    table = Table(box=None, padding=(0, 2, 0, 0), pad_edge=False, header_style="bold")
    for index, header in enumerate(headers):
        if index < names:
            table.add_column(Text(header), overflow="fold")
        else:
            table.add_column(Text(header, justify="right"), justify="right", no_wrap=True)
    return table
