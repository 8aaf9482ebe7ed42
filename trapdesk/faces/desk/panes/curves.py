"""The plots: SWR over both bands, and the trap by itself."""

from __future__ import annotations

import numpy as np

from ....errors import visible
from ....services.figures import BandFigures, Figures
from ... import shown
from ...lines import band_line, band_name
from ..lines import Line
from ..plots import LEAST_HEIGHT, Panel, draw, log_ticks
from ..view import Sight

_ABREAST = 84
"""Columns from which two panels stand side by side."""
_MARGIN = 5


def swr_lines(sight: Sight) -> list[Line]:
    """Return the SWR of each band, with its edges, the wanted part and the limit."""
    figures = sight.session.figures
    if figures is None:
        return []
    return _together([_swr_panel(figures, band) for band in figures.bands.values()], sight)


def trap_lines(sight: Sight) -> list[Line]:
    """Return size and phase of the trap's impedance over frequency."""
    figures = sight.session.figures
    if figures is None:
        return []
    if figures.trap is None:
        return [[("this antenna has no trap", "quiet")]]
    return _together(_trap_panels(figures), sight)


def _together(panels: list[Panel], sight: Sight) -> list[Line]:
    """Return panels side by side where there is room, else one above the other, else the first that fit."""
    if not panels:
        return []
    if len(panels) > 1 and sight.width >= _ABREAST:
        width = (sight.width - 2) // 2
        left, right = (draw(panel, width, sight.height, sight.look) for panel in panels[:2])
        return [[*a, ("  ", "text"), *b] for a, b in zip(left, right, strict=True)]
    count = min(len(panels), max(1, sight.height // LEAST_HEIGHT))
    lines: list[Line] = []
    for index, panel in enumerate(panels[:count]):
        height = sight.height // count + (1 if index < sight.height % count else 0)
        lines += draw(panel, sight.width, height, sight.look)
    return lines


def _swr_panel(figures: Figures, band: BandFigures) -> Panel:
    design = getattr(figures.design.bands, band.role)
    limit = figures.design.station.swr_limit
    top = max(3.0, float(np.ceil(1.5 * limit)))
    frequency = band.curve.frequency / 1e6
    ticks = {1.0: "1", top: f"{top:.0f}", limit: f"{limit:.3g}"}
    margin = 0.12 * (design.high - design.low) / 1e6
    return Panel(
        heading=f"{band_name(band)} SWR",
        readout=band_line(figures, band).partition(";")[0],
        x=frequency,
        y=band.curve.swr,
        x_range=(design.low / 1e6 - margin, design.high / 1e6 + margin),
        y_range=(1.0, top),
        ticks=tuple(ticks.items()),
        marks=(design.low / 1e6, design.high / 1e6),
        wanted=tuple(edge / 1e6 for edge in design.wanted_edges),
        limit=limit,
    )


def _trap_panels(figures: Figures) -> list[Panel]:
    trap = figures.trap
    assert trap is not None
    frequency = trap.curve.frequency / 1e6
    size, phase = np.abs(trap.curve.impedance), np.degrees(np.angle(trap.curve.impedance))
    level = np.log10(np.maximum(size, 1e-3))
    low, high = float(np.floor(level.min())), float(np.ceil(level.max()))
    bands = [(visible(b.name, 12), b) for _, b in figures.design.bands.items()]
    marks = tuple(band.target / 1e6 for _, band in bands)
    x_range = (float(frequency[0]), float(frequency[-1]))
    resonance = shown.known(trap.resonance, trap.resonance_doubt, "frequency", "MHz")
    dynamic = shown.about(trap.dynamic_resistance, "resistance")
    aims = ", ".join(f"{name} {_phase_at(trap.curve, band.target):+.0f} deg" for name, band in bands)
    return [
        Panel(
            heading="trap |Z| ohm",
            readout=f"{dynamic} at {resonance.number} {resonance.unit}",
            x=frequency,
            y=level,
            x_range=x_range,
            y_range=(low, max(high, low + 1)),
            ticks=log_ticks(low, high),
            marks=marks,
            margin=_MARGIN,
        ),
        Panel(
            heading="phase deg",
            readout=aims,
            x=frequency,
            y=phase,
            x_range=x_range,
            y_range=(-90.0, 90.0),
            ticks=((-90.0, "-90"), (0.0, "0"), (90.0, "+90")),
            marks=marks,
            limit=0.0,
            margin=_MARGIN,
        ),
    ]


def _phase_at(curve, frequency: float) -> float:  # noqa: ANN001 - a Curve
    """Return the phase at a frequency, read off the curve."""
    phase = np.degrees(np.angle(curve.impedance))
    return float(np.interp(frequency, curve.frequency, phase))
