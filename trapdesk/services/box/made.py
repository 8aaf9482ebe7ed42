"""Offers made exact: the coil solved; pitch, bunching or stub set so that the trap resonates where wanted."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from ...design.box import Box
from ...design.fields import SOLVE
from ...design.parts import Trap
from ...engine.cable_list import Terminals
from ...errors import NoAnswer
from ..trap.built import BuiltTrap, build
from ..trap.capacitors import cable_rating
from ..trap.coils import CUT_TAIL, mean_diameter
from .combos import TRAPS
from .offers import END_ROOM, Offer, built_off, room
from .parts import cable_part, capacitor_part, solenoid_part, stub_part, toroid_part
from .winders import WIDER, turn_step

Made = tuple[Trap, BuiltTrap, Offer]


def made(offer: Offer, box: Box, wanted: float) -> Made | None:
    """Return an offer's trap as parts, solved so that it resonates where wanted, and the offer made exact.

    None where the exact coil does not come to it, or what there is in the box does not do.
    """
    if offer.stub >= 0:
        return _with_stub(offer, box, wanted)
    return EXACT[offer.kind](offer, box, wanted)


def _with_stub(offer: Offer, box: Box, wanted: float) -> Made | None:
    """Solve the length of the stub; the coil stays as it was offered."""
    wire, cable = box.wires[offer.pair[2]], box.cables[offer.stub]
    if offer.kind == "toroid":
        coil = toroid_part(box.cores[offer.pair[1]], wire, offer.turns)
    else:
        coil = solenoid_part(box.formers[offer.pair[1]], wire, offer.pitch, offer.turns)
    stub = stub_part(cable)
    trap = Trap(resonance=wanted, coil=coil, capacitor=stub)
    try:
        built = build(trap)
    except NoAnswer:
        return None
    length = built.capacitor.length
    off = built_off(offer.tolerance, built.capacitance - built.fitted, built.capacitance)
    # Capacitance goes with the length, frequency with the root of what it and the coil make.
    snip = 2 * off * length * built.capacitance / built.fitted
    if TRAPS * (length + snip) > cable.length:
        return None
    rating = cable_rating(stub)
    reach = float(built.capacitor.limits.reach(np.array([wanted]))[0])
    return trap, built, replace(
        offer, capacitance=built.fitted, stub_length=length, snip=snip, off=off,
        voltage=math.inf if rating is None else rating / reach,
    )  # fmt: skip


def _solenoid(offer: Offer, box: Box, wanted: float) -> Made | None:
    """Set the pitch by the solved rings; one step of turns more where they would lie in each other."""
    former, wire = box.formers[offer.pair[1]], box.wires[offer.pair[2]]
    capacitor = capacitor_part(box.capacitors, offer.way, offer.pieces)
    for turns in (offer.turns, offer.turns + turn_step(former)):
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
                down, up = room(slope, pitch, wire.closest, length, former.length)
                turn = math.hypot(math.pi * mean_diameter(coil), pitch)
                offer = replace(
                    offer, turns=turns, pitch=pitch, length=length, down=float(down), up=float(up),
                    wire_length=turns * turn + 2 * CUT_TAIL,
                    off=built_off(offer.tolerance, built.capacitance - built.fitted, built.capacitance),
                )  # fmt: skip
                return trap, built, offer
            pitch *= math.exp(-2 * miss / offer.slope)
    return None


def _slope(trap: Trap, resonance: float) -> float:
    """Return by which power of the pitch a trap's inductance falls, by its resonance."""
    wider = replace(trap, coil=replace(trap.coil, pitch=trap.coil.pitch * WIDER))
    return 2 * math.log(build(wider).resonance / resonance) / math.log(WIDER)


def _toroid(offer: Offer, box: Box, wanted: float) -> Made | None:
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


def _cable(offer: Offer, box: Box, wanted: float) -> Made | None:
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


EXACT: dict[str, Callable[[Offer, Box, float], Made | None]] = {
    "solenoid": _solenoid,
    "toroid": _toroid,
    "cable": _cable,
}
