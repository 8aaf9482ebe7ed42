"""What surrounds the panes: the heading above, the worst finding, next move, note and keys below."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from textual.events import Key

from ....errors import visible
from ....services.antenna.levels import Level
from ... import rows as presenter
from ... import words
from ..form import NONE, FormRow
from ..lines import Line, Lines, padded, width_of, wrapped
from ..session import Session
from ..titles import as_fits
from ..typed import Typed
from .answer import MARKS, STYLES
from .chances import chances_line
from .going import next_line
from .jobs import TOLERANCE

if TYPE_CHECKING:
    from ....services.antenna.figures import Figures

# What a key does, the most needed first: the last ones go when there is no room.
BROWSING = (
    ("Enter", "edit"), ("?", "help"), ("q", "quit"), ("v", "view"), ("Tab", "drawer"), ("w", "write"),
    ("u", "undo"), ("+-", "nudge"), ("g", "go to finding"), ("c", "cure"), ("/", "find"), ("k", "keep"),
    ("o", "open"), ("n", "new"), ("arrows", "rows"), ("U", "redo"), ("PgDn", "scroll"), ("t", "colours"),
)  # fmt: skip
EDITING = (("Enter", "keeps"), ("Esc", "restores"), ("arrows", "mend what is there"), ("Ctrl+U", "clears"))

ANSWERING = (("Enter", "answers"), ("Esc", "leaves it"))
PLOTTING = (("left right", "readout"), ("z", "zoom"))
"""What the keys also do while a plot is in sight."""
SOLVE_ROOM = len("s solve it")
_LEAST_ANSWER = 16
"""Cells to type in, without which a question stands above its answer."""


class Heading(Lines):
    """Which antenna, where, with what, and whether it is an estimate."""

    def repaint(self, session: Session) -> None:
        """Show the heading of a session in as many lines as there are."""
        width, height, figures = self.size.width, self.size.height, session.figures
        state = "no answer" if session.no_answer else "solving" if session.solving else ""
        star = " (unsaved)" if session.unsaved else ""
        if session.unsafe:
            star += " (no journal)"
        about = _summary(figures) if figures is not None else {}
        room = width - len(state) - 1 if state else width
        basis = f": {words.basis(figures.design)}" if figures is not None and not session.dimmed else ""
        if width < 2 * len(basis):
            basis = basis.partition(",")[0]
        title = visible(session.design.title, max(8, room - len(basis) - len(star)))
        text = padded(title + basis + star, room)
        lines: list[Line] = [[(text, "head"), (f" {state}" if state else "", "watch")]]
        below = [about[key].value for key in ("site", "station") if key in about]
        lines += [[(as_fits(text, width), "text")] for text in below]
        self.show(lines[:height], stale=False)


class Foot(Lines):
    """The worst finding and its cure, the yield, the next move, a note, the keys; and questions in a line.

    `offered` are the keys of a view that has them first, and `about` what it is.
    """

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self.note = ""
        self.refused = False
        self.offered: tuple[tuple[str, str], ...] = ()
        self.about = ""
        self.plotting = False
        self._asking = ""
        self._typed: Typed | None = None
        self._answer: Callable[[str], None] | None = None
        self._live: Callable[[str], object] | None = None

    def say(self, text: str, refused: bool = False) -> None:
        """Set the note, shown until the next thing is said."""
        self.note, self.refused = text, refused

    def ask(
        self,
        question: str,
        answer: Callable[[str], None],
        text: str | None = None,
        live: Callable[[str], object] | None = None,
    ) -> None:
        """Ask in one line: with a text, for a line that Enter gives; without, for a single key.

        `live` is told the text whenever it changes.
        """
        self._asking, self._answer, self._live = question, answer, live
        # A beginning that waits for the rest of it stays when typing goes on.
        self._typed = None if text is None else Typed(text, fresh=not text.endswith("="))

    @property
    def asking(self) -> bool:
        """Whether a question is open."""
        return self._answer is not None

    def _close(self) -> Callable[[str], None]:
        answer = self._answer
        assert answer is not None
        self._asking, self._answer, self._typed = "", None, None
        return answer

    def key(self, event: Key) -> None:
        """Type the answer, or give it."""
        if event.key == "escape":
            self._close()("")
        elif self._typed is None:
            if event.character and event.is_printable:
                self._close()(event.character)
        elif event.key == "enter":
            text = self._typed.text.strip()
            self._close()(text)
        elif self._typed.key(event) and self._live is not None:
            self._live(self._typed.text)

    def paste(self, text: str) -> None:
        """Type what is pasted."""
        if self._typed is not None:
            self._typed.insert(text)
            if self._live is not None:
                self._live(self._typed.text)

    def repaint(self, session: Session, row: FormRow | None, editing: bool) -> None:
        """Show worst finding, yield, next move, note and keys in as many lines as there are."""
        width, height = self.size.width, self.size.height
        row = None if self.offered else row
        # A question that a key answers is told whole: what the keys do stands at its end.
        most = height - 1 if self.asking and self._typed is None else 2 if height > 3 else 1
        note = self._note(session, row, width, most)
        room = height - 1 - len(note)
        chances = self._chances(session, width) if room >= 3 else []
        # The worst finding always has a line; what is left goes to its cure, then to the next move.
        share = max(1, room - len(chances) - (1 if height > 3 else 0))
        worst = _cut(self._worst(session, width), min(share, 2, room), width)
        left = room - len(worst) - len(chances)
        following = _cut(self._next(session, width), left, width) if left > 0 else []
        blank: list[Line] = [[] for _ in range(left - len(following))]
        busy = editing or self.asking
        browsing = (*BROWSING[:3], *PLOTTING, *BROWSING[3:]) if self.plotting else BROWSING
        keys = ANSWERING if self.asking else EDITING if editing else self.offered or browsing
        line = keys_line(keys, row, busy or bool(self.offered), width)
        self.show([*worst, *chances, *following, *blank, *note, line])

    def _chances(self, session: Session, width: int) -> list[Line]:
        """Return the yield in a line."""
        if session.figures is None:
            return []
        style = "text" if session.aside.fresh(TOLERANCE) or session.settling else "quiet"
        return [[(padded(chances_line(session, width), width).rstrip(), style)]]

    def _worst(self, session: Session, width: int) -> list[Line]:
        if session.no_answer:
            return [[(piece, "stop")] for piece in wrapped("! " + session.no_answer, width, 2)]
        if session.figures is None:
            return [[]]
        row = _summary(session.figures)["worst"]
        level = row.finding.level if row.finding is not None else Level.FINE
        style = "quiet" if session.dimmed else STYLES[level]
        text = f"{MARKS[level].lstrip()}{row.label}: {row.value}"
        return [[(piece, style)] for piece in wrapped(text, width, 2)]

    def _next(self, session: Session, width: int) -> list[Line]:
        if session.figures is None:
            return []
        if read := next_line(session):
            return [[(piece, "text")] for piece in wrapped(f"next: {read}", width, 2)]
        row = _summary(session.figures)["next"]
        style = "quiet" if session.dimmed else "text"
        return [[(piece, style)] for piece in wrapped(f"{row.label}: {row.value}", width, 2)]

    def _note(self, session: Session, row: FormRow | None, width: int, most: int) -> list[Line]:
        if self._asking:
            if self._typed is None:
                return _cut([[(p, "watch")] for p in wrapped(self._asking, width)], most, width)
            if len(self._asking) + 1 + _LEAST_ANSWER <= width:
                question = self._asking + " "
                return [[(question, "watch"), *self._typed.pieces(width - len(question))]]
            above = _cut([[(p, "watch")] for p in wrapped(self._asking, width)], most, width)
            return [*above, self._typed.pieces(width)]
        if self.note:
            style = "stop" if self.refused else "found"
            text = f"! {self.note}" if self.refused else self.note
            return _cut([[(piece, style)] for piece in wrapped(text, width, 2)], most, width)
        if row is None:
            # A short screen has no other line for the yield.
            text = chances_line(session, width) if most == 1 else self.about
            return [[(padded(text, width).rstrip(), "quiet")]]
        text = "one of " + ", ".join(row.words) + ". " + row.known.help if row.words else row.known.help
        return _cut([[(piece, "quiet")] for piece in wrapped(text, width)], 1, width)


def _summary(figures: Figures) -> dict[str, presenter.Row]:
    return {row.key: row for row in presenter.summary(figures)}


def _cut(lines: list[Line], most: int, width: int) -> list[Line]:
    """Return so many lines at most; a cut text ends in dots."""
    if len(lines) <= most or most < 1:
        return lines[: max(0, most)]
    text, style = lines[most - 1][0]
    kept = text[: max(0, width - 3)].rpartition(" ")[0] or text[: max(0, width - 4)]
    return [*lines[: most - 1], [(kept.rstrip(" ,;:") + " ...", style)]]


def keys_line(keys: tuple[tuple[str, str], ...], row: FormRow | None, busy: bool, width: int) -> Line:
    """Return what the keys do just now, as many as fit; what changes with the row stands at the right.

    So little changes from row to row that little goes down a thin line.
    """
    solve = ""
    if not busy and row is not None:
        does = "edit     " if not row.words else "add it   " if row.value == NONE else "next word"
        of_list = (
            (("+-", "one more, one less"),) if row.counts else (("Del", "take it out"),) if row.listed else ()
        )
        keys = (("Enter", "how many " if row.counts else does), *of_list, *keys[1:])
        solve = f"s {'set it' if row.found and not row.unset else 'solve it'}" if row.solvable else ""
    room = width if busy else width - SOLVE_ROOM
    line: list[tuple[str, str]] = []
    for key, does in keys:
        piece = [(key, "head"), (f" {does}  ", "quiet")]
        if width_of([*line, *piece]) - 2 <= room:
            line += piece
    if solve and room > 0:
        gap = " " * (width - width_of(line) - SOLVE_ROOM)
        line += [(gap, "quiet"), (solve[:1], "head"), (solve[1:], "quiet")]
    return line
