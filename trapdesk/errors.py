"""What can go wrong, as data first and as one line of words second."""

import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

WORDS = {
    "unreadable": "cannot read {value}",
    "empty": "nothing is given",
    "too_long": "{value} is too long to be a quantity",
    "no_unit": "{value} has no unit",
    "unknown_unit": "{value} has a unit that is not known",
    "wrong_dimension": "{value} is {limit}",
    "two_meanings": "{value} can be read two ways",
    "not_finite": "{value} is not a finite number",
    "too_large": "{value} is more than {limit}",
    "too_small": "{value} is less than {limit}",
    "not_above": "{value} is not above {limit}",
    "outside": "{value} is outside {limit}",
    "ends_too_low": "the wire would end at {value}, less than {limit} above the ground",
    "not_positive": "{value} is not above zero",
    "negative": "{value} is below zero",
    "unknown_key": "{value} is not a known name",
    "unknown_choice": "{value} is not one of {limit}",
    "missing": "a value is missing",
    "duplicate": "{value} is given twice",
    "not_found": "there is no such file",
    "not_readable": "the file may not be read",
    "not_writable": "the file may not be written",
    "is_directory": "this is a directory, not a file",
    "not_text": "the file is not UTF-8 text",
    "not_toml": "the file is not valid TOML",
}
"""Words for the common codes; any other code is spoken as it is written, with spaces for underscores."""


def visible(text: object, limit: int = 60) -> str:
    """Return foreign text as one short printable line.

    Control characters, line breaks, invisible and bidirectional marks appear as escapes, so that they can
    neither move a cursor nor hide; text past the limit is cut and says so.

    Parameters
    ----------
    text : object
        What is to be shown; anything but a string is turned into one first.
    limit : int
        Longest result. [characters], >= 4

    Returns
    -------
    str
        Printable text of at most `limit` characters.
    """
    raw = str(text)
    pieces = []
    length = 0
    for position, character in enumerate(raw):
        piece = character if character.isprintable() else _escape(character)
        pieces.append(piece)
        length += len(piece)
        if length > limit or (length == limit and position + 1 < len(raw)):
            while length > limit - 3:
                length -= len(pieces.pop())
            return "".join(pieces) + "..."
    return "".join(pieces)


def _escape(character: str) -> str:
    code = ord(character)
    if code <= 0xFF:
        return f"\\x{code:02x}"
    if code <= 0xFFFF:
        return f"\\u{code:04x}"
    return f"\\U{code:08x}"


def quoted(value: object, limit: int = 60) -> str:
    """Return foreign text made visible, in quotation marks.

    Parameters
    ----------
    value : object
        What was given.
    limit : int
        Longest text between the marks. [characters]

    Returns
    -------
    str
        The text in single quotes, or in double ones when it holds a single quote (feet).
    """
    shown = visible(value, limit)
    return f'"{shown}"' if "'" in shown and '"' not in shown else f"'{shown}'"


def _words(code: str, value: str, limit: str) -> str:
    template = WORDS.get(code)
    if template is not None and (value != "" or "{value}" not in template):
        return template.format(value=quoted(value), limit=visible(limit, 200))
    words = code.replace("_", " ")
    if value != "":
        words = f"{quoted(value)}: {words}"
    if limit != "":
        words = f"{words} ({visible(limit, 200)})"
    return words


@dataclass(frozen=True)
class Fault:
    """One thing wrong with what was given.

    Parameters
    ----------
    where : str
        Dotted key of the value, such as "antenna.lengths.inner"; empty when the caller knows it better.
    code : str
        Kind of fault: a key of `WORDS`, or what is wrong in a few words, as it is to be read.
    value : str
        What was given, as it was given.
    limit : str
        The bound that was broken, with its unit, in words.
    help : str
        What would be right.
    """

    where: str
    code: str
    value: str = ""
    limit: str = ""
    help: str = ""

    def __str__(self) -> str:
        """Return one line: where, what is wrong, what would be right."""
        line = _words(self.code, self.value, self.limit)
        if self.where:
            line = f"{visible(self.where, 120)}: {line}"
        return f"{line}; {visible(self.help, 300)}" if self.help else line


class TrapdeskError(Exception):
    """An end with a reason: `exit_code` is what the command line returns for it."""

    exit_code = 1


class BadInput(TrapdeskError):
    """What was given cannot be used; every fault found is carried.

    Parameters
    ----------
    faults : Fault or iterable of Fault
        At least one.
    """

    exit_code = 2

    def __init__(self, faults: Fault | Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = (faults,) if isinstance(faults, Fault) else tuple(faults)
        if not self.faults:
            raise ValueError("faults must hold at least one fault")
        super().__init__(self.faults)

    def __str__(self) -> str:
        """Return one line a fault."""
        return "\n".join(str(fault) for fault in self.faults)


class FileFault(TrapdeskError):
    """A file cannot be read, understood or written.

    Parameters
    ----------
    path : str or path
        The file.
    code : str
        Kind of fault, as in `Fault`.
    help : str
        What would be right.
    faults : iterable of Fault
        Single faults inside the file, when there are any.
    """

    exit_code = 3

    def __init__(
        self, path: str | os.PathLike[str], code: str, help: str = "", faults: Iterable[Fault] = ()
    ) -> None:
        self.path = os.fspath(path)
        self.code = code
        self.help = help
        self.faults: tuple[Fault, ...] = tuple(faults)
        super().__init__(self.path, code, help, self.faults)

    def __str__(self) -> str:
        """Return one line for the file and one for each fault inside it."""
        line = f"{visible(self.path, 200)}: {_words(self.code, '', '')}"
        if self.help:
            line = f"{line}; {visible(self.help, 300)}"
        return "\n".join([line, *(f"{visible(self.path, 200)}: {fault}" for fault in self.faults)])


class NoAnswer(TrapdeskError):
    """The question is sound but nothing answers it.

    Parameters
    ----------
    code : str
        Reason, a few words joined by underscores.
    where : str
        Dotted key of what could not be found.
    numbers : mapping
        The numbers behind the reason, by name with the unit in the name.
    help : str
        What would help.
    """

    exit_code = 1

    def __init__(
        self, code: str, where: str = "", numbers: Mapping[str, float] | None = None, help: str = ""
    ) -> None:
        self.code = code
        self.where = where
        self.numbers: dict[str, float] = dict(numbers or {})
        self.help = help
        super().__init__(code, where, self.numbers, help)

    def __str__(self) -> str:
        """Return one line: what was looked for, why there is none, the numbers, what would help."""
        line = _words(self.code, "", "")
        if self.where:
            line = f"{visible(self.where, 120)}: {line}"
        if self.numbers:
            shown = ", ".join(f"{visible(name)} = {number:.6g}" for name, number in self.numbers.items())
            line = f"{line} ({shown})"
        return f"{line}; {visible(self.help, 300)}" if self.help else line
