"""The trap for scripts: SI, unit in the key, null where there is nothing."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from ..services.antenna.figures import Adjustment, CoilFigures, Figures, Heat, PartFigures, PartStress, Shift


def add_trap(table: dict[str, Any], figures: Figures) -> None:
    """Add what was found of the trap to what was set; a solved value takes its place among the inputs."""
    trap = figures.trap
    table |= {
        "resonance_hz": trap.resonance,
        "bring_to_hz": trap.bring_to,
        "inductance_h": trap.inductance,
        "capacitance_f": trap.capacitance,
        "q": trap.q,
        "q_range": trap.q_range,
        "dynamic_ohm": trap.dynamic_resistance,
        "resonance_doubt_hz": trap.resonance_doubt,
        "inductance_doubt_h": trap.inductance_doubt,
        "z_ohm": trap.impedance,
        "reactance_ohm": {role: z.imag for role, z in trap.impedance.items()},
        "capacitor_tolerance": trap.tolerance,
        "adjustments": adjustments(trap.adjustments),
        "parts": [_part(part) for part in trap.parts],
        "stress": {role: [_stress(part) for part in band.parts] for role, band in figures.bands.items()},
        "heat": _heat(trap.heat),
        "shifts": [_shift(shift) for shift in trap.shifts],
    }
    if table["capacitor"] is not None:
        table["capacitor"]["capacitance_f"] = trap.fitted_capacitance
    if trap.coil is None:
        table["coil"]["inductance_h"] = trap.inductance
    else:
        table["coil"] |= coil(trap.coil)


def coil(coil: CoilFigures) -> dict[str, Any]:
    """Return what to wind."""
    return {
        "turns": coil.turns,
        "turns_range": coil.turns_range,
        "wind_turns": coil.wind,
        "half_turns": coil.half_turns,
        "half_resonance_hz": coil.half_resonance,
        "most_turns": coil.most_turns,
        "diameter_m": coil.diameter,
        "pitch_m": coil.pitch,
        "length_m": coil.length,
        "wire_length_m": coil.wire_length,
        "cut_m": coil.cut,
        "outer_diameter_m": coil.outer_diameter,
        "outer_length_m": coil.outer_length,
        "mass_kg": coil.mass,
        "self_capacitance_f": coil.self_capacitance[1],
        "self_capacitance_range_f": (coil.self_capacitance[0], coil.self_capacitance[2]),
        "own_resonance_hz": coil.own_resonance,
        "crowding": coil.crowding,
    }


def adjustments(found: Iterable[Adjustment]) -> list[dict[str, Any]]:
    """Return what can be moved on a built trap."""
    return [
        {
            "what": a.what,
            "where": a.where,
            "raises_hz": a.raises,
            "lowers_hz": a.lowers,
            "rate_hz_per_m": a.rate,
        }
        for a in found
    ]


def _part(part: PartFigures) -> dict[str, Any]:
    return {
        "key": part.key,
        "name": part.name,
        "capacitance_f": part.capacitance,
        "loss_tangent": part.loss_tangent,
        "loss_source": part.loss_source,
        "tolerance": part.tolerance,
        "drift_per_k": part.drift,
        "pieces": part.pieces,
        "length_m": part.length,
    }


def _stress(part: PartStress) -> dict[str, Any]:
    return {
        "key": part.key,
        "name": part.name,
        "f_hz": part.frequency,
        "peak_v": part.peak_voltage,
        "rms_a": part.rms_current,
        "carrier_w": part.watts,
        "average_w": part.average,
        "share_of_limit": part.share,
        "limited_by": part.rules,
        "allowed_peak_v": part.allowed,
        "margin": None if not part.share else 1 / part.share,
    }


def _heat(heat: Heat | None) -> dict[str, Any] | None:
    if heat is None:
        return None
    return {
        "average_w": heat.watts,
        "lasting_rise_k": heat.lasting,
        "over_rise_k": heat.over,
        "hottest_degc": heat.hottest,
        "softens_degc": heat.softens,
    }


def _shift(shift: Shift) -> dict[str, Any]:
    return {"what": shift.what, "trap_hz": shift.trap, "dip_hz": shift.dips, "worst_swr": shift.swr}
