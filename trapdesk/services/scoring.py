"""How traps are ranked: one cost in per cent, made of parts that can each be said in words."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np

WIDTH_FROM, WIDTH_COST = 0.75, 10.0
VOLTS_FROM, VOLTS_COST, UNRATED_COST = 0.6, 20.0, 4.0
LENGTH_COST, DIAMETER_COST = 10.0, 5.0
PIECE_COST = 0.5
ADJUSTMENT_COST = 150.0
SPARE_COST = 0.5

WORDS = (
    "Ranked by a cost in points: 1 for each per cent of the power that both traps take, on either band;"
    " up to 10 a band as the wanted part fills the usable width (from three quarters of it on);"
    " 2 for each tenth of the voltage rating used beyond 60 %, 4 where no rating is known;"
    " 1 for 10 cm of winding and 1 for 20 cm of diameter; half a point for each capacitor beyond the first;"
    " 1.5 for each per cent of frequency that parts may be off and adjustment cannot mend;"
    " half a point when no capacitor is left over. Of each former and wire the best is shown."
)
"""The ranking in words, as it is shown."""


@dataclass(frozen=True, kw_only=True)
class Cost:
    """What makes a trap worse than another, in points; numbers or arrays."""

    loss: Any
    width: Any
    volts: Any
    size: Any
    pieces: Any
    adjustment: Any
    spare: Any

    @property
    def total(self) -> Any:
        """All of it together, in points."""
        return sum(getattr(self, f.name) for f in fields(self))


def cost(
    *,
    losses: Any,
    fillings: Any,
    volts_share: Any,
    rated: Any,
    length: Any,
    diameter: Any,
    pieces: Any,
    uncovered: Any,
    spare: Any,
) -> Cost:
    """Return what a trap costs; everything broadcasts.

    `losses` and `fillings` hold a value a band: the share of both traps, and the wanted part over the usable
    width (infinite above the SWR limit). `volts_share` is worst volts over rating, `uncovered` the part of
    the frequency that adjustment cannot mend.
    """
    beyond = VOLTS_COST * np.maximum(np.asarray(volts_share, float) - VOLTS_FROM, 0.0)
    return Cost(
        loss=100 * sum(losses),
        width=sum(WIDTH_COST * np.clip(np.asarray(f, float) - WIDTH_FROM, 0.0, 1.0) for f in fillings),
        volts=np.where(rated, beyond, UNRATED_COST),
        size=LENGTH_COST * length + DIAMETER_COST * diameter,
        pieces=PIECE_COST * np.maximum(np.asarray(pieces) - 1, 0),
        adjustment=ADJUSTMENT_COST * uncovered,
        spare=SPARE_COST * (np.asarray(spare) < 1),
    )


class Surface:
    """Loss, filling and volts of traps of one resonance over capacitance and loss, from a few outcomes."""

    def __init__(self, capacitance: np.ndarray, loss: np.ndarray, outcomes: list[list[Any]]) -> None:
        self._c, self._loss = np.log(capacitance), loss
        roles = list(outcomes[0][0].bands)
        self._tables = {
            name: [np.array([[pick(o.bands[r]) for o in row] for row in outcomes]) for r in roles]
            for name, pick in (
                ("loss", lambda b: b.loss / (1 - b.loss)),
                ("filling", lambda b: 10.0 if b.width is None else min(b.wanted / b.width, 10.0)),
                ("volts", lambda b: np.log(b.peak_voltage)),
            )
        }

    def at(self, capacitance: np.ndarray, loss: np.ndarray) -> tuple[list[np.ndarray], list[Any], np.ndarray]:
        """Return losses and fillings, one each a band, and the worst voltage, linear between the outcomes."""
        rows, down = _place(self._c, np.log(capacitance))
        columns, right = _place(self._loss, loss)

        def between(t: np.ndarray) -> np.ndarray:
            left = (1 - down) * t[rows, columns] + down * t[rows + 1, columns]
            return (1 - right) * left + right * (
                (1 - down) * t[rows, columns + 1] + down * t[rows + 1, columns + 1]
            )

        odds = [np.maximum(between(t), 0.0) for t in self._tables["loss"]]
        fillings = [between(t) for t in self._tables["filling"]]
        volts = np.exp(np.max([between(t) for t in self._tables["volts"]], axis=0))
        return [o / (1 + o) for o in odds], fillings, volts


def _place(nodes: np.ndarray, at: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the interval each value lies in, and how far along it."""
    index = np.clip(np.searchsorted(nodes, at) - 1, 0, nodes.size - 2)
    return index, (at - nodes[index]) / (nodes[index + 1] - nodes[index])
