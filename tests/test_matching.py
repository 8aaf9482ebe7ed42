"""Matching within limits against references, brute force and a search of another kind."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import differential_evolution

from tests.cases import reference
from tests.families import family, limits
from trapdesk.engine import matching, nearest
from trapdesk.engine.arms import Kind, Problem
from trapdesk.engine.ladder import carried, input_impedance
from trapdesk.engine.networks import NETWORKS, ladder_of, match
from trapdesk.engine.reflection import swr
from trapdesk.engine.spans import ArmLimits

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=60)
THREE = [name for name, network in NETWORKS.items() if len(network.arms) == 3]
C_L_C = NETWORKS["t-clc"]


def ohms(pair):
    return complex(pair["re"], pair["im"])


def found(values):
    """Return the solutions there are, of a problem with one load."""
    return values[~np.isnan(values[:, 0])]


def reflection(z, wanted=50.0):
    return np.abs((z - wanted) / (z + np.conj(wanted)))


def seen(network, values, problem):
    return input_impedance(ladder_of(network, values, problem), problem.load)


# Independent reference computation: scan of the family of matches, differential evolution.
@pytest.mark.parametrize("case", reference("networks", "tmin-"))
def test_reference_least_loss(case):
    inputs, expected, within = case["inputs"], case["expected"], case["tolerance"]
    problem = Problem(
        frequency=inputs["f_hz"],
        load=ohms(inputs["z_load_ohm"]),
        coil_q=inputs["q_inductor"],
        capacitor_q=inputs["q_capacitor"],
    )
    coil = (inputs["l_min_h"], inputs["l_max_h"])
    capacitor = (inputs["c_min_f"], inputs["c_max_f"])
    got = nearest.best_setting(C_L_C, problem, limits(C_L_C, coil=coil, capacitor=capacitor))
    assert got.matched == expected["feasible"]
    assert got.loss_db == pytest.approx(expected["loss_db"], abs=within["loss_db"]["abs"])
    for value, key in zip(got.values, ("c_source_f", "l_h", "c_load_f"), strict=True):
        assert value == pytest.approx(expected[key], rel=within[key]["rel"])
    assert got.swr == pytest.approx(1.0, abs=1e-9)
    stress = carried(ladder_of(C_L_C, got.values, problem), problem.load, inputs["power_in_w"])
    assert stress.voltages == pytest.approx(expected["v_rms_100w"], rel=1e-6)
    assert stress.currents == pytest.approx(expected["i_rms_100w"], rel=1e-6)
    assert stress.powers == pytest.approx(expected["p_element_w"], rel=1e-6)
    values, loss = family(C_L_C, problem, np.geomspace(*capacitor, 20_001))
    low, high = (np.array([e[0], e[1], e[0]])[:, None] for e in zip(capacitor, coil, strict=True))
    inside = np.all((values >= low) & (values <= high), axis=1)
    # The reference's worst match is the worst of a scan, so one that is found here may only be worse.
    assert expected["worst_feasible_loss_db"] - 1e-3 < np.max(loss[inside])
    assert np.max(loss[inside]) == pytest.approx(expected["worst_feasible_loss_db"], rel=0.04)
    worst = np.moveaxis(values, 1, 0)[:, inside][:, np.argmax(loss[inside])]
    assert swr(seen(C_L_C, worst, problem)) == pytest.approx(1.0, abs=1e-9)
    assert carried(ladder_of(C_L_C, worst, problem), problem.load).loss_db == pytest.approx(
        np.max(loss[inside])
    )


# Independent reference computation: closed form with bounds, bounded search for the least reflection.
@pytest.mark.parametrize("case", reference("networks", "tuner-"))
def test_reference_reach(case):
    box = case["inputs"]["box"]
    coil, capacitor = (box["l_min_h"], box["l_max_h"]), (box["c_min_f"], box["c_max_f"])
    names = {"shunt_at_load": "l-load-low-pass", "shunt_at_source": "l-source-low-pass"}
    for result in case["expected"]["results"]:
        problem = Problem(frequency=result["f_hz"], load=ohms(result["z_load_ohm"]))
        got = {
            form: nearest.best_setting(NETWORKS[name], problem, limits(NETWORKS[name], coil, capacitor))
            for form, name in names.items()
        }
        assert any(setting.matched for setting in got.values()) == result["can_match"]
        least = min(setting.swr for setting in got.values())
        assert least == pytest.approx(
            result["best_swr_in_box"], rel=case["tolerance"]["best_swr_in_box"]["rel"]
        )
        for solution in result["solutions"]:
            network, setting = NETWORKS[names[solution["form"]]], got[solution["form"]]
            by_kind = {arm.kind: value for arm, value in zip(network.arms, setting.values, strict=True)}
            assert by_kind[Kind.COIL] == pytest.approx(solution["l_h"], rel=case["tolerance"]["rel"])
            assert by_kind[Kind.CAPACITOR] == pytest.approx(solution["c_f"], rel=case["tolerance"]["rel"])


problems = st.fixed_dictionaries(
    {
        "frequency": st.floats(1.8e6, 30e6),
        "load": st.builds(complex, st.floats(1.0, 3000.0), st.floats(-2000.0, 2000.0)),
        "wanted": st.builds(complex, st.floats(10.0, 300.0), st.one_of(st.just(0.0), st.floats(-50.0, 50.0))),
    }
)
losses = st.fixed_dictionaries({"coil_q": st.floats(50.0, 1e4), "capacitor_q": st.floats(200.0, 1e5)})
boxes = st.fixed_dictionaries(
    {
        "coil": st.tuples(st.floats(0.05e-6, 0.5e-6), st.floats(2e-6, 40e-6)),
        "capacitor": st.tuples(st.floats(5e-12, 30e-12), st.floats(100e-12, 2e-9)),
    }
)


@pytest.mark.parametrize("name", THREE)
@fixed
@given(problems, losses, boxes)
def test_least_loss_is_not_beaten_on_a_fine_grid(name, plain, loss, box):
    network, problem = NETWORKS[name], Problem(**plain, **loss)
    within = limits(network, **box)
    got = matching.least_loss(network, problem, within)
    ends = np.array([within.low, within.high])
    # Brute force: every match along the arm beside the load.
    values, grid_loss = family(network, problem, np.geomspace(*ends[:, 2], 2001))
    inside = np.all((values >= ends[0][:, None]) & (values <= ends[1][:, None]), axis=1)
    if np.any(inside):
        assert got.matched
        assert got.loss_db <= np.min(grid_loss[inside]) + 1e-9
    if got.matched:
        assert np.all((got.values >= ends[0]) & (got.values <= ends[1]))
        assert reflection(seen(network, got.values, problem), problem.wanted) < 1e-6
        assert carried(ladder_of(network, got.values, problem), problem.load).loss_db == pytest.approx(
            got.loss_db, abs=1e-6
        )
    else:
        assert np.all(np.isnan(got.values)) and np.isnan(got.loss_db)


def test_least_loss_between_limits():
    # Limits wide enough that no arm ends on one: the least loss is a smooth minimum on the curve.
    problem = Problem(frequency=3.6e6, load=175.0 + 275j, coil_q=100.0, capacitor_q=100.0)
    within = limits(C_L_C, coil=(1e-9, 1e-3), capacitor=(1e-13, 1e-5))
    got = matching.least_loss(C_L_C, problem, within)
    ends = np.array([within.low, within.high])
    values, loss = family(C_L_C, problem, got.values[2] * np.linspace(0.9, 1.1, 2001))
    inside = np.all((values > ends[0][:, None]) & (values < ends[1][:, None]), axis=1)
    assert got.loss_db <= np.min(loss[inside]) + 1e-12
    assert np.all((got.values > 2.0 * ends[0]) & (got.values < 0.5 * ends[1]))


@pytest.mark.parametrize(
    ("name", "load", "frequency"),
    [
        ("t-clc", 3.0 - 400j, 1.9e6),
        ("t-clc", 2500.0 + 2000j, 1.9e6),
        ("t-lcl", 900.0 - 900j, 3.6e6),
        ("pi-clc", 8.0 + 300j, 3.6e6),
        ("pi-clc", 3.0 + 20j, 1.9e6),
        ("pi-lcl", 4.0 + 300j, 3.6e6),
        ("l-load-low-pass", 5.0 - 900j, 3.6e6),
        ("l-source-high-pass", 12.0 - 900j, 1.9e6),
    ],
)
def test_nearest_setting_is_not_beaten_by_a_search(name, load, frequency):
    network = NETWORKS[name]
    problem = Problem(frequency=frequency, load=load, coil_q=150.0, capacitor_q=1500.0)
    within = limits(network, coil=(1e-7, 8e-6), capacitor=(2e-11, 2.5e-10))
    got = nearest.best_setting(network, problem, within)
    assert not got.matched
    assert swr(seen(network, got.values, problem)) == pytest.approx(got.swr, rel=1e-12)
    assert np.all((got.values >= within.low) & (got.values <= within.high))

    def miss(logarithms):
        return reflection(seen(network, np.exp(logarithms), problem))

    # scipy: differential evolution over the whole box.
    ends = list(zip(np.log(within.low), np.log(within.high), strict=True))
    rival = differential_evolution(
        miss, ends, rng=1, popsize=30, maxiter=150, tol=1e-10, vectorized=True, updating="deferred"
    )
    ours = (got.swr - 1.0) / (got.swr + 1.0)
    assert ours <= rival.fun + 1e-9
    assert ours == pytest.approx(rival.fun, abs=1e-4)


def test_what_is_short_and_by_how_much():
    # By hand: 2000 ohm to 50 ohm with a coil in series and a capacitor across the load needs
    # X = sqrt(50 x 1950) = 312.25 ohm in series and 320.26 ohm across.
    network, w = NETWORKS["l-load-low-pass"], 2.0 * np.pi * 3.6e6
    coil, capacitor = 312.24990 / w, 1.0 / (w * 320.25631)
    problem = Problem(frequency=3.6e6, load=2000.0)
    enough = nearest.best_setting(network, problem, limits(network, (0.0, 1.01 * coil), (0.0, 1e-9)))
    assert enough.matched and enough.short_arm == -1 and np.isnan(enough.needed)
    assert enough.values == pytest.approx([coil, capacitor], rel=1e-6)
    short = nearest.best_setting(network, problem, limits(network, (0.0, 0.8 * coil), (0.0, 1e-9)))
    assert (short.matched, short.short_arm) == (False, 0)
    assert [short.needed, short.limit] == pytest.approx([coil, 0.8 * coil], rel=1e-6)
    assert short.swr > 1.1
    coarse = nearest.best_setting(network, problem, limits(network, (0.0, 1e-3), (2.0 * capacitor, 1e-9)))
    assert coarse.short_arm == 1
    assert [coarse.needed, coarse.limit] == pytest.approx([capacitor, 2.0 * capacitor], rel=1e-6)
    # The other L cannot match 2000 ohm with any value at all.
    other = NETWORKS["l-source-low-pass"]
    hopeless = nearest.best_setting(other, problem, limits(other, (0.0, 1e-3), (0.0, 1e-6)))
    assert not hopeless.matched and hopeless.short_arm == -1
    assert hopeless.swr == pytest.approx(40.0, rel=1e-6)


def test_nearest_setting_with_an_arm_at_nothing():
    # By hand: through two coils an inductive load of 60 ohm only gets worse, so the one in series is left at
    # nothing and the one across at infinity, and the SWR is the load's own.
    network, load = NETWORKS["l-source-coils"], 60.0 + 100j
    problem = Problem(frequency=3.6e6, load=load)
    got = nearest.best_setting(network, problem, ArmLimits(low=(4e-6, 0.0), high=(np.inf, 3e-6)))
    assert not got.matched
    assert got.values.tolist() == [np.inf, 0.0]
    assert got.swr == pytest.approx(swr(load), rel=1e-12)


def test_widening_the_limit_named_short_gives_a_match():
    within = limits(C_L_C, coil=(1e-7, 30e-6), capacitor=(15e-12, 250e-12))
    problem = Problem(frequency=1.9e6, load=6.0 - 700j, coil_q=150.0, capacitor_q=2000.0)
    got = nearest.best_setting(C_L_C, problem, within)
    assert not got.matched and got.short_arm >= 0
    low, high = list(within.low), list(within.high)
    assert got.needed < low[got.short_arm] or got.needed > high[got.short_arm]
    low[got.short_arm] = min(low[got.short_arm], 0.999 * got.needed)
    high[got.short_arm] = max(high[got.short_arm], 1.001 * got.needed)
    assert matching.least_loss(C_L_C, problem, ArmLimits(low=tuple(low), high=tuple(high))).matched


def test_settings_of_many_loads_at_once():
    within = limits(C_L_C, coil=(1e-7, 30e-6), capacitor=(15e-12, 250e-12))
    f = np.array([[1.9e6], [7.1e6]])
    load = np.array([6.0 - 700j, 80.0 + 10j, 2.0 + 900j])
    many = Problem(frequency=f, load=load, coil_q=150.0, capacitor_q=2000.0)
    got = nearest.best_setting(C_L_C, many, within)
    assert got.values.shape == (3, 2, 3)
    assert 0 < np.count_nonzero(got.matched) < 6
    for i in range(2):
        for j in range(3):
            one = Problem(frequency=f[i, 0], load=load[j], coil_q=150.0, capacitor_q=2000.0)
            alone = nearest.best_setting(C_L_C, one, within)
            assert got.values[:, i, j] == pytest.approx(alone.values, rel=1e-6)
            assert got.matched[i, j] == alone.matched and got.short_arm[i, j] == alone.short_arm
            assert got.swr[i, j] == pytest.approx(alone.swr, rel=1e-9)


@pytest.mark.parametrize("name", ["t-clc", "pi-clc", "l-load-low-pass"])
def test_map_of_reach(name):
    network = NETWORKS[name]
    within = limits(network, coil=(1e-7, 8e-6), capacitor=(15e-12, 250e-12))
    r, x = np.geomspace(4.0, 3000.0, 12), np.linspace(-1200.0, 1200.0, 9)
    got = matching.reach(network, 7.1e6, r, x, within, coil_q=150.0, capacitor_q=2000.0)
    assert got.matched.shape == (9, 12) and 5 < np.count_nonzero(got.matched) < 100
    for i in range(9):
        for j in range(12):
            load = r[j] + 1j * x[i]
            problem = Problem(frequency=7.1e6, load=load, coil_q=150.0, capacitor_q=2000.0)
            closely = nearest.best_setting(network, problem, within)
            assert got.matched[i, j] == closely.matched
            if closely.matched:
                assert closely.loss_db - 1e-9 <= got.loss_db[i, j] <= closely.loss_db + 0.02
            else:
                assert closely.swr > 1.0 + 1e-6


def test_snap_of_switched_steps_against_every_combination():
    network = NETWORKS["l-load-low-pass"]
    problem = Problem(frequency=7.1e6, load=400.0 - 150j, coil_q=120.0, capacitor_q=1000.0)
    coils = 0.1e-6 * np.arange(1, 64)
    capacitors = 8e-12 * np.arange(1, 64)
    wide = limits(network, (0.0, 1.0), (0.0, 1.0))
    values, ratio = nearest.snap(network, problem, wide, (coils, capacitors))
    every = swr(seen(network, np.array(np.meshgrid(coils, capacitors)), problem))
    assert ratio == np.min(every)
    assert values[0] in coils and values[1] in capacitors
    exact = found(match(network, problem).values)[0]
    assert 1.0 < ratio < 1.3 and values == pytest.approx(exact, rel=0.2)


def test_snap_of_a_tapped_coil_between_variable_capacitors():
    problem = Problem(frequency=7.1e6, load=30.0 + 60j, coil_q=150.0, capacitor_q=2000.0)
    within = limits(C_L_C, coil=(1e-7, 30e-6), capacitor=(15e-12, 250e-12))
    taps = np.geomspace(0.4e-6, 20e-6, 12)
    values, ratio = nearest.snap(C_L_C, problem, within, (None, taps, None))
    assert values[1] in taps
    assert ratio == pytest.approx(1.0, abs=1e-9)
    loss = carried(ladder_of(C_L_C, values, problem), problem.load).loss_db
    free = matching.least_loss(C_L_C, problem, within).loss_db
    assert free <= loss < free + 0.3
    # With taps that all lie too low there is no match left, only a least SWR.
    values, ratio = nearest.snap(C_L_C, problem, within, (None, taps / 30.0, None))
    assert ratio > 1.5 and ratio == pytest.approx(swr(seen(C_L_C, values, problem)), rel=1e-9)


def test_snap_with_one_arm_left_free():
    network = NETWORKS["l-source-low-pass"]
    problem = Problem(frequency=3.6e6, load=12.0 - 40j, coil_q=120.0, capacitor_q=1000.0)
    within = limits(network, (0.0, 20e-6), (0.0, 4e-9))
    coils = 0.7e-6 * np.arange(1, 20)
    values, ratio = nearest.snap(network, problem, within, (None, coils))
    fine = np.linspace(0.0, 4e-9, 40_001)
    assert ratio <= np.min(swr(seen(network, np.array([fine, values[1] + 0.0 * fine]), problem)))
    nothing, none = nearest.snap(network, problem, within, (None, None))
    assert none == pytest.approx(1.0, abs=1e-9)
    assert nothing == pytest.approx(found(match(network, problem).values)[0], rel=1e-9)
