"""A search of a box for one design: what is tried first, what is looked at closely, what comes in."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import islice
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from ...design.box import Box
from ...design.capacitor_kinds import GivenCapacitor
from ...design.coil_kinds import GivenCoil
from ...design.design import Design
from ...design.parts import Trap
from ...errors import NoAnswer
from ..antenna.solve import hang
from ..compare.port_grid import FEW_NODES, Outcome, PortGrid
from ..trap.built import BuiltTrap, build
from ..trap.coils import Wound
from .combos import NO_COMBOS, TRAPS, WAYS, Combos, combos, stubs, together
from .made import made
from .offers import Offer
from .scoring import Cost, Surface, cost
from .winders import MAKERS

if TYPE_CHECKING:
    from ..trials.tolerance import Yield

REACTANCE = (70.0, 640.0)
"""Coil reactance at resonance within which traps are sought. [ohm]"""
LOOKS = 17
"""How many reactances are looked at for wires where not all of them have any."""
LOSSES, SIZES = (1 / 2000, 1 / 250, 1 / 100, 1 / 30), 7
FEW_LOSSES, FEW_SIZES = (1 / 600, 1 / 80), 4
"""Coil losses, 1/Q, and how many capacitances a trap's outcome is known for; fewer for a first look."""
BIN = 0.005
"""Of combinations this near each other in capacitance only the best two are tried with every coil."""
AT_ONCE = 4096
"""Combinations whose figures are read off at once."""
BEST_OF_PAIR = 4
NEAR = 0.2
"""How many points the coarse cost may be off."""
FIRST_LOOK, FIRST_ROWS = 10, 3
"""So many pairs are looked into to show a few rows, before all of them are, in earnest."""
Joined = dict[str, Combos]
"""Capacitors to try, by kind of trap."""
MOST_OWN = 0.5
"""Part of a trap's capacitance that its coil may add itself and still be tried. [1]"""
BODY_ROOM = 0.02
"""How much longer a trap is than its winding. [m], an estimate"""


@dataclass(frozen=True, kw_only=True)
class Stub:
    """A piece of a cable of the box that serves as a trap's capacitor, cut `snip` longer than it will be.

    Lengths in m; `left` is what both traps leave of the cable, `slope` what a metre less does to the trap's
    resonance [Hz/m].
    """

    cable: str
    length: float
    snip: float
    left: float
    slope: float


@dataclass(frozen=True, kw_only=True)
class Row:
    """A trap that can be built, twice, with what it does in the antenna.

    `pieces` are places in the box's list of capacitors, joined as `way` says. `down` and `up` are how far the
    finished trap's resonance can still be moved each way, `off` how far it may be off as built: parts of it.
    `voltage` is what may lie across the trap, None where no rating is known; `stub` stands in for pieces.
    `within` is the share of antennas with it that keep the SWR limit, once that was asked for.
    """

    trap: Trap
    kind: str
    former: str
    wire: str
    turns: float
    way: str
    pieces: tuple[int, ...]
    capacitance: float
    tolerance: float
    voltage: float | None
    wire_length: float
    length: float
    diameter: float
    down: float
    up: float
    off: float
    spare: int
    resonance: float
    inductance: float
    q: float
    wound: Wound
    outcome: Outcome
    cost: Cost
    stub: Stub | None = None
    within: Yield | None = None

    @property
    def volts(self) -> float:
        """Worst peak voltage on any band, in V."""
        return max(b.peak_voltage for b in self.outcome.bands.values())


def tank(resonance: float, capacitance: float, q: float, body: float = 0.0, loss: float = 0.0) -> Trap:
    """Return a trap known by its resonance, capacitance, coil Q and capacitor loss, 1/Q."""
    capacitor = GivenCapacitor(capacitance=capacitance, q=1 / loss if loss else None)
    return Trap(resonance=resonance, body=body, coil=GivenCoil(q=q), capacitor=capacitor)


class Progress(NamedTuple):
    """How many pairs of former and wire were looked into closely, of how many, and the rows so far."""

    done: int
    total: int
    rows: tuple[Row, ...]
    finished: bool


class Search:
    """A look through a box for one design: the wires of every trap in range, and what traps do on them."""

    def __init__(self, design: Design, box: Box, wanted: float) -> None:
        """Solve the wires of every trap in range of the resonance `wanted`; NoAnswer where none has any."""
        self.design, self.box, self.wanted = design, box, wanted
        self.body = design.antenna.trap.body
        self.tried = 0
        try:
            self._start(REACTANCE)
        except NoAnswer as error:
            ends = self._with_wires()
            if ends is None:
                raise error
            self._start(ends)

    def _start(self, reactances: tuple[float, float]) -> None:
        """Solve wires and outcomes of traps within a range of reactances; NoAnswer where one has no wires."""
        self.range = [1 / (2 * math.pi * self.wanted * x) for x in reactances]
        big, small = self.range
        # These have the shortest and longest wires, or nearly: loss moves a trap of much capacitance most.
        few, many = 1 / LOSSES[0], 1 / LOSSES[-1]
        corners = ((big, few), (big, many), (small, 200.0), (math.sqrt(big * small), 200.0))
        self.grid = PortGrid(self.design, [self._tank(c, q) for c, q in corners], FEW_NODES)
        self.surface = self._surface(FEW_LOSSES, FEW_SIZES)

    def _with_wires(self) -> tuple[float, float] | None:
        """Return the widest range of reactances within which every trap has wires; None for none."""

        def has_wires(x: float) -> bool:
            try:
                for q in (1 / LOSSES[0], 1 / LOSSES[-1]):
                    hang(self.design, self._tank(1 / (2 * math.pi * self.wanted * x), q))
            except NoAnswer:
                return False
            return True

        low, high = REACTANCE
        tried = np.geomspace(low, high, LOOKS)
        runs, run = [], []
        for x, good in zip(tried, map(has_wires, tried), strict=True):
            run = [*run, float(x)] if good else []
            runs.append(run)
        found = max(runs, key=len)
        return (found[0], found[-1]) if len(found) > 1 else None

    def _tank(self, capacitance: float, q: float, loss: float = 0.0) -> BuiltTrap:
        return build(tank(self.wanted, float(capacitance), float(q), self.body, loss))

    def _surface(self, losses: tuple[float, ...], count: int) -> Surface:
        # Chebyshev's places in the logarithm, the polynomial through them is true to the ends.
        ends = np.log([self.range[-1], self.range[0]])
        sizes = np.exp(ends.mean() - np.cos(np.pi * np.arange(count) / (count - 1)) * np.ptp(ends) / 2)
        outcomes = [[self.grid.outcome(self._tank(c, 1 / q)) for q in losses] for c in sizes]
        places = {role: band.target / self.wanted for role, band in self.design.bands.items()}
        return Surface(sizes, np.array(losses), outcomes, places)

    def _in_earnest(self) -> None:
        """Solve as many wires as figures want, and begin again."""
        self.grid = self.grid.finer()
        self.surface = self._surface(LOSSES, SIZES)
        self.tried = 0

    def capacitors(self, box: Box) -> Joined:
        """Return for each kind of trap the capacitors worth trying with every coil, by rising capacitance."""
        low, high = self.range[-1] * (1 - MOST_OWN), self.range[0]
        pieces = self._best(combos(box.capacitors, low, high))
        cut = stubs(box.cables, self.wanted, low, high)
        return {"solenoid": pieces, "stub": cut, "toroid": together((pieces, cut)), "cable": NO_COMBOS}

    def _best(self, every: Combos) -> Combos:
        """Return the best two of all combinations that are nearly equal in capacitance."""
        if not len(every):
            return every
        inside = np.clip(every.capacitance, self.range[-1], self.range[0])
        # A piece at a time: all at once take more memory than everything else at the desk.
        pieces = [
            self.surface.at(
                inside[start : start + AT_ONCE], np.array(1 / 200), every.loss[start : start + AT_ONCE]
            )
            for start in range(0, len(every), AT_ONCE)
        ]
        losses, fillings = (
            [np.concatenate(band) for band in zip(*(piece[n] for piece in pieces), strict=True)]
            for n in (0, 1)
        )
        volts = np.concatenate([piece[2] for piece in pieces])
        points = cost(
            losses=losses,
            fillings=fillings,
            volts_share=volts / every.voltage,
            rated=every.rated,
            length=0.0,
            diameter=0.0,
            pieces=every.pieces,
            uncovered=every.tolerance / 2,
            spare=every.spare,
        ).total
        # Where the rating does not do, nothing else counts.
        points = np.where(volts > every.voltage, points + 1e6, points)
        bins = np.floor(np.log(every.capacitance) / BIN)
        order = np.lexsort((points, bins))
        rank = np.arange(order.size) - np.searchsorted(bins[order], bins[order], side="left")
        kept = order[rank < 2]
        return every.take(kept[np.argsort(every.capacitance[kept], kind="stable")])

    def pairs(self, box: Box) -> list[tuple[str, int, int]]:
        """Return every former or core with every wire, the thickest wires and the largest formers first."""
        wires = sorted(range(len(box.wires)), key=lambda j: -box.wires[j].diameter)
        formers = sorted(range(len(box.formers)), key=lambda i: -box.formers[i].diameter)
        return [
            *(("solenoid", i, j) for j in wires for i in formers),
            *(("cable", i, j) for j in range(len(box.cables)) for i in formers),
            *(("toroid", i, j) for j in wires for i in range(len(box.cores))),
            *(("stub", i, j) for j in wires for i in formers),
        ]

    def offers(self, box: Box, pair: tuple[str, int, int], joined: Joined) -> list[Offer]:
        """Return the best few traps of a pair, by rising coarse cost."""
        kind, limits = pair[0], (self.range[-1], self.range[0])
        if kind != "cable" and not len(joined[kind]):
            return []
        found = list(MAKERS[kind](box, pair, joined[kind], self.wanted, self.surface, limits))
        self.tried += sum(offer.tried for offer in found)
        return sorted(found, key=lambda o: o.points)[:BEST_OF_PAIR]

    def run(self, rows: int) -> Iterator[Progress]:
        """Look into a few pairs, then into all, the promising ones closely; yield after each row found."""
        pairs = self.pairs(self.box)
        found: dict[tuple[str, int, int], Row] = {}
        for offers in self._first_look(pairs):
            if (row := self.best(offers, self.box)) is not None:
                found[offers[0].pair] = row
                yield Progress(len(found), len(pairs), _ranked(found, rows), False)
        self._in_earnest()
        joined = self.capacitors(self.box)
        waiting = [offers for pair in pairs if (offers := self.offers(self.box, pair, joined))]
        waiting.sort(key=lambda offers: offers[0].points)
        sure: dict[tuple[str, int, int], Row] = {}
        for done, offers in enumerate(waiting, start=1):
            # What is further behind than coarse costs may be off cannot come in.
            ranked = _ranked(sure, rows)
            if len(ranked) == rows and offers[0].points > ranked[-1].cost.total + 2 * NEAR:
                break
            found.pop(offers[0].pair, None)
            if (row := self.best(offers, self.box)) is not None:
                sure[offers[0].pair] = row
                yield Progress(done, len(waiting), _ranked(found | sure, rows), False)
        shown = list(_ranked(sure, rows))
        for kind in MAKERS:
            # The best of a kind is worth knowing, however far behind.
            if not any(row.kind == kind for row in shown):
                known = [row for row in _ranked(sure, len(sure)) if row.kind == kind]
                others = (self.best(o, self.box) for o in waiting if o[0].kind == kind and not known)
                shown += known[:1] or list(islice(filter(None, others), 1))
        if shown:
            yield Progress(len(waiting), len(waiting), tuple(shown), True)

    def _first_look(self, pairs: list[tuple[str, int, int]]) -> list[list[Offer]]:
        """Return the most promising of the first few pairs that make a trap."""
        joined = self.capacitors(self.box)
        good = (offers for pair in pairs if (offers := self.offers(self.box, pair, joined)))
        few = sorted(islice(good, FIRST_LOOK), key=lambda offers: offers[0].points)
        return few[:FIRST_ROWS]

    def best(self, offers: list[Offer], box: Box) -> Row | None:
        """Return the best of a pair's offers, by coils solved exactly."""
        found = None
        for offer in offers:
            if found is not None and offer.points > float(found.cost.total) + NEAR:
                break
            row = self.row(offer, box)
            if row is not None and (found is None or row.cost.total < found.cost.total):
                found = row
        return found

    def _cost(self, offer: Offer, outcome: Outcome) -> Cost:
        bands = outcome.bands.values()
        volts = max(b.peak_voltage for b in bands)
        return cost(
            losses=[b.loss for b in bands],
            fillings=[math.inf if b.width is None else b.wanted / b.width for b in bands],
            volts_share=volts / offer.voltage,
            rated=offer.rated,
            length=offer.length,
            diameter=offer.diameter,
            pieces=len(offer.pieces),
            uncovered=offer.uncovered,
            spare=offer.spare,
            stub=offer.stub_length + offer.snip if offer.stub >= 0 else 0.0,
        )

    def row(self, offer: Offer, box: Box) -> Row | None:
        """Return an offer as a row; None when the exact coil does not bring it to its resonance."""
        exact = made(offer, box, self.wanted)
        if exact is None:
            return None
        trap, built, offer = exact
        body = max(self.body, math.ceil((offer.length + BODY_ROOM) * 100 - 1e-9) / 100)
        trap = replace(trap, body=body, weather=self.design.antenna.trap.weather)
        try:
            outcome = self.grid.outcome(built)
        except NoAnswer:
            return None
        if offer.rated and max(b.peak_voltage for b in outcome.bands.values()) > offer.voltage:
            return None
        return Row(
            trap=trap,
            kind=offer.kind,
            former=offer.former_name(box),
            wire=offer.wire_name(box),
            turns=offer.turns,
            way=WAYS[offer.way] if offer.pieces else "",
            pieces=offer.pieces,
            capacitance=offer.capacitance,
            tolerance=offer.tolerance,
            voltage=offer.voltage if offer.rated else None,
            wire_length=offer.wire_length,
            length=offer.length,
            diameter=offer.diameter,
            down=offer.down,
            up=offer.up,
            off=offer.off,
            spare=offer.spare,
            resonance=built.resonance,
            inductance=built.inductance,
            q=built.q,
            wound=built.wound,
            outcome=outcome,
            cost=self._cost(offer, outcome),
            stub=_stub(offer, built, box),
        )

    def volts(self, capacitance: float) -> float:
        """Return about how many volts a trap of this capacitance bears at its worst."""
        return float(self.surface.at(np.array([capacitance]), np.array([1 / 200]), np.zeros(1))[2][0])


def _ranked(found: dict[tuple[str, int, int], Row], most: int) -> tuple[Row, ...]:
    """Return the best rows, the best first."""
    return tuple(sorted(found.values(), key=lambda row: float(row.cost.total))[:most])


def _stub(offer: Offer, built: BuiltTrap, box: Box) -> Stub | None:
    if offer.stub < 0:
        return None
    cable = box.cables[offer.stub]
    angle = 2 * math.pi * built.resonance * offer.stub_length / built.capacitor.line.velocity
    # Capacitance goes with the tangent of the angle, frequency with the root of all capacitance.
    steeper = 2 * angle / math.sin(2 * angle)
    return Stub(
        cable=cable.name,
        length=offer.stub_length,
        snip=offer.snip,
        left=cable.length - TRAPS * (offer.stub_length + offer.snip),
        slope=steeper * built.resonance * built.fitted / built.capacitance / (2 * offer.stub_length),
    )
