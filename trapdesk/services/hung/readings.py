"""What readings of the hung antenna should be for trials of it, and how likely each trial makes them."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType
from weakref import WeakKeyDictionary

import numpy as np

from ...design.reading_kinds import Interval, Reading
from ...engine.cables import propagation, transform
from ...engine.fits import Sweep
from ...engine.ports import terminate_entries
from ...engine.reflection import dip_of_squares
from ...engine.sampling import normal_probability
from ..trials.ensemble import Ensemble
from ..trials.nearby import Nearby, Table
from ..trials.traps import Circuit, Stage, Traps
from .latents import Latents

SWEPT = 9
"""Points of a sweep that are weighed: neighbours tell the same. [1]"""
SWEEP_SIGMA, LINE_SIGMA = 0.02, 0.01
"""How far a swept reflection of the antenna and of a bare line may be off. [1], an estimate, no source"""
MODEL_DIP, MODEL_SWR, MODEL_Z = 7e-5, 0.02, 0.02
"""What the nearby wires may be off in a dip, an SWR and an impedance, relative. [1]

Of 100 antennas a preset solved from scratch, dips are off by 1.5e-5 to 6.5e-5 (root of the mean square); the
others are estimates.
"""
WINDOW, WINDOW_POINTS = 0.012, 17
"""How far around a dip that was read trials near it are looked at, relative, and how closely."""
FAR_POINTS = 15
"""Frequencies below and above a band at which a broken antenna is looked at."""
LEAST_CHANCE = 1e-300


class ReadingUnusable(Exception):
    """A reading that says nothing of this antenna: a code, which reading, and numbers by name."""

    def __init__(self, code: str, where: str, **numbers: float) -> None:
        super().__init__(code)
        self.code, self.where, self.numbers = code, where, numbers


@dataclass(frozen=True, kw_only=True)
class Hoist:
    """What was read while it hung one way.

    `change` is how much longer than computed each wire of a side was meant to be [m]; `moves` and `tunings`
    count the moves made and the times the traps were tuned again before.
    """

    readings: tuple[Reading, ...] = ()
    change: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    moves: int = 0
    tunings: int = 0


Loads = Callable[[str, np.ndarray, list[np.ndarray], np.ndarray], list[np.ndarray]]
"""From band, frequencies, both traps' impedances (trials, n) and extra numbers to what closes the ports."""


@dataclass(frozen=True, kw_only=True)
class Altered:
    """Another antenna than the one that was meant: how its ports, its traps and its wires differ.

    `extras` is how many standard normal numbers of its own it has; `longer` turns them into changes of
    both sides' wires [m]. `ranges` names the ranges a band is looked at in and where they lie, its own first.
    """

    nearby: Nearby | None = None
    ranges: Callable[[str], Mapping[str, tuple[float, float]]] | None = None
    offset: Callable[[str, np.ndarray], np.ndarray] | None = None
    loads: Loads | None = None
    longer: Callable[[np.ndarray], dict[str, np.ndarray]] | None = None
    extras: int = 0


@dataclass(frozen=True, kw_only=True)
class _Channel:
    """One number of a reading: where to find it among the predictions, what was read and its sigma."""

    reading: int
    hoist: int
    role: str
    kind: str
    at: str
    frequency: np.ndarray
    low: np.ndarray
    high: np.ndarray
    sigma: np.ndarray

    @property
    def at_places(self) -> bool:
        """Whether it is read at frequencies of a band that are known beforehand."""
        return self.kind != "dip" and not self.kind.startswith("line")


class Forward:
    """Readings predicted for trials, each a row of standard normal numbers."""

    def __init__(
        self,
        ensemble: Ensemble,
        latents: Latents,
        hoists: Sequence[Hoist],
        stage: Stage,
        sweeps: Mapping[str, Sweep],
        altered: Altered | None = None,
        basis: np.ndarray | None = None,
        origin: np.ndarray | None = None,
    ) -> None:
        self.basis, self.origin = basis, origin
        self.ensemble, self.latents, self.hoists, self.stage = ensemble, latents, tuple(hoists), stage
        self.altered = altered or Altered()
        self.nearby = self.altered.nearby or ensemble.nearby
        self.readings = [reading for hoist in hoists for reading in hoist.readings]
        self.channels = list(self._channels(sweeps))
        self._begins = self._places()
        self._tables: dict[tuple, tuple[Table, Circuit | None]] = {}
        self._narrow = False

    @property
    def size(self) -> int:
        """Standard normal numbers a trial has."""
        own = self.latents.size if self.basis is None else self.basis.shape[0]
        return own + self.altered.extras

    def whole(self, z: np.ndarray) -> np.ndarray:
        """Return all numbers of trials of which only those along the basis were given."""
        if self.basis is None:
            return z
        own = self.basis.shape[0]
        inner = z[:, :own] @ self.basis
        return np.concatenate([inner if self.origin is None else inner + self.origin, z[:, own:]], axis=1)

    def stage_at(self, hoist: Hoist) -> Stage:
        """Return the stage the traps are at: who tunes them again does so with the traps closed."""
        return (
            replace(self.stage, tuned=True, sealed=True, sealed_first=True) if hoist.tunings else self.stage
        )

    def narrowed(self) -> Forward:
        """Return the same for trials whose dips are near those read: fewer frequencies, closer together."""
        other = object.__new__(Forward)
        other.__dict__.update(self.__dict__)
        other._tables, other._narrow = {}, True
        return other

    def _channels(self, sweeps: Mapping[str, Sweep]):  # noqa: ANN202 - yields channels
        number = -1
        for h, hoist in enumerate(self.hoists):
            for reading in hoist.readings:
                number += 1
                role = reading.subject
                at = str(reading.options.get("at", "radio"))
                yield from self._of(reading, number, h, role, at, sweeps)

    def _of(self, reading: Reading, number: int, h: int, role: str, at: str, sweeps: Mapping[str, Sweep]):  # noqa: ANN202
        def channel(kind: str, frequency, low, high, sigma) -> _Channel:  # noqa: ANN001
            arrays = (np.atleast_1d(np.asarray(x)) for x in (frequency, low, high, sigma))
            f, a, b, s = arrays
            return _Channel(
                reading=number, hoist=h, role=role, kind=kind, at=at, frequency=f, low=a, high=b, sigma=s
            )

        value = reading.value
        if reading.what == "dip":
            assert isinstance(value, float)
            where = math.log(value)
            sigma = math.hypot(reading.doubt.of(value) / value, MODEL_DIP)
            yield channel("dip", value, where, where, sigma)
        elif reading.what == "swr":
            assert isinstance(value, Interval) and reading.frequency is not None
            known = max(value.low, 1.0) if math.isinf(value.high) else (value.low + value.high) / 2
            sigma = math.hypot(reading.doubt.of(known) / known, MODEL_SWR)
            low = math.log(value.low)
            high = math.inf if math.isinf(value.high) else math.log(value.high)
            yield channel("swr", reading.frequency, low, high, sigma)
        elif reading.what == "z":
            assert isinstance(value, complex) and reading.frequency is not None
            sigma = math.hypot(reading.doubt.of(abs(value)), MODEL_Z * abs(value))
            yield channel("z", reading.frequency, value, value, sigma)
        elif reading.what == "sweep" and reading.subject == "line":
            swept = sweeps[str(value)]
            f, wave = _picked(swept, 0.0, math.inf)
            kind = f"line {reading.options.get('end', 'open')} {swept.reference}"
            yield channel(kind, f, wave, wave, LINE_SIGMA)
        elif reading.what == "sweep":
            swept = sweeps[str(value)]
            band = dict(self.ensemble.design.bands.items())[role]
            low, high = band.low * 0.97, band.high * 1.03
            f, wave = _picked(swept, low, high)
            if f.size < 3:
                ends = {"from_hz": float(swept.frequency[0]), "to_hz": float(swept.frequency[-1])}
                raise ReadingUnusable("sweep_of_another_band", reading.name, low_hz=low, high_hz=high, **ends)
            yield channel(f"wave {swept.reference}", f, wave, wave, math.hypot(SWEEP_SIGMA, MODEL_Z / 2))

    # Predictions

    def _table(self, key: tuple, role: str, frequency: np.ndarray) -> tuple[Table, Circuit | None]:
        if key not in self._tables:
            table = _kept(self.nearby, self._ranges(role), frequency)
            if self.altered.offset is not None:
                coefficients = table.coefficients.copy()
                offset = np.ascontiguousarray(self.altered.offset(role, frequency).ravel()).view(float)
                coefficients[0] += offset
                table = Table(frequency=frequency, coefficients=coefficients)
            of_traps = self.ensemble.of_traps
            self._tables[key] = table, None if of_traps is None else of_traps.circuit(frequency)
        return self._tables[key]

    def _ranges(self, role: str) -> Mapping[str, tuple[float, float]]:
        return {role: (0.0, math.inf)} if self.altered.ranges is None else self.altered.ranges(role)

    def _grid(self, role: str, channel: _Channel) -> np.ndarray:
        if self._narrow:
            f = channel.frequency[0]
            return np.linspace(f * (1 - WINDOW), f * (1 + WINDOW), WINDOW_POINTS)
        pieces = [ends for piece, ends in self._ranges(role).items() if piece != role]
        near = np.asarray(self.ensemble.grids[role].frequency)
        if not pieces:
            return near
        found = [near[::2], near[-1:]]
        found += [np.linspace(*ends, FAR_POINTS) for ends in pieces]
        return np.unique(np.concatenate(found))

    def feed(self, role: str, key: tuple, frequency: np.ndarray, hoist: Hoist, z: np.ndarray) -> np.ndarray:
        """Return feed impedances (trials, frequencies) while it hung as at a hoist."""
        table, circuit = self._table(key, role, frequency)
        features, traps = self._there(hoist, z)
        entries = Nearby.entries(table, features)
        of_traps = self.ensemble.of_traps
        if traps is None or circuit is None or of_traps is None:
            return entries[:, 0]
        loads = of_traps.impedances(circuit, traps)
        if self.altered.loads is not None:
            loads = self.altered.loads(role, frequency, loads, z[:, self.latents.size :])
        return terminate_entries(*(entries[:, k] for k in range(6)), *loads)[0]

    def _there(self, hoist: Hoist, z: np.ndarray) -> tuple[np.ndarray, Traps | None]:
        """Return terms of the port polynomials and traps of trials at a hoist; the last asked for is kept."""
        if getattr(self, "_last", (None, None))[0] is z and self._last[1] is hoist:
            return self._last[2]
        count = z.shape[0]
        draws = self.latents.draws(z, hoist.tunings)
        change = self.latents.change(z, hoist.change, hoist.moves)
        if self.altered.longer is not None:
            for wire, more in self.altered.longer(z[:, self.latents.size :]).items():
                change[wire] = change[wire] + more
        features = self.nearby.features(self.ensemble.places(draws, count, change), count)
        traps = self.ensemble.traps(draws, self.stage_at(hoist), count)
        self._last = (z, hoist, (features, traps))
        return features, traps

    def _seen(self, feed: np.ndarray, frequency: np.ndarray, at: str, z: np.ndarray) -> np.ndarray:
        """Return the impedance at the end of the line it is read at; a tuner is off."""
        path = self.ensemble.path
        if path is None:
            return feed
        load = feed / path.ratio
        if at == "feed" or path.line is None:
            return load
        line, length = self.latents.line(z, path.line, path.length)
        return transform(*propagation(line, frequency), length, np.maximum(load.real, 0.0) + 1j * load.imag)

    def residuals(self, z: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return for trials how far what they would read is from what was read, in sigma, and the log chance.

        The first (trials, numbers) is for steps towards what was read: an interval counts from its middle, a
        reading off the scale only where it is not reached. The second (trials,) is exact.
        """
        z = self.whole(z)
        count = z.shape[0]
        columns, chance = [], np.zeros(count)
        feeds: dict[tuple[int, str], np.ndarray] = {}
        reference = self.ensemble.design.station.reference
        for number, channel in enumerate(self.channels):
            hoist, f = self.hoists[channel.hoist], channel.frequency
            if channel.kind.startswith("line"):
                values = self._line_waves(channel, z)
            elif channel.kind == "dip":
                grid = self._grid(channel.role, channel)
                key = ("dip", channel.role, float(f[0]) if self._narrow else 0.0)
                seen = self._seen(self.feed(channel.role, key, grid, hoist, z), grid, channel.at, z)
                values = np.log(dips(grid, squared(seen, reference)))[:, None]
            else:
                group = (channel.hoist, channel.role)
                if group not in feeds:
                    feeds[group] = self._together(group, hoist, z)
                begin = self._begins[number]
                feed = feeds[group][:, begin : begin + f.size]
                values = _read(channel, self._seen(feed, f, channel.at, z), reference)
            if channel.kind == "swr":
                off, log = _of_interval(values, channel)
                columns.append(off)
                chance += log[:, 0]
                continue
            off = (values - channel.low) / channel.sigma
            both = [off.real, off.imag] if np.iscomplexobj(off) else [off]
            columns += both
            chance -= 0.5 * sum((part**2).sum(axis=1) for part in both)
        found = np.concatenate(columns, axis=1) if columns else np.zeros((count, 0))
        # What is nowhere near any number tells nothing finer than that.
        return np.clip(np.nan_to_num(found, nan=1e6), -1e6, 1e6), np.nan_to_num(chance, nan=-1e12)

    def _together(self, group: tuple[int, str], hoist: Hoist, z: np.ndarray) -> np.ndarray:
        """Return feed impedances at all frequencies read on one band in one hoist, one after the other."""
        mine = [c for c in self.channels if (c.hoist, c.role) == group and c.at_places]
        frequency = np.concatenate([channel.frequency for channel in mine])
        return self.feed(group[1], ("at", *group), frequency, hoist, z)

    def _places(self) -> list[int]:
        """Return where each channel's frequencies begin among those of its band and hoist."""
        used: dict[tuple[int, str], int] = {}
        found = []
        for channel in self.channels:
            group = (channel.hoist, channel.role)
            found.append(used.get(group, 0))
            if channel.at_places:
                used[group] = found[-1] + channel.frequency.size
        return found

    def owners(self) -> list[int]:
        """Return which reading each column of the residuals belongs to."""
        found = []
        for channel in self.channels:
            times = 2 if np.iscomplexobj(channel.low) else 1
            found += [channel.reading] * channel.frequency.size * times
        return found

    def _line_waves(self, channel: _Channel, z: np.ndarray) -> np.ndarray:
        path = self.ensemble.path
        _, end, reference = channel.kind.split()
        if path is None or path.line is None:
            raise ReadingUnusable("no_line", "line.sweep")
        line, length = self.latents.line(z, path.line, path.length)
        load = np.inf if end == "open" else 0.0
        seen = transform(
            *propagation(line, channel.frequency), length, np.full(channel.frequency.shape, load)
        )
        return (seen - float(reference)) / (seen + float(reference))


def _picked(swept: Sweep, low: float, high: float) -> tuple[np.ndarray, np.ndarray]:
    inside = np.flatnonzero((swept.frequency >= low) & (swept.frequency <= high))
    if inside.size > SWEPT:
        inside = inside[np.linspace(0, inside.size - 1, SWEPT).round().astype(int)]
    return swept.frequency[inside], swept.reflection[inside]


def _read(channel: _Channel, seen: np.ndarray, reference: float) -> np.ndarray:
    if channel.kind == "z":
        return seen
    if channel.kind == "swr":
        size = np.sqrt(np.minimum(squared(seen, reference), 1 - 1e-9))
        return np.log((1 + size) / (1 - size))
    r0 = float(channel.kind.split()[1])
    return (seen - r0) / (seen + r0)


def _of_interval(values: np.ndarray, channel: _Channel) -> tuple[np.ndarray, np.ndarray]:
    """Return how far values are from an interval, for steps, and the log chance of it."""
    low, high, sigma = channel.low, channel.high, channel.sigma
    if np.all(low == high):
        off = (values - low) / sigma
        return off, -0.5 * off**2
    above = 1.0 if np.isinf(high[0]) else normal_probability((high - values) / sigma)
    chance = np.maximum(above - normal_probability((low - values) / sigma), LEAST_CHANCE)
    if np.isinf(high[0]):
        return np.minimum(values - low, 0.0) / sigma, np.log(chance)
    wide = np.hypot(sigma, (high - low) / math.sqrt(12))
    off = (values - (low + high) / 2) / wide
    # Far outside, the chance of an interval falls like that of its nearer end.
    far = np.maximum(np.maximum(low - values, values - high) / sigma, 0.0)
    return off, np.where(far > 7, -0.5 * far**2, np.log(chance))


def squared(impedance: np.ndarray, reference: float) -> np.ndarray:
    """Return the squared reflection of impedances; those that give power count as taking none."""
    real, square = np.maximum(impedance.real, 0.0), impedance.imag**2
    return ((real - reference) ** 2 + square) / ((real + reference) ** 2 + square)


def dips(frequency: np.ndarray, reflection: np.ndarray) -> np.ndarray:
    """Return where squared reflections (trials, frequencies) are least, by a parabola through three."""
    trial = np.arange(reflection.shape[0])
    at = np.clip(np.argmin(reflection, axis=1), 1, frequency.size - 2)
    f0, f1, f2 = (frequency[at + k] for k in (-1, 0, 1))
    g0, g1, g2 = (reflection[trial, at + k] for k in (-1, 0, 1))
    # Beyond its three points the parabola still tells which way the dip lies.
    return dip_of_squares((f0, f1, f2), (g0, g1, g2), beyond=1.0)[0]


_TABLES: WeakKeyDictionary[Nearby, dict] = WeakKeyDictionary()
MOST_KEPT = 400
"""Tables kept with a wire: the same frequencies are asked for again by every kind of antenna."""


def _kept(nearby: Nearby, ranges: Mapping[str, tuple[float, float]], frequency: np.ndarray) -> Table:
    kept = _TABLES.setdefault(nearby, {})
    key = (*ranges, frequency.tobytes())
    if key not in kept:
        if len(kept) >= MOST_KEPT:
            kept.clear()
        kept[key] = piecewise(nearby, ranges, frequency)
    return kept[key]


def piecewise(nearby: Nearby, ranges: Mapping[str, tuple[float, float]], frequency: np.ndarray) -> Table:
    """Return the ports' polynomial at frequencies, each from the range it lies in; the first also beyond."""
    bands = list(ranges)
    if len(bands) == 1:
        return nearby.table(bands[0], frequency)
    owner = np.zeros(frequency.size, int)
    # The first range is laid over the others, so it has the last word.
    for i, band in reversed(list(enumerate(bands))):
        low, high = ranges[band]
        owner[(frequency >= low) & (frequency <= high)] = i
    coefficients = np.empty((len(nearby.terms), 6 if nearby.has_trap else 1, frequency.size), complex)
    for i, band in enumerate(bands):
        mine = owner == i
        if mine.any():
            part = nearby.table(band, frequency[mine]).coefficients.view(complex)
            coefficients[:, :, mine] = part.reshape(len(nearby.terms), -1, int(mine.sum()))
    flat = np.ascontiguousarray(coefficients.reshape(len(nearby.terms), -1))
    return Table(frequency=frequency, coefficients=flat.view(float))
