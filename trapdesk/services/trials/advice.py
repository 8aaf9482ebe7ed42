"""What would help most: single improvements held against each other, and designs chosen for their yield."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np

from ...design.design import Design, get, with_value
from ...design.doubts import Meaning
from ...design.fields import SOLVE
from ...design.parts import GivenCapacitor
from ...design.rules import check, trap_unknowns
from ...engine.reflection import squared_reflection
from ...errors import NoAnswer
from ..antenna.figures import Figures
from ..antenna.solve import solve
from ..antenna.trap_findings import TRAP_VOLTAGE_MARGIN
from ..trap.built import build
from .beliefs import Belief
from .ensemble import Ensemble
from .stages import run_stage
from .tolerance import BLOCK, SEED, Yield, allowances, stage_yield
from .traps import AS_CUT, STAGES, Stage

TRIALS, FEWEST = 2000, 200
"""Trials improvements are held against each other in, and the fewest in which that tells anything."""
SEARCH_TRIALS = 400
TIGHT_CAPACITOR = 0.01
"""What a good capacitor is bought to. [1]"""
METER = 0.01
"""How well a meter tells an inductance or a capacitance. [1], common practice, no source"""
WOUND_PARTS = ("turns", "pitch", "former")
ROUNDS = 5
RESONANCE_STEP, RATIO_STEP = 0.004, 0.12
"""First steps of the search in trap resonance and in its capacitance, both relative."""
AIM_STEP = 0.15
"""First step of an aim, in parts of the wanted part."""
SOFTNESS = 0.03
"""Width over which a margin counts gradually, so that a search sees where more would come from. [1]"""
FARTHEST = (0.04, 0.5)
"""How far the search may take the trap's resonance, and the logarithm of its capacitance."""


@dataclass(frozen=True, kw_only=True)
class Improvement:
    """One improvement by itself: what the yield becomes, in the same trials."""

    code: str
    within: Yield
    gain: float


@dataclass(frozen=True, kw_only=True)
class Improvements:
    """Improvements of an antenna built and hung as cut, the best first, and what goes best with the first."""

    base: Yield
    steps: tuple[Improvement, ...]
    then: tuple[Improvement, ...]


@dataclass(frozen=True)
class _Plan:
    """An antenna on the way: what is believed, and what is done before it is used."""

    stage: Stage
    varying: Mapping[str, Belief]


def _tighter(plan: _Plan) -> _Plan | None:
    belief = plan.varying.get("capacitor")
    if belief is None or belief.of_logarithm or belief.reach <= TIGHT_CAPACITOR:
        return None
    tight = replace(belief, size=TIGHT_CAPACITOR, between=False)
    return replace(plan, varying={**plan.varying, "capacitor": tight})


def _matched(plan: _Plan) -> _Plan | None:
    """Measure coils and capacitors, put like to like, and trim the coils to what was measured."""
    coil = plan.varying.get("coil")
    measured = coil is not None and coil.of_logarithm
    if plan.stage.tuned or measured or "capacitor" not in plan.varying:
        return None
    known = Belief(size=METER, meaning=Meaning.TWO_SIGMA, pair=True, alike=1.0)
    rest = {name: belief for name, belief in plan.varying.items() if name not in WOUND_PARTS}
    return replace(plan, varying={**rest, "capacitor": known, "coil": known})


def _tuned(plan: _Plan) -> _Plan | None:
    return None if plan.stage.tuned else replace(plan, stage=replace(plan.stage, tuned=True, sealed=True))


def _sealed_first(plan: _Plan) -> _Plan | None:
    if plan.stage.sealed_first or "sealing" not in plan.varying:
        return None
    return replace(plan, stage=replace(plan.stage, tuned=True, sealed=True, sealed_first=True))


def _aimed(plan: _Plan) -> _Plan | None:
    return None if plan.stage.aimed else replace(plan, stage=replace(plan.stage, aimed=True))


IMPROVEMENTS: dict[str, tuple[bool, Callable[[_Plan], _Plan | None]]] = {
    "tighter_capacitor": (True, _tighter),
    "match_traps": (True, _matched),
    "tune_traps": (True, _tuned),
    "seal_then_tune": (True, _sealed_first),
    "bring_to_aim": (False, _aimed),
}
"""Improvements: whether they need a trap, and what they make of a plan; None where there is nothing to do."""


def improvements(ensemble: Ensemble, *, trials: int = TRIALS, seed: int = SEED) -> Improvements:
    """Return what each improvement buys, for the antenna as cut."""
    start = _Plan(AS_CUT, ensemble.varying)

    def worth(plan: _Plan) -> Yield:
        return stage_yield(ensemble.with_beliefs(plan.varying), plan.stage, trials, seed)

    def steps(plan: _Plan, base: Yield) -> Iterator[tuple[Improvement, _Plan]]:
        for code, (for_traps, improve) in IMPROVEMENTS.items():
            if for_traps and ensemble.trap is None:
                continue
            better = improve(plan)
            if better is not None:
                within = worth(better)
                yield Improvement(code=code, within=within, gain=within.share - base.share), better

    base = worth(start)
    first = sorted(steps(start, base), key=lambda pair: -pair[0].gain)
    then: list[tuple[Improvement, _Plan]] = []
    if first and first[0][0].within.share < 1.0:
        then = sorted(steps(first[0][1], first[0][0].within), key=lambda pair: -pair[0].gain)
    return Improvements(base=base, steps=tuple(s for s, _ in first), then=tuple(s for s, _ in then))


@dataclass(frozen=True, kw_only=True)
class Change:
    """One value of a design chosen for its yield."""

    key: str
    before: float
    after: float


@dataclass(frozen=True, kw_only=True)
class ForYield:
    """A design chosen for the largest yield at a stage: what was changed, and what that bought.

    Both yields are those of the designs solved anew, in trials the search never saw. `prices` are, by band,
    the trap's volts [V] and both traps' share of the power before and after.
    """

    design: Design
    stage: str
    changes: tuple[Change, ...]
    before: Yield
    after: Yield
    prices: Mapping[str, tuple[tuple[float, float], tuple[float, float]]]


class _Search:
    """Designs near one, judged by the yield in the same few trials."""

    def __init__(self, figures: Figures, stage: Stage, seed: int) -> None:
        self.figures, self.stage, self.seed = figures, stage, seed
        self.ensemble = Ensemble(figures)
        self.draws = self.ensemble.draws(seed, 0, SEARCH_TRIALS)
        self.limit = float(squared_reflection(figures.design.station.swr_limit))
        design, trap = figures.design, self.ensemble.trap
        # No gain in SWR is worth a capacitor that breaks: volts may rise to a margin below its rating.
        rating = getattr(design.antenna.trap.capacitor, "voltage", None) if trap is not None else None
        present = [b.worst_stress.peak_voltage for b in figures.bands.values() if b.worst_stress]
        self.most_volts = max([TRAP_VOLTAGE_MARGIN * rating if rating else math.inf, *present])
        self.keys: dict[str, tuple[float, float]] = {}
        if trap is not None:
            self.keys["antenna.trap.resonance"] = (trap.resonance, RESONANCE_STEP * trap.resonance)
            capacitor = design.antenna.trap.capacitor
            if isinstance(capacitor, GivenCapacitor):
                self.keys["antenna.trap.capacitor.capacitance"] = (trap.fitted, RATIO_STEP * trap.fitted)
        for role in self.ensemble.unknown_wires.values():
            band = dict(design.bands.items())[role]
            low, high = band.wanted_edges
            self.keys[f"bands.{role}.aim"] = (band.target, AIM_STEP * (high - low))

    def design_at(self, values: Mapping[str, float]) -> Design:
        """Return the design with its values chosen; the coil is solved where nothing else of the trap is."""
        design = self.figures.design
        for key, value in values.items():
            design = with_value(design, key, value)
        trap = design.antenna.trap
        if trap is not None and not any(get(design, key) is SOLVE for key in trap_unknowns(trap)):
            key = next(key for key in trap_unknowns(trap) if key.startswith("antenna.trap.coil."))
            design = with_value(design, key, SOLVE)
        return design

    def worth(self, values: Mapping[str, float]) -> float:
        """Return the share of trials within the limit, counted gradually; least for what cannot be built."""
        design = self.design_at(values)
        if check(design):
            return -math.inf
        try:
            trap = build(design.antenna.trap) if design.antenna.trap is not None else None
        except NoAnswer:
            return -math.inf
        ensemble = self.ensemble.with_trap(design, trap)
        still = ensemble.nominal(1)
        change = ensemble.to_aim({**still, **_no_reading(still)}, replace(AS_CUT, aimed=True), 1)
        if any(not np.isfinite(value).all() for value in change.values()):
            return -math.inf
        moved = {name: value[0] for name, value in change.items()}
        if self.stage.aimed:
            free = ensemble.to_aim(self.draws, _dry_of(self.stage), SEARCH_TRIALS)
            needs = {name: value - moved[name] for name, value in free.items()}
            extra = allowances(ensemble, needs, design.doubts.risk)
            most = {name: moved[name] + extra[name].length for name in extra}
            outcomes, _ = run_stage(ensemble, (self.stage,), self.draws, SEARCH_TRIALS, most)
        else:
            outcomes, _ = run_stage(ensemble, (self.stage,), self.draws, SEARCH_TRIALS, None, None, moved)
        volts = max(float(np.median(outcomes[self.stage.name][role].volts)) for role in ensemble.roles)
        if volts > self.most_volts:
            return -math.inf
        worst = np.array([outcomes[self.stage.name][role].worst for role in ensemble.roles])
        margin = 1 - np.sqrt(worst.max(axis=0) / self.limit)
        return float((1 / (1 + np.exp(-np.clip(margin / SOFTNESS, -50, 50)))).mean())

    def best(self) -> dict[str, float]:
        """Return the values of largest worth, sought one after the other, the steps halved every round."""
        values = {key: start for key, (start, _) in self.keys.items()}
        found = self.worth(values)
        steps = {key: step for key, (_, step) in self.keys.items()}
        for _ in range(ROUNDS):
            for key in values:
                for sign in (1.0, -1.0):
                    moved = self._bounded(key, values[key] + sign * steps[key])
                    worth = self.worth({**values, key: moved})
                    if worth > found:
                        # As long as it gets better, on in the same direction.
                        while worth > found:
                            found, values = worth, {**values, key: moved}
                            moved = self._bounded(key, moved + sign * steps[key])
                            worth = self.worth({**values, key: moved})
                        break
            steps = {key: step / 2 for key, step in steps.items()}
        return values

    def _bounded(self, key: str, value: float) -> float:
        start, _ = self.keys[key]
        if key.endswith(".aim"):
            low, high = dict(self.figures.design.bands.items())[key.split(".")[1]].wanted_edges
            return min(max(value, low), high)
        far = FARTHEST[0] if key.endswith("resonance") else FARTHEST[1]
        return min(max(value, start * math.exp(-far)), start * math.exp(far))


def _no_reading(still: Mapping[str, np.ndarray]) -> dict[str, np.ndarray]:
    return {name: value * 0.0 for name, value in still.items() if name.startswith("aim_")}


def _dry_of(stage: Stage) -> Stage:
    return replace(stage, wet=False)


def for_yield(figures: Figures, *, stage: str = "aimed", trials: int = BLOCK, seed: int = SEED) -> ForYield:
    """Return a design whose trap, ratio of L to C and aims are chosen for the largest yield at a stage.

    What is set in the design is where the search begins; wires stay solved for the aims. NoAnswer where a
    wire is set: its aim cannot be chosen.
    """
    design = figures.design
    wanted = next(s for s in STAGES if s.name == stage)
    lengths = design.antenna.lengths
    for name in ("inner", "end"):
        if getattr(lengths, name) not in (SOLVE, None):
            raise NoAnswer("wire_is_set", f"antenna.lengths.{name}", {}, 'let it be "solve"')
    search = _Search(figures, wanted, seed)
    values = {key: _told(value) for key, value in search.best().items()}
    changed = search.design_at(values)
    before = stage_yield(search.ensemble, wanted, trials, seed + 1)
    solved = solve(changed)
    after = stage_yield(Ensemble(solved), wanted, trials, seed + 1)
    changes = tuple(
        Change(key=key, before=search.keys[key][0], after=value)
        for key, value in values.items()
        if abs(value / search.keys[key][0] - 1) > 1e-6
    )
    if after.share <= before.share or not changes:
        return ForYield(design=design, stage=stage, changes=(), before=before, after=before, prices={})
    prices = {
        role: tuple(
            (f.bands[role].worst_stress.peak_voltage, f.bands[role].shares.trap) for f in (figures, solved)
        )
        for role in figures.bands
        if figures.bands[role].worst_stress is not None
    }
    return ForYield(design=changed, stage=stage, changes=changes, before=before, after=after, prices=prices)


def _told(value: float) -> float:
    """Return a value to the four digits in which it is told, so that what is told is what was judged."""
    digits = 3 - math.floor(math.log10(abs(value)))
    return round(value, digits) if digits <= 0 else round(value * 10.0**digits) / 10.0**digits
