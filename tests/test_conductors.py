"""Conductors against published tables, and internal impedance against independent Bessel functions."""

import numpy as np
import pytest
import scipy.special
from scipy.constants import epsilon_0, mu_0

from tests.cases import published, reference
from trapdesk.engine import conductors
from trapdesk.engine.metals import MATERIALS
from trapdesk.units.units import gauge_diameter

COPPER = MATERIALS["copper"].resistivity


# Independent reference computation: Bessel functions with mpmath, and Riccati's equation by Radau.
@pytest.mark.parametrize("case", reference("coils", "wire-"))
def test_reference_internal_impedance(case):
    given, expected, within = case["inputs"], case["expected"], case["tolerance"]["rel"]
    wire = given["d_wire_m"], given["rho_ohm_m"]
    z = conductors.internal_impedance(given["f_hz"], *wire)
    assert z.real == pytest.approx(expected["r_per_m_ohm"], rel=within)
    assert z.imag == pytest.approx(expected["x_per_m_ohm"], rel=within)
    assert conductors.dc_resistance(*wire) == pytest.approx(expected["r_dc_per_m_ohm"], rel=within)
    depth = conductors.skin_depth(given["f_hz"], given["rho_ohm_m"])
    assert depth == pytest.approx(expected["skin_depth_m"], rel=within)


def test_internal_impedance_against_scipy():
    frequency = np.logspace(1, 8, 60)[:, None, None]
    diameter = np.array([1e-4, 1.6e-3, 6e-3])[:, None]
    rho = np.array([1.59e-8, COPPER, 9.5e-8])
    g = np.sqrt(2j * np.pi * frequency * mu_0 / rho)
    z = g * diameter / 2
    exact = rho * g / (np.pi * diameter) * scipy.special.ive(0, z) / scipy.special.ive(1, z)
    # mu_0 of the two tables of constants differs by 7e-10
    np.testing.assert_allclose(conductors.internal_impedance(frequency, diameter, rho), exact, rtol=2e-9)


def test_internal_impedance_limits():
    wire = 1.6e-3, COPPER
    slow = conductors.internal_impedance(1.0, *wire)
    assert slow.real == pytest.approx(conductors.dc_resistance(*wire), rel=1e-6)
    # uniform current: mu0 / (8 pi) per metre, the textbook's internal inductance
    assert slow.imag / (2 * np.pi) == pytest.approx(mu_0 / (8 * np.pi), rel=1e-5)
    # thin skin: the ratio is r / (2 delta) + 1/4 + 3 delta / (32 r), the textbook's expansion
    ratio = 0.8e-3 / conductors.skin_depth(30e6, COPPER)
    fast = conductors.internal_impedance(30e6, *wire).real / conductors.dc_resistance(*wire)
    assert fast == pytest.approx(ratio / 2 + 1 / 4 + 3 / (32 * ratio), rel=1e-6)


def test_perfect_conductor():
    perfect = MATERIALS["perfect"]
    z = conductors.internal_impedance(np.array([1e3, 1e7]), 1e-3, [perfect.resistivity, perfect.resistivity])
    np.testing.assert_array_equal(z, [0, 0])
    both = conductors.internal_impedance(1e7, 1e-3, [0.0, COPPER])
    assert both[0] == 0 and both[1] == conductors.internal_impedance(1e7, 1e-3, COPPER)


def test_array_equals_scalar_one_by_one():
    frequency, diameter = np.array([1e3, 7e6, 2e9]), np.array([[1e-3], [4e-3]])
    z = conductors.internal_impedance(frequency, diameter, COPPER)
    singly = [[conductors.internal_impedance(f, d, COPPER) for f in frequency] for d in diameter.ravel()]
    np.testing.assert_allclose(z, singly, rtol=1e-13)


@pytest.mark.parametrize("case", published("astm-b258-law"))
def test_published_gauges(case):
    assert gauge_diameter(case["given"]["gauge"]) == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("case", published("wire-table"))
def test_published_wire_table(case):
    got = conductors.dc_resistance(gauge_diameter(case["given"]["gauge"]), COPPER)
    assert got == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("case", published("pozar-example-1-2"))
def test_published_skin_depths(case):
    got = conductors.skin_depth(case["given"]["frequency"], 1 / case["given"]["conductivity"])
    assert got == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("case", published("terman-awg-10"))
def test_published_resistance_ratio(case):
    wire = gauge_diameter(case["given"]["gauge"]), COPPER
    z = conductors.internal_impedance(case["given"]["frequency"], *wire)
    assert z.real / conductors.dc_resistance(*wire) == pytest.approx(case["expect"], abs=case["within"])


def test_gauges_fall_by_equal_ratios():
    diameters = gauge_diameter(np.arange(-3, 41))
    np.testing.assert_allclose(diameters[:-1] / diameters[1:], 92 ** (1 / 39), rtol=1e-12)


def test_materials():
    # nbs-handbook-100: 58 MS/m; the others as in the register, conductivity falls in this order
    assert 1 / COPPER == pytest.approx(58e6, rel=1e-4)
    order = ["silver", "copper", "hard-drawn copper", "aluminium", "bronze"]
    values = [MATERIALS[name].resistivity for name in order]
    assert values == sorted(values)
    for name, material in MATERIALS.items():
        assert material.seen or "from memory" in material.source, name


def test_coating_elastance_by_integration():
    # potential difference of a line charge across the coating: in air less in the dielectric
    r = np.linspace(0.8e-3, 1.3e-3, 20_001)
    field = 1 / (2 * np.pi * epsilon_0 * r)
    exact = np.trapezoid(field * (1 - 1 / 2.3), r)
    assert conductors.coating_elastance(1.6e-3, 0.5e-3, 2.3) == pytest.approx(exact, rel=1e-6)
    assert conductors.coating_elastance(1.6e-3, 0.0, 2.3) == 0
    assert conductors.coating_elastance(1.6e-3, 0.5e-3, 1.0) == 0


@pytest.mark.parametrize(
    ("call", "name"),
    [
        (lambda: conductors.skin_depth(0.0, COPPER), "frequency"),
        (lambda: conductors.skin_depth(1e6, -1.0), "resistivity"),
        (lambda: conductors.dc_resistance(np.nan, COPPER), "diameter"),
        (lambda: conductors.internal_impedance(1e6, [1e-3, 0.0], COPPER), "diameter"),
        (lambda: conductors.internal_impedance(np.inf, 1e-3, COPPER), "frequency"),
        (lambda: conductors.internal_impedance(1e6, 1e-3, np.nan), "resistivity"),
        (lambda: conductors.coating_elastance(1e-3, -1e-4, 2.0), "coating_thickness"),
        (lambda: conductors.coating_elastance(1e-3, 1e-4, 0.9), "permittivity"),
    ],
)
def test_refuses(call, name):
    with pytest.raises(ValueError, match=rf"^{name} must be"):
        call()
