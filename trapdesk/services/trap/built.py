"""A trap put together: which value is solved, and the one resonator it makes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ...design.coil_kinds import CableCoil
from ...design.fields import SOLVE
from ...design.parts import Trap
from ...engine import resonator
from ...engine.stress import Stress, stress, stress_of_branches
from ...errors import NoAnswer
from .cable_coil import BuiltCable, CableNetwork, build_cable
from .capacitors import BuiltCapacitor, FittedCapacitor, Limits, build_capacitor, cable_rating, is_open
from .coils import NO_SELF_CAPACITANCE, BuiltCoil, Wound, build_coil
from .measured_trap import MeasuredNetwork, with_measured

SETTLED = 1e-13
LOOKS = 40


KEPT = 16
"""Sets of frequencies at which a trap's circuit is kept."""


@dataclass(frozen=True, kw_only=True)
class Lumped:
    """A coil and a capacitor side by side, and what the coil adds of its own."""

    coil: BuiltCoil
    capacitor: BuiltCapacitor

    @cached_property
    def _kept(self) -> dict[tuple, tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]]:
        return {}

    def circuit(self, frequency: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
        """Return coil inductance, capacitance, coil and capacitor resistance at frequencies.

        The last few answers are kept: impedance, stress and their changes are asked for at the same ones.
        """
        key = np.shape(frequency), np.asarray(frequency, float).tobytes()
        found = self._kept.get(key)
        if found is None:
            if len(self._kept) >= KEPT:
                self._kept.clear()
            found = self._kept[key] = self._circuit(frequency)
        return found

    def _circuit(self, frequency: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
        inductance, resistance = self.coil.series(frequency)
        w = 2 * np.pi * np.asarray(frequency)
        z = self.capacitor.impedance(frequency)
        if own := self.coil.own[1]:
            z = z / (1 + 1j * w * own * z)
        return inductance, -1 / (w * z.imag), resistance, np.maximum(z.real, 0.0)

    @cached_property
    def _of_line(self) -> bool:
        """Whether a piece of line is in it, which far above resonance is no capacitor any more."""
        return any(part.line is not None for part, _, _ in self.capacitor.shares(np.float64(1e6)))

    def _branches(self, frequency: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the impedances of the coil and of all capacitance across it."""
        inductance, resistance = self.coil.series(frequency)
        w = 2 * np.pi * np.asarray(frequency)
        z = self.capacitor.impedance(frequency)
        return resistance + 1j * w * inductance, z / (1 + 1j * w * self.coil.own[1] * z)

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance at frequencies, in ohm."""
        if self._of_line:
            return resonator.impedance_of_branches(*self._branches(frequency))
        return resonator.impedance(frequency, *self.circuit(frequency))

    def moved(self, frequency: np.ndarray, steps: Sequence[float]) -> np.ndarray:
        """Return the impedance with the resonance moved by parts of itself, by the capacitor: (steps, n)."""
        if self._of_line:
            coil, capacitor = self._branches(frequency)
            capacitor = capacitor * (1 + np.asarray(steps, float)[:, None]) ** 2
            return resonator.impedance_of_branches(coil, capacitor)
        inductance, capacitance, coil, capacitor = self.circuit(frequency)
        factor = (1 + np.asarray(steps, float)[:, None]) ** 2
        return resonator.impedance(frequency, inductance, capacitance / factor, coil, capacitor)

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what its parts bear for an rms current through the whole trap."""
        if self._of_line:
            return stress_of_branches(current, *self._branches(frequency))
        return stress(frequency, *self.circuit(frequency), current=current)


@dataclass(frozen=True, kw_only=True)
class BuiltTrap:
    """A trap as it is computed with: anything with `impedance(frequency)` can stand in its place.

    `inductance` [H] is that at the trap's own resonance [Hz]; `capacitance` [F] is what is fitted plus what
    the coil adds; of a trap of cable both are those of the plain circuit that is alike near resonance.
    `doubt` is the relative doubt of the inductance, `q_factors` what a built trap may reach of the Q
    computed.
    """

    resonance: float
    inductance: float
    capacitance: float
    fitted: float
    network: Lumped | CableNetwork | MeasuredNetwork
    wound: Wound | None
    coil: BuiltCoil | None
    capacitor: BuiltCapacitor | None
    self_capacitance: tuple[float, float, float]
    doubt: float
    q_factors: tuple[float, float]

    def circuit(self, frequency: np.ndarray) -> tuple:
        """Return coil inductance, capacitance, coil and capacitor resistance at frequencies."""
        return self.network.circuit(frequency)

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance of the trap at frequencies, in ohm."""
        return self.network.impedance(frequency)

    def moved(self, frequency: np.ndarray, steps: Sequence[float]) -> np.ndarray:
        """Return the impedance with the trap's resonance moved by parts of itself, (steps, n), in ohm."""
        return self.network.moved(frequency, steps)

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what its parts bear for an rms current through the whole trap."""
        return self.network.stress(frequency, current)

    @property
    def own_capacitance(self) -> float:
        """What the coil adds to the capacitor, in farad; nothing where both come as one."""
        own = self.capacitance - self.fitted
        # What was measured leaves rounding between the two.
        return own if own > 1e-9 * self.capacitance and self.self_capacitance[1] > 0 else 0.0

    @property
    def cable(self) -> CableNetwork | None:
        """The cable it is wound of as it was computed, None for coil and capacitor apart."""
        inner = self.network.computed if isinstance(self.network, MeasuredNetwork) else self.network
        return inner if isinstance(inner, CableNetwork) else None

    @property
    def q(self) -> float:
        """Q at its resonance, losses of coil and capacitor together."""
        inductance, _, coil, capacitor = self.circuit(np.float64(self.resonance))
        loss = float(coil + capacitor)
        return 2 * math.pi * self.resonance * float(inductance) / loss if loss else math.inf


def build(trap: Trap) -> BuiltTrap:
    """Return the trap with its solved value found and what was measured in its place; NoAnswer for none."""
    return with_measured(_computed(trap), trap.measured)


def wanted_resonance(trap: Trap | None) -> float:
    """Return where the trap of a design resonates, in Hz; NoAnswer without a trap."""
    if trap is None:
        help = "add a table [antenna.trap] with the resonance that is wanted"
        raise NoAnswer("no_trap_to_build", "antenna.trap", {}, help)
    return build(trap).resonance if trap.resonance is SOLVE else trap.resonance


def _computed(trap: Trap) -> BuiltTrap:
    """Return the trap as it is computed."""
    if isinstance(trap.coil, CableCoil):
        return _of_cable(trap.coil, None if trap.resonance is SOLVE else trap.resonance)
    if trap.resonance is SOLVE:
        return _with_resonance_found(trap)
    resonance = trap.resonance
    if is_open(trap.capacitor):
        return _with_capacitor_found(trap, resonance)
    capacitor = build_capacitor(trap.capacitor)
    fitted = _farads(capacitor, resonance)
    coil = build_coil(
        trap.coil, resonance, lambda own: float(resonator.partner(resonance, fitted + own)), resonance
    )
    return _built(resonance, coil, capacitor)


def _farads(capacitor: BuiltCapacitor, frequency: float) -> float:
    """Return what capacitance a capacitor is at a frequency; NoAnswer where a stub in it is none there."""
    at = np.float64(frequency)
    for part, _, _ in capacitor.shares(at):
        if part.line is not None and 4 * frequency * part.length >= part.line.velocity:
            help = "less than a quarter wave of it"
            raise NoAnswer("stub_is_too_long", part.key, {"trap_hz": frequency, "stub_m": part.length}, help)
    return -1 / (2 * math.pi * frequency * float(np.imag(capacitor.impedance(at))))


def _with_capacitor_found(trap: Trap, resonance: float) -> BuiltTrap:
    coil = build_coil(trap.coil, resonance, None, resonance)
    total = float(resonator.partner(resonance, coil.series(np.float64(resonance))[0]))
    left = total - coil.own[1]
    if left <= 0:
        raise NoAnswer(
            "coil_resonates_below_by_itself",
            "antenna.trap.capacitor.capacitance",
            {"self_capacitance_f": coil.own[1], "needed_f": total},
            "fewer turns or a smaller former",
        )
    reactance = 1 / (2 * math.pi * resonance * left)
    capacitor = build_capacitor(trap.capacitor, frequency=resonance, reactance=reactance)
    return _built(resonance, coil, capacitor)


def _with_resonance_found(trap: Trap) -> BuiltTrap:
    """Find where the reactances of both are equal; they change little with frequency."""
    capacitor = build_capacitor(trap.capacitor)
    # A first look at a frequency where everything that varies has nearly its value.
    at = 1e6
    coil = build_coil(trap.coil, at, None, at)
    for _ in range(LOOKS):
        fitted = _farads(capacitor, min(at, 1e8))
        inductance = float(coil.series(np.float64(at))[0])
        found = float(resonator.lc_resonance(inductance, fitted + coil.own[1]))
        if abs(found / at - 1) < SETTLED:
            break
        at = found
    return _built(at, build_coil(trap.coil, at, None, at), capacitor)


def _built(resonance: float, coil: BuiltCoil, capacitor: BuiltCapacitor) -> BuiltTrap:
    fitted = _farads(capacitor, resonance)
    return BuiltTrap(
        resonance=resonance,
        inductance=float(coil.series(np.float64(resonance))[0]),
        capacitance=fitted + coil.own[1],
        fitted=fitted,
        network=Lumped(coil=coil, capacitor=capacitor),
        wound=coil.wound,
        coil=coil,
        capacitor=capacitor,
        self_capacitance=coil.own if coil.wound is not None else NO_SELF_CAPACITANCE,
        doubt=coil.doubt,
        q_factors=coil.q_factors,
    )


def _of_cable(coil: CableCoil, resonance: float | None) -> BuiltTrap:
    built: BuiltCable = build_cable(coil, resonance)
    network = built.network
    inductance, capacitance, _ = network.equivalent
    rating = FittedCapacitor(
        key="antenna.trap.coil",
        name=coil.cable,
        impedance=network.impedance,
        limits=Limits(voltage=cable_rating(coil), reach=network.inside),
        length=network.length,
    )
    return BuiltTrap(
        resonance=network.resonance if resonance is None else resonance,
        inductance=inductance,
        capacitance=capacitance,
        fitted=capacitance,
        network=network,
        wound=built.wound,
        coil=None,
        capacitor=rating,
        self_capacitance=built.own,
        doubt=built.doubt,
        q_factors=built.q_factors,
    )
