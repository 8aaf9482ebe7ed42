"""What a trap is made of: a coil, a capacitor unless the coil is one too, and what the weather does."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from enum import StrEnum
from typing import Any

from .capacitor_kinds import (
    CAPACITORS,
    GivenCapacitor,
    ParallelCapacitors,
    SeriesCapacitors,
    SingleCapacitor,
    StubCapacitor,
)
from .coil_kinds import COILS, CableCoil, GivenCoil, Solenoid, Toroid
from .fields import SOLVE, Value, choice, declared, part, quantity
from .measured_part import Measured


class Sealing(StrEnum):
    """How a trap is closed against the weather."""

    NONE = "none"
    TAPE = "tape"
    POTTED = "potted"


@dataclass(frozen=True, kw_only=True)
class Weather:
    """What closing, water and temperature do to a trap. All shifts are common practice, no source."""

    sealing: Sealing = choice(
        Sealing,
        "sealed with",
        "none; tape or shrink; potted: nothing can be moved afterwards.",
        default=Sealing.NONE,
    )
    sealing_shift: float = quantity(
        "ratio",
        "sealing lowers by",
        "How much closing it lowers the trap's resonance. 0.5 to 2 %: common practice, no source.",
        default=0.0125,
        low=0.0,
        high=0.2,
        example="1.25 %",
    )
    rain_shift: float = quantity(
        "ratio",
        "rain lowers by",
        "How much rain lowers the trap's resonance. 0.5 to 1 %: common practice, no source.",
        default=0.0075,
        low=0.0,
        high=0.2,
        example="0.75 %",
    )
    ice_shift: float = quantity(
        "ratio",
        "ice lowers by",
        "How much ice lowers the trap's resonance; more than rain: common practice, no source.",
        default=0.02,
        low=0.0,
        high=0.3,
        example="2 %",
    )
    built_at: float = quantity(
        "temperature",
        "built at",
        "Temperature at which it is brought to its resonance.",
        default=20.0,
        low=-40.0,
        high=60.0,
        example="20 degC",
    )
    in_sun: float = quantity(
        "temperature",
        "in the sun",
        "How warm the trap gets in the sun, nothing sent. Common practice, no source.",
        default=45.0,
        low=-40.0,
        high=100.0,
        example="45 degC",
    )
    in_cold: float = quantity(
        "temperature",
        "in the cold",
        "Coldest it is used at.",
        default=-10.0,
        low=-80.0,
        high=60.0,
        example="-10 degC",
    )

    @property
    def closing(self) -> float:
        """How much closing lowers the resonance, a part of it; nothing of a trap that stays open."""
        return 0.0 if self.sealing is Sealing.NONE else self.sealing_shift


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
    coil: GivenCoil | Solenoid | CableCoil | Toroid = part(
        "coil", "How the coil is made.", default=GivenCoil(), kinds=COILS
    )
    capacitor: (
        GivenCapacitor | SingleCapacitor | StubCapacitor | SeriesCapacitors | ParallelCapacitors | None
    ) = part(
        "capacitor",
        "How the capacitor is made. A coil of cable is one already and needs none.",
        default=GivenCapacitor(),
        kinds=CAPACITORS,
    )
    weather: Weather = part("weather", "What closing and weather do to it.", default=Weather())
    measured: Measured | None = part(
        "measured",
        "What was measured of the built trap; it replaces what is computed.",
        default=None,
        optional=True,
    )


def solvable(part_: Any, prefix: str) -> Iterator[tuple[str, Any]]:
    """Yield key and value of everything in a coil or capacitor that may be solved, members included."""
    for name, known in declared(part_).items():
        value = getattr(part_, name)
        if known.solvable:
            yield prefix + name, value
        elif known.dimension == "parts":
            for place, member in enumerate(value, start=1):
                yield from solvable(member, f"{prefix}{name}.{place}.")
