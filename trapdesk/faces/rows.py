"""The one presenter: figures become rows, which the desk, the command line and the sheet all show."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from ..design.design import MODES, Design, Shape, get, known_at
from ..design.fields import SOLVE
from ..engine.soils import UNKNOWN_SOIL, GroundKind
from ..errors import visible
from . import feed_rows, trap_rows, words
from .lines import (
    band_line,
    band_name,
    check_line,
    ground_words,
    length_text,
    moves_line,
    next_move,
    rating_text,
    site_line,
    station_line,
    swr_text,
    trap_line,
    wire_line,
)
from .shown import (
    about,
    exact,
    impedance,
    kilohertz_per_step,
    known,
    measured,
    megahertz,
    percents,
    small_step,
)

if TYPE_CHECKING:
    from ..services.antenna.figures import BandFigures, Figures, Finding, Shares

# Which row of a band or a trap a finding belongs to, where its place alone does not tell.
_FINDING_ROWS = {
    "swr_wanted": "worst_swr",
    "wanted_wide": "width",
    "no_width": "width",
    "aim_missed": "resonance",
    "no_resonance": "resonance",
    "site_doubt": "dip",
    "parts_doubt": "dip",
    "ground_share": "ground_share",
    "line_voltage": "feed.line_voltage",
    "line_current": "feed.line_current",
    "line_loss": "feed.line_loss",
    "transmitter_folds_back": "feed.least",
    "line_flatters": "feed.other_worst",
    "tuner_short": "feed.tuner",
    **{
        f"tuner_{kind}_{what}": "feed.tuner"
        for kind in ("coil", "capacitor")
        for what in ("voltage", "current", "heat")
    },
    "trap_heat": "trap_average",
    "trap_voltage": "trap_worst_peak",
    "trap_voltage_unrated": "trap_worst_peak",
}

_STRESSES = {
    "trap_voltage": "peak_voltage",
    "trap_voltage_unrated": "peak_voltage",
    "trap_heat": "average_watts",
}


SHARES = "of the power taken at the feed point; what the ground takes is an estimate"


@dataclass(frozen=True, kw_only=True)
class Row:
    """One thing given or found: `given` is what somebody set, `value` and `unit` what was found.

    `key` is a dotted key of the design or of the results. `why` says where the number comes from.
    """

    key: str
    group: str
    label: str
    value: str = ""
    unit: str = ""
    given: str = ""
    why: str = ""
    finding: Finding | None = None

    @property
    def found(self) -> str:
        """Value and unit together."""
        return f"{self.value} {self.unit}".rstrip()


def given(design: Design, key: str) -> str:
    """Return what somebody set at a dotted key, as text; empty where nothing is set."""
    value = get(design, key)
    what = known_at(design, key)
    if value is None:
        return ""
    if value is SOLVE:
        return "solve"
    if what.dimension == "frequency":
        return megahertz(value)
    if what.dimension in ("text", "choice", "print"):
        return visible(value, 60)
    # Wires are cut to the millimetre.
    return str(exact(value, what.dimension, digits=5 if key.startswith("antenna.lengths.") else None))


def rows(figures: Figures) -> tuple[Row, ...]:
    """Return everything there is to show of a design, group by group, with the findings on their rows."""
    found = [
        *_site(figures),
        *(row for band in figures.bands.values() for row in _band(figures, band)),
        *(Row(**cells) for band in figures.bands.values() for cells in feed_rows.rows(figures, band)),
        *_wires(figures),
        *_trap(figures),
        *(row for band in figures.bands.values() for row in _stress(figures, band)),
        *(Row(**cells) for band in figures.bands.values() for cells in trap_rows.stress_rows(figures, band)),
        *(Row(**cells) for cells in trap_rows.heat_rows(figures)),
        *(row for band in figures.bands.values() for row in _effects(band)),
        *(Row(**cells) for cells in trap_rows.shift_rows(figures)),
    ]
    for finding in words.ranked(figures.findings):
        index = _row_of(_placed(finding, figures), found)
        if index is not None and found[index].finding is None:
            found[index] = replace(found[index], finding=finding)
    return (*found, *_findings(figures))


def _placed(finding: Finding, figures: Figures) -> Finding:
    """Return a finding on the trap's stress moved to the band in which the stress is worst."""
    quantity = _STRESSES.get(finding.code)
    bands = [band for band in figures.bands.values() if band.worst_stress is not None]
    if quantity is None or not bands:
        return finding
    worst = max(bands, key=lambda band: getattr(band.worst_stress, quantity))
    return replace(finding, where=f"bands.{worst.role}")


def _row_of(finding: Finding, among: list[Row]) -> int | None:
    """Return the row a finding belongs to, or None."""
    name = _FINDING_ROWS.get(finding.code)
    keys = [f"{finding.where}.{name}"] if name else []
    for key in (*keys, finding.where):
        for index, row in enumerate(among):
            if row.key == key:
                return index
    for index, row in enumerate(among):
        if row.key.startswith(finding.where + "."):
            return index
    return None


def _input(figures: Figures, key: str, group: str = "site", **more: Any) -> Row:
    """Return the row of a value somebody set."""
    what = known_at(figures.design, key)
    return Row(
        key=key, group=group, label=what.label, given=given(figures.design, key), why=what.help, **more
    )


def _site(figures: Figures) -> Iterator[Row]:
    design, lengths = figures.design, figures.lengths
    yield Row(key="title", group="site", label="design", given=visible(design.title, 40))
    yield Row(key="basis", group="site", label="these figures are", value=words.basis(figures.design))
    yield _input(figures, "site.shape")
    yield _input(figures, "site.height")
    if design.site.shape is Shape.VEE:
        if design.site.included_angle is not None:
            yield _input(figures, "site.included_angle")
        ends = known(lengths.end_height, 0.1, "length", "m")
        yield _input(figures, "site.end_height", value=ends.number, unit=ends.unit)
        slope = f"{math.degrees(lengths.slope):.0f}"
        yield Row(key="site.slope", group="site", label="slope of the wire", value=slope, unit="deg")
    soil = ""
    if design.site.soil_is_unknown:
        soil = f"{about(UNKNOWN_SOIL.conductivity, 'conductivity')}, {UNKNOWN_SOIL.permittivity:.0f}"
    yield Row(
        key="site.soil", group="site", label="ground", given=_ground_given(design), value=soil,
        why="conductivity and relative permittivity taken for it",
    )  # fmt: skip
    yield _input(figures, "station.power")
    mode = MODES[design.station.mode]
    yield _input(figures, "station.mode", value=f"{100 * mode.mean:.0f} %", unit="on average while sending")
    yield _input(figures, "station.reference")
    yield _input(figures, "station.swr_limit", value="", unit="")


def _ground_given(design: Design) -> str:
    if design.site.ground is not GroundKind.SOIL:
        return str(design.site.ground)
    return ground_words(design).partition(",")[0] if design.site.soil_is_unknown else ground_words(design)


def _band(figures: Figures, band: BandFigures) -> Iterator[Row]:
    key, name = f"bands.{band.role}", band_name(band)
    design = getattr(figures.design.bands, band.role)
    limit = f"{figures.design.station.swr_limit:.3g}"

    def row(tail: str, label: str, shown_: Any, **more: str) -> Row:
        value, unit = (shown_, "") if isinstance(shown_, str) else (shown_.value, shown_.unit)
        return Row(
            key=f"{key}.{tail}", group="bands", label=f"{name} {label}", value=value, unit=unit, **more
        )

    doubt = band.frequency_doubt
    yield row("dip", "dip", known(band.dip, doubt, "frequency", "MHz"), why="where the SWR is least")
    yield row("dip_swr", "SWR at the dip", swr_text(band, band.dip_swr))
    yield row(
        "resonance", "resonance", known(band.resonance, doubt, "frequency", "MHz"),
        given=f"aim {megahertz(band.aim)}", why="where the reactance rises through zero, nearest the aim",
    )  # fmt: skip
    yield row("aim_swr", "SWR at the aim", swr_text(band, band.aim_swr))
    yield row("z_aim", "Z at the aim", impedance(band.aim_impedance, band.impedance_doubt))
    if band.resonance_resistance is not None:
        resistance = known(band.resonance_resistance, band.impedance_doubt, "resistance", "ohm")
        yield row("r_resonance", "R at resonance", resistance)
    low, high = design.wanted_edges
    yield row("low_swr", "SWR at the low edge", swr_text(band, band.low_swr), given=megahertz(low))
    yield row("high_swr", "SWR at the high edge", swr_text(band, band.high_swr), given=megahertz(high))
    worst = swr_text(band, band.worst_swr)
    yield row("worst_swr", "worst SWR wanted", worst, given=f"limit {limit}")
    width = known(band.width, doubt, "frequency", "kHz")
    yield row(
        "width", "width under the limit", replace(width, doubt=""), why=f"around the dip, SWR below {limit}"
    )
    if band.usable is not None:
        first, last = (known(edge, doubt, "frequency", "MHz").number for edge in band.usable)
        yield row("usable", "usable", f"{first} to {last} MHz")
    sky, ground, wire, trap = shares_text(band.shares)
    yield row("sky_share", "to the sky", f"about {sky}", why=SHARES)
    yield row("ground_share", "to the ground", f"about {ground}", why=SHARES)
    yield row("wire_share", "to the wire", wire)
    if figures.trap is not None:
        yield row("trap_share", "to both traps", trap)
    current = known(band.feed_current, band.feed_current * band.stress_doubt, "current")
    yield row("feed_rms", "feed current, rms", current, why="at the aim, as a steady carrier")


def shares_text(shares: Shares) -> list[str]:
    """Return what sky, ground, wire and both traps get, in whole per cent that add up to 100."""
    return percents((shares.sky, shares.ground, shares.wire, shares.trap))


def _wires(figures: Figures) -> Iterator[Row]:
    lengths, design = figures.lengths, figures.design
    for name, far in (("inner", "feed point to trap centre"), ("end", "trap centre to the wire's end")):
        length = getattr(lengths, name)
        if length is None:
            continue
        if name == "inner" and lengths.end is None:
            far = "feed point to the wire's end"
        solved = get(design, f"antenna.lengths.{name}") is SOLVE
        value = length_text(length, lengths.doubt if solved else 0.0)
        yield Row(
            key=f"antenna.lengths.{name}", group="wires", label=f"{name} wire", value=value.value,
            unit=value.unit, given=given(design, f"antenna.lengths.{name}"), why=f"electrical, {far}",
        )  # fmt: skip
        for tail, label in (("mark", "tape mark"), ("reel", "off the reel")):
            yield Row(
                key=f"antenna.lengths.{name}_{tail}", group="wires", label=f"{name} wire, {label}",
                **_cells(measured(getattr(lengths, f"{name}_{tail}"), "m", 2)),
            )  # fmt: skip
    reserve = design.antenna.lengths.reserve
    yield Row(
        key="antenna.lengths.reserve", group="wires", label="extra on each wire",
        given=str(exact(reserve, "length")),
        why="left on when cutting, so that wire can still be let out",
    )  # fmt: skip
    total = known(lengths.total, 2 * lengths.doubt, "length", "m")
    yield Row(
        key="antenna.lengths.total", group="wires", label="tip to tip", value=total.number, unit=total.unit
    )
    yield Row(
        key="antenna.lengths.half_wave", group="wires", label="plain half wave",
        **_cells(measured(lengths.half_wave, "m", 1)), why="in free space at the lower aim, for comparison",
    )  # fmt: skip


def _cells(text: str) -> dict[str, str]:
    """Return a value and its unit apart."""
    value, _, unit = text.rpartition(" ")
    return {"value": value, "unit": unit}


def _trap(figures: Figures) -> Iterator[Row]:
    def set_(tail: str) -> str:
        return given(figures.design, f"antenna.trap.{tail}")

    for cells in trap_rows.rows(figures, set_):
        yield Row(**cells)


def _stress(figures: Figures, band: BandFigures) -> Iterator[Row]:
    if band.stress is None or band.worst_stress is None:
        return
    name = band_name(band)

    def row(tail: str, label: str, value: float, dimension: str, **more: str) -> Row:
        text = known(value, value * band.stress_doubt, dimension)
        key = f"bands.{band.role}.{tail}"
        return Row(key=key, group="stress", label=f"{name} {label}", value=text.value, unit=text.unit, **more)

    at = "at the aim, as a steady carrier"
    yield row("trap_peak", "peak volts at the aim", band.stress.peak_voltage, "voltage", why=at)
    yield row(
        "trap_worst_peak", "worst peak volts", band.worst_stress.peak_voltage, "voltage",
        given=rating_text(figures.design),
        why=f"in the wanted part, at {megahertz(band.worst_stress.frequency)}",
    )  # fmt: skip
    yield row("trap_rms", "current, rms", band.stress.rms_current, "current", why=at)
    yield row("trap_coil", "coil current, rms", band.stress.coil_current, "current", why=at)
    yield row("trap_capacitor", "capacitor current, rms", band.stress.capacitor_current, "current", why=at)
    yield row("trap_heat", "heat, steady carrier", band.stress.watts, "power", why=at)
    yield row(
        "trap_average", "worst heat, average", band.worst_stress.average_watts, "power",
        given=figures.design.station.mode, why="in the wanted part, in this mode while sending",
    )  # fmt: skip


def _effects(band: BandFigures) -> Iterator[Row]:
    effects = band.effects
    if effects is None:
        return
    name, key = band_name(band), f"bands.{band.role}.effects"

    def row(tail: str, label: str, value: str, why: str) -> Row:
        return Row(key=f"{key}.{tail}", group="effects", label=f"{name} {label}", value=value, why=why)

    unit, _ = small_step()
    for tail, label in (("inner", f"per {unit} of inner wire"), ("end", f"per {unit} of end wire")):
        slope = getattr(effects, tail)
        if slope is not None:
            way = "lower" if slope < 0 else "higher"
            why = f"both sides made longer: the band goes {way}"
            yield row(tail, label, f"{kilohertz_per_step(slope)} {way}", why)
    if effects.trap is not None:
        way = "higher" if effects.trap > 0 else "lower"
        text = f"{about(abs(effects.trap) / 100, 'frequency')} {way}"
        yield row("trap", "per % of trap", text, "both traps tuned 1 % higher")
    if effects.height is not None:
        way = "higher" if effects.height > 0 else "lower"
        yield row(
            "height", "per m of height", f"{about(abs(effects.height), 'frequency')} {way}", "hung higher"
        )
    if effects.soil is not None:
        low, high = sorted(effects.soil)
        text = f"{low / 1e3:+.0f} to {high / 1e3:+.0f} kHz"
        yield row("soil", "from dry to wet soil", text, "against the soil taken")


def _findings(figures: Figures) -> Iterator[Row]:
    for number, finding in enumerate(words.ranked(figures.findings)):
        yield Row(
            key=f"findings.{number}", group="findings", label=words.LEVEL_WORDS[finding.level],
            value=words.sentence(finding, figures.design), why=words.cure(finding), finding=finding,
        )  # fmt: skip


def summary(figures: Figures) -> tuple[Row, ...]:
    """Return what is needed to trust or doubt a design in ten seconds, a short text each."""

    def row(key: str, label: str, value: str, finding: Finding | None = None) -> Row:
        return Row(key=key, group="summary", label=label, value=value, finding=finding)

    found = [
        row("title", "", f"{visible(figures.design.title, 40)}: {words.basis(figures.design)}"),
        row("site", "site", site_line(figures)),
        row("station", "radio", station_line(figures.design)),
    ]
    found += [row(f"bands.{b.role}", band_name(b), band_line(figures, b)) for b in figures.bands.values()]
    found += [row("antenna.lengths", "wires", wire_line(figures))]
    if moves := moves_line(figures):
        found += [row("effects", f"1 {small_step()[0]}", moves)]
    if figures.trap is not None:
        found += [row("antenna.trap", "trap", trap_line(figures))]
    found += [row("check", "check", check_line(figures))]
    worst = next(iter(words.ranked(figures.findings)), None)
    if worst is None:
        found += [row("worst", "fine", "no findings")]
    else:
        text = words.sentence(worst, figures.design)
        helps = words.cure_among(worst, figures.findings)
        found += [row("worst", words.LEVEL_WORDS[worst.level], f"{text}; {helps}" if helps else text, worst)]
    return (*found, row("next", "next", next_move(figures)))
