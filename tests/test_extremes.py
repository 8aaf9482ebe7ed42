"""Designs at the ends of what is allowed: nothing is wider than 79 columns, no column runs into the next."""

import re

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from trapdesk.design.design import with_value
from trapdesk.design.rules import check
from trapdesk.errors import NoAnswer
from trapdesk.faces import cli, feed_json, feed_out
from trapdesk.faces.layout import WIDTH, fitted
from trapdesk.faces.rows import rows
from trapdesk.faces.shown import about, known, percents
from trapdesk.services.antenna.feed_point import way_of
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

PRESET = store.preset("80-40-cable")[0]
EXTREMES = {
    "station.power": (1e-12, 1e-6, 1e-3, 0.5, 5000.0),
    "station.mode": ("SSB", "carrier"),
    "station.reference": (1.0, 50.0, 2000.0),
    "station.swr_limit": (1.001, 2.0, 20.0),
    "station.line.length": (0.001, 25.0, 2000.0),
    "site.height": (12.0, 300.0),
    "bands.upper.name": ("40 m", "", "forty metres of the relief net", "80 m"),
    "antenna.wire.diameter": (1e-4, 0.02),
    "antenna.trap.coil.former": (0.012, 0.05, 0.2),
    "antenna.lengths.reserve": (0.0, 5.0),
    "title": ("x", "T" * 200, "words " * 33),
}


@st.composite
def designs(draw):
    """Return a preset with some of its values at an end of what is allowed."""
    design = PRESET
    for key in draw(st.sets(st.sampled_from(sorted(EXTREMES)), min_size=1, max_size=6)):
        design = with_value(design, key, draw(st.sampled_from(EXTREMES[key])))
    return design


@settings(
    max_examples=8,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)
@given(design=designs(), verb=st.sampled_from(["figures", "sheet", "tuner", "tolerance"]))
def test_no_verb_prints_wider_than_a_terminal(design, verb, tmp_path_factory, capsys):
    assert not check(design)
    path = tmp_path_factory.mktemp("extreme") / "design.toml"
    path.write_text(store.to_text(design), "utf-8")
    more = {"figures": ["--at", "1MHz,100MHz"], "tolerance": ["--trials", "50"]}.get(verb, [])
    code = cli.main([verb, str(path), *more])
    out, err = capsys.readouterr()
    assert code in (0, NoAnswer.exit_code), err
    wide = [line for line in out.splitlines() if len(line) > WIDTH]
    assert not wide
    # A unit is never followed by the next number at once.
    assert not [line for line in out.splitlines() if re.search(r"\d [num]?[WVA]\d", line)]


@given(
    value=st.floats(1e-15, 1e7),
    part=st.floats(1e-3, 0.5),
    dimension=st.sampled_from(["power", "current", "voltage"]),
)
def test_a_number_of_any_size_is_short(value, part, dimension):
    shown = known(value, value * part, dimension)
    assert len(shown.number) <= 10 and len(about(value, dimension)) <= 10
    assert "e" not in about(value, dimension).replace("under", "")


@pytest.mark.parametrize(
    ("watts", "told"),
    [(7.9e-6, "7.9 uW"), (4e-9, "4 nW"), (1e-12, "under 1 nW"), (0.036, "0.036 W"), (0.0036, "3.6 mW")],
)
def test_little_power_is_told_in_its_own_unit(watts, told):
    assert about(watts, "power") == told


@given(st.lists(st.floats(0, 1), min_size=2, max_size=6).filter(lambda parts: sum(parts) > 0.01))
def test_shares_add_up(parts):
    shares = [part / sum(parts) for part in parts]
    texts = percents(shares)
    numbers = [0 if text.startswith("under") else int(text.removesuffix(" %")) for text in texts]
    assert sum(numbers) == 100
    assert all(abs(n - 100 * share) < 1 for n, share in zip(numbers, shares, strict=True))


def test_what_is_too_wide_hangs_below():
    assert fitted(["  ab" * 30, "short"])[-1] == "short"
    assert max(map(len, fitted(["  " + "word " * 40]))) <= WIDTH


def test_figures_and_the_way_down_tell_the_same_shares(capsys):
    """Of 100 W without line or tuner, watts on the way down are per cent of the figures."""
    design = with_value(PRESET, "station.line", None)
    for key, value in (("tuner", None), ("choke", None), ("power", 100.0)):
        design = with_value(design, f"station.{key}", value)
    figures = solve(design)
    found = {row.key: row.value for row in rows(figures)}
    for role, band in figures.bands.items():
        watts = [float(text) for text in feed_out.printed(way_of(figures, band))[:4]]
        names = ("sky", "ground", "wire", "trap")
        told = [float(re.search(r"\d+", found[f"bands.{role}.{name}_share"])[0]) for name in names]
        assert watts == told and sum(told) == 100


def test_swr_with_a_tuner_says_how_it_is_set():
    figures = solve(PRESET)
    found = {row.key: row for row in rows(figures)}
    assert found["bands.lower.feed.other_worst"].given == "tuner set at aim"
    for band in figures.bands.values():
        told = feed_json.feed(band)
        # Set anew it matches everywhere; left as it was set for the aim it does not.
        assert told["worst_transmitter_swr"] < 1.01 < told["other_worst_swr"]
        assert told["tuner_set_anew_for_worst_transmitter_swr"] and told["other_tuner_left_as_set_for_aim"]
    plain = solve(with_value(PRESET, "station.tuner", None))
    assert {row.key: row for row in rows(plain)}["bands.lower.feed.other_worst"].given == ""


@pytest.mark.parametrize(
    ("names", "told"),
    [
        (("80 m", "80 m"), {"80 m 7.03", "80 m 3.55"}),
        (("", ""), {"upper band", "lower band"}),
        (("  ", "80 m"), {"upper band", "80 m"}),
        (("relief net by day", "relief net by night"), {"relie 7.03", "relie 3.55"}),
        (("40 m", "80 m"), {"40 m", "80 m"}),
    ],
)
def test_bands_are_told_apart(names, told, tmp_path, capsys):
    design = PRESET
    for role, name in zip(("upper", "lower"), names, strict=True):
        design = with_value(design, f"bands.{role}.name", name)
    assert {design.bands.called(role) for role, _ in design.bands.items()} == told
    path = tmp_path / "design.toml"
    store.save(design, path)
    assert store.load(path).bands == design.bands
    for verb, *more in (["figures"], ["tolerance", "--trials", "50"]):
        assert cli.main([verb, str(path), *more]) == 0
        out = capsys.readouterr().out
        assert all(name in out for name in told)
        assert not re.search(r"move  by|  SWR low|, on ,|on \.$", out)


@pytest.mark.parametrize(
    "typed",
    [
        "tank f=99GHz L=1.23456789pH Q=123456789",
        "tank f=1.23456789kHz C=0.987654321F R=123456.789ohm",
        "line RG-58/U length=98765.4321m f=99.987654GHz Z=0.00123-j987654321",
        "line RG-58/U length=0.1um f=1.23456kHz Z=987654321+j123456",
        "match Z=0.00123-j98765432 f=1.23456789kHz power=999999W",
        "match Z=987654321 f=99GHz power=0.000001W network=t-clc",
        "coil former=0.3m wire=0.2mm pitch=1mm turns=80 f=1.2345678MHz",
    ],
)
def test_no_typed_value_prints_wider_than_a_terminal(typed, capsys):
    code = cli.main(typed.split())
    out, err = capsys.readouterr()
    assert code in (0, 1, 2) and (out or err)
    assert max((len(line) for line in out.splitlines()), default=0) <= WIDTH
