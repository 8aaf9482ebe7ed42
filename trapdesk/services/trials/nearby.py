"""Wires near a solved one: port matrices as polynomials in lengths, height, soil, coating and frequency.

Coarse-mesh solves at a few places, less the coarse solve of the wire itself, go on top of its ports: the
mesh's error is the same before and after. Places and terms are as many, so the polynomial meets every solve.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from ...design.design import Design
from ...engine.ground import GroundKind
from ...engine.mesh import Plan, Side
from ...engine.ports import Ports, chebyshev_nodes, polynomial_weights
from ...engine.wire import BentWire, Wire, plan, solve_ports, solve_whole
from ..antenna.lengths import slope_of
from .beliefs import soil_at
from .workspace import Workspace

NODES = 3
LENGTH_STEPS = (0.02, 0.04)
"""Least step of inner and end wire, as a share of the side: as far as bringing to aim goes. [1]"""
LEAST_STEP = {"height": 0.3, "coating": 0.1, "site": 0.005}
ODD_STEP = 0.02
"""How far the sides are put apart to see what that does. [m]"""
LOWEST = 0.3
"""Height of the wire's ends below which no solve is put. [m]"""

Place = tuple[tuple[str, float], ...]
"""Where a solve is put: variables away from nothing, in steps."""
Term = tuple[tuple[str, int], ...]
"""A product of powers of variables."""

_CURVE = {"soil": (-1.0, -0.5, 0.5, 1.0)}
_PAIRS: dict[tuple[str, str], tuple[tuple[float, float], ...]] = {
    ("inner", "end"): ((1.0, 1.0),),
    ("inner", "soil"): ((1.0, 1.0), (1.0, -1.0)),
    ("end", "soil"): ((1.0, 1.0), (1.0, -1.0)),
    ("height", "soil"): ((1.0, 1.0), (1.0, -1.0)),
    ("inner", "height"): ((1.0, -1.0),),
    ("end", "height"): ((1.0, -1.0),),
    ("inner", "site"): ((1.0, 1.0),),
    ("end", "site"): ((1.0, 1.0),),
    ("soil", "site"): ((1.0, 1.0), (-1.0, 1.0)),
    ("height", "site"): ((1.0, 1.0),),
    ("coating", "site"): ((1.0, 1.0),),
}


def _design_of(variables: Iterable[str]) -> tuple[list[Place], list[Term]]:
    """Return places to solve at and the terms they determine."""
    there = list(variables)
    places: list[Place] = []
    terms: list[Term] = []
    for name in there:
        at = _CURVE.get(name, (-1.0, 1.0))
        places += [((name, x),) for x in at]
        terms += [((name, power),) for power in range(1, len(at) + 1)]
    for (one, other), at in _PAIRS.items():
        if one in there and other in there:
            places += [((one, x), (other, y)) for x, y in at]
            curved = one if one == "soil" else other
            terms += [((one, 1), (other, 1))]
            if len(at) > 1:
                terms += [((one, 1 + (curved == one)), (other, 1 + (curved == other)))]
    return places, terms


@dataclass(frozen=True, kw_only=True)
class Table:
    """The polynomial of one band's ports at some frequencies: coefficients (terms, 6 entries x frequencies).

    Entries are feed; feed to first and second trap; first and second trap; between both. Complex numbers are
    pairs of columns, so that one real product serves.
    """

    frequency: np.ndarray
    coefficients: np.ndarray

    @cached_property
    def rows(self) -> np.ndarray:
        """The same by entry and frequency, all real parts before all imaginary ones."""
        return np.concatenate([self.coefficients[:, 0::2], self.coefficients[:, 1::2]], axis=1).T.copy()


class Nearby:
    """Ports of every wire near a solved one, for each band."""

    def __init__(
        self,
        design: Design,
        wire: Wire,
        ports: Mapping[str, Ports],
        ranges: Mapping[str, tuple[float, float]],
        reach: Mapping[str, float],
    ) -> None:
        self.wire, self.ports, self.has_trap = wire, dict(ports), wire.end is not None
        self._design, self._ranges = design, dict(ranges)
        self.step = self._steps(reach)
        even = [name for name in self.step if not name.startswith("odd")]
        self._places, self._even = _design_of(even)
        self._odd: list[Term] = [
            ((name, power),) for name in self.step if name not in even for power in (1, 2)
        ]
        self.terms: list[Term] = [(), *self._even, *self._odd]
        self._highest: dict[str, int] = {}
        for name, power in itertools.chain(*self.terms):
            self._highest[name] = max(power, self._highest.get(name, 1))
        self._solve()

    def _steps(self, reach: Mapping[str, float]) -> dict[str, float]:
        side, ground = self.wire.side, self.wire.ground.kind
        steps = {"inner": max(LENGTH_STEPS[0] * side, reach.get("inner", 0.0))}
        if self.has_trap:
            steps["end"] = max(LENGTH_STEPS[1] * side, reach.get("end", 0.0))
        if ground is not GroundKind.SPACE and reach.get("height"):
            steps["height"] = max(LEAST_STEP["height"], reach["height"])
            room = self.wire.end_height - LOWEST
            if room < steps["height"]:
                steps["height"] = max(room, 0.05)
        if ground is GroundKind.SOIL and reach.get("soil"):
            steps["soil"] = reach["soil"]
        if self.wire.elastance and reach.get("coating"):
            steps["coating"] = max(LEAST_STEP["coating"], reach["coating"])
        if reach.get("site"):
            steps["site"] = max(LEAST_STEP["site"], reach["site"])
        steps |= {f"odd_{name}": ODD_STEP for name in ("inner", "end") if name in steps}
        return steps

    def moved(self, place: Mapping[str, float]) -> Wire:
        """Return the wire with its lengths, height, soil and coating elsewhere, in SI units."""
        site, wire = self._design.site, self.wire
        inner = wire.inner + place.get("inner", 0.0)
        end = None if wire.end is None else wire.end + place.get("end", 0.0)
        slope = slope_of(site.shape, site.height, inner + (end or 0.0), site.end_height, site.included_angle)
        ground = wire.ground
        if place.get("soil"):
            ground = soil_at(ground, site.soil_is_unknown, place["soil"])
        return replace(
            wire,
            inner=inner,
            end=end,
            slope=wire.slope if math.isnan(slope) else slope,
            height=wire.height + place.get("height", 0.0),
            elastance=wire.elastance * (1 + place.get("coating", 0.0)),
            ground=ground,
        )

    def apart(self, wire: Wire, odd_inner: float, odd_end: float) -> BentWire:
        """Return a wire with its first side longer and its second shorter by as much."""
        sides = []
        for sign in (1, -1):
            inner = wire.inner + sign * odd_inner
            length = inner + (0.0 if wire.end is None else wire.end + sign * odd_end)
            y, z = length * math.cos(wire.slope), wire.height - length * math.sin(wire.slope)
            trap = None if wire.end is None else inner
            sides += [Side(vertices=((0.0, 0.0, wire.height), (0.0, sign * y, z)), trap=trap, body=wire.body)]
        return BentWire(
            sides=(sides[0], sides[1]),
            radius=wire.radius,
            resistivity=wire.resistivity,
            ground=wire.ground,
            elastance=wire.elastance,
        )

    def _solve(self) -> None:
        """Solve at every place, all bands at once, on the coarse mesh of the wire itself."""
        nodes = np.concatenate([chebyshev_nodes(*ends, NODES) for ends in self._ranges.values()])
        highest = float(nodes.max())
        counts: Plan = plan(self.wire, highest)

        def coarse(wire: Wire) -> np.ndarray:
            return solve_ports(wire, nodes, counts, highest, extrapolate=False, power=False).impedance

        base = coarse(self.wire)
        by_geometry: dict[Place, np.ndarray] = {(): np.zeros_like(base)}
        for place in self._places:
            there = _geometry(place)
            if there not in by_geometry:
                moved = self.moved({name: x * self.step[name] for name, x in there})
                by_geometry[there] = coarse(moved) - base
        odd = []
        for name in ("odd_inner", "odd_end"):
            if name in self.step:
                steps = [self.step[name] * (name == which) for which in ("odd_inner", "odd_end")]
                apart = self.apart(self.wire, *steps)
                found = solve_whole(apart, nodes, (counts, counts), highest, extrapolate=False, power=False)
                odd.append(found.impedance - base)
        self._differences: dict[str, tuple[np.ndarray, dict[Place, np.ndarray], list[np.ndarray]]] = {}
        for i, role in enumerate(self._ranges):
            part = slice(i * NODES, (i + 1) * NODES)
            places = {place: z[part] for place, z in by_geometry.items()}
            self._differences[role] = (nodes[part], places, [z[part] for z in odd])
        self._system = np.array([[_value(term, dict(p)) for term in self._even] for p in self._places])

    def table(self, role: str, frequency: np.ndarray) -> Table:
        """Return the polynomial of a band's ports at frequencies."""
        nodes, places, odd = self._differences[role]
        base = self.ports[role]
        own = base.at(frequency).impedance
        rows = []
        for place in self._places:
            scaled = frequency / (1 + dict(place).get("site", 0.0) * self.step.get("site", 0.0))
            there = polynomial_weights(nodes, scaled)
            shifted = base.at(scaled).impedance - own
            rows.append(shifted + np.tensordot(there, places[_geometry(place)], 1))
        count = frequency.size
        even = np.zeros((0, *own.shape), complex)
        if rows:
            even = np.linalg.solve(self._system, np.array(rows).reshape(len(rows), -1)).reshape(
                -1, *own.shape
            )
        weights = polynomial_weights(nodes, frequency)
        halves = []
        for difference in odd:
            at = np.tensordot(weights, difference, 1)
            mirrored = at if at.shape[-1] == 1 else at[:, [0, 2, 1]][:, :, [0, 2, 1]]
            # Mirrored sides change places: what that turns about is odd in the length, the rest is even.
            halves += [(at - mirrored) / 2, (at + mirrored) / 2]
        full = np.concatenate([own[None], even, np.array(halves).reshape(-1, *own.shape)])
        picked = [(0, 0)] if own.shape[-1] == 1 else [(0, 0), (0, 1), (0, 2), (1, 1), (2, 2), (1, 2)]
        entries = np.stack([full[:, :, i, j] for i, j in picked], axis=1)
        flat = np.ascontiguousarray(entries.reshape(full.shape[0], len(picked) * count))
        return Table(frequency=frequency, coefficients=flat.view(float))

    def features(self, place: Mapping[str, np.ndarray], count: int) -> np.ndarray:
        """Return the terms (trials, terms) of places in SI units."""
        powers: dict[tuple[str, int], np.ndarray] = {}
        for name, step in self.step.items():
            if name in place:
                x = powers[name, 1] = place[name] / step
                for power in range(2, self._highest.get(name, 1) + 1):
                    powers[name, power] = powers[name, power - 1] * x
        found = np.empty((len(self.terms), count))
        found[0] = 1.0
        for row, term in zip(found[1:], self.terms[1:], strict=True):
            there = [powers.get(pair) for pair in term]
            # What a place does not say is nothing.
            if any(value is None for value in there):
                row[:] = 0.0
            elif len(there) == 1:
                row[:] = there[0]
            else:
                np.multiply(*there, out=row)
        return found.T

    @staticmethod
    def entries(table: Table, features: np.ndarray) -> np.ndarray:
        """Return the matrix entries (trials, 6, frequencies), one entry without traps."""
        return (
            (features @ table.coefficients).view(complex).reshape(features.shape[0], -1, table.frequency.size)
        )

    @staticmethod
    def planes(table: Table, features: np.ndarray, space: Workspace) -> np.ndarray:
        """Return the matrix entries (6, frequencies, trials): trials that lie together are quick to work on.

        They stand in the workspace, and only until it is asked for others.
        """
        rows, count = table.rows.shape[0], features.shape[0]
        found = np.matmul(table.rows, features.T, out=space.array("parts", rows, count))
        entries = space.array("entries", rows // 2, count, dtype=complex)
        entries.real, entries.imag = found[: rows // 2], found[rows // 2 :]
        return entries.reshape(-1, table.frequency.size, count)


def _geometry(place: Place) -> Place:
    """Return a place without the part of it that only scales frequency."""
    return tuple(pair for pair in place if pair[0] != "site")


def _value(term: Term, at: Mapping[str, float]) -> float:
    """Return a term at a place; a variable that is not there is nothing."""
    return math.prod(at.get(name, 0.0) ** power for name, power in term)
