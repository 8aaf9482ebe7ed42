"""How far what was set may be off once it is built and hung, and what each of these numbers means.

Every size of 0 switches its cause off. A size that is not set is the usual one of the kind of part.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Any

from .fields import choice, quantity


class Meaning(StrEnum):
    """What a stated doubt says of the values behind it."""

    LIMITS = "limits"
    TWO_SIGMA = "2 sigma"
    THREE_SIGMA = "3 sigma"
    MEASURED = "measured"


CUT = 4.0
"""Normal values are drawn within this many sigma: what lies outside is one in 16 000. [1]"""
SIGMAS: dict[Meaning, float] = {Meaning.TWO_SIGMA: 2.0, Meaning.THREE_SIGMA: 3.0, Meaning.MEASURED: 1.0}
"""How many sigma a stated size stands for; limits have none: all values within them are alike."""


def farthest(meaning: Meaning) -> float:
    """Return the farthest value that is drawn, in stated sizes."""
    return CUT / SIGMAS[meaning] if meaning in SIGMAS else 1.0


def two_sigma(size: float, meaning: Meaning) -> float:
    """Return a stated size as two sigma; limits stand as they are."""
    return size * SIGMAS[Meaning.TWO_SIGMA] / SIGMAS[meaning] if meaning in SIGMAS else size


def _relative(label: str, help: str, *, default: float | None, example: str = "") -> Any:
    return quantity(
        "ratio",
        label,
        help,
        default=default,
        optional=default is None,
        low=0.0,
        high=1.0,
        example=example or (f"{100 * default:g} %" if default else "2 %"),
    )


def _meaning(of: str, default: Meaning) -> Any:
    return choice(
        Meaning,
        f"{of}: meaning",
        "limits: anything within, all alike; 2 sigma, 3 sigma: normal, the size being so many; measured:"
        " normal, the size being one sigma, each part by itself.",
        default=default,
    )


SITE = 0.007
"""How far trees, slopes and masts may move a frequency. [1], common practice, no source"""


@dataclass(frozen=True, kw_only=True)
class Doubts:
    """Everything that may turn out otherwise. Estimates and common practice, no source, unless said."""

    coil: float | None = _relative(
        "coil doubt",
        "Inductance of the coil against what was computed or given. Unset: 0.5 % wound by these formulas,"
        " that of the core on a ring, 1.5 % else.",
        default=None,
        example="1.5 %",
    )
    coil_meaning: Meaning = _meaning("coil", Meaning.TWO_SIGMA)
    turns: float = quantity(
        "count",
        "turns rounded by",
        "Most a winder is off the computed turns, anywhere within; a quarter where half turns are wound.",
        default=0.25,
        low=0.0,
        high=5.0,
    )
    pitch: float = _relative("pitch doubt", "Distance from turn to turn of a wound coil.", default=0.03)
    pitch_meaning: Meaning = _meaning("pitch", Meaning.TWO_SIGMA)
    former: float = _relative("former doubt", "Diameter of a wound coil.", default=0.005)
    former_meaning: Meaning = _meaning("former", Meaning.TWO_SIGMA)
    capacitor: float | None = _relative(
        "capacitor doubt",
        "Tolerance of the capacitor. Unset: what is printed on it, else 5 %.",
        default=None,
        example="5 %",
    )
    capacitor_meaning: Meaning = _meaning("capacitor", Meaning.LIMITS)
    q: float | None = _relative(
        "Q doubt",
        "Q of the built coil. Unset: what coils wound by hand reach, a third either way; 15 % given.",
        default=None,
        example="15 %",
    )
    q_meaning: Meaning = _meaning("Q", Meaning.LIMITS)
    self_capacitance: float = quantity(
        "ratio",
        "self-capacitance range",
        "How much of its range the self-capacitance of a wound coil may take: 1 is all of it, a factor of"
        " two either way.",
        default=1.0,
        low=0.0,
        high=1.0,
    )
    self_capacitance_meaning: Meaning = _meaning("self-capacitance", Meaning.LIMITS)
    alike: float = quantity(
        "ratio",
        "traps alike",
        "Share of a trap's variance that both traps have in common: one batch, one winder, one instrument.",
        default=0.5,
        low=0.0,
        high=1.0,
    )
    tuning: float = _relative(
        "trap reading doubt",
        "How well a trap is brought to its frequency on the bench.",
        default=0.002,
    )
    tuning_meaning: Meaning = _meaning("trap reading", Meaning.TWO_SIGMA)
    sealing_least: float | None = _relative(
        "sealing, least",
        "Closing a trap lowers it by at least this much. Unset: 0.4 times what the trap's weather says.",
        default=None,
        example="0.5 %",
    )
    sealing_most: float | None = _relative(
        "sealing, most",
        "Closing a trap lowers it by at most this much. Unset: 1.6 times what the trap's weather says.",
        default=None,
        example="2 %",
    )
    rain_least: float | None = _relative(
        "rain, least",
        "Rain lowers a trap by at least this much. Unset: two thirds of what the trap's weather says.",
        default=None,
        example="0.5 %",
    )
    rain_most: float | None = _relative(
        "rain, most",
        "Rain lowers a trap by at most this much. Unset: four thirds of what the trap's weather says.",
        default=None,
        example="1 %",
    )
    temperature: float = quantity(
        "ratio",
        "temperature range",
        "How much of the range from the cold to the sun counts; what it was built at is the middle.",
        default=1.0,
        low=0.0,
        high=1.0,
    )
    coil_drift: float | None = quantity(
        "temperature_coefficient",
        "coil drift",
        "Change of the inductance with temperature. Unset: that of the part, else 40 ppm/K.",
        default=None,
        optional=True,
        low=-2e-3,
        high=2e-3,
        example="40 ppm/K",
    )
    capacitor_drift: float | None = quantity(
        "temperature_coefficient",
        "capacitor drift",
        "Change of the capacitance with temperature. Unset: that of the part, else 30 ppm/K.",
        default=None,
        optional=True,
        low=-6e-3,
        high=6e-3,
        example="30 ppm/K",
    )
    marking: float = quantity(
        "length",
        "marking doubt",
        "Lengths of both sides alike: tape, pull, where the mark went.",
        default=0.01,
        low=0.0,
        high=1.0,
    )
    marking_meaning: Meaning = _meaning("marking", Meaning.TWO_SIGMA)
    fastening: float = quantity(
        "length",
        "fastening doubt",
        "Length of each wire by itself: knots, loops, the cut.",
        default=0.02,
        low=0.0,
        high=1.0,
    )
    fastening_meaning: Meaning = _meaning("fastening", Meaning.TWO_SIGMA)
    creep_most: float = _relative(
        "creep, most",
        "Wire gets longer by up to this much before it is adjusted; soft strands not pulled first reach 2 %.",
        default=0.003,
    )
    height: float = quantity(
        "length", "height doubt", "Height of the whole antenna.", default=0.5, low=0.0, high=20.0
    )
    height_meaning: Meaning = _meaning("height", Meaning.LIMITS)
    sag_most: float | None = quantity(
        "length",
        "sag, most",
        "Sag of a side by up to this much; counts as two thirds of it lower. Unset: 40 cm flat, 20 cm vee.",
        default=None,
        optional=True,
        low=0.0,
        high=10.0,
        example="40 cm",
    )
    soil: float = quantity(
        "ratio",
        "soil range",
        "How much of its range the soil may take. The range: dry ground to wet ground where it is unknown,"
        " else half to twice the conductivity and 0.8 to 1.25 times the permittivity, together.",
        default=1.0,
        low=0.0,
        high=1.0,
    )
    soil_meaning: Meaning = _meaning("soil", Meaning.LIMITS)
    coating: float = _relative(
        "coating doubt", "What the coating does to the wire; only where it is coated.", default=0.2
    )
    coating_meaning: Meaning = _meaning("coating", Meaning.TWO_SIGMA)
    site: float = _relative(
        "site doubt",
        "Trees, slopes and masts: what they may move the wire's frequency by.",
        default=SITE,
        example="0.7 %",
    )
    site_meaning: Meaning = _meaning("site", Meaning.TWO_SIGMA)
    aim: float = _relative(
        "aim reading doubt",
        "How well resonance is brought to the aim by folding or cutting, each band by itself.",
        default=0.001,
    )
    aim_meaning: Meaning = _meaning("aim reading", Meaning.TWO_SIGMA)
    risk: float = quantity(
        "ratio",
        "risk of adding",
        "Chance that may be left of having to add wire; sets the cutting allowance.",
        default=0.05,
        low=0.001,
        high=0.5,
        example="5 %",
    )
