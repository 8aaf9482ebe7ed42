"""What a view is: a name, and lines made from what is in sight."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Protocol

from rich.cells import cell_len
from textual.events import Click, MouseScrollDown, MouseScrollUp
from textual.message import Message

from .aside import Job
from .form import FormRow
from .lines import Line, Lines
from .session import Session
from .terminal import Look

TALL = 18
"""Height of the screen from which heading and foot have all their lines."""


@dataclass(frozen=True, kw_only=True)
class Sight:
    """All that a view may draw from: the session, the row under the cursor, the room, the look.

    `left` is how many columns of a text too wide for the room have been gone past.
    """

    session: Session
    row: FormRow | None
    width: int
    height: int
    look: Look
    tall: bool
    left: int = 0


class Acting(Protocol):
    """What a view may do when a key is pressed in it."""

    session: Session

    def ask(self, question: str, answer: Callable[[str], None], text: str | None = None) -> None:
        """Ask for a line, or for a single key when there is no text to start from."""

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""

    def changed(self) -> None:
        """Have the design solved that an edit made."""

    def show_again(self) -> None:
        """Draw the views anew."""


@dataclass(frozen=True, kw_only=True)
class View:
    """A view by its name, the letter that shows it, and the function that makes its lines.

    A `broad` one takes the room of the panes beside it, and keys are for it first: `press` is given each,
    `keys` and `about` tell of them. `jobs` are worked out aside while it is shown. `told` is its text as it
    can be written to a file that ends in `ending`. A `plot` has a readout and can be zoomed.
    """

    name: str
    lines: Callable[[Sight], list[Line]]
    letter: str = ""
    dims: bool = True
    plot: bool = False
    broad: bool = False
    jobs: tuple[Job, ...] = ()
    told: Callable[[Session], list[str]] | None = None
    ending: str = ".txt"
    keys: tuple[tuple[str, str], ...] = ()
    about: str = ""
    press: Callable[[str, Acting], bool] | None = None
    picked: Callable[[Session, list[Line]], int] | None = None


class ViewPane(Lines):
    """A pane that shows one view at a time, its name in the first line."""

    class Named(Message):
        """A view was pointed at by its letter, or the next one or the one before by > or <."""

        def __init__(self, letter: str) -> None:
            super().__init__()
            self.letter = letter

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self.pinned = 1
        self.view: View | None = None
        self.left = 0

    def update_view(self, session: Session, row: FormRow | None, look: Look, view: View, names: Line) -> None:
        """Show a view of the session under a line of names."""
        if view is not self.view:
            self.view = view
            self.left = 0
            self.scroll_lines(-(10**6))
        sight = Sight(
            session=session,
            row=row,
            width=self.room,
            height=max(0, self.size.height - 1),
            look=look,
            tall=self.screen.size.height >= TALL,
            left=self.left,
        )
        lines = view.lines(sight)
        if len(lines) > sight.height:
            # Where there is more below, the last column is for the mark that says so.
            lines = view.lines(replace(sight, width=sight.width - 1))
        if not lines and session.figures is None and not view.broad:
            words = session.no_answer or "working out the first answer"
            lines = [[(words, "stop" if session.no_answer else "quiet")]]
        old = session.stale or not all(session.aside.fresh(job) for job in view.jobs)
        dimmed = session.dimmed or (old and not session.settling)
        self.show([names, *lines], stale=view.dims and dimmed)
        if view.picked is not None and (place := view.picked(session, lines)) >= 0:
            self.keep_in_sight(min(place + 5, len(lines)))
            self.keep_in_sight(place + 1)

    def on_click(self, event: Click) -> None:
        """Ask for the view whose name the mouse points at in the first line."""
        left, letter = len(self.edge), ""
        for text, style in self._lines[0] if event.y == 0 and self._lines else ():
            letter = text if style == "head" else letter if style == "quiet" else ""
            if left <= event.x < left + cell_len(text):
                if letter:
                    self.post_message(self.Named(letter))
                return
            left += cell_len(text)

    def rename(self, names: Line) -> None:
        """Show another line of names above the same lines."""
        self.show([names, *self._lines[1:]], stale=self.stale)

    def slide(self, columns: int) -> None:
        """Go past columns of a text too wide for the room, or back."""
        self.left = max(0, min(self.left + columns, 80 - self.room))

    def on_mouse_scroll_down(self, event: MouseScrollDown) -> None:
        """Scroll down."""
        self.scroll_lines(2)

    def on_mouse_scroll_up(self, event: MouseScrollUp) -> None:
        """Scroll up."""
        self.scroll_lines(-2)
