"""Coils that a box can wind for a trap: every former, wire and pitch; every core and wire."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from ..box import Box, Former, Wire
from ..engine.coil_formulas import medhurst_capacitance
from ..engine.coil_table import QUICK_RANGE, in_range, quick_coil
from ..engine.conductors import MATERIALS, internal_impedance
from ..fields import SOLVE
from ..parts import GivenCapacitor, GivenCoil, Solenoid, Trap
from .combos import PIECES, TRAPS, Combos
from .scoring import Surface, cost
from .trap import COIL_DOUBT, build

SPACINGS = (1.0, 1.5, 2.0, 3.0)
"""Pitches that are tried, in closest pitches of the wire."""
END_ROOM = 0.01
"""Former beyond the winding at each end. [m], an estimate"""
TAIL = 0.12
"""Wire beyond the winding at each end. [m], an estimate"""
SPREAD = 1.2
"""How much wider than as wound the turns of an open winding can still be set; an estimate."""
TURNS = np.arange(2.0, 60.5, 0.5)
WIDER = 1.01
RING_ROOM = 0.05
"""Part of its inductance by which a coil on a ring moves as its turns are bunched or spread; an estimate."""
BEST = 4


@dataclass(frozen=True, kw_only=True)
class Offer:
    """A trap that can be wound, its coil from quick formulas; `pair` is kind, former or core, and wire."""

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

    def former_name(self, box: Box) -> str:
        """Return what it is wound on."""
        held = box.formers if self.kind == "solenoid" else box.cores
        return held[self.pair[1]].name

    def make(self, box: Box, wanted: float) -> tuple[Solenoid | GivenCoil, Offer] | None:
        """Return the coil as a part, solved so that the trap resonates where it is wanted."""
        if self.kind != "solenoid":
            total = 1 / ((2 * math.pi * wanted) ** 2 * self.capacitance)
            return GivenCoil(inductance=total, q=box.cores[self.pair[1]].q), self
        return _exact(self, box.formers[self.pair[1]], box.wires[self.pair[2]], wanted)


def solenoid_part(former: Former, wire: Wire, pitch: float, turns: float) -> Solenoid:
    """Return a coil of a box's wire on its former; the metal lies on the former and its coat."""
    return Solenoid(
        former=former.diameter + 2 * wire.coating,
        wire=wire.diameter,
        pitch=pitch,
        turns=turns,
        material=wire.material,
    )


def _exact(offer: Offer, former: Former, wire: Wire, wanted: float) -> tuple[Solenoid, Offer] | None:
    """Set the pitch by the solved rings; half a turn more where the turns would have to lie in each other."""
    capacitor = GivenCapacitor(capacitance=offer.capacitance)
    for turns in (offer.turns, offer.turns + 0.5):
        pitch = offer.pitch
        for _ in range(6):
            if pitch < wire.closest * (1 - 1e-6):
                break
            coil = solenoid_part(former, wire, pitch, turns)
            miss = math.log(build(Trap(resonance=SOLVE, coil=coil, capacitor=capacitor)).resonance / wanted)
            if abs(miss) < 1e-6:
                length = turns * pitch
                if length > former.length - 2 * END_ROOM:
                    return None
                down, up = _room(offer.slope, pitch, wire.closest, length, former.length)
                turn = math.hypot(math.pi * (coil.former + coil.wire), pitch)
                return coil, replace(
                    offer, turns=turns, pitch=pitch, length=length, down=float(down), up=float(up),
                    wire_length=turns * turn + 2 * TAIL,
                )  # fmt: skip
            pitch *= math.exp(-2 * miss / offer.slope)
    return None


def _room(
    slope: float | np.ndarray,
    pitch: np.ndarray | float,
    closest: float,
    length: np.ndarray | float,
    room: float,
) -> tuple[np.ndarray, np.ndarray]:
    """Return how far the resonance moves with the turns pushed together, and with them drawn apart."""
    apart = np.minimum(SPREAD, (room - 2 * END_ROOM) / length)
    return 0.5 * slope * np.log(pitch / closest), 0.5 * slope * np.log(np.maximum(apart, 1.0))


@dataclass(frozen=True, kw_only=True)
class Wound:
    """Windings of one wire on one former at one pitch, arrays over turns (n,): quick figures."""

    former: Former
    wire: Wire
    pitch: float
    diameter: float
    turns: np.ndarray
    inductance: np.ndarray
    resistance: np.ndarray
    own: np.ndarray
    slope: np.ndarray


def windings(former: Former, wire: Wire, wanted: float) -> Iterator[Wound]:
    """Yield what a wire makes on a former at each pitch, as long as the former is."""
    metal = solenoid_part(former, wire, wire.closest, 1.0)
    diameter, w = metal.former + metal.wire, 2 * math.pi * wanted
    pitches = wire.closest * np.array(SPACINGS)
    covered = in_range(diameter, pitches, wire.diameter) & in_range(diameter, WIDER * pitches, wire.diameter)
    pitches = pitches[covered & (pitches * TURNS[1] <= former.length - 2 * END_ROOM)]
    if former.diameter <= wire.closest or not pitches.size:
        return
    both = np.array([1.0, WIDER])[:, None, None] * pitches[:, None]
    inductance, crowding = quick_coil(diameter, both, wire.diameter, TURNS)
    slope = np.log(inductance[0] / inductance[1]) / math.log(WIDER)
    inside = internal_impedance(wanted, wire.diameter, MATERIALS[wire.material].resistivity)
    along = TURNS * np.hypot(math.pi * diameter, pitches)[:, None] * crowding[0]
    own = 0.5 * medhurst_capacitance(diameter, TURNS * pitches[:, None])
    for k, pitch in enumerate(pitches):
        there = int(np.count_nonzero(TURNS * pitch <= former.length - 2 * END_ROOM))
        yield Wound(
            former=former,
            wire=wire,
            pitch=float(pitch),
            diameter=diameter,
            turns=TURNS[:there],
            inductance=(inductance[0, k] + inside.imag * along[k] / w)[:there],
            resistance=(inside.real * along[k] / metal.q_share)[:there],
            own=own[k, :there],
            slope=slope[k, :there],
        )


def solenoid_offers(
    box: Box, i: int, j: int, joined: Combos, wanted: float, surface: Surface, limits: tuple[float, float]
) -> Iterator[Offer]:
    """Yield the best traps of one former and one wire, a few for every pitch."""
    w = 2 * math.pi * wanted
    for wound in windings(box.formers[i], box.wires[j], wanted):
        former, wire, turns, pitch = wound.former, wound.wire, wound.turns, wound.pitch
        # The least number of half turns that is enough: then the turns are drawn apart until it is right.
        needed = 1 / (w * w * wound.inductance) - wound.own
        n = np.searchsorted(-needed, -joined.capacitance)
        which = np.flatnonzero((n > 0) & (n < turns.size))
        if not which.size:
            continue
        n, some = n[which], joined.take(which)
        slope, total = wound.slope[n], some.capacitance + wound.own[n]
        wide = pitch * np.exp(np.log(wound.inductance[n] * w * w * total) / slope)
        length = turns[n] * wide
        wire_length = turns[n] * np.hypot(math.pi * wound.diameter, wide) + 2 * TAIL
        loss = wound.resistance[n] * w * total + some.loss * some.capacitance / total
        down, up = _room(slope, wide, wire.closest, length, former.length)
        good = (length <= former.length - 2 * END_ROOM) & (wire_length * TRAPS <= wire.length)
        good &= np.floor(former.length / (length + 2 * END_ROOM)) * former.count >= TRAPS
        good &= (total >= limits[0]) & (total <= limits[1])
        good &= wire.diameter / wide >= QUICK_RANGE["wire_over_pitch"][0]
        yield from _picked(
            ("solenoid", i, j), some, surface, good, turns=turns[n], pitch=wide, total=total, loss=loss,
            length=length, diameter=np.full(n.size, wound.diameter), wire_length=wire_length, down=down,
            up=up, off=some.tolerance / 2 + COIL_DOUBT / 2, slope=slope,
        )  # fmt: skip


def toroid_offers(
    box: Box, i: int, j: int, joined: Combos, wanted: float, surface: Surface, limits: tuple[float, float]
) -> Iterator[Offer]:
    """Yield the best traps of one core and one wire: whole turns, capacitors near what they ask for."""
    w, core, wire = 2 * math.pi * wanted, box.cores[i], box.wires[j]
    over = wire.diameter + 2 * wire.coating
    most = int(math.pi * (core.inner - over) / wire.closest)
    if core.count < TRAPS or most < 2:
        return
    # The turns nearest in inductance, whole on a ring.
    ask = 1 / (w * w * joined.capacitance * core.inductance_index)
    turns = np.clip(np.round(np.sqrt(ask)), 1, most)
    shift = np.log(turns**2 / ask)
    wire_length = turns * (2 * core.height + core.outer - core.inner + 4 * over) + 2 * TAIL
    good = (np.abs(shift) < RING_ROOM) & (wire_length * TRAPS <= wire.length)
    good &= (joined.capacitance >= limits[0]) & (joined.capacitance <= limits[1])
    size = np.full(turns.size, 1.0)
    yield from _picked(
        ("toroid", i, j), joined, surface, good, turns=turns, pitch=0 * size, total=joined.capacitance,
        loss=1 / core.q + joined.loss, length=core.height * size, diameter=core.outer * size,
        wire_length=wire_length, down=0.5 * np.maximum(RING_ROOM + shift, 0.0),
        up=0.5 * np.maximum(RING_ROOM - shift, 0.0), off=(joined.tolerance + core.tolerance) / 2, slope=size,
    )  # fmt: skip


def _picked(
    pair: tuple[str, int, int], some: Combos, surface: Surface, good: np.ndarray, **of: np.ndarray
) -> Iterator[Offer]:
    """Yield the best of one coil's traps; what nothing can be built of, with how many were tried."""
    of = {name: array[good] for name, array in of.items()}
    some = some.take(np.flatnonzero(good))
    if not len(some):
        return
    losses, fillings, volts = surface.at(of["total"], of["loss"])
    points = cost(
        losses=losses,
        fillings=fillings,
        volts_share=volts / some.voltage,
        rated=some.rated,
        length=of["length"],
        diameter=of["diameter"],
        pieces=np.array(PIECES)[some.way],
        uncovered=np.maximum(of["off"] - of["down"], 0.0) + np.maximum(of["off"] - of["up"], 0.0),
        spare=some.spare,
    ).total
    # A rating is held to the figures of the row; up to here they are only near.
    points = np.where(volts > 1.02 * some.voltage, np.inf, points)
    for k in np.argsort(points, kind="stable")[:BEST]:
        if not math.isfinite(points[k]):
            break
        one = {name: float(array[k]) for name, array in of.items()}
        members = tuple(int(m) for m in some.members[k] if m >= 0)
        yield Offer(
            kind=pair[0], pair=pair, turns=one["turns"], pitch=one["pitch"], way=int(some.way[k]),
            pieces=members, capacitance=float(some.capacitance[k]), total_capacitance=one["total"],
            capacitor_loss=float(some.loss[k]), loss=one["loss"], tolerance=float(some.tolerance[k]),
            voltage=float(some.voltage[k]), rated=bool(some.rated[k]), spare=int(some.spare[k]),
            wire_length=one["wire_length"], length=one["length"], diameter=one["diameter"],
            down=one["down"], up=one["up"], off=one["off"], points=float(points[k]), slope=one["slope"],
            tried=len(some),
        )  # fmt: skip
