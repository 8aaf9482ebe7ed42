"""Help: the row under the cursor first, then the keys."""

from __future__ import annotations

from collections.abc import Mapping

from ....units.unit_names import Dimension
from ...shown import plain
from ..form import FormRow
from ..lines import Line, wrapped
from ..lists import MOST
from ..view import Sight, View

KEYS: tuple[tuple[str, str], ...] = (
    ("while editing", "Enter keeps, Esc restores"),
    ("up down", "move between rows"),
    ("Tab, Shift+Tab", "next drawer, drawer before"),
    ("/", "find a row by typing a part of its name"),
    ("Enter or a digit", "edit the row; a choice takes its next word"),
    ("e", "type into the row, also into a choice"),
    ("s", "set or solved: let the desk find the value, or keep what it found"),
    ("+ -", "nudge: a centimetre, half a turn, one step"),
    ("u, U", "undo, redo, as far back as you like"),
    ("g", "go to the row a finding is about, then to the next"),
    ("c", "try the cure of that finding, where it is an edit"),
    ("a capital letter", "the view of that name, see below"),
    ("v, V", "next view, view before"),
    ("left right , .", "move the readout of a plot; < > move it far"),
    ("z", "plot one band alone, then both again"),
    ("k, K", "keep these figures to compare with; let them go"),
    ("PgUp PgDn", "scroll the view"),
    ("in a text", "arrows scroll, also sideways; Tab or Esc goes back to the inputs"),
    ("x", "write what the view tells to a file; SWR as Touchstone, .s1p"),
    ("w, W", "write the file, write another file"),
    ("o, n", "open a file, begin a new design from a preset"),
    ("t", "colours: the terminal's own, dark, daylight, red light, none"),
    ("Ctrl+L, Ctrl+Z", "draw the screen again; back to the shell for a while"),
    ("h or ?", "this help, and back"),
    ("q", "quit"),
)


def help_lines(sight: Sight, letters: Mapping[str, View]) -> list[Line]:
    """Return what is known of the row under the cursor, what every key does, and the letters of the views."""
    lines: list[Line] = []
    if sight.row is not None and sight.row.key:
        lines += _about(sight.row, sight.width)
    lines.append([("keys", "head")])
    for key, does in KEYS:
        pieces = wrapped(does, max(8, sight.width - 18))
        lines.append([(f"{key:<17} ", "found"), (pieces[0], "text")])
        lines += [[(" " * 18 + piece, "text")] for piece in pieces[1:]]
    lines += [[], [("views", "head")]]
    for letter, view in letters.items():
        pieces = wrapped(view.about, max(8, sight.width - 18))
        lines.append([(f"{letter} {view.name:<15} ", "found"), (pieces[0], "text")])
        lines += [[(" " * 18 + piece, "text")] for piece in pieces[1:]]
    return lines


def _about(row: FormRow, width: int) -> list[Line]:
    known = row.known
    lines: list[Line] = [[(known.label, "head")]]
    texts = [known.help]
    if row.words:
        texts.append("one of: " + ", ".join(row.words))
    elif limits := _limits(row):
        texts.append(limits)
    if known.example:
        texts.append(f"for example {known.example}")
    if known.optional and not row.words:
        texts.append("may be left empty")
    if known.solvable:
        texts.append("s lets the desk find it")
    for text in texts:
        lines += [[(piece, "text")] for piece in wrapped(text, width)]
    return [*lines, [(row.key, "quiet")], []]


def _limits(row: FormRow) -> str:
    """Return the limits of a quantity in words."""
    known = row.known
    if row.counts:
        return f"from 0 up to {MOST}; + adds one, - takes the last away"
    if known.dimension in ("text", "choice", "part", "print"):
        return ""
    kind = Dimension(known.dimension)
    pieces = []
    if known.low is not None:
        pieces.append(f"from {plain(known.low, kind)}")
    if known.above is not None:
        pieces.append(f"above {plain(known.above, kind)}")
    if known.high is not None:
        pieces.append(f"up to {plain(known.high, kind)}")
    return " ".join(pieces)
