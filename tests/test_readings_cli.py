"""The verbs readings and touchstone: text, JSON, files kept or left alone, refusals in one line."""

import json
import math
import os
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import skrf

from tests.cases import HERE
from trapdesk.design.coil_kinds import CableCoil
from trapdesk.design.design import with_value
from trapdesk.design.measured_part import Measured
from trapdesk.design.reading_kinds import KINDS, PARTS
from trapdesk.faces import cli, readings_out
from trapdesk.services.antenna.solve import solve
from trapdesk.services.trap.built import build
from trapdesk.services.trap.part_values import ReadingRefused
from trapdesk.services.trials.beliefs import beliefs, draw
from trapdesk.services.trials.ensemble import Ensemble
from trapdesk.services.trials.traps import STAGES
from trapdesk.store import store

LOOP = HERE / "s1p" / "trap_loop_ma_mhz.s1p"
PRESET = "40-20-vee"
TEXT = store.preset(PRESET)[1]
DESIGN = store.preset(PRESET)[0]


@pytest.fixture
def call(capsys):
    """Return a way to run the command in this process: exit code, stdout, stderr."""

    def caller(*arguments):
        try:
            code = cli.main([str(argument) for argument in arguments])
        except SystemExit as end:
            code = end.code or 0
        out, err = capsys.readouterr()
        return code, out, err

    return caller


@pytest.fixture
def file(tmp_path):
    path = tmp_path / "mine.toml"
    path.write_text(TEXT, "utf-8")
    return path


def shown(result):
    code, out, err = result
    assert (code, err) == (0, "")
    assert out.isascii() and max(map(len, out.splitlines())) <= 79
    return out


def refused(result, code, *words):
    got, out, err = result
    assert (got, out) == (code, "")
    assert len(err.splitlines()) == 1 and err.startswith("trapdesk: ")
    for word in words:
        assert word in err


def test_what_was_read_beside_what_is_computed(call):
    out = shown(
        call("readings", PRESET, "trap.f0=13.98MHz", "trap.f0_with=11.6MHz,added=22pF", "coil.l=2.7uH")
    )
    assert "14.05 MHz        13.98 +- 0.01 MHz" in out
    assert "not told by these readings" in out
    assert "coil.l: read at low frequency" in out


def test_json(call):
    code, out, err = call("readings", PRESET, "trap.f0=13.98MHz,doubt=10kHz", "trap.q=250,load=1M", "--json")
    assert (code, err) == (0, "")
    document = json.loads(out)
    assert document["kind"] == "readings" and document["kept"] is False
    assert document["measured"]["resonance_hz"] == pytest.approx(13.98e6)
    assert document["measured"]["resonance_doubt_hz"] == pytest.approx(1e4)
    assert document["measured"]["inductance_h"] is None
    assert document["loaded_q"]["trap.q"]["q"] == 250
    assert document["readings"][1]["options"] == {"load": 1e6}
    assert document["computed"]["resonance_hz"] == pytest.approx(14.05e6)


def test_sweep_shows_the_fit_over_the_data(call, tmp_path):
    path = tmp_path / "forty.toml"
    path.write_text(TEXT.replace("14.05 MHz", "7.11 MHz").replace('"47 pF"', '"100 pF"'), "utf-8")
    reading = f"trap.sweep={LOOP},how=loop,fixture=0.31ns"
    out = shown(call("readings", path, reading))
    assert "7.112" in out and "The model holds" in out and "401 points" in out
    code, out, err = call("readings", path, reading, "--json")
    (fit,) = json.loads(out)["fits"]
    read, fitted = (np.array(fit[key]) @ [1, 1j] for key in ("read", "fitted"))
    assert read == pytest.approx(skrf.Network(LOOP).s[:, 0, 0], abs=1e-12)
    assert math.sqrt(np.mean(np.abs(read - fitted) ** 2) / 2) == pytest.approx(0.0015, rel=0.1)


def test_without_readings_every_kind_is_told(call):
    out = shown(call("readings", PRESET))
    code, text, _ = call("readings", PRESET, "--json")
    kinds = json.loads(text)["kinds"]
    assert list(kinds) == [name for name in KINDS if name.partition(".")[0] in PARTS]
    for name, kind in kinds.items():
        assert f"{name}: {kind['label']}" in out and kind["example"] in out


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        (("trap.f0=7MHz",), 2, ("7.00 MHz", "14.05 MHz")),
        (("trap.f0=14",), 2, ("no unit",)),
        (("lower.dip=7.1MHz",), 2, ("lower.dip", "trap.NAME")),
        (("trap.f0=14MHz", "trap.f0=14.4MHz"), 2, ("contradict", "14.4 MHz")),
        (("trap.sweep=none.s1p,how=loop",), 3, ("no such file",)),
        ((f"trap.sweep={LOOP},how=loop",), 2, ("7.1122 MHz", "another band")),
        ((f"trap.sweep={HERE / 's1p' / 'bad_nan.s1p'},how=loop",), 3, ("line 7",)),
        (("--keep",), 2, ("no readings",)),
        (("trap.f0=14MHz", "--keep"), 3, ("preset",)),
        (("coil.l=2.7nH",), 2, ("2.7 nH", "slipped unit")),
    ],
)
def test_refusals(call, arguments, code, words):
    refused(call("readings", PRESET, *arguments), code, *words)


def slipped(tmp_path, slip):
    network = skrf.Network(LOOP)
    wave = slip(network.s[:, 0, 0])
    path = tmp_path / "slipped.s1p"
    lines = [
        f"{f:.9g} {abs(w):.9g} {np.degrees(np.angle(w)):.9g}" for f, w in zip(network.f, wave, strict=True)
    ]
    path.write_text("# Hz S MA R 50\n" + "\n".join(lines) + "\n", "ascii")
    return path


def test_model_that_does_not_hold_is_no_answer(call, tmp_path):
    path = tmp_path / "forty.toml"
    path.write_text(TEXT.replace("14.05 MHz", "7.11 MHz").replace('"47 pF"', '"100 pF"'), "utf-8")
    before = path.read_bytes()
    sweep = slipped(tmp_path, lambda wave: wave.imag + 1j * wave.real)
    code, out, err = call("readings", path, f"trap.sweep={sweep},how=loop", "--keep")
    assert code in (1, 2) and out == ""
    assert "swapped" in err and len(err.splitlines()) == 1
    # Beside a reading that is good, the failed one is told and not used; nothing is kept of either.
    twice = slipped(tmp_path, lambda wave: wave * (1 + 0.05 * np.sin(np.arange(wave.size) / 9)) / 1.05)
    readings = (f"trap.sweep={twice},how=loop,fixture=0.31ns", "trap.f0=7.11MHz")
    out = shown(call("readings", path, *readings))
    assert "does not hold" in out and "7.110 +- 0.007 MHz" in out
    refused(call("readings", path, *readings, "--keep"), 1, "errors of", "nothing is kept")
    assert path.read_bytes() == before


def test_keep_puts_it_into_the_file_and_nothing_else(call, file):
    shown(call("readings", file, "trap.f0=13.98MHz", "trap.f0_with=11.6MHz,added=22pF", "--keep"))
    text = file.read_text("utf-8")
    kept = store.load(file).antenna.trap.measured
    assert (kept.resonance, kept.resonance_doubt) == (13.98e6, 14e3)
    assert kept.capacitance_doubt == pytest.approx(0.66e-12, rel=0.02)
    assert kept.q is None
    assert [line for line in TEXT.splitlines() if line not in text.splitlines()] == []
    assert with_value(store.load(file), "antenna.trap.measured", None) == DESIGN
    # Q later joins what was kept; a later resonance takes the place of all three that hang together.
    shown(call("readings", file, "trap.q=250", "--keep"))
    both = store.load(file).antenna.trap.measured
    assert (both.resonance, both.q) == (kept.resonance, 250.0)
    shown(call("readings", file, "trap.f0=14.0MHz", "--keep"))
    last = store.load(file).antenna.trap.measured
    assert (last.resonance, last.inductance, last.q) == (pytest.approx(14e6), None, 250.0)


def test_measured_values_are_marked_as_such(call, file):
    shown(call("readings", file, "trap.f0=13.98MHz,doubt=14kHz", "trap.q=250", "--keep"))
    lines = shown(call("figures", file)).splitlines()
    for label, text in (
        ("trap resonance", "measured         13.98 MHz"),
        ("measured to, one sigma", "10 kHz"),
        ("Q of the trap", "measured         250 ("),
    ):
        (line,) = (line for line in lines if line.strip().startswith(label))
        assert text in line
    assert not any("measured  " in line for line in lines if "inductance" in line)


def test_kept_readings_do_not_change_what_is_computed(call, file):
    shown(call("readings", file, "trap.f0=13.98MHz", "--keep"))
    document = json.loads(call("readings", file, "trap.f0=13.98MHz", "--json")[1])
    assert document["computed"]["resonance_hz"] == pytest.approx(14.05e6)


@pytest.mark.parametrize("mode", [0o444])
def test_file_that_may_not_be_written_stays(call, file, mode):
    os.chmod(file, mode)
    before = file.read_bytes()
    code, out, err = call("readings", file, "trap.f0=13.98MHz", "--keep")
    # Who may write everything, writes; anybody else is told.
    assert (code, file.read_bytes() == before) in ((0, False), (3, True))


def measured(**values):
    return with_value(DESIGN, "antenna.trap.measured", Measured(**values))


def test_measured_trap_replaces_the_computed_one():
    computed = build(DESIGN.antenna.trap)
    trap = build(
        measured(
            resonance=13.9e6, resonance_doubt=1e4, inductance=2.75e-6, q=200.0, q_doubt=20.0
        ).antenna.trap
    )
    assert (trap.resonance, trap.inductance) == (13.9e6, 2.75e-6)
    assert trap.capacitance == pytest.approx(1 / ((2 * math.pi * 13.9e6) ** 2 * 2.75e-6), rel=1e-12)
    # What it does agrees with what it is said to be: resonance, slope of the reactance, dynamic resistance.
    f = 13.9e6 * np.array([1 - 1e-6, 1.0, 1 + 1e-6])
    y = 1 / trap.impedance(f)
    reactance = 2 * math.pi * 13.9e6 * 2.75e-6
    assert y[1].real == pytest.approx(1 / (200.0 * reactance), rel=1e-3)
    assert y[1].imag == pytest.approx(0, abs=2e-2 * y[1].real)
    assert (y[2].imag - y[0].imag) / 4e-6 == pytest.approx(1 / reactance, rel=0.02)
    assert trap.q == pytest.approx(200.0, rel=1e-2)
    assert trap.doubt == pytest.approx(2 * 1e4 / 13.9e6)
    assert trap.q_factors == pytest.approx((0.9, 1.1))
    # Far from resonance it still takes power and gives none.
    assert (trap.impedance(np.linspace(3e6, 30e6, 50)).real > 0).all()
    borne = trap.stress(f, np.ones(3))
    assert borne.voltage == pytest.approx(np.abs(trap.impedance(f)), rel=1e-9)
    assert borne.total_power == pytest.approx(trap.impedance(f).real, rel=1e-6)
    assert trap.wound == computed.wound


@pytest.mark.parametrize(
    ("values", "expected"),
    [
        ({"resonance": 13.9e6}, ("capacitance",)),
        ({"inductance": 2.8e-6}, ("capacitance",)),
        ({"capacitance": 50e-12}, ("inductance",)),
        ({"q": 150.0}, ("inductance", "capacitance", "resonance")),
    ],
)
def test_what_was_not_measured_stays_as_computed(values, expected):
    computed = build(DESIGN.antenna.trap)
    trap = build(measured(**values).antenna.trap)
    for name in ("resonance", "inductance", "capacitance"):
        wanted = values.get(name, getattr(computed, name) if name in expected else None)
        if wanted is not None:
            assert getattr(trap, name) == pytest.approx(wanted, rel=1e-9)
    product = (2 * math.pi * trap.resonance) ** 2 * trap.inductance * trap.capacitance
    assert product == pytest.approx(1, rel=1e-6)


def spread(design, **more):
    built = build(design.antenna.trap)
    varying = beliefs(design, built)
    return built, {name: varying[name] for name in ("coil", "capacitor", "turns", "q") if name in varying}


def test_doubt_of_what_was_measured_goes_into_the_ensemble():
    _, computed = spread(DESIGN)
    assert set(computed) == {"coil", "capacitor", "turns", "q"}
    trap, known = spread(measured(resonance=13.98e6, resonance_doubt=14e3, q=250.0, q_doubt=25.0))
    # 0.1 % of the resonance is 0.2 % of the inductance. The capacitor stays as believed, and the coil makes
    # up for it.
    assert set(known) == {"coil", "capacitor", "q"}
    assert known["coil"].size == pytest.approx(2 * 14e3 / 13.98e6)
    assert known["q"].size == pytest.approx(0.1)
    _, parts = spread(
        measured(inductance=2.7e-6, inductance_doubt=27e-9, capacitance=48e-12, capacitance_doubt=1e-12)
    )
    assert parts["coil"].size == pytest.approx(0.01)
    assert parts["capacitor"].size == pytest.approx(1 / 48, rel=0.05)
    ensemble = Ensemble(solve(measured(resonance=13.98e6, resonance_doubt=14e3)))
    count = 4000
    # What the day's temperature adds is left out here.
    draws = draw(ensemble.varying, 1, 0, count)
    draws = {name: draws[name] for name in ("coil", "capacitor", "self_capacitance") if name in draws}
    found = ensemble.of_traps.resonance(ensemble.traps(draws, STAGES[0], count))
    assert found.std() == pytest.approx(14e3, rel=0.05)
    assert found.mean() == pytest.approx(13.98e6, abs=4 * 14e3 / math.sqrt(2 * count))


def test_measured_as_computed_changes_nothing():
    trap = build(DESIGN.antenna.trap)
    same = build(measured(resonance=trap.resonance, inductance=trap.inductance, q=trap.q).antenna.trap)
    f = np.linspace(3e6, 30e6, 40)
    assert same.impedance(f) == pytest.approx(trap.impedance(f), rel=1e-9)
    assert same.stress(f, np.ones(40)).coil_current == pytest.approx(
        trap.stress(f, np.ones(40)).coil_current, rel=1e-9
    )


def test_figures_follow_a_measured_trap():
    # A trap 1 % low pulls the upper band down by what its own effect says, times that one per cent.
    plain = solve(with_value(with_value(DESIGN, "antenna.lengths.inner", 5.0), "antenna.lengths.end", 4.2))
    low = solve(with_value(plain.design, "antenna.trap.measured", Measured(resonance=0.997 * 14.05e6)))
    moved = low.bands["upper"].resonance - plain.bands["upper"].resonance
    assert moved == pytest.approx(-0.003 * plain.bands["upper"].effects.trap, rel=0.15)


def of_cable(**values):
    trap = replace(DESIGN.antenna.trap, coil=CableCoil(), capacitor=None, measured=Measured(**values))
    return with_value(DESIGN, "antenna.trap", trap)


def test_measured_trap_of_cable():
    trap = build(of_cable(resonance=13.9e6, q=150.0).antenna.trap)
    f = 13.9e6 * np.array([1 - 1e-6, 1.0, 1 + 1e-6])
    y = 1 / trap.impedance(f)
    reactance = 2 * math.pi * 13.9e6 * trap.inductance
    assert y[1].real == pytest.approx(1 / (150.0 * reactance), rel=1e-3)
    assert (y[2].imag - y[0].imag) / 4e-6 == pytest.approx(1 / reactance, rel=1e-3)
    assert trap.cable is not None
    borne = trap.stress(f, np.ones(3))
    assert borne.voltage == pytest.approx(np.abs(trap.impedance(f)), rel=1e-9)
    assert borne.total_power == pytest.approx(trap.impedance(f).real, rel=1e-6)
    assert solve(of_cable(resonance=13.9e6, q=150.0)).trap.resonance == 13.9e6


@pytest.mark.parametrize("reading", ["coil.l=2.7uH", "capacitor.c=47pF"])
def test_trap_of_cable_is_read_by_no_low_frequency_meter(call, tmp_path, reading):
    path = tmp_path / "cable.toml"
    store.save(of_cable(), path)
    refused(call("readings", path, reading), 2, "a trap of cable is coil and capacitor in one")


@pytest.mark.parametrize("bands", [(), ("--band", "upper"), ("--band", "lower")])
def test_feed_impedance_as_touchstone(call, tmp_path, bands):
    path = tmp_path / "feed.s1p"
    assert call("touchstone", PRESET, *bands, "--out", path) == (0, "", "")
    network = skrf.Network(path)
    code, out, err = call("touchstone", PRESET, *bands)
    assert (code, err) == (0, "") and path.read_text("ascii") == out
    document = json.loads(call("touchstone", PRESET, *bands, "--json")[1])
    assert network.f == pytest.approx(document["f_hz"], rel=1e-11)
    assert network.z[:, 0, 0] == pytest.approx(np.array(document["z_ohm"]) @ [1, 1j], rel=1e-8)
    # And it is the antenna of the figures, at the aims of the bands.
    figures = json.loads(call("figures", PRESET, "--json")[1])
    for role in ("upper", "lower"):
        if bands and bands[1] != role:
            continue
        band = figures["bands"][role]
        z = np.interp(band["aim_hz"], network.f, network.z[:, 0, 0])
        assert abs(z - complex(*band["z_aim_ohm"])) < 0.3
    refused(call("touchstone", PRESET, "--out", path), 3, "written over")
    assert path.read_text("ascii") == out


def test_touchstone_of_a_band_that_is_none(call, tmp_path):
    path = tmp_path / "one.toml"
    text = '[bands.lower]\nname = "40 m"\nlow = "7 MHz"\nhigh = "7.2 MHz"\n'
    path.write_text(text, "utf-8")
    refused(call("touchstone", path, "--band", "upper"), 2, "no upper band")


def test_every_refusal_has_its_words():
    source = "".join(
        p.read_text("utf-8") for p in Path(readings_out.__file__).parents[1].glob("services/*/part_*.py")
    )
    codes = set()
    for line in source.split("ReadingRefused(")[1:]:
        word = line.strip().split('"')[1] if line.strip().startswith(('"', 'f"')) else ""
        codes |= {word} if word and "{" not in word else set()
    codes |= {"no_reflection", "no_transmission"}
    assert codes == set(readings_out.said.REFUSALS)
    for code in codes:
        numbers = dict.fromkeys(
            ("read_hz", "computed_hz", "from_hz", "to_hz", "read_f", "at_hz", "low_hz"), 1e6
        )
        numbers |= dict.fromkeys(("high_hz", "middle_hz", "resonance_hz", "width_hz", "doubt_hz", "q"), 2e6)
        numbers["load_ohm"] = 5.0
        text = str(readings_out._refusal(ReadingRefused(code, "trap.f0", numbers)))
        assert "{" not in text and text.isprintable()
