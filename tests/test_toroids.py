"""Coils on ring cores against the independent reference, and against the law of induction."""

import numpy as np
import pytest

from tests.cases import reference
from trapdesk.engine import toroids


@pytest.mark.parametrize("case", reference("toroids", "tor-"))
def test_reference(case):
    given, expect, within = case["inputs"], case["expected"], case["tolerance"]["rel"]
    index, wire = given["a_l_h_per_turn2"], given["d_wire_m"]
    size = (given["od_m"], given["id_m"], given["height_m"])
    assert toroids.toroid_inductance(index, given["turns"]) == pytest.approx(expect["l_h"], rel=within)
    turns = toroids.toroid_turns(index, given["l_target_h"])
    assert turns == pytest.approx(expect["turns_exact"], rel=within)
    per_turn = toroids.toroid_turn_length(*size, wire)
    assert per_turn == pytest.approx(expect["wire_per_turn_m"], rel=within)
    most = toroids.toroid_most_turns(given["id_m"], wire)
    assert most == expect["max_turns_single_layer"]
    assert (given["turns"] <= most) == expect["fits"]


def test_most_turns_by_trying():
    # Wires on their circle, each as far from the next as they are thick: one more would overlap.
    for inner, wire in ((0.0198, 1.2e-3), (0.01, 3e-3), (0.005, 2.4e-3)):
        most = int(toroids.toroid_most_turns(inner, wire))
        circle = 0.5 * (inner - wire)
        gaps = [2 * circle * np.sin(np.pi / count) for count in (most, most + 1)]
        assert gaps[0] >= wire * (1 - 1e-9) > gaps[1]
    assert toroids.toroid_most_turns(0.002, 1.5e-3) == 0


def test_flux_is_the_integral_of_the_voltage():
    f, volts, turns, size = 7e6, 100.0, 12, (0.05, 0.03, 0.014)
    t = np.linspace(0, 0.25 / f, 20001)
    # A quarter period takes the flux from nothing to its peak.
    flux = np.trapezoid(np.sqrt(2) * volts * np.cos(2 * np.pi * f * t), t) / turns
    section = 0.01 * 0.014
    assert toroids.toroid_flux(f, volts, turns, *size) == pytest.approx(flux / section, rel=1e-6)


def test_arrays_equal_one_by_one():
    index, turns = np.array([1e-9, 5e-9, 2e-8]), np.array([[5.0], [11.5]])
    every = toroids.toroid_inductance(index, turns)
    assert every.shape == (2, 3)
    for i, n in enumerate(turns[:, 0]):
        for j, a in enumerate(index):
            assert every[i, j] == toroids.toroid_inductance(a, n)
    most = toroids.toroid_most_turns(np.array([0.002, 0.02]), 1.5e-3)
    assert list(most) == [0, toroids.toroid_most_turns(0.02, 1.5e-3)]


@pytest.mark.parametrize(
    ("call", "name"),
    [
        (lambda: toroids.toroid_inductance(0.0, 5), "index"),
        (lambda: toroids.toroid_turns(1e-9, float("nan")), "inductance"),
        (lambda: toroids.toroid_turn_length(0.02, 0.02, 0.01, 1e-3), "outer"),
        (lambda: toroids.toroid_most_turns(-1.0, 1e-3), "inner"),
        (lambda: toroids.toroid_flux(0.0, 1.0, 5, 0.02, 0.01, 0.01), "frequency"),
        (lambda: toroids.toroid_flux(7e6, -1.0, 5, 0.02, 0.01, 0.01), "voltage"),
    ],
)
def test_refuses(call, name):
    with pytest.raises(ValueError, match=name):
        call()
