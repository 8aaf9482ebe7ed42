"""The desk as an application: it solves aside and hands what is found to the panes."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from typing import ClassVar

from textual.app import App, ComposeResult
from textual.binding import Binding
from textual.events import Key, Paste, Resize

from ... import store
from ...errors import TrapdeskError
from ...services.solve import solve
from .arrange import LEAST_HEIGHT, LEAST_WIDTH, arrangement
from .filing import Filing
from .lines import Lines, padded
from .middle import Middle
from .panes.drawers import DrawersPane
from .panes.frame import Foot, Heading
from .session import Session
from .solving import Solved, Solver, Solving
from .terminal import Look, look
from .themes import THEMES


class Desk(App[None]):
    """Inputs, views and findings of one design."""

    CSS_PATH = "desk.tcss"
    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    BINDINGS: ClassVar = [
        Binding("u", "undo"),
        Binding("U,ctrl+r", "redo"),
        Binding("v", "view(1)"),
        Binding("V", "view(-1)"),
        Binding("h,question_mark,f1", "help"),
        Binding("escape", "back"),
        Binding("w", "write"),
        Binding("W", "write_as"),
        Binding("t", "colours"),
        Binding("pagedown", "scroll(1)"),
        Binding("pageup", "scroll(-1)"),
        Binding("q,ctrl+q,ctrl+c", "leave"),
    ]

    def __init__(self, session: Session, drawn: Look, solver: Solver = solve) -> None:
        super().__init__()
        self.session = session
        self.drawn = drawn
        self._fitting = False
        self._solving = Solving(self, session, solver)
        self._filing = Filing(session, self)
        for theme in THEMES.values():
            self.register_theme(theme)
        self.theme = drawn.theme

    def get_theme_variable_defaults(self) -> dict[str, str]:
        """Return the colours that a theme not of ours lacks."""
        return THEMES["plain"].variables

    def compose(self) -> ComposeResult:
        """Lay out heading, panes and foot."""
        yield Heading(id="heading")
        yield Middle(self.session, self.drawn, id="middle")
        yield Foot(id="foot")
        yield Lines(id="small")

    def on_mount(self) -> None:
        """Paint, then begin to solve."""
        self.call_after_refresh(self._solve)

    def on_key(self, event: Key) -> None:
        """Give a key to whom it is for: nothing has the focus, so that keys are dealt with in their order."""
        if self.foot.asking:
            self.foot.key(event)
            self._repaint_foot()
        elif not (self._middle.key(event) or self.drawers.key(event)):
            return
        event.stop()
        event.prevent_default()

    def on_paste(self, event: Paste) -> None:
        """Give what is pasted to whom it is for."""
        if self.foot.asking:
            self.foot.paste(event.text)
            self._repaint_foot()
        else:
            self.drawers.paste(event.text)

    @property
    def _middle(self) -> Middle:
        return self.query_one(Middle)

    @property
    def drawers(self) -> DrawersPane:
        """The inputs."""
        return self.query_one(DrawersPane)

    @property
    def foot(self) -> Foot:
        """The lines below the panes."""
        return self.query_one(Foot)

    async def settled(self) -> None:
        """Wait until the present design has its whole answer, or the reason why there is none."""
        await self._solving.settled()

    def _solve(self) -> None:
        self._solving.begin()
        self.repaint()

    def on_solved(self, message: Solved) -> None:
        """Take an answer in and show it when it is still wanted."""
        if self._solving.take(message):
            self.repaint()

    def on_resize(self, event: Resize) -> None:
        """Choose the arrangement for a size."""
        width, height = event.size
        self._middle.arranged = arrangement(width, height)
        text = f"{width}x{height} is too small: the desk needs {LEAST_WIDTH}x{LEAST_HEIGHT}"
        self.query_one("#small", Lines).show([[(padded(text, width), "text")]])
        self.repaint()

    def on_lines_resized(self) -> None:
        """Fit the panes to their new sizes, once for all of them."""
        if not self._fitting:
            self._fitting = True
            self.call_later(self._fit)

    def _fit(self) -> None:
        self._fitting = False
        self.repaint()

    def repaint(self) -> None:
        """Hand the session to every pane."""
        self.query_one(Heading).repaint(self.session)
        self._middle.repaint()
        self._repaint_foot()

    def _repaint_foot(self) -> None:
        self.foot.repaint(self.session, self.drawers.row, self.drawers.editing)

    def on_drawers_pane_changed(self) -> None:
        """Solve the design that an edit made."""
        self._solve()

    def on_drawers_pane_moved(self) -> None:
        """Tell of the row the cursor came to."""
        self.foot.say("")
        self.repaint() if self._middle.helping else self._repaint_foot()

    def on_drawers_pane_said(self, message: DrawersPane.Said) -> None:
        """Show what the inputs have to tell."""
        self.say(message.words, message.refused)

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""
        self.foot.say(text, refused)
        self.query_one(Heading).repaint(self.session)
        self._repaint_foot()

    def ask(self, question: str, answer: Callable[[str], None], text: str | None = None) -> None:
        """Ask in the foot for a line, or for a single key when there is no text to start from."""
        self.foot.ask(question, answer, text)
        self._repaint_foot()

    def close(self) -> None:
        """End the desk."""
        self.exit()

    def action_undo(self) -> None:
        """Go back one design."""
        self._step(self.session.undo(), "undone", "there is nothing to undo")

    def action_redo(self) -> None:
        """Take back an undo."""
        self._step(self.session.redo(), "done again", "there is nothing to do again")

    def _step(self, moved: bool, done: str, nothing: str) -> None:
        self.say(done if moved else nothing, refused=not moved)
        if moved:
            self._solve()

    def action_view(self, by: int) -> None:
        """Show another view."""
        self._middle.turn(by)

    def action_help(self) -> None:
        """Show help, or take it away."""
        self._middle.helping = not self._middle.helping
        self.repaint()

    def action_back(self) -> None:
        """Take help and note away."""
        self._middle.helping = False
        self.foot.say("")
        self.repaint()

    def action_scroll(self, pages: int) -> None:
        """Scroll the view."""
        self._middle.scroll_view(pages)

    def action_colours(self) -> None:
        """Take the next theme."""
        order = list(THEMES)
        self.theme = order[(order.index(self.theme) + 1) % len(order)]
        self.say(f"colours: {self.theme}")

    def action_write(self) -> None:
        """Save the design."""
        self._filing.write()

    def action_write_as(self) -> None:
        """Save the design under another name."""
        self._filing.write_as()

    def action_leave(self) -> None:
        """Quit; ask when something is not saved."""
        if not self.foot.asking:
            self._filing.leave()


def run(argument: str | None) -> int:
    """Open the desk on a file or preset, the first preset without one, and return the exit code."""
    try:
        document = store.find(argument) if argument is not None else store.find()
    except TrapdeskError as error:
        print(error, file=sys.stderr)
        return error.exit_code
    if not (sys.stdin.isatty() and sys.stdout.isatty()):
        print("the desk needs a terminal; trapdesk figures FILE prints the figures", file=sys.stderr)
        return 2
    Desk(Session(document), look(os.environ)).run()
    return 0
