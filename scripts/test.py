"""The whole gate: format, lint, types, tests, and the wheel alone in a bare environment.

Further options are handed on to pytest. Stops at the first stage that fails and names it.
"""

import json
import os
import shutil
import subprocess
import tempfile
import time
from pathlib import Path

import environment
from demo import HOUSE

ROOT = environment.ROOT


class StageFailedError(Exception):
    """A stage of the gate found something."""


def check_stages(python, pytest_options):
    """Name and command of every stage that runs in the checkout's own environment."""
    module = [str(python), "-m"]
    return [
        ("format", [*module, "ruff", "format", "--check", "."]),
        ("lint", [*module, "ruff", "check", "."]),
        ("types", [*module, "mypy"]),
        ("tests", [*module, "pytest", "-n", "2", "-q", *pytest_options]),
    ]


def run_stage(name, command):
    """Run one stage in the checkout and let it talk."""
    if subprocess.call(command, cwd=str(ROOT)) != 0:
        raise StageFailedError(name)


def answer_of(command, cwd):
    """Give the standard output of the installed program; anything but exit code 0 fails the stage."""
    # A wheel must not lean on the checkout, and neither on the shell of whoever runs this.
    clean = {name: value for name, value in os.environ.items() if name != "PYTHONPATH"}
    done = subprocess.run(command, cwd=str(cwd), env=clean, stdout=subprocess.PIPE, check=False)
    if done.returncode != 0:
        shown = " ".join(command)
        message = f"wheel: exit code {done.returncode} from {shown}"
        raise StageFailedError(message)
    return done.stdout.decode("utf-8")


def build_wheel(python, workshop):
    """Build the wheel from a copy, so that no leftovers of older builds get into it."""
    source = workshop / "source"
    shutil.copytree(str(ROOT / "balancer"), str(source / "balancer"), ignore=shutil.ignore_patterns("__pycache__"))
    for name in ("pyproject.toml", "README.md"):
        shutil.copy(str(ROOT / name), str(source / name))
    command = [python, "-m", "pip", "wheel", "--quiet", "--no-deps", "--wheel-dir", workshop, source]
    environment.run_quietly(command, "Building the wheel")
    return next(workshop.glob("*.whl"))


def try_wheel(python):
    """Install the wheel without extras in a bare environment, ask for help and balance the example house."""
    with tempfile.TemporaryDirectory() as folder:
        workshop = Path(folder)
        bare = workshop / "bare"
        wheel = build_wheel(python, workshop)
        environment.make_venv(bare)
        environment.install(bare, wheel)
        balancer = [str(environment.python_in(bare)), "-m", "balancer"]
        answer_of([*balancer, "--help"], workshop)
        answer_of([*balancer, "start", "house", "--example"], workshop)
        house = [str(ROOT / part) if part.startswith("data/") else part for part in HOUSE]
        document = json.loads(answer_of([*balancer, "plan", *house, "--json"], workshop))
    if not document["bound"]["proven"] or not document["complete"]:
        message = "wheel: the plan of the example house is not proven"
        raise StageFailedError(message)


def main(pytest_options):
    """Run every stage; the exit code is 0 only when all of them pass."""
    began = time.monotonic()
    python = environment.prepare(["test", "xlsx"])
    try:
        for name, command in check_stages(python, pytest_options):
            environment.say(f"== {name}")
            run_stage(name, command)
        environment.say("== wheel")
        try_wheel(python)
    except StageFailedError as failure:
        environment.say(f"FAILED at: {failure}")
        return 1
    environment.say(f"All passed in {time.monotonic() - began:.0f} s.")
    return 0


if __name__ == "__main__":
    environment.run_script(main)
