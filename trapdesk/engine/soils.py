"""What can lie under the wire, and classes of soil by name."""

from dataclasses import dataclass
from enum import StrEnum


class GroundKind(StrEnum):
    """What lies under the wire."""

    SPACE = "space"
    MIRROR = "mirror"
    SOIL = "soil"


@dataclass(frozen=True, kw_only=True)
class Soil:
    """A class of soil: conductivity [S/m] and relative permittivity [1]."""

    conductivity: float
    permittivity: float
    source: str
    seen: bool


SOILS: dict[str, Soil] = {
    name: Soil(conductivity=sigma, permittivity=eps, source="itu-r-p368", seen=True)
    for name, sigma, eps in (
        ("sea water", 5.0, 70.0),
        ("brackish water", 1.0, 80.0),
        ("fresh water", 3e-3, 80.0),
        ("very wet ground", 3e-2, 40.0),
        ("wet ground", 1e-2, 30.0),
        ("land", 3e-3, 22.0),
        ("medium dry ground", 1e-3, 15.0),
        ("dry ground", 3e-4, 7.0),
        ("very dry ground", 1e-4, 3.0),
    )
}
UNKNOWN_SOIL = Soil(conductivity=5e-3, permittivity=13.0, source="common practice, no source", seen=False)
"""Stands for a soil nobody has looked at; its doubt reaches from `dry ground` to `wet ground`."""
UNKNOWN_SOIL_FROM = ("dry ground", "wet ground")
