"""The verb rummage: the box, the search, and what is wrong in the box said after what was found."""

from __future__ import annotations

import argparse
import os
from collections.abc import Callable, Iterator
from typing import Any

from ..design.box import Box
from ..design.design import Design
from ..errors import BadInput, Fault, FileFault, NoAnswer, visible
from ..services.box.rummage import Found, rummage, take
from ..store import box_read, store, sweep_files
from . import json_out, rummage_out

MOST_ROWS = 200


def run(options: argparse.Namespace, write: Callable[[str], Any]) -> str:
    """Return the best traps a box can build for a design, as text or JSON.

    What was found is not lost to a bad entry of the box, nor what is nearest when nothing can be built: then
    it is written, and what is wrong raised.
    """
    if not 1 <= options.rows <= MOST_ROWS:
        raise BadInput(Fault("--rows", "outside the range", str(options.rows), f"1 to {MOST_ROWS}"))
    _refuse_half_said(options)
    opened, fault = store.find(options.file), None
    design = opened.design
    try:
        box = box_read.find_box(options.box or box_read.READY_BOX)
    except box_read.BoxFault as error:
        box, fault = error.box, error
        if box.is_empty:
            raise
    found = rummage_out.last(search(design, box, options.rows, options.for_yield))
    if options.json:
        text = json_out.text(rummage_out.document(design, box, found))
    else:
        text = "\n".join(rummage_out.lines(design, box, found)) + "\n"
    if found.rows and options.take is not None:
        said = _taken(options, opened, found, lambda: write(text))
        text += "" if options.json else said
    if fault is None and found.rows:
        return text
    write(text)
    raise fault or NoAnswer("nothing_to_build", "", {}, "the one part named above, or another design")


def _refuse_half_said(options: argparse.Namespace) -> None:
    """Refuse a row to take and no file for it, or the other way round, and a file that is there, at once."""
    if options.take is not None and options.out is None:
        raise BadInput(Fault("--take", "no file said", help="--out and a file that is not there yet"))
    if options.take is None and options.out is not None:
        raise BadInput(Fault("--out", "no row said", help="--take and the number of a row"))
    if options.out is not None and os.path.lexists(options.out):
        raise FileFault(options.out, "already_there", help="nothing is written over; choose another name")


def _taken(options: argparse.Namespace, opened: store.Document, found: Found, show: Callable[[], Any]) -> str:
    """Write the design with the trap of a row, and say so; the rows are shown before a refusal."""
    count = len(found.rows)
    if not 1 <= options.take <= count:
        show()
        raise BadInput(Fault("--take", "outside the range", str(options.take), f"1 to {count}, a row shown"))
    design = take(opened.design, found.rows[options.take - 1])
    try:
        sweep_files.write_new(options.out, store.to_text(design, opened.text), "utf-8")
    except FileFault:
        show()
        raise
    return f"\nThe design with the trap of row {options.take} is in {visible(options.out)}.\n"


def search(design: Design, box: Box, rows: int, stage: str | None) -> Iterator[Found]:
    """Yield what is found, and then again by its yield at a stage, if one is said."""
    for found in rummage(design, box, rows):
        yield found
    if stage and found.rows:
        from ..services.box.by_yield import by_yield

        yield from by_yield(design, found, stage)
