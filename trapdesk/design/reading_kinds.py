"""What can be measured and how: each kind of reading declared once, with its doubt and how to do it well.

A doubt is one standard deviation: two readings in three lie closer than that. The defaults are common
practice without a source, and every one of them can be changed where a reading is typed.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType


@dataclass(frozen=True, kw_only=True)
class Doubt:
    """One standard deviation, as a part of the value and in its own SI unit; both count."""

    relative: float = 0.0
    absolute: float = 0.0

    def of(self, value: float) -> float:
        """Return the standard deviation of a value, in its unit."""
        return math.hypot(self.relative * abs(value), self.absolute)


@dataclass(frozen=True, kw_only=True)
class Interval:
    """From `low` to `high`, equal where one number was read; infinite where it went off the scale."""

    low: float
    high: float


@dataclass(frozen=True, kw_only=True)
class Option:
    """What may be said after a reading: what it measures, the words it may be, or what it is the doubt of."""

    help: str
    dimensions: tuple[str, ...] = ()
    choices: tuple[str, ...] = ()
    doubt_of: str = ""
    needed: bool = False


@dataclass(frozen=True, kw_only=True)
class Kind:
    """A kind of reading.

    `takes` is what its value measures, or `impedance`, `swr` or `file`. `hows` are the ways it may be done
    with their doubts, the usual one first, under an empty name where there is only one. `at_frequency` tells
    whether a frequency stands behind @ in its name.
    """

    label: str
    takes: str
    hows: Mapping[str, Doubt]
    advice: str
    example: str
    options: Mapping[str, Option] = field(default_factory=dict)
    at_frequency: bool = False
    how_is_needed: bool = False


@dataclass(frozen=True, kw_only=True)
class Reading:
    """One thing measured: `subject` and `what` name it, as in trap.f0; `frequency` is that behind @, in Hz.

    `options` hold SI numbers, words or doubts by name; an option left out is not in it.
    """

    subject: str
    what: str
    value: float | complex | Interval | str
    typed: str
    doubt: Doubt
    how: str = ""
    frequency: float | None = None
    options: Mapping[str, float | str | Doubt] = field(default_factory=lambda: MappingProxyType({}))

    @property
    def name(self) -> str:
        """What it is called where it is typed, without a frequency."""
        return f"{self.subject}.{self.what}"

    @property
    def kind(self) -> Kind:
        """What is known of its kind."""
        return KINDS[f"{GROUPS[self.subject]}.{self.what}"]

    def option(self, name: str, default: float = 0.0) -> float:
        """Return a number said after it, in SI."""
        value = self.options.get(name, default)
        return value if isinstance(value, float) else default

    def option_doubt(self, name: str, usual: float) -> Doubt:
        """Return a doubt said after it, or the usual share."""
        value = self.options.get(name)
        return value if isinstance(value, Doubt) else Doubt(relative=usual)


GROUPS = {
    "trap": "trap",
    "coil": "coil",
    "capacitor": "capacitor",
    "lower": "band",
    "upper": "band",
    "line": "line",
}
"""What a reading may be of, and the group of kinds that goes with it."""
PARTS = ("trap", "coil", "capacitor")

_PROBE = Option(
    dimensions=("capacitance",),
    help="capacitance of the probe that hung across it: 1 to 2 pF for a scope probe or a clip",
)
_LOAD = Option(dimensions=("resistance",), help="resistance of the meter or source that hung across it")
_FIXTURE = Option(
    dimensions=("time", "length"),
    help="line between where the instrument was calibrated and the part, one way: its delay, or as a length"
    " of air (a cable counts as its length over its velocity factor)",
)
_LEAD = Option(
    dimensions=("inductance", "length"),
    help="leads in series with the part: their inductance, or their length at about 0.8 nH per mm",
)
_AT = Option(choices=("radio", "feed"), help="which end of the line it was read at")
_RESONANCE_HOWS = {
    "analyser": Doubt(relative=0.001),
    "receiver": Doubt(relative=0.002),
    "dial": Doubt(relative=0.025),
}
_LOOSE = (
    "Hold a loop of one or two turns 3 to 5 cm from the coil, no nearer than the dip can just be seen: a loop"
    " closer than that pulls the frequency. Keep the trap a coil's length from metal and hands."
)

KINDS: dict[str, Kind] = {
    "trap.f0": Kind(
        label="resonance",
        takes="frequency",
        hows=_RESONANCE_HOWS,
        options={"probe": _PROBE},
        advice=f"{_LOOSE} A dip meter's dial is 2 to 3 % off: read its frequency on a receiver instead."
        " Say probe= when anything was clipped on. Measure both traps, and at the temperature they will"
        " hang in.",
        example="trap.f0=14.05MHz",
    ),
    "trap.f0_with": Kind(
        label="resonance with a known capacitor",
        takes="frequency",
        hows=_RESONANCE_HOWS,
        options={
            "added": Option(
                dimensions=("capacitance",),
                help="the capacitor that was put across the trap",
                needed=True,
            ),
            "added_doubt": Option(
                doubt_of="capacitance", help="how far that capacitor may be off: 1 % unless said"
            ),
            "probe": _PROBE,
        },
        advice="Clip a capacitor of about half the trap's own, with the shortest leads there are, across the"
        " trap and find the resonance as before, with nothing else moved. Its value is what everything rests"
        " on: take a 1 % mica, film or C0G part, or measure it. A smaller one makes the answer less sure.",
        example="trap.f0_with=11.64MHz,added=22pF",
    ),
    "trap.low": Kind(
        label="lower half-power point",
        takes="frequency",
        hows={"": Doubt(relative=1e-4)},
        options={"load": _LOAD},
        advice="Couple a source and a voltmeter or receiver to the trap as loosely as both still read; find"
        " the largest voltage, then go down until it is 0.707 of that (3 dB less, power half). Couple more"
        " loosely and look again: if the width changes, the coupling was in it. Goes with trap.high.",
        example="trap.low=14.01MHz,trap.high=14.09MHz",
    ),
    "trap.high": Kind(
        label="upper half-power point",
        takes="frequency",
        hows={"": Doubt(relative=1e-4)},
        options={"load": _LOAD},
        advice="As trap.low, going up from the largest voltage until it is 0.707 of it, with nothing moved in"
        " between: the width is a small difference of two large numbers.",
        example="trap.low=14.01MHz,trap.high=14.09MHz",
    ),
    "trap.ratio": Kind(
        label="voltage beside resonance over that at resonance",
        takes="ratio",
        hows={"": Doubt(relative=0.03)},
        at_frequency=True,
        options={"load": _LOAD},
        advice="With the coupling of trap.low, read the voltage at resonance and once beside it, where it is"
        " about half, and give the second over the first. A diode detector bends at low voltage: keep both"
        " readings well above a volt, or use a receiver's calibrated steps.",
        example="trap.ratio@14.2MHz=0.45",
    ),
    "trap.q": Kind(
        label="Q",
        takes="ratio",
        hows={"": Doubt(relative=0.1)},
        options={"load": _LOAD},
        advice="As a Q meter or an analyser tells it, at the trap's own resonance. What hangs across the trap"
        " while it is read goes into it: say load= if that is known.",
        example="trap.q=240",
    ),
    "trap.sweep": Kind(
        label="sweep of the trap",
        takes="file",
        hows={
            "loop": Doubt(relative=1e-5),
            "direct": Doubt(relative=1e-5),
            "through": Doubt(relative=1e-5),
        },
        how_is_needed=True,
        options={
            "fixture": _FIXTURE,
            "fixture_doubt": Option(doubt_of="time", help="how far it may be off: 20 % unless said"),
            "lead": _LEAD,
            "lead_doubt": Option(doubt_of="inductance", help="how far they may be off: 30 % unless said"),
            "probe": _PROBE,
        },
        advice="Calibrate at the end of the cable, then sweep 50 to 400 points. loop: a small loop near the"
        " coil; gives resonance and Q, never L or C. direct: the trap across the port of a one-port; give the"
        " fixture and the leads, which a fit over one band cannot tell from the trap. through: the trap in"
        " series between two ports (.s2p): best for a high impedance. direct and through want a sweep of some"
        " ten per cent to each side for L and C. doubt= is that of the frequency.",
        example="trap.sweep=trap.s1p,how=loop,fixture=0.31ns",
    ),
    "coil.l": Kind(
        label="inductance of the coil by itself",
        takes="inductance",
        hows={"": Doubt(relative=0.01, absolute=3e-8)},
        options={
            "at": Option(dimensions=("frequency",), help="frequency of the meter: 100 kHz unless said"),
        },
        advice="Zero the meter with its leads shorted together the way they will lie, and keep metal away."
        " A low-frequency meter reads neither Q nor resonance nor the coil's own capacitance, reads some per"
        " cent more than the coil has at radio frequency, and cannot read a trap of cable whose ends are"
        " joined, nor a coil under a microhenry to better than its own leads.",
        example="coil.l=2.7uH,at=100kHz",
    ),
    "capacitor.c": Kind(
        label="capacitance of the capacitor by itself",
        takes="capacitance",
        hows={"": Doubt(relative=0.01, absolute=5e-13)},
        options={"probe": _PROBE},
        advice="Off the coil, zeroed with the leads open where they will lie. What the coil adds by itself is"
        " not in it. A stub or a cable reads the same at low frequency as long as it is short against the"
        " wave.",
        example="capacitor.c=47.3pF",
    ),
    "band.dip": Kind(
        label="frequency of least SWR",
        takes="frequency",
        hows={"": Doubt(relative=3e-4)},
        options={"at": _AT},
        advice="At the radio's end of the line, with choke and line as they will be used and everybody off"
        " the wire. Grip the line and look again: if the reading moves, the line radiates and the reading"
        " means nothing.",
        example="lower.dip=7.085MHz",
    ),
    "band.swr": Kind(
        label="SWR at a frequency",
        takes="swr",
        hows={"": Doubt(relative=0.08)},
        at_frequency=True,
        options={"at": _AT},
        advice="Low power, a steady carrier, a free frequency inside the band, and the call. Say what the"
        " meter really tells: 2..3 for somewhere between, 3.. for off the scale. Its tuner must be off.",
        example="upper.swr@14.1MHz=1.5..2",
    ),
    "band.z": Kind(
        label="R and X at a frequency",
        takes="impedance",
        hows={"": Doubt(relative=0.03, absolute=1.0)},
        at_frequency=True,
        options={"at": _AT},
        advice="With the sign of X: many meters leave it out, and without it the reading says half as much."
        " Calibrate at the end that is read.",
        example="lower.z@7.05MHz=42-j12",
    ),
    "band.sweep": Kind(
        label="sweep of a band",
        takes="file",
        hows={"": Doubt(relative=1e-5)},
        options={"at": _AT},
        advice="From a twentieth below the band to a twentieth above it, 50 points or more, as Touchstone"
        " or CSV.",
        example="upper.sweep=upper.s1p",
    ),
    "line.sweep": Kind(
        label="sweep of the line alone",
        takes="file",
        hows={"": Doubt(relative=1e-5)},
        options={"end": Option(choices=("open", "short"), help="how its far end was left")},
        advice="With the antenna taken off and the far end left open or shorted, swept at the radio's end"
        " over both bands: it tells the line's length, loss and impedance.",
        example="line.sweep=line.s1p,end=open",
    ),
}
"""Every kind of reading, by group and name."""
