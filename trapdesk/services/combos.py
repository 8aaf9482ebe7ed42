"""Capacitors in ones, twos and threes: every combination of which a box holds enough for two equal traps."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations_with_replacement

import numpy as np

from ..design.box import Capacitor

TRAPS = 2
WAYS = ("{0}", "{0} + {1}", "{0} - {1}", "{0} + {1} + {2}", "{0} - {1} - {2}", "({0} - {1}) + {2}")
WAYS += ("({0} + {1}) - {2}",)
"""How the pieces of one trap are joined: + side by side (parallel), - one after the other (series)."""
PIECES = (1, 2, 2, 3, 3, 3, 3)


@dataclass(frozen=True, kw_only=True)
class Combos:
    """Combinations, arrays (n,), rows of `members` (n, 3) being places in the list of kinds or -1.

    `loss` is 1/Q, `tolerance` the worst case, `voltage` what all of it stands (infinite where a rating is not
    known, and `rated` says so), `spare` how many pieces are left over of the kind that runs shortest.
    """

    way: np.ndarray
    members: np.ndarray
    capacitance: np.ndarray
    loss: np.ndarray
    tolerance: np.ndarray
    voltage: np.ndarray
    rated: np.ndarray
    spare: np.ndarray

    def __len__(self) -> int:
        """Return how many there are."""
        return self.way.size

    def take(self, which: np.ndarray) -> Combos:
        """Return some of them."""
        return Combos(**{name: array[which] for name, array in vars(self).items()})


@dataclass(frozen=True, kw_only=True)
class _Part:
    """Two-terminal parts, arrays: what both ways of joining keep track of."""

    c: np.ndarray
    loss: np.ndarray
    tolerance: np.ndarray
    voltage: np.ndarray

    def beside(self, other: _Part) -> _Part:
        """Return both in parallel: charge adds."""
        c = self.c + other.c
        a, b = self.c / c, other.c / c
        return self._mixed(other, c, a, b, np.minimum(self.voltage, other.voltage))

    def after(self, other: _Part) -> _Part:
        """Return both in series: voltage divides by the capacitances."""
        c = self.c * other.c / (self.c + other.c)
        a, b = c / self.c, c / other.c
        return self._mixed(other, c, a, b, np.minimum(self.voltage / a, other.voltage / b))

    def _mixed(self, other: _Part, c: np.ndarray, a: np.ndarray, b: np.ndarray, voltage: np.ndarray) -> _Part:
        return _Part(
            c=c,
            loss=a * self.loss + b * other.loss,
            tolerance=a * self.tolerance + b * other.tolerance,
            voltage=voltage,
        )


def combos(kinds: Sequence[Capacitor], low: float, high: float, most: int = 3) -> Combos:
    """Return every combination of up to three pieces from `low` to `high` farads that can be had twice."""
    held = np.array([int(k.count) for k in kinds])
    usable = np.flatnonzero(held >= TRAPS)
    found = list(_joined(kinds, usable, most)) if usable.size else []
    if not found:
        none = np.zeros(0)
        return Combos(
            way=none.astype(int), members=np.zeros((0, 3), int), capacitance=none, loss=none,
            tolerance=none, voltage=none, rated=none.astype(bool), spare=none.astype(int),
        )  # fmt: skip
    way = np.concatenate([np.full(len(m), w) for w, m, _ in found])
    members = np.concatenate([m for _, m, _ in found])
    parts = {
        n: np.concatenate([getattr(p, n) for *_, p in found]) for n in ("c", "loss", "tolerance", "voltage")
    }
    need = (members[:, :, None] == members[:, None, :]).sum(2) * TRAPS
    left = np.where(members >= 0, held[members] - need, np.iinfo(int).max).min(1)
    known = np.array([k.voltage is not None for k in kinds])
    rated = np.where(members >= 0, known[members], True).all(1)
    keep = np.flatnonzero((left >= 0) & (parts["c"] >= low) & (parts["c"] <= high))
    return Combos(
        way=way,
        members=members,
        capacitance=parts["c"],
        loss=parts["loss"],
        tolerance=parts["tolerance"],
        voltage=parts["voltage"],
        rated=rated,
        spare=left,
    ).take(keep)


def _joined(
    kinds: Sequence[Capacitor], usable: np.ndarray, most: int
) -> Iterator[tuple[int, np.ndarray, _Part]]:
    """Yield each way of joining with its members and what they make."""
    values = [(k.capacitance, 1 / k.q, k.tolerance, k.voltage or np.inf) for k in kinds]
    table = np.array(values, float)

    def part(index: np.ndarray) -> _Part:
        return _Part(**dict(zip(("c", "loss", "tolerance", "voltage"), table[index].T, strict=True)))

    def padded(members: np.ndarray) -> np.ndarray:
        return np.pad(members, ((0, 0), (0, 3 - members.shape[1])), constant_values=-1)

    one = usable[:, None]
    yield 0, padded(one), part(usable)
    if most < 2:
        return
    two = usable[np.array(list(combinations_with_replacement(range(usable.size), 2)))]
    a, b = part(two[:, 0]), part(two[:, 1])
    yield 1, padded(two), a.beside(b)
    yield 2, padded(two), a.after(b)
    if most < 3:
        return
    three = usable[np.array(list(combinations_with_replacement(range(usable.size), 3)))]
    a, b, c = (part(three[:, i]) for i in range(3))
    yield 3, three, a.beside(b).beside(c)
    yield 4, three, a.after(b).after(c)
    mixed = np.column_stack([np.repeat(two, usable.size, axis=0), np.tile(usable, len(two))])
    a, b, c = (part(mixed[:, i]) for i in range(3))
    yield 5, mixed, a.after(b).beside(c)
    yield 6, mixed, a.beside(b).after(c)
