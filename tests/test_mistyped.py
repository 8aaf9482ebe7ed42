"""What hands mistype: one line says what is wrong, where, and what would be right; no answer is too wide."""

import pytest

from tests.test_cli import PRESET, call, design, refused

WIDTH = 79
__all__ = ["call", "design"]


@pytest.mark.parametrize(
    ("typed", "told"),
    [
        (("match", "Z=35", "f=7MHz", "network=pi"), "network: 'pi': unknown network; one of pi-clc, pi-lcl"),
        (("match", "Z=35", "f=7MHz", "line=RG"), "line: 'RG' is not one of RG-58/U"),
        (("match", "Z=35+j1e30", "f=7MHz"), "Z: '35+j1e30' is more than 1000 Mohm"),
        (("match", "Z=1e-30", "f=7MHz"), "Z: '1e-30' is less than 1 mohm"),
        (("line", "", "length=2m", "f=7MHz", "Z=50"), "type: nothing is given; one of RG-58/U"),
        (("tuner", PRESET, "--line", "RG"), "--line: 'RG' is not one of RG-58/U"),
        (("tuner", PRESET, "--load", "1e30"), "--load: '1e30' is more than 1000 Mohm"),
        (
            ("coil", "kind=toroid", "f=7MHz", "turns=300"),
            "is more than 200 turns; from 1 turns up to 200 turns",
        ),
        (("tank", "", "C=47pF", "Q=180"), "nothing is given; write name=value"),
        (("readings", PRESET, ""), "nothing is given; write name=value"),
        (("readings", PRESET, "trap.f0="), "trap.f0: nothing is given; write name=value"),
        (("readings", PRESET, "trap.f0=14.02MHz,doubt="), "doubt: nothing is given; write name=value"),
    ],
)
def test_refused_in_one_line(call, typed, told):
    refused(call(*typed), 2, told)


def test_every_network_can_be_read_in_the_refusal(call):
    from trapdesk.design.station import TUNER_NETWORKS
    from trapdesk.engine.networks import NETWORKS

    refused(call("match", "Z=35", "f=7MHz", "network=zz"), 2, *NETWORKS, *TUNER_NETWORKS)


@pytest.mark.parametrize(
    ("change", "told"),
    [
        (("format = 1", f"format = {'9' * 5000}"), "a number in it has thousands of digits"),
        (('height = "10 m"', 'height = "10 m"\nheight = "9 m"'), "something is given twice (at line"),
        (("[station]", "[site]\n[station]"), "something is given twice (at line"),
    ],
)
def test_toml_that_is_none(call, design, change, told):
    refused(call("figures", design(change)), 3, told)
    assert "sys." not in told


def test_a_name_from_another_table(call, design):
    file = design(('former = "40 mm"', 'former = "40 mm"\ncoating = "0.05 mm"'))
    refused(call("figures", file), 2, "antenna.trap.coil.coating", "here it is called insulation")


@pytest.mark.parametrize("load", ["35", "35-j120", "50", "2-j900", "3000+j10"])
@pytest.mark.parametrize("more", [(), ("Q=5",), ("line=RG-58/U",)])
def test_match_is_never_too_wide_and_loses_nothing_below_zero(call, load, more):
    code, out, _ = call("match", f"Z={load}", "f=7.1MHz", *more)
    assert code == 0
    assert max(len(line) for line in out.splitlines()) <= WIDTH
    assert "-0 dB" not in out


def test_where_the_tuner_stands_is_not_cut_off(call, design):
    long = '[station.line]\ntype = "RG-58/U"\nlength = "30 m"\n[station.tuner]\nnetwork = "t-clc"\n'
    file = design(('mode = "SSB"', f'mode = "SSB"\n{long}'))
    code, out, _ = call("tuner", file)
    assert code == 0
    head = " ".join(out.split("\n\n")[0].split())
    assert head.endswith("30 m of RG-58/U, tuner at the transmitter")
