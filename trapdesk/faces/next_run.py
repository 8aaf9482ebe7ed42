"""The verb next: readings taken together with what was kept, and what is kept of them."""

from __future__ import annotations

import argparse
from dataclasses import replace

from ..design.design import Design, Site, at_new_site
from ..design.history import History
from ..design.reading_kinds import PARTS, Reading
from ..errors import BadInput, Fault, FileFault, NoAnswer, visible
from ..services.hung import next_move as service
from ..services.hung.readings import ReadingUnusable
from ..store import store
from ..units import reading_text, units
from . import json_out, move_words, moves_out, readings_out
from .shown import megahertz


def run(options: argparse.Namespace) -> str:
    """Return the next move as text or JSON, and keep or undo what was asked to be."""
    opened = store.find(options.file)
    design = opened.design
    writes = options.keep or options.undo or options.moved
    if writes and opened.path is None:
        help = "a preset is never written over: save it under a name of its own first"
        raise FileFault(options.file, "not_writable", help=help)
    kept = []
    if options.undo:
        design = without_last(design)
        kept.append(f"The last readings and their move are taken out of {visible(options.file, 60)}.")
    if options.moved:
        design = with_moves(design, options.moved)
        kept.append(f"What was really moved is kept in {visible(options.file, 60)}.")
    given = antenna_readings(options.values)
    if options.keep and not (given or options.site):
        raise BadInput(Fault("--keep", "there are no readings to keep", help="type them behind the design"))
    found = found_next(design, given, options.site)
    if options.keep:
        what = ["the new site"] * bool(options.site) + ["these readings"] * bool(given)
        design = with_step(design, options.values, found, at=found.figures.design.site)
        kept.append(f"Kept in {visible(options.file, 60)}: {', '.join([*what, 'and this move as made'])}.")
        kept.append("Did you move otherwise? Say so with --moved inner=-5cm; --undo takes both back.")
    if writes:
        store.save(design, opened.path, opened.text)
    if options.json:
        return json_out.text(moves_out.document(found, options.keep))
    return "\n".join(moves_out.lines(found, given, ["", *kept] if kept else [])) + "\n"


def card(design: Design) -> list[str]:
    """Return what was learnt so far as lines for the hill card."""
    return moves_out.card(found_next(design, (), None))


def found_next(design: Design, given: tuple[Reading, ...], site: str | None) -> service.NextMove:
    """Return what to do next by what was kept and what is given; BadInput in words where that cannot be."""
    past = past_readings(design)
    sweeps, _ = readings_out.sweeps_of([*(r for step in past for r in step), *given])
    other = None if site is None else store.find(site).design
    try:
        return service.next_move(design, past, given, sweeps, site=other)
    except ReadingUnusable as refused:
        says, helps = move_words.REFUSALS[refused.code]
        shown = {name.removesuffix("_hz"): megahertz(value, 4) for name, value in refused.numbers.items()}
        raise BadInput(Fault(refused.where, says.format(**shown), help=helps.format(**shown))) from None


def past_readings(design: Design) -> list[tuple[Reading, ...]]:
    """Return the readings that were kept, step by step; BadInput names the step that cannot be read."""
    steps = () if design.history is None else design.history.all_steps
    found = []
    for place, step in enumerate(steps, start=1):
        try:
            found.append(antenna_readings(step.readings.split()))
        except BadInput as refused:
            where = f"history, lowering {place}:"
            raise BadInput(
                replace(fault, where=f"{where} {fault.where}".strip()) for fault in refused.faults
            ) from None
    return found


def antenna_readings(texts: list[str]) -> tuple[Reading, ...]:
    """Return the readings of the antenna typed; BadInput for what cannot be read or is of a part."""
    readings = reading_text.parse(texts)
    parts = [r for r in readings if r.subject in PARTS]
    if parts:
        help = "trapdesk readings takes those; here go upper., lower. and line."
        raise BadInput(Fault(r.name, "a_reading_of_a_part", help=help) for r in parts)
    return readings


def with_step(design: Design, texts: list[str], found: service.NextMove, at: Site | None = None) -> Design:
    """Return the design with readings and the move that follows them kept in it.

    Where it hangs `at` another site that one becomes the design's: the wires stay as they were computed and
    cut, and what was kept goes with the site it left.
    """
    if found.diagnosis.named or found.cannot_tell or found.diagnosis.misfits:
        help = "mend or read again first; readings of something broken are not kept"
        raise NoAnswer("no_move_to_keep", "history", {}, help)
    said = " ".join("".join(text.split()) for text in texts)
    if at is not None and at != design.site:
        design = at_new_site(design, at, found.figures.wire.inner, found.figures.wire.end)
    history = design.history or History()
    step = service.step_after(said, found.advice)
    return replace(design, history=replace(history, steps=(*history.steps, step)))


def without_last(design: Design) -> Design:
    """Return the design without the readings and the move that were kept last.

    Without any left at this site it is back at the one before, its wires as they are.
    """
    history = design.history
    if history is not None and len(history.steps) <= 1 and history.stays:
        *stays, last = history.stays
        return replace(design, site=last.site, history=replace(history, stays=tuple(stays), steps=last.steps))
    if history is None or not history.steps:
        raise BadInput(
            Fault("--undo", "there is nothing to undo", help="no readings were kept in this design")
        )
    return replace(design, history=replace(history, steps=history.steps[:-1]))


def with_moves(design: Design, texts: list[str]) -> Design:
    """Return the design with what was really moved last."""
    history = design.history
    if history is None or not history.steps:
        raise BadInput(Fault("--moved", "no move was kept yet", help="keep readings first, with --keep"))
    last, said = history.steps[-1], set()
    for text in texts:
        wire, _, value = text.partition("=")
        if wire not in ("inner", "end") or not value:
            raise BadInput(Fault("--moved", "unreadable", text, help="--moved inner=-5cm or --moved end=3cm"))
        length = units.read(value, units.Dimension.LENGTH, "--moved")
        if abs(length) > 20:
            raise BadInput(Fault("--moved", "too_large", text, "20 m"))
        if wire in said:
            raise BadInput(Fault("--moved", "given twice", text, help="each wire once, by its whole move"))
        said.add(wire)
        last = replace(last, **{wire: length})
    return replace(design, history=replace(history, steps=(*history.steps[:-1], last)))
