"""The feed, the tuner, the table and the map as JSON: SI, unit in the key, peak or rms named."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ..services.antenna.feed_findings import tuner_watts
from ..services.antenna.figures import BandFigures, Figures
from ..services.compare.reach import ReachMap, TunerAnswer
from ..services.compare.worth import WayFigures, Worth
from ..services.feed.path import LineUse, WayStep
from ..services.feed.tuner import Element, TunerSetting

VALUE_KEYS = {"coil": "inductance_h", "capacitor": "capacitance_f"}
_UNIT = {"coil": "_h", "capacitor": "_f"}


def feed(band: BandFigures) -> dict[str, Any] | None:
    """Return what lies between feed point and transmitter on a band; None where nothing does."""
    found = band.feed
    if found is None:
        return None
    other = found.other
    return {
        "feed_w": found.feed_watts,
        "transmitter_w": found.transmitter_watts,
        "z_transmitter_ohm": found.transmitter_impedance,
        "transmitter_swr": found.transmitter_swr,
        # A tuner is set anew at every frequency here; for other_… it is left as set for the aim.
        "worst_transmitter_swr": found.worst_transmitter_swr,
        "tuner_set_anew_for_worst_transmitter_swr": found.tuner is not None,
        "least_transmitter_w": found.least_watts,
        "line": None if found.line is None else line(found.line),
        "line_worst_rms_v": found.worst_voltage,
        "line_worst_rms_a": found.worst_current,
        "transformer_w": found.transformer_watts,
        "tuner": None if found.tuner is None else setting(found.tuner, tuner_watts(band)),
        "other_place": str(other.where),
        "other_tuner_left_as_set_for_aim": found.tuner is not None and other.where == "transmitter",
        "other_dip_hz": other.dip,
        "other_dip_swr": other.dip_swr,
        "other_low_swr": other.low_swr,
        "other_high_swr": other.high_swr,
        "other_worst_swr": other.worst_swr,
        "way_down": steps(found.steps),
    }


def steps(found: tuple[WayStep, ...]) -> list[dict[str, Any]]:
    """Return the way down: what stays where, and the places passed."""
    return [
        {"step": s.code, "lost_w": s.watts}
        if s.impedance is None
        else {"place": s.code, "passing_w": s.watts, "z_ohm": s.impedance, "swr": s.swr}
        for s in found
    ]


def line(use: LineUse) -> dict[str, Any]:
    """Return a line in use."""
    return {
        "z_load_ohm": use.load,
        "z_in_ohm": use.input,
        "matched_loss_db": use.matched_loss,
        "total_loss_db": use.total_loss,
        "swr_load": use.swr_load,
        "swr_in": use.swr_input,
        "load_w": use.power_load,
        "input_w": use.power_input,
        "rms_v": use.largest_voltage,
        "rms_v_at_m": use.voltage_at,
        "rms_a": use.largest_current,
        "rms_a_at_m": use.current_at,
    }


def setting(found: TunerSetting, watts: float) -> dict[str, Any]:
    """Return a setting with what each element bears at a power into the tuner."""
    short = found.short
    return {
        "network": found.network,
        "f_hz": found.frequency,
        "z_load_ohm": found.load,
        "matched": found.matched,
        "swr": found.swr,
        "loss_db": found.loss,
        "lost_w": watts * (1 - found.efficiency),
        "elements": [_element(e, watts) for e in found.elements],
        "short": None
        if short is None
        else {
            "element": short.element + 1,
            "kind": short.kind,
            "needed" + _UNIT[short.kind]: short.needed,
            "limit" + _UNIT[short.kind]: short.limit,
        },
    }


def _element(element: Element, watts: float) -> dict[str, Any]:
    root = watts**0.5
    return {
        "kind": element.kind,
        "place": element.place,
        VALUE_KEYS[element.kind]: element.value,
        "step": element.step,
        "peak_v": root * element.volts,
        "rms_a": root * element.amps,
        "w": watts * element.share,
        "swr_rise_per_percent": element.touch,
    }


def tuner(
    figures: Figures, answers: Mapping[str, TunerAnswer], maps: Mapping[str, ReachMap], table: Worth
) -> dict[str, Any]:
    """Return a design's tuner band by band, the table of ways and the maps of reach."""
    watts = figures.design.station.power
    bands = {}
    for role, answer in answers.items():
        found = maps[role]
        bands[role] = {
            "aim": setting(answer.aim, watts),
            "wanted": [setting(one, watts) for one in answer.over],
            "width_hz": answer.width,
            "reach": {
                "resistance_ohm": found.resistance,
                "reactance_ohm": found.reactance,
                "loss_db": found.loss,
                "own_ohm": found.own,
            },
            "ways": [_way(one) for one in table.bands[role]],
        }
    return {
        "bands": bands,
        "advice": str(table.advice),
        "gain": table.gain,
        "gaining": table.gaining or None,
        "typical_transmitter": table.typical_transmitter,
        "tuner_stands_in": table.standing_in,
        "no_recut": table.no_recut or None,
    }


def _way(way: WayFigures) -> dict[str, Any]:
    return {
        "way": str(way.way),
        "radiated_w": way.radiated,
        "made_w": way.made,
        "worst_swr": way.worst_swr,
        "least_given_w": way.least_given,
        "hottest": way.hottest,
        "hottest_w": way.hottest_watts,
        "matched": way.matched,
    }
