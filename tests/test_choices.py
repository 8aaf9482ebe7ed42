"""Choices of the trap's resonance and of L over C against the full solve and plain circuit laws."""

import json
import math
from dataclasses import replace
from pathlib import Path

import pytest

from trapdesk.design.capacitor_kinds import GivenCapacitor
from trapdesk.design.coil_kinds import GivenCoil
from trapdesk.design.parts import Trap
from trapdesk.errors import NoAnswer
from trapdesk.faces import choices_out, cli
from trapdesk.services.antenna.solve import solve
from trapdesk.services.compare.choices import ABOVE, BELOW, choices
from trapdesk.store import store


@pytest.fixture(scope="module", params=store.presets())
def found(request):
    design = store.preset(request.param)[0]
    return design, choices(design)


def present(points):
    (one,) = [p for p in points if p.present]
    return one


def test_present_choice_is_the_design(found):
    design, both = found
    full = solve(design)
    for points in (both.by_resonance, both.by_ratio):
        here = present(points)
        assert here.resonance == pytest.approx(full.trap.resonance, rel=1e-9)
        for role, band in full.bands.items():
            assert here.bands[role].loss == pytest.approx(band.shares.trap, rel=1e-9)
            assert here.bands[role].peak_voltage == pytest.approx(band.worst_stress.peak_voltage, rel=1e-9)
            assert here.bands[role].width == pytest.approx(band.width, rel=1e-9)
        assert here.inner == pytest.approx(full.lengths.inner, rel=1e-9)


def test_choices_reach_as_far_as_they_say(found):
    design, both = found
    aim = design.bands.upper.target
    places = [p.resonance for p in both.by_resonance]
    assert places == sorted(places)
    assert places[0] == pytest.approx(aim * (1 - BELOW))
    assert places[-1] == pytest.approx(aim * (1 + ABOVE))
    for point in (*both.by_resonance, *both.by_ratio):
        assert point.inductance * point.capacitance * (2 * math.pi * point.resonance) ** 2 == pytest.approx(1)


def test_more_inductance_shortens_the_wire_and_costs_on_the_lower_band(found):
    _, both = found
    there = [p for p in both.by_ratio if p.bands]
    assert len(there) >= 7
    # A larger loading coil at the same Q: less wire, more loss where the whole wire works.
    ends = [p.end for p in there]
    assert ends == sorted(ends, reverse=True)
    losses = [p.bands["lower"].loss for p in there]
    assert losses == sorted(losses)
    # A higher impedance at the same Q carries less current: less loss on the trap's own band.
    upper = [p.bands["upper"].loss for p in there]
    assert upper == sorted(upper, reverse=True)


def test_one_choice_is_what_a_design_of_it_does(found):
    design, both = found
    here = present(both.by_ratio)

    def plain(resonance, capacitance):
        trap = Trap(
            resonance=resonance,
            body=design.antenna.trap.body,
            coil=GivenCoil(q=200.0),
            capacitor=GivenCapacitor(capacitance=capacitance, q=1500.0),
        )
        return replace(design, antenna=replace(design.antenna, trap=trap))

    curves = choices(plain(here.resonance, here.capacitance))
    for point in (curves.by_ratio[2], curves.by_resonance[2]):
        full = solve(plain(point.resonance, point.capacitance))
        for role, band in full.bands.items():
            assert point.bands[role].loss == pytest.approx(band.shares.trap, rel=1e-6)
            assert point.bands[role].peak_voltage == pytest.approx(band.worst_stress.peak_voltage, rel=1e-6)
        assert point.inner == pytest.approx(full.lengths.inner, rel=1e-9)


def test_a_trap_of_cable_has_curves_without_a_step():
    design = store.find(str(Path(__file__).parent / "designs/cable-trap.toml")).design
    both = choices(design)
    for points in (both.by_resonance, both.by_ratio):
        i = next(n for n, point in enumerate(points) if point.present)
        for role in points[i].bands:
            before, here, after = (points[k].bands[role].loss for k in (i - 1, i, i + 1))
            assert min(before, after) < here < max(before, after)


def test_words_say_what_is_given_up(found):
    design, both = found
    lines = choices_out.lines(design, both)
    assert max(map(len, lines)) <= 79
    assert sum(line.startswith(">") for line in lines) == 2
    text = " ".join(" ".join(lines).split())
    assert text.count("gives up") >= 4
    assert text.count("least") == 2


def test_command_line(capsys):
    assert cli.main(["choices", "20-10-flat", "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["kind"] == "choices"
    assert sum(p["present"] for p in found["by_ratio"]) == 1
    assert cli.main(["choices", "nothing-like-it"]) == 3


def test_no_trap_has_no_choices():
    design = store.preset(store.FIRST_PRESET)[0]
    lengths = replace(design.antenna.lengths, end=None)
    with pytest.raises(NoAnswer):
        choices(replace(design, antenna=replace(design.antenna, trap=None, lengths=lengths)))
