"""Help: the row under the cursor first, then the keys."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

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
    ("found, =", "the desk found this value, nobody set it"),
    ("s", "set or solved: let the desk find the value, or keep what it found"),
    ("+ -", "nudge: a centimetre, half a turn, one step; of a list one more, one less"),
    ("Del, Backspace", "take a tap, a segment, a lowering out of its list"),
    ("u, U", "undo, redo, as far back as you like"),
    ("g", "go to the row a finding is about, then to the next"),
    ("c", "try the cure of that finding, where it is an edit"),
    ("v, V", "next view, view before"),
    ("left right , .", "move the readout of a plot; < > move it far"),
    ("z", "plot one band alone, then both again"),
    ("k, K", "keep these figures to compare with; let them go"),
    ("PgUp PgDn", "scroll the view"),
    ("in a text", "arrows scroll, also sideways; Tab or Esc goes back to the inputs"),
    ("x", "write what the view tells to a file; SWR as Touchstone, .s1p"),
    ("w, W", "write the file, write another file"),
    ("o, n", "open a file, begin a new design: from a preset, or for bands such as 40 20"),
    ("t", "colours: the terminal's own, dark, daylight, red light, none"),
    ("m", "leave the mouse to the terminal, to select text with it, and back; Shift does as well"),
    ("Ctrl+L, Ctrl+Z", "draw the screen again; back to the shell for a while"),
    ("h or ?", "this help, and back"),
    ("q", "quit"),
)


def help_lines(sight: Sight, letters: Mapping[str, View]) -> list[Line]:
    """Return what is known of the row under the cursor, the letters of the views, and what every key does."""
    lines: list[Line] = []
    if sight.row is not None and sight.row.key:
        lines += _about(sight.row, sight.width)
    lines.append([("views, each by its capital letter", "head")])
    lines += _listed([(f"{letter} {view.name}", view.about) for letter, view in letters.items()], sight.width)
    lines += [[], [("keys", "head")], *_listed(KEYS, sight.width)]
    return lines


def _listed(pairs: Sequence[tuple[str, str]], width: int) -> list[Line]:
    """Return names with what they stand for beside them."""
    lines: list[Line] = []
    column = max(len(name) for name, _ in pairs) + 1
    for name, does in pairs:
        first, *more = wrapped(does, max(8, width - column))
        lines.append([(f"{name:<{column}}", "found"), (first, "text")])
        lines += [[(" " * column + piece, "text")] for piece in more]
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
