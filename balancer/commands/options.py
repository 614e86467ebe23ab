"""Options shared by the commands: one flag, one meaning, everywhere.

Each bundle of options reaches its command as one frozen dataclass.
"""

from __future__ import annotations

import functools
import math
from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import Any, TypeVar

import click

CONTEXT_SETTINGS = {"help_option_names": ["-h", "--help"], "max_content_width": 100}

MOST_LANDINGS = 168
"""Two halves in each of 84 spaces."""

Function = TypeVar("Function", bound=Callable[..., Any])


@dataclass(frozen=True, kw_only=True)
class InputFiles:
    """The files that a command reads."""

    inventory: str
    panel_file: str | None
    scenario_file: str | None
    profile_file: str | None

    @property
    def names(self) -> tuple[str, ...]:
        """Every file that is given."""
        given = (self.inventory, self.panel_file, self.scenario_file, self.profile_file)
        return tuple(name for name in given if name is not None)


@dataclass(frozen=True, kw_only=True)
class Output:
    """How a command gives its answer."""

    as_json: bool
    is_quiet: bool


@dataclass(frozen=True, kw_only=True)
class Saving:
    """Where the as-left inventory goes, if anywhere, and whether it may replace a file."""

    save: str | None
    is_forced: bool


@dataclass(frozen=True, kw_only=True)
class Wishes:
    """What the user asks of an arrangement; `aim` None leaves it to the supply."""

    aim: str | None
    turn_240: bool
    splice: bool
    time_limit_s: float | None


@dataclass(frozen=True, kw_only=True)
class LandingWishes:
    """What may be given up to save landings, and how many may change at most."""

    within_a: float
    max_landings: int | None = None


class Amount(click.ParamType[float]):
    """A finite number within limits; unlike a float it refuses ``nan`` and ``inf``."""

    def __init__(self, name: str, *, highest: float, is_zero_allowed: bool = True) -> None:
        self.name = name
        self._highest = highest
        self._is_zero_allowed = is_zero_allowed

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> float:
        """Read the number, or say what is allowed."""
        try:
            number = float(value)
        except ValueError:
            number = math.nan
        is_too_low = number < 0 or (number == 0 and not self._is_zero_allowed)
        if not math.isfinite(number) or is_too_low or number > self._highest:
            least = "from 0" if self._is_zero_allowed else "above 0 and up"
            self.fail(f"{value!r} is not a number of {self.name} {least} to {self._highest:g}.", param, ctx)
        return number


class Count(click.IntRange):
    """A whole number from `min` to `max`, refused in the same words as an `Amount`."""

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> int:
        """Read the number, or say what is allowed."""
        try:
            return int(super().convert(value, param, ctx))
        except click.BadParameter:
            self.fail(f"{value!r} is not a whole number from {self.min} to {self.max}.", param, ctx)


def _bundle(name: str, kind: type, *decorators: Callable[[Any], Any]) -> Callable[[Function], Function]:
    """Decorate a command so that these options arrive as one argument `name` of type `kind`."""

    def decorate(function: Function) -> Function:
        @functools.wraps(function)
        def collect(**values: Any) -> Any:
            values[name] = kind(**{field.name: values.pop(field.name) for field in fields(kind)})
            return function(**values)

        decorated: Any = collect
        for decorator in reversed(decorators):
            decorated = decorator(decorated)
        return decorated  # type: ignore[no-any-return]

    return decorate


def panel_inputs() -> Callable[[Function], Function]:
    """Add the inventory and the files that go with it, as `files`."""
    return _bundle(
        "files",
        InputFiles,
        click.argument("inventory", metavar="INVENTORY"),
        click.option("--panel", "panel_file", metavar="FILE", help="Panel file (TOML): spaces, main, supply."),
        click.option("--scenarios", "scenario_file", metavar="FILE", help="Scenario file: shares of full load."),
        click.option("--profiles", "profile_file", metavar="FILE", help="Use profiles in place of the shipped ones."),
    )


def output_options() -> Callable[[Function], Function]:
    """Add how the answer is given, as `output`."""
    return _bundle(
        "output",
        Output,
        click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of the report."),
        click.option("--quiet", "is_quiet", is_flag=True, help="Nothing on stderr but errors."),
        click.option("--debug", is_flag=True, expose_value=False, help="Show the details of a fault in balancer."),
    )


def landing_options() -> Callable[[Function], Function]:
    """Add what landings are worth, as `landing`."""
    return _bundle(
        "landing",
        LandingWishes,
        click.option(
            "--within",
            "within_a",
            type=Amount("amps", highest=1000),
            metavar="AMPS",
            default=0.25,
            show_default=True,
            help="Give up this much of the best possible to save landings.",
        ),
        click.option(
            "--landings",
            "max_landings",
            type=Count(min=0, max=MOST_LANDINGS),
            metavar="N",
            help="Change at most N landings.",
        ),
    )


def saving_options() -> Callable[[Function], Function]:
    """Add where the as-left inventory is saved, as `saving`."""
    return _bundle(
        "saving",
        Saving,
        click.option("--save", metavar="FILE", help="Save the as-left inventory as CSV; it can be read back."),
        click.option("--force", "is_forced", is_flag=True, help="Let --save replace a file."),
    )


def planning_options() -> Callable[[Function], Function]:
    """Add what is asked of an arrangement, as `wishes`."""
    return _bundle(
        "wishes",
        Wishes,
        click.option(
            "--aim",
            type=click.Choice(["neutral", "legs"]),
            help="What comes first: the peak neutral or the heavy leg.  [default: legs where an inverter or "
            "generator feeds the panel, else neutral]",
        ),
        click.option("--turn-240", "turn_240", is_flag=True, help="Let the hots of 120/240 V circuits change places."),
        click.option("--splice", is_flag=True, help="Let conductors be lengthened with a splice."),
        click.option(
            "--time-limit",
            "time_limit_s",
            type=Amount("seconds", highest=86400, is_zero_allowed=False),
            metavar="SECONDS",
            help="Stop searching after this long and show the best so far.",
        ),
    )
