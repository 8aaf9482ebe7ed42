"""A pane that is nothing but lines of text, drawn by ourselves so that a change repaints only its lines."""

from __future__ import annotations

from collections.abc import Sequence

from rich.cells import cell_len
from rich.segment import Segment
from textual.events import Resize
from textual.geometry import Region
from textual.message import Message
from textual.selection import Selection
from textual.strip import Strip
from textual.widget import Widget

from .themes import styles_of

Piece = tuple[str, str]
"""Text and the name of its style, one of those in `themes`."""
Line = Sequence[Piece]


def width_of(line: Line) -> int:
    """Return the terminal cells a line takes."""
    return sum(cell_len(text) for text, _ in line)


def shown_on(text: str, bare: bool) -> str:
    """Return text as a terminal can show it: a bare one gets a question mark for what is not ASCII."""
    if not bare or text.isascii():
        return text
    return "".join(c if c.isascii() else "?" * cell_len(c) for c in text)


def padded(text: str, width: int) -> str:
    """Return text cut or filled to so many cells; what is cut ends in a tilde."""
    length = cell_len(text)
    if length <= width:
        return text + " " * (width - length)
    if width < 1:
        return ""
    kept = text
    while cell_len(kept) > width - 1:
        kept = kept[:-1]
    return kept + "~" + " " * (width - 1 - cell_len(kept))


def wrapped(text: str, width: int, indent: int = 0) -> list[str]:
    """Return text broken between words into lines of so many cells, all but the first indented."""
    if width < 2:
        return [text[: max(width, 0)]]
    indent = min(indent, width // 2)
    lines, current = [], ""
    for word in text.split(" "):
        while True:
            free = width - (indent if lines else 0)
            joined = f"{current} {word}" if current else word
            if cell_len(joined) <= free:
                current = joined
                break
            if current:
                lines.append(current)
                current = ""
            else:
                fitting = len(word)
                while fitting > 1 and cell_len(word[:fitting]) > free:
                    fitting -= 1
                lines.append(word[:fitting])
                word = word[fitting:]
                if not word:
                    break
    if current or not lines:
        lines.append(current)
    return [lines[0], *(" " * indent + line for line in lines[1:])]


class Lines(Widget):
    """Lines of text in named styles, with an upright line at the left when there is a pane beside it."""

    can_focus = False

    class Resized(Message):
        """A pane has another size, and wants other lines."""

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._lines: list[list[Piece]] = []
        self._written = self._drawn = False
        self._first = 0
        self.edge = ""
        self.stale = False
        self.pinned = 0

    @property
    def room(self) -> int:
        """Cells a line may take."""
        return max(0, self.size.width - len(self.edge))

    @property
    def bare(self) -> bool:
        """Whether the terminal shows nothing but ASCII for certain."""
        return getattr(self.app, "bare", False)

    def on_resize(self, event: Resize) -> None:
        """Tell of the new size."""
        self.post_message(self.Resized())

    def show(self, lines: Sequence[Line], *, stale: bool = False) -> None:
        """Show other lines; only those that changed are repainted. Stale ones are dimmed."""
        self._written = True
        new = [list(line) for line in lines]
        old, self._lines = self._lines, new
        first = self._first
        self.scroll_lines(0)
        anew = stale != self.stale or first != self._first
        self.stale = stale
        if not self._drawn:
            return
        if anew:
            self.refresh()
            return
        for index in range(max(len(old), len(new))):
            if old[index : index + 1] != new[index : index + 1]:
                y = index if index < self.pinned else index - self._first
                self.refresh(Region(0, y, self.size.width, 1))

    def scroll_lines(self, by: int) -> None:
        """Move what is shown up or down, as far as there are lines; pinned ones stay."""
        first = max(0, min(self._first + by, len(self._lines) - self.size.height))
        if first != self._first:
            self._first = first
            self.refresh()

    def keep_in_sight(self, index: int) -> None:
        """Scroll so far that a line is in sight."""
        height = self.size.height
        if index < self._first + self.pinned:
            self.scroll_lines(index - self._first - self.pinned)
        elif index >= self._first + height:
            self.scroll_lines(index - self._first - height + 1)

    def line_at(self, y: int) -> int:
        """Return the index of the line on a row of the pane."""
        return y if y < self.pinned else y + self._first

    def render_line(self, y: int) -> Strip:
        """Return one row, filled to the width of the pane."""
        if not self._written:
            # All panes have their sizes when the first row is asked for: written then, none is sent empty.
            self.app.repaint()
        self._drawn = True
        index = self.line_at(y)
        pieces = list(self._lines[index]) if 0 <= index < len(self._lines) else []
        if self.edge:
            pieces.insert(0, (self.edge, "quiet"))
        below = len(self._lines) - self._first - self.size.height
        above = self._first
        more = (
            "v" if y == self.size.height - 1 and below > 0 else "^" if y == self.pinned and above > 0 else ""
        )
        base, styles = self.rich_style, styles_of(self.app.theme)
        segments = []
        for text, name in pieces:
            named = styles["quiet" if self.stale and name not in ("cursor", "edit") else name]
            segments.append(Segment(shown_on(text, self.bare), base + named))
        width = self.size.width
        strip = Strip(segments).adjust_cell_length(width, base)
        if more and width > 2:
            strip = Strip.join([strip.crop(0, width - 1), Strip([Segment(more, base + styles["quiet"])])])
        selection = self.text_selection
        if selection is not None and (span := selection.get_span(index)) is not None:
            start, end = span[0], width if span[1] == -1 else span[1]
            chosen = strip.crop(start, end).apply_style(
                self.screen.get_component_rich_style("screen--selection")
            )
            strip = Strip.join([strip.crop(0, start), chosen, strip.crop(end, width)])
        return strip.apply_offsets(0, index)

    def get_selection(self, selection: Selection) -> tuple[str, str] | None:
        """Return the text under a selection made with the mouse."""
        gap = " " * len(self.edge)
        text = "\n".join(gap + "".join(piece for piece, _ in line) for line in self._lines)
        return selection.extract(text), "\n"

    def selection_updated(self, selection: Selection | None) -> None:
        """Repaint when what is selected changes."""
        self.refresh()

    def plain(self) -> str:
        """Return what the pane says, as plain text."""
        return "\n".join("".join(text for text, _ in line).rstrip() for line in self._lines)
