"""The findings, the most serious first, each with what would help, and the next move."""

from __future__ import annotations

from ... import words
from ...lines import next_move
from ..lines import Line, wrapped
from ..view import Sight
from .answer import MARKS, STYLES


def findings_lines(sight: Sight) -> list[Line]:
    """Return every finding with its cure, and what to do next."""
    figures = sight.session.figures
    if figures is None:
        return []
    lines: list[Line] = []
    for finding in words.ranked(figures.findings):
        style = STYLES[finding.level]
        text = f"{words.LEVEL_WORDS[finding.level]}: {words.sentence(finding, figures.design)}"
        lines += [
            [((MARKS[finding.level] if not index else "  ") + piece, style)]
            for index, piece in enumerate(wrapped(text, sight.width - 2))
        ]
        if cure := words.cure_among(finding, figures.findings):
            lines += [[("  " + piece, "text")] for piece in wrapped(f"helps: {cure}", sight.width - 2)]
        lines.append([])
    if not lines:
        lines = [[("no findings", "text")], []]
    lines.append([("next", "head")])
    lines += [[("  " + piece, "text")] for piece in wrapped(next_move(figures), sight.width - 2)]
    return [*lines, [], *caution_lines(sight.width)]


def caution_lines(width: int) -> list[Line]:
    """Return the first caution, quietly."""
    return [[(piece, "quiet")] for piece in wrapped(words.POWER_LINES, width)]
