"""The work at the panel: steps, parts to bring and tests to make before, as plain data with their sentences."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from balancer.panel import Landing, format_landing


class How(StrEnum):
    """How a circuit gets from its old terminal to its new one."""

    EXCHANGE = "exchange"
    """The breakers stay; the conductor goes to an equal breaker."""
    MOVE_BREAKER = "move breaker"
    """The breaker goes with its circuit, or a new one is fitted for it."""
    TURN = "turn"
    """The two conductors of a two-pole circuit or of a pair change places."""
    NEW = "new"
    """The circuit was not landed before."""
    TAKE_OUT = "take out"
    """A spare breaker comes out to make room."""

    @property
    def document_word(self) -> str:
        """The word of the JSON document, which knows four: a spare taken out is a breaker moved to nowhere."""
        return str(How.MOVE_BREAKER if self is How.TAKE_OUT else self)


class Splice(StrEnum):
    """Whether the conductor is long enough for its new terminal."""

    NONE = ""
    MAY_BE_NEEDED = "may be needed"
    NEEDED = "needed"


@dataclass(frozen=True, kw_only=True)
class Step:
    """What is done to one circuit; steps are carried out in order, the panel dead.

    Attributes
    ----------
    lift_first
        Circuits to lift off their terminals and set aside before this step; each lands in a later step of its own.
    was_lifted
        This circuit was set aside in an earlier step and is landed now.
    with_breaker
        Its as-found breaker goes with it. False: the conductor lands on a breaker already there, or on a new one.
    is_new_breaker
        It lands on a breaker that has to be bought.
    breaker_a
        Rating [A] of the breaker that the conductor ends on; None where it is not known.
    reach_in
        How far [in] the conductor must reach beyond where it was landed.
    action
        One or two sentences: what to do.
    goes_along
        What moves or changes with it, a short sentence each: load neutral, partner, metering coil, mounting screw.
    splice_text
        "" or a short sentence with reach and slack.
    """

    circuit: str
    description: str
    from_: Landing
    to: Landing
    how: How
    lift_first: tuple[str, ...] = ()
    was_lifted: bool = False
    with_breaker: bool = False
    is_new_breaker: bool = False
    breaker_a: float | None = None
    reach_in: float = 0.0
    splice: Splice = Splice.NONE
    action: str = ""
    goes_along: tuple[str, ...] = ()
    splice_text: str = ""

    @property
    def from_text(self) -> str:
        """Old landing as the inventory writes it; "" for a new circuit."""
        return format_landing(self.from_)

    @property
    def to_text(self) -> str:
        """New landing as the inventory writes it; "" for a spare taken out."""
        return format_landing(self.to)


class PartKind(StrEnum):
    """Parts that a plan may need."""

    FILLER = "filler plate"
    HANDLE_TIE = "handle tie"
    BREAKER = "breaker"
    SPLICE = "splice"


@dataclass(frozen=True, kw_only=True)
class Part:
    """Something to bring along; `is_certain` False says that it may turn out not to be needed."""

    kind: PartKind
    quantity: int
    circuits: tuple[str, ...]
    text: str
    is_certain: bool = True


PRE_MOVE_TEST = (
    "With a load on the circuit and the others left running, clamp its hot and the neutral of the same cable together. "
    "0 A: the neutral is its own. Any other reading: the neutral is shared or crossed; leave the circuit where it is, "
    "find its partner, enter both in shared_neutral and plan again. A partner that is idle does not show."
)
"""How every circuit is tested of which nobody knows whether it shares its neutral."""


@dataclass(frozen=True, kw_only=True)
class PreMoveTest:
    """A clamp-meter test, as `PRE_MOVE_TEST` says, of one circuit before the panel is shut off; `text` names it."""

    circuit: str
    landing: Landing
    text: str


@dataclass(frozen=True, kw_only=True)
class Work:
    """Everything to do, in order. `max_loose` is the most hot conductors set aside at any one time.

    Conductors of circuits that were not landed before do not count as set aside.
    """

    steps: tuple[Step, ...]
    parts: tuple[Part, ...]
    pre_moves: tuple[PreMoveTest, ...]
    max_loose: int
