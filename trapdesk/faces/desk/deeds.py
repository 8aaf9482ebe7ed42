"""What the keys do that move no row and type nothing."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, Protocol

from ...errors import BadInput
from .. import words
from . import cures
from .filing import Filing
from .mouse import switch
from .themes import THEMES

if TYPE_CHECKING:
    from ...services.antenna.figures import Finding
    from .middle import Middle
    from .panes.drawers import DrawersPane
    from .panes.frame import Foot
    from .session import Session
    from .thin import Thin

KEYS: dict[str, str] = {
    "undo": "u",
    "redo": "U,ctrl+r",
    "next_view": "v",
    "view_before": "V",
    "help": "h,question_mark,f1",
    "back": "escape",
    "write": "w",
    "write_as": "W",
    "open": "o",
    "new": "n",
    "colours": "t",
    "page_down": "pagedown,ctrl+d",
    "page_up": "pageup,ctrl+u",
    "keep": "k",
    "let_go": "K",
    "jump": "g",
    "cure": "c",
    "find": "slash",
    "zoom": "z",
    "left": "left,comma",
    "right": "right,full_stop",
    "far_left": "shift+left,less_than_sign",
    "far_right": "shift+right,greater_than_sign",
    "mouse": "m",
    "redraw": "ctrl+l",
    "sleep": "ctrl+z",
    "leave": "q,ctrl+q,ctrl+c",
}
"""Keys by the name of the deed."""
FAR = 8
"""Steps of the readout at once."""


class Acting(Protocol):
    """What the deeds are done to: the app, as far as they need it."""

    session: Session
    theme: str
    thin: Thin
    middle: Middle
    drawers: DrawersPane
    foot: Foot

    say: Callable[..., None]
    ask: Callable[..., None]
    solve: Callable[[], None]
    repaint: Callable[[], None]
    repaint_foot: Callable[[], None]
    refresh: Callable[..., Any]
    action_suspend_process: Callable[[], None]
    _driver: Any


class Deeds:
    """The deeds of a desk, each a method by the name it has in `KEYS`."""

    def __init__(self, desk: Acting, filing: Filing) -> None:
        self._desk = desk
        self._session = desk.session
        self._filing = filing
        self.write, self.write_as, self.open, self.new = (
            filing.write,
            filing.write_as,
            filing.open,
            filing.new,
        )
        self._jumped: tuple[Finding, ...] = ()
        self._mouse = True

    def undo(self) -> None:
        """Go back one design."""
        self._step(self._session.undo(), "undone", "there is nothing to undo")

    def redo(self) -> None:
        """Take back an undo."""
        self._step(self._session.redo(), "done again", "there is nothing to do again")

    def _step(self, moved: bool, done: str, nothing: str) -> None:
        self._desk.say(done if moved else nothing, refused=not moved)
        if moved:
            self._desk.solve()

    def next_view(self) -> None:
        """Show the next view."""
        self._desk.middle.turn(1)
        self._desk.repaint_foot()

    def view_before(self) -> None:
        """Show the view before."""
        self._desk.middle.turn(-1)
        self._desk.repaint_foot()

    def help(self) -> None:
        """Show help, or take it away."""
        self._desk.middle.helping = not self._desk.middle.helping
        self._desk.repaint()

    def back(self) -> None:
        """Take help, readout and note away."""
        self._desk.middle.helping = False
        self._session.cursor = None
        self._desk.foot.say("")
        self._desk.repaint()

    def page_down(self) -> None:
        """Scroll the view down."""
        self._desk.middle.scroll_view(1)

    def page_up(self) -> None:
        """Scroll the view up."""
        self._desk.middle.scroll_view(-1)

    def colours(self) -> None:
        """Take the next theme."""
        order = list(THEMES)
        self._desk.theme = order[(order.index(self._desk.theme) + 1) % len(order)]
        self._desk.say(f"colours: {self._desk.theme}")

    def keep(self) -> None:
        """Keep the present design's figures to compare with."""
        session = self._session
        if session.figures is None or session.stale:
            self._desk.say("there are no figures of this design to keep yet", refused=True)
            return
        session.ghost = session.figures
        self._desk.say("kept: its curves stay on the plots, dotted; K lets them go")
        self._desk.repaint()

    def let_go(self) -> None:
        """Let what was kept go."""
        held, self._session.ghost = self._session.ghost, None
        self._desk.say("let go" if held is not None else "nothing is kept", refused=held is None)
        self._desk.repaint()

    def jump(self) -> None:
        """Move the cursor to the row that a finding is about: the worst first, then the next with each."""
        figures = self._session.figures
        ranked = words.ranked(figures.findings) if figures is not None else ()
        if not ranked or figures is None:
            self._desk.say("there are no findings", refused=True)
            return
        after = ranked.index(self._jumped[-1]) + 1 if self._jumped and self._jumped[-1] in ranked else 0
        finding = ranked[after % len(ranked)]
        self._jumped = (finding,)
        self._go(finding)
        self._desk.say(f"{words.LEVEL_WORDS[finding.level]}: {words.sentence(finding, figures.design)}")

    def cure(self) -> None:
        """Try the cure of the finding last jumped to, else of the worst, as an edit that can be undone."""
        session, figures = self._session, self._session.figures
        if figures is None or session.stale:
            self._desk.say("there are no figures of this design to mend yet", refused=True)
            return
        ranked = words.ranked(figures.findings)
        finding = next((one for one in ranked if one in self._jumped), next(iter(ranked), None))
        if finding is None:
            self._desk.say("there are no findings", refused=True)
            return
        tried = cures.cure(figures, finding)
        helps = words.cure_among(finding, figures.findings)
        if tried is None:
            self._go(finding)
            no_edit = f"no edit mends this by itself: {helps}" if helps else "this needs no cure"
            self._desk.say(no_edit, refused=True)
            return
        try:
            session.take(tried[0])
        except BadInput as refusal:
            self._desk.say(f"{tried[1]} is not allowed: {refusal.faults[0]}", refused=True)
            return
        self._jumped = ()
        self._desk.say(f"tried: {tried[1]}; u takes it back")
        self._go(finding)
        self._desk.solve()

    def _go(self, finding: Finding) -> None:
        """Put the cursor on the row of a finding."""
        self._desk.drawers.go(finding.where)
        if self._desk.middle.helping:
            self._desk.middle.repaint()

    def find(self) -> None:
        """Find a row by typing a part of its name."""
        drawers = self._desk.drawers
        before = drawers.row.key if drawers.row is not None else ""

        def answered(text: str) -> None:
            if not text:
                drawers.go(before)
                self._desk.say("")
            elif not drawers.find(text):
                drawers.go(before)
                self._desk.say(f"no row has {text!r} in its name", refused=True)

        self._desk.ask("find", answered, "", live=drawers.find)

    def zoom(self) -> None:
        """Plot both bands, or one of them alone."""
        roles = ["", *(role for role, _ in self._session.design.bands.items())]
        here = roles.index(self._session.zoom) if self._session.zoom in roles else 0
        self._session.zoom = roles[(here + 1) % len(roles)]
        self._desk.repaint()

    def left(self) -> None:
        """Move the readout to the left."""
        self._desk.middle.move_cursor(-1)

    def right(self) -> None:
        """Move the readout to the right."""
        self._desk.middle.move_cursor(1)

    def far_left(self) -> None:
        """Move the readout far to the left."""
        self._desk.middle.move_cursor(-FAR)

    def far_right(self) -> None:
        """Move the readout far to the right."""
        self._desk.middle.move_cursor(FAR)

    def mouse(self) -> None:
        """Leave the mouse to the terminal, so that it selects text as everywhere, or take it again."""
        wanted = not self._mouse
        if not switch(self._desk._driver, wanted):
            self._desk.say("there is no mouse here", refused=True)
            return
        self._mouse = wanted
        self._desk.say(
            "the mouse is the desk's" if wanted else "the mouse is the terminal's; m takes it back"
        )

    def redraw(self) -> None:
        """Send the whole screen again."""
        self._desk.thin.forget()
        self._desk.refresh(layout=True)

    def sleep(self) -> None:
        """Give the terminal back to the shell until it calls."""
        self._desk.action_suspend_process()

    def leave(self) -> None:
        """Quit; ask when something is not saved."""
        if not self._desk.foot.asking:
            self._filing.leave()
