"""Lasting choices of a person, from a file: they fill new designs and the display, never a computation."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any

from ...errors import quoted, visible

THEMES = ("own", "dark", "daylight", "red-light", "plain")
CHOICES: dict[str, tuple[Any, ...]] = {
    "units": ("metric", "imperial"),
    "theme": THEMES,
    "region": (1, 2, 3),
}
"""What may be chosen, and from what."""


@dataclass(frozen=True, kw_only=True)
class Config:
    """Choices that last: units of lengths shown, theme, ITU region of band edges; none where nobody chose."""

    units: str = "metric"
    theme: str = ""
    region: int | None = None


def place(environment: Mapping[str, str]) -> Path:
    """Return where the file of lasting choices is looked for."""
    given = environment.get("XDG_CONFIG_HOME", "")
    home = Path(environment.get("HOME") or "~").expanduser()
    return (Path(given) if os.path.isabs(given) else home / ".config") / "trapdesk" / "config.toml"


def load(file: Path) -> tuple[Config, str]:
    """Return the choices in a file, and in one line what is wrong in it: nothing, or what was passed over."""
    try:
        text = file.read_text("utf-8")
    except FileNotFoundError:
        return Config(), ""
    except (OSError, ValueError) as error:
        reason = (error.strerror if isinstance(error, OSError) else "") or "not UTF-8 text"
        return Config(), f"{visible(file.name)}: {visible(reason)}"
    # Most people never choose anything, and pay for neither.
    import difflib
    import tomllib

    try:
        table = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        return Config(), f"{visible(file.name)}: not valid TOML: {visible(error, 100)}"
    faults, chosen = [], {}
    for name, value in table.items():
        known = CHOICES.get(name)
        if known is None:
            near = difflib.get_close_matches(name, CHOICES, n=1)
            helps = f"did you mean {near[0]}?" if near else f"known are {', '.join(CHOICES)}"
            faults.append(f"{quoted(name, 30)} is not a known name; {helps}")
        elif type(value) is not type(known[0]) or value not in known:
            faults.append(f"{name}: {quoted(value, 30)} is not one of {', '.join(map(str, known))}")
        else:
            chosen[name] = value
    config = Config(**{f.name: chosen.get(f.name, f.default) for f in fields(Config)})
    return config, f"{visible(file.name)}: {'; '.join(faults)}" if faults else ""
