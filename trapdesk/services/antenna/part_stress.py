"""What each part of a trap bears against what it stands, and how warm the trap gets."""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np

from ...design.coil_kinds import Toroid
from ...design.design import MODES, Design
from ...engine.capacitors import rating
from ...engine.heat import over_share, temperature_rise
from ...engine.toroids import toroid_flux
from ..trap.built import BuiltTrap
from ..trap.capacitors import FittedCapacitor, capacitance_of
from .figures import BandFigures, Heat, PartStress
from .response import Behaviour

COPPER_HEAT = 385.0
"""Heat a kilogram of copper takes for a kelvin; from memory. [J/(kg K)]"""
FLUX = "flux"


def part_stress(design: Design, trap: BuiltTrap, over: Behaviour) -> tuple[PartStress, ...]:
    """Return what each part bears at its worst over the frequencies of a behaviour."""
    mean = MODES[design.station.mode].mean
    volts = over.stress.voltage
    if trap.cable is not None:
        return (_cable(trap, over, mean),)
    found = [_coil(design, trap, over, mean)]
    for fitted, share, amps in trap.capacitor.shares(over.frequency):
        found.append(_capacitor(fitted, over.frequency, volts * share, volts * amps, mean))
    return tuple(found)


def _part(
    key: str,
    name: str,
    frequency: np.ndarray,
    volts: np.ndarray,
    amps: np.ndarray,
    watts: np.ndarray,
    mean: float,
    allowed: np.ndarray | None,
    rules: np.ndarray | str = "",
) -> PartStress:
    """Return one part; `allowed` is the rms voltage at its ends that a limit leaves, infinite for none."""
    share = where = None
    peak = float(math.sqrt(2) * volts.max())
    if allowed is not None and np.isfinite(allowed).any():
        shares = volts / allowed
        where = int(np.argmax(shares))
        share = float(shares[where])
    at = int(np.argmax(volts)) if where is None else where
    return PartStress(
        key=key,
        name=name,
        frequency=float(frequency[at]),
        peak_voltage=peak,
        rms_current=float(amps.max()),
        watts=float(watts.max()),
        average=float(watts.max()) * mean,
        share=share,
        rules=None if share is None else str(np.broadcast_to(rules, volts.shape)[at]),
        allowed=None if share is None else float(math.sqrt(2) * allowed[at]),
    )


def _capacitor(
    fitted: FittedCapacitor, frequency: np.ndarray, volts: np.ndarray, amps: np.ndarray, mean: float
) -> PartStress:
    limits, z = fitted.limits, fitted.impedance(frequency)
    reach = 1.0 if limits.reach is None else limits.reach(frequency)
    allowed = rating(
        frequency,
        np.abs(capacitance_of(z, frequency)),
        math.inf if limits.voltage is None else limits.voltage / reach,
        math.inf if limits.current is None else limits.current,
        math.inf if limits.heat is None else limits.heat / mean,
        np.maximum(z.real, 0.0) / np.abs(z.imag),
    )
    watts = amps**2 * np.maximum(z.real, 0.0)
    return _part(
        fitted.key, fitted.name, frequency, volts * reach, amps, watts, mean,
        allowed.allowed * reach, allowed.limited_by,
    )  # fmt: skip


def _cable(trap: BuiltTrap, over: Behaviour, mean: float) -> PartStress:
    fitted, stress = trap.capacitor, over.stress
    volts = stress.voltage * fitted.limits.reach(over.frequency)
    limit = fitted.limits.voltage
    allowed = None if limit is None else np.full_like(volts, limit / math.sqrt(2))
    return _part(
        fitted.key, fitted.name, over.frequency, volts, stress.coil_current, stress.total_power, mean,
        allowed, "voltage",
    )  # fmt: skip


def _coil(design: Design, trap: BuiltTrap, over: Behaviour, mean: float) -> PartStress:
    stress, part = over.stress, design.antenna.trap.coil
    allowed, rules = None, np.array("")
    limits = trap.coil.limits
    if limits.flux is not None or limits.heat is not None:
        many = np.full_like(stress.voltage, np.inf)
        by_flux = by_heat = many
        if limits.flux is not None and isinstance(part, Toroid):
            per_volt = toroid_flux(over.frequency, 1.0, trap.wound.turns, part.outer, part.inner, part.height)
            by_flux = limits.flux / per_volt
        if limits.heat is not None:
            by_heat = stress.voltage * np.sqrt(limits.heat / (mean * stress.coil_power))
        allowed = np.minimum(by_flux, by_heat)
        rules = np.where(by_flux <= by_heat, FLUX, "heat")
    return _part(
        "antenna.trap.coil", "coil", over.frequency, stress.voltage, stress.coil_current,
        stress.coil_power, mean, allowed, rules,
    )  # fmt: skip


def heat(design: Design, trap: BuiltTrap, bands: Iterable[BandFigures]) -> Heat | None:
    """Return how warm a trap gets in the band that heats it most; None for a coil of unknown size."""
    wound = trap.wound
    watts = max((b.worst_stress.average_watts for b in bands if b.worst_stress is not None), default=None)
    if wound is None or watts is None:
        return None
    ambient = design.antenna.trap.weather.in_sun
    lasting = float(temperature_rise(watts, wound.outer_diameter, wound.outer_length, ambient))
    station = design.station
    share = 1.0
    if watts > 0 and lasting > 0:
        constant = wound.mass * COPPER_HEAT * lasting / watts
        share = float(over_share(constant, station.over, station.pause))
    return Heat(
        watts=watts,
        lasting=lasting,
        over=share * lasting,
        hottest=ambient + share * lasting,
        softens=wound.softens,
    )
