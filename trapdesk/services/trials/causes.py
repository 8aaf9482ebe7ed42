"""What a result scatters by: shares of its variance, the worst case, and the first-order check."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from ...design.doubts import SIGMAS
from ..trap.measured_trap import holds_resonance
from .beliefs import CAUSES, Belief, Draws
from .ensemble import Ensemble
from .traps import Stage

FEWEST = 200
"""Trials below which shares of variance tell nothing. [1]"""
SMALLEST = 0.005
"""Share below which a cause is not told. [1]"""
POWERS = 3


@dataclass(frozen=True, kw_only=True)
class Share:
    """The share of a result's variance that one cause has by itself."""

    cause: str
    share: float


@dataclass(frozen=True, kw_only=True)
class CauseShares:
    """Shares of a result's variance, the largest first, and what no cause has by itself."""

    causes: tuple[Share, ...]
    together: float


def _drivers(belief: Belief, values: np.ndarray) -> list[np.ndarray]:
    """Return what a result may follow: of a pair its mean, and how far both are apart whichever way."""
    if not belief.pair:
        return [values]
    return [values.mean(axis=1), (values[:, 0] - values[:, 1]) ** 2]


def _columns(varying: Mapping[str, Belief], draws: Draws, names: tuple[str, ...]) -> np.ndarray:
    """Return the terms one cause can have: powers of its quantities, and products of two of them."""
    columns, means = [], []
    for name in names:
        if name not in varying:
            continue
        first, *rest = _drivers(varying[name], draws[name])
        size = first.std()
        if size > 0:
            x = (first - first.mean()) / size
            means.append(x)
            columns += [x**power for power in range(1, POWERS + 1)]
        columns += [column / column.std() for column in rest if column.std() > 0]
    columns += [a * b for i, a in enumerate(means) for b in means[:i]]
    return np.column_stack(columns) if columns else np.zeros((0, 0))


class Regression:
    """Trials taken apart by cause, once for all results."""

    def __init__(self, varying: Mapping[str, Belief], draws: Draws, count: int) -> None:
        self._groups: dict[str, slice] = {}
        blocks, at = [np.ones((count, 1))], 1
        for cause, names in CAUSES.items():
            block = _columns(varying, draws, names)
            if block.size:
                self._groups[cause] = slice(at, at + block.shape[1])
                blocks.append(block - block.mean(axis=0))
                at += block.shape[1]
        self._terms = np.concatenate(blocks, axis=1)
        self._square = self._terms.T @ self._terms
        # Terms that hardly differ share what they explain: nothing is told of single terms.
        self._square[np.diag_indices(at)] *= 1 + 1e-9
        self.enough = count >= max(FEWEST, 3 * at)

    def shares(self, results: np.ndarray) -> list[CauseShares | None]:
        """Return the shares of each result (trials, results); none of one that does not scatter."""
        if not self.enough:
            return [None] * results.shape[1]
        moved = results - results.mean(axis=0)
        spread = moved.var(axis=0)
        found = np.linalg.solve(self._square, self._terms.T @ moved)
        answers: list[CauseShares | None] = []
        for i, variance in enumerate(spread):
            if not variance > 1e-18 * max(float(np.mean(results[:, i]) ** 2), 1e-30):
                answers.append(None)
                continue
            scale = variance * results.shape[0]
            parts = {
                cause: float(found[group, i] @ self._square[group, group] @ found[group, i] / scale)
                for cause, group in self._groups.items()
            }
            ranked = sorted(parts.items(), key=lambda pair: -pair[1])
            told = tuple(Share(cause=cause, share=share) for cause, share in ranked if share > SMALLEST)
            answers.append(CauseShares(causes=told, together=max(0.0, 1.0 - sum(parts.values()))))
        return answers


def corners(varying: Mapping[str, Belief], draws: Draws, results: np.ndarray) -> dict[str, np.ndarray]:
    """Return two trials a result, every cause at that end of its doubt that raises it, or lowers it."""
    moved = results - results.mean(axis=0)
    found = {}
    for name, belief in varying.items():
        first = _drivers(belief, draws[name])[0]
        sign = np.sign((first - first.mean()) @ moved)
        low, high = belief.ends
        up = np.where(sign >= 0, high, low)
        values = np.concatenate([up, low + high - up])
        found[name] = np.repeat(values[:, None], 2, axis=1) if belief.pair else values
    return found


def deviation(belief: Belief) -> float:
    """Return the standard deviation of a quantity."""
    if belief.between:
        return (belief.high - belief.low) / math.sqrt(12)
    if belief.is_normal:
        return belief.size / SIGMAS[belief.meaning]
    return belief.size / math.sqrt(3)


def trap_first_order(ensemble: Ensemble) -> float | None:
    """Return the scatter of one trap's resonance as built, by df/f = -(dL/L + dC/C)/2; relative."""
    if ensemble.of_traps is None:
        return None
    trap = ensemble.of_traps.trap
    by_turns, by_pitch, by_diameter = ensemble.of_traps.exponents
    own = trap.own_capacitance / trap.capacitance
    low, _, high = trap.self_capacitance
    rates = {
        "coil": 1.0,
        "turns": by_turns / trap.wound.turns if trap.wound is not None else 0.0,
        "pitch": by_pitch,
        "former": by_diameter,
        "capacitor": 1 - own,
        "self_capacitance": own * math.log(high / low) / 2 if own else 0.0,
    }
    if holds_resonance(ensemble.of_traps.part.measured):
        rates |= {"capacitor": 0.0, "self_capacitance": 0.0}
    parts = (
        rate * deviation(ensemble.varying[name]) for name, rate in rates.items() if name in ensemble.varying
    )
    return math.sqrt(sum(part * part for part in parts)) / 2


def one_at_a_time(ensemble: Ensemble, stage: Stage) -> dict[str, float]:
    """Return the scatter of each band's dip if every cause acted by itself and in proportion, in Hz."""
    names = list(ensemble.varying)
    trials = ensemble.nominal(4 * max(len(names), 1))
    weights = np.zeros(len(names) * 2)
    for i, name in enumerate(names):
        belief = ensemble.varying[name]
        size = deviation(belief)
        middle = sum(belief.ends) / 2
        trials[name] = trials[name].copy()
        for half in range(2):
            rows = slice(4 * i + 2 * half, 4 * i + 2 * half + 2)
            steps = middle + size * np.array([1.0, -1.0])
            if not belief.pair:
                trials[name][rows] = steps
                weights[2 * i] = 1.0
            elif half == 0:
                trials[name][rows] = steps[:, None]
                weights[2 * i] = (1 + belief.alike) / 2
    count = 4 * max(len(names), 1)
    features = ensemble.features(trials, count, None)
    traps = ensemble.traps(trials, stage, count)
    found = {}
    for role in ensemble.roles:
        dips = np.concatenate([piece.dip for piece in ensemble.outcome(role, features, [traps])[0]])
        halves = (dips[0::2] - dips[1::2])[: weights.size] / 2
        found[role] = float(np.sqrt(weights @ halves**2))
    return found
