"""New designs: from a preset, or for bands that were only named."""

from __future__ import annotations

import math
import re
from dataclasses import replace

from ...design.capacitor_kinds import GivenCapacitor
from ...design.design import Antenna, Band, Bands, Design, Lengths
from ...design.fields import SOLVE
from ...design.parts import Trap
from ...design.rules import check
from ...errors import BadInput, Fault
from ...store import store
from ...store.store import Document
from ...units.prints import preferred
from .config import Config

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

REACTANCE = 250.0
"""Reactance of the capacitor a new trap begins with. Common practice, no source. [ohm]"""
_BANDS = re.compile(r"\s*(\d+)\s*m?(?:\s*[ ,/+-]\s*(\d+)\s*m?)?\s*", re.IGNORECASE)
USUAL_REGION = 1


def begun(name: str, config: Config) -> Document:
    """Return a new design for bands such as "40 20", else from a preset; BadInput or FileFault for neither.

    Band edges are those of the region that was chosen.
    """
    if found := _BANDS.fullmatch(name):
        names = [f"{int(number)} m" for number in found.groups() if number]
        return _for_bands(names, config.region or USUAL_REGION)
    design, text = store.preset(name)
    design = filled(design, config)
    return Document(design=design, text=store.to_text(design, text), name=name.removesuffix(".toml"))


def _for_bands(names: list[str], region: int) -> Document:
    unknown = [name for name in names if name not in EDGES]
    if unknown or len(set(names)) < len(names):
        known = ", ".join(name.removesuffix(" m") for name in EDGES)
        limit = f"known are {known}"
        raise BadInput(Fault("bands", "not_one_or_two_bands", " ".join(names), limit, "for example 40 20"))
    bands = sorted((_band(name, region) for name in names), key=lambda band: band.low)
    short = "/".join(name.removesuffix(" m") for name in (band.name for band in bands))
    design = Design(
        title=f"{short} m, new",
        bands=Bands(lower=bands[0], upper=bands[1] if len(bands) > 1 else None),
        antenna=Antenna(lengths=Lengths(end=SOLVE), trap=_trap(bands[1])) if len(bands) > 1 else Antenna(),
    )
    return Document(design=design, text=store.to_text(design), name=short.replace("/", "-"))


def _band(name: str, region: int) -> Band:
    low, high = (float(round(edge * MEGA)) for edge in EDGES[name][region])
    return Band(name=name, low=low, high=high)


def _trap(upper: Band) -> Trap:
    """Return a trap at the lower edge of a band, its capacitor a value that is easy to find."""
    farads = 1.0 / (math.tau * upper.low * REACTANCE)
    capacitor = GivenCapacitor(capacitance=preferred(farads, "E12"))
    return replace(Trap(), resonance=upper.low, capacitor=capacitor)


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
