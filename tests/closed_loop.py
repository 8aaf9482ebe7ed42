"""Closed loop: antennas as they come out, solved from scratch; readings with noise; the advice followed."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from tests.hung_antenna import HONEST, WIDER, Hung
from trapdesk.services.antenna.solve import solve
from trapdesk.services.hung.faults import Bench, diagnose
from trapdesk.services.hung.moves import Prospects, advise
from trapdesk.services.hung.readings import Hoist, dips
from trapdesk.services.hung.updating import stage_of, update
from trapdesk.services.trials.ensemble import Ensemble
from trapdesk.store import store

PRESETS = ("40-20-vee", "80-40-flat", "20-10-flat")
MOST_LOWERINGS = 6


def ensemble_of(name):
    """Return the ensemble of a preset."""
    return Ensemble(solve(store.find(name).design))


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
    return float(dips(frequency, (((swr - 1) / (swr + 1)) ** 2)[None])[0])


@dataclass
class Story:
    """How one antenna went: lowerings until it met the limit (None: never), why it ended, cut too short.

    `too_short` is needing more wire than there is with nothing cut but what was safe; `cut_short` the same
    where a plain rule cuts what it shortens. `said` is what the advice says once the limit is met.
    """

    met_after: int | None = None
    ended: str = ""
    worst: list = field(default_factory=list)
    too_short: bool = False
    cut_short: bool = False
    called: str = ""
    said: str = ""
    moves: list = field(default_factory=list)


def advised(ensemble, bench, hung, random, read, seed):
    """Follow the advice until the limit is met, or it says stop, or calls the antenna faulty."""
    story = Story()
    hoists, change = [], {"inner": 0.0, "end": 0.0}
    reserve = ensemble.design.antenna.lengths.reserve
    left = {wire: reserve for wire in change}
    for lowering in range(MOST_LOWERINGS + 1):
        view = hung.hang(change, lowering)
        worst = view.worst()
        story.worst.append(worst)
        if worst <= ensemble.design.station.swr_limit:
            story.met_after = lowering
        readings = view.read_dips(random) if read == "dips" else view.read_meter(random)
        hoists.append(Hoist(readings=readings, change=dict(change), moves=lowering, tunings=hung.tunings))
        diagnosis = diagnose(bench, hoists) if story.met_after is None else None
        if diagnosis and (diagnosis.named or diagnosis.misfits):
            story.called = diagnosis.named[0].code if diagnosis.named else "misfits"
            story.ended = f"called {story.called}"
            return story
        advice = advise(update(ensemble, hoists, seed=seed), can_tune=True)
        if advice.verdict == "measure":
            # It says to read the SWR at the wanted edges, which takes no lowering.
            more = view.read_meter(random, 2, wanted=True)
            hoists[-1] = replace(hoists[-1], readings=(*readings, *more))
            advice = advise(update(ensemble, hoists, seed=seed), can_tune=True)
        if story.met_after is not None:
            story.said = advice.verdict
            return story
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


def plain(ensemble, hung, random, *, learning=False, read="dips"):
    """Scale lengths with frequency: the inner wire by the upper dip, the whole side by the lower one.

    With `learning` each band's scale is corrected by what the last move really did to its dip. Where there is
    only a meter, the dip is where the computed curve fits best what the meter shows. It folds, with as much
    wire to let out as was left on.
    """
    story = Story()
    scale, before = {"upper": 1.0, "lower": 1.0}, None
    change = {"inner": 0.0, "end": 0.0}
    reserve = ensemble.design.antenna.lengths.reserve
    left = {wire: reserve for wire in change}
    bands = dict(ensemble.design.bands.items())
    wire = ensemble.wire
    for lowering in range(MOST_LOWERINGS + 1):
        view = hung.hang(change, lowering)
        worst = view.worst()
        story.worst.append(worst)
        if worst <= ensemble.design.station.swr_limit:
            story.met_after = lowering
            return story
        if read == "dips":
            seen = {reading.subject: reading.value for reading in view.read_dips(random)}
        else:
            shown = view.read_meter(random)
            seen = {role: by_meter(ensemble, role, [r for r in shown if r.subject == role]) for role in bands}
        misses = {role: value / bands[role].target - 1 for role, value in seen.items()}
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
        for name, value in (("inner", more), ("end", whole - more)):
            change[name] += value
            story.too_short |= change[name] > reserve
            # Who cuts instead of folding has no more than is left; a centimetre is nothing.
            story.cut_short |= change[name] > left[name] + 0.01
            left[name] = min(left[name], change[name]) if value < 0 else max(left[name], change[name])
    story.ended = "too many"
    return story


def by_meter(ensemble, role, readings):
    """Return the dip that fits a meter's readings best if the curve is the computed one, moved along."""
    nothing = ensemble.nominal()
    features = ensemble.features(nothing, 1, {wire: np.zeros(1) for wire in ("inner", "end")})
    (outcome,) = ensemble.outcome(role, features, [ensemble.traps(nothing, stage_of(True), 1)])[0]
    frequency = np.asarray(ensemble.grids[role].frequency)
    size = np.sqrt(outcome.reflection[0])
    curve = np.log((1 + size) / (1 - size))
    moved = np.linspace(-0.06, 0.06, 601)
    off = 1e-3 * moved**2
    for reading in readings:
        value = np.interp(reading.frequency / (1 + moved), frequency, curve)
        low, high = np.log(reading.value.low), np.log(min(reading.value.high, 30.0))
        off += np.maximum(np.maximum(low - value, value - high), 0.0) ** 2
        if np.isfinite(reading.value.high):
            off += 0.01 * (value - (low + high) / 2) ** 2
    return float(outcome.dip[0] * (1 + moved[int(np.argmin(off))]))


def savable(ensemble, hung):
    """Return whether any wire length met the limit: a search with full solves from many starts at once."""
    limit, side = ensemble.design.station.swr_limit, ensemble.wire.side
    steps = side * np.linspace(-0.04, 0.04, 5)
    seen = {}

    def worst(there):
        if there not in seen:
            seen[there] = hung.hang({"inner": there[0], "end": there[1]}).worst()
        return seen[there]

    starts = [(round(a, 4), round(b, 4)) for a in steps for b in steps]
    for at in sorted(starts, key=worst)[:3]:
        best, step = worst(at), 0.01 * side
        while step > 0.004:
            around = [(a, b) for a in (-1, 0, 1) for b in (-1, 0, 1)]
            tries = [(round(at[0] + step * a, 4), round(at[1] + step * b, 4)) for a, b in around]
            at = min(tries, key=worst)
            if worst(at) <= limit:
                return True
            if worst(at) >= best - 1e-4:
                step /= 2
            best = min(best, worst(at))
    return min(seen.values()) <= limit


def study(name, number, seed, *, world=WIDER, read="dips", rule="advice"):
    """Return the stories of many antennas."""
    ensemble = ensemble_of(name)
    bench = Bench(ensemble)
    stories = []
    for n in range(number):
        random = np.random.default_rng((seed, n))
        hung = Hung(ensemble, random, world)
        if rule == "advice":
            story = advised(ensemble, bench, hung, random, read, n + 1)
        else:
            story = plain(ensemble, hung, random, learning=rule == "plain learning", read=read)
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
    found = {"antennas": len(stories), "no length": len(hopeless), "median": float(np.median(counts))}
    found |= {f"within {most}": float(np.mean([c <= most for c in counts])) for most in (0, 1, 2, 4)}
    met = [s for s in rest if s.met_after is not None and s.said]
    return found | {
        "too short": float(np.mean([s.too_short for s in stories])),
        "too short if cut": float(np.mean([s.cut_short for s in stories])),
        "called faulty": float(np.mean([bool(s.called) for s in stories])),
        "told to move on": float(np.mean([s.said not in ("stop", "measure") for s in met])) if met else 0.0,
    }
