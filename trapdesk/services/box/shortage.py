"""Nothing can be built: what comes nearest, what it lacks, and which single part would do."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import Any

from ...design.box import Box, Capacitor, Former, Wire
from ...design.preferred_values import SERIES
from .combos import TRAPS
from .search import Row, Search


@dataclass(frozen=True, kw_only=True)
class Shortage:
    """Why nothing can be built: what is nearest, what it lacks, and which single part would do.

    `lacks` names what would each be enough to have more of: pieces, rating, former, wire, cable; all of
    them when only all together would do. `missing` are lists of the box with nothing in them. `parts` are
    pairs of a list of the box and the entry to add, each alone enough.
    """

    lacks: tuple[str, ...]
    missing: tuple[str, ...]
    nearest: Row | None
    parts: tuple[tuple[str, Any], ...]


FORMERS = (0.025, 0.032, 0.04, 0.05, 0.063)
WIRES = (0.001, 0.0016, 0.002)
AMPLE = 0.15
"""Length of a former that is offered as the one part. [m], an estimate"""
MARGIN = 1.5
"""Rating of a capacitor that is offered, over the worst volts."""


def _with_counts(box: Box, count: int) -> Box:
    kinds = (replace(c, count=max(c.count, count)) for c in box.capacitors)
    return replace(box, capacitors=tuple(kinds))


RELAXED: dict[str, Callable[[Box], Box]] = {
    "pieces": lambda box: _with_counts(box, 3 * TRAPS),
    "rating": lambda box: replace(box, capacitors=tuple(replace(c, voltage=1e6) for c in box.capacitors)),
    "former": lambda box: replace(
        box, formers=tuple(replace(f, length=f.length + 1.0, count=max(f.count, TRAPS)) for f in box.formers)
    ),
    "wire": lambda box: replace(box, wires=tuple(replace(w, length=1e4) for w in box.wires)),
    "cable": lambda box: replace(box, cables=tuple(replace(c, length=1e4) for c in box.cables)),
}
"""What may be the only thing that is short, each with the box in which it is not."""


def shortage(search: Search) -> Shortage:
    """Return what is nearest, what it lacks, and the single parts of which each would be enough."""
    box, nearest, lacks = search.box, None, []
    for name, relax in RELAXED.items():
        row = _first(search, relax(box))
        if row is not None:
            lacks.append(name)
            nearest = nearest or row
    if nearest is None:
        every = box
        for relax in RELAXED.values():
            every = relax(every)
        nearest = _first(search, every)
        lacks = list(RELAXED) if nearest is not None else []
    missing = [name for name in ("formers", "wires", "capacitors") if not getattr(box, name)]
    return Shortage(
        lacks=tuple(lacks), nearest=nearest, parts=tuple(_single_parts(search)), missing=tuple(missing)
    )


def _first(search: Search, box: Box, only: tuple[int | None, int | None] = (None, None)) -> Any:
    """Return the best row of a box, of one former or wire alone when so asked; None without any."""
    joined = search.capacitors(box)
    former, wire = only
    offers = []
    for pair in search.pairs(box):
        kind, i, j = pair
        if (former is not None and (kind == "toroid" or i != former)) or (
            wire is not None and (kind == "cable" or j != wire)
        ):
            continue
        if of_pair := search.offers(box, pair, joined):
            offers.append(of_pair)
    for of_pair in sorted(offers, key=lambda o: o[0].points)[:5]:
        row = search.best(of_pair, box)
        if row is not None:
            return row
    return None


def _single_parts(search: Search) -> Iterator[tuple[str, Any]]:
    """Yield for each list of the box the best single addition that makes a trap possible."""
    box = search.box
    tried: dict[str, list[tuple[Box, Any, tuple[int | None, int | None]]]] = {
        "capacitors": [
            (replace(box, capacitors=(*box.capacitors, part)), part, (None, None))
            for part in _capacitors(search)
        ],
        "formers": [
            (replace(box, formers=(*box.formers, part)), part, (len(box.formers), None))
            for part in (
                Former(name=f"tube of {1e3 * d:.0f} mm", diameter=d, length=AMPLE, count=TRAPS)
                for d in FORMERS
            )
        ],
        "wires": [
            (replace(box, wires=(*box.wires, part)), part, (None, len(box.wires)))
            for part in (
                Wire(name=f"enamelled {1e3 * d:.1f} mm", diameter=d, coating=0.03 * d, length=20.0)
                for d in WIRES
            )
        ],
    }
    for table, boxes in tried.items():
        rows = [(row, part) for fuller, part, only in boxes if (row := _first(search, fuller, only))]
        if rows:
            yield table, min(rows, key=lambda pair: float(pair[0].cost.total))[1]


def _capacitors(search: Search) -> Iterator[Capacitor]:
    """Yield preferred values within the range, rated for what they would bear."""
    least, most = search.range[-1], search.range[0]
    for power in range(math.floor(math.log10(least)), math.ceil(math.log10(most))):
        for value in SERIES["E12"]:
            c = value * 10.0 ** (power - 1)
            if least < c < most:
                volts = search.volts(c)
                rating = math.ceil(MARGIN * volts / 500) * 500.0
                yield Capacitor(name=f"{1e12 * c:.3g} pF", capacitance=c, voltage=rating, count=TRAPS)
