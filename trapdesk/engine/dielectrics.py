"""What capacitors are made of, by name, as far as it loses."""

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class Dielectric:
    """What a capacitor is made of, as far as its loss goes; constant over the high frequencies.

    Parameters
    ----------
    loss_tangent : float
        Series resistance over reactance, 1/Q. [-]
    source : str
        Key of the source.
    seen : bool
        Whether the value was read there, or recalled from memory.
    note : str
        What else is known about it.
    """

    loss_tangent: float
    source: str
    seen: bool
    note: str = ""


DIELECTRICS: dict[str, Dielectric] = {
    "ceramic": Dielectric(
        loss_tangent=1e-3,
        source="np0-sheet",
        seen=True,
        note="class 1 of 30 pF and more, the most a maker allows at 1 MHz; below 30 pF see ceramic_q",
    ),
    "ceramic, class 2": Dielectric(
        loss_tangent=0.025, source="from memory", seen=False, note="not meant for tuned circuits"
    ),
    "silver mica": Dielectric(loss_tangent=5e-4, source="from memory", seen=False),
    "polystyrene": Dielectric(
        loss_tangent=2e-4, source="dielectric-table", seen=True, note="the material; its foil loses more"
    ),
    "PTFE": Dielectric(loss_tangent=2e-4, source="dielectric-table", seen=True, note="the material"),
    "polyethylene": Dielectric(loss_tangent=3e-4, source="dielectric-table", seen=True, note="the material"),
    "PVC": Dielectric(
        loss_tangent=0.04,
        source="dielectric-table",
        seen=True,
        note="0.02 to 0.08 by compound: not for traps",
    ),
    "air": Dielectric(
        loss_tangent=1e-4, source="from memory", seen=False, note="its insulators lose a little"
    ),
    "vacuum": Dielectric(loss_tangent=5e-5, source="from memory", seen=False),
}
"""Loss by dielectric: an estimate for a part nobody has measured."""
