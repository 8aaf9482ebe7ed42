"""Kinds of coils: what each is made from, declared once, in a registry."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, ClassVar

from ..engine.cable_list import CABLES, Terminals
from ..engine.coil_limits import MOST_TURNS
from ..engine.metals import MATERIALS
from .fields import SOLVE, Value, choice, quantity
from .former_kinds import FORMER_MATERIALS, UNKNOWN_FORMER


def _former(default: float) -> Any:
    return quantity(
        "length",
        "former",
        "Outside diameter of the former the winding lies on.",
        default=default,
        low=0.003,
        high=0.5,
    )


def _former_material() -> Any:
    return choice(
        FORMER_MATERIALS,
        "former material",
        "What the former is made of: when it softens and how it expands. Common practice, no source.",
        default=UNKNOWN_FORMER,
    )


def _turns(help: str, most: float = MOST_TURNS) -> Any:
    return quantity("count", "turns", help, default=SOLVE, solvable=True, low=1.0, high=float(most))


def _q_share(help: str) -> Any:
    return quantity("ratio", "share of ideal Q", help, default=0.7, low=0.05, high=1.0)


def _wire(default: float) -> Any:
    return quantity(
        "length",
        "coil wire",
        "Diameter of the coil's wire without insulation; a gauge such as AWG 14 will do.",
        default=default,
        low=5e-5,
        high=0.01,
        example="AWG 14",
    )


def _material() -> Any:
    return choice(MATERIALS, "coil metal", "Metal of the coil's wire.", default="copper")


def _own(label: str, help: str, dimension: str, **limits: Any) -> Any:
    """Declare a number that takes the place of a listed one."""
    return quantity(dimension, label, help, default=None, optional=True, **limits)


@dataclass(frozen=True, kw_only=True)
class GivenCoil:
    """A coil known by its inductance and Q."""

    kind: ClassVar[str] = "given"
    inductance: Value = quantity(
        "inductance",
        "inductance",
        "Inductance of the coil at the trap's resonance.",
        default=SOLVE,
        solvable=True,
        low=1e-8,
        high=1e-3,
        example="8.2 uH",
    )
    q: float = quantity(
        "ratio",
        "coil Q",
        "Q of the coil at the trap's resonance; its resistance goes with the square root of frequency.",
        default=200.0,
        low=1.0,
        high=5000.0,
    )


@dataclass(frozen=True, kw_only=True)
class Solenoid:
    """A single-layer coil of round wire on a round former.

    Pitch or winding length is given, or neither: then it is wound close, insulation on insulation.
    """

    kind: ClassVar[str] = "solenoid"
    former: float = _former(0.05)
    wire: float = _wire(0.0016)
    pitch: float | None = quantity(
        "length",
        "pitch",
        "From one turn to the next, wire centre to wire centre. Without it and without a winding length it"
        " is wound close.",
        default=None,
        optional=True,
        low=5e-5,
        high=0.1,
        example="3 mm",
    )
    length: float | None = quantity(
        "length",
        "winding length",
        "Length of the winding, turns times pitch, instead of the pitch.",
        default=None,
        optional=True,
        low=1e-3,
        high=2.0,
        example="50 mm",
    )
    insulation: float = quantity(
        "length",
        "insulation",
        "Thickness of enamel or sleeve on the coil's wire: it lies on the former and between close turns.",
        default=5e-5,
        low=0.0,
        high=0.01,
        example="0.05 mm",
    )
    turns: Value = _turns("Turns of the coil. Solved: those that bring the trap to its resonance.")
    lead: float = quantity(
        "length",
        "lead",
        "Straight wire from each end of the winding to the capacitor. It adds to the inductance.",
        default=0.0,
        low=0.0,
        high=0.5,
    )
    material: str = _material()
    former_material: str = _former_material()
    q_share: float = _q_share(
        "What a built coil reaches of the Q of smooth bare wire in free air. An estimate; measure it."
    )


@dataclass(frozen=True, kw_only=True)
class CableCoil:
    """Coaxial cable wound on a former, inner conductor at one end joined to the shield at the other.

    The cable is coil and capacitor in one. Listed numbers of the cable give way to those given here.
    """

    kind: ClassVar[str] = "cable"
    cable: str = choice(CABLES, "cable", "Type of cable; lists differ, measure yours.", default="RG-58/U")
    former: float = _former(0.05)
    pitch: float | None = quantity(
        "length",
        "pitch",
        "From one turn to the next, cable centre to cable centre; wound close unless set.",
        default=None,
        optional=True,
        low=5e-4,
        high=0.2,
        example="5 mm",
    )
    turns: Value = _turns("Turns of cable. Solved: those that bring the trap to its resonance.")
    terminals: Terminals = choice(
        Terminals,
        "terminals",
        "shield: the wire goes on across the shield alone; series: across shield and inner conductor one"
        " after the other, four times the impedance.",
        default=Terminals.SERIES,
    )
    tail: float = quantity(
        "length",
        "tail",
        "Cable from each end of the winding to the joint; it counts to the capacitance.",
        default=0.03,
        low=0.0,
        high=0.5,
        example="3 cm",
    )
    impedance: float | None = _own(
        "cable impedance", "Characteristic impedance, instead of the listed one.", "resistance",
        low=10.0, high=300.0, example="50 ohm",
    )  # fmt: skip
    velocity_factor: float | None = _own(
        "velocity factor", "Speed on the cable over that of light, instead of the listed one.", "ratio",
        low=0.3, high=1.0, example="0.66",
    )  # fmt: skip
    outside: float | None = _own(
        "cable diameter", "Diameter over the jacket, instead of the listed one.", "length",
        low=5e-4, high=0.05, example="5 mm",
    )  # fmt: skip
    shield: float | None = _own(
        "shield diameter", "Diameter over the braid, instead of the listed one.", "length",
        low=3e-4, high=0.05, example="3.6 mm",
    )  # fmt: skip
    loss: float | None = _own(
        "cable loss", "Matched loss at `loss_at`, instead of the listed ones.", "loss_per_length",
        low=0.0, high=10.0, example="4.6 dB/100 m",
    )  # fmt: skip
    loss_at: float = quantity(
        "frequency",
        "loss given at",
        "Frequency of the loss that is given; it goes with the root of frequency.",
        default=10e6,
        low=1e6,
        high=3e9,
    )
    voltage: float | None = _own(
        "cable rating", "Highest peak voltage from inner conductor to shield.", "voltage",
        low=1.0, high=1e5, example="1.9 kV",
    )  # fmt: skip
    former_material: str = _former_material()
    q_share: float = _q_share(
        "What a built cable trap reaches of the Q of smooth copper: weave and tinning cost. An estimate;"
        " measure it."
    )


@dataclass(frozen=True, kw_only=True)
class Toroid:
    """A coil on a ring core; every number of the core is its maker's or measured."""

    kind: ClassVar[str] = "toroid"
    inductance_index: float = quantity(
        "inductance",
        "inductance index",
        "Inductance of one turn, AL: 1 nH is 10 uH for 100 turns.",
        default=4.9e-9,
        low=1e-11,
        high=1e-4,
        example="4.9 nH",
    )
    outer: float = quantity(
        "length", "core outside", "Outer diameter of the core.", default=0.0508, low=0.002, high=0.3
    )
    inner: float = quantity(
        "length", "core inside", "Inner diameter of the core.", default=0.0318, low=0.001, high=0.3
    )
    height: float = quantity(
        "length", "core height", "Height of the core.", default=0.014, low=0.001, high=0.2
    )
    wire: float = _wire(0.001)
    insulation: float = quantity(
        "length",
        "insulation",
        "Thickness of enamel or sleeve on the coil's wire.",
        default=5e-5,
        low=0.0,
        high=0.005,
        example="0.05 mm",
    )
    turns: Value = _turns("Turns of the coil. Solved: those that bring the trap to its resonance.", 200.0)
    tolerance: float = quantity(
        "ratio",
        "core tolerance",
        "How far the inductance index may be off. 5 %: common practice, no source.",
        default=0.05,
        low=0.0,
        high=0.5,
        example="5 %",
    )
    q: float = quantity(
        "ratio",
        "coil Q",
        "Q of the coil at the trap's resonance: measured, or the maker's. An estimate unless measured.",
        default=120.0,
        low=1.0,
        high=1000.0,
    )
    drift: float = quantity(
        "temperature_coefficient",
        "core drift",
        "Change of the inductance with temperature: the maker's.",
        default=100e-6,
        low=-5e-3,
        high=5e-3,
        example="100 ppm/K",
    )
    self_capacitance: float = quantity(
        "capacitance",
        "self-capacitance",
        "What the winding itself adds across its ends; 1 to 3 pF is common practice, no source.",
        default=1.5e-12,
        low=0.0,
        high=1e-10,
        example="1.5 pF",
    )
    flux: float | None = quantity(
        "flux_density",
        "flux limit",
        "Highest peak flux density at this frequency: the maker's.",
        default=None,
        optional=True,
        low=1e-5,
        high=2.0,
        example="5 mT",
    )
    heat: float | None = quantity(
        "power",
        "heat limit",
        "Most heat the core gives off without harm: the maker's.",
        default=None,
        optional=True,
        low=0.01,
        high=1e3,
        example="2 W",
    )


PlainCoil = GivenCoil | Solenoid | Toroid
"""A coil that needs a capacitor beside it."""
AnyCoil = PlainCoil | CableCoil
COILS: dict[str, type] = {c.kind: c for c in (GivenCoil, Solenoid, CableCoil, Toroid)}
