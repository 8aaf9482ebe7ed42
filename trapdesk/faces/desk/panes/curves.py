"""The plots: SWR over both bands, R and X at the feed point, and the trap by itself."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from ....errors import visible
from ....services.antenna.figures import BandFigures, Curve, Figures
from ... import shown
from ...lines import band_line, band_name, swr_text
from ..lines import Line
from ..plots import LEAST_HEIGHT, Panel, draw, log_ticks
from ..view import Sight

_ABREAST = 84
"""Columns from which two panels stand side by side."""
_MARGIN = 5
_ROUND = np.array([25.0, 50.0, 100.0, 200.0, 400.0, 800.0, 1600.0, 3200.0])
"""Ends of the axis of R and X. [ohm]"""
NEAR = 0.12
"""How much is plotted beside a band's edges, in parts of the band."""


def swr_lines(sight: Sight) -> list[Line]:
    """Return the SWR of each band, with its edges, the wanted part and the limit."""
    figures = sight.session.figures
    if figures is None:
        return []
    ghost = sight.session.ghost
    return _together([_swr_panel(figures, band, ghost) for band in _bands(sight, figures)], sight)


def feed_lines(sight: Sight) -> list[Line]:
    """Return R and X at the feed point over each band, or over one that was zoomed to."""
    figures = sight.session.figures
    if figures is None:
        return []
    ghost = sight.session.ghost
    panels = [panel for band in _bands(sight, figures) for panel in _feed_panels(figures, band, ghost)]
    if len(panels) > 2 and sight.width < _ABREAST and sight.height < 4 * LEAST_HEIGHT:
        # Where four panels have no room, both X go: the resonance is told, and zoom brings them back.
        panels = panels[::2] if sight.height < 2 * LEAST_HEIGHT else [panels[1], panels[3]]
    return _together(panels, sight)


def trap_lines(sight: Sight) -> list[Line]:
    """Return size and phase of the trap's impedance over frequency."""
    figures = sight.session.figures
    if figures is None:
        return []
    if figures.trap is None:
        return [[("this antenna has no trap", "quiet")]]
    panels = _trap_panels(figures, sight.session.ghost)
    band = getattr(figures.design.bands, sight.session.zoom or "none", None)
    if band is not None:
        panels = [replace(panel, x_range=_around(band.low, band.high)) for panel in panels]
    return _together(panels, sight)


def _bands(sight: Sight, figures: Figures) -> list[BandFigures]:
    """Return the bands to plot."""
    bands = list(figures.bands.values())
    return [band for band in bands if band.role == sight.session.zoom] or bands


def _together(panels: list[Panel], sight: Sight) -> list[Line]:
    """Return panels side by side where there is room, else one above the other, else the first that fit."""
    panels = [replace(panel, cursor=sight.session.cursor) for panel in panels]
    if not panels:
        return []
    if len(panels) > 1 and sight.width >= _ABREAST:
        width, height = (sight.width - 2) // 2, sight.height // ((len(panels) + 1) // 2)
        lines = []
        for left, right in zip(panels[::2], panels[1::2], strict=True):
            pair = (draw(panel, width, height, sight.look) for panel in (left, right))
            lines += [[*a, ("  ", "text"), *b] for a, b in zip(*pair, strict=True)]
        return lines
    count = min(len(panels), max(1, sight.height // LEAST_HEIGHT))
    lines: list[Line] = []
    for index, panel in enumerate(panels[:count]):
        height = sight.height // count + (1 if index < sight.height % count else 0)
        lines += draw(panel, sight.width, height, sight.look)
    return lines


def _around(low: float, high: float) -> tuple[float, float]:
    """Return a band in MHz with a little beside its edges."""
    margin = NEAR * (high - low)
    return ((low - margin) / 1e6, (high + margin) / 1e6)


def _read(x: np.ndarray, y: np.ndarray, words: Callable[[float], str]) -> Callable[[float], str]:
    """Return what tells, in words, the value of a curve at a place; nothing outside the curve."""
    return lambda place: words(float(np.interp(place, x, y))) if x[0] <= place <= x[-1] else "not computed"


def _beside(at: Callable[[float], str], ghost: Callable[[float], str] | None) -> Callable[[float], str]:
    return at if ghost is None else lambda x: f"{at(x)} (kept {ghost(x)})"


def _swr_panel(figures: Figures, band: BandFigures, ghost: Figures | None) -> Panel:
    design = getattr(figures.design.bands, band.role)
    limit = figures.design.station.swr_limit
    top = max(3.0, float(np.ceil(1.5 * limit)))
    ticks = {1.0: "1", top: f"{top:.0f}", limit: f"{limit:.3g}"}
    mega = band.curve.frequency / 1e6
    at, old = _read(mega, band.curve.swr, lambda value: f"SWR {swr_text(band, value)}"), None
    kept = ghost.bands.get(band.role) if ghost is not None else None
    if kept is not None:
        old = _read(kept.curve.frequency / 1e6, kept.curve.swr, lambda value: swr_text(kept, value))
    return Panel(
        heading=f"{band_name(band)} SWR",
        readout=band_line(figures, band).partition(";")[0],
        x=mega,
        y=band.curve.swr,
        x_range=_around(design.low, design.high),
        y_range=(1.0, top),
        ticks=tuple(ticks.items()),
        marks=(design.low / 1e6, design.high / 1e6),
        wanted=tuple(edge / 1e6 for edge in design.wanted_edges),
        limit=limit,
        ghost=None if kept is None else (kept.curve.frequency / 1e6, kept.curve.swr),
        at=_beside(at, old),
    )


def _feed_panels(figures: Figures, band: BandFigures, ghost: Figures | None) -> list[Panel]:
    """Return R and X of a band at the feed point, each on the least round scale that holds it in the band."""
    design = getattr(figures.design.bands, band.role)
    mega, z = band.curve.frequency / 1e6, band.curve.impedance
    inside = (band.curve.frequency >= design.low) & (band.curve.frequency <= design.high)
    kept = ghost.bands.get(band.role) if ghost is not None else None
    readouts = {"R": f"Z at the aim {shown.impedance(band.aim_impedance, *[band.impedance_doubt] * 2)}"}
    readouts["X"] = "no resonance"
    if band.resonance is not None:
        resonance = shown.known(band.resonance, band.frequency_doubt, "frequency", "MHz")
        readouts["X"] = f"X = 0 at {resonance.number} {resonance.unit}"
    panels = []
    for name, take in (("R", np.real), ("X", np.imag)):
        values = take(z)
        most = float(np.abs(values[inside]).max(initial=1.0))
        top = float(next((end for end in _ROUND if end >= most), _ROUND[-1]))
        low = 0.0 if name == "R" else -top
        old = None if kept is None else (kept.curve.frequency / 1e6, take(kept.curve.impedance))
        panels.append(
            Panel(
                heading=f"{band_name(band)} {name} ohm",
                readout=readouts[name],
                x=mega,
                y=values,
                x_range=_around(design.low, design.high),
                y_range=(low, top),
                ticks=tuple((end, f"{end:.0f}") for end in sorted({low, 0.0, top})),
                marks=(design.low / 1e6, design.high / 1e6),
                wanted=tuple(edge / 1e6 for edge in design.wanted_edges),
                limit=figures.design.station.reference if name == "R" else 0.0,
                margin=_MARGIN + 1,
                ghost=old,
                at=_beside(
                    _read(mega, values, _ohms(band, f"{name} ")),
                    None if old is None or kept is None else _read(*old, _ohms(kept)),
                ),
            )
        )
    return panels


def _ohms(band: BandFigures, head: str = "") -> Callable[[float], str]:
    """Return what tells ohms, to the part of them that is in doubt at the aim."""
    part = band.impedance_doubt / abs(band.aim_impedance)

    def words(value: float) -> str:
        doubt = max(band.impedance_doubt, part * abs(value), 1e-3)
        return f"{head}{shown.known(value, doubt, 'resistance', 'ohm').number} ohm"

    return words


def _trap_panels(figures: Figures, ghost: Figures | None) -> list[Panel]:
    trap = figures.trap
    assert trap is not None
    mega, size, phase = _trap_curve(trap.curve)
    level = np.log10(np.maximum(size, 1e-3))
    low, high = float(np.floor(level.min())), float(np.ceil(level.max()))
    bands = [(visible(b.name, 12), b) for _, b in figures.design.bands.items()]
    marks = tuple(band.target / 1e6 for _, band in bands)
    x_range = (float(mega[0]), float(mega[-1]))
    dynamic = shown.about(trap.dynamic_resistance, "resistance")
    aims = ", ".join(f"{name} {_phase_at(trap.curve, band.target):+.0f} deg" for name, band in bands)
    kept = ghost.trap if ghost is not None else None
    old = _trap_curve(kept.curve) if kept is not None else None

    def ohms(value: float) -> str:
        return shown.about(10.0**value, "resistance")

    def degrees(value: float) -> str:
        return f"{value:+.0f} deg"

    old_level = None if old is None else np.log10(np.maximum(old[1], 1e-3))
    return [
        Panel(
            heading="trap |Z| ohm",
            readout=f"{dynamic} at {shown.megahertz(trap.resonance)}",
            x=mega,
            y=level,
            x_range=x_range,
            y_range=(low, max(high, low + 1)),
            ticks=log_ticks(low, high),
            marks=marks,
            margin=_MARGIN,
            ghost=None if old is None else (old[0], old_level),
            at=_beside(_read(mega, level, ohms), None if old is None else _read(old[0], old_level, ohms)),
        ),
        Panel(
            heading="phase deg",
            readout=aims,
            x=mega,
            y=phase,
            x_range=x_range,
            y_range=(-90.0, 90.0),
            ticks=((-90.0, "-90"), (0.0, "0"), (90.0, "+90")),
            marks=marks,
            limit=0.0,
            margin=_MARGIN,
            ghost=None if old is None else (old[0], old[2]),
            at=_beside(_read(mega, phase, degrees), None if old is None else _read(old[0], old[2], degrees)),
        ),
    ]


def _trap_curve(curve: Curve) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return MHz, ohms and degrees."""
    impedance = curve.impedance
    return curve.frequency / 1e6, np.abs(impedance), np.degrees(np.angle(impedance))


def _phase_at(curve: Curve, frequency: float) -> float:
    """Return the phase at a frequency, read off the curve."""
    mega, _, phase = _trap_curve(curve)
    return float(np.interp(frequency / 1e6, mega, phase))
