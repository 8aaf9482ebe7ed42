"""Changing values in a TOML text and leaving everything else as the person wrote it.

The text is known to be valid; what is changed here is read again by whoever asked, so that a shape of text
this editor does not foresee is noticed there and never written.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Set
from dataclasses import dataclass

Path = tuple[str, ...]

_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_INSIDE = re.compile(r"(?:[ \t\r\n,]|#[^\n]*)*")
_SPACE = re.compile(r"[ \t]*")
_KEY = re.compile(r"[A-Za-z0-9_-]+|\"(?:\\.|[^\"\\\n])*\"|'[^'\n]*'")
_SCALAR = re.compile(
    r"\"\"\"(?:\\.|[^\\])*?\"\"\"\"{0,2}|'''.*?''''{0,2}|\"(?:\\.|[^\"\\\n])*\"|'[^'\n]*'|[^\s,\]}#\[{][^,\]}#\n]*",
    re.DOTALL,
)
_COMMENT_AFTER = re.compile(r"([ \t]{2,})#")


class Unforeseen(Exception):
    """A shape of text that this editor does not know."""


@dataclass(frozen=True, kw_only=True)
class _Entry:
    """A key with its value: spans of characters in the text."""

    path: Path
    table: Path
    start: int
    key: tuple[int, int]
    value: tuple[int, int]
    end: int
    inline: bool


@dataclass(frozen=True, kw_only=True)
class _Header:
    """A line that opens a table."""

    path: Path
    start: int
    end: int


class _Scan:
    """Where the keys, values and headers of a text are."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.entries: list[_Entry] = []
        self.headers: list[_Header] = []
        self.counts: dict[Path, int] = {}
        table: Path = ()
        position = self._skip(_BLANK, 0)
        while position < len(text):
            start = text.rfind("\n", 0, position) + 1
            if text[position] == "[":
                listed = text.startswith("[[", position)
                names, position = self._keys(self._skip(_SPACE, position + 1 + listed))
                table = self._placed(names, listed)
                position = self._line_end(position)
                self.headers.append(_Header(path=table, start=start, end=position))
            else:
                position = self._line_end(self._pair(position, start, table, table, inline=False))
            position = self._skip(_BLANK, position)

    def _placed(self, names: Path, listed: bool) -> Path:
        """Return a header's path with places in lists, the last of each list being meant."""
        path: Path = ()
        for number, name in enumerate(names, start=1):
            path = (*path, name)
            if listed and number == len(names):
                self.counts[path] = self.counts.get(path, 0) + 1
            if path in self.counts:
                path = (*path, str(self.counts[path]))
        return path

    def _skip(self, pattern: re.Pattern[str], position: int) -> int:
        match = pattern.match(self.text, position)
        return match.end() if match else position

    def _line_end(self, position: int) -> int:
        found = self.text.find("\n", position)
        return len(self.text) if found < 0 else found + 1

    def _keys(self, position: int) -> tuple[Path, int]:
        """Return a dotted key and where it ends."""
        names = []
        while True:
            match = _KEY.match(self.text, position)
            if match is None:
                raise Unforeseen(f"no key at character {position}")
            name = match[0]
            names.append(next(iter(tomllib.loads(f"{name} = 0"))) if name[0] in "\"'" else name)
            dot = self._skip(_SPACE, match.end())
            if not self.text.startswith(".", dot):
                return tuple(names), match.end()
            position = self._skip(_SPACE, dot + 1)

    def _pair(self, position: int, start: int, base: Path, table: Path, *, inline: bool) -> int:
        """Note a key with its value, and return where the value ends."""
        names, key_end = self._keys(position)
        value = self._skip(_SPACE, self._skip(_SPACE, key_end) + 1)
        end = self._value(value, start, base + names, table)
        entry = _Entry(
            path=base + names,
            table=table,
            start=start,
            key=(position, key_end),
            value=(value, end),
            end=self._line_end(end),
            inline=inline,
        )
        self.entries.append(entry)
        return end

    def _value(self, position: int, start: int, path: Path, table: Path) -> int:
        """Return where a value ends; what an inline table holds is noted on the way."""
        opening = self.text[position : position + 1]
        if opening not in ("[", "{"):
            match = _SCALAR.match(self.text, position)
            if match is None:
                raise Unforeseen(f"no value at character {position}")
            return position + len(match[0].rstrip())
        position = self._skip(_INSIDE, position + 1)
        place = 0
        while self.text[position : position + 1] not in "]}":
            if opening == "{":
                position = self._pair(position, start, path, table, inline=True)
            else:
                place += 1
                position = self._value(position, start, (*path, str(place)), table)
            position = self._skip(_INSIDE, position)
        return position + 1


def edit(text: str, wanted: Mapping[str, str], changed: Set[str], aliases: Mapping[str, str]) -> str:
    """Return the text with other values, its comments, order and layout kept.

    Parameters
    ----------
    text : str
        Valid TOML.
    wanted : mapping
        Every key the text may hold, dotted, with its value as TOML. What else it holds is taken out, and a
        table that holds nothing of it goes with the comments inside it.
    changed : set of str
        Keys of `wanted` whose values are to be set; all others stay as they are, present or not.
    aliases : mapping
        Keys by their second names, dotted; the second name gives way where the value changes.

    Returns
    -------
    str
        The text. Keys are neither added to inline tables nor taken out of them.
    """
    scan = _Scan(text)
    newline = "\r\n" if "\r\n" in text else "\n"
    paths = {tuple(key.split(".")): key for key in wanted}
    second = {tuple(name.split(".")): key for name, key in aliases.items()}
    prefixes = {path[:length] for path in paths for length in range(len(path) + 1)}
    gone = _gone(scan, prefixes)
    cuts = [(start, end, "") for start, end in gone]
    missing = set(changed)
    last_kept: dict[Path, _Entry] = {}
    for entry in scan.entries:
        key = paths.get(entry.path, second.get(entry.path, ""))
        if any(start <= entry.start < end for start, end in gone):
            continue
        if not entry.inline:
            last_kept[entry.table] = max(last_kept.get(entry.table, entry), entry, key=lambda e: e.end)
        if key in changed:
            missing.discard(key)
            if entry.path not in paths:
                head, dot, _ = text[slice(*entry.key)].rpartition(".")
                cuts.append((*entry.key, head + dot + key.rpartition(".")[2]))
            cuts.append(_replaced(text, entry, wanted[key]))
        elif not key and entry.path not in prefixes and not entry.inline:
            cuts.append((entry.start, entry.end, ""))
    added: dict[Path, list[str]] = {}
    for path, key in paths.items():
        if key in missing:
            added.setdefault(path[:-1], []).append(f"{path[-1]} = {wanted[key]}")
    tail = ""
    for table, lines in added.items():
        place = _place(scan, table, gone, last_kept)
        if place is None:
            block = newline + newline.join([header(table), *lines]) + newline
            after = _after_siblings(scan, table, gone)
            if after is None:
                tail += block
            else:
                broken = newline if text[after - 1] != "\n" else ""
                cuts.append((after, after, broken + block))
            continue
        position, before = place
        broken = newline if position and text[position - 1] != "\n" else ""
        cuts.append((position, position, broken + "".join(f"{before}{line}{newline}" for line in lines)))
    edited = _cut(text, cuts)
    return edited + (newline if tail and edited and not edited.endswith("\n") else "") + tail


def header(table: Path) -> str:
    """Return the line that opens a table, or the next table of a list."""
    names = ".".join(name for name in table if not name.isdecimal())
    return f"[[{names}]]" if table[-1].isdecimal() else f"[{names}]"


def _after_siblings(scan: _Scan, table: Path, gone: list[tuple[int, int]]) -> int | None:
    """Return where a new table of a list goes: after the tables before it in that list; None for no list."""
    first = next((n for n, name in enumerate(table) if name.isdecimal()), None)
    if first is None:
        return None
    spans = [
        *((h.path, h.start, h.end) for h in scan.headers),
        *((e.path, e.start, e.end) for e in scan.entries if not e.inline),
    ]
    # The list itself, else the part it is in: what comes last of it.
    for length in range(len(table) - 1, max(first - 2, 0), -1):
        above = table[:length]
        ends = [
            end
            for path, start, end in spans
            if path[:length] == above and not any(s <= start < e for s, e in gone)
        ]
        if ends:
            return max(ends)
    return None


def _gone(scan: _Scan, prefixes: Set[Path]) -> list[tuple[int, int]]:
    """Return the spans of tables that are no longer wanted.

    Comments right above the next table's header are that table's, and stay.
    """
    spans = []
    for number, header in enumerate(scan.headers):
        if header.path in prefixes:
            continue
        end = len(scan.text)
        if number + 1 < len(scan.headers):
            end = scan.headers[number + 1].start
            while True:
                above = scan.text.rfind("\n", 0, end - 1) + 1
                if above <= header.start or not scan.text[above:end].lstrip().startswith("#"):
                    break
                end = above
        spans.append((header.start, end))
    return spans


def _replaced(text: str, entry: _Entry, value: str) -> tuple[int, int, str]:
    """Return the cut that sets a value; a comment set off by several spaces keeps its column."""
    start, end = entry.value
    comment = _COMMENT_AFTER.match(text, end)
    if comment is None:
        return start, end, value
    room = max(2, len(comment[1]) - (len(value) - (end - start)))
    return start, comment.end(1), value + " " * room


def _place(
    scan: _Scan, table: Path, gone: list[tuple[int, int]], last_kept: Mapping[Path, _Entry]
) -> tuple[int, str] | None:
    """Return where a new key of a table goes and what stands before it; None where a header is wanted."""
    header = next(
        (h for h in scan.headers if h.path == table and not any(s <= h.start < e for s, e in gone)), None
    )
    if header is not None or not table:
        last = last_kept.get(table)
        if last is None:
            return (header.end if header else 0), ""
        return last.end, scan.text[last.start : last.key[0]]
    dotted = [e for e in scan.entries if e.path[:-1] == table and not e.inline]
    if not dotted:
        return None
    last = max(dotted, key=lambda e: e.end)
    return last.end, scan.text[last.start : last.key[0]] + ".".join(table[len(last.table) :]) + "."


def _cut(text: str, cuts: list[tuple[int, int, str]]) -> str:
    """Return the text with spans replaced."""
    pieces = []
    position = 0
    for start, end, piece in sorted(cuts, key=lambda cut: cut[:2]):
        pieces += [text[position:start], piece]
        position = max(position, end)
    return "".join([*pieces, text[position:]])
