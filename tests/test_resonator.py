"""The resonator, its stress and its inverse against references, published values and other methods."""

import json
import tomllib
from itertools import combinations
from pathlib import Path

import mpmath
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import linprog, minimize_scalar

from trapdesk.engine import resonances, resonator, tank
from trapdesk.engine.stress import stress, stress_of_branches
from trapdesk.services.bench import tank as service

HERE = Path(__file__).parent
# Independent reference computation: 40-digit roots of the rational function (mpmath) and searches on the
# complex impedance (scipy); the inverse by a rank test in logarithms; powers by two sums.
REFERENCE = json.loads((HERE / "reference" / "resonator.json").read_text("utf-8"))["cases"]
LETTERS = {
    "f0_hz": "f",
    "l_h": "L",
    "c_f": "C",
    "r_series_ohm": "R",
    "r_d_ohm": "RD",
    "q": "Q",
    "bw_hz": "B",
}
PUBLISHED = (
    "buxton-1992",
    "cebik-trap-modeling",
    "covington-1990",
    "helfrick-cooper",
    "roddy-coolen",
    "scilab-companion-2210",
)
fixed = settings(derandomize=True, deadline=None, database=None, max_examples=60)


def reference(prefix, *, without=()):
    return [
        pytest.param(case, id=case["id"])
        for case in REFERENCE
        if case["id"].startswith(prefix) and not case["id"].startswith(tuple(without) or "-")
    ]


def parts_of(inputs):
    shunt = inputs.get("r_shunt_ohm")
    losses = (inputs["r_coil_series_ohm"], inputs.get("r_cap_esr_ohm") or 0.0)
    return inputs["l_h"], inputs["c_f"], *losses, np.inf if shunt is None else shunt


@pytest.mark.parametrize("case", reference("res-", without=["res-nofr"]))
def test_reference_resonances(case):
    parts, expected = parts_of(case["inputs"]), case["expected"]
    z_lc = resonator.impedance(expected["f_lc_hz"], *parts)
    low, high = resonances.half_power_frequencies(*parts)
    q = resonances.qualities(*parts)
    got = {
        "f_lc_hz": resonator.lc_resonance(*parts[:2]),
        "f_upf_hz": resonances.unity_power_factor_resonance(*parts[:4]),
        "f_zmax_hz": resonances.peak_resonance(*parts),
        "z_max_ohm": resonances.peak_impedance(*parts),
        "z_at_f_lc_re_ohm": z_lc.real,
        "r_at_upf_ohm": resonances.dynamic_resistance(*parts),
        "rd_highq_ohm": resonances.dynamic_resistance_high_q(*parts),
        "q_from_components": q.components,
        "f_3db_lo_hz": low,
        "f_3db_hi_hz": high,
        "bw_3db_hz": resonances.bandwidth(*parts),
        "q_from_3db": q.half_power,
        "q_from_zmax": q.peak,
    }
    within = case["tolerance"]["rel"]
    assert got == pytest.approx({name: expected[name] for name in got}, rel=within)
    # A reactance of rounding size is held against |Z|.
    assert z_lc.imag == pytest.approx(expected["z_at_f_lc_im_ohm"], rel=within, abs=within * abs(z_lc))
    if "r_at_upf_closed_form_ohm" in expected:
        assert got["r_at_upf_ohm"] == pytest.approx(expected["r_at_upf_closed_form_ohm"], rel=within)
    signs = np.sign(resonator.impedance(np.array([0.5, 2.0]) * expected["f_lc_hz"], *parts).imag)
    words = {1.0: "inductive", -1.0: "capacitive"}
    assert [words[sign] for sign in signs] == [expected["sign_below_f0"], expected["sign_above_f0"]]


@pytest.mark.parametrize("case", reference("res-", without=["res-nofr"]))
def test_reference_impedance(case):
    points, within = case["expected"]["z_of_f"], case["tolerance"]["rel"]
    z = resonator.impedance([p["f_hz"] for p in points], *parts_of(case["inputs"]))
    for got, point in zip(z, points, strict=True):
        expected = complex(point["re_ohm"], point["im_ohm"])
        assert got.real == pytest.approx(expected.real, rel=within)
        assert got.imag == pytest.approx(expected.imag, rel=within, abs=within * abs(expected))


@pytest.mark.parametrize("case", reference("res-nofr"))
def test_reference_no_unity_power_factor(case):
    parts = parts_of(case["inputs"])
    assert case["expected"]["f_upf_hz"] is None
    assert np.isnan(resonances.unity_power_factor_resonance(*parts[:4]))
    assert np.isnan(resonances.dynamic_resistance(*parts))
    assert resonances.unity_power_factor_status(*parts[:4]) == resonances.UnityPowerFactor.NONE


@pytest.mark.parametrize("case", reference("pow-"))
def test_reference_stress(case):
    inputs, expected = case["inputs"], case["expected"]
    got = stress(
        inputs["f_hz"], *parts_of(inputs), current=inputs["i_trap_rms_a"], voltage=inputs["v_trap_rms_v"]
    )
    named = {
        "v_rms_v": got.voltage,
        "v_peak_v": got.peak_voltage,
        "i_total_rms_a": got.line_current,
        "i_coil_rms_a": got.coil_current,
        "i_cap_rms_a": got.capacitor_current,
        "p_dissipated_w": got.total_power,
        "q_reactive_cap_va": got.capacitor_reactive,
    }
    within = case["tolerance"]["rel"]
    assert named == pytest.approx({name: expected[name] for name in named}, rel=within)
    z = resonator.impedance(inputs["f_hz"], *parts_of(inputs))
    assert z == pytest.approx(complex(expected["z_trap"]["re"], expected["z_trap"]["im"]), rel=within)


@pytest.mark.parametrize("case", reference("inv-"))
def test_reference_inverse(case):
    expected = case["expected"]
    got = tank.solve_tank({LETTERS[name]: value for name, value in case["inputs"].items()})
    determined = expected["values"] if "values" in expected else expected["determined"]
    assert got.status == expected["status"]
    within = case["tolerance"]["rel"]
    assert got.values == pytest.approx({LETTERS[name]: v for name, v in determined.items()}, rel=within)
    if "max_log_residual" in expected:
        # Consistent cases have a residual of rounding size only.
        assert got.max_log_residual == pytest.approx(expected["max_log_residual"], rel=within, abs=1e-12)


def published():
    for key in PUBLISHED:
        document = tomllib.loads((HERE / "published" / f"{key}.toml").read_text("utf-8"))
        assert document["source"] == key
        for case in document["case"]:
            yield pytest.param(case, id=f"{key}: {case['id']}")


@pytest.mark.parametrize("case", list(published()))
def test_published(case):
    values = case["given"]
    if case["formula"] == "solve_tank":
        got = tank.solve_tank(values).values[case["want"]]
    elif case["formula"] == "lc_resonance":
        got = resonator.lc_resonance(**values)
    else:
        z = resonator.impedance(**values)
        got = z.imag / z.real if "apparent Q" in case["id"] else z.imag / (2 * np.pi * values["frequency"])
    assert got == pytest.approx(case["expect"], abs=case["within"], rel=0.0)


def logarithmic(low, high):
    return st.floats(np.log(low), np.log(high)).map(lambda x: float(np.exp(x)))


@st.composite
def circuits(draw, largest_loss=2.0):
    """Coil Q from 0.5 to 10 000, capacitor and shunt lossless or as lossy as the coil."""
    l, c = draw(logarithmic(1e-8, 1e-3)), draw(logarithmic(1e-13, 1e-8))  # noqa: E741 - as in the formulas
    rho = np.sqrt(l / c)
    r = rho * draw(logarithmic(1e-4, largest_loss))
    r_c = rho * draw(st.just(0.0) | logarithmic(1e-6, largest_loss))
    r_p = rho / draw(st.just(0.0) | logarithmic(1e-6, largest_loss)) if draw(st.booleans()) else np.inf
    return l, c, r, r_c, r_p


@pytest.fixture(autouse=True)
def _divisions_by_a_drawn_zero():
    with np.errstate(divide="ignore"):
        yield


def plain_impedance(f, l, c, r, r_c, r_p):  # noqa: E741 - as in the formulas
    """Return Z by adding the branches' admittances in complex arithmetic."""
    w = 2.0 * np.pi * f
    return 1.0 / (1.0 / (r + 1j * w * l) + 1.0 / (r_c + 1.0 / (1j * w * c)) + 1.0 / r_p)


@fixed
@given(circuits(), logarithmic(0.05, 20.0))
def test_impedance_is_branches_added(parts, ratio):
    f = ratio * resonator.lc_resonance(*parts[:2])
    q = resonances.qualities(*parts).components
    # Near resonance the plain sum cancels: its rounding grows with Q.
    assert resonator.impedance(f, *parts) == pytest.approx(
        plain_impedance(f, *parts), rel=1e-13 * max(q, 1.0)
    )


@fixed
@given(circuits())
def test_peak_by_search(parts):
    f0 = resonator.lc_resonance(*parts[:2])
    grid = f0 * np.geomspace(1e-3, 1e3, 3001)
    values = np.abs(plain_impedance(grid, *parts))
    f, z = resonances.peak_resonance(*parts), resonances.peak_impedance(*parts)
    if np.isnan(f):
        assert np.isnan(z)
        assert max(values[0], values[-1]) >= values.max() * (1.0 - 1e-12)
        return
    assert values.max() <= z * (1.0 + 1e-11)
    # Searched as an offset: the search resolves its unknown to 1.5e-8 of it, and Q multiplies that.
    found = minimize_scalar(
        lambda x: -abs(plain_impedance(f * (1.0 + x), *parts)),
        bounds=(-0.01, 0.01),
        method="bounded",
        options={"xatol": 1e-13, "maxiter": 500},
    )
    assert z == pytest.approx(-found.fun, rel=1e-11)
    assert z == pytest.approx(abs(plain_impedance(f, *parts)), rel=1e-11)


def exact_square(l, c, r, r_c, r_p):  # noqa: E741 - as in the formulas
    """Return 1/|Z|^2 as a function of ln f with 40 digits."""
    l, c, r, r_c, r_p = (mpmath.mpf(float(x)) for x in (l, c, r, r_c, r_p))  # noqa: E741

    def square(log_f):
        w = 2 * mpmath.pi * mpmath.exp(log_f)
        y = 1 / mpmath.mpc(r, w * l) + 1 / mpmath.mpc(r_c, -1 / (w * c)) + 1 / r_p
        return y.real**2 + y.imag**2

    return square


@settings(fixed, max_examples=25)
@given(circuits(largest_loss=0.8))
def test_peak_and_width_in_forty_digits(parts):
    got = resonances.peak_resonance(*parts)
    low, high = resonances.half_power_frequencies(*parts)
    width = resonances.bandwidth(*parts)
    with mpmath.workdps(40):
        square = exact_square(*parts)
        if np.isnan(got):
            return
        step = mpmath.mpf(10) ** -3 / resonances.qualities(*parts).components
        at = mpmath.log(float(got))
        peak = mpmath.findroot(lambda x: mpmath.diff(square, x), (at, at + step), tol=1e-40, verify=False)
        assert got == pytest.approx(float(mpmath.exp(peak)), rel=1e-12)
        half = 2 * square(peak)
        edges = []
        for edge in (low, high):
            if not np.isnan(edge):
                at = mpmath.log(float(edge))
                near = (at - step / 10, at + step / 10)
                root = mpmath.findroot(lambda x: square(x) / half - 1, near, solver="anderson", tol=1e-35)
                edges.append(mpmath.exp(root))
                assert edge == pytest.approx(float(edges[-1]), rel=1e-11)
        assert np.isnan(width) == (len(edges) < 2)
        if len(edges) == 2:
            assert width == pytest.approx(float(edges[1] - edges[0]), rel=1e-11)


@pytest.mark.parametrize("q", [0.6, 0.7, 1.0, 10.0, 1e4])
def test_width_at_extreme_q(q):
    # Loss half in the coil, half in the capacitor: symmetric, so the peak is at LC and has a closed value.
    l, c = 2e-6, 5e-11  # noqa: E741 - as in the formulas
    half = np.sqrt(l / c) / q / 2.0
    parts = (l, c, half, half)
    assert resonances.peak_resonance(*parts) == pytest.approx(resonator.lc_resonance(l, c), rel=1e-14)
    assert resonances.peak_impedance(*parts) == pytest.approx((l / c + half**2) / (2.0 * half), rel=1e-14)
    low, high = resonances.half_power_frequencies(*parts)
    if not np.isnan(low):
        assert low * high == pytest.approx(resonator.lc_resonance(l, c) ** 2, rel=1e-13)
        assert resonances.bandwidth(*parts) == pytest.approx(high - low, rel=1e-15 * max(q, 10.0) * 10)
    assert np.isnan(low) == np.isnan(high) == (q < 0.65)


@fixed
@given(circuits())
def test_half_power_points_lie_on_the_curve(parts):
    z = resonances.peak_impedance(*parts)
    for f in resonances.half_power_frequencies(*parts):
        if not np.isnan(f):
            q = max(1.0, resonances.qualities(*parts).components)
            assert abs(resonator.impedance(f, *parts)) == pytest.approx(
                z / np.sqrt(2.0), rel=1e-13 * q + 1e-11
            )


@fixed
@given(circuits())
def test_missing_half_power_point_has_no_value_that_low(parts):
    z, f = resonances.peak_impedance(*parts), resonances.peak_resonance(*parts)
    low, high = resonances.half_power_frequencies(*parts)
    if np.isnan(low) and not np.isnan(f):
        assert abs(resonator.impedance(1e-4 * f, *parts)) >= z / np.sqrt(2.0) * (1.0 - 1e-6)
    if np.isnan(high) and not np.isnan(f):
        assert abs(resonator.impedance(1e4 * f, *parts)) >= z / np.sqrt(2.0) * (1.0 - 1e-6)


@fixed
@given(circuits())
def test_unity_power_factor(parts):
    f = resonances.unity_power_factor_resonance(*parts[:4])
    status = resonances.unity_power_factor_status(*parts[:4])
    assert np.isnan(f) == (status != resonances.UnityPowerFactor.ONE)
    if status == resonances.UnityPowerFactor.ONE:
        z = plain_impedance(f, *parts)
        assert resonances.dynamic_resistance(*parts) == pytest.approx(z.real, rel=1e-9)
        assert abs(z.imag) <= 1e-9 * abs(z)
    elif status == resonances.UnityPowerFactor.EVERY:
        z = plain_impedance(f0_grid(parts), *parts)
        assert np.all(np.abs(z.imag) <= 1e-13 * np.abs(z))
    else:
        signs = np.sign(plain_impedance(f0_grid(parts), *parts).imag)
        assert abs(signs.sum()) == signs.size


def f0_grid(parts):
    return resonator.lc_resonance(*parts[:2]) * np.geomspace(1e-2, 1e2, 41)


def test_resistive_at_every_frequency():
    # r = r_c = sqrt(l/c) makes the impedance that resistance throughout.
    parts = (1e-6, 4e-10, 50.0, 50.0)
    assert resonances.unity_power_factor_status(*parts) == resonances.UnityPowerFactor.EVERY
    assert np.isnan(resonances.unity_power_factor_resonance(*parts))
    assert resonances.dynamic_resistance(*parts) == pytest.approx(50.0, rel=1e-14)
    f = np.geomspace(1e3, 1e9, 7)
    assert resonator.impedance(f, *parts) == pytest.approx(np.full(7, 50.0 + 0j), rel=1e-12)


def test_lossless():
    parts = (1.0, 1.0, 0.0)
    f0 = 1.0 / (2.0 * np.pi)
    assert resonator.impedance(f0, *parts) == complex(np.inf, 0.0)
    # jX with X = w l/(1 - w^2 l c), no resistance.
    assert resonator.impedance([0.5 * f0, 2.0 * f0], *parts) == pytest.approx([2j / 3, -2j / 3], rel=1e-14)
    assert resonances.peak_impedance(*parts) == np.inf
    assert resonances.half_power_frequencies(*parts) == (pytest.approx(f0), pytest.approx(f0))
    assert resonances.bandwidth(*parts) == 0.0
    q = resonances.qualities(*parts)
    assert (q.components, q.dynamic, q.half_power, q.peak) == (np.inf,) * 4
    driven = stress(f0, *parts, current=1.0)
    assert driven.voltage == np.inf and driven.total_power == 0.0
    held = stress(f0, *parts, voltage=3.0)
    assert held.line_current == 0.0
    assert held.circulating_current == pytest.approx(3.0, rel=1e-15)
    assert stress(f0, *parts, current=0.0).voltage == 0.0


@fixed
@given(circuits(), logarithmic(0.1, 10.0), logarithmic(1e-3, 10.0))
def test_watts_add_up(parts, ratio, current):
    f = ratio * resonator.lc_resonance(*parts[:2])
    got = stress(f, *parts, current=current)
    z = plain_impedance(f, *parts)
    rounding = 1e-12 * max(resonances.qualities(*parts).components, 1.0)
    assert got.total_power == pytest.approx(z.real * current**2, rel=rounding + 1e-10)
    reactive = got.coil_reactive - got.capacitor_reactive
    scale = max(got.coil_reactive, got.capacitor_reactive)
    assert reactive == pytest.approx(z.imag * current**2, rel=0.0, abs=(rounding + 1e-11) * scale)
    back = stress(f, *parts, voltage=got.voltage)
    assert back.line_current == pytest.approx(current, rel=1e-13)
    assert back.coil_power == pytest.approx(got.coil_power, rel=1e-13)


@fixed
@given(circuits(), logarithmic(0.1, 10.0), logarithmic(1e-3, 10.0))
def test_branches_of_plain_parts_are_the_resonator(parts, ratio, current):
    inductance, capacitance, r, r_c, _ = parts
    f = ratio * resonator.lc_resonance(inductance, capacitance)
    w = 2.0 * np.pi * f
    coil, capacitor = r + 1j * w * inductance, r_c + 1.0 / (1j * w * capacitance)
    # What branches lose to rounding where they nearly cancel: up to Q times that of one of them.
    q = max(resonances.qualities(inductance, capacitance, r, r_c).components, 1.0)
    assume(q < 1e9)
    within = 1e-12 + 1e-15 * q
    plain = resonator.impedance(f, inductance, capacitance, r, r_c)
    assert abs(resonator.impedance_of_branches(coil, capacitor) / plain - 1.0) < within
    got = stress_of_branches(current, coil, capacitor)
    expected = stress(f, inductance, capacitance, r, r_c, current=current)
    for name, value in vars(expected).items():
        assert getattr(got, name) == pytest.approx(value, rel=2.0 * within), name


def test_branches_array_equals_scalar():
    # (steps, 1) capacitors, one of them with a resistance below 0 by rounding, across (frequencies,) coils.
    coil = np.array([1.0 + 200j, 2.0 + 400j, 3.0 + 800j])
    capacitor = np.array([[0.1 - 300j], [-1e-18 - 500j]])
    z = resonator.impedance_of_branches(coil, capacitor)
    many = stress_of_branches(np.array([1.0, 2.0, 0.0]), coil, capacitor)
    for at in np.ndindex(2, 3):
        assert z[at] == resonator.impedance_of_branches(coil[at[1]], capacitor[at[0], 0])
        one = stress_of_branches([1.0, 2.0, 0.0][at[1]], coil[at[1]], capacitor[at[0], 0])
        for name, value in vars(one).items():
            assert getattr(many, name)[at] == value, name
    assert np.all(many.capacitor_power >= 0.0) and np.all(many.voltage[:, 2] == 0.0)
    with pytest.raises(ValueError, match="current must be"):
        stress_of_branches(-1.0, coil, capacitor)


@fixed
@given(logarithmic(1e6, 1e8), logarithmic(1e-13, 1e-3))
def test_partner_resonates_there(frequency, value):
    other = resonator.partner(frequency, value)
    assert resonator.lc_resonance(value, other) == pytest.approx(frequency, rel=1e-14)
    assert resonator.partner(frequency, other) == pytest.approx(value, rel=1e-14)
    assert resonator.partner([frequency, 2.0 * frequency], value) == pytest.approx(
        [other, other / 4.0], rel=1e-14
    )
    with pytest.raises(ValueError, match="value must be"):
        resonator.partner(frequency, -value)


def test_circulating_current_is_q_times_line_current():
    parts = (5e-6, 1e-10, 0.5)
    q = resonances.qualities(*parts).components
    got = stress(resonances.unity_power_factor_resonance(*parts), *parts, current=0.2)
    # At unity power factor |I_C| = w C R_D I = Q sqrt(1 - 1/Q^2) I.
    assert got.circulating_current == pytest.approx(0.2 * np.sqrt(q**2 - 1.0), rel=1e-12)


SHAPES = {
    "l": np.array([[2e-6], [5e-6], [9e-6]]),
    "c": np.array([40e-12, 60e-12, 80e-12, 99e-12]),
    "r": np.array([[0.5], [3.0], [400.0]]),
    "r_c": np.array([0.0, 0.1, 20.0, 500.0]),
    "r_p": np.array([[np.inf], [1e5], [300.0]]),
}


def flat(value):
    if isinstance(value, tuple):
        return value
    return tuple(vars(value).values()) if hasattr(value, "__dict__") else (value,)


@pytest.mark.parametrize(
    ("function", "count", "swept"),
    [
        (resonator.impedance, 5, True),
        (resonator.lc_resonance, 2, False),
        (resonances.unity_power_factor_resonance, 4, False),
        (resonances.unity_power_factor_status, 4, False),
        (resonances.peak_resonance, 5, False),
        (resonances.peak_impedance, 5, False),
        (resonances.half_power_frequencies, 5, False),
        (resonances.bandwidth, 5, False),
        (resonances.dynamic_resistance, 5, False),
        (resonances.dynamic_resistance_high_q, 5, False),
        (resonances.qualities, 5, False),
        (lambda *x: stress(*x, current=np.array([1.0, 2.0, 3.0, 4.0])), 5, True),
    ],
)
def test_array_equals_scalar(function, count, swept):
    arguments = ([np.array([3e6, 7e6, 10e6, 14e6])] if swept else []) + list(SHAPES.values())[:count]
    whole = flat(function(*arguments))
    spread = np.broadcast_arrays(*arguments)
    for at in np.ndindex(3, 4):
        single = [x[at] for x in spread]
        if function.__name__ == "<lambda>":
            one = flat(stress(*single, current=float(at[1] + 1)))
        else:
            one = flat(function(*single))
        for many, alone in zip(whole, one, strict=True):
            assert np.shape(many) == (3, 4)
            assert np.array_equal(many[at], alone, equal_nan=np.asarray(many).dtype.kind != "U")


def test_loss_that_varies_with_frequency():
    f = np.array([3e6, 7e6, 14e6])
    r = 0.5 * np.sqrt(f / 3e6)
    swept = resonator.impedance(f, 5e-6, 6e-11, r)
    assert swept == pytest.approx(plain_impedance(f, 5e-6, 6e-11, r, 0.0, np.inf), rel=1e-12)


@pytest.mark.parametrize("wrong", [0.0, -1.0, np.nan, np.inf])
@pytest.mark.parametrize("name", ["frequency", "inductance", "capacitance"])
def test_refuses(name, wrong):
    good = {"frequency": 7e6, "inductance": 5e-6, "capacitance": 6e-11, "coil_resistance": 1.0}
    with pytest.raises(ValueError, match=f"{name} must be"):
        resonator.impedance(**good | {name: [good[name], wrong]})
    if name != "frequency":
        del good["frequency"]
        with pytest.raises(ValueError, match=f"{name} must be"):
            resonances.peak_resonance(**good | {name: wrong})


@pytest.mark.parametrize(
    ("name", "wrong"),
    [
        ("coil_resistance", -1e-9),
        ("coil_resistance", np.nan),
        ("coil_resistance", np.inf),
        ("capacitor_resistance", -1.0),
        ("capacitor_resistance", np.nan),
        ("shunt_resistance", 0.0),
        ("shunt_resistance", np.nan),
    ],
)
def test_refuses_losses(name, wrong):
    good = {"inductance": 5e-6, "capacitance": 6e-11, "coil_resistance": 1.0}
    with pytest.raises(ValueError, match=f"{name} must be"):
        resonator.impedance(7e6, **good | {name: wrong})
    with pytest.raises(ValueError, match=f"{name} must be"):
        resonances.bandwidth(**good | {name: wrong})


def test_stress_refuses():
    parts = (7e6, 5e-6, 6e-11, 1.0)
    with pytest.raises(ValueError, match="either current or voltage"):
        stress(*parts)
    with pytest.raises(ValueError, match="either current or voltage"):
        stress(*parts, current=1.0, voltage=1.0)
    with pytest.raises(ValueError, match="current must be"):
        stress(*parts, current=-1.0)
    with pytest.raises(ValueError, match="voltage must be"):
        stress(*parts, voltage=np.nan)


def seven(l, c, r):  # noqa: E741 - as in the formulas
    """Return the seven quantities from their definitions."""
    f, q = 1.0 / (2.0 * np.pi * np.sqrt(l * c)), np.sqrt(l / c) / r
    return {"f": f, "L": l, "C": c, "R": r, "RD": l / (c * r), "Q": q, "B": f / q}


INSUFFICIENT = {frozenset(s) for s in (("f", "L", "C"), ("f", "Q", "B"), ("L", "R", "B"))}
INSUFFICIENT |= {frozenset(s) for s in (("C", "RD", "B"), ("R", "RD", "Q"))}


@settings(fixed, max_examples=20)
@given(logarithmic(1e-8, 1e-3), logarithmic(1e-13, 1e-8), logarithmic(0.3, 1e4))
def test_inverse_of_forward_is_identity(l, c, q):  # noqa: E741 - as in the formulas
    truth = seven(l, c, np.sqrt(l / c) / q)
    for triple in combinations(truth, 3):
        got = tank.solve_tank({name: truth[name] for name in triple})
        if frozenset(triple) in INSUFFICIENT:
            assert (got.status, got.missing) == (tank.TankStatus.INSUFFICIENT, 1)
            assert set(got.values) == set(triple)
            assert set(got.would_help) == set(truth) - set(triple)
        else:
            assert (got.status, got.missing, got.would_help) == (tank.TankStatus.EXACT, 0, ())
            assert got.values == pytest.approx(truth, rel=1e-11)


def test_every_four_is_overdetermined():
    truth = seven(6.2e-6, 8.1e-11, 1.35)
    for names in combinations(truth, 4):
        got = tank.solve_tank({name: truth[name] for name in names})
        assert got.status == tank.TankStatus.OVERDETERMINED_CONSISTENT
        assert got.values == pytest.approx(truth, rel=1e-11)
        assert got.relation


@st.composite
def typed(draw):
    names = draw(st.lists(st.sampled_from("f L C R RD Q B".split()), min_size=3, max_size=7, unique=True))
    truth = seven(6.2e-6, 8.1e-11, 1.35)
    slack = {name: draw(st.just(0.0) | logarithmic(1e-4, 0.1)) for name in names}
    off = {name: draw(st.floats(-0.05, 0.05)) if draw(st.booleans()) else 0.0 for name in names}
    return {name: truth[name] * np.exp(off[name]) for name in names}, slack


@fixed
@given(typed())
def test_contradiction_by_linear_programme(case):
    # Least s for which some (ln L, ln C, ln R) meets every value within s times what is permitted.
    values, slack = case
    logs = seven(np.e, 1.0, 1.0), seven(1.0, np.e, 1.0), seven(1.0, 1.0, np.e)
    base = seven(1.0, 1.0, 1.0)
    rows = np.array([[np.log(each[n] / base[n]) for each in logs] for n in values])
    aim = np.array([np.log(values[n] / base[n]) for n in values])
    permitted = np.array([1e-3 + slack[n] for n in values])[:, None]
    found = linprog(
        [0.0, 0.0, 0.0, 1.0],
        A_ub=np.vstack([np.hstack([rows, -permitted]), np.hstack([-rows, -permitted])]),
        b_ub=np.concatenate([aim, -aim]),
        bounds=[(None, None)] * 3 + [(0.0, None)],
    )
    assert found.status == 0
    got = tank.solve_tank(values, slack)
    # The programme's own feasibility tolerance is 1e-7 in logarithms, over 1e-3.
    assert got.strain == pytest.approx(found.fun, rel=1e-4, abs=5e-4)
    assert (got.status == tank.TankStatus.CONTRADICTORY) == (got.strain > 1.0)


def test_rounding_is_forgiven():
    values = {"f": 7.1e6, "L": 6.2e-6, "C": 81e-12, "Q": 200.0}
    slack = {"f": 0.05 / 7.1, "L": 0.05 / 6.2, "C": 0.5 / 81, "Q": 0.0025}
    assert tank.solve_tank(values, slack).status == tank.TankStatus.OVERDETERMINED_CONSISTENT
    off = values | {"C": 85e-12}
    assert tank.solve_tank(off).status == tank.TankStatus.CONTRADICTORY
    assert tank.solve_tank(off, slack).status == tank.TankStatus.CONTRADICTORY
    assert tank.solve_tank(off, {"C": 0.06}).status == tank.TankStatus.OVERDETERMINED_CONSISTENT


@pytest.mark.parametrize("wrong", ["f", "L", "C", "R", "RD", "Q", "B"])
def test_one_wrong_value_of_seven_is_named(wrong):
    truth = seven(6.2e-6, 8.1e-11, 1.35)
    got = tank.solve_tank(truth | {wrong: 1.04 * truth[wrong]})
    assert [each.quantity for each in got.suspects] == [wrong]
    assert got.suspects[0].relative == pytest.approx(0.04, rel=1e-9)
    assert got.suspects[0].implied == pytest.approx(truth[wrong], rel=1e-11)
    assert got.disagreements[0] == got.suspects[0]
    assert wrong in got.relation


def test_four_values_leave_the_culprit_open():
    truth = seven(6.2e-6, 8.1e-11, 1.35)
    got = tank.solve_tank({n: truth[n] for n in "fLQ"} | {"RD": 1.2 * truth["RD"]}, {"L": 0.01})
    assert {each.quantity: each.relative for each in got.suspects} == pytest.approx(
        {"RD": 0.2, "f": 1 / 1.2 - 1, "L": 1 / 1.2 - 1, "Q": 1 / 1.2 - 1}, rel=1e-9
    )
    assert got.suspects[0].quantity == "L", "the coarsest first"


def test_value_outside_the_strained_relation_is_no_suspect():
    got = tank.solve_tank({"f": 7.1e6, "L": 6.2e-6, "C": 100e-12, "R": 1.35})
    assert {each.quantity for each in got.suspects} == {"f", "L", "C"}
    assert set(got.relation) == {"f", "L", "C"}


def test_doubt_follows_rounding():
    # f = 1/(2 pi sqrt(L C)) and Q = w0 L/R: half of either slack, then half, half and whole.
    got = tank.solve_tank({"L": 6.2e-6, "C": 81e-12, "R": 1.35}, {"L": 0.01, "C": 0.02, "R": 0.04})
    assert got.doubt["f"] == pytest.approx(0.015, rel=1e-9)
    assert got.doubt["Q"] == pytest.approx(0.055, rel=1e-9)
    assert got.doubt["C"] == pytest.approx(0.02, rel=1e-9)
    assert got.values["L"] == 6.2e-6


def test_relations_are_those_of_theory():
    truth = seven(6.2e-6, 8.1e-11, 1.35)
    base = seven(1.0, 1.0, 1.0)
    assert {frozenset(r) for r in tank.relations() if len(r) == 3} == INSUFFICIENT
    for relation in tank.relations():
        assert np.prod([(truth[n] / base[n]) ** p for n, p in relation.items()]) == pytest.approx(
            1.0, rel=1e-11
        )


@pytest.mark.parametrize(
    ("values", "slack", "message"),
    [
        ({}, None, "at least one"),
        ({"f": 7e6, "X": 1.0}, None, "named by .* not 'X'"),
        ({"f": 0.0}, None, "value f must be from"),
        ({"f": -1.0}, None, "value f must be from"),
        ({"f": np.nan}, None, "value f must be from"),
        ({"f": np.inf}, None, "value f must be from"),
        ({"f": 7e6}, {"f": -0.1}, "slack f must be from"),
        ({"f": 7e6}, {"f": 0.6}, "slack f must be from"),
        ({"f": 7e6}, {"L": 0.1}, "slack must be given only"),
    ],
)
def test_inverse_refuses(values, slack, message):
    with pytest.raises(ValueError, match=message):
        tank.solve_tank(values, slack)


def test_answer_of_the_service():
    got = service.answer({"f": 10.05e6, "C": 47e-12, "Q": 180.0})
    assert got.status == "exact"
    # L = 1/(4 pi^2 f^2 C), R = w L/Q, by hand.
    assert got.values["L"] == pytest.approx(1.0 / (4.0 * np.pi**2 * 10.05e6**2 * 47e-12), rel=1e-13)
    b = got.behaviour
    assert b.lc_resonance == pytest.approx(10.05e6, rel=1e-13)
    assert b.unity_power_factor_resonance == pytest.approx(10.05e6 * np.sqrt(1.0 - 1.0 / 180.0**2), rel=1e-13)
    assert b.unity_power_factor_resonance < b.peak_resonance < b.lc_resonance
    assert b.dynamic_resistance_difference == pytest.approx(0.0, abs=1e-9 * b.dynamic_resistance)
    assert b.peak_excess == pytest.approx(0.5 / 180.0**2, rel=1e-3)
    assert b.half_power_high - b.half_power_low == pytest.approx(b.half_power_width, rel=1e-11)
    assert [b.q_components, b.q_dynamic] == pytest.approx([180.0, 180.0], rel=1e-12)
    assert [b.q_half_power, b.q_peak] == pytest.approx([180.0, 180.0], rel=1e-4)


def test_answer_of_the_service_without_a_circuit():
    few = service.answer({"f": 7e6, "Q": 200.0})
    assert (few.status, few.missing, few.behaviour) == ("insufficient", 1, None)
    assert set(few.values) == {"f", "Q", "B"}
    assert set(few.would_help) == {"L", "C", "R", "RD"}
    odd = service.answer({"f": 7e6, "L": 6e-6, "C": 60e-12, "R": 1.0})
    assert (odd.status, odd.behaviour) == ("contradictory", None)
    assert odd.suspects and odd.strain > 1.0
    # So lossy that nothing but the LC frequency is left: no unity power factor, no peak.
    dull = service.answer({"L": 1e-6, "C": 1e-9, "R": 60.0}).behaviour
    assert dull.unity_power_factor == "none"
    assert dull.unity_power_factor_resonance is dull.peak_resonance is dull.half_power_width is None
    with pytest.raises(TypeError):
        few.values["f"] = 1.0


@settings(fixed, max_examples=40)
@given(st.dictionaries(st.sampled_from("f L C R RD Q B".split()), logarithmic(1e-29, 1e29), min_size=1))
def test_service_answers_any_accepted_values(values):
    got = service.answer(values)
    assert all(np.isfinite(v) and v > 0.0 for v in got.values.values())
    assert (got.behaviour is None) == (got.status in ("insufficient", "contradictory"))
