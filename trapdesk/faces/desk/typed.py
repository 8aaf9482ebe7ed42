"""A line being typed: its text, where the caret stands, and what a key does to it."""

from __future__ import annotations

from rich.cells import cell_len
from textual.events import Key

from ...errors import visible
from .lines import Piece

LONGEST = 200


class Typed:
    """Text with a caret. Control characters never get in.

    A `fresh` text is one to start from: what is typed first takes its place, what moves the caret keeps it.
    """

    def __init__(self, text: str = "", *, fresh: bool = False) -> None:
        self.text = "".join(character for character in text if character.isprintable())[:LONGEST]
        self.caret = len(self.text)
        self.fresh = fresh

    def insert(self, text: str) -> None:
        """Put text in at the caret; in place of a fresh text nobody has touched yet."""
        if self.fresh:
            self.text, self.caret = "", 0
        self.fresh = False
        lines = text.splitlines()
        clean = "".join(c for c in lines[0] if c.isprintable()) if lines else ""
        clean = clean[: LONGEST - len(self.text)]
        self.text = self.text[: self.caret] + clean + self.text[self.caret :]
        self.caret += len(clean)

    def key(self, event: Key) -> bool:
        """Do what a key asks of the text, and return whether it asks anything."""
        name, text, caret = event.key, self.text, self.caret
        if event.is_printable and event.character:
            self.insert(event.character)
            return True
        if name == "backspace" and caret:
            self.text, self.caret = text[: caret - 1] + text[caret:], caret - 1
        elif name in ("delete", "ctrl+d"):
            self.text = text[:caret] + text[caret + 1 :]
        elif name == "ctrl+u":
            self.text, self.caret = text[caret:], 0
        elif name == "ctrl+k":
            self.text = text[:caret]
        elif name == "ctrl+w":
            kept = text[:caret].rstrip()
            kept = kept[: kept.rfind(" ") + 1]
            self.text, self.caret = kept + text[caret:], len(kept)
        elif name in ("left", "ctrl+b"):
            self.caret = max(0, caret - 1)
        elif name in ("right", "ctrl+f"):
            self.caret = min(len(text), caret + 1)
        elif name in ("home", "ctrl+a"):
            self.caret = 0
        elif name in ("end", "ctrl+e"):
            self.caret = len(text)
        elif name != "backspace":
            return False
        self.fresh = False
        return True

    def pieces(self, width: int) -> list[Piece]:
        """Return the text with its caret in so many cells, scrolled so that the caret is in sight."""
        width = max(2, width)
        text, caret = self.text, self.caret
        if self.fresh and text and cell_len(text) < width:
            return [(text, "cursor"), (" " * (width - cell_len(text)), "edit")]
        start = 0
        while cell_len(text[start:caret]) > width - 1:
            start += 1
        end = len(text)
        while cell_len(text[start:end]) > width - (1 if end == caret else 0) and end > caret + 1:
            end -= 1
        under = text[caret : caret + 1] if caret < end else " "
        before, after = visible(text[start:caret], 999) if caret > start else "", text[caret + 1 : end]
        used = cell_len(before) + cell_len(under) + cell_len(after)
        return [(before, "edit"), (under, "cursor"), (after + " " * max(0, width - used), "edit")]
