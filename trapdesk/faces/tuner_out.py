"""The verb tuner: a design, perhaps with a line it does not have yet, to table, way down and map."""

from __future__ import annotations

from dataclasses import replace

from ..design.design import Design
from ..design.station import OWN, FeedLine
from ..errors import BadInput, Fault
from ..services.antenna.feed_point import way_of
from ..services.antenna.solve import solve
from ..services.compare.reach import reach_map, reading, tuner_answer
from ..services.compare.worth import worth
from ..store import store
from ..units.unit_names import Dimension
from ..units.units import read, read_impedance
from . import feed_json, feed_out, json_out
from .layout import fitted, folded
from .line_out import cable_named
from .pairs import bounded
from .rows import summary

USUAL_LENGTH = 25.0


def text(file: str, load: str | None, line: str | None, length: str | None, *, as_json: bool) -> str:
    """Return everything of the verb, as text or JSON."""
    asked = None if load is None else _load(load)
    design = _with_line(store.find(file).design, line, length)
    figures = solve(design)
    answers = {role: tuner_answer(figures, role) for role in figures.bands}
    maps = {role: reach_map(figures, role) for role in figures.bands}
    table = worth(figures)
    readings = {} if asked is None else {role: reading(found, asked) for role, found in maps.items()}
    if as_json:
        document = {"format": json_out.FORMAT, "kind": "tuner"}
        document |= feed_json.tuner(figures, answers, maps, table)
        for role, band in figures.bands.items():
            document["bands"][role]["way_down"] = feed_json.steps(way_of(figures, band))
            if role in readings:
                document["bands"][role]["load"] = feed_json.setting(readings[role], design.station.power)
        return json_out.text(document)
    head = [
        line
        for row in summary(figures)
        if row.label in ("site", "radio")
        for line in folded(f"{row.label:<7}", row.value)
    ]
    lines = [*head, "", *feed_out.document_lines(figures, answers, maps, table)]
    for role, setting in readings.items():
        lines += folded(f"  {figures.bands[role].name}: ", feed_out.reading_line(setting))
    return "\n".join(fitted(lines)) + "\n"


def _load(text: str) -> complex:
    return bounded(read_impedance(text, "--load"), "--load", text, "for example --load 35-j120")


def _with_line(design: Design, line: str | None, length: str | None) -> Design:
    """Return the design fed through another line, or another length of its own."""
    if line is None and length is None:
        return design
    own = design.station.line
    metres = USUAL_LENGTH if own is None else own.length
    if length is not None:
        metres = read(length, Dimension.LENGTH, "--length")
        if not 0 < metres <= 2000:
            raise BadInput(Fault("--length", "outside", length, "0 to 2000 m", "for example --length 25m"))
    if line is None:
        new = FeedLine(length=metres) if own is None else replace(own, length=metres)
    else:
        kind = cable_named(line, "--line")
        if kind == OWN:
            raise BadInput(
                Fault("--line", "unknown_choice", line, help="a line of your own goes into the design")
            )
        new = FeedLine(type=kind, length=metres)
    return replace(design, station=replace(design.station, line=new))
