"""The panes between heading and foot: inputs, views, findings, as the size of the screen allows."""

from __future__ import annotations

from collections.abc import Callable

from textual.app import ComposeResult
from textual.containers import Container
from textual.events import Key

from .arrange import ANSWER, CHANCES, FINDINGS, HELP, INPUTS, LETTERS, Arrangement, arrangement, names
from .aside import Job
from .filing import FIRST_RUN, Asker
from .lines import Line
from .panes.drawers import DrawersPane
from .panes.frame import Foot
from .panes.jobs import TOLERANCE
from .session import Session
from .terminal import Look
from .view import View, ViewPane
from .writing import Writing

SIDEWAYS = 8
_OF_INPUTS = frozenset("0123456789+=-es ")


class Middle(Container):
    """Which view is shown where."""

    def __init__(self, session: Session, drawn: Look, *, id: str) -> None:
        super().__init__(id=id)
        self.session = session
        self._drawn = drawn
        self.arranged: Arrangement = arrangement(80, 24)
        self.shown: View = ANSWER
        self.helping = False
        self._before: View = ANSWER
        self._hold = False
        self._writing = Writing(session, self)

    def compose(self) -> ComposeResult:
        """Lay out the panes that every size has; `furnish` adds those of the present one."""
        yield DrawersPane(self.session, id="drawers")
        yield Container(ViewPane(id="answer"), id="centre")

    def lay_out(self, arranged: Arrangement) -> None:
        """Take another arrangement, with the panes it has room for; the style sheet hides what it has not."""
        self.arranged = arranged
        if self.arranged.tall and not self.query("#below"):
            self.query_one("#centre").mount(ViewPane(id="below"))
        if self.arranged.wide and not self.query("#right"):
            self.mount(Container(ViewPane(id="side"), ViewPane(id="chances"), id="right"))
        self._classify()

    def _classify(self) -> None:
        """Tell the style sheet what is to be seen."""
        arranged = self.arranged
        if self.shown not in arranged.cycle:
            self.shown = arranged.cycle[0]
        for name in ("small", "short", "thin", "wide", "tall"):
            self.screen.set_class(getattr(arranged, name), name)
        self.screen.set_class(self._inputs, "inputs")
        self.screen.set_class(arranged.thin and not self._inputs, "views")
        self.screen.set_class(self._broad, "broad")
        self.screen.set_class(self._covering and not arranged.thin, "cover")

    @property
    def _inputs(self) -> bool:
        """Whether the inputs have the one pane there is."""
        return self.arranged.thin and self.shown is INPUTS and not self.helping

    def _pane(self, name: str) -> ViewPane:
        return self.query_one(f"#{name}", ViewPane)

    @property
    def _drawers(self) -> DrawersPane:
        return self.query_one(DrawersPane)

    @property
    def _broad(self) -> bool:
        """Whether the view takes the room of the panes beside it."""
        return self.shown.broad and not self.arranged.thin and (not self.helping or self.arranged.wide)

    @property
    def _beside(self) -> bool:
        """Whether findings, or help in their place, have a pane of their own just now."""
        # The pane is there a moment after its column, and tells of its size then like any other.
        return self.arranged.wide and not self._broad and bool(self.query("#side"))

    @property
    def _covering(self) -> bool:
        """Whether the inputs are hidden."""
        return self.shown is not INPUTS if self.arranged.thin else self._broad and not self.arranged.roomy

    @property
    def held(self) -> bool:
        """Whether keys are for the view first."""
        return self._covering or (self._broad and self._hold)

    @property
    def _turning(self) -> ViewPane:
        return self._pane("below" if self.arranged.tall else "answer")

    def repaint(self) -> None:
        """Hand the session to every pane, and have worked out what they lack."""
        self._classify()
        arranged, helping = self.arranged, self.helping and not self._beside
        drawers = self._drawers
        drawers.repaint()
        for pane in self.query(ViewPane):
            pane.edge = "" if arranged.thin or self._covering else self._drawn.upright
        self.session.aside.want(self.app, self._jobs, self._found, self._moved_on)
        given = (self.session, drawers.row, self._drawn)
        if arranged.tall and not self._broad:
            self._pane("answer").update_view(*given, ANSWER, [(ANSWER.name, "picked")])
        if not self._inputs:
            view, turning = HELP if helping else self.shown, self._turning
            turning.update_view(*given, view, self._names(view))
        if self._beside:
            view = HELP if self.helping else FINDINGS
            self._pane("side").update_view(*given, view, [(view.name, "picked")])
            if arranged.tall:
                self._pane("chances").update_view(*given, CHANCES, [(CHANCES.name, "picked")])
        foot = self.screen.query_one(Foot)
        foot.offered = self.shown.keys or VIEWING if self.held and not helping else ()
        foot.about = self.shown.about
        foot.plotting = self.plotting
        self._writing.look()

    def _names(self, view: View) -> Line:
        return names(self.arranged.cycle, view, self._turning.room, self._busy())

    @property
    def _jobs(self) -> tuple[Job, ...]:
        """What is to be worked out for what is in sight, or waits to be written."""
        return tuple(dict.fromkeys((TOLERANCE, *self.shown.jobs, *self._writing.jobs)))

    def _moved_on(self) -> None:
        """Tell how far the work is: where there is something to see already, beside the name alone."""
        pane, aside = self._turning, self.session.aside
        there = all(aside.found(job.name) is not None for job in self._jobs)
        # A list to pick from says so below its rows too.
        if there and pane.view is self.shown and self.shown.picked is None:
            pane.rename(self._names(self.shown))
        else:
            self._found()

    def _busy(self) -> str:
        """Return how far the work for the view is."""
        told = (self.session.aside.progress(job.name) for job in self.shown.jobs)
        return next(filter(None, told), "")

    def _found(self) -> None:
        """Show what was worked out aside."""
        self.repaint()
        drawers = self._drawers
        self.screen.query_one(Foot).repaint(self.session, drawers.row, drawers.editing)

    def key(self, event: Key) -> bool:
        """Do what a key asks of the view, and return whether it asks anything."""
        character = event.character or ""
        if self._drawers.editing:
            return False
        if view := LETTERS.get(character):
            self._show(view)
        elif character == "x" and self.shown.told is not None and not self.helping:
            self._writing.ask(self.shown)
        elif not self.held or self.helping:
            return False
        elif self.shown.press is not None and self.shown.press(event.key, self):
            self._found()
        else:
            return self._browse(event.key, character)
        return True

    def _browse(self, key: str, character: str) -> bool:
        """Scroll, or go back to the inputs; return whether a key asks that."""
        scrolls = {"up": -1, "down": 1, "home": -9999, "end": 9999}
        slides = {"left": -SIDEWAYS, "right": SIDEWAYS}
        if key in scrolls:
            self._turning.scroll_lines(scrolls[key])
        elif key in slides and self.shown.broad:
            self._turning.slide(slides[key])
            self.repaint()
        elif key in ("escape", "tab", "shift+tab"):
            self._leave()
        elif character in ("g", "/") and character:
            # They move between the inputs, which have to be in sight.
            self._leave()
            return False
        elif key == "enter" or (character and character in _OF_INPUTS):
            self.say("Tab goes to the inputs")
        else:
            return False
        return True

    def _show(self, view: View) -> None:
        """Show a view; one with a pane of its own is there once nothing hides it."""
        self.helping = False
        if view in self.arranged.cycle:
            self._go(view)
        elif self._broad:
            self._go(self._before)
        else:
            self.repaint()
        self._found()

    def _go(self, view: View) -> None:
        if not self.shown.broad:
            self._before = self.shown
        foot = self.screen.query_one(Foot)
        # What went wrong stays until something else is said; the rest belonged to what was in sight.
        if not foot.refused and foot.note != FIRST_RUN:
            foot.say("")
        self.shown, self._hold = view, view.broad

    def _leave(self) -> None:
        """Give the keys back to the inputs, in sight again."""
        if self.arranged.thin:
            self._go(INPUTS)
        elif self._covering:
            self._go(self._before)
        else:
            self._hold = False
        self.say("")
        self._found()

    @property
    def _asker(self) -> Asker:
        return self.app  # type: ignore[return-value] - the desk is one

    def ask(self, question: str, answer: Callable[[str], None], text: str | None = None) -> None:
        """Ask in the foot for a line, or for a single key when there is no text to start from."""
        self._asker.ask(question, answer, text)

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""
        self._asker.say(text, refused)

    def changed(self) -> None:
        """Have the design solved that an edit made."""
        self._drawers.post_message(DrawersPane.Changed())

    def show_again(self) -> None:
        """Draw the views anew."""
        self._found()

    def turn(self, by: int) -> None:
        """Show another view; help that stands in its place goes first."""
        cycle = self.arranged.cycle
        if self.helping and not self._beside:
            self.helping = False
        else:
            self._go(cycle[(cycle.index(self.shown) + by) % len(cycle)])
        self._found()

    @property
    def plotting(self) -> bool:
        """Whether the view in sight is a plot."""
        return self.shown.plot and not (self.helping and not self._beside)

    def move_cursor(self, steps: int) -> None:
        """Move the readout along the plots by so many columns; the first step puts it in the middle."""
        if not self.plotting:
            return
        pane = self._turning
        step = 1.0 / max(8, pane.room - 7)
        here = self.session.cursor
        self.session.cursor = 0.5 if here is None else min(1.0, max(0.0, here + steps * step))
        self.repaint()

    def on_view_pane_named(self, message: ViewPane.Named) -> None:
        """Show the view that the mouse pointed at."""
        if self._drawers.editing or self.screen.query_one(Foot).asking:
            return
        if view := LETTERS.get(message.letter):
            self._show(view)
        else:
            self.turn(1 if message.letter == ">" else -1)

    def scroll_view(self, pages: int) -> None:
        """Scroll the view, or help where that has a pane of its own."""
        pane = self._pane("side") if self.helping and self._beside else self._turning
        pane.scroll_lines(pages * max(1, pane.size.height - 2))


VIEWING = (
    ("Tab", "inputs"), ("v", "view"), ("arrows", "scroll"), ("?", "help"), ("x", "write to a file"),
    ("q", "quit"),
)  # fmt: skip
"""What keys do in a view that hides the inputs, the most needed first."""
