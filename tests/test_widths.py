"""What a verb prints for people fits 79 columns, whatever the design, in metric and in imperial units."""

import pytest

from trapdesk.design.design import with_value
from trapdesk.design.station import (
    Choke,
    FeedLine,
    Foldback,
    ListedLoss,
    Segment,
    Tap,
    Transmitter,
    Tuner,
    TunerCapacitor,
    TunerCoil,
)
from trapdesk.faces.cli import VERBS, main
from trapdesk.store import store

WIDTH = 79


@pytest.fixture(scope="module")
def crowded(tmp_path_factory):
    """Return the file of a design with everything that makes lines long."""
    design, _ = store.preset("40-20-vee")
    station = {
        "line": FeedLine(length=123.45, losses=(ListedLoss(frequency=10e6, loss=0.0456),), weather="wet"),
        "choke": Choke(upper=345.0, lower=234.0, ratio=4.0, loss=0.25),
        "tuner": Tuner(
            coil=TunerCoil(taps=(Tap(inductance=7e-6), Tap(inductance=14e-6))),
            load_coil=TunerCoil(),
            load_capacitor=TunerCapacitor(),
        ),
        "transmitter": Transmitter(table=(Foldback(swr=2.0, watts=100.0), Foldback(swr=5.0, watts=12.5))),
    }
    for name, part in station.items():
        design = with_value(design, f"station.{name}", part)
    segments = tuple(Segment(low=low, high=low + 3e4, weight=2.5) for low in (14.0e6, 14.1e6, 14.3e6))
    design = with_value(design, "bands.upper.wanted_low", None)
    design = with_value(design, "bands.upper.wanted_high", None)
    design = with_value(design, "bands.upper.wanted", segments)
    design = with_value(design, "title", "The long name of a landing at which nobody has hung a wire before")
    path = tmp_path_factory.mktemp("crowded") / "crowded.toml"
    store.save(design, path)
    return str(path)


@pytest.mark.parametrize("units", ["metric", "imperial"])
@pytest.mark.parametrize(
    "words",
    [
        "figures FILE --at 7.05MHz,14.2MHz",
        "sheet FILE",
        "tuner FILE --load 35-j120",
        "choices FILE",
        "tolerance FILE --trials 200",
        "readings FILE trap.f0=13.95MHz trap.f0_with=11.4MHz,added=22pF",
        "next FILE",
        "touchstone FILE",
        "match Z=5-j900 f=1.85MHz Q=300",
        "match Z=35-j120 f=7.1MHz",
        "line RG-58/U length=20m f=7.1MHz Z=35-j120",
        "tank f=10.05MHz C=47pF Q=180",
        "coil kind=solenoid former=40mm wire=1.6mm turns=8 f=14.1MHz",
        "coil kind=cable former=50mm turns=5 f=14.1MHz",
    ],
)
def test_lines_keep_to_the_width(words, units, crowded, tmp_path, monkeypatch, capsys):
    (tmp_path / "trapdesk").mkdir()
    (tmp_path / "trapdesk" / "config.toml").write_text(f'units = "{units}"')
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path))
    code = main([crowded if word == "FILE" else word for word in words.split()])
    printed = capsys.readouterr()
    assert code == 0, printed.err
    assert [line for line in printed.out.splitlines() if len(line) > WIDTH] == []
    assert len(printed.out.splitlines()) > 4


@pytest.mark.parametrize("verb", sorted(VERBS))
def test_help_keeps_to_the_width(verb, capsys, monkeypatch):
    monkeypatch.setenv("COLUMNS", "80")
    with pytest.raises(SystemExit):
        main([verb, "--help"])
    assert [line for line in capsys.readouterr().out.splitlines() if len(line) > WIDTH] == []


def test_units_are_for_display_alone(crowded, tmp_path, monkeypatch, capsys):
    (tmp_path / "trapdesk").mkdir()
    choices = tmp_path / "trapdesk" / "config.toml"
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path))
    printed = []
    for units in ("metric", "imperial", "leagues"):
        choices.write_text(f'units = "{units}"')
        assert main(["figures", crowded, "--json"]) == 0
        printed.append(capsys.readouterr())
    assert printed[0].out == printed[1].out == printed[2].out
    assert "'leagues' is not one of metric, imperial" in printed[2].err
