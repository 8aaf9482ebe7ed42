"""What a rummage found: ranked rows with the reason in words, or what is missing; text and JSON."""

from __future__ import annotations

import sys
from collections.abc import Iterable
from dataclasses import asdict, fields
from typing import Any

from ..design.box import Box
from ..design.design import Design
from ..errors import visible
from ..services.box.rummage import Found
from ..services.box.scoring import WORDS
from ..services.box.search import Row, Stub
from ..services.box.shortage import Shortage
from ..services.compare.port_grid import BandSummary
from .json_out import FORMAT, SUFFIXES
from .json_out import inputs as inputs_of
from .layout import folded
from .shown import about, centimetres, exact, kilohertz_per_step, measured, megahertz, small_step, swr
from .tolerance_out import STAGES, chance

KINDS = {"solenoid": "coil", "stub": "coil and stub", "toroid": "ring core", "cable": "cable trap"}
MORE = {
    "loss": "more loss",
    "width": "less width to spare",
    "volts": "less margin in volts",
    "size": "larger",
    "pieces": "more capacitors",
    "adjustment": "less adjustment",
    "spare": "no capacitor left over",
}
LESS = {
    "loss": "less loss",
    "width": "more width to spare",
    "volts": "more margin in volts",
    "size": "smaller",
    "pieces": "fewer capacitors",
    "adjustment": "better adjustment",
    "spare": "spare capacitors",
}
MUCH = 0.1
"""Part of the frequency beyond which an adjustment is not told more finely."""
WORTH = 0.05
"""Points below which two traps count as equal in one respect."""
LACKS = {
    "pieces": "the capacitors do not go round: two equal traps want twice the pieces of one",
    "rating": "the voltage ratings do not stand what a trap bears",
    "former": "the formers are too short or too few for two windings",
    "wire": "there is too little wire for two windings",
    "cable": "there is too little cable for two windings or stubs",
}


def last(progress: Iterable[Found]) -> Found | None:
    """Return the last of a search, saying on a terminal how far it is; an interrupt keeps what was found."""
    found = None
    shows = sys.stderr is not None and sys.stderr.isatty()
    try:
        for found in progress:
            if shows and found.rows and not found.finished:
                best = visible(found.rows[0].former, 20)
                doing = "yield of" if found.stage else "looked into"
                line = f"{doing} {found.done} of {found.total}; best so far: {best}; Ctrl-C keeps these"
                print(f"\r{line:<78}", end="", file=sys.stderr, flush=True)
    except KeyboardInterrupt:
        if found is None:
            raise
    if shows:
        print(f"\r{'':<78}\r", end="", file=sys.stderr, flush=True)
    return found


def lines(design: Design, box: Box, found: Found) -> list[str]:
    """Return the ranked rows as lines of at most 79 columns; without rows what is missing."""
    title = f"{visible(box.title, 30)} for {visible(design.title, 40)}"
    out = folded("", f"{title}: traps at {megahertz(found.resonance)}, two of each, estimates.")
    if not found.rows:
        return [*out, "", *_shortage(box, found.shortage)]
    out += folded("", f"{thousands(found.tried)} ways tried." + ("" if found.finished else " Stopped early."))
    out += folded("", by_yield(found)) if found.stage else []
    for place, row in enumerate(found.rows, start=1):
        out += ["", *_row(place, row, found.rows[0], box)]
    return [*out, "", *folded("", WORDS)]


def by_yield(found: Found) -> str:
    """Return what a ranking by yield goes by, and whether it tells the rows apart."""
    known = [row.within for row in found.rows if row.within is not None]
    text = f"Ordered by yield, {STAGES[found.stage]}: antennas within the SWR limit on every band"
    if not known:
        return f"{text}. None of the rows has any."
    text += f", {known[0].trials} trials each, the same for all. What they cannot tell apart goes by cost"
    if len(known) == len(found.rows) > 1 and min(y.high for y in known) >= max(y.low for y in known):
        return f"{text}: that is every row; another stage may tell more."
    return f"{text}."


def thousands(number: int) -> str:
    """Return a whole number with gaps between its thousands."""
    return f"{number:,}".replace(",", " ")


def turns_text(turns: float) -> str:
    """Return turns to the half turn, or to a tenth where they are neither."""
    return f"{turns:.0f}" if turns == round(turns) else f"{turns:.1f}"


def capacitors_text(row: Row, box: Box) -> str:
    """Return the capacitors of one trap and how they are joined."""
    names = [exact(box.capacitors[i].capacitance, "capacitance") for i in row.pieces]
    return row.way.format(*names).replace("+", "beside").replace(" - ", " in series with ")


def coil_text(row: Row) -> str:
    """Return what is wound on what."""
    on = f"{visible(row.wire, 30)} on {visible(row.former, 30)}"
    if row.kind == "cable":
        low, high = row.wound.turns_range or (row.turns, row.turns)
        needed = f"{low:.1f}" if f"{low:.1f}" == f"{high:.1f}" else f"{low:.1f} to {high:.1f}"
        return f"wind {row.wound.wind} turns of {on}, then trim: {needed} are needed"
    text = f"{turns_text(row.turns)} turns of {on}"
    pitch = getattr(row.trap.coil, "pitch", None)
    return f"{text}, turn to turn {measured(pitch, 'mm', 2)}" if pitch else text


def reason(row: Row, first: Row) -> str:
    """Return why a row stands where it stands: what sets it behind the first, and what it has over it."""
    if row is first and row.within is not None:
        return f"first by its yield; most of its cost is {_PLAIN[_heaviest(row)]}"
    if row is first:
        return f"first: least cost of all; most of its cost is {_PLAIN[_heaviest(row)]}"
    gaps = {f.name: float(getattr(row.cost, f.name) - getattr(first.cost, f.name)) for f in fields(row.cost)}
    worse = [MORE[n] for n, g in sorted(gaps.items(), key=lambda item: -item[1]) if g > WORTH]
    if row.within is not None and first.within is not None and row.within.share < first.within.low:
        worse.insert(0, "less yield")
    better = [LESS[n] for n, g in sorted(gaps.items(), key=lambda item: item[1]) if g < -WORTH]
    text = f"against the first: {' and '.join(worse[:2])}" if worse else "as good as the first"
    return f"{text}, but {' and '.join(better[:2])}" if better else text


def _heaviest(row: Row) -> str:
    return max(fields(row.cost), key=lambda f: float(getattr(row.cost, f.name))).name


_PLAIN = {
    "loss": "what the traps take",
    "width": "the width, which the wanted parts fill",
    "volts": "the volts, near the rating",
    "size": "its size",
    "pieces": "the number of capacitors",
    "adjustment": "what adjustment cannot mend",
    "spare": "that no capacitor is left over",
}


def _row(place: int, row: Row, first: Row, box: Box) -> list[str]:
    head = f"{place:>2}  "
    cost = f"cost {float(row.cost.total):.1f}"
    if row.within is not None:
        cost = f"yield {chance(row.within)}, {cost}"
    out = folded(head, f"{KINDS[row.kind]}, {cost}: {coil_text(row)}")
    out += folded("    ", _parts(row, box))
    out += folded("    ", "; ".join(_band(b) for b in row.outcome.bands.values()) + f"; {_volts(row)}")
    out += folded("    ", f"{adjustment(row)}; {_stock(row)}")
    return out + folded("    ", reason(row, first))


def _parts(row: Row, box: Box) -> str:
    if row.kind == "cable":
        with_ = _TAKEN[str(row.trap.coil.terminals)]
    elif row.stub is not None:
        with_ = f"with {stub_text(row.stub)}"
    else:
        with_ = f"with {capacitors_text(row, box)}"
    if len(row.pieces) > 1:
        with_ += f", together {about(row.capacitance, 'capacitance', 3)}"
    size = f"{measured(row.length, 'mm', 0)} long, {measured(row.diameter, 'mm', 0)} wide"
    what = "cable" if row.kind == "cable" else "wire"
    wire = measured(row.wire_length, "m", 2)
    return f"{with_}; {size}, {wire} of {what} a trap, Q about {about(row.q, 'ratio')}"


_TAKEN = {
    "shield": "the antenna goes on across the shield alone",
    "series": "the antenna goes on across shield and inner conductor in series",
}


def _band(band: BandSummary) -> str:
    width = f"{band.width / 1e3:.0f} kHz wide" if band.width else f"SWR {swr(band.worst_swr)}, over the limit"
    return f"{visible(band.name, 12)}: traps take {100 * band.loss:.1f} %, {width}"


def _volts(row: Row) -> str:
    volts = f"{about(row.volts, 'voltage')} peak"
    if row.voltage is None:
        return f"{volts}, no rating known"
    return f"{volts} of {about(row.voltage, 'voltage')}"


def stub_text(stub: Stub) -> str:
    """Return the stub of one trap and how long to cut it."""
    whole = centimetres(stub.length + stub.snip)
    return f"a stub cut to {whole}, {centimetres(stub.length)} once snipped, of {visible(stub.cable, 30)}"


def adjustment(row: Row) -> str:
    """Return what can still be moved after building, and whether that covers what the parts may be off."""
    if row.stub is not None:
        step = kilohertz_per_step(row.stub.slope)
        each = f"each {small_step()[0]} raises it by {step}"
        return f"snip the stub: {each}, nothing lowers it again; seal its end"
    how = {
        "solenoid": ("turns together", "apart"),
        "toroid": ("turns bunched", "spread"),
    }
    if row.kind not in how:
        return "built low and trimmed: cutting cable raises it, nothing lowers it again"
    down, up = (
        f"{100 * part:.1f}" if part < MUCH else f"over {100 * MUCH:.0f}" for part in (row.down, row.up)
    )
    text = f"{how[row.kind][0]} lower it by {down} %, {how[row.kind][1]} raise it by {up} %"
    covered = row.off <= min(row.down, row.up)
    return f"{text}, parts may be {100 * row.off:.1f} % off" + ("" if covered else ": not all of it")


def _stock(row: Row) -> str:
    if row.stub is not None:
        return f"{measured(row.stub.left, 'm', 1)} of cable left over"
    if row.kind == "cable":
        return "no capacitors"
    left = int(row.spare)
    return "no capacitor left over" if left < 1 else f"{left} capacitor{'s' * (left > 1)} left over"


def _shortage(box: Box, short: Shortage | None) -> list[str]:
    """Return why nothing can be built, what is nearest, and what one part would do."""
    out = ["Nothing in it makes two equal traps for this design."]
    if short is None:
        return out
    for name in short.missing:
        out += folded("  missing: ", f"the box holds no {name}")
    if len(short.lacks) > 1 and len(short.lacks) == len(LACKS):
        out += folded("  short: ", "several things at once; more of one alone would not do")
    else:
        for name in short.lacks:
            out += folded("  short: ", LACKS[name])
    if short.nearest is not None:
        row = short.nearest
        near = coil_text(row) + (f", with {capacitors_text(row, box)}" if row.pieces else "")
        out += folded("  nearest: ", f"{near}; it would bear {about(row.volts, 'voltage')} peak")
    for table, part in short.parts:
        out += folded("  enough: ", part_text(table, part))
    if not short.parts:
        out += folded("  enough: ", "no single part; fill the lists that are empty")
    return out


def part_text(table: str, part: Any) -> str:
    """Return the one part that would make a trap possible, in words."""
    if table == "capacitors":
        rating = f", rated {about(part.voltage, 'voltage')}" if part.voltage else ""
        return f"two capacitors of {exact(part.capacitance, 'capacitance')}{rating}"
    if table == "formers":
        return (
            f"two pieces of tube of {measured(part.diameter, 'mm', 0)}, {measured(part.length, 'cm', 0)} long"
        )
    return f"enamelled wire of {measured(part.diameter, 'mm', 1)}, {measured(part.length, 'm', 0)}"


def document(design: Design, box: Box, found: Found) -> dict[str, Any]:
    """Return the rows for scripts: SI units, the unit in the key."""
    short = found.shortage
    return {
        "format": FORMAT,
        "kind": "rummage",
        "title": design.title,
        "box": box.title,
        "resonance_hz": found.resonance,
        "tried": found.tried,
        "finished": found.finished,
        "ranking": WORDS,
        "for_yield": found.stage or None,
        "rows": [_document_row(place, row, found.rows[0], box) for place, row in enumerate(found.rows, 1)],
        "shortage": None
        if short is None
        else {
            "lacks": short.lacks,
            "missing": short.missing,
            "nearest": None if short.nearest is None else coil_text(short.nearest),
            "enough": [
                {"list": table, "text": part_text(table, part)} | inputs_of(part)
                for table, part in short.parts
            ],
        },
    }


def _document_row(place: int, row: Row, first: Row, box: Box) -> dict[str, Any]:
    return {
        "rank": place,
        "kind": row.kind,
        "former": row.former,
        "wire": row.wire,
        "turns": row.turns,
        "capacitors": [
            {"row": i + 1, "capacitance" + SUFFIXES["capacitance"]: box.capacitors[i].capacitance}
            for i in row.pieces
        ],
        "stub": None
        if row.stub is None
        else {
            "cable": row.stub.cable,
            "length_m": row.stub.length,
            "cut_m": row.stub.length + row.stub.snip,
            "left_m": row.stub.left,
            "raises_hz_per_m": row.stub.slope,
        },
        "terminals": str(row.trap.coil.terminals) if row.kind == "cable" else None,
        "turns_range": row.wound.turns_range,
        "wind_turns": row.wound.wind,
        "joined": row.way.format(*(f"#{i + 1}" for i in row.pieces)),
        "capacitance_f": row.capacitance,
        "tolerance": row.tolerance,
        "rating_v": row.voltage,
        "inductance_h": row.inductance,
        "resonance_hz": row.resonance,
        "q": row.q,
        "wire_length_m": row.wire_length,
        "length_m": row.length,
        "diameter_m": row.diameter,
        "adjustment_down": row.down,
        "adjustment_up": row.up,
        "off_as_built": row.off,
        "left_over": row.spare,
        "inner_m": row.outcome.inner,
        "end_m": row.outcome.end,
        "bands": {role: document_band(band) for role, band in row.outcome.bands.items()},
        "cost": {f.name: float(getattr(row.cost, f.name)) for f in fields(row.cost)}
        | {"total": float(row.cost.total)},
        "yield": None if row.within is None else asdict(row.within),
        "reason": reason(row, first),
    }


def document_band(band: BandSummary) -> dict[str, Any]:
    """Return a band of a row or a choice for scripts."""
    return {
        "name": band.name,
        "trap_share": band.loss,
        "sky_share": band.sky,
        "width_hz": band.width,
        "wanted_hz": band.wanted,
        "worst_swr": band.worst_swr,
        "dip_hz": band.dip,
        "resonance_hz": band.resonance,
        "trap_worst_peak_v": band.peak_voltage,
        "trap_worst_average_w": band.average_watts,
    }
