"""What may be broken or mixed up: the same readings held against other antennas than the one that was meant.

Each fault is what the ports are closed with, or a wire solved anew; how likely the readings are under it,
over all that may vary, stands against how likely they are of a sound antenna. Likelihoods are those around
the most likely antenna of each kind (Laplace's approximation, from memory).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from ...design.design import Design
from ...design.reading_kinds import Reading
from ...engine.fits import Sweep
from ...engine.ground import C0
from ...engine.mesh import Side, plan_side
from ...engine.ports import Ports, chebyshev_nodes, polynomial_weights
from ...engine.sampling import chance_above, normal_probability
from ...engine.soils import GroundKind
from ...engine.wire import BentWire, Wire, plan, solve_ports, solve_whole
from ..antenna.response import MARGIN, WIDE
from ..trap.sweep_suspects import SLIPS, mended_by
from ..trials.ensemble import Ensemble
from ..trials.nearby import Nearby
from .latents import LINE, Latents
from .readings import Altered, Forward, Hoist
from .updating import STEPS, latents_of, peak_of, stage_of

NODES, FAR_NODES = 11, 6
FAR = {"below": (WIDE[0], 1 - MARGIN), "above": (1 + MARGIN, WIDE[1])}
"""How far beyond a band it is looked at: as shares of its lower and of its upper edge. [1]"""
SHORT, OPEN = 0.3, 1e7
"""What a shorted and an open trap are to the wire. [ohm]"""
STUB = 0.05
"""What is left of an end wire that is missing. [m]"""
PIECES = (0.1, 0.25, 0.4, 0.55, 0.7, 0.85)
"""Shares of an end wire that may be left of it. [1]"""
LOOSE = 0.08
"""How far the place of a break may be from those solved, one sigma, as a share of the end wire. [1]"""
OFF_BY = (1.0, -1.0, 0.3048, -0.3048)
"""By how much both wires of a kind may be off where a unit was slipped: a metre, a foot. [m]"""
SPREAD = 2.0
"""How many times as far off as believed a sound antenna may be. [1], a choice of ours

Beliefs are estimates: who is sent to open a sound trap loses more than who folds wire for a poor one.
"""
NAMED = 20.0
"""How many times likelier the readings must be of a fault than of a sound antenna for it to be named."""
BESIDE = 20.0
"""A fault that is less than this many times less likely than the first is told with it."""
CLOSE = 0.2
"""How near a band, by the log of frequency, what is nearer to it than to its own is taken for its own."""
ATTEMPTS = 4
"""Stretches in which the likeliest antenna with a fault is sought; it may be given up after each."""
RESTS, FALLS = 0.02, 0.3
"""A search rests once a stretch gains less than this, or this share of what is still missed. [1]"""
WELL = 0.3
"""Chance of the readings, of the likeliest sound antenna, above which nothing else is looked for. [1]"""
UNLIKELY = 1e-7
"""Chance of the readings, of any antenna known here, below which none of them is believed."""


@dataclass(frozen=True, kw_only=True)
class Suspect:
    """A fault: its code, the log of how many times likelier than a sound antenna it makes the readings."""

    code: str
    log_ratio: float
    misfit: float

    @property
    def ratio(self) -> float:
        """How many times likelier than a sound antenna; what is beyond every number is told as 1e300."""
        return math.exp(min(self.log_ratio, 690.0))


@dataclass(frozen=True, kw_only=True)
class Diagnosis:
    """Whether something is broken: the faults named, the likeliest first, and all that were looked at.

    `healthy_misfit` is the sum of squares by which the readings miss the likeliest sound antenna; `misfits`
    tells that none known here fits either.
    """

    named: tuple[Suspect, ...]
    looked_at: tuple[Suspect, ...]
    healthy_misfit: float
    misfits: bool


Shape = Callable[["Bench"], Altered | None]


def _extra(z: np.ndarray, low: float, high: float) -> np.ndarray:
    """Return numbers anywhere between two ends, (trials, 1)."""
    return (low + (high - low) * normal_probability(z))[:, None]


def _closed(first: float | None, second: float | None) -> Shape:
    """Return the fault of traps that are something else than traps; None leaves one as it is."""

    def make(bench: Bench) -> Altered:
        def loads(role: str, frequency: np.ndarray, own: list[np.ndarray], z: np.ndarray) -> list[np.ndarray]:
            given = zip((first, second), own, strict=True)
            return [load if value is None else np.full_like(load, value) for value, load in given]

        return bench.altered(loads=loads)

    return make


def _shifted(both: bool, low: float, high: float, q: tuple[float, float] | None = None) -> Shape:
    """Return the fault of one or both traps off by a share of their resonance, and of their Q."""

    def make(bench: Bench) -> Altered:
        of_traps = bench.ensemble.of_traps
        assert of_traps is not None

        def loads(role: str, frequency: np.ndarray, own: list[np.ndarray], z: np.ndarray) -> list[np.ndarray]:
            shift = _extra(z[:, 0], low, high)
            more = 2j * np.pi * frequency * of_traps.trap.capacitance * (1 / (1 + shift) ** 2 - 1)
            if q is not None:
                # Water is a leak across the trap: of the size that leaves this share of its Q.
                left = np.exp(_extra(z[:, 1], math.log(q[0]), math.log(q[1])))
                more = (
                    more
                    + (1 / left - 1) / of_traps.trap.q * 2 * np.pi * frequency * of_traps.trap.capacitance
                )
            found = [1 / (1 / own[0] + more), own[1]]
            return [found[0], 1 / (1 / own[1] + more)] if both else found

        return bench.altered(loads=loads, extras=2 if q is not None else 1)

    return make


def _sides(change: Callable[[float, float], tuple[tuple[float, float], tuple[float, float]] | None]) -> Shape:
    """Return the fault of other wires: from inner and end as meant to those of both sides."""

    def make(bench: Bench) -> Altered | None:
        assert bench.ensemble.wire.end is not None
        lengths = change(bench.ensemble.wire.inner, bench.ensemble.wire.end)
        return None if lengths is None else bench.with_sides(lengths)

    return make


def _slip(wire: str, by: float) -> Shape:
    def change(inner: float, end: float) -> tuple[tuple[float, float], tuple[float, float]] | None:
        side = (inner + by, end) if wire == "inner" else (inner, end + by)
        return None if min(side) < 0.3 else (side, side)

    return _sides(change)


def _missing(bench: Bench) -> Altered | None:
    altered = _sides(lambda inner, end: ((inner, STUB), (inner, end)))(bench)
    opened = _closed(OPEN, None)(bench)
    return None if altered is None else replace(altered, loads=opened.loads)


def _broken(left: float) -> Shape:
    def make(bench: Bench) -> Altered | None:
        end = bench.ensemble.wire.end
        assert end is not None
        altered = _sides(lambda inner, whole: ((inner, max(left * whole, STUB)), (inner, whole)))(bench)
        if altered is None:
            return None

        def longer(z: np.ndarray) -> dict[str, np.ndarray]:
            # Half as much on both sides does to the even currents what all of it does on one.
            return {"end": LOOSE / 2 * end * z[:, 0]}

        return replace(altered, longer=longer, extras=1)

    return make


FAULTS: dict[str, dict[str, Shape]] = {
    "trap_shorted_one": {"": _closed(SHORT, None)},
    "trap_shorted_both": {"": _closed(SHORT, SHORT)},
    "trap_open_one": {"": _closed(OPEN, None)},
    "trap_open_both": {"": _closed(OPEN, OPEN)},
    "trap_open_and_shorted": {"": _closed(OPEN, SHORT)},
    "end_wire_missing": {"": _missing},
    "end_wire_broken": {f"{share:g}": _broken(share) for share in PIECES},
    "wires_swapped_both": {"": _sides(lambda inner, end: ((end, inner), (end, inner)))},
    "wires_swapped_one": {"": _sides(lambda inner, end: ((end, inner), (inner, end)))},
    "water_one": {"": _shifted(False, -0.06, -0.01, (0.05, 0.6))},
    "water_both": {"": _shifted(True, -0.06, -0.01, (0.05, 0.6))},
    "unequal_traps": {"low": _shifted(False, -0.08, -0.01), "high": _shifted(False, 0.01, 0.08)},
    "traps_off": {"low": _shifted(True, -0.08, -0.01), "high": _shifted(True, 0.01, 0.08)},
    "slipped_inner": {f"{by:g}": _slip("inner", by) for by in OFF_BY},
    "slipped_end": {f"{by:g}": _slip("end", by) for by in OFF_BY},
}
"""Every fault that is looked for, each in one or several shapes."""


class Bench:
    """An ensemble's antenna looked at far beyond its bands, and other antennas made of it."""

    def __init__(self, ensemble: Ensemble) -> None:
        self.ensemble = ensemble
        self._bands = dict(ensemble.design.bands.items())

    @cached_property
    def nearby(self) -> Nearby:
        """Ports of every wire near the computed one, over the bands and far beyond."""
        wire, ranges, ports = self.ensemble.wire, {}, dict(self.ensemble.figures.ports)
        for role, band in self._bands.items():
            counts = plan(wire, band.target)
            for where, (low, high) in self.ranges(role).items():
                ranges[where] = (low, high)
                if where == role:
                    continue
                nodes = chebyshev_nodes(low, high, FAR_NODES)
                ports[where] = solve_ports(wire, nodes, counts, band.target, power=False)
        steps = self.ensemble.nearby.step
        return Nearby(self.ensemble.design, wire, ports, ranges, steps)

    def ranges(self, role: str) -> dict[str, tuple[float, float]]:
        """Return the ranges a band is looked at in, its own first."""
        band = self._bands[role]
        edge = {"below": (band.low, band.low), "above": (band.high, band.high)}
        far = {
            f"{role} {where}": (shares[0] * edge[where][0], shares[1] * edge[where][1])
            for where, shares in FAR.items()
        }
        return {role: (band.low * (1 - MARGIN), band.high * (1 + MARGIN))} | far

    def altered(self, **more: object) -> Altered:
        """Return the antenna looked at far beyond its bands, with a difference."""
        return Altered(nearby=self.nearby, ranges=self.ranges, **more)  # type: ignore[arg-type]

    def _nodes(self, role: str) -> np.ndarray:
        band = self._bands[role]
        return chebyshev_nodes(band.low * WIDE[0] * 0.99, band.high * WIDE[1] * 1.01, NODES)

    def _solved(self, sides: tuple[tuple[float, float], tuple[float, float]]) -> dict[str, Ports]:
        """Return the ports of a wire of two sides of inner and end each, on a coarse mesh."""
        wire, found = self.ensemble.wire, {}
        for role, band in self._bands.items():
            nodes = self._nodes(role)
            if sides[0] == sides[1]:
                other = self._hung(wire, *sides[0])
                counts = plan(other, band.target)
                found[role] = solve_ports(other, nodes, counts, band.target, extrapolate=False, power=False)
                continue
            bent = self._bent(wire, sides)
            counts = tuple(plan_side(side, C0 / band.target) for side in bent.sides)
            found[role] = solve_whole(bent, nodes, counts, band.target, extrapolate=False, power=False)
        return found

    def _hung(self, wire: Wire, inner: float, end: float) -> Wire:
        assert wire.end is not None
        moved = self.ensemble.nearby.moved({"inner": inner - wire.inner, "end": end - wire.end})
        lowest = moved.end_height
        # Wires too long for where they hang are taken to lie as low as can be computed with.
        return (
            moved
            if wire.ground.kind is GroundKind.SPACE or lowest > STUB
            else replace(moved, slope=wire.slope)
        )

    def _bent(self, wire: Wire, sides: Sequence[tuple[float, float]]) -> BentWire:
        made = []
        for sign, (inner, end) in zip((1, -1), sides, strict=True):
            length = inner + end
            y, z = length * math.cos(wire.slope), wire.height - length * math.sin(wire.slope)
            made.append(
                Side(
                    vertices=((0.0, 0.0, wire.height), (0.0, sign * y, z)),
                    trap=inner,
                    body=min(wire.body, 2 * end),
                )
            )
        return BentWire(
            sides=(made[0], made[1]),
            radius=wire.radius,
            resistivity=wire.resistivity,
            ground=wire.ground,
            elastance=wire.elastance,
        )

    @cached_property
    def _base(self) -> dict[str, Ports]:
        wire = self.ensemble.wire
        assert wire.end is not None
        return self._solved(((wire.inner, wire.end), (wire.inner, wire.end)))

    def with_sides(self, sides: tuple[tuple[float, float], tuple[float, float]]) -> Altered:
        """Return the antenna with other wires; what varies does to it what it does to the one meant."""
        solved = self._solved(sides)

        def offset(role: str, frequency: np.ndarray) -> np.ndarray:
            weights = polynomial_weights(self._nodes(role), frequency)
            apart = solved[role].impedance - self._base[role].impedance
            at = np.tensordot(weights, apart, 1)
            picked = [(0, 0), (0, 1), (0, 2), (1, 1), (2, 2), (1, 2)]
            return np.stack([at[:, i, j] for i, j in picked])

        return self.altered(offset=offset)

    def basis(self, latents: Latents) -> np.ndarray:
        """Return the directions along which an antenna differs from another, as rows of unit length.

        Each trap's resonance and Q, what is read of either band, the line: of the many ways to get there only
        the likeliest one counts, so few numbers do for all.
        """
        ensemble, step, of_traps = self.ensemble, 0.5, self.ensemble.of_traps
        z = np.concatenate([step * np.eye(latents.size), -step * np.eye(latents.size)])
        draws, count = latents.draws(z), 2 * latents.size
        change = latents.change(z, {}, 0)
        traps = ensemble.traps(draws, stage_of(True), count)
        features = ensemble.features(draws, count, change)
        seen = (
            []
            if traps is None or of_traps is None
            else [*np.log(of_traps.resonance(traps)), *np.log(traps.q)]
        )
        for role in ensemble.roles:
            pieces = ensemble.outcome(role, features, [traps])[0]
            seen.append(np.log(np.concatenate([piece.dip for piece in pieces])))
            seen.append(np.concatenate([piece.dip_reflection for piece in pieces]))
        slopes = np.array([(values[: latents.size] - values[latents.size :]) for values in seen])
        others = [name for name in latents.columns if name in ("site", *LINE) or name.startswith("fold")]
        unit = np.eye(latents.size)
        rows = [
            *slopes,
            *(
                unit[latents.columns[name]][i]
                for name in others
                for i in range(unit[latents.columns[name]].shape[0])
            ),
        ]
        rows = [row / np.linalg.norm(row) for row in rows if np.linalg.norm(row) > 0]
        _, sizes, along = np.linalg.svd(np.array(rows), full_matrices=False)
        return along[sizes > 1e-3]

    @cached_property
    def _made(self) -> dict[tuple[str, str], Altered | None]:
        return {}

    def shape(self, code: str, which: str) -> Altered | None:
        """Return one shape of a fault, made when it is first asked for; None where it cannot be."""
        if (code, which) not in self._made:
            self._made[code, which] = FAULTS[code][which](self)
        return self._made[code, which]


def evidence(forward: Forward, sought: float = -math.inf) -> tuple[float, float]:
    """Return the log of how likely the readings are, and how far the most likely antenna misses them.

    The search is given up where it neither nears nor has reached the log that is `sought`.
    """
    starts = np.zeros((1, forward.size))
    extras = forward.altered.extras
    if extras:
        at = np.array(np.meshgrid(*[(-1.2, 0.0, 1.2)] * extras)).reshape(extras, -1).T
        starts = np.concatenate([np.zeros((at.shape[0], forward.size - extras)), at], axis=1)
    before = math.inf
    for _ in range(ATTEMPTS):
        z, slopes, off = peak_of(forward, starts, steps=STEPS // ATTEMPTS)
        _, chance = forward.residuals(z[None])
        inside = np.eye(off.size) + slopes @ slopes.T
        log = float(chance[0]) - 0.5 * float(z @ z) - 0.5 * float(np.linalg.slogdet(inside)[1])
        misfit = float(z @ z + off @ off)
        if before - misfit < max(RESTS, FALLS * misfit * (log < sought)):
            break
        before, starts = misfit, z[None]
    return log, misfit


def diagnose(
    bench: Bench,
    hoists: Sequence[Hoist],
    *,
    tuned: bool = True,
    sweeps: Mapping[str, Sweep] | None = None,
    latents: Latents | None = None,
) -> Diagnosis:
    """Return what fits the readings better than any sound antenna, if anything does."""
    ensemble = bench.ensemble
    if latents is None:
        latents = latents_of(ensemble, hoists[-1].moves, hoists[-1].tunings, SPREAD)
    files = sweeps or {}

    def forward(
        altered: Altered | None = None, basis: np.ndarray | None = None, files: Mapping[str, Sweep] = files
    ) -> Forward:
        return Forward(ensemble, latents, hoists, stage_of(tuned), files, altered, basis)

    whole = forward()
    count = max(len(whole.owners()), 1)
    z, _, off = peak_of(whole, np.zeros((1, whole.size)))
    miss = float(z @ z + off @ off)
    # What misses by so little leaves no room for anything that fits so much better.
    if miss < 2 * math.log(NAMED) - 1 or chance_above(miss, count) > WELL:
        return Diagnosis(named=(), looked_at=(), healthy_misfit=0.0, misfits=False)
    basis = bench.basis(latents)
    sound, healthy_misfit = evidence(forward(basis=basis))
    found = []
    for code in FAULTS if ensemble.wire.end is not None else ():
        shapes = [bench.shape(code, which) for which in FAULTS[code]]
        tried = [evidence(forward(shape, basis), sound) for shape in shapes if shape is not None]
        if tried:
            most = max(log for log, _ in tried)
            mean = most + math.log(sum(math.exp(log - most) for log, _ in tried) / len(shapes))
            found.append(Suspect(code=code, log_ratio=mean - sound, misfit=min(miss for _, miss in tried)))
    swept = {str(r.value) for h in hoists for r in h.readings if r.what == "sweep" and r.subject != "line"}
    for code, mend in SLIPS.items() if swept else ():
        mended = {name: mended_by(mend, sweep) if name in swept else sweep for name, sweep in files.items()}
        log, misfit = evidence(forward(basis=basis, files=mended), sound)
        found.append(Suspect(code=code, log_ratio=log - sound, misfit=misfit))
    found.sort(key=lambda one: -one.log_ratio)
    named: tuple[Suspect, ...] = ()
    if found and found[0].ratio >= NAMED:
        near = found[0].log_ratio - math.log(BESIDE)
        named = tuple(one for one in found if one.log_ratio >= near)
    least = min([healthy_misfit, *(one.misfit for one in found)])
    return Diagnosis(
        named=named,
        looked_at=tuple(found),
        healthy_misfit=healthy_misfit,
        misfits=chance_above(least, count) < UNLIKELY,
    )


def of_other_band(design: Design, reading: Reading) -> str | None:
    """Return the band a reading is really of, where its frequency lies nearer that one; None else."""
    frequency = reading.frequency if reading.frequency is not None else reading.value
    bands = dict(design.bands.items())
    if reading.subject not in bands or not isinstance(frequency, float):
        return None
    near = min(bands, key=lambda role: abs(math.log(bands[role].target / frequency)))
    close = abs(math.log(bands[near].target / frequency)) < CLOSE
    return near if near != reading.subject and close else None
