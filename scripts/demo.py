"""Balance the crowded house in ``data/`` and show the report; further options are handed on to ``balancer plan``."""

import subprocess

import environment

HOUSE = [
    "data/crowded_house.csv",
    "--panel",
    "data/crowded_house.toml",
    "--scenarios",
    "data/crowded_house_scenarios.csv",
]


def main(options):
    """Set up where needed, run the plan, pass its exit code on."""
    python = environment.prepare(["xlsx"])
    command = ["plan", *HOUSE, *options]
    environment.say("Running: balancer " + " ".join(command))
    return subprocess.call([str(python), "-m", "balancer", *command], cwd=str(environment.ROOT))


if __name__ == "__main__":
    environment.run_script(main)
