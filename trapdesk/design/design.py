"""What a person sets: an Antenna at a Site with a Station, frozen, in SI units.

Every field is declared once, with what it measures, its limits, default, label and help; the form, the
file, the command line, the sheet and the tests all follow from the declarations.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, is_dataclass, replace
from enum import StrEnum
from typing import Any

from ..engine.metals import MATERIALS
from ..engine.soils import SOILS, GroundKind
from .doubts import Doubts
from .fields import SOLVE, Declared, Value, choice, declared, member_of, part, parts, quantity, text
from .history import STAYS, History, Step
from .parts import Trap
from .station import Choke, FeedLine, Segment, Transmitter, Tuner


class Shape(StrEnum):
    """How the wire hangs."""

    FLAT = "flat"
    VEE = "vee"


class JudgedAt(StrEnum):
    """Where the SWR limit is held."""

    FEED = "feed"
    TRANSMITTER = "transmitter"


@dataclass(frozen=True)
class Mode:
    """How hard a transmitter works at its stated power: mean share of it while sending, and what that is."""

    mean: float
    help: str


MODES: dict[str, Mode] = {
    "carrier": Mode(1.0, "full carrier without a pause: tuning up, FM"),
    "data": Mode(1.0, "data modes that send a full carrier for a whole over; common practice, no source"),
    "CW": Mode(0.5, "keyed carrier; half the time on, common practice, no source"),
    "SSB": Mode(0.2, "speech without processing; common practice, no source"),
    "SSB processed": Mode(0.5, "speech with strong processing; common practice, no source"),
}

_BAND_LIMITS = {"low": 1.5e6, "high": 60e6}


@dataclass(frozen=True, kw_only=True)
class Band:
    """A band: its edges, the wanted part that is judged, and the aim in it."""

    name: str = text("band", "What the band is called, for example 40 m.")
    low: float = quantity("frequency", "band from", "Lower band edge; national rules decide.", **_BAND_LIMITS)
    high: float = quantity("frequency", "band to", "Upper band edge; national rules decide.", **_BAND_LIMITS)
    wanted_low: float | None = quantity(
        "frequency",
        "wanted from",
        "Start of the part of the band that is wanted and judged; the band edge unless set.",
        default=None,
        optional=True,
        **_BAND_LIMITS,
    )
    wanted_high: float | None = quantity(
        "frequency",
        "wanted to",
        "End of the part of the band that is wanted and judged; the band edge unless set.",
        default=None,
        optional=True,
        **_BAND_LIMITS,
    )
    wanted: tuple[Segment, ...] = parts(
        "wanted segments",
        "Several parts that are wanted, each with a weight, instead of one from and to.",
        kinds={"": Segment},
    )
    aim: float | None = quantity(
        "frequency",
        "aim",
        "Where resonance at the feed point is wanted; the middle of the wanted part unless set.",
        default=None,
        optional=True,
        **_BAND_LIMITS,
    )

    @property
    def wanted_edges(self) -> tuple[float, float]:
        """The edges of all that is wanted, in Hz."""
        if self.wanted:
            return (min(part.low for part in self.wanted), max(part.high for part in self.wanted))
        return (self.wanted_low or self.low, self.wanted_high or self.high)

    @property
    def segments(self) -> tuple[Segment, ...]:
        """Every wanted segment, from low to high; one of weight 1 where no list is given."""
        if self.wanted:
            return tuple(sorted(self.wanted, key=lambda part: part.low))
        low, high = self.wanted_edges
        return (Segment(low=low, high=high),)

    @property
    def segments_wanted(self) -> tuple[tuple[float, float], ...]:
        """The edges of every wanted segment, from low to high, in Hz."""
        return tuple((part.low, part.high) for part in self.segments)

    @property
    def target(self) -> float:
        """The aim in Hz, set or by default: the middle, of several segments by weight."""
        if self.aim is None and self.wanted:
            middles = [part.weight * (part.low + part.high) / 2 for part in self.wanted]
            return sum(middles) / sum(part.weight for part in self.wanted)
        return self.aim or sum(self.wanted_edges) / 2


@dataclass(frozen=True, kw_only=True)
class Bands:
    """The bands of the design; `upper` may be absent."""

    lower: Band = part("lower band", "The band on which the whole wire works.")
    upper: Band | None = part("upper band", "The trap's own band.", default=None, optional=True)

    def items(self) -> Iterator[tuple[str, Band]]:
        """Return role and band, upper first, of the bands there are."""
        for role in ("upper", "lower"):
            if (band := getattr(self, role)) is not None:
                yield role, band

    def called(self, role: str) -> str:
        """Return what a band is to be called: one without a name by its place, alike ones by their aims."""
        named = {role: " ".join(band.name.split()) for role, band in self.items()}
        if not named[role]:
            return f"{role} band"
        # Only so much of a name is shown in a column.
        if len({name[:11].casefold() for name in named.values()}) == len(named):
            return getattr(self, role).name
        aims = {role: f"{band.target / 1e6:.5g}" for role, band in self.items()}
        told = f"{named[role][:5].strip()} {aims[role]}"
        return told if len(set(aims.values())) == len(aims) else f"{role} band"


@dataclass(frozen=True, kw_only=True)
class AntennaWire:
    """The wire off the reel."""

    diameter: float = quantity(
        "length",
        "wire diameter",
        "Diameter of the conductor without its coating; a gauge such as AWG 14 will do. For strands the"
        " circle around them.",
        default=0.002,
        low=1e-4,
        high=0.02,
        alias="gauge",
        example="AWG 14",
    )
    material: str = choice(MATERIALS, "material", "Metal of the wire.", default="copper")
    conductivity: float | None = quantity(
        "conductivity",
        "conductivity",
        "Conductivity of the wire, when it is none of the listed metals.",
        default=None,
        optional=True,
        low=1e4,
        high=1e9,
        example="58 MS/m",
    )
    coating: float = quantity(
        "length",
        "coating",
        "Thickness of the insulation on the wire, 0 for bare wire. A coating lowers both bands.",
        default=0.0,
        low=0.0,
        high=0.01,
        example="0.6 mm",
    )
    coating_permittivity: float = quantity(
        "ratio",
        "coating permittivity",
        "Relative permittivity of the insulation: polyethylene 2.3, PVC 3 to 4 (it varies much).",
        default=2.3,
        low=1.0,
        high=12.0,
    )
    stretch: float = quantity(
        "ratio",
        "stretch",
        "How much longer the wire gets once it is pulled. Soft stranded copper creeps 0.5 to 2 % in its first"
        " days (common practice, no source): pull it first, then mark it, and leave this 0.",
        default=0.0,
        low=0.0,
        high=0.05,
        example="1 %",
    )


@dataclass(frozen=True, kw_only=True)
class Lengths:
    """Wire lengths of one side, as the engine computes with them, and what fastening takes."""

    inner: Value = quantity(
        "length",
        "inner wire",
        "Feed point to trap centre, to the wire's end where there is no trap. Solved: meets the upper aim.",
        default=SOLVE,
        solvable=True,
        low=0.3,
        high=200.0,
    )
    end: Value | None = quantity(
        "length",
        "end wire",
        "Trap centre to the wire's end. Solved: meets the lower aim. Absent without a trap.",
        default=None,
        solvable=True,
        optional=True,
        low=0.2,
        high=200.0,
    )
    knot: float = quantity(
        "length",
        "knot",
        "Wire that each fastening at feed point and trap takes. 10 to 15 cm: common practice, no source.",
        default=0.12,
        low=0.0,
        high=2.0,
    )
    loop: float = quantity(
        "length",
        "loop",
        "Wire through the end insulator and laid back. 10 to 15 cm: common practice, no source.",
        default=0.15,
        low=0.0,
        high=2.0,
    )
    reserve: float = quantity(
        "length",
        "reserve",
        "Extra to leave on each wire when cutting, so that it can still be let out.",
        default=0.20,
        low=0.0,
        high=5.0,
    )


@dataclass(frozen=True, kw_only=True)
class Antenna:
    """What is carried: wire, lengths, traps."""

    wire: AntennaWire = part("wire", "The wire of both sides.", default=AntennaWire())
    lengths: Lengths = part("lengths", "Wire lengths of one side.", default=Lengths())
    trap: Trap | None = part("trap", "The trap in each side.", default=None, optional=True)


UNKNOWN = "unknown"


@dataclass(frozen=True, kw_only=True)
class Site:
    """Where it hangs."""

    shape: Shape = choice(
        Shape, "shape", "flat: a level wire; vee: ends lower than the feed point.", default=Shape.FLAT
    )
    height: float = quantity(
        "length", "height", "Height of the feed point above ground.", default=10.0, low=0.5, high=300.0
    )
    end_height: float | None = quantity(
        "length",
        "height of ends",
        "Height of the wire's ends of a vee; this or the included angle.",
        default=None,
        optional=True,
        low=0.5,
        high=300.0,
    )
    included_angle: float | None = quantity(
        "angle",
        "included angle",
        "Angle between both sides of a vee; this or the height of the ends.",
        default=None,
        optional=True,
        low=math.radians(30),
        high=math.pi,
        example="120 deg",
    )
    ground: GroundKind = choice(
        GroundKind,
        "ground",
        "soil: real earth; mirror: an ideal conductor; space: far from any ground.",
        default=GroundKind.SOIL,
    )
    soil: str | None = choice(
        (UNKNOWN, *SOILS),
        "soil",
        "Class of soil; unknown takes an average and shows what not knowing is worth.",
        default=None,
        optional=True,
    )
    conductivity: float | None = quantity(
        "conductivity",
        "soil conductivity",
        "Conductivity of the soil, together with its permittivity instead of a class.",
        default=None,
        optional=True,
        low=0.0,
        high=10.0,
        example="5 mS/m",
    )
    permittivity: float | None = quantity(
        "ratio",
        "soil permittivity",
        "Relative permittivity of the soil, together with its conductivity instead of a class.",
        default=None,
        optional=True,
        low=1.0,
        high=100.0,
        example="13",
    )

    @property
    def soil_is_unknown(self) -> bool:
        """Whether the ground is real earth that nobody has named."""
        named = self.soil not in (None, UNKNOWN) or self.conductivity is not None
        return self.ground == GroundKind.SOIL and not named


@dataclass(frozen=True, kw_only=True)
class Stay:
    """A site the antenna left, and what was read and done to it there."""

    title: str = text("title", "What the design was called at that site.", default="")
    site: Site = part("site", "Where it hung then.", default=Site())
    steps: tuple[Step, ...] = parts(
        "lowerings", "Readings and moves, one for each time it came down there.", kinds={"": Step}
    )


STAYS[""] = Stay


@dataclass(frozen=True, kw_only=True)
class Station:
    """What feeds it and what is asked of it."""

    reference: float = quantity(
        "resistance",
        "SWR reference",
        "Resistance the SWR is counted against.",
        default=50.0,
        low=1.0,
        high=2000.0,
    )
    swr_limit: float = quantity(
        "ratio", "SWR limit", "Highest SWR that counts as usable.", default=2.0, above=1.0, high=20.0
    )
    judged_at: JudgedAt = choice(JudgedAt, "judged at", "Where the SWR limit is held.", default=JudgedAt.FEED)
    power: float = quantity(
        "power", "power", "Power of the transmitter at its peaks.", default=100.0, above=0.0, high=5000.0
    )
    mode: str = choice(
        MODES, "mode", "What is sent: how much of the power is there on average.", default="SSB"
    )
    over: float = quantity(
        "time",
        "over",
        "How long it is sent at a stretch. 2 minutes: common practice, no source.",
        default=120.0,
        low=1.0,
        high=86400.0,
        example="2 min",
    )
    pause: float = quantity(
        "time",
        "pause",
        "How long it is listened in between. 2 minutes: common practice, no source.",
        default=120.0,
        low=0.0,
        high=86400.0,
        example="2 min",
    )
    line: FeedLine | None = part(
        "line",
        "From the transmitter to the feed point; none: no line is counted.",
        default=None,
        optional=True,
    )
    choke: Choke | None = part(
        "choke", "The choke or transformer at the feed point.", default=None, optional=True
    )
    tuner: Tuner | None = part("tuner", "The tuner, where there is one.", default=None, optional=True)
    transmitter: Transmitter | None = part(
        "transmitter",
        "How the transmitter takes a mismatch; none: it gives its full power into any.",
        default=None,
        optional=True,
    )


@dataclass(frozen=True, kw_only=True)
class Design:
    """One antenna at one site with one station."""

    title: str = text("title", "What the design is called.", default="untitled")
    bands: Bands = part("bands", "The bands that are wanted.")
    antenna: Antenna = part("antenna", "What is carried.", default=Antenna())
    site: Site = part("site", "Where it hangs.", default=Site())
    station: Station = part("station", "What feeds it.", default=Station())
    doubts: Doubts = part("doubts", "How far what is built may be off.", default=Doubts())
    history: History | None = part(
        "history", "What was read of the hung antenna, and what was done to it.", default=None, optional=True
    )


def get(design: Any, key: str) -> Any:
    """Return the value at a dotted key; KeyError for a key that the design does not have."""
    value: Any = design
    for name in key.split("."):
        value = _inside(value, name, key)
    return value


def _inside(owner: Any, name: str, key: str) -> Any:
    """Return a field of a part, or a part of a list by its place, counted from 1."""
    if isinstance(owner, tuple):
        if not (name.isdecimal() and 1 <= int(name) <= len(owner)):
            raise KeyError(key)
        return owner[int(name) - 1]
    if not is_dataclass(owner) or name not in declared(owner):
        raise KeyError(key)
    return getattr(owner, name)


def known_at(design: Any, key: str) -> Declared:
    """Return what is declared of the value at a dotted key; KeyError for a key the design does not have."""
    above, _, name = key.rpartition(".")
    owner = get(design, above) if above else design
    _inside(owner, name, key)
    if isinstance(owner, tuple):
        return member_of(known_at(design, above), int(name))
    return declared(owner)[name]


def with_value(part: Any, key: str, value: Any) -> Any:
    """Return the design with another value at a dotted key; KeyError for a key that it does not have."""
    name, _, rest = key.partition(".")
    new = _inside(part, name, key)
    new = with_value(new, rest, value) if rest else value
    if isinstance(part, tuple):
        place = int(name) - 1
        return (*part[:place], new, *part[place + 1 :])
    return replace(part, **{name: new})


def at_new_site(design: Design, site: Site, inner: float, end: float | None) -> Design:
    """Return the design as the same antenna at another site, its wires as cut [m].

    What was read and done so far goes with the site it leaves.
    """
    history = design.history or History()
    stay = Stay(title=design.title, site=design.site, steps=history.steps)
    # To a tenth of a millimetre: finer than any wire is cut.
    lengths = replace(
        design.antenna.lengths, inner=round(inner, 4), end=None if end is None else round(end, 4)
    )
    return replace(
        design,
        site=site,
        antenna=replace(design.antenna, lengths=lengths),
        history=replace(history, stays=(*history.stays, stay), steps=()),
    )
