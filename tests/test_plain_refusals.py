"""Slips at the command line end in one line that names what is wrong and what would be right."""

import pytest

from trapdesk.faces import cli, trap_sheet
from trapdesk.faces.lines import site_line
from trapdesk.faces.shown import exact
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

ONE_BAND = """
format = 1
kind = "design"
title = "one band"
[bands.lower]
name = "40 m"
low = "7 MHz"
high = "7.2 MHz"
[site]
height = "33 ft"
"""


@pytest.fixture
def call(capsys):
    """Return what a command line comes to: its code, its data and its words."""

    def run(*arguments: str):
        return cli.main(arguments), *capsys.readouterr()

    return run


@pytest.mark.parametrize(
    ("typed", "code", "told"),
    [
        ("readings 40-20-vee trap.f0=14.02MHz,doubt", 2, "doubt wants a value, for example doubt=0.5%"),
        ("readings 40-20-vee trap.f0_with=11.6MHz,added", 2, "added wants a value"),
        ("tuner 40-20-vee --load -5+j3", 2, "--load: '-5+j3': resistance is not above zero"),
        ("tuner 40-20-vee --load -j50", 2, "--load: '-j50': resistance is not above zero"),
        ("tank f=7µHz L=5uH Q=100", 2, "f: '7µHz' is outside 1 kHz to 100 GHz"),
        ("tank f=7MHz L=5uH Q=1e12", 2, "Q: '1e12' is outside"),
        ("line RG-58/U length=20m f=7.1MHz Zin=1+j500", 1, "(loss if matched 0.7041 dB)"),
    ],
)
def test_a_slip_is_told_in_one_line(call, typed, code, told):
    found, out, err = call(*typed.split())
    assert (found, out) == (code, "")
    assert told in err and len(err.splitlines()) == 1


def test_a_load_may_begin_with_a_sign(call):
    assert "35 - j120 ohm" in call("tuner", "40-20-vee", "--load", "+35-j120")[1]


@pytest.mark.parametrize("typed", [["choices"], ["rummage"], ["readings", "trap.f0=14.02MHz"]])
def test_without_a_trap_there_is_no_answer(call, tmp_path, typed):
    path = tmp_path / "one.toml"
    path.write_text(ONE_BAND)
    code, out, err = call(typed[0], str(path), *typed[1:])
    assert (code, out) == (1, "") and "the design has no trap; add a table [antenna.trap]" in err


def test_given_values_are_not_finer_than_typed():
    figures = solve(store.read_text(ONE_BAND))
    assert "10.06 m" in site_line(figures)
    assert str(exact(12.3456e-6, "inductance")) == "12.35 uH"
    assert str(exact(14.02512e6, "frequency")) == "14.025 MHz"


def test_the_index_of_a_core_is_for_one_turn_squared():
    text = store.preset("40-20-vee")[1].replace(
        'kind = "solenoid"\nformer = "40 mm"\nwire = "1.6 mm"\npitch = "2.4 mm"\n',
        'kind = "toroid"\ninductance_index = "4.9 nH"\nouter = "51 mm"\ninner = "32 mm"\nheight = "14 mm"\n'
        'wire = "1.6 mm"\n',
    )
    told = " ".join(line.strip() for line in trap_sheet.lines(solve(store.read_text(text))))
    assert "4.9 nH for one turn, by turns squared;" in told
