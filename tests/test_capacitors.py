"""Capacitors: loss and ratings against the reference and against the powers themselves."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.cases import reference
from trapdesk.engine import capacitors
from trapdesk.engine.capacitors import Limit

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=60)
PART = {"capacitance": 50e-12, "peak_voltage": 3e3, "rms_current": 5.0, "dissipation": 1.0}


# Independent reference computation: the definitions, in another hand.
@pytest.mark.parametrize("case", reference("capacitors", "derate-"))
def test_reference_ratings(case):
    given, expected, within = case["inputs"], case["expected"], case["tolerance"]["rel"]
    names = ("f_hz", "c_f", "v_rating_peak_v", "i_max_rms_a", "p_max_w", "tan_delta")
    got = capacitors.rating(*(given[name] for name in names))
    assert got.voltage_limit == pytest.approx(expected["v_limit_voltage_rms"], rel=within)
    assert got.current_limit == pytest.approx(expected["v_limit_current_rms"], rel=within)
    assert got.heat_limit == pytest.approx(expected["v_limit_heat_rms"], rel=within)
    assert got.allowed == pytest.approx(expected["v_allowed_rms"], rel=within)
    assert Limit(str(got.limited_by)) == expected["limited_by"]
    assert got.voltage_to_current == pytest.approx(expected["f_voltage_to_current_hz"], rel=within)
    assert got.voltage_to_heat == pytest.approx(expected["f_voltage_to_heat_hz"], rel=within)


@fixed
@given(
    st.floats(1e5, 1e8),
    st.floats(1e-12, 1e-8),
    st.floats(0.1, 50.0),
    st.floats(0.01, 50.0),
    st.floats(1e-5, 0.05),
)
def test_allowed_voltage_keeps_every_limit_and_reaches_one(f, c, current, power, tangent):
    got = capacitors.rating(f, c, 2e3, current, power, tangent)
    # powers from the complex current through the series circuit itself
    z = (tangent - 1j) / (2 * np.pi * f * c)
    i = got.allowed / abs(z)
    used = {
        Limit.VOLTAGE: got.allowed * np.sqrt(2) / 2e3,
        Limit.CURRENT: i / current,
        Limit.HEAT: np.sqrt(i**2 * z.real / power),
    }
    # tan(delta) is taken as small: its square is up to 2.5e-3
    assert max(used.values()) == pytest.approx(1.0, rel=2e-3)
    assert used[Limit(str(got.limited_by))] == max(used.values())


def test_limits_change_at_the_crossovers():
    got = capacitors.rating(1e6, **PART, loss_tangent=2e-4)
    for crossover, beyond in ((got.voltage_to_heat, "heat_limit"), (got.voltage_to_current, "current_limit")):
        at = capacitors.rating(crossover, **PART, loss_tangent=2e-4)
        assert at.voltage_limit == pytest.approx(getattr(at, beyond), rel=1e-12)
    assert capacitors.rating(0.99 * got.voltage_to_heat, **PART, loss_tangent=2e-4).limited_by == "voltage"
    assert capacitors.rating(1.01 * got.voltage_to_heat, **PART, loss_tangent=2e-4).limited_by == "heat"


def test_lossless_and_unlimited():
    got = capacitors.rating(1e9, 50e-12, 3e3, np.inf, np.inf, [0.0, 1e-3])
    np.testing.assert_array_equal(got.limited_by, ["voltage", "voltage"])
    np.testing.assert_array_equal(got.heat_limit, [np.inf, np.inf])
    np.testing.assert_array_equal(got.voltage_to_heat, [np.inf, np.inf])
    assert capacitors.lossy_impedance(7e6, 47e-12, 0.0).real == 0


def test_array_equals_scalar_one_by_one():
    f, tangent = np.array([1e6, 7e6, 28e6]), np.array([[0.0], [1e-4], [1e-2]])
    got = capacitors.rating(f, **PART, loss_tangent=tangent)
    for row, t in enumerate(tangent.ravel()):
        for column, frequency in enumerate(f):
            one = capacitors.rating(frequency, **PART, loss_tangent=t)
            assert one.allowed == got.allowed[row, column]
            assert one.limited_by == got.limited_by[row, column]
    z = capacitors.lossy_impedance(f, 47e-12, np.array([[2e-3], [5e-4]]))
    assert z.shape == (2, 3)
    assert z[1, 2] == capacitors.lossy_impedance(28e6, 47e-12, 5e-4)


def test_lossy_impedance_by_hand():
    # 1 / (2 pi 10 MHz 100 pF) = 159.155 ohm, a thousandth of it lost
    assert capacitors.lossy_impedance(10e6, 100e-12, 1e-3) == pytest.approx(0.159155 - 159.155j, rel=1e-5)


@pytest.mark.parametrize(
    ("change", "name"),
    [
        ({"frequency": 0.0}, "frequency"),
        ({"capacitance": -1e-12}, "capacitance"),
        ({"peak_voltage": np.nan}, "peak_voltage"),
        ({"rms_current": 0.0}, "rms_current"),
        ({"dissipation": np.nan}, "dissipation"),
        ({"loss_tangent": -1e-4}, "loss_tangent"),
    ],
)
def test_rating_refuses(change, name):
    with pytest.raises(ValueError, match=rf"^{name} must be"):
        capacitors.rating(**({"frequency": 7e6, "loss_tangent": 1e-4} | PART | change))


@pytest.mark.parametrize(
    "bad", [(0.0, 1e-12, 1e-3), (1e6, np.nan, 1e-3), (1e6, 1e-12, -1e-3), (1e6, 1e-12, np.nan)]
)
def test_lossy_impedance_refuses(bad):
    with pytest.raises(ValueError, match="must be"):
        capacitors.lossy_impedance(*bad)
