"""Curves as lines of text on straight axes: plotext draws the curve, the axes and their words are ours."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from .lines import Line, Piece, padded
from .terminal import Glyphs, Look
from .titles import as_fits

LEAST_WIDTH, LEAST_HEIGHT = 16, 5
_EMPTY = (" ", "\u2800")
_SPEEDS = (1.0, 2.0, 2.5, 5.0, 10.0)


@dataclass(frozen=True, kw_only=True)
class Panel:
    """One curve over frequency: `heading` names it, `readout` is what it comes to in one line.

    `x` is in MHz; `ghost` is another curve, x and y, drawn dotted. `at` tells what there is at a frequency,
    for the readout, whose place `cursor` goes from 0 to 1 along the axis. `wanted` is a part of the axis
    drawn heavy, `marks` are upright lines, `limit` is a level line. `ticks` are the values named at the left,
    each with its text, in a margin of at least `margin`.
    """

    heading: str
    readout: str
    x: np.ndarray
    y: np.ndarray
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    ticks: tuple[tuple[float, str], ...]
    marks: tuple[float, ...] = ()
    wanted: tuple[float, float] | None = None
    limit: float | None = None
    margin: int = 0
    ghost: tuple[np.ndarray, np.ndarray] | None = None
    cursor: float | None = None
    at: Callable[[float], str] | None = None


def ready() -> None:
    """Import what draws curves; done aside, after the first paint, because it takes a while."""
    import plotext  # noqa: F401 - kept by Python for `_curve`


def draw(panel: Panel, width: int, height: int, look: Look) -> list[Line]:
    """Return a panel in so many columns and lines: heading with readout, canvas, axis, frequencies."""
    panel, mark = _with_cursor(panel)
    if width < LEAST_WIDTH or height < LEAST_HEIGHT:
        return [[(padded(panel.readout, width), "text")]]
    margin = max(panel.margin, *(len(text) + 1 for _, text in panel.ticks))
    columns, rows = width - margin - 1, height - 3
    canvas = _curve(panel, panel.x, panel.y, columns, rows, look)
    styles = [["curve"] * columns for _ in range(rows)]
    _haunt(panel, canvas, styles, look)
    _rule(panel, canvas, styles, look)
    column = None if mark is None else min(columns - 1, max(0, _column(panel, mark, columns, look)))
    if column is not None:
        for row in range(rows):
            if canvas[row][column] not in _EMPTY and styles[row][column] == "curve":
                styles[row][column] = "cursor"
    named = {_row(panel, value, rows, look): text for value, text in panel.ticks}
    lines: list[Line] = [_heading(panel, width)]
    for row in range(rows):
        label = named.get(row, "")
        lines.append([(f"{label:>{margin - 1}} {look.upright}", "quiet"), *_runs(canvas[row], styles[row])])
    lines.append([(" " * margin + look.corner, "quiet"), *_marked(_axis(panel, columns, look), column)])
    lines.append([(padded(" " * (margin + 1) + _frequencies(panel, columns, look), width), "quiet")])
    return lines


def _with_cursor(panel: Panel) -> tuple[Panel, float | None]:
    """Return the panel reading out what is at its cursor, and the frequency of that."""
    if panel.cursor is None or panel.at is None:
        return panel, None
    low, high = panel.x_range
    step = 10.0 ** math.floor(math.log10((high - low) / 100))
    x = round((low + panel.cursor * (high - low)) / step) * step
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    return replace(panel, readout=f"{x:.{decimals}f} MHz {panel.at(x)}"), x


def _marked(axis: list[Piece], column: int | None) -> list[Piece]:
    """Return the axis with a mark at a column."""
    if column is None:
        return axis
    cells = [(character, style) for text, style in axis for character in text]
    cells[column] = ("^", "head")
    return _runs([cell for cell, _ in cells], [style for _, style in cells])


def _heading(panel: Panel, width: int) -> Line:
    room = width - len(panel.heading) - 2
    readout = panel.readout
    if room < len(readout):
        # The last that is told is the least: what stands first has the dip and what it comes to.
        readout = as_fits(readout, room).rstrip().removesuffix(", ...")
    return [(panel.heading, "head"), (f"{readout:>{max(0, width - len(panel.heading))}}", "text")]


def _cell(place: float, ends: tuple[float, float], cells: int, dots: int) -> int:
    """Return the cell of a value on an axis; the ends lie in the outer of the dots that a cell has."""
    low, high = ends
    return math.floor((place - low) / (high - low) * (cells * dots - 1) + 0.5) // dots


def _column(panel: Panel, x: float, columns: int, look: Look) -> int:
    return _cell(x, panel.x_range, columns, 2 if look.glyphs is Glyphs.BRAILLE else 1)


def _row(panel: Panel, y: float, rows: int, look: Look) -> int:
    return rows - 1 - _cell(y, panel.y_range, rows, 4 if look.glyphs is Glyphs.BRAILLE else 1)


def _curve(
    panel: Panel, x: np.ndarray, y: np.ndarray, columns: int, rows: int, look: Look
) -> list[list[str]]:
    """Return the cells of a curve alone."""
    import plotext

    low, high = panel.y_range
    inside = np.isfinite(y)
    # What leaves the canvas is drawn to just beyond its edge, so that the curve is seen to leave.
    beyond = high + (high - low)
    x, y = x[inside], np.clip(y[inside], low - (high - low), beyond)
    figure = plotext.figure
    figure.clear()
    figure.plot_size(columns, rows)
    figure.axes(False)
    for axis, limits in (("x", panel.x_range), ("y", panel.y_range)):
        ruler = figure.ruler(axis)
        ruler.ticks([], [])
        ruler.lim(*limits)
    marker = "braille" if look.glyphs is Glyphs.BRAILLE else "*"
    figure.draw(figure.signal(x.tolist(), y.tolist(), marker=marker).lines(True))
    text = figure.build().string(colorless=True).split("\n")
    cells = [list(line.ljust(columns)[:columns]) for line in text[:rows]]
    return cells + [[" "] * columns for _ in range(rows - len(cells))]


def _haunt(panel: Panel, canvas: list[list[str]], styles: list[list[str]], look: Look) -> None:
    """Draw the other curve, every second cell of it, where the curve leaves room."""
    if panel.ghost is None:
        return
    rows, columns = len(canvas), len(canvas[0])
    other = _curve(panel, *panel.ghost, columns, rows, look)
    for row in range(rows):
        for column in range(row % 2, columns, 2):
            if canvas[row][column] in _EMPTY and other[row][column] not in _EMPTY:
                glyph = other[row][column] if look.glyphs is Glyphs.BRAILLE else "."
                canvas[row][column], styles[row][column] = glyph, "quiet"


def _rule(panel: Panel, canvas: list[list[str]], styles: list[list[str]], look: Look) -> None:
    """Draw the limit and the upright marks where the curve leaves room."""
    rows, columns = len(canvas), len(canvas[0])
    if panel.limit is not None and panel.y_range[0] <= panel.limit <= panel.y_range[1]:
        row = _row(panel, panel.limit, rows, look)
        for column in range(0, columns):
            if canvas[row][column] in _EMPTY:
                canvas[row][column], styles[row][column] = look.level if column % 2 else " ", "limit"
    for mark in panel.marks:
        column = _column(panel, mark, columns, look)
        if 0 <= column < columns:
            for row in range(rows):
                if canvas[row][column] in (*_EMPTY, look.level):
                    canvas[row][column], styles[row][column] = look.upright if row % 2 else ":", "quiet"


def _runs(cells: list[str], styles: list[str]) -> list[Piece]:
    """Return cells of one style joined."""
    runs: list[Piece] = []
    for cell, style in zip(cells, styles, strict=True):
        if runs and runs[-1][1] == style:
            runs[-1] = (runs[-1][0] + cell, style)
        else:
            runs.append((cell, style))
    return runs


def _axis(panel: Panel, columns: int, look: Look) -> list[Piece]:
    if panel.wanted is None:
        return [(look.level * columns, "quiet")]
    first, last = (_column(panel, x, columns, look) for x in panel.wanted)
    first, last = max(0, first), min(columns - 1, last)
    return [
        (look.level * first, "quiet"),
        ("=" * (last - first + 1), "found"),
        (look.level * (columns - 1 - last), "quiet"),
    ]


def _frequencies(panel: Panel, columns: int, look: Look) -> str:
    """Return round frequencies below the axis, each centred under its place, MHz after the last."""
    low, high = panel.x_range
    unit = " MHz"
    rough = (high - low) / max(2, columns // 9)
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(power * s for s in _SPEEDS if power * s >= rough * 0.999)
    decimals = max(1, 1 - math.floor(math.log10(step) + 1e-9)) if step < 1 else 1
    text, after, last = [" "] * columns, 0, columns - len(unit)
    text[last:] = unit
    for place in range(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1):
        name = f"{place * step:.{decimals}f}"
        start = _column(panel, place * step, columns, look) - len(name) // 2
        if after <= start and start + len(name) <= last:
            text[start : start + len(name)] = name
            after = start + len(name) + 1
    return "".join(text)


def log_ticks(low: float, high: float) -> tuple[tuple[float, str], ...]:
    """Return the powers of ten between two logarithms of ohms, each with its text."""
    names = {0: "1", 1: "10", 2: "100", 3: "1k", 4: "10k", 5: "100k", 6: "1M"}
    whole = range(math.ceil(low - 1e-9), math.floor(high + 1e-9) + 1)
    return tuple((float(power), names[power]) for power in whole if power in names)
