"""Saving and leaving, with the questions they ask."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Protocol

from ... import store
from ...errors import TrapdeskError, visible
from .session import Session


class Asker(Protocol):
    """Who can tell and ask a person something, and close the desk."""

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""

    def ask(self, question: str, answer: Callable[[str], None], text: str | None = None) -> None:
        """Ask for a line, or for a single key when there is no text to start from."""

    def close(self) -> None:
        """End the desk."""


class Filing:
    """What `write` and `leave` do, a question at a time."""

    def __init__(self, session: Session, asker: Asker) -> None:
        self._session = session
        self._asker = asker

    def write(self) -> None:
        """Save where the design came from; ask for a name when that was a preset."""
        if self._session.path is None:
            self.write_as()
        else:
            self._write(self._session.path)

    def write_as(self, then: Callable[[], None] | None = None) -> None:
        """Ask for the name of a file and save there."""
        name = Path(self._session.name).name.removesuffix(".toml")
        text = str(self._session.path or f"{name}.toml")
        self._asker.ask("write to", lambda given: self._named(given, then), text)

    def _named(self, given: str, then: Callable[[], None] | None) -> None:
        if not given:
            self._asker.say("nothing was written")
            return
        path = Path(given).expanduser()
        if path == self._session.path or not path.exists():
            self._write(path, then)
            return

        def decided(key: str) -> None:
            if key == "r":
                self._write(path, then)
            else:
                self._asker.say("nothing was written")

        self._asker.ask(f"{visible(path, 40)} is there already; r replaces it, Esc leaves it", decided)

    def _write(self, path: Path, then: Callable[[], None] | None = None) -> None:
        try:
            saved = store.save(self._session.design, path, self._session.text)
            self._session.saved_as(path, store.read_file(path))
        except TrapdeskError as error:
            self._asker.say("; ".join(str(error).splitlines()), refused=True)
            return
        kept = "" if saved.comments_kept else "; its comments could not be kept"
        self._asker.say(f"written to {visible(path)}{kept}")
        if then is not None:
            then()

    def leave(self) -> None:
        """Close the desk; ask first when something is not saved."""
        if not self._session.unsaved:
            self._asker.close()
            return
        self._asker.ask("not saved: w writes it and quits, q quits without, Esc stays", self._left)

    def _left(self, key: str) -> None:
        if key == "q":
            self._asker.close()
        elif key == "w" and self._session.path is not None:
            self._write(self._session.path, self._asker.close)
        elif key == "w":
            self.write_as(self._asker.close)
        else:
            self._asker.say("still here")
