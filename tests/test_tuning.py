"""The tuner against independent references, searches and published examples; its reach; its verbs."""

import json
import math
from dataclasses import replace
from itertools import product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.cases import published, reference
from trapdesk.design.station import (
    TUNER_NETWORKS,
    FeedLine,
    Tap,
    Tuner,
    TunerCapacitor,
    TunerCoil,
    TunerPlace,
)
from trapdesk.engine.arms import Problem
from trapdesk.engine.ladder import carried, input_impedance
from trapdesk.engine.networks import NETWORKS, ladder_of
from trapdesk.faces import cli, feed_out
from trapdesk.services.antenna.feed_point import FeedPoint
from trapdesk.services.antenna.solve import solve
from trapdesk.services.compare.reach import reach_map, reading, tuner_answer
from trapdesk.services.feed import tuner as tuning
from trapdesk.services.feed.path import Path
from trapdesk.store import store

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=40)
DESIGN, _ = store.preset("40-20-vee")


def number(pair):
    return complex(pair["re"], pair["im"])


def wide(network, q=100.0, capacitor_q=1000.0):
    """Return a tuner whose parts hardly limit it."""
    coil = TunerCoil(low=0.0, high=1e-3, q=q)
    return Tuner(network=network, coil=coil, capacitor=TunerCapacitor(low=0.0, high=1e-6, q=capacitor_q))


def problem(tuner, frequency, load, wanted=50.0):
    return tuning.problem_of(tuner, frequency, load, wanted)


@pytest.fixture
def call(capsys):
    def caller(*arguments):
        code = cli.main(list(arguments))
        out, err = capsys.readouterr()
        return code, out, err

    return caller


@fixed
@given(
    st.sampled_from(["t-clc", "t-lcl", "pi-clc", "pi-lcl"]),
    st.floats(1.8e6, 30e6),
    st.floats(2, 2000),
    st.floats(-1000, 1000),
    st.floats(20, 200),
)
def test_a_setting_shows_what_is_wanted_with_its_loss(network, frequency, resistance, reactance, wanted):
    load = complex(resistance, reactance)
    for q, within in ((1e12, 1e-9), (100.0, 1e-6)):
        tuner = wide(network, q, 1e12 if q > 1e6 else 1000.0)
        setting = tuning.tune_at(tuner, frequency, load, wanted)
        if not setting.matched:
            continue
        assert abs(setting.impedance / wanted - 1) < within
        # Computed afresh from the values alone.
        again = input_impedance(
            ladder_of(NETWORKS[network], setting.values, problem(tuner, frequency, load)), load
        )
        assert abs(again / wanted - 1) < within
        assert sum(e.share for e in setting.elements) == pytest.approx(1 - setting.efficiency, abs=1e-12)


# Independent reference computation: scan of the family of matches, and differential evolution.
@pytest.mark.parametrize("case", reference("networks", "tmin"))
def test_reference_setting_of_least_loss(case):
    inputs, expected, within = case["inputs"], case["expected"], case["tolerance"]
    tuner = Tuner(
        coil=TunerCoil(low=inputs["l_min_h"], high=inputs["l_max_h"], q=inputs["q_inductor"]),
        capacitor=TunerCapacitor(low=inputs["c_min_f"], high=inputs["c_max_f"], q=inputs["q_capacitor"]),
    )
    setting = tuning.tune_at(tuner, inputs["f_hz"], number(inputs["z_load_ohm"]), 50.0)
    assert setting.loss == pytest.approx(expected["loss_db"], abs=within["loss_db"]["abs"])
    for name, value in zip(("c_source_f", "l_h", "c_load_f"), setting.values, strict=True):
        assert value == pytest.approx(expected[name], rel=within[name]["rel"])
    root = math.sqrt(inputs["power_in_w"])
    for element, volts, amps, watts in zip(
        setting.elements, expected["v_rms_100w"], expected["i_rms_100w"], expected["p_element_w"], strict=True
    ):
        assert root * element.volts == pytest.approx(math.sqrt(2) * volts, rel=2e-3)
        assert root * element.amps == pytest.approx(amps, rel=2e-3)
        assert 100 * element.share == pytest.approx(watts, rel=2e-3)


# Independent reference computation: closed forms within the limits of both circuits of an L tuner.
@pytest.mark.parametrize("case", reference("networks", "tuner-region"))
def test_reference_reach_of_an_l_tuner(case):
    box = case["inputs"]["box"]
    tuner = Tuner(
        network="l-low-pass",
        coil=TunerCoil(low=box["l_min_h"], high=box["l_max_h"], q=5000.0),
        capacitor=TunerCapacitor(low=box["c_min_f"], high=box["c_max_f"], q=1e5),
    )
    tuner = replace(tuner, coil=replace(tuner.coil, q=1e9), capacitor=replace(tuner.capacitor, q=1e9))
    for result in case["expected"]["results"]:
        setting = tuning.tune_at(tuner, result["f_hz"], number(result["z_load_ohm"]), 50.0)
        assert setting.matched == result["can_match"]
        assert setting.swr == pytest.approx(result["best_swr_in_box"], rel=1e-3)


def test_least_loss_is_not_beaten_on_a_fine_grid():
    """By brute force: the last capacitor and the coil on fine grids."""
    tuner = Tuner()
    for frequency, load in ((7.1e6, 35 - 120j), (3.6e6, 300 + 200j), (14.2e6, 15 + 60j)):
        setting = tuning.tune_at(tuner, frequency, load, 50.0)
        assert setting.matched
        w, q_l, q_c = 2 * np.pi * frequency, tuner.coil.q, tuner.capacitor.q
        best = np.inf
        for c_load in np.geomspace(15e-12, 250e-12, 400):
            z = load + (1 / q_c - 1j) / (w * c_load)
            coil = np.geomspace(1e-7, 28e-6, 4000)
            y = 1 / z + 1 / (w * coil * (1 / q_l + 1j))
            seen = 1 / y
            # What is left for the series capacitor: resistance 50 with its own loss, reactance taken out.
            x = seen.imag
            miss = seen.real + np.abs(x) / q_c - 50
            ok = (
                (x > 0)
                & (1 / (w * np.maximum(x, 1e-9)) >= 15e-12)
                & (1 / (w * np.maximum(x, 1e-9)) <= 250e-12)
            )
            for i in np.flatnonzero(miss[:-1] * miss[1:] <= 0):
                if ok[i] and ok[i + 1]:
                    t = miss[i] / (miss[i] - miss[i + 1])
                    length = coil[i] + t * (coil[i + 1] - coil[i])
                    y_l = 1 / (w * length * (1 / q_l + 1j))
                    z_in = 1 / (1 / z + y_l)
                    share = (load.real / z.real) * ((1 / z).real / (1 / z + y_l).real)
                    best = min(best, -10 * np.log10(share * z_in.real / (z_in.real + z_in.imag / q_c)))
        assert setting.loss <= best + 1e-6
        assert best - setting.loss < 0.02


def test_steps_give_the_least_swr_of_all_combinations():
    tuner = Tuner(
        network="l-low-pass",
        coil=TunerCoil(low=0.0, high=12e-6, steps=25.0),
        capacitor=TunerCapacitor(low=0.0, high=1.2e-9, steps=25.0),
    )
    for load in (35 - 120j, 300 + 50j, 12 + 5j):
        setting = tuning.tune_at(tuner, 7.1e6, load, 50.0)
        every = np.array(list(product(np.linspace(0, 12e-6, 25), np.linspace(0, 1.2e-9, 25)))).T
        every = np.maximum(every, 1e-15)
        least = np.inf
        for name in TUNER_NETWORKS["l-low-pass"]:
            network = NETWORKS[name]
            values = every if str(network.arms[0].kind) == "coil" else every[::-1]
            many = problem(tuner, 7.1e6, np.full(every.shape[1], load))
            z = input_impedance(ladder_of(network, values, many), many.load)
            r = np.abs((z - 50) / (z + 50))
            least = min(least, float(((1 + r) / (1 - r)).min()))
        assert setting.swr == pytest.approx(least, rel=1e-9)
        assert all(1 <= e.step <= 25 for e in setting.elements)


def test_many_steps_are_still_near_the_best():
    free = Tuner(network="l-low-pass", capacitor=TunerCapacitor(low=0.0, high=2e-9))
    stepped = replace(
        free,
        coil=TunerCoil(low=0.0, high=16e-6, steps=1024.0),
        capacitor=TunerCapacitor(low=0.0, high=2e-9, steps=1024.0),
    )
    setting = tuning.tune_at(stepped, 7.1e6, 35 - 120j, 50.0)
    assert setting.matched and setting.swr < 1.05


def test_taps_are_taken_as_they_are():
    taps = tuple(Tap(inductance=value) for value in (1e-6, 2e-6, 4e-6, 8e-6))
    setting = tuning.tune_at(Tuner(coil=TunerCoil(taps=taps)), 7.1e6, 35 - 120j, 50.0)
    coil = next(e for e in setting.elements if e.kind == "coil")
    assert coil.value in (1e-6, 2e-6, 4e-6, 8e-6) and coil.step in (1, 2, 3, 4)
    assert setting.matched and setting.swr == pytest.approx(1.0, abs=1e-6)


def test_parts_of_their_own_beside_the_antenna():
    other = TunerCapacitor(low=15e-12, high=500e-12)
    setting = tuning.tune_at(Tuner(load_capacitor=other), 3.6e6, 35 - 120j, 50.0)
    assert [e.high for e in setting.elements] == [250e-12, 28e-6, 500e-12]
    assert setting.loss < tuning.tune_at(Tuner(), 3.6e6, 35 - 120j, 50.0).loss


def test_what_runs_short_and_by_how_much():
    tuner = Tuner(coil=TunerCoil(high=3e-6))
    short = tuning.tune_at(tuner, 3.6e6, 2 - 900j, 50.0)
    assert not short.matched and short.short.kind == "coil" and short.short.limit == 3e-6
    enough = replace(tuner, coil=TunerCoil(high=1.0001 * short.short.needed))
    assert tuning.tune_at(enough, 3.6e6, 2 - 900j, 50.0).matched


def test_many_loads_as_one_by_one():
    frequency = np.array([7e6, 7.1e6, 14.2e6])
    loads = np.array([35 - 120j, 200 + 20j, 12 - 300j])
    for network in ("t-clc", "l-low-pass", "pi-clc"):
        tuner = Tuner(network=network, capacitor=TunerCapacitor(low=0.0, high=2e-9))
        many = tuning.tune(tuner, frequency, loads, 50.0)
        for i, (f, z) in enumerate(zip(frequency, loads, strict=True)):
            one = tuning.tune_at(tuner, float(f), complex(z), 50.0)
            assert many.efficiency[i] == pytest.approx(one.efficiency, rel=1e-9)
            assert many.matched[i] == one.matched
            coils = [e.share for e in one.elements if e.kind == "coil"]
            assert many.coil_share[i] == pytest.approx(max(coils), rel=1e-9)
            assert many.all_coils[i] + many.all_capacitors[i] == pytest.approx(1 - one.efficiency, abs=1e-12)


# ---- on a design


def tuned(**tuner):
    station = replace(DESIGN.station, line=FeedLine(length=25.0), tuner=Tuner(**tuner))
    return solve(replace(DESIGN, station=station))


AT_RADIO = tuned()


@pytest.mark.parametrize("place", list(TunerPlace))
def test_answer_on_a_design(place):
    figures = AT_RADIO if place is TunerPlace.TRANSMITTER else tuned(place=place)
    path, point = Path(figures.design.station), FeedPoint(figures)
    for role, band in figures.bands.items():
        answer = tuner_answer(figures, role)
        assert answer.aim.values == pytest.approx(band.feed.tuner.values, rel=1e-6)
        assert [s.frequency for s in answer.over] == list(getattr(DESIGN.bands, role).wanted_edges)
        assert all(s.matched for s in (answer.aim, *answer.over))
        # The width by a fine walk outwards with the setting left alone.
        frequency = np.linspace(answer.width[0], answer.width[1], 2001)
        z = path.transmitter_sees(frequency, point.impedance(role, frequency), answer.aim)
        r = np.abs((z - 50) / (z + 50))
        assert np.all((1 + r) / (1 - r) <= 2.001)
        assert (1 + r[0]) / (1 - r[0]) == pytest.approx(2, abs=2e-3)
        assert (1 + r[-1]) / (1 - r[-1]) == pytest.approx(2, abs=2e-3)


def test_touch_is_one_per_cent_off():
    setting = AT_RADIO.bands["lower"].feed.tuner
    network = NETWORKS[setting.network]
    one = Problem(frequency=setting.frequency, load=setting.load, coil_q=100.0, capacitor_q=1000.0)
    for i, element in enumerate(setting.elements):
        swrs = []
        for change in (0.99, 1.01):
            values = np.array(setting.values)
            values[i] *= change
            z = carried(ladder_of(network, values, one), setting.load).input_impedance
            r = abs((z - 50) / (z + 50))
            swrs.append((1 + r) / (1 - r))
        assert 1 + element.touch == pytest.approx(max(swrs) / setting.swr, rel=1e-6)


@pytest.mark.parametrize("network", ["t-clc", "l-low-pass"])
def test_map_agrees_with_the_setting_at_each_load(network):
    figures = tuned(network=network)
    found = reach_map(figures, "lower", columns=15, lines=11)
    assert 0 < found.share < 1
    for i, j in product(range(0, 11, 2), range(0, 15, 2)):
        one = reading(found, complex(found.resistance[j], found.reactance[i]))
        assert one.matched == np.isfinite(found.loss[i, j])
        if one.matched:
            assert one.loss <= found.loss[i, j] + 1e-9
        else:
            assert one.short is not None
    own = figures.bands["lower"].feed.line.input
    assert found.aim == pytest.approx(own, rel=1e-6)


# ---- the verb match


@pytest.mark.parametrize(
    "case",
    [
        case
        for case in published("misra-matching", "pozar-example-5-1", "scilab-companion-2210-matching")
        if case.values[0]["formula"] == "match" and "across" not in case.values[0]["given"]
    ],
)
def test_verb_match_on_published_examples(call, case):
    """The examples take parts without loss: the values before retuning."""
    inputs = case["given"]
    typed = [
        f"Z={inputs['load'][0]}{inputs['load'][1]:+}j",
        f"f={inputs['frequency']}Hz",
        f"wanted={inputs['wanted']}",
        f"network={inputs['network']}",
    ]
    if "quality" in inputs:
        typed.append(f"Q={inputs['quality']}")
    code, out, _ = call("match", *typed, "--json")
    assert code == 0
    expected = case["expect"]
    ways = [
        [part.get("lossless_inductance_h", part.get("lossless_capacitance_f")) for part in one["parts"]]
        for one in json.loads(out)["solutions"]
    ]
    assert any(way == pytest.approx(expected, rel=case["within"]) for way in ways)


# Independent reference computation: all exact L networks.
@pytest.mark.parametrize("case", reference("networks", "lnet"))
def test_verb_match_finds_every_l_network(call, case):
    inputs, expected = case["inputs"], case["expected"]
    load = number(inputs["z_load_ohm"])
    code, out, _ = call(
        "match",
        f"Z={load.real}{load.imag:+}j",
        f"f={inputs['f_hz']}Hz",
        f"QL={inputs['q_inductor']}",
        f"QC={inputs['q_capacitor']}",
        "--json",
    )
    found = json.loads(out)["solutions"]
    assert (code, len(found)) == (0, expected["count"])
    assert [one["loss_db"] for one in found] == sorted(one["loss_db"] for one in found)
    for solution in expected["solutions"]:
        wanted = [e["value_si"] for e in solution["elements_retuned"]]
        (same,) = [
            one
            for one in found
            if [p.get("inductance_h", p.get("capacitance_f")) for p in one["parts"]]
            == pytest.approx(wanted, rel=1e-6)
        ]
        assert same["loss_db"] == pytest.approx(solution["loss_db_retuned"], rel=1e-6)
        assert same["not_retuned_swr"] == pytest.approx(solution["swr_not_retuned"], rel=1e-6)
        assert [p["peak_v"] for p in same["parts"]] == pytest.approx(solution["v_peak_100w"], rel=1e-6)
        assert [p["w"] for p in same["parts"]] == pytest.approx(solution["p_element_100w"], rel=1e-6)


def test_verb_match_with_a_tuner_from_a_file(call, tmp_path):
    text = store.preset("40-20-vee")[1] + '\n[station.tuner]\nnetwork = "pi-clc"\n'
    path = tmp_path / "hut.toml"
    path.write_text(text + '[station.tuner.capacitor]\nhigh = "1 nF"\n', "utf-8")
    code, out, _ = call("match", "Z=35 -120", "f=7.1MHz", f"tuner={path}", "--json")
    (setting,) = json.loads(out)["settings"]
    assert (code, setting["network"], setting["matched"]) == (0, "pi-clc", True)
    code, _, err = call("match", "Z=35 -120", "f=7.1MHz", "tuner=40-20-vee")
    assert code == 2 and "holds no tuner" in err


def test_verb_match_says_what_is_short(call):
    code, out, err = call("match", "Z=2-j900", "f=3.6MHz", "network=t-clc", "Lmax=3uH")
    assert (code, out) == (1, "")
    assert "no setting of this tuner matches it" in err and "it reaches 3 uH" in err
    assert "the nearest is" in err and len(err.splitlines()) == 1


@pytest.mark.parametrize(
    ("typed", "code", "told"),
    [
        (("Z=0+j5", "f=7MHz"), 2, "Z: '0+j5': resistance is not above zero"),
        (("Z=-5", "f=7MHz"), 2, "Z: '-5': resistance is not above zero"),
        (("Z=50",), 2, "f: a value is missing"),
        (("Z=5O", "f=7MHz"), 2, "Z: cannot read '5O'"),
        (("Z=20", "f=7MHz", "network=t-clk"), 2, "network: 't-clk': unknown network; did you mean"),
        (("Z=20", "f=7MHz", "network=stub-open"), 2, "line: a value is missing"),
        (("Z=20", "f=7MHz", "Lmin=3uH", "Lmax=2uH"), 2, "Lmin: leaves nothing to set"),
        (("Z=20", "f=7MHz", "Z=30"), 2, "'Z' is given twice"),
        (("Z=2000", "f=7MHz", "network=l-source-low-pass"), 1, "Z: no match with these parts"),
    ],
)
def test_verb_match_refuses_in_one_line(call, typed, code, told):
    got, out, err = call("match", *typed)
    assert (got, out) == (code, "")
    assert err.startswith(f"trapdesk: {told}") and len(err.splitlines()) == 1


def test_verb_match_cuts_stubs_from_a_line(call):
    code, out, _ = call("match", "Z=35-j120", "f=14.2MHz", "network=stub-shorted", "line=RG-213/U", "--json")
    (first, *_) = json.loads(out)["solutions"]
    assert code == 0 and first["swr"] == pytest.approx(1.0, abs=1e-6)
    assert all(0 < part["length_m"] < 10 for part in first["parts"])


# ---- the verb tuner


@pytest.mark.parametrize("name", store.presets())
def test_verb_tuner_on_every_preset(call, name):
    code, out, err = call("tuner", name, "--line", "RG-58", "--length", "25m", "--load", "5-j900")
    assert (code, err) == (0, "")
    assert out.isascii() and max(map(len, out.splitlines())) <= 79
    assert out.count("= from the transmitter") == 2 and out.count("in reach of the tuner") == 2
    assert "The cheapest improvement" in out


def test_verb_tuner_in_json(call):
    found = json.loads(call("tuner", "40-20-vee", "--line", "RG-58", "--load", "35-j120", "--json")[1])
    lower = found["bands"]["lower"]
    assert lower["load"]["z_load_ohm"] == [35, -120]
    assert len(lower["reach"]["loss_db"]) == len(lower["reach"]["reactance_ohm"])
    assert found["advice"] == "as it is"
    assert sum(step.get("lost_w", 0) for step in lower["way_down"]) == pytest.approx(100, rel=1e-9)


@pytest.mark.parametrize(
    ("typed", "told"),
    [
        (("--load", "-5"), "--load: '-5': resistance is not above zero"),
        (("--load", "0+j5"), "--load: '0+j5': resistance is not above zero"),
        (("--line", "RG-99"), "--line: 'RG-99' is not one of"),
        (("--length", "0m"), "--length: '0m' is outside"),
    ],
)
def test_verb_tuner_refuses_in_one_line(call, typed, told):
    code, out, err = call("tuner", "40-20-vee", *typed)
    assert (code, out) == (2, "") and told in err and len(err.splitlines()) == 1


def test_map_shows_antenna_axes_and_the_reading():
    found = reach_map(AT_RADIO, "upper")
    lines = list(feed_out.map_lines(AT_RADIO, found, "upper"))
    assert any("X" in line[11:] for line in lines[1:22])
    assert lines[22].strip().startswith("X, ohm") and "R, ohm" in lines[23]
    assert "SWR 1.0" in lines[-1]
