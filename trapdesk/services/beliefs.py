"""What varies from one antenna to the next, how far and by which meaning, and trials drawn from that."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from ..design import Design, Shape
from ..doubts import SIGMAS, Meaning, farthest
from ..engine.ground import SOILS, UNKNOWN_SOIL_FROM, Ground, GroundKind
from ..engine.sampling import normal_probability, normal_quantile, uniform
from ..parts import Solenoid

COIL = {"given": 0.015, "solenoid": 0.005}
"""How far a coil's inductance may be off, by its kind: as made, and as computed. [1]"""
CAPACITOR = {"given": 0.05}
Q = {"given": 0.15, "solenoid": 1 / 3}
SAG = {Shape.FLAT: 0.4, Shape.VEE: 0.2}
"""Most a side sags, by shape. [m], an estimate, no source"""
TWO_THIRDS = 2 / 3
NAMED_SOIL = (2.0, 1.25)
"""Factors by which conductivity and permittivity of a named soil may be off. [1], an estimate, no source"""
STREAMS = 8
"""Streams of random numbers that each quantity has to itself."""
NORMAL = Meaning.THREE_SIGMA

CAUSES: dict[str, tuple[str, ...]] = {
    "capacitor": ("capacitor",),
    "coil": ("coil", "turns", "pitch", "former"),
    "self_capacitance": ("self_capacitance",),
    "q": ("q",),
    "tuning": ("tuning",),
    "sealing": ("sealing",),
    "temperature": ("temperature", "weather"),
    "rain": ("rain",),
    "lengths": ("marking_inner", "marking_end", "creep"),
    "fastening": ("fastening_inner", "fastening_end"),
    "height": ("height",),
    "sag": ("sag",),
    "soil": ("soil",),
    "coating": ("coating",),
    "site": ("site",),
    "aim": ("aim_upper", "aim_lower"),
}
"""The causes that are told apart, and the quantities each of them moves."""
QUANTITIES = tuple(name for names in CAUSES.values() for name in names)


@dataclass(frozen=True, kw_only=True)
class Belief:
    """One quantity that varies, about nothing by a size, or anywhere between `low` and `high`.

    Of a `pair`, one number for each trap or side, `alike` is the share of variance that both have in common.
    """

    size: float = 0.0
    meaning: Meaning = Meaning.LIMITS
    low: float = 0.0
    high: float = 0.0
    between: bool = False
    pair: bool = False
    alike: float = 0.0

    @property
    def ends(self) -> tuple[float, float]:
        """What is taken for the worst on both sides: the ends of a range, or the size as it is stated."""
        return (self.low, self.high) if self.between else (-self.size, self.size)

    @property
    def reach(self) -> float:
        """The farthest that is drawn."""
        return max(abs(self.low), abs(self.high)) if self.between else self.size * farthest(self.meaning)

    @property
    def active(self) -> bool:
        """Whether it varies at all."""
        return self.low != self.high if self.between else self.size > 0

    @property
    def is_normal(self) -> bool:
        """Whether values near the middle are the more likely."""
        return not self.between and self.meaning in SIGMAS

    def shaped(self, sigmas: np.ndarray | None, chances: np.ndarray | None) -> np.ndarray:
        """Return values from standard normal numbers, or from chances where all values are alike."""
        if self.is_normal:
            assert sigmas is not None
            bound = farthest(self.meaning)
            return self.size * np.clip(sigmas / SIGMAS[self.meaning], -bound, bound)
        if chances is None:
            chances = normal_probability(sigmas)
        if self.between:
            return self.low + (self.high - self.low) * chances
        return self.size * (2 * chances - 1)


Draws = Mapping[str, np.ndarray]
"""Values of every quantity: (trials,), or (trials, 2) of a pair."""


def beliefs(design: Design) -> dict[str, Belief]:
    """Return what varies in a design, by quantity; what does not apply to it is left out."""
    found = {name: belief for name, belief in _all(design) if belief.active}
    return {name: found[name] for name in QUANTITIES if name in found}


def _all(design: Design) -> Iterator[tuple[str, Belief]]:
    doubts, trap = design.doubts, design.antenna.trap

    def about(name: str, size: float | None = None, **more: object) -> Belief:
        meaning = Meaning(getattr(doubts, f"{name}_meaning"))
        if more.get("pair") and meaning is Meaning.MEASURED:
            more["alike"] = 0.0
        return Belief(size=getattr(doubts, name) if size is None else size, meaning=meaning, **more)  # type: ignore[arg-type]

    def both(low: float, high: float, **more: object) -> Belief:
        return Belief(low=low, high=high, between=True, **more)  # type: ignore[arg-type]

    pair = {"pair": True, "alike": doubts.alike}
    if trap is not None:
        wound = isinstance(trap.coil, Solenoid)
        size = COIL[trap.coil.kind] if doubts.coil is None else doubts.coil
        yield "coil", about("coil", size, pair=True, alike=1.0 if wound else doubts.alike)
        if wound:
            yield "turns", Belief(size=doubts.turns, **pair)
            yield "pitch", about("pitch", **pair)
            yield "former", about("former", **pair)
            yield "self_capacitance", about("self_capacitance", **pair)
        size = CAPACITOR[trap.capacitor.kind] if doubts.capacitor is None else doubts.capacitor
        yield "capacitor", about("capacitor", size, **pair)
        yield "q", about("q", Q[trap.coil.kind] if doubts.q is None else doubts.q, **pair)
        yield "tuning", about("tuning", **pair)
        yield "sealing", both(doubts.sealing_least, doubts.sealing_most, **pair)
        yield "rain", both(doubts.rain_least, doubts.rain_most, **pair)
        if doubts.coil_drift or doubts.capacitor_drift:
            yield "temperature", both(doubts.coldest, doubts.warmest)
            yield "weather", both(doubts.coldest, doubts.warmest)
    for wire in ("inner",) if trap is None else ("inner", "end"):
        yield f"marking_{wire}", about("marking")
        yield f"fastening_{wire}", about("fastening", pair=True)
    yield "creep", both(0.0, doubts.creep_most)
    ground = GroundKind(design.site.ground)
    if ground is not GroundKind.SPACE:
        yield "height", about("height")
        sag = SAG[Shape(design.site.shape)] if doubts.sag_most is None else doubts.sag_most
        yield "sag", both(0.0, sag)
    if ground is GroundKind.SOIL:
        yield "soil", about("soil")
    if design.antenna.wire.coating:
        yield "coating", about("coating")
    yield "site", about("site")
    for role, _ in design.bands.items():
        yield f"aim_{role}", about("aim")


def draw(varying: Mapping[str, Belief], seed: int, begin: int, count: int) -> dict[str, np.ndarray]:
    """Return trials `begin` to `begin + count`; the same for a seed however they are split."""
    columns: list[np.ndarray] = []
    for name, belief in varying.items():
        first = STREAMS * QUANTITIES.index(name)
        wanted = range(first, first + (3 if belief.pair else 1))
        columns += [uniform(seed, stream, begin, count) for stream in wanted]
    chances = np.array(columns).reshape(len(columns), count)
    sigmas = normal_quantile(chances) if chances.size else chances
    found, at = {}, 0
    for name, belief in varying.items():
        if not belief.pair:
            found[name] = belief.shaped(sigmas[at], chances[at])
            at += 1
            continue
        common, own = sigmas[at], sigmas[at + 1 : at + 3]
        mixed = math.sqrt(belief.alike) * common + math.sqrt(1 - belief.alike) * own
        found[name] = belief.shaped(mixed, None).T
        at += 3
    return found


def soil_at(ground: Ground, unknown: bool, place: float) -> Ground:
    """Return the soil at a place of its range: -1 the driest, 0 what is computed with, 1 the wettest."""
    found = []
    for i, name in enumerate(("conductivity", "permittivity")):
        middle = math.log(max(getattr(ground, name), 1e-9))
        step = math.log(NAMED_SOIL[i])
        low, high = middle - step, middle + step
        if unknown:
            low, high = (math.log(getattr(SOILS[soil], name)) for soil in UNKNOWN_SOIL_FROM)
        bend, slope = (low + high) / 2 - middle, (high - low) / 2
        found.append(math.exp(middle + slope * place + bend * place * place))
    return Ground(kind=ground.kind, conductivity=found[0], permittivity=max(found[1], 1.0))
