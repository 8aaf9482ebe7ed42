"""The hill card: what is carried to the halyard, centimetres against readings."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from ..services.antenna.figures import BandFigures, Figures
from ..services.trials.tolerance import Tolerance
from . import tolerance_out, words
from .layout import WIDTH, folded
from .lines import band_name, title
from .shown import about, centimetres, measured, megahertz

STEPS = 5


@dataclass(frozen=True, kw_only=True)
class Move:
    """How far off the dip is [Hz], what wire that is on each side [m], how far the other band goes [Hz]."""

    off: float
    change: float
    other: float | None


@dataclass(frozen=True, kw_only=True)
class Card:
    """The moves of one wire for one band. `other` is the band that goes with it, None where there is none."""

    band: BandFigures
    wire: str
    shorten_when_low: bool
    other: BandFigures | None
    moves: tuple[Move, ...]


def cards(figures: Figures) -> tuple[Card, ...]:
    """Return the moves of the inner wires for the upper band, then those of the end wires for the lower.

    Upper band first, because the inner wires move both. Without a trap or an upper band one wire does all
    there is to do. A band without a resonance has no card.
    """
    upper, lower = figures.bands.get("upper"), figures.bands["lower"]
    if figures.trap is None:
        wanted = [(lower, "inner", upper)]
    elif upper is None:
        wanted = [(lower, "end", None)]
    else:
        wanted = [(upper, "inner", lower), (lower, "end", upper)]
    found = (_card(band, wire, other) for band, wire, other in wanted)
    return tuple(card for card in found if card is not None)


def _card(band: BandFigures, wire: str, other: BandFigures | None) -> Card | None:
    slope = getattr(band.effects, wire, None)
    if not slope:
        return None
    beside = getattr(other.effects, wire, None) if other is not None else None
    step = even(band.frequency_doubt / 2)
    moves = (
        Move(
            off=n * step,
            change=n * step / abs(slope),
            other=None if beside is None else n * step / abs(slope) * -beside * math.copysign(1, -slope),
        )
        for n in range(1, STEPS + 1)
    )
    return Card(band=band, wire=wire, shorten_when_low=slope < 0, other=other, moves=tuple(moves))


def even(size: float) -> float:
    """Return the nearest 1, 2 or 5 times a power of ten at or below a size."""
    power = 10.0 ** math.floor(math.log10(size))
    return next(n * power for n in (5, 2, 1) if n * power <= size * (1 + 1e-9))


def lines(figures: Figures, ensemble: Tolerance | None = None) -> list[str]:
    """Return the card as lines, fewer than fill a small screen; with an ensemble, how much wire to leave."""
    head = f"HILL CARD: {title(figures.design, 36)}"
    basis = words.basis(figures.design)
    found = [f"{head:<{WIDTH - len(basis) - 1}} {basis}"[:WIDTH], *_marks(figures)]
    found += [] if ensemble is None else folded("", tolerance_out.card_line(ensemble))
    all_cards = cards(figures)
    for number, card in enumerate(all_cards, start=1):
        wire = "side" if figures.trap is None else f"{card.wire} wire"
        found += _table(card, f"{number}. " if len(all_cards) > 1 else "", wire)
    if not all_cards:
        found += ["No resonance near the aim: mend the design before going out."]
    trap = figures.bands["upper"].effects if "upper" in figures.bands else None
    if figures.trap is not None and trap is not None and trap.trap is not None:
        name = band_name(figures.bands["upper"])
        moved = about(abs(trap.trap) / 100, "frequency")
        found += [f"Traps 1 % low put {name} {moved} low: mend a trap before cutting wire for it."]
    return [*found, "Fold back before you cut. Measure again after each move. No power lines near."]


def _marks(figures: Figures) -> Iterator[str]:
    lengths = figures.lengths
    if lengths.end_mark is None:
        yield f"Tape mark {measured(lengths.inner_mark, 'm', 2)} from the feed point. Both sides alike."
        return
    trap = megahertz(figures.trap.resonance) if figures.trap else ""
    yield from folded(
        "",
        f"Tape marks: inner {measured(lengths.inner_mark, 'm', 2)}, end {measured(lengths.end_mark, 'm', 2)}."
        f" Traps {trap}. Both sides alike.",
    )


def _table(card: Card, number: str, wire: str) -> Iterator[str]:
    name = band_name(card.band)
    low, high = ("shorten", "let out") if card.shorten_when_low else ("let out", "shorten")
    yield f"{number}{name}, aim {megahertz(card.band.aim)}: dip too low, {low}; dip too high, {high}."
    beside = ""
    if card.other is not None and any(move.other is not None for move in card.moves):
        beside = f"{band_name(card.other)} goes with it by"
    yield f"     {'dip off by':>12}   {'each ' + wire + ' by':>20}   {beside:>22}".rstrip()
    for move in card.moves:
        other = _other(move.other) if beside else ""
        off, change = about(move.off, "frequency"), centimetres(move.change)
        yield f"     {off:>12}   {change:>20}   {other:>22}".rstrip()


def _other(change: float | None) -> str:
    """Return how far the other band goes; a minus stands for the other way."""
    if change is None:
        return ""
    sign = "-" if change < 0 else ""
    return "hardly" if abs(change) < 500 else f"{sign}{about(abs(change), 'frequency')}"
