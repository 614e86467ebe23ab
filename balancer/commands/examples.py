"""Commands whose help begins with examples."""

from __future__ import annotations

from typing import Any

import click


class ExampleCommand(click.Command):
    """A command with examples above its description."""

    def __init__(self, *args: Any, examples: tuple[str, ...], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.examples = examples

    def format_help_text(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the examples, then the description."""
        write_examples(formatter, self.examples)
        super().format_help_text(ctx, formatter)


def write_examples(formatter: click.HelpFormatter, examples: tuple[str, ...]) -> None:
    """Write examples as they are typed, unwrapped."""
    with formatter.section("Examples"):
        for example in examples:
            formatter.write(f"{'':{formatter.current_indent}}{example}\n")
