"""How the panes are arranged for a size of the screen, and which views there are."""

from __future__ import annotations

from dataclasses import dataclass

from .lines import Line
from .panes.answer import answer_lines, figures_lines
from .panes.curves import feed_lines, swr_lines, trap_lines
from .panes.findings import findings_lines
from .panes.help import help_lines
from .view import TALL, View

LEAST_WIDTH, LEAST_HEIGHT = 40, 12

INPUTS = View(name="inputs", lines=lambda sight: [])
ANSWER = View(name="answer", lines=answer_lines)
FINDINGS = View(name="findings", lines=findings_lines)
HELP = View(name="help", lines=help_lines, dims=False)
VIEWS = (
    ANSWER,
    View(name="SWR", lines=swr_lines, plot=True),
    View(name="z", lines=feed_lines, plot=True),
    View(name="trap", lines=trap_lines, plot=True),
    FINDINGS,
    View(name="figures", lines=figures_lines),
)
"""The views of the desk, in the order in which a key goes through them."""


@dataclass(frozen=True, kw_only=True)
class Arrangement:
    """What a size of the screen allows.

    `small`: nothing. `short`: heading and foot of few lines. `thin`: one pane at a time. `wide`: findings in
    a column of their own. `tall`: the answer in a pane of its own above the views.
    """

    small: bool
    short: bool
    thin: bool
    wide: bool
    tall: bool

    @property
    def cycle(self) -> tuple[View, ...]:
        """The views a key goes through: those that have no pane of their own."""
        if self.thin:
            return (INPUTS, *VIEWS)
        own = ((ANSWER,) if self.tall else ()) + ((FINDINGS,) if self.wide else ())
        return tuple(view for view in VIEWS if view not in own)


def arrangement(width: int, height: int) -> Arrangement:
    """Return the arrangement for a screen of so many columns and lines."""
    thin = width < 72
    return Arrangement(
        small=width < LEAST_WIDTH or height < LEAST_HEIGHT,
        short=height < TALL,
        thin=thin,
        wide=width >= 110,
        tall=height >= 36 and not thin,
    )


def names(cycle: tuple[View, ...], here: View, width: int) -> Line:
    """Return the names of the views, the present one in brackets; it alone where there is no room."""
    shown = cycle if here in cycle else (here,)
    if sum(len(view.name) + 2 for view in shown) > width:
        shown = (here,)
    return [
        (f"[{view.name}]" if view is here else f" {view.name} ", "picked" if view is here else "quiet")
        for view in shown
    ]
