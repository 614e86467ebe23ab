"""Why nothing fits: the constraints that conflict, in the user's words, found by releasing them one by one."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from ortools.sat.python import cp_model

from balancer.arrange.clock import Clock
from balancer.arrange.limits import Hold
from balancer.arrange.results import Options
from balancer.arrange.seating import SeatModel, row_limits_a
from balancer.arrange.seats import build_units
from balancer.arrange.solve import SolveStatus, solve
from balancer.errors import InfeasibleError, NoAnswerInTime
from balancer.panel import Installation, Role, format_landing
from balancer.rules import check_installation, errors_of

_CHECK_WORK_S = 10.0

_MENDED_BY_MOVING = ("shared-neutral-one-leg", "tandem-not-allowed", "stab-limit")
"""Error-level rules that another arrangement can satisfy."""


@dataclass(frozen=True)
class _Constraint:
    """Something that could be released: what it is, what it says and what to do about it."""

    hold: Hold | None
    label: str
    text: str
    remedy: str


def explain_no_seats(installation: Installation, options: Options, clock: Clock) -> InfeasibleError:
    """Name a smallest set of constraints that leaves no room for every circuit.

    Raises
    ------
    NoAnswerInTime
        When the clock ran out before a reason was found.
    """
    shortage = _shortage(installation)
    if shortage is not None:
        return shortage
    constraints = _constraints(installation, options)
    if not _fits(installation, options, [], clock):
        return InfeasibleError(
            [
                "the circuits do not fit: two poles and shared-neutral pairs need adjacent spaces on opposite legs, and"
                " tied circuits spaces one below the other"
            ],
            ["free adjacent spaces, or use a larger panel or a subpanel"],
        )
    conflict = _smallest_conflict(installation, options, constraints, clock)
    if len(conflict) == 1 and conflict[0].hold is None:
        return _too_few_landings(installation, options, clock)
    return InfeasibleError([c.text for c in conflict], [c.remedy for c in conflict])


def _too_few_landings(installation: Installation, options: Options, clock: Clock) -> InfeasibleError:
    """Name what must be mended, and how many landings that takes."""
    units = build_units(installation, options)
    model = cp_model.CpModel()
    seats = SeatModel(model, units, row_limits_a(installation.panel.stab_a, units))
    model.minimize(seats.landings_changed)
    solved = solve(model, seats.flat, clock, _CHECK_WORK_S, is_assignment=True)
    needed = f"at least {_count(seats.seating(solved.values).landings_changed)}" if solved.status.has_answer else "more"
    errors = [e for e in errors_of(check_installation(installation)) if e.rule in _MENDED_BY_MOVING]
    names = "; ".join(f"{error.rule} ({' and '.join(error.circuits)})" for error in errors)
    what = f"mending {names}" if names else "fitting every circuit in"
    text = f"at most {_count(options.max_landings or 0)} may change, and {what} takes {needed}"
    return InfeasibleError([text], ["allow more with --landings"])


def _count(landings: int) -> str:
    return f"{landings} landing{'' if landings == 1 else 's'}"


def _shortage(installation: Installation) -> InfeasibleError | None:
    """More poles than spaces: the plainest reason."""
    panel = installation.panel
    needed = sum(c.poles for c in installation.circuits if not c.landing and c.role is not Role.SPARE)
    filled = {
        t.space
        for c in installation.circuits
        for t in c.landing
        if c.role is not Role.SPARE and t.space not in panel.reserved
    }
    usable = len(panel.spaces) - len(panel.reserved)
    total = needed + len(filled)
    if total <= usable:
        return None
    reserved = f" ({len(panel.reserved)} more are reserved)" if panel.reserved else ""
    remedy = "use a larger panel or a subpanel, combine circuits, or leave some out"
    if panel.is_assumed:
        # No panel file was given, and the size is only that of the highest space in use.
        remedy = "where it has more spaces, say how many in a panel file (--panel)"
    return InfeasibleError([f"the breakers need {total} spaces and the panel has {usable} to use{reserved}"], [remedy])


def _constraints(installation: Installation, options: Options) -> list[_Constraint]:
    """Everything that could be released, what is easiest to release last."""
    found = []
    for circuit in installation.circuits:
        if circuit.is_fixed or circuit.role.is_device:
            text = f'"{circuit.label}" is fixed in space {format_landing(circuit.landing)}'
            found.append(_Constraint(Hold.FIXED, circuit.label, text, "release it if it may move"))
    found += _panel_wide(installation)
    for circuit in installation.circuits:
        if circuit.slack_in is not None and math.isfinite(circuit.slack_in) and circuit.landing and not options.splice:
            place = format_landing(circuit.landing)
            text = f'the conductor of "{circuit.label}" reaches {circuit.slack_in:g} in from space {place}'
            found.append(_Constraint(Hold.REACH, circuit.label, text, "allow splices with --splice"))
    if options.max_landings is not None:
        text = f"at most {options.max_landings} landings may change"
        found.append(_Constraint(None, "", text, "allow more with --landings"))
    return found


def _panel_wide(installation: Installation) -> list[_Constraint]:
    panel = installation.panel
    found = []
    if panel.reserved:
        found.append(_Constraint(Hold.RESERVED, "", "some spaces are reserved", "free a reserved space"))
    if any(t.half for c in installation.circuits for t in c.landing):
        text = "half-width breakers may go only where tandem_spaces allows them"
        found.append(_Constraint(Hold.TANDEM, "", text, "check which spaces take half-width breakers"))
    if panel.plug_on_neutral:
        text = "plug-on-neutral breakers need a space beside the neutral bar"
        found.append(_Constraint(Hold.PLUG_ON, "", text, "use a breaker with a neutral pigtail"))
    if panel.bolt_on:
        text = "bolt-on breakers fit bolted spaces only"
        found.append(_Constraint(Hold.BOLT_ON, "", text, "use a breaker made for the space"))
    if panel.stab_a is not None:
        text = f"the handle ratings of one row may add up to {panel.stab_a:g} A at most (stab_a)"
        found.append(_Constraint(Hold.STAB, "", text, "check the limit on the panel's label"))
    return found


def _fits(installation: Installation, options: Options, kept: Sequence[_Constraint], clock: Clock) -> bool:
    """Whether every circuit finds a seat while only the kept constraints hold."""
    holding = {(c.hold, c.label) for c in kept}
    everything = [(c.hold, c.label) for c in _constraints(installation, options) if c.hold is not None]
    ignored = frozenset((hold, label) for hold, label in everything if (hold, label) not in holding)
    units = build_units(installation, options, ignored)
    if any(not unit.placements and not unit.is_optional for unit in units):
        return False
    model = cp_model.CpModel()
    stab_a = installation.panel.stab_a if (Hold.STAB, "") in holding else None
    seats = SeatModel(model, units, row_limits_a(stab_a, units))
    if options.max_landings is not None and (None, "") in holding:
        model.add(seats.landings_changed <= options.max_landings)
    status = solve(model, (), clock, _CHECK_WORK_S).status
    if status is SolveStatus.UNKNOWN:
        message = "the limit was reached while looking for what is in the way"
        raise NoAnswerInTime(message)
    return status.has_answer


def _smallest_conflict(
    installation: Installation, options: Options, constraints: Sequence[_Constraint], clock: Clock
) -> list[_Constraint]:
    """Drop every constraint without which there is still no room: what is left conflicts, and each is needed for it."""
    conflict = list(constraints)
    for constraint in constraints:
        rest = [c for c in conflict if c is not constraint]
        if not _fits(installation, options, rest, clock):
            conflict = rest
    return conflict
