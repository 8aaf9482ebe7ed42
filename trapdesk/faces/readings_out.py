"""Readings of parts: from what was typed and swept to columns of computed and measured, and to JSON."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

from ..design.design import Design
from ..design.reading_kinds import KINDS, PARTS, Doubt, Kind, Reading
from ..engine.fits import Sweep
from ..engine.measured import Estimate
from ..errors import BadInput, Fault, NoAnswer, visible
from ..services.bench import part_readings
from ..services.trap import measured_trap
from ..services.trap.part_values import PartsFound, ReadingRefused, ReadingsDisagree, Remark, SweepFit
from ..store import sweep_files
from ..units import reading_text
from . import reading_words as said
from .json_out import FORMAT
from .layout import WIDTH, folded
from .shown import about, exact, known, megahertz

ROWS = {
    "resonance": ("resonance", "frequency"),
    "inductance": ("inductance", "inductance"),
    "capacitance": ("capacitance, all of it", "capacitance"),
    "q": ("Q", "ratio"),
}
SHOWN_POINTS = 9
MOST_JSON_POINTS = 2000


def parts_of(texts: Sequence[str]) -> tuple[Reading, ...]:
    """Return the readings of parts typed; BadInput for what cannot be read or is no part."""
    readings = reading_text.parse(texts)
    others = [r for r in readings if r.subject not in PARTS]
    if others:
        help = f"of parts there are {', '.join(f'{part}.…' for part in PARTS)}".replace("…", "NAME")
        raise BadInput(Fault(r.name, "no reading of a part", help=help) for r in others)
    return readings


def sweeps_of(readings: Iterable[Reading]) -> tuple[dict[str, Sweep], list[str]]:
    """Return the sweeps that readings name, by name, and remarks on their files."""
    found: dict[str, Sweep] = {}
    notes: list[str] = []
    for reading in readings:
        if reading.kind.takes == "file" and str(reading.value) not in found:
            name = str(reading.value)
            found[name], remarks = sweep_files.read(name)
            notes += [f"{visible(name, 60)}: {remark}" for remark in remarks]
    return found, notes


def answer(design: Design, readings: Sequence[Reading], sweeps: Mapping[str, Sweep]) -> PartsFound:
    """Return what the readings come to; BadInput in words where they cannot be used or disagree."""
    try:
        found = part_readings.find(design, readings, sweeps)
    except ReadingRefused as refused:
        raise BadInput(_refusal(refused)) from None
    except ReadingsDisagree as at_odds:
        raise BadInput(_at_odds(at_odds)) from None
    failed = [one for one in found.fits if not one.used]
    if failed and not found.tells_anything:
        raise NoAnswer("model_does_not_hold", failed[0].reading.name, help=_why(failed[0]))
    return found


def keep(design: Design, found: PartsFound) -> Design:
    """Return the design with what was found; NoAnswer where a reading failed or nothing came out."""
    failed = [one for one in found.fits if not one.used]
    if failed:
        raise NoAnswer("nothing_is_kept", failed[0].reading.name, help=_why(failed[0]))
    if not found.tells_anything:
        help = "the readings tell no value well enough; a reading more, or a surer one, would"
        raise NoAnswer("nothing_is_kept", "antenna.trap.measured", help=help)
    return measured_trap.kept(design, found)


def _refusal(refused: ReadingRefused) -> Fault:
    says, helps = said.REFUSALS[refused.code]
    shown = {name: _number(name, value) for name, value in refused.numbers.items()}
    shown |= {name.rpartition("_")[0]: text for name, text in shown.items()}
    if refused.suspects:
        helps = said.SUSPECTS[refused.suspects[0]]
    return Fault(refused.where, says.format(**shown), help=helps.format(**shown))


def _number(name: str, value: float) -> str:
    """Return a number by the unit in its name."""
    dimension = {"hz": "frequency", "h": "inductance", "f": "capacitance", "ohm": "resistance"}.get(
        name.rpartition("_")[2], "ratio"
    )
    return megahertz(value) if dimension == "frequency" and value >= 1e6 else str(exact(value, dimension))


def _at_odds(at_odds: ReadingsDisagree) -> Fault:
    """Say which readings contradict each other, and what the others would want of each."""
    names = list(dict.fromkeys(strain.name for strain in at_odds.strains))
    alone = [strain for strain in at_odds.strains if strain.alone] or list(at_odds.strains)
    wants = [
        f"{s.name} = {exact(s.wanted, s.dimension, digits=4)} (given {exact(s.given, s.dimension, digits=4)})"
        for s in alone
    ]
    listed = " and ".join([", ".join(names[:-1]), names[-1]]) if len(names) > 1 else f"two of {names[0]}"
    if len(alone) == 1:
        help = f"the others agree among themselves: they want {wants[0]}"
    else:
        help = f"measure one again, or give it more doubt; the others would want {' or '.join(wants)}"
    return Fault(listed, "contradict each other", help=help)


def _why(one: SweepFit) -> str:
    """Say in what a fit fails and what would explain it."""
    f = one.fitted
    text = (
        f"errors of {f.structure:.2g} follow the curve where noise is expected, the largest at"
        f" {megahertz(f.worst, 6)}"
    )
    if one.suspects:
        return f"{text}; {said.SUSPECTS[one.suspects[0]]}"
    return f"{text}; {said.NO_SUSPECT}"


def lines(found: PartsFound, readings: Sequence[Reading], notes: Sequence[str] = ()) -> list[str]:
    """Return readings, what they come to beside what is computed, fits and remarks as lines of text."""
    out = [f"{'Readings':<30}{'read':<17}doubt"]
    for reading in readings:
        out += _reading_lines(reading)
    out += ["", f"{'Trap, each of two':<30}{'computed':<17}measured"]
    for name, (label, dimension) in ROWS.items():
        one: Estimate | None = getattr(found, name)
        computed = str(exact(found.computed[name], dimension, digits=4))
        text = _estimate(one, dimension) if one else "not told by these readings"
        out.append(f"  {label:<27} {computed:<16} {text}")
    for name, one in found.loaded_q.items():
        out.append(f"  {'Q loaded, in ' + name:<27} {'':<16} {_estimate(one, 'ratio')}")
    out += folded("  ", "+- is one standard deviation: two in three lie within it, nearly all within three.")
    for one in found.fits:
        out += ["", *_fit_lines(one)]
    told = [*map(_remark, found.remarks), *notes]
    if told:
        out += ["", "Remarks"]
        for text in told:
            out += folded("  ", f"{text}.")
    return out


def _reading_lines(reading: Reading) -> list[str]:
    value = reading.value
    name = reading.name
    if reading.frequency is not None:
        name += f"@{megahertz(reading.frequency, 6).replace(' ', '')}"
    how = f"  by {reading.how}" if reading.how else ""
    if not isinstance(value, float):
        return folded(f"  {name:<27} ", f"{visible(reading.typed, 200)}{how}")
    off = about(reading.doubt.of(value), reading.kind.takes)
    return [f"  {name:<27} {exact(value, reading.kind.takes, digits=6)!s:<16} +- {off}{how}"]


def _estimate(one: Estimate, dimension: str) -> str:
    return str(known(one.value, one.sigma, dimension))


def _fit_lines(one: SweepFit) -> list[str]:
    """Return the fit over the data at a few frequencies, closest together at resonance."""
    f = one.fitted
    head = f"{one.reading.name}: {said.MODELS[one.reading.how]}"
    out = folded("", head)
    out.append(f"  {'MHz':>10} {'read':>19} {'fitted':>19} {'apart':>10}")
    for i in _places(f.frequency, f.values["resonance_hz"], f.values["q"]):
        out.append(
            f"  {f.frequency[i] / 1e6:>10.6g} {_wave(f.data[i]):>19} {_wave(f.model[i]):>19}"
            f" {abs(f.data[i] - f.model[i]):>10.2g}"
        )
    if one.used:
        text = f"The model holds: what is left is noise of {f.noise:.2g}, {f.frequency.size} points."
    else:
        text = f"The model does not hold, and nothing of it is used: {_why(one)}."
    return out + folded("  ", text)


def _places(frequency: np.ndarray, resonance: float, q: float) -> list[int]:
    """Return which points to show: both ends, and around resonance by widths."""
    steps = np.array([-5.0, -1.5, -0.5, 0.0, 0.5, 1.5, 5.0]) * resonance / max(q, 1.0)
    wanted = np.concatenate([frequency[:1], resonance + steps, frequency[-1:]])
    return sorted({int(np.argmin(np.abs(frequency - f))) for f in wanted})[:SHOWN_POINTS]


def _wave(value: complex) -> str:
    return f"{value.real:+.4f} {value.imag:+.4f}j"


def _remark(remark: Remark) -> str:
    text = said.REMARKS[remark.code]
    return f"{remark.where}: " + text.format(
        share=f"{100 * remark.value:.1f} %",
        plain=f"{remark.value:.3g}",
        size=about(remark.value, "inductance"),
    )


def document(
    found: PartsFound, readings: Sequence[Reading], notes: Sequence[str], kept: bool
) -> dict[str, Any]:
    """Return what the readings come to as JSON: SI, the unit in the key."""
    keys = {
        "resonance": "resonance_hz",
        "inductance": "inductance_h",
        "capacitance": "capacitance_f",
        "q": "q",
    }
    measured: dict[str, Any] = {}
    for name, key in keys.items():
        one: Estimate | None = getattr(found, name)
        stem, _, unit = key.partition("_")
        measured[key] = one.value if one else None
        measured[f"{stem}_doubt{'_' + unit if unit else ''}"] = one.sigma if one else None
    return {
        "format": FORMAT,
        "kind": "readings",
        "kept": kept,
        "readings": [_reading_document(reading) for reading in readings],
        "measured": measured,
        "computed": {key: found.computed[name] for name, key in keys.items()},
        "told_by": {name: list(names) for name, names in found.told_by.items()},
        "loaded_q": {name: {"q": one.value, "q_doubt": one.sigma} for name, one in found.loaded_q.items()},
        "fits": [_fit_document(one) for one in found.fits],
        "remarks": [
            {"code": r.code, "where": r.where, "value": r.value, "text": _remark(r)} for r in found.remarks
        ],
        "notes": list(notes),
    }


def _reading_document(reading: Reading) -> dict[str, Any]:
    value = reading.value
    return {
        "name": reading.name,
        "value": value if isinstance(value, float) else str(value),
        "dimension": reading.kind.takes,
        "doubt": reading.doubt.of(value) if isinstance(value, float) else None,
        "how": reading.how or None,
        "frequency_hz": reading.frequency,
        "options": {
            key: {"relative": o.relative, "absolute": o.absolute} if isinstance(o, Doubt) else o
            for key, o in reading.options.items()
        },
    }


def _fit_document(one: SweepFit) -> dict[str, Any]:
    f = one.fitted
    step = max(1, -(-f.frequency.size // MOST_JSON_POINTS))
    return {
        "reading": one.reading.name,
        "how": one.reading.how,
        "holds": f.holds,
        "values": {name: e.value for name, e in one.estimates.items()},
        "doubts": {name: e.sigma for name, e in one.estimates.items()},
        "doubts_by_noise": f.sigmas,
        "noise": f.noise,
        "structure": f.structure,
        "worst_hz": f.worst,
        "suspects": list(one.suspects),
        "f_hz": [float(x) for x in f.frequency[::step]],
        "read": [complex(x) for x in f.data[::step]],
        "fitted": [complex(x) for x in f.model[::step]],
    }


def kinds_lines() -> list[str]:
    """Return every reading of parts: how it is typed, its usual doubt, and how to do it well."""
    out = [
        "Readings of parts. Values take units; each takes doubt= behind a comma, in per",
        "cent or in its own unit: one standard deviation. The doubts here are common",
        "practice, no source.",
    ]
    for name, kind in KINDS.items():
        if name.partition(".")[0] in PARTS:
            out += ["", f"{name}: {kind.label}", f"  {kind.example}", *_doubts(kind)]
            for key, option in kind.options.items():
                out += folded(f"  {key}= ", option.help)
            out += textwrap.wrap(kind.advice, WIDTH, initial_indent="  ", subsequent_indent="  ")
    return out


def _doubts(kind: Kind) -> list[str]:
    takes = "frequency" if kind.takes == "file" else kind.takes
    ways = [f"{f'how={how}: ' if how else ''}{_doubt(doubt, takes)}" for how, doubt in kind.hows.items()]
    return folded("  doubt ", "; ".join(ways))


def _doubt(doubt: Doubt, takes: str) -> str:
    parts = [f"{100 * doubt.relative:g} %"] if doubt.relative else []
    parts += [about(doubt.absolute, takes)] if doubt.absolute else []
    return " and ".join(parts)


def kinds_document() -> dict[str, Any]:
    """Return every reading of parts as JSON."""
    return {
        "format": FORMAT,
        "kind": "reading kinds",
        "kinds": {
            name: {
                "label": kind.label,
                "takes": kind.takes,
                "example": kind.example,
                "doubts": {
                    how or "usual": {"relative": d.relative, "absolute": d.absolute}
                    for how, d in kind.hows.items()
                },
                "options": {key: option.help for key, option in kind.options.items()},
                "advice": kind.advice,
            }
            for name, kind in KINDS.items()
            if name.partition(".")[0] in PARTS
        },
    }
