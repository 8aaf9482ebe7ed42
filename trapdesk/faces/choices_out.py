"""What other choices of the trap's resonance and of L over C would do: tables, a short answer, JSON."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ..design.design import Design
from ..errors import visible
from ..services.compare.choices import Choices, Point
from .json_out import FORMAT
from .layout import folded
from .rummage_out import document_band
from .shown import about, imperial, measured, megahertz

WORTH_LOSS, WORTH_WIDTH = 0.003, 0.03
"""Least change of a share, and of a width by its whole, that is told."""

SAID_FROM = 0.1
"""Loss saved that is worth a word. [%]"""


def lines(design: Design, found: Choices) -> list[str]:
    """Return both curves as tables, the present choice marked, each with its short answer."""
    out = folded("", f"{visible(design.title, 40)}: estimates, with the Q of coil and capacitor held.")
    out += ["", *_table("Where the trap resonates", "MHz", found.by_resonance, _frequency)]
    out += ["", *_answer(found.by_resonance, "resonance", lambda p: megahertz(p.resonance, 4))]
    out += ["", *_table("How large L over C, the resonance kept", "pF", found.by_ratio, _capacitance)]
    out += ["", *_answer(found.by_ratio, "capacitance", lambda p: about(p.capacitance, "capacitance", 3))]
    return out


def _frequency(point: Point) -> str:
    return f"{point.resonance / 1e6:.3f}"


def _capacitance(point: Point) -> str:
    return f"{point.capacitance * 1e12:.1f}"


def _table(title: str, unit: str, points: Sequence[Point], value: Any) -> list[str]:
    bands = next((list(p.bands.values()) for p in points if p.bands), [])
    out = [f"{title}, > marks the present choice"]
    out += [f"  {'':>8}{'':>7}" + "".join(f"{visible(b.name, 12):>18}" for b in bands)]
    heads = "".join(f"{'lost':>8}{'usable':>10}" for _ in bands)
    out += [f"  {unit:>8}{'uH':>7}{heads}{'volts':>8}{'inner':>8}{'end':>8}"]
    for point in points:
        mark = "> " if point.present else "  "
        head = f"{mark}{value(point):>8}{point.inductance * 1e6:>7.2f}"
        if not point.bands:
            out += [f"{head}   no wire lengths meet the aims"]
            continue
        cells = "".join(
            f"{100 * b.loss:>6.1f} %" + (f"{b.width / 1e3:>6.0f} kHz" if b.width else f"{'none':>10}")
            for b in point.bands.values()
        )
        out += [f"{head}{cells}{point.volts:>6.0f} V{_long(point.inner)}{_long(point.end)}"]
    return out


def _long(length: float) -> str:
    """Return a length as a column has it, feet in tenths where lengths are shown in feet."""
    return f"{length / 0.3048:>5.1f} ft" if imperial("length") else f"{length:>6.2f} m"


def _answer(points: Sequence[Point], what: str, value: Any) -> list[str]:
    """Return what going either way from the present choice would give up for what."""
    there = [p for p in points if p.bands]
    present = next((p for p in there if p.present), None)
    if present is None:
        return folded("", "No wire lengths meet the aims with the present trap.")
    ends = [there[0], there[-1]] if what == "resonance" else sorted(there, key=lambda p: p.capacitance)
    text = []
    for end, way in ((ends[0], "lower" if what == "resonance" else "less"), (ends[-1], "more")):
        if end is present:
            continue
        way = {"resonance": {"more": "higher"}.get(way, way)}.get(what, way)
        noun = "resonance" if what == "resonance" else "capacitance"
        text.append(f"{way.capitalize()} {noun}, as far as {value(end)}: {_gain(present, end)}.")
    least = min(there, key=lambda p: p.loss)
    saved = 100 * (present.loss - least.loss)
    if saved >= SAID_FROM:
        text.append(
            f"Both bands together the traps take least at {value(least)}, {saved:.1f} % less than now."
        )
    else:
        text.append("Both bands together the traps take least where it is now.")
    return [line for one in text for line in folded("  ", one)]


def _gain(present: Point, other: Point) -> str:
    """Return what another choice gains and what it gives up."""
    gains, losses = [], []
    for role, band in other.bands.items():
        now, name = present.bands[role], visible(band.name, 12)
        change = band.loss - now.loss
        if abs(change) > WORTH_LOSS:
            where = losses if change > 0 else gains
            where.append(f"{name} loses {100 * band.loss:.1f} % instead of {100 * now.loss:.1f} %")
        if band.width and now.width and abs(band.width / now.width - 1) > WORTH_WIDTH:
            where = losses if band.width < now.width else gains
            where.append(f"{name} is {band.width / 1e3:.0f} kHz wide instead of {now.width / 1e3:.0f}")
        elif bool(band.width) != bool(now.width):
            (gains if band.width else losses).append(
                f"{name} {'comes' if band.width else 'does not come'} under the SWR limit"
            )
    if abs(other.volts / present.volts - 1) > WORTH_WIDTH:
        where = losses if other.volts > present.volts else gains
        where.append(f"{about(other.volts, 'voltage')} instead of {about(present.volts, 'voltage')}")
    shorter = 2 * (present.inner + present.end - other.inner - other.end)
    if abs(shorter) > 0.1:
        where = gains if shorter > 0 else losses
        where.append(f"{measured(abs(shorter), 'm', 1)} {'less' if shorter > 0 else 'more'} wire")
    if not gains and not losses:
        return "hardly any difference"
    kept = f"gains {', '.join(gains)}" if gains else "gains nothing"
    return f"{kept}; gives up {', '.join(losses)}" if losses else f"{kept}; gives up nothing"


def document(design: Design, found: Choices) -> dict[str, Any]:
    """Return both curves for scripts: SI units, the unit in the key."""
    return {
        "format": FORMAT,
        "kind": "choices",
        "title": design.title,
        "coil_q": found.coil_q,
        "capacitor_q": found.capacitor_q,
        "by_resonance": [_point(p) for p in found.by_resonance],
        "by_ratio": [_point(p) for p in found.by_ratio],
    }


def _point(point: Point) -> dict[str, Any]:
    return {
        "present": point.present,
        "trap_resonance_hz": point.resonance,
        "inductance_h": point.inductance,
        "capacitance_f": point.capacitance,
        "inner_m": point.inner,
        "end_m": point.end,
        "bands": {role: document_band(band) for role, band in point.bands.items()},
        "why_none": point.why or None,
    }
