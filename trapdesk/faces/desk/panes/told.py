"""Texts of the verbs for the views: the same lines that the command line prints."""

from __future__ import annotations

from ..session import Session
from .jobs import CHOICES, FOR_YIELD, FULL_TOLERANCE, SHEET_TOLERANCE, TUNER


def causes_told(session: Session) -> list[str]:
    """Return the whole tolerance text, what it comes from and what would help first."""
    from ... import tolerance_out as out

    found = session.aside.found(FULL_TOLERANCE.name)
    if found is None:
        return []
    tolerance, advice = found
    head, *_ = out.lines(tolerance)
    chosen = session.aside.found(FOR_YIELD.name) if session.aside.fresh(FOR_YIELD) else None
    return _apart(
        [head],
        out.choice(chosen) if chosen is not None else [],
        out.helps(advice),
        out.causes(tolerance),
        out.cutting(tolerance),
        out.yields(tolerance),
        out.scatters(tolerance),
        out.varies(tolerance),
    )


def choices_told(session: Session) -> list[str]:
    """Return other resonances and other ratios of L to C."""
    from ... import choices_out

    found = session.aside.found(CHOICES.name)
    return [] if found is None else choices_out.lines(session.design, found)


def down_told(session: Session) -> list[str]:
    """Return whether a tuner is worth it, the way down, settings and reach: everything of the verb tuner."""
    from ... import feed_out
    from ...layout import folded
    from ...rows import summary

    fed, figures = session.aside.found(TUNER.name), session.figures
    if fed is None or figures is None or set(fed.maps) != set(figures.bands):
        return []
    head = [
        line
        for row in summary(figures)
        if row.label in ("site", "radio")
        for line in folded(f"{row.label:<7}", row.value)
    ]
    return [*head, "", *feed_out.document_lines(figures, fed.answers, fed.maps, fed.table)]


def loads_told(session: Session) -> list[str]:
    """Return map of reach and settings of the tuner, band by band; a load that was asked for first."""
    from ....services.compare.reach import reading
    from ....units import units
    from ... import feed_out
    from ...layout import folded

    fed, figures = session.aside.found(TUNER.name), session.figures
    if fed is None or figures is None or set(fed.maps) != set(figures.bands):
        return []
    parts = []
    for role in figures.bands:
        parts += [
            list(feed_out.map_lines(figures, fed.maps[role], role)),
            list(feed_out.setting_lines(figures, fed.answers[role])),
        ]
    if session.aside.load:
        load = units.read_impedance(session.aside.load)
        asked = [
            line
            for role, band in figures.bands.items()
            for line in folded(f"  {band.name}: ", feed_out.reading_line(reading(fed.maps[role], load)))
        ]
        parts.insert(0, asked)
    return _apart(*parts)


def sheet_told(session: Session) -> list[str]:
    """Return the build sheet."""
    from ... import sheet

    found, figures = session.aside.found(SHEET_TOLERANCE.name), session.figures
    return [] if found is None or figures is None else sheet.text(figures, found).splitlines()


def card_told(session: Session) -> list[str]:
    """Return the hill card."""
    from ... import hill_card

    found, figures = session.aside.found(SHEET_TOLERANCE.name), session.figures
    return [] if found is None or figures is None else hill_card.lines(figures, found)


def numbers_told(session: Session) -> list[str]:
    """Return every figure, as the verb prints them."""
    from ... import layout, rows

    figures = session.figures
    if figures is None:
        return []
    return [*layout.summary_lines(figures), "", *layout.layout(rows.rows(figures))]


def feed_told(session: Session) -> list[str]:
    """Return the impedance at the feed point as a Touchstone file has it."""
    from ... import feed_file

    figures = session.figures
    return [] if figures is None else feed_file.text(figures, tuple(figures.bands)).splitlines()


def _apart(*parts: list[str]) -> list[str]:
    """Return parts of a text with an empty line between them."""
    lines: list[str] = []
    for part in parts:
        lines += [*([""] if lines and part else []), *part]
    return lines
