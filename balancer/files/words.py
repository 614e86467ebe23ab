"""Help with misspelt names: the known word that the user most likely meant."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Sequence

_SIMILAR_ENOUGH = 0.6


def nearest_word(word: str, known: Iterable[str]) -> str | None:
    """Give the known word closest to a misspelt one, whatever the case; None where none is close."""
    by_folded = {name.casefold(): name for name in known}
    matches = difflib.get_close_matches(word.casefold(), list(by_folded), n=1, cutoff=_SIMILAR_ENOUGH)
    return by_folded[matches[0]] if matches else None


def did_you_mean(word: str, known: Sequence[str]) -> str:
    """Ask back with the nearest known word, or list what is allowed."""
    nearest = nearest_word(word, known)
    return f"did you mean {nearest}?" if nearest else f"write one of: {', '.join(known)}"
