"""The command line: one file a command, and the only room that prints."""

from balancer.commands.entry import cli, main

__all__ = ["cli", "main"]
