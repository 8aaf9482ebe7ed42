"""Rows of a rummage ordered by how many antennas with each trap keep the SWR limit, built with all doubts."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from ...design.design import Design
from ...errors import NoAnswer
from ..trials.tolerance import SEED, quick_yield
from .rummage import Found, take
from .search import Row

TRIALS = 1000
"""Trials a row: a yield in the middle is then known to three in a hundred."""


def by_yield(design: Design, found: Found, stage: str, *, seed: int = SEED) -> Iterator[Found]:
    """Yield what was found with the yield of one row more each time, ordered by yield as far as it is known.

    Every row sees the same trials, so that luck does not rank them; of a trap without figures there is none.
    """
    rows = list(found.rows)
    for place, row in enumerate(found.rows):
        try:
            within = quick_yield(take(design, row), trials=TRIALS, seed=seed, stage=stage)
        except NoAnswer:
            within = None
        rows[place] = replace(row, within=within)
        last = place == len(rows) - 1
        yield replace(
            found,
            rows=tuple(ranked(rows)),
            finished=found.finished and last,
            done=place + 1,
            total=len(rows),
            stage=stage,
        )


def ranked(rows: list[Row]) -> Iterator[Row]:
    """Yield rows by their yield; those the trials cannot tell from the best one left go by their cost."""
    left = sorted((row for row in rows if row.within is not None), key=lambda row: -row.within.share)
    while left:
        equal = [row for row in left if row.within.share >= left[0].within.low]
        yield from sorted(equal, key=_points)
        left = left[len(equal) :]
    yield from sorted((row for row in rows if row.within is None), key=_points)


def _points(row: Row) -> float:
    return float(row.cost.total)
