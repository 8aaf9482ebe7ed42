"""Is a tuner worth it: four ways to run each band side by side, and the cheapest improvement."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum

import numpy as np

from ...design.design import MODES, Design, with_value
from ...design.fields import SOLVE
from ...design.station import Tuner, TunerPlace
from ...errors import NoAnswer
from ..antenna.feed_point import FeedPoint
from ..antenna.figures import Figures
from ..antenna.response import Behaviour, behave
from ..antenna.solve import solve
from ..feed.path import Passage, Path

POINTS = 9
"""Points over each wanted segment."""
WORTH_WHILE = 0.1
"""Gain in watts radiated from which on an improvement counts, relative; half a decibel, an estimate."""


class Way(StrEnum):
    """A way to run a band."""

    AS_IS = "as it is"
    AT_TRANSMITTER = "tuner at the transmitter"
    AT_FEED = "tuner at the feed point"
    RECUT = "wires re-cut"


@dataclass(frozen=True, kw_only=True)
class WayFigures:
    """One way to run one band, over its wanted part: watts as means by weight, the rest at its worst.

    `hottest` is what takes most on average in the mode: trap (each), line, transformer, tuner coil, tuner
    capacitor, or nothing; `hottest_watts` how much.
    """

    way: Way
    radiated: float
    made: float
    worst_swr: float
    least_given: float
    hottest: str
    hottest_watts: float
    matched: bool

    @property
    def share(self) -> float:
        """Watts radiated of watts made."""
        return self.radiated / self.made if self.made else 0.0


@dataclass(frozen=True, kw_only=True)
class Worth:
    """The table: by band role the ways there are, and the cheapest that helps.

    `advice` is the way to take, AS_IS when none is worth it; `gain` what it adds to the watts radiated on the
    band that gains most, relative, `gaining` that band. `typical_transmitter` says that the transmitter's own
    table is not given and a typical one was taken; `no_recut` is the code of why no wires are re-cut.
    """

    bands: dict[str, tuple[WayFigures, ...]]
    advice: Way
    gain: float
    gaining: str
    typical_transmitter: bool
    standing_in: bool
    no_recut: str


def worth(figures: Figures) -> Worth:
    """Return the four ways for every band; re-cutting costs a solve of the wires, all else none."""
    design = figures.design
    station = design.station
    tuner = station.tuner or Tuner()
    bare = replace(station, tuner=None)
    stations = {
        Way.AS_IS: bare,
        Way.AT_TRANSMITTER: replace(station, tuner=replace(tuner, place=TunerPlace.TRANSMITTER)),
        Way.AT_FEED: replace(station, tuner=replace(tuner, place=TunerPlace.FEED)),
    }
    ways = {way: (figures, Path(one, typical_transmitter=True)) for way, one in stations.items()}
    recut, why = _recut(figures)
    if recut is not None:
        ways[Way.RECUT] = (recut, Path(bare, typical_transmitter=True))
    bands = {}
    for role in figures.bands:
        measured: dict[int, Behaviour] = {}
        rows = []
        for way, (of, path) in ways.items():
            if id(of) not in measured:
                measured[id(of)] = _behaviour(of, role)
            rows.append(_row(way, design, role, path, measured[id(of)]))
        bands[role] = tuple(rows)
    advice, gain, gaining = _advice(bands)
    return Worth(
        bands=bands,
        advice=advice,
        gain=gain,
        gaining=gaining,
        typical_transmitter=station.transmitter is None or not station.transmitter.table,
        standing_in=station.tuner is None,
        no_recut=why,
    )


def _recut(figures: Figures) -> tuple[Figures | None, str]:
    """Return the figures with both wires solved, or why there are none."""
    design = figures.design
    lengths = design.antenna.lengths
    keys = ["inner"] if lengths.end is None or design.bands.upper is None else ["inner", "end"]
    if lengths.end is not None and design.bands.upper is None:
        keys = ["end"]
    if all(getattr(lengths, key) is SOLVE for key in keys):
        return None, "already_cut_for_the_aims"
    plain = replace(
        design, station=replace(design.station, line=None, tuner=None, choke=None, transmitter=None)
    )
    for key in keys:
        plain = with_value(plain, f"antenna.lengths.{key}", SOLVE)
    try:
        return solve(plain), ""
    except NoAnswer as error:
        return None, error.code


def _points(design: Design, role: str) -> tuple[np.ndarray, np.ndarray]:
    """Return frequencies over the wanted part and the weight of each, which add to 1."""
    band = getattr(design.bands, role)
    weights = np.repeat([part.weight for part in band.segments], POINTS)
    frequency = np.concatenate([np.linspace(part.low, part.high, POINTS) for part in band.segments])
    return frequency, weights / weights.sum()


def _behaviour(figures: Figures, role: str) -> Behaviour:
    frequency, _ = _points(figures.design, role)
    trap = FeedPoint(figures).trap
    return behave(figures.ports[role].at(frequency), trap, figures.design.station.reference, 1.0)


def _row(way: Way, design: Design, role: str, path: Path, antenna: Behaviour) -> WayFigures:
    _, weight = _points(design, role)
    passage = path.passage(antenna.frequency, antenna.impedance)
    name, watts = _hottest(passage, antenna, MODES[design.station.mode].mean)
    return WayFigures(
        way=way,
        radiated=float(np.sum(weight * passage.arriving * antenna.sky)),
        made=float(np.sum(weight * passage.given)),
        worst_swr=float(passage.transmitter_swr.max()),
        least_given=float(passage.given.min()),
        hottest=name,
        hottest_watts=watts,
        matched=passage.tuned is None or bool(passage.tuned.matched.all()),
    )


def _hottest(passage: Passage, antenna: Behaviour, mean: float) -> tuple[str, float]:
    heat = {"trap": passage.arriving * antenna.trap / 2, "transformer": passage.transformer}
    if passage.line is not None:
        heat["line"] = passage.in_line * (1 - passage.line.power_load)
    if passage.tuned is not None:
        heat["tuner coil"] = passage.into_tuner * passage.tuned.coil_share
        heat["tuner capacitor"] = passage.into_tuner * passage.tuned.capacitor_share
    name = max(heat, key=lambda one: float(heat[one].max()))
    watts = mean * float(heat[name].max())
    return (name, watts) if watts > 0 else ("nothing", 0.0)


CHEAPEST = (Way.RECUT, Way.AT_TRANSMITTER, Way.AT_FEED)
"""What helps, the cheapest first: folding wire costs nothing, a tuner at the mast the most."""


def _advice(bands: dict[str, tuple[WayFigures, ...]]) -> tuple[Way, float, str]:
    """Return the cheapest way that helps: more watts radiated by a margin, nothing made worse by one."""
    by_way = {
        way: {role: row for role, rows in bands.items() for row in rows if row.way is way} for way in Way
    }
    now = by_way[Way.AS_IS]
    best = (Way.AS_IS, 0.0, "")
    for way in CHEAPEST:
        there = by_way[way]
        if not there:
            continue
        gains = {role: there[role].radiated / max(now[role].radiated, 1e-9) - 1 for role in now}
        role = max(gains, key=lambda one: gains[one])
        # The next dearer way must beat the cheaper one by as much again.
        if gains[role] > WORTH_WHILE + best[1] and min(gains.values()) > -WORTH_WHILE:
            best = (way, gains[role], role)
    return best
