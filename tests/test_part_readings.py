"""Readings of parts: what they tell together, how sure, what contradicts what, and what is not believed."""

import math

import numpy as np
import pytest

from tests.cases import HERE, reference
from trapdesk.design.design import with_value
from trapdesk.engine.fits import Sweep, loop_impedance
from trapdesk.engine.resonator import impedance
from trapdesk.errors import NoAnswer
from trapdesk.services.bench.part_readings import find
from trapdesk.services.trap.built import build
from trapdesk.services.trap.part_values import ReadingRefused, ReadingsDisagree
from trapdesk.store import store
from trapdesk.store.sweep_files import read
from trapdesk.units.reading_text import parse

DESIGN = store.preset("40-20-vee")[0]
BUILT = build(DESIGN.antenna.trap)
GIVEN = store.preset("80-40-flat")[0]


def found(*texts, sweeps=None, design=DESIGN):
    return find(design, parse(texts), sweeps or {})


def test_resonance_alone_tells_neither_coil_nor_capacitor():
    answer = found("trap.f0=13.98MHz,doubt=10kHz")
    assert (answer.resonance.value, answer.resonance.sigma) == pytest.approx((13.98e6, 10e3))
    assert answer.inductance is answer.capacitance is answer.q is None
    assert answer.computed["resonance"] == BUILT.resonance


def test_probe_is_taken_off():
    # 1.5 pF more across the computed capacitance lowers the resonance by the root of the ratio.
    # The trap is 1 % off what was computed; whether coil or capacitor is matters by 1 % of that correction.
    c = BUILT.capacitance
    answer = found("trap.f0=13.98MHz,probe=1.5pF")
    assert answer.resonance.value == pytest.approx(13.98e6 * math.sqrt((c + 1.5e-12) / c), rel=2e-4)
    assert answer.resonance.sigma > 1.1 * found("trap.f0=13.98MHz").resonance.sigma


@pytest.mark.parametrize("case", reference("readings", "read-2f"))
def test_two_resonances_as_the_reference(case):
    i, e = case["inputs"], case["expected"]
    design = GIVEN
    for key, value in (("resonance", i["f_alone_hz"]), ("capacitor.capacitance", e["c_f"])):
        design = with_value(design, f"antenna.trap.{key}", value)
    answer = find(
        design,
        parse([
            f"trap.f0={i['f_alone_hz']}Hz,doubt={i['sigma_f_alone_hz']}Hz",
            f"trap.f0_with={i['f_with_added_hz']}Hz,doubt={i['sigma_f_with_hz']}Hz,added=50pF,added_doubt=0.5pF",
        ]),
        {},
    )  # fmt: skip
    assert answer.capacitance.value == pytest.approx(e["c_f"], rel=1e-10)
    assert answer.inductance.value == pytest.approx(e["l_h"], rel=1e-10)
    # The added capacitor's doubt is put into the second frequency: the same to first order.
    assert answer.capacitance.sigma == pytest.approx(e["sigma_c_f"], rel=2e-3)
    assert answer.inductance.sigma == pytest.approx(e["sigma_l_h"], rel=2e-3)
    # The reference's Monte Carlo, 4e5 draws: its own scatter is about 0.1 %.
    assert answer.capacitance.sigma == pytest.approx(e["mc_sigma_c_f"], rel=5e-3)
    assert answer.inductance.sigma == pytest.approx(e["mc_sigma_l_h"], rel=5e-3)


def test_ninety_per_cent_of_traps_within_ninety_per_cent_intervals():
    # 300 traps, their readings drawn with the stated doubts: hits within 3.3 sigma of the count, 90 +- 6 %.
    rng = np.random.default_rng(5)
    hits = {"resonance": 0, "inductance": 0, "capacitance": 0}
    n = 300
    for _ in range(n):
        l, c = (  # noqa: E741 - the document's symbol
            BUILT.inductance * math.exp(0.03 * rng.normal()),
            BUILT.capacitance * math.exp(0.03 * rng.normal()),
        )
        added = 22e-12 * (1 + 0.01 * rng.normal())
        probe = 1.5e-12
        f = [1 / (2 * math.pi * math.sqrt(l * (c + extra + probe))) for extra in (0.0, added)]
        f = [value * (1 + 0.001 * rng.normal()) for value in f]
        answer = found(f"trap.f0={f[0]!r}Hz,probe=1.5pF", f"trap.f0_with={f[1]!r}Hz,probe=1.5pF,added=22pF")
        true = {"resonance": 1 / (2 * math.pi * math.sqrt(l * c)), "inductance": l, "capacitance": c}
        for name in hits:
            one = getattr(answer, name)
            hits[name] += abs(one.value - true[name]) < 1.645 * one.sigma
    for name, count in hits.items():
        assert 0.84 <= count / n <= 0.96, name


def test_several_capacitors_and_a_meter_make_it_surer():
    l, c = BUILT.inductance, BUILT.capacitance  # noqa: E741 - the document's symbols
    texts = [
        f"trap.f0_with={1 / (2 * math.pi * math.sqrt(l * (c + a * 1e-12)))!r}Hz,added={a}pF"
        for a in (10, 22, 47)
    ]
    two, three = found(*texts[:2]), found(*texts)
    assert three.inductance.value == pytest.approx(l, rel=1e-6)
    assert three.inductance.sigma < two.inductance.sigma
    four = found(*texts, f"trap.f0={BUILT.resonance!r}Hz")
    assert four.resonance.sigma < 0.5 * three.resonance.sigma


def test_low_frequency_meter_reads_more_than_radio_frequency_has():
    wound = BUILT.circuit(np.array([100e3, BUILT.resonance]))[0]
    answer = found(f"coil.l={float(wound[0])!r}H", f"trap.f0={BUILT.resonance!r}Hz")
    assert wound[0] > 1.005 * wound[1]
    assert answer.inductance.value == pytest.approx(wound[1], rel=1e-9)
    assert answer.capacitance.value == pytest.approx(BUILT.capacitance, rel=1e-6)
    assert [r.code for r in answer.remarks] == ["brought_to_radio_frequency"]
    given = found("coil.l=8.5uH", design=GIVEN)
    assert [r.code for r in given.remarks] == ["low_frequency_reads_high"]
    assert given.inductance.sigma / 8.5e-6 > 0.02


def test_capacitor_alone_lacks_what_the_coil_adds():
    answer = found("capacitor.c=47pF,probe=1pF")
    assert answer.capacitance.value == pytest.approx(46e-12 + BUILT.self_capacitance[1], rel=1e-9)
    assert answer.resonance is None


def test_q_of_each_kind():
    f0 = 14e6
    low, high = (
        f0 * (math.sqrt(1 + 1 / (4 * 250**2)) - 1 / 500),
        f0 * (math.sqrt(1 + 1 / (4 * 250**2)) + 1 / 500),
    )
    answer = found(f"trap.low={low!r}Hz,trap.high={high!r}Hz", "trap.f0=14MHz")
    assert answer.q.value == pytest.approx(250, rel=1e-6)
    assert [r.code for r in answer.remarks] == ["as_it_was_loaded"]
    ratio = 1 / math.sqrt(1 + 250**2 * (14.05 / 14 - 14 / 14.05) ** 2)
    assert found("trap.f0=14MHz", f"trap.ratio@14.05MHz={ratio!r}").q.value == pytest.approx(250, rel=1e-6)
    # 1/Q = 1/Q_loaded - X/R, by hand, with the reactance of the computed trap at the resonance read.
    x = math.sqrt(BUILT.inductance / BUILT.capacitance)
    loaded = found("trap.f0=14.05MHz", "trap.q=250,load=500k")
    assert loaded.q.value == pytest.approx(1 / (1 / 250 - x / 500e3), rel=1e-3)
    assert loaded.loaded_q["trap.q"].value == 250
    both = found("trap.f0=14MHz", "trap.q=260,doubt=10", f"trap.ratio@14.05MHz={ratio!r}")
    assert 250 < both.q.value < 260 and both.q.sigma < 10


@pytest.mark.parametrize("case", reference("readings", "s1p-loop"))
def test_loop_file(case):
    sweep, _ = read(HERE / "s1p" / "trap_loop_ma_mhz.s1p")
    design = with_value(GIVEN, "antenna.trap.resonance", 7.1e6)
    answer = found("trap.sweep=x,how=loop,fixture=0.31ns", sweeps={"x": sweep}, design=design)
    e = case["expected"]
    assert answer.resonance.value == pytest.approx(e["f0_hz"], abs=200)
    assert answer.q.value == pytest.approx(e["q_unloaded"], rel=0.03)
    assert answer.loaded_q["trap.sweep"].value == pytest.approx(e["q_loaded_approx"], rel=0.06)
    assert answer.inductance is answer.capacitance is None
    # The fixture is an input: 20 % of it in doubt moves the fit as the reference's free delay moved it.
    assert answer.resonance.sigma > e["fit_sigma_f0_hz"]


F = np.linspace(12.5e6, 15.5e6, 201)
L, C, Q = 2.6e-6, 49e-12, 250.0
F0 = 1 / (2 * math.pi * math.sqrt(L * C))


def waves(kind, seed=1):
    rng = np.random.default_rng(seed)
    f = F if kind != "loop" else np.linspace(13.5e6, 14.5e6, 201)
    if kind == "loop":
        z = loop_impedance(f, 14.1e6, 240.0, 0.5, 1.5e-7, 0.3, 50.0)
    else:
        z = impedance(f, L, C, 2 * math.pi * F0 * L / Q * np.sqrt(f / F0))
    wave = 100 / (100 + z) if kind == "through" else (z - 50) / (z + 50)
    return f, wave + 1e-3 * (rng.normal(size=f.size) + 1j * rng.normal(size=f.size))


def swept(f, wave, name="reflection"):
    return {"x": Sweep(frequency=f, reference=50.0, **{name: wave})}


def test_fixture_and_leads_that_nobody_spoke_of_are_in_doubt():
    f, wave = waves("direct")
    silent = found("trap.sweep=x,how=direct", sweeps=swept(f, wave))
    # 30 ps on 50 ohm is 0.6 pF of 49 pF: 0.6 % of the resonance; 10 nH of 2.6 uH moves it far less.
    assert silent.resonance.sigma == pytest.approx(F0 * 0.6 / 49 / 2, rel=0.2)
    sure = found("trap.sweep=x,how=direct,fixture=1ps,fixture_doubt=1%", sweeps=swept(f, wave))
    assert sure.resonance.sigma < silent.resonance.sigma / 10
    assert sure.resonance.value == pytest.approx(F0, rel=1e-3)
    f, wave = waves("through")
    through = found("trap.sweep=x,how=through", sweeps=swept(f, wave, "transmission"))
    assert through.resonance.value == pytest.approx(F0, abs=4 * through.resonance.sigma)
    assert through.capacitance.value == pytest.approx(C, abs=4 * through.capacitance.sigma)


SLIPS = {
    "angles_in_radians": lambda w: np.abs(w) * np.exp(1j * np.radians(np.angle(w))),
    "real_and_imaginary_swapped": lambda w: w.imag + 1j * w.real,
    "sign_of_reactance": np.conj,
}


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize("slip", SLIPS)
@pytest.mark.parametrize("how", ["loop", "direct", "through"])
def test_slips_are_named(how, slip, seed):
    f, wave = waves(how, seed)
    sweeps = swept(f, SLIPS[slip](wave), "transmission" if how == "through" else "reflection")
    try:
        answer = found(f"trap.sweep=x,how={how}", sweeps=sweeps)
    except ReadingRefused as refused:
        named = refused.suspects
    else:
        assert not answer.tells_anything
        named = answer.fits[0].suspects
    assert slip in named


def test_way_of_measuring_that_is_not_so():
    with pytest.raises(ReadingRefused) as caught:
        found("trap.sweep=x,how=direct", sweeps=swept(*waves("loop")))
    assert caught.value.suspects == ("how_is_loop",)
    answer = found("trap.sweep=x,how=loop", sweeps=swept(*waves("direct")))
    assert "no_small_loop" in [r.code for r in answer.remarks]
    with pytest.raises(ReadingRefused) as caught:
        found("trap.sweep=x,how=through", sweeps=swept(*waves("direct")))
    assert caught.value.code == "no_transmission"


@pytest.mark.parametrize(
    ("texts", "names", "alone"),
    [
        (("trap.f0=14MHz", "trap.f0=14.3MHz"), {"trap.f0"}, 2),
        (("trap.f0=13.98MHz", "trap.f0_with=11.6MHz,added=22pF", "coil.l=3.4uH"), {"coil.l"}, 3),
        (("trap.q=300", "trap.q=90"), {"trap.q"}, 2),
        (
            ("trap.f0=13.98MHz", "trap.f0=13.99MHz", "trap.f0=13.4MHz"),
            {"trap.f0"},
            1,
        ),
    ],
)
def test_contradictions(texts, names, alone):
    with pytest.raises(ReadingsDisagree) as caught:
        found(*texts)
    assert names <= {strain.name for strain in caught.value.strains}
    assert sum(strain.alone for strain in caught.value.strains) == alone
    if alone == 1:
        assert caught.value.strains[0].given == 13.4e6


def test_a_coarse_reading_does_not_contradict_a_fine_one():
    answer = found("trap.f0=13.8MHz,how=dial", "trap.f0=14.1MHz")
    assert answer.resonance.value == pytest.approx(14.1e6, rel=1e-3)


@pytest.mark.parametrize(
    ("texts", "code"),
    [
        (("trap.f0=7MHz",), "another_band"),
        (("trap.f0_with=5MHz,added=22pF",), "another_band"),
        (("coil.l=2.7nH",), "another_part"),
        (("capacitor.c=470pF",), "another_part"),
        (("coil.l=2.7uH,at=10MHz",), "meter_near_resonance"),
        (("capacitor.c=1pF,probe=2pF",), "probe_is_more_than_all"),
        (("trap.low=14MHz",), "half_power_alone"),
        (("trap.low=14.1MHz", "trap.high=14MHz"), "half_power_crossed"),
        (("trap.low=14.0MHz", "trap.high=14.1MHz", "trap.f0=14.3MHz"), "half_power_off_centre"),
        (("trap.low=14.0MHz,doubt=1%", "trap.high=14.1MHz"), "half_power_too_coarse"),
        (("trap.ratio@14MHz=0.5",), "ratio_without_resonance"),
        (("trap.ratio@14MHz=0.5", "trap.f0=14MHz"), "ratio_at_resonance"),
        (("trap.q=250,load=10k",), "load_explains_all"),
    ],
)
def test_refusals(texts, code):
    with pytest.raises(ReadingRefused) as caught:
        found(*texts)
    assert caught.value.code == code


def test_a_sweep_without_a_resonance_or_of_another_band():
    rng = np.random.default_rng(1)
    noise = 0.9 + 1e-3 * (rng.normal(size=F.size) + 1j * rng.normal(size=F.size))
    for how in ("loop", "direct"):
        with pytest.raises(ReadingRefused) as caught:
            found(f"trap.sweep=x,how={how}", sweeps=swept(F, noise))
        assert caught.value.code == "nothing_resonates"
    sweep, _ = read(HERE / "s1p" / "trap_loop_ma_mhz.s1p")
    with pytest.raises(ReadingRefused) as caught:
        found("trap.sweep=x,how=loop", sweeps={"x": sweep})
    assert caught.value.code == "another_band"


def test_no_trap():
    design = with_value(with_value(DESIGN, "antenna.trap", None), "antenna.lengths.end", None)
    with pytest.raises(NoAnswer, match="no trap"):
        found("trap.f0=14MHz", design=design)
