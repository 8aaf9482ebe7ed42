"""Designs and their TOML files: reading with every fault at once, saving without loss, the presets."""

from __future__ import annotations

import difflib
import errno
import json
import os
import stat
from dataclasses import dataclass
from importlib import resources
from pathlib import Path
from typing import Any

from ..design.design import Design
from ..design.fields import SOLVE, Declared, walk
from ..design.rules import check
from ..errors import FileFault, TrapdeskError
from ..units import units
from . import toml_edit
from .spoken import spoken
from .toml_read import HEAD, DesignFault, read_text

FIRST_PRESET = "40-20-vee"
"""The preset that opens when nothing else is asked for."""

LARGEST_FILE = 1_000_000
BOX_ENDING = "-box.toml"
"""What the name of a ready box ends in."""


@dataclass(frozen=True, kw_only=True)
class Document:
    """A design as it was opened: with its text, and its path unless it is a preset."""

    design: Design
    text: str
    name: str
    path: Path | None = None


@dataclass(frozen=True, kw_only=True)
class Saved:
    """What was written: where, and whether the person's comments and layout are still there."""

    path: Path
    comments_kept: bool


def load(path: str | os.PathLike[str]) -> Design:
    """Return the design in a file; FileFault when there is none, DesignFault with all that is wrong in it."""
    return read_text(read_file(path), os.fspath(path))


def read_file(path: str | os.PathLike[str]) -> str:
    """Return the text of a file; FileFault when it cannot be read, is too large or is not text."""
    try:
        with open(path, "rb") as file:
            data = file.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        raise FileFault(path, "not_found", help=_near_presets(os.fspath(path))) from None
    except IsADirectoryError:
        raise FileFault(path, "is_directory", help="name a file in it") from None
    except (OSError, ValueError) as error:
        raise FileFault(path, "not_readable", help=_reason(error)) from None
    if len(data) > LARGEST_FILE:
        raise FileFault(path, "too_large", help=f"a design is at most {LARGEST_FILE // 1000} kB")
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as error:
        raise FileFault(path, "not_text", help=f"byte {error.start + 1} is no part of it") from None
    if "\0" in text:
        raise FileFault(path, "not_text", help=f"byte {data.index(0) + 1} is zero: a binary file")
    return text


def find(argument: str | os.PathLike[str] = FIRST_PRESET) -> Document:
    """Return what a person named: a file, or else a preset, with or without .toml."""
    name = os.fspath(argument)
    if not os.path.lexists(argument) and (known := name.removesuffix(".toml")) in presets():
        design, text = preset(known)
        return Document(design=design, text=text, name=known)
    text = read_file(argument)
    return Document(design=read_text(text, name), text=text, name=name, path=Path(argument))


def presets() -> list[str]:
    """Return the names of the presets; a box on the same shelf is no design."""
    names = (f.name for f in shelf().iterdir())
    found = (name for name in names if name.endswith(".toml") and not name.endswith(BOX_ENDING))
    return sorted(name.removesuffix(".toml") for name in found)


def preset(name: str) -> tuple[Design, str]:
    """Return a preset's design and text; FileFault when there is no such preset."""
    known = name.removesuffix(".toml")
    if known not in presets():
        raise FileFault(name, "not_found", help=_near_presets(name))
    text = shelf().joinpath(f"{known}.toml").read_text("utf-8")
    return read_text(text, known), text


def shelf() -> Any:
    """Return the folder of the presets: in the installed package, else at the top of the checkout."""
    packaged = resources.files("trapdesk") / "presets"
    return packaged if packaged.is_dir() else Path(__file__).parents[2] / "presets"


def _near_presets(name: str) -> str:
    known = presets()
    near = difflib.get_close_matches(Path(name).name.removesuffix(".toml")[:60], known, n=1)
    return f"did you mean the preset {near[0]}?" if near else f"presets are {', '.join(known)}"


def _reason(error: Exception) -> str:
    return (error.strerror if isinstance(error, OSError) else "") or str(error)


def to_text(design: Design, original_text: str | None = None) -> str:
    """Return a design as TOML: the original text with values changed in place where that is possible.

    Values that did not change stay as the person wrote them. Raises DesignFault for a design that could
    not be read again.
    """
    return _to_text(design, original_text, "design")[0]


def _to_text(design: Design, original_text: str | None, name: str) -> tuple[str, bool]:
    """Return the text, and whether comments and layout of the original are in it."""
    breaches = check(design)
    if breaches:
        raise DesignFault(name, (spoken(breach) for breach in breaches))
    wanted = _written(design)
    if original_text is not None:
        edited = _edited(design, wanted, original_text)
        if edited is not None:
            return edited, True
    text = _fresh(wanted)
    if read_text(text, name) != design:
        raise ValueError("design must read back from its text")
    return text, original_text is None


def _edited(design: Design, wanted: dict[str, str], original: str) -> str | None:
    """Return the original with its changed values set; None where what comes out is not the design."""
    try:
        original = original.removeprefix("\ufeff")
        before = _written(read_text(original))
        changed = {key for key, value in wanted.items() if before.get(key) != value}
        aliases = {}
        for key, known, _ in walk(design):
            if known.alias:
                second = _second_name(key, known)
                aliases |= {second: key} if key in wanted else {key: second}
        edited = toml_edit.edit(original, wanted, changed, aliases)
        return edited if read_text(edited) == design else None
    except (TrapdeskError, toml_edit.Unforeseen):
        return None


def _written(design: Design) -> dict[str, str]:
    """Return every value there is as TOML, by dotted key, in the order of a fresh file."""
    written = dict(HEAD)
    for key, known, value in walk(design):
        if known.dimension == "parts":
            continue
        if known.dimension != "part":
            if value is not None:
                text = _value(known, value)
                by_gauge = known.alias and text.startswith('"AWG')
                written[_second_name(key, known) if by_gauge else key] = text
        elif value is not None and isinstance(known.choices, dict) and "" not in known.choices:
            written[f"{key}.kind"] = _text(value.kind)
    return written


def _second_name(key: str, known: Declared) -> str:
    return f"{key.rpartition('.')[0]}.{known.alias}"


def _value(known: Declared, value: Any) -> str:
    """Return one value as TOML."""
    if value is SOLVE:
        return _text(SOLVE.value)
    if known.dimension in ("text", "choice", "print"):
        return _text(str(value))
    if known.example.startswith("AWG"):
        gauge = next((n for n in range(41) if units.gauge_diameter(n) == value), None)
        if gauge is not None:
            return _text(f"AWG {gauge}")
    written = units.to_text(float(value), units.Dimension(known.dimension))
    return written if known.dimension in ("ratio", "count") else _text(written)


def _text(text: str) -> str:
    """Return a TOML string; TOML escapes what JSON does, and DEL."""
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _fresh(wanted: dict[str, str]) -> str:
    """Return a file of these values alone."""
    tables: dict[str, list[str]] = {"": []}
    for key, value in wanted.items():
        table, _, name = key.rpartition(".")
        tables.setdefault(table, []).append(f"{name} = {value}\n")
    heads = {table: f"{toml_edit.header(tuple(table.split('.')))}\n" if table else "" for table in tables}
    return "\n".join(heads[table] + "".join(lines) for table, lines in tables.items())


def save(design: Design, path: str | os.PathLike[str], original_text: str | None = None) -> Saved:
    """Write a design to a file, all of it or nothing, and say whether comments were kept.

    The new text is on the disk under another name before it takes the old one's place, so a failure at any
    moment leaves the old file or the new one. A link is followed. Raises FileFault when that cannot be done,
    DesignFault for a design that could not be read again.
    """
    text, kept = _to_text(design, original_text, os.fspath(path))
    try:
        target = os.path.realpath(path)
        mode = _mode(target)
        if mode is not None and not stat.S_ISREG(mode):
            code = "is_directory" if stat.S_ISDIR(mode) else "not_writable"
            raise FileFault(path, code, help="a design goes into a file of its own")
        if mode is not None and not os.access(target, os.W_OK):
            raise FileFault(path, "not_writable", help="it is read-only; save under another name")
        put_whole(target, text.encode("utf-8"), mode)
    except (OSError, ValueError) as error:
        raise FileFault(path, "not_writable", help=_reason(error)) from None
    return Saved(path=Path(path), comments_kept=kept)


def _mode(target: str) -> int | None:
    """Return kind and permissions of what is there, None where nothing is."""
    try:
        return os.stat(target).st_mode
    except FileNotFoundError:
        return None


def put_whole(target: str, data: bytes, mode: int | None = None) -> None:
    """Put bytes in the place of a file, all of them or none."""
    folder = os.path.dirname(target)
    beside = os.path.join(folder, f".{os.urandom(6).hex()}.trapdesk")
    handle = os.open(beside, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o666)
    try:
        with open(handle, "wb") as file:
            if mode is not None:
                os.fchmod(handle, stat.S_IMODE(mode))
            file.write(data)
            file.flush()
            os.fsync(handle)
        os.replace(beside, target)
    except BaseException:
        os.unlink(beside)
        raise
    settle(folder)


def settle(folder: str) -> None:
    """Have a folder's names outlive a power cut, where its file system can do that."""
    try:
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
    except OSError as error:
        # The file itself is written and in place; some folders may not be read or synced.
        if error.errno not in (errno.EACCES, errno.EINVAL, errno.ENOTSUP):
            raise
