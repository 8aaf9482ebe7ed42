"""Sentences: what a finding says and what would help, why there is no answer, and the cautions."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from ..design.design import Design, known_at
from ..errors import NoAnswer, visible
from ..services.antenna.levels import LEVELS, Level
from ..units.unit_names import Dimension
from . import shown

if TYPE_CHECKING:
    from ..services.antenna.figures import Finding

ESTIMATE = "an estimate, not measured"
MEASURED = "an estimate, traps as measured"

LEVEL_WORDS: dict[Level, str] = {Level.FINE: "fine", Level.WATCH: "watch", Level.STOP: "STOP"}
SEVERITY = LEVELS[::-1]
"""The worst first."""


def basis(design: Design) -> str:
    """Return what the figures of a design rest on, in a few words."""
    trap = design.antenna.trap
    measured = trap.measured if trap is not None else None
    values = (measured.resonance, measured.inductance, measured.capacitance, measured.q) if measured else ()
    return MEASURED if any(value is not None for value in values) else ESTIMATE


@dataclass(frozen=True, kw_only=True)
class Saying:
    """What a finding says, with {where}, {value} and {limit} to fill in, and what would help.

    `bare` is said when there is no limit. `as_` is how value and limit read when not by their dimension.
    """

    says: str
    helps: str
    bare: str = ""
    as_: str = ""


SAYINGS: dict[str, Saying] = {
    "swr_wanted": Saying(
        says="{where}: worst SWR {value} in the wanted part, the limit is {limit}",
        bare="{where}: worst SWR {value} in the wanted part",
        helps="want less of the band, move the aim, or expect to use a tuner",
        as_="swr",
    ),
    "wanted_wide": Saying(
        says="{where}: {value} is wanted, {limit} lies within the SWR limit",
        bare="{where}: {value} is wanted, more than lies within the SWR limit",
        helps="want less of the band, or expect to use a tuner at its edges",
    ),
    "aim_missed": Saying(
        says="{where}: resonance lies {value} the aim; up to {limit} would not matter",
        bare="{where}: resonance lies {value} the aim",
        helps="let both wires be solved, or change the one that was set",
        as_="miss",
    ),
    "no_resonance": Saying(
        says="{where}: no resonance near the aim of {value}",
        helps="change the wires, or let them be solved",
    ),
    "no_width": Saying(
        says="{where}: nowhere within the SWR limit of {limit}, the dip is {value}",
        bare="{where}: nowhere within the SWR limit, the dip is {value}",
        helps="raise the limit, change the height or the angle, or use a tuner",
        as_="swr",
    ),
    "trap_voltage": Saying(
        says="the trap bears {value} peak, its capacitor is rated {limit}",
        bare="the trap bears {value} peak",
        helps="a capacitor of higher rating, several in series, more capacitance, or less power",
    ),
    "trap_voltage_unrated": Saying(
        says="the trap bears {value} peak and no capacitor rating is given; {limit} would leave a margin",
        bare="the trap bears {value} peak and no capacitor rating is given",
        helps="enter what the capacitor is rated for, peak, at radio frequency",
    ),
    "part_current": Saying(
        says="{where} carries {value} of the current it stands",
        bare="{where} carries {value} of the current it stands",
        helps="several side by side, one that stands more, less capacitance, or less power",
        as_="percent",
    ),
    "part_heat": Saying(
        says="{where} turns {value} of the voltage its heat allows into warmth",
        bare="{where}: {value} of the voltage its heat allows",
        helps="less loss, several side by side, less power or shorter overs",
        as_="percent",
    ),
    "part_flux": Saying(
        says="{where}: the core's flux reaches {value} of its limit",
        bare="{where}: the core's flux reaches {value} of its limit",
        helps="more turns, a larger core, or less power",
        as_="percent",
    ),
    "former_softens": Saying(
        says="{where}: in the sun and at work it reaches {value}, it softens at {limit} (common practice)",
        bare="{where}: in the sun and at work it reaches {value}",
        helps="a former that stands more heat, thicker wire, less power or shorter overs",
    ),
    "turns_do_not_fit": Saying(
        says="{where}: {value} do not fit into the core, only {limit}",
        bare="{where}: {value} do not fit into the core",
        helps="thinner wire, a larger core, or more inductance index",
    ),
    "trap_drifts": Saying(
        says="heat or cold moves the trap by {value}, more than the {limit} that would not matter",
        bare="heat or cold moves the trap by {value}",
        helps="a capacitor that drifts less or the other way (C0G, P100), another former, shade",
    ),
    "capacitor_varies": Saying(
        says="heat or cold may change the trap's capacitance by {value}; up to {limit} would not matter",
        bare="heat or cold may change the trap's capacitance by {value}",
        helps="C0G or mica in place of class 2 ceramic (X7R, Y5V): the shifts shown leave this out",
        as_="percent",
    ),
    "trap_heat": Saying(
        says="each trap turns {value} into heat on average; from {limit} on it gets warm",
        bare="each trap turns {value} into heat on average",
        helps="thicker wire on the coil, another trap resonance, less power or shorter overs",
    ),
    "end_low": Saying(
        says="the wire ends hang at {value}, below {limit}: within reach, and they carry high voltage",
        bare="the wire ends hang at {value}: within reach, and they carry high voltage",
        helps="raise the ends or the feed point, or open the angle",
    ),
    "trap_far": Saying(
        says="the trap resonates at {value}, far below the upper band that starts at {limit}",
        bare="the trap resonates at {value}, far from the upper band",
        helps="fewer turns or less capacitance: in or just below the band serves best",
    ),
    "trap_above_band": Saying(
        says="the trap resonates at {value}, above the upper band that ends at {limit}",
        bare="the trap resonates at {value}, above the upper band",
        helps="more turns or more capacitance: in or just below the band serves best",
    ),
    "soil_unknown": Saying(
        says="the soil is not known; dry or wet, resonance may lie {value} off; naming it narrows that",
        helps="name the soil, or measure the dip and trust that",
    ),
    "coil_range": Saying(
        says="{where} of the coil: {value}, its formulas are held to {limit}",
        bare="{where} of the coil: {value}, outside the range its formulas hold for",
        helps="wind it, measure its inductance, and enter that as a given coil",
    ),
    "site_doubt": Saying(
        says="{where}: site and parts may move the dip by {value}, more than the {limit} there is to spare",
        bare="{where}: site and parts may move the dip by {value}",
        helps="leave the wires long, measure, then cut",
    ),
    "parts_doubt": Saying(
        says="{where}: traps as made may move the dip by {value}, more than the {limit} there is to spare",
        bare="{where}: traps as made may move the dip by {value}",
        helps="bring both traps to their frequency first, leave the wires long, measure, then cut",
    ),
    "ground_share": Saying(
        says="{where}: the ground takes about {value} of the power, more than {limit}",
        bare="{where}: the ground takes about {value} of the power",
        helps="hang it higher",
        as_="percent",
    ),
    "length_odd": Saying(
        says="tip to tip the wire is {value} of a plain half wave, where {limit} would be the usual bound",
        bare="tip to tip the wire is {value} of a plain half wave, which is unusual",
        helps="look over the aims, the trap's values and the lengths that were set",
        as_="percent",
    ),
    "choke_missing": Saying(
        says="the line has no choke of {value} or more at the feed point: its shield is part of the antenna",
        helps="a choke of 1 kohm or more on both bands (common practice, no source); until then grip the line"
        " while you read the SWR: if the reading moves, it means nothing",
    ),
    "choke_unknown": Saying(
        says="{where}: not known, {value} or more is wanted",
        helps="measure it, or grip the line while you read the SWR: if the reading moves, it is too little",
    ),
    "choke_weak": Saying(
        says="{where}: {value}, less than the {limit} wanted (common practice, no source)",
        bare="{where}: {value}, less than wanted",
        helps="more turns or another core; test by hand: grip the line while you read the SWR: if the reading"
        " moves, it means nothing",
    ),
    "line_voltage": Saying(
        says="{where}: {value} rms on the line, it is rated {limit}",
        bare="{where}: {value} rms on the line",
        helps="less power, a better match at the feed point, or a line that stands more",
    ),
    "line_current": Saying(
        says="{where}: {value} rms on the line, it is rated {limit}",
        bare="{where}: {value} rms on the line",
        helps="less power, a better match at the feed point, or a thicker line",
    ),
    "line_loss": Saying(
        says="{where}: the line loses {value} as it is used",
        helps="a shorter or thicker line, or a better match at the feed point",
    ),
    "transmitter_folds_back": Saying(
        says="{where}: the transmitter gives {value} of its {limit} at the worst of the wanted part",
        bare="{where}: the transmitter gives {value} at the worst of the wanted part",
        helps="want less of the band, or a tuner at the transmitter",
    ),
    "line_flatters": Saying(
        says="{where}: the transmitter sees an SWR within {limit}, but at the feed point it is {value}",
        bare="{where}: at the feed point the SWR is {value}",
        helps="judge at the feed point when the antenna is what you tune: loss in the line hides its SWR",
        as_="swr",
    ),
    "tuner_short": Saying(
        says="{where}: no setting of the tuner matches; the nearest leaves SWR {value}",
        helps="see which element runs short with trapdesk tuner, or bring the antenna nearer first",
        as_="swr",
    ),
    "tuner_coil_voltage": Saying(
        says="{where}: the tuner's coil bears {value} peak, it is rated {limit}",
        bare="{where}: the tuner's coil bears {value} peak",
        helps="less power, or a match nearer at the antenna",
    ),
    "tuner_coil_current": Saying(
        says="{where}: the tuner's coil carries {value}, it is rated {limit}",
        bare="{where}: the tuner's coil carries {value}",
        helps="less power, or a match nearer at the antenna",
    ),
    "tuner_capacitor_voltage": Saying(
        says="{where}: a capacitor of the tuner bears {value} peak, it is rated {limit}",
        bare="{where}: a capacitor of the tuner bears {value} peak",
        helps="less power, a wider capacitor, or a match nearer at the antenna",
    ),
    "tuner_capacitor_current": Saying(
        says="{where}: a capacitor of the tuner carries {value}, it is rated {limit}",
        bare="{where}: a capacitor of the tuner carries {value}",
        helps="less power, or a match nearer at the antenna",
    ),
    "tuner_coil_heat": Saying(
        says="{where}: {value} of heat on average in the tuner's coil, from {limit} on it gets warm",
        bare="{where}: {value} of heat on average in the tuner's coil",
        helps="less power, shorter overs, or a match nearer at the antenna",
    ),
    "tuner_capacitor_heat": Saying(
        says="{where}: {value} of heat on average in a capacitor of the tuner, from {limit} on it gets warm",
        bare="{where}: {value} of heat on average in a capacitor of the tuner",
        helps="less power, shorter overs, or a match nearer at the antenna",
    ),
}

_SYMPTOMS = ("swr_wanted", "no_width", "wanted_wide", "site_doubt", "parts_doubt")
_CAUSES = ("no_resonance", "aim_missed")

REASONS = {
    "aim_not_met": "no wire lengths give resonance at the aim",
    "ends_too_low": "the wire that meets the aim reaches the ground",
    "side_shorter_than_its_drop": "a side is shorter than the drop to the height of its ends",
    "coil_resonates_below_by_itself": "the coil alone resonates below the trap's resonance",
    "nothing_to_build": "the box holds no two equal traps for this design",
    "no_trap_to_build": "the design has no trap",
    "no_setting_in_reach": "no setting of this tuner matches it",
    "network_does_not_match": "no match with these parts, whatever their size",
    "no_load_gives_this": "no load that takes power shows this through the line",
    "no_such_cable_trap": "no number of turns of this cable on this former resonates there",
    "no_turns_fit": "the turns that are needed do not fit",
    "no_capacitor_makes_up_the_rest": "no value of this member makes up what the others leave",
    "stub_is_too_long": "the stub is longer than a quarter wave and is no capacitor",
    "no_such_coil": "no number of turns on this former makes the coil that is needed",
    "wire_is_set": "a wire of set length leaves no aim to move",
    "model_does_not_hold": "what was read does not fit such a part",
    "no_move_to_keep": "the move cannot be kept",
}
"""Why there is no answer, by the code of `NoAnswer`."""
POWER_LINES = (
    "Power lines kill. Keep wire, mast and halyard away from every overhead line, much further"
    " than the length of antenna plus mast, also when they fall or swing."
)
CAUTIONS: tuple[str, ...] = (
    POWER_LINES,
    "Trap and wire ends carry high voltage, kilovolts at 100 W, and any part of a transmitting"
    " antenna burns. Keep people, animals and what may catch fire out of reach of it.",
    "Nobody on the halyard or at the wire while transmitting: lock the transmitter out first.",
    "People may not be exposed to strong fields: keep well away while transmitting; the law sets"
    " the limits, and no distance is worked out here.",
    "Masts need guys, a clear fall zone and somebody who knows how.",
    "Take it down and disconnect the line before a thunderstorm. No arrester makes it safe to stay.",
    "Volts and heat are estimates: leave a margin and begin at low power.",
    "Local codes and licensed practice decide, not this sheet.",
)


def place(where: str, design: Design) -> str:
    """Return what a person calls the place a dotted key names: a band by its name, else its label."""
    head, _, rest = where.partition(".")
    if head == "bands" and rest:
        role = rest.split(".")[0]
        if getattr(design.bands, role, None) is not None:
            return visible(design.bands.called(role), 20)
    try:
        return known_at(design, where).label
    except (KeyError, TypeError, AttributeError):
        return visible(where.replace("_", " ").replace(".", " "), 60)


def sentence(finding: Finding, design: Design) -> str:
    """Return what a finding says, with its number and its limit; a code without words is spoken as it is."""
    saying = SAYINGS.get(finding.code)
    where = place(finding.where, design)
    as_ = saying.as_ if saying else ""
    value = amount(finding.value, finding.dimension, as_)
    limit = "" if finding.limit is None else amount(finding.limit, finding.dimension, as_ and as_ + " limit")
    if (who := _part_of(finding.where)) and finding.code in _OF_PARTS:
        rated = f"it is rated {limit}" if limit else "no rating of it is given"
        return f"{who} bears {value} peak, {rated}"
    if saying is None:
        text = f"{where}: {visible(finding.code.replace('_', ' '))}, {value}"
        return f"{text}, limit {limit}" if limit else text
    if as_ == "swr" and finding.limit is not None and finding.value > finding.limit >= float_or(value):
        value = f"just over {limit}"
    if not limit:
        return (saying.bare or saying.says).format(where=where, value=value)
    return saying.says.format(where=where, value=value, limit=limit)


_OF_PARTS = ("trap_voltage", "trap_voltage_unrated")


def _part_of(where: str) -> str:
    """Return which part of a trap bears something when that is not all of it; empty when it is."""
    if where.startswith("antenna.trap.coil"):
        return "the cable of the trap"
    _, members, place = where.removesuffix(".voltage").partition("antenna.trap.capacitor.members.")
    return f"capacitor {place.replace('.members.', '.')}" if members else ""


def float_or(text: str, otherwise: float = math.inf) -> float:
    """Return a number that may have become words."""
    try:
        return float(text)
    except ValueError:
        return otherwise


def cure(finding: Finding) -> str:
    """Return what would help; empty where nothing needs help, and for a code without words."""
    saying = SAYINGS.get(finding.code)
    return saying.helps if saying and finding.level is not Level.FINE else ""


def cure_among(finding: Finding, findings: tuple[Finding, ...]) -> str:
    """Return what would help a finding, or its cause where another finding of that place is the cause."""
    if finding.code in _SYMPTOMS:
        for other in findings:
            if other.where == finding.where and other.code in _CAUSES and other.level is not Level.FINE:
                return cure(other)
    return cure(finding)


def amount(value: float, dimension: str, as_: str = "") -> str:
    """Return a finding's number in words, to two or three digits."""
    if as_ == "swr":
        return shown.swr(value, 0.1)
    if as_ == "swr limit":
        return f"{value:.3g}"
    if as_ in ("percent", "percent limit"):
        return shown.percent(value)
    if not math.isfinite(value):
        return "no number"
    if as_ == "miss":
        return f"{shown.plain(abs(value), dimension, 2)} {'above' if value > 0 else 'below'}"
    # A frequency is told finely when it is a place on the dial, to two digits when it is a distance.
    if dimension == "frequency":
        return shown.megahertz(value) if value >= 1e6 else shown.plain(value, dimension, 2)
    return shown.about(value, dimension)


def ranked(findings: tuple[Finding, ...]) -> tuple[Finding, ...]:
    """Return the findings, the most serious first, otherwise as they came."""
    return tuple(sorted(findings, key=lambda f: SEVERITY.index(f.level)))


_SUFFIXES = {
    "hz": Dimension.FREQUENCY,
    "h": Dimension.INDUCTANCE,
    "f": Dimension.CAPACITANCE,
    "ohm": Dimension.RESISTANCE,
    "m": Dimension.LENGTH,
    "v": Dimension.VOLTAGE,
    "a": Dimension.CURRENT,
    "w": Dimension.POWER,
    "db": Dimension.LOSS,
}


def no_answer(error: NoAnswer) -> str:
    """Return in one line why there is no answer, how near it came and what would help."""
    reason = REASONS.get(error.code)
    if reason is None:
        return str(error)
    numbers = []
    for name, value in error.numbers.items():
        words, _, suffix = name.rpartition("_")
        kind = _SUFFIXES.get(suffix)
        if kind is None or not words:
            words, text = name, f"{value:.4g}"
        else:
            text = shown.plain(value, kind)
        numbers.append(f"{visible(words.replace('_', ' '))} {text}")
    line = f"{visible(error.where, 120)}: {reason}" if error.where else reason
    if numbers:
        line += f" ({', '.join(numbers)})"
    return f"{line}; {visible(error.help, 300)}" if error.help else line
