"""Whether breakers can stand where the inventory says: spaces that exist, poles on both legs, one body in one place."""

from __future__ import annotations

from collections.abc import Sequence

from balancer.files.columns import FIXED, ROLE, SPACE, TIED, VOLTS
from balancer.files.inventory_row import InventoryRow
from balancer.panel import Landing, Panel, Role, Terminal, format_landing

_QUAD_HALVES = (("b", "a"), ("a", "b"))
"""Halves of the upper and the lower space: a quad's inner and outer two-pole."""


def check_poles(row: InventoryRow) -> None:
    """Report a landing with more or fewer spaces than the circuit has poles, or one that is missing and needed."""
    landing, volts = row.get(SPACE), row.get(VOLTS)
    if landing is None:
        _check_not_landed(row)
    elif volts is not None and len(landing) != volts.poles:
        if volts.poles == 2:
            row.report(SPACE, f"a {volts} V circuit takes two spaces", "write both, such as 5-7")
        else:
            row.report(SPACE, f"a {volts} V circuit takes one space", "write one, such as 7, or correct volts")


def _check_not_landed(row: InventoryRow) -> None:
    if row.is_faulty(SPACE):
        return
    role = row.get(ROLE) or Role.LOAD
    if row.get(FIXED):
        row.report(FIXED, "nothing holds a circuit that has no space yet", "give its space, or clear this")
    elif role.is_device:
        remedy = "give its space; leave out a device that takes none"
        row.report(SPACE, f"a {role} device stays where it is, and no space is given", remedy)


def check_place(row: InventoryRow, panel: Panel) -> None:
    """Report a landing that the panel does not have."""
    landing = row.get(SPACE)
    if landing is None or row.is_faulty(SPACE):
        return
    for terminal in landing:
        if terminal.space not in panel.by_number:
            problem = f"the panel has no space {terminal.space}: it has {len(panel.spaces)} spaces"
            return row.report(SPACE, problem, "correct the space, or spaces in the panel file")
        if terminal.space in panel.reserved:
            problem = f"space {terminal.space} is reserved in the panel file"
            return row.report(SPACE, problem, "correct the space, or take it out of reserved")
    if len(landing) == 2:
        _check_two_poles(row, landing, panel)
    return None


def _check_two_poles(row: InventoryRow, landing: Landing, panel: Panel) -> None:
    upper, lower = _from_the_top(landing, panel)
    if (upper.space, lower.space) not in panel.two_pole_seats:
        problem = "no two-pole breaker fits: its spaces are next to each other in one column, on opposite legs"
        row.report(SPACE, problem, "write two such spaces, such as 5-7 or 6-8")
    elif (upper.half, lower.half) not in (("", ""), *_QUAD_HALVES):
        inner, outer = f"{upper.space}b-{lower.space}a", f"{upper.space}a-{lower.space}b"
        problem = "no quad breaker has poles like this"
        row.report(SPACE, problem, f"write {inner} for its inner two-pole, {outer} for its outer one")


def _from_the_top(landing: Landing, panel: Panel) -> tuple[Terminal, Terminal]:
    first, second = landing
    if panel.by_number[first.space].row > panel.by_number[second.space].row:
        return second, first
    return first, second


def check_collisions(rows: Sequence[InventoryRow]) -> None:
    """Report breakers that cannot stand in one space together; circuits on the same terminals are a double tap."""
    by_space: dict[int, list[InventoryRow]] = {}
    for row in rows:
        landing = row.get(SPACE)
        if landing is None or row.is_faulty(SPACE):
            continue
        spaces = dict.fromkeys(terminal.space for terminal in landing)
        earlier = [other for space in spaces for other in by_space.get(space, ())]
        for other in dict.fromkeys(earlier):
            if _report_collision(row, other):
                break
        for space in spaces:
            by_space.setdefault(space, []).append(row)


def _report_collision(row: InventoryRow, other: InventoryRow) -> bool:
    mine, theirs = row.get(SPACE) or (), other.get(SPACE) or ()
    why = why_impossible(mine, theirs)
    if why is None or (_shares_terminal(mine, theirs) and _are_tied(row, other)):
        return False
    problem = f"{why}: {other.label} (line {other.line}) is on {format_landing(theirs)}"
    remedy = "correct one of the two"
    if _shares_terminal(mine, theirs):
        remedy += "; for two conductors under one breaker give both rows one label under tied"
    row.report(SPACE, problem, remedy)
    return True


def _shares_terminal(one: Landing, other: Landing) -> bool:
    """Whether a single-pole circuit is landed on one pole of a two-pole breaker."""
    return {len(one), len(other)} == {1, 2} and any(terminal in other for terminal in one)


def _are_tied(row: InventoryRow, other: InventoryRow) -> bool:
    return bool(row.text(TIED)) and row.text(TIED).casefold() == other.text(TIED).casefold()


def why_impossible(one: Landing, other: Landing) -> str | None:
    """Say why two landings cannot both be; None where they can, be it as a double tap."""
    shared = [part for terminal in one for part in terminal.parts if part in _parts(other)]
    if not shared:
        return _why_bodies_collide(one, other)
    if sorted(one) == sorted(other):
        return None
    space = shared[0][0]
    if any(mine.space == theirs.space and mine.half != theirs.half for mine in one for theirs in other):
        return f"a full-width breaker and a half cannot both be in space {space}"
    return f"two breakers cannot both be in space {space}"


def _parts(landing: Landing) -> list[tuple[int, str]]:
    return [part for terminal in landing for part in terminal.parts]


def _why_bodies_collide(one: Landing, other: Landing) -> str | None:
    """Two quad two-poles that meet in a space must be of one body, hence in the same two spaces."""
    if len(one) < 2 or len(other) < 2:
        return None
    mine, theirs = {terminal.space for terminal in one}, {terminal.space for terminal in other}
    if mine == theirs or not mine & theirs:
        return None
    return f"two quad bodies cannot both be in space {min(mine & theirs)}"
