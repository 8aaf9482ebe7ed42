"""The journal: what a person did at a desk, on the disk before the desk says that it is kept.

Every desk writes a journal of its own into the state folder, a record for each kept edit, undo, redo, save
and opening. A record is written and synced (fsync) before its edit is shown as kept, and a new journal's name
is synced with its folder, so that neither the end of the process nor a power cut loses what was shown. A
record that was torn fails its check sum; what stands before it holds. Journals and records are numbered, each
one after the highest there is: no clock is asked, for that of a small computer without a network is wrong.

A journal also says whose it is, by process, start of the process and boot of the machine: a journal of a
desk that still runs is a lock on the file it has open, one of a desk that ended without leaving is stale.
"""

from __future__ import annotations

import json
import os
import zlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from ...design.design import Design
from ...errors import TrapdeskError
from ...store import store
from ...store.store import Document
from ...store.toml_read import read_text
from .session import Session

ENDING = ".journal"
LARGEST = 64_000_000
"""A journal past this is begun anew with the present design alone. [bytes]"""


@dataclass(frozen=True, kw_only=True)
class Owner:
    """A process: its number, when after boot it was started, and which boot that was; empty if not told."""

    pid: int
    start: str
    boot: str

    @property
    def alive(self) -> bool:
        """Whether this very process still runs."""
        if self.boot != _boot():
            return False
        try:
            os.kill(self.pid, 0)
        except ProcessLookupError:
            return False
        except PermissionError:  # somebody else's, so there is one
            pass
        return _start(self.pid) == self.start


def myself() -> Owner:
    """Return this process."""
    return Owner(pid=os.getpid(), start=_start(os.getpid()), boot=_boot())


def _boot() -> str:
    return _told("/proc/sys/kernel/random/boot_id")


def _start(pid: int) -> str:
    # The name in parentheses may hold blanks; what follows it starts with field 3, and the start is field 22.
    fields = _told(f"/proc/{pid}/stat").rpartition(")")[2].split()
    return fields[19] if len(fields) > 19 else ""


def _told(path: str) -> str:
    try:
        return Path(path).read_text("ascii", errors="replace").strip()
    except OSError:
        return ""


@dataclass(frozen=True, kw_only=True)
class Left:
    """What a journal holds: the document that was opened or saved last, and the designs made from it."""

    file: Path
    number: int
    owner: Owner
    document: Document
    designs: tuple[Design, ...]
    place: int

    @property
    def design(self) -> Design:
        """The design after the last kept edit."""
        return self.designs[self.place]

    @property
    def unsaved(self) -> bool:
        """Whether that design is in no file."""
        return self.design != self.document.design


def folder(environment: Mapping[str, str]) -> Path:
    """Return where the desk keeps its state."""
    given = environment.get("XDG_STATE_HOME", "")
    base = Path(given) if os.path.isabs(given) else Path(environment.get("HOME") or "~").expanduser()
    return base / "trapdesk" if os.path.isabs(given) else base / ".local" / "state" / "trapdesk"


@dataclass(kw_only=True)
class Journal:
    """The journal of one desk. `note` returns what went wrong, in a few words; nothing when all is kept."""

    folder: Path
    _handle: int | None = field(default=None, init=False)
    _file: Path | None = field(default=None, init=False)
    _count: int = field(default=0, init=False)
    _size: int = field(default=0, init=False)
    _kept_in: tuple[Path | None, str] | None = field(default=None, init=False)

    def note(self, session: Session, opened: bool = False) -> str:
        """Write the present state of a session; a journal that could not be written is begun anew."""
        try:
            if self._handle is None or self._size > LARGEST:
                self._begin(session)
            else:
                whole = opened or (session.path, session.text) != self._kept_in
                self._append(_record(session, whole=whole, fresh=opened))
        except (OSError, TrapdeskError) as error:
            self._give_up()
            return (error.strerror if isinstance(error, OSError) else "") or str(error)
        self._kept_in = (session.path, session.text)
        return ""

    def _begin(self, session: Session) -> None:
        """Begin a journal with the designs there are; it takes its name when all of them are on the disk."""
        self.folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        number = max((number_of(file) for file in _files(self.folder)), default=0) + 1
        file = self.folder / f"{number:06d}-{os.urandom(4).hex()}{ENDING}"
        beside = file.with_suffix(".begun")
        old = self._file
        self._give_up()
        handle = os.open(beside, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_APPEND, 0o600)
        self._handle, self._count, self._size = handle, 0, 0
        try:
            first = _record(session, whole=True, fresh=True)
            self._append(first | {"desk": vars(myself())})
            os.replace(beside, file)
        except BaseException:
            beside.unlink(missing_ok=True)
            raise
        self._file = file
        store.settle(str(self.folder))
        if old is not None:
            old.unlink(missing_ok=True)

    def _append(self, record: dict[str, Any]) -> None:
        handle = self._handle
        assert handle is not None
        body = json.dumps({"n": self._count + 1, **record}, ensure_ascii=True).encode("ascii")
        line = b"%08x %s\n" % (zlib.crc32(body), body)
        written = 0
        while written < len(line):
            written += os.write(handle, line[written:])
        os.fsync(handle)
        self._count += 1
        self._size += len(line)

    def _give_up(self) -> None:
        """Leave what is written as it is: it holds the last state that could be kept."""
        if self._handle is not None:
            os.close(self._handle)
        self._handle = None

    def end(self) -> None:
        """Remove the journal: its person left, and wanted nothing more kept than was saved."""
        self._give_up()
        if self._file is not None:
            self._file.unlink(missing_ok=True)
            self._file = None

    @property
    def file(self) -> Path | None:
        """Where it is written."""
        return self._file


def _record(session: Session, *, whole: bool, fresh: bool) -> dict[str, Any]:
    """Return the state as a record: `whole` with the document, `fresh` when former designs do not count."""
    record: dict[str, Any] = {"place": session.designs[1], "design": store.to_text(session.design)}
    if whole:
        path = None if session.path is None else os.path.abspath(session.path)
        record |= {"path": path, "name": session.name, "text": session.text, "fresh": fresh}
    if fresh:
        record["designs"] = [store.to_text(design) for design in session.designs[0]]
    return record


def number_of(file: Path) -> int:
    """Return the number of a journal by its name, 0 when it has none."""
    digits = file.name.partition("-")[0]
    return int(digits) if digits.isascii() and digits.isdigit() else 0


def _files(where: Path) -> Iterator[Path]:
    try:
        names = os.listdir(where)
    except OSError:
        return
    yield from (where / name for name in names if name.endswith(ENDING))


def _records(file: Path) -> Iterator[dict[str, Any]]:
    """Yield the records of a journal up to the first that is torn."""
    try:
        data = file.read_bytes()
    except OSError:
        return
    for line in data.split(b"\n")[:-1]:
        sum_, _, body = line.partition(b" ")
        if sum_ != b"%08x" % zlib.crc32(body):
            return
        yield json.loads(body)


def read(file: Path) -> Left | None:
    """Return what a journal holds; None for one that holds nothing, or nothing this version can read."""
    owner, document, designs, place = None, None, [], 0
    known: dict[str, Design] = {}

    def design_of(text: str) -> Design:
        if text not in known:
            known[text] = read_text(text)
        return known[text]

    try:
        for record in _records(file):
            owner = Owner(**record["desk"]) if "desk" in record else owner
            if "text" in record:
                path = None if record["path"] is None else Path(record["path"])
                document = Document(
                    design=design_of(record["text"]), text=record["text"], name=record["name"], path=path
                )
            if record.get("fresh"):
                designs = list(record["designs"])
            place = min(record["place"], len(designs))
            if designs[place : place + 1] != [record["design"]]:
                designs[place:] = [record["design"]]
        if owner is None or document is None:
            return None
        made = tuple(design_of(text) for text in designs)
    except (TrapdeskError, KeyError, TypeError, ValueError):
        return None
    return Left(file=file, number=number_of(file), owner=owner, document=document, designs=made, place=place)


@dataclass(frozen=True, kw_only=True)
class Found:
    """The journals of other desks: of those that left something unsaved, the latest first, and that run."""

    left: tuple[Left, ...]
    running: tuple[Left, ...]


def look_through(where: Path) -> Found:
    """Return what other desks wrote; journals of desks that ended and left nothing unsaved are removed."""
    left, running, me = [], [], myself()
    for file in sorted(_files(where), key=lambda file: (-number_of(file), file.name)):
        held = read(file)
        if held is None or held.owner == me:
            continue
        if held.owner.alive:
            running.append(held)
        elif held.unsaved:
            left.append(held)
        else:
            drop(held)
    return Found(left=tuple(left), running=tuple(running))


def drop(held: Left) -> None:
    """Remove a journal; one that may not be removed stays."""
    try:
        held.file.unlink(missing_ok=True)
    except OSError:
        return
