"""The way down, the tuner's settings, the map of reach and the table of ways, as plain lines."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import replace

from ..design.design import MODES
from ..errors import visible
from ..services.antenna.feed_point import way_of
from ..services.antenna.figures import BandFigures, Figures
from ..services.compare.reach import ReachMap, TunerAnswer
from ..services.compare.worth import Way, WayFigures, Worth
from ..services.feed.path import WayStep
from ..services.feed.tuner import TunerSetting
from ..units.unit_names import UNITS, Dimension
from .feed_rows import element_name, element_value, line_name, loss_text, setting_text
from .layout import WIDTH, folded
from .shown import about, impedance, known, megahertz, percent, swr

STEPS = {
    "sky": "to the sky",
    "ground": "into the ground",
    "wire": "heat in the wire",
    "traps": "heat in both traps",
    "transformer": "heat in the transformer",
    "line": "heat in the line",
    "tuner coil": "heat in the tuner's coils",
    "tuner capacitor": "heat in the tuner's capacitors",
    "feed": "= taken at the feed point",
    "tuner": "= into the tuner",
    "line end": "= out of the line",
    "line start": "= into the line",
    "transmitter": "= from the transmitter",
}
SHADES = ((0.3, "."), (1.0, ":"), (math.inf, "#"))
"""Loss in dB up to which a load of the map gets its mark."""
OWN_MARK, AIM_MARK = "o", "X"


def watt_unit(steps: Iterable[WayStep]) -> str:
    """Return the unit the powers of a way down are told in."""
    *_, last = steps
    return known(last.watts, last.watts / 100, "power").unit or "W"


def printed(steps: Iterable[WayStep]) -> list[str]:
    """Return the powers of a way down as text, rounded so that what is printed adds up without a remainder.

    They are in `watt_unit`.
    """
    steps = tuple(steps)
    size = UNITS[Dimension.POWER][watt_unit(steps)]
    steps = tuple(replace(step, watts=step.watts * size.bottom / size.top) for step in steps)
    total = steps[-1].watts
    if total <= 0:
        return ["0"] * len(steps)
    power = max(math.floor(math.log10(total)) - 2, -6)
    unit = 10.0**power
    lost = [(i, s.watts / unit) for i, s in enumerate(steps) if s.impedance is None]
    whole = {i: math.floor(share) for i, share in lost}
    rest = round(total / unit) - sum(whole.values())
    # What is left over goes where rounding down took most.
    for i, share in sorted(lost, key=lambda pair: pair[1] % 1, reverse=True)[:rest]:
        whole[i] = math.floor(share) + 1
    texts, passing = [], 0
    for i, _ in enumerate(steps):
        passing += whole.get(i, 0)
        texts.append(f"{whole.get(i, passing) * unit:.{max(0, -power)}f}")
    return texts


def way_lines(figures: Figures, band: BandFigures) -> Iterator[str]:
    """Yield the way down of a band at its aim."""
    station = figures.design.station
    steps = way_of(figures, band)
    yield f"{visible(band.name, 12)} at {megahertz(band.aim)}, from the wire down to the transmitter"
    unit = watt_unit(steps)
    yield f"  {'watts' if unit == 'W' else unit:>7}  {'':<36}{'Z':<22}SWR"
    for step, watts in zip(steps, printed(steps), strict=True):
        words = STEPS[step.code]
        if step.code == "line":
            words = f"heat in {line_name(station.line)}"
        if step.impedance is None:
            yield f"  {watts:>7}  {words[:60]}"
            continue
        ohms = impedance(step.impedance, band.impedance_doubt)
        ratio = swr(step.swr, band.swr_doubt * step.swr / band.aim_swr)
        yield f"  {watts:>7}  {words:<36}{ohms:<22}{ratio}"
    given = steps[-1].watts
    if given < station.power:
        yield f"  {'':>7}  of {about(station.power, 'power', 3)} it could give: it folds back at this SWR"


def table_lines(figures: Figures, table: Worth) -> Iterator[str]:
    """Yield the four ways to run each band, and the advice."""
    yield "Four ways to run it, over the wanted part"
    yield f"  {'':<32}{'radiated':>9}{'of made':>8}{'SWR':>6}{'gives':>7}  hottest"
    for role, ways in table.bands.items():
        name = visible(figures.bands[role].name, 12)
        if len(name) > 6:
            yield f"  {name}"
            name = ""
        for way in ways:
            yield from _way_lines(name, way)
            name = ""
            if not way.matched:
                yield f"  {'':<9}out of reach of the tuner in part of what is wanted"
        if table.no_recut:
            yield f"  {'':<7}{Way.RECUT:<25}{table.no_recut.replace('_', ' ')}"
    yield from folded(
        "  ",
        "radiated: mean by weight; SWR at the transmitter, what it then gives and what gets hottest, on"
        " average in this mode: worst.",
    )
    if table.typical_transmitter:
        yield from folded(
            "  ",
            "The transmitter's own watts at each SWR are not given: a typical one is taken, full to 2, half"
            " at 3, a quarter at 5, a tenth at 10 (common practice, no source).",
        )
    if table.standing_in:
        yield from folded(
            "  ", "No tuner is in the design: a common T network, coil across, stands in (no source)."
        )
    yield from folded("  ", advice(figures, table))


def advice(figures: Figures, table: Worth) -> str:
    """Return the cheapest improvement in words."""
    if table.advice is Way.AS_IS:
        return "The cheapest improvement: none. Leave it as it is: no other way radiates a tenth more."
    band = visible(figures.bands[table.gaining].name, 12)
    what = {
        Way.RECUT: "re-cut the wires",
        Way.AT_TRANSMITTER: "a tuner at the transmitter",
        Way.AT_FEED: "a tuner at the feed point",
    }[table.advice]
    return f"The cheapest improvement: {what}: {_gain(table.gain)} radiated on {band}."


def _gain(gain: float) -> str:
    return f"{100 * gain:.0f} % more" if gain < 1 else f"{1 + gain:.1f} times as much"


def _way_lines(name: str, way: WayFigures) -> Iterator[str]:
    """Yield a way; what gets hottest follows below where there is no room for it."""
    hot = way.hottest.removeprefix("tuner ")
    if way.hottest_watts:
        hot += f" {about(way.hottest_watts, 'power')}"
    share, ratio = (
        text.replace("under ", "<").replace("over ", ">")
        for text in (percent(way.share), swr(way.worst_swr, 0.1))
    )
    line = (
        f"  {name:<7}{way.way:<25}{about(way.radiated, 'power'):>9}{share:>8}"
        f"{ratio:>6}{about(way.least_given, 'power'):>7}"
    )
    if len(line) + 2 + len(hot) <= WIDTH:
        yield f"{line}  {hot}"
    else:
        yield line
        yield f"  {'':<9}hottest: {hot}"


def setting_lines(figures: Figures, answer: TunerAnswer) -> Iterator[str]:
    """Yield the settings of a tuner on a band: at the aim element by element, then at the edges wanted."""
    band, station = figures.bands[answer.role], figures.design.station
    yield from folded(
        f"{visible(band.name, 12)} settings: ", f"{answer.aim.network}, from the transmitter to the antenna"
    )
    yield from element_lines(answer.aim, station.power, MODES[station.mode].mean)
    for one in (answer.aim, *answer.over):
        yield from folded(f"  {megahertz(one.frequency):<11} ", f"{setting_text(one)}; {loss_text(one)}")
    if answer.width is None:
        yield from folded("  ", f"At the aim the SWR stays above {station.swr_limit:.3g}.")
        return
    low, high = answer.width
    first = "below the band" if low is None else megahertz(low, 4)
    last = "above the band" if high is None else megahertz(high, 4)
    yield from folded(
        "  ", f"Set for the aim it serves from {first} to {last} (SWR {station.swr_limit:.3g})."
    )


def element_lines(setting: TunerSetting, watts: float, mean: float) -> Iterator[str]:
    """Yield a setting element by element, with what each bears at a power into it."""
    yield f"  {'':<20}{'set to':>10}{'step':>6}{'volts peak':>12}{'amps':>8}{'heat':>9}  1 % off"
    root = math.sqrt(watts)
    for e in setting.elements:
        step = "" if e.step is None else str(e.step)
        volts, amps = about(root * e.volts, "voltage"), about(root * e.amps, "current")
        heat = about(mean * watts * e.share, "power")
        touch = f"{setting.swr * (1 + e.touch):.2f}"
        yield f"  {element_name(e):<20}{element_value(e):>10}{step:>6}{volts:>12}{amps:>8}{heat:>9}  {touch}"
        if _over(root * e.volts, e.voltage) or _over(root * e.amps, e.current):
            yield f"  {'':<20}over its rating"


def _over(value: float, limit: float | None) -> bool:
    return limit is not None and value > limit


def map_lines(figures: Figures, found: ReachMap, role: str) -> Iterator[str]:
    """Yield the map of reach with its axes, and the line that reads the aim."""
    name = visible(figures.bands[role].name, 12)
    network = found.setting.tuner.network
    yield f"{name} loads in reach of the tuner ({network}) at {megahertz(found.frequency)}"
    rows, columns = found.loss.shape
    cells = [[_shade(loss) for loss in line] for line in found.loss]
    right = float(found.resistance[0] + found.resistance[-1])
    step = float(found.reactance[1] - found.reactance[0])
    for loads, mark in ((found.own, OWN_MARK), ([found.aim], AIM_MARK)):
        for load in loads:
            column = min(int(load.real / right * columns), columns - 1)
            row = int(round((load.imag - float(found.reactance[0])) / step))
            cells[min(max(row, 0), rows - 1)][column] = mark
    for i in reversed(range(rows)):
        shown = f"{found.reactance[i]:+.0f}" if i in (0, rows // 2, rows - 1) else ""
        yield f"  {shown.replace('+0', '0') if i == rows // 2 else shown:>7} |{''.join(cells[i])}".rstrip()
    yield f"  {'X, ohm':>7} +{'-' * columns}"
    half, full = f"{right / 2:.0f}", f"{right:.0f} R, ohm"
    yield f"  {'':>7}  0{half:>{columns // 2}}{full:>{columns - columns // 2 - 1}}"
    legend = "lost: . under 0.3 dB, : under 1 dB, # more; blank: out of reach; o the antenna, X the aim"
    yield from folded("  ", legend)
    yield from folded("  ", reading_line(found.setting))


def reading_line(setting: TunerSetting) -> str:
    """Return one load of a map in words."""
    return f"{impedance(setting.load, 1.0)}: {loss_text(setting)}"


def _shade(loss: float) -> str:
    if not math.isfinite(loss):
        return " "
    return next(mark for limit, mark in SHADES if loss <= limit)


def document_lines(figures: Figures, answers: dict, maps: dict, table: Worth) -> list[str]:
    """Return everything of the verb tuner as lines."""
    lines = list(table_lines(figures, table))
    for band in figures.bands.values():
        lines += ["", *way_lines(figures, band)]
    lines += [
        "",
        *folded("", "Sky and ground are estimates; all watts those of a steady carrier at the aim."),
    ]
    for role in figures.bands:
        lines += ["", *setting_lines(figures, answers[role]), "", *map_lines(figures, maps[role], role)]
    return lines
