"""From the feed point to the transmitter: what choke, line and tuner do to impedance and watts."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from ...design.design import JudgedAt, Station
from ...design.station import (
    OWN,
    PARALLEL,
    TYPICAL_FOLDBACK,
    WET_LOSS,
    WET_SLOWER,
    FeedLine,
    LineWeather,
    TunerPlace,
)
from ...engine.cable_list import CABLES
from ...engine.cable_types import cable_line, loss_constants
from ...engine.cables import Line, LineFigures, line_figures, propagation, transform
from ...engine.reflection import swr
from .tuner import Tuned, TunerSetting, setting_seen, setting_share, tune, tune_at


def laid_line(feed_line: FeedLine) -> Line:
    """Return the line as it lies there, with age and weather; ValueError for losses that cannot be fitted."""
    cable = None if feed_line.type == OWN else CABLES[feed_line.type]
    listed = cable_line(cable) if cable is not None else None
    if feed_line.losses:
        rows = [(row.frequency, row.loss) for row in feed_line.losses]
        skin, dielectric = loss_constants(*np.array(rows).T)
    else:
        skin, dielectric = (0.0, 0.0) if listed is None else (listed.skin_loss, listed.dielectric_loss)
    z0 = listed.z0 if feed_line.z0 is None else feed_line.z0
    velocity = listed.velocity_factor if feed_line.velocity_factor is None else feed_line.velocity_factor
    more = 1 + feed_line.age * feed_line.yearly_loss
    if feed_line.weather is LineWeather.WET:
        open_to_rain = has_no_shield(feed_line)
        more *= 1 + (WET_LOSS[open_to_rain] if feed_line.wet_loss is None else feed_line.wet_loss)
        velocity *= 1 - (WET_SLOWER[open_to_rain] if feed_line.wet_slower is None else feed_line.wet_slower)
    return Line(z0=z0, velocity_factor=velocity, skin_loss=skin * more, dielectric_loss=dielectric * more)


LEAST_PARALLEL = 150.0
"""A line of one's own from this impedance on is taken for two open wires. [ohm], an estimate"""


def has_no_shield(feed_line: FeedLine) -> bool:
    """Return whether a line is two open wires, by its type or by the impedance of a line of one's own."""
    of_its_own = feed_line.type == OWN and feed_line.z0 is not None and feed_line.z0 >= LEAST_PARALLEL
    return feed_line.type in PARALLEL or of_its_own


def voltage_rating(feed_line: FeedLine) -> float | None:
    """Return the rms voltage a line may be worked at, None where nobody said."""
    if feed_line.voltage is not None or feed_line.type == OWN:
        return feed_line.voltage
    return CABLES[feed_line.type].working_voltage


def given_power(station: Station, ratio: np.ndarray, *, typical: bool = False) -> np.ndarray:
    """Return what the transmitter gives into an SWR, in W.

    Without a table of its own it gives its full power into any; `typical` takes the typical table instead.
    """
    if station.transmitter is not None and station.transmitter.table:
        rows = [(row.swr, row.watts) for row in station.transmitter.table]
    elif station.transmitter is not None or typical:
        rows = [(at, share * station.power) for at, share in TYPICAL_FOLDBACK]
    else:
        return np.full(np.shape(ratio), float(station.power))
    at, watts = zip(*rows, strict=True)
    below = float(station.power)
    return np.minimum(np.interp(ratio, at, watts, left=below), below)


@dataclass(frozen=True, kw_only=True)
class LineUse:
    """The line in use at one frequency: peak and rms as named, places in m from the feed point.

    `swr_load` and `swr_input` are against the line's own nominal impedance.
    """

    load: complex
    input: complex
    matched_loss: float
    total_loss: float
    swr_load: float
    swr_input: float
    power_load: float
    power_input: float
    largest_voltage: float
    voltage_at: float
    largest_current: float
    current_at: float


@dataclass(frozen=True, kw_only=True)
class WayStep:
    """One line of the way down: watts that stay there, or with an impedance a place they pass.

    `code` is sky, ground, wire, traps, transformer, line, tuner coil, tuner capacitor for what keeps watts;
    feed, line end, line start, transmitter for places.
    """

    code: str
    watts: float
    impedance: complex | None = None
    swr: float | None = None


@dataclass(frozen=True, kw_only=True)
class OtherPlace:
    """The SWR where it is not judged, over the wanted part."""

    where: JudgedAt
    dip: float
    dip_swr: float
    low_swr: float
    high_swr: float
    worst_swr: float


@dataclass(frozen=True, kw_only=True)
class FeedFigures:
    """What lies between feed point and transmitter does on one band, at the aim unless said otherwise.

    `share` is the part of the transmitter's power that is accepted at the feed point. The worst of the
    wanted part: volts and amps on the line (rms), SWR at the transmitter and what it then gives [W].
    """

    feed_watts: float
    transmitter_watts: float
    transmitter_impedance: complex
    transmitter_swr: float
    share: float
    line: LineUse | None
    transformer_watts: float
    tuner: TunerSetting | None
    worst_voltage: float | None
    worst_current: float | None
    worst_transmitter_swr: float
    least_watts: float
    other: OtherPlace
    steps: tuple[WayStep, ...]


@dataclass(frozen=True, kw_only=True)
class Passage:
    """Power on its way over frequency, arrays (n,): what the transmitter sees and gives, what arrives."""

    transmitter_impedance: np.ndarray
    transmitter_swr: np.ndarray
    given: np.ndarray
    arriving: np.ndarray
    transformer: np.ndarray
    frequency: np.ndarray
    feed: np.ndarray
    line_load: np.ndarray
    line: LineFigures | None
    in_line: np.ndarray
    tuned: Tuned | None
    into_tuner: np.ndarray


class Path:
    """Everything between feed point and transmitter of a station."""

    def __init__(self, station: Station, *, typical_transmitter: bool = False) -> None:
        self.station, self.typical = station, typical_transmitter
        self.reference = station.reference
        self.line = None if station.line is None else laid_line(station.line)
        self.length = 0.0 if station.line is None else station.line.length
        choke = station.choke
        self.ratio = 1.0 if choke is None else choke.ratio
        self.passed = 1.0 if choke is None else 10 ** (-choke.loss / 10)
        self.tuner = station.tuner
        self.at_feed = self.tuner is not None and self.tuner.place is TunerPlace.FEED

    @property
    def is_bare(self) -> bool:
        """Whether there is nothing between, and full power into any SWR."""
        nothing = self.line is None and self.ratio == 1.0 and self.passed == 1.0 and self.tuner is None
        return nothing and self.station.transmitter is None

    @property
    def wanted(self) -> float:
        """What the tuner is to show: the line's own impedance at the feed point, else the reference."""
        if not self.at_feed:
            return self.reference
        return self.ratio * (self.reference if self.line is None else float(self.line.z0))

    def line_input(self, frequency: np.ndarray, load: np.ndarray) -> np.ndarray:
        """Return the impedance at the transmitter's end of the line."""
        if self.line is None:
            return load
        return transform(*propagation(self.line, frequency), self.length, load)

    def tuner_load(self, frequency: np.ndarray, feed: np.ndarray) -> np.ndarray:
        """Return the impedance the tuner is to match."""
        return feed if self.at_feed else self.line_input(frequency, feed / self.ratio)

    def set_at(self, frequency: float, feed: complex) -> TunerSetting | None:
        """Return the tuner's setting for one feed impedance, None without a tuner."""
        if self.tuner is None:
            return None
        load = complex(self.tuner_load(np.array(frequency), np.array(feed)))
        return tune_at(self.tuner, frequency, load, self.wanted)

    def transmitter_sees(
        self, frequency: np.ndarray, feed: np.ndarray, setting: TunerSetting | None
    ) -> np.ndarray:
        """Return the impedance at the transmitter, the tuner left as it is set."""
        if setting is None:
            return self.line_input(frequency, feed / self.ratio)
        if self.at_feed:
            seen = setting_seen(setting, frequency, feed)
            return self.line_input(frequency, seen / self.ratio)
        return setting_seen(setting, frequency, self.tuner_load(frequency, feed))

    def judged(self, frequency: np.ndarray, feed: np.ndarray, setting: TunerSetting | None) -> np.ndarray:
        """Return the impedance that is judged: that at the feed point, or what the transmitter sees.

        At the feed point it is the antenna's own, behind a transformer but before a tuner.
        """
        if self.station.judged_at == JudgedAt.FEED:
            return feed / self.ratio
        return self.transmitter_sees(frequency, feed, setting)

    def other(self, frequency: np.ndarray, feed: np.ndarray, setting: TunerSetting | None) -> np.ndarray:
        """Return the impedance at the place that is not judged."""
        if self.station.judged_at == JudgedAt.FEED:
            return self.transmitter_sees(frequency, feed, setting)
        return feed / self.ratio

    def passage(
        self, frequency: np.ndarray, feed: np.ndarray, setting: TunerSetting | None = None
    ) -> Passage:
        """Return the power on its way, the tuner set anew at every frequency unless a setting is given.

        A tuner that comes in steps is set anew as if it had none: steps change the match, hardly the loss.
        """
        tuned, at_tuner = None, np.ones(frequency.shape)
        below = feed
        if self.at_feed:
            tuned = self._tuned(frequency, feed, setting)
            below, at_tuner = tuned.impedance, tuned.efficiency
        below = below / self.ratio
        line, along = None, np.ones(frequency.shape)
        seen = below
        if self.line is not None:
            line = line_figures(*propagation(self.line, frequency), self.length, below, float(self.line.z0))
            along, seen = line.power_load, line.input_impedance
        if self.tuner is not None and not self.at_feed:
            tuned = self._tuned(frequency, seen, setting)
            seen, at_tuner = tuned.impedance, tuned.efficiency
        ratio = swr(seen, self.reference)
        given = given_power(self.station, ratio, typical=self.typical)
        into_line = given if self.at_feed else given * at_tuner
        into_transformer = into_line * along
        out = into_transformer * self.passed
        arriving = out * at_tuner if self.at_feed else out
        return Passage(
            transmitter_impedance=seen,
            transmitter_swr=ratio,
            given=given,
            arriving=arriving,
            transformer=into_transformer - out,
            frequency=frequency,
            feed=feed,
            line_load=below,
            line=line,
            in_line=into_line,
            tuned=tuned,
            into_tuner=out if self.at_feed else given,
        )

    def _tuned(self, frequency: np.ndarray, load: np.ndarray, setting: TunerSetting | None) -> Tuned:
        if setting is not None:
            return setting_share(setting, frequency, load)
        return tune(self.tuner, frequency, load, self.wanted)


def line_use(found: LineFigures, load: complex, watts: float, i: int | tuple[()] = ()) -> LineUse:
    """Return what a line does and bears for watts into it; `i` is which of the figures, each for one watt."""
    root = math.sqrt(watts)
    return LineUse(
        load=complex(load),
        input=complex(found.input_impedance[i]),
        matched_loss=float(found.matched_loss[i]),
        total_loss=float(found.total_loss[i]),
        swr_load=float(found.swr_load[i]),
        swr_input=float(found.swr_input[i]),
        power_load=watts * float(found.power_load[i]),
        power_input=watts,
        largest_voltage=root * float(found.largest_voltage[i]),
        voltage_at=float(found.voltage_at[i]),
        largest_current=root * float(found.largest_current[i]),
        current_at=float(found.current_at[i]),
    )


def way_down(
    path: Path, passage: Passage, i: int, feed: complex, shares: Mapping[str, float]
) -> tuple[WayStep, ...]:
    """Return the way from the wire to the transmitter at one frequency: what stays adds up to its power.

    `shares` are those of the power accepted at the feed point, by the codes they go under.
    """
    watts = float(passage.arriving[i])
    steps = [WayStep(code=code, watts=share * watts) for code, share in shares.items()]

    def place(code: str, passing: float, impedance: complex) -> None:
        ratio = float(swr(impedance, path.reference))
        steps.append(WayStep(code=code, watts=passing, impedance=complex(impedance), swr=ratio))

    def tuner() -> None:
        into, tuned = float(passage.into_tuner[i]), passage.tuned
        for code, share in (("tuner coil", tuned.all_coils), ("tuner capacitor", tuned.all_capacitors)):
            steps.append(WayStep(code=code, watts=into * float(share[i])))

    place("feed", watts, feed)
    if path.at_feed:
        tuner()
        watts = float(passage.into_tuner[i])
        place("tuner", watts, complex(passage.tuned.impedance[i]))
    if path.ratio != 1.0 or path.passed != 1.0:
        lost = float(passage.transformer[i])
        steps.append(WayStep(code="transformer", watts=lost))
        watts += lost
        if path.line is not None or (path.tuner is not None and not path.at_feed):
            place("line end", watts, complex(passage.line_load[i]))
    if path.line is not None:
        into = float(passage.in_line[i])
        steps.append(WayStep(code="line", watts=into - into * float(passage.line.power_load[i])))
        if path.tuner is not None and not path.at_feed:
            place("line start", into, complex(passage.line.input_impedance[i]))
    if path.tuner is not None and not path.at_feed:
        tuner()
    place("transmitter", float(passage.given[i]), complex(passage.transmitter_impedance[i]))
    return tuple(steps)


def path_of(station: Station) -> Path | None:
    """Return what lies between feed point and transmitter, None where there is nothing."""
    path = Path(station)
    return None if path.is_bare else path


@dataclass(frozen=True, kw_only=True)
class View:
    """How a feed impedance looks from where it is judged, the tuner left as it was set at the aim."""

    path: Path
    setting: TunerSetting | None

    def __call__(self, frequency: np.ndarray, feed: np.ndarray) -> np.ndarray:
        """Return the impedance that is judged."""
        return self.path.judged(frequency, feed, self.setting)


class Feeding:
    """Says what arrives at the feed point and what is judged, and keeps the power on its way."""

    def __init__(self, path: Path, look: Callable[[np.ndarray, np.ndarray], np.ndarray]) -> None:
        self.path, self.look = path, look
        self.passage: Passage | None = None

    def __call__(self, frequency: np.ndarray, feed: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the power that arrives and the impedance that is judged."""
        self.passage = self.path.passage(frequency, feed)
        return self.passage.arriving, self.look(frequency, feed)


def feed_figures(
    path: Path,
    setting: TunerSetting | None,
    over: Passage,
    shares: Mapping[str, float],
    other_dip: tuple[float, float],
) -> FeedFigures:
    """Return what the feed does on a band.

    `over` runs over the wanted part in order, the aim last; `shares` are those at the aim; `other_dip` is
    where the SWR at the place that is not judged is least, and how much it is there.
    """
    aim, i = over, -1
    if setting is not None:
        aim, i = path.passage(over.frequency[-1:], over.feed[-1:], setting), 0
    given, arriving = float(aim.given[i]), float(aim.arriving[i])
    other = swr(path.other(over.frequency[:-1], over.feed[:-1], setting), path.reference)
    judged_at_feed = path.station.judged_at == JudgedAt.FEED
    root = np.sqrt(over.in_line)
    return FeedFigures(
        feed_watts=arriving,
        transmitter_watts=given,
        transmitter_impedance=complex(aim.transmitter_impedance[i]),
        transmitter_swr=float(aim.transmitter_swr[i]),
        share=arriving / given if given else 0.0,
        line=None if aim.line is None else line_use(aim.line, aim.line_load[i], float(aim.in_line[i]), i),
        transformer_watts=float(aim.transformer[i]),
        tuner=setting,
        worst_voltage=None if over.line is None else float(np.max(root * over.line.largest_voltage)),
        worst_current=None if over.line is None else float(np.max(root * over.line.largest_current)),
        worst_transmitter_swr=float(over.transmitter_swr[:-1].max()),
        least_watts=float(over.given[:-1].min()),
        other=OtherPlace(
            where=JudgedAt.TRANSMITTER if judged_at_feed else JudgedAt.FEED,
            dip=other_dip[0],
            dip_swr=other_dip[1],
            low_swr=float(other[0]),
            high_swr=float(other[-1]),
            worst_swr=float(other.max()),
        ),
        steps=way_down(path, aim, i, complex(over.feed[-1]), shares),
    )
