"""What the terminal can show: glyphs and colours, judged from the environment alone."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path


class Glyphs(StrEnum):
    """Characters for lines and curves."""

    BRAILLE = "braille"
    ASCII = "ascii"


# Their fonts lack braille and most of the line drawing, or nobody knows what they have.
_BARE = ("linux", "vt", "dumb", "ansi", "cons", "unknown")
_COLOURLESS = ("vt", "dumb", "unknown")


@dataclass(frozen=True, kw_only=True)
class Look:
    """Which glyphs to draw with, and the theme to start in."""

    glyphs: Glyphs
    theme: str

    @property
    def upright(self) -> str:
        """The character between columns."""
        return "│" if self.glyphs is Glyphs.BRAILLE else "|"

    @property
    def level(self) -> str:
        """The character of a line across."""
        return "─" if self.glyphs is Glyphs.BRAILLE else "-"

    @property
    def corner(self) -> str:
        """The character where the axes of a plot meet."""
        return "└" if self.glyphs is Glyphs.BRAILLE else "+"


def look(environment: Mapping[str, str], theme: str = "") -> Look:
    """Return how to draw on the terminal an environment describes, in a theme where it has colours.

    `NO_COLOR` set to anything but nothing turns colours off, as its convention has it.
    """
    name = environment.get("TERM", "").lower() or "unknown"
    bare = name.startswith(_BARE)
    colourless = bool(environment.get("NO_COLOR")) or name.startswith(_COLOURLESS)
    glyphs = Glyphs.ASCII if bare or not _speaks_unicode(environment) else Glyphs.BRAILLE
    return Look(glyphs=glyphs, theme="plain" if colourless else theme or "own")


def as_started(environment: Mapping[str, str]) -> dict[str, str]:
    """Return an environment with the locale this process was started in.

    In the plain C locale Python sets LC_CTYPE to UTF-8 for itself, whatever the terminal shows: PEP 538.
    """
    try:
        started = Path("/proc/self/environ").read_bytes().split(b"\0")
    except OSError:
        return dict(environment)
    was = [pair for pair in started if pair.startswith(b"LC_CTYPE=")]
    given = {"LC_CTYPE": was[0].partition(b"=")[2].decode("ascii", "replace")} if was else {"LC_CTYPE": ""}
    return dict(environment) | given


def _speaks_unicode(environment: Mapping[str, str]) -> bool:
    """Return whether the locale's character set is UTF-8; the first variable that is set decides."""
    for variable in ("LC_ALL", "LC_CTYPE", "LANG"):
        if value := environment.get(variable):
            return "utf8" in value.lower().replace("-", "")
    return False
