"""What a trap is made of: kinds of coils and capacitors, each declared once, in registries."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from .engine.conductors import MATERIALS
from .fields import SOLVE, Value, choice, part, quantity


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
    """A single-layer coil of round wire on a round former."""

    kind: ClassVar[str] = "solenoid"
    former: float = quantity(
        "length",
        "former",
        "Outside diameter of the former the wire lies on.",
        default=0.05,
        low=0.003,
        high=0.5,
    )
    wire: float = quantity(
        "length",
        "coil wire",
        "Diameter of the coil's wire without insulation; a gauge such as AWG 14 will do.",
        default=0.0016,
        low=5e-5,
        high=0.01,
        example="AWG 14",
    )
    pitch: float = quantity(
        "length",
        "pitch",
        "From one turn to the next, wire centre to wire centre.",
        default=0.003,
        low=5e-5,
        high=0.1,
    )
    turns: Value = quantity(
        "count",
        "turns",
        "Turns of the coil. Solved: those that bring the trap to its resonance.",
        default=SOLVE,
        solvable=True,
        low=1.0,
        high=200.0,
    )
    material: str = choice(MATERIALS, "coil metal", "Metal of the coil's wire.", default="copper")
    q_share: float = quantity(
        "ratio",
        "share of ideal Q",
        "What a built coil reaches of the Q of smooth bare wire in free air. An estimate; measure it.",
        default=0.7,
        low=0.05,
        high=1.0,
    )


COILS: dict[str, type] = {c.kind: c for c in (GivenCoil, Solenoid)}


@dataclass(frozen=True, kw_only=True)
class GivenCapacitor:
    """A capacitor known by its capacitance and Q."""

    kind: ClassVar[str] = "given"
    capacitance: Value = quantity(
        "capacitance",
        "capacitance",
        "Capacitance of the capacitor; what the coil itself adds is counted apart.",
        default=SOLVE,
        solvable=True,
        low=1e-13,
        high=1e-7,
        example="60 pF",
    )
    q: float | None = quantity(
        "ratio",
        "capacitor Q",
        "Q of the capacitor at the trap's resonance; none given counts as lossless.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
    )
    voltage: float | None = quantity(
        "voltage",
        "capacitor rating",
        "Highest peak voltage the capacitor stands at radio frequency.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="3 kV",
    )


CAPACITORS: dict[str, type] = {c.kind: c for c in (GivenCapacitor,)}


@dataclass(frozen=True, kw_only=True)
class Trap:
    """A parallel tuned circuit in each side. Of resonance, coil and capacitor exactly one is solved."""

    resonance: Value = quantity(
        "frequency",
        "trap resonance",
        "Where coil and capacitor resonate by themselves. In or just below the upper band serves best.",
        default=SOLVE,
        solvable=True,
        low=1e6,
        high=100e6,
    )
    body: float = quantity(
        "length",
        "trap body",
        "Length of the trap along the wire, end to end; wires are measured to its centre.",
        default=0.0,
        low=0.0,
        high=0.5,
    )
    coil: GivenCoil | Solenoid = part("coil", "How the coil is made.", default=GivenCoil(), kinds=COILS)
    capacitor: GivenCapacitor = part(
        "capacitor", "How the capacitor is made.", default=GivenCapacitor(), kinds=CAPACITORS
    )
