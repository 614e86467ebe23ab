"""Collects what is wrong with a file, so that the user hears everything at once."""

from __future__ import annotations

from dataclasses import dataclass, field

from balancer.errors import InputError, Problem


@dataclass(frozen=True)
class Place:
    """Where in a file a problem stands, and the value found there."""

    line: int | None = None
    column: str | None = None
    value: str | None = None


@dataclass
class ProblemList:
    """The problems of one file."""

    file: str
    _found: list[Problem] = field(default_factory=list)

    def add(self, place: Place, problem: str, remedy: str) -> None:
        """Note a problem: what is wrong, and what would be right."""
        self._found.append(Problem(self.file, problem, remedy, place.line, place.column, place.value))

    @property
    def in_line_order(self) -> tuple[Problem, ...]:
        """Every problem found, by line; those of the whole file first."""
        return tuple(sorted(self._found, key=lambda problem: problem.line or 0))

    def raise_if_any(self) -> None:
        """Raise an `InputError` with all problems, where there are any."""
        if self._found:
            raise InputError(self.in_line_order)


def one_problem(file: str, problem: str, remedy: str, line: int | None = None) -> InputError:
    """Make the error of a file that cannot be read any further."""
    return InputError([Problem(file, problem, remedy, line=line)])
