"""Writes a file whole or not at all."""

from __future__ import annotations

import os
from pathlib import Path


def write_whole(target: Path, data: bytes) -> None:
    """Write beside the target and rename, so that a failure leaves what was there and nothing else."""
    unfinished = target.with_name(f".{target.name}.{os.getpid()}.part")
    try:
        with unfinished.open("xb") as file:
            file.write(data)
        unfinished.replace(target)
    finally:
        unfinished.unlink(missing_ok=True)
