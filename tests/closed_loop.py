"""Closed loop: antennas as they come out, solved from scratch; readings with noise; the advice followed."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from tests.hung_antenna import HONEST, WIDER, Hung
from trapdesk.services.antenna_readings import Hoist
from trapdesk.services.ensemble import Ensemble
from trapdesk.services.moves import Prospects, advise
from trapdesk.services.solve import solve
from trapdesk.services.updating import update
from trapdesk.store import store

PRESETS = ("40-20-vee", "80-40-flat", "20-10-flat")
MOST_LOWERINGS = 6


def ensemble_of(name):
    """Return the ensemble of a preset."""
    return Ensemble(solve(store.find(name).design))


def weighted(values, weights, share):
    order = np.argsort(values)
    return float(np.interp(share, np.cumsum(weights[order]) - weights[order] / 2, values[order]))


def honest(ensemble, number, seed, read="dips"):
    """Return for each quantity in how many of the antennas the stated 90 % interval holds the truth."""
    inside: dict[str, list[bool]] = {}
    for n in range(number):
        random = np.random.default_rng((seed, n))
        hung = Hung(ensemble, random, HONEST)
        view = hung.hang({})
        readings = view.read_dips(random) if read == "dips" else view.read_meter(random)
        posterior = update(ensemble, [Hoist(readings=readings)], seed=n + 1)
        prospects = Prospects(posterior)
        after = {wire: float(np.nanmedian(v)) for wire, v in prospects.needs().items()}
        truth, believed = truths(ensemble, hung, view, prospects, after)
        for name, value in truth.items():
            low, high = np.nanquantile(believed[name], (0.05, 0.95))
            inside.setdefault(name, []).append(bool(low <= value <= high))
    return {name: float(np.mean(values)) for name, values in inside.items()}


def truths(ensemble, hung, view, prospects, after):
    """Return true values and what trials say of them: traps, site, dips and SWR after a move."""
    truth, believed = {}, {}
    draws = hung.draws()
    believed["site"], truth["site"] = prospects.draws["site"], draws["site"][0]
    believed["height"] = ensemble.places(prospects.draws, prospects.count)["height"]
    truth["height"] = ensemble.places(draws, 1)["height"][0]
    if ensemble.trap is not None:
        resonance = ensemble.of_traps.resonance(prospects.traps)
        believed["traps"], truth["traps"] = (
            resonance.mean(axis=0),
            ensemble.of_traps.resonance(view.traps).mean(),
        )
    moved = hung.hang(after)
    change = {w: prospects.change[w] + after.get(w, 0.0) for w in prospects.change}
    features = ensemble.features(prospects.draws, prospects.count, change)
    for role in ensemble.roles:
        pieces = ensemble.outcome(role, features, [prospects.traps])[0]
        believed[f"{role} dip"] = np.concatenate([piece.dip for piece in pieces])
        reflection = np.concatenate([piece.worst for piece in pieces])
        believed[f"{role} worst"] = reflection
        band = dict(ensemble.design.bands.items())[role]
        s = moved.swr(role, np.linspace(*band.wanted_edges, 9), judged=True).max()
        truth[f"{role} worst"] = ((s - 1) / (s + 1)) ** 2
        frequency = moved.span(role)
        s = moved.swr(role, frequency, judged=True)
        truth[f"{role} dip"] = refined(frequency, s)
    return truth, believed


def refined(frequency, swr):
    from trapdesk.services.antenna_readings import dips

    return float(dips(frequency, (((swr - 1) / (swr + 1)) ** 2)[None])[0])


@dataclass
class Story:
    """How one antenna went: lowerings until it met the limit (None: never), why it ended, cut too short."""

    met_after: int | None = None
    ended: str = ""
    worst: list = field(default_factory=list)
    too_short: bool = False
    moves: list = field(default_factory=list)


def advised(ensemble, hung, random, read, seed):
    """Follow the advice until it says stop."""
    story = Story()
    hoists, change = [], {"inner": 0.0, "end": 0.0}
    reserve = ensemble.design.antenna.lengths.reserve
    left = {wire: reserve for wire in change}
    for lowering in range(MOST_LOWERINGS + 1):
        view = hung.hang(change, lowering)
        worst = view.worst()
        story.worst.append(worst)
        if worst <= ensemble.design.station.swr_limit and story.met_after is None:
            story.met_after = lowering
            return story
        readings = view.read_dips(random) if read == "dips" else view.read_meter(random)
        hoists.append(Hoist(readings=readings, change=dict(change), moves=lowering, tunings=hung.tunings))
        posterior = update(ensemble, hoists, seed=seed)
        advice = advise(posterior, can_tune=True)
        if advice.verdict in ("stop", "measure"):
            story.ended = f"{advice.verdict} {advice.now.all_bands:.2f} {advice.best.all_bands:.2f}"
            return story
        story.moves.append((advice.best.name, dict(advice.best.change), advice.best.all_bands))
        for wire, more in advice.best.change.items():
            change[wire] += more
            if change[wire] > left[wire] + 1e-6:
                story.too_short = True
                left[wire] = change[wire] + reserve
            left[wire] -= advice.cut[wire]
        hung.tunings += advice.best.tuning
    story.ended = "too many"
    return story


def plain(ensemble, hung, random, *, learning=False):
    """Scale lengths with frequency: the inner wire by the upper dip, the whole side by the lower one.

    With `learning` each band's scale is corrected by what the last move really did to its dip.
    """
    story = Story()
    scale, before = {"upper": 1.0, "lower": 1.0}, None
    change = {"inner": 0.0, "end": 0.0}
    bands = dict(ensemble.design.bands.items())
    wire = ensemble.wire
    for lowering in range(MOST_LOWERINGS + 1):
        view = hung.hang(change, lowering)
        worst = view.worst()
        story.worst.append(worst)
        if worst <= ensemble.design.station.swr_limit:
            story.met_after = lowering
            return story
        dips = {reading.subject: reading.value for reading in view.read_dips(random)}
        misses = {role: value / bands[role].target - 1 for role, value in dips.items()}
        if learning and before is not None:
            for role, miss in misses.items():
                gained = before[role] - miss
                if abs(gained) > 1e-3:
                    scale[role] = float(np.clip(scale[role] * before[role] / gained, 0.3, 6.0))
        before = misses
        inner = wire.inner + change["inner"]
        more = inner * misses["upper"] * scale["upper"]
        side = wire.side + change["inner"] + change["end"]
        whole = side * misses["lower"] * scale["lower"]
        change["inner"] += more
        change["end"] += whole - more
    story.ended = "too many"
    return story


def savable(ensemble, hung):
    """Return whether any wire length met the limit: a search with full solves."""
    best, at, step = np.inf, np.zeros(2), 0.16
    seen = {}
    for _ in range(60):
        for direction in [(0, 0), (1, 0), (-1, 0), (0, 1), (0, -1), (1, -1), (-1, 1), (1, 1), (-1, -1)]:
            there = tuple(np.round(at + step * np.array(direction), 4))
            if there not in seen:
                seen[there] = hung.hang({"inner": there[0], "end": there[1]}).worst()
        i = min(seen, key=seen.get)
        if seen[i] <= ensemble.design.station.swr_limit:
            return True
        if seen[i] >= best - 1e-4:
            step /= 2
            if step < 0.004:
                break
        best, at = seen[i], np.array(i)
    return False


def study(name, number, seed, *, world=WIDER, read="dips", rule="advice"):
    """Return the stories of many antennas."""
    ensemble = ensemble_of(name)
    stories = []
    for n in range(number):
        random = np.random.default_rng((seed, n))
        hung = Hung(ensemble, random, world)
        if rule == "advice":
            story = advised(ensemble, hung, random, read, n + 1)
        else:
            story = plain(ensemble, hung, random, learning=rule == "plain learning")
        if story.met_after is None:
            hung.tunings = 0
            story.ended += "" if savable(ensemble, hung) else "; no length"
        stories.append(story)
    return stories


def table(stories):
    """Return what the stories come to."""
    hopeless = [s for s in stories if s.ended.endswith("no length")]
    rest = [s for s in stories if s not in hopeless]
    counts = [99 if s.met_after is None else s.met_after for s in rest]
    return {
        "antennas": len(stories),
        "no length": len(hopeless),
        "median": float(np.median(counts)),
        "within 0": float(np.mean([c <= 0 for c in counts])),
        "within 1": float(np.mean([c <= 1 for c in counts])),
        "within 2": float(np.mean([c <= 2 for c in counts])),
        "within 4": float(np.mean([c <= 4 for c in counts])),
        "too short": float(np.mean([s.too_short for s in stories])),
    }
