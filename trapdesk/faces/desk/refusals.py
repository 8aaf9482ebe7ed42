"""Why there is no answer, in one line."""

from __future__ import annotations

from ...design.rules import InvalidDesign
from ...errors import NoAnswer, TrapdeskError
from ...store.spoken import spoken
from .. import words


def reason(error: TrapdeskError) -> str:
    """Return in one line why a design has no answer."""
    if isinstance(error, NoAnswer):
        return words.no_answer(error)
    if isinstance(error, InvalidDesign):
        return "; ".join(str(spoken(breach)) for breach in error.breaches)
    return "; ".join(str(error).splitlines())
