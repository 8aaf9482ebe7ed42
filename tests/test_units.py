"""What a person may type, what comes of it, and how it is written back."""

import math
import subprocess
import sys
import tomllib
from fractions import Fraction
from pathlib import Path

import pint
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from trapdesk.errors import BadInput, Fault, FileFault, NoAnswer, visible
from trapdesk.units.numerals import rounded, shortest_decimal, snapped
from trapdesk.units.unit_names import ELEMENTS, IMPERIAL, LETTERS, SHOWN, UNITS
from trapdesk.units.units import (
    Dimension,
    _ask_pint,
    gauge_diameter,
    read,
    read_exact,
    read_impedance,
    show,
    show_parts,
    to_text,
)

ROOT = Path(__file__).resolve().parent.parent

LENGTH, FREQUENCY = Dimension.LENGTH, Dimension.FREQUENCY
INDUCTANCE, CAPACITANCE, RESISTANCE = Dimension.INDUCTANCE, Dimension.CAPACITANCE, Dimension.RESISTANCE
RATIO, COUNT, ANGLE, POWER = Dimension.RATIO, Dimension.COUNT, Dimension.ANGLE, Dimension.POWER

# The right side is written out in SI by hand; an inch is 25.4 mm exactly.
TYPED = [
    ("8.2 uH", INDUCTANCE, 8.2e-6),
    ("8.2uH", INDUCTANCE, 8.2e-6),
    ("8u2", INDUCTANCE, 8.2e-6),
    ("8\u00b52", INDUCTANCE, 8.2e-6),
    ("8u2H", INDUCTANCE, 8.2e-6),
    ("8U2", INDUCTANCE, 8.2e-6),
    ("8,2 \u00b5H", INDUCTANCE, 8.2e-6),
    ("8,2 \u03bcH", INDUCTANCE, 8.2e-6),
    ("8.2 uh", INDUCTANCE, 8.2e-6),
    ("8.2 UH", INDUCTANCE, 8.2e-6),
    ("1e-6 H", INDUCTANCE, 1e-6),
    ("1E-6H", INDUCTANCE, 1e-6),
    ("5m", INDUCTANCE, 5e-3),
    ("60pF", CAPACITANCE, 60e-12),
    ("100 pf", CAPACITANCE, 100e-12),
    ("100 PF", CAPACITANCE, 100e-12),
    ("4p7", CAPACITANCE, 4.7e-12),
    ("47p", CAPACITANCE, 47e-12),
    ("n47", CAPACITANCE, 0.47e-9),
    ("50 mmfd", CAPACITANCE, 50e-12),
    ("1 mF", CAPACITANCE, 1e-3),
    ("4k7", RESISTANCE, 4700.0),
    ("4K7", RESISTANCE, 4700.0),
    ("4.7k", RESISTANCE, 4700.0),
    ("4k7 ohm", RESISTANCE, 4700.0),
    ("50R", RESISTANCE, 50.0),
    ("R47", RESISTANCE, 0.47),
    ("50 ohm", RESISTANCE, 50.0),
    ("50 Ohms", RESISTANCE, 50.0),
    ("50 \u2126", RESISTANCE, 50.0),
    ("50\u03a9", RESISTANCE, 50.0),
    ("1.2 k\u03a9", RESISTANCE, 1200.0),
    ("2 Mohm", RESISTANCE, 2e6),
    ("2 MOHM", RESISTANCE, 2e6),
    ("2 mohm", RESISTANCE, 2e-3),
    ("7.05 MHz", FREQUENCY, 7.05e6),
    ("7050 kHz", FREQUENCY, 7.05e6),
    ("7.1 mhz", FREQUENCY, 7.1e6),
    ("7.1 mHz", FREQUENCY, 7.1e6),
    ("7.1 MHZ", FREQUENCY, 7.1e6),
    ("7050 khz", FREQUENCY, 7.05e6),
    ("7050 KHZ", FREQUENCY, 7.05e6),
    ("14M05", FREQUENCY, 14.05e6),
    ("7,050,000 Hz", FREQUENCY, 7.05e6),
    ("7.050.000 Hz", FREQUENCY, 7.05e6),
    ("7 050 000 Hz", FREQUENCY, 7.05e6),
    ("7\u202f050 kHz", FREQUENCY, 7.05e6),
    ("7 megahertz", FREQUENCY, 7e6),
    ("9.91 m", LENGTH, 9.91),
    ("9m91", LENGTH, 9.91),
    ("  9.91   m ", LENGTH, 9.91),
    ("9.91\tm\n", LENGTH, 9.91),
    ("9,91 m", LENGTH, 9.91),
    (".5 m", LENGTH, 0.5),
    ("5. m", LENGTH, 5.0),
    ("0,500 m", LENGTH, 0.5),
    ("1.500 m", LENGTH, 1.5),
    ("1.500,5 m", LENGTH, 1500.5),
    ("1,500.5 m", LENGTH, 1500.5),
    ("1500,250 m", LENGTH, 1500.25),
    ("1,5 mm", LENGTH, 1.5e-3),
    ("5 MM", LENGTH, 5e-3),
    ("-3 cm", LENGTH, -0.03),
    ("\u22123 cm", LENGTH, -0.03),
    ("+3 cm", LENGTH, 0.03),
    ("- 3 cm", LENGTH, -0.03),
    ("\uff19\uff0e\uff19\uff11\u3000\uff4d", LENGTH, 9.91),
    ("32 ft 6 in", LENGTH, 390 * 0.0254),
    ("32ft6in", LENGTH, 390 * 0.0254),
    ("32' 6\"", LENGTH, 390 * 0.0254),
    ("32'6", LENGTH, 390 * 0.0254),
    ("32\u2032 6\u2033", LENGTH, 390 * 0.0254),
    ("32' 6''", LENGTH, 390 * 0.0254),
    ("32 feet 6 inches", LENGTH, 390 * 0.0254),
    ("32 FT 6 IN", LENGTH, 390 * 0.0254),
    ("5 ft 3 in", LENGTH, 63 * 0.0254),
    ("-5 ft 3 in", LENGTH, -63 * 0.0254),
    ("5 ft 3 1/2 in", LENGTH, 63.5 * 0.0254),
    ("5'-3 1/2\"", LENGTH, 63.5 * 0.0254),
    ("5 ft 3.5 in", LENGTH, 63.5 * 0.0254),
    ("2 yd 1 ft 6 in", LENGTH, 90 * 0.0254),
    ("2 m 15 cm", LENGTH, 2.15),
    ("1 1/4 in", LENGTH, 31.75e-3),
    ("1-1/4 in", LENGTH, 31.75e-3),
    ("1\u00bc in", LENGTH, 31.75e-3),
    ("-1 1/4 in", LENGTH, -31.75e-3),
    ("1/4 in", LENGTH, 6.35e-3),
    ("\u00bd in", LENGTH, 12.7e-3),
    ("5/4 in", LENGTH, 31.75e-3),
    ("7 furlongs", LENGTH, 7 * 201.168),
    ("10 mil", LENGTH, 0.254e-3),
    ("10 yards", LENGTH, 9.144),
    ("10 Metres", LENGTH, 10.0),
    ("550 nm", LENGTH, 550e-9),
    ("5 %", RATIO, 0.05),
    ("5%", RATIO, 0.05),
    ("0.66", RATIO, 0.66),
    ("0,66", RATIO, 0.66),
    ("2/3", RATIO, 2 / 3),
    ("2:1", RATIO, 2.0),
    ("1.5 : 1", RATIO, 1.5),
    ("1:4", RATIO, 0.25),
    ("250", RATIO, 250.0),
    ("100 ppm", RATIO, 1e-4),
    ("12", COUNT, 12.0),
    ("12.5", COUNT, 12.5),
    ("12 turns", COUNT, 12.0),
    ("2 turn", COUNT, 2.0),
    ("12 1/2 t", COUNT, 12.5),
    ("120 deg", ANGLE, 2 * math.pi / 3),
    ("120\u00b0", ANGLE, 2 * math.pi / 3),
    ("1.5 rad", ANGLE, 1.5),
    ("10 MW", POWER, 10e6),
    ("10 mW", POWER, 10e-3),
    ("1k5", POWER, 1500.0),
    ("1.5 KW", POWER, 1500.0),
    ("3 kV", Dimension.VOLTAGE, 3000.0),
    ("250 ma", Dimension.CURRENT, 0.25),
    ("5 mS/m", Dimension.CONDUCTIVITY, 5e-3),
    ("5 ms/m", Dimension.CONDUCTIVITY, 5e-3),
    ("58 MS/m", Dimension.CONDUCTIVITY, 58e6),
    ("61 % IACS", Dimension.CONDUCTIVITY, 0.61 * 58e6),
    ("20 \u00b0C", Dimension.TEMPERATURE, 20.0),
    ("-40 degF", Dimension.TEMPERATURE, -40.0),
    ("68 F", Dimension.TEMPERATURE, 20.0),
    ("300 K", Dimension.TEMPERATURE, 26.85),
    ("1 h 30 min", Dimension.TIME, 5400.0),
    ("2 lb 3 oz", Dimension.MASS, 35 * 0.028349523125),
    ("0.8 db", Dimension.LOSS, 0.8),
    ("4 dB/100 m", Dimension.LOSS_PER_LENGTH, 0.04),
    ("4 dB/100m", Dimension.LOSS_PER_LENGTH, 0.04),
    ("4 dB per 100 ft", Dimension.LOSS_PER_LENGTH, 4 / 30.48),
    ("30 ppm/K", Dimension.TEMPERATURE_COEFFICIENT, 30e-6),
    ("-750 ppm/\u00b0C", Dimension.TEMPERATURE_COEFFICIENT, -750e-6),
    ("100 pF/m", Dimension.CAPACITANCE_PER_LENGTH, 100e-12),
    ("30.48 pF/ft", Dimension.CAPACITANCE_PER_LENGTH, 100e-12),
]


@pytest.mark.parametrize(("text", "dimension", "value"), TYPED)
def test_typed(text, dimension, value):
    # 1e-15: the hand-written side rounds at most a few times where the reader rounds once.
    assert read(text, dimension) == pytest.approx(value, rel=1e-15, abs=0)


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("8.2 uH", INDUCTANCE, 8.2e-6),
        ("47 pF", CAPACITANCE, 47e-12),
        ("14.074 MHz", FREQUENCY, 14074000.0),
        ("9906 mm", LENGTH, 9.906),
        ("32 ft 6 in", LENGTH, 9.906),
        ("0.1 %", RATIO, 0.001),
    ],
)
def test_typed_is_the_nearest_float(text, dimension, value):
    assert read(text, dimension) == value


CASES = tomllib.loads((ROOT / "tests/published/astm-b258.toml").read_text("utf-8"))["case"]


@pytest.mark.parametrize("case", CASES, ids=lambda case: case["id"])
def test_gauge(case):
    gauge = case["given"]["gauge"]
    metres = {"gauge_mm": 1e-3, "gauge_in": 0.0254}[case["formula"]]
    for text in (f"AWG {gauge}", f"{gauge} AWG", f"#{gauge}", f"awg{gauge}", f"#{gauge} AWG"):
        assert read(text, LENGTH) / metres == pytest.approx(case["expect"], rel=0, abs=case["within"])


def test_gauge_law():
    # The law's own statement: 39 steps of equal ratio, 92 from one end to the other.
    assert gauge_diameter(-3) / gauge_diameter(36) == pytest.approx(92, rel=1e-14)
    assert read("4/0 AWG", LENGTH) == read("AWG 0000", LENGTH) == gauge_diameter(-3)
    assert read("1/0 AWG", LENGTH) == read("AWG 0", LENGTH) == gauge_diameter(0)


@pytest.mark.parametrize(
    ("text", "dimension", "slack"),
    [
        ("10.05MHz", FREQUENCY, 0.005 / 10.05),
        ("7050 kHz", FREQUENCY, 0.5 / 7050),
        ("7.050 MHz", FREQUENCY, 0.0005 / 7.05),
        ("47 pF", CAPACITANCE, 0.5 / 47),
        ("4p7", CAPACITANCE, 0.05 / 4.7),
        ("1.20e3 Hz", FREQUENCY, 0.005 / 1.2),
        ("32 ft 6 in", LENGTH, 0.5 / 390),
        ("1 1/4 in", LENGTH, 0.125 / 1.25),
        ("-3.0 cm", LENGTH, 0.05 / 3),
        ("2.0:1", RATIO, 0.05 / 2),
        ("180", RATIO, 0.5 / 180),
        ("0 ohm", RESISTANCE, math.inf),
    ],
)
def test_slack(text, dimension, slack):
    assert read_exact(text, dimension).relative_slack == pytest.approx(slack, rel=1e-14)


def refusal(text, dimension=LENGTH):
    with pytest.raises(BadInput) as caught:
        read(text, dimension, "antenna.lengths.inner")
    (fault,) = caught.value.faults
    assert fault.where == "antenna.lengths.inner"
    assert fault.value == text
    assert fault.help
    line = str(caught.value)
    assert line.isprintable()
    return fault.code, line


@pytest.mark.parametrize(
    ("text", "dimension", "code", "words"),
    [
        ("", LENGTH, "empty", "for example 9.91 m, 32 ft 6 in or AWG 14"),
        ("   ", LENGTH, "empty", "9.91 m"),
        ("1" * 10_000, LENGTH, "too_long", "..."),
        ("7.05", FREQUENCY, "no_unit", "7.05 MHz or 7.05 kHz?"),
        ("7050", FREQUENCY, "no_unit", "7050 kHz or 7050 Hz?"),
        ("9,91", LENGTH, "no_unit", "9,91 m or 9,91 ft?"),
        ("50", RESISTANCE, "no_unit", "50 ohm or 50 kohm?"),
        ("20", Dimension.TEMPERATURE, "no_unit", "20 degC or 20 degF?"),
        ("7 MHz", LENGTH, "wrong_dimension", "is a frequency, where a length is wanted; for example 9.91 m"),
        ("7 mhz", LENGTH, "wrong_dimension", "a frequency"),
        ("7 furlongs", FREQUENCY, "wrong_dimension", "is a length, where a frequency is wanted"),
        ("50 %", COUNT, "wrong_dimension", "a number of turns is wanted"),
        ("50 ohm", RATIO, "wrong_dimension", "is a resistance"),
        ("5 kelvin", RATIO, "wrong_dimension", "is a temperature"),
        ("1,500 m", LENGTH, "two_meanings", "1500 m or 1.500 m?"),
        ("-1,500 m", LENGTH, "two_meanings", "-1500 m or -1.500 m?"),
        ("1 500 m", LENGTH, "two_meanings", "1500 m or 1.500 m?"),
        ("5 ft 1,500 in", LENGTH, "two_meanings", "5 ft 1500 in or 5 ft 1.500 in?"),
        ("7,050", FREQUENCY, "two_meanings", "7050 or 7.050?"),
        ("7 zorkmids", LENGTH, "unknown_unit", "9.91 m"),
        ("7 [b]m[/b]", LENGTH, "unknown_unit", "[b]m[/b]"),
        ("10 mf", CAPACITANCE, "unknown_unit", "47 pF"),
        ("20 kelvins", Dimension.TEMPERATURE, "unknown_unit", "20 degC"),
        ("nan", LENGTH, "not_finite", "9.91 m"),
        ("nan", RATIO, "not_finite", "0.66"),
        ("inf", RATIO, "not_finite", "0.66"),
        ("-inf m", LENGTH, "not_finite", "9.91 m"),
        ("Infinity", RATIO, "not_finite", "0.66"),
        ("1e400 m", LENGTH, "not_finite", "9.91 m"),
        ("1e308 km", LENGTH, "not_finite", "9.91 m"),
        ("1e99999999 m", LENGTH, "not_finite", "9.91 m"),
        ("1e-330 m", LENGTH, "too_small", "9.91 m"),
        ("9**9**9", RATIO, "unreadable", "0.66"),
        ("9**9**9 m", LENGTH, "unreadable", "9.91 m"),
        ("9^9 m", LENGTH, "unreadable", "9.91 m"),
        ("1 + 1 m", LENGTH, "unreadable", "9.91 m"),
        ("m", LENGTH, "unreadable", "9.91 m"),
        ("-", LENGTH, "unreadable", "9.91 m"),
        ("--3 m", LENGTH, "unreadable", "9.91 m"),
        ("+-3 m", LENGTH, "unreadable", "9.91 m"),
        ("1.2.3 m", LENGTH, "unreadable", "9.91 m"),
        ("1,5,5 m", LENGTH, "unreadable", "9.91 m"),
        ("1/0 in", LENGTH, "unreadable", "9.91 m"),
        ("1 5/4 in", LENGTH, "unreadable", "9.91 m"),
        ("5 ft 13 in", LENGTH, "unreadable", "less than one of the larger"),
        ("5 ft 12 in", LENGTH, "unreadable", "less than one of the larger"),
        ("5.5 ft 3 in", LENGTH, "unreadable", "9.91 m"),
        ("3 in 5 ft", LENGTH, "unreadable", "less than one"),
        ("7 MHz 5 kHz", FREQUENCY, "unreadable", "7.05 MHz"),
        ("AWG 14.5", LENGTH, "unreadable", "AWG 14"),
        ("-AWG 14", LENGTH, "unreadable", "AWG 14"),
        ("AWG 00000", LENGTH, "unreadable", "AWG 14"),
        ("8u2", LENGTH, "unreadable", "9.91 m"),
        ("0:1", RATIO, "unreadable", "0.66"),
        ("7 m\x1b[31m", LENGTH, "unreadable", "\\x1b[31m"),
        ("7\x00 m", LENGTH, "unreadable", "\\x00"),
        ("7\u202e m", LENGTH, "unreadable", "\\u202e"),
        ("7 \ud800", LENGTH, "unreadable", "\\ud800"),
        ("7\nm", LENGTH, "unreadable", "7\\x0am"),
        ("10\u00b2 m", LENGTH, "unreadable", "9.91 m"),
    ],
)
def test_refused(text, dimension, code, words):
    found, line = refusal(text, dimension)
    assert (found, words in line) == (code, True), line


@pytest.mark.parametrize("dimension", Dimension)
def test_every_dimension_refuses_another_and_shows_what_works(dimension):
    text = "5 V" if dimension is not Dimension.VOLTAGE else "5 A"
    _, line = refusal(text, dimension)
    example = line.rsplit("for example ", 1)[1].replace(" or ", ", ")
    for suggestion in example.split(", "):
        assert math.isfinite(read(suggestion, dimension))


@pytest.mark.parametrize("text", ["7.05", "0.2", "7050", "7050000"])
@pytest.mark.parametrize("dimension", [d for d in Dimension if d not in (RATIO, COUNT)])
def test_suggested_units_work(dimension, text):
    code, line = refusal(text, dimension)
    assert code == "no_unit"
    for suggestion in line.rsplit("; ", 1)[1].rstrip("?").split(" or "):
        assert math.isfinite(read(suggestion, dimension))


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("35-j120", 35 - 120j),
        ("35 - j120", 35 - 120j),
        ("35-120j", 35 - 120j),
        ("35 - 120 j", 35 - 120j),
        ("35 -120", 35 - 120j),
        ("35 + 120", 35 + 120j),
        ("35+j0", 35 + 0j),
        ("35+J12.5", 35 + 12.5j),
        ("35 - i120", 35 - 120j),
        ("\u22125 + j3 \u03a9", -5 + 3j),
        ("j50", 50j),
        ("-50j", -50j),
        ("50", 50 + 0j),
        ("50 ohm", 50 + 0j),
        ("3,5-j2,5", 3.5 - 2.5j),
        ("1e3-j1e-2", 1000 - 0.01j),
    ],
)
def test_impedance(text, value):
    assert read_impedance(text) == value


@pytest.mark.parametrize(
    "text",
    [
        "",
        "35-120",
        "35 120",
        "35j120",
        "j",
        "35+",
        "35+j",
        "1,500",
        "nan",
        "nan+nanj",
        "1e400",
        "50 V",
        "9" * 99,
    ]
    + ["35-j1.2.3", "9**9**9", "35\x1b-j1"],
)
def test_impedance_refused(text):
    with pytest.raises(BadInput) as caught:
        read_impedance(text, "station.load")
    assert caught.value.faults[0].where == "station.load"
    assert "or" in caught.value.faults[0].help
    assert str(caught.value).isprintable()


def test_elements():
    assert set(ELEMENTS) == {"f", "L", "C", "R", "RD", "Q", "B"}
    for name, text in {
        "f": "10.05MHz",
        "L": "5.3uH",
        "C": "47pF",
        "R": "2R2",
        "RD": "60k",
        "Q": "180",
    }.items():
        assert read(text, ELEMENTS[name]) > 0


# Names written with signs, or with a digit, that pint spells otherwise.
IN_WORDS = {
    "%": "percent",
    "mil": "thou",
    "'": "foot",
    '"': "inch",
    "": "",
    "%IACS": "percent * siemens / meter * 58e6",
    "dB/100m": "decibel / (100 * meter)",
    "dB/100ft": "decibel / (100 * foot)",
    "/K": "1 / kelvin",
}
# Not in pint's own list, or another unit there: radio and dealers' ways of writing.
OWN_NAMES = {"t", "turn", "turns", "%IACS", "", "mho/m", "mmho/m"}
SI = {
    LENGTH: "meter",
    FREQUENCY: "hertz",
    INDUCTANCE: "henry",
    CAPACITANCE: "farad",
    RESISTANCE: "ohm",
    POWER: "watt",
    Dimension.VOLTAGE: "volt",
    Dimension.CURRENT: "ampere",
    ANGLE: "radian",
    Dimension.CONDUCTIVITY: "siemens / meter",
    RATIO: "",
    Dimension.TIME: "second",
    Dimension.MASS: "kilogram",
    Dimension.TEMPERATURE_COEFFICIENT: "1 / kelvin",
    Dimension.CAPACITANCE_PER_LENGTH: "farad / meter",
}
NAMED = [(dimension, name) for dimension in UNITS for name in UNITS[dimension]]


@pytest.fixture(scope="module")
def full():
    return pint.UnitRegistry(non_int_type=Fraction)


def words(name):
    if name in IN_WORDS:
        return IN_WORDS[name]
    return name.replace("%", "percent").replace("/C", "/K").replace("/degC", "/K")


@pytest.mark.parametrize(
    ("dimension", "name"), [pair for pair in NAMED if pair[0] in SI and pair[1] not in OWN_NAMES]
)
def test_table_equals_pint(full, dimension, name):
    unit = UNITS[dimension][name]
    factor = full.Quantity(Fraction(1), words(name)).to(SI[dimension]).magnitude
    # pint's degree holds pi to more digits than a float; every other factor is a fraction, so exact.
    close = Fraction(1, 10**18) if dimension is ANGLE else 0
    assert abs(Fraction(unit.top, unit.bottom) / factor - 1) <= close
    assert unit.shift == 0


@pytest.mark.parametrize("name", UNITS[Dimension.TEMPERATURE])
def test_temperatures_equal_pint(full, name):
    spelled = {"C": "degC", "F": "degF", "K": "kelvin"}.get(name, name)
    for typed in (-40, 0, 20, 100):
        expected = full.Quantity(Fraction(typed), spelled).to("degC").magnitude
        assert read(f"{typed} {name}", Dimension.TEMPERATURE) == pytest.approx(float(expected), abs=1e-12)


@pytest.mark.parametrize(
    ("dimension", "name"),
    [
        pair
        for pair in NAMED
        if pair[1].replace("/", "").isalpha() and pair[1][0] != "/" and pair[0] is not Dimension.TEMPERATURE
    ],
)
def test_definition_file_equals_table(dimension, name):
    if name.endswith(("/C", "/degC")):
        name = name.rsplit("/", 1)[0] + "/K"
    found, unit = _ask_pint(name)
    assert found is dimension
    own = UNITS[dimension][name]
    assert Fraction(unit.top, unit.bottom) == Fraction(own.top, own.bottom)


# Conversion factors of NIST SP 811, appendix B, and the neper of its table 8: from memory.
@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("1 in", LENGTH, 2.54e-2),
        ("1 ft", LENGTH, 3.048e-1),
        ("1 yd", LENGTH, 9.144e-1),
        ("1 mil", LENGTH, 2.54e-5),
        ("1 mile", LENGTH, 1609.344),
        ("1 fathom", LENGTH, 1.8288),
        ("1 lb", Dimension.MASS, 0.45359237),
        ("1 oz", Dimension.MASS, 2.8349523125e-2),
        ("1 deg", ANGLE, 0.017453292519943295),
        ("1 Np", Dimension.LOSS, 8.685889638065037),
        ("1 mho/m", Dimension.CONDUCTIVITY, 1.0),
        ("32 degF", Dimension.TEMPERATURE, 0.0),
        ("273.15 K", Dimension.TEMPERATURE, 0.0),
    ],
)
def test_conversion_factors(text, dimension, value):
    assert read(text, dimension) == value


def test_neper():
    assert read("1 Np", Dimension.LOSS) == pytest.approx(20 / math.log(10), rel=1e-15)


def test_slips_of_case_never_change_an_exact_name():
    for dimension, names in UNITS.items():
        for name, unit in names.items():
            if name:
                number = Fraction(3 * unit.top + unit.shift, unit.bottom)
                assert read(f"3 {name}", dimension) == float(number), (dimension, name)


def test_shown_units_exist():
    for table in (SHOWN, IMPERIAL):
        for dimension, units in table.items():
            assert [name for name, _ in units if name not in UNITS[dimension]] == []
            assert [least for _, least in units] == sorted(least for _, least in units)


finite = st.floats(allow_nan=False, allow_infinity=False)
sensible = st.floats(min_value=1e-15, max_value=1e12)
dimensions = st.sampled_from(Dimension)


@given(finite, dimensions)
@example(5e-324, LENGTH)
@example(sys.float_info.max, ANGLE)
@example(sys.float_info.max, INDUCTANCE)
@example(5e-324, ANGLE)
@example(-0.0, LENGTH)
@example(0.1 + 0.2, LENGTH)
@settings(max_examples=600, deadline=None)
def test_text_and_back_loses_nothing(value, dimension):
    text = to_text(value, dimension)
    assert text.isascii()
    assert read(text, dimension) == value
    assert to_text(read(text, dimension), dimension) == text


@given(st.integers(1, 9999), st.integers(-4, 4), dimensions)
def test_text_is_as_short_as_what_was_typed(digits, power, dimension):
    unit = SHOWN[dimension][0][0]
    text = to_text(read(f"{digits}e{power} {unit}".rstrip(), dimension), dimension)
    shown = text.split(" ")[0].replace(".", "").strip("0") or "0"
    assert shown == str(digits).strip("0")


def typed_quantities():
    names = st.sampled_from([pair for pair in NAMED if pair[0] is not Dimension.TEMPERATURE])
    numbers = st.one_of(
        st.integers(0, 999).map(str),
        st.tuples(st.integers(0, 9999), st.integers(0, 99)).map(lambda n: f"{n[0]}.{n[1]:02}"),
        st.tuples(st.integers(0, 99), st.integers(0, 7)).map(lambda n: f"{n[0]} {n[1]}/8"),
    )
    return st.tuples(numbers, names).map(lambda both: (f"{both[0]} {both[1][1]}".strip(), both[1][0]))


@given(typed_quantities())
def test_writing_twice_changes_nothing(typed):
    text, dimension = typed
    once = to_text(read(text, dimension), dimension)
    assert to_text(read(once, dimension), dimension) == once


ALPHABET = st.one_of(
    st.text(max_size=90),
    st.text(
        alphabet="0123456789.,-+/ '\"eEjkMmunpRHzFftinAWG#%:*()[]\u00b5\u03a9\u00b0\u00bd\u2009", max_size=30
    ),
    st.lists(
        st.sampled_from(
            [
                "1",
                "7.05",
                "1,5",
                " ",
                "1/4",
                "MHz",
                "ft",
                "in",
                "'",
                '"',
                "u",
                "H",
                "m",
                "AWG",
                "-",
                "e9",
                "dB",
            ]
            + ["/100", "per", "furlong", "nan", "inf", "**", "j", "ohm", "%", "K", "deg", "/", "in", "lambda"]
        ),
        max_size=9,
    ).map("".join),
)


@given(ALPHABET, dimensions)
@settings(max_examples=1500, deadline=1000)
def test_anything_typed_is_read_or_refused(text, dimension):
    try:
        reading = read_exact(text, dimension)
    except BadInput as refused:
        assert str(refused).isprintable()
        assert refused.faults[0].help
        assert len(str(refused)) < 400
    else:
        assert math.isfinite(reading.value)
        assert reading.relative_slack > 0


@given(ALPHABET)
@settings(max_examples=500, deadline=1000)
def test_any_impedance_is_read_or_refused(text):
    try:
        value = read_impedance(text)
    except BadInput as refused:
        assert str(refused).isprintable()
    else:
        assert math.isfinite(value.real) and math.isfinite(value.imag)


@pytest.mark.parametrize(
    ("value", "dimension", "options", "text"),
    [
        (9.912, LENGTH, {"resolution": 0.01}, "9.91 m"),
        (9.899, LENGTH, {"resolution": 0.01}, "9.90 m"),
        (9.912, LENGTH, {"resolution": 0.05}, "9.90 m"),
        (9.912, LENGTH, {"resolution": 0.013}, "9.91 m"),
        (9.912, LENGTH, {"resolution": 1}, "10 m"),
        (0.9996, LENGTH, {"resolution": 0.01}, "1.00 m"),
        (-0.0004, LENGTH, {"resolution": 0.01}, "0 m"),
        (0.255, LENGTH, {"resolution": 0.01}, "26 cm"),
        (0.0016277, LENGTH, {}, "1.628 mm"),
        (0.031, LENGTH, {}, "31 mm"),
        (0.0, LENGTH, {}, "0 m"),
        (390 * 0.0254, LENGTH, {"system": "imperial", "resolution": 0.01}, "32 ft 6 in"),
        (390.25 * 0.0254, LENGTH, {"system": "imperial", "resolution": 0.001}, "32 ft 6 1/4 in"),
        (388.0 * 0.0254, LENGTH, {"system": "imperial", "resolution": 0.3}, "32 ft 0 in"),
        (360.5 * 0.0254, LENGTH, {"system": "imperial", "resolution": 0.01}, "30 ft 1/2 in"),
        (-390 * 0.0254, LENGTH, {"system": "imperial"}, "-32 ft 6 in"),
        (0.03175, LENGTH, {"system": "imperial"}, "1.25 in"),
        (11.9999 * 0.0254 * 12, LENGTH, {"system": "imperial"}, "12 ft 0 in"),
        (7.0523e6, FREQUENCY, {"resolution": 1e3}, "7.052 MHz"),
        (7.0523e6, FREQUENCY, {"digits": 2}, "7.1 MHz"),
        (999_960.0, FREQUENCY, {}, "1 MHz"),
        (28e3, FREQUENCY, {}, "28 kHz"),
        (8.2e-6, INDUCTANCE, {}, "8.2 uH"),
        (47e-12, CAPACITANCE, {}, "47 pF"),
        (4700.0, RESISTANCE, {}, "4.7 kohm"),
        (2 * math.pi / 3, ANGLE, {}, "120 deg"),
        (5e-3, Dimension.CONDUCTIVITY, {}, "5 mS/m"),
        (20.0, Dimension.TEMPERATURE, {"system": "imperial"}, "68 degF"),
        (0.04, Dimension.LOSS_PER_LENGTH, {}, "4 dB/100m"),
        (12.5, COUNT, {}, "12.5 turns"),
        (1.8765, RATIO, {"digits": 3}, "1.88"),
        (12345.0, RATIO, {"digits": 3}, "12300"),
        (math.nan, RATIO, {}, "not known"),
        (math.inf, RATIO, {}, "infinite"),
    ],
)
def test_show(value, dimension, options, text):
    assert show(value, dimension, **options) == text


def test_show_parts():
    assert show_parts(9.912, LENGTH, resolution=0.01) == ("9.91", "m")
    assert show_parts(9.906, LENGTH, "imperial") == ("32 ft 6", "in")
    assert show_parts(2.0, RATIO) == ("2", "")


@given(sensible, dimensions, st.sampled_from(["metric", "imperial"]), st.integers(2, 9))
@settings(max_examples=400)
def test_shown_text_reads_back_to_its_digits(value, dimension, system, digits):
    text = show(value, dimension, system=system, digits=digits)
    # Half a unit of the last digit; Fahrenheit rounds its own larger number, so there it is absolute.
    slack = 0.5 * 10.0 ** (1 - digits)
    assert read(text, dimension) == pytest.approx(value, rel=1.001 * slack, abs=32 * slack)
    if dimension is not Dimension.TEMPERATURE:
        assert read(text, dimension) == pytest.approx(value, rel=1.001 * slack, abs=0)


@given(st.floats(-1e6, 1e6), st.floats(1e-6, 10))
def test_resolution_bounds_the_rounding(value, resolution):
    for system in ("metric", "imperial"):
        shown = read(show(value, LENGTH, system=system, resolution=resolution), LENGTH)
        # The nearest of 1, 2 and 5 is coarser by a half at most, a tape's mark never under 1/64 in.
        assert abs(shown - value) <= 0.5 * max(1.5 * resolution, 0.0254 / 64) * (1 + 1e-9) + 1e-9


@given(st.floats(1e-12, 1e12))
def test_snapped_step(step):
    lead, power = snapped(step)
    assert lead in (1, 2, 5)
    # The step is first rounded to two digits: 2 stands for 1.45 to 3.45, 5 up to 7.45.
    assert 2 / 3.451 <= lead * 10.0**power / step <= 5 / 3.449


def test_numerals():
    assert rounded(1234.5678, 6, None) == "1234.57"
    assert rounded(1e300, 3, None) == "1e300"
    assert rounded(1e300, 3, 1e-300) == "1e300"
    assert shortest_decimal(0.1, 1, 1) == ("1", -1)
    assert shortest_decimal(math.pi, 10**19, 10**19) == ("3141592653589793", -15)


@pytest.mark.parametrize("options", [{"system": "cubits"}, {"digits": 0}, {"resolution": 0.0}])
def test_show_refuses_nonsense(options):
    with pytest.raises(ValueError, match=next(iter(options))):
        show(1.0, LENGTH, **options)


def test_text_of_no_number():
    with pytest.raises(ValueError, match="finite"):
        to_text(math.nan, LENGTH)


def test_everyday_text_needs_no_pint():
    code = (
        "import sys; from trapdesk.units.units import Dimension as D, read, show, to_text;"
        "read('8.2 uH', D.INDUCTANCE); read('32 ft 6 in', D.LENGTH); read('7.1 mhz', D.FREQUENCY);"
        "read('AWG 14', D.LENGTH); show(to_text(2.0, D.ANGLE) and 2.0, D.ANGLE);"
        "assert not {'pint', 'numpy'} & set(sys.modules);"
        "read('7 furlongs', D.LENGTH); assert 'pint' in sys.modules"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, timeout=60, check=False
    )
    assert (done.returncode, done.stderr) == (0, "")


def test_letters_are_prefixes():
    for dimension, letters in LETTERS.items():
        for letter, power in letters.items():
            assert read(f"4{letter}7", dimension) == float(Fraction(47, 10) * Fraction(10) ** power)


def test_faults_in_words():
    faults = [Fault("a.b", "too_large", "9 km", "1 km", "try 1 m"), Fault("", "odd_thing", "x", "3")]
    assert str(BadInput(faults)).splitlines() == [
        "a.b: '9 km' is more than 1 km; try 1 m",
        "'x': odd thing (3)",
    ]
    assert BadInput(faults).exit_code == 2
    file = FileFault("some\x1b.toml", "not_toml", "see line 3", faults)
    assert str(file).splitlines()[0] == "some\\x1b.toml: the file is not valid TOML; see line 3"
    assert (len(str(file).splitlines()), file.exit_code) == (3, 3)
    none = NoAnswer("no_length_resonates", "antenna.lengths.end", {"f_hz": 7.05e6}, "raise the wire")
    assert str(none) == "antenna.lengths.end: no length resonates (f_hz = 7.05e+06); raise the wire"
    assert none.exit_code == 1
    with pytest.raises(ValueError, match="at least one"):
        BadInput([])


@given(st.text(max_size=200), st.integers(4, 80))
def test_visible(text, limit):
    shown = visible(text, limit)
    assert shown.isprintable()
    assert len(shown) <= limit
    if text.isprintable() and len(text) <= limit:
        assert shown == text
    if len(text) > limit:
        assert shown.endswith("...")
