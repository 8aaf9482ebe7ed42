"""What a tuner can match: a map of loads and their loss, what runs short, the width before retuning."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ...design.station import TUNER_NETWORKS, Tuner
from ...engine.matching import reach
from ...engine.networks import NETWORKS
from ...engine.reflection import swr
from ..antenna.feed_point import FeedPoint
from ..antenna.figures import Figures
from ..antenna.response import MARGIN
from ..antenna.solve import wanted_frequencies
from ..feed.path import Path
from ..feed.tuner import TunerSetting, limits_of, tune_all, tune_at

ROOM = 2.5
"""How far a map reaches beyond the antenna's own loads, as a factor."""
LEAST_ROOM = 4.0
"""How far it reaches at least, in parts of what the tuner is to show."""
COLUMNS, LINES = 61, 21
COARSE = 13
GROWTHS = 4
SHOWN_OUT = 0.15
"""Part of a map that is to lie out of reach, so that the border is on it; it grows so often for that."""
WIDTH_POINTS = 201


@dataclass(frozen=True, kw_only=True)
class ReachMap:
    """The loads a tuner can match at one frequency, over resistance (r,) and reactance (x,), rising.

    `loss` (x, r) in dB, NaN where the load is out of reach; `own` is the antenna over the wanted part as the
    tuner sees it, `aim` that at the aim; `setting` the tuner there.
    """

    frequency: float
    resistance: np.ndarray
    reactance: np.ndarray
    loss: np.ndarray
    own: np.ndarray
    aim: complex
    setting: TunerSetting

    @property
    def share(self) -> float:
        """The part of the map that is in reach."""
        return float(np.mean(np.isfinite(self.loss)))


def path_with_tuner(figures: Figures) -> Path:
    """Return what lies between feed point and transmitter, a tuner at the transmitter if there is none."""
    station = figures.design.station
    return Path(station if station.tuner is not None else replace(station, tuner=Tuner()))


def reach_map(figures: Figures, role: str, columns: int = COLUMNS, lines: int = LINES) -> ReachMap:
    """Return the loads a design's tuner can match at the aim of a band, around the antenna's own."""
    path, point = path_with_tuner(figures), FeedPoint(figures)
    band = getattr(figures.design.bands, role)
    frequency = np.append(wanted_frequencies(band), band.target)
    loads = path.tuner_load(frequency, point.impedance(role, frequency))
    own, aim = loads[:-1], complex(loads[-1])
    right = max(ROOM * float(own.real.max()), LEAST_ROOM * path.wanted)
    top = max(ROOM * float(np.abs(own.imag).max()), LEAST_ROOM * path.wanted)
    for _ in range(GROWTHS):
        coarse = _axes(right, top, COARSE, COARSE)
        out = np.isnan(loss_of(path.tuner, band.target, *coarse, path.wanted))
        if np.mean(out) >= SHOWN_OUT:
            break
        right, top = 2 * right, 2 * top
    resistance, reactance = _axes(right, top, columns, lines)
    return ReachMap(
        frequency=band.target,
        resistance=resistance,
        reactance=reactance,
        loss=loss_of(path.tuner, band.target, resistance, reactance, path.wanted),
        own=own,
        aim=aim,
        setting=tune_at(path.tuner, band.target, aim, path.wanted),
    )


def _axes(right: float, top: float, columns: int, lines: int) -> tuple[np.ndarray, np.ndarray]:
    """Return resistances in the middle of the columns, and reactances from bottom to top."""
    return right * (np.arange(columns) + 0.5) / columns, top * np.linspace(-1.0, 1.0, lines)


def loss_of(
    tuner: Tuner, frequency: float, resistance: np.ndarray, reactance: np.ndarray, wanted: float
) -> np.ndarray:
    """Return the least loss (x, r) in dB with which a tuner matches each load, NaN for those out of reach."""
    found = [
        reach(
            NETWORKS[name],
            frequency,
            resistance,
            reactance,
            limits_of(tuner, NETWORKS[name]),
            wanted=wanted,
            coil_q=tuner.coil.q,
            capacitor_q=tuner.capacitor.q,
        ).loss_db
        for name in TUNER_NETWORKS[tuner.network]
    ]
    return np.fmin.reduce(found)


def reading(found: ReachMap, load: complex) -> TunerSetting:
    """Return what the tuner of a map does with one load: its setting, or the nearest and what is short."""
    return tune_at(found.setting.tuner, found.frequency, load, found.setting.wanted)


@dataclass(frozen=True, kw_only=True)
class TunerAnswer:
    """What a tuner does on a band: its settings at the edges of the wanted part and at the aim.

    `width` is the range around the aim in Hz in which the transmitter sees an SWR within the limit with the
    setting left as it is at the aim; an end is None where it lies further out than the band's surroundings.
    """

    role: str
    aim: TunerSetting
    over: tuple[TunerSetting, ...]
    width: tuple[float | None, float | None] | None


def tuner_answer(figures: Figures, role: str) -> TunerAnswer:
    """Return the settings of a design's tuner on a band, and how far each goes before retuning."""
    path, point = path_with_tuner(figures), FeedPoint(figures)
    band = getattr(figures.design.bands, role)
    edges = [edge for edges in band.segments_wanted for edge in edges]
    frequency = np.array([band.target, *edges])
    loads = path.tuner_load(frequency, point.impedance(role, frequency))
    aim, *over = tune_all(path.tuner, frequency, loads, path.wanted)
    return TunerAnswer(role=role, aim=aim, over=tuple(over), width=_width(figures, path, point, role, aim))


def _width(
    figures: Figures, path: Path, point: FeedPoint, role: str, setting: TunerSetting
) -> tuple[float | None, float | None] | None:
    band, limit = getattr(figures.design.bands, role), figures.design.station.swr_limit
    ends = (band.low * (1 - MARGIN), band.high * (1 + MARGIN))
    found: list[float | None] = []
    for end in ends:
        frequency = np.linspace(band.target, end, WIDTH_POINTS)
        seen = path.transmitter_sees(frequency, point.impedance(role, frequency), setting)
        ratio = swr(seen, path.reference)
        over = ratio > limit
        if over[0]:
            return None
        first = int(np.argmax(over))
        if not over[first]:
            found.append(None)
            continue
        part = (limit - ratio[first - 1]) / (ratio[first] - ratio[first - 1])
        found.append(float(frequency[first - 1] + part * (frequency[first] - frequency[first - 1])))
    return found[0], found[1]
