"""The half-space: kernels against other integrals and formulations, soils and reflections by tables."""

import math

import numpy as np
import pytest
from scipy.interpolate import BarycentricInterpolator

from tests import oracles
from trapdesk.engine.constants import C0, EPS0, ETA0, MU0
from trapdesk.engine.ground import Ground, fresnel, reflected_kernels
from trapdesk.engine.quadrature import barycentric, gauss_legendre
from trapdesk.engine.soils import SOILS, UNKNOWN_SOIL, UNKNOWN_SOIL_FROM, GroundKind

SOIL = {
    "sea": (5.0, 70.0),
    "wet": (1e-2, 30.0),
    "average": (5e-3, 13.0),
    "medium dry": (1e-3, 15.0),
    "dry": (3e-4, 7.0),
    "very dry": (1e-4, 3.0),
    "lossless": (0.0, 9.0),
}
MIRROR = Ground(kind=GroundKind.MIRROR)
DISTANCE = np.array([0.0, 0.3, 2.0, 10.0, 35.0])
FREQUENCY = np.array([1.8e6, 7.1e6, 28.5e6])
# A kernel error of this share of an image's 1/R moves 40 ohm of reflected reactance by 0.01 ohm.
WITHIN = 3e-4


def soil(conductivity, permittivity):
    return Ground(kind=GroundKind.SOIL, conductivity=conductivity, permittivity=permittivity)


def stacked(reflected):
    return np.stack([reflected.along, reflected.upright, reflected.cross, reflected.charge])


@pytest.mark.parametrize("height_sum", [1.0, 2.0, 6.0, 20.0, 80.0])
@pytest.mark.parametrize("name", SOIL)
def test_kernels_are_sommerfeld_integrals(name, height_sum):
    got = stacked(reflected_kernels(FREQUENCY, DISTANCE, np.full(5, height_sum), soil(*SOIL[name])))
    image = np.hypot(DISTANCE, height_sum)
    for i, f in enumerate(FREQUENCY):
        n2 = oracles.index_squared(f, *SOIL[name])
        expect = np.stack([oracles.sommerfeld(f, d, height_sum, n2) for d in DISTANCE], axis=1)
        assert np.abs((got[:, i] - expect) * image).max() < WITHIN


@pytest.mark.parametrize("height_sum", [120.0, 200.0, 600.0])
@pytest.mark.parametrize("frequency", [7.1e6, 28.5e6, 54e6])
def test_kernels_high_above_ground(frequency, height_sum):
    # A design may hang its feed point as high as 300 m.
    n2 = oracles.index_squared(frequency, *SOIL["average"])
    at = np.array([frequency]), DISTANCE, np.full(5, height_sum)
    got = stacked(reflected_kernels(*at, soil(*SOIL["average"])))[:, 0]
    expect = np.stack([oracles.sommerfeld(frequency, d, height_sum, n2) for d in DISTANCE], axis=1)
    assert np.abs((got - expect) * np.hypot(DISTANCE, height_sum)).max() < WITHIN


@pytest.mark.parametrize("name", SOIL)
def test_kernels_of_many_distances_at_one_height(name):
    # Many pairs of one height share a polynomial in the distance: two heights keep each pair by itself.
    distance = np.linspace(0.0, 35.0, 301)
    for height_sum in (1.0, 8.0, 40.0):
        together = stacked(
            reflected_kernels(FREQUENCY, distance, np.full(301, height_sum), soil(*SOIL[name]))
        )
        apart = reflected_kernels(
            FREQUENCY,
            np.append(distance, 0.0),
            np.append(np.full(301, height_sum), height_sum + 1),
            soil(*SOIL[name]),
        )
        error = np.abs(together - stacked(apart)[:, :, :-1]) * np.hypot(distance, height_sum)
        assert error.max() < WITHIN


@pytest.mark.parametrize("ground", [soil(*SOIL["average"]), soil(*SOIL["sea"]), MIRROR], ids=str)
def test_array_is_each_pair_by_itself(ground):
    distance, heights = np.array([0.0, 3.0, 20.0]), np.array([2.0, 9.0, 30.0])
    together = stacked(reflected_kernels(FREQUENCY, distance, heights, ground))
    for i in range(FREQUENCY.size):
        for p in range(3):
            one = stacked(
                reflected_kernels(FREQUENCY[i : i + 1], distance[p : p + 1], heights[p : p + 1], ground)
            )
            error = np.abs(one[:, 0, 0] - together[:, i, p]) * math.hypot(distance[p], heights[p])
            assert error.max() < WITHIN


def test_mirror_is_an_image():
    height_sum = np.array([1.0, 2.0, 6.0, 20.0, 80.0])
    got = reflected_kernels(FREQUENCY, DISTANCE, height_sum, MIRROR)
    r = np.sqrt(DISTANCE**2 + height_sum**2)
    wave = np.exp(-2j * np.pi * FREQUENCY[:, None] * r / oracles.C0) / r
    for kernel, sign in ((got.along, -1), (got.charge, -1), (got.upright, 1), (got.cross, 0)):
        assert np.allclose(kernel, sign * wave, rtol=1e-12, atol=0)


def test_metal_soil_is_a_mirror():
    # At 1e6 S/m the field enters a soil by the root of 2 eps0 w/sigma: 4e-5 to 2e-4 of an image.
    height_sum = np.full(5, 6.0)
    got = stacked(reflected_kernels(FREQUENCY, DISTANCE, height_sum, soil(1e6, 1.0)))
    image = stacked(reflected_kernels(FREQUENCY, DISTANCE, height_sum, MIRROR))
    assert np.abs((got - image) * np.hypot(DISTANCE, 6.0)).max() < 1e-3


def test_soil_of_air_reflects_nothing():
    got = stacked(reflected_kernels(FREQUENCY, DISTANCE, np.full(5, 3.0), soil(0.0, 1.0)))
    assert np.abs(got).max() < 1e-6


@pytest.mark.parametrize("permittivity", [2.5, 9.0, 80.0])
def test_static_charge_over_a_dielectric(permittivity):
    # Electrostatics: the image of a charge over a dielectric is -(eps - 1)/(eps + 1) of it.
    distance, height_sum = np.array([0.0, 1.0, 3.0]), np.full(3, 2.0)
    got = reflected_kernels(np.array([2e4]), distance, height_sum, soil(0.0, permittivity)).charge[0]
    expect = -(permittivity - 1) / (permittivity + 1) / np.hypot(distance, height_sum)
    assert got.real == pytest.approx(expect, rel=2e-3)


def test_a_static_current_does_not_see_the_soil():
    # Magnetostatics: a soil without magnetism leaves the field alone; what is left goes with the soil's
    # wave number, three times that of air.
    got = reflected_kernels(np.array([2e4]), np.array([0.0, 3.0]), np.full(2, 2.0), soil(0.0, 9.0)).along
    assert np.abs(got).max() < 3 * 2 * np.pi * 2e4 / C0


def reflected_impedance(side, height, slope, frequency, ground, count=24):
    """Return what the ground adds to the impedance of a sinusoidal current, referred to its maximum."""
    x, w = gauss_legendre(count)
    x, w = side * x, side * w
    k0, omega = 2 * math.pi * frequency / C0, 2 * math.pi * frequency
    current, change = np.sin(k0 * (side - x)), -k0 * np.cos(k0 * (side - x))
    c, s = math.cos(slope), math.sin(slope)
    place, height = np.concatenate([c * x, -c * x]), np.tile(height - s * x, 2)
    level, rise = np.full(2 * count, c), np.repeat([-s, s], count)
    amps, charge = np.tile(current * w, 2), np.concatenate([change * w, -change * w])
    apart, heights = place[:, None] - place, height[:, None] + height
    seen = reflected_kernels(np.array([frequency]), abs(apart).ravel(), heights.ravel(), ground)
    along, upright, cross, scalar = (kernel.reshape(apart.shape) for kernel in stacked(seen))
    cross = cross * np.sign(apart)
    vector = np.outer(level, level) * along + np.outer(rise, rise) * upright
    vector = vector + np.outer(rise, level) * cross - np.outer(level, rise) * cross
    return 1j * omega * MU0 / (4 * np.pi) * amps @ vector @ amps + charge @ scalar @ charge / (
        4j * np.pi * omega * EPS0
    )


@pytest.mark.parametrize(
    ("side", "height", "slope", "frequency", "name"),
    [
        (10.0, 10.0, 0.0, 7.1e6, "average"),
        (10.0, 3.0, 0.0, 7.1e6, "medium dry"),
        (10.0, 10.0, 30.0, 7.1e6, "average"),
        (10.0, 8.0, 40.0, 7.1e6, "sea"),
        (5.0, 4.0, 20.0, 14.1e6, "dry"),
        (10.0, 8.0, 45.0, 7.1e6, "very dry"),
    ],
)
def test_kernels_together_are_reflected_plane_waves(side, height, slope, frequency, name):
    # All four kernels at once, in a formulation without potentials: TE and TM waves and their reflection.
    slope = math.radians(slope)
    x, w = gauss_legendre(36)
    current = np.sin(2 * math.pi * frequency / C0 * side * (1 - x))
    wire = oracles.on_vee(height, slope, side * x, side * w, current)
    expect = oracles.ground_reaction(wire, frequency, oracles.index_squared(frequency, *SOIL[name]))
    assert abs(reflected_impedance(side, height, slope, frequency, soil(*SOIL[name])) - expect) < 1e-3


# Half-wave dipole with sinusoidal current in free space, exact eta0: Orfanidis, Electromagnetic Waves and
# Antennas, help text of the book's mutual-impedance function (public copy). Seen.
HALF_WAVE = 73.079 + 42.515j
# Resistance of the horizontal half-wave dipole with sinusoidal current over perfect ground, by height in
# wavelengths. Independent reference computation: Carter's closed form of 1932, exact eta0; printed to 0.01.
OVER_MIRROR = {
    0.05: 5.79,
    0.1: 21.72,
    0.125: 32.32,
    0.2: 66.87,
    0.25: 85.60,
    0.3: 96.38,
    0.35: 97.92,
    0.4: 91.56,
    0.5: 69.07,
    0.75: 74.97,
    1.0: 72.00,
}
# Its impedance over real ground at 7.1 MHz. Independent reference computation: Sommerfeld spectral integral,
# converged to 1e-9, perfect-ground limit equal to Carter's; printed to 0.01 ohm.
OVER_SOIL = {
    0.05: "8.00+36.65 45.55+47.75 57.31+53.99 64.27+45.38 79.43+53.55",
    0.1: "23.13+62.10 44.61+58.65 52.98+58.32 53.72+50.87 70.73+47.20",
    0.15: "44.86+76.77 57.05+67.67 62.20+64.50 59.85+59.50 70.12+48.77",
    0.2: "67.49+79.43 72.14+68.66 74.34+64.48 70.71+62.08 73.02+49.75",
    0.25: "85.83+71.82 84.46+62.37 84.19+58.51 80.61+58.43 76.49+48.55",
    0.3: "96.26+57.85 90.99+51.76 89.03+49.14 86.44+50.74 78.73+45.58",
    0.4: "91.15+30.19 85.35+32.11 82.93+32.73 83.31+35.03 77.32+39.14",
    0.5: "68.90+25.07 68.67+29.99 68.44+31.99 70.28+32.37 71.71+38.13",
    1.0: "71.89+33.29 71.51+35.75 71.28+36.74 72.19+37.03 72.61+40.06",
}
COLUMNS = ("sea", "wet", "average", "medium dry", "very dry")
# Half a unit of the last digit each of the table and of the free-space value, and the kernels' own doubt.
PRINTED = 0.015


def at_wavelengths(height, ground):
    wavelength = C0 / 7.1e6
    return HALF_WAVE + reflected_impedance(wavelength / 4, height * wavelength, 0.0, 7.1e6, ground)


@pytest.mark.parametrize("height", OVER_MIRROR)
def test_half_wave_over_a_mirror(height):
    assert at_wavelengths(height, MIRROR).real == pytest.approx(OVER_MIRROR[height], abs=PRINTED)


@pytest.mark.parametrize("height", OVER_SOIL)
def test_half_wave_over_real_ground(height):
    for name, printed in zip(COLUMNS, OVER_SOIL[height].split(), strict=True):
        r, x = (float(number) for number in printed.split("+"))
        got = at_wavelengths(height, soil(*SOIL[name]))
        assert (got.real, got.imag) == pytest.approx((r, x), abs=PRINTED), name


# Magnitude and phase in degrees, horizontal then vertical, at 30 degrees elevation and 7.1 MHz. Independent
# reference computation: Fresnel's equations; no published value was seen.
REFLECTION = {
    "sea": (0.9937, 179.6, 0.9751, -1.4),
    "wet": (0.8600, 176.8, 0.5449, -13.4),
    "average": (0.8027, 174.6, 0.4116, -23.1),
    "medium dry": (0.7685, 178.7, 0.3355, -6.0),
    "very dry": (0.5019, 177.6, 0.0141, -89.2),
}


@pytest.mark.parametrize("name", REFLECTION)
def test_reflection_coefficients(name):
    n2 = soil(*SOIL[name]).index_squared(np.float64(7.1e6))
    found = fresnel(np.cos(math.radians(60)), n2)
    got = [value for r in found for value in (abs(r), math.degrees(np.angle(r)))]
    assert got[0::2] == pytest.approx(REFLECTION[name][0::2], abs=6e-5)
    assert got[1::2] == pytest.approx(REFLECTION[name][1::2], abs=0.06)


def test_reflection_limits():
    cosine = np.linspace(0.0, 1.0, 11)
    horizontal, vertical = fresnel(cosine, np.complex128(9.0))
    # Normal incidence: (1 - n)/(1 + n), the vertical one counted the other way; grazing: -1 both.
    assert (horizontal[-1], vertical[-1]) == pytest.approx((-0.5, 0.5))
    assert (horizontal[0], vertical[0]) == pytest.approx((-1.0, -1.0))
    # Brewster's angle: tan = n from the vertical.
    assert abs(fresnel(np.cos(np.arctan(3.0)), np.complex128(9.0))[1]) < 1e-12
    mirror = fresnel(cosine[1:], np.complex128(1 - 1e12j))
    assert np.allclose(mirror[0], -1, atol=1e-4)
    assert np.allclose(mirror[1], 1, atol=1e-4)


@pytest.mark.parametrize("name", SOIL)
def test_index_squared(name):
    got = soil(*SOIL[name]).index_squared(FREQUENCY)
    assert np.allclose(got, oracles.index_squared(FREQUENCY, *SOIL[name]), rtol=1e-9)


def test_constants():
    # SI before and after 2019 agree to 1e-9; c is exact, eta0 = 376.730313668 ohm (CODATA 2018, from memory).
    assert C0 == oracles.C0
    assert ETA0 == pytest.approx(376.730313668, rel=2e-9)
    assert MU0 * EPS0 * C0**2 == pytest.approx(1.0, rel=1e-9)


# ITU-R P.368 curve sets, conductivity [S/m] and relative permittivity, seen in a public copy.
P368 = {
    "sea water": (5.0, 70.0),
    "brackish water": (1.0, 80.0),
    "fresh water": (3e-3, 80.0),
    "very wet ground": (3e-2, 40.0),
    "wet ground": (1e-2, 30.0),
    "land": (3e-3, 22.0),
    "medium dry ground": (1e-3, 15.0),
    "dry ground": (3e-4, 7.0),
    "very dry ground": (1e-4, 3.0),
}


def test_soil_classes():
    assert {name: (s.conductivity, s.permittivity) for name, s in SOILS.items()} == P368
    assert all(s.seen and s.source == "itu-r-p368" for s in SOILS.values())


def test_unknown_soil_claims_no_source_and_lies_within_its_range():
    # Seen remark in a public copy: 5 mS/m and 13 are a textbook average, none of the ITU curves.
    assert (UNKNOWN_SOIL.conductivity, UNKNOWN_SOIL.permittivity) == (5e-3, 13.0)
    assert not UNKNOWN_SOIL.seen
    dry, wet = (SOILS[name] for name in UNKNOWN_SOIL_FROM)
    assert dry.conductivity < UNKNOWN_SOIL.conductivity < wet.conductivity
    assert dry.permittivity < UNKNOWN_SOIL.permittivity < wet.permittivity


def test_barycentric_is_the_polynomial_through_the_nodes():
    angle = np.pi * (np.arange(9) + 0.5) / 9
    nodes, weights = 3 + 2 * np.cos(angle), np.sin(angle)
    position = np.linspace(1.0, 5.0, 40)
    values = np.exp(nodes)
    got = barycentric(nodes, weights, position) @ values
    assert got == pytest.approx(BarycentricInterpolator(nodes, values)(position), rel=1e-12)
    assert barycentric(nodes, weights, nodes.copy()) == pytest.approx(np.eye(9), abs=1e-12)


@pytest.mark.parametrize("count", [1, 2, 8, 40])
def test_gauss_rule_is_exact_for_polynomials(count):
    x, w = gauss_legendre(count)
    for power in range(2 * count):
        assert w @ x**power == pytest.approx(1 / (power + 1), rel=1e-12)


def test_nonsense_is_refused():
    one = np.ones(1)
    with pytest.raises(ValueError, match="space reflects nothing"):
        reflected_kernels(one, one, one, Ground(kind=GroundKind.SPACE))
    for height in (0.0, -1.0, math.nan):
        for ground in (MIRROR, soil(5e-3, 13.0)):
            with pytest.raises(ValueError, match="height_sum"):
                reflected_kernels(one * 7e6, one, one * height, ground)
    for cosine in (-0.1, 1.1, math.nan):
        with pytest.raises(ValueError, match="cosine"):
            fresnel(np.array([cosine]), np.complex128(9.0))
    with pytest.raises(ValueError, match="count"):
        gauss_legendre(0)
