"""What is believed of an antenna once it was read: trials moved to where the readings are, and weighed.

Before readings every trial is as likely as any other. Where readings leave many of those, they are weighed
as they are. Else the step of an ensemble Kalman filter, repeated until it rests, leads to the most likely
antenna; trials are drawn around it and each weighed by how much likelier it is than it was to be drawn, so
that the answer does not hang on the step having been straight.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from ...engine.fits import Sweep
from ...engine.sampling import normal_quantile, uniform
from ..trials.ensemble import Ensemble
from ..trials.traps import TUNED, Stage
from .latents import LINE, Latents
from .readings import Altered, Forward, Hoist

TRIALS = 1000
PILOT = 200
SURVIVE = 0.15
"""Share of the pilot that must survive for the trials to be weighed as they are. [1]"""
STEPS, STEP = 12, 0.25
"""Kalman steps at most, and how far apart numbers are put to see what they do. [sigma]"""
WIDER = 1.25
"""How much wider than computed trials are drawn along what was read. [1]"""
OWN_STEPS = 2
"""Kalman steps of each trial's own: after one alone, weights hang on the few trials it served well. [1]"""
ASTRAY, STRAYS = 4.0, 6
"""How much wider one in so many trials is drawn. [1]"""
LEAST = 0.06
"""Share of the trials drawn that must survive for them not to be drawn once more. [1]"""
FEWEST = 60
"""Trials of equal weight that the weighed ones must be worth at least. [1]"""
STREAM = 4096
"""First stream of random numbers here: those of the beliefs lie below."""
BUILT = Stage(name="built", sealed=True)
"""Traps closed as they came out, never brought to their frequency."""


@dataclass(frozen=True, kw_only=True)
class Posterior:
    """Trials (trials, numbers) with weights that add to 1, and what came with them.

    `evidence` is the log of how likely the readings were before they were taken; `misfit` is how far the most
    likely antenna is from beliefs and readings, as a sum of squares. `told` is what each reading tells beyond
    all the others [nats], `strain` how far each is from the most likely antenna [sigma].
    """

    forward: Forward
    z: np.ndarray
    weights: np.ndarray
    evidence: float
    misfit: float
    told: tuple[float, ...]
    strain: tuple[float, ...]
    moved: bool

    @property
    def survivors(self) -> float:
        """How many trials of equal weight these are worth."""
        return float(1 / (self.weights**2).sum())

    def even(self, count: int) -> np.ndarray:
        """Return trials of equal weight, all their numbers."""
        steps = (np.arange(count) + 0.5) / count
        picked = np.searchsorted(np.cumsum(self.weights), steps).clip(0, self.weights.size - 1)
        return self.forward.whole(self.z[picked])


def stage_of(tuned: bool) -> Stage:
    """Return the stage the traps are at when it hangs."""
    return TUNED if tuned else BUILT


def latents_of(ensemble: Ensemble, moves: int, tunings: int, spread: float = 1.0) -> Latents:
    """Return what a trial is made of after moves and tunings, `spread` times as far off as believed."""
    has_line = ensemble.path is not None and ensemble.path.line is not None
    return Latents(ensemble.varying, moves, tunings, has_line, ensemble.wire.end is not None, spread)


def update(
    ensemble: Ensemble,
    hoists: Sequence[Hoist],
    *,
    tuned: bool = True,
    sweeps: Mapping[str, Sweep] | None = None,
    trials: int = TRIALS,
    seed: int = 1,
    altered: Altered | None = None,
    latents: Latents | None = None,
) -> Posterior:
    """Return what is believed once all readings of all hoists are in.

    The last hoist is how it hangs now, read or not. `altered` makes it another antenna than was meant.
    """
    if latents is None:
        latents = latents_of(ensemble, hoists[-1].moves, hoists[-1].tunings)
    forward = Forward(ensemble, latents, hoists, stage_of(tuned), sweeps or {}, altered)
    return weigh(forward, trials, seed)


def weigh(forward: Forward, trials: int, seed: int) -> Posterior:
    """Return trials weighed by the readings, moved to where they are if few would survive."""
    size = forward.size
    if not forward.channels:
        z = _normal(seed, 0, trials, size)
        return _posterior(forward, z, np.zeros(trials), 0.0, np.zeros((0, size)), np.zeros(0), moved=False)
    pilot = _normal(seed, 0, min(PILOT, trials), size)
    _, chance = forward.residuals(pilot)
    share = np.exp(chance - chance.max())
    if share.sum() ** 2 / (share**2).sum() >= SURVIVE * pilot.shape[0]:
        z = _normal(seed, 0, trials, size)
        off, chance = forward.residuals(z)
        best = z[int(np.argmax(chance))]
        _, slopes, off = _sloped(forward, best)
        return _posterior(forward, z, chance, float(off @ off), slopes, off, moved=False)
    nothing = np.zeros(size)
    peak, slopes, off = peak_of(forward, np.array([nothing, pilot[int(np.argmax(chance))]]))
    near = forward.narrowed()
    for attempt in range(2):
        z, weights = _around(near, peak, slopes, trials, seed + attempt, WIDER + attempt / 2)
        share = np.exp(weights - weights.max())
        if share.sum() ** 2 / (share**2).sum() >= LEAST * trials:
            break
        peak, slopes, off = peak_of(forward, z[int(np.argmax(weights))][None])
    misfit = float(peak @ peak + off @ off)
    return _posterior(forward, z, weights, misfit, slopes, off, moved=True)


def _posterior(
    forward: Forward, z: np.ndarray, logs: np.ndarray, misfit: float, slopes: np.ndarray, off: np.ndarray,
    *, moved: bool,
) -> Posterior:  # fmt: skip
    largest = float(logs.max())
    share = np.exp(logs - largest)
    owners = np.array(forward.owners(), int)
    count = len(forward.readings)
    return Posterior(
        forward=forward,
        z=z,
        weights=_levelled(share),
        evidence=largest + math.log(share.mean()),
        misfit=misfit,
        told=_told(slopes, owners, count),
        strain=tuple(float(np.sqrt((off[owners == i] ** 2).sum())) for i in range(count)),
        moved=moved,
    )


def _levelled(share: np.ndarray) -> np.ndarray:
    """Return weights that add to 1, no fewer than `FEWEST` trials counting.

    Where a few trials carry all, an interval of them would be far too narrow: weights are evened out until
    more do, which errs on the wide side.
    """
    power = 1.0
    while True:
        weights = share**power
        weights = weights / weights.sum()
        if 1 / (weights**2).sum() >= min(FEWEST, share.size) or power < 1e-3:
            return weights
        power *= 0.8


def _told(slopes: np.ndarray, owners: np.ndarray, count: int) -> tuple[float, ...]:
    """Return what each reading tells that the others do not: by how much it narrows the belief, in nats."""

    def told(rows: np.ndarray) -> float:
        inside = np.eye(rows.shape[0]) + rows @ rows.T
        return 0.5 * float(np.linalg.slogdet(inside)[1])

    everything = told(slopes)
    return tuple(everything - told(slopes[owners != i]) for i in range(count))


def _normal(seed: int, begin: int, count: int, size: int) -> np.ndarray:
    """Return standard normal numbers (count, size), trial n the same however many are drawn."""
    columns = [uniform(seed, STREAM + i, begin, count) for i in range(size)]
    return normal_quantile(np.array(columns).T) if columns else np.zeros((count, 0))


def _sloped(forward: Forward, z: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return what is at numbers z, and how it changes with each of them."""
    steps = STEP * np.eye(z.size)
    off, _ = forward.residuals(np.concatenate([z[None], z + steps, z - steps]))
    slopes = (off[1 : z.size + 1] - off[z.size + 1 :]).T / (2 * STEP)
    return z, slopes, off[0]


def peak_of(
    forward: Forward, starts: np.ndarray, steps: int = STEPS
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the most likely numbers, with slopes and residuals there: Kalman steps until they rest."""

    def cost(z: np.ndarray) -> np.ndarray:
        off, _ = forward.residuals(z)
        return (off**2).sum(axis=1) + (z**2).sum(axis=1)

    z = starts[int(np.argmin(cost(starts)))]
    parts = np.array([1.0, 0.6, 0.3, 0.1, 0.03])[:, None]
    for _ in range(steps):
        _, slopes, off = _sloped(forward, z)
        # The gain of a Kalman filter on numbers whose own covariance is the unit matrix.
        inside = np.eye(off.size) + slopes @ slopes.T
        goal = slopes.T @ np.linalg.solve(inside, slopes @ z - off)
        step = goal - z
        tries = np.concatenate([z[None], z + parts * step])
        costs = cost(tries)
        best = int(np.argmin(costs))
        gained = costs[0] - costs[best]
        z = tries[best]
        if gained < 1e-2:
            break
    _, slopes, off = _sloped(forward, z)
    return z, slopes, off


def _around(
    near: Forward, peak: np.ndarray, slopes: np.ndarray, count: int, seed: int, wider: float
) -> tuple[np.ndarray, np.ndarray]:
    """Return trials drawn around the most likely one, and the log of what each weighs.

    Across what was read they are drawn as believed before; along it each where Kalman steps of its own lead,
    `wider` than those steps say.
    """
    _, sizes, along = np.linalg.svd(slopes, full_matrices=False)
    e = _normal(seed, 0, count, peak.size)
    inside = e @ along.T
    start = along @ peak
    z = e + (start - inside) @ along
    slope = slopes @ along.T
    narrow = 1 / (1 + sizes**2)
    middle = np.broadcast_to(start, inside.shape)
    for _ in range(OWN_STEPS):
        off, _ = near.residuals(z)
        there = (middle * sizes**2 - off @ slope) * narrow
        z = z + (there - middle) @ along
        middle = there
    # Some are drawn much wider: a trial whose own steps led astray would else outweigh all the others.
    scale, far = (np.minimum(times * np.sqrt(narrow), 1.0) for times in (wider, ASTRAY))
    strays = np.arange(count) % STRAYS == 0
    inside = inside * np.where(strays[:, None], far, scale)
    z = z + inside @ along
    _, chance = near.residuals(z)
    away = middle + inside
    drawn = np.logaddexp(
        _drawn(inside, scale) + math.log(1 - 1 / STRAYS), _drawn(inside, far) - math.log(STRAYS)
    )
    return z, chance - 0.5 * (away**2).sum(axis=1) - drawn


def _drawn(inside: np.ndarray, scale: np.ndarray) -> np.ndarray:
    """Return the log of how likely it was to draw these numbers from normal ones of such a scale."""
    return -0.5 * ((inside / scale) ** 2).sum(axis=1) - np.log(scale).sum()


def at_new_site(
    posterior: Posterior,
    ensemble: Ensemble,
    hoists: Sequence[Hoist],
    *,
    sweeps: Mapping[str, Sweep] | None = None,
    trials: int = TRIALS,
    seed: int = 1,
) -> Posterior:
    """Return what is believed of the same antenna elsewhere: what belongs to it is kept, the site forgotten.

    What is kept is put into a normal distribution of the same mean and spread. `ensemble` is that of the new
    site with the same computed wires, `hoists` are how it hung there.
    """
    old, last = posterior.forward.latents, hoists[-1]
    latents = latents_of(ensemble, last.moves, last.tunings)
    z = posterior.even(trials)[:, : old.size]
    basis, origin = np.eye(latents.size), np.zeros(latents.size)
    kept = old.kept()
    pairs = [
        (i, latents.columns[name].start + n)
        for name, columns in old.columns.items()
        if name in latents.columns
        for n, i in enumerate(range(columns.start, columns.stop))
        if kept[i]
    ]
    here, there = (np.array(column) for column in zip(*pairs, strict=True))
    spread = np.linalg.cholesky(np.cov(z[:, here].T) + 1e-6 * np.eye(here.size))
    origin[there] = z[:, here].mean(axis=0)
    basis[np.ix_(there, there)] = spread.T
    stage = posterior.forward.stage
    forward = Forward(ensemble, latents, hoists, stage, sweeps or {}, basis=basis, origin=origin)
    return weigh(forward, trials, seed)


@dataclass(frozen=True, kw_only=True)
class Learned:
    """One thing that is believed: 5, 50 and 95 of 100 trials before the readings and after them.

    `belongs` is antenna, site or line: what belongs to the antenna stays with it at another site.
    """

    code: str
    belongs: str
    dimension: str
    before: tuple[float, float, float]
    after: tuple[float, float, float]


def learned(posterior: Posterior, count: int = 400) -> tuple[Learned, ...]:
    """Return what is believed about traps, wires, height, soil, site and line, before and after."""
    forward = posterior.forward
    prior = forward.whole(_normal(1, 0, count, forward.size))
    found = []
    before, after = (
        _quantities(forward, z[:, : forward.latents.size]) for z in (prior, posterior.even(count))
    )
    for code, (belongs, dimension, values) in after.items():
        ends = [np.quantile(v, (0.05, 0.5, 0.95)) for v in (before[code][2], values)]
        low, high = (tuple(float(x) for x in three) for three in ends)
        found.append(Learned(code=code, belongs=belongs, dimension=dimension, before=low, after=high))
    return tuple(found)


def _quantities(forward: Forward, z: np.ndarray) -> dict[str, tuple[str, str, np.ndarray]]:
    ensemble, hoist, latents = forward.ensemble, forward.hoists[-1], forward.latents
    draws, count = latents.draws(z, hoist.tunings), z.shape[0]
    places = ensemble.places(draws, count, latents.change(z, hoist.change, hoist.moves))
    found: dict[str, tuple[str, str, np.ndarray]] = {}
    traps = ensemble.traps(draws, forward.stage_at(hoist), count)
    if traps is not None and ensemble.of_traps is not None:
        resonance = ensemble.of_traps.resonance(traps)
        found["traps"] = "antenna", "frequency", resonance.mean(axis=0)
        found["traps_apart"] = "antenna", "frequency", np.abs(resonance[0] - resonance[1])
    for wire in ("inner", "end"):
        own = getattr(ensemble.wire, wire)
        if own is not None:
            found[wire] = "antenna", "length", own + places[wire]
    if "height" in ensemble.varying or "sag" in ensemble.varying:
        found["height"] = "site", "length", ensemble.wire.height + places["height"]
    if "soil" in ensemble.varying:
        found["soil"] = "site", "ratio", places["soil"]
    if "site" in ensemble.varying:
        found["site"] = "site", "ratio", places["site"]
    for name in latents.columns:
        if name in LINE:
            found[name] = "line", "ratio", np.expm1(LINE[name] * z[:, latents.columns[name].start])
    return found
