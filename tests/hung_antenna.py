"""An antenna as it came out and hangs, solved from scratch each time: what advice is held against.

Nothing here goes through the ensemble's nearby ports: every wire is solved whole, both sides as they are.
Where a side sags, it is a chain of straight pieces along a parabola, which no belief knows of.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np

from trapdesk.design.design import Shape
from trapdesk.design.reading_kinds import Doubt, Interval, Reading
from trapdesk.engine.cables import propagation, transform
from trapdesk.engine.mesh import Side
from trapdesk.engine.ports import chebyshev_nodes, polynomial_weights, terminate
from trapdesk.engine.wire import BentWire, plan, solve_whole
from trapdesk.services.antenna.lengths import slope_of
from trapdesk.services.antenna.response import MARGIN
from trapdesk.services.hung.readings import dips, squared
from trapdesk.services.hung.updating import latents_of, stage_of
from trapdesk.services.trials.beliefs import TWO_THIRDS, soil_at
from trapdesk.services.trials.ensemble import WIRES, Ensemble

NODES, GRID = 5, 321
PIECES = 6


@dataclass(frozen=True, kw_only=True)
class World:
    """How the truth differs from what is believed: by a factor, in metres of one side, by real sag."""

    spread: float = 1.0
    unequal: float = 0.0
    sag: bool = False
    wide: float = 0.0
    """How much further than the bands' margins is looked, relative."""


HONEST = World()
WIDER = World(spread=1.5, unequal=0.05, sag=True)


@dataclass
class Hung:
    """One antenna: a row of standard normal numbers, and what is done to it."""

    ensemble: Ensemble
    random: np.random.Generator
    world: World = HONEST
    moves: int = 8
    tunings: int = 0
    broken: object = None
    z: np.ndarray = field(init=False)

    def __post_init__(self):
        self.latents = latents_of(self.ensemble, self.moves, 3)
        self.z = self.random.standard_normal((1, self.latents.size))
        self.side = self.random.choice(["inner", "end"] if self.ensemble.wire.end is not None else ["inner"])
        self.sign = self.random.choice([-1.0, 1.0])

    def draws(self):
        found = {}
        for name, value in self.latents.draws(self.z, self.tunings).items():
            middle = sum(self.ensemble.varying[name].ends) / 2
            found[name] = middle + self.world.spread * (value - middle)
        return found

    def wires(self, change, moves):
        """Return the lengths of each side's wires."""
        draws, wire = self.draws(), self.ensemble.wire
        meant = {name: float(v[0]) for name, v in self.latents.change(self.z, change, moves).items()}
        found = []
        for i in range(2):
            lengths = {}
            for name in WIRES:
                own = getattr(wire, name)
                if own is None:
                    continue
                more = (
                    draws[f"marking_{name}"][0] + draws["creep"][0] * own + draws[f"fastening_{name}"][0, i]
                )
                apart = self.world.unequal / 2 * self.sign * (-1) ** i if name == self.side else 0.0
                lengths[name] = own + more + meant[name] + apart
            found.append(lengths)
        return found

    def hang(self, change, moves=0):
        """Return this antenna hung with its wires changed."""
        draws, wire, site = self.draws(), self.ensemble.wire, self.ensemble.design.site
        lengths = self.wires(change, moves)
        if self.broken is not None:
            lengths = self.broken.lengths(lengths)
        side = float(np.mean([sum(each.values()) for each in lengths]))
        slope = slope_of(site.shape, site.height, side, site.end_height, site.included_angle)
        slope = wire.slope if math.isnan(slope) else slope
        sag = draws["sag"][0] if "sag" in draws else 0.0
        height = wire.height + (draws["height"][0] if "height" in draws else 0.0)
        if not self.world.sag:
            height -= TWO_THIRDS * sag
        sides = []
        for i, each in enumerate(lengths):
            length = sum(each.values())
            # A level wire is held in the middle by the line: each side hangs for itself.
            depth = max(sag, 0.0) * (0.75 if site.shape is Shape.VEE else 1.0) if self.world.sag else 0.0
            points = hanging(length, depth, slope) * [1.0, (-1) ** i, 1.0] + [0.0, 0.0, height]
            vertices = tuple(map(tuple, points))
            sides.append(
                Side(vertices=vertices, trap=each["inner"] if wire.end is not None else None, body=wire.body)
            )
        ground = (
            soil_at(wire.ground, site.soil_is_unknown, draws["soil"][0]) if "soil" in draws else wire.ground
        )
        coating = draws["coating"][0] if "coating" in draws else 0.0
        bent = BentWire(
            sides=(sides[0], sides[1]), radius=wire.radius, resistivity=wire.resistivity, ground=ground,
            elastance=wire.elastance * (1 + coating),
        )  # fmt: skip
        return View(self, bent, draws)


def hanging(length, depth, slope):
    """Return points along a side of a length that hangs in a parabola, so deep below its chord's middle.

    The wire keeps its length: what it hangs through brings its end nearer.
    """
    shares = np.linspace(0, 1, PIECES + 1) if depth > 0 else np.array([0.0, 1.0])
    chord = length
    for _ in range(6):
        along = shares * chord
        drop = along * math.sin(slope) + 4 * depth * shares * (1 - shares)
        points = np.column_stack([np.zeros_like(along), along * math.cos(slope), -drop])
        chord *= length / np.linalg.norm(np.diff(points, axis=0), axis=1).sum()
    return points


class View:
    """How one antenna looks as it hangs."""

    def __init__(self, hung, wire, draws):
        self.hung, self.ensemble = hung, hung.ensemble
        self.scale = 1 + draws["site"][0] if "site" in draws else 1.0
        self.traps = None
        if self.ensemble.trap is not None:
            self.traps = self.ensemble.traps(draws, stage_of(True), 1)
        self._solved = {}
        self.wire = wire

    def feed(self, role, frequency):
        """Return the feed impedance at frequencies near a band."""
        band = dict(self.ensemble.design.bands.items())[role]
        if role not in self._solved:
            low, high = (
                band.low * (1 - MARGIN - self.hung.world.wide),
                band.high * (1 + MARGIN + self.hung.world.wide),
            )
            count = NODES if not self.hung.world.wide else 11
            nodes = chebyshev_nodes(low / 1.02, high * 1.02, count)
            counts = plan(self.ensemble.wire, band.target)
            ports = solve_whole(self.wire, nodes, (counts, counts), band.target, power=False)
            self._solved[role] = (nodes, ports.impedance)
        nodes, impedance = self._solved[role]
        frequency = np.atleast_1d(np.asarray(frequency, float))
        there = np.tensordot(polynomial_weights(nodes, frequency / self.scale), impedance, 1)
        if self.traps is None:
            return there[:, 0, 0]
        of_traps = self.ensemble.of_traps
        loads = of_traps.impedances(of_traps.circuit(frequency), self.traps)
        loads = [load[0] for load in loads]
        if self.hung.broken is not None:
            loads = self.hung.broken.loads(frequency, loads)
        return terminate(there, *loads).impedance

    def at_radio(self, role, frequency):
        """Return the impedance at the radio's end of the line as it really is."""
        feed, path = self.feed(role, frequency), self.ensemble.path
        if path is None or path.line is None:
            return feed if path is None else feed / path.ratio
        line, length = self.hung.latents.line(self.hung.z, path.line, path.length)
        return transform(*propagation(line, np.atleast_1d(frequency)), length[0], feed / path.ratio)[0]

    def span(self, role):
        band = dict(self.ensemble.design.bands.items())[role]
        wide = MARGIN + self.hung.world.wide
        return np.linspace(band.low * (1 - wide), band.high * (1 + wide), GRID)

    def dip(self, role):
        """Return where the SWR at the radio is least."""
        frequency = self.span(role)
        seen = self.at_radio(role, frequency)
        return float(dips(frequency, squared(seen, self.ensemble.design.station.reference)[None])[0])

    def swr(self, role, frequency, *, judged=False):
        feed = self.feed(role, frequency)
        path = self.ensemble.path
        if judged:
            seen = feed if path is None else path.judged(np.atleast_1d(frequency), feed, None)
        else:
            seen = self.at_radio(role, frequency)
        size = np.sqrt(squared(seen, self.ensemble.design.station.reference))
        return (1 + size) / np.maximum(1 - size, 1e-9)

    def worst(self):
        """Return the worst SWR over the wanted part of any band, where it is judged."""
        found = []
        for role, band in self.ensemble.design.bands.items():
            frequency = np.linspace(*band.wanted_edges, 17)
            found.append(self.swr(role, frequency, judged=True).max())
        return float(max(found))

    def read_dips(self, random, sigma=3e-4):
        """Return readings of both dips, with noise."""
        found = []
        for role, _ in self.ensemble.design.bands.items():
            value = self.dip(role) * (1 + sigma * random.standard_normal())
            doubt = Doubt(relative=sigma)
            found.append(
                Reading(subject=role, what="dip", value=value, typed=f"{value / 1e6:.4f}MHz", doubt=doubt)
            )
        return tuple(found)

    def read_meter(self, random, places=3, sigma=0.08, *, wanted=False):
        """Return what a transmitter's meter shows: coarse, inside the band, off the scale above 3.

        It is read over the whole band, or over the `wanted` part alone.
        """
        steps = [1.0, 1.2, 1.5, 2.0, 2.5, 3.0, math.inf]
        found = []
        for role, band in self.ensemble.design.bands.items():
            ends = band.wanted_edges if wanted else (band.low, band.high)
            for f in np.linspace(*ends, places):
                shown = float(self.swr(role, f)[0]) * math.exp(sigma * random.standard_normal())
                i = int(np.clip(np.searchsorted(steps, shown) - 1, 0, len(steps) - 2))
                value = Interval(low=steps[i], high=steps[i + 1])
                found.append(
                    Reading(
                        subject=role, what="swr", value=value, typed=f"{value.low:g}..{value.high:g}",
                        doubt=Doubt(relative=sigma), frequency=float(f),
                    )
                )  # fmt: skip
        return tuple(found)
