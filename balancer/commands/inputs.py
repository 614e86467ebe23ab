"""From the files named on the command line to an installation and its scenarios."""

from __future__ import annotations

import sys
from typing import TYPE_CHECKING

from balancer.commands.options import InputFiles, LandingWishes, Saving, Wishes
from balancer.errors import OptionError

STANDARD_INPUT = "-"

if TYPE_CHECKING:
    from balancer.arrange.results import Options
    from balancer.electrical.scenarios import Scenarios
    from balancer.panel import Installation


def read_installation(files: InputFiles, *, is_quiet: bool = False) -> Installation:
    """Read the inventory and, where given, the panel file."""
    from balancer.files import read_inventory

    _refuse_sharing_standard_input(files)
    if files.scenario_file is not None and files.profile_file is not None:
        problem = "--scenarios and --profiles contradict each other: a scenario file leaves no hours to profile"
        raise OptionError(problem, "Give one of the two.")
    if not is_quiet:
        _say_waiting(files)
    return read_inventory(files.inventory, files.panel_file)


def read_scenarios_of(installation: Installation, files: InputFiles) -> Scenarios:
    """Take the scenarios from the most trusted source given."""
    from balancer.electrical.scenario_sets import choose_scenarios, profile_scenarios
    from balancer.files import read_profiles, read_scenarios

    if files.scenario_file is not None:
        return read_scenarios(files.scenario_file, installation)
    if files.profile_file is not None:
        return profile_scenarios(installation, read_profiles(files.profile_file))
    return choose_scenarios(installation)


def planning_choices(installation: Installation, wishes: Wishes, landing: LandingWishes) -> Options:
    """Turn wishes into planning options; where nobody said, a source that trips per leg puts the legs first."""
    from balancer.arrange.results import Aim, Options

    by_supply = Aim.LEGS if installation.panel.supply.is_trip_per_leg else Aim.NEUTRAL
    return Options(
        aim=by_supply if wishes.aim is None else Aim(wishes.aim),
        within_a=landing.within_a,
        max_landings=landing.max_landings,
        turn_240=wishes.turn_240,
        splice=wishes.splice,
        time_limit_s=wishes.time_limit_s,
    )


def check_save_path(saving: Saving, files: InputFiles) -> None:
    """Refuse a bad place to save before any time is spent on planning.

    Raises
    ------
    OptionError
        When the file is one of the inputs, exists and is not to be replaced, or cannot be made there.
    """
    from balancer.files.export import check_target

    if saving.save is None:
        if saving.is_forced:
            problem = "--force says that --save may replace a file, but there is no --save"
            raise OptionError(problem, "Add --save FILE, or leave --force out.")
        return
    check_target(saving.save, files.names, force=saving.is_forced)


def _refuse_sharing_standard_input(files: InputFiles) -> None:
    if files.names.count(STANDARD_INPUT) > 1:
        problem = "more than one file is to come from standard input (-)"
        raise OptionError(problem, "Name the others.")


def _say_waiting(files: InputFiles) -> None:
    """Say that a file is awaited from the keyboard, so that nobody takes the wait for a hang."""
    from balancer.commands.screen import notify

    if STANDARD_INPUT in files.names and sys.stdin is not None and sys.stdin.isatty():
        notify("Waiting for standard input: end it with Ctrl-D (on Windows Ctrl-Z, then Enter).")
