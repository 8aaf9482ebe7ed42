"""One coil by itself, for a quick look: what it is at a frequency, what to wind, what can be moved."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from ...design.capacitor_kinds import GivenCapacitor
from ...design.coil_kinds import AnyCoil, CableCoil
from ...design.fields import SOLVE
from ...design.parts import Trap
from ..antenna.figures import Adjustment, CoilFigures
from ..antenna.trap_figures import adjustments, coil_figures
from ..trap.built import BuiltTrap, build
from ..trap.coils import build_coil


@dataclass(frozen=True, kw_only=True)
class CoilAnswer:
    """A coil at a frequency; `capacitance` is what resonates it at `resonance`, None in a coil of cable.

    `q_range` is what a built one may reach; `impedance` is that of the coil with its own capacitance, of a
    trap of cable that between its terminals.
    """

    part: AnyCoil
    frequency: float
    inductance: float
    inductance_doubt: float
    resistance: float
    q: float
    q_range: tuple[float, float]
    impedance: complex
    resonance: float
    capacitance: float | None
    coil: CoilFigures | None
    adjustments: tuple[Adjustment, ...]
    trap: BuiltTrap


def check_coil(
    coil: AnyCoil, frequency: float, inductance: float | None = None, capacitance: float | None = None
) -> CoilAnswer:
    """Return a coil at a frequency, its turns solved for an inductance or for resonance with a capacitance.

    NoAnswer when no turns do.
    """
    of_cable = isinstance(coil, CableCoil)
    turns_open = getattr(coil, "turns", None) is SOLVE
    if inductance is not None and turns_open and not of_cable:
        wanted = inductance
        built = build_coil(coil, frequency, lambda own: wanted, frequency)
        coil = replace(coil, turns=built.wound.turns)
        turns_open = False
    if of_cable:
        part = Trap(resonance=frequency if turns_open else SOLVE, coil=coil, capacitor=None)
    elif capacitance is None:
        part = Trap(resonance=frequency, coil=coil, capacitor=GivenCapacitor(capacitance=SOLVE))
    else:
        solved = turns_open or getattr(coil, "inductance", None) is SOLVE
        part = Trap(
            resonance=frequency if solved else SOLVE,
            coil=coil,
            capacitor=GivenCapacitor(capacitance=capacitance),
        )
    trap = build(part)
    at = np.float64(frequency)
    found, _, resistance, _ = trap.circuit(at)
    q = 2 * math.pi * frequency * float(found) / float(resistance)
    own = trap.self_capacitance[1]
    alone = complex(float(resistance), 2 * math.pi * frequency * float(found))
    if of_cable:
        alone = complex(trap.impedance(at))
    elif own:
        alone = alone / (1 + 2j * math.pi * frequency * own * alone)
    return CoilAnswer(
        part=coil,
        frequency=frequency,
        inductance=float(found),
        inductance_doubt=float(found) * trap.doubt,
        resistance=float(resistance),
        q=q,
        q_range=(q * trap.q_factors[0], q * trap.q_factors[1]),
        impedance=alone,
        resonance=trap.resonance,
        capacitance=None if of_cable else trap.fitted,
        coil=None if trap.wound is None else coil_figures(trap, trap.wound),
        adjustments=tuple(adjustments(part, trap)),
        trap=trap,
    )
