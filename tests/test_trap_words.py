"""What a builder reads of each kind of trap: doubts of all its parts, how they are joined, what to cut."""

import re
from dataclasses import replace
from pathlib import Path

import pytest

from trapdesk.faces import trap_rows, trap_sheet, words
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

DESIGNS = Path(__file__).parent / "designs"


def figures_of(name):
    return solve(store.find(DESIGNS / f"{name}-trap.toml").design)


def sheet(figures):
    return " ".join(" ".join([*trap_sheet.parts(figures), *trap_sheet.lines(figures)]).split())


def test_a_trap_as_wound_is_off_by_coil_and_capacitor():
    figures = figures_of("res")
    trap = figures.trap
    # A coil known to 1.5 % and a capacitor to 5 %, each by half of that, the coil's own 1.1 pF apart.
    expected = trap.resonance * (0.015 + 0.05 * 47e-12 / trap.capacitance) / 2
    assert trap_rows.as_wound(figures) == pytest.approx(expected, rel=1e-6)


def test_a_stub_is_cut_long_by_what_the_trap_may_be_off():
    figures = figures_of("stub")
    (stub,) = figures.trap.parts
    text = sheet(figures)
    assert f"{100 * stub.length:.1f} cm long in the end" in text
    cut = float(re.search(r"cut (\d+) cm", text)[1]) / 100
    rate = next(a.rate for a in figures.trap.adjustments if a.what == "stub")
    assert (cut - stub.length) * rate == pytest.approx(trap_rows.as_wound(figures), abs=0.005 * rate)


def test_the_sheet_says_how_capacitors_are_joined_and_which_is_meant():
    figures = figures_of("combo")
    text = sheet(figures)
    assert "capacitor 1 in series with (capacitor 2.1 beside capacitor 2.2)" in text
    assert "(capacitor 2.1)" in text
    said = [words.sentence(finding, figures.design) for finding in figures.findings]
    assert any(text.startswith("capacitor 2.2 bears ") for text in said)
    assert not any("its capacitor is rated" in text for text in said)


def test_of_a_cable_trap_the_cable_is_rated():
    figures = figures_of("cable")
    said = [words.sentence(finding, figures.design) for finding in figures.findings]
    assert any(text.startswith("the cable of the trap bears ") for text in said)


def test_turns_wound_close_are_not_pushed_together():
    assert "pushed together" not in sheet(figures_of("close"))
    assert "pushed together" in sheet(figures_of("res"))


def test_a_ring_core_takes_whole_turns():
    design = store.find(DESIGNS / "toroid-trap.toml").design
    trap = design.antenna.trap
    # Turns that are nearer a half than a whole one.
    ring = replace(trap.coil, inductance_index=trap.coil.inductance_index * 0.98)
    found = solve(replace(design, antenna=replace(design.antenna, trap=replace(trap, coil=ring)))).trap.coil
    assert 0.25 < found.turns % 1 < 0.75
    assert found.half_turns == int(found.half_turns)
