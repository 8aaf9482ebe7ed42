"""A load of one's own matched: what was typed, and every network's settings in ranked rows."""

from __future__ import annotations

import difflib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Any

from ..design.station import TUNER_NETWORKS, FeedLine, Tuner
from ..engine.networks import NETWORKS
from ..errors import BadInput, Fault, NoAnswer
from ..services.feed.load_match import MatchedPart, Solution, solutions, with_line
from ..services.feed.path import laid_line
from ..services.feed.tuner import TunerSetting, tune_at
from . import feed_json, json_out
from .feed_out import element_lines
from .feed_rows import DIMENSIONS, PLACES, loss_text, setting_text, short_text
from .layout import fitted, folded
from .line_out import cable_named
from .pairs import IMPEDANCE, TEXT, Name, need, read_pairs
from .shown import about, exact, impedance_range, megahertz, swr

EXAMPLE = "trapdesk match Z=35-j120 f=7.1MHz"
_Q = {"dimension": "ratio", "low": 1.0, "high": 1e9}
NAMES: dict[str, Name] = {
    "Z": Name(dimension=IMPEDANCE, example="35-j120"),
    "f": Name(dimension="frequency", example="7.1MHz", low=1e3, high=1e11),
    "network": Name(dimension=TEXT, example="t-clc"),
    "wanted": Name(dimension=IMPEDANCE, example="50"),
    "power": Name(dimension="power", example="100W", above=0.0, high=1e6),
    "Q": Name(dimension="ratio", example="5", above=0.0, high=1e6),
    "QL": Name(example="100", **_Q),
    "QC": Name(example="1000", **_Q),
    "Lmin": Name(dimension="inductance", example="0.1uH", low=0.0, high=1.0),
    "Lmax": Name(dimension="inductance", example="28uH", above=0.0, high=1.0),
    "Cmin": Name(dimension="capacitance", example="15pF", low=0.0, high=1.0),
    "Cmax": Name(dimension="capacitance", example="250pF", above=0.0, high=1.0),
    "Lsteps": Name(dimension="ratio", example="32", low=2.0, high=4096.0),
    "Csteps": Name(dimension="ratio", example="32", low=2.0, high=4096.0),
    "line": Name(dimension=TEXT, example="RG-58/U"),
    "tuner": Name(dimension=TEXT, example="hut.toml"),
}
LIMITS = ("Lmin", "Lmax", "Cmin", "Cmax", "Lsteps", "Csteps", "tuner")


@dataclass(frozen=True, kw_only=True)
class MatchAnswer:
    """What was typed and what was found: free solutions, or a tuner's settings within its limits."""

    load: complex
    frequency: float
    wanted: complex
    power: float
    coil_q: float
    capacitor_q: float
    found: tuple[Solution, ...]
    settings: tuple[TunerSetting, ...]


def answer_to(texts: Sequence[str]) -> MatchAnswer:
    """Return every match of a typed load; BadInput for what is wrong with it, NoAnswer without a match."""
    typed = read_pairs(texts, NAMES, EXAMPLE)
    need(typed, NAMES, ("Z", "f"))
    name = _network(typed["network"], typed) if "network" in typed else ""
    if any(key in typed for key in LIMITS):
        return _within_limits(typed, name)
    return _free(typed, name)


def _network(text: str, typed: dict[str, Any]) -> str:
    known = {*NETWORKS, *TUNER_NETWORKS}
    word = text.lower()
    if word not in known:
        near = difflib.get_close_matches(word[:40], sorted(known), n=1)
        begun = [each for each in sorted(known) if word and each.startswith(word)]
        help = f"did you mean {near[0]}?" if near else f"one of {', '.join(begun or sorted(known))}"
        raise BadInput(Fault("network", "unknown_network", text, help=help))
    if with_line(TUNER_NETWORKS.get(word, (word,))) and any(key in typed for key in LIMITS):
        raise BadInput(
            Fault("network", "has_no_coils_and_capacitors_to_set", text, help="take the limits out")
        )
    return word


def _free(typed: dict[str, Any], name: str) -> MatchAnswer:
    """Match with parts of any size; networks of three arms need Q, those of line need line."""
    parts = Tuner()
    line = None
    if "line" in typed:
        line = laid_line(FeedLine(type=cable_named(typed["line"], "line"), length=1.0))
    names = list(TUNER_NETWORKS.get(name, (name,))) if name else list(NETWORKS)
    if line is None:
        stubs = with_line(names)
        if name and stubs:
            help = "stubs are cut from line: add line=RG-58/U or another type"
            raise BadInput(Fault("line", "missing", help=help))
        names = [each for each in names if each not in stubs]
    if "Q" not in typed:
        three = [each for each in names if len(NETWORKS[each].arms) == 3]
        if name and three:
            # Three arms leave a choice: the parts of a tuner, or a quality, make it.
            return _within_limits(typed, name)
        names = [each for each in names if each not in three]
    wanted, q_l, q_c = (
        typed.get("wanted", 50.0 + 0j),
        typed.get("QL", parts.coil.q),
        typed.get("QC", parts.capacitor.q),
    )
    power = typed.get("power", 100.0)
    found: list[Solution] = []
    others = []
    for each in names:
        got, missed = solutions(
            each, typed["f"], typed["Z"], wanted,
            coil_q=q_l, capacitor_q=q_c, power=power, quality=typed.get("Q"), line=line,
        )  # fmt: skip
        found += got
        others += [missed.network] if missed is not None and missed.other_kinds else []
    if not found:
        help = "the same places with other kinds of parts would do" if others else "another network"
        raise NoAnswer("network_does_not_match", "Z", {}, help)
    found.sort(key=lambda one: one.loss)
    return MatchAnswer(
        load=typed["Z"], frequency=typed["f"], wanted=wanted, power=power, coil_q=q_l, capacitor_q=q_c,
        found=tuple(found), settings=(),
    )  # fmt: skip


def _tuner(typed: dict[str, Any]) -> Tuner:
    """Return the tuner of a file, else a common one, with the limits that were typed."""
    tuner = Tuner()
    if "tuner" in typed:
        from ..store import store

        tuner = store.find(typed["tuner"]).design.station.tuner
        if tuner is None:
            help = "a table [station.tuner] in it, or the limits as Lmin, Lmax, Cmin, Cmax"
            raise BadInput(Fault("tuner", "holds_no_tuner", typed["tuner"], help=help))
    changes: dict[str, dict[str, float]] = {"coil": {}, "capacitor": {}}
    for part, letter in (("coil", "L"), ("capacitor", "C")):
        for key, field in ((f"{letter}min", "low"), (f"{letter}max", "high"), (f"{letter}steps", "steps")):
            if key in typed:
                changes[part][field] = typed[key]
        if f"Q{letter}" in typed:
            changes[part]["q"] = typed[f"Q{letter}"]
    coil, capacitor = replace(tuner.coil, **changes["coil"]), replace(tuner.capacitor, **changes["capacitor"])
    for letter, part in (("L", coil), ("C", capacitor)):
        if part.low >= part.high:
            help = f"{letter}min must lie below {letter}max"
            raise BadInput(Fault(f"{letter}min", "leaves_nothing_to_set", help=help))
    return replace(tuner, coil=coil, capacitor=capacitor)


def _within_limits(typed: dict[str, Any], name: str) -> MatchAnswer:
    tuner = _tuner(typed)
    wanted = typed.get("wanted", 50.0 + 0j)
    if wanted.imag:
        raise BadInput(
            Fault("wanted", "is_not_a_resistance", str(wanted), help="a tuner shows a resistance: wanted=50")
        )
    names = [name] if name else [tuner.network] if "tuner" in typed else list(TUNER_NETWORKS)
    for each in names:
        if each not in TUNER_NETWORKS:
            raise BadInput(Fault("network", "unknown_choice", each, ", ".join(TUNER_NETWORKS)))
    settings = [tune_at(replace(tuner, network=each), typed["f"], typed["Z"], wanted.real) for each in names]
    best = min(settings, key=lambda s: s.swr)
    if not any(s.matched for s in settings):
        raise NoAnswer(
            "no_setting_in_reach",
            "Z",
            {"nearest_swr": best.swr},
            f"{best.network}: {short_text(best)}; the nearest is {setting_text(best)}",
        )
    settings.sort(key=lambda s: (not s.matched, s.loss if s.matched else s.swr))
    return MatchAnswer(
        load=typed["Z"], frequency=typed["f"], wanted=wanted, power=typed.get("power", 100.0),
        coil_q=tuner.coil.q, capacitor_q=tuner.capacitor.q, found=(), settings=tuple(settings),
    )  # fmt: skip


def _ohms(wanted: complex) -> str:
    return impedance_range(wanted) if wanted.imag else f"{wanted.real:.4g} ohm"


def lines(answer: MatchAnswer) -> list[str]:
    """Return what was typed and the ways found, the least loss first."""
    found = [
        f"{impedance_range(answer.load)} at {megahertz(answer.frequency)},"
        f" {_ohms(answer.wanted)} wanted, {about(answer.power, 'power', 3)},"
    ]
    found += [
        f"coil Q {answer.coil_q:.4g}, capacitor Q {answer.capacitor_q:.4g}; from the source to the load"
    ]
    for one in answer.found:
        found += ["", f"{one.network}: {NETWORKS[one.network].title}"]
        found += list(_solution(one))
    for number, setting in enumerate(answer.settings):
        found += [""]
        found += folded(f"{setting.network}: ", f"{setting_text(setting)}; {loss_text(setting)}")
        if number == 0:
            found += list(element_lines(setting, answer.power, 1.0))
    text = (
        "Volts are peak, amps rms, heat that of a steady carrier; 1 % off: the SWR with that part so far off."
    )
    found += ["", *folded("", text)]
    return fitted(found)


def _label(part: MatchedPart) -> str:
    return f"{part.kind} {PLACES[part.place]}" if part.kind in DIMENSIONS else part.kind


def _solution(one: Solution) -> Iterator[str]:
    yield f"  {'':<22}{'with loss':>12}{'without':>12}{'volts':>9}{'amps':>9}{'heat':>9}"
    for part in one.parts:
        dimension = DIMENSIONS.get(part.kind, "length")
        label = _label(part)
        values = [
            str(exact(v, dimension, digits=4)) if v < float("inf") else "open"
            for v in (part.value, part.lossless)
        ]
        volts, amps = about(part.volts, "voltage"), about(part.amps, "current")
        heat = about(part.watts, "power")
        yield f"  {label:<22}{values[0]:>12}{values[1]:>12}{volts:>9}{amps:>9}{heat:>9}"
    worst = max(one.parts, key=lambda part: part.touch)
    # Nothing is added to the power: what is below zero is rounding.
    text = (
        f"{max(0.0, one.loss):.3g} dB lost; 1 % off in the {_label(worst)} makes the SWR"
        f" {1 + worst.touch:.2f}; set as without loss it is {swr(one.not_retuned, 0.01)}"
    )
    yield from folded("  ", text)


def document(answer: MatchAnswer) -> dict[str, Any]:
    """Return the same for scripts."""
    return {
        "format": json_out.FORMAT,
        "kind": "match",
        "z_load_ohm": answer.load,
        "f_hz": answer.frequency,
        "z_wanted_ohm": answer.wanted,
        "power_w": answer.power,
        "solutions": [_json(one) for one in answer.found],
        "settings": [feed_json.setting(one, answer.power) for one in answer.settings],
    }


def _json(one: Solution) -> dict[str, Any]:
    keys = [feed_json.VALUE_KEYS.get(part.kind, "length_m") for part in one.parts]
    return {
        "network": one.network,
        "loss_db": one.loss,
        "swr": one.swr,
        "not_retuned_swr": one.not_retuned,
        "parts": [
            {
                "kind": part.kind,
                "place": part.place,
                key: part.value,
                f"lossless_{key}": part.lossless,
                "peak_v": part.volts,
                "rms_a": part.amps,
                "w": part.watts,
                "swr_rise_per_percent": part.touch,
            }
            for part, key in zip(one.parts, keys, strict=True)
        ],
    }


def text(texts: Sequence[str], *, as_json: bool) -> str:
    """Return what was typed and what was found, as text or JSON."""
    answer = answer_to(texts)
    return json_out.text(document(answer)) if as_json else "\n".join(lines(answer)) + "\n"
