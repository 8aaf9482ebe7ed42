"""The build sheet: plain text for paper, what to cut, wind, check and measure."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from ..design.design import Design, Shape
from ..services.antenna.figures import Figures
from ..services.trials.tolerance import Tolerance
from . import feed_out, hill_card, json_out, tolerance_json, tolerance_out, trap_sheet, words
from .feed_rows import loss_text, setting_text
from .layout import WIDTH, fitted, folded, said
from .lines import (
    band_line,
    band_name,
    check_line,
    moves_line,
    site_line,
    station_line,
    title,
)
from .shown import about, exact, imperial, known, measured, small_step


def text(figures: Figures, ensemble: Tolerance | None = None) -> str:
    """Return the whole sheet as text that ends in a line break; with an ensemble, how much longer to cut."""
    traps = () if figures.trap is None else (trap_sheet.lines, _stress)
    feed = (_feed,) if any(band.feed is not None for band in figures.bands.values()) else ()
    parts = (_head, _wires, _parts, *traps[:1], _expected, *feed, *traps[1:], _findings)
    cutting = () if ensemble is None else tolerance_out.sheet_lines(ensemble)
    lines = [line for part in parts for line in (*part(figures), *(cutting if part is _wires else ()), "")]
    rule = "-" * WIDTH
    lines += [rule, *hill_card.lines(figures, ensemble), *_learned(figures.design), rule, "", *_cautions()]
    return "\n".join(line.rstrip() for line in fitted(lines)) + "\n"


def _learned(design: Design) -> list[str]:
    """Return where the dips may be next and the moves that go with them, once something was read."""
    if design.history is None or not design.history.steps:
        return []
    from . import next_run

    return ["", *next_run.card(design)]


def document(figures: Figures, ensemble: Tolerance | None = None) -> dict[str, Any]:
    """Return the sheet for scripts: the figures, the hill card, the cautions, and what an ensemble says."""
    cards = [
        {
            "band": card.band.role,
            "aim_hz": card.band.aim,
            "wire": card.wire,
            "shorten_when_low": card.shorten_when_low,
            "moves": [
                {"dip_off_hz": move.off, "change_m": move.change, "other_band_hz": move.other}
                for move in card.moves
            ],
        }
        for card in hill_card.cards(figures)
    ]
    found = json_out.figures(figures) | {"hill_card": cards, "cautions": list(words.CAUTIONS)}
    return found if ensemble is None else found | {"tolerance": tolerance_json.document(ensemble)}


def _head(figures: Figures) -> Iterator[str]:
    yield f"BUILD SHEET: {title(figures.design)}"
    yield from folded("", f"This is {words.basis(figures.design)}. Leave the wires long, measure, then cut.")
    yield ""
    yield from folded("  site   ", site_line(figures))
    yield from folded("  radio  ", station_line(figures.design))


def _wire_words(design: Design) -> str:
    wire = design.antenna.wire
    coat = f", coated {exact(wire.coating, 'length')}" if wire.coating else ", bare"
    metal = wire.material if wire.conductivity is None else about(wire.conductivity, "conductivity", 3)
    return f"{metal}, {exact(wire.diameter, 'length', digits=3)}{coat}"


def _wires(figures: Figures) -> Iterator[str]:
    lengths, own = figures.lengths, figures.design.antenna.lengths
    doubt = known(lengths.doubt, lengths.doubt, "length", "cm")
    # Feet and inches take more room.
    wide = 15 if imperial("length") else 12
    yield f"WIRES: {_wire_words(figures.design)}. Two of each."
    yield f"  {'':<12}{'electrical':>{wide}}{'tape mark':>{wide}}{'off the reel':>{wide + 2}}"
    rows = [
        ("inner wire" if lengths.end else "each side", lengths.inner, lengths.inner_mark, lengths.inner_reel)
    ]
    if lengths.end is not None:
        rows += [("end wire", lengths.end, lengths.end_mark, lengths.end_reel)]
    for name, electrical, mark, reel in rows:
        cells = [measured(length, "m", 2) for length in (electrical, mark, reel)]
        yield f"  {name:<12}{cells[0]:>{wide}}{cells[1]:>{wide}}{cells[2]:>{wide + 2}}"
    if lengths.end is not None:
        yield from folded(
            "  electrical  ", "inner: feed point to trap centre; end: trap centre to the wire's end."
        )
        yield from folded(
            "  tape mark   ",
            "inner: from the feed point terminal to the trap's near end; end: from the trap's far end to the"
            " fold at the end insulator. Between the fastenings, wire pulled tight.",
        )
    else:
        yield from folded("  electrical  ", "feed point to the wire's end.")
        yield from folded("  tape mark   ", "from the feed point terminal to the fold at the end insulator.")
    yield from folded(
        "  reel        ",
        f"the tape mark and {exact(own.knot, 'length')} for each knot, {exact(own.loop, 'length')} for the"
        f" end loop, {exact(own.reserve, 'length')} to spare. Fold what is to spare back along the wire.",
    )
    if stretch := figures.design.antenna.wire.stretch:
        yield from folded(
            "  stretch     ", f"marks are for slack wire, pulled it gets {100 * stretch:.1f} % longer."
        )
    yield from folded("  known to    ", f"about {doubt.doubt} {doubt.unit} before measuring.")
    yield from folded("  check       ", f"{check_line(figures)}.")
    if moves := moves_line(figures):
        yield from folded(f"  {'one ' + small_step()[0]:<12}", f"{moves}.")


def _parts(figures: Figures) -> Iterator[str]:
    lengths, design = figures.lengths, figures.design
    total = 2 * (lengths.inner_reel + (lengths.end_reel or 0.0))
    yield "PARTS"
    yield from folded("  wire       ", f"{measured(total, 'm', 1)} off the reel in all")
    yield from trap_sheet.parts(figures)
    support = "two supports" if design.site.shape is Shape.FLAT else "one support, cords for the ends"
    yield from folded("  also       ", f"feed point insulator, choke, line, 2 end insulators, {support}")


def _expected(figures: Figures) -> Iterator[str]:
    yield "EXPECTED AT THE FEED POINT"
    for band in figures.bands.values():
        yield from folded(f"  {band_name(band):<7} ", band_line(figures, band))


def _feed(figures: Figures) -> Iterator[str]:
    """Yield the way from the wire to the transmitter, band by band, and the tuner's setting."""
    yield "FROM THE WIRE TO THE TRANSMITTER"
    for band in figures.bands.values():
        yield from feed_out.way_lines(figures, band)
        if band.feed is not None and band.feed.tuner is not None:
            setting = band.feed.tuner
            yield from folded("  tuner      ", f"{setting_text(setting)}; {loss_text(setting)}")


def _stress(figures: Figures) -> Iterator[str]:
    design = figures.design
    yield f"STRESS OF ONE TRAP at {about(design.station.power, 'power', 3)}, worst in the wanted part"
    bands = [band for band in figures.bands.values() if band.worst_stress is not None]
    mode = f"average {design.station.mode}"
    yield f"  {'':<13}{'peak volts':>14}{'coil, rms':>15}{'steady heat':>15}{mode:>19}"
    for band in bands:
        worst, doubt = band.worst_stress, band.stress_doubt
        assert worst is not None
        cells = [
            str(known(value, value * doubt, dimension))
            for value, dimension in (
                (worst.peak_voltage, "voltage"),
                (worst.coil_current, "current"),
                (worst.watts, "power"),
                (worst.average_watts, "power"),
            )
        ]
        volts, amps, watts, average = cells
        yield f"  {band_name(band):<13}{volts:>14}{amps:>15}{watts:>15}{average:>19}"
    yield from folded(
        "  ", "Peak volts decide the capacitor, average watts the heat. The wire ends carry high voltage too."
    )


def _findings(figures: Figures) -> Iterator[str]:
    yield "FINDINGS"
    for finding in words.ranked(figures.findings):
        text = words.sentence(finding, figures.design)
        yield from said(f"  {words.LEVEL_WORDS[finding.level]}: ", text, words.cure(finding))
    if not figures.findings:
        yield "  none"


def _cautions() -> Iterator[str]:
    yield "BEFORE ANYTHING GOES UP"
    for caution in words.CAUTIONS:
        yield from folded("  - ", caution)
