"""What presents the figures: nothing finer than it is known, the band's name on its rows, no finding lost."""

import math
import re
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.sample_figures import BANDS, DESIGN, FIGURES, FINDINGS, PLAIN, TRAP
from trapdesk.design.design import Bands
from trapdesk.errors import NoAnswer
from trapdesk.faces import json_out, layout, rows, shown, words
from trapdesk.services.antenna.figures import AtFrequency, Finding, Shares
from trapdesk.services.antenna.levels import Level
from trapdesk.units.unit_names import UNITS, Dimension

EVERY = [FIGURES, PLAIN]


def found(figures) -> dict[str, rows.Row]:
    return {row.key: row for row in rows.rows(figures)}


def summary(figures) -> dict[str, str]:
    return {row.key: row.value for row in rows.summary(figures)}


# What a number may be printed to follows from its doubt by the rule 10**floor(log10(doubt)), worked by hand.
@pytest.mark.parametrize(
    ("value", "doubt", "dimension", "unit", "text"),
    [
        (7.1021e6, 51.1e3, "frequency", "MHz", "7.10 +- 0.05 MHz"),
        (14.1391e6, 126e3, "frequency", "MHz", "14.1 +- 0.1 MHz"),
        (5.0312, 0.031, "length", "m", "5.03 +- 0.03 m"),
        (1854.3, 426.5, "voltage", "", "1.9 +- 0.4 kV"),
        (854.3, 96.5, "voltage", "", "850 +- 100 V"),
        (0.2123, 0.049, "current", "", "0.21 +- 0.05 A"),
        (2.6431e-6, 0.04e-6, "inductance", "", "2.64 +- 0.04 uH"),
        (10.37, 0.2, "count", "", "10.4 +- 0.2 turns"),
        (0.3, 2.0, "length", "m", "0 +- 2 m"),
        (-0.2, 2.0, "length", "m", "0 +- 2 m"),
        (47e-12, 0.0, "capacitance", "", "47 pF"),
        (None, 1.0, "frequency", "MHz", "none"),
    ],
)
def test_no_number_finer_than_known(value, doubt, dimension, unit, text):
    assert str(shown.known(value, doubt, dimension, unit)) == text


@given(
    st.floats(1e3, 60e6),
    st.floats(1.0, 1e6),
    st.sampled_from(["frequency", "length", "voltage", "power", "resistance"]),
)
def test_last_digit_is_the_doubts_first(value, doubt, dimension):
    text = shown.known(value, doubt, dimension)
    unit = UNITS[Dimension(dimension)][text.unit]
    decimals = len(text.number.partition(".")[2])
    last = 10.0**-decimals * unit.top / unit.bottom
    assert abs(float(text.number) * unit.top / unit.bottom - value) <= 0.5001 * max(
        last, 10.0 ** math.floor(math.log10(doubt))
    )
    if decimals:
        assert last <= doubt * (1 + 1e-6) < 10 * last * (1 + 1e-6)
    assert len(text.doubt.replace(".", "").strip("0")) <= 1


@pytest.mark.parametrize(
    ("value", "doubt", "text"),
    [
        (1.2212, 0.12, "1.2"),
        (1.2212, 0.012, "1.22"),
        (2.61, 1.2, "3"),
        (math.inf, 0.1, "over 10"),
        (0.9996, 0.1, "1.0"),
    ],
)
def test_swr(value, doubt, text):
    assert shown.swr(value, doubt) == text


@pytest.mark.parametrize(
    ("value", "doubt", "text"),
    [
        (61.23 + 0.51j, 6.1, "61 + j1 ohm"),
        (48.2 - 0.2j, 5.2, "48 + j0 ohm"),
        (48 - 13.7j, 12, "50 - j10 ohm"),
    ],
)
def test_impedance(value, doubt, text):
    assert shown.impedance(value, doubt) == text


@pytest.mark.parametrize(
    ("share", "doubt", "text"),
    [(0.8123, 0.04, "81 %"), (0.8123, 0.15, "80 %"), (0.03, 0.15, "under 10 %"), (0.0, 0.1, "0 %")],
)
def test_percent(share, doubt, text):
    assert shown.percent(share, doubt) == text


def test_wire_row_has_what_was_set_beside_what_was_found():
    row = found(FIGURES)["antenna.lengths.inner"]
    assert (row.given, row.found) == ("solve", "5.03 +- 0.03 m")
    assert "trap centre" in row.why
    resonance = found(FIGURES)["antenna.trap.resonance"]
    assert (resonance.given, resonance.found) == ("14.05 MHz", "14.05 MHz")


def test_every_row_of_a_band_names_the_band():
    for figures in EVERY:
        for row in rows.rows(figures):
            if row.key.startswith("bands."):
                assert row.label.startswith("20 m " if ".upper." in row.key else "40 m ")


def test_screen_never_says_upper_or_lower():
    for figures in EVERY:
        text = "\n".join([*layout.summary_lines(figures), *layout.layout(rows.rows(figures))])
        assert not re.search(r"\b(upper|lower) (band|aim|wire)", text)


def test_keys_are_unique():
    for figures in EVERY:
        keys = [row.key for row in rows.rows(figures)]
        assert len(keys) == len(set(keys))


def test_finding_stands_on_its_row_and_in_the_list():
    by_key = found(FIGURES)
    assert by_key["bands.lower.worst_swr"].finding == FINDINGS[0]
    assert by_key["site.soil"].finding == FINDINGS[1]
    listed = [row.finding for row in rows.rows(FIGURES) if row.group == "findings"]
    assert listed == list(FINDINGS)


@pytest.mark.parametrize("level", list(Level))
@pytest.mark.parametrize("code", [*words.SAYINGS, "a_rule_nobody_has_words_for"])
@pytest.mark.parametrize("limit", [None, 2.0])
def test_no_finding_is_lost(code, level, limit):
    finding = Finding(code=code, level=level, where="antenna.nowhere", value=3.0, limit=limit)
    figures = replace(FIGURES, findings=(finding,))
    row = found(figures)["findings.0"]
    assert row.label.lower() == level
    assert "3" in row.value
    assert "{" not in row.value + row.why
    assert "\n".join(layout.layout([row])).count(row.label) == 1
    assert words.SEVERITY[0] is Level.STOP
    if code in words.SAYINGS and level is not Level.FINE:
        assert row.why


def test_stress_is_marked_where_it_is_worst():
    hot = Finding(code="trap_heat", level=Level.STOP, where="antenna.trap", value=30.0, dimension="power")
    volts = Finding(
        code="trap_voltage",
        level=Level.WATCH,
        where="antenna.trap.capacitor.voltage",
        value=2.5e3,
        dimension="voltage",
    )
    by_key = found(replace(FIGURES, findings=(hot, volts)))
    assert by_key["bands.upper.trap_average"].finding == hot
    assert by_key["bands.upper.trap_worst_peak"].finding == volts
    assert by_key["antenna.trap.resonance"].finding is None


def test_cure_is_that_of_the_cause():
    swr = Finding(code="swr_wanted", level=Level.STOP, where="bands.upper", value=30.0, limit=2.0)
    none = Finding(
        code="no_resonance", level=Level.WATCH, where="bands.upper", value=14.15e6, dimension="frequency"
    )
    assert "let them be solved" in summary(replace(FIGURES, findings=(swr, none)))["next"]
    elsewhere = replace(none, where="bands.lower")
    assert "want less of the band" in summary(replace(FIGURES, findings=(swr, elsewhere)))["next"]


def test_doubt_of_an_swr_goes_with_it():
    odd = replace(BANDS["upper"], aim_swr=40.0, swr_doubt=4.0)
    says = summary(replace(FIGURES, bands=BANDS | {"upper": odd}))["bands.upper"]
    assert "SWR 1.2; 1.6 at" in says


def test_worst_finding_comes_first():
    fine = Finding(code="trap_heat", level=Level.FINE, where="antenna.trap", value=1.0, dimension="power")
    stop = Finding(
        code="trap_voltage", level=Level.STOP, where="antenna.trap.capacitor.voltage", value=4e3, limit=3e3,
        dimension="voltage",
    )  # fmt: skip
    figures = replace(FIGURES, findings=(fine, *FINDINGS, stop))
    worst = next(row for row in rows.summary(figures) if row.key == "worst")
    assert worst.label == "STOP"
    assert "4 kV" in worst.value
    assert "rated 3 kV" in worst.value
    assert "less power" in worst.value
    assert summary(figures)["next"].startswith("mend the design first")


@pytest.mark.parametrize(
    ("code", "where", "value", "limit", "dimension", "text"),
    [
        ("swr_wanted", "bands.upper", 2.01, 2.0, "ratio",
         "20 m: worst SWR just over 2 in the wanted part, the limit is 2"),
        ("aim_missed", "bands.lower", -41e3, 9e3, "frequency",
         "40 m: resonance lies 41 kHz below the aim; up to 9 kHz would not matter"),
        ("ground_share", "bands.lower", 0.61, 0.5, "ratio",
         "40 m: the ground takes about 61 % of the power, more than 50 %"),
        ("end_low", "site.end_height", 2.1, 3.0, "length",
         "the wire ends hang at 2.1 m, below 3 m: within reach, and they carry high voltage"),
        ("coil_range", "antenna.trap.coil.turns", 120.0, 80.0, "ratio",
         "turns of the coil: 120, its formulas are held to 80"),
        ("trap_heat", "antenna.trap", 0.79, 5.0, "power",
         "each trap turns 0.79 W into heat on average; from 5 W on it gets warm"),
        ("odd_thing", "site.height", 1.5, 2.0, "length", "height: odd thing, 1.5 m, limit 2 m"),
    ],
)  # fmt: skip
def test_sentences(code, where, value, limit, dimension, text):
    finding = Finding(
        code=code, level=Level.WATCH, where=where, value=value, limit=limit, dimension=dimension
    )
    assert words.sentence(finding, DESIGN) == text


def test_summary_says_what_ten_seconds_need():
    says = summary(FIGURES)
    assert "estimate" in says["title"]
    assert says["site"] == "vee, feed point at 10 m, ends at 3.0 m, soil unknown, an average taken"
    assert "100 W SSB" in says["station"]
    assert says["bands.upper"] == "dip 14.14 MHz +- 96 kHz, SWR 1.2; 1.6 at 14.00, 1.8 at 14.35 MHz"
    assert says["bands.lower"] == "dip 7.10 MHz +- 51 kHz, SWR 1.0; 2.6 at 7.00, 2.5 at 7.20 MHz"
    assert (
        says["antenna.lengths"]
        == "inner 5.03 +- 0.03 m, end 3.22 +- 0.03 m a side; leave 20 cm extra on each wire"
    )
    assert "inner wires move 20 m by 7.1 kHz and 40 m by 4.9 kHz" in says["effects"]
    assert says["antenna.trap"].startswith(
        "14.05 MHz, 10.37 turns, 1.9 kV peak on 20 m (rated 3 kV), 1.3 W heat"
    )
    assert "78 % of a plain half wave" in says["check"]
    assert "worst SWR 2.6" in says["worst"]
    assert "bring both to 14.05 MHz" in says["next"]


def test_summary_of_a_plain_dipole():
    says = summary(PLAIN)
    assert "antenna.trap" not in says
    assert says["effects"] == "each side moves 40 m by 6.9 kHz"
    assert says["worst"] == "no findings"
    assert "over 10 at 7.00" in says["bands.lower"]


def at_frequency(frequency: float, stress=BANDS["upper"].stress) -> AtFrequency:
    shares = Shares(sky=0.8, ground=0.1, wire=0.04, trap=0.06)
    return AtFrequency(
        frequency=frequency,
        impedance=712 + 1913j,
        swr=119.0,
        shares=shares,
        feed_current=0.371,
        stress=stress,
    )


def test_nothing_is_wider_than_a_terminal():
    # The longest names a band and a design may show, beside the ordinary ones.
    wide = Bands(
        upper=replace(DESIGN.bands.upper, name="a" * 200), lower=replace(DESIGN.bands.lower, name="b" * 200)
    )
    long = replace(
        FIGURES,
        design=replace(DESIGN, title="x " * 100, bands=wide),
        bands={role: replace(band, name=band.role * 40) for role, band in BANDS.items()},
    )
    for figures in [*EVERY, long]:
        lines = [
            *layout.summary_lines(figures),
            *layout.layout(rows.rows(figures)),
            *layout.at_lines(figures, [at_frequency(14.2e6), at_frequency(3.5e6, None)]),
        ]
        assert max(map(len, lines)) <= 79
        assert all(line.isascii() and line.isprintable() and line == line.rstrip() for line in lines)


def test_a_title_cannot_move_the_cursor():
    figures = replace(FIGURES, design=replace(DESIGN, title="\x1b[2J[bold]gone"))
    lines = [*layout.summary_lines(figures), *layout.layout(rows.rows(figures))]
    assert all(line.isprintable() for line in lines)
    assert any("\\x1b[2J[bold]gone" in line for line in lines)


def test_a_number_stays_with_its_unit():
    for head in range(60):
        lines = layout.folded("", "y" * head + " dip at 7.10 MHz and 20 cm and 50 kohm then", 40)
        for number, unit in (("7.10", "MHz"), ("20", "cm"), ("50", "kohm")):
            assert any(f"{number} {unit}" in line for line in lines)


def test_no_answer_says_which_aim_and_how_near():
    error = NoAnswer(
        "aim_not_met",
        "bands.lower.aim",
        {"aim_hz": 7.1e6, "reactance_left_ohm": 131.2, "end_m": 4.2},
        "mend it",
    )
    assert words.no_answer(error) == (
        "bands.lower.aim: no wire lengths give resonance at the aim"
        " (aim 7.1 MHz, reactance left 131.2 ohm, end 4.2 m); mend it"
    )
    unknown = NoAnswer("something_new", "site", {"n": 2.0})
    assert words.no_answer(unknown) == str(unknown)


BAND_KEYS = set(
    "aim_hz z_aim_ohm resonance_hz r_resonance_ohm dip_hz dip_swr low_swr high_swr width_hz sky_share"
    " ground_share wire_share trap_share feed_rms_a trap_peak_v trap_rms_a trap_w trap_worst_peak_v"
    " trap_worst_rms_a trap_worst_w".split()
)
"""The keys scripts rely on, as the design of the JSON names them."""


def test_json_has_the_keys_scripts_rely_on():
    for figures in EVERY:
        document = json_out.plain(json_out.figures(figures))
        assert document["format"] == 1
        for role in figures.bands:
            assert not BAND_KEYS - set(document["bands"][role])
        assert {"inner_m", "end_m"} <= set(document["antenna"]["lengths"])
    document = json_out.plain(json_out.figures(FIGURES, [at_frequency(10e6)]))
    trap = document["antenna"]["trap"]
    assert {"resonance_hz", "inductance_h", "capacitance_f", "q", "dynamic_ohm"} <= set(trap)
    for finding in document["findings"]:
        assert {"code", "level", "where", "value", "limit", "help"} <= set(finding)
    at_keys = {"f_hz", "z_ohm", "swr", "sky_share", "feed_rms_a", "trap_peak_v", "trap_rms_a", "trap_w"}
    assert at_keys <= set(document["at"][0])


def test_json_is_full_precision_and_si():
    document = json_out.plain(json_out.figures(FIGURES))
    upper = document["bands"]["upper"]
    assert upper["dip_hz"] == BANDS["upper"].dip
    assert upper["z_aim_ohm"] == [61.23, 0.51]
    assert upper["usable_hz"] == [13.94e6, 14.3523e6]
    assert upper["effects"]["trap_hz_per_percent"] == BANDS["upper"].effects.trap / 100
    assert document["antenna"]["trap"]["capacitance_f"] == TRAP.capacitance
    assert document["antenna"]["trap"]["capacitor"]["capacitance_f"] == TRAP.fitted_capacitance
    assert document["antenna"]["trap"]["coil"]["turns"] == TRAP.coil.turns
    assert document["site"]["height_m"] == 10.0
    assert document["solved"] == ["antenna.lengths.inner", "antenna.lengths.end", "antenna.trap.coil.turns"]


def test_json_says_null_where_there_is_nothing():
    text = json_out.text(json_out.figures(PLAIN))
    assert "NaN" not in text
    assert "Infinity" not in text
    document = json_out.plain(json_out.figures(PLAIN))
    lower = document["bands"]["lower"]
    assert lower["resonance_hz"] is lower["width_hz"] is lower["usable_hz"] is lower["trap_w"] is None
    assert lower["low_swr"] is None
    assert document["antenna"]["trap"] is document["bands"]["upper"] is None


def test_json_takes_numpy():
    given = {
        "a": np.float64(2.0),
        "b": np.array([1 + 2j]),
        "c": np.nan,
        "d": (True, None, 3),
    }
    assert json_out.plain(given) == {
        "a": 2.0, "b": [[1.0, 2.0]], "c": None, "d": [True, None, 3]
    }  # fmt: skip
