"""From the files named on the command line to an installation and its scenarios."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

from balancer.commands.options import InputFiles, Saving, Wishes
from balancer.errors import OptionError

if TYPE_CHECKING:
    from balancer.arrange.results import Options
    from balancer.electrical.scenarios import Scenarios
    from balancer.panel import Installation


def read_installation(files: InputFiles) -> Installation:
    """Read the inventory and, where given, the panel file."""
    from balancer.files import read_inventory

    if files.scenario_file is not None and files.profile_file is not None:
        problem = "--scenarios and --profiles contradict each other: a scenario file leaves no hours to profile"
        raise OptionError(problem, "Give one of the two.")
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


def planning_choices(installation: Installation, wishes: Wishes, max_landings: int | None = None) -> Options:
    """Turn wishes into planning options; where nobody said, a source that trips per leg puts the legs first."""
    from balancer.arrange.results import Aim, Options

    by_supply = Aim.LEGS if installation.panel.supply.is_trip_per_leg else Aim.NEUTRAL
    return Options(
        aim=by_supply if wishes.aim is None else Aim(wishes.aim),
        within_a=wishes.within_a,
        max_landings=max_landings,
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
    save = saving.save
    if save is None:
        if saving.is_forced:
            problem = "--force says that --save may replace a file, but there is no --save"
            raise OptionError(problem, "Add --save FILE, or leave --force out.")
        return
    for given in (files.inventory, files.panel_file, files.scenario_file, files.profile_file):
        if given is not None and _is_same_file(given, save):
            problem = f"--save {save} would overwrite an input file"
            raise OptionError(problem, "Save under another name.")
    if os.path.isdir(save) or not os.path.isdir(os.path.dirname(save) or "."):
        problem = f"--save {save} is no place for a file"
        raise OptionError(problem, "Name a file in a directory that exists.")
    if os.path.exists(save) and not saving.is_forced:
        problem = f"--save {save} exists already"
        raise OptionError(problem, "Save under another name, or add --force to replace it.")


def _is_same_file(one: str, other: str) -> bool:
    if os.path.exists(one) and os.path.exists(other):
        return os.path.samefile(one, other)
    return os.path.realpath(one) == os.path.realpath(other)
