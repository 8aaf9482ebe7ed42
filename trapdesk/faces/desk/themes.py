"""The colours of the desk: the terminal's own, dark, daylight, red light, and none at all."""

from __future__ import annotations

from functools import cache

from rich.style import Style
from textual.color import Color
from textual.theme import Theme

NAMES = ("ground", "text", "quiet", "found", "watch", "stop", "pick")


_DEFAULT = "ansi_default"
# Textual's own style sheet asks these two of a theme that keeps to the terminal's colours.
_BEHIND = {"ansi-background": _DEFAULT, "ansi-foreground": _DEFAULT}


def _theme(name: str, colours: str, *, dark: bool = True, ansi: bool = False, faint: str = "none") -> Theme:
    values = dict(zip(NAMES, colours.split(), strict=True))
    return Theme(
        name=name,
        primary=values["found"],
        foreground=values["text"],
        background=values["ground"],
        surface=values["ground"],
        panel=values["ground"],
        boost=values["ground"],
        dark=dark,
        ansi=ansi,
        variables=_BEHIND | {f"desk-{key}": value for key, value in values.items()} | {"desk-faint": faint},
    )


THEMES = {
    theme.name: theme
    for theme in (
        # Ground and text that the terminal has anyway need no codes: the fewest bytes over a thin line.
        _theme(
            "own",
            f"{_DEFAULT} {_DEFAULT} {_DEFAULT} ansi_cyan ansi_yellow ansi_bright_red ansi_cyan",
            ansi=True,
            faint="dim",
        ),
        _theme("dark", "#101418 #d8dcd6 #8a949c #8fd0c0 #e0b860 #ff8a70 #8fd0c0"),
        _theme("daylight", "#ffffff #000000 #4a4a4a #00506a #7a4a00 #a00000 #00506a", dark=False),
        # Red alone, and on black: what eyes used to the dark lose least by. Common practice, no source.
        _theme("red-light", "#000000 #d82414 #a81e10 #ff4030 #ff4030 #ff4030 #8a1408"),
        _theme("plain", " ".join([_DEFAULT] * len(NAMES)), ansi=True, faint="dim"),
    )
}
"""Themes by name, in the order in which a key goes through them."""

PIECES: dict[str, tuple[str, str]] = {
    "text": ("text", ""),
    "quiet": ("quiet", "faint"),
    "head": ("text", "bold"),
    "found": ("found", ""),
    "watch": ("watch", ""),
    "stop": ("stop", "bold"),
    "cursor": ("text", "reverse"),
    "edit": ("text", "underline"),
    "curve": ("found", ""),
    "limit": ("watch", ""),
    "picked": ("text", "bold"),
}
"""Styles of pieces of text by name: the colour of the theme, and what meaning rests on beside it."""


@cache
def styles_of(theme: str) -> dict[str, Style]:
    """Return the style of each kind of piece in a theme; in one not of ours that of no colours.

    They are no part of the style sheet, which would be matched anew for each kind in each pane.
    """
    colours = THEMES.get(theme, THEMES["plain"]).variables
    faint = colours["desk-faint"] == "dim"
    return {
        name: Style(
            color=Color.parse(colours[f"desk-{colour}"]).rich_color,
            bold="bold" in how or None,
            dim=(how == "faint" and faint) or None,
            reverse=how == "reverse" or None,
            underline=how == "underline" or None,
        )
        for name, (colour, how) in PIECES.items()
    }
