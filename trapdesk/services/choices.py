"""Where to put the trap's resonance and how large L over C: what is given up for what."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..design.design import Design
from ..engine.capacitors import series_resistance
from ..engine.resonator import impedance
from ..engine.stress import Stress, stress
from ..errors import NoAnswer
from .port_grid import BandSummary, summary
from .rummage import wanted_resonance
from .solve import hang
from .trap import BuiltTrap, build

BELOW, ABOVE, PLACES = 0.05, 0.02, 12
"""How far from the upper aim the trap's resonance is tried, relative, and at how many places."""
RATIOS = np.geomspace(1 / 4, 4, 9)
"""By what L over C is multiplied."""


@dataclass(frozen=True, kw_only=True)
class Tank:
    """A trap of which only resonance, capacitance and both Q matter; the coil's goes with the root of f."""

    resonance: float
    capacitance: float
    coil_q: float
    capacitor_q: float

    @property
    def inductance(self) -> float:
        """Inductance, in H."""
        return 1 / ((2 * np.pi * self.resonance) ** 2 * self.capacitance)

    def _circuit(self, frequency: np.ndarray) -> tuple[float, float, np.ndarray, np.ndarray]:
        reactance = 2 * np.pi * self.resonance * self.inductance
        coil = reactance / self.coil_q * np.sqrt(frequency / self.resonance)
        capacitor = series_resistance(frequency, self.capacitance, self.capacitor_q)
        return self.inductance, self.capacitance, coil, capacitor

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance at frequencies, in ohm."""
        return impedance(frequency, *self._circuit(frequency))

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what it bears for an rms current through it."""
        return stress(frequency, *self._circuit(frequency), current=current)


@dataclass(frozen=True, kw_only=True)
class Point:
    """One choice with what it does; without wires that meet the aims, `bands` is empty and `why` the code."""

    resonance: float
    inductance: float
    capacitance: float
    present: bool
    inner: float | None = None
    end: float | None = None
    bands: dict[str, BandSummary]
    why: str = ""

    @property
    def loss(self) -> float:
        """Share of the power both traps take, added over the bands."""
        return sum(b.loss for b in self.bands.values())

    @property
    def volts(self) -> float:
        """Worst peak voltage of one trap on any band, in V."""
        return max(b.peak_voltage for b in self.bands.values())


@dataclass(frozen=True, kw_only=True)
class Choices:
    """Both curves, each with the present choice in it; the Q of coil and capacitor are held as they are."""

    by_resonance: tuple[Point, ...]
    by_ratio: tuple[Point, ...]
    coil_q: float
    capacitor_q: float


def choices(design: Design) -> Choices:
    """Return what other resonances and other ratios of L to C would do, with the real wire and ground.

    NoAnswer without a trap. A length that is set stays as it is.
    """
    present = wanted_resonance(design)
    built = build(design.antenna.trap)
    bands = dict(design.bands.items())
    aim = bands["upper"].target if "upper" in bands else present
    places = np.linspace(aim * (1 - BELOW), aim * (1 + ABOVE), PLACES)
    # A place as good as the present one only repeats it.
    places = [f for f in places if abs(f / present - 1) > 1e-3]
    inductance, c, coil, capacitor = (float(x) for x in built.circuit(np.float64(present)))
    w = 2 * np.pi * present
    coil_q = w * inductance / coil if coil else np.inf
    capacitor_q = 1 / (w * c * capacitor) if capacitor else np.inf

    def other(resonance: float, capacitance: float) -> Point:
        here = Tank(
            resonance=float(resonance), capacitance=float(capacitance), coil_q=coil_q, capacitor_q=capacitor_q
        )
        return _point(design, here, here)

    now = Tank(resonance=present, capacitance=c, coil_q=coil_q, capacitor_q=capacitor_q)
    as_is = _point(design, now, built, present=True)
    return Choices(
        by_resonance=tuple(as_is if f == present else other(f, c) for f in sorted([*places, present])),
        by_ratio=tuple(as_is if r == 1.0 else other(present, c / np.sqrt(r)) for r in RATIOS),
        coil_q=coil_q,
        capacitor_q=capacitor_q,
    )


def _point(design: Design, tank: Tank, trap: Tank | BuiltTrap, *, present: bool = False) -> Point:
    """Return one choice: wires solved with its trap, both bands looked at."""
    of = {
        "resonance": tank.resonance,
        "inductance": tank.inductance,
        "capacitance": tank.capacitance,
        "present": present,
    }
    try:
        wire = hang(design, trap)
    except NoAnswer as error:
        return Point(**of, bands={}, why=error.code)
    return Point(
        **of,
        inner=wire.inner,
        end=wire.end,
        bands={role: summary(design, role, wire, trap) for role, _ in design.bands.items()},
    )
