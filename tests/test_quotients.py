"""Numerators and denominators: their quotients against circuits solved anew, and how slowly they vary."""

import numpy as np
import pytest
from numpy.polynomial import chebyshev

from trapdesk.engine.ports import chebyshev_nodes, polynomial_weights
from trapdesk.engine.quotients import resonator_fraction, terminate_fractions

F = np.linspace(13.4e6, 14.9e6, 41)
PARTS = {"inductance": 2.6e-6, "capacitance": 48.5e-12, "coil_resistance": 1.1}


def branches(frequency, inductance, capacitance, coil_resistance):
    """Return the impedance of two branches side by side, from their admittances."""
    w = 2 * np.pi * frequency
    return 1 / (1 / (coil_resistance + 1j * w * inductance) + 1j * w * capacitance)


def ports(frequency):
    """Return reciprocal port matrices (frequencies, 3, 3) that vary with frequency as a wire's do."""
    x = frequency[:, None, None] / 14e6
    fixed = np.array([[70, 40, 38], [40, 95, 20], [38, 20, 90]])
    slope = np.array([[1500, 900, 880], [900, 700, 350], [880, 350, 690]])
    return fixed * x**2 + 1j * slope * (x - 0.7)


def entries_of(z):
    return [z[:, i, j] for i, j in ((0, 0), (0, 1), (0, 2), (1, 1), (2, 2), (1, 2))]


def test_resonator_is_its_branches_side_by_side():
    top, bottom = resonator_fraction(F, **PARTS)
    assert top / bottom == pytest.approx(branches(F, **PARTS), rel=1e-12)


def test_arrays_are_their_elements_one_by_one():
    inductance, capacitance = np.array([2.5e-6, 2.7e-6, 2.9e-6]), np.array([40e-12, 50e-12, 60e-12])
    top, bottom = resonator_fraction(F[:, None], inductance, capacitance, 1.0)
    assert top.shape == bottom.shape == (F.size, 3)
    for i in range(3):
        n, d = resonator_fraction(F[7], inductance[i], capacitance[i], 1.0)
        assert (top[7, i], bottom[7, i]) == (n, d)


@pytest.mark.parametrize("name", ["frequency", "inductance", "capacitance", "coil_resistance"])
@pytest.mark.parametrize("value", [-1.0, np.nan])
def test_nonsense_is_named(name, value):
    with pytest.raises(ValueError, match=name):
        resonator_fraction(**{"frequency": F, **PARTS, name: value})


def test_closed_ports_are_the_solved_circuit():
    z = ports(F)
    traps = [PARTS, {**PARTS, "capacitance": 51e-12}]
    top, bottom, *across = terminate_fractions(
        *entries_of(z), *(resonator_fraction(F, **parts) for parts in traps)
    )
    loads = [branches(F, **parts) for parts in traps]
    for i in range(F.size):
        loaded = z[i].copy()
        loaded[1, 1] += loads[0][i]
        loaded[2, 2] += loads[1][i]
        # One ampere into the feed point: the trap ports' own equations give the other two currents.
        currents = np.linalg.solve(loaded[1:, 1:], -loaded[1:, 0])
        feed = loaded[0, 0] + loaded[0, 1:] @ currents
        assert top[i] / bottom[i] == pytest.approx(feed, rel=1e-10)
        for k in range(2):
            assert across[k][i] / bottom[i] == pytest.approx(loads[k][i] * currents[k], rel=1e-10)


def test_few_frequencies_tell_all_even_through_the_resonance():
    nodes = chebyshev_nodes(F[0], F[-1], 9)
    weights = polynomial_weights(nodes, F)
    few = terminate_fractions(*entries_of(ports(nodes)), *[resonator_fraction(nodes, **PARTS)] * 2)
    every = terminate_fractions(*entries_of(ports(F)), *[resonator_fraction(F, **PARTS)] * 2)
    for some, one in zip(few, every, strict=True):
        assert np.abs(weights @ some - one).max() < 1e-8 * np.abs(one).max()
    # The trap resonates between them: its impedance itself is no polynomial of that degree.
    trap = branches(F, **PARTS)
    fitted = chebyshev.Chebyshev.fit(F, np.abs(trap), 8)(F)
    assert np.abs(fitted - np.abs(trap)).max() > 0.1 * np.abs(trap).max()
