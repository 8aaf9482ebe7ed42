"""The ensemble: whether the antenna, built and hung with its doubts, still covers the wanted bands."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from ...design.design import Design
from ...engine.reflection import squared_reflection
from ...engine.sampling import quantiles
from ..antenna.figures import Figures
from ..antenna.solve import solve
from .beliefs import Belief
from .causes import CauseShares, Regression, corners, one_at_a_time, trap_first_order
from .ensemble import Ensemble, Outcome, swr_of
from .stages import run_stage
from .traps import AIMED, AS_CUT, STAGES, Stage

TRIALS, SEED = 10_000, 1
FEWEST, MOST = 2, 10_000_000
BLOCK = 2000
"""Trials drawn at once."""
KEPT = 10_000
"""Trials whose results are kept for scatter; all of them count for the yield."""
CURVES = 500
"""Trials whose whole curve is kept."""
PILOT, LEAST_PILOT = 4000, 400
"""Trials by which the cutting allowance is set and shares of variance are told; the allowance and the worst
case take the least of them even where fewer are asked for."""
TAILS = (0.05, 0.5, 0.95)
EDGE = 0.001
"""Share of trials on either side that would leave the rest of a histogram in one bin."""
CONFIDENCE = 1.959964
"""Sigma of a 95 % interval. [1]"""
LEVEL = 0.975
"""Chance that lies below the end of such an interval. [1]"""
RESULTS = ("dip", "aim_swr", "worst_swr", "volts", "loss")
BINS = 96

Progress = Callable[[int, int], bool]
"""Told trials done and wanted; whether to go on."""


@dataclass(frozen=True, kw_only=True)
class Yield:
    """Share of antennas within the limit, with the ends of its 95 % interval."""

    share: float
    low: float
    high: float
    passed: int
    trials: int


@dataclass(frozen=True, kw_only=True)
class Scatter:
    """How far a result moves: 5, 50 and 95 of 100, and every doubt at its end at once (`least`, `most`)."""

    mean: float
    deviation: float
    low: float
    middle: float
    high: float
    least: float
    most: float
    causes: CauseShares | None
    edges: np.ndarray
    counts: np.ndarray


@dataclass(frozen=True, kw_only=True)
class CurveBand:
    """SWR over frequency of which 5, 50 and 95 of 100 antennas are below; arrays (frequencies,)."""

    frequency: np.ndarray
    low: np.ndarray
    middle: np.ndarray
    high: np.ndarray


@dataclass(frozen=True, kw_only=True)
class BandScatter:
    """One band at one stage; dip [Hz], SWR, volts [V] and trap loss [1] of `RESULTS`.

    `outside` is the share of antennas whose dip lies outside what is looked at.
    """

    role: str
    name: str
    within: Yield
    results: Mapping[str, Scatter]
    curve: CurveBand
    outside: float


@dataclass(frozen=True, kw_only=True)
class StageScatter:
    """Every band at one stage, and the share of antennas within the limit on all of them."""

    name: str
    within: Yield
    bands: Mapping[str, BandScatter]
    unreached: float


@dataclass(frozen=True, kw_only=True)
class Allowance:
    """How much longer to cut a wire [m], so that adding some stays unlikely, and what it may cost.

    5 of 100 antennas need less beyond the mark than `shortest`, 5 more than `longest`; what is folded back
    within it is negative; `reserve_risk` is the chance that the design's own reserve is too short.
    """

    wire: str
    length: float
    shortest: float
    longest: float
    reserve: float
    reserve_risk: float


@dataclass(frozen=True, kw_only=True)
class Check:
    """The first-order scatter beside that of the trials: of one trap's resonance [1], of dips as cut [Hz]."""

    trap: tuple[float, float] | None
    dips: Mapping[str, tuple[float, float]]


@dataclass(frozen=True, kw_only=True)
class Tolerance:
    """What an ensemble says of a design; seed and trials go with every number."""

    design: Design
    seed: int
    trials: int
    wanted_trials: int
    varying: Mapping[str, Belief]
    stages: Mapping[str, StageScatter]
    allowances: Mapping[str, Allowance]
    risk: float
    check: Check
    tells_causes: bool

    @property
    def stopped(self) -> bool:
        """Whether it was stopped before all trials were made."""
        return self.trials < self.wanted_trials


def yield_of(passed: int, trials: int) -> Yield:
    """Return a share with its 95 % interval.

    Wilson's score interval (`wilson-1927`); where none or all pass, up to the share that would leave it so in
    one run of 40.
    """
    z2 = CONFIDENCE**2
    share = passed / trials
    middle = (passed + z2 / 2) / (trials + z2)
    half = CONFIDENCE / (trials + z2) * math.sqrt(passed * (trials - passed) / trials + z2 / 4)
    low, high = middle - half, middle + half
    bound = 1 - (1 - LEVEL) ** (1 / trials)
    if passed == 0:
        low, high = 0.0, bound
    if passed == trials:
        low, high = 1 - bound, 1.0
    return Yield(share=share, low=low, high=high, passed=passed, trials=trials)


def allowance_of(needs: Mapping[str, np.ndarray], risk: float) -> dict[str, float]:
    """Return the least equal-risk lengths such that any wire is too short in at most that share of trials."""
    names = list(needs)
    values = np.array([needs[name] for name in names])
    ranked = np.sort(values, axis=1)
    count = values.shape[1]

    def lengths(each: float) -> np.ndarray:
        """Return the lengths that a wire exceeds in at most that share of trials."""
        return ranked[:, min(count - 1, math.ceil((1 - each) * count))]

    low, high = risk / len(names), risk
    for _ in range(20):
        each = (low + high) / 2
        short = (values > lengths(each)[:, None]).any(axis=0).mean()
        low, high = (each, high) if short <= risk else (low, each)
    return {name: max(0.0, float(length)) for name, length in zip(names, lengths(low), strict=True)}


def pilot_change(ensemble: Ensemble, draws: Mapping[str, np.ndarray], count: int) -> dict[str, np.ndarray]:
    """Return what would bring trials to the aims, traps tuned, however much wire that takes."""
    return ensemble.to_aim(draws, AIMED, count)


def part_of(values: Mapping[str, np.ndarray], begin: int, end: int) -> dict[str, np.ndarray]:
    """Return some of the trials."""
    return {name: value[begin:end] for name, value in values.items()}


def allowances(ensemble: Ensemble, change: Mapping[str, np.ndarray], risk: float) -> dict[str, Allowance]:
    """Return how much longer to cut each wire that is brought to an aim."""
    needs = {name: change[name] for name in ensemble.unknown_wires}
    reached = np.all([np.isfinite(need) for need in needs.values()], axis=0)
    needs = {name: need[reached] if reached.any() else np.zeros(1) for name, need in needs.items()}
    lengths = allowance_of(needs, risk)
    reserve = ensemble.design.antenna.lengths.reserve
    return {
        name: Allowance(
            wire=name,
            length=lengths[name],
            shortest=float(np.quantile(need, TAILS[0])),
            longest=float(np.quantile(need, TAILS[2])),
            reserve=reserve,
            reserve_risk=float((need > reserve).mean()),
        )
        for name, need in needs.items()
    }


def tolerance(
    figures: Figures,
    *,
    trials: int = TRIALS,
    seed: int = SEED,
    progress: Progress | None = None,
    ensemble: Ensemble | None = None,
) -> Tolerance:
    """Return what becomes of a design over many trials, at four stages.

    An ensemble of the same figures saves its port solves. ValueError names a number of trials or a seed that
    cannot be.
    """
    if not FEWEST <= trials <= MOST:
        raise ValueError(f"trials: must be {FEWEST} to {MOST}")
    ensemble = Ensemble(figures) if ensemble is None else ensemble
    risk = figures.design.doubts.risk
    pilot = min(max(trials, LEAST_PILOT), PILOT)
    early = ensemble.draws(seed, 0, pilot)
    first = pilot_change(ensemble, early, pilot)
    allowed = allowances(ensemble, first, risk)
    most = {name: allowance.length for name, allowance in allowed.items()}
    gathered = _Gathered(ensemble, min(trials, KEPT))
    done = 0
    while done < trials:
        count = min(BLOCK, trials - done)
        known = done + count <= pilot
        draws = part_of(early, done, done + count) if known else ensemble.draws(seed, done, count)
        free = part_of(first, done, done + count) if known else None
        gathered.add(*run_stage(ensemble, STAGES, draws, count, most, free), done, count)
        done += count
        if progress is not None and not progress(done, trials):
            break
    pilot = min(done, PILOT)
    draws = part_of(early, 0, pilot)
    regression = Regression(ensemble.varying, draws, pilot)
    return Tolerance(
        design=figures.design,
        seed=seed,
        trials=done,
        wanted_trials=trials,
        varying=ensemble.varying,
        stages=gathered.stages(regression, early, pilot, done, most),
        allowances=allowed,
        risk=risk,
        check=_check(ensemble, draws, pilot, gathered),
        tells_causes=regression.enough,
    )


class _Gathered:
    """Results of all trials so far: counts of all, values of the first ones."""

    def __init__(self, ensemble: Ensemble, kept: int) -> None:
        self.ensemble, self.kept = ensemble, kept
        roles, count = ensemble.roles, len(STAGES)
        self.limit = float(squared_reflection(ensemble.design.station.swr_limit))
        self.passed = np.zeros((count, len(roles) + 1), int)
        self.unreached = np.zeros(count, int)
        self.values = np.empty((count, len(roles), len(RESULTS), kept))
        first = next(iter(ensemble.grids.values())).frequency.size
        self.curves = np.empty((count, len(roles), first, min(kept, CURVES)))

    def add(
        self,
        outcomes: Mapping[str, Mapping[str, Outcome]],
        unreached: Mapping[str, np.ndarray],
        begin: int,
        count: int,
    ) -> None:
        """Add a block of trials."""
        room = max(0, min(count, self.kept - begin))
        curved = max(0, min(count, self.curves.shape[3] - begin))
        for i, stage in enumerate(STAGES):
            every = np.ones(count, bool)
            for j, role in enumerate(self.ensemble.roles):
                one = outcomes[stage.name][role]
                within = one.worst <= self.limit
                every &= within
                self.passed[i, j] += int(within.sum())
                self.values[i, j, :, begin : begin + room] = _values(one)[:, :room]
                self.curves[i, j, :, begin : begin + curved] = one.reflection[:curved].T
            self.passed[i, -1] += int(every.sum())
            self.unreached[i] += int(unreached[stage.name].sum())

    def stages(
        self,
        regression: Regression,
        draws: Mapping[str, np.ndarray],
        pilot: int,
        done: int,
        most: Mapping[str, float],
    ) -> dict[str, StageScatter]:
        """Return everything gathered, with causes by the first trials."""
        kept = min(self.kept, done)
        ensemble = self.ensemble
        every = [self.values[i, :, :, :pilot].reshape(-1, pilot).T for i in range(len(STAGES))]
        extremes = self._ends(draws, every, most)
        found = {}
        for i, stage in enumerate(STAGES):
            shares, ends = regression.shares(every[i]), extremes[stage.name]
            bands = {}
            tails = quantiles(self.values[i, :, :, :kept], (EDGE, *TAILS, 1 - EDGE))
            for j, role in enumerate(ensemble.roles):
                scatters = {}
                for k, name in enumerate(RESULTS):
                    at = j * len(RESULTS) + k
                    values = self.values[i, j, k, :kept]
                    worst = (float(ends[0][at]), float(ends[1][at]))
                    scatters[name] = _scatter(values, tails[:, j, k], shares[at], worst)
                frequency = ensemble.grids[role].frequency
                dips = self.values[i, j, 0, :kept]
                bands[role] = BandScatter(
                    role=role,
                    name=ensemble.design.bands.called(role),
                    within=yield_of(int(self.passed[i, j]), done),
                    results=scatters,
                    curve=self._curve(i, j, frequency, done),
                    outside=float(((dips <= frequency[0]) | (dips >= frequency[-1])).mean()),
                )
            found[stage.name] = StageScatter(
                name=stage.name,
                within=yield_of(int(self.passed[i, -1]), done),
                bands=bands,
                unreached=float(self.unreached[i] / done),
            )
        return found

    def _ends(
        self, draws: Mapping[str, np.ndarray], results: list[np.ndarray], most: Mapping[str, float]
    ) -> dict[str, tuple[np.ndarray, np.ndarray]]:
        """Return the least and most of each result with every doubt at its end at once, by stage."""
        if not self.ensemble.varying:
            return {s.name: (r[0], r[0]) for s, r in zip(STAGES, results, strict=True)}
        pilot = results[0].shape[0]
        if pilot < LEAST_PILOT:
            # Too few tell which way a result goes with each doubt: more are made for that alone.
            pilot = LEAST_PILOT
            outcomes, _ = run_stage(self.ensemble, STAGES, part_of(draws, 0, pilot), pilot, most)
            results = [self._results(outcomes[stage.name]).T for stage in STAGES]
        draws = part_of(draws, 0, pilot)
        found = {}
        for aimed in (False, True):
            members = [i for i, stage in enumerate(STAGES) if stage.aimed is aimed]
            trials = corners(
                self.ensemble.varying, draws, np.concatenate([results[i] for i in members], axis=1)
            )
            count = 2 * sum(results[i].shape[1] for i in members)
            stages = tuple(STAGES[i] for i in members)
            outcomes, _ = run_stage(self.ensemble, stages, trials, count, most)
            for stage in stages:
                values = self._results(outcomes[stage.name])
                found[stage.name] = values.min(axis=1), values.max(axis=1)
        return found

    def _results(self, outcomes: Mapping[str, Outcome]) -> np.ndarray:
        return np.concatenate([_values(outcomes[role]) for role in self.ensemble.roles])

    def _curve(self, i: int, j: int, frequency: np.ndarray, done: int) -> CurveBand:
        reflection = quantiles(self.curves[i, j, :, :done], TAILS)
        low, middle, high = swr_of(reflection)
        return CurveBand(frequency=frequency, low=low, middle=middle, high=high)


def _values(one: Outcome) -> np.ndarray:
    """Return the results of trials in the order of `RESULTS`."""
    return np.array([one.dip, swr_of(one.aim), swr_of(one.worst), one.volts, one.loss])


def _scatter(
    values: np.ndarray, tails: np.ndarray, causes: CauseShares | None, ends: tuple[float, float]
) -> Scatter:
    begin, low, middle, high, end = (float(tail) for tail in tails)
    if not end > begin:
        begin, end = begin - 0.5, end + 0.5
    place = ((values - begin) * (BINS / (end - begin))).astype(int)
    counts = np.bincount(np.clip(place, 0, BINS - 1), minlength=BINS)
    return Scatter(
        mean=float(values.mean()),
        deviation=float(values.std()),
        low=low,
        middle=middle,
        high=high,
        least=min(ends),
        most=max(ends),
        causes=causes,
        edges=np.linspace(begin, end, BINS + 1),
        counts=counts,
    )


def _check(ensemble: Ensemble, draws: Mapping[str, np.ndarray], count: int, gathered: _Gathered) -> Check:
    """Return first-order scatter beside that of the trials."""
    trap = None
    first = trap_first_order(ensemble)
    if first is not None:
        built = ensemble.traps({n: v for n, v in draws.items() if n != "temperature"}, AS_CUT, count)
        resonance = ensemble.of_traps.resonance(built)
        trap = (first, float(resonance.std() / resonance.mean()))
    dips = one_at_a_time(ensemble, AS_CUT)
    return Check(
        trap=trap,
        dips={
            role: (dips[role], float(gathered.values[0, j, 0, : min(gathered.kept, count)].std()))
            for j, role in enumerate(ensemble.roles)
        },
    )


def quick_yield(
    design: Design,
    *,
    trials: int = 300,
    seed: int = SEED,
    stage: str = "aimed",
    figures: Figures | None = None,
) -> Yield:
    """Return the yield of a design at one stage, quickly: enough to rank designs by."""
    ensemble = Ensemble(solve(design) if figures is None else figures)
    return stage_yield(ensemble, next(s for s in STAGES if s.name == stage), trials, seed)


def stage_yield(ensemble: Ensemble, stage: Stage, trials: int, seed: int) -> Yield:
    """Return the yield of an ensemble at a stage of any kind."""
    most = change = None
    pilot = min(max(trials, LEAST_PILOT), PILOT)
    if stage.aimed:
        change = pilot_change(ensemble, ensemble.draws(seed, 0, pilot), pilot)
        allowed = allowances(ensemble, change, ensemble.design.doubts.risk)
        most = {name: allowance.length for name, allowance in allowed.items()}
    limit = float(squared_reflection(ensemble.design.station.swr_limit))
    passed = 0
    for begin in range(0, trials, BLOCK):
        end = min(begin + BLOCK, trials)
        known = part_of(change, begin, end) if change is not None and end <= pilot else None
        draws = ensemble.draws(seed, begin, end - begin)
        outcomes, _ = run_stage(ensemble, (stage,), draws, end - begin, most, known)
        worst = [outcomes[stage.name][role].worst for role in ensemble.roles]
        passed += int(np.all(np.array(worst) <= limit, axis=0).sum())
    return yield_of(passed, trials)
