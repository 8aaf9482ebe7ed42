"""A trap put together: which value is solved, and the one resonator it makes."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from ..engine import resonator
from ..engine.coils import (
    BUILT_Q,
    MOST_TURNS,
    Coil,
    Winding,
    coil_at,
    self_capacitance_range,
    solenoid_turns,
    winding,
)
from ..engine.conductors import MATERIALS
from ..engine.stress import Stress, stress
from ..errors import NoAnswer
from ..fields import SOLVE
from ..parts import GivenCoil, Solenoid, Trap

COIL_DOUBT = 0.015
"""How far the inductance of a coil wound by hand may be off, relative; a given one is taken as given."""
NO_SELF_CAPACITANCE = (0.0, 0.0, 0.0)


@dataclass(frozen=True, kw_only=True)
class BuiltTrap:
    """A trap as it is computed with: anything with `impedance(frequency)` can stand in its place.

    `inductance` [H] is that at the trap's own resonance [Hz]; `capacitance` [F] is what is fitted plus what
    the coil adds. `doubt` is the relative doubt of the inductance, `q_factors` what a built trap may reach of
    the Q computed.
    """

    resonance: float
    inductance: float
    capacitance: float
    fitted: float
    coil_series: Callable[[np.ndarray], tuple[np.ndarray, np.ndarray]]
    capacitor_q: float
    wound: Winding | None
    self_capacitance: tuple[float, float, float]
    doubt: float
    q_factors: tuple[float, float]

    def circuit(self, frequency: np.ndarray) -> tuple[np.ndarray, float, np.ndarray, np.ndarray | float]:
        """Return coil inductance, capacitance, coil and capacitor resistance at frequencies."""
        inductance, resistance = self.coil_series(frequency)
        lossless = math.isinf(self.capacitor_q)
        esr = 0.0 if lossless else 1 / (2 * np.pi * frequency * self.capacitance * self.capacitor_q)
        return inductance, self.capacitance, resistance, esr

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance of the trap at frequencies, in ohm."""
        return resonator.impedance(frequency, *self.circuit(frequency))

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what its parts bear for an rms current through the whole trap."""
        return stress(frequency, *self.circuit(frequency), current=current)

    @property
    def q(self) -> float:
        """Q at its resonance, losses of coil and capacitor together."""
        inductance, _, coil, capacitor = self.circuit(np.float64(self.resonance))
        loss = float(coil + capacitor)
        return 2 * math.pi * self.resonance * float(inductance) / loss if loss else math.inf


def build(trap: Trap) -> BuiltTrap:
    """Return the trap with its solved value found; NoAnswer when there is none."""
    capacitance = trap.capacitor.capacitance
    resonance = trap.resonance
    if isinstance(trap.coil, GivenCoil):
        return _with_given_coil(trap, trap.coil, resonance, capacitance)
    return _with_solenoid(trap, trap.coil, resonance, capacitance)


def _with_given_coil(trap: Trap, coil: GivenCoil, resonance, capacitance) -> BuiltTrap:  # noqa: ANN001
    inductance = coil.inductance
    if resonance is SOLVE:
        resonance = float(resonator.lc_resonance(inductance, capacitance))
    elif inductance is SOLVE:
        inductance = _partner(resonance, capacitance)
    else:
        capacitance = _partner(resonance, inductance)
    at_resonance = 2 * math.pi * resonance * inductance / coil.q

    def series(frequency: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        return np.full_like(frequency, inductance), at_resonance * np.sqrt(frequency / resonance)

    return BuiltTrap(
        resonance=resonance,
        inductance=inductance,
        capacitance=capacitance,
        fitted=capacitance,
        coil_series=series,
        capacitor_q=trap.capacitor.q or math.inf,
        wound=None,
        self_capacitance=NO_SELF_CAPACITANCE,
        doubt=0.0,
        q_factors=(1.0, 1.0),
    )


def _partner(resonance: float, value: float) -> float:
    """Return the capacitance to an inductance at a resonance, or the other way round."""
    return 1 / ((2 * math.pi * resonance) ** 2 * value)


def _with_solenoid(trap: Trap, coil: Solenoid, resonance, capacitance) -> BuiltTrap:  # noqa: ANN001
    diameter = coil.former + coil.wire
    resistivity = MATERIALS[coil.material].resistivity
    turns = coil.turns
    if turns is SOLVE:
        turns = _turns(coil, diameter, resistivity, resonance, capacitance)
    wound = winding(diameter, coil.pitch, coil.wire, turns)
    own = self_capacitance_range(diameter, wound.length)

    def smooth(frequency: np.ndarray) -> Coil:
        return coil_at(wound, frequency, resistivity)

    def series(frequency: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        at = smooth(frequency)
        return at.inductance, at.resistance / coil.q_share

    if capacitance is SOLVE:
        total = _partner(resonance, float(smooth(np.float64(resonance)).inductance))
        capacitance = total - own[1]
        if capacitance <= 0:
            raise NoAnswer(
                "coil_resonates_below_by_itself",
                "antenna.trap.capacitor.capacitance",
                {"self_capacitance_f": own[1], "needed_f": total},
                "fewer turns or a smaller former",
            )
    total = capacitance + own[1]
    if resonance is SOLVE:
        resonance = float(resonator.lc_resonance(wound.inductance, total))
        for _ in range(3):
            resonance = float(resonator.lc_resonance(smooth(np.float64(resonance)).inductance, total))
    return BuiltTrap(
        resonance=resonance,
        inductance=float(smooth(np.float64(resonance)).inductance),
        capacitance=total,
        fitted=capacitance,
        coil_series=series,
        capacitor_q=trap.capacitor.q or math.inf,
        wound=wound,
        self_capacitance=own,
        doubt=COIL_DOUBT,
        q_factors=(BUILT_Q[0] / BUILT_Q[1], BUILT_Q[2] / BUILT_Q[1]),
    )


def _turns(coil: Solenoid, diameter: float, resistivity: float, resonance: float, fitted: float) -> float:
    """Return the turns that bring the trap to its resonance with what the coil's own capacitance adds."""

    def miss(turns: float) -> float:
        wound = winding(diameter, coil.pitch, coil.wire, turns)
        inductance = float(coil_at(wound, resonance, resistivity).inductance)
        total = fitted + self_capacitance_range(diameter, wound.length)[1]
        return math.log(inductance / _partner(resonance, total))

    wanted = _partner(resonance, fitted + self_capacitance_range(diameter, diameter)[1])
    try:
        turns = solenoid_turns(wanted, diameter, coil.pitch, coil.wire, resonance, resistivity)
        # L goes with about the 1.7th power of the turns: a start for secant steps in the logarithm.
        x, step = math.log(turns), -miss(turns) / 1.7
        old = miss(turns)
        for _ in range(12):
            x += step
            new = miss(math.exp(x))
            if abs(new) < 1e-9 or new == old:
                break
            step, old = -new * step / (new - old), new
        return math.exp(x)
    except ValueError:
        few = winding(diameter, coil.pitch, coil.wire, 1.0).inductance > wanted
        raise NoAnswer(
            "no_such_coil",
            "antenna.trap.coil.turns",
            {"wanted_h": wanted, "turns_bound": 1 if few else MOST_TURNS},
            "a smaller former or less capacitance" if few else "a larger former or more capacitance",
        ) from None
