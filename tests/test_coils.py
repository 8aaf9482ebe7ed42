"""The solenoid against an independent reference, published tables and other methods."""

from dataclasses import replace

import mpmath
import numpy as np
import pytest
import scipy.special
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import mu_0
from scipy.optimize import brentq

from tests import coil_checks
from tests.cases import published, reference
from trapdesk.design.coil_kinds import Solenoid
from trapdesk.design.fields import SOLVE
from trapdesk.engine import coil_formulas, coils, metals, rings
from trapdesk.services.trap.coils import build_coil

COPPER = metals.MATERIALS["copper"]
fixed = settings(derandomize=True, deadline=None, database=None, max_examples=25)
WIDE = st.tuples(st.floats(0.025, 0.11), st.floats(1.5, 5.0), st.floats(1e-3, 3e-3), st.integers(3, 25)).map(
    lambda x: (x[0], x[1] * x[2], x[2], x[3])
)


def shape_of(given):
    return given["d_mean_m"], given["pitch_m"], given["d_wire_m"]


# Independent reference computation: axisymmetric boundary elements, current sheet by Lorenz's elliptic form
# and Neumann's double integral, ring sums, internal impedance by Bessel functions and Riccati's equation.
SOLENOIDS = [case for case in reference("coils", "sol-") if case.id.removeprefix("sol-").isdigit()]


@pytest.mark.parametrize("case", SOLENOIDS)
def test_reference_rings(case):
    given, expected, within = case["inputs"], case["expected"], case["tolerance"]
    inductance, proximity = rings.solenoid_rings(*shape_of(given), given["turns"])
    assert inductance == pytest.approx(expected["l_skin_limit_h"], rel=within["l_skin_limit_h"]["rel"])
    assert proximity == pytest.approx(expected["proximity_phi"], rel=within["proximity_phi"]["rel"])


@pytest.mark.parametrize("case", SOLENOIDS)
def test_reference_coil_at_frequency(case):
    given, expected = case["inputs"], case["expected"]
    wound = coils.winding(*shape_of(given), given["turns"])
    coil = coils.coil_at(wound, given["f_hz"], given["rho_ohm_m"])
    # Of the same model the numbers agree far closer than the reference's own 0.3 % and 3 %, which are about
    # helix and leads; what is left is the proximity factor's 0.1 %, and its part of the inductance.
    assert wound.wire_length == pytest.approx(expected["wire_length_m"], rel=1e-9)
    assert wound.length == pytest.approx(expected["length_current_sheet_m"], rel=1e-12)
    assert coil.inductance == pytest.approx(expected["l_hf_total_h"], rel=3e-5)
    assert coil.inductance - wound.inductance == pytest.approx(expected["l_internal_h"], rel=2e-3)
    assert coil.resistance == pytest.approx(expected["r_hf_ohm"], rel=1.1e-3)
    stretched = expected["r_isolated_per_m_ohm"] * expected["wire_length_m"]
    assert coil.resistance / wound.proximity_factor == pytest.approx(stretched, rel=1e-8)
    assert coil.q == pytest.approx(expected["q_coil"], rel=1.1e-3)


@pytest.mark.parametrize("case", SOLENOIDS)
def test_reference_exponents_and_drift(case):
    given, expected = case["inputs"], case["expected"]
    wound = coils.winding(*shape_of(given), given["turns"])
    names = ("dlnL_dlnD", "dlnL_dlnp", "dlnL_dlnd")
    # 1e-6 of the inductance, the nodes' error, over a step of 1e-3
    assert coils.exponents(wound) == pytest.approx([expected[name] for name in names], abs=1e-3)
    # The table was fitted for a search; its slopes are good to a hundredth.
    assert coils.quick_exponents(wound) == pytest.approx(coils.exponents(wound), abs=0.01)
    metal = given["alpha_copper_per_k"], COPPER.temperature_coefficient
    arguments = wound, given["f_hz"], given["rho_ohm_m"]
    resistive = expected["tc_l_resistivity_part_per_k"]
    on_former = coils.temperature_drift(*arguments, given["alpha_former_per_k"], *metal)
    free = coils.temperature_drift(*arguments, given["alpha_copper_per_k"], *metal)
    assert on_former == pytest.approx(expected["tc_l_on_former_70ppm_per_k"] + resistive, abs=1e-7)
    assert free == pytest.approx(expected["tc_l_free_copper_per_k"] + resistive, abs=1e-8)


@pytest.mark.parametrize("case", SOLENOIDS)
def test_reference_formulas(case):
    given, expected = case["inputs"], case["expected"]
    shape, turns = shape_of(given), given["turns"]
    length = turns * shape[1]
    assert coil_formulas.sheet_factor(shape[0], length) == pytest.approx(expected["nagaoka_k"], rel=1e-9)
    sheet = coil_formulas.sheet_inductance(shape[0], length, turns)
    assert sheet == pytest.approx(expected["l_current_sheet_h"], rel=1e-9)
    assert coil_formulas.rosa_inductance(*shape, turns) == pytest.approx(expected["l_rosa_hf_h"], rel=1e-6)
    assert rings.ring_sum(*shape, turns) == pytest.approx(expected["l_ring_sum_hf_h"], rel=1e-9)
    spread = rings.ring_sum(*shape, turns, surface=False)
    assert spread == pytest.approx(expected["l_ring_sum_uniform_current_h"], rel=1e-9)


@pytest.mark.parametrize("case", SOLENOIDS)
def test_reference_self_capacitance(case):
    given, expected = case["inputs"], case["expected"]
    diameter, length = given["d_mean_m"], given["turns"] * given["pitch_m"]
    low, typical, high = coils.self_capacitance_range(diameter, length)
    assert low < typical < high
    # The reference takes Medhurst's H by a closed form that misses his table by up to 8 %.
    assert high == pytest.approx(expected["c_self_medhurst_f"], rel=0.08)
    # Bare wire, both ends floating, by a quasistatic model that says +-50 % of a built coil.
    bare = expected["c_self_quasistatic_floating_f"]
    assert 0.5 * bare < high and 1.5 * bare > low


@pytest.mark.parametrize("case", reference("coils", "sol-turns-"))
def test_reference_turns(case):
    given, expected, within = case["inputs"], case["expected"], case["tolerance"]
    shape, wanted = shape_of(given), given["l_target_h"]
    turns = brentq(lambda n: coils.winding(*shape, n).inductance - wanted, 1.0, 60.0, xtol=1e-9)
    assert turns == pytest.approx(expected["turns_skin_limit"], abs=within["turns_skin_limit"]["abs"])
    rosa = coil_formulas.rosa_inductance(*shape, expected["turns_rosa"] + np.array([-1, 1]) * 0.002)
    assert rosa[0] < wanted < rosa[1]
    wheeler = expected["turns_wheeler"]
    got = coil_checks.wheeler_inductance(shape[0], wheeler * shape[1], wheeler)
    assert got == pytest.approx(wanted, rel=1e-9)


@pytest.mark.parametrize("case", reference("coils", "sol-rosa-km"))
def test_reference_rosa_corrections(case):
    expected, within = case["expected"], case["tolerance"]["abs"]
    got = coil_formulas.rosa_mutual_correction(case["inputs"]["turns"])
    np.testing.assert_allclose(got, expected["k_m"], rtol=0, atol=within)
    surface = coil_formulas.rosa_self_correction(1e-3, 1e-3)
    spread = coil_formulas.rosa_self_correction(1e-3, 1e-3, surface=False)
    assert surface == pytest.approx(expected["k_s_hf_at_p_eq_d"], abs=within)
    assert spread == pytest.approx(expected["k_s_uniform_at_p_eq_d"], abs=within)


TABLES = ("grover-1946", "nagaoka-1909", "medhurst-1947", "antentop-009")


@pytest.mark.parametrize("case", published(*TABLES))
def test_published_formulas(case):
    where = coil_checks if hasattr(coil_checks, case["formula"]) else coil_formulas
    got = getattr(where, case["formula"])(**case["given"])
    assert got == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("case", published("beaumont-2011-coil"))
def test_published_measured_coil(case):
    given = dict(case["given"])
    tails, diameter = given.pop("tails"), given["wire_diameter"]
    # a braid at audio frequency: current uniform round it; straight tails by Neumann's formula
    straight = mu_0 * tails / (2 * np.pi) * (np.log(4 * tails / diameter) - 1)
    assert rings.ring_sum(**given) + straight == pytest.approx(case["expect"], abs=case["within"])


def test_mutual_correction_against_mpmath():
    # (2 / N) ln G(N + 1) - N ln N + 3/2 (N - 1) with the Barnes function of mpmath, at broken turns too
    turns = [1.0, 1.5, 2.25, 7.75, 40.5, 300.0]
    with mpmath.workdps(30):
        exact = [
            float(2 / mpmath.mpf(n) * mpmath.log(mpmath.barnesg(n + 1)) - n * mpmath.log(n) + 1.5 * (n - 1))
            for n in turns
        ]
    np.testing.assert_allclose(coil_formulas.rosa_mutual_correction(turns), exact, rtol=0, atol=1e-10)
    assert coil_formulas.rosa_mutual_correction(1e6) == pytest.approx(np.log(2 * np.pi) - 1.5, abs=1e-5)


def test_wheeler_within_its_stated_range_and_error():
    low = coil_checks.WHEELER_RANGE["length_over_radius"][0]
    length = 0.5 * np.logspace(np.log10(low), 2, 200)
    wheeler = coil_checks.wheeler_inductance(1.0, length, 10)
    sheet = coil_formulas.sheet_inductance(1.0, length, 10)
    np.testing.assert_allclose(wheeler, sheet, rtol=coil_checks.WHEELER_ERROR)
    outside = coil_checks.wheeler_inductance(1.0, 0.25 * low / 2, 10)
    assert outside / coil_formulas.sheet_inductance(1.0, 0.25 * low / 2, 10) - 1 < -0.1


def test_lundin_agrees_with_the_sheet_within_its_error():
    x = np.logspace(-3, 3, 2001)
    exact = coil_formulas.sheet_factor(x, 1.0)
    np.testing.assert_allclose(coil_checks.lundin_factor(x, 1.0), exact, rtol=coil_checks.LUNDIN_ERROR)


def test_two_distant_rings_by_maxwells_formula():
    # Thin wire, wide apart: no crowding, so L = 2 (mu0 R (ln(8 R / a) - 2) + M), M with scipy's integrals.
    radius, a, apart = 0.05, 5e-5, 0.04
    m = 4 * radius**2 / (4 * radius**2 + apart**2)
    k = np.sqrt(m)
    mutual = mu_0 * radius * ((2 / k - k) * scipy.special.ellipk(m) - 2 / k * scipy.special.ellipe(m))
    exact = 2 * (mu_0 * radius * (np.log(8 * radius / a) - 2) + mutual)
    inductance, proximity = rings.solenoid_rings(2 * radius, apart, 2 * a, 2)
    # corrections of order (a / R)^2 ln and (a / p)^2
    assert inductance == pytest.approx(exact, rel=1e-5)
    assert proximity == pytest.approx(1.0, abs=1e-4)
    assert rings.ring_sum(2 * radius, apart, 2 * a, 2) == pytest.approx(exact, rel=1e-8)


def crowding_of_two_wires(spacing, terms=60):
    """Return the proximity factor of two straight wires of radius 1 with equal currents, by multipoles."""
    # Potential ln r + sum c_n cos(n t) / r^n about one centre, mirrored about the other; that it is constant
    # on the circle gives the c_n by least squares, the surface current is its normal derivative there.
    angle = np.linspace(0, np.pi, 400)
    x, y = np.cos(angle), np.sin(angle)
    across = x - spacing
    distance, turn = np.hypot(across, y), np.arctan2(y, -across)
    n = np.arange(1, terms + 1)[:, None]
    columns = np.cos(n * angle) + np.cos(n * turn) / distance**n
    system = np.vstack([columns, np.ones_like(angle)]).T
    strength = np.linalg.lstsq(system, -np.log(distance), rcond=None)[0][:-1]
    outward = (across * x + y * y) / distance
    sideways = (x * y - across * y) / distance
    current = 1 + outward / distance - strength @ (n * np.cos(n * angle))
    current -= strength @ (
        n * (np.cos(n * turn) * outward + np.sin(n * turn) * sideways) / distance ** (n + 1)
    )
    return np.trapezoid(current**2, angle) / np.pi / (np.trapezoid(current, angle) / np.pi) ** 2


@pytest.mark.parametrize("pitch", [1.1e-3, 1.5e-3, 3e-3])
def test_two_rings_of_large_radius_are_parallel_wires(pitch):
    wire = 1e-3
    got = [rings.solenoid_rings(diameter, pitch, wire, 2)[1] for diameter in (2.0, 8.0)]
    exact = crowding_of_two_wires(2 * pitch / wire)
    # what curvature leaves falls with the radius
    assert got == pytest.approx([exact, exact], rel=5e-5)
    assert abs(got[1] - exact) < abs(got[0] - exact)


def test_rings_converge_with_their_nodes():
    for pitch in (1.05e-3, 1.1e-3, 1.3e-3, 2e-3, 5e-3):
        for diameter, turns in ((0.02, 25), (0.05, 12), (0.1, 3)):
            got = rings.solenoid_rings(diameter, pitch, 1e-3, turns)
            fine = rings.solenoid_rings(diameter, pitch, 1e-3, turns, nodes=128)
            assert got[0] == pytest.approx(fine[0], rel=1e-5)
            assert got[1] == pytest.approx(fine[1], rel=1e-3)


@fixed
@given(WIDE)
def test_formulas_agree_within_their_stated_errors(shape):
    diameter, pitch, wire, turns = shape
    inductance, proximity = rings.solenoid_rings(*shape)
    uniform = rings.ring_sum(*shape)
    # Crowding moves the current inwards, no further than the inner edge of the wire; inductance goes with
    # the diameter's square at most.
    assert 1.0 < uniform / inductance < (diameter / (diameter - wire)) ** 2
    # Rosa's distances are those of straight wires side by side: curvature is left out, which is of the order
    # of the square of spacing over diameter and makes the mutual inductances high.
    assert 0.0 < coil_formulas.rosa_inductance(*shape) / uniform - 1.0 < 0.2 * (pitch / diameter) ** 2
    low, high = coil_checks.MEDHURST_ERROR
    medhurst = coil_checks.medhurst_proximity(turns * pitch / diameter, wire / pitch)
    assert 1 + low < medhurst / proximity < 1 + high


@fixed
@given(WIDE, st.floats(0.3, 3.0))
def test_inductance_scales_with_size(shape, scale):
    larger = *(scale * x for x in shape[:3]), shape[3]
    (one, phi), (other, phi_other) = rings.solenoid_rings(*shape), rings.solenoid_rings(*larger)
    assert other == pytest.approx(scale * one, rel=1e-9)
    assert phi_other == pytest.approx(phi, rel=1e-7)


@fixed
@given(WIDE, st.floats(2.0, 24.0))
def test_turns_and_back(shape, turns):
    diameter, pitch, wire, _ = shape
    made = Solenoid(former=diameter - wire, wire=wire, pitch=pitch, turns=turns)
    inductance = float(build_coil(made, None, None, 7.1e6).series(np.float64(7.1e6))[0])
    solved = build_coil(replace(made, turns=SOLVE), 7.1e6, lambda own: inductance, 7.1e6)
    assert solved.wound.turns == pytest.approx(turns, abs=1e-6)


def test_broken_turns_join_the_whole_ones():
    shape = 0.05, 2e-3, 1e-3
    turns = np.array([1.0, 1.5, 2.0, 2.999999, 3.0, 3.000001, 3.5, 4.0, 78.5, 80.0])
    solved = np.array([rings.solenoid_rings(*shape, n) for n in turns])
    assert np.all(np.diff(solved[:, 0]) > 0)
    np.testing.assert_allclose(solved[3], solved[4], rtol=2e-6)
    np.testing.assert_allclose(solved[5], solved[4], rtol=2e-6)


def test_coil_array_equals_scalar_one_by_one():
    wound = coils.winding(0.05, 2e-3, 1e-3, 12)
    frequency, rho = np.array([1.8e6, 7e6, 28e6]), np.array([[0.0], [COPPER.resistivity]])
    coil = coils.coil_at(wound, frequency, rho)
    for row in range(2):
        for column in range(3):
            one = coils.coil_at(wound, frequency[column], rho[row, 0])
            for name in ("frequency", "inductance", "resistance", "q"):
                assert getattr(one, name) == pytest.approx(getattr(coil, name)[row, column], rel=1e-12)


def test_perfect_coil_has_no_loss():
    coil = coils.coil_at(coils.winding(0.05, 2e-3, 1e-3, 12), 7e6, 0.0)
    assert coil.resistance == 0 and coil.q == np.inf
    assert coil.inductance == rings.solenoid_rings(0.05, 2e-3, 1e-3, 12)[0]


def test_self_capacitance_beyond_the_table_goes_on_rising():
    short, long = coil_formulas.CAPACITANCE_RANGE["length_over_diameter"]
    ratio = np.array([0.5 * short, short, long, 2 * long])
    h = coil_formulas.medhurst_capacitance(0.01, 0.01 * ratio)
    assert h[0] > h[1] and h[3] > h[2]


SHAPE = {"diameter": 0.05, "pitch": 2e-3, "wire_diameter": 1e-3, "turns": 10}


@pytest.mark.parametrize("solve", [rings.solenoid_rings, rings.ring_sum, coils.winding])
@pytest.mark.parametrize(
    "change",
    [
        {"diameter": 0.0},
        {"diameter": 1e-3},
        {"pitch": 1e-3},
        {"pitch": np.nan},
        {"wire_diameter": -1e-3},
        {"turns": 0.5},
        {"turns": 81},
        {"turns": np.nan},
    ],
)
def test_winding_refuses(solve, change):
    with pytest.raises(ValueError, match=rf"^{next(iter(change))} must be"):
        solve(**(SHAPE | change))


@pytest.mark.parametrize(
    ("call", "name"),
    [
        (lambda: rings.solenoid_rings(0.05, 2e-3, 1e-3, 10, nodes=7), "nodes"),
        (lambda: coils.self_capacitance_range(0.05, 0.0), "length"),
        (lambda: coils.wire_length(0.05, -1.0, 10), "pitch"),
        (lambda: coil_formulas.sheet_factor(np.nan, 1.0), "diameter"),
        (lambda: coil_formulas.sheet_inductance(1.0, 1.0, 0.0), "turns"),
        (lambda: coil_formulas.rosa_self_correction(0.0, 1.0), "pitch"),
        (lambda: coil_formulas.rosa_mutual_correction(0.5), "turns"),
    ],
)
def test_refuses(call, name):
    with pytest.raises(ValueError, match=rf"^{name} must be"):
        call()


@pytest.mark.parametrize("spacing", [{"pitch": 3.53e-3}, {"length": 0.0459}, {}])
def test_insulated_wire_lies_on_the_former_with_its_insulation(spacing):
    """By geometry: from a former of 32 mm, 0.1 mm of enamel and half a wire of 1.6 mm to the centre."""
    made = Solenoid(former=0.032, wire=1.6e-3, insulation=1e-4, turns=13.0, **spacing)
    wound = build_coil(made, None, None, 28e6).wound
    assert wound.diameter == pytest.approx(2 * (16e-3 + 0.1e-3 + 0.8e-3))
    assert wound.outer_diameter == pytest.approx(2 * (16e-3 + 0.1e-3 + 1.6e-3 + 0.1e-3))
