"""As much as fits of what is told in a line: names around the one that is here, pieces between commas."""

from __future__ import annotations

from collections.abc import Sequence

from rich.cells import cell_len

from .lines import padded


def in_sight(keys: Sequence[str], texts: Sequence[str], here: int, width: int) -> list[tuple[str, str]]:
    """Return as many of a row of names as fit in so many cells around the one that is here, in brackets.

    Each name, which has a blank on either side, comes with its key. Names beyond are told by < and >, under
    the key of the nearest that is not in sight.
    """
    texts = [f"[{text.strip()}]" if place == here else text for place, text in enumerate(texts)]
    first, last = here, here
    used = cell_len(texts[here])
    reach = True
    while reach:
        reach = False
        # What comes next matters more than what was.
        for place in (last + 1, first - 1):
            if not 0 <= place < len(texts):
                continue
            ends = (min(first, place), max(last, place))
            marks = (ends[0] > 0) + (ends[1] < len(texts) - 1)
            if used + cell_len(texts[place]) + marks <= width:
                (first, last), used, reach = ends, used + cell_len(texts[place]), True
    shown = list(zip(keys[first : last + 1], texts[first : last + 1], strict=True))
    before = [(keys[first - 1], "<")] if first > 0 else []
    behind = [(keys[last + 1], ">")] if last < len(texts) - 1 else []
    return [*before, *shown, *behind]


def as_fits(text: str, width: int) -> str:
    """Return what is told between commas, as much of it as fits; dots stand for the rest."""
    if len(text) <= width:
        return padded(text, width)
    pieces = text.split(", ")
    while len(pieces) > 1 and len(", ".join(pieces)) + 5 > width:
        pieces.pop()
    return padded(f"{', '.join(pieces)}, ...", width)
