"""How many antennas of a hundred keep the SWR limit: large figures, and where dips and worst SWR lie."""

from __future__ import annotations

from ....errors import visible
from ..lines import Line, padded, wrapped
from ..session import Session
from ..view import Sight
from .jobs import TOLERANCE
from .texts import waiting_lines

LARGE = 14
"""Lines from which the figures are large."""
_COLUMN = 11
_STRIP_ROOM = 31
_LEAST_STRIP = 8
_NARROW = 62
# The seven strokes of a figure in three lines, with what every terminal has.
_FIGURES = {
    "0": (" _ ", "| |", "|_|"),
    "1": ("   ", "  |", "  |"),
    "2": (" _ ", " _|", "|_ "),
    "3": (" _ ", " _|", " _|"),
    "4": ("   ", "|_|", "  |"),
    "5": (" _ ", "|_ ", " _|"),
    "6": (" _ ", "|_ ", "|_|"),
    "7": (" _ ", "  |", "  |"),
    "8": (" _ ", "|_|", "|_|"),
    "9": (" _ ", "|_|", " _|"),
    ".": (" ", " ", "."),
}


def large(number: str) -> tuple[str, str, str]:
    """Return a number in figures three lines high."""
    first, second, third = ("".join(_FIGURES[character][line] for character in number) for line in range(3))
    return first, second, third


def chances_lines(sight: Sight) -> list[Line]:
    """Return the yield at every stage and, below, how dips and worst SWR of each band scatter."""
    from ... import tolerance_out as out

    found = sight.session.aside.found(TOLERANCE.name)
    if found is None:
        return waiting_lines(sight.session, TOLERANCE, sight.width)
    width = sight.width
    text = f"how many of 100 keep SWR {found.design.station.swr_limit:.3g}"
    lines: list[Line] = [[(piece, "head")] for piece in wrapped(text, width)[:1]]
    for name, stage in out.told_stages(found):
        chance = out.chance(stage.within)
        bands = ", ".join(
            f"{visible(band.name, 12)} {out.percent(band.within.share)}" for band in stage.bands.values()
        )
        if sight.height < LARGE:
            lines.append([(f"{out.STAGES[name]:<15}", "text"), (padded(chance, width - 15), "head")])
            continue
        figures = large(out.percent(stage.within.share).removesuffix(" %"))
        for row, told in zip(figures, (out.STAGES[name], chance, bands), strict=True):
            lines.append(
                [(f"{row:>{_COLUMN - 1}} ", "found"), (padded(told, width - _COLUMN).rstrip(), "text")]
            )
    lines.append([(padded(out.trials_line(found), width).rstrip(), "quiet")])
    if width - _STRIP_ROOM >= _LEAST_STRIP:
        for role, band in next(iter(found.stages.values())).bands.items():
            lines += [[], [(visible(band.name, 12), "head")]]
            strips = out.histograms(found, role, min(width - _STRIP_ROOM, out.STRIP))
            lines += [[(padded(text, width).rstrip(), "text")] for text in strips]
    return lines


def chances_line(session: Session, width: int) -> str:
    """Return the yield in one line."""
    from ... import tolerance_out as out

    found = session.aside.found(TOLERANCE.name)
    if found is None:
        return f"yield: {session.aside.refusal(TOLERANCE.name) or 'being worked out'}"
    shares = {name: out.percent(stage.within.share) for name, stage in out.told_stages(found)}
    if width < _NARROW:
        return "yield " + ", ".join(
            f"{out.STAGES[name].split()[-1]} {share.removesuffix(' %')}" for name, share in shares.items()
        )
    return "yield: " + ", ".join(f"{out.STAGES[name]} {share}" for name, share in shares.items())
