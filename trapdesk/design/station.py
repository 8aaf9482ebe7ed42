"""What stands between feed point and transmitter: choke, line, tuner, transmitter; wanted segments."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from ..engine.cable_list import CABLES
from .fields import choice, part, parts, quantity, text


class TunerPlace(StrEnum):
    """Where the tuner stands."""

    TRANSMITTER = "transmitter"
    FEED = "feed"


class LineWeather(StrEnum):
    """What the line lies in."""

    DRY = "dry"
    WET = "wet"


OWN = "own"
"""The type of a line of which every number is given."""
PARALLEL = ("window line",)
"""Types without a shield, whose field reaches into the rain."""
WET_LOSS = {False: 0.05, True: 1.0}
WET_SLOWER = {False: 0.0, True: 0.03}
"""What rain adds to the loss and takes from the speed, relative, of a coaxial and a parallel line.

Estimates, no source: rain hardly touches a sound jacket, and dirt and film on a window line vary greatly.
"""
TUNER_NETWORKS: dict[str, tuple[str, ...]] = {
    "t-clc": ("t-clc",),
    "t-lcl": ("t-lcl",),
    "pi-clc": ("pi-clc",),
    "pi-lcl": ("pi-lcl",),
    "l-low-pass": ("l-source-low-pass", "l-load-low-pass"),
    "l-high-pass": ("l-source-high-pass", "l-load-high-pass"),
} | {
    f"l-{end}-{parts}": (f"l-{end}-{parts}",)
    for end in ("load", "source")
    for parts in ("low-pass", "high-pass", "coils", "capacitors")
}
"""Networks a tuner may be, each with the circuits it can be switched to."""


@dataclass(frozen=True, kw_only=True)
class Segment:
    """A part of a band that is wanted."""

    low: float = quantity("frequency", "segment from", "Where the segment starts.", low=1.5e6, high=60e6)
    high: float = quantity("frequency", "segment to", "Where the segment ends.", low=1.5e6, high=60e6)
    weight: float = quantity(
        "ratio", "weight", "How much it matters against the others.", default=1.0, above=0.0, high=1000.0
    )


@dataclass(frozen=True, kw_only=True)
class ListedLoss:
    """Matched loss of a line at one frequency."""

    frequency: float = quantity(
        "frequency", "loss given at", "Frequency of the loss.", low=1e5, high=1e10, example="30 MHz"
    )
    loss: float = quantity(
        "loss_per_length",
        "matched loss",
        "Loss with a matched load.",
        above=0.0,
        high=10.0,
        example="0.07 dB/m",
    )


@dataclass(frozen=True, kw_only=True)
class FeedLine:
    """The line from the transmitter to the feed point. What is not set is that of its type."""

    type: str = choice(
        (*CABLES, OWN),
        "line type",
        f"A listed type to start from, or {OWN}: every number given below.",
        default="RG-58/U",
    )
    length: float = quantity(
        "length",
        "line length",
        "From the transmitter to the feed point.",
        above=0.0,
        high=2000.0,
        example="25 m",
    )
    z0: float | None = quantity(
        "resistance",
        "line impedance",
        "Characteristic impedance; that of the type unless set.",
        default=None,
        optional=True,
        low=5.0,
        high=1500.0,
        example="50 ohm",
    )
    velocity_factor: float | None = quantity(
        "ratio",
        "velocity factor",
        "Speed on the line over that of light; that of the type unless set.",
        default=None,
        optional=True,
        low=0.2,
        high=1.0,
        example="0.66",
    )
    losses: tuple[ListedLoss, ...] = parts(
        "line loss",
        "Matched loss at two or more frequencies; one alone counts to the conductors.",
        kinds={"": ListedLoss},
    )
    voltage: float | None = quantity(
        "voltage",
        "line voltage rating",
        "Highest rms voltage to work by; that of the type unless set, where one is known.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="1.4 kV",
    )
    current: float | None = quantity(
        "current",
        "line current rating",
        "Highest rms current; lists seldom say.",
        default=None,
        optional=True,
        low=0.01,
        high=1000.0,
        example="5 A",
    )
    age: float = quantity(
        "ratio", "age of the line", "In years, out of doors.", default=0.0, low=0.0, high=60.0, example="10"
    )
    yearly_loss: float = quantity(
        "ratio",
        "loss gained a year",
        "By how much its loss grows in a year. An estimate, no source.",
        default=0.02,
        low=0.0,
        high=1.0,
        example="2 %",
    )
    weather: LineWeather = choice(LineWeather, "line lies", "dry or wet.", default=LineWeather.DRY)
    wet_loss: float | None = quantity(
        "ratio",
        "loss gained when wet",
        "By how much rain raises the loss. An estimate, no source: coaxial 5 %, window line 100 % unless"
        " set.",
        default=None,
        optional=True,
        low=0.0,
        high=20.0,
        example="100 %",
    )
    wet_slower: float | None = quantity(
        "ratio",
        "slower when wet",
        "How much rain takes off its speed. An estimate, no source: coaxial 0, window line 3 % unless set.",
        default=None,
        optional=True,
        low=0.0,
        high=0.5,
        example="3 %",
    )


@dataclass(frozen=True, kw_only=True)
class Choke:
    """The choke or transformer at the feed point."""

    upper: float | None = quantity(
        "resistance",
        "choke on the upper band",
        "Its impedance to current on the outside of the line.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="2 kohm",
    )
    lower: float | None = quantity(
        "resistance",
        "choke on the lower band",
        "Its impedance to current on the outside of the line.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="2 kohm",
    )
    ratio: float = quantity(
        "ratio",
        "transformer ratio",
        "Ohms on the antenna's side over ohms on the line's; 1 for a choke alone.",
        default=1.0,
        low=0.01,
        high=100.0,
        example="4",
    )
    loss: float = quantity(
        "loss",
        "transformer loss",
        "What it loses on the way.",
        default=0.0,
        low=0.0,
        high=20.0,
        example="0.2 dB",
    )


@dataclass(frozen=True, kw_only=True)
class Tap:
    """A tap of a tuner's coil."""

    inductance: float = quantity(
        "inductance", "tap", "Inductance at this tap.", above=0.0, high=1e-3, example="2 uH"
    )


_STEPS = {"default": None, "optional": True, "low": 2.0, "high": 4096.0, "example": "32"}


@dataclass(frozen=True, kw_only=True)
class TunerCoil:
    """A coil of the tuner: what it can be set to and what it stands."""

    low: float = quantity("inductance", "coil from", "Least inductance.", default=1e-7, low=0.0, high=1e-3)
    high: float = quantity(
        "inductance", "coil to", "Greatest inductance.", default=28e-6, above=0.0, high=1e-3
    )
    steps: float | None = quantity(
        "ratio", "coil steps", "Positions evenly from least to greatest; none set: any value.", **_STEPS
    )
    taps: tuple[Tap, ...] = parts("taps", "Its taps, where the steps are not even.", kinds={"": Tap})
    q: float = quantity(
        "ratio", "tuner coil Q", "Reactance over loss. An estimate.", default=100.0, low=1.0, high=5000.0
    )
    voltage: float | None = quantity(
        "voltage",
        "tuner coil rating",
        "Highest peak voltage across it.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="3 kV",
    )
    current: float | None = quantity(
        "current",
        "tuner coil current",
        "Highest rms current through it.",
        default=None,
        optional=True,
        low=0.01,
        high=1000.0,
        example="5 A",
    )


@dataclass(frozen=True, kw_only=True)
class TunerCapacitor:
    """A capacitor of the tuner: what it can be set to and what it stands."""

    low: float = quantity(
        "capacitance", "capacitor from", "Least capacitance.", default=15e-12, low=0.0, high=1e-6
    )
    high: float = quantity(
        "capacitance", "capacitor to", "Greatest capacitance.", default=250e-12, above=0.0, high=1e-6
    )
    steps: float | None = quantity(
        "ratio", "capacitor steps", "Positions evenly from least to greatest; none set: any value.", **_STEPS
    )
    q: float = quantity(
        "ratio", "tuner capacitor Q", "Reactance over loss. An estimate.", default=1000.0, low=1.0, high=1e5
    )
    voltage: float | None = quantity(
        "voltage",
        "tuner capacitor rating",
        "Highest peak voltage across it.",
        default=None,
        optional=True,
        low=1.0,
        high=1e6,
        example="1 kV",
    )
    current: float | None = quantity(
        "current",
        "tuner capacitor current",
        "Highest rms current through it.",
        default=None,
        optional=True,
        low=0.01,
        high=1000.0,
        example="5 A",
    )


@dataclass(frozen=True, kw_only=True)
class Tuner:
    """A tuner. Its default parts are those of a common size of T network; common practice, no source."""

    network: str = choice(TUNER_NETWORKS, "tuner network", "What its parts form.", default="t-clc")
    place: TunerPlace = choice(
        TunerPlace, "tuner stands", "At the transmitter or at the feed point.", default=TunerPlace.TRANSMITTER
    )
    coil: TunerCoil = part("tuner coil", "Its coil, or the one nearer the transmitter.", default=TunerCoil())
    capacitor: TunerCapacitor = part(
        "tuner capacitor", "Its capacitor, or the one nearer the transmitter.", default=TunerCapacitor()
    )
    load_coil: TunerCoil | None = part(
        "second coil", "The coil nearer the antenna, where it is another.", default=None, optional=True
    )
    load_capacitor: TunerCapacitor | None = part(
        "second capacitor",
        "The capacitor nearer the antenna, where it is another.",
        default=None,
        optional=True,
    )


@dataclass(frozen=True, kw_only=True)
class Foldback:
    """What a transmitter gives into one SWR."""

    swr: float = quantity("ratio", "at SWR", "SWR at the transmitter.", low=1.0, high=100.0, example="3")
    watts: float = quantity("power", "gives", "What it then gives.", low=0.0, high=5000.0, example="50 W")


TYPICAL_FOLDBACK = ((2.0, 1.0), (3.0, 0.5), (5.0, 0.25), (10.0, 0.1))
"""SWR and share of full power still given: many fold back from 2 on; common practice, no source."""


@dataclass(frozen=True, kw_only=True)
class Transmitter:
    """How the transmitter takes a mismatch."""

    name: str = text("transmitter", "What it is called.", default="transmitter")
    table: tuple[Foldback, ...] = parts(
        "SWR to watts",
        "What it gives at rising SWR, straight between rows, full power below the first; a typical one unless"
        " set (full to 2, half at 3, a quarter at 5, a tenth at 10 and above; common practice, no source).",
        kinds={"": Foldback},
    )
