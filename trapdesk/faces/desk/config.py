"""Lasting choices of a person, from a file: they fill new designs and the display, never a computation."""

from __future__ import annotations

import difflib
import os
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import Any

from ...design.design import Band, Design
from ...design.rules import check
from ...errors import quoted, visible
from .themes import THEMES

MEGA = 1e6
EDGES: dict[str, dict[int, tuple[float, float]]] = {
    "160 m": {1: (1.81, 1.85), 2: (1.8, 2.0), 3: (1.8, 2.0)},
    "80 m": {1: (3.5, 3.8), 2: (3.5, 4.0), 3: (3.5, 3.9)},
    "40 m": {1: (7.0, 7.2), 2: (7.0, 7.3), 3: (7.0, 7.2)},
    "30 m": dict.fromkeys((1, 2, 3), (10.1, 10.15)),
    "20 m": dict.fromkeys((1, 2, 3), (14.0, 14.35)),
    "17 m": dict.fromkeys((1, 2, 3), (18.068, 18.168)),
    "15 m": dict.fromkeys((1, 2, 3), (21.0, 21.45)),
    "12 m": dict.fromkeys((1, 2, 3), (24.89, 24.99)),
    "10 m": dict.fromkeys((1, 2, 3), (28.0, 29.7)),
}
"""Edges of the amateur bands by ITU region, in MHz: Radio Regulations article 5, from memory; national rules
decide."""

CHOICES: dict[str, tuple[Any, ...]] = {
    "units": ("metric", "imperial"),
    "theme": tuple(THEMES),
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


def filled(design: Design, config: Config) -> Design:
    """Return a new design with the band edges of the region that was chosen, where its rules allow them."""
    for role, band in design.bands.items():
        edges = EDGES.get(band.name, {}).get(config.region or 0)
        if edges is not None:
            design = _with_edges(design, role, band, edges)
    return design


def _with_edges(design: Design, role: str, band: Band, edges: tuple[float, float]) -> Design:
    low, high = (round(edge * MEGA) for edge in edges)
    bands = replace(design.bands, **{role: replace(band, low=float(low), high=float(high))})
    changed = replace(design, bands=bands)
    return design if check(changed) else changed
