"""The inputs: drawers of rows, browsed and edited by keyboard."""

from __future__ import annotations

import re

from textual.events import Click, Key, MouseScrollDown, MouseScrollUp
from textual.message import Message

from ....design.fields import SOLVE
from ....errors import BadInput, Fault, visible
from ....services.antenna.levels import Level
from .. import form
from ..form import DRAWERS, FormRow
from ..lines import Line, Lines, padded
from ..lists import list_of, without
from ..moving import moved, reads_here
from ..session import Session
from ..titles import in_sight
from ..typed import Typed
from .answer import MARKS, STYLES

ALL_AT_ONCE = 26
"""Height from which all drawers stand one below the other."""
_LONGEST_LABEL = 20
_KEY = re.compile(r"\b[a-z]+(?:\.[a-z0-9_]+)+\b|\b[a-z]+_[a-z_]+\b")
"""A dotted key of a design, or a name in it with an underscore."""


class DrawersPane(Lines):
    """Rows with a cursor. Browsing, keys move or command; editing, they type into the row."""

    class Changed(Message):
        """The design changed."""

    class Moved(Message):
        """The cursor, or what is being typed, changed."""

    class Said(Message):
        """Something to tell: words, and whether they are a refusal."""

        def __init__(self, words: str, refused: bool = False) -> None:
            super().__init__()
            self.words = words
            self.refused = refused

    def __init__(self, session: Session, *, id: str) -> None:
        super().__init__(id=id)
        self.pinned = 1
        self.session = session
        self.drawer = next(iter(DRAWERS))
        self.typed: Typed | None = None
        self._key = ""
        self._spare = 0
        self._last: dict[str, str] = {}
        self._rows: list[FormRow] = []
        self._places: list[int | None] = []

    @property
    def row(self) -> FormRow | None:
        """The row under the cursor."""
        return next((row for row in self._rows if row.key == self._key), None)

    @property
    def editing(self) -> bool:
        """Whether keys type into the row."""
        return self.typed is not None

    def _form(self) -> dict[str, list[FormRow]]:
        return form.rows(self.session.design, self.session.figures)

    def repaint(self) -> None:
        """Make the rows anew from the session and show them."""
        drawers = self._form()
        shown = list(DRAWERS) if self.size.height >= ALL_AT_ONCE else [self.drawer]
        self._rows = [row for name in shown for row in drawers[name]]
        keys = [row.key for row in self._rows if row.key and form.drawer_of(row.key) == self.drawer]
        if self._key not in keys:
            self._key = keys[0] if keys else ""
        marks = self._marks()
        # Where there is more below, the last column is for the mark that says so.
        self._spare = int(len(shown) > 1 or len(self._rows) >= self.size.height)
        lines: list[Line] = [self._names()]
        self._places = [None]
        cursor = 0
        for name in shown:
            if len(shown) > 1:
                lines += [*([[]] if len(lines) > 1 else []), [(name, "head")]]
                self._places += [None] * (len(lines) - len(self._places))
            label = max((len(r.name) for r in drawers[name]), default=0)
            for row in drawers[name]:
                if row.key == self._key:
                    cursor = len(lines)
                self._places.append(self._rows.index(row) if row.key else None)
                lines.append(self._line(row, min(label, _LONGEST_LABEL, self.room - 15), marks))
        self.show(lines)
        # From the first row on everything above it is in sight too.
        self.keep_in_sight(cursor if cursor > 3 else 1)

    def _names(self) -> Line:
        here = self.drawer
        return [(text, "picked" if name == here else "quiet") for name, text in self._titles()]

    def _titles(self) -> list[tuple[str, str]]:
        """Return the names of the drawers as they read, those near the present one where not all fit."""
        names = list(DRAWERS)
        return in_sight(names, [f" {name} " for name in names], names.index(self.drawer), self.room)

    def _marks(self) -> dict[str, Level]:
        """Return the most serious level of the findings on each key."""
        figures = self.session.figures
        found: dict[str, Level] = {}
        order = list(Level)
        for finding in figures.findings if figures is not None else ():
            if order.index(finding.level) > order.index(found.get(finding.where, Level.FINE)):
                found[finding.where] = finding.level
        return found

    def _line(self, row: FormRow, label: int, marks: dict[str, Level]) -> Line:
        if not row.key:
            return [("  " + row.known.label, "head")]
        here = row.key == self._key
        level = marks.get(row.key, Level.FINE)
        front = MARKS[level].strip() or (">" if here else " ")
        width = self.room - label - 3 - self._spare
        # A long name takes of the room that a short value leaves.
        longer = max(label, min(len(row.name), self.room - 3 - self._spare - max(4, len(row.text))))
        width, label = width - (longer - label), longer
        # And a long value of what a short name leaves.
        short = max(len(row.name), min(label, label + width - len(row.text) - len(" found") * row.found))
        if not (here and self.typed is not None):
            width, label = width + (label - short), short
        name = padded(row.name, label)
        if here and self.typed is not None:
            return [(front, "cursor"), (f" {name} ", "head"), *self.typed.pieces(width)]
        tail, text = (" found" if row.found and not row.unset else ""), row.text
        if tail and len(tail) + len(text) > width:
            tail, text = "", f"= {text}"
        value = padded(text, max(1, width - len(tail)))
        style = "quiet" if row.unset else "found" if row.found else "text"
        if row.found and self.session.dimmed:
            style = "quiet"
        if here:
            return [(f"{front} {name} {value}{tail}", "cursor")]
        return [(front + " ", STYLES[level]), (name + " ", "text"), (value, style), (tail, style)]

    def key(self, event: Key) -> bool:
        """Type, or move, or do what the key stands for; return whether it stands for anything here."""
        return self._browse(event) if self.typed is None else self._type(event)

    def _type(self, event: Key) -> bool:
        assert self.typed is not None
        if event.key in ("ctrl+c", "ctrl+q"):
            return False
        if event.key == "enter":
            self._keep(self.typed.text)
        elif event.key == "escape":
            self.typed = None
            self._tell("as it was")
        elif self.typed.key(event):
            self.post_message(self.Moved())
        self.repaint()
        return True

    def _browse(self, event: Key) -> bool:
        row, name = self.row, event.key
        steps = {"up": -1, "down": 1}
        if name in steps:
            self.move(steps[name])
        elif name in ("home", "end"):
            self.move(-999 if name == "home" else 999)
        elif name in ("tab", "shift+tab"):
            self.turn(1 if name == "tab" else -1)
        elif row is None:
            return False
        elif name in ("enter", "space") and row.words:
            self._set(row, form.following_word(row))
        elif name in ("enter", "e"):
            self.edit(Typed(form.starting_text(row), fresh=name == "enter" or bool(row.words)))
        elif event.character and event.character in "0123456789" and not row.words:
            self.edit(Typed(event.character))
        elif name == "s":
            self._try(row, lambda: form.toggled(self.session.design, row, self.session.figures))
        elif event.character in ("+", "=", "-"):
            self._try(row, lambda: form.nudged(row, -1 if event.character == "-" else 1))
        elif name in ("delete", "backspace") and row.listed:
            self._take_out(row)
        elif row.words and event.character and event.character in "0123456789.":
            self._refuse(
                row, BadInput(Fault("", "this_is_a_choice", help="Enter takes its next word, e types"))
            )
        else:
            return False
        return True

    def paste(self, text: str) -> None:
        """Type what is pasted, its first line only."""
        row = self.row
        if self.typed is None and row is not None and not row.words:
            self.edit(Typed(form.starting_text(row), fresh=True))
        if self.typed is not None:
            self.typed.insert(text)
            self.repaint()

    def edit(self, typed: Typed) -> None:
        """Start typing into the row under the cursor."""
        self.typed = typed
        self.repaint()
        self.post_message(self.Moved())

    def _keep(self, text: str) -> None:
        row = self.row
        assert row is not None
        if text.strip() == form.starting_text(row):
            self.typed = None
            self._tell("as it was")
            return
        self._try(row, lambda: form.read_row(row, text))

    def _try(self, row: FormRow, value) -> None:  # noqa: ANN001 - a function that may raise BadInput
        try:
            self._set(row, value())
        except BadInput as refusal:
            self._refuse(row, refusal)

    def _take_out(self, row: FormRow) -> None:
        """Take the member of a list that a row belongs to out of the list."""
        _, place = list_of(self.session.design, row.key) or ("", 0)
        try:
            self.session.take(without(self.session.design, row.listed, place))
        except BadInput as refusal:
            self._refuse(row, refusal)
            return
        self.go(row.listed)
        self._tell("taken out of its list; u puts it back")
        self.post_message(self.Changed())

    def _ask_site(self, row: FormRow, value: object) -> None:
        """Ask what a changed site means for readings that were kept; anything else leaves all as it was."""

        def decided(key: str) -> None:
            self.typed = None
            if key in ("n", "c"):
                self._set(row, value, new_site=key == "n")
            else:
                self.repaint()
                self._tell("as it was")

        question = "readings were kept at this site: n it hangs at a new one, c only corrects, Esc neither"
        self.app.ask(question, decided)  # type: ignore[attr-defined] - the desk is the app

    def _set(self, row: FormRow, value: object, new_site: bool | None = None) -> None:
        """Set a row; what a rule forbids is told, and the old value stays."""
        before = row.text
        session = self.session
        if new_site is None and row.key.startswith("site.") and reads_here(session.design):
            self._ask_site(row, value)
            return
        try:
            changed = form.put(session.design, row.key, value, session.figures, session.past())
            if new_site and changed != session.design:
                changed = moved(session.design, changed, session.figures)
            changed = session.take(changed)
        except BadInput as refusal:
            self._refuse(row, refusal)
            return
        self.typed = None
        self.repaint()
        after = self.row
        now = after.text if after is not None else ""
        if after is not None and after.value is SOLVE:
            now = "to be solved"
        said = (
            f"{row.known.label}: {now}, was {before}" if changed else f"{row.known.label}: {now}, as before"
        )
        self._tell(said)
        if changed:
            self.post_message(self.Changed())

    def _refuse(self, row: FormRow, refusal: BadInput) -> None:
        """Tell the first fault; while editing the text stays, to be mended."""
        fault = refusal.faults[0]
        words = str(fault)
        if fault.where:
            name = fault.where.rpartition(".")[2].replace("_", " ")
            words = self._label(fault.where, row, name) + words[len(visible(fault.where, 120)) :]
        else:
            words = f"{row.known.label}: {words}"
        # The rules speak of keys of the file; here their rows have names.
        words = _KEY.sub(lambda found: self._label(found[0], row, found[0]), words)
        self.post_message(self.Said(words, refused=True))
        self.repaint()

    def _label(self, key: str, row: FormRow, unknown: str) -> str:
        """Return what a key, or the last word of one, is called on the desk, the nearest row first."""
        rows = [one for drawer in self._form().values() for one in drawer]
        near = row.key.rpartition(".")[0]
        wanted = (key, f"{near}.{key}")
        found = next((one for one in rows if one.key in wanted), None) or next(
            (one for one in rows if one.key.endswith(f".{key}")), None
        )
        return found.known.label if found is not None else unknown

    def _tell(self, words: str) -> None:
        self.post_message(self.Said(words))

    def move(self, by: int) -> None:
        """Move the cursor by so many rows."""
        keys = [row.key for row in self._rows if row.key]
        if not keys:
            return
        place = keys.index(self._key) if self._key in keys else 0
        self._move_to(keys[max(0, min(len(keys) - 1, place + by))])

    def turn(self, by: int) -> None:
        """Go to another drawer, to the row that was last under the cursor there."""
        names = list(DRAWERS)
        self.drawer = names[(names.index(self.drawer) + by) % len(names)]
        self._key = self._last.get(self.drawer, "")
        self.repaint()
        self._move_to(self._key)

    def go(self, key: str) -> None:
        """Put the cursor on the row of a key, or on the first of those that lie below it."""
        drawers = self._form()
        keys = [row.key for rows in drawers.values() for row in rows if row.key]
        below = [one for one in keys if one.startswith(f"{key}.")]
        # A key of the figures alone, such as a band's, may have no row but those below it.
        found = [key] if key in keys and form.drawer_of(key) else below
        if not found:
            return
        self._key = found[0]
        self.drawer = form.drawer_of(self._key)
        self._last[self.drawer] = self._key
        self.repaint()

    def _move_to(self, key: str) -> None:
        self.go(key)
        self.post_message(self.Moved())

    def find(self, text: str) -> bool:
        """Go to the first row that begins with a text, or has it in its name; return whether there is one."""
        drawers = self._form()
        rows = [row for drawer in drawers.values() for row in drawer if row.key]
        wanted = text.strip().lower()
        begins = [row for row in rows if row.known.label.lower().startswith(wanted)]
        holds = [row for row in rows if wanted in row.known.label.lower() or wanted in row.key]
        found = next(iter(begins or holds), None)
        if found is not None and wanted:
            self.go(found.key)
        return found is not None

    def on_click(self, event: Click) -> None:
        """Put the cursor where the mouse points; a second click edits."""
        index = self.line_at(event.y)
        if self.typed is not None or not 0 <= index < len(self._places):
            return
        if index == 0:
            return self._pick(event.x)
        place = self._places[index]
        if place is None:
            return
        row = self._rows[place]
        if row.key == self._key and event.chain > 1 and not row.words:
            self.edit(Typed(form.starting_text(row)))
        else:
            self._move_to(row.key)

    def _pick(self, x: int) -> None:
        """Open the drawer whose name is at a column of the first line."""
        left = len(self.edge)
        names = list(DRAWERS)
        for name, text in self._titles():
            if left <= x < left + len(text):
                self.turn(names.index(name) - names.index(self.drawer))
                return
            left += len(text)

    def on_mouse_scroll_down(self, event: MouseScrollDown) -> None:
        """Scroll the rows."""
        self.scroll_lines(2)

    def on_mouse_scroll_up(self, event: MouseScrollUp) -> None:
        """Scroll the rows."""
        self.scroll_lines(-2)
