"""Cures that are an edit: what a key tries for a finding, to be undone like any other edit."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from ...design.design import Design, Shape, get, with_value
from ...design.fields import SOLVE
from ...units.unit_names import Dimension
from ...units.units import show
from .. import shown

if TYPE_CHECKING:
    from ...services.antenna.figures import Figures, Finding

EDGE_STEP = 5e3
"""Edges of a wanted part are tried at whole multiples of this. [Hz]"""
CLEARANCE = 0.1
"""What is added to a height that is to be made good, for its doubt. [m]"""
TRAP_VOLTAGE_SHARE = 0.7
"""Part of a rating up to which a trap's voltage is brought by less power; an estimate, no source."""

Cure = Callable[["Figures", "Finding"], tuple[Design, str] | None]
"""Returns the design to try and what was changed in a few words; None where no edit would help."""


def _less_wanted(figures: Figures, finding: Finding) -> tuple[Design, str] | None:
    role = finding.where.removeprefix("bands.")
    band, found = getattr(figures.design.bands, role), figures.bands[role]
    if found.usable is None or band.wanted:
        return None
    wanted = band.wanted_edges
    low = max(wanted[0], math.ceil(found.usable[0] / EDGE_STEP) * EDGE_STEP)
    high = min(wanted[1], math.floor(found.usable[1] / EDGE_STEP) * EDGE_STEP)
    if low >= high or (low, high) == wanted:
        return None
    aim = band.aim if band.aim is None or low <= band.aim <= high else None
    changed = replace(band, wanted_low=low, wanted_high=high, aim=aim)
    design = replace(figures.design, bands=replace(figures.design.bands, **{role: changed}))
    return design, f"wanted {low / 1e6:.3f} to {high / 1e6:.3f} MHz"


def _solve_wires(figures: Figures, finding: Finding) -> tuple[Design, str] | None:
    design = figures.design
    names = ["inner"] if design.antenna.trap is None else ["inner", "end"]
    if design.bands.upper is None and len(names) > 1:
        names = ["end"]
    if all(get(design, f"antenna.lengths.{name}") is SOLVE for name in names):
        return None
    for name in names:
        design = with_value(design, f"antenna.lengths.{name}", SOLVE)
    return design, f"{' and '.join(names)} to be solved"


def _less_power(figures: Figures, finding: Finding, part: float, root: float) -> tuple[Design, str] | None:
    """Return the power at which value / limit comes down to a part; the value goes with power to 1 / root."""
    if not finding.limit or finding.value <= part * finding.limit:
        return None
    power = figures.design.station.power * (part * finding.limit / finding.value) ** root
    step = 10.0 ** (math.floor(math.log10(power)) - 1)
    power = round(math.floor(power / step) * step, 9)
    design = with_value(figures.design, "station.power", power)
    return design, f"power {show(power, Dimension.POWER)}"


def _raise_ends(figures: Figures, finding: Finding) -> tuple[Design, str] | None:
    design = figures.design
    missing = (finding.limit or 0.0) - finding.value
    if missing <= 0:
        return None
    rise = math.ceil((missing + CLEARANCE) * 10) / 10
    site = replace(design.site, height=round(design.site.height + rise, 6))
    if site.shape is Shape.VEE and site.end_height is not None:
        site = replace(site, end_height=round(site.end_height + rise, 6))
    return replace(design, site=site), f"height {shown.plain(site.height, 'length')}"


def _trap_to_band(figures: Figures, finding: Finding) -> tuple[Design, str] | None:
    design, upper = figures.design, figures.design.bands.upper
    trap = design.antenna.trap
    if upper is None or trap is None or trap.resonance is SOLVE:
        return None
    changed = with_value(design, "antenna.trap.resonance", upper.low)
    return changed, f"trap resonance {upper.low / 1e6:.3f} MHz"


CURES: dict[str, Cure] = {
    "swr_wanted": _less_wanted,
    "wanted_wide": _less_wanted,
    "aim_missed": _solve_wires,
    "no_resonance": _solve_wires,
    "trap_voltage": lambda figures, finding: _less_power(figures, finding, TRAP_VOLTAGE_SHARE, 2.0),
    "trap_heat": lambda figures, finding: _less_power(figures, finding, 1.0, 1.0),
    "end_low": _raise_ends,
    "trap_far": _trap_to_band,
    "trap_above_band": _trap_to_band,
}
"""By the code of a finding. Those that are not here ask for something that no edit is."""


def cure(figures: Figures, finding: Finding) -> tuple[Design, str] | None:
    """Return the design to try for a finding and what was changed; None where its cure is not an edit."""
    known = CURES.get(finding.code)
    return known(figures, finding) if known is not None else None
