"""Make or reuse ``.venv`` in the checkout, so that one command sets everything up on a machine with only Python.

This file must load on Python 3.6, so that an old Python gets a sentence and not a traceback.
"""

import hashlib
import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
VENV = ROOT / ".venv"
STAMP = VENV / "installed-for-balancer.txt"
OLDEST_PYTHON = (3, 11)
TRIMMED_LINES = 15
# What pip says, on the three systems, when there is no way to a package index.
OFFLINE_SIGNS = (
    "NewConnectionError",
    "ConnectTimeoutError",
    "Failed to establish a new connection",
    "Temporary failure in name resolution",
    "getaddrinfo failed",
    "nodename nor servname",
    "Network is unreachable",
    "ProxyError",
)


class SetupError(Exception):
    """Setting up failed; the message is for the person at the terminal."""


def say(text):
    """Tell what is being done, on stderr so that the program's own answer stays alone on stdout."""
    print(text, file=sys.stderr, flush=True)


def require_python():
    """Leave with one line where this Python is too old."""
    if sys.version_info < OLDEST_PYTHON:
        here, oldest = sys.version.split()[0], ".".join(str(part) for part in OLDEST_PYTHON)
        sys.exit(f"This is Python {here}; balancer needs {oldest} or newer. Start this script with a newer one.")


def python_in(venv):
    """Path of the interpreter of a virtual environment."""
    return venv / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def run_quietly(command, purpose, cwd=ROOT):
    """Run a command and give its output; a failure becomes a `SetupError` with the end of it."""
    environment = dict(os.environ, PIP_DISABLE_PIP_VERSION_CHECK="1", PYTHONIOENCODING="utf-8")
    done = subprocess.run(
        [str(part) for part in command],
        cwd=str(cwd),
        env=environment,
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        check=False,
    )
    output = done.stdout.decode("utf-8", "replace")
    if done.returncode == 0:
        return output
    if any(sign in output for sign in OFFLINE_SIGNS):
        message = f"{purpose}: no connection to the package index. Connect this machine and start again."
        raise SetupError(message)
    tail = "\n".join(output.strip().splitlines()[-TRIMMED_LINES:])
    message = f"{purpose} failed:\n{tail}"
    raise SetupError(message)


def make_venv(venv):
    """Make a fresh virtual environment, over a broken one if there is one."""
    purpose = f"Making {venv.name} (where the venv module is missing: apt install python3-venv, or your system's like)"
    run_quietly([sys.executable, "-m", "venv", "--clear", venv], purpose)


def install(venv, *requirements):
    """Install into a virtual environment with its own pip."""
    pip = [python_in(venv), "-m", "pip", "install", "--quiet", "--retries", "1", "--timeout", "20"]
    run_quietly([*pip, *requirements], "Installing packages")


def is_working(venv):
    """Whether the interpreter of a virtual environment starts and is new enough."""
    code = f"import sys; sys.exit(sys.version_info < {OLDEST_PYTHON!r})"
    try:
        done = subprocess.run([str(python_in(venv)), "-c", code], stderr=subprocess.DEVNULL, check=False)
    except OSError:
        return False
    return done.returncode == 0


def is_installed(extras):
    """Whether the stamp says that these extras were installed for the present ``pyproject.toml``."""
    try:
        fingerprint, *installed = STAMP.read_text(encoding="utf-8").split()
    except (OSError, ValueError):
        return False
    return fingerprint == _fingerprint() and set(extras) <= set(installed)


def prepare(extras):
    """Give the path of a Python that has balancer and these extras, setting it up where it is missing."""
    if not is_working(VENV):
        say("Making a virtual environment in .venv ...")
        make_venv(VENV)
    if not is_installed(extras):
        say("Installing balancer and what it needs into .venv (a minute or two, the first time only) ...")
        install(VENV, "--editable", ".[{}]".format(",".join(extras)))
        STAMP.write_text("\n".join([_fingerprint(), *extras]) + "\n", encoding="utf-8")
    return python_in(VENV)


def run_script(main):
    """Run a script's main function; give failures one clear message and Ctrl-C its usual exit code."""
    require_python()
    try:
        sys.exit(main(sys.argv[1:]))
    except SetupError as error:
        sys.exit(str(error))
    except KeyboardInterrupt:
        sys.exit(130)


def _fingerprint():
    # The place belongs to it: an editable install in a checkout that was moved points to nowhere.
    return hashlib.sha256((ROOT / "pyproject.toml").read_bytes() + str(ROOT).encode("utf-8")).hexdigest()
