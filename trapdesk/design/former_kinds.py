"""What coils are wound on, as far as heat and cold matter."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class FormerMaterial:
    """A material to wind on: at which temperature it softens [degC], and its linear expansion [1/K].

    None softens at no temperature a trap reaches. All values are common practice, no source: grades differ.
    """

    softens: float | None
    expansion: float


FORMER_MATERIALS: dict[str, FormerMaterial] = {
    "unknown plastic": FormerMaterial(softens=60.0, expansion=80e-6),
    "PVC": FormerMaterial(softens=65.0, expansion=70e-6),
    "polyethylene": FormerMaterial(softens=75.0, expansion=150e-6),
    "polypropylene": FormerMaterial(softens=90.0, expansion=110e-6),
    "ABS": FormerMaterial(softens=85.0, expansion=90e-6),
    "PLA": FormerMaterial(softens=55.0, expansion=70e-6),
    "PETG": FormerMaterial(softens=70.0, expansion=65e-6),
    "acrylic": FormerMaterial(softens=85.0, expansion=70e-6),
    "polycarbonate": FormerMaterial(softens=125.0, expansion=68e-6),
    "PTFE": FormerMaterial(softens=200.0, expansion=120e-6),
    "fibreglass": FormerMaterial(softens=110.0, expansion=15e-6),
    "ceramic": FormerMaterial(softens=None, expansion=6e-6),
    "air": FormerMaterial(softens=None, expansion=17e-6),
}
"""From memory, common practice, no source. `air`: self-supporting, it expands as copper does."""
UNKNOWN_FORMER = "unknown plastic"
