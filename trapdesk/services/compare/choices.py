"""Where to put the trap's resonance and how large L over C: what is given up for what."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace

import numpy as np

from ...design.design import Design
from ...engine.stress import Stress
from ...errors import NoAnswer
from ..antenna.solve import hang
from ..trap.built import BuiltTrap, build, wanted_resonance
from .port_grid import BandSummary, summary

BELOW, ABOVE, PLACES = 0.05, 0.02, 12
"""How far from the upper aim the trap's resonance is tried, relative, and at how many places."""
RATIOS = np.geomspace(1 / 4, 4, 9)
"""By what L over C is multiplied."""


@dataclass(frozen=True, kw_only=True)
class Alike:
    """The trap as built, its resonance and the level of its impedance multiplied: the same Q, the same kind.

    Ohms and reactances scale with the level, so currents stay and volts and watts follow it.
    """

    built: BuiltTrap
    pitch: float
    level: float

    @property
    def resonance(self) -> float:
        """Resonance, in Hz."""
        return self.pitch * self.built.resonance

    @property
    def inductance(self) -> float:
        """Inductance, in H."""
        return self.built.inductance * self.level / self.pitch

    @property
    def capacitance(self) -> float:
        """Capacitance, in F."""
        return self.built.capacitance / (self.level * self.pitch)

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance at frequencies, in ohm."""
        return self.level * self.built.impedance(np.asarray(frequency) / self.pitch)

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what it bears for an rms current through it."""
        plain = self.built.stress(np.asarray(frequency) / self.pitch, current)
        scaled = {
            field.name: getattr(plain, field.name) * self.level
            for field in fields(plain)
            if not field.name.endswith("_current")
        }
        return replace(plain, **scaled)


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
    present = wanted_resonance(design.antenna.trap)
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

    def point(pitch: float = 1.0, level: float = 1.0) -> Point:
        return _point(design, Alike(built=built, pitch=float(pitch), level=float(level)))

    as_is = point()
    return Choices(
        # The capacitance stays.
        by_resonance=tuple(
            as_is if f == present else point(f / present, present / f) for f in sorted([*places, present])
        ),
        by_ratio=tuple(as_is if r == 1.0 else point(level=np.sqrt(r)) for r in RATIOS),
        coil_q=coil_q,
        capacitor_q=capacitor_q,
    )


def _point(design: Design, trap: Alike) -> Point:
    """Return one choice: wires solved with its trap, both bands looked at."""
    of = {
        "resonance": trap.resonance,
        "inductance": trap.inductance,
        "capacitance": trap.capacitance,
        "present": trap.pitch == trap.level == 1.0,
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
