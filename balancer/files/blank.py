"""Blank files to begin with: a header with commented examples, and a panel file with every key explained."""

from __future__ import annotations

from balancer.files.columns import COLUMNS
from balancer.panel import Panel

_EXAMPLES: tuple[dict[str, str], ...] = (
    {
        "circuit": "kitchen 1",
        "description": "Counter left of the sink",
        "space": "7",
        "volts": "120",
        "load_a": "12.5",
        "breaker_a": "20",
        "breaker_type": "standard",
        "wire": "12 cu",
        "use": "kitchen",
        "shared_neutral": "none",
    },
    {
        "circuit": "range",
        "description": "Kitchen range",
        "space": "6-8",
        "volts": "120/240",
        "load_w": "7200",
        "load_120_a": "2.5",
        "pole_120": "first",
        "breaker_a": "50",
        "wire": "6 cu",
        "use": "cooking",
    },
)

_PANEL_TEXT = """\
# What stands on the wall, and what feeds it. Only spaces is needed; take the # off the lines that you know.

[panel]
spaces = 40                        # numbered spaces, 2 to 84
#name = "Garage wall"              # what the reports call the panel
#main_a = 200                      # rating of the main breaker, amps
#bus_a = 200                       # rating of the bus, amps
#feed = "top"                      # where the main lugs or the main breaker are: "top" or "bottom"
#tandem_spaces = [37, 38, 39, 40]  # spaces that take two half-width breakers; true for all, false for none
#plug_on_neutral = [1, 2, 3, 4]    # spaces with a plug-on neutral; true for all
#bolt_on = false                   # spaces with bolt-on breakers: true for all, or a list
#reserved = [1, 2]                 # spaces to keep free
#row_legs = "AB"                   # leg of every row from the top, or a pattern that repeats
#numbering = "across"              # odd left and even right ("across"), or down the columns ("down")
#crossing_in = {crossing_in:g}                  # conductor length that changing columns takes up, inches
#stab_a = 140                      # most that the handle ratings in one row may add up to, amps

# Where the spaces are laid out in no such way, say it of every one instead of spaces, row_legs and numbering:
#[[panel.space]]
#number = 1
#column = "left"                   # "left" or "right"
#row = 1                           # 1 at the top
#leg = "A"                         # "A" or "B"

[supply]
#system = "120/240"                # "120/208": two legs of a wye; "120": one 120 V source on both legs
#rotation = "unknown"              # on 120/208 only: "A leads" or "B leads"
#source = "utility"                # "inverter" and "generator" trip per leg, so the legs come first

# For voltages:
#transformer_kva = 25
#impedance_pct = 1.8
#service_wire = "2/0 al"
#neutral_wire = "2 al"
#length_ft = 70                    # one way, from the transformer to the panel
"""


def blank_inventory_text() -> str:
    """Give an inventory without circuits: every column, and example rows as comments."""
    lines = [
        "# One line a circuit. Blank cells mean what the README says; circuit and volts are needed. Two examples:",
        *(f"# {example_line(example)}" for example in _EXAMPLES),
        ",".join(column.name for column in COLUMNS),
    ]
    return "".join(f"{line}\n" for line in lines)


def example_line(example: dict[str, str]) -> str:
    """Write an example with a cell for every column."""
    return ",".join(example.get(column.name, "") for column in COLUMNS)


def blank_panel_text() -> str:
    """Give a panel file with every key explained; as it stands it is an ordinary panel of 40 spaces."""
    return _PANEL_TEXT.format(crossing_in=Panel.crossing_in)
