"""The traps of many trials at each stage: made of other parts, tuned, sealed, warm and wet."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ...design.design import Design
from ...design.parts import Toroid
from ...engine import resonator
from ...engine.coil_formulas import sheet_inductance
from ...engine.quotients import resonator_fraction
from ..antenna.weather import drifts
from ..trap.built import BuiltTrap
from ..trap.measured_trap import holds_resonance
from .beliefs import Belief, Draws


@dataclass(frozen=True, kw_only=True)
class Stage:
    """What has been done by then: traps tuned on the bench, before or after sealing; wires brought to aim."""

    name: str
    tuned: bool = False
    sealed: bool = False
    sealed_first: bool = False
    aimed: bool = False
    wet: bool = False


AS_CUT = Stage(name="as_cut")
TUNED = Stage(name="tuned", tuned=True, sealed=True)
AIMED = Stage(name="aimed", tuned=True, sealed=True, aimed=True)
WET = Stage(name="wet", tuned=True, sealed=True, aimed=True, wet=True)
STAGES: tuple[Stage, ...] = (AS_CUT, TUNED, AIMED, WET)


@dataclass(frozen=True, kw_only=True)
class Traps:
    """Traps of many trials, arrays (2, trials): inductance and Q over nominal, capacitance [F]."""

    inductance: np.ndarray
    capacitance: np.ndarray
    q: np.ndarray

    def part(self, pick: np.ndarray) -> Traps:
        """Return the traps of some of the trials."""
        return Traps(
            inductance=self.inductance[:, pick], capacitance=self.capacitance[:, pick], q=self.q[:, pick]
        )


@dataclass(frozen=True, kw_only=True)
class Circuit:
    """The nominal trap at some frequencies: the coil beside its capacitance, with all loss in it."""

    frequency: np.ndarray
    inductance: np.ndarray
    resistance: np.ndarray


class TrialTraps:
    """What the traps of trials have in common: the nominal trap and what is believed of it."""

    def __init__(self, design: Design, trap: BuiltTrap, varying: Mapping[str, Belief]) -> None:
        assert design.antenna.trap is not None
        self.design, self.trap, self.part, self.varying = design, trap, design.antenna.trap, varying

    def circuit(self, frequency: np.ndarray) -> Circuit:
        """Return the nominal trap at frequencies.

        Whatever it is made of, beside its capacitance there is a coil that makes up its impedance.
        """
        w = 2 * np.pi * frequency
        coil = 1 / (1 / self.trap.impedance(frequency) - 1j * w * self.trap.capacitance)
        return Circuit(
            frequency=frequency,
            inductance=coil.imag / w,
            resistance=np.maximum(coil.real, 0.0),
        )

    @cached_property
    def exponents(self) -> tuple[float, float, float]:
        """Powers by which the inductance follows turns, pitch and diameter, by the current sheet."""
        wound = self.trap.wound
        if wound is None:
            return 0.0, 0.0, 0.0
        if wound.pitch <= 0 or isinstance(self.part.coil, Toroid):
            return 2.0, 0.0, 0.0
        given = (wound.diameter, wound.pitch, wound.turns)

        def log(diameter: float, pitch: float, turns: float) -> float:
            return math.log(float(sheet_inductance(diameter, turns * pitch, turns)))

        step = 1e-3
        rates = [
            (log(*(v * (1 + step * (i == j)) for j, v in enumerate(given))) - log(*given)) / math.log1p(step)
            for i in range(3)
        ]
        return rates[2], rates[1], rates[0]

    @cached_property
    def _drifts(self) -> tuple[float, float]:
        return drifts(self.design, self.trap)

    def made(self, draws: Draws, stage: Stage, count: int) -> Traps:
        """Return the traps of trials at a stage."""
        trap, part = self.trap, self.part

        def of(name: str) -> np.ndarray | float:
            return draws[name].T if name in draws else 0.0

        turns = trap.wound.turns if trap.wound is not None else 1.0
        by_turns, by_pitch, by_diameter = self.exponents
        inductance = np.ones((2, count)) * (1 + of("coil"))
        log = (
            by_turns * np.log1p(of("turns") / turns)
            + by_pitch * np.log1p(of("pitch"))
            + by_diameter * np.log1p(of("former"))
        )
        inductance = inductance * np.exp(log)
        own = trap.own_capacitance
        capacitance = trap.fitted * (1 + of("capacitor")) + np.zeros((2, count))
        if own:
            low, middle, high = trap.self_capacitance
            x = np.asarray(of("self_capacitance"))
            factor = np.where(x > 0, math.log(high / middle), math.log(middle / low))
            capacitance = capacitance + own * np.exp(x * factor)
        capacitance = capacitance / (1 + of("ratio"))
        inductance = inductance * (1 + of("ratio"))
        if holds_resonance(part.measured):
            inductance = inductance * (trap.capacitance / capacitance)
        sealing = of("sealing")
        if stage.tuned:
            # Who tunes before sealing tunes as much too high as the sheet says that sealing takes.
            closes = "sealing" in self.varying and stage.sealed and not stage.sealed_first
            wanted = (1 + of("tuning")) / (1 - part.weather.closing * closes)
            inductance = trap.capacitance / capacitance / wanted**2
        if stage.sealed and not stage.sealed_first:
            capacitance = capacitance / (1 - sealing) ** 2
        weather = "weather" if stage.wet else "temperature"
        if weather in draws:
            of_coil, of_capacitor = self._drifts
            inductance = inductance * (1 + of_coil * draws[weather])
            capacitance = capacitance * (1 + of_capacitor * draws[weather])
        if stage.wet:
            capacitance = capacitance / (1 - of("rain")) ** 2
        return Traps(inductance=inductance, capacitance=capacitance, q=np.ones((2, count)) * (1 + of("q")))

    def resonance(self, traps: Traps) -> np.ndarray:
        """Return the resonance of the traps (2, trials), in Hz."""
        return resonator.lc_resonance(self.trap.inductance * traps.inductance, traps.capacitance)

    def impedances(
        self, circuit: Circuit, traps: Traps, pick: slice = slice(None), frequency: np.ndarray | None = None
    ) -> list[np.ndarray]:
        """Return the impedance of both traps (trials, frequencies); at frequencies near the circuit's."""
        found = []
        for i in range(2):
            factor, capacitance = traps.inductance[i, pick, None], traps.capacitance[i, pick, None]
            found += [
                resonator.impedance(
                    circuit.frequency if frequency is None else frequency,
                    circuit.inductance * factor,
                    capacitance,
                    circuit.resistance * (factor / traps.q[i, pick, None]),
                )
            ]
        return found

    def fractions(
        self, circuit: Circuit, traps: Traps, pick: slice = slice(None), frequency: np.ndarray | None = None
    ) -> list[tuple[np.ndarray, np.ndarray]]:
        """Return numerator and denominator of the impedance of both traps, each (frequencies, trials)."""
        at = circuit.frequency[:, None] if frequency is None else frequency
        found = []
        for i in range(2):
            factor = traps.inductance[i, pick]
            found += [
                resonator_fraction(
                    at,
                    circuit.inductance[:, None] * factor,
                    traps.capacitance[i, pick],
                    circuit.resistance[:, None] * (factor / traps.q[i, pick]),
                )
            ]
        return found

    @staticmethod
    def conductances(circuit: Circuit, traps: Traps, pick: slice = slice(None)) -> np.ndarray:
        """Return the conductance (2, trials) of both traps at the one frequency of a circuit, in siemens."""
        reactance = 2 * np.pi * circuit.frequency * circuit.inductance
        resistance = circuit.resistance / traps.q[:, pick]
        return resistance / (traps.inductance[:, pick] * (resistance * resistance + reactance * reactance))
