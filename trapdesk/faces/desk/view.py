"""What a view is: a name, and lines made from what is in sight."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from textual.events import MouseScrollDown, MouseScrollUp

from .form import FormRow
from .lines import Line, Lines
from .session import Session
from .terminal import Look

TALL = 18
"""Height of the screen from which heading and foot have all their lines."""


@dataclass(frozen=True, kw_only=True)
class Sight:
    """All that a view may draw from: the session, the row under the cursor, the room, the look."""

    session: Session
    row: FormRow | None
    width: int
    height: int
    look: Look
    tall: bool


@dataclass(frozen=True, kw_only=True)
class View:
    """A view by its name and the function that makes its lines; a `plot` has a readout and can be zoomed."""

    name: str
    lines: Callable[[Sight], list[Line]]
    dims: bool = True
    plot: bool = False


class ViewPane(Lines):
    """A pane that shows one view at a time, its name in the first line."""

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self.pinned = 1
        self.view: View | None = None

    def update_view(self, session: Session, row: FormRow | None, look: Look, view: View, names: Line) -> None:
        """Show a view of the session under a line of names."""
        if view is not self.view:
            self.view = view
            self.scroll_lines(-(10**6))
        sight = Sight(
            session=session,
            row=row,
            width=self.room,
            height=max(0, self.size.height - 1),
            look=look,
            tall=self.screen.size.height >= TALL,
        )
        lines = view.lines(sight)
        if len(lines) > sight.height:
            # Where there is more below, the last column is for the mark that says so.
            lines = view.lines(replace(sight, width=sight.width - 1))
        if not lines and session.figures is None:
            words = session.no_answer or "working out the first answer"
            lines = [[(words, "stop" if session.no_answer else "quiet")]]
        self.show([names, *lines], stale=view.dims and session.stale)

    def on_mouse_scroll_down(self, event: MouseScrollDown) -> None:
        """Scroll down."""
        self.scroll_lines(2)

    def on_mouse_scroll_up(self, event: MouseScrollUp) -> None:
        """Scroll up."""
        self.scroll_lines(-2)
