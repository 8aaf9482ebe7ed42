"""The verb rummage: the box, the search, and what is wrong in the box said after what was found."""

from __future__ import annotations

import argparse
from collections.abc import Callable, Iterator
from typing import Any

from ..design.box import Box
from ..design.design import Design
from ..errors import BadInput, Fault, NoAnswer
from ..services.rummage import Found, rummage
from ..store import box_read, store
from . import json_out, rummage_out

MOST_ROWS = 200


def run(options: argparse.Namespace, write: Callable[[str], Any]) -> str:
    """Return the best traps a box can build for a design, as text or JSON.

    What was found is not lost to a bad entry of the box, nor what is nearest when nothing can be built: then
    it is written, and what is wrong raised.
    """
    if not 1 <= options.rows <= MOST_ROWS:
        raise BadInput(Fault("--rows", "outside the range", str(options.rows), f"1 to {MOST_ROWS}"))
    design, fault = store.find(options.file).design, None
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
    if fault is None and found.rows:
        return text
    write(text)
    raise fault or NoAnswer("nothing_to_build", "", {}, "the one part named above, or another design")


def search(design: Design, box: Box, rows: int, stage: str | None) -> Iterator[Found]:
    """Yield what is found, and then again by its yield at a stage, if one is said."""
    for found in rummage(design, box, rows):
        yield found
    if stage and found.rows:
        from ..services.by_yield import by_yield

        yield from by_yield(design, found, stage)
