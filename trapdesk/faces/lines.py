"""One line each: what the first screen says of a site, a band, the wires, the trap, and what to do next."""

from __future__ import annotations

from typing import TYPE_CHECKING

from ..design.capacitor_kinds import StubCapacitor
from ..design.coil_kinds import CableCoil
from ..design.design import Design, Shape, get
from ..design.fields import SOLVE
from ..engine.soils import GroundKind
from ..errors import visible
from . import words
from .feed_rows import line_name
from .shown import Shown, about, centimetres, exact, kilohertz_per_step, known, measured, megahertz, swr

if TYPE_CHECKING:
    from ..services.antenna.figures import BandFigures, Figures


def title(design: Design, longest: int = 60) -> str:
    """Return the design's title, fit to be shown."""
    return visible(design.title, longest)


def ground_words(design: Design) -> str:
    """Return what is under the wire, in a few words."""
    site = design.site
    if site.ground is GroundKind.SPACE:
        return "far from any ground"
    if site.ground is GroundKind.MIRROR:
        return "over a mirror (ideal ground)"
    if site.conductivity is not None and site.permittivity is not None:
        return f"soil {about(site.conductivity, 'conductivity', 3)}, permittivity {site.permittivity:.3g}"
    return "soil unknown, an average taken" if site.soil_is_unknown else f"soil {site.soil}"


def band_name(band: BandFigures) -> str:
    """Return the band's name, fit to be shown."""
    return visible(band.name, 12)


def swr_text(band: BandFigures, value: float) -> str:
    """Return an SWR of a band; its doubt is that at the aim, the same part of it elsewhere."""
    return swr(value, band.swr_doubt * value / band.aim_swr)


def rating(design: Design) -> float | None:
    """Return the peak voltage the trap's capacitor stands, None when nobody said."""
    trap = design.antenna.trap
    if trap is None:
        return None
    if isinstance(trap.coil, CableCoil):
        from ..services.trap.capacitors import cable_rating

        return cable_rating(trap.coil)
    part = trap.capacitor
    if isinstance(part, StubCapacitor):
        from ..services.trap.capacitors import cable_rating

        return cable_rating(part)
    printed = getattr(part, "print", None)
    return getattr(part, "voltage", None) or (printed.voltage if printed is not None else None)


def rating_text(design: Design) -> str:
    """Return what the trap's capacitor stands, in a few words."""
    rated = rating(design)
    if rated:
        return f"rated {about(rated, 'voltage', 3)}"
    trap = design.antenna.trap
    return "by its parts" if trap is not None and hasattr(trap.capacitor, "members") else "no rating given"


def inductance_text(figures: Figures) -> Shown:
    """Return the trap's inductance: to its doubt when wound, as it was typed or to four digits when given."""
    trap = figures.trap
    assert trap is not None
    if trap.inductance_doubt:
        return known(trap.inductance, trap.inductance_doubt, "inductance")
    coil = figures.design.antenna.trap.coil if figures.design.antenna.trap else None
    if getattr(coil, "inductance", SOLVE) is SOLVE:
        return exact(trap.inductance, "inductance", digits=4)
    return exact(trap.inductance, "inductance")


def turns_doubt(figures: Figures) -> float:
    """Return how far turns may be off: as the root of the inductance."""
    trap = figures.trap
    assert trap is not None and trap.coil is not None
    return trap.coil.turns * trap.inductance_doubt / trap.inductance / 2


def length_text(length: float, doubt: float) -> Shown:
    """Return a wire length in metres: to its doubt when solved, to the millimetre when set."""
    return known(length, doubt, "length", "m") if doubt else exact(length, "length", "m", digits=5)


def site_line(figures: Figures) -> str:
    """Return shape, heights and ground in one line."""
    site = figures.design.site
    text = f"{site.shape}, feed point at {exact(site.height, 'length')}"
    if site.shape is Shape.VEE and figures.lengths.end_height is not None:
        text += f", ends at {measured(figures.lengths.end_height, 'm', 1)}"
    return f"{text}, {ground_words(figures.design)}"


def station_line(design: Design) -> str:
    """Return watts, mode and what is asked of the antenna."""
    station = design.station
    return (
        f"{about(station.power, 'power', 3)} {station.mode},"
        f" SWR limit {station.swr_limit:.3g} at the {station.judged_at}"
        f" against {exact(station.reference, 'resistance')}"
        + (f", {line_name(station.line)}" if station.line is not None else "")
        + (f", tuner at the {station.tuner.place}" if station.tuner is not None else "")
    )


def band_line(figures: Figures, band: BandFigures) -> str:
    """Return a band in one line: dip, and SWR there and at both edges."""
    low, high = getattr(figures.design.bands, band.role).wanted_edges
    dip = known(band.dip, band.frequency_doubt, "frequency", "MHz")
    off = about(band.frequency_doubt, "frequency")
    return (
        f"dip {dip.number} MHz +- {off}, SWR {swr_text(band, band.dip_swr)};"
        f" {swr_text(band, band.low_swr)} at {megahertz(low).removesuffix(' MHz')},"
        f" {swr_text(band, band.high_swr)} at {megahertz(high)}"
    )


def wire_line(figures: Figures) -> str:
    """Return the wires of one side and what to leave on them."""
    lengths, design = figures.lengths, figures.design
    pieces = []
    for name in ("inner", "end"):
        length = getattr(lengths, name)
        if length is not None:
            solved = get(design, f"antenna.lengths.{name}") is SOLVE
            pieces += [f"{name} {length_text(length, lengths.doubt if solved else 0.0)}"]
    if len(pieces) == 1:
        pieces = [pieces[0].removeprefix("inner ")]
    return (
        f"{', '.join(pieces)} a side; leave {centimetres(design.antenna.lengths.reserve)} extra on each wire"
    )


def moves_line(figures: Figures) -> str:
    """Return what a centimetre, or an inch, of each wire does, band by band."""
    pieces = []
    for name in ("inner", "end"):
        parts = []
        for band in figures.bands.values():
            slope = getattr(band.effects, name) if band.effects else None
            if slope is not None:
                parts += [f"{band_name(band)} by {kilohertz_per_step(slope)}"]
        if parts:
            pieces += [f"{name} wires move {' and '.join(parts)}"]
    if figures.trap is None:
        pieces = [piece.replace("inner wires move", "each side moves") for piece in pieces]
    return "; ".join(pieces)


def trap_line(figures: Figures) -> str:
    """Return the trap in one line: frequency, turns, volts against rating, heat."""
    trap = figures.trap
    assert trap is not None
    pieces = [megahertz(trap.resonance)]
    if trap.coil is not None:
        pieces += [f"{known(trap.coil.turns, turns_doubt(figures), 'count').number} turns"]
    else:
        pieces += [f"{inductance_text(figures)}"]
    worst = [(b, b.worst_stress) for b in figures.bands.values() if b.worst_stress is not None]
    if worst:
        band, stress = max(worst, key=lambda pair: pair[1].peak_voltage)
        volts = known(stress.peak_voltage, stress.peak_voltage * band.stress_doubt, "voltage")
        against = rating_text(figures.design).replace("by its parts", "rated by its parts")
        pieces += [f"{volts.number} {volts.unit} peak on {band_name(band)} ({against})"]
        band, stress = max(worst, key=lambda pair: pair[1].average_watts)
        heat = known(stress.average_watts, stress.average_watts * band.stress_doubt, "power")
        pieces += [f"{heat.number} {heat.unit} heat on average"]
    return ", ".join(pieces)


def check_line(figures: Figures) -> str:
    """Return the total length against a plain half wave."""
    lengths = figures.lengths
    total = known(lengths.total, 2 * lengths.doubt, "length", "m")
    lower = figures.bands["lower"]
    return (
        f"tip to tip {total.number} {total.unit},"
        f" {100 * lengths.total / lengths.half_wave:.0f} % of a plain half wave at {megahertz(lower.aim)}"
        f" ({measured(lengths.half_wave, 'm', 1)})"
    )


def next_move(figures: Figures) -> str:
    """Return what to do next with a design that nobody has measured yet."""
    worst = next(iter(words.ranked(figures.findings)), None)
    helps = words.cure_among(worst, figures.findings) if worst is not None else ""
    if worst is not None and worst.level == words.SEVERITY[0] and helps:
        return f"mend the design first: {helps}"
    names = [band_name(band) for band in figures.bands.values()]
    hang = f"cut the wires to their reel lengths, hang them, measure the dip on {names[0]}"
    if len(names) > 1:
        hang += " first"
    if figures.trap is None:
        return hang
    return f"build two traps and bring both to {megahertz(figures.trap.resonance)} off the wire, then {hang}"
