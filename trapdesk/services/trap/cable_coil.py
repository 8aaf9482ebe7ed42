"""The trap wound of cable, put together: coil and capacitor in one."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from ...design.coil_kinds import CableCoil
from ...design.fields import SOLVE
from ...design.former_kinds import FORMER_MATERIALS
from ...design.part_rules import cable_numbers
from ...engine.cable_trap import (
    CableTrap,
    cable_trap_impedance,
    cable_trap_resonance,
    dielectric_voltage,
    shield_current,
)
from ...engine.cable_winding import (
    BUILT_SHIELD_Q,
    CableWinding,
    cable_trap_turns,
    cable_winding,
    shield_resistance,
)
from ...engine.cables import Line
from ...engine.coils import SOLENOID_ERROR, self_capacitance_range
from ...engine.metals import MATERIALS
from ...engine.resonator import partner
from ...engine.stress import Stress
from ...errors import NoAnswer
from .capacitors import line_of
from .coils import WHERE, Wound

DENSITY = 1950.0
"""Mass of solid coaxial cable over its volume. [kg/m3], from memory"""
ASIDE = 1e-4


@dataclass(frozen=True, kw_only=True)
class CableNetwork:
    """A trap of cable over frequency."""

    winding: CableWinding
    line: Line
    coil: CableCoil
    own: float
    length: float
    inductance: float

    def at(self, frequency: np.ndarray | float | None = None) -> CableTrap:
        """Return the circuit at frequencies, without resistance when none are given."""
        resistance = 0.0
        if frequency is not None:
            resistance = shield_resistance(self.winding, frequency, MATERIALS["copper"].resistivity)
        share = self.coil.q_share
        return CableTrap(
            line=replace(
                self.line,
                skin_loss=self.line.skin_loss / share,
                dielectric_loss=self.line.dielectric_loss / share,
            ),
            length=self.length,
            inductance=self.inductance,
            resistance=resistance / share,
            terminals=self.coil.terminals,
            self_capacitance=self.own,
        )

    @cached_property
    def resonance(self) -> float:
        """Resonance without loss, in Hz."""
        return float(cable_trap_resonance(self.at()))

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance at frequencies, in ohm."""
        return cable_trap_impedance(frequency, self.at(frequency))

    def moved(self, frequency: np.ndarray, steps: Sequence[float]) -> np.ndarray:
        """Return the impedance with the resonance moved by parts of itself, by the cable: (steps, n)."""
        return np.array([self.shorter(step).impedance(frequency) for step in steps])

    def shorter(self, step: float) -> CableNetwork:
        """Return the trap with as much less cable as moves its resonance by this part of itself."""
        # The condition of `cable_trap_resonance`, solved for the length.
        w = 2 * math.pi * self.resonance * (1 + step)
        left = 1 / (w * self.inductance) - w * self.own
        return replace(self, length=math.atan(left * self.line.z0) / w * float(self.line.velocity))

    def by_length(self, change: float) -> float:
        """Return how far the resonance moves when the cable is cut by a length, in Hz."""
        return replace(self, length=self.length - change).resonance - self.resonance

    @cached_property
    def equivalent(self) -> tuple[float, float, float]:
        """Inductance, capacitance and series resistance of the plain circuit that is alike near resonance."""
        at = self.resonance * np.array([1 - ASIDE, 1.0, 1 + ASIDE])
        y = 1 / self.impedance(at)
        slope = (y[2].imag - y[0].imag) / (2 * np.pi * (at[2] - at[0]))
        capacitance = float(slope / 2)
        inductance = float(partner(self.resonance, capacitance))
        return inductance, capacitance, float(y[1].real) * inductance / capacitance

    def circuit(self, frequency: np.ndarray) -> tuple[np.ndarray, float, np.ndarray, float]:
        """Return the equivalent circuit near resonance: inductance, capacitance, both resistances."""
        inductance, capacitance, resistance = self.equivalent
        root = np.sqrt(np.asarray(frequency) / self.resonance)
        return np.full_like(frequency, inductance), capacitance, resistance * root, 0.0

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what it bears for an rms current through it: shield as the coil, inside as the capacitor."""
        trap = self.at(frequency)
        z = cable_trap_impedance(frequency, trap)
        volts = current * np.abs(z)
        shield = current * shield_current(frequency, trap)
        total = current**2 * z.real
        winding = np.minimum(shield**2 * trap.resistance, total)
        zero = np.zeros_like(volts)
        return Stress(
            line_current=np.broadcast_to(current, volts.shape),
            voltage=volts,
            peak_voltage=math.sqrt(2) * volts,
            coil_current=shield,
            capacitor_current=shield,
            shunt_current=zero,
            circulating_current=shield,
            coil_power=winding,
            capacitor_power=total - winding,
            shunt_power=zero,
            total_power=total,
            coil_reactive=2 * math.pi * frequency * self.inductance * shield**2,
            capacitor_reactive=2 * math.pi * frequency * self.inductance * shield**2,
        )

    def inside(self, frequency: np.ndarray) -> np.ndarray:
        """Return the largest voltage from inner conductor to shield per volt at the terminals."""
        return dielectric_voltage(frequency, self.at(frequency))


@dataclass(frozen=True, kw_only=True)
class BuiltCable:
    """A trap of cable: its circuit, what to wind, and how well that is known."""

    network: CableNetwork
    wound: Wound
    own: tuple[float, float, float]
    doubt: float
    q_factors: tuple[float, float]


def build_cable(coil: CableCoil, resonance: float | None) -> BuiltCable:
    """Return a trap of cable; solved turns bring it to a resonance."""
    line = line_of(coil)
    outside, shield = cable_numbers(coil)
    shape = (coil.former, outside, shield)
    turns, spread, wind = coil.turns, None, None
    own = None
    if turns is SOLVE:
        # What the winding adds by itself is little and hardly depends on its length.
        own = self_capacitance_range(coil.former + outside, coil.former + outside)
        try:
            found = cable_trap_turns(resonance, line, *shape, coil.pitch, coil.tail, own[1])
        except ValueError:
            raise _no_turns(coil, line, shape, resonance) from None
        turns, spread, wind = found.high, (found.low, found.high), found.wind
    winding = cable_winding(*shape, turns, coil.pitch, coil.tail)
    length = winding.turns * winding.pitch
    if own is None:
        own = self_capacitance_range(winding.diameter, length)
    network = CableNetwork(
        winding=winding,
        line=line,
        coil=coil,
        own=own[1],
        length=winding.cable_length,
        inductance=winding.inductance,
    )
    return BuiltCable(
        network=network,
        wound=Wound(
            turns=turns,
            diameter=winding.diameter,
            pitch=winding.pitch,
            length=length,
            wire_length=winding.wound_length,
            cut=winding.cable_length if wind is None else winding.cable_length * wind / turns,
            outer_diameter=coil.former + 2 * outside,
            outer_length=length + outside,
            mass=winding.cable_length * math.pi / 4 * outside**2 * DENSITY,
            crowding=winding.proximity_factor,
            turns_range=spread,
            wind=wind,
            softens=FORMER_MATERIALS[coil.former_material].softens,
        ),
        own=own,
        doubt=winding.uniform_inductance / winding.inductance - 1 + SOLENOID_ERROR,
        q_factors=(BUILT_SHIELD_Q[0] / BUILT_SHIELD_Q[1], BUILT_SHIELD_Q[2] / BUILT_SHIELD_Q[1]),
    )


def _no_turns(coil: CableCoil, line: Line, shape: tuple[float, float, float], resonance: float) -> NoAnswer:
    """Say whether one turn is too much, or the most turns too few."""
    one = cable_winding(*shape, 1.0, coil.pitch, coil.tail)
    trap = CableTrap(line=line, length=one.cable_length, inductance=one.inductance)
    highest = float(cable_trap_resonance(trap))
    over = resonance > highest
    return NoAnswer(
        "no_such_cable_trap",
        f"{WHERE}.turns",
        {"wanted_hz": resonance, **({"one_turn_hz": highest} if over else {})},
        "a smaller former or shorter tails" if over else "a larger former",
    )
