"""How long one update of a thousand trials takes, in yardsticks."""

import itertools

import numpy as np
import pytest

from tests.bench.yardstick import ratio, record
from tests.closed_loop import ensemble_of
from trapdesk.design.reading_kinds import Doubt, Interval, Reading
from trapdesk.services.hung.readings import Hoist
from trapdesk.services.hung.updating import update


def of_dips(design, shift):
    return tuple(
        Reading(subject=role, what="dip", value=band.target * shift, typed="", doubt=Doubt(relative=3e-4))
        for role, band in design.bands.items()
    )


def of_meter(design, shift):
    return tuple(
        Reading(
            subject=role,
            what="swr",
            value=Interval(low=1.5, high=2.0),
            typed="1.5..2",
            doubt=Doubt(relative=0.08),
            frequency=float(f) * shift,
        )
        for role, band in design.bands.items()
        for f in np.linspace(band.low, band.high, 3)
    )


@pytest.mark.parametrize("read", [of_dips, of_meter])
@pytest.mark.parametrize("name", ["40-20-vee", "80-40-flat"])
def test_update_of_a_thousand_trials(name, read):
    ensemble = ensemble_of(name)
    # No two calls alike: nothing kept from the call before serves the next.
    shifts = itertools.count()

    def call():
        shift = 1 + 1e-5 * (next(shifts) % 97)
        update(ensemble, [Hoist(readings=read(ensemble.design, shift))], trials=1000)

    record(f"update, 1000 trials, {name[:5]} m, {read.__name__[3:]}", ratio(call, runs=10), limit=12.0)
