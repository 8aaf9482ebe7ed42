"""What a box offers for a trap: quick figures of one coil with one capacitor, and the best of many."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from ...design.box import Box
from ...engine.coils import CAPACITANCE_DOUBT
from ..trap.coils import COIL_DOUBT
from .combos import Combos
from .scoring import Surface, cost

END_ROOM = 0.01
"""Former beyond the winding at each end. [m], an estimate"""
SPREAD = 1.2
"""How much wider than as wound the turns of an open winding can still be set; an estimate."""
RING_ROOM = 0.05
"""Part of its inductance by which a coil on a ring moves as its turns are bunched or spread; an estimate."""
SNIP_STEP = 0.002
"""How finely a stub is snipped. [m], an estimate"""
BEST = 4


@dataclass(frozen=True, kw_only=True)
class Offer:
    """A trap that can be wound, its coil from quick formulas; `pair` is kind, former or core, and wire.

    `stub` is the place in the box's cables of a stub that serves as its capacitor, -1 without one; `snip` is
    how much of it is there to be cut away again.
    """

    kind: str
    pair: tuple[str, int, int]
    turns: float
    pitch: float
    way: int
    pieces: tuple[int, ...]
    capacitance: float
    total_capacitance: float
    capacitor_loss: float
    loss: float
    tolerance: float
    voltage: float
    rated: bool
    spare: int
    wire_length: float
    length: float
    diameter: float
    down: float
    up: float
    off: float
    points: float
    slope: float
    tried: int = 0
    stub: int = -1
    stub_length: float = 0.0
    snip: float = 0.0

    def former_name(self, box: Box) -> str:
        """Return what it is wound on."""
        held = box.cores if self.kind == "toroid" else box.formers
        return held[self.pair[1]].name

    def wire_name(self, box: Box) -> str:
        """Return what is wound."""
        held = box.cables if self.kind == "cable" else box.wires
        return held[self.pair[2]].name

    @property
    def uncovered(self) -> float:
        """The part of its frequency that its parts may be off and adjustment cannot mend.

        What is snipped to frequency is cut long enough for all of it; a stub comes out a step off at most.
        """
        if self.kind == "cable":
            return 0.0
        off = (
            self.off
            if self.stub < 0
            else step_off(self.stub_length, self.capacitance / self.total_capacitance)
        )
        return float(uncovered(off, self.down, self.up))


def step_off(length: Any, share: Any) -> Any:
    """Return by what part of itself a resonance is off by half a step of snipping.

    `share` is the stub's part of all the capacitance.
    """
    return SNIP_STEP * share / (4 * length)


def uncovered(off: Any, down: Any, up: Any) -> Any:
    """Return what of the doubt of a resonance cannot be mended, both ways together."""
    return np.maximum(off - down, 0.0) + np.maximum(off - up, 0.0)


def built_off(tolerance: Any, own: Any, total: Any) -> Any:
    """Return by what part of itself a wound trap's resonance may be off before it is adjusted.

    By the capacitors' tolerance, the coil's doubt, and its own capacitance, known to a factor either way.
    """
    return (tolerance + COIL_DOUBT + math.log(CAPACITANCE_DOUBT) * own / total) / 2


def room(slope: Any, pitch: Any, closest: float, length: Any, former: float) -> tuple[Any, Any]:
    """Return how far the resonance moves with the turns pushed together, and with them drawn apart."""
    apart = np.minimum(SPREAD, (former - 2 * END_ROOM) / length)
    return 0.5 * slope * np.log(pitch / closest), 0.5 * slope * np.log(np.maximum(apart, 1.0))


def points_of(some: Combos, surface: Surface, of: dict[str, np.ndarray]) -> np.ndarray:
    """Return the coarse cost of traps; infinite where the rating does not do.

    `of` holds `total` capacitance and `loss` of the coil, `length`, `diameter`, `down`, `up` and `off`.
    """
    length = np.where(some.stub >= 0, some.stub_length, math.inf)
    off = np.where(some.stub >= 0, step_off(length, some.capacitance / of["total"]), of["off"])
    losses, fillings, volts = surface.at(of["total"], of["loss"], some.loss * some.capacitance / of["total"])
    points = cost(
        losses=losses,
        fillings=fillings,
        volts_share=volts / some.voltage,
        rated=some.rated,
        length=of["length"],
        diameter=of["diameter"],
        pieces=some.pieces,
        uncovered=uncovered(off, of["down"], of["up"]),
        spare=some.spare,
        stub=some.stub_length,
    ).total
    # A rating is held to the figures of the row; up to here they are only near.
    return np.where(volts > 1.02 * some.voltage, np.inf, points)


def picked(
    pair: tuple[str, int, int], some: Combos, surface: Surface, of: dict[str, np.ndarray], tried: int
) -> Iterator[Offer]:
    """Yield the best of one pair's traps; each says its share of how many were tried."""
    if not len(some):
        return
    points = points_of(some, surface, of)
    losses = some.loss * some.capacitance / of["total"]
    order = np.argsort(points, kind="stable")
    order = order[np.isfinite(points[order])]
    if np.any(some.stub >= 0):
        # Of a coil with stubs of one cable a little longer or shorter the best is enough.
        alike = np.where(some.stub >= 0, some.stub * 1e3 + of["turns"], -1.0 - np.arange(len(some)))[order]
        order = order[np.sort(np.unique(alike, return_index=True)[1])]
    for place, k in enumerate(order[:BEST]):
        one = {name: float(array[k]) for name, array in of.items()}
        yield Offer(
            kind=pair[0],
            pair=pair,
            turns=one["turns"],
            pitch=one["pitch"],
            way=int(some.way[k]),
            pieces=tuple(int(m) for m in some.members[k] if m >= 0),
            capacitance=float(some.capacitance[k]),
            total_capacitance=one["total"],
            capacitor_loss=float(losses[k]),
            loss=one["loss"],
            tolerance=float(some.tolerance[k]),
            voltage=float(some.voltage[k]),
            rated=bool(some.rated[k]),
            spare=int(some.spare[k]),
            wire_length=one["wire_length"],
            length=one["length"],
            diameter=one["diameter"],
            down=one["down"],
            up=one["up"],
            off=one["off"],
            points=float(points[k]),
            slope=one["slope"],
            tried=0 if place else tried,
            stub=int(some.stub[k]),
            stub_length=float(some.stub_length[k]),
        )
