"""The presets as files: they read, they keep, and they stay inside the bands they name."""

import pytest

from trapdesk.design.fields import SOLVE
from trapdesk.design.parts import Solenoid
from trapdesk.store import store

# Band edges in Hz of ITU Region 1, from public copies of the band table; national rules decide.
REGION_1 = {
    "80 m": (3.5e6, 3.8e6),
    "40 m": (7.0e6, 7.2e6),
    "20 m": (14.0e6, 14.35e6),
    "10 m": (28.0e6, 29.7e6),
}


def test_presets_are_these():
    assert store.presets() == ["20-10-flat", "40-20-vee", "80-40-cable", "80-40-flat"]
    assert store.FIRST_PRESET == "40-20-vee"


@pytest.mark.parametrize("name", store.presets())
def test_preset_reads_and_keeps_its_text(name):
    design, text = store.preset(name)
    assert store.to_text(design, text) == text
    assert store.read_text(store.to_text(design)) == design
    assert design == store.preset(f"{name}.toml")[0]


@pytest.mark.parametrize("name", store.presets())
def test_preset_names_its_bands_truly(name):
    design, _ = store.preset(name)
    upper, lower = design.bands.upper, design.bands.lower
    assert f"{lower.name[:2]}-{upper.name[:2]}" == name[:5]
    for band in (upper, lower):
        assert (band.low, band.high) == REGION_1[band.name]
        assert band.low < band.wanted_low < band.wanted_high < band.high
    # What a name ends in is the shape, unless it is what the traps are wound of.
    assert name[6:] in (design.site.shape, design.antenna.trap.coil.kind)
    assert (design.antenna.lengths.inner, design.antenna.lengths.end) == (SOLVE, SOLVE)


def test_one_preset_winds_its_coil():
    coils = [store.preset(name)[0].antenna.trap.coil for name in store.presets()]
    assert [coil.turns for coil in coils if isinstance(coil, Solenoid)] == [SOLVE]


@pytest.mark.parametrize("name", store.presets())
def test_preset_fits_a_screen(name):
    _, text = store.preset(name)
    assert text.isascii()
    assert max(len(line) for line in text.splitlines()) <= 110


def test_one_preset_shows_cable_line_choke_and_tuner():
    design, _ = store.preset("80-40-cable")
    station = design.station
    assert design.antenna.trap.coil.kind == "cable" and design.antenna.trap.capacitor is None
    assert station.line.type == "RG-58/U" and station.choke is not None
    assert station.tuner.network == "t-clc"
