"""Opening, saving and leaving, what an earlier desk left, and the questions they ask."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path
from typing import Protocol

from ...errors import FileFault, TrapdeskError, visible
from ...store import store
from ...store.store import Document
from . import journal
from .config import Config
from .fresh import begun
from .journal import Journal, Left
from .session import Session

RECENT = 9
"""Files that are offered to be opened again."""
FIRST_RUN = "new here? ? helps; arrows move, Enter or a digit edits, v turns the views, q quits"


class Asker(Protocol):
    """Who can tell and ask a person something, show another design, and close the desk."""

    def say(self, text: str, refused: bool = False) -> None:
        """Show a note."""

    def ask(self, question: str, answer: Callable[[str], None], text: str | None = None) -> None:
        """Ask for a line, or for a single key when there is no text to start from."""

    def solve(self) -> None:
        """Solve and show the present design."""

    def close(self) -> None:
        """End the desk."""


def one_line(error: TrapdeskError) -> str:
    """Return an error of several lines as one; of a file that was just named its last name is enough."""
    text = "; ".join(str(error).splitlines())
    if isinstance(error, FileFault):
        text = text.replace(visible(error.path, 200), visible(Path(error.path).name, 30))
    return text


class Filing:
    """What the keys for files do, a question at a time."""

    def __init__(
        self, session: Session, asker: Asker, config: Config, kept: Journal | None = None, trouble: str = ""
    ) -> None:
        self._session = session
        self._asker = asker
        self._config = config
        self._journal = kept
        self._trouble = trouble
        if kept is not None:
            session.note = self._note

    def _note(self, opened: bool = False) -> None:
        """Journal the present state, and tell when that cannot be done."""
        assert self._journal is not None
        trouble, before = self._journal.note(self._session, opened), self._session.unsafe
        self._session.unsafe = bool(trouble)
        if trouble and not before:
            self._trouble = f"edits cannot be kept safe here ({visible(trouble, 60)}): write often"

    def trouble(self) -> str:
        """Return what went wrong since this was last asked."""
        told, self._trouble = self._trouble, ""
        return told

    def begin(self) -> None:
        """Begin the journal; tell what an earlier desk left, and of another that has the same file."""
        if self._journal is None:
            return
        found = journal.look_through(self._journal.folder)
        first = not self._journal.folder.exists()
        self._note()
        trouble = self.trouble()
        if trouble:
            self._asker.say(trouble, refused=True)
        elif not (self._warn_of_others(found.running) or self._tell_of_unsaved(found.running)) and first:
            self._asker.say(FIRST_RUN)
        if found.left:
            here = self._here(self._session.path)
            mine = [one for one in found.left if here and self._here(one.document.path) == here]
            self._offer((mine or found.left)[0])

    def _offer(self, left: Left) -> None:
        title = visible(left.design.title, 30)
        question = f"{title} was left unsaved by a desk that ended: r resumes it, n not now, d drops it"

        def decided(key: str) -> None:
            if key == "r":
                self._session.open(left.document, left.designs, left.place)
                if not self._session.unsafe:
                    journal.drop(left)
                self._asker.say(self.trouble() or "as it was after the last edit")
                self._asker.solve()
            elif key == "d":
                journal.drop(left)
                self._asker.say("dropped")
            else:
                self._asker.say("it will be offered again at the next start")

        self._asker.ask(question, decided)

    @staticmethod
    def _here(path: Path | None) -> str:
        return os.path.realpath(path) if path is not None else ""

    def _warn_of_others(self, running: tuple[Left, ...]) -> bool:
        """Tell of another desk that has the present file open, and return whether there is one."""
        here = self._here(self._session.path)
        for other in running:
            if here and self._here(other.document.path) == here:
                words = (
                    f"another desk (process {other.owner.pid}) has this file open: save under another name"
                )
                self._asker.say(words, refused=True)
                return True
        return False

    def _tell_of_unsaved(self, running: tuple[Left, ...]) -> bool:
        """Tell of a desk that runs elsewhere with unsaved edits, as over a link that dropped unnoticed."""
        for other in running:
            if other.unsaved:
                pid, title = other.owner.pid, visible(other.design.title, 30)
                words = (
                    f"{title} is unsaved at another desk; kill -HUP {pid} ends it, the next start resumes it"
                )
                self._asker.say(words)
                return True
        return False

    def open(self) -> None:
        """Ask which file or preset to open; recent ones by their number."""
        self._unless_unsaved(self._ask_open)

    def _ask_open(self) -> None:
        recent = self._recent()
        listed = " ".join(f"{n}:{visible(file.stem, 14)}" for n, file in enumerate(recent, 1))
        self._asker.ask(f"open{f' ({listed})' if listed else ''}", self._opened, "")

    def _opened(self, given: str) -> None:
        recent = self._recent()
        if given.isascii() and given.isdigit() and 1 <= int(given) <= len(recent):
            given = str(recent[int(given) - 1])
        if not given:
            self._asker.say("nothing was opened")
            return
        try:
            document = store.find(Path(given).expanduser())
        except TrapdeskError as error:
            self._asker.say(one_line(error), refused=True)
            return
        self._begin_with(document, f"{visible(document.name, 50)} is open")

    def new(self) -> None:
        """Ask for the bands, or the preset, to begin with."""
        question = f"new: bands such as 40 20, or one of {', '.join(store.presets())}"
        self._unless_unsaved(lambda: self._asker.ask(question, self._new, store.FIRST_PRESET))

    def _new(self, name: str) -> None:
        if not name:
            self._asker.say("nothing was begun")
            return
        try:
            document = begun(name, self._config)
        except TrapdeskError as error:
            self._asker.say(one_line(error), refused=True)
            return
        self._begin_with(document, f"a new design, {visible(document.name, 40)}; w gives it a file")

    def _begin_with(self, document: Document, words: str) -> None:
        self._session.open(document)
        trouble = self.trouble()
        self._asker.say(trouble or words, refused=bool(trouble))
        if document.path is not None:
            self._remember(document.path)
            if self._journal is not None:
                self._warn_of_others(journal.look_through(self._journal.folder).running)
        self._asker.solve()

    def _unless_unsaved(self, then: Callable[[], None]) -> None:
        if not self._session.unsaved:
            then()
            return

        def decided(key: str) -> None:
            if key == "w" and self._session.path is not None:
                self._unless_changed(self._session.path, then)
            elif key == "w":
                self.write_as(then)
            elif key == "x":
                then()
            else:
                self._asker.say("still here")

        self._asker.ask("not saved: w writes it first, x goes on without, Esc stays", decided)

    def _recent_file(self) -> Path | None:
        return None if self._journal is None else self._journal.folder / "recent"

    def _recent(self) -> list[Path]:
        """Return the files that were open, the latest first, without those that are gone."""
        file = self._recent_file()
        try:
            lines = file.read_text("utf-8").splitlines() if file is not None else []
        except (OSError, ValueError):
            return []
        return [Path(line) for line in lines if line and os.path.isfile(line)][:RECENT]

    def _remember(self, path: Path) -> None:
        """Note a file as recent; a list that cannot be written is no reason to trouble anybody."""
        file, kept = self._recent_file(), os.path.abspath(path)
        if file is None or not kept.isprintable():
            return
        lines = [kept, *(str(other) for other in self._recent() if str(other) != kept)][:RECENT]
        try:
            store.put_whole(str(file), ("\n".join(lines) + "\n").encode("utf-8", "surrogateescape"))
        except OSError:
            return

    def write(self) -> None:
        """Save where the design came from; ask for a name when that was a preset."""
        if self._session.path is None:
            self.write_as()
        else:
            self._unless_changed(self._session.path)

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
        if path == self._session.path:
            self._unless_changed(path, then)
        elif path.exists():
            self._confirm(path, f"{visible(path, 40)} is there already; r replaces it, Esc leaves it", then)
        else:
            self._write(path, then)

    def _unless_changed(self, path: Path, then: Callable[[], None] | None = None) -> None:
        """Save over the file that was opened, unless somebody else changed it since: then ask."""
        try:
            same = _bytes_of(store.read_file(path)) == _bytes_of(self._session.text)
        except TrapdeskError:
            same = not path.exists()
        if same:
            self._write(path, then)
        else:
            question = f"{visible(path, 30)} was changed by someone else; r replaces it, Esc leaves it"
            self._confirm(path, question, then)

    def _confirm(self, path: Path, question: str, then: Callable[[], None] | None) -> None:
        def decided(key: str) -> None:
            if key == "r":
                self._write(path, then)
            else:
                self._asker.say("nothing was written")

        self._asker.ask(question, decided)

    def _write(self, path: Path, then: Callable[[], None] | None = None) -> None:
        try:
            saved = store.save(self._session.design, path, self._session.text)
            self._session.saved_as(path, store.read_file(path))
        except TrapdeskError as error:
            self._asker.say(one_line(error), refused=True)
            return
        self._remember(path)
        kept = "" if saved.comments_kept else "; its comments could not be kept"
        self._asker.say(self.trouble() or f"written to {visible(path)}{kept}")
        if then is not None:
            then()

    def leave(self) -> None:
        """Close the desk; ask first when something is not saved."""
        if not self._session.unsaved:
            self._close()
            return
        self._asker.ask("not saved: w writes it and quits, q quits without, Esc stays", self._left)

    def _left(self, key: str) -> None:
        if key == "q":
            self._close()
        elif key == "w" and self._session.path is not None:
            self._unless_changed(self._session.path, self._close)
        elif key == "w":
            self.write_as(self._close)
        else:
            self._asker.say("still here")

    def _close(self) -> None:
        """End the desk and its journal: what is not in a file now was to be forgotten."""
        if self._journal is not None:
            try:
                self._journal.end()
            except OSError:
                pass  # It stays, and is offered at the next start.
        self._asker.close()


def _bytes_of(text: str) -> bytes:
    return text.encode("utf-8", "surrogatepass")
