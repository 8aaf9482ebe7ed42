"""Plots with readout, ghost and zoom; findings gone to and tried; rows found by typing."""

import re
from dataclasses import replace

import numpy as np
import pytest

from tests.desk.screens import BRAILLE, PLAIN, go_to, opened, pressed, screen, settled, text, typed
from trapdesk.design.design import with_value
from trapdesk.design.fields import SOLVE
from trapdesk.design.rules import check
from trapdesk.faces import words
from trapdesk.faces.desk import cures
from trapdesk.faces.desk.plots import Panel, draw
from trapdesk.services.antenna.levels import Level
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

HEIGHT = "site.height"


async def show(desk, pilot, name):
    for _ in range(20):
        if desk.middle.shown.name == name:
            return
        await pressed(desk, pilot, "v")
    raise AssertionError(f"no view {name}")


def line_with(desk, wanted):
    return next(line for line in screen(desk) if wanted in line)


@pytest.mark.parametrize("look", [BRAILLE, PLAIN])
async def test_the_readout_tells_the_swr_where_it_stands(look):
    async with opened(look=look) as (desk, pilot):
        await show(desk, pilot, "SWR")
        assert "left right readout" in screen(desk)[-1]
        await pressed(desk, pilot, "right", "right", "comma")
        told = re.search(r"20 m SWR +([0-9.]+) MHz SWR ([0-9.]+)", text(desk))
        band = desk.session.figures.bands["upper"]
        there = np.interp(float(told[1]) * 1e6, band.curve.frequency, band.curve.swr)
        assert float(told[2]) == pytest.approx(there, abs=0.06)
        assert sum(line.count("^") for line in screen(desk)) == 2
        places = []
        for key in ("less_than_sign", "less_than_sign", "full_stop"):
            await pressed(desk, pilot, key)
            places.append(line_with(desk, "^").index("^"))
        assert places[1] < places[0]
        assert places[2] == places[1] + 1
        await pressed(desk, pilot, *["left"] * 99)
        await pressed(desk, pilot, "escape")
        assert "^" not in text(desk)
        assert re.search(r"20 m SWR +dip", text(desk))


def test_the_mark_stands_under_the_frequency_that_is_read_out():
    x = np.linspace(10.0, 11.0, 51)
    panel = Panel(
        heading="h", readout="r", x=x, y=1 + (x - 10.5) ** 2 * 8, x_range=(10.0, 11.0), y_range=(1.0, 3.0),
        ticks=((1.0, "1"),), cursor=0.75, at=lambda place: f"at {place:.3f}",
    )  # fmt: skip
    for look in (PLAIN, BRAILLE):
        lines = ["".join(piece for piece, _ in line) for line in draw(panel, 44, 10, look)]
        assert "10.75 MHz at 10.750" in lines[0]
        columns = 44 - 2 - 1
        assert lines[-2].index("^") - 3 == pytest.approx(0.75 * (columns - 1), abs=1)


@pytest.mark.parametrize("look", [BRAILLE, PLAIN])
async def test_what_was_kept_stays_dotted_until_it_is_let_go(look):
    async with opened((120, 40), look=look) as (desk, pilot):
        await show(desk, pilot, "SWR")
        await pressed(desk, pilot, "k")
        kept = desk.session.ghost
        assert kept is desk.session.figures
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "14 m", "enter")
        await settled(desk, pilot)
        await pressed(desk, pilot, "right")
        told = re.search(r"([0-9.]+) MHz SWR ([0-9.]+) \(kept ([0-9.]+)\)", text(desk))
        for number, figures in ((2, desk.session.figures), (3, kept)):
            curve = figures.bands["upper"].curve
            there = np.interp(float(told[1]) * 1e6, curve.frequency, curve.swr)
            assert float(told[number]) == pytest.approx(there, abs=0.06)
        with_ghost = text(desk)
        await pressed(desk, pilot, "K")
        assert "kept" not in text(desk)
        drawn = lambda whole: sum(c == "." or 0x2801 <= ord(c) <= 0x28FF for c in whole)  # noqa: E731
        assert drawn(with_ghost) > drawn(text(desk)) + 10
        await pressed(desk, pilot, "K")
        assert "nothing is kept" in text(desk)


async def test_zoom_plots_one_band_and_then_both_again():
    async with opened(look=BRAILLE) as (desk, pilot):
        await show(desk, pilot, "SWR")
        for bands in ({"20 m"}, {"40 m"}, {"20 m", "40 m"}):
            await pressed(desk, pilot, "z")
            assert {name for name in ("20 m", "40 m") if f"{name} SWR" in text(desk)} == bands
        await show(desk, pilot, "trap")
        await pressed(desk, pilot, "z")
        axis = next(line for line in reversed(screen(desk)) if "MHz" in line and "│" in line)
        shown = [float(number) for number in re.findall(r"\d+\.\d+", axis)]
        assert shown
        assert all(13.9 < number < 14.5 for number in shown)


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (40, 12)])
async def test_r_and_x_at_the_feed_point_are_plotted(size):
    async with opened(size, look=BRAILLE) as (desk, pilot):
        await show(desk, pilot, "Z at feed")
        await pressed(desk, pilot, "z")
        band = desk.session.figures.bands["upper"]
        if size != (40, 12):
            assert f"{band.resonance / 1e6:.1f}"[:4] in line_with(desk, "X = 0 at")
            await pressed(desk, pilot, "right")
            told = re.search(r"([0-9.]+) MHz X (-?[0-9.]+) ohm", text(desk))
            there = np.interp(float(told[1]) * 1e6, band.curve.frequency, band.curve.impedance.imag)
            assert float(told[2]) == pytest.approx(there, abs=2 * band.impedance_doubt)
        assert "20 m R ohm" in text(desk)


async def test_goes_to_the_rows_of_findings_one_after_the_other():
    async with opened() as (desk, pilot):
        ranked = words.ranked(desk.session.figures.findings)
        seen = []
        for _ in range(len(ranked) + 1):
            await pressed(desk, pilot, "g")
            seen.append(desk.drawers.row.key)
        for finding, key in zip(ranked, seen, strict=False):
            assert key == finding.where or key.startswith(f"{finding.where}.")
        assert seen[-1] == seen[0]


async def test_tries_a_cure_that_is_an_edit_and_takes_it_back():
    document = store.find()
    document = replace(document, design=with_value(document.design, "station.power", 5000.0))
    async with opened(document=document) as (desk, pilot):
        before = desk.session.design
        voltage = lambda: next(  # noqa: E731
            f for f in desk.session.figures.findings if f.code == "trap_voltage"
        )
        assert voltage().level is Level.STOP
        await pressed(desk, pilot, "c")
        assert "u takes it back" in text(desk)
        await settled(desk, pilot)
        assert voltage().level is not Level.STOP
        assert desk.session.design.station.power < 5000.0
        await pressed(desk, pilot, "u")
        await settled(desk, pilot)
        assert desk.session.design is before


async def test_says_when_a_cure_is_no_edit():
    async with opened() as (desk, pilot):
        before = desk.session.design
        await pressed(desk, pilot, "c")
        assert "no edit mends this by itself: " in text(desk)
        assert desk.session.design is before


def cured(design, code):
    """Return the design that the cure of a finding makes, and its figures."""
    figures = solve(design, site_effects=True)
    finding = next(f for f in figures.findings if f.code == code and f.level is not Level.FINE)
    tried = cures.cure(figures, finding)
    assert tried is not None
    assert not check(tried[0])
    return tried[0], solve(tried[0], site_effects=True), finding


@pytest.mark.parametrize(
    ("code", "changes"),
    [
        ("trap_heat", {"station.power": 1500.0, "station.mode": "CW"}),
        ("end_low", {"site.height": 6.0}),
        ("trap_above_band", {"antenna.trap.resonance": 15.2e6}),
        ("trap_far", {"antenna.trap.resonance": 12.9e6}),
        (
            "wanted_wide",
            {"bands.upper.wanted_low": 14.0e6, "bands.upper.wanted_high": 14.35e6, "station.swr_limit": 1.6},
        ),
        ("aim_missed", {"antenna.lengths.inner": 4.9}),
    ],
)
def test_cures_help(code, changes):
    design = store.find().design
    for key, value in changes.items():
        design = with_value(design, key, value)
    changed, figures, finding = cured(design, code)
    assert changed != design
    rest = [f for f in figures.findings if (f.code, f.where) == (code, finding.where)]
    # Gone, no remark any more, or less of it: a narrower part moves its own middle.
    assert not rest or rest[0].level is Level.FINE or abs(rest[0].value) < abs(finding.value)


async def test_finds_a_row_by_typing():
    async with opened() as (desk, pilot):
        first = desk.drawers.row.key
        await pressed(desk, pilot, "slash")
        await typed(desk, pilot, "turn")
        assert desk.drawers.row.key == "antenna.trap.coil.turns"
        await pressed(desk, pilot, "enter")
        assert desk.drawers.row.key == "antenna.trap.coil.turns"
        await pressed(desk, pilot, "slash")
        await typed(desk, pilot, "height", "escape")
        assert desk.drawers.row.key == "antenna.trap.coil.turns"
        await pressed(desk, pilot, "slash")
        await typed(desk, pilot, "parsnips", "enter")
        assert "no row has 'parsnips' in its name" in text(desk)
        assert first == "title"
        assert desk.session.design.antenna.trap.coil.turns is SOLVE


async def test_a_note_goes_with_the_view_it_was_told_in_but_not_what_went_wrong():
    async with opened() as (desk, pilot):
        desk.say("nothing was written")
        await pressed(desk, pilot, "v")
        assert "nothing was written" not in text(desk)
        desk.say("the disk is full", refused=True)
        await pressed(desk, pilot, "v")
        assert "the disk is full" in text(desk)
