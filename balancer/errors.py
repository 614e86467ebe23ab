"""What can go wrong, and with which exit code.

::

    BalancerError                 base; the commands catch exactly this
    ├─ InputError(problems)       a file is wrong: every problem at once            exit 2
    ├─ OptionError                options contradict each other or the panel        exit 2
    ├─ InfeasibleError(reasons)   no arrangement keeps every constraint             exit 1
    ├─ NoAnswerInTime             a limit was reached, nothing found or disproved   exit 3
    └─ SelfCheckError(details)    the re-check disagrees with the solver: our bug   exit 4
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True)
class Problem:
    """One thing that is wrong in a file, where it stands, and what would be right.

    `line` counts from 1 as an editor shows it; `column` is the header's name. Both are None where they mean nothing.
    """

    file: str
    problem: str
    remedy: str
    line: int | None = None
    column: str | None = None
    value: str | None = None


class BalancerError(Exception):
    """Base of every error that the tool reports in its own words."""

    exit_code: ClassVar[int] = 4

    @property
    def problems(self) -> tuple[Problem, ...]:
        """The error as a list of problems, for the screen and for JSON."""
        return (Problem(file="", problem=str(self), remedy=""),)


class InputError(BalancerError):
    """A file cannot be read as what it should be; carries every problem found, in file order."""

    exit_code = 2

    def __init__(self, problems: Sequence[Problem]) -> None:
        self._problems = tuple(problems)
        count = len(self._problems)
        super().__init__(f"{count} problem{'s' if count != 1 else ''} in the input")

    @property
    def problems(self) -> tuple[Problem, ...]:
        """Every problem found, in file order."""
        return self._problems


class OptionError(BalancerError):
    """Command-line options contradict each other or the panel."""

    exit_code = 2

    def __init__(self, problem: str, remedy: str = "") -> None:
        self._problem = Problem(file="", problem=problem, remedy=remedy)
        super().__init__(problem)

    @property
    def problems(self) -> tuple[Problem, ...]:
        """The one contradiction."""
        return (self._problem,)


class InfeasibleError(BalancerError):
    """No arrangement keeps every constraint; carries the conflicting ones in the user's words."""

    exit_code = 1

    def __init__(self, reasons: Sequence[str], remedies: Sequence[str] = ()) -> None:
        self.reasons = tuple(reasons)
        self.remedies = tuple(remedies)
        super().__init__("; ".join(self.reasons))

    @property
    def problems(self) -> tuple[Problem, ...]:
        """One problem a conflicting constraint; the remedies stand beside the first ones."""
        padded = self.remedies + ("",) * (len(self.reasons) - len(self.remedies))
        return tuple(
            Problem(file="", problem=reason, remedy=remedy)
            for reason, remedy in zip(self.reasons, padded, strict=False)
        )


class NoAnswerInTime(BalancerError):  # noqa: N818 - a limit reached is no error of anybody's
    """A limit was reached with nothing found and nothing disproved."""

    exit_code = 3


class SelfCheckError(BalancerError):
    """The solver-free re-check disagrees with the solver: a bug of ours, never shown as a plan."""

    exit_code = 4

    def __init__(self, details: Sequence[str]) -> None:
        self.details = tuple(details)
        super().__init__("; ".join(self.details))
