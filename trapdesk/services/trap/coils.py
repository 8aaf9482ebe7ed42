"""Coils put together from their parts: what each is over frequency, what to wind, what can be moved after."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from ...design.coil_kinds import GivenCoil, PlainCoil, Solenoid, Toroid
from ...design.fields import SOLVE
from ...design.former_kinds import FORMER_MATERIALS
from ...engine.cable_winding import straight_inductance
from ...engine.coil_formulas import rosa_inductance
from ...engine.coil_limits import MOST_TURNS
from ...engine.coil_table import in_range, quick_coil
from ...engine.coils import BUILT_Q, Winding, self_capacitance_range, winding
from ...engine.conductors import internal_impedance
from ...engine.metals import MATERIALS
from ...engine.toroids import toroid_inductance, toroid_most_turns, toroid_turn_length, toroid_turns
from ...errors import NoAnswer
from .capacitors import Limits

WHERE = "antenna.trap.coil"
COIL_DOUBT = 0.015
"""How far the inductance of a coil made by hand may be off, turns, pitch and former with it. [1]"""
WOUND_Q = (BUILT_Q[0] / BUILT_Q[1], BUILT_Q[2] / BUILT_Q[1])
"""What a coil of plain wire may reach of the Q computed, low and high."""
TOROID_Q = (0.7, 1.2)
"""The same of the Q stated for a coil on a core; an estimate, no source."""
NO_SELF_CAPACITANCE = (0.0, 0.0, 0.0)
CUT_TAIL = 0.10
"""Wire beyond the winding at each end of a coil. [m], common practice, no source"""
GUESSES = np.arange(1.0, MOST_TURNS + 1.0)
STEPS = 16


@dataclass(frozen=True, kw_only=True)
class Wound:
    """What to wind, and how large it comes out; lengths in m, mass in kg without former and core.

    `diameter` and `pitch` are to the centre of the wire or cable, `length` is turns times pitch; `outer_…` is
    what it measures outside. `most_turns` is what fits, where something limits it.
    """

    turns: float
    diameter: float
    pitch: float
    length: float
    wire_length: float
    cut: float
    outer_diameter: float
    outer_length: float
    mass: float
    crowding: float = 1.0
    turns_range: tuple[float, float] | None = None
    wind: int | None = None
    most_turns: int | None = None
    softens: float | None = None


@dataclass(frozen=True, kw_only=True)
class BuiltCoil:
    """A coil as it is computed with.

    `series(frequency)` gives inductance and resistance, what the coil's own capacitance adds left out.
    `doubt` is the relative doubt of the inductance, `q_factors` what a built coil may reach of the Q
    computed, `drift` the relative change of the inductance per kelvin where the part says it. `spread` is by
    which power the inductance follows the winding's length, `together` how much of its length it can be
    pushed together.
    """

    series: Callable[[Any], tuple[Any, Any]]
    own: tuple[float, float, float] = NO_SELF_CAPACITANCE
    wound: Wound | None = None
    winding: Winding | None = None
    doubt: float = 0.0
    q_factors: tuple[float, float] = (1.0, 1.0)
    drift: float | None = None
    limits: Limits = Limits()
    spread: float | None = None
    together: float = 0.0


Needed = Callable[[float], float]
"""From what a coil adds of its own capacitance [F] to the inductance it must have [H]."""


def build_coil(coil: PlainCoil, frequency: float | None, needed: Needed | None, q_at: float) -> BuiltCoil:
    """Return a coil put together.

    Solved turns bring it to the inductance it needs at a frequency; `q_at` is where a stated Q holds.
    """
    return BUILDERS[type(coil)](coil, frequency, needed, q_at)


def _given(coil: GivenCoil, frequency: float | None, needed: Needed | None, q_at: float) -> BuiltCoil:
    inductance = needed(0.0) if coil.inductance is SOLVE else coil.inductance
    return BuiltCoil(series=_by_q(inductance, coil.q, q_at))


def _by_q(inductance: float, q: float, q_at: float) -> Callable[[Any], tuple[Any, Any]]:
    """Return a coil of stated Q at a frequency, its resistance going with the root of frequency."""
    resistance = 2 * math.pi * q_at * inductance / q

    def series(frequency: Any) -> tuple[Any, Any]:
        return np.full_like(frequency, inductance), resistance * np.sqrt(frequency / q_at)

    return series


def mean_diameter(coil: Solenoid) -> float:
    """Return the diameter to the centre of the wire, which lies on the former with its insulation."""
    return coil.former + coil.wire + 2 * coil.insulation


def pitch_of(coil: Solenoid, turns: float) -> float:
    """Return the distance from turn to turn: as set, from the winding's length, or wound close."""
    if coil.pitch is not None:
        return coil.pitch
    return coil.wire + 2 * coil.insulation if coil.length is None else coil.length / turns


def _solenoid(coil: Solenoid, frequency: float | None, needed: Needed | None, q_at: float) -> BuiltCoil:
    material = MATERIALS[coil.material]
    diameter = mean_diameter(coil)
    leads = 2 * straight_inductance(coil.lead, coil.wire)

    def wind(turns: float) -> Winding:
        return winding(diameter, pitch_of(coil, turns), coil.wire, turns)

    turns = coil.turns
    if turns is SOLVE:
        turns = _solved_turns(coil, diameter, wind, leads, material.resistivity, frequency, needed)
    wound = wind(turns)
    of_wire = wound.proximity_factor * wound.wire_length + 2 * coil.lead

    def series(at: Any) -> tuple[Any, Any]:
        inside = internal_impedance(at, coil.wire, material.resistivity) * of_wire
        inductance = wound.inductance + leads + inside.imag / (2 * np.pi * np.asarray(at))
        return inductance, inside.real / coil.q_share

    length = wound.length
    copper = wound.wire_length + 2 * CUT_TAIL + 2 * coil.lead
    rosa = rosa_inductance(diameter, wound.pitch * np.array([1.0, 1.01, 1.02]), coil.wire, turns)
    of_pitch = float(np.log(rosa[2] / rosa[0]) / math.log(1.02)) if wound.pitch > 1.02 * coil.wire else 0.0
    gap = wound.pitch - coil.wire - 2 * coil.insulation
    return BuiltCoil(
        series=series,
        own=self_capacitance_range(diameter, length),
        winding=wound,
        wound=Wound(
            turns=turns,
            diameter=diameter,
            pitch=wound.pitch,
            length=length,
            wire_length=wound.wire_length,
            cut=copper,
            outer_diameter=diameter + coil.wire + 2 * coil.insulation,
            outer_length=length + coil.wire,
            mass=copper * math.pi / 4 * coil.wire**2 * material.density,
            crowding=wound.proximity_factor,
            softens=FORMER_MATERIALS[coil.former_material].softens,
        ),
        doubt=COIL_DOUBT,
        q_factors=WOUND_Q,
        spread=of_pitch,
        together=max(0.0, gap / wound.pitch),
    )


def _rosa(*shape: Any) -> tuple[np.ndarray]:
    """Return Rosa's inductance where the table of quick coils ends."""
    return (rosa_inductance(*shape),)


def _solved_turns(
    coil: Solenoid,
    diameter: float,
    wind: Callable[[float], Winding],
    leads: float,
    resistivity: float,
    frequency: float,
    needed: Needed,
) -> float:
    """Return the turns that give the inductance needed, with what the coil's own capacitance adds."""
    inside = float(internal_impedance(frequency, coil.wire, resistivity).imag) / (2 * math.pi * frequency)

    def miss(log_turns: float) -> float:
        wound = wind(math.exp(log_turns))
        own = self_capacitance_range(diameter, wound.length)[1]
        within = inside * (wound.proximity_factor * wound.wire_length + 2 * coil.lead)
        return math.log((wound.inductance + leads + within) / needed(own))

    wanted = needed(self_capacitance_range(diameter, diameter)[1])
    most = MOST_TURNS if coil.length is None else min(MOST_TURNS, 0.98 * coil.length / coil.wire)
    if most < 2:
        raise NoAnswer(
            "no_turns_fit", f"{WHERE}.length", {"winding_length_m": coil.length or 0.0}, "a longer winding"
        )
    guesses = GUESSES[GUESSES <= most]
    pitches = np.array([pitch_of(coil, turns) for turns in guesses])
    table = quick_coil if np.all(in_range(diameter, pitches, coil.wire)) else _rosa
    logs = np.log(table(diameter, pitches, coil.wire, guesses)[0] + leads)
    few, many = 0.0, math.log(most)
    x = float(np.clip(np.interp(math.log(wanted), logs, np.log(guesses)), few, many))
    new = miss(x)
    # Inductance goes with about the 1.7th power of the turns: a start for secant steps in the logarithm.
    step = -new / 1.7
    for _ in range(STEPS):
        if abs(new) < 1e-9:
            return math.exp(x)
        last, old = x, new
        x = min(max(x + step, few), many)
        if x == last:
            break
        new = miss(x)
        if new == old:
            break
        step = -new * (x - last) / (new - old)
    if abs(new) < 1e-6:
        return math.exp(x)
    bound = math.exp(x)
    raise NoAnswer(
        "no_such_coil",
        f"{WHERE}.turns",
        {"wanted_h": wanted, "turns_bound": bound},
        "a smaller former or less capacitance" if new > 0 else "a larger former or more capacitance",
    )


def _toroid(coil: Toroid, frequency: float | None, needed: Needed | None, q_at: float) -> BuiltCoil:
    own = coil.self_capacitance
    turns = coil.turns
    over = coil.wire + 2 * coil.insulation
    most = int(toroid_most_turns(coil.inner, over))
    if turns is SOLVE:
        turns = float(toroid_turns(coil.inductance_index, needed(own)))
        if not 1 <= turns <= most:
            numbers = {"wanted_h": needed(own), "turns_that_fit": float(most), "turns_needed": turns}
            help = "thinner wire or a larger core" if turns > 1 else "a core of less inductance index"
            raise NoAnswer("no_turns_fit", f"{WHERE}.turns", numbers, help)
    per_turn = float(toroid_turn_length(coil.outer, coil.inner, coil.height, over))
    cut = per_turn * turns + 2 * CUT_TAIL
    return BuiltCoil(
        series=_by_q(float(toroid_inductance(coil.inductance_index, turns)), coil.q, q_at),
        own=(0.5 * own, own, 2 * own),
        wound=Wound(
            turns=turns,
            diameter=0.5 * (coil.outer + coil.inner),
            pitch=math.pi * (coil.inner - over) / turns,
            length=coil.height + 2 * over,
            wire_length=per_turn * turns,
            cut=cut,
            outer_diameter=coil.outer + 2 * over,
            outer_length=coil.height + 2 * over,
            mass=cut * math.pi / 4 * coil.wire**2 * MATERIALS["copper"].density,
            most_turns=most,
        ),
        doubt=coil.tolerance,
        q_factors=TOROID_Q,
        drift=coil.drift,
        limits=Limits(flux=coil.flux, heat=coil.heat),
    )


BUILDERS: dict[type, Callable[[Any, float | None, Needed | None, float], BuiltCoil]] = {
    GivenCoil: _given,
    Solenoid: _solenoid,
    Toroid: _toroid,
}
"""Coils that need a capacitor beside them; one of cable is a trap by itself."""
