"""Prints on capacitors: both directions over the whole of each table, and bad ones refused at their place."""

import tomllib
from itertools import product
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from trapdesk.design.preferred_values import SERIES
from trapdesk.errors import BadInput
from trapdesk.units import print_tables, prints

PUBLISHED = tomllib.loads((Path(__file__).parent / "published" / "capacitor-codes.toml").read_text("utf-8"))
E6 = (10, 15, 22, 33, 47, 68)  # IEC 60063, from memory
E12 = (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82)
# First and last rows of the finer series of IEC 60063, from memory.
FINE = {"E48": (10.0, 10.5, 95.3), "E96": (10.0, 10.2, 97.6), "E192": (10.0, 10.1, 98.8)}


@pytest.mark.parametrize("case", PUBLISHED["value"], ids=lambda case: case["print"])
def test_published_values(case):
    said = prints.read(case["print"])
    assert said.capacitance == pytest.approx(case["capacitance"], rel=1e-12)
    assert said.tolerance == (case["tolerance"], case["tolerance"])


def test_published_tables():
    for first, second, third in product(*(PUBLISHED[t] for t in ("figure", "multiplier", "allowed"))):
        drift, doubt = prints.read_characteristic(first + second + third)
        assert drift == pytest.approx(
            PUBLISHED["figure"][first] * PUBLISHED["multiplier"][second] * 1e-6, abs=1e-15
        )
        assert doubt == pytest.approx(PUBLISHED["allowed"][third] * 1e-6)
    assert SERIES["E24"] == tuple(round(10 * value) for value in PUBLISHED["e24"])
    for letter, share in PUBLISHED["percent"].items():
        assert prints.read_tolerance(letter, 47e-12) == pytest.approx((share / 100, share / 100))
    for letter, size in PUBLISHED["picofarads"].items():
        assert prints.read_tolerance(letter, 5e-12) == pytest.approx((size / 5, size / 5))
    for letter, share in PUBLISHED["varies"].items():
        assert prints.read(f"1n0 X7{letter}").varies == pytest.approx((share / 100, share / 100))
    assert prints.read_tolerance("Z", 1e-9) == (0.2, 0.8)


@pytest.mark.parametrize("case", PUBLISHED["value"], ids=lambda case: case["print"])
def test_published_values_are_written_so(case):
    size, share = case["capacitance"], case["tolerance"]
    assert prints.write_code(size) + prints.write_tolerance((share, share), size) == case["print"]


def test_published_tables_are_written_so():
    # What is written is read by the published table here, not by the reader: some meanings have two codes.
    for first, second, third in product(*(PUBLISHED[t] for t in ("figure", "multiplier", "allowed"))):
        drift = PUBLISHED["figure"][first] * PUBLISHED["multiplier"][second] * 1e-6
        code = prints.write_characteristic(drift, PUBLISHED["allowed"][third] * 1e-6)
        meant = PUBLISHED["figure"][code[0]] * PUBLISHED["multiplier"][code[1]] * 1e-6
        assert meant == pytest.approx(drift, abs=1e-15)
        assert code[2] == third
    for letter, share in PUBLISHED["percent"].items():
        assert prints.write_tolerance((share / 100, share / 100), 47e-12) == letter
    for letter, size in PUBLISHED["picofarads"].items():
        assert prints.write_tolerance((size / 5, size / 5), 5e-12) == letter
    for value in PUBLISHED["e24"]:
        assert prints.preferred(value * 1e-12) == pytest.approx(value * 1e-12)
        assert prints.preferred(1.02 * value * 1e-9) == pytest.approx(value * 1e-9)
    # IEC 60062's own examples, from memory.
    for size, letters in (
        (0.33e-12, "p33"),
        (3.32e-12, "3p32"),
        (10e-12, "10p"),
        (150e-9, "150n"),
        (4.7e-9, "4n7"),
    ):
        assert prints.write_letters(size) == letters


def test_trade_names_mean_their_codes():
    for name, code in PUBLISHED["trade"].items():
        drift, doubt = prints.read_characteristic(code)
        named, named_doubt = prints.read_characteristic(name)
        assert named == pytest.approx(drift, abs=1e-12)
        assert named_doubt == doubt


def test_series():
    assert SERIES["E6"] == E6
    assert SERIES["E12"] == E12
    assert len(SERIES["E3"]) == 3
    for name, (first, second, last) in FINE.items():
        series = SERIES[name]
        assert (series[0], series[1], series[-1]) == (first, second, last)
        assert len(series) == int(name[1:]) == len(set(series))
    assert set(SERIES["E48"]) < set(SERIES["E96"]) < set(SERIES["E192"])


@pytest.mark.parametrize("series", SERIES)
@given(st.floats(1e-14, 1e6))
def test_preferred_is_the_nearest(series, value):
    found = prints.preferred(value, series)
    assert prints.preferred(found, series) == pytest.approx(found)
    steps = 1 + 1.2 * (10 ** (1 / len(SERIES[series])) - 1)
    assert value / steps < found < value * steps


def test_every_value_code_both_ways():
    for digits, power in product(range(10, 100), (*range(7), 8, 9)):
        code = f"{digits}{power}"
        size = digits * 10.0 ** {8: -2, 9: -1}.get(power, power) * 1e-12
        assert prints.read_code(code) == pytest.approx(size, rel=1e-14)
        assert prints.write_code(prints.read_code(code)) == code


@pytest.mark.parametrize("letter", print_tables.PERCENT)
@pytest.mark.parametrize("capacitance", [4.7e-12, 47e-12, 4.7e-9])
def test_every_tolerance_letter_both_ways(letter, capacitance):
    assert prints.write_tolerance(prints.read_tolerance(letter, capacitance), capacitance) == letter


def test_every_characteristic_both_ways():
    for code in map("".join, product(print_tables.FIGURE, print_tables.MULTIPLIER, print_tables.ALLOWED)):
        meaning = prints.read_characteristic(code)
        written = prints.write_characteristic(*meaning)
        assert prints.read_characteristic(written) == pytest.approx(meaning, abs=1e-15)
        assert written[2] == code[2]


@pytest.mark.parametrize("power", range(-13, -6))
@pytest.mark.parametrize("digits", [100, 101, 220, 475, 999])
def test_letters_for_points_both_ways(digits, power):
    size = digits * 10.0 ** (power - 2)
    text = prints.write_letters(size)
    assert prints.read(text).capacitance == pytest.approx(size, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "capacitance", "tolerance", "voltage", "drift"),
    [
        ("470J 3kV", 47e-12, 0.05, 3000.0, None),
        ("4n7", 4.7e-9, None, None, None),
        ("101K", 100e-12, 0.1, None, None),
        ("47pF 5% C0G", 47e-12, 0.05, None, 0.0),
        ("47 pF J 500 V N150", 47e-12, 0.05, 500.0, -150e-6),
        ("4R7C 2kV5", 4.7e-12, 0.25 / 4.7, 2500.0, None),
        ("p47", 0.47e-12, None, None, None),
        ("n22M U2J", 220e-12, 0.2, None, -750e-6),
        ("22 NPO", 22e-12, None, None, 0.0),
        ("6.8pF", 6.8e-12, None, None, None),
        ("680", 68e-12, None, None, None),
        ("680pF", 680e-12, None, None, None),
        ("100F CG", 10e-12, 0.01, None, 0.0),
        ("0.001uF", 1e-9, None, None, None),
    ],
)
def test_prints_as_they_stand(text, capacitance, tolerance, voltage, drift):
    said = prints.read(text)
    assert said.text == text
    assert said.capacitance == pytest.approx(capacitance, rel=1e-12)
    assert said.tolerance == (None if tolerance is None else pytest.approx((tolerance, tolerance)))
    assert said.voltage == voltage
    assert said.drift == (None if drift is None else pytest.approx(drift))


@pytest.mark.parametrize(
    ("text", "at", "words"),
    [
        ("abc", 1, "means nothing"),
        ("47pX", 4, "tolerance letter"),
        ("470 47x3", 7, "means nothing"),
        ("N155 47", 1, "characteristic"),
        ("47p U4Q", 7, "characteristic"),
        ("47p U5J", 6, "characteristic"),
        ("47p Q2J", 5, "characteristic"),
        ("1n X9R", 5, "characteristic"),
        ("N150", 1, "no capacitance"),
        ("470 101", 5, "value twice"),
        ("47J K", 5, "tolerance twice"),
        ("47J 10%", 5, "tolerance twice"),
        ("47p 1kV 2kV", 9, "voltage twice"),
        ("47p C0G N150", 9, "characteristic twice"),
        ("229Y", 4, "tolerance letter"),
        ("47p 0%", 5, "tolerance"),
        ("107", 1, "tuned circuit"),
        ("0", 1, "tuned circuit"),
    ],
)
def test_bad_prints_are_refused_at_their_place(text, at, words):
    with pytest.raises(BadInput) as refused:
        prints.read(text, "a.key")
    line = str(refused.value)
    assert line.startswith("a.key: ")
    assert f"sign {at} of" in line
    assert words in line
    assert len(line.splitlines()) == 1


@pytest.mark.parametrize(("text", "words"), [("", "nothing is given"), ("x" * 61, "too long")])
def test_no_print_and_an_endless_one_are_refused(text, words):
    with pytest.raises(BadInput, match=words):
        prints.read(text)


@given(st.text(max_size=20))
def test_anything_is_read_or_refused(text):
    try:
        said = prints.read(text, "a.key")
    except BadInput as refused:
        assert all(line.isprintable() and len(line) < 400 for line in str(refused).splitlines())
    else:
        assert 1e-13 <= said.capacitance <= 1e-6
