"""Capacitors in ones, twos and threes: every combination of which a box holds enough for two equal traps."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations_with_replacement

import numpy as np

from ...design.box import Cable, Capacitor
from ...engine.capacitors import stub_end_voltage, stub_impedance, stub_length
from ..trap.capacitors import cable_rating, line_of
from .parts import stub_part

TRAPS = 2
WAYS = ("{0}", "{0} + {1}", "{0} - {1}", "{0} + {1} + {2}", "{0} - {1} - {2}", "({0} - {1}) + {2}")
WAYS += ("({0} + {1}) - {2}",)
"""How the pieces of one trap are joined: + side by side (parallel), - one after the other (series)."""
PIECES = (1, 2, 2, 3, 3, 3, 3)
STUB_STEP = 0.02
"""Between two stubs that are tried, in the logarithm of their capacitance."""
STUB_DOUBT = 0.05
"""How far the capacitance of a metre of cable may be off its constants. Common practice, no source."""
FREE = 1
"""Pieces left over of what does not come in pieces."""


@dataclass(frozen=True, kw_only=True)
class Combos:
    """Combinations, arrays (n,), rows of `members` (n, 3) being places in the list of kinds or -1.

    `loss` is 1/Q, `tolerance` the worst case, `voltage` what all of it stands (infinite where a rating is not
    known, and `rated` says so), `spare` how many pieces are left over of the kind that runs shortest. A stub
    has no members: `stub` is its place in the list of cables, -1 where none is, `stub_length` how long it is.
    """

    way: np.ndarray
    members: np.ndarray
    capacitance: np.ndarray
    loss: np.ndarray
    tolerance: np.ndarray
    voltage: np.ndarray
    rated: np.ndarray
    spare: np.ndarray
    stub: np.ndarray
    stub_length: np.ndarray

    @property
    def pieces(self) -> np.ndarray:
        """How many pieces each is made of, stubs too."""
        return np.array(PIECES)[self.way]

    def __len__(self) -> int:
        """Return how many there are."""
        return self.way.size

    def take(self, which: np.ndarray) -> Combos:
        """Return some of them."""
        return Combos(**{name: array[which] for name, array in vars(self).items()})


NO_COMBOS = Combos(
    way=np.zeros(0, np.int8),
    members=np.zeros((0, 3), np.int16),
    capacitance=np.zeros(0),
    loss=np.zeros(0),
    tolerance=np.zeros(0),
    voltage=np.zeros(0),
    rated=np.zeros(0, bool),
    spare=np.zeros(0, np.int32),
    stub=np.zeros(0, np.int8),
    stub_length=np.zeros(0),
)


def together(several: Sequence[Combos]) -> Combos:
    """Return all of several lots, by rising capacitance."""
    every = _in_one(several)
    return every.take(np.argsort(every.capacitance, kind="stable"))


def _in_one(several: Sequence[Combos]) -> Combos:
    lots = [vars(lot) for lot in (NO_COMBOS, *several)]
    return Combos(**{name: np.concatenate([lot[name] for lot in lots]) for name in lots[0]})


@dataclass(frozen=True, kw_only=True)
class _Part:
    """Two-terminal parts, arrays: what both ways of joining keep track of."""

    c: np.ndarray
    loss: np.ndarray
    tolerance: np.ndarray
    voltage: np.ndarray

    def take(self, which: np.ndarray) -> _Part:
        """Return some of them."""
        return _Part(**{name: array[which] for name, array in vars(self).items()})

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
    known = np.array([k.voltage is not None for k in kinds])
    usable = np.flatnonzero(held >= TRAPS).astype(np.int16)
    lots = []
    for joined_as, which, part in _joined(kinds, usable, most) if usable.size else ():
        inside = np.flatnonzero((part.c >= low) & (part.c <= high))
        spare = _left_over(which[inside], held)
        kept = inside[spare >= 0]
        of, made = which[kept], part.take(kept)
        lots.append(
            Combos(
                way=np.full(kept.size, joined_as, np.int8),
                members=of,
                capacitance=made.c,
                loss=made.loss,
                tolerance=made.tolerance,
                voltage=made.voltage,
                rated=(known[of] | (of < 0)).all(axis=1),
                spare=spare[spare >= 0],
                stub=np.full(kept.size, -1, np.int8),
                stub_length=np.zeros(kept.size),
            )
        )
    return _in_one(lots)


def _left_over(members: np.ndarray, held: np.ndarray) -> np.ndarray:
    """Return how many are left of the kind that runs shortest once both traps have theirs, (n,)."""
    left = np.full(len(members), np.iinfo(np.int32).max, np.int32)
    for own in members.T:
        # Of a kind that is there twice or thrice so many more are wanted; an empty place wants nothing.
        wanted = TRAPS * sum((own == other).astype(np.int32) for other in members.T)
        left = np.minimum(left, np.where(own >= 0, held[own] - wanted, left))
    return left


def stubs(cables: Sequence[Cable], frequency: float, low: float, high: float) -> Combos:
    """Return stubs of each cable from `low` to `high` farads, as far as there is cable for two.

    They are cut long, by what they and the coil may be off, and snipped: any capacitance can be had.
    """
    count = max(2, math.ceil(math.log(high / low) / STUB_STEP))
    wanted, found = np.geomspace(low, high, count), []
    for place, cable in enumerate(cables):
        part = stub_part(cable)
        line = line_of(part)
        length = stub_length(frequency, line, 1 / (2 * np.pi * frequency * wanted))
        z = stub_impedance(frequency, line, length)
        rating = cable_rating(part)
        none = np.zeros(count)
        some = Combos(
            way=np.zeros(count, np.int8),
            members=np.full((count, 3), -1, np.int16),
            capacitance=wanted,
            loss=z.real / -z.imag,
            tolerance=none + STUB_DOUBT,
            voltage=(math.inf if rating is None else rating) / stub_end_voltage(frequency, line, length),
            rated=np.full(count, rating is not None),
            spare=np.full(count, FREE, np.int32),
            stub=np.full(count, place, np.int8),
            stub_length=length,
        )
        found.append(some.take(np.flatnonzero(TRAPS * length <= cable.length)))
    return together(found)


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
