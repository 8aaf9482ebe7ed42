"""Trials of one antenna as it might come out: each through the same resonator and the same port matrices."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np

from ...design.design import Design
from ...engine.ports import chebyshev_nodes, polynomial_weights, terminate
from ...engine.quotients import terminate_fractions
from ...engine.reflection import dip_of_squares
from ..antenna.figures import Figures
from ..antenna.response import MARGIN
from ..feed.path import Path, path_of
from ..feed.tuner import TunerSetting
from ..trap.built import BuiltTrap, build
from .aiming import root
from .beliefs import TWO_THIRDS, Belief, Draws, beliefs, draw
from .nearby import Nearby, Table
from .traps import AS_CUT, Circuit, Stage, Traps, TrialTraps
from .workspace import Workspace

POINTS = 41
"""Frequencies a band is looked at: in its wanted part, and over the band and its margins."""
WANTED_POINTS = 9
MORE_NODES = 3
"""Frequencies a band is computed at, beyond those its ports are solved at: products vary a little faster."""
CHUNK = 500
"""Trials that are worked on at once: their arrays stay near the processor."""
FARTHEST = 0.08
"""How far a wire is changed on the way to the aim, as a share of the side."""
WIRES = ("inner", "end")


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """What one band does in many trials, arrays (trials,), and its reflection (trials, frequencies).

    `worst` and `aim` are squared reflections in the wanted part and at the aim; volts are peak, of the worse
    trap at its worst in the wanted part; `loss` is the share of power that both traps heat with at the aim.
    """

    dip: np.ndarray
    dip_reflection: np.ndarray
    aim: np.ndarray
    worst: np.ndarray
    volts: np.ndarray
    loss: np.ndarray
    reflection: np.ndarray


def swr_of(reflection: np.ndarray) -> np.ndarray:
    """Return the standing wave ratio of squared reflections."""
    size = np.sqrt(reflection)
    return (1 + size) / np.maximum(1 - size, 1e-9)


@dataclass(frozen=True, kw_only=True)
class _Grid:
    """A band's frequencies, where among them the wanted part and the aim are, and what stands there.

    `aim_wanted` is the aim's place in the wanted part, `watts` (wanted, 1) what arrives at the feed point
    over that part of the antenna as designed; `setting` is how a tuner stands. `table` and `circuit` are at
    the nodes, and `weights` (frequencies, nodes) lead from there to all frequencies.
    """

    frequency: np.ndarray
    wanted: slice | np.ndarray
    aim: int
    aim_wanted: int
    table: Table
    weights: np.ndarray
    circuit: Circuit | None
    aim_circuit: Circuit | None
    watts: np.ndarray | float
    setting: TunerSetting | None


class Ensemble:
    """All that trials of a design have in common: its ports and their neighbours, its trap, its beliefs."""

    def __init__(self, figures: Figures, varying: Mapping[str, Belief] | None = None) -> None:
        design = figures.design
        self.design, self.figures = design, figures
        self.trap: BuiltTrap | None = build(design.antenna.trap) if design.antenna.trap is not None else None
        self.varying = dict(beliefs(design, self.trap) if varying is None else varying)
        self.wire = figures.wire
        self.path: Path | None = path_of(design.station)
        self.roles = [role for role, _ in design.bands.items()]
        self._bands = dict(design.bands.items())
        ranges = {
            role: (band.low * (1 - MARGIN), band.high * (1 + MARGIN)) for role, band in design.bands.items()
        }
        self.nearby = Nearby(design, self.wire, figures.ports, ranges, self._reach())
        self.grids = {role: self._grid(role) for role in self.roles}

    def with_beliefs(self, varying: Mapping[str, Belief]) -> Ensemble:
        """Return the ensemble with other beliefs on the same ports."""
        other = object.__new__(Ensemble)
        cached = ("_slopes", "_aim_tables", "_aim_circuits", "of_traps")
        other.__dict__.update({name: value for name, value in self.__dict__.items() if name not in cached})
        other.varying = dict(varying)
        return other

    def with_trap(self, design: Design, trap: BuiltTrap) -> Ensemble:
        """Return the ensemble with another trap and other aims in the same wire."""
        other = self.with_beliefs(self.varying)
        other.design, other.trap = design, trap
        other._bands = dict(design.bands.items())
        other.grids = {role: other._grid(role) for role in self.roles}
        return other

    def _reach(self) -> dict[str, float]:
        reach = {name: belief.reach for name, belief in self.varying.items()}

        def total(*names: str) -> float:
            return sum(reach.get(name, 0.0) for name in names)

        found = {name: reach[name] for name in ("soil", "coating", "site") if name in reach}
        found["height"] = 0.8 * (total("height") + TWO_THIRDS * total("sag"))
        for wire in WIRES:
            found[wire] = total(f"marking_{wire}", f"fastening_{wire}")
        return found

    def _grid(self, role: str) -> _Grid:
        band = self._bands[role]
        low, high = band.low * (1 - MARGIN), band.high * (1 + MARGIN)
        segments = band.segments_wanted
        each = max(3, (WANTED_POINTS - 1) // len(segments))
        parts = [np.linspace(*segment, each) for segment in segments]
        wanted = np.unique(np.concatenate([*parts, [band.target]]))
        begin, end = wanted[0], wanted[-1]
        rest = max(POINTS - wanted.size, 8)
        below = round(rest * (begin - low) / (begin - low + high - end))
        outer = np.linspace(low, begin, below, endpoint=False), np.linspace(end, high, rest - below + 1)[1:]
        frequency = np.concatenate([outer[0], wanted, outer[1]])
        aim = int(np.argmin(np.abs(frequency - band.target)))
        judged = [aim, *(i for i, f in enumerate(frequency) if any(a <= f <= b for a, b in segments))]
        picked = np.unique(judged)
        # A slice where one does: it takes no copy.
        one_piece = picked[-1] - picked[0] + 1 == picked.size
        nodes = chebyshev_nodes(low, high, self.figures.ports[role].frequency.size + MORE_NODES)
        return _Grid(
            frequency=frequency,
            wanted=slice(picked[0], picked[-1] + 1) if one_piece else picked,
            aim=aim,
            aim_wanted=int(np.searchsorted(picked, aim)),
            table=self.nearby.table(role, nodes),
            weights=polynomial_weights(nodes, frequency),
            circuit=self._circuit(nodes),
            aim_circuit=self._circuit(frequency[[aim]]),
            **self._fed(role, frequency[picked]),
        )

    def _fed(self, role: str, frequency: np.ndarray) -> dict[str, Any]:
        """Return how a tuner stands and what arrives at the feed point of the antenna as designed."""
        if self.path is None:
            return {"watts": self.design.station.power, "setting": None}
        ports = self.figures.ports[role].at(frequency)
        loads = () if self.trap is None else (self.trap.impedance(frequency),)
        feed = terminate(ports.impedance, *loads).impedance
        setting = self.path.set_at(self._bands[role].target, self.figures.bands[role].aim_impedance)
        return {"watts": self.path.passage(frequency, feed).arriving[:, None], "setting": setting}

    def _circuit(self, frequency: np.ndarray) -> Circuit | None:
        return None if self.of_traps is None else self.of_traps.circuit(frequency)

    @cached_property
    def of_traps(self) -> TrialTraps | None:
        """The traps of the trials, None without traps."""
        return None if self.trap is None else TrialTraps(self.design, self.trap, self.varying)

    def traps(self, draws: Draws, stage: Stage, count: int) -> Traps | None:
        """Return the traps of trials at a stage, None without traps."""
        return None if self.of_traps is None else self.of_traps.made(draws, stage, count)

    def draws(self, seed: int, begin: int, count: int) -> dict[str, np.ndarray]:
        """Return trials as values of what varies."""
        return draw(self.varying, seed, begin, count)

    def nominal(self, count: int = 1) -> dict[str, np.ndarray]:
        """Return trials in which nothing varies; sealing does what is allowed for."""
        found = {}
        for name, belief in self.varying.items():
            value = self.of_traps.part.weather.closing if name == "sealing" else 0.0
            found[name] = np.full((count, 2) if belief.pair else count, value)
        return found

    def places(
        self, draws: Draws, count: int, change: Mapping[str, np.ndarray] | None = None
    ) -> dict[str, np.ndarray]:
        """Return where trials stand among the nearby wires, `change` [m] being made to both sides."""
        zero = np.zeros(count)
        creep = draws.get("creep", zero)
        found = {
            "height": draws.get("height", zero) - TWO_THIRDS * draws.get("sag", zero),
            "soil": draws.get("soil", zero),
            "coating": draws.get("coating", zero),
            "site": draws.get("site", zero),
        }
        for wire in WIRES:
            length = getattr(self.wire, wire)
            if length is None:
                continue
            sides = draws.get(f"fastening_{wire}", np.zeros((count, 2)))
            found[wire] = draws.get(f"marking_{wire}", zero) + creep * length + sides.mean(axis=1)
            found[f"odd_{wire}"] = (sides[:, 0] - sides[:, 1]) / 2
            if change is not None:
                found[wire] = found[wire] + change[wire]
        return found

    @property
    def unknown_wires(self) -> dict[str, str]:
        """Which wire is changed for which band's aim."""
        if self.wire.end is None:
            return {"inner": "lower"}
        return {"inner": "upper", "end": "lower"} if "upper" in self._bands else {"end": "lower"}

    @cached_property
    def _aim_tables(self) -> dict[str, Table]:
        return {
            role: self.nearby.table(role, np.array([self._bands[role].target]))
            for role in self.unknown_wires.values()
        }

    @cached_property
    def _aim_circuits(self) -> dict[str, Circuit]:
        found = {role: self._circuit(np.array([self._bands[role].target])) for role in self._aim_tables}
        return {role: circuit for role, circuit in found.items() if circuit is not None}

    def _reactances(
        self, places: Mapping[str, np.ndarray], traps: Traps | None, draws: Draws, count: int
    ) -> np.ndarray:
        """Return the reactance (trials, aims) where each aim is thought to be."""
        found = []
        for role in self.unknown_wires.values():
            aim = self._bands[role].target
            off = draws.get(f"aim_{role}", np.zeros(count))
            # The wire at another frequency is the wire with another scale of frequency.
            there = {**places, "site": (1 + places["site"]) / (1 + off) - 1}
            entries = Nearby.planes(self._aim_tables[role], self.nearby.features(there, count), Workspace())
            if traps is None:
                found += [entries[0, 0].imag]
                continue
            frequency = aim * (1 + off)
            loads = self.of_traps.fractions(self._aim_circuits[role], traps, frequency=frequency)
            top, bottom, *_ = terminate_fractions(*entries, *loads)
            found += [(top / bottom)[0].imag]
        return np.column_stack(found)

    def to_aim(
        self,
        draws: Draws,
        stage: Stage,
        count: int,
        most: Mapping[str, float] | None = None,
        free: Mapping[str, np.ndarray] | None = None,
    ) -> dict[str, np.ndarray]:
        """Return how much longer each wire of a side must be for both aims, in m; at most `most`.

        NaN marks trials in which no length near the computed one brings it to the aim. `free` is the answer
        without `most`, where it is known.
        """
        traps = self.traps(draws, stage, count)
        places = self.places(draws, count)
        names = list(self.unknown_wires)
        held: dict[str, np.ndarray] = {}
        change = self._newton(places, traps, draws, count, names, held) if free is None else dict(free)
        if most is not None:
            for name in names:
                over = change[name] > most[name]
                if not np.any(over):
                    continue
                held[name] = np.minimum(change[name], most[name])
                rest = [other for other in names if other not in held]
                if rest:
                    # What the held wire leaves to the other one only concerns the trials where it was held.
                    pick = np.flatnonzero(over)
                    some = {key: value[pick] for key, value in places.items()}
                    part = None if traps is None else traps.part(pick)
                    mine = {key: value[pick] for key, value in held.items()}
                    own = {key: value[pick] for key, value in draws.items()}
                    again = self._newton(some, part, own, pick.size, rest, mine)
                    for other in rest:
                        change[other] = change[other].copy()
                        change[other][pick] = again[other]
                change[name] = held[name]
        return {wire: change.get(wire, np.zeros(count)) for wire in WIRES}

    def _newton(
        self,
        places: Mapping[str, np.ndarray],
        traps: Traps | None,
        draws: Draws,
        count: int,
        names: list[str],
        held: Mapping[str, np.ndarray],
    ) -> dict[str, np.ndarray]:
        """Bring the reactances at the aims to nothing by changing wires; see `aiming.root`."""
        aims = [list(self.unknown_wires).index(name) for name in names]

        def miss(change: np.ndarray) -> np.ndarray:
            there = dict(places)
            for name, value in (*held.items(), *zip(names, change.T, strict=True)):
                there[name] = places[name] + value
            return self._reactances(there, traps, draws, count)[:, aims]

        slopes = self._slopes[np.ix_(aims, aims)]
        change = root(miss, slopes, count, FARTHEST * self.wire.side)
        return dict(zip(names, change.T, strict=True))

    @cached_property
    def _slopes(self) -> np.ndarray:
        """Change of the reactance at each aim with each wire, in ohm per metre, for the nominal antenna."""
        count = 2 * len(self.unknown_wires)
        stage = replace(AS_CUT, name="nominal")
        nothing = self.nominal(count)
        traps = self.traps(nothing, stage, count)
        places = self.places({}, count)
        step = 0.005 * self.wire.side
        for i, name in enumerate(self.unknown_wires):
            places[name] = places[name].copy()
            places[name][2 * i : 2 * i + 2] += (step, -step)
        found = self._reactances(places, traps, {}, count)
        return ((found[0::2] - found[1::2]) / (2 * step)).T

    # The outcome

    def features(self, draws: Draws, count: int, change: Mapping[str, np.ndarray] | None) -> np.ndarray:
        """Return the terms of the port polynomials for trials whose wires were changed."""
        return self.nearby.features(self.places(draws, count, change), count)

    def outcome(self, role: str, features: np.ndarray, traps: list[Traps | None]) -> list[list[Outcome]]:
        """Return what a band does with each set of traps in the same wires, in pieces of a chunk each."""
        found: list[list[Outcome]] = [[] for _ in traps]
        space = Workspace()
        for begin in range(0, features.shape[0], CHUNK):
            pick = slice(begin, begin + CHUNK)
            entries = Nearby.planes(self.grids[role].table, features[pick], space)
            for pieces, own in zip(found, traps, strict=True):
                pieces.append(self._closed(role, entries, own, pick, space))
        return found

    def _closed(
        self, role: str, entries: np.ndarray, traps: Traps | None, pick: slice, space: Workspace
    ) -> Outcome:
        grid, reference = self.grids[role], self.design.station.reference
        if traps is None or grid.circuit is None or grid.aim_circuit is None:
            top, bottom = entries[0], np.ones_like(entries[0])
            volts = loss = np.zeros(top.shape[1])
        else:
            loads = self.of_traps.fractions(grid.circuit, traps, pick)
            top, bottom, *across = terminate_fractions(*entries, *loads)
            spread = _spread(space, grid.weights[grid.wanted], top, bottom, *across)
            resistance = (spread[:, :2] * spread[:, 2:4]).sum(axis=1)
            # Voltages and the feed's resistance have the square of the denominator in common.
            squares = _squares(spread[:, 4:])
            volts = np.sqrt((2 * grid.watts * squares.max(axis=1) / resistance).max(axis=0))
            conductances = self.of_traps.conductances(grid.aim_circuit, traps, pick)
            aim = grid.aim_wanted
            loss = (conductances * squares[aim]).sum(axis=0) / resistance[aim]
        if self.path is None:
            shift = bottom * reference
            squares = _squares(_spread(space, grid.weights, top - shift, top + shift))
            reflection = np.divide(squares[:, 0], squares[:, 1])
            # A resistance below nothing, as a polynomial may have it, takes no power and reflects all.
            np.minimum(reflection, 1.0, out=reflection)
        else:
            parts = _spread(space, grid.weights, top, bottom)
            feed = (parts[:, 0] + 1j * parts[:, 1]) / (parts[:, 2] + 1j * parts[:, 3])
            judged = self.path.judged(grid.frequency, feed.T, grid.setting).T
            real, square = np.maximum(judged.real, 0.0), judged.imag * judged.imag
            reflection = ((real - reference) ** 2 + square) / ((real + reference) ** 2 + square)
        dip, least = _dips(grid.frequency, reflection)
        return Outcome(
            dip=dip,
            dip_reflection=least,
            aim=reflection[grid.aim],
            worst=reflection[grid.wanted].max(axis=0),
            volts=volts,
            loss=loss,
            reflection=reflection.T,
        )


def _spread(space: Workspace, weights: np.ndarray, *values: np.ndarray) -> np.ndarray:
    """Return complex values (nodes, trials) at all frequencies that weights lead to.

    Real and imaginary parts are planes of their own, (frequencies, 2 x values, trials): one real product
    serves. They stand in the workspace until the next ones.
    """
    nodes, count = values[0].shape
    planes = space.array("planes", nodes, 2 * len(values), count)
    for i, value in enumerate(values):
        planes[:, 2 * i], planes[:, 2 * i + 1] = value.real, value.imag
    found = space.array("spread", weights.shape[0], 2 * len(values) * count)
    np.matmul(weights, planes.reshape(nodes, -1), out=found)
    return found.reshape(weights.shape[0], -1, count)


def _squares(planes: np.ndarray) -> np.ndarray:
    """Return the squares of magnitudes (frequencies, values, trials), in the place of the planes."""
    planes *= planes
    planes[:, 0::2] += planes[:, 1::2]
    return planes[:, 0::2]


def _dips(frequency: np.ndarray, reflection: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return where each column of squared reflections is least, and how much, by a parabola."""
    trial = np.arange(reflection.shape[1])
    at = np.clip(np.argmin(reflection, axis=0), 1, frequency.size - 2)
    three = (-1, 0, 1)
    dip, least = dip_of_squares(
        tuple(frequency[at + k] for k in three), tuple(reflection[at + k, trial] for k in three)
    )
    return dip, np.maximum(least, 0.0)
