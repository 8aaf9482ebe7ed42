"""The panes between heading and foot: inputs, views, findings, as the size of the screen allows."""

from __future__ import annotations

from textual.app import ComposeResult
from textual.containers import Container
from textual.events import Key

from .arrange import ANSWER, FINDINGS, HELP, INPUTS, Arrangement, arrangement, names
from .panes.drawers import DrawersPane
from .session import Session
from .terminal import Look
from .view import View, ViewPane


class Middle(Container):
    """Which view is shown where."""

    def __init__(self, session: Session, drawn: Look, *, id: str) -> None:
        super().__init__(id=id)
        self._session = session
        self._drawn = drawn
        self.arranged: Arrangement = arrangement(80, 24)
        self.shown: View = ANSWER
        self.helping = False

    def compose(self) -> ComposeResult:
        """Lay the panes out; the style sheet hides those a size has no room for."""
        yield DrawersPane(self._session, id="drawers")
        with Container(id="centre"):
            yield ViewPane(id="answer")
            yield ViewPane(id="below")
        yield ViewPane(id="side")

    def _pane(self, name: str) -> ViewPane:
        return self.query_one(f"#{name}", ViewPane)

    def repaint(self) -> None:
        """Hand the session to every pane."""
        arranged = self.arranged
        if self.shown not in arranged.cycle:
            self.shown = arranged.cycle[0]
        helping = self.helping and not arranged.wide
        inputs = arranged.thin and self.shown is INPUTS and not helping
        for name in ("small", "short", "thin", "wide", "tall"):
            self.screen.set_class(getattr(arranged, name), name)
        self.screen.set_class(inputs, "inputs")
        self.screen.set_class(arranged.thin and not inputs, "views")
        drawers = self.query_one(DrawersPane)
        drawers.repaint()
        answer, below, side = (self._pane(name) for name in ("answer", "below", "side"))
        for pane in (answer, below, side):
            pane.edge = "" if arranged.thin else self._drawn.upright
        given = (self._session, drawers.row, self._drawn)
        if arranged.tall:
            answer.update_view(*given, ANSWER, [(ANSWER.name, "picked")])
        if not inputs:
            view, turning = HELP if helping else self.shown, below if arranged.tall else answer
            turning.update_view(*given, view, names(arranged.cycle, view, turning.room))
        if arranged.wide:
            beside = HELP if self.helping else FINDINGS
            side.update_view(*given, beside, [(beside.name, "picked")])

    def key(self, event: Key) -> bool:
        """Do what a key asks of the view, and return whether it asks anything."""
        return False

    def turn(self, by: int) -> None:
        """Show another view; help that stands in its place goes first."""
        cycle = self.arranged.cycle
        if self.helping and not self.arranged.wide:
            self.helping = False
        else:
            self.shown = cycle[(cycle.index(self.shown) + by) % len(cycle)]
        self.repaint()

    @property
    def plotting(self) -> bool:
        """Whether the view in sight is a plot."""
        return self.shown.plot and not (self.helping and not self.arranged.wide)

    def move_cursor(self, steps: int) -> None:
        """Move the readout along the plots by so many columns; the first step puts it in the middle."""
        if not self.plotting:
            return
        pane = self._pane("below" if self.arranged.tall else "answer")
        step = 1.0 / max(8, pane.room - 7)
        here = self._session.cursor
        self._session.cursor = 0.5 if here is None else min(1.0, max(0.0, here + steps * step))
        self.repaint()

    def scroll_view(self, pages: int) -> None:
        """Scroll the view, or help where that has a pane of its own."""
        beside = self.helping and self.arranged.wide
        pane = self._pane("side" if beside else "below" if self.arranged.tall else "answer")
        pane.scroll_lines(pages * max(1, pane.size.height - 2))
