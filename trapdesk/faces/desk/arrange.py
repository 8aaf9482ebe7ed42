"""How the panes are arranged for a size of the screen, and which views there are."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from .lines import Line, Piece, padded, width_of
from .panes import told
from .panes.answer import answer_lines, figures_lines
from .panes.asking import LOAD_KEYS, YIELD_KEYS, load_press, yield_press
from .panes.box import KEYS as BOX_KEYS
from .panes.box import box_lines, box_picked, box_press, box_told
from .panes.chances import chances_lines
from .panes.findings import findings_lines
from .panes.going import KEYS as NEXT_KEYS
from .panes.going import NEXT, next_lines, next_press, next_told
from .panes.help import help_lines
from .panes.jobs import CHOICES, FOR_YIELD, FULL_TOLERANCE, RUMMAGE, SHEET_TOLERANCE, TOLERANCE, TUNER
from .panes.measured import KEYS as READING_KEYS
from .panes.measured import READINGS, measured_lines, measured_press, measured_told
from .panes.quick import KEYS as SUM_KEYS
from .panes.quick import SUM, quick_lines, quick_press, quick_told
from .panes.texts import text_view
from .titles import in_sight
from .view import TALL, Sight, View

LEAST_WIDTH, LEAST_HEIGHT = 40, 12
ROOMY = 117
"""Width from which a text of the command line stands whole beside the inputs."""


def _curves(name: str) -> Callable[[Sight], list[Line]]:
    """Return a view of curves, which is imported with its numpy when there is one to draw."""

    def lines(sight: Sight) -> list[Line]:
        from .panes import curves

        return getattr(curves, name)(sight) if sight.session.figures is not None else []

    return lines


INPUTS = View(name="inputs", lines=lambda sight: [], letter="I", about="what is given")
ANSWER = View(
    name="answer", lines=answer_lines, letter="A", told=told.numbers_told, about="what to know in ten seconds"
)
FINDINGS = View(name="findings", lines=findings_lines, letter="F", about="what is wrong, and what would help")
CHANCES = View(
    name="yield",
    lines=chances_lines,
    letter="Y",
    jobs=(TOLERANCE,),
    about="how many of a hundred antennas keep the SWR limit",
)
VIEWS = (
    ANSWER,
    View(
        name="SWR",
        lines=_curves("swr_lines"),
        letter="S",
        plot=True,
        told=told.feed_told,
        ending=".s1p",
        about="SWR over both bands",
    ),
    View(
        name="Z at feed",
        lines=_curves("feed_lines"),
        letter="Z",
        plot=True,
        told=told.feed_told,
        ending=".s1p",
        about="R and X at the feed point",
    ),
    View(
        name="trap",
        lines=_curves("trap_lines"),
        letter="T",
        plot=True,
        about="size and phase of its impedance",
    ),
    CHANCES,
    FINDINGS,
    View(
        name="every figure",
        lines=figures_lines,
        letter="E",
        told=told.numbers_told,
        about="all there is, what was given beside what was found",
    ),
    text_view(
        "reasons",
        "R",
        told.causes_told,
        (FULL_TOLERANCE, FOR_YIELD),
        "what the yield hangs on, what would help",
        YIELD_KEYS,
        yield_press,
    ),
    text_view("choices", "C", told.choices_told, (CHOICES,), "other resonances of the trap, other L to C"),
    View(
        name="box",
        letter="B",
        lines=box_lines,
        broad=True,
        jobs=(RUMMAGE,),
        told=box_told,
        keys=BOX_KEYS,
        about="traps that can be built from a box of parts, the best first",
        press=box_press,
        picked=box_picked,
    ),
    text_view("down", "D", told.down_told, (TUNER,), "from wire to transmitter: is a tuner worth it"),
    text_view(
        "loads",
        "L",
        told.loads_told,
        (TUNER,),
        "what the tuner can reach, and its settings",
        LOAD_KEYS,
        load_press,
    ),
    View(
        name="measured",
        letter="M",
        lines=measured_lines,
        broad=True,
        jobs=(READINGS,),
        told=measured_told,
        keys=READING_KEYS,
        about="type what was measured, see what it comes to, keep it",
        press=measured_press,
    ),
    View(
        name="next",
        letter="N",
        lines=next_lines,
        broad=True,
        jobs=(NEXT,),
        told=next_told,
        keys=NEXT_KEYS,
        about="type what was read of the hung antenna, see what to do, keep it",
        press=next_press,
    ),
    text_view("paper", "P", told.sheet_told, (SHEET_TOLERANCE,), "the build sheet"),
    text_view("hill", "H", told.card_told, (SHEET_TOLERANCE,), "the card to carry to the halyard"),
    View(
        name="quick sums",
        letter="Q",
        lines=quick_lines,
        broad=True,
        jobs=(SUM,),
        told=quick_told,
        keys=SUM_KEYS,
        about="a resonator, a match or a line of your own",
        press=quick_press,
    ),
)
"""The views of the desk, in the order in which a key goes through them."""
LETTERS = {view.letter: view for view in (INPUTS, *VIEWS)}
HELP = View(name="help", lines=lambda sight: help_lines(sight, LETTERS), dims=False)


@dataclass(frozen=True, kw_only=True)
class Arrangement:
    """What a size of the screen allows.

    `small`: nothing. `short`: heading and foot of few lines. `thin`: one pane at a time. `wide`: findings in
    a column of their own. `tall`: the answer in a pane of its own above the views. `roomy`: a broad text
    beside the inputs.
    """

    small: bool
    short: bool
    thin: bool
    wide: bool
    tall: bool
    roomy: bool

    @property
    def cycle(self) -> tuple[View, ...]:
        """The views a key goes through: those that have no pane of their own."""
        if self.thin:
            return (INPUTS, *VIEWS)
        own = ((ANSWER,) if self.tall else ()) + ((FINDINGS,) if self.wide else ())
        own += (CHANCES,) if self.tall and self.wide else ()
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
        roomy=width >= ROOMY,
    )


def names(cycle: tuple[View, ...], here: View, width: int, busy: str = "") -> Line:
    """Return the names of the views, as many as fit around the present one, and what is being done.

    The letter that shows a view begins its name. What is being done stands at the right where there is room.
    """
    shown = cycle if here in cycle else (here,)
    keys = [view.letter for view in shown]
    texts = [f"{view.letter}{view.name[1:]} " for view in shown]
    room = (
        max(0, min(width, width - min(len(busy), _MOST_BUSY) - 1)) if busy and width >= _ROOM_BUSY else width
    )
    line: list[Piece] = []
    for letter, text in in_sight(keys, texts, shown.index(here), room):
        if text.startswith("["):
            line.append((f"[{here.name}]", "picked"))
        elif text in "<>":
            line.append((text, "head"))
        else:
            line += [(letter, "head"), (text[1:], "quiet")]
    free = width - width_of(line) - 1
    if busy and free >= _LEAST_BUSY:
        line.append((" " + padded(busy, free).rstrip(), "watch"))
    return line


_LEAST_BUSY, _MOST_BUSY, _ROOM_BUSY = 12, 24, 44
