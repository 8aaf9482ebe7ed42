"""Looks through a box for traps it can build for a design, the best first."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from ...design.box import Box
from ...design.design import Design
from ..trap.built import wanted_resonance
from .search import Row, Search
from .shortage import Shortage, shortage


@dataclass(frozen=True, kw_only=True)
class Found:
    """What has been found so far: `done` of `total` pairs of former and wire looked into.

    With a `stage` the rows are ordered by their yield at it, and `done` of `total` rows have theirs.
    """

    done: int
    total: int
    rows: tuple[Row, ...]
    tried: int
    resonance: float
    finished: bool = False
    shortage: Shortage | None = None
    stage: str = ""


def rummage(design: Design, box: Box, rows: int = 20) -> Iterator[Found]:
    """Yield what can be built, more each time, the best first; stop whenever enough is seen.

    The last one is `finished`. NoAnswer when no trap of this resonance has wires that meet the aims.
    """
    search = Search(design, box, wanted_resonance(design.antenna.trap))

    def found(rows: tuple[Row, ...], done: int = 0, total: int = 0, finished: bool = True) -> Found:
        return Found(
            done=done,
            total=total,
            rows=rows,
            tried=search.tried,
            resonance=search.wanted,
            finished=finished,
            shortage=None if rows else shortage(search),
        )

    none = True
    for so_far in search.run(rows):
        none = False
        yield found(so_far.rows, so_far.done, so_far.total, so_far.finished)
    if none:
        yield found(())


def take(design: Design, row: Row) -> Design:
    """Return the design with the trap of a row in it."""
    return replace(design, antenna=replace(design.antenna, trap=row.trap))
