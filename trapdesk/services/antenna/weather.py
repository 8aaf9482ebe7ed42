"""What closing, water, sun, cold and its own heat do to a trap's resonance, and through it to the bands."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ...design.coil_kinds import Solenoid
from ...design.design import Design
from ...design.former_kinds import FORMER_MATERIALS
from ...engine.coils import quick_exponents, temperature_drift
from ...engine.heat import drifted
from ...engine.metals import MATERIALS
from ...engine.ports import polynomial_weights, terminate
from ...engine.reflection import dip_among_three
from ..trap.built import BuiltTrap
from ..trap.capacitors import drift_of
from .figures import Figures, Heat, Shift
from .response import MARGIN, swr

POINTS = 121
DRIFTS = (4e-5, 3e-5)
"""Drift of coil and capacitor where the parts do not say. [1/K], common practice, no source"""


def drifts(design: Design, trap: BuiltTrap) -> tuple[float, float]:
    """Return the drift of inductance and of all capacitance, in 1/K: as set, or that of the parts."""
    doubts = design.doubts
    of_coil, of_capacitance = _of_cable(design) if trap.cable is not None else _of_parts(design, trap)
    return (
        of_coil if doubts.coil_drift is None else doubts.coil_drift,
        of_capacitance if doubts.capacitor_drift is None else doubts.capacitor_drift,
    )


def _of_cable(design: Design) -> tuple[float, float]:
    # The shield follows the former; of the dielectric nothing is listed.
    return FORMER_MATERIALS[design.antenna.trap.coil.former_material].expansion, 0.0


def _of_parts(design: Design, trap: BuiltTrap) -> tuple[float, float]:
    coil, part = trap.coil, design.antenna.trap.coil
    of_coil = DRIFTS[0] if coil.drift is None else coil.drift
    if isinstance(part, Solenoid) and coil.winding is not None:
        material = MATERIALS[part.material]
        of_coil = float(
            temperature_drift(
                coil.winding,
                trap.resonance,
                material.resistivity,
                FORMER_MATERIALS[part.former_material].expansion,
                material.expansion,
                material.temperature_coefficient,
                quick_exponents(coil.winding),
            )
        )
    of_fitted, _, known = drift_of(trap.capacitor, trap.resonance)
    return of_coil, (of_fitted if known else DRIFTS[1]) * trap.fitted / trap.capacitance


def _steps(design: Design, trap: BuiltTrap, heat: Heat | None) -> Iterator[tuple[str, float]]:
    """Yield what happens and by which part of itself the resonance moves."""
    weather = design.antenna.trap.weather
    if weather.closing:
        yield "sealing", -weather.closing
    yield "rain", -weather.rain_shift
    yield "ice", -weather.ice_shift
    of_coil, of_capacitor = drifts(design, trap)
    warmth = [("sun", weather.in_sun - weather.built_at), ("cold", weather.in_cold - weather.built_at)]
    if heat is not None:
        warmth.append(("heat", heat.over))
    for what, kelvin in warmth:
        yield what, float(drifted(1.0, of_coil * kelvin, of_capacitor * kelvin)) - 1


def shifts(figures: Figures, trap: BuiltTrap, heat: Heat | None) -> tuple[Shift, ...]:
    """Return what each thing does by itself to a trap that is as it was built.

    Sealing is counted from the resonance before it: a trap brought to where the design says beforehand falls
    by so much.
    """
    design = figures.design
    steps = list(_steps(design, trap, heat))
    dips: dict[str, np.ndarray] = {}
    worst: dict[str, np.ndarray] = {}
    for role, band in design.bands.items():
        ports = figures.ports[role]
        low, high = band.low * (1 - MARGIN), band.high * (1 + MARGIN)
        frequency = np.linspace(low, high, POINTS)
        at = np.append(frequency, np.linspace(*band.wanted_edges, 9))
        z = np.tensordot(polynomial_weights(ports.frequency, at), ports.impedance, 1)
        loads = trap.moved(at, [0.0, *(step for _, step in steps)])
        each = np.array([swr(terminate(z, load).impedance, design.station.reference) for load in loads])
        found = np.array([_dip(frequency, s[:POINTS]) for s in each])
        dips[role] = found[1:] - found[0]
        worst[role] = each[1:, POINTS:].max(axis=1)
    return tuple(
        Shift(
            what=what,
            trap=step * trap.resonance,
            dips={role: float(dips[role][n]) for role in dips},
            swr={role: float(worst[role][n]) for role in worst},
        )
        for n, (what, step) in enumerate(steps)
    )


def _dip(frequency: np.ndarray, ratio: np.ndarray) -> float:
    """Return where the SWR is least; NaN at an end."""
    i = int(np.argmin(ratio))
    if i in (0, frequency.size - 1):
        return float("nan")
    return float(dip_among_three(frequency[i - 1 : i + 2], ratio[i - 1 : i + 2]))
