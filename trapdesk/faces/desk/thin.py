"""Only what changed goes down the line: the app's updates are compared, cell by cell, with what is shown.

This reads two kinds of update from inside Textual, of the version that the project pins. Whatever it does not
recognise passes unchanged, and the next update is sent in full.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache
from typing import Any

from rich.cells import cell_len
from rich.console import Console
from textual.strip import Strip

try:
    from textual._compositor import ChopsUpdate, CompositorUpdate, LayoutUpdate
except ImportError:  # another version, built otherwise: nothing is recognised
    CompositorUpdate, UNDERSTOOD = object, ()
else:
    UNDERSTOOD = (ChopsUpdate, LayoutUpdate)

Cell = tuple[str, str]
"""What stands in a cell, and the codes of its style; a wide character leaves its second cell empty."""

SHORT_GAP = 3
"""Unchanged cells of the same style that are cheaper to write again than to step over."""
LONG_BLANK = 6
"""Blanks up to the edge from which on erasing the rest of the line is shorter."""


SEEN_ON_BLANKS = {4, 5, 7, 9, 21, 51, 52, 53}
"""Underline, blink, reverse, strike, frames and overline show on a blank too."""


class Written(CompositorUpdate):
    """An update that has been brought to the characters to send."""

    def __init__(self, text: str) -> None:
        self.text = text

    def render_segments(self, console: Console) -> str:
        """Return the characters to send."""
        return self.text


class Thin:
    """What the terminal shows, as far as it is known."""

    def __init__(self) -> None:
        self._rows: list[list[Cell | None]] = []
        self._size = (0, 0)

    def forget(self) -> None:
        """Take nothing for granted: the next update is sent whole."""
        self._size = (0, 0)

    def reduced(self, update: Any, size: tuple[int, int], console: Console) -> Any:
        """Return an update that changes only the cells that differ; one not understood comes back as it was.

        Parameters
        ----------
        update : object
            What the app is about to show.
        size : tuple of int
            Columns and rows of the terminal.
        console : Console
            Whose colours the terminal has.
        """
        if not isinstance(update, UNDERSTOOD):
            self.forget()
            return update
        try:
            pieces = list(_pieces(update))
        except (AttributeError, TypeError, ValueError):
            self.forget()
            return update
        if size != self._size:
            self._rows = [[None] * size[0] for _ in range(size[1])]
            self._size = size
        changed: dict[int, set[int]] = {}
        for x, y, strip in pieces:
            if 0 <= y < size[1]:
                changed.setdefault(y, set()).update(self._put(x, y, strip, console))
        return Written("".join(self._sent(y, sorted(changed[y])) for y in sorted(changed) if changed[y]))

    def _put(self, x: int, y: int, strip: Strip, console: Console) -> list[int]:
        """Note what a strip shows, and return the columns that it changes."""
        row, changed = self._rows[y], []
        for cell in _cells(strip, console):
            if 0 <= x < len(row) and row[x] != cell:
                row[x] = cell
                changed.append(x)
            x += 1
        return changed

    def _sent(self, y: int, columns: list[int]) -> str:
        """Return the characters that bring changed columns of a row to the terminal."""
        row, out, style = self._rows[y], [f"\x1b[{y + 1};{columns[0] + 1}H"], ""
        blank_from, at = _blank_from(row), columns[0]
        for x in columns:
            if x < at:
                continue
            if x >= blank_from:
                out.append(_step(x - at) + ("\x1b[m" if style else "") + "\x1b[K")
                return "".join(out)
            between = row[at:x]
            if x - at <= SHORT_GAP and all(cell is not None and cell[1] == style for cell in between):
                out += [cell[0] for cell in between]
            else:
                out.append(_step(x - at))
            text, codes = row[x]
            if codes != style:
                out.append(f"\x1b[{'0;' if style and codes else ''}{codes}m")
                style = codes
            out.append(text)
            at = x + max(1, cell_len(text))
        return "".join([*out, "\x1b[m" if style else ""])


def _step(columns: int) -> str:
    """Return what moves the cursor to the right."""
    return "" if columns == 0 else "\x1b[C" if columns == 1 else f"\x1b[{columns}C"


def _pieces(update: Any) -> Iterator[tuple[int, int, Strip]]:
    """Yield column, row and strip of everything an update shows."""
    if isinstance(update, LayoutUpdate):
        for y, line in enumerate(update.strips, update.region.y):
            x = update.region.x
            for strip in line:
                yield x, y, strip
                x += strip.cell_length
    elif isinstance(update, ChopsUpdate):
        for y, x1, x2 in update.spans:
            for end, (x, strip) in zip(update.chop_ends[y], update.chops[y].items(), strict=False):
                if strip is not None and x <= x2 and end > x1:
                    yield x, y, strip if end <= x2 else strip.crop(0, min(end, x2) - x)


def _cells(strip: Strip, console: Console) -> list[Cell]:
    """Return every cell of a strip."""
    system, cells = console._color_system, []
    for text, style, control in strip:
        if control:
            continue
        codes = _lean(style._make_ansi_codes(system)) if style is not None and system is not None else ""
        if text.isascii():
            cells += [(character, codes) for character in text]
            continue
        for character in text:
            width = cell_len(character)
            if width:
                cells += [(character, codes)] + [("", codes)] * (width - 1)
            elif cells:  # a combining mark belongs to the character before it
                base = -1 if cells[-1][0] else -2
                cells[base] = (cells[base][0] + character, cells[base][1])
    return cells


def _tokens(codes: str) -> Iterator[tuple[str, ...]]:
    """Yield the codes of a style, those of one colour together."""
    numbers = iter(codes.split(";") if codes else ())
    for number in numbers:
        if number in ("38", "48"):
            kind = next(numbers, "")
            yield (number, kind, *(next(numbers, "") for _ in range(3 if kind == "2" else 1)))
        else:
            yield (number,)


@cache
def _lean(codes: str) -> str:
    """Return the codes without those that ask for the terminal's own colours: they are there already."""
    return ";".join(";".join(token) for token in _tokens(codes) if token not in (("39",), ("49",)))


def _blank_from(row: list[Cell | None]) -> int:
    """Return the column from which a row is blank to its edge; its length where that is not worth erasing."""
    x = len(row)
    while x and row[x - 1] is not None and row[x - 1][0] == " " and _unseen(row[x - 1][1]):
        x -= 1
    return x if len(row) - x >= LONG_BLANK else len(row)


@cache
def _unseen(codes: str) -> bool:
    """Return whether a blank of this style looks as if it had none."""
    for token in _tokens(codes):
        number = int(token[0])
        if number in SEEN_ON_BLANKS or 40 <= number <= 48 or 100 <= number <= 107:
            return False
    return True
