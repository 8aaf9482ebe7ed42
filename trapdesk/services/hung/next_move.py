"""From a design, what was kept of it and what is read now, to what is believed, broken, and to do."""

from __future__ import annotations

import itertools
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from ...design.design import Design, Site
from ...design.history import Again, History, Step, TrapsWere
from ...design.reading_kinds import Interval, Reading
from ...engine.fits import Sweep
from ..antenna.figures import Figures
from ..antenna.response import MARGIN
from ..antenna.solve import solve
from ..trials.ensemble import Ensemble
from .faults import Bench, Diagnosis, diagnose, of_other_band
from .moves import Advice, Prospects, advise
from .readings import Hoist, ReadingUnusable
from .updating import Learned, Posterior, at_new_site, learned, update

APART = 4.0
"""Two readings of the same thing farther apart than this contradict each other. [sigma]"""
FARTHEST_DIP = 0.35
"""How far from its band a dip may be read, relative. [1]"""
LITTLE = 0.4
"""What all readings must tell, in nats, for a move to be made of them. [1], an estimate"""


@dataclass(frozen=True, kw_only=True)
class NextMove:
    """What is believed and what to do. `worst_swr` by band is that of 50 and of 95 of 100 as it hangs.

    `cannot_tell` where what was read says too little, `unread` where nothing was read at all.
    """

    figures: Figures
    posterior: Posterior
    diagnosis: Diagnosis
    advice: Advice
    learned: tuple[Learned, ...]
    worst_swr: Mapping[str, tuple[float, float]]
    dips: Mapping[str, float]
    unread: bool
    cannot_tell: bool
    new_site: bool


def hoists_of(
    design: Design, past: Sequence[Sequence[Reading]], now: Sequence[Reading], site: Site | None
) -> list[tuple[Site, list[Hoist]]]:
    """Return every way it hung, site by site; the last of each is how it came to hang there in the end.

    `past` holds the readings of all steps of all sites in order; a `site` is where it hangs now instead.
    """
    history = design.history or History()
    stays: list[tuple[Site, tuple[Step, ...]]] = [(stay.site, stay.steps) for stay in history.stays]
    stays.append((design.site, history.steps))
    if site is not None:
        stays.append((site, ()))
    found, read = [], iter(past)
    change, moves, tunings = {"inner": 0.0, "end": 0.0}, 0, 0
    for place, (there, steps) in enumerate(stays, start=1):
        hoists = []
        for step in steps:
            readings = tuple(next(read))
            hoists.append(Hoist(readings=readings, change=dict(change), moves=moves, tunings=tunings))
            change = {"inner": change["inner"] + step.inner, "end": change["end"] + step.end}
            moves, tunings = moves + 1, tunings + (step.traps is Again.YES)
        readings = tuple(now) if place == len(stays) else ()
        hoists.append(Hoist(readings=readings, change=dict(change), moves=moves, tunings=tunings))
        found.append((there, hoists))
    return found


def were_tuned(design: Design) -> bool:
    """Return whether the traps were brought to their frequency; measured ones are what was measured."""
    trap, history = design.antenna.trap, design.history
    if trap is not None and trap.measured is not None and trap.measured.resonance is not None:
        return False
    return history is None or history.traps is TrapsWere.TUNED


def next_move(
    design: Design,
    past: Sequence[Sequence[Reading]],
    readings: Sequence[Reading],
    sweeps: Mapping[str, Sweep],
    *,
    site: Design | None = None,
) -> NextMove:
    """Return what to do next; with a design of another site, at that site, which the readings are then of.

    Raises ReadingUnusable for a reading that cannot be of this antenna.
    """
    _check(design, readings)
    plain = replace(design, history=None)
    tuned = were_tuned(design)
    (first, hoists), *later = hoists_of(design, past, readings, None if site is None else site.site)
    figures = solve(replace(plain, site=first))
    ensemble = Ensemble(figures)
    posterior = update(ensemble, hoists, tuned=tuned, sweeps=sweeps)
    read = [reading for hoist in hoists for reading in hoist.readings]
    for there, hoists in later:
        # The wires are cut: elsewhere they are what they were, whatever that site would have had computed.
        lengths = replace(plain.antenna.lengths, inner=figures.wire.inner, end=figures.wire.end)
        plain = replace(plain, antenna=replace(plain.antenna, lengths=lengths))
        figures = solve(replace(plain, site=there))
        ensemble = Ensemble(figures)
        posterior = at_new_site(posterior, ensemble, hoists, sweeps=sweeps)
        read += [reading for hoist in hoists for reading in hoist.readings]
    diagnosis = Diagnosis(named=(), looked_at=(), healthy_misfit=posterior.misfit, misfits=False)
    if any(hoist.readings for hoist in hoists):
        diagnosis = diagnose(Bench(ensemble), hoists, tuned=tuned, sweeps=sweeps)
    can_tune = figures.trap is not None and bool(figures.trap.adjustments)
    advice = advise(posterior, can_tune=can_tune)
    prospects = Prospects(posterior)
    swr = {role: value[0] for role, value in prospects.worst([{}]).items()}
    little = sum(posterior.told) < LITTLE and posterior.survivors > 0.7 * posterior.weights.size
    return NextMove(
        figures=figures,
        posterior=posterior,
        diagnosis=diagnosis,
        advice=advice,
        learned=learned(posterior),
        worst_swr={r: (float(np.quantile(v, 0.5)), float(np.quantile(v, 0.95))) for r, v in swr.items()},
        dips=_dips_after(prospects, advice),
        unread=not read,
        cannot_tell=bool(read) and little and not later,
        new_site=bool(later),
    )


def _dips_after(prospects: Prospects, advice: Advice) -> dict[str, float]:
    """Return where the dips should be after the move, where they are judged: the middle of the trials."""
    change = {wire: value + advice.best.change.get(wire, 0.0) for wire, value in prospects.change.items()}
    features = prospects.ensemble.features(prospects.draws, prospects.count, change)
    traps = prospects.tuned_traps if advice.best.tuning else prospects.traps
    found = {}
    for role in prospects.ensemble.roles:
        pieces = prospects.ensemble.outcome(role, features, [traps])[0]
        found[role] = float(np.median(np.concatenate([piece.dip for piece in pieces])))
    return found


def step_after(readings: str, advice: Advice) -> Step:
    """Return what is kept of readings and the move that follows them."""
    return Step(
        readings=readings,
        inner=round(advice.best.change.get("inner", 0.0), 4),
        end=round(advice.best.change.get("end", 0.0), 4),
        traps=Again.YES if advice.best.tuning else Again.NO,
    )


def _check(design: Design, readings: Sequence[Reading]) -> None:
    """Refuse what cannot be of this antenna, and what contradicts itself."""
    bands = dict(design.bands.items())
    for reading in readings:
        if reading.subject == "line":
            if design.station.line is None:
                raise ReadingUnusable("no_line", reading.name)
            continue
        if reading.subject not in bands:
            raise ReadingUnusable("no_such_band", reading.name)
        other = of_other_band(design, reading)
        if other is not None:
            raise ReadingUnusable(f"wrong_band_{other}", reading.name)
        band = bands[reading.subject]
        frequency = reading.frequency
        if reading.what == "dip" and isinstance(reading.value, float):
            low, high = band.low * (1 - FARTHEST_DIP), band.high * (1 + FARTHEST_DIP)
            if not low <= reading.value <= high:
                raise ReadingUnusable("far_from_the_band", reading.name, low_hz=low, high_hz=high)
        elif frequency is not None:
            low, high = band.low * (1 - MARGIN), band.high * (1 + MARGIN)
            if not low <= frequency <= high:
                raise ReadingUnusable("far_from_the_band", reading.name, low_hz=low, high_hz=high)
    for one, other in itertools.combinations(readings, 2):
        if _same(one, other) and _apart(one, other) > APART:
            raise ReadingUnusable("contradict", one.name)


def _same(one: Reading, other: Reading) -> bool:
    at = [str(r.options.get("at", "radio")) for r in (one, other)]
    return one.name == other.name and one.frequency == other.frequency and at[0] == at[1]


def _apart(one: Reading, other: Reading) -> float:
    """Return how far two readings of the same thing are apart, in sigma."""
    a, b = one.value, other.value
    if isinstance(a, Interval) and isinstance(b, Interval):
        gap = max(a.low - b.high, b.low - a.high, 0.0)
        size = max(min(a.low, b.low), 1.0)
        return gap / math.hypot(one.doubt.of(size), other.doubt.of(size))
    if isinstance(a, str) or isinstance(b, str) or isinstance(a, Interval) or isinstance(b, Interval):
        return 0.0
    return abs(a - b) / math.hypot(one.doubt.of(abs(a)), other.doubt.of(abs(b)))
