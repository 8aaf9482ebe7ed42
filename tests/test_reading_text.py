"""Readings as they are typed: what is understood, and what is refused in one line."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trapdesk.design.reading_kinds import GROUPS, KINDS, PARTS, Doubt, Interval
from trapdesk.errors import BadInput
from trapdesk.units.reading_text import parse
from trapdesk.units.unit_names import Dimension


def one(text):
    (reading,) = parse([text])
    return reading


@pytest.mark.parametrize(
    ("text", "value", "more"),
    [
        ("trap.f0=14.05MHz", 14.05e6, {"how": "analyser", "doubt": Doubt(relative=0.001)}),
        ("trap.f0=14,05MHz", 14.05e6, {}),
        ("TRAP.F0 = 14050 kHz , how = dial", 14.05e6, {"how": "dial", "doubt": Doubt(relative=0.025)}),
        ("trap.f0=14.05MHz,doubt=5kHz,how=dial", 14.05e6, {"doubt": Doubt(absolute=5e3)}),
        ("trap.f0=14.05MHz,doubt=0,5%", 14.05e6, {"doubt": Doubt(relative=0.005)}),
        ("trap.f0=14.05MHz,probe=1,5pF", 14.05e6, {"options": {"probe": 1.5e-12}}),
        ("trap.f0_with=12.3MHz,added=22pF", 12.3e6, {"options": {"added": 22e-12}}),
        (
            "trap.f0_with=12.3MHz,added=22pF,added_doubt=0.2pF",
            12.3e6,
            {"options": {"added": 22e-12, "added_doubt": Doubt(absolute=0.2e-12)}},
        ),
        ("trap.q=240,load=1M", 240.0, {"options": {"load": 1e6}}),
        ("trap.ratio@14.2MHz=0.45", 0.45, {"frequency": 14.2e6}),
        ("trap.ratio@14,2MHz=-6dB", 10**-0.3, {"frequency": 14.2e6}),
        ("coil.l=2.7uH,at=100kHz", 2.7e-6, {"options": {"at": 1e5}}),
        ("capacitor.c=47.3pF", 47.3e-12, {}),
        (
            "trap.sweep=a b.s1p,how=loop,fixture=0.31ns",
            "a b.s1p",
            {"how": "loop", "options": {"fixture": 3.1e-10}},
        ),
        ("trap.sweep=x,y.csv,how=direct,lead=25nH", "x,y.csv", {"options": {"lead": 25e-9}}),
        ("trap.sweep=a.s1p,how=direct,lead=3cm", "a.s1p", {"options": {"lead": 24e-9}}),
        ("lower.dip=3.612MHz", 3.612e6, {"subject": "lower"}),
        ("upper.swr@7.05MHz=1.8", Interval(low=1.8, high=1.8), {"frequency": 7.05e6}),
        ("upper.swr@7.05MHz=1.8:1", Interval(low=1.8, high=1.8), {}),
        ("upper.swr@7.05MHz=1:1.8", Interval(low=1.8, high=1.8), {}),
        ("upper.swr@7.19MHz=2..3", Interval(low=2.0, high=3.0), {}),
        (
            "upper.swr@7,19MHz=1.5 .. 2,5,doubt=10%",
            Interval(low=1.5, high=2.5),
            {"doubt": Doubt(relative=0.1)},
        ),
        ("upper.swr@7.19MHz=3..", Interval(low=3.0, high=math.inf), {}),
        ("upper.swr@7.19MHz=..2", Interval(low=1.0, high=2.0), {}),
        ("lower.z@3.6MHz=42-j12", 42 - 12j, {"frequency": 3.6e6, "options": {}}),
        ("lower.z@3.6MHz=42-j12,at=feed", 42 - 12j, {"options": {"at": "feed"}}),
        ("lower.z@3.6MHz=42-j12,doubt=2ohm", 42 - 12j, {"doubt": Doubt(absolute=2.0)}),
        ("upper.sweep=FILE,at=feed", "FILE", {"subject": "upper"}),
        ("line.sweep=line.s1p,end=open", "line.s1p", {"options": {"end": "open"}}),
    ],
)
def test_understood(text, value, more):
    reading = one(text)
    assert reading.value == pytest.approx(value) if isinstance(value, float) else reading.value == value
    for name, wanted in more.items():
        got = getattr(reading, name)
        if name == "options":
            assert got.keys() == wanted.keys()
            for key in wanted:
                same = isinstance(wanted[key], float)
                assert got[key] == (pytest.approx(wanted[key]) if same else wanted[key])
        else:
            assert got == (pytest.approx(wanted) if isinstance(wanted, float) else wanted)


def test_fixture_as_a_length_of_air():
    assert one("trap.sweep=a,how=loop,fixture=29.9792458cm").options["fixture"] == pytest.approx(1e-9)


def test_several_in_one_text_and_their_order():
    found = parse(
        ["trap.low=14.0MHz,doubt=1kHz,trap.high=14,1MHz", "upper.swr@14MHz=2,upper.swr@14,1MHz=1.5"]
    )
    assert [r.name for r in found] == ["trap.low", "trap.high", "upper.swr", "upper.swr"]
    assert [r.doubt.absolute for r in found[:2]] == [1e3, 0.0]
    assert found[3].frequency == 14.1e6


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "name=value"),
        ("trap", "name=value"),
        ("=3MHz", "name=value"),
        ("trap.f0=", "name=value"),
        ("trap.f1=3MHz", "trap.f0"),
        ("tarp.f0=3MHz", "trap.f0"),
        ("trap.dip=3MHz", "known are"),
        ("trap.f0=14", "MHz"),
        ("trap.f0=3uH", "an inductance"),
        ("trap.f0=nan MHz", "7.05 MHz"),
        ("trap.f0=inf", "finite"),
        ("trap.f0=-3MHz", "above zero"),
        ("trap.f0=0Hz", "above zero"),
        ("trap.f0=14MHz,dobt=1kHz", "doubt"),
        ("trap.f0=14MHz,doubt=1kHz,doubt=2kHz", "twice"),
        ("trap.f0=14MHz,doubt=1pF", "frequency"),
        ("trap.f0=14MHz,doubt=0%", "above zero"),
        ("trap.f0=14MHz,doubt=150%", "100 %"),
        ("trap.f0=14MHz,how=dail", "dial"),
        ("trap.f0=14MHz,at=feed", "known here"),
        ("trap.f0=14MHz,probe=-1pF", "below zero"),
        ("trap.f0_with=14MHz", "added"),
        ("trap.ratio=0.4", "@"),
        ("trap.ratio@14MHz=1", "14MHz"),
        ("trap.sweep=a.s1p", "how=loop"),
        ("coil.q=3", "coil.l"),
        ("lower.dip@7MHz=7MHz", "@"),
        ("upper.swr=2", "frequency"),
        ("upper.swr@7MHz=0.9", "at least 1"),
        ("upper.swr@7MHz=3..2", "lower first"),
        ("upper.swr@7MHz=..", "lower first"),
        ("lower.z@7MHz=-4+j3", "below zero"),
        ("lower.z@7MHz=4,at=top", "radio"),
        ("trap.f0=" + "9" * 500, "400"),
    ],
)
def test_refused(text, words):
    with pytest.raises(BadInput) as caught:
        parse([text])
    told = str(caught.value)
    assert len(told.splitlines()) == 1 and told.isprintable()
    assert words in told


def test_everything_wrong_is_told_at_once():
    with pytest.raises(BadInput) as caught:
        parse(["trap.f0=14", "coil.l=3MHz", "trap.q=240"])
    assert len(caught.value.faults) == 2


@pytest.mark.parametrize("name", KINDS)
def test_every_kind_is_whole(name):
    group, _, what = name.partition(".")
    kind = KINDS[name]
    assert group in GROUPS.values()
    assert kind.takes in (*Dimension, "impedance", "swr", "file")
    assert len(kind.advice) > 80 and kind.advice.endswith(".")
    assert all(doubt.relative or doubt.absolute for doubt in kind.hows.values())
    assert what in [r.what for r in parse([kind.example])]
    for option in kind.options.values():
        assert bool(option.dimensions) + bool(option.choices) + bool(option.doubt_of) == 1
        assert all(d in list(Dimension) for d in (*option.dimensions, *filter(None, [option.doubt_of])))


def test_parts_are_groups():
    assert set(PARTS) <= set(GROUPS)


@settings(max_examples=300, deadline=None)
@given(
    st.text(max_size=60),
    st.sampled_from(["", "trap.f0=", "upper.swr@7MHz=", "lower.z@7MHz=", "trap.f0=7MHz,"]),
)
def test_any_text_ends_in_words(text, head):
    try:
        parse([head + text])
    except BadInput as refused:
        assert all(line.isprintable() for line in str(refused).splitlines())
