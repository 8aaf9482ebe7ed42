"""Coils that a box can wind for a trap: every former, wire and pitch; every core and wire; every cable."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from ..design.box import Box, Former, Wire
from ..design.fields import SOLVE
from ..design.part_rules import cable_numbers
from ..design.parts import Trap
from ..engine.cable_trap import Terminals
from ..engine.cables import propagation
from ..engine.coil_formulas import medhurst_capacitance
from ..engine.coil_table import QUICK_RANGE, in_range, quick_coil
from ..engine.coils import CAPACITANCE_DOUBT
from ..engine.conductors import MATERIALS, internal_impedance
from ..engine.ground import C0
from ..errors import NoAnswer
from .box_parts import cable_part, capacitor_part, solenoid_part, toroid_part
from .capacitors import cable_rating, line_of
from .coils import COIL_DOUBT
from .combos import PIECES, TRAPS, Combos
from .scoring import Surface, cost
from .trap import BuiltTrap, build

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
CABLE_LEAST = 0.75
"""What the exact cost of a cable trap may be of the coarse one, so that none is passed over."""
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
        held = box.cores if self.kind == "toroid" else box.formers
        return held[self.pair[1]].name

    def wire_name(self, box: Box) -> str:
        """Return what is wound."""
        held = box.cables if self.kind == "cable" else box.wires
        return held[self.pair[2]].name

    def make(self, box: Box, wanted: float) -> tuple[Trap, BuiltTrap, Offer] | None:
        """Return the trap as parts, solved so that it resonates where wanted, and the offer made exact."""
        return EXACT[self.kind](self, box, wanted)


def _exact_solenoid(offer: Offer, box: Box, wanted: float) -> tuple[Trap, BuiltTrap, Offer] | None:
    """Set the pitch by the solved rings; half a turn more where the turns would have to lie in each other."""
    former, wire = box.formers[offer.pair[1]], box.wires[offer.pair[2]]
    capacitor = capacitor_part(box.capacitors, offer.way, offer.pieces)
    for turns in (offer.turns, offer.turns + 0.5):
        pitch = offer.pitch
        for _ in range(8):
            if pitch < wire.closest * (1 - 1e-6):
                break
            coil = solenoid_part(former, wire, pitch, turns)
            trap = Trap(resonance=SOLVE, coil=coil, capacitor=capacitor)
            built = build(trap)
            miss = math.log(built.resonance / wanted)
            if abs(miss) < 1e-6:
                length = turns * pitch
                if length > former.length - 2 * END_ROOM:
                    return None
                slope = _slope(trap, built.resonance)
                down, up = _room(slope, pitch, wire.closest, length, former.length)
                turn = math.hypot(math.pi * (coil.former + coil.wire), pitch)
                offer = replace(
                    offer, turns=turns, pitch=pitch, length=length, down=float(down), up=float(up),
                    wire_length=turns * turn + 2 * TAIL,
                    off=built_off(offer.tolerance, built.capacitance - built.fitted, built.capacitance),
                )  # fmt: skip
                return trap, built, offer
            pitch *= math.exp(-2 * miss / offer.slope)
    return None


def _slope(trap: Trap, resonance: float) -> float:
    """Return by which power of the pitch a trap's inductance falls, by its resonance."""
    wider = replace(trap, coil=replace(trap.coil, pitch=trap.coil.pitch * WIDER))
    return 2 * math.log(build(wider).resonance / resonance) / math.log(WIDER)


def _exact_toroid(offer: Offer, box: Box, wanted: float) -> tuple[Trap, BuiltTrap, Offer] | None:
    """Move the inductance by bunching or spreading the turns until it is right."""
    core, wire = box.cores[offer.pair[1]], box.wires[offer.pair[2]]
    capacitor = capacitor_part(box.capacitors, offer.way, offer.pieces)
    shift = 0.0
    for _ in range(3):
        coil = toroid_part(core, wire, offer.turns, shift)
        trap = Trap(resonance=SOLVE, coil=coil, capacitor=capacitor)
        built = build(trap)
        shift = (1 + shift) * (built.resonance / wanted) ** 2 - 1
    return trap, built, offer


def _exact_cable(offer: Offer, box: Box, wanted: float) -> tuple[Trap, BuiltTrap, Offer] | None:
    """Solve turns and cable; it is wound a turn long and trimmed, which mends whatever it may be off."""
    former, cable = box.formers[offer.pair[1]], box.cables[offer.pair[2]]
    coil = cable_part(former, cable, list(Terminals)[offer.way])
    trap = Trap(resonance=wanted, coil=coil, capacitor=None)
    try:
        built = build(trap)
    except NoAnswer:
        return None
    wound = built.wound
    enough = math.floor(former.length / (wound.outer_length + 2 * END_ROOM)) * former.count >= TRAPS
    if not enough or TRAPS * wound.cut > cable.length:
        return None
    reach = float(built.capacitor.limits.reach(np.array([wanted]))[0])
    rating = cable_rating(coil)
    return trap, built, replace(
        offer, turns=wound.turns, pitch=wound.pitch, capacitance=built.capacitance,
        total_capacitance=built.capacitance, loss=1 / built.q, wire_length=wound.cut, length=wound.length,
        diameter=wound.diameter, voltage=math.inf if rating is None else rating / reach,
        off=built.doubt / 2, up=built.doubt / 2, down=built.doubt / 2,
    )  # fmt: skip


EXACT = {"solenoid": _exact_solenoid, "toroid": _exact_toroid, "cable": _exact_cable}


def built_off(tolerance: Any, own: Any, total: Any) -> Any:
    """Return by what part of itself a wound trap's resonance may be off before it is adjusted.

    By the capacitors' tolerance, the coil's doubt, and its own capacitance, known to a factor either way.
    """
    return (tolerance + COIL_DOUBT + math.log(CAPACITANCE_DOUBT) * own / total) / 2


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

    def drawn_apart(
        self, turns: np.ndarray, pitch: np.ndarray, fitted: np.ndarray, wanted: float
    ) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
        """Return pitch, slope, resistance and total capacitance of turns near their pitch, made to resonate.

        The slope is by which power of the pitch inductance times capacitance falls.
        """
        wire, w = self.wire, 2 * math.pi * wanted
        share = solenoid_part(self.former, wire, self.pitch, 1.0).q_share
        inside = internal_impedance(wanted, wire.diameter, MATERIALS[wire.material].resistivity)
        widest = min(
            wire.diameter / QUICK_RANGE["wire_over_pitch"][0],
            self.diameter / QUICK_RANGE["diameter_over_pitch"][0],
        ) / (WIDER * WIDER)
        for _ in range(2):
            pitch = np.clip(pitch, self.pitch, widest)
            both = np.array([[1.0], [WIDER]]) * pitch
            inductance, crowding = quick_coil(self.diameter, both, wire.diameter, turns)
            along = turns * np.hypot(math.pi * self.diameter, both) * crowding
            inductance = inductance + inside.imag * along / w
            total = fitted + 0.5 * medhurst_capacitance(self.diameter, turns * both)
            logs = np.log(inductance * total * w * w)
            slope = (logs[0] - logs[1]) / math.log(WIDER)
            pitch = pitch * np.exp(logs[0] / slope)
        total = fitted + 0.5 * medhurst_capacitance(self.diameter, turns * pitch)
        # What does not end where it was looked at lies outside what the quick coil is good for.
        pitch = np.where(np.abs(np.log(pitch / both[0])) < 0.05, pitch, np.nan)
        return pitch, slope, inside.real * along[0] / share, total


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
        turns, total = turns[n], some.capacitance + wound.own[n]
        wide = pitch * np.exp(np.log(wound.inductance[n] * w * w * total) / wound.slope[n])
        wide = np.minimum(wide, 1.02 * (former.length - 2 * END_ROOM) / turns)
        wide, slope, resistance, total = wound.drawn_apart(turns, wide, some.capacitance, wanted)
        length = turns * wide
        wire_length = turns * np.hypot(math.pi * wound.diameter, wide) + 2 * TAIL
        loss = resistance * w * total
        down, up = _room(slope, wide, wire.closest, length, former.length)
        good = (length <= former.length - 2 * END_ROOM) & (wire_length * TRAPS <= wire.length)
        good &= np.floor(former.length / (length + 2 * END_ROOM)) * former.count >= TRAPS
        good &= (total >= limits[0]) & (total <= limits[1]) & (wide > 0)
        yield from _picked(
            ("solenoid", i, j), some, surface, good, turns=turns, pitch=wide, total=total, loss=loss,
            length=length, diameter=np.full(turns.size, wound.diameter), wire_length=wire_length, down=down,
            up=up, off=built_off(some.tolerance, total - some.capacitance, total), slope=slope,
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
    total = joined.capacitance + toroid_part(core, wire, 1.0).self_capacitance
    ask = 1 / (w * w * total * core.inductance_index)
    turns = np.clip(np.round(np.sqrt(ask)), 1, most)
    shift = np.log(turns**2 / ask)
    wire_length = turns * (2 * core.height + core.outer - core.inner + 4 * over) + 2 * TAIL
    good = (np.abs(shift) < RING_ROOM) & (wire_length * TRAPS <= wire.length)
    good &= (total >= limits[0]) & (total <= limits[1])
    size = np.full(turns.size, 1.0)
    yield from _picked(
        ("toroid", i, j), joined, surface, good, turns=turns, pitch=0 * size, total=total,
        loss=size / core.q, length=core.height * size, diameter=core.outer * size,
        wire_length=wire_length, down=0.5 * np.maximum(RING_ROOM - shift, 0.0),
        up=0.5 * np.maximum(RING_ROOM + shift, 0.0), off=(joined.tolerance + core.tolerance) / 2, slope=size,
    )  # fmt: skip


def cable_offers(
    box: Box, i: int, j: int, joined: Combos, wanted: float, surface: Surface, limits: tuple[float, float]
) -> Iterator[Offer]:
    """Yield traps of one cable wound close on one former, both ways of taking its terminals."""
    former, cable = box.formers[i], box.cables[j]
    coil = cable_part(former, cable, Terminals.SERIES)
    outside, shield = cable_numbers(coil)
    diameter, w, line = former.diameter + outside, 2 * math.pi * wanted, line_of(coil)
    turns = TURNS[TURNS * outside <= former.length - 2 * END_ROOM]
    if former.diameter < outside or not in_range(diameter, outside, shield) or turns.size < 2:
        return
    inductance, crowding = quick_coil(diameter, outside, shield, turns)
    length = turns * math.hypot(math.pi * diameter, outside) + 2 * coil.tail
    theta = w * length / (C0 * line.velocity_factor)
    # Resonance: w L tan(theta) = Z0, rising with the turns up to a quarter wave of cable.
    over = np.where(theta < np.pi / 2, w * inductance * np.tan(np.minimum(theta, 1.57)) / line.z0, np.inf)
    n = int(np.argmax(over > 1))
    if n == 0:
        return
    part = math.log(1 / over[n - 1]) / math.log(min(over[n], 1e3) / over[n - 1])
    at = turns[n - 1] + part * (turns[n] - turns[n - 1])
    l_x, phi, s, angle = (float(np.interp(at, turns, y)) for y in (inductance, crowding, length, theta))
    copper = MATERIALS["copper"].resistivity
    shield_loss = float(internal_impedance(wanted, shield, copper).real) * phi * s
    # Inside, the current falls straight to nothing at the open end: a third of the loss of an even one.
    inner_loss = 2 / 3 * float(propagation(line, np.float64(wanted))[0].real) * line.z0 * s
    loss = (shield_loss + inner_loss) / coil.q_share / (w * l_x)
    winding, fits = at * outside, TRAPS * s <= cable.length
    if not fits or math.floor(former.length / (winding + outside + 2 * END_ROOM)) * former.count < TRAPS:
        return
    for way, terminals in enumerate(Terminals):
        ratio = 1.0 if terminals is Terminals.SHIELD else (1 + 1 / math.cos(angle)) ** 2
        total = 1 / (w * w * l_x * ratio)
        if not limits[0] <= total <= limits[1]:
            continue
        losses, fillings, _ = surface.at(np.array([total]), np.array([loss]), np.zeros(1))
        points = cost(
            losses=losses, fillings=fillings, volts_share=0.0, rated=cable_rating(coil) is not None,
            length=winding, diameter=diameter, pieces=0, uncovered=0.0, spare=1,
        ).total  # fmt: skip
        yield Offer(
            kind="cable", pair=("cable", i, j), turns=at, pitch=outside, way=way, pieces=(),
            capacitance=total, total_capacitance=total, capacitor_loss=0.0, loss=loss, tolerance=0.0,
            voltage=math.inf, rated=cable_rating(coil) is not None, spare=1, wire_length=s, length=winding,
            diameter=diameter, down=0.0, up=0.0, off=0.0, points=CABLE_LEAST * float(points[0]), slope=1.0,
            tried=1,
        )  # fmt: skip


def _picked(
    pair: tuple[str, int, int], some: Combos, surface: Surface, good: np.ndarray, **of: np.ndarray
) -> Iterator[Offer]:
    """Yield the best of one coil's traps; what nothing can be built of, with how many were tried."""
    of = {name: array[good] for name, array in of.items()}
    some = some.take(np.flatnonzero(good))
    if not len(some):
        return
    losses, fillings, volts = surface.at(of["total"], of["loss"], some.loss * some.capacitance / of["total"])
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
    losses = some.loss * some.capacitance / of["total"]
    for k in np.argsort(points, kind="stable")[:BEST]:
        if not math.isfinite(points[k]):
            break
        one = {name: float(array[k]) for name, array in of.items()}
        members = tuple(int(m) for m in some.members[k] if m >= 0)
        yield Offer(
            kind=pair[0], pair=pair, turns=one["turns"], pitch=one["pitch"], way=int(some.way[k]),
            pieces=members, capacitance=float(some.capacitance[k]), total_capacitance=one["total"],
            capacitor_loss=float(losses[k]), loss=one["loss"], tolerance=float(some.tolerance[k]),
            voltage=float(some.voltage[k]), rated=bool(some.rated[k]), spare=int(some.spare[k]),
            wire_length=one["wire_length"], length=one["length"], diameter=one["diameter"],
            down=one["down"], up=one["up"], off=one["off"], points=float(points[k]), slope=one["slope"],
            tried=len(some),
        )  # fmt: skip
