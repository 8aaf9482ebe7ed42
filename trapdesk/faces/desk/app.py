"""The desk as an application: it solves aside and hands what is found to the panes."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from typing import ClassVar

from textual.app import App, ComposeResult
from textual.binding import Binding
from textual.containers import Container
from textual.events import Resize

from ... import store
from ...errors import TrapdeskError
from ...services.solve import solve
from .arrange import ANSWER, FINDINGS, HELP, INPUTS, LEAST_HEIGHT, LEAST_WIDTH, arrangement, names
from .filing import Filing
from .lines import Lines, padded
from .panes.drawers import DrawersPane
from .panes.frame import Foot, Heading
from .session import Session
from .solving import Solved, Solver, Solving
from .terminal import Look, look
from .themes import THEMES
from .view import ViewPane


class Desk(App[None]):
    """Inputs, views and findings of one design."""

    CSS_PATH = "desk.tcss"
    ENABLE_COMMAND_PALETTE = False
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
        self._solving = Solving(self, session, solver)
        self._filing = Filing(session, self)
        self._arranged = arrangement(80, 24)
        self._view = ANSWER
        self._helping = False
        for theme in THEMES.values():
            self.register_theme(theme)
        self.theme = drawn.theme

    def get_theme_variable_defaults(self) -> dict[str, str]:
        """Return the colours that a theme not of ours lacks."""
        return THEMES["plain"].variables

    def compose(self) -> ComposeResult:
        """Lay out heading, panes and foot."""
        yield Heading(id="heading")
        with Container(id="middle"):
            yield DrawersPane(self.session, id="drawers")
            with Container(id="centre"):
                yield ViewPane(id="answer")
                yield ViewPane(id="below")
            yield ViewPane(id="side")
        yield Foot(id="foot")
        yield Lines(id="small")

    def on_mount(self) -> None:
        """Paint, then begin to solve."""
        self.drawers.focus()
        self.call_after_refresh(self._solve)

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
        self._arranged = arrangement(width, height)
        text = f"{width}x{height} is too small: the desk needs {LEAST_WIDTH}x{LEAST_HEIGHT}"
        self.query_one("#small", Lines).show([[(padded(text, width), "text")]])
        self.repaint()
        self.call_after_refresh(self.repaint)

    def repaint(self) -> None:
        """Hand the session to every pane."""
        arranged, cycle = self._arranged, self._arranged.cycle
        if self._view not in cycle:
            self._view = cycle[0]
        helping = self._helping and not arranged.wide
        inputs = arranged.thin and self._view is INPUTS and not helping
        for name in ("small", "short", "thin", "wide", "tall"):
            self.screen.set_class(getattr(arranged, name), name)
        self.screen.set_class(inputs, "inputs")
        self.screen.set_class(arranged.thin and not inputs, "views")
        self.query_one(Heading).repaint(self.session)
        self.drawers.repaint()
        answer, below, side = (self.query_one(f"#{name}", ViewPane) for name in ("answer", "below", "side"))
        given = (self.session, self.drawers.row, self.drawn)
        for pane in (answer, below, side):
            pane.edge = "" if arranged.thin else self.drawn.upright
        view = HELP if helping else self._view
        turning = below if arranged.tall else answer
        if arranged.tall:
            answer.update_view(*given, ANSWER, [("answer", "picked")])
        if not inputs:
            turning.update_view(*given, view, names(cycle, view, turning.room))
        if arranged.wide:
            beside = HELP if self._helping else FINDINGS
            side.update_view(*given, beside, [(beside.name, "picked")])
        self._repaint_foot()

    def _repaint_foot(self) -> None:
        self.foot.repaint(self.session, self.drawers.row, self.drawers.editing)

    def on_drawers_pane_changed(self) -> None:
        """Solve the design that an edit made."""
        self._solve()

    def on_drawers_pane_moved(self) -> None:
        """Tell of the row the cursor came to."""
        self.foot.say("")
        self.repaint() if self._helping else self._repaint_foot()

    def on_drawers_pane_said(self, message: DrawersPane.Said) -> None:
        """Show what the inputs have to tell."""
        self.say(message.words, message.refused)

    def on_foot_typing(self) -> None:
        """Echo an answer being typed."""
        self._repaint_foot()

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""
        self.foot.say(text, refused)
        self.query_one(Heading).repaint(self.session)
        self._repaint_foot()

    def ask(self, question: str, answer: Callable[[str], None], text: str | None = None) -> None:
        """Ask in the foot for a line, or for a single key when there is no text to start from."""

        def answered(given: str) -> None:
            self.drawers.focus()
            answer(given)

        self.foot.ask(question, answered, text)
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

    def _turn(self) -> None:
        """Repaint now for the words, and once more when the panes have their new sizes."""
        self.repaint()
        self.call_after_refresh(self.repaint)

    def action_view(self, by: int) -> None:
        """Show another view."""
        cycle = self._arranged.cycle
        if self._helping and not self._arranged.wide:
            self._helping = False
        else:
            self._view = cycle[(cycle.index(self._view) + by) % len(cycle)]
        self._turn()

    def action_help(self) -> None:
        """Show help, or take it away."""
        self._helping = not self._helping
        self._turn()

    def action_back(self) -> None:
        """Take help and note away."""
        self._helping = False
        self.foot.say("")
        self._turn()

    def action_scroll(self, pages: int) -> None:
        """Scroll the view."""
        beside = self._helping and self._arranged.wide
        name = "#side" if beside else "#below" if self._arranged.tall else "#answer"
        pane = self.query_one(name, ViewPane)
        pane.scroll_lines(pages * max(1, pane.size.height - 2))

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
