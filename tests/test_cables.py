"""Lines against scikit-rf and mpmath, an independent reference and published examples; types of cable."""

import mpmath
import numpy as np
import pytest
import skrf
from hypothesis import example, given, settings
from hypothesis import strategies as st
from scipy.constants import c as light

from tests.cases import published, reference
from trapdesk.engine import cable_types, cables
from trapdesk.engine.cable_list import CABLES
from trapdesk.engine.cables import DECIBELS, Line
from trapdesk.engine.reflection import dip_among_three, dip_of_squares, squared_reflection

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=60)


def number(pair):
    return complex(pair["re"], pair["im"])


def line_of(inputs):
    return Line(
        z0=inputs["z0_ohm"],
        velocity_factor=inputs["velocity_factor"],
        skin_loss=inputs["k1_db_per_100m_sqrt_mhz"] / 1e5,
        dielectric_loss=inputs["k2_db_per_100m_mhz"] / 1e8,
    )


def loss_at(line, frequency):
    return line.skin_loss * np.sqrt(frequency) + line.dielectric_loss * frequency


# Independent reference computation: tanh and cosh with a real line impedance, scikit-rf, the power ratio.
@pytest.mark.parametrize("case", reference("cables", "line-"))
def test_reference_line(case):
    inputs, expected, within = case["inputs"], case["expected"], case["tolerance"]
    line, frequency, z0 = line_of(inputs), inputs["f_hz"], inputs["z0_ohm"]
    gamma = loss_at(line, frequency) / DECIBELS + 2j * np.pi * frequency / line.velocity
    load = number(inputs["z_load_ohm"])
    got = cables.line_figures(gamma, z0, inputs["length_m"], load, z0, 100.0)
    assert abs(got.input_impedance / number(expected["z_in"]) - 1) < within["rel"]
    named = {
        "matched_loss_db": got.matched_loss,
        "total_loss_db": got.total_loss,
        "total_loss_formula_db": got.total_loss,
        "additional_loss_db": got.total_loss - got.matched_loss,
        "swr_load": got.swr_load,
        "swr_in": got.swr_input,
        "power_at_load_w_for_100w_in": got.power_load,
    }
    assert named == pytest.approx({name: expected[name] for name in named}, rel=within["rel"])
    for name, value in (("v_max", got.largest_voltage), ("i_max", got.largest_current)):
        name = f"{name}_rms_at_100w"
        assert value == pytest.approx(expected[name], rel=within[name]["rel"])


@pytest.mark.parametrize("case", published("scikit-rf-line-losses"))
def test_published_line(case):
    x = case["given"]
    gamma = x["loss"] / DECIBELS + 2j * np.pi * x["frequency"] / (x["velocity_factor"] * light)
    load = complex(x["load_real"], x["load_imag"])
    got = cables.line_figures(gamma, x["z0"], x["length"], load, x["z0"], x["power"])
    for name, value in case["expect"].items():
        assert getattr(got, name) == pytest.approx(value, abs=case["within"][name]), name


@pytest.mark.parametrize("case", published("stearns-2014"))
def test_published_complex_line(case):
    x, expect, within = case["given"], case["expect"], case["within"]
    # The document's own constants: a complex line impedance, the phase without loss.
    gamma = x["loss"] / DECIBELS + 2j * np.pi * x["frequency"] / (x["velocity_factor"] * light)
    load = complex(x["load_real"], x["load_imag"])
    got = cables.line_figures(gamma, complex(x["z0"], x["line_imag"]), x["length"], load, x["z0"])
    real = cables.line_figures(gamma, x["z0"], x["length"], load, x["z0"])
    assert got.total_loss == pytest.approx(expect["total_loss"], abs=within["total_loss"])
    assert real.total_loss == pytest.approx(expect["real_total_loss"], abs=within["real_total_loss"])
    assert got.input_impedance.real == pytest.approx(expect["input_real"], abs=within["input_real"])
    assert got.input_impedance.imag == pytest.approx(expect["input_imag"], abs=within["input_imag"])
    # Ours from the listed loss alone: the reactance appears by itself.
    line = cable_types.cable_line(CABLES["window line"])
    gamma, z = cables.propagation(line, x["frequency"])
    assert z.imag == pytest.approx(x["line_imag"], rel=1e-4)
    own = cables.line_figures(gamma, z, x["length"], load, x["z0"])
    assert own.total_loss == pytest.approx(expect["total_loss"], abs=within["total_loss"])


@pytest.mark.parametrize("case", published("pozar-chapter-2"))
def test_published_swr(case):
    x = case["given"]
    got = cables.swr(complex(x["load_real"], x["load_imag"]), x["reference"])
    assert got == pytest.approx(case["expect"], abs=case["within"])


RG58 = Line(z0=50.0, velocity_factor=0.66, skin_loss=1.4e-5, dielectric_loss=1.7e-10)
LOADS = {
    "short of 3 m into 5-j1000": (3.0, 5.0 - 1000.0j),
    "short, all but open": (0.4, 1e7 + 0.0j),
    "short, all but shorted": (0.4, 1e-3 + 0.0j),
    "long": (250.0, 200.0 + 300.0j),
    "millimetre": (1e-3, 20.0 - 5.0j),
    "matched": (20.0, 50.0 + 0.0j),
}


@pytest.mark.parametrize(("length", "load"), LOADS.values(), ids=LOADS)
@pytest.mark.parametrize("line", [RG58, Line(z0=402.75, velocity_factor=0.915, skin_loss=2.3e-6)])
def test_scikit_rf(line, length, load):
    frequency = np.array([1.8e6, 7.1e6, 29e6])
    w = 2 * np.pi * frequency
    resistance = 2 * line.skin_loss * np.sqrt(frequency) / DECIBELS * line.z0
    conductance = 2 * line.dielectric_loss * frequency / DECIBELS / line.z0
    ind, cap = line.z0 / (line.velocity_factor * light), 1 / (line.z0 * line.velocity_factor * light)
    media = skrf.media.DistributedCircuit(
        skrf.Frequency.from_f(frequency, unit="hz"), C=cap, L=ind, R=resistance, G=conductance
    )
    gamma, z = cables.propagation(line, frequency)
    np.testing.assert_allclose(gamma, media.gamma, rtol=1e-12)
    np.testing.assert_allclose(z, np.sqrt((resistance + 1j * w * ind) / (conductance + 1j * w * cap)), 1e-12)
    # a(bcd) matrix of the line, and the load at its end
    a = media.line(length, "m", z0=media.z0_characteristic).a
    exact = (a[:, 0, 0] * load + a[:, 0, 1]) / (a[:, 1, 0] * load + a[:, 1, 1])
    got = cables.transform(gamma, z, length, load)
    assert np.abs(got / exact - 1).max() < 1e-9
    if 1e-2 < abs(load) < 1e6:
        loss = skrf.tlineFunctions.zl_2_total_loss(z, load, gamma * length)
        got = cables.line_figures(gamma, z, length, load, 50.0)
        np.testing.assert_allclose(got.total_loss, 10 * np.log10(loss), rtol=1e-9, atol=1e-12)


def exact_figures(gamma, z, length, load):
    """Return input impedance and total loss in decibels, to fifty digits."""
    with mpmath.workdps(50):
        turn = mpmath.mpc(gamma) * mpmath.mpf(length)
        z, load = mpmath.mpc(z), mpmath.mpc(load)
        voltage = load * mpmath.cosh(turn) + z * mpmath.sinh(turn)
        current = mpmath.cosh(turn) + load / z * mpmath.sinh(turn)
        loss = 10 * mpmath.log10(mpmath.re(voltage * mpmath.conj(current)) / load.real)
        return complex(voltage / current), float(loss)


USE = {
    "z0": st.floats(25.0, 600.0),
    "decades": st.tuples(
        st.floats(5.3, 7.7), st.floats(-3.0, 2.5), st.floats(-6.5, -3.5), st.floats(-0.3, 3.3)
    ),
    "reactance": st.floats(-2000.0, 2000.0),
}


def drawn(z0, decades, reactance):
    frequency, length, skin, resistance = (10.0**x for x in decades)
    line = Line(z0=z0, velocity_factor=0.7, skin_loss=skin, dielectric_loss=1e-3 * skin**1.5)
    return (*cables.propagation(line, frequency), length, complex(resistance, reactance))


@fixed
@given(**USE)
@example(z0=50.0, decades=(7.7, 2.5, -3.5, 1.0), reactance=-300.0)  # more than 700 dB
def test_against_fifty_digits(z0, decades, reactance):
    gamma, z, length, load = drawn(z0, decades, reactance)
    got = cables.line_figures(gamma, z, length, load, z0)
    impedance, loss = exact_figures(gamma, z, length, load)
    assert abs(got.input_impedance / impedance - 1) < 1e-9
    assert got.total_loss == pytest.approx(loss, rel=1e-9, abs=1e-11)
    # r = matched fraction, a = matched loss: exact with a real line impedance, the handbook's formula
    real = cables.line_figures(gamma, z0, length, load, z0)
    a, r2 = 10 ** (real.matched_loss / 10), abs((load - z0) / (load + z0)) ** 2
    if a < 1e12:
        assert real.total_loss == pytest.approx(
            10 * np.log10((a * a - r2) / (a * (1 - r2))), rel=1e-8, abs=1e-11
        )


@fixed
@given(**USE)
def test_power_in_is_power_out_and_loss(z0, decades, reactance):
    gamma, z, length, load = drawn(z0, decades, reactance)
    got = cables.line_figures(gamma, z, length, load, z0, 100.0)
    # What the line itself takes, R' |I|^2 + G' |V|^2, summed along it with Gauss points.
    x, weight = np.polynomial.legendre.leggauss(20)
    pieces = int(np.ceil(abs(gamma) * length)) + 1
    edge = np.linspace(0.0, length, pieces + 1)
    x = (edge[:-1, None] + 0.5 * (edge[1] - edge[0]) * (x + 1)).ravel()
    weight = np.tile(0.5 * (edge[1] - edge[0]) * weight, pieces)
    current = np.sqrt(got.power_load / load.real)
    series, across = (gamma * z).real, (gamma / z).real
    forward, backward = 0.5 * (load + z) * np.exp(gamma * x), 0.5 * (load - z) * np.exp(-gamma * x)
    volts, amps = np.abs(current * (forward + backward)), np.abs(current / z * (forward - backward))
    lost = weight @ (series * amps**2 + across * volts**2)
    assert got.power_input == 100.0
    # The phases that are summed have run up to |gamma| length, and lost as many last digits.
    assert got.power_load + lost == pytest.approx(100.0, rel=1e-12 * (1.0 + pieces))
    assert got.largest_voltage >= volts.max() * (1 - 1e-9)
    assert got.largest_current >= amps.max() * (1 - 1e-9)


def test_largest_by_brute_force():
    random = np.random.default_rng(5)
    n = 60
    line = Line(
        z0=random.uniform(30, 600, n),
        velocity_factor=random.uniform(0.6, 1, n),
        skin_loss=10 ** random.uniform(-7, -3, n),
        dielectric_loss=10 ** random.uniform(-12, -9, n),
    )
    frequency, length = 10 ** random.uniform(5.5, 7.7, n), 10 ** random.uniform(-2, 2, n)
    load = 10 ** random.uniform(-0.5, 3, n) + 300j * random.normal(size=n)
    gamma, z = cables.propagation(line, frequency)
    got = cables.line_figures(gamma, z, length, load, 50.0, 100.0)
    x = length * np.linspace(0, 1, 20_001)[:, None]
    volts = np.abs(load * np.cosh(gamma * x) + z * np.sinh(gamma * x))
    amps = np.abs(np.cosh(gamma * x) + load / z * np.sinh(gamma * x))
    per_unit = np.sqrt(got.power_load / load.real)
    # A crest between samples rises by half the square of the phase missed.
    missed = 0.5 * (np.abs(gamma) * length / 20_000) ** 2 * np.maximum(got.swr_load, 1)
    for value, place, found in (
        (got.largest_voltage, got.voltage_at, per_unit * volts),
        (got.largest_current, got.current_at, per_unit * amps),
    ):
        assert np.all(value >= found.max(axis=0) * (1 - 1e-10))
        assert np.all(value <= found.max(axis=0) * (1 + missed + 1e-10))
        assert np.all((place >= 0) & (place <= length))
    at = np.abs(load * np.cosh(gamma * got.voltage_at) + z * np.sinh(gamma * got.voltage_at))
    np.testing.assert_allclose(got.largest_voltage, per_unit * at, rtol=1e-10)


@fixed
@given(**USE)
def test_load_behind_undoes_transform(z0, decades, reactance):
    gamma, z, length, load = drawn(z0, decades, reactance)
    length = min(length, 1.0 / gamma.real, 50.0 / gamma.imag)
    back = cables.load_behind(gamma, z, length, cables.transform(gamma, z, length, load))
    # In reflection: that is where a loss of 1 neper each way multiplies the rounding by e^2.
    assert abs((back - z) / (back + z) - (load - z) / (load + z)) < 1e-12


def test_zero_length_changes_nothing():
    gamma, z = cables.propagation(RG58, 7.1e6)
    loads = np.array([5 - 1000j, 50, 1e-6, 1e9 + 3j])
    np.testing.assert_allclose(cables.transform(gamma, z, 0.0, loads), loads, rtol=1e-15)
    got = cables.line_figures(gamma, z, 0.0, loads, 50.0, 10.0)
    np.testing.assert_allclose(got.total_loss, 0.0, atol=1e-11)
    np.testing.assert_allclose(got.power_load, 10.0, rtol=1e-11)
    np.testing.assert_allclose(got.largest_current, np.sqrt(10.0 / loads.real), rtol=1e-11)
    assert np.isinf(cables.transform(gamma, z, 0.0, np.inf))


def test_ends_open_and_shorted():
    gamma, z = cables.propagation(RG58, 7.1e6)
    turn = gamma * 3.0
    assert cables.transform(gamma, z, 3.0, np.inf) == pytest.approx(z / np.tanh(turn), rel=1e-14)
    assert cables.transform(gamma, z, 3.0, complex(np.inf, np.inf)) == cables.transform(gamma, z, 3.0, np.inf)
    assert cables.transform(gamma, z, 3.0, 0.0) == pytest.approx(z * np.tanh(turn), rel=1e-14)
    # A short open line is the capacitance of its cable, to the square of its loss tangent of 0.0012.
    tiny = cables.transform(gamma, z, 1e-3, np.inf)
    assert tiny.imag == pytest.approx(-1 / (2 * np.pi * 7.1e6 * RG58.capacitance * 1e-3), rel=2e-6)


def test_real_line_impedance_misleads_on_short_lines():
    # Independent reference computation of 3 m into 5-j1000 at 1.83 MHz, to a tenth: 4.7 dB, not 14.4.
    gamma, z = cables.propagation(RG58, 1.83e6)
    right = cables.line_figures(gamma, z, 3.0, 5 - 1000j, 50.0)
    wrong = cables.line_figures(gamma, 50.0, 3.0, 5 - 1000j, 50.0)
    assert right.total_loss == pytest.approx(4.7, abs=0.05)
    assert wrong.total_loss == pytest.approx(14.4, abs=0.05)


def test_low_loss_limits():
    line = Line(z0=50.0, velocity_factor=0.66)
    gamma, z = cables.propagation(line, 10e6)
    assert gamma.real == 0.0
    assert z == pytest.approx(50.0, rel=1e-15)
    assert gamma.imag == pytest.approx(2 * np.pi * 10e6 / (0.66 * light), rel=1e-14)
    gamma, _ = cables.propagation(RG58, 10e6)
    assert gamma.real * DECIBELS == pytest.approx(loss_at(RG58, 10e6), rel=1e-3)
    # half a wave repeats the load, a quarter inverts it
    half = light * 0.66 / 20e6
    assert cables.transform(2j * np.pi / (2 * half), 50.0, half, 30 + 7j) == pytest.approx(30 + 7j, rel=1e-13)
    inverted = cables.transform(2j * np.pi / (2 * half), 50.0, half / 2, 30 + 7j)
    assert inverted == pytest.approx(2500 / (30 + 7j), rel=1e-13)


def test_arrays_equal_scalars_one_by_one():
    frequency, load = np.array([1.8e6, 7e6, 29e6]), np.array([[20 + 30j], [500 - 800j]])
    line = Line(z0=50.0, velocity_factor=0.66, skin_loss=1e-5, dielectric_loss=1e-10)
    got = cables.line_figures(*cables.propagation(line, frequency), 12.0, load, 50.0, 100.0)
    for i, z in enumerate(load.ravel()):
        for k, f in enumerate(frequency):
            one = cables.line_figures(*cables.propagation(line, f), 12.0, z, 50.0, 100.0)
            for name in one.__dataclass_fields__:
                assert getattr(got, name)[i, k] == pytest.approx(getattr(one, name), rel=1e-12), name


def test_swr():
    # one over the other on a resistance; infinite where nothing is taken
    assert cables.swr([25.0, 100.0, 50.0], 50.0) == pytest.approx([2.0, 2.0, 1.0], rel=1e-15)
    assert np.isinf(cables.swr(80j, 50.0))
    # far from a match, where 1 - |r| has few digits left: R + X^2/R over Z0
    assert cables.swr(1e-3 + 4e4j, 50.0) == pytest.approx(1.6e12 / 50, rel=1e-5)


@fixed
@given(st.floats(0.0, 5.0), st.floats(0.0, 5.0), st.integers(1, 6))
def test_loss_constants_come_back(skin, dielectric, rows):
    if skin + dielectric < 1e-3 or (rows == 1 and skin < 1e-3):
        return
    if rows == 1:
        dielectric = 0.0
    frequency = np.geomspace(2e6, 900e6, rows)
    loss = 1e-5 * skin * np.sqrt(frequency) + 1e-9 * dielectric * frequency
    got = cable_types.loss_constants(frequency, loss)
    assert got[0] == pytest.approx(1e-5 * skin, rel=1e-9, abs=1e-14)
    assert got[1] == pytest.approx(1e-9 * dielectric, rel=1e-9, abs=1e-18)


def test_loss_constants_stay_positive():
    # a little flatter than the root, a little steeper than proportion: one kind takes it all
    skin, dielectric = cable_types.loss_constants([10e6, 100e6], [0.1, 0.1 * 10**0.45])
    assert skin > 0 and dielectric == 0
    skin, dielectric = cable_types.loss_constants([10e6, 100e6], [0.1, 0.1 * 10**1.05])
    assert skin == 0 and dielectric > 0


@pytest.mark.parametrize(
    ("frequency", "loss", "words"),
    [
        ([10e6, 100e6], [0.2, 0.1], "loss must rise"),
        ([10e6, 100e6], [0.1, 0.1], "loss must rise"),
        ([10e6, 100e6], [0.1, 2.0], "loss must rise"),
        ([10e6, 50e6, 100e6], [0.1, 0.9, 0.4], "50 MHz"),
        ([10e6, 10e6], [0.1, 0.1], "frequency must have two"),
        ([10e6, 100e6], [0.1], "loss must be as many"),
        ([10e6, 100e6], [0.1, -0.2], "loss must be finite and above"),
        ([0.0, 100e6], [0.1, 0.2], "frequency must be finite"),
        ([10e6, np.nan], [0.1, 0.2], "frequency must be finite"),
    ],
)
def test_loss_constants_refuse(frequency, loss, words):
    with pytest.raises(ValueError, match=words):
        cable_types.loss_constants(frequency, loss)


@pytest.mark.parametrize("case", published("cable-listing"))
def test_published_listing(case):
    cable = CABLES[case["given"]["cable"]]
    line = cable_types.cable_line(cable)
    if case["formula"] == "capacitance":
        assert cable.capacitance == case["expect"]
        got = line.capacitance
    else:
        frequency = case["given"]["frequency"]
        assert dict(cable.losses)[frequency] == pytest.approx(case["expect"], rel=1e-12)
        got = loss_at(line, frequency)
    assert got == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("case", published("harden-cable-sheet"))
def test_published_capacitance(case):
    line = cable_types.cable_line(CABLES[case["given"]["cable"]])
    assert line.capacitance == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("case", published("lux-2004"))
def test_published_largest_loss(case):
    # A typical cable stays below what its specification allows, and not by so much that a unit slipped.
    line = cable_types.cable_line(CABLES[case["given"]["cable"]])
    assert 0.5 * case["expect"] < loss_at(line, case["given"]["frequency"]) < case["expect"]


def test_capacitance_by_hand():
    # 1 / (velocity factor, speed of light, impedance), worked out apart: 101.080, 67.387, 95.990, 81.357 pF/m
    for z0, factor, expect in (
        (50, 0.66, 101.080),
        (75, 0.66, 67.387),
        (50, 0.695, 95.990),
        (50, 0.82, 81.357),
    ):
        assert Line(z0=z0, velocity_factor=factor).capacitance == pytest.approx(1e-12 * expect, abs=1e-15)


def test_listed_sections_make_the_listed_impedance():
    # Field of a line charge between cylinders: 60 ohm/sqrt(eps_r) ln(D/d), which makes the examples of
    # blake-chapter-14 in print; a conductor of strands acts like a solid one of 0.94 of the circle around it.
    def coaxial(inner, outer, permittivity):
        return 376.730 / (2 * np.pi) / np.sqrt(permittivity) * np.log(outer / inner)

    for case in published("blake-chapter-14"):
        example = case.values[0]
        assert coaxial(**example["given"]) == pytest.approx(example["expect"], abs=example["within"])
    looked_at = 0
    for cable in CABLES.values():
        if cable.inner is not None and cable.dielectric is not None:
            low, high = (
                coaxial(share * cable.inner, cable.dielectric, cable.velocity_factor**-2)
                for share in (1.0, 0.94)
            )
            # Sold as 50 +- 2 ohm (common practice, no source), sizes listed to a few hundredths: 5 % in all.
            assert 0.95 * low < cable.z0 < 1.05 * high, cable.name
            looked_at += 1
    assert looked_at > 3


@pytest.mark.parametrize("name", CABLES)
def test_types_are_whole(name):
    cable = CABLES[name]
    assert cable.name and cable.source and cable.note
    assert 20 < cable.z0 < 600 and 0.6 < cable.velocity_factor < 1
    sizes = [cable.inner, cable.dielectric, cable.shield, cable.outside]
    if cable.outside is not None:
        assert sizes == sorted(sizes) and len(set(sizes)) == 4
    line = cable_types.cable_line(cable)
    assert line.skin_loss > 0 and line.dielectric_loss >= 0
    assert cable.working_voltage is None or cable.working_voltage < cable.listed_voltage


GAMMA, Z = cables.propagation(RG58, 7.1e6)


@pytest.mark.parametrize(
    ("call", "name"),
    [
        (lambda: cables.propagation(RG58, 0.0), "frequency"),
        (lambda: cables.propagation(Line(z0=-50.0, velocity_factor=0.66), 1e6), "z0"),
        (lambda: cables.propagation(Line(z0=50.0, velocity_factor=1.01), 1e6), "velocity_factor"),
        (lambda: cables.propagation(Line(z0=50.0, velocity_factor=np.nan), 1e6), "velocity_factor"),
        (lambda: cables.propagation(Line(z0=50.0, velocity_factor=0.7, skin_loss=-1.0), 1e6), "skin_loss"),
        (
            lambda: cables.propagation(Line(z0=50.0, velocity_factor=0.7, dielectric_loss=np.nan), 1e6),
            "dielectric_loss",
        ),
        (lambda: cables.transform(-1.0, 50.0, 1.0, 50.0), "propagation_constant"),
        (lambda: cables.transform(GAMMA, -50.0, 1.0, 50.0), "line_impedance"),
        (lambda: cables.transform(GAMMA, Z, -1.0, 50.0), "length"),
        (lambda: cables.transform(GAMMA, Z, 1.0, np.nan), "load"),
        (lambda: cables.load_behind(GAMMA, Z, 1.0, np.nan), "impedance"),
        (lambda: cables.line_figures(GAMMA, Z, 1.0, np.inf, 50.0), "load"),
        (lambda: cables.line_figures(GAMMA, Z, 1.0, -5.0, 50.0), "load"),
        (lambda: cables.line_figures(GAMMA, Z, 1.0, 50.0, 0.0), "reference"),
        (lambda: cables.line_figures(GAMMA, Z, 1.0, 50.0, 50.0, -1.0), "power"),
        (lambda: cables.swr(-5.0, 50.0), "impedance"),
        (lambda: cables.swr(50.0, 0.0), "reference"),
    ],
)
def test_refuses(call, name):
    with pytest.raises(ValueError, match=rf"^{name} must be"):
        call()


def test_dip_among_three_is_that_of_a_finer_look():
    # A series resonator: its SWR has a corner where it meets 50 ohm, a round dip where it does not.
    resistance = np.array([50.0, 40.0, 90.0])[:, None]
    centre = 7.1e6 + np.array([2e3, -3e3, 4e3])[:, None]

    def ratio(f):
        return cables.swr(resistance + 2e-5j * 2 * np.pi * (f - centre), 50.0)

    f = np.broadcast_to(7.1e6 + 10e3 * np.array([-1.0, 0.0, 1.0]), (3, 3))
    found = dip_among_three(f, ratio(f))
    fine = np.broadcast_to(np.linspace(7.09e6, 7.11e6, 200_001), (3, 200_001))
    best = fine[0, np.argmin(ratio(fine), axis=1)]
    assert found == pytest.approx(best, abs=20.0)
    assert found == pytest.approx([dip_among_three(*row) for row in zip(f, ratio(f), strict=True)], rel=0)
    assert dip_among_three(f[0], [2.0, 2.0, 2.0]) == f[0, 1]


def test_dip_of_squares_is_the_vertex():
    # Any parabola 0.1 + c (f - f0)^2 is met exactly by points of any spacing, inside them or outside.
    f = np.array([7.0, 7.03, 7.1])
    for vertex in (7.01, 7.06, 7.12, 6.95):
        at, least = dip_of_squares(tuple(f), tuple(0.1 + 3.0 * (f - vertex) ** 2), beyond=1.0)
        assert (at, least) == pytest.approx((vertex, 0.1), rel=1e-9)
        held = dip_of_squares(tuple(f), tuple(0.1 + 3.0 * (f - vertex) ** 2))
        inside = np.clip(vertex, 7.0, 7.1)
        assert held == pytest.approx((inside, 0.1 + 3.0 * (inside - vertex) ** 2), rel=1e-9)
    # What bends down or not at all is least at an end.
    assert dip_of_squares(tuple(f), (0.3, 0.4, 0.2))[0] == 7.1
    assert dip_of_squares(tuple(f), (0.2, 0.4, 0.3))[0] == 7.0
    assert squared_reflection([1.0, 3.0]) == pytest.approx([0.0, 0.25], rel=1e-15)
