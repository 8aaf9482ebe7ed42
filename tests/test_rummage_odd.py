"""Rummage for designs far from the presets: its rows against the full solve of the design with their trap."""

from dataclasses import replace

import pytest

from tests.test_rummage import DISC, PIPE, SMALL, finished, preset
from trapdesk.design.box import Cable
from trapdesk.errors import NoAnswer
from trapdesk.services.antenna.solve import solve
from trapdesk.services.box.rummage import take


def with_bands(design, resonance, **edges):
    """Return a design with other bands, (low, high) in MHz each, and a trap of this resonance in MHz."""
    bands = design.bands
    for role, (low, high) in edges.items():
        band = replace(
            getattr(bands, role), name=role, low=low * 1e6, high=high * 1e6, wanted_low=None, wanted_high=None
        )
        bands = replace(bands, **{role: band})
    trap = replace(design.antenna.trap, resonance=resonance * 1e6)
    return replace(design, bands=bands, antenna=replace(design.antenna, trap=trap))


BOX = replace(
    SMALL,
    formers=(replace(PIPE, length=0.15),),
    capacitors=(DISC, replace(DISC, capacitance=22e-12), replace(DISC, capacitance=100e-12)),
    cables=(Cable(name="coax", impedance=75.0, velocity_factor=0.66, loss=0.07, voltage=2e3, length=2.0),),
)

ODD = {
    # Neighbouring bands: the end wire is as short as 25 cm, and loss in the trap moves it more than C does.
    "17/15 m": lambda: with_bands(preset(), 21.0, upper=(21.0, 21.2), lower=(18.068, 18.168)),
    # Most traps of little capacitance leave the end wire shorter than 20 cm.
    "12/10 m": lambda: with_bands(preset("20-10-flat"), 28.2, upper=(28.3, 28.55), lower=(24.89, 24.99)),
    # A trap between the bands: large capacitance leaves no inner wire at all.
    "trap between": lambda: with_bands(preset(), 10.0, upper=(14.1, 14.23), lower=(7.05, 7.12)),
    # A trap above both bands, each wire over a quarter wave: the matrices change too fast to be interpolated.
    "trap above": lambda: with_bands(preset(), 30.2264, upper=(21.0, 21.15), lower=(7.0, 7.2)),
}


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("name", ODD)
def test_what_figures_solve_a_rummage_solves_alike(name):
    design = ODD[name]()
    solve(design)
    row, *_ = finished(design, BOX, 1).rows
    full = solve(take(design, row))
    assert row.outcome.inner == pytest.approx(full.lengths.inner, abs=2e-3)
    assert row.outcome.end == pytest.approx(full.lengths.end, abs=4e-3)
    for role, band in full.bands.items():
        of = row.outcome.bands[role]
        assert of.loss == pytest.approx(band.shares.trap, rel=6e-3)
        assert of.peak_voltage == pytest.approx(band.worst_stress.peak_voltage, rel=5e-3)
        assert of.worst_swr == pytest.approx(band.worst_swr, rel=5e-3)


def test_where_no_trap_has_wires_the_reason_is_that_of_the_solve():
    design = preset()
    design = replace(design, site=replace(design.site, height=3.0))
    with pytest.raises(NoAnswer) as by_figures:
        solve(design)
    with pytest.raises(NoAnswer) as by_rummage:
        finished(design, BOX)
    assert by_rummage.value.code == by_figures.value.code
    assert by_rummage.value.help
