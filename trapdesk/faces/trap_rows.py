"""The trap as rows: what to wind and fit, which side to build on, what each part bears, what weather does."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace
from typing import TYPE_CHECKING

from ..design.coil_kinds import CableCoil
from ..design.design import get
from ..design.fields import SOLVE
from ..errors import visible
from .lines import band_name, inductance_text, turns_doubt
from .shown import Shown, about, exact, impedance_range, known, measured, megahertz, percent, small_step, swr

if TYPE_CHECKING:
    from ..services.antenna.figures import (
        Adjustment,
        BandFigures,
        Figures,
        PartFigures,
        PartStress,
        TrapFigures,
    )

Cells = dict[str, str]

WORDS = {
    "turns": ("pulling turns apart", "pushing them together"),
    "ring": ("spreading the turns", "bunching them"),
    "tail": ("taking cable off", ""),
    "stub": ("snipping the stub", ""),
}
"""What is moved: the way that raises the trap, and the way that lowers it."""
SHIFTS = {
    "sealing": "sealed, not allowed for",
    "rain": "rain",
    "ice": "ice",
    "sun": "sun",
    "cold": "cold",
    "heat": "its own heat",
}
RULES = {"voltage": "voltage", "current": "current", "heat": "heat", "flux": "flux"}
MEASURED = {"resonance": "resonance", "coil.inductance": "inductance", "q": "q"}
"""The rows that readings of the trap replace, and the readings that do."""
HARDLY = 500.0
"""Shift below which it is said to hardly move. [Hz]"""


def rows(figures: Figures, given: Callable[[str], str]) -> Iterator[Cells]:
    """Yield the rows of the trap by itself; `given` tells what was set at a key, or that it was measured."""
    part = figures.design.antenna.trap
    measured = None if part is None else part.measured
    for cells in _computed(figures, given):
        tail = cells["key"].removeprefix("antenna.trap.")
        if measured is None:
            yield cells
        elif tail == "resonance_doubt" and measured.resonance is not None:
            yield cells | {"label": "measured to, one sigma", "why": "what its readings leave in doubt"}
        elif tail in MEASURED and getattr(measured, MEASURED[tail]) is not None:
            yield cells | {"given": "measured"}
        else:
            yield cells


def _computed(figures: Figures, given: Callable[[str], str]) -> Iterator[Cells]:
    trap, design = figures.trap, figures.design
    if trap is None:
        return
    part = design.antenna.trap
    of_cable = part is not None and isinstance(part.coil, CableCoil)
    if of_cable:
        yield from _side(trap)
        yield from _cable_turns(trap, given)
    doubt = as_wound(figures)
    yield _row(
        "resonance", "trap resonance", megahertz(trap.resonance), given=given("resonance"),
        why="what to bring it to, by itself, off the wire",
    )  # fmt: skip
    if trap.bring_to is not None and trap.bring_to != trap.resonance:
        why = f"closing it lowers it by {percent(1 - trap.resonance / trap.bring_to, 1e-3)}, common practice"
        yield _row("bring_to", "before it is closed", megahertz(trap.bring_to), why=why)
    if doubt > 0:
        off = known(doubt, doubt, "frequency", "kHz").doubt
        yield _row(
            "resonance_doubt", "as wound, off by up to", f"{off} kHz", why="before it is brought there"
        )
    if not of_cable:
        yield from _side(trap)
    yield from _parts(figures, given, of_cable)
    yield from _coil(figures, given, of_cable)
    least, most = trap.q_range
    spread = f" ({about(least, 'ratio')} to {about(most, 'ratio')})" if most > least else ""
    yield _row("q", "Q of the trap", f"{about(trap.q, 'ratio', 2 if spread else 3)}{spread}")
    if trap.coil is not None and trap.coil.crowding > 1.02:
        lost = 1 - 1 / trap.coil.crowding
        yield _row(
            "crowding", "crowding", f"costs {percent(lost)} of Q",
            why="current crowds to the inside of the turns; wider turns and thinner wire crowd less",
        )  # fmt: skip
    yield _row("dynamic", "dynamic resistance", about(trap.dynamic_resistance, "resistance"))
    for role, z in trap.impedance.items():
        name = visible(design.bands.called(role), 12)
        yield _row(f"z_{role}", f"trap Z at the {name} aim", impedance_range(z))


def _row(tail: str, label: str, value: str | Shown, **more: str) -> Cells:
    text, unit = (value, "") if isinstance(value, str) else (value.value, value.unit)
    return {
        "key": f"antenna.trap.{tail}", "group": "trap", "label": label, "value": text, "unit": unit, **more,
    }  # fmt: skip


def as_wound(figures: Figures) -> float:
    """Return how far the resonance may be off before the trap is brought to it, at worst [Hz]."""
    return figures.trap.resonance_doubt


def adjustment_text(adjustment: Adjustment) -> str:
    """Return what moving something does, in words."""
    up, down = WORDS[adjustment.what]
    text = f"{up} raises it"
    if adjustment.rate is not None:
        text += f" {about(adjustment.rate * small_step()[1], 'frequency')} a {small_step()[0]}"
    text += f" by up to {about(adjustment.raises, 'frequency')}"
    if adjustment.lowers > HARDLY:
        text += f", {down} lowers it by up to {about(adjustment.lowers, 'frequency')}"
    return text


def side_text(adjustments: tuple[Adjustment, ...]) -> str:
    """Return on which side of its resonance to build a trap."""
    if not adjustments:
        return "right at once: nothing on it can be moved afterwards"
    if all(a.lowers <= HARDLY for a in adjustments):
        return "a little low: afterwards it only goes up"
    return "a little low: raising it is the easier way"


def _side(trap: TrapFigures) -> Iterator[Cells]:
    yield _row("build", "build it", side_text(trap.adjustments))
    for number, adjustment in enumerate(trap.adjustments, start=1):
        key = f"adjustments.{number}"
        yield _row(key, "then", adjustment_text(adjustment), why="what its kind allows after building")


def _cable_turns(trap: TrapFigures, given: Callable[[str], str]) -> Iterator[Cells]:
    coil = trap.coil
    if coil.turns_range is None:
        yield _row("coil.turns", "turns", f"{coil.turns:.2f}", given=given("coil.turns"))
        return
    low, high = coil.turns_range
    yield _row(
        "coil.turns", "turns", f"{low:.2f} to {high:.2f}", given=given("coil.turns"),
        why="how the current spreads round the braid is not known: somewhere between",
    )  # fmt: skip
    yield _row(
        "coil.wind", "wind first", f"{coil.wind} turns, {measured(coil.cut, 'm', 2)} of cable, then trim",
        why="the next whole turn up, tails included",
    )  # fmt: skip


def part_label(part: PartFigures) -> str:
    """Return what a capacitor is called: its place, and its print where it has one."""
    place = part.key.removeprefix("antenna.trap.capacitor").replace(".members.", ".").lstrip(".")
    return f"capacitor {place}".strip()


def part_name(part: PartFigures | PartStress) -> str:
    """Return what a part is, in a few words."""
    return visible(part.name, 24)


def part_text(part: PartFigures) -> str:
    """Return a capacitor in words: its value, tolerance, drift, length."""
    pieces = [str(exact(part.capacitance, "capacitance", digits=3))]
    if part.tolerance is not None:
        down, up = part.tolerance
        pieces += [f"+- {100 * up:.2g} %" if down == up else f"-{100 * down:.2g} +{100 * up:.2g} %"]
    text = " ".join(pieces)
    if part.name != "capacitor" and not part.name.isdecimal():
        text = f"{part_name(part)}: {text}"
    if part.pieces > 1:
        text = f"{part.pieces} x {text}"
    if part.length is not None:
        text += f", {measured(part.length, 'cm', 1)} long"
    if part.drift is not None:
        text += f", {part.drift * 1e6:+.0f} ppm/K"
    return text


def loss_text(part: PartFigures) -> str:
    """Return a capacitor's loss and where it comes from."""
    if part.loss_source == "none":
        return "counted as lossless"
    source = {"given": "as given", "estimate": "an estimate"}.get(part.loss_source, "an estimate from a list")
    return f"tan delta {part.loss_tangent:.2g}, {source}"


def _parts(figures: Figures, given: Callable[[str], str], of_cable: bool) -> Iterator[Cells]:
    trap, design = figures.trap, figures.design
    inductance = inductance_text(figures)
    kind = design.antenna.trap.coil.kind if design.antenna.trap else ""
    was = given("coil.inductance") if kind == "given" else ""
    yield _row(
        "coil.inductance", "inductance", inductance, given=was,
        why="of the plain circuit that is alike near resonance" if of_cable else "",
    )  # fmt: skip
    fitted = f"{trap.fitted_capacitance * 1e12:.3g}"
    shown = exact(trap.fitted_capacitance, "capacitance")
    key = "antenna.trap.capacitor.capacitance"
    plain = hasattr(design.antenna.trap.capacitor, "capacitance")
    if not plain or get(design, key) is SOLVE:
        shown = replace(shown, number=fitted, unit="pF")
    yield _row(
        "capacitor.capacitance", "capacitor" if plain else "capacitance", shown,
        given=given("capacitor.capacitance") if plain else "",
        why="of that circuit" if of_cable else "what is fitted; the coil adds its own",
    )  # fmt: skip
    if of_cable or not trap.parts:
        return
    for part in trap.parts:
        if len(trap.parts) > 1 or part.name != "capacitor":
            tail = part.key.removeprefix("antenna.trap.")
            yield _row(tail, part_label(part), part_text(part), why=loss_text(part))
    if len(trap.parts) > 1 and trap.tolerance is not None:
        down, up = trap.tolerance
        text = f"-{100 * down:.2g} to +{100 * up:.2g} %"
        yield _row("capacitor.tolerance", "all of it, at worst", text, why="every member off the same way")


def _coil(figures: Figures, given: Callable[[str], str], of_cable: bool) -> Iterator[Cells]:
    coil = figures.trap.coil
    if coil is None:
        return
    if not of_cable:
        turns = known(coil.turns, turns_doubt(figures), "count")
        yield _row("coil.turns", "turns", replace(turns, unit=""), given=given("coil.turns"))
        if coil.half_turns is not None and abs(coil.half_turns - coil.turns) > 0.01:
            text = f"{coil.half_turns:g}: trap at {megahertz(coil.half_resonance, 4)}"
            step = "to half a turn" if coil.most_turns is None else "to a whole turn"
            yield _row("coil.half_turns", step, text, why="before it is adjusted")
    if coil.most_turns is not None:
        yield _row("coil.most_turns", "turns that fit", f"{coil.most_turns}", why="side by side in the core")
    else:
        wire = "cable" if of_cable else "wire"
        yield _row(
            "coil.diameter",
            "coil diameter",
            measured(coil.diameter, "mm", 1),
            why=f"centre to centre of the {wire}",
        )
        yield _row("coil.length", "winding length", measured(coil.length, "mm", 0), why="turns times pitch")
        if coil.pitch:
            yield _row("coil.pitch", "pitch", measured(coil.pitch, "mm", 2), given=given("coil.pitch"))
    name = "cable" if of_cable else "wire"
    yield _row(
        "coil.wire", f"{name} in the coil", measured(coil.wire_length, "m", 2), why="without the tails"
    )
    if coil.outer_diameter:
        size = f"{measured(coil.outer_diameter, 'mm', 0)} across, {measured(coil.outer_length, 'mm', 0)} long"
        yield _row("coil.size", "size", size)
        yield _row(
            "coil.mass", "weight", f"{coil.mass * 1e3:.0f} g", why="without former, core and capacitor; about"
        )
    low, middle, high = (c * 1e12 for c in coil.self_capacitance)
    yield _row(
        "coil.self_capacitance", "coil's own capacitance", f"{middle:.1f} ({low:.1f} to {high:.1f}) pF"
    )
    if coil.own_resonance is not None:
        text = about(coil.own_resonance, "frequency")
        yield _row("coil.own_resonance", "coil by itself", f"resonates near {text}", why="a rough estimate")


def stress_rows(figures: Figures, band: BandFigures) -> Iterator[Cells]:
    """Yield what each part of the trap bears in a band, and against which limit."""
    parts = [part for part in band.parts if part.key != "antenna.trap.coil" or part.share is not None]
    if len(parts) == 1 and parts[0].rules in (None, "voltage") and parts[0].name == "capacitor":
        return
    for part in parts:
        doubt = band.stress_doubt
        volts, amps, watts = (
            f"{shown.number} {shown.unit}"
            for shown in (
                known(part.peak_voltage, part.peak_voltage * doubt, "voltage"),
                known(part.rms_current, part.rms_current * doubt, "current", "A"),
                known(part.average, part.average * doubt, "power", "W"),
            )
        )
        limit = "no limit known"
        if part.share is not None:
            limit = f"{percent(part.share)} of {RULES[part.rules]}"
        place = part.key.removeprefix("antenna.trap.").replace(".members", "")
        yield {
            "key": f"bands.{band.role}.{place}", "group": "stress",
            "label": f"{band_name(band)} {part_name(part)}", "given": limit,
            "value": f"{volts} peak, {amps}, {watts}",
            "why": "worst in the wanted part; watts on average while sending",
        }  # fmt: skip


def heat_rows(figures: Figures) -> Iterator[Cells]:
    """Yield how warm a trap gets."""
    heat = figures.trap.heat if figures.trap is not None else None
    if heat is None:
        return
    text = f"about {heat.over:.0f} K at the end of an over, {heat.lasting:.0f} K without a pause"
    softens = f"softens {heat.softens:.0f} C" if heat.softens is not None else ""
    yield {
        "key": "antenna.trap.heat", "group": "stress", "label": "trap gets warmer by", "value": text,
        "given": softens, "why": f"an estimate in still air; with the sun it reaches {heat.hottest:.0f} degC",
    }  # fmt: skip


def shift_rows(figures: Figures) -> Iterator[Cells]:
    """Yield what closing, water and temperature do."""
    for shift in figures.trap.shifts if figures.trap is not None else ():
        yield {
            "key": f"antenna.trap.weather.{shift.what}", "group": "effects",
            "label": f"trap, {SHIFTS[shift.what]}", "value": shift_text(figures, shift.what),
            "why": "common practice" if shift.what in ("sealing", "rain", "ice") else "an estimate",
        }  # fmt: skip


def _moved(change: float) -> str:
    if change != change:
        return "out of sight"
    if abs(change) < HARDLY:
        return "hardly"
    return f"{about(abs(change), 'frequency')} {'lower' if change < 0 else 'higher'}"


def shift_text(figures: Figures, what: str) -> str:
    """Return what one thing does to trap and bands, in words."""
    shift = next(s for s in figures.trap.shifts if s.what == what)
    bands = [
        f"{band_name(band)} {_moved(shift.dips[role])}, worst SWR {swr(shift.swr[role], band.swr_doubt)}"
        for role, band in figures.bands.items()
    ]
    return f"{_moved(shift.trap)}; {'; '.join(bands)}"
