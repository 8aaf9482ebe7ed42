"""Looks through a box for traps it can build for a design, the best first."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from ..design.box import Box
from ..design.capacitor_kinds import GivenCapacitor
from ..design.coil_kinds import GivenCoil
from ..design.design import Design
from ..design.fields import SOLVE
from ..design.parts import Trap
from ..errors import NoAnswer
from .coils import Wound
from .combos import PIECES, WAYS, Combos, combos
from .port_grid import Outcome, PortGrid
from .scoring import Cost, Surface, cost
from .trap import BuiltTrap, build
from .winders import Offer, cable_offers, solenoid_offers, toroid_offers

REACTANCE = (70.0, 240.0, 640.0)
"""Coil reactance at resonance within which traps are sought: least, middle, most. [ohm]"""
SURFACE_LOSSES = (1 / 2000, 1 / 250, 1 / 100, 1 / 30)
SURFACE_SIZES = 7
BIN = 0.005
"""Of combinations this near each other in capacitance only the best two are tried with every coil."""
BEST_OF_PAIR = 4
NEAR = 0.2
"""How many points the coarse cost may be off."""
FIRST_LOOK, FIRST_ROWS = 24, 3
"""After so many pairs a few rows are shown, before all the others are looked into."""
BODY_ROOM = 0.02
"""How much longer a trap is than its winding. [m], an estimate"""


@dataclass(frozen=True, kw_only=True)
class Row:
    """A trap that can be built, twice, with what it does in the antenna.

    `pieces` are places in the box's list of capacitors, joined as `way` says. `down` and `up` are how far the
    finished trap's resonance can still be moved each way, `off` how far it may be off as built: parts of it.
    `voltage` is what may lie across the trap, None where no rating is known.
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

    @property
    def volts(self) -> float:
        """Worst peak voltage on any band, in V."""
        return max(b.peak_voltage for b in self.outcome.bands.values())


@dataclass(frozen=True, kw_only=True)
class Shortage:
    """Why nothing can be built: what is nearest, what it lacks, and which single part would do.

    `lacks` names what would each be enough to have more of: pieces, rating, former, wire; all four when only
    all together would do. `missing` are lists of the box with nothing in them. `parts` are pairs of a list of
    the box and the entry to add, each alone enough.
    """

    lacks: tuple[str, ...]
    missing: tuple[str, ...]
    nearest: Row | None
    parts: tuple[tuple[str, Any], ...]


@dataclass(frozen=True, kw_only=True)
class Found:
    """What has been found so far: `done` of `total` pairs of former and wire looked into."""

    done: int
    total: int
    rows: tuple[Row, ...]
    tried: int
    resonance: float
    finished: bool = False
    shortage: Shortage | None = None


def wanted_resonance(design: Design) -> float:
    """Return where the design's trap resonates; NoAnswer without a trap to replace."""
    trap = design.antenna.trap
    if trap is None:
        help = "add a table [antenna.trap] with the resonance that is wanted"
        raise NoAnswer("no_trap_to_build", "antenna.trap", {}, help)
    return build(trap).resonance if trap.resonance is SOLVE else trap.resonance


def rummage(design: Design, box: Box, rows: int = 20) -> Iterator[Found]:
    """Yield what can be built, more each time, the best first; stop whenever enough is seen.

    The last one is `finished`. NoAnswer when no trap of this resonance has wires that meet the aims.
    """
    from .shortage import shortage

    search = Search(design, box)
    last = None
    for last in search.run(rows):
        yield last
    if last is None or not last.rows:
        tried = search.tried
        yield Found(
            done=0, total=0, rows=(), tried=tried, resonance=search.wanted, finished=True,
            shortage=shortage(search),
        )  # fmt: skip


def take(design: Design, row: Row) -> Design:
    """Return the design with the trap of a row in it."""
    return replace(design, antenna=replace(design.antenna, trap=row.trap))


def tank(resonance: float, capacitance: float, q: float, body: float = 0.0, loss: float = 0.0) -> Trap:
    """Return a trap known by its resonance, capacitance, coil Q and capacitor loss, 1/Q."""
    capacitor = GivenCapacitor(capacitance=capacitance, q=1 / loss if loss else None)
    return Trap(resonance=resonance, body=body, coil=GivenCoil(q=q), capacitor=capacitor)


MAKERS = {"solenoid": solenoid_offers, "cable": cable_offers, "toroid": toroid_offers}
"""Who winds what: each takes the box, two places in it, the combinations, and what ranks them."""


class Search:
    """A look through a box for one design: the wires of every trap in range, and what traps do on them."""

    def __init__(self, design: Design, box: Box) -> None:
        self.design, self.box = design, box
        self.wanted = wanted_resonance(design)
        self.body = design.antenna.trap.body
        self.tried = 0
        self.range = [1 / (2 * math.pi * self.wanted * x) for x in REACTANCE]
        self.grid = self._grid()
        most, least = self.range[0], self.range[-1]
        # Chebyshev's places in the logarithm, the polynomial through them is true to the ends.
        ends = np.log([least, most])
        sizes = np.exp(
            ends.mean() - np.cos(np.pi * np.arange(SURFACE_SIZES) / (SURFACE_SIZES - 1)) * np.ptp(ends) / 2
        )
        losses = np.array(SURFACE_LOSSES)
        outcomes = [[self.grid.outcome(self._tank(c, 1 / q)) for q in losses] for c in sizes]
        places = {role: band.target / self.wanted for role, band in design.bands.items()}
        self.surface = Surface(sizes, losses, outcomes, places)

    def _tank(self, capacitance: float, q: float, loss: float = 0.0) -> BuiltTrap:
        return build(tank(self.wanted, float(capacitance), float(q), self.body, loss))

    def _grid(self) -> PortGrid:
        """Return the wires of every trap in range, the range made narrower where a trap has no wires."""
        for _ in range(6):
            traps = [self._tank(c, 200.0) for c in (self.range[0], self.range[-1])]
            try:
                return PortGrid(self.design, traps)
            except NoAnswer as error:
                first = error
                middle = self.range[1]
                self.range = [middle * (c / middle) ** 0.75 for c in self.range]
        raise first

    def combos(self, box: Box) -> Combos:
        """Return the combinations worth trying with every coil, by rising capacitance."""
        every = combos(box.capacitors, self.range[-1] * 0.9, self.range[0])
        if not len(every):
            return every
        inside = np.clip(every.capacitance, self.range[-1], self.range[0])
        losses, fillings, volts = self.surface.at(inside, np.array(1 / 200), every.loss)
        points = cost(
            losses=losses,
            fillings=fillings,
            volts_share=volts / every.voltage,
            rated=every.rated,
            length=0.0,
            diameter=0.0,
            pieces=np.array(PIECES)[every.way],
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
        ]

    def offers(self, box: Box, pair: tuple[str, int, int], joined: Combos) -> list[Offer]:
        """Return the best few traps of a pair, by rising coarse cost."""
        kind, i, j = pair
        if kind != "cable" and not len(joined):
            return []
        limits = (self.range[-1], self.range[0])
        found = list(MAKERS[kind](box, i, j, joined, self.wanted, self.surface, limits))
        self.tried += sum(offer.tried for offer in found)
        return sorted(found, key=lambda o: o.points)[:BEST_OF_PAIR]

    def run(self, rows: int) -> Iterator[Found]:
        """Look into every pair, then into the most promising ones closely, and yield after each row found."""
        joined = self.combos(self.box)
        waiting: list[list[Offer]] = []
        found: list[Row] = []
        total = done = 0
        pairs = self.pairs(self.box)

        def closely(offers: list[Offer]) -> bool:
            row = self.best(offers, self.box)
            if row is not None:
                found.append(row)
                found.sort(key=lambda r: float(r.cost.total))
            return row is not None

        for n, pair in enumerate(pairs, start=1):
            if offers := self.offers(self.box, pair, joined):
                waiting.append(offers)
                total += 1
            if n == FIRST_LOOK or n == len(pairs):
                waiting.sort(key=lambda offers: offers[0].points)
            if n == FIRST_LOOK:
                for offers in waiting[:FIRST_ROWS]:
                    done += 1
                    if closely(offers):
                        yield self._so_far(done, len(pairs), found[:rows], False)
                del waiting[:FIRST_ROWS]
        for offers in waiting:
            # What is further behind than coarse costs may be off cannot come in.
            if len(found) >= rows and offers[0].points > found[rows - 1].cost.total + 2 * NEAR:
                break
            done += 1
            if closely(offers):
                yield self._so_far(done, total, found[:rows], False)
        shown = found[:rows]
        for kind in MAKERS:
            # The best of a kind is worth knowing, however far behind.
            if not any(row.kind == kind for row in shown):
                others = (offers for offers in waiting if offers[0].kind == kind)
                known = [row for row in found if row.kind == kind]
                row = (
                    known[0] if known else next(filter(None, (self.best(o, self.box) for o in others)), None)
                )
                shown += [row] if row is not None else []
        if shown:
            yield self._so_far(total, total, shown, True)

    def _so_far(self, done: int, total: int, rows: list[Row], finished: bool) -> Found:
        return Found(
            done=done, total=total, rows=tuple(rows), tried=self.tried, resonance=self.wanted,
            finished=finished,
        )  # fmt: skip

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
        off = offer.off
        return cost(
            losses=[b.loss for b in bands],
            fillings=[math.inf if b.width is None else b.wanted / b.width for b in bands],
            volts_share=volts / offer.voltage,
            rated=offer.rated,
            length=offer.length,
            diameter=offer.diameter,
            pieces=len(offer.pieces),
            uncovered=max(off - offer.down, 0.0) + max(off - offer.up, 0.0),
            spare=offer.spare,
        )

    def row(self, offer: Offer, box: Box) -> Row | None:
        """Return an offer as a row; None when the exact coil does not bring it to its resonance."""
        made = offer.make(box, self.wanted)
        if made is None:
            return None
        trap, built, offer = made
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
        )

    def volts(self, capacitance: float) -> float:
        """Return about how many volts a trap of this capacitance bears at its worst."""
        return float(self.surface.at(np.array([capacitance]), np.array([1 / 200]), np.zeros(1))[2][0])
