"""What there is to build from: formers, wires, cables, cores and capacitors, and how many of each."""

from __future__ import annotations

from dataclasses import dataclass, fields
from enum import StrEnum
from typing import ClassVar

from ..engine.cable_list import CABLES
from ..engine.metals import MATERIALS
from .fields import choice, quantity, text

CLOSEST = 1.05
"""Least pitch over wire diameter for which windings are computed."""
BARE_PITCH = 1.2
"""Least pitch over diameter of bare wire, whose turns must not touch."""


class TurnStep(StrEnum):
    """What turns a former lets its wire lie in: where the leads can leave it."""

    HALF = "half"
    WHOLE = "whole"


class Make(StrEnum):
    """How a cable is made."""

    COAXIAL = "coaxial"
    PARALLEL = "parallel"


def _count(label: str, help: str) -> float:
    return quantity("count", label, help, default=1.0, low=0.0, high=1e5)


@dataclass(frozen=True, kw_only=True)
class Former:
    """A round tube or rod to wind on."""

    table: ClassVar[str] = "formers"
    name: str = text("former", "What it is called.")
    diameter: float = quantity(
        "length", "diameter", "Outside diameter.", low=0.003, high=0.5, example="40 mm"
    )
    length: float = quantity(
        "length", "length", "Length of one piece; pieces are cut from it.", low=0.01, high=20, example="30 cm"
    )
    count: float = _count("pieces", "How many pieces of that length there are.")
    turn_step: TurnStep = choice(
        TurnStep,
        "turn step",
        "half: leads may leave on opposite sides. whole: both leave on the same side, as where holes are"
        " drilled.",
        default=TurnStep.HALF,
    )


@dataclass(frozen=True, kw_only=True)
class Wire:
    """Wire to wind a coil of, on a reel."""

    table: ClassVar[str] = "wires"
    name: str = text("wire", "What it is called.")
    diameter: float = quantity(
        "length",
        "diameter",
        "Diameter of the bare wire; a gauge such as AWG 14 will do.",
        low=5e-5,
        high=0.01,
        alias="gauge",
        example="AWG 14",
    )
    coating: float = quantity(
        "length",
        "coating",
        "Thickness of enamel or insulation, 0 for bare wire, whose turns must not touch.",
        default=0.0,
        low=0.0,
        high=0.005,
        example="0.04 mm",
    )
    material: str = choice(MATERIALS, "material", "Metal of the wire.", default="copper")
    length: float = quantity(
        "length", "length", "How much of it there is.", low=0.0, high=1e4, example="20 m"
    )

    @property
    def closest(self) -> float:
        """Least pitch to wind it at, in m: coats touching, or bare wire a fifth of itself apart."""
        if not self.coating:
            return BARE_PITCH * self.diameter
        return max(self.diameter + 2 * self.coating, CLOSEST * self.diameter)


def _constant(dimension: str, label: str, help: str, **limits: object) -> float | None:
    help = f"{help} As listed for its type unless set."
    return quantity(dimension, label, help, default=None, optional=True, **limits)


CONSTANTS = ("impedance", "velocity_factor", "outside", "shield", "loss", "loss_at")
"""What must be known of a cable: given, or listed for its type."""


@dataclass(frozen=True, kw_only=True)
class Cable:
    """Cable to wind a trap of, or for a stub across a coil; its constants are given, or those of its type.

    Nothing is wound of parallel line.
    """

    table: ClassVar[str] = "cables"
    name: str = text("cable", "What it is called.")
    type: str | None = choice(
        CABLES, "type", "Type of cable; lists differ, measure yours.", default=None, optional=True
    )
    make: Make = choice(Make, "make", "coaxial, or parallel: good for stubs only.", default=Make.COAXIAL)
    impedance: float | None = _constant(
        "resistance", "impedance", "Characteristic impedance.", low=10, high=1000, example="50 ohm"
    )
    velocity_factor: float | None = _constant(
        "ratio", "velocity factor", "Speed on it over that of light.", low=0.3, high=1.0, example="0.66"
    )
    outside: float | None = _constant(
        "length", "outside diameter", "Over the jacket.", low=5e-4, high=0.05, example="5 mm"
    )
    shield: float | None = _constant(
        "length", "shield diameter", "Over the braid.", low=3e-4, high=0.05, example="3.6 mm"
    )
    loss: float | None = _constant(
        "loss_per_length", "loss", "Matched loss at `loss_at`.", low=0.0, high=10, example="0.073 dB/m"
    )
    loss_at: float | None = _constant(
        "frequency", "loss given at", "Frequency of the loss.", low=1e6, high=3e9, example="30 MHz"
    )
    voltage: float | None = quantity(
        "voltage",
        "rating",
        "Highest peak voltage between inner conductor and shield.",
        default=None,
        optional=True,
        low=1.0,
        high=1e5,
        example="1.9 kV",
    )
    length: float = quantity(
        "length", "length", "How much of it there is.", low=0.0, high=1e4, example="10 m"
    )

    @property
    def is_wound(self) -> bool:
        """Whether a trap can be wound of it: not of parallel line, said or listed without a shield."""
        return self.make == Make.COAXIAL and not (self.type and CABLES[self.type].shield is None)

    @property
    def missing(self) -> tuple[str, ...]:
        """The constants that neither it nor the list of its type says."""
        listed = CABLES[self.type] if self.type else None
        known = {"outside": listed and listed.outside, "shield": listed and listed.shield}
        wanted = [n for n in CONSTANTS if self.is_wound or n not in known]
        names = [n for n in wanted if getattr(self, n) is None and not known.get(n, listed)]
        half = self.loss is not None and self.loss_at is None and "loss_at" not in names
        return tuple(names + ["loss_at"] * half)

    @property
    def over_jacket(self) -> float:
        """Outside diameter of what is wound, its own or the listed one, in m."""
        listed = CABLES[self.type].outside if self.type else None
        return self.outside or listed or 0.0


@dataclass(frozen=True, kw_only=True)
class Core:
    """A ring core; every number of it is its maker's or measured."""

    table: ClassVar[str] = "cores"
    name: str = text("core", "What it is called.")
    inductance_index: float = quantity(
        "inductance",
        "inductance index",
        "Inductance of one turn, AL: 1 nH is 10 uH for 100 turns.",
        low=1e-11,
        high=1e-4,
        example="4.9 nH",
    )
    outer: float = quantity(
        "length", "outer diameter", "Outer diameter.", low=0.002, high=0.3, example="33 mm"
    )
    inner: float = quantity(
        "length", "inner diameter", "Inner diameter.", low=0.001, high=0.3, example="19.5 mm"
    )
    height: float = quantity("length", "height", "Height.", low=0.001, high=0.2, example="11 mm")
    tolerance: float = quantity(
        "ratio",
        "tolerance",
        "How far the inductance index may be off. 5 %: common practice, no source.",
        default=0.05,
        low=0.0,
        high=0.5,
    )
    q: float = quantity(
        "ratio",
        "Q",
        "Q a coil on it reaches near the upper band: measured, or its maker's. An estimate unless measured.",
        default=120.0,
        low=1.0,
        high=2000.0,
    )
    count: float = _count("pieces", "How many there are.")


@dataclass(frozen=True, kw_only=True)
class Capacitor:
    """Capacitors of one kind."""

    table: ClassVar[str] = "capacitors"
    name: str = text("capacitor", "What it is called.", default="")
    print: str = text(
        "print", "What is printed on it, read for what is not said by itself: 470J 3kV.", default=""
    )
    capacitance: float = quantity(
        "capacitance",
        "capacitance",
        "Capacitance, when no print says it.",
        low=1e-13,
        high=1e-7,
        example="47 pF",
    )
    tolerance: float = quantity(
        "ratio", "tolerance", "How far it may be off.", default=0.05, low=0.0, high=0.9, example="5 %"
    )
    voltage: float | None = quantity(
        "voltage",
        "rating",
        "Highest peak voltage it stands at radio frequency.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="3 kV",
    )
    q: float = quantity(
        "ratio",
        "Q",
        "Q near the upper band. An estimate unless measured.",
        default=1000.0,
        low=1.0,
        high=1e6,
    )
    count: float = _count("pieces", "How many there are.")


@dataclass(frozen=True, kw_only=True)
class Box:
    """What there is; each kind in the order it was written."""

    title: str = "box"
    formers: tuple[Former, ...] = ()
    wires: tuple[Wire, ...] = ()
    cables: tuple[Cable, ...] = ()
    cores: tuple[Core, ...] = ()
    capacitors: tuple[Capacitor, ...] = ()

    @property
    def is_empty(self) -> bool:
        """Whether there is nothing in it."""
        return not any(getattr(self, f.name) for f in fields(self) if f.name != "title")


TABLES: dict[str, type] = {kind.table: kind for kind in (Former, Wire, Cable, Core, Capacitor)}
"""What stands in a box, by the name of its list in a file."""
