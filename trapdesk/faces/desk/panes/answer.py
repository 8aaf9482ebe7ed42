"""The answer: what to know in ten seconds, and below it everything there is."""

from __future__ import annotations

from ....services.antenna.levels import Level
from ... import rows as presenter
from ...layout import GROUPS
from ..lines import Line, wrapped
from ..view import Sight

MARKS = {Level.FINE: "  ", Level.WATCH: "* ", Level.STOP: "! "}
STYLES = {Level.FINE: "text", Level.WATCH: "watch", Level.STOP: "stop"}
IN_HEADING = ("title", "site", "station")
IN_FOOT = ("worst", "next")
_LABEL = 6


def answer_lines(sight: Sight) -> list[Line]:
    """Return the summary, without what heading and foot say."""
    figures = sight.session.figures
    if figures is None:
        return []
    skipped = (*IN_FOOT, *(IN_HEADING if sight.tall else ("title",)))
    lines: list[Line] = []
    for row in presenter.summary(figures):
        if row.key not in skipped:
            lines += labelled(row.label, row.value, sight.width)
    return lines


def labelled(label: str, text: str, width: int, style: str = "text") -> list[Line]:
    """Return a text hanging beside its label."""
    pieces = wrapped(text, width - _LABEL)
    return [
        [(f"{label if not index else '':<{_LABEL}}", "head"), (piece, style)]
        for index, piece in enumerate(pieces)
    ]


def figures_lines(sight: Sight) -> list[Line]:
    """Return every figure: what was given, what was found, with a mark where there is a finding."""
    figures = sight.session.figures
    if figures is None:
        return []
    lines: list[Line] = []
    group = ""
    label = max(16, min(26, sight.width // 2 - 2))
    for row in presenter.rows(figures):
        if row.group == "findings":
            break
        if row.group != group:
            group = row.group
            lines += [*([[]] if lines else []), [(GROUPS[group], "head")]]
        level = row.finding.level if row.finding is not None else Level.FINE
        value = row.found or row.given
        beside = f" ({row.given})" if row.found and row.given and row.given != "solve" else ""
        head = [(MARKS[level], STYLES[level]), (f"{row.label:<{label}} ", "quiet")]
        texts = wrapped(value + beside, max(4, sight.width - label - 3))
        if len(row.label) > label:
            lines.append([(MARKS[level], STYLES[level]), (row.label, "quiet")])
            head = [("  ", "text"), (" " * (label + 1), "quiet")]
        lines.append([*head, (texts[0], STYLES[level])])
        lines += [[(" " * (label + 3), "text"), (text, STYLES[level])] for text in texts[1:]]
    return lines
