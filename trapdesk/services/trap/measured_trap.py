"""A computed trap with what was measured of it in its place."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, Protocol, TypeVar

import numpy as np

from ...design.design import Design, with_value
from ...design.measured_part import Measured
from ...engine.measured import Estimate
from ...engine.resonator import lc_resonance, partner
from ...engine.stress import Stress
from .part_values import PartsFound

Trap = TypeVar("Trap")
NAMES = ("resonance", "inductance", "capacitance")


def values_with(
    measured: Measured, resonance: float, inductance: float, capacitance: float
) -> tuple[float, float, float]:
    """Return resonance, inductance and capacitance with the measured ones in their places.

    Of all three the capacitance follows from the others; with one of them the coil is held to be what
    differs, unless it is the coil that was measured.
    """
    f, l, c = (getattr(measured, name) for name in NAMES)  # noqa: E741 - the document's symbol
    if f is not None and l is not None:
        return f, l, float(partner(f, l))
    if f is not None:
        c = c or capacitance
        return f, float(partner(f, c)), c
    if l is None and c is None:
        return resonance, inductance, capacitance
    l, c = l or inductance, c or capacitance  # noqa: E741
    return float(lc_resonance(l, c)), l, c


@dataclass(frozen=True, kw_only=True)
class Left:
    """What measurements leave in doubt, as one sigma of logarithms that hang on nothing of each other.

    The coil's and the capacitor's own move the resonance; of the `ratio` the coil gains what the capacitor
    loses. None stands for a part nothing was measured of.
    """

    coil: float | None
    capacitor: float | None
    ratio: float


def holds_resonance(measured: Measured | None) -> bool:
    """Return whether only the resonance is known: the coil then makes up for whatever the capacitor is."""
    return measured is not None and (
        measured.resonance is not None and measured.inductance is None and measured.capacitance is None
    )


def doubts_of(measured: Measured) -> Left:
    """Return what measured values leave in doubt.

    The doubts of resonance, inductance and capacitance kept together tell how the last two hang together;
    of two of them the third follows.
    """
    resonance, inductance, capacitance = (_relative(measured, name) for name in NAMES)
    if resonance is None:
        return Left(coil=inductance, capacitor=capacitance, ratio=0.0)
    both = 2.0 * resonance
    if inductance is None:
        known = capacitance is not None
        return Left(coil=both, capacitor=0.0 if known else None, ratio=capacitance or 0.0)
    if not capacitance:
        return Left(coil=0.0, capacitor=both, ratio=inductance)
    # With ln L = u + e and ln C = v - e the sum u + v is that of the resonance, twice and turned about.
    of_coil, of_capacitor = inductance * inductance, capacitance * capacitance
    shared = min(max((of_coil + of_capacitor - both * both) / 2.0, 0.0), of_coil, of_capacitor)
    coil, capacitor = math.sqrt(of_coil - shared), math.sqrt(of_capacitor - shared)
    size = math.hypot(coil, capacitor)
    if not size:
        return Left(coil=both, capacitor=0.0, ratio=math.sqrt(shared))
    # Doubts that do not go together leave the resonance what was said of it.
    scale = both / size
    return Left(coil=coil * scale, capacitor=capacitor * scale, ratio=math.sqrt(shared))


def _relative(measured: Measured, name: str) -> float | None:
    value = getattr(measured, name)
    return None if value is None else getattr(measured, f"{name}_doubt") / value


class Network(Protocol):
    """What a trap is over frequency."""

    def circuit(self, frequency: np.ndarray) -> tuple:
        """Return coil inductance, capacitance, coil and capacitor resistance."""

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance in ohm."""

    def moved(self, frequency: np.ndarray, steps: Sequence[float]) -> np.ndarray:
        """Return the impedance with the resonance moved by parts of itself, (steps, n)."""

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what its parts bear."""


@dataclass(frozen=True, kw_only=True)
class MeasuredNetwork:
    """A computed trap brought to what was measured: `shift` of frequency, `level` of impedance, `loss`.

    Its shape over frequency stays the computed one; `shift` is the computed resonance over the measured.
    """

    computed: Network
    shift: float
    level: float
    loss: float

    def circuit(self, frequency: np.ndarray) -> tuple:
        """Return coil inductance, capacitance, coil and capacitor resistance at frequencies."""
        inductance, capacitance, coil, capacitor = self.computed.circuit(frequency * self.shift)
        loss = self.level * self.loss
        return (
            inductance * self.level * self.shift,
            capacitance * self.shift / self.level,
            coil * loss,
            capacitor * loss,
        )

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance at frequencies, in ohm."""
        return self._brought(self.computed.impedance(frequency * self.shift))

    def moved(self, frequency: np.ndarray, steps: Sequence[float]) -> np.ndarray:
        """Return the impedance with the resonance moved by parts of itself, (steps, n), in ohm."""
        return self._brought(self.computed.moved(frequency * self.shift, steps))

    def stress(self, frequency: np.ndarray, current: np.ndarray) -> Stress:
        """Return what its parts bear for an rms current through the whole trap."""
        computed = self.computed.impedance(frequency * self.shift)
        measured = self._brought(computed)
        inside = self.computed.stress(
            frequency * self.shift, current * np.abs(measured) / np.abs(self.level * computed)
        )
        loss = self.level * self.loss
        return replace(
            inside,
            line_current=np.broadcast_to(current, np.shape(inside.voltage)),
            voltage=inside.voltage * self.level,
            peak_voltage=inside.peak_voltage * self.level,
            coil_power=inside.coil_power * loss,
            capacitor_power=inside.capacitor_power * loss,
            shunt_power=inside.shunt_power * loss,
            total_power=inside.total_power * loss,
            coil_reactive=inside.coil_reactive * self.level,
            capacitor_reactive=inside.capacitor_reactive * self.level,
        )

    def _brought(self, impedance: np.ndarray) -> np.ndarray:
        """Return an impedance with its loss as conductance, which keeps it passive, and its level brought."""
        y = 1.0 / impedance
        return self.level / (self.loss * y.real + 1j * y.imag)


def with_measured(built: Trap, measured: Measured | None) -> Trap:
    """Return a computed trap with what was measured of it in the place of what was computed."""
    if measured is None or all(getattr(measured, name) is None for name in (*NAMES, "q")):
        return built
    computed = built.resonance, built.inductance, built.capacitance
    resonance, inductance, capacitance = values_with(measured, *computed)
    changes: dict[str, Any] = {}
    if measured.q is not None:
        off = measured.q_doubt / measured.q
        changes["q_factors"] = (max(1.0 - off, 0.1), 1.0 + off)
    if measured.resonance is not None:
        # The doubt of an inductance moves a resonance by half of itself.
        changes["doubt"] = 2.0 * measured.resonance_doubt / resonance
    elif measured.inductance is not None:
        changes["doubt"] = measured.inductance_doubt / inductance
    fitted = built.fitted + capacitance - built.capacitance
    if fitted <= 0.0:
        # Less than the coil was thought to add by itself: then both are taken to be less alike.
        fitted = built.fitted * capacitance / built.capacitance
    network = MeasuredNetwork(
        computed=built.network,
        shift=built.resonance / resonance,
        level=inductance * resonance / (built.inductance * built.resonance),
        loss=1.0 if measured.q is None else built.q / measured.q,
    )
    return replace(
        built,
        resonance=resonance,
        inductance=inductance,
        capacitance=capacitance,
        fitted=fitted,
        network=network,
        **changes,
    )


def kept(design: Design, found: PartsFound) -> Design:
    """Return the design with what was found kept with its trap.

    Resonance, inductance and capacitance are kept together, for they hang together: an answer on any of them
    takes the place of what was kept of all three.
    """
    before = getattr(design.antenna.trap, "measured", None) or Measured()
    changes: dict[str, float | None] = {}
    if any(getattr(found, name) for name in NAMES):
        changes |= _as_fields(NAMES, found)
    if found.q is not None:
        changes |= _as_fields(("q",), found)
    return with_value(design, "antenna.trap.measured", replace(before, **changes))


def _as_fields(names: tuple[str, ...], found: PartsFound) -> dict[str, float | None]:
    fields: dict[str, float | None] = {}
    for name in names:
        one = getattr(found, name)
        fields[name], fields[f"{name}_doubt"] = _to_doubt(one) if one else (None, 0.0)
    return fields


def _to_doubt(one: Estimate) -> tuple[float, float]:
    """Return a value to a hundredth of its doubt and the doubt to two digits: no finer is it kept."""
    if one.sigma <= 0.0:
        return one.value, one.sigma
    digits = math.floor(math.log10(one.value)) - math.floor(math.log10(one.sigma)) + 3
    return float(f"{one.value:.{max(digits, 3)}g}"), float(f"{one.sigma:.2g}")
