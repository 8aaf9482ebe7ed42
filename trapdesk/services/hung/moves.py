"""The next move: what to fold, let out, cut or tune, how likely it is to do, and when to stop."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from ...engine.ports import terminate_entries
from ...engine.sampling import normal_probability, normal_quantile, uniform
from ..trials.ensemble import WIRES, swr_of
from ..trials.nearby import Nearby
from ..trials.traps import Traps
from .latents import FOLD
from .readings import squared
from .updating import Posterior

TRIALS, SEARCHED = 400, 120
"""Trials chances are counted over, and those a move is looked for with."""
ASIDE = 0.04
"""How far from both aims a move may lead at the price of a hundredth of chance. [m], a choice of ours"""
SOFT = 0.1
"""How far from the limit a trial counts as in doubt while a move is looked for. [1]"""
STEPS = (0.08, 0.04, 0.02, 0.01, 0.005)
ROUNDS = 24
SURE, ENOUGH = 0.98, 0.9
"""Chance from which on it is left as it is, and that counts as met where traps might be mended. [1]"""
WORTH, TUNING_WORTH = 0.03, 0.15
"""By how much a chance must rise for a lowering, and for taking the traps down as well. [1]"""
ADDING_WORTH = 0.1
"""By how much a chance must rise for wire to be added to what there is. [1], a choice of ours"""
LOWERINGS = 4
"""Lowerings over which the risk of having cut too much is spread. [1], a choice of ours"""
WORTH_CUTTING = 0.03
"""Less wire than this is not worth a cut. [m]"""
FARTHEST = 10.0
"""No move is looked for beyond this. [m]"""
FINEST = 0.005
"""Nobody folds finer than this. [m]"""
STREAM = 2048


@dataclass(frozen=True, kw_only=True)
class Option:
    """A move: how much longer each wire gets [m], whether the traps are tuned again, the chances after it.

    `chances` by band role and `all_bands` are those of meeting the limit over the whole wanted part.
    """

    name: str
    change: Mapping[str, float]
    tuning: bool
    chances: Mapping[str, float]
    all_bands: float


@dataclass(frozen=True, kw_only=True)
class Need:
    """How much longer a wire should be than it is [m]: 5, 50 and 95 of 100, and the step it is known to."""

    wire: str
    low: float
    middle: float
    high: float
    step: float


@dataclass(frozen=True, kw_only=True)
class Advice:
    """What to do next. `verdict` is stop, wires, traps, or measure: no move helps, reading more may.

    `lowerings` are the chances that no, one or two more lowerings do; what is left of 1 is out of reach of
    any length. `cut` is what may be cut off each folded-back wire after the move [m], `spare` what is folded
    back then, `lacking` what must be added.
    """

    verdict: str
    now: Option
    best: Option
    options: tuple[Option, ...]
    one_wire: Option | None
    needs: Mapping[str, Need]
    lowerings: tuple[float, float, float]
    cut: Mapping[str, float]
    spare: Mapping[str, float]
    lacking: Mapping[str, float]


class Prospects:
    """Trials of what is believed, and what moves make of them."""

    def __init__(self, posterior: Posterior, trials: int = TRIALS) -> None:
        self.posterior, self.ensemble = posterior, posterior.forward.ensemble
        self.hoist = posterior.forward.hoists[-1]
        self.latents, self.count = posterior.forward.latents, trials
        self.z = posterior.even(trials)[:, : self.latents.size]
        self.draws = self.latents.draws(self.z, self.hoist.tunings)
        self.stage = posterior.forward.stage_at(self.hoist)
        self.wires = tuple(wire for wire in WIRES if getattr(self.ensemble.wire, wire) is not None)
        self.change = self.latents.change(self.z, self.hoist.change, self.hoist.moves)
        noise = [normal_quantile(uniform(1, STREAM + i, 0, trials)) for i in range(4)]
        self._folds = dict(zip(WIRES, noise, strict=False))
        self._tuning = np.array(noise[2:])
        self._bands = {}
        design = self.ensemble.design
        for role, band in design.bands.items():
            parts = [np.linspace(part.low, part.high, 7) for part in band.segments]
            frequency = np.unique(np.concatenate(parts))
            of_traps = self.ensemble.of_traps
            circuit = None if of_traps is None else of_traps.circuit(frequency)
            self._bands[role] = (frequency, self.ensemble.nearby.table(role, frequency), circuit)
        self.traps = self._traps(tuning=False)
        self.tuned_traps = self._traps(tuning=True)
        self.limit = design.station.swr_limit

    def _traps(self, *, tuning: bool) -> Traps | None:
        if not tuning:
            return self.ensemble.traps(self.draws, self.stage, self.count)
        belief = self.ensemble.varying.get("tuning")
        draws = dict(self.draws)
        if belief is not None:
            draws["tuning"] = belief.shaped(self._tuning, None).T
        stage = replace(self.stage, tuned=True, sealed=True, sealed_first=True)
        return self.ensemble.traps(draws, stage, self.count)

    def needs(self, *, tuning: bool = False) -> dict[str, np.ndarray]:
        """Return how much longer each wire should be for both aims, by trial, in m; NaN where none does."""
        draws, stage = dict(self.draws), self.stage
        if tuning:
            belief = self.ensemble.varying.get("tuning")
            if belief is not None:
                draws["tuning"] = belief.shaped(self._tuning, None).T
            stage = replace(stage, tuned=True, sealed=True, sealed_first=True)
        there = self.ensemble.to_aim(draws, stage, self.count)
        return {wire: there[wire] - self.change[wire] for wire in self.wires}

    def worst(
        self,
        moves: Sequence[Mapping[str, float | np.ndarray]],
        *,
        tuning: bool = False,
        trials: int | None = None,
    ) -> dict[str, np.ndarray]:
        """Return the worst SWR in the wanted part of each band after each move, (moves, trials)."""
        count = self.count if trials is None else trials
        step = self.count // count
        pick = slice(0, step * count, step)
        draws = {name: value[pick] for name, value in self.draws.items()}
        own = self.tuned_traps if tuning else self.traps
        rows = []
        for move in moves:
            change = {}
            for wire in WIRES:
                more = move.get(wire, 0.0)
                moved = np.any(np.asarray(more) != 0.0)
                extra = np.asarray(more)[pick] if np.ndim(more) else more
                change[wire] = self.change[wire][pick] + extra + moved * FOLD * self._folds[wire][pick]
            rows.append(self.ensemble.features(draws, count, change))
        features = np.concatenate(rows)
        found = {}
        for role, (frequency, table, circuit) in self._bands.items():
            entries = Nearby.entries(table, features)
            feed = entries[:, 0]
            if own is not None and circuit is not None and self.ensemble.of_traps is not None:
                mine = Traps(
                    inductance=own.inductance[:, pick], capacitance=own.capacitance[:, pick], q=own.q[:, pick]
                )
                loads = self.ensemble.of_traps.impedances(circuit, mine)
                loads = [np.tile(load, (len(moves), 1)) for load in loads]
                feed = terminate_entries(*(entries[:, k] for k in range(6)), *loads)[0]
            path = self.ensemble.path
            seen = feed if path is None else path.judged(frequency, feed, self.ensemble.grids[role].setting)
            worst = squared(seen, self.ensemble.design.station.reference).max(axis=1)
            found[role] = swr_of(worst).reshape(len(moves), count)
        return found

    def option(self, name: str, move: Mapping[str, float], *, tuning: bool = False) -> Option:
        """Return a move with its chances."""
        worst = self.worst([move], tuning=tuning)
        met = {role: value[0] <= self.limit for role, value in worst.items()}
        return Option(
            name=name,
            change={wire: float(move.get(wire, 0.0)) for wire in self.wires},
            tuning=tuning,
            chances={role: float(value.mean()) for role, value in met.items()},
            all_bands=float(np.all(list(met.values()), axis=0).mean()),
        )

    def search(
        self, start: Mapping[str, float], wires: Sequence[str], most: Mapping[str, float], *, tuning: bool
    ) -> dict[str, float]:
        """Return the move with the largest chance that only changes these wires, no longer than `most`."""

        def bounded(move: np.ndarray) -> dict[str, float]:
            return {wire: float(min(value, most[wire])) for wire, value in zip(wires, move, strict=True)}

        at = np.array([start.get(wire, 0.0) for wire in wires])
        aims = at.copy()

        def merit(tries: np.ndarray) -> np.ndarray:
            moves = [bounded(move) for move in tries]
            worst = self.worst(moves, tuning=tuning, trials=SEARCHED)
            largest = np.log(np.max(list(worst.values()), axis=0))
            margin = (np.log(self.limit) - largest) / SOFT
            # Where the chance does not tell moves apart, the one that comes near the aims is taken.
            away = (((tries - aims) / ASIDE) ** 2).sum(axis=1)
            return normal_probability(margin).mean(axis=1) - 0.02 * largest.mean(axis=1) - 0.01 * away

        directions = np.array(np.meshgrid(*[(-1, 0, 1)] * len(wires))).reshape(len(wires), -1).T
        best, step = -np.inf, 0
        for _ in range(ROUNDS):
            tries = at + STEPS[step] * directions
            merits = merit(tries)
            i = int(np.argmax(merits))
            if merits[i] <= best + 1e-4 or not directions[i].any():
                step += 1
                if step == len(STEPS):
                    break
            if merits[i] > best:
                best, at = float(merits[i]), tries[i]
        return bounded(at)


def step_of(deviation: float) -> float:
    """Return the step a move is told in: 1, 2 or 5 times a power of ten at or below how far it is known."""
    size = max(deviation, FINEST)
    power = 10.0 ** np.floor(np.log10(size) + 1e-9)
    return max(FINEST, next(n * power for n in (5, 2, 1) if n * power <= size * (1 + 1e-9)))


def _rounded(
    move: Mapping[str, float], needs: Mapping[str, Need], most: Mapping[str, float]
) -> dict[str, float]:
    found = {}
    for wire, value in move.items():
        step = needs[wire].step
        near = step * round(value / step)
        found[wire] = near if near <= most[wire] + 1e-9 else step * np.floor(most[wire] / step)
    return found


def needs_of(prospects: Prospects, *, tuning: bool = False) -> dict[str, Need]:
    """Return what each wire needs, over the trials in which any length does."""
    found = {}
    for wire, values in prospects.needs(tuning=tuning).items():
        values = values[np.isfinite(values)]
        if not values.size:
            values = np.zeros(1)
        low, middle, high = (float(np.quantile(values, q)) for q in (0.05, 0.5, 0.95))
        # A third of what it may be off is as fine as is worth telling.
        step = step_of((high - low) / 3.29 / 1.5)
        found[wire] = Need(wire=wire, low=low, middle=middle, high=high, step=step)
    return found


def _best(
    prospects: Prospects,
    name: str,
    wires: Sequence[str],
    needs: Mapping[str, Need],
    most: Mapping[str, float],
    *,
    tuning: bool = False,
) -> Option:
    """Return the best move of some wires; one for which wire must be added only where that is worth it."""
    free = {wire: FARTHEST for wire in wires}
    middle = {wire: needs[wire].middle for wire in wires}
    move = _rounded(prospects.search(middle, wires, free, tuning=tuning), needs, free)
    found = prospects.option(name, move, tuning=tuning)
    if any(move[wire] > most[wire] + 1e-9 for wire in wires):
        within = {wire: min(value, most[wire]) for wire, value in move.items()}
        held = _rounded(prospects.search(within, wires, most, tuning=tuning), needs, most)
        other = prospects.option(name, held, tuning=tuning)
        if other.all_bands >= found.all_bands - ADDING_WORTH:
            return other
    return found


def advise(posterior: Posterior, *, can_tune: bool, reserve: float | None = None) -> Advice:
    """Return what to do next.

    `can_tune` tells whether the traps can be brought to their frequency again; `reserve` is how much wire was
    left on each beyond the computed length [m], that of the design unless given.
    """
    prospects = Prospects(posterior)
    ensemble = prospects.ensemble
    reserve = ensemble.design.antenna.lengths.reserve if reserve is None else reserve
    meant = prospects.hoist.change
    most = {wire: max(reserve - meant.get(wire, 0.0), 0.0) for wire in prospects.wires}
    needs = needs_of(prospects)
    now = prospects.option("now", {})
    both = _best(prospects, "both", prospects.wires, needs, most)
    options = [both]
    singles = []
    for wire in prospects.wires if len(prospects.wires) > 1 else ():
        singles.append(_best(prospects, wire, (wire,), needs, most))
    options += singles
    if can_tune and both.all_bands < ENOUGH and prospects.traps is not None:
        again = needs_of(prospects, tuning=True)
        options.append(_best(prospects, "traps", prospects.wires, again, most, tuning=True))
    best = both
    one = max(singles, key=lambda option: option.all_bands) if singles else None
    traps = next((option for option in options if option.tuning), None)
    if traps is not None and traps.all_bands >= best.all_bands + TUNING_WORTH:
        best = traps
    verdict = "traps" if best.tuning else "wires"
    still = all(value == 0.0 for value in best.change.values()) and not best.tuning
    if now.all_bands >= SURE or best.all_bands < now.all_bands + WORTH or still:
        verdict = "stop" if now.all_bands >= SURE else "measure"
        best = now
    lowerings = _lowerings(prospects, now, best)
    each = ensemble.design.doubts.risk / len(prospects.wires) / LOWERINGS
    cut, spare, lacking = {}, {}, {}
    for wire, values in prospects.needs().items():
        values = values[np.isfinite(values)]
        after = best.change[wire]
        spare[wire] = max(reserve - meant.get(wire, 0.0) - after, 0.0)
        lacking[wire] = max(after - most[wire], 0.0)
        keep = max(float(np.quantile(values, 1 - each)) - after, 0.0) if values.size else spare[wire]
        left = np.floor((spare[wire] - keep) / 0.01) * 0.01
        cut[wire] = float(left) if left >= WORTH_CUTTING and posterior.told else 0.0
    return Advice(
        verdict=verdict,
        now=now,
        best=best,
        options=tuple(options),
        one_wire=one,
        needs=needs,
        lowerings=lowerings,
        cut=cut,
        spare=spare,
        lacking=lacking,
    )


def _lowerings(prospects: Prospects, now: Option, best: Option) -> tuple[float, float, float]:
    """Return chances that no, one or two lowerings do; for the second each trial gets its own move."""
    own = {wire: np.nan_to_num(values) for wire, values in prospects.needs(tuning=best.tuning).items()}
    worst = prospects.worst([own], tuning=best.tuning)
    reached = float(np.all([value[0] <= prospects.limit for value in worst.values()], axis=0).mean())
    one = max(best.all_bands, now.all_bands)
    return now.all_bands, one - now.all_bands, max(reached - one, 0.0)
