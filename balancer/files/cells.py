"""The other kinds of cells: voltages, spaces, wires, power factors and words. Each parser raises `CellError`."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Generic, TypeVar

from balancer.electrical.defaults import known_uses, normal_use
from balancer.files.quantities import INCHES, NO_UNIT, Cell, Quantity, read_number, refuse
from balancer.files.words import did_you_mean
from balancer.panel import MAX_SPACES, Landing, Pole, PowerFactor, Role, Volts, Wire, parse_landing

Word = TypeVar("Word")

_YES = ("yes", "y", "true", "1", "x")
_NO = ("no", "n", "false", "0")
_OFF_NOMINAL = {"110": "120", "115": "120", "125": "120", "127": "120", "220": "240", "230": "240", "250": "240"}
_WIRE = re.compile(r"#?\s*([0-9]+(?:/0)?)\s*(?:awg|kcmil|mcm)?[\s,-]*([a-z]+)\.?", re.ASCII)
_METALS = {"cu": "cu", "copper": "cu", "al": "al", "aluminum": "al", "aluminium": "al"}
WIRE_SIZES = (
    *("18", "16", "14", "12", "10", "8", "6", "4", "3", "2", "1", "1/0", "2/0", "3/0", "4/0"),
    *("250", "300", "350", "400", "500", "600", "700", "750", "800", "900", "1000", "1250", "1500", "1750", "2000"),
)
"""Trade sizes: AWG, then kcmil (the rows of NEC Chapter 9 Table 8, from memory)."""

_MONTHS = (
    "jan|feb|fév|mar|mär|apr|abr|avr|may|mai|mag|jun|jui|giu|jul|lug|aug|ago|aoû"
    "|sep|set|oct|okt|ott|nov|dec|dez|dic|déc"
)
"""How the months begin in the languages that spreadsheets are most likely set to."""

_DATE = re.compile(
    rf"""\d{{4}}-\d\d-\d\d.*                             # as a workbook holds it
    |\d{{1,2}}[./]\d{{1,2}}[./]\d{{2,4}}                 # 7/5/2026, 5.7.2026
    |\d{{1,4}}[-./\s]+(?:{_MONTHS})\w*\.?(?:[-./\s]+\d{{2,4}})?
    |(?:{_MONTHS})\w*\.?[-./\s]+\d{{1,4}}""",
    re.VERBOSE,
)
_SERIAL_DATE = re.compile(r"[3-6][0-9]{4}", re.ASCII)
_AS_TEXT = "a spreadsheet made a date of it: format the column as text and type the spaces again, such as 5-7"

_PRIORITY_NUMBER = Quantity(NO_UNIT, most=100)
_SLACK_NUMBER = Quantity(INCHES, most=240)


@dataclass(frozen=True)
class SharedNeutral:
    """What the inventory says of a circuit's neutral: a pair's label, or "" for its own, checked."""

    label: str


@dataclass(frozen=True)
class OneOf(Generic[Word]):
    """Reads one of a few words."""

    words: dict[str, Word]

    def __call__(self, cell: Cell) -> Word:
        """Read a cell, whatever its case."""
        folded = " ".join(cell.text.casefold().split())
        if folded not in self.words:
            refuse("is not a word known here", did_you_mean(cell.text, list(self.words)))
        return self.words[folded]


read_role: Callable[[Cell], Role] = OneOf({role.value: role for role in Role})
read_pole: Callable[[Cell], Pole] = OneOf({pole.value: pole for pole in Pole})


def read_text(cell: Cell) -> str:
    """Take a cell as it stands."""
    return cell.text


def read_yes_no(cell: Cell) -> bool:
    """Read yes or no, in any of the ways that forms are filled in."""
    word = cell.text.casefold()
    if word not in _YES + _NO:
        refuse("is neither yes nor no", "write yes or no")
    return word in _YES


def read_use(cell: Cell) -> str:
    """Read the name of a use profile; the result is its name as the tool writes it."""
    use = normal_use(cell.text)
    if use is None:
        refuse("is not a known use", did_you_mean(cell.text, known_uses()))
    return use


def read_volts(cell: Cell) -> Volts:
    """Read a nominal voltage, with or without V."""
    text = re.sub(r"\s*(v|volts?)$", "", cell.text.casefold()).replace(" ", "")
    if text in tuple(Volts):
        return Volts(text)
    allowed = "write 120, 240 or 120/240 (208 or 120/208 on a 120/208 V supply)"
    if text in _OFF_NOMINAL:
        refuse("is not a nominal voltage", f"write {_OFF_NOMINAL[text]}")
    refuse("is not a voltage of this panel", allowed)


def read_space(cell: Cell) -> Landing:
    """Read the space or spaces of a breaker, and tell when a spreadsheet has made a date of them."""
    text = cell.text
    if _DATE.fullmatch(text.casefold()) or _SERIAL_DATE.fullmatch(text):
        refuse("is not a space", _AS_TEXT)
    try:
        landing = parse_landing(text)
    except ValueError:
        refuse("is not a space", "write 7, 5-7 for two poles, 12a or 12b for a half, 12b-14a for quad poles")
    if any(terminal.space > MAX_SPACES for terminal in landing):
        refuse("is no space of any panel taken here", f"spaces go from 1 to {MAX_SPACES}")
    return landing


def read_power_factor(cell: Cell) -> PowerFactor:
    """Read ``0.95``, ``0.95 lag`` or ``0.95 lead``."""
    value, word = read_number(cell)
    if word == "%" or (word == "" and 2 <= value <= 100):
        refuse("is a percentage", f"write it as a fraction of 1: {value / 100:g}")
    if word not in ("", "lag", "lagging", "lead", "leading"):
        refuse("is not a power factor", "write 0.95, or 0.95 lead where the current leads")
    if not 0.0 < value <= 1.0:
        refuse("is not a power factor", "write a number above 0 and up to 1")
    return PowerFactor(value, is_leading=word.startswith("lead"))


def read_wire(cell: Cell) -> Wire:
    """Read a conductor such as ``12 cu`` or ``2/0 al``."""
    match = _WIRE.fullmatch(cell.text.casefold())
    metal = _METALS.get(match[2]) if match else None
    if match is None or metal is None:
        refuse("is not a conductor", "write size and metal, such as 12 cu or 2/0 al")
    if match[1] not in WIRE_SIZES:
        refuse("is not a trade size", f"write one of: {', '.join(WIRE_SIZES)}")
    return Wire(match[1], metal)


def read_shared_neutral(cell: Cell) -> SharedNeutral:
    """Read a pair's label, or ``none`` for a neutral that was checked to be the circuit's own."""
    return SharedNeutral("" if cell.text.casefold() == "none" else cell.text)


def read_slack(cell: Cell) -> float:
    """Read spare conductor length in inches; ``short`` is none at all, ``ok`` any."""
    word = cell.text.casefold()
    if word in ("short", "ok"):
        return 0.0 if word == "short" else math.inf
    return _or_words(_SLACK_NUMBER, cell, ("short", "ok"))


def read_priority(cell: Cell) -> str:
    """Read ``must``, ``never`` or a number from 0 to 100."""
    word = cell.text.casefold()
    if word in ("must", "never"):
        return word
    return f"{_or_words(_PRIORITY_NUMBER, cell, ('must', 'never')):g}"


def _or_words(quantity: Quantity, cell: Cell, words: Sequence[str]) -> float:
    if not any(character.isdigit() for character in cell.text):
        refuse("is not a word known here", f"write {', '.join(words)} or a number from 0 to {quantity.most:g}")
    return quantity(cell)
