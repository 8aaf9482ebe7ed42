"""Coils that a box can wind for a trap: every former, wire and pitch; every core and wire; every cable."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from ...design.box import Box, Former, TurnStep, Wire
from ...design.part_rules import cable_numbers
from ...engine.cable_list import Terminals
from ...engine.cables import propagation
from ...engine.coil_formulas import medhurst_capacitance
from ...engine.coil_table import QUICK_RANGE, in_range, quick_coil
from ...engine.conductors import internal_impedance
from ...engine.ground import C0
from ...engine.metals import MATERIALS
from ...engine.resonator import partner
from ...engine.toroids import toroid_most_turns, toroid_turn_length, toroid_turns
from ..trap.capacitors import cable_rating, line_of
from ..trap.coils import CUT_TAIL, mean_diameter
from .combos import FREE, TRAPS, Combos
from .offers import END_ROOM, RING_ROOM, Offer, built_off, picked, points_of, room
from .parts import cable_part, solenoid_part, toroid_part
from .scoring import Surface, cost

SPACINGS = (1.0, 1.5, 2.0, 3.0)
"""Pitches that are tried, in closest pitches of the wire."""
TURNS = np.arange(2.0, 60.5, 0.5)
WIDER = 1.01
CLOSE_BY = 1.5
"""Points behind the best, by coils not yet drawn apart, within which a trap is looked at closer."""
FEWEST = 64
"""So many are looked at closer in any case."""
NEARLY = 1.02
"""How much a winding may overrun what there is before it is looked at closer."""
CABLE_LEAST = 0.75
"""What the exact cost of a cable trap may be of the coarse one, so that none is passed over."""

Farads = tuple[float, float]
"""Least and most capacitance of a trap. [F]"""
Arrays = dict[str, np.ndarray]


@dataclass(frozen=True, kw_only=True)
class Wound:
    """Windings of one wire on one former, quick figures: arrays over pitches and turns (p, n).

    `there` is how many of the turns the former has room for at each pitch.
    """

    former: Former
    wire: Wire
    pitches: np.ndarray
    diameter: float
    turns: np.ndarray
    inductance: np.ndarray
    resistance: np.ndarray
    own: np.ndarray
    slope: np.ndarray
    there: np.ndarray

    def drawn_apart(
        self, turns: np.ndarray, least: np.ndarray, pitch: np.ndarray, fitted: np.ndarray, wanted: float
    ) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
        """Return pitch, slope, resistance and total capacitance of turns near their pitch, made to resonate.

        The slope is by which power of the pitch inductance times capacitance falls.
        """
        wire, w = self.wire, 2 * math.pi * wanted
        share = solenoid_part(self.former, wire, wire.closest, 1.0).q_share
        inside = internal_impedance(wanted, wire.diameter, MATERIALS[wire.material].resistivity)
        widest = min(
            wire.diameter / QUICK_RANGE["wire_over_pitch"][0],
            self.diameter / QUICK_RANGE["diameter_over_pitch"][0],
        ) / (WIDER * WIDER)
        for _ in range(2):
            pitch = np.clip(pitch, least, widest)
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


def turn_step(former: Former) -> float:
    """Return the least by which a winding on a former can be longer, in turns."""
    return 1.0 if former.turn_step == TurnStep.WHOLE else 0.5


def windings(former: Former, wire: Wire, wanted: float) -> Wound | None:
    """Return what a wire makes on a former at each pitch, as long as the former is; None where it cannot."""
    metal = solenoid_part(former, wire, wire.closest, 1.0)
    diameter, w = mean_diameter(metal), 2 * math.pi * wanted
    turns = TURNS[TURNS % turn_step(former) == 0]
    pitches = wire.closest * np.array(SPACINGS)
    covered = in_range(diameter, pitches, wire.diameter) & in_range(diameter, WIDER * pitches, wire.diameter)
    pitches = pitches[covered & (pitches * turns[1] <= former.length - 2 * END_ROOM)]
    if former.diameter <= wire.closest or not pitches.size:
        return None
    turns = turns[turns * pitches[0] <= former.length - 2 * END_ROOM]
    both = np.array([1.0, WIDER])[:, None, None] * pitches[:, None]
    inductance, crowding = quick_coil(diameter, both, wire.diameter, turns)
    inside = internal_impedance(wanted, wire.diameter, MATERIALS[wire.material].resistivity)
    along = turns * np.hypot(math.pi * diameter, pitches)[:, None] * crowding[0]
    return Wound(
        former=former,
        wire=wire,
        pitches=pitches,
        diameter=diameter,
        turns=turns,
        inductance=inductance[0] + inside.imag * along / w,
        resistance=inside.real * along / metal.q_share,
        own=0.5 * medhurst_capacitance(diameter, turns * pitches[:, None]),
        slope=np.log(inductance[0] / inductance[1]) / math.log(WIDER),
        there=np.count_nonzero(turns * pitches[:, None] <= former.length - 2 * END_ROOM, axis=1),
    )


def solenoid_offers(
    box: Box, pair: tuple[str, int, int], joined: Combos, wanted: float, surface: Surface, limits: Farads
) -> Iterator[Offer]:
    """Yield the best traps of one former and one wire."""
    former, wire = box.formers[pair[1]], box.wires[pair[2]]
    wound = windings(former, wire, wanted)
    if wound is None:
        return
    w, space = 2 * math.pi * wanted, former.length - 2 * END_ROOM
    at: list[tuple[np.ndarray, np.ndarray, np.ndarray]] = []
    for k, there in enumerate(wound.there):
        # The fewest turns that are enough: then they are drawn apart until it is right.
        needed = partner(wanted, wound.inductance[k, :there]) - wound.own[k, :there]
        n = np.searchsorted(-needed, -joined.capacitance)
        which = np.flatnonzero((n > 0) & (n < there))
        at.append((np.full(which.size, k), n[which], which))
    k, n, which = (np.concatenate(part) for part in zip(*at, strict=True))
    if not which.size:
        return

    def figures(turns: Any, pitch: Any, slope: Any, resistance: Any, total: Any, some: Combos) -> Arrays:
        length = turns * pitch
        down, up = room(slope, pitch, wire.closest, length, former.length)
        return {
            "turns": turns,
            "pitch": pitch,
            "total": total,
            "loss": resistance * w * total,
            "length": length,
            "diameter": np.full(turns.size, wound.diameter),
            "wire_length": turns * np.hypot(math.pi * wound.diameter, pitch) + 2 * CUT_TAIL,
            "down": down,
            "up": up,
            "off": built_off(some.tolerance, total - some.capacitance, total),
            "slope": slope,
        }

    some, turns = joined.take(which), wound.turns[n]
    total, slope = some.capacitance + wound.own[k, n], wound.slope[k, n]
    wide = wound.pitches[k] * np.exp(np.log(wound.inductance[k, n] * w * w * total) / slope)
    wide = np.minimum(wide, NEARLY * space / turns)
    rough = figures(turns, wide, slope, wound.resistance[k, n], total, some)
    points = np.where(_fits(former, wire, rough, limits, NEARLY), points_of(some, surface, rough), math.inf)
    order = np.argsort(points, kind="stable")
    order = order[: max(FEWEST, int(np.searchsorted(points[order], points[order[:1]] + CLOSE_BY)[0]))]
    near = order[np.isfinite(points[order])]
    if not near.size:
        return
    some, turns = some.take(near), turns[near]
    drawn = wound.drawn_apart(turns, wound.pitches[k[near]], wide[near], some.capacitance, wanted)
    of = figures(turns, *drawn, some)
    good = _fits(former, wire, of, limits)
    of = {name: array[good] for name, array in of.items()}
    yield from picked(pair, some.take(np.flatnonzero(good)), surface, of, which.size)


def _fits(former: Former, wire: Wire, of: Arrays, limits: Farads, nearly: float = 1.0) -> np.ndarray:
    """Return which windings a former and a wire are enough for, twice, and which are in range; or nearly."""
    length = of["length"] / nearly
    fits = (length <= former.length - 2 * END_ROOM) & (of["wire_length"] * TRAPS <= nearly * wire.length)
    fits &= np.floor(former.length / (length + 2 * END_ROOM)) * former.count >= TRAPS
    return fits & (of["total"] * nearly >= limits[0]) & (of["total"] <= nearly * limits[1])


def toroid_offers(
    box: Box, pair: tuple[str, int, int], joined: Combos, wanted: float, surface: Surface, limits: Farads
) -> Iterator[Offer]:
    """Yield the best traps of one core and one wire: whole turns, capacitors near what they ask for."""
    core, wire = box.cores[pair[1]], box.wires[pair[2]]
    over = wire.diameter + 2 * wire.coating
    most = int(toroid_most_turns(core.inner, wire.closest))
    if core.count < TRAPS or most < 2:
        return
    # The turns nearest in inductance, whole on a ring.
    total = joined.capacitance + toroid_part(core, wire, 1.0).self_capacitance
    ask = toroid_turns(core.inductance_index, partner(wanted, total))
    turns = np.clip(np.round(ask), 1, most)
    shift = 2 * np.log(turns / ask)
    per_turn = toroid_turn_length(core.outer, core.inner, core.height, over)
    wire_length = turns * per_turn + 2 * CUT_TAIL
    good = (np.abs(shift) < RING_ROOM) & (wire_length * TRAPS <= wire.length)
    good &= (total >= limits[0]) & (total <= limits[1])
    some, size = joined.take(np.flatnonzero(good)), np.ones(np.count_nonzero(good))
    of = {
        "turns": turns[good],
        "pitch": 0 * size,
        "total": total[good],
        "loss": size / core.q,
        "length": core.height * size,
        "diameter": core.outer * size,
        "wire_length": wire_length[good],
        "down": 0.5 * np.maximum(RING_ROOM - shift[good], 0.0),
        "up": 0.5 * np.maximum(RING_ROOM + shift[good], 0.0),
        "off": (some.tolerance + core.tolerance) / 2,
        "slope": size,
    }
    yield from picked(pair, some, surface, of, len(some))


def cable_offers(
    box: Box, pair: tuple[str, int, int], joined: Combos, wanted: float, surface: Surface, limits: Farads
) -> Iterator[Offer]:
    """Yield traps of one cable wound close on one former, both ways of taking its terminals."""
    former, cable = box.formers[pair[1]], box.cables[pair[2]]
    if not cable.is_wound:
        return
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
        total = float(partner(wanted, l_x * ratio))
        if not limits[0] <= total <= limits[1]:
            continue
        losses, fillings, _ = surface.at(np.array([total]), np.array([loss]), np.zeros(1))
        points = cost(
            losses=losses, fillings=fillings, volts_share=0.0, rated=cable_rating(coil) is not None,
            length=winding, diameter=diameter, pieces=0, uncovered=0.0, spare=FREE,
        ).total  # fmt: skip
        yield Offer(
            kind="cable", pair=pair, turns=at, pitch=outside, way=way, pieces=(),
            capacitance=total, total_capacitance=total, capacitor_loss=0.0, loss=loss, tolerance=0.0,
            voltage=math.inf, rated=cable_rating(coil) is not None, spare=FREE, wire_length=s, length=winding,
            diameter=diameter, down=0.0, up=0.0, off=0.0, points=CABLE_LEAST * float(points[0]), slope=1.0,
            tried=1,
        )  # fmt: skip


Maker = Callable[[Box, tuple[str, int, int], Combos, float, Surface, Farads], Iterator[Offer]]
MAKERS: dict[str, Maker] = {
    "solenoid": solenoid_offers,
    "stub": solenoid_offers,
    "cable": cable_offers,
    "toroid": toroid_offers,
}
"""Who winds what: a coil with capacitors or with a stub of cable, cable alone, a ring core with either."""
