"""Warmth and drift: reference cases, a solver of another kind, and what must hold whatever the numbers."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from tests.cases import reference
from trapdesk.engine import heat


@pytest.mark.parametrize("case", reference("drift", "tol-temp"))
def test_reference_drift(case):
    given, expect = case["inputs"], case["expected"]
    kelvin = given["delta_t_k"]
    found = heat.drifted(expect["f0_hz"], given["tc_l_per_k"] * kelvin, given["tc_c_per_k"] * kelvin)
    assert found == pytest.approx(expect["f_hot_hz"], rel=case["tolerance"]["rel"])
    # To first order minus half of both; the second order of these is below one in a thousand.
    first = -0.5 * (given["tc_l_per_k"] + given["tc_c_per_k"]) * kelvin * expect["f0_hz"]
    assert first == pytest.approx(expect["first_order_shift_hz"], rel=1e-9)
    assert found - expect["f0_hz"] == pytest.approx(first, rel=0.03)


@pytest.mark.parametrize(("watts", "diameter", "length", "air"), [(1, 0.04, 0.03, 20), (80, 0.05, 0.05, 45)])
def test_rise_balances_the_heat(watts, diameter, length, air):
    area = np.pi * diameter * (length + diameter / 2)

    def short(rise):
        convection = 1.32 * (rise / diameter) ** 0.25 * rise
        hot, cold = air + 273.15 + rise, air + 273.15
        return area * (convection + 0.9 * 5.670374419e-8 * (hot**4 - cold**4)) - watts

    expected = brentq(short, 0, 2000)
    assert heat.temperature_rise(watts, diameter, length, air) == pytest.approx(expected, rel=1e-6)


def test_rise_of_nothing_is_nothing_and_more_is_more():
    watts = np.array([0.0, 0.1, 1.0, 10.0, 100.0])
    rise = heat.temperature_rise(watts, 0.04, 0.03)
    assert rise[0] == 0
    assert np.all(np.diff(rise) > 0)
    assert rise[3] == heat.temperature_rise(10.0, 0.04, 0.03)


def test_share_of_an_over_is_what_a_store_of_heat_does():
    tau, over, pause = 150.0, 120.0, 60.0
    state = 0.0
    for _ in range(20):
        for seconds, drive in ((over, 1.0), (pause, 0.0)):
            end = solve_ivp(lambda t, y, d=drive: (d - y) / tau, (0, seconds), [state], rtol=1e-9, atol=1e-12)
            state, last = float(end.y[0, -1]), state
        top = last if pause else state
    assert heat.over_share(tau, over, pause) == pytest.approx(top, rel=1e-5)
    assert heat.over_share(tau, over, 0.0) == pytest.approx(1.0)
    assert heat.over_share(tau, 1e6, 60.0) == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("call", "name"),
    [
        (lambda: heat.temperature_rise(-1.0, 0.04, 0.03), "power"),
        (lambda: heat.temperature_rise(1.0, 0.0, 0.03), "diameter"),
        (lambda: heat.over_share(0.0, 1.0, 1.0), "time_constant"),
        (lambda: heat.drifted(0.0, 0.1, 0.1), "frequency"),
        (lambda: heat.drifted(1.0, -1.0, 0.1), "change"),
    ],
)
def test_refuses(call, name):
    with pytest.raises(ValueError, match=name):
        call()
