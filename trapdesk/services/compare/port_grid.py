"""A wire of any lengths within a range, from a few that were solved: what a search over traps needs.

The port matrices vary smoothly with both wire lengths. Solved on a small grid of them and interpolated, they
give wire lengths and all band figures of any trap at the cost of small algebra. Where they do not vary
smoothly enough, or a trap's wires lie outside, each antenna is solved by itself.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from ...design.design import MODES, Band, Design, Lengths
from ...design.fields import SOLVE
from ...engine.ports import Ports, chebyshev_nodes, polynomial_weights, terminate
from ...engine.wire import Wire, plan, solve_ports
from ...errors import NoAnswer
from ..antenna.response import MARGIN, Response, behave
from ..antenna.solve import hang, wanted_frequencies
from ..feed.path import Feeding, View, path_of

NODES = (3, 4)
FEW_NODES = (2, 3)
"""Lengths of inner and end wire that are solved: for figures, and for a first look a per mille or two off."""
NODES_BAND = 3
STEPS = 20
UNSETTLED = 0.03
"""Last term of what is interpolated, as a part of all of it, from which on it is no longer trusted."""
CLOSE = 1e-6
"""Part of a length to which it is found."""


@dataclass(frozen=True, kw_only=True)
class BandSummary:
    """What a trap makes of one band; `width` is None above the SWR limit, `loss` the share of both traps.

    `peak_voltage` [V] and `average_watts` [W] are the worst of one trap in the wanted part.
    """

    role: str
    name: str
    loss: float
    width: float | None
    wanted: float
    worst_swr: float
    dip: float
    resonance: float | None
    peak_voltage: float
    average_watts: float
    sky: float


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """An antenna with one trap: the wires that meet the aims, and each band."""

    inner: float
    end: float
    bands: dict[str, BandSummary]


def with_lengths(design: Design, inner: float | Any, end: float | Any) -> Design:
    """Return the design with other wire lengths."""
    lengths: Lengths = replace(design.antenna.lengths, inner=inner, end=end)
    return replace(design, antenna=replace(design.antenna, lengths=lengths))


class PortGrid:
    """Port matrices over inner and end wire for each band of a design."""

    def __init__(self, design: Design, traps: list[Any], nodes: tuple[int, int] = NODES) -> None:
        """Solve a grid that holds the wires of all these traps; NoAnswer when one of them has none."""
        self.design, self.bands = design, dict(design.bands.items())
        self._hung = [hang(design, trap) for trap in traps]
        self._trap = traps[0]
        self._place(nodes)

    @property
    def is_smooth(self) -> bool:
        """Whether the port matrices vary smoothly enough over the lengths to be interpolated."""
        return all(
            _last_term(matrix, axis, nodes) < UNSETTLED
            for matrix in self._at_aim.values()
            for axis, nodes in enumerate((self.inner, self.end))
        )

    def finer(self) -> PortGrid:
        """Return the grid for the same traps on as many lengths as figures want."""
        other = object.__new__(PortGrid)
        other.__dict__.update(self.__dict__)
        other._place(NODES)
        return other

    def _place(self, nodes: tuple[int, int]) -> None:
        lengths = self.design.antenna.lengths
        self.inner = _nodes([w.inner for w in self._hung], lengths.inner is SOLVE, nodes[0])
        self.end = _nodes([w.end for w in self._hung], lengths.end is SOLVE, nodes[1])
        self.guess = (float(np.mean(self.inner)), float(np.mean(self.end)))
        self._to_inner, self._to_end = (
            np.linalg.inv(np.array([_powers(n, x) for x in n])) for n in (self.inner, self.end)
        )
        self._solve()
        self._trusted = self.is_smooth

    def make(self, inner: float, end: float) -> Wire:
        """Return the wire hung with these lengths."""
        return hang(with_lengths(self.design, inner, end), self._trap)

    def _solve(self) -> None:
        middle = self.make(*self.guess)
        wires = [[self.make(i, e) for e in self.end] for i in self.inner]
        self._nodes, self._matrices, self._at_aim = {}, {}, {}
        for role, band in self.bands.items():
            nodes = chebyshev_nodes(band.low * (1 - MARGIN), band.high * (1 + MARGIN), NODES_BAND)
            counts = plan(middle, band.target)
            solved = [[solve_ports(w, nodes, counts, band.target, odd=False) for w in row] for row in wires]
            parts = [
                np.array([[getattr(p, name) for p in row] for row in solved])
                for name in ("impedance", "loss", "sky")
            ]
            weights = polynomial_weights(nodes, np.array([band.target]))[0]
            self._nodes[role], self._matrices[role] = nodes, parts
            self._at_aim[role] = np.einsum("f,iefpq->iepq", weights, parts[0])

    def _weights(self, inner: float, end: float) -> np.ndarray:
        one = _powers(self.inner, inner) @ self._to_inner
        return np.outer(one, _powers(self.end, end) @ self._to_end)

    def ports(self, role: str, inner: float, end: float) -> Ports:
        """Return a band's port matrices for these lengths."""
        weights = self._weights(inner, end)
        return Ports(self._nodes[role], *(np.tensordot(weights, m, 2) for m in self._matrices[role]))

    def lengths(self, trap: Any) -> tuple[float, float]:
        """Return the wires that meet the aims with a trap; NoAnswer when they lie outside the grid."""
        given = self.design.antenna.lengths
        unknown = [n for n, v in enumerate((given.inner, given.end)) if v is SOLVE]
        if not unknown:
            return self.guess
        roles = [("upper", "lower")[n] if "upper" in self.bands else "lower" for n in unknown]
        loads = {r: trap.impedance(np.array([self.bands[r].target]))[0] for r in roles}

        def miss(at: np.ndarray) -> np.ndarray:
            weights = self._weights(*at)
            ports = (np.tensordot(weights, self._at_aim[r], 2) for r in roles)
            return np.array(
                [terminate(z, loads[r]).impedance.imag for z, r in zip(ports, roles, strict=True)]
            )

        spans = [np.ptp(n) if n.size > 1 else 0.0 for n in (self.inner, self.end)]
        # The nearest of the wires that were hung to start from: far from it there may be other lengths.
        starts = [np.array(self.guess), *(np.array([w.inner, w.end]) for w in self._hung)]
        x = min(starts, key=lambda start: float(np.abs(miss(start)).max())).copy()
        now, columns = miss(x), []
        for n in unknown:
            step = np.zeros(2)
            step[n] = 1e-4 * x[n]
            columns.append((miss(x + step) - now) / step[n])
        slopes = np.column_stack(columns)
        most = np.array([spans[n] / 2 for n in unknown])
        for _ in range(STEPS):
            move = np.linalg.solve(slopes, -now)
            move = move / max(1.0, float(np.max(np.abs(move) / most)))
            x[unknown] += move
            if np.all(np.abs(move) < CLOSE * x[unknown]):
                break
            new = miss(x)
            # Broyden's update keeps the slopes right along the step just made.
            slopes = slopes + np.outer(new - now - slopes @ move, move) / (move @ move)
            now = new
        for n, name in enumerate(("inner", "end")):
            low, high = _reach([getattr(wire, name) for wire in self._hung])
            if n in unknown and not low <= x[n] <= high:
                raise NoAnswer("aim_not_met", f"antenna.lengths.{name}", {f"{name}_m": float(x[n])})
        return float(x[0]), float(x[1])

    def outcome(self, trap: Any) -> Outcome:
        """Return what the antenna does with a trap; NoAnswer where no wires meet the aims."""
        if not self._trusted:
            return self._in_full(trap)
        try:
            inner, end = self.lengths(trap)
        except NoAnswer:
            return self._in_full(trap)
        ports = {role: self.ports(role, inner, end) for role in self.bands}
        if not all(_takes_power(of, self.bands[role], trap) for role, of in ports.items()):
            return self._in_full(trap)
        return self._outcome(self.make(inner, end), trap, ports)

    def _in_full(self, trap: Any) -> Outcome:
        """Return what the antenna does with a trap, its wires solved for this one alone."""
        return self._outcome(hang(self.design, trap), trap, {})

    def _outcome(self, wire: Wire, trap: Any, ports: dict[str, Ports]) -> Outcome:
        bands = {role: summary(self.design, role, wire, trap, ports.get(role)) for role in self.bands}
        return Outcome(inner=wire.inner, end=wire.end, bands=bands)


def summary(design: Design, role: str, wire: Wire, trap: Any, ports: Ports | None = None) -> BandSummary:
    """Return a band in a few numbers, by the rules of the full figures; its ports are solved if need be."""
    band, station = dict(design.bands.items())[role], design.station
    path = path_of(station)
    looking = None if path is None else lambda aim, z: View(path=path, setting=path.set_at(aim, z))
    response = Response(wire, band, trap, station.reference, ports, looking)
    frequency = wanted_frequencies(band)
    wanted = behave(
        response.ports.at(np.append(frequency, band.target)),
        trap,
        station.reference,
        station.power,
        None if path is None else Feeding(path, response.look),
    )
    usable = response.usable(station.swr_limit)
    return BandSummary(
        role=role,
        name=design.bands.called(role),
        loss=float(wanted.trap[-1]),
        width=None if usable is None else usable[1] - usable[0],
        wanted=float(np.ptp(frequency)),
        worst_swr=float(wanted.swr[:-1].max()),
        dip=response.dip[0],
        resonance=response.resonance,
        peak_voltage=float(wanted.stress.peak_voltage.max()),
        average_watts=float(wanted.stress.total_power.max()) * MODES[station.mode].mean,
        sky=float(wanted.sky[-1]),
    )


def _powers(nodes: np.ndarray, at: float) -> np.ndarray:
    """Return the powers of a place among nodes, brought to the order of one."""
    low, high = nodes[0], nodes[-1]
    return ((at - low) / (high - low) if nodes.size > 1 else 0.0) ** np.arange(nodes.size)


def _nodes(lengths: list[float], solved: bool, count: int) -> np.ndarray:
    """Return where to solve over a length, with a little room; a length that is set needs one place."""
    if not solved:
        return np.array(lengths[:1])
    return chebyshev_nodes(*_reach(lengths), count)


def _reach(lengths: list[float]) -> tuple[float, float]:
    """Return from where to where a length is solved."""
    low, high = min(lengths), max(lengths)
    room = 0.02 * (high - low) + 0.002 * low
    return low - room, high + room


def _takes_power(ports: Ports, band: Band, trap: Any) -> bool:
    """Return whether the feed point takes power all over the wanted part, as that of a wire must."""
    there = ports.at(np.append(wanted_frequencies(band), band.target))
    return bool(np.all(terminate(there.impedance, trap.impedance(there.frequency)).impedance.real > 0))


def _last_term(matrix: np.ndarray, axis: int, nodes: np.ndarray) -> float:
    """Return the last Chebyshev term along an axis of what was solved, as a part of the largest value.

    Of fewer than three nodes it says nothing: the last term is then all there is of the slope.
    """
    count = nodes.size
    if count < 3:
        return 0.0
    # Over the zeros of the polynomial of this order, the last but one alternates like the sine.
    weights = (-1.0) ** np.arange(count) * np.sin(np.pi * (np.arange(count) + 0.5) / count)
    last = np.abs(np.tensordot(weights, np.moveaxis(matrix, axis, 0), 1)) * 2 / count
    size = np.abs(matrix).max(axis=(0, 1))
    return float(np.max(np.divide(last.max(axis=0), size, out=np.zeros_like(size), where=size > 0)))
