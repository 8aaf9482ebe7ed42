"""How traps are ranked: one cost in per cent, made of parts that can each be said in words."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.polynomial.chebyshev import chebvander

WIDTH_FROM, WIDTH_COST = 0.75, 10.0
VOLTS_FROM, VOLTS_COST, UNRATED_COST = 0.6, 20.0, 4.0
LENGTH_COST, DIAMETER_COST = 10.0, 5.0
PIECE_COST = 0.5
ADJUSTMENT_COST = 150.0
SPARE_COST = 0.5
STUB_COST = 2.0

WORDS = (
    "Ranked by a cost in points: 1 for each per cent of the power that both traps take, on either band;"
    " up to 10 a band as the wanted part fills the usable width (from three quarters of it on);"
    " 2 for each tenth of the voltage rating used beyond 60 %, 4 where no rating is known;"
    " 1 for 10 cm of winding, 1 for 20 cm of diameter, 1 for 50 cm of stub; half a point for each capacitor"
    " beyond the first;"
    " 1.5 for each per cent of frequency that parts may be off and adjustment cannot mend;"
    " half a point when no capacitor is left over. Of each former and wire the best is shown,"
    " with capacitors and with a stub of cable."
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
    stub: Any = 0.0,
) -> Cost:
    """Return what a trap costs; everything broadcasts.

    `losses` and `fillings` hold a value a band: the share of both traps, and the wanted part over the usable
    width (infinite above the SWR limit). `volts_share` is worst volts over rating, `uncovered` the part of
    the frequency that adjustment cannot mend, `stub` how much cable hangs on it [m].
    """
    beyond = VOLTS_COST * np.maximum(np.asarray(volts_share, float) - VOLTS_FROM, 0.0)
    return Cost(
        loss=100 * sum(losses),
        width=sum(WIDTH_COST * np.clip(np.asarray(f, float) - WIDTH_FROM, 0.0, 1.0) for f in fillings),
        volts=np.where(rated, beyond, UNRATED_COST),
        size=LENGTH_COST * length + DIAMETER_COST * diameter + STUB_COST * np.asarray(stub),
        pieces=PIECE_COST * np.maximum(np.asarray(pieces) - 1, 0),
        adjustment=ADJUSTMENT_COST * uncovered,
        spare=SPARE_COST * (np.asarray(spare) < 1),
    )


class Surface:
    """Loss, filling and volts of traps of one resonance over capacitance and coil loss, from a few outcomes.

    A capacitor's loss counts on each band as the coil's, but by the square of how far below resonance it is:
    so much less of the current goes through it.
    """

    def __init__(
        self, capacitance: np.ndarray, loss: np.ndarray, outcomes: list[list[Any]], places: dict[str, float]
    ) -> None:
        """Take outcomes of every capacitance and coil loss; `places` are the aims over the resonance."""
        self._c, self._loss = np.log(capacitance), loss
        self._weights = [places[role] ** 2 for role in outcomes[0][0].bands]
        self._wanted = [band.wanted for band in outcomes[0][0].bands.values()]
        odds, volts, widths = [], [], []
        for role in outcomes[0][0].bands:
            table = [[o.bands[role] for o in row] for row in outcomes]

            def of(pick: Callable[[Any], float], table: list[list[Any]] = table) -> np.ndarray:
                return np.array([[pick(b) for b in row] for row in table])

            odds.append(np.log(of(lambda b: b.loss / (1 - b.loss)) / loss))
            volts.append(np.log(of(lambda b: b.peak_voltage)))
            widths.append(of(lambda b: b.width or 0.0))
        # Where some have no width at all a polynomial would swing: there it goes straight.
        self._is_straight = [not width.all() for width in widths]
        self._odds, self._volts, self._widths = odds, volts, widths
        self._middle, self._half = self._c.mean(), np.ptp(self._c) / 2
        self._solved = np.linalg.inv(chebvander((self._c - self._middle) / self._half, self._c.size - 1))

    def at(
        self, capacitance: np.ndarray, coil: np.ndarray, capacitor: np.ndarray
    ) -> tuple[list[np.ndarray], list[np.ndarray], np.ndarray]:
        """Return losses and fillings, one each a band, and the worst voltage; both losses as 1/Q."""
        c = np.log(capacitance)
        across = chebvander((c - self._middle) / self._half, self._c.size - 1) @ self._solved
        straight = _straight(self._c, c) if any(self._is_straight) else across
        losses, fillings, volts = [], [], []
        for n, (weight, wanted) in enumerate(zip(self._weights, self._wanted, strict=True)):
            loss = np.broadcast_to(coil + weight * capacitor, c.shape)
            column, part = _place(self._loss, loss)
            rows = np.arange(column.size)

            def between(
                table: np.ndarray,
                weights: np.ndarray = across,
                rows: np.ndarray = rows,
                column: np.ndarray = column,
                part: np.ndarray = part,
            ) -> np.ndarray:
                found = weights @ table
                return (1 - part) * found[rows, column] + part * found[rows, column + 1]

            odd = np.exp(between(self._odds[n])) * loss
            losses.append(odd / (1 + odd))
            volts.append(between(self._volts[n]))
            wide = between(self._widths[n], straight if self._is_straight[n] else across)
            fillings.append(wanted / np.maximum(wide, 0.1 * wanted))
        return losses, fillings, np.exp(np.max(volts, axis=0))


def _straight(nodes: np.ndarray, at: np.ndarray) -> np.ndarray:
    """Return the weights (at, nodes) of values that go straight from node to node."""
    index, part = _place(nodes, at)
    weights = np.zeros((index.size, nodes.size))
    weights[np.arange(index.size), index] = 1 - part
    weights[np.arange(index.size), index + 1] = part
    return weights


def _place(nodes: np.ndarray, at: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the interval each value lies in, and how far along it."""
    index = np.clip(np.searchsorted(nodes, at) - 1, 0, nodes.size - 2)
    return index, (at - nodes[index]) / (nodes[index + 1] - nodes[index])
