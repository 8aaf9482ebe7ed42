"""The desk as an application: it solves aside and hands what is found to the panes."""

from __future__ import annotations

import gc
import os
import sys
from collections.abc import Callable
from typing import ClassVar

from rich.console import RenderableType
from rich.text import Text
from textual.app import App, ComposeResult
from textual.binding import Binding
from textual.driver import Driver
from textual.events import Key, Paste, Resize
from textual.screen import Screen
from textual.timer import Timer

from .. import shown
from . import config, journal
from .arrange import LEAST_HEIGHT, LEAST_WIDTH, arrangement
from .deeds import KEYS, Deeds
from .endings import end_by_signals, told
from .filing import Filing
from .lines import Lines, padded
from .middle import Middle
from .mouse import quieter
from .panes.drawers import DrawersPane
from .panes.frame import Foot, Heading
from .session import Session
from .solving import Solved, Solver, Solving
from .terminal import Glyphs, Look
from .themes import THEMES
from .thin import Thin

SETTLING = 1.0
"""Seconds for which old figures stand undimmed: dimming them costs a thin line more than most new ones."""


class Desk(App[None]):
    """Inputs, views and findings of one design."""

    CSS_PATH = "desk.tcss"
    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    BINDINGS: ClassVar = [Binding(keys, f"do('{deed}')") for deed, keys in KEYS.items()]

    def __init__(
        self,
        session: Session,
        drawn: Look,
        solver: Solver | None = None,
        *,
        chosen: config.Config | None = None,
        kept: journal.Journal | None = None,
        trouble: str = "",
    ) -> None:
        super().__init__()
        # Two widgets on every screen for what the foot does here.
        self._disable_tooltips = self._disable_notifications = True
        self.session = session
        self.drawn = drawn
        self.thin = Thin()
        self.chosen = chosen or config.Config()
        shown.show_lengths_in(self.chosen.units)
        self._trouble = trouble
        self._fitting = False
        self._settling: Timer | None = None
        self._solving = Solving(self, session, solver)
        self._filing = Filing(session, self, self.chosen, kept)
        self._deeds = Deeds(self, self._filing)
        for theme in THEMES.values():
            self.register_theme(theme)
        self.theme = drawn.theme

    def get_driver_class(self) -> type[Driver]:
        """Return the driver of the terminal, with a mouse that is quiet while it only passes by."""
        return quieter(super().get_driver_class())

    def get_theme_variable_defaults(self) -> dict[str, str]:
        """Return the colours that a theme not of ours lacks."""
        return THEMES["plain"].variables

    def _display(self, screen: Screen, renderable: RenderableType | None) -> None:
        """Send only what changed of an update; nothing of one that changes nothing."""
        sends = self._running and not self._closed and not self._batch_count and not self.is_headless
        if sends and renderable is not None and self._driver is not None:
            renderable = self.thin.reduced(renderable, tuple(self.size), self.console)
        super()._display(screen, renderable)

    def _fatal_error(self) -> None:
        """End after an error nobody foresaw: one line for the person, the rest into a file."""
        self.panic(Text(told(sys.exception(), os.environ)))

    def compose(self) -> ComposeResult:
        """Lay out heading, panes and foot."""
        yield Heading(id="heading")
        yield Middle(self.session, self.drawn, id="middle")
        yield Foot(id="foot")

    def on_mount(self) -> None:
        """Paint, then begin to solve and to journal."""
        self.app_resume_signal.subscribe(self, lambda app: self._deeds.redraw())
        self.theme_changed_signal.subscribe(self, lambda theme: self._recolour())
        if not self.is_headless:
            end_by_signals(self)
        self._lay_out(*self.size)
        self.call_after_refresh(self._begin)

    def _recolour(self) -> None:
        for pane in self.query(Lines):
            pane.refresh()

    def _begin(self) -> None:
        gc.freeze()
        gc.enable()
        self.solve()
        self._filing.begin()
        if self._trouble:
            self.say(self._trouble, refused=True)

    def on_key(self, event: Key) -> None:
        """Give a key to whom it is for: nothing has the focus, so that keys are dealt with in their order."""
        if event.key.startswith("alt+") and event.character:
            # A thin line brings Esc and the letter behind it at once.
            self._press(Key("escape", None))
            self._press(Key(event.character, event.character))
        elif not self._given(event):
            return
        event.stop()
        event.prevent_default()

    def _given(self, event: Key) -> bool:
        """Give a key to a question, the view or the inputs; return whether it was for any of them."""
        if self.foot.asking:
            self.foot.key(event)
            self.repaint_foot()
            return True
        return self.middle.key(event) or self.drawers.key(event)

    def _press(self, event: Key) -> None:
        """Deal with a key at once."""
        deed = next((deed for deed, keys in KEYS.items() if event.key in keys.split(",")), "")
        if not self._given(event) and deed:
            self.action_do(deed)

    def on_paste(self, event: Paste) -> None:
        """Give what is pasted to whom it is for."""
        if self.foot.asking:
            self.foot.paste(event.text)
            self.repaint_foot()
        else:
            self.drawers.paste(event.text)

    def action_do(self, deed: str) -> None:
        """Do what a key stands for."""
        getattr(self._deeds, deed)()

    @property
    def bare(self) -> bool:
        """Whether the terminal shows nothing but ASCII for certain."""
        return self.drawn.glyphs is Glyphs.ASCII

    @property
    def middle(self) -> Middle:
        """The panes between heading and foot."""
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

    def solve(self) -> None:
        """Solve and show the present design."""
        self.session.settling = True
        if self._settling is not None:
            self._settling.stop()
        self._settling = self.set_timer(SETTLING, self._waited)
        self._solving.begin()
        self.repaint()

    def _waited(self) -> None:
        self.session.settling = False
        self.repaint()

    def on_solved(self, message: Solved) -> None:
        """Take an answer in and show it when it is still wanted."""
        if self._solving.take(message):
            self.repaint()

    def on_resize(self, event: Resize) -> None:
        """Choose the arrangement for a size."""
        self.thin.forget()
        self._lay_out(*event.size)
        if self.middle.size:  # else nothing has been laid out yet
            self.repaint()

    def _lay_out(self, width: int, height: int) -> None:
        self.middle.lay_out(arrangement(width, height))
        if self.middle.arranged.small:
            self._say_small(width, height)

    def _say_small(self, width: int, height: int) -> None:
        """Say in the one line there is that nothing else fits."""
        found = self.query("#small").results(Lines)
        small = next(iter(found), None) or Lines(id="small")
        if not small.is_attached:
            self.mount(small)
        text = f"the desk needs {LEAST_WIDTH}x{LEAST_HEIGHT}, not {width}x{height}"
        small.show([[(padded(text, width), "text")]])

    def on_lines_resized(self) -> None:
        """Fit the panes to their new sizes, once for all of them."""
        if not self._fitting:
            self._fitting = True
            self.call_later(self._fit)

    def _fit(self) -> None:
        self._fitting = False
        self.repaint()

    def repaint(self) -> None:
        """Hand the session to every pane; at the end of the desk there may be none left."""
        if not self.query(Heading):
            return
        self.query_one(Heading).repaint(self.session)
        self.middle.repaint()
        self.repaint_foot()

    def repaint_foot(self) -> None:
        """Fit the foot to the row and the view in sight."""
        self.foot.repaint(self.session, self.drawers.row, self.drawers.editing)

    def on_drawers_pane_changed(self) -> None:
        """Solve the design that an edit made; say so when it could not be kept safe."""
        if trouble := self._filing.trouble():
            self.say(trouble, refused=True)
        self.solve()

    def on_drawers_pane_moved(self) -> None:
        """Tell of the row the cursor came to."""
        self.foot.say("")
        self.repaint() if self.middle.helping else self.repaint_foot()

    def on_drawers_pane_said(self, message: DrawersPane.Said) -> None:
        """Show what the inputs have to tell."""
        self.say(message.words, message.refused)

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""
        self.foot.say(text, refused)
        self.query_one(Heading).repaint(self.session)
        self.repaint_foot()

    def ask(
        self,
        question: str,
        answer: Callable[[str], None],
        text: str | None = None,
        live: Callable[[str], object] | None = None,
    ) -> None:
        """Ask in the foot for a line, or for a single key when there is no text to start from."""
        self.foot.ask(question, answer, text, live)
        self.repaint_foot()

    def close(self) -> None:
        """End the desk."""
        self.exit()
