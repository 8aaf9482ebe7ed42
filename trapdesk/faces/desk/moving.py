"""An antenna taken to another site: what was read before stays with the site it was read at."""

from __future__ import annotations

from typing import TYPE_CHECKING

from ...design.design import Design, at_new_site
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
    return at_new_site(before, changed.site, figures.lengths.inner, figures.lengths.end)
