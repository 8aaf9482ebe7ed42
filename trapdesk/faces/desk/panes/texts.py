"""Texts of the command line in a pane: whole where there is room, folded anew or moved sideways where not."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from itertools import groupby

from ....errors import visible
from ...layout import WIDTH
from ..aside import Job
from ..lines import Line, padded, wrapped
from ..session import Session
from ..view import Acting, Sight, View

_GAP = re.compile(r"(?<=\S) {2,}(?=\S)")
_HANG = 4
_WIDE = 12
"""Blanks that stand between columns, not after a label."""


def text_lines(texts: Sequence[str], width: int, left: int = 0) -> list[Line]:
    """Return plain lines as lines of a pane, in so many columns; tables start at the column `left`."""
    lines: list[Line] = []
    shown = ((t, _is_table(t)) for t in texts) if width >= WIDTH else _closer(_paragraphs(texts), width)
    for paragraph, table in shown:
        head = not paragraph.startswith(" ") and (not lines or not any(text for text, _ in lines[-1]))
        style = "head" if head else "text"
        if table and len(paragraph) > width:
            lines.append([(padded(paragraph[left:].rstrip(), width).rstrip(), style)])
        elif len(paragraph) > width:
            text = _GAP.sub("  ", paragraph.strip())
            indent = min(len(paragraph) - len(paragraph.lstrip()), _HANG)
            folded = wrapped(text, width - indent, 2)
            lines += [[(" " * indent + piece, style)] for piece in folded]
        else:
            lines.append([(paragraph, style)])
    return lines


def _paragraphs(texts: Sequence[str]) -> Iterator[tuple[str, bool]]:
    """Yield what was folded to the command line's width as it was before, and whether a table has it."""
    pieces: list[str] = []
    last = ""
    for text in texts:
        if pieces and not _goes_on(pieces[0], last, text):
            yield " ".join(pieces), _is_table(pieces[0])
            pieces = []
        pieces.append(text.strip() if pieces else text)
        last = text
    if pieces:
        yield " ".join(pieces), _is_table(pieces[0])


def _closer(paragraphs: Iterator[tuple[str, bool]], width: int) -> Iterator[tuple[str, bool]]:
    """Yield tables that are too broad with their columns moved together; drawings stay as they are."""
    for table, group in groupby(paragraphs, key=lambda pair: pair[1]):
        texts = [text for text, _ in group]
        broad = table and max(map(len, texts)) > width and not any("|" in text for text in texts)
        yield from ((text, table) for text in (_together(texts) if broad else texts))


def _together(texts: Sequence[str]) -> list[str]:
    """Return lines without those blanks between their columns that all of them have, but for two."""
    most = max(map(len, texts))
    padded_texts = [text.ljust(most) for text in texts]
    begin = min(len(text) - len(text.lstrip()) for text in texts)
    blank = [all(text[place] == " " for text in padded_texts) for place in range(most)]
    kept = [
        place
        for place in range(most)
        if place < begin + 2 or not (blank[place] and blank[place - 1] and blank[place - 2])
    ]
    return ["".join(text[place] for place in kept).rstrip() for text in padded_texts]


def _is_table(text: str) -> bool:
    gaps = _GAP.findall(text)
    return len(gaps) > 1 or "|" in text or any(len(gap) >= _WIDE for gap in gaps)


def _goes_on(first: str, last: str, text: str) -> bool:
    """Return whether a line is the rest of the one before, broken for want of room."""
    words = text.split()
    if not words or not last.strip() or _is_table(first) or _GAP.search(text):
        return False
    indent, before = (len(line) - len(line.lstrip()) for line in (text, first))
    hangs = indent > before if _GAP.search(first) else indent >= before
    return hangs and len(last) + 1 + len(words[0]) > WIDTH


def waiting_lines(session: Session, job: Job, width: int) -> list[Line]:
    """Return why there is nothing to show of a job yet."""
    aside = session.aside
    if words := aside.refusal(job.name):
        return [[(piece, "stop")] for piece in wrapped(f"! {words}", width, 2)]
    if session.no_answer and job.needs_figures:
        return [[(piece, "stop")] for piece in wrapped(f"! {session.no_answer}", width, 2)]
    return [[(padded(aside.progress(job.name) or "working it out", width).rstrip(), "quiet")]]


def text_view(
    name: str,
    letter: str,
    told: Callable[[Session], list[str]],
    jobs: tuple[Job, ...] = (),
    about: str = "",
    keys: tuple[tuple[str, str], ...] = (),
    press: Callable[[str, Acting], bool] | None = None,
) -> View:
    """Return the view of a text, which is empty until there is something to tell.

    `keys` come before those that every text has.
    """

    def lines(sight: Sight) -> list[Line]:
        session = sight.session
        texts = told(session)
        if texts:
            return text_lines(texts, sight.width, sight.left)
        job = next((job for job in jobs if session.aside.found(job.name) is None), None)
        if job is not None:
            return waiting_lines(session, job, sight.width)
        words = session.no_answer or "working out the first answer"
        return [[(piece, "quiet")] for piece in wrapped(visible(words, 400), sight.width)]

    return View(
        name=name,
        letter=letter,
        lines=lines,
        broad=True,
        jobs=jobs,
        told=told,
        about=about,
        keys=(*keys, *READING),
        press=press,
    )


READING = (
    ("arrows", "scroll"), ("PgDn", "page"), ("x", "write to a file"), ("Tab", "inputs"), ("v", "view"),
    ("?", "help"), ("q", "quit"),
)  # fmt: skip
"""What keys do in a text, the most needed first."""
