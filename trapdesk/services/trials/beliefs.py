"""What varies from one antenna to the next, how far and by which meaning, and trials drawn from that."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from ...design.design import Design, Shape
from ...design.doubts import SIGMAS, Doubts, Meaning, farthest
from ...design.measured_part import Measured
from ...design.parts import GivenCoil, Solenoid
from ...engine.ground import Ground
from ...engine.sampling import normal_probability, normal_quantile, uniform
from ...engine.soils import SOILS, UNKNOWN_SOIL_FROM, GroundKind
from ..trap.built import BuiltTrap
from ..trap.capacitors import UNSAID_TOLERANCE, tolerance_of
from ..trap.coils import COIL_DOUBT
from ..trap.measured_trap import doubts_of

WOUND = 0.005
"""How far the inductance of a coil wound just as computed may be off. [1]"""
Q = 0.15
SEALING, RAIN = (0.4, 1.6), (2 / 3, 4 / 3)
"""Least and most of what sealing and rain do, over what the trap's weather says. [1]"""
SAG = {Shape.FLAT: 0.4, Shape.VEE: 0.2}
"""Most a side sags, by shape. [m], an estimate, no source"""
TWO_THIRDS = 2 / 3
NAMED_SOIL = (2.0, 1.25)
"""Factors by which conductivity and permittivity of a named soil may be off. [1], an estimate, no source"""
STREAMS = 8
"""Streams of random numbers that each quantity has to itself."""

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
    "ratio": ("ratio",),
}
"""The causes that are told apart, and the quantities each of them moves."""
QUANTITIES = tuple(name for names in CAUSES.values() for name in names)


@dataclass(frozen=True, kw_only=True)
class Belief:
    """One quantity that varies, about nothing by a size, or anywhere between `low` and `high`.

    Of a `pair`, one number for each trap or side, `alike` is the share of variance that both have in common.
    `of_logarithm` has the size be that of a logarithm, as a measured value has it: no value reaches nothing.
    """

    size: float = 0.0
    meaning: Meaning = Meaning.LIMITS
    low: float = 0.0
    high: float = 0.0
    between: bool = False
    pair: bool = False
    alike: float = 0.0
    of_logarithm: bool = False

    @property
    def ends(self) -> tuple[float, float]:
        """What is taken for the worst on both sides: the ends of a range, or the size as it is stated."""
        if self.of_logarithm:
            return math.expm1(-self.size), math.expm1(self.size)
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

    def mixed(self, common: np.ndarray, own: np.ndarray) -> np.ndarray:
        """Return standard normal numbers of a pair from what both have in common and what each has."""
        return math.sqrt(self.alike) * common + math.sqrt(1 - self.alike) * own

    def shaped(self, sigmas: np.ndarray | None, chances: np.ndarray | None) -> np.ndarray:
        """Return values from standard normal numbers, or from chances where all values are alike."""
        if self.is_normal:
            assert sigmas is not None
            bound = farthest(self.meaning)
            found = self.size * np.clip(sigmas / SIGMAS[self.meaning], -bound, bound)
            return np.expm1(found) if self.of_logarithm else found
        if chances is None:
            chances = normal_probability(sigmas)
        if self.between:
            return self.low + (self.high - self.low) * chances
        return self.size * (2 * chances - 1)


Draws = Mapping[str, np.ndarray]
"""Values of every quantity: (trials,), or (trials, 2) of a pair."""


def beliefs(design: Design, trap: BuiltTrap | None) -> dict[str, Belief]:
    """Return what varies in a design, by quantity; what does not apply to it is left out."""
    found = {name: belief for name, belief in _all(design, trap) if belief.active}
    return {name: found[name] for name in QUANTITIES if name in found}


def _all(design: Design, trap: BuiltTrap | None) -> Iterator[tuple[str, Belief]]:
    if trap is not None:
        yield from _of_trap(design, trap)
    doubts = design.doubts

    def about(name: str, **more: Any) -> Belief:
        return Belief(size=getattr(doubts, name), meaning=Meaning(getattr(doubts, f"{name}_meaning")), **more)

    for wire in ("inner",) if trap is None else ("inner", "end"):
        yield f"marking_{wire}", about("marking")
        yield f"fastening_{wire}", about("fastening", pair=True, alike=0.0)
    yield "creep", _between(0.0, doubts.creep_most)
    ground = GroundKind(design.site.ground)
    if ground is not GroundKind.SPACE:
        yield "height", about("height")
        sag = SAG[Shape(design.site.shape)] if doubts.sag_most is None else doubts.sag_most
        yield "sag", _between(0.0, sag)
    if ground is GroundKind.SOIL:
        yield "soil", about("soil")
    if design.antenna.wire.coating:
        yield "coating", about("coating")
    yield "site", about("site")
    for role, _ in design.bands.items():
        yield f"aim_{role}", about("aim")


def _between(low: float, high: float, **more: Any) -> Belief:
    return Belief(low=low, high=high, between=True, **more)


def _of_trap(design: Design, trap: BuiltTrap) -> Iterator[tuple[str, Belief]]:
    doubts, part = design.doubts, design.antenna.trap
    assert part is not None

    def about(name: str, size: float, alike: float = doubts.alike) -> Belief:
        meaning = Meaning(getattr(doubts, f"{name}_meaning"))
        # What was measured of one part says nothing of the other.
        alike = 0.0 if meaning is Meaning.MEASURED else alike
        return Belief(size=size, meaning=meaning, pair=True, alike=alike)

    pair = {"pair": True, "alike": doubts.alike}
    known = dict(_as_measured(part.measured, trap))
    yield from known.items()
    for name, belief in _as_built(design, trap, about, pair):
        if name not in known:
            yield name, belief
    yield "tuning", about("tuning", doubts.tuning)
    said = part.weather
    for name, shift, factors in (("sealing", said.closing, SEALING), ("rain", said.rain_shift, RAIN)):
        ends = [getattr(doubts, f"{name}_{end}") for end in ("least", "most")]
        low, high = (f * shift if end is None else end for end, f in zip(ends, factors, strict=True))
        yield name, _between(min(low, high), high, **pair)
    for name in ("temperature", "weather"):
        cold, hot = (doubts.temperature * (at - said.built_at) for at in (said.in_cold, said.in_sun))
        yield name, _between(cold, hot)


def _as_measured(measured: Measured | None, trap: BuiltTrap) -> Iterator[tuple[str, Belief]]:
    """Yield what a measured trap leaves in doubt, and with a size of 0 what no longer is."""
    if measured is None:
        return

    def one_sigma(size: float) -> Belief:
        return Belief(size=size, meaning=Meaning.MEASURED, pair=True, alike=0.0, of_logarithm=True)

    settled = one_sigma(0.0)
    left = doubts_of(measured)
    if left.coil is not None:
        yield "coil", one_sigma(left.coil)
        yield from ((name, settled) for name in ("turns", "pitch", "former"))
    if left.capacitor is not None:
        # The size is that of the fitted part, the doubt that of all the capacitance.
        yield "capacitor", one_sigma(left.capacitor * trap.capacitance / trap.fitted)
        yield "self_capacitance", settled
    yield "ratio", one_sigma(left.ratio)
    if measured.q is not None:
        yield "q", one_sigma(measured.q_doubt / measured.q)


def _as_built(
    design: Design, trap: BuiltTrap, about: Callable[..., Belief], pair: dict[str, Any]
) -> Iterator[tuple[str, Belief]]:
    """Yield what may turn out otherwise in a trap that nobody has measured."""
    doubts, coil = design.doubts, design.antenna.trap.coil
    if doubts.coil is not None:
        size = doubts.coil
    elif isinstance(coil, GivenCoil):
        size = COIL_DOUBT
    else:
        size = WOUND if isinstance(coil, Solenoid) else max(trap.doubt, WOUND)
    yield "coil", about("coil", size, doubts.alike if isinstance(coil, GivenCoil) else 1.0)
    if trap.wound is not None:
        # Cable is cut to any length; wire ends where a lead can leave.
        if trap.cable is None:
            yield "turns", Belief(size=doubts.turns, **pair)
        if isinstance(coil, Solenoid):
            yield "pitch", about("pitch", doubts.pitch)
            yield "former", about("former", doubts.former)
        if trap.own_capacitance:
            yield "self_capacitance", about("self_capacitance", doubts.self_capacitance)
    if trap.cable is not None and doubts.capacitor is None:
        # The doubt of a cable's turns is that of the whole trap: there is no other capacitor.
        yield from _q(doubts, trap, about)
        return
    printed = None
    if doubts.capacitor is None and trap.capacitor is not None:
        printed = tolerance_of(trap.capacitor, trap.resonance)
    if printed is not None and printed[0] != printed[1]:
        yield "capacitor", _between(-printed[0], printed[1], **pair)
    else:
        size = printed[0] if printed else UNSAID_TOLERANCE if doubts.capacitor is None else doubts.capacitor
        yield "capacitor", about("capacitor", size)
    yield from _q(doubts, trap, about)


def _q(doubts: Doubts, trap: BuiltTrap, about: Callable[..., Belief]) -> Iterator[tuple[str, Belief]]:
    reached = max(abs(factor - 1) for factor in trap.q_factors) or Q
    yield "q", about("q", min(reached, 0.9) if doubts.q is None else doubts.q)


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
        mixed = belief.mixed(common, own)
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
