"""The computed impedance at the feed point as a Touchstone file, for other plots and programs."""

from __future__ import annotations

from typing import Any

import numpy as np

from .. import __version__
from ..errors import visible
from ..services.antenna.figures import Figures
from ..store.touchstone import touchstone
from .json_out import FORMAT
from .layout import WIDTH, folded


def curve(figures: Figures, roles: tuple[str, ...]) -> tuple[np.ndarray, np.ndarray]:
    """Return frequencies and impedances over the bands named, rising, a little past their edges."""
    frequency, impedance = np.zeros(0), np.zeros(0, complex)
    for band in sorted((figures.bands[role] for role in roles), key=lambda band: band.aim):
        above = band.curve.frequency > (frequency[-1] if frequency.size else 0.0)
        frequency = np.append(frequency, band.curve.frequency[above])
        impedance = np.append(impedance, band.curve.impedance[above])
    return frequency, impedance


def text(figures: Figures, roles: tuple[str, ...]) -> str:
    """Return the file."""
    frequency, impedance = curve(figures, roles)
    names = " and ".join(figures.bands[role].name for role in roles)
    remarks = (
        *folded("", f"{visible(figures.design.title, 200)}: impedance at the feed point, {names}", WIDTH - 2),
        f"computed by trapdesk {__version__}, an estimate, not measured",
    )
    return touchstone(frequency, impedance, figures.design.station.reference, remarks)


def document(figures: Figures, roles: tuple[str, ...]) -> dict[str, Any]:
    """Return the same as JSON: SI, the unit in the key."""
    frequency, impedance = curve(figures, roles)
    return {
        "format": FORMAT,
        "kind": "feed impedance",
        "title": figures.design.title,
        "reference_ohm": figures.design.station.reference,
        "f_hz": [float(f) for f in frequency],
        "z_ohm": [complex(z) for z in impedance],
    }
