"""Kinds of capacitors: what each is made from, declared once, in a registry."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, ClassVar

from ..engine.cable_list import CABLES
from ..engine.dielectrics import DIELECTRICS
from .fields import SOLVE, Value, choice, parts, printed, quantity


@dataclass(frozen=True, kw_only=True)
class Printed:
    """What a print on a part says, None where it says nothing.

    `tolerance` is the relative error down and up, `drift` the change of capacitance with temperature [1/K]
    and `drift_doubt` how far that may be off; `varies` the relative change over the whole range of a
    class 2 ceramic, down and up.
    """

    text: str
    capacitance: float | None = None
    tolerance: tuple[float, float] | None = None
    voltage: float | None = None
    drift: float | None = None
    drift_doubt: float | None = None
    varies: tuple[float, float] | None = None

    def __str__(self) -> str:
        """Return the print as it stands."""
        return self.text


def _limit(dimension: str, label: str, help: str, **more: Any) -> Any:
    return quantity(dimension, label, help, default=None, optional=True, **more)


def _current() -> Any:
    return _limit(
        "current", "current limit", "Most current it stands, rms at radio frequency.",
        low=1e-3, high=1e3, example="2 A",
    )  # fmt: skip


def _heat() -> Any:
    return _limit(
        "power", "heat limit", "Most heat it gives off without harm.", low=1e-3, high=1e3, example="0.5 W"
    )


def _drift() -> Any:
    return _limit(
        "temperature_coefficient", "drift", "Change of the capacitance with temperature.",
        low=-6e-3, high=6e-3, example="-150 ppm/K",
    )  # fmt: skip


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
    current: float | None = _current()
    heat: float | None = _heat()
    drift: float | None = _drift()


@dataclass(frozen=True, kw_only=True)
class SingleCapacitor:
    """A capacitor known by what is printed on it, or several equal ones side by side."""

    kind: ClassVar[str] = "single"
    print: Printed | None = printed(
        "print",
        "What is printed on it: a value, and as far as there is tolerance letter, voltage, temperature"
        " characteristic.",
        example="470J 3kV",
    )
    count: float = quantity(
        "ratio", "pieces", "How many equal ones side by side.", default=1.0, low=1.0, high=50.0
    )
    dielectric: str = choice(
        DIELECTRICS,
        "dielectric",
        "What it is made of, for its loss where none is given.",
        default="ceramic",
    )
    loss_tangent: float | None = _limit(
        "ratio", "tan delta", "Loss tangent, 1/Q, of one; by its dielectric unless set.",
        low=0.0, high=1.0, example="0.0005",
    )  # fmt: skip
    voltage: float | None = _limit(
        "voltage", "capacitor rating", "Highest peak voltage it stands, instead of the printed one.",
        low=1.0, high=1e6, example="3 kV",
    )  # fmt: skip
    current: float | None = _current()
    heat: float | None = _heat()
    drift: float | None = _drift()


@dataclass(frozen=True, kw_only=True)
class StubCapacitor:
    """A piece of line, open at its far end. Listed numbers of the line give way to those given here."""

    kind: ClassVar[str] = "stub"
    cable: str = choice(
        CABLES, "cable", "Type of cable or line; lists differ, measure yours.", default="RG-58/U"
    )
    length: Value = quantity(
        "length",
        "stub length",
        "Length of the piece. Solved: what brings the trap to its resonance.",
        default=SOLVE,
        solvable=True,
        low=0.005,
        high=10.0,
        example="60 cm",
    )
    impedance: float | None = _limit(
        "resistance", "cable impedance", "Characteristic impedance, instead of the listed one.",
        low=10.0, high=1000.0, example="50 ohm",
    )  # fmt: skip
    velocity_factor: float | None = _limit(
        "ratio", "velocity factor", "Speed on the line over that of light, instead of the listed one.",
        low=0.3, high=1.0, example="0.66",
    )  # fmt: skip
    loss: float | None = _limit(
        "loss_per_length", "cable loss", "Matched loss at `loss_at`, instead of the listed ones.",
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
    voltage: float | None = _limit(
        "voltage", "cable rating", "Highest peak voltage from conductor to conductor.",
        low=1.0, high=1e5, example="1.9 kV",
    )  # fmt: skip
    drift: float | None = _drift()


CAPACITORS: dict[str, type] = {}
"""Kinds by name; combinations hold any of them, combinations too."""


@dataclass(frozen=True, kw_only=True)
class SeriesCapacitors:
    """Capacitors one after the other: they share the voltage."""

    kind: ClassVar[str] = "series"
    members: tuple[Any, ...] = parts("members", "The capacitors, one after the other.", kinds=CAPACITORS)


@dataclass(frozen=True, kw_only=True)
class ParallelCapacitors:
    """Capacitors side by side: they share the current."""

    kind: ClassVar[str] = "parallel"
    members: tuple[Any, ...] = parts("members", "The capacitors, side by side.", kinds=CAPACITORS)


AnyCapacitor = GivenCapacitor | SingleCapacitor | StubCapacitor | SeriesCapacitors | ParallelCapacitors
CAPACITORS |= {
    c.kind: c for c in (GivenCapacitor, SingleCapacitor, StubCapacitor, SeriesCapacitors, ParallelCapacitors)
}
MOST_DEEP = 6
"""Combinations within combinations that are read. [1]"""
