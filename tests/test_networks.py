"""Matching networks against references, worked examples, scikit-rf, searches and the cascade itself."""

import numpy as np
import pytest
import skrf
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from tests.cases import published, reference
from tests.families import limits, width
from trapdesk.engine import matching, nearest, networks
from trapdesk.engine.arms import Kind, LineConstants, Problem
from trapdesk.engine.ladder import Ladder, Part, Place, carried, input_impedance
from trapdesk.engine.networks import NETWORKS, MatchStatus, ladder_of, match, touchiness
from trapdesk.engine.reflection import swr

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=60)
L_FORMS = [name for name in NETWORKS if name.startswith("l-")]
C_L_C = NETWORKS["t-clc"]
KINDS = {"L": Kind.COIL, "C": Kind.CAPACITOR}


def ohms(pair):
    return complex(pair["re"], pair["im"])


def named(elements):
    """Return the registered network with these elements, source to load, as the reference lists them."""
    wanted = [(Place(e["place"]), KINDS[e["kind"]]) for e in elements]
    return next(n for n in NETWORKS.values() if [(a.place, a.kind) for a in n.arms] == wanted)


def found(values):
    """Return the solutions there are, of a problem with one load."""
    return values[~np.isnan(values[:, 0])]


def seen(network, values, problem):
    return input_impedance(ladder_of(network, values, problem), problem.load)


# Independent reference computation: closed form, chain matrices, scikit-rf cascade.
@pytest.mark.parametrize("case", reference("networks", "lnet-"))
def test_reference_l_networks(case):
    inputs, expected, within = case["inputs"], case["expected"], case["tolerance"]["rel"]
    lossy = Problem(
        frequency=inputs["f_hz"],
        load=ohms(inputs["z_load_ohm"]),
        wanted=inputs["r_source_ohm"],
        coil_q=inputs["q_inductor"],
        capacitor_q=inputs["q_capacitor"],
    )
    counted = sum(len(found(match(NETWORKS[name], lossy.lossless()).values)) for name in L_FORMS)
    assert counted == expected["count"] == len(expected["solutions"])
    for solution in expected["solutions"]:
        network = named(solution["elements"])
        before = match(network, lossy.lossless()).values
        index = [i for i, v in enumerate(before) if not np.isnan(v[0])]
        exact = [[e["value_si"] for e in solution[key]] for key in ("elements", "elements_retuned")]
        index = min(index, key=lambda i, exact=exact: abs(before[i][0] / exact[0][0] - 1.0))
        assert before[index] == pytest.approx(exact[0], rel=within)
        assert solution["retuned_ok"]
        after = match(network, lossy).values[index]
        assert after == pytest.approx(exact[1], rel=within)

        untouched = carried(ladder_of(network, before[index], lossy), lossy.load, inputs["power_in_w"])
        assert untouched.loss_db == pytest.approx(solution["loss_db_not_retuned"], rel=within)
        ratio = swr(untouched.input_impedance, lossy.wanted)
        assert ratio == pytest.approx(solution["swr_not_retuned"], rel=within)
        got = carried(ladder_of(network, after, lossy), lossy.load, inputs["power_in_w"])
        assert got.loss_db == pytest.approx(solution["loss_db_retuned"], rel=within)
        assert got.voltages == pytest.approx(solution["v_rms_100w"], rel=within)
        assert got.currents == pytest.approx(solution["i_rms_100w"], rel=within)
        assert got.powers == pytest.approx(solution["p_element_100w"], rel=within)


# Independent reference computation: walk along the ladder, chain matrices.
@pytest.mark.parametrize("case", reference("networks", "lrev-"))
def test_reference_of_an_l_network_as_it_stands(case):
    inputs, expected, within = case["inputs"], case["expected"], case["tolerance"]["rel"]
    network, load = named(inputs["elements"]), ohms(inputs["z_load_ohm"])
    values = np.array([e["value_si"] for e in inputs["elements"]])
    q = {e["kind"]: e["q"] for e in inputs["elements"]}
    problem = Problem(frequency=inputs["f_hz"], load=load, coil_q=q["L"], capacitor_q=q["C"])
    got = carried(ladder_of(network, values, problem), load, inputs["power_in_w"])
    assert got.input_impedance == pytest.approx(ohms(expected["z_in"]), rel=within)
    assert swr(got.input_impedance) == pytest.approx(expected["swr_in"], rel=within)
    assert got.loss_db == pytest.approx(expected["loss_db"], rel=within)
    assert got.voltages == pytest.approx(expected["v_rms"], rel=within)
    assert got.currents == pytest.approx(expected["i_rms"], rel=within)
    assert got.powers == pytest.approx(expected["p_element_w"], rel=within)
    assert got.load_power == pytest.approx(expected["p_load_w"], rel=within)
    backward = Problem(frequency=inputs["f_hz"], load=ohms(expected["load_matched_exactly_lossless"]))
    solutions = found(match(network, backward).values)
    assert min(np.max(np.abs(s / values - 1.0)) for s in solutions) < within


# Independent reference computation: design by the virtual resistance, chain matrices, scikit-rf.
@pytest.mark.parametrize("case", reference("networks", "pit-"))
def test_reference_pi_and_t(case):
    inputs, expected, within = case["inputs"], case["expected"], case["tolerance"]["rel"]
    network = named(expected["elements"])
    wanted = inputs["r_source_ohm"]
    problem = Problem(frequency=inputs["f_hz"], load=inputs["r_load_ohm"], wanted=wanted)
    solutions = found(match(network, problem, inputs["q_loaded"]).values)
    assert len(solutions) == 1
    values = solutions[0]
    assert values == pytest.approx([e["value_si"] for e in expected["elements"]], rel=within)
    lossy = Problem(
        frequency=inputs["f_hz"],
        load=inputs["r_load_ohm"],
        wanted=wanted,
        coil_q=inputs["q_inductor"],
        capacitor_q=inputs["q_capacitor"],
    )
    got = carried(ladder_of(network, values, lossy), lossy.load, inputs["power_in_w"])
    assert got.loss_db == pytest.approx(expected["loss_db"], rel=within)
    assert swr(got.input_impedance, wanted) == pytest.approx(expected["swr_lossy"], rel=within)
    assert got.voltages == pytest.approx(expected["v_rms_100w"], rel=within)
    assert got.currents == pytest.approx(expected["i_rms_100w"], rel=within)
    assert np.sqrt(2.0) * got.voltages == pytest.approx(expected["v_peak_100w"], rel=within)

    def swr_at(frequency):
        at = Problem(frequency=frequency, load=inputs["r_load_ohm"], wanted=wanted)
        return swr(seen(network, values, at), wanted)

    edges = width(swr_at, inputs["f_hz"])
    assert edges[0] == pytest.approx(expected["swr2_f_lo_hz"], rel=case["tolerance"]["swr2_f_lo_hz"]["rel"])
    assert edges[1] == pytest.approx(expected["swr2_f_hi_hz"], rel=case["tolerance"]["swr2_f_hi_hz"]["rel"])


# Independent reference computation: brentq on chain matrices, marching outward to a factor e^1.2.
@pytest.mark.parametrize("case", reference("networks", "lbw-"))
def test_reference_width_before_retuning(case):
    f0, load = case["inputs"]["f_hz"], ohms(case["inputs"]["z_load_ohm"])
    for solution in case["expected"]["solutions"]:
        network = named(solution["elements"])
        values = np.array([e["value_si"] for e in solution["elements"]])
        assert seen(network, values, Problem(frequency=f0, load=load)) == pytest.approx(50.0, rel=1e-12)

        def swr_at(frequency, network=network, values=values):
            slope = frequency / f0 if load.imag > 0.0 else f0 / frequency
            at = Problem(frequency=frequency, load=load.real + 1j * load.imag * slope)
            return swr(seen(network, values, at))

        edges = width(swr_at, f0, span=np.exp(1.2))
        for edge, key in zip(edges, ("swr2_f_lo_hz", "swr2_f_hi_hz"), strict=True):
            if solution[key] is None:
                assert np.isnan(edge)
            else:
                assert edge == pytest.approx(solution[key], rel=case["tolerance"]["rel"])


@pytest.mark.parametrize(
    "case", published("misra-matching", "pozar-example-5-1", "scilab-companion-2210-matching")
)
def test_published(case):
    inputs = case["given"]
    network, f = NETWORKS[inputs["network"]], inputs["frequency"]
    load = 1.0 / (1.0 / complex(*inputs["load"]) + 2j * np.pi * f * inputs.get("across", 0.0))
    problem = Problem(frequency=f, load=load, wanted=inputs["wanted"])
    values = match(network, problem, inputs.get("quality")).values
    if case["formula"] == "match reactances":
        coils = [arm.kind is Kind.COIL for arm in network.arms]
        with np.errstate(invalid="ignore"):
            values = np.where(coils, 2.0 * np.pi * f * values, 1.0 / (2.0 * np.pi * f * values))
    (values,) = found(values)
    assert values == pytest.approx(case["expect"], rel=case["within"])


resistances = st.floats(1.0, 3000.0)
problems = st.fixed_dictionaries(
    {
        "frequency": st.floats(1.8e6, 30e6),
        "load": st.builds(complex, resistances, st.floats(-2000.0, 2000.0)),
        "wanted": st.builds(complex, st.floats(10.0, 300.0), st.one_of(st.just(0.0), st.floats(-50.0, 50.0))),
    }
)
qualities = st.floats(0.3, 20.0)
losses = st.fixed_dictionaries({"coil_q": st.floats(50.0, 1e4), "capacitor_q": st.floats(200.0, 1e5)})
attenuations = st.floats(0.0, 0.01)


def line_at(frequency, attenuation, impedance):
    return LineConstants(
        gamma=attenuation + 2j * np.pi * frequency / (0.66 * 299792458.0), impedance=impedance
    )


@pytest.mark.parametrize("name", NETWORKS)
@fixed
@given(problems, qualities, losses, attenuations)
def test_every_network_brings_its_load_to_the_wanted_impedance(name, plain, quality, loss, attenuation):
    network = NETWORKS[name]
    quality = quality if len(network.arms) == 3 else None
    # A lossy line has a complex impedance; a twentieth of it reactive is much.
    lossless = Problem(**plain, line=line_at(plain["frequency"], 0.0, 75.0))
    lossy = Problem(**plain, **loss, line=line_at(plain["frequency"], attenuation, 75.0 - 4j))
    for problem, within in ((lossless, 1e-9), (lossy, 1e-6)):
        got = match(network, problem, quality)
        solutions = found(got.values)
        assert (got.status == MatchStatus.FOUND.value) == (len(solutions) > 0)
        for values in solutions:
            assert np.all(values >= 0.0)
            z = seen(network, values, problem)
            assert abs(z - problem.wanted) <= within * abs(problem.wanted)


@pytest.mark.parametrize("name", NETWORKS)
def test_every_network_has_matches_with_and_without_loss(name):
    network = NETWORKS[name]
    real, imag = (np.ravel(a) for a in np.meshgrid(np.geomspace(5, 2000, 16), np.linspace(-500, 500, 21)))
    lossy = Problem(
        frequency=7.1e6,
        load=real + 1j * imag,
        coil_q=200.0,
        capacitor_q=2000.0,
        line=line_at(7.1e6, 0.0005, 75.0 - 0.2j),
    )
    quality = 6.0 if len(network.arms) == 3 else None
    before, after = (match(network, p, quality).values for p in (lossy.lossless(), lossy))
    there = ~np.isnan(before[:, 0])
    assert np.count_nonzero(there) > 40
    # Retuning loses a solution only where it is about to vanish anyway.
    assert np.count_nonzero(np.isnan(after[:, 0]) & there) < 0.1 * np.count_nonzero(there)


@fixed
@given(problems)
def test_l_networks_exist_where_theory_has_them(plain):
    plain["wanted"] = plain["wanted"].real
    problem, load, wanted = Problem(**plain), plain["load"], plain["wanted"]
    # On the border both solutions are one, and where an arm drops out its kind is free.
    assume(min(abs((1.0 / load).real * wanted - 1.0), abs(load.real / wanted - 1.0)) > 1e-9)
    assume(abs(load.imag) > 1e-9 or load.imag == 0.0)
    counts = {
        side: sum(len(found(match(NETWORKS[n], problem).values)) for n in L_FORMS if side in n)
        for side in ("load", "source")
    }
    # By hand: G R_w <= 1 with the shunt arm at the load, R <= R_w with it at the source; two signs of a root.
    assert counts == {
        "load": 2 * ((1.0 / load).real * wanted < 1.0),
        "source": 2 * (load.real < wanted),
    }


def test_status_says_whether_other_kinds_would_do():
    load = np.array([300.0, 20.0 + 100j, 20.0])
    got = match(NETWORKS["l-load-low-pass"], Problem(frequency=7e6, load=load)).status
    assert got.tolist() == ["found", "found", "outside"]
    got = match(NETWORKS["l-load-coils"], Problem(frequency=7e6, load=load)).status
    assert got.tolist() == ["other kinds", "other kinds", "outside"]


def test_arms_that_drop_out():
    problem = Problem(frequency=7e6, load=50.0, coil_q=100.0, capacitor_q=1000.0)
    for name, gone in (("l-load-low-pass", [0.0, 0.0]), ("l-load-high-pass", [np.inf, np.inf])):
        network = NETWORKS[name]
        assert any(np.array_equal(v, gone) for v in match(network, problem).values)
        assert seen(network, np.array(gone), problem) == 50.0
        assert len(found(match(network, problem.lossless()).values)) == 1  # a double root counts once


@pytest.mark.parametrize("name", ["stub-open", "stub-shorted"])
def test_stub_at_the_load_that_loss_moves_beyond_it(name):
    # Conductance 1/50 S at the load: without loss one stub sits there. With loss it would have to sit behind
    # the load, so the one half a wave before it is taken.
    load = 1.0 / (1.0 / 50.0 + 0.03j)
    problem = Problem(frequency=7.1e6, load=load, line=line_at(7.1e6, 0.002, 75.0 - 1j))
    before, after = (match(NETWORKS[name], p).values for p in (problem.lossless(), problem))
    half_wave = 0.5 * 0.66 * 299792458.0 / 7.1e6
    index = int(np.argmin(before[:, 1]))
    assert before[index, 1] == pytest.approx(0.0, abs=1e-6)
    assert after[index, 1] == pytest.approx(half_wave, rel=0.02)
    for values in after:
        assert seen(NETWORKS[name], values, problem) == pytest.approx(50.0, rel=1e-6)


@pytest.mark.parametrize("name", NETWORKS)
def test_array_equals_scalar_one_by_one(name):
    network = NETWORKS[name]
    rng = np.random.default_rng(3)
    f = rng.uniform(3e6, 15e6, (4, 1))
    load = rng.uniform(5.0, 800.0, 5) + 1j * rng.uniform(-300.0, 300.0, 5)
    quality = 5.0 if len(network.arms) == 3 else None

    def problem(f, load):
        return Problem(frequency=f, load=load, coil_q=150.0, line=line_at(f, 0.001, 75.0 - 0.5j))

    many = match(network, problem(f, load), quality)
    assert many.status.shape == (4, 5)
    for i in range(4):
        for j in range(5):
            one = match(network, problem(f[i, 0], load[j]), quality)
            assert many.values[..., i, j] == pytest.approx(one.values, rel=1e-9, nan_ok=True)
            assert many.status[i, j] == one.status


def part(place, r, x, z, g, turn):
    """Return a passive part: a line has series and shunt constants of its own, so it only loses."""
    if place is not Place.LINE:
        return Part(place=place, impedance=complex(r, x))
    along, across = complex(g * r / 200.0, 1.0), complex(g, 1.0)
    return Part(place=place, impedance=z * np.sqrt(along / across), turn=turn * np.sqrt(along * across))


branches = st.builds(
    part,
    st.sampled_from(Place),
    st.floats(0.01, 200.0),
    st.floats(-2000.0, 2000.0),
    st.floats(20.0, 600.0),
    st.floats(0.0, 0.1),
    st.floats(0.0, 6.0),
)


def chain_matrix(part):
    z = complex(part.impedance)
    if part.place is Place.SERIES:
        return [[1.0, z], [0.0, 1.0]]
    if part.place is Place.SHUNT:
        return [[1.0, 0.0], [1.0 / z, 1.0]]
    return [
        [np.cosh(part.turn), z * np.sinh(part.turn)],
        [np.sinh(part.turn) / z, np.cosh(part.turn)],
    ]


@fixed
@given(
    st.lists(branches, min_size=1, max_size=5),
    st.builds(complex, resistances, st.floats(-500, 500)),
    st.floats(0.1, 1500.0),
)
def test_ladder_keeps_power_and_agrees_with_a_cascade(parts, load, power):
    got = carried(Ladder(parts=tuple(parts)), load, power)
    # What goes in equals what comes out and the heat; rounding grows with the volt-amperes that swing.
    swing = 1.0 + np.max(got.voltages * got.currents) / power
    assert abs(got.load_power + got.powers.sum() - power) <= 1e-12 * power * swing
    assert got.efficiency == pytest.approx(got.load_power / power, rel=1e-12)
    assert got.loss_db == pytest.approx(-10.0 * np.log10(got.efficiency), abs=1e-12)
    assert got.load_voltage == pytest.approx(abs(load) * got.load_current, rel=1e-12)
    assert got.load_power == pytest.approx(load.real * got.load_current**2, rel=1e-9)
    # scikit-rf: wave parameters of each part, cascaded and closed with the load.
    one = skrf.Frequency(7, 7, 1, "MHz")
    whole = None
    for part in parts:
        waves = skrf.Network(
            frequency=one, s=skrf.network.a2s(np.array([chain_matrix(part)], dtype=complex)), z0=50
        )
        whole = waves if whole is None else whole**waves
    end = skrf.Network(frequency=one, s=np.array([[[(load - 50.0) / (load + 50.0)]]]), z0=50)
    r_in, r_end, s = (whole**end).s[0, 0, 0], end.s[0, 0, 0], whole.s[0]
    z_in = 50.0 * (1.0 + r_in) / (1.0 - r_in)
    # Waves on 50 ohm carry an impedance z with a relative rounding of about |z/50| + |50/z|.
    blur = 1e-11 * (abs(z_in) / 50.0 + 50.0 / abs(z_in)) * swing
    assert abs(got.input_impedance - z_in) <= blur * abs(z_in)
    passed = abs(s[1, 0]) ** 2 * (1.0 - abs(r_end) ** 2) / abs(1.0 - s[1, 1] * r_end) ** 2
    if 1.0 - abs(r_in) ** 2 > 1e-6:
        assert got.efficiency == pytest.approx(passed / (1.0 - abs(r_in) ** 2), rel=1e-6)


def test_ladder_over_frequency_and_trials():
    f = np.linspace(6.9e6, 7.3e6, 7)
    load = np.array([[60.0 + 20j], [35.0 - 80j]]) * np.ones(7)
    values = np.array([150e-12, 2e-6, 220e-12])
    many = Problem(frequency=f, load=load, coil_q=150.0, capacitor_q=1000.0)
    got = carried(ladder_of(C_L_C, values, many), load, 100.0)
    assert got.powers.shape == (3, 2, 7)
    for i in range(2):
        for j in range(7):
            one = Problem(frequency=f[j], load=load[i, j], coil_q=150.0, capacitor_q=1000.0)
            alone = carried(ladder_of(C_L_C, values, one), load[i, j], 100.0)
            assert got.input_impedance[i, j] == pytest.approx(alone.input_impedance, rel=1e-14)
            assert got.powers[:, i, j] == pytest.approx(alone.powers, rel=1e-12)


def test_touchiness_by_hand():
    # At a match, 1 % of the arm at the source puts dz = 0.01 z in series: |reflection| = |dz/(2 R + dz)|.
    network = NETWORKS["l-load-low-pass"]
    problem = Problem(frequency=7.1e6, load=600.0 + 100j)
    values = found(match(network, problem).values)[0]
    step = 0.01j * 2.0 * np.pi * 7.1e6 * values[0]
    r = abs(step / (100.0 + step))
    got = touchiness(network, values, problem)
    assert got[0] == pytest.approx((1.0 + r) / (1.0 - r) - 1.0, rel=1e-9)
    # The capacitor carries as much reactive power as the coil, so it is as touchy, to first order.
    reactive = carried(ladder_of(network, values, problem), problem.load)
    ratio = (reactive.voltages * reactive.currents)[1] / (reactive.voltages * reactive.currents)[0]
    assert got[1] / got[0] == pytest.approx(ratio, rel=0.05)


def test_problems_refused():
    good = {"frequency": 7e6, "load": 50.0}
    for bad, message in [
        ({"frequency": 0.0}, "frequency must be finite and above 0"),
        ({"load": -1.0}, "load must be finite and its resistance above 0"),
        ({"load": np.nan}, "load must be finite and its resistance above 0"),
        ({"wanted": 1j}, "wanted must be finite and its resistance above 0"),
        ({"coil_q": 0.0}, "coil_q must be above 0; infinite means no loss"),
        ({"capacitor_q": np.nan}, "capacitor_q must be above 0; infinite means no loss"),
        ({"line": LineConstants(gamma=0.1j, impedance=0.0)}, "characteristic impedance must be finite"),
        ({"line": LineConstants(gamma=0.1, impedance=50.0)}, "phase constant must be finite and above 0"),
    ]:
        with pytest.raises(ValueError, match=message):
            Problem(**{**good, **bad})
    plain, box = Problem(**good), limits(C_L_C, (0.0, 1e-5), (0.0, 1e-9))
    for call, message in [
        (lambda: match(C_L_C, plain), "quality must be given for a network of three arms"),
        (lambda: match(NETWORKS["l-load-coils"], plain, 3.0), "quality must be given for networks of three"),
        (lambda: match(NETWORKS["stub-open"], plain), "line must be given"),
        (lambda: matching.least_loss(NETWORKS["stub-open"], plain, box), "network must consist of coils"),
        (lambda: matching.least_loss(NETWORKS["l-load-coils"], plain, box), "limits for 2 arms"),
        (lambda: limits(C_L_C, (2e-6, 1e-6), (0.0, 1e-9)), "high must be at least low"),
        (lambda: limits(C_L_C, (-1e-6, 1e-6), (0.0, 1e-9)), "low must be finite and at least 0"),
        (lambda: nearest.snap(C_L_C, plain, box, (None, None)), "an entry for each of 3 arms"),
        (lambda: carried(Ladder(parts=()), 50.0, -1.0), "power must be finite and at least 0"),
        (lambda: input_impedance(Ladder(parts=()), -5.0), "load must be finite and its resistance above 0"),
        (
            lambda: input_impedance(Ladder(parts=(Part(place=Place.SHUNT, impedance=0.0),)), 50.0),
            "impedance of a shunt branch must not be 0",
        ),
    ]:
        with pytest.raises(ValueError, match=message):
            call()


def test_registry():
    assert all(len(n.arms) in (2, 3) and n.title for n in NETWORKS.values())
    assert len({n.arms for n in NETWORKS.values()}) == len(NETWORKS)
    assert len({n.title for n in NETWORKS.values()}) == len(NETWORKS)
    assert networks.MATCHED < 1e-9
