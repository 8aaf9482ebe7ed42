"""The colours of the desk: dark, daylight, the terminal's own sixteen, and none at all."""

from __future__ import annotations

from textual.theme import Theme

NAMES = ("ground", "text", "quiet", "found", "watch", "stop", "pick")


_DEFAULT = "ansi_default"
# Textual's own style sheet asks these two of a theme that keeps to the terminal's colours.
_BEHIND = {"ansi-background": _DEFAULT, "ansi-foreground": _DEFAULT}


def _theme(name: str, colours: str, *, dark: bool = True, ansi: bool = False) -> Theme:
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
        variables=_BEHIND | {f"desk-{key}": value for key, value in values.items()},
    )


THEMES = {
    theme.name: theme
    for theme in (
        _theme("dark", "#101418 #d8dcd6 #8a949c #8fd0c0 #e0b860 #ff8a70 #8fd0c0"),
        _theme("daylight", "#ffffff #000000 #4a4a4a #00506a #7a4a00 #a00000 #00506a", dark=False),
        _theme(
            "sixteen",
            f"{_DEFAULT} {_DEFAULT} {_DEFAULT} ansi_cyan ansi_yellow ansi_bright_red ansi_cyan",
            ansi=True,
        ),
        _theme("plain", " ".join([_DEFAULT] * len(NAMES)), ansi=True),
    )
}
"""Themes by name, in the order in which a key goes through them."""
