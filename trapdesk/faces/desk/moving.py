"""An antenna taken to another site: what was read before stays with the site it was read at."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from ...design.design import Design, Stay
from ...errors import BadInput, Fault

if TYPE_CHECKING:
    from ...services.antenna.figures import Figures


def reads_here(design: Design) -> bool:
    """Return whether readings were kept at the present site."""
    return design.history is not None and bool(design.history.steps)


def moved(before: Design, changed: Design, figures: Figures | None) -> Design:
    """Return a design whose site was changed as the same antenna at a new site, its wires as they were cut.

    Raises BadInput while the lengths of the wires are not known yet.
    """
    if figures is None or figures.design != before:
        raise BadInput(Fault("", "its_wires_are_not_known_yet", help="wait for the figures, then try again"))
    history = before.history
    assert history is not None
    stay = Stay(title=before.title, site=before.site, steps=history.steps)
    lengths, wires = changed.antenna.lengths, figures.lengths
    end = None if wires.end is None else round(wires.end, 4)
    lengths = replace(lengths, inner=round(wires.inner, 4), end=end)
    return replace(
        changed,
        antenna=replace(changed.antenna, lengths=lengths),
        history=replace(history, stays=(*history.stays, stay), steps=()),
    )
