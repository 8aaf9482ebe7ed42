"""The ensemble as text and JSON: chances, histograms, causes, what would help, and how much wire to leave."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping

import numpy as np

from ..design.design import Design
from ..design.doubts import Meaning
from ..errors import visible
from ..services.trials.advice import Change, ForYield, Improvement, Improvements
from ..services.trials.beliefs import CAUSES, Belief
from ..services.trials.causes import CauseShares
from ..services.trials.tolerance import Allowance, Scatter, StageScatter, Tolerance, Yield
from .layout import WIDTH, fitted, folded
from .shown import LARGEST_SWR, about, centimetres, measured, megahertz, swr

STAGES: dict[str, str] = {
    "as_cut": "as cut",
    "tuned": "traps tuned",
    "aimed": "brought to aim",
    "wet": "wet",
}
STAGE_HELP: dict[str, str] = {
    "as_cut": "built and hung by the sheet, not yet tuned or sealed",
    "tuned": "traps brought to their frequency on the bench, sealed if the design says so",
    "aimed": "wires folded or cut until resonance is at both aims",
    "wet": "the same antenna in the rain, at another temperature",
}
CAUSE_NAMES: dict[str, str] = {
    "capacitor": "capacitor",
    "coil": "coil",
    "self_capacitance": "self-capacitance",
    "q": "Q",
    "tuning": "trap reading",
    "sealing": "sealing",
    "temperature": "temperature",
    "rain": "rain",
    "lengths": "lengths, both sides",
    "fastening": "lengths, each wire",
    "height": "height",
    "sag": "sag",
    "soil": "soil",
    "coating": "coating",
    "site": "site",
    "aim": "aim reading",
    "ratio": "coil to capacitor",
}
STEPS: dict[str, str] = {
    "tighter_capacitor": "capacitors of 1 %",
    "match_traps": "measure coils and capacitors to 1 % and pair like with like",
    "tune_traps": "tune both traps on the bench, before any sealing",
    "seal_then_tune": "seal both traps first, then tune them",
    "bring_to_aim": "bring the wires to the aims",
}
CHANGES: dict[str, str] = {"resonance": "trap resonance", "capacitance": "capacitor", "aim": "aim"}
RAMP = " .:-=+*#%@"
"""From none to most, in characters that every terminal has."""
STRIP = 50
MOST_CAUSES = 4
_RELATIVE = {
    name: "length"
    for name in ("marking_inner", "marking_end", "fastening_inner", "fastening_end", "height", "sag")
}
_OTHER = {"turns": "count", "temperature": "K", "weather": "K"}
_QUANTITIES: dict[str, str] = {
    "coil": "inductance",
    "turns": "turns rounded",
    "pitch": "pitch",
    "former": "coil diameter",
    "marking_inner": "inner wire",
    "marking_end": "end wire",
    "fastening_inner": "each inner wire",
    "fastening_end": "each end wire",
    "creep": "creep",
    "weather": "temperature when wet",
}


def percent(share: float) -> str:
    """Return a share in per cent, finer near nothing and all; never all when some are missing."""
    if share in (0.0, 1.0):
        return f"{100 * share:.0f} %"
    number = 100 * share
    if 2 <= number <= 98:
        return f"{number:.0f} %"
    return f"{min(max(number, 0.1), 99.9):.1f} %"


def chance(within: Yield) -> str:
    """Return a yield with its 95 % interval, as fine as that is narrow."""
    low, high = 100 * within.low, 100 * within.high
    wide = high - low
    digits = 0 if wide >= 10 or (wide >= 1 and 2 <= low and high <= 98) else 1
    if digits and (high < 0.1 or low > 99.9 or 0 < low < 0.05 or 99.95 < high < 100):
        digits = 2
    share = percent(within.share)
    if digits and 0 < within.share < 1:
        step = 10.0**-digits
        share = f"{min(max(100 * within.share, step), 100 - step):.{digits}f} %"
    return f"{share} ({_end(low, digits, math.floor)}-{_end(high, digits, math.ceil)})"


def _end(value: float, digits: int, outward: Callable[[float], int]) -> str:
    """Return an end of an interval, rounded outward; nothing and all only where they are meant."""
    if value in (0.0, 100.0):
        return f"{value:.0f}"
    step = 10.0**-digits
    return f"{min(outward(round(value / step, 6)) * step, 100.0 - step):.{digits}f}"


def told_stages(found: Tolerance) -> Iterator[tuple[str, StageScatter]]:
    """Yield the stages there are something to tell of: without traps none is tuned."""
    for name, stage in found.stages.items():
        if name != "tuned" or found.design.antenna.trap is not None:
            yield name, stage


def trials_line(found: Tolerance) -> str:
    """Return how many trials, and by which seed."""
    told = f"{found.trials} trials, seed {found.seed}"
    return f"{told}; stopped before {found.wanted_trials}" if found.stopped else told


def sheet_lines(found: Tolerance) -> list[str]:
    """Return the cutting line of the sheet, and what to expect of it."""
    alone = len(found.allowances) == 1
    parts = [
        f"{wire_name(one, alone)} {centimetres(one.length)} beyond its mark"
        for one in found.allowances.values()
    ]
    text = (
        f"{', '.join(parts)}: then the chance of having to add wire stays below {percent(found.risk)}"
        f" ({trials_line(found)})."
    )
    return [*folded("  leave       ", text), *folded("  chances     ", f"{summary(found)}.")]


def card_line(found: Tolerance) -> str:
    """Return the hill card's line: how much to leave, and how likely it is right after each step."""
    alone = len(found.allowances) == 1
    leave = ", ".join(
        f"{wire_name(one, alone)} {centimetres(one.length)}" for one in found.allowances.values()
    )
    told = ", ".join(
        f"{STAGES[name]} {percent(stage.within.share)}" for name, stage in told_stages(found) if name != "wet"
    )
    return f"Leave {leave}. Chance to hold the SWR: {told}."


def lines(found: Tolerance, advice: Improvements | None = None, chosen: ForYield | None = None) -> list[str]:
    """Return everything as lines of at most 79 columns."""
    out = [*folded("", f"TOLERANCE: {visible(found.design.title, 50)}; {trials_line(found)}"), ""]
    for part in (yields(found), scatters(found), causes(found), cutting(found)):
        out += [*part, ""]
    if advice is not None:
        out += [*helps(advice), ""]
    if chosen is not None:
        out += [*choice(chosen), ""]
    return fitted([*out, *varies(found)])


def summary(found: Tolerance) -> str:
    """Return the yield of every stage in one line, for where there is no more room."""
    parts = [f"{STAGES[name]} {percent(stage.within.share)}" for name, stage in told_stages(found)]
    return f"within the SWR limit: {', '.join(parts)}"


def yields(found: Tolerance) -> list[str]:
    """Return the chance at every stage, of all bands and of each."""
    limit = found.design.station.swr_limit
    bands = next(iter(found.stages.values())).bands
    which = "the whole wanted part" if len(bands) == 1 else "the whole wanted parts of both bands"
    out = folded("", f"Of 100 antennas, how many keep SWR {limit:.3g} over {which}")
    names = "".join(f"{visible(band.name, 12):>21}" for band in bands.values())
    all_bands = "" if len(bands) == 1 else f"{'both':>21}"
    out += [f"  {'':<14}{all_bands}{names}"]
    for name, stage in told_stages(found):
        shares = [] if len(bands) == 1 else [stage.within]
        shares += [band.within for band in stage.bands.values()]
        # They are so many of 100: without the sign there is room between them.
        cells = (chance(share).replace(" %", "") for share in shares)
        out += [f"  {STAGES[name]:<14}" + "".join(f"{cell:>21}" for cell in cells)]
    told = "In brackets: between these it lies 95 times of 100; more trials narrow it."
    if not found.varying:
        told = "Nothing varies: all antennas are the computed one, whatever the brackets say."
    out += folded("  ", told)
    for name, _ in told_stages(found):
        out += folded(f"  {STAGES[name] + ':':<16} ", _stage_help(found, name))
    lost = {name: stage.unreached for name, stage in found.stages.items() if stage.unreached > 0}
    if lost:
        share = percent(max(lost.values()))
        what = "the band to its aim" if len(bands) == 1 else "both bands to their aims"
        out += folded("  ", f"In {share} no wire length near the computed ones brought {what}.")
    return out


def _stage_help(found: Tolerance, name: str) -> str:
    """Return what a stage is, in words that fit the bands and the traps there are."""
    text = STAGE_HELP[name]
    if found.design.bands.upper is None:
        text = text.replace("both aims", "the aim")
    return text if found.design.antenna.trap is not None else text.replace(", not yet tuned or sealed", "")


def scatters(found: Tolerance) -> list[str]:
    """Return the scatter of every result, band by band, stage by stage, and where the dips and SWR lie."""
    out = ["What 5 to 95 of 100 antennas do; in brackets every doubt at its end at once"]
    for role in next(iter(found.stages.values())).bands:
        stages = {name: stage.bands[role] for name, stage in told_stages(found)}
        first = next(iter(stages.values()))
        out += [f"{visible(first.name, 12)}"]
        out += [f"  {'':<15}{'dip, MHz':>27}{'SWR at the aim':>17}{'worst SWR':>18}"]
        for name, band in stages.items():
            dip, aim, worst = (band.results[key] for key in ("dip", "aim_swr", "worst_swr"))
            ends = f"({_mega(dip.least, 2)}-{_mega(dip.most, 2)})"
            dips = f"{_mega(dip.low)}-{_mega(dip.high)} {ends}"
            out += [f"  {STAGES[name]:<15}{dips:>27}{_swr_range(aim):>17}{_swr_range(worst):>18}"]
        beyond = max(stages.items(), key=lambda pair: pair[1].outside)
        if beyond[1].outside > 0:
            low, high = (_mega(float(end)) for end in beyond[1].curve.frequency[[0, -1]])
            out += folded(
                "  ",
                f"{STAGES[beyond[0]]}, {percent(beyond[1].outside)} of the dips lie beyond {low} to {high}"
                " MHz and are counted there",
            )
        if any(band.results["volts"].high > 0 for band in stages.values()):
            out += [f"  {'':<15}{'trap, peak volts':>27}{'lost in both traps':>25}"]
            for name, band in stages.items():
                volts, loss = band.results["volts"], band.results["loss"]
                told = f"{volts.low:.0f}-{volts.high:.0f} ({volts.most:.0f})"
                share = f"{100 * loss.low:.1f}-{100 * loss.high:.1f} % ({100 * loss.most:.1f})"
                out += [f"  {STAGES[name]:<15}{told:>27}{share:>25}"]
        out += histograms(found, role)
    return out


def histograms(found: Tolerance, role: str, columns: int = STRIP) -> list[str]:
    """Return where dips and worst SWR of a band lie at every stage: denser is more."""
    stages = {name: stage.bands[role] for name, stage in told_stages(found)}
    band = dict(found.design.bands.items())[role]
    out = ["  where the dips lie: [ ] the wanted part, ^ the aim"]
    low, high = _reach([b.results["dip"] for b in stages.values()])
    low, high = min(low, band.wanted_edges[0]), max(high, band.wanted_edges[1])
    for name, scattered in stages.items():
        out += [f"  {STAGES[name]:<15}|{strip(scattered.results['dip'], low, high, columns)}|"]
    marks = {band.wanted_edges[0]: "[", band.wanted_edges[1]: "]", band.target: "^"}
    out += _axis(marks, low, high, columns, _mega(low), f"{_mega(high)} MHz")
    out += ["  where the worst SWR lies: ! the limit"]
    limit = found.design.station.swr_limit
    low, high = 1.0, min(_reach([b.results["worst_swr"] for b in stages.values()])[1], 4 * limit)
    high = max(high, 1.1 * limit)
    for name, scattered in stages.items():
        out += [f"  {STAGES[name]:<15}|{strip(scattered.results['worst_swr'], low, high, columns)}|"]
    return [*out, *_axis({limit: "!"}, low, high, columns, "1", f"{swr(high)}")]


def _reach(results: list[Scatter]) -> tuple[float, float]:
    return min(float(r.edges[0]) for r in results), max(float(r.edges[-1]) for r in results)


def strip(result: Scatter, low: float, high: float, columns: int) -> str:
    """Return a histogram as one line of characters; what lies beyond either end is put into it."""
    sums = np.concatenate([[0.0], np.cumsum(result.counts)])
    ends = np.interp(np.linspace(low, high, columns + 1), result.edges, sums)
    ends[0], ends[-1] = 0.0, sums[-1]
    counts = np.diff(ends)
    if not counts.any():
        return " " * columns
    level = np.ceil(counts / counts.max() * (len(RAMP) - 1) - 1e-9).astype(int)
    return "".join(RAMP[n] for n in level)


def _axis(
    marks: Mapping[float, str], low: float, high: float, columns: int, begin: str, end: str
) -> list[str]:
    line = [" "] * columns
    for value, mark in marks.items():
        place = int((value - low) / (high - low) * columns)
        line[min(max(place, 0), columns - 1)] = mark
    return [f"  {begin:>15} {''.join(line)} {end}"]


def causes(found: Tolerance) -> list[str]:
    """Return what each result scatters by, the largest first, as cut and brought to aim."""
    out = ["What it comes from: share of the scatter by cause"]
    if not found.varying:
        return [*out, "  nothing varies: every cause is switched off, all antennas are the computed one"]
    if not found.tells_causes:
        out += folded("  ", "Too few trials to tell causes apart; some hundred are needed.")
    for name in ("as_cut", "aimed") if found.tells_causes else ():
        out += [f"  {STAGES[name]}"]
        for band in found.stages[name].bands.values():
            for key, label in (("dip", "dip"), ("worst_swr", "worst SWR")):
                told = shares_text(band.results[key].causes)
                out += folded(f"    {f'{visible(band.name, 12)}, {label}':<16} ", told)
    check = found.check
    if check.trap is not None:
        first, seen = check.trap
        out += folded(
            "  check    ",
            f"df/f = -(dL/L + dC/C)/2 lets one trap as built scatter by {100 * first:.2f} % (one sigma),"
            f" the trials by {100 * seen:.2f} %",
        )
    for role, (first, seen) in check.dips.items():
        name = visible(found.design.bands.called(role), 12)
        out += folded(
            "  check    ",
            f"{name} dip as cut, causes one at a time and in proportion: {about(first, 'frequency')},"
            f" the trials {about(seen, 'frequency')}",
        )
    return out


def shares_text(shares: CauseShares | None) -> str:
    """Return causes in order with their shares, and what remains by interaction."""
    if shares is None:
        return "does not scatter enough to tell"
    parts = [f"{CAUSE_NAMES[one.cause]} {percent(one.share)}" for one in shares.causes[:MOST_CAUSES]]
    rest = sum(one.share for one in shares.causes[MOST_CAUSES:])
    parts += [f"others {percent(rest)}"] if rest > 0.005 else []
    parts += [f"by several at once {percent(shares.together)}"] if shares.together > 0.005 else []
    return ", ".join(parts) or "nothing in particular"


def cutting(found: Tolerance) -> list[str]:
    """Return how much longer to cut each wire."""
    return ["How much longer to cut", *(f"  {line}" for line in _cutting(found))]


def _cutting(found: Tolerance) -> Iterator[str]:
    for allowance in found.allowances.values():
        yield from folded("", f"{allowance_text(found, allowance)}.", WIDTH - 2)
    wire = sum(2 * allowance.length for allowance in found.allowances.values())
    if wire > 0:
        yield from folded("", f"That is at most {measured(wire, 'm', 1)} more wire in all.", WIDTH - 2)


def wire_name(allowance: Allowance, alone: bool) -> str:
    """Return which wire an allowance is for."""
    return "each side" if alone and allowance.wire == "inner" else f"each {allowance.wire} wire"


def allowance_text(found: Tolerance, allowance: Allowance) -> str:
    """Return one wire's allowance, why, and whether the design's own reserve does."""
    name = wire_name(allowance, len(found.allowances) == 1)
    if not found.varying:
        return f"{name}: as computed, for nothing varies"
    short = percent(allowance.reserve_risk) if allowance.reserve_risk else "none"
    return (
        f"{name}: {_signed(max(allowance.length, 0.0))}, and the chance of having to add wire stays below"
        f" {percent(found.risk)}; 5 to 95 of 100 end {_signed(allowance.shortest)} to"
        f" {_signed(allowance.longest)}. The reserve of {centimetres(allowance.reserve)} is too short in"
        f" {short}"
    )


def _signed(length: float) -> str:
    if abs(length) < 5e-4:
        return "as computed"
    return f"{centimetres(length)} {'shorter' if length < 0 else 'longer'}"


def helps(advice: Improvements) -> list[str]:
    """Return what each improvement buys."""
    trials = advice.base.trials
    out = [f"What would help most, from as cut, now {percent(advice.base.share)} ({trials} trials)"]
    if advice.base.share == 1.0:
        return [*out, "  nothing: every one of them keeps the limit already"]
    out += [_step(step) for step in advice.steps]
    if advice.then:
        out += [f"and after the first of these, then {percent(advice.steps[0].within.share)}"]
        out += [_step(step) for step in advice.then]
    return out


def _step(step: Improvement) -> str:
    gain = 100 * step.gain
    return f"  {STEPS[step.code]:<61} {percent(step.within.share):>6} {gain:>+5.0f}"


def choice(chosen: ForYield) -> list[str]:
    """Return what a design chosen for its yield changes, what that buys and what it costs."""
    stage = STAGES[chosen.stage]
    head = f"Chosen for yield, {stage}"
    if not chosen.changes:
        return [head, *folded("  ", f"nothing near the design does better than {chance(chosen.before)}")]
    out = [head]
    for change in chosen.changes:
        before, after = (_amount(change, value) for value in (change.before, change.after))
        out += [f"  {_change_name(chosen, change):<20}{before:>14} -> {after}"]
    out += [f"  {'yield':<20}{percent(chosen.before.share):>14} -> {chance(chosen.after)}"]
    for role, ((volts, loss), (new_volts, new_loss)) in chosen.prices.items():
        name = visible(chosen.design.bands.called(role), 12)
        out += [f"  {name + ', trap peak':<20}{volts:>12.0f} V -> {new_volts:.0f} V"]
        out += [f"  {name + ', lost in traps':<20}{100 * loss:>12.1f} % -> {100 * new_loss:.1f} %"]
    return out


def _change_name(chosen: ForYield, change: Change) -> str:
    last = change.key.rpartition(".")[2]
    if last == "aim":
        role = change.key.split(".")[1]
        return f"{visible(chosen.design.bands.called(role), 12)} aim"
    return CHANGES[last]


def _amount(change: Change, value: float) -> str:
    if change.key.endswith("capacitance"):
        return about(value, "capacitance", 4)
    return megahertz(value)


def varies(found: Tolerance) -> list[str]:
    """Return what varies, how far, and by which meaning."""
    out = ["What varies; change it in the design's [doubts], 0 switches it off"]
    for cause, names in CAUSES.items():
        there = [name for name in names if name in found.varying]
        if cause == "aim":
            there = there[:1]
        told = [
            f"{_QUANTITIES.get(name, '')} {belief_text(name, found.varying[name])}".lstrip() for name in there
        ]
        if told:
            out += folded(f"  {CAUSE_NAMES[cause]:<21} ", "; ".join(told))
        elif applies(cause, found.design):
            out += [f"  {CAUSE_NAMES[cause]:<21} off"]
    return out


def applies(cause: str, design: Design) -> bool:
    """Return whether a cause has anything to move in a design."""
    of_trap = ("capacitor", "coil", "q", "tuning", "sealing", "temperature", "rain")
    if cause in of_trap:
        trap = design.antenna.trap
        if trap is None:
            return False
        # What was measured takes the place of what was believed of the parts.
        return trap.measured is None or cause not in ("capacitor", "coil", "q")
    if cause in ("self_capacitance", "ratio"):
        return False
    if cause == "coating":
        return bool(design.antenna.wire.coating)
    if cause in ("height", "sag"):
        return str(design.site.ground) != "space"
    return cause != "soil" or str(design.site.ground) == "soil"


def belief_text(name: str, belief: Belief) -> str:
    """Return one doubt with its meaning."""
    kind = _RELATIVE.get(name) or _OTHER.get(name, "ratio")
    if name in ("soil", "self_capacitance"):
        return f"{100 * belief.size:.0f} % of its range, {_meaning(belief)}"
    low, high = belief.ends
    if belief.between:
        if kind == "K":
            return f"{low:+.0f} to {high:+.0f} K"
        return f"{_number(low, kind)} to {_number(high, kind)}"
    return f"+-{_number(high, kind)}, {_meaning(belief)}"


def _meaning(belief: Belief) -> str:
    words = {Meaning.LIMITS: "limits", Meaning.MEASURED: "measured, one sigma"}
    return words.get(belief.meaning, str(belief.meaning))


def _number(value: float, kind: str) -> str:
    if kind == "length":
        return centimetres(value)
    return f"{value:.2g}" if kind == "count" else f"{100 * value:.2g} %"


def _mega(value: float, digits: int = 3) -> str:
    return f"{value / 1e6:.{digits}f}"


def _swr_range(result: Scatter) -> str:
    return f"{_swr(result.low)}-{_swr(result.high)} ({_swr(result.most)})"


def _swr(value: float) -> str:
    """Return an SWR to two decimals where it is of use, shorter where it is not."""
    if not value < LARGEST_SWR:
        return f">{LARGEST_SWR:.0f}"
    return f"{value:.2f}" if value < 3 else f"{value:.1f}"
