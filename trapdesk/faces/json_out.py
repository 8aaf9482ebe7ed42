"""The figures as JSON that scripts rely on: full precision, SI, unit in the key, null where there is nothing.

The names are those of the tables of a design, with the results beside the inputs; `solved` names the inputs
that stand as "solve" in the file.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np

from ..design.capacitor_kinds import Printed
from ..design.design import Design
from ..design.fields import SOLVE, declared, walk
from ..services.antenna.figures import AtFrequency, BandFigures, Effects, Figures, Finding, Shares, TrapStress
from ..services.bench.tank import TankAnswer
from . import feed_json, trap_json, words

FORMAT = 1
SUFFIXES: dict[str, str] = {
    "length": "_m",
    "frequency": "_hz",
    "inductance": "_h",
    "capacitance": "_f",
    "resistance": "_ohm",
    "power": "_w",
    "voltage": "_v",
    "current": "_a",
    "angle": "_rad",
    "conductivity": "_s_per_m",
    "temperature": "_degc",
    "time": "_s",
    "mass": "_kg",
    "loss": "_db",
    "loss_per_length": "_db_per_m",
    "temperature_coefficient": "_per_k",
    "capacitance_per_length": "_f_per_m",
    "ratio": "",
    "count": "",
    "text": "",
    "choice": "",
    "print": "",
    "flux_density": "_t",
}
"""What a key ends in, by what it measures."""


def text(document: Mapping[str, Any]) -> str:
    """Return a document as JSON text that ends in a line break."""
    return json.dumps(plain(document), indent=2, allow_nan=False) + "\n"


def plain(value: Any) -> Any:
    """Return a value as JSON knows it: complex as [re, im], what is not finite as null."""
    if isinstance(value, Mapping):
        return {str(key): plain(inner) for key, inner in value.items()}
    if isinstance(value, str | Printed):
        return str(value)
    if isinstance(value, list | tuple | np.ndarray):
        return [plain(inner) for inner in value]
    if isinstance(value, complex | np.complexfloating):
        return [plain(float(value.real)), plain(float(value.imag))]
    if isinstance(value, bool | None | int):
        return value
    number = float(value)
    return number if math.isfinite(number) else None


def inputs(part: Any) -> dict[str, Any]:
    """Return what was set in a part and the parts in it; a value that is solved is null."""
    found: dict[str, Any] = {}
    if kind := getattr(part, "kind", ""):
        found["kind"] = kind
    for name, known in declared(part).items():
        value = getattr(part, name)
        if known.dimension == "part":
            found[name] = None if value is None else inputs(value)
        elif known.dimension == "parts":
            found[name] = [inputs(member) for member in value]
        else:
            found[name + SUFFIXES[known.dimension]] = None if value is SOLVE else value
    return found


def figures(figures: Figures, at: Iterable[AtFrequency] = ()) -> dict[str, Any]:
    """Return everything computed for a design, and the single frequencies that were asked for."""
    design = figures.design
    found = {"format": FORMAT, "kind": "figures"} | inputs(design)
    found["basis"] = "estimate"
    found["solved"] = [key for key, _, value in walk(design) if value is SOLVE]
    for role, band in figures.bands.items():
        found["bands"][role] |= _band(band) | {"feed": feed_json.feed(band)}
    found["antenna"]["lengths"] |= _lengths(figures)
    if figures.trap is not None:
        trap_json.add_trap(found["antenna"]["trap"], figures)
    if figures.lengths.end_height is not None:
        found["site"]["end_height_m"] = figures.lengths.end_height
    found["site"]["slope_rad"] = figures.lengths.slope
    found["site"]["soil_is_unknown"] = design.site.soil_is_unknown
    found["findings"] = [_finding(finding, design) for finding in figures.findings]
    single = [_at(one) for one in at]
    return found | ({"at": single} if single else {})


def _band(band: BandFigures) -> dict[str, Any]:
    found = {
        "aim_hz": band.aim,
        "z_aim_ohm": band.aim_impedance,
        "aim_swr": band.aim_swr,
        "resonance_hz": band.resonance,
        "r_resonance_ohm": band.resonance_resistance,
        "dip_hz": band.dip,
        "dip_swr": band.dip_swr,
        "low_swr": band.low_swr,
        "high_swr": band.high_swr,
        "worst_swr": band.worst_swr,
        "width_hz": band.width,
        "usable_hz": band.usable,
    }
    found |= _shares(band.shares) | {"feed_rms_a": band.feed_current} | _stress(band.stress)
    found["trap_average_w"] = band.stress.average_watts if band.stress else None
    worst = band.worst_stress
    found |= {
        "trap_worst_peak_v": worst.peak_voltage if worst else None,
        "trap_worst_rms_a": worst.rms_current if worst else None,
        "trap_worst_w": worst.watts if worst else None,
        "trap_worst_average_w": worst.average_watts if worst else None,
        "trap_worst_peak_hz": worst.frequency if worst else None,
        "resonance_doubt_hz": band.frequency_doubt,
        "z_doubt_ohm": band.impedance_doubt,
        "swr_doubt": band.swr_doubt,
        "share_doubt": band.share_doubt,
        "stress_doubt": band.stress_doubt,
        "effects": _effects(band.effects),
    }
    return found


def _shares(shares: Shares) -> dict[str, Any]:
    names = ("sky", "ground", "wire", "trap")
    return {f"{name}_share": getattr(shares, name) for name in names}


def _stress(stress: TrapStress | None) -> dict[str, Any]:
    return {
        "trap_peak_v": stress.peak_voltage if stress else None,
        "trap_rms_a": stress.rms_current if stress else None,
        "trap_coil_rms_a": stress.coil_current if stress else None,
        "trap_capacitor_rms_a": stress.capacitor_current if stress else None,
        "trap_w": stress.watts if stress else None,
    }


def _effects(effects: Effects | None) -> dict[str, Any] | None:
    if effects is None:
        return None
    return {
        "inner_hz_per_m": effects.inner,
        "end_hz_per_m": effects.end,
        "trap_hz_per_percent": None if effects.trap is None else effects.trap / 100,
        "height_hz_per_m": effects.height,
        "soil_hz": None if effects.soil is None else sorted(effects.soil),
    }


def _lengths(figures: Figures) -> dict[str, Any]:
    lengths = figures.lengths
    return {
        "inner_m": lengths.inner,
        "end_m": lengths.end,
        "inner_mark_m": lengths.inner_mark,
        "end_mark_m": lengths.end_mark,
        "inner_reel_m": lengths.inner_reel,
        "end_reel_m": lengths.end_reel,
        "total_m": lengths.total,
        "half_wave_m": lengths.half_wave,
        "doubt_m": lengths.doubt,
    }


def _finding(finding: Finding, design: Design) -> dict[str, Any]:
    return {
        "code": finding.code,
        "level": str(finding.level),
        "where": finding.where,
        "value": finding.value,
        "limit": finding.limit,
        "dimension": finding.dimension,
        "text": words.sentence(finding, design),
        "help": words.cure(finding),
    }


def _at(one: AtFrequency) -> dict[str, Any]:
    found = {"f_hz": one.frequency, "z_ohm": one.impedance, "swr": one.swr}
    return found | _shares(one.shares) | {"feed_rms_a": one.feed_current} | _stress(one.stress)


_TANK_KEYS = {
    "f": "f_hz",
    "L": "l_h",
    "C": "c_f",
    "R": "r_ohm",
    "RD": "rd_ohm",
    "Q": "q",
    "B": "b_hz",
}
_BEHAVIOUR_KEYS = {
    "lc_resonance": "lc_resonance_hz",
    "unity_power_factor_resonance": "unity_power_factor_resonance_hz",
    "unity_power_factor": "unity_power_factor",
    "peak_resonance": "peak_resonance_hz",
    "peak_impedance": "peak_impedance_ohm",
    "half_power_low": "half_power_low_hz",
    "half_power_high": "half_power_high_hz",
    "half_power_width": "half_power_width_hz",
    "dynamic_resistance": "dynamic_ohm",
    "dynamic_resistance_high_q": "dynamic_high_q_ohm",
    "dynamic_resistance_difference": "dynamic_difference_ohm",
    "peak_excess": "peak_excess",
    "q_components": "q_components",
    "q_dynamic": "q_dynamic",
    "q_half_power": "q_half_power",
    "q_peak": "q_peak",
}


def tank(given: Mapping[str, float], answer: TankAnswer) -> dict[str, Any]:
    """Return a resonator: what was given, what follows from it, and how it behaves."""
    behaviour = answer.behaviour
    return {
        "format": FORMAT,
        "kind": "tank",
        "status": str(answer.status),
        "given": {_TANK_KEYS[name]: value for name, value in given.items()},
        "values": {_TANK_KEYS[str(name)]: value for name, value in answer.values.items()},
        "relative_doubt": {str(name): value for name, value in answer.doubt.items()},
        "behaviour": None
        if behaviour is None
        else {key: getattr(behaviour, name) for name, key in _BEHAVIOUR_KEYS.items()},
    }
