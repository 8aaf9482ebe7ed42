"""The command line: exit codes, data on stdout, one clear line a fault on stderr, never a traceback."""

import json
import math
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from trapdesk import __version__
from trapdesk.faces import cli
from trapdesk.store import store

ROOT = Path(__file__).resolve().parent.parent
PRESET = "40-20-vee"
TEXT = (ROOT / "presets" / f"{PRESET}.toml").read_text("utf-8")


def run(*arguments: str, **more) -> subprocess.CompletedProcess:
    """Run the command in a process of its own, without a terminal."""
    options = {"capture_output": True, "text": True, "stdin": subprocess.DEVNULL, "timeout": 60} | more
    command = [sys.executable, "-m", "trapdesk", *arguments]
    return subprocess.run(command, cwd=ROOT, check=False, **options)


@pytest.fixture
def call(capsys):
    """Return a way to run the command in this process: exit code, stdout, stderr."""

    def caller(*arguments: str) -> tuple[int, str, str]:
        try:
            code = cli.main(list(arguments))
        except SystemExit as end:
            code = end.code or 0
        out, err = capsys.readouterr()
        return code, out, err

    return caller


@pytest.fixture
def design(tmp_path):
    """Return a way to write the preset with some of its text replaced."""

    def writer(*changes: tuple[str, str], name: str = "design.toml") -> str:
        text = TEXT
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        path = tmp_path / name
        path.write_text(text, "utf-8")
        return str(path)

    return writer


def refused(result: tuple[int, str, str], code: int, *words: str, lines: int | None = 1) -> None:
    """Check an end without an answer: nothing on stdout, plain lines on stderr that hold the words."""
    got, out, err = result
    assert (got, out) == (code, "")
    assert "Traceback" not in err
    told = err.splitlines()
    assert told and all(line.startswith("trapdesk: ") and line.isprintable() for line in told)
    if lines is not None:
        assert len(told) == lines
    for word in words:
        assert word in err


def test_version(call):
    assert call("--version") == (0, f"trapdesk {__version__}\n", "")


@pytest.mark.parametrize("verb", [(), *((verb,) for verb in cli.VERBS)])
def test_help(call, verb):
    code, out, err = call(*verb, "--help")
    assert (code, err) == (0, "")
    assert max(map(len, out.splitlines())) <= 79
    if verb:
        example = out.split("example:\n")[1].splitlines()[0].strip()
        assert example.startswith(f"trapdesk {verb[0]} ")


@pytest.mark.parametrize("verb", cli.VERBS)
def test_example_of_the_help_works(call, verb):
    example = cli.VERBS[verb][2].splitlines()[0].partition(" >")[0].split()[1:]
    code, out, err = call(*example)
    assert (code, err) == (0, "")
    assert len(out.splitlines()) > 10
    code, out, err = call(*example, "--json")
    assert (code, err) == (0, "")
    assert json.loads(out)["format"] == 1


@pytest.mark.parametrize("name", store.presets())
def test_figures_and_sheet_of_every_preset(call, name):
    for verb in ("figures", "sheet"):
        code, out, err = call(verb, name)
        assert (code, err) == (0, "")
        assert max(map(len, out.splitlines())) <= 79
        assert "an estimate, not measured" in out
        assert out.isascii()


def finite(value) -> bool:
    """Return whether every number in a document is one."""
    if isinstance(value, dict):
        return all(map(finite, value.values()))
    if isinstance(value, list):
        return all(map(finite, value))
    return not isinstance(value, float) or math.isfinite(value)


def test_figures_json(call, design):
    code, out, err = call("figures", design(), "--json", "--at", "7.05MHz,14.2 MHz", "--at", "10100kHz")
    assert (code, err) == (0, "")
    document = json.loads(out)
    assert finite(document)
    assert [one["f_hz"] for one in document["at"]] == [7.05e6, 14.2e6, 10.1e6]
    upper = document["bands"]["upper"]
    assert abs(upper["resonance_hz"] - upper["aim_hz"]) < 2e3
    shares = sum(upper[f"{name}_share"] for name in ("sky", "ground", "wire", "trap"))
    assert shares == pytest.approx(1)
    assert document["antenna"]["lengths"]["inner_m"] > 1
    assert re.search(r"  +10\.1 ", call("figures", design(), "--at", "10.1MHz")[1])


def test_figures_json_is_the_same_twice(call):
    assert call("figures", PRESET, "--json") == call("figures", PRESET, "--json")


def test_json_at_the_band_agrees_with_the_band(call):
    document = json.loads(call("figures", PRESET, "--json")[1])
    aim = document["bands"]["lower"]["aim_hz"]
    (one,) = json.loads(call("figures", PRESET, "--json", "--at", f"{aim} Hz")[1])["at"]
    # Solved at the aim itself here, interpolated over the band there.
    assert one["swr"] == pytest.approx(document["bands"]["lower"]["aim_swr"], abs=5e-3)
    assert one["trap_peak_v"] == pytest.approx(document["bands"]["lower"]["trap_peak_v"], rel=1e-2)


@pytest.mark.parametrize(
    ("at", "word"),
    [
        ("7,05MHz", "commas separate frequencies"),
        ("7.05", "has no unit"),
        ("", "nothing is given"),
        ("7.05MHz,,14MHz", "nothing is given"),
        ("3 ohm", "where a frequency is wanted"),
        ("-7MHz", "outside the range"),
        ("0 Hz", "outside the range"),
        ("1GHz", "1 to 100 MHz"),
        ("nan", "--at"),
    ],
)
def test_bad_frequencies(call, at, word):
    refused(call("figures", PRESET, f"--at={at}"), 2, "--at", word, lines=None)


def test_missing_file(call):
    refused(
        call("figures", "40-20-ve"), 3, "40-20-ve: there is no such file", "did you mean the preset 40-20-vee"
    )
    refused(call("sheet", "no/such.toml"), 3, "no such file")
    refused(call("no/such.toml"), 3, "no such file")


def test_directory(call, tmp_path):
    refused(call("figures", str(tmp_path)), 3, "directory")


def test_binary(call, tmp_path):
    (tmp_path / "b").write_bytes(bytes(range(256)))
    refused(call("figures", str(tmp_path / "b")), 3, "not UTF-8 text")


def test_broken_toml(call, tmp_path):
    (tmp_path / "b.toml").write_text("[bands\n")
    refused(call("figures", str(tmp_path / "b.toml")), 3, "not valid TOML")


def test_name_that_is_not_text(call):
    refused(call("figures", "\udcff\x1b[2J"), 3, "no such file", "\\x1b[2J")
    refused(call("figures", "\0"), 3)


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ('height = "10 m"', 'heihgt = "10 m"', ("site.heihgt", "did you mean height")),
        ('height = "10 m"', 'height = "10 ohm"', ("site.height", "where a length is wanted")),
        ('height = "10 m"', "height = 10", ("site.height", "no unit")),
        ('height = "10 m"', 'height = "0 m"', ("site.height", "from 50 cm")),
        ('power = "100 W"', 'power = "-5 W"', ("station.power", "above 0 W")),
        ('wanted_high = "7.12 MHz"', 'aim = "8 MHz"', ("bands.lower.aim", "7.2 MHz")),
        ('end = "solve"', 'end = "solv"', ("antenna.lengths.end",)),
        ('turns = "solve"', "turns = 8", ("antenna.trap",)),
        ('swr_limit = 2', 'swr_limit = "nan"', ("station.swr_limit",)),
        ('shape = "vee"', 'shape = "flat"', ("site.included_angle",)),
    ],
)  # fmt: skip
def test_bad_design(call, design, old, new, words):
    refused(call("figures", design((old, new))), 2, "design.toml: ", *words)


def test_every_fault_of_a_file_at_once(call, design):
    path = design(('height = "10 m"', 'height = "0 m"'), ('power = "100 W"', 'power = "5 ohm"'))
    refused(call("sheet", path), 2, "site.height", "station.power", lines=2)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        (
            [('capacitance = "47 pF"', 'capacitance = "0.1 pF"')],
            ("antenna.trap.coil.turns", "no number of turns", "more capacitance"),
        ),
        (
            [('inner = "solve"', 'inner = "15 m"')],
            ("bands.lower.aim", "aim 7.085 MHz", "reactance left"),
        ),
        (
            [('"120 deg"', '"40 deg"'), ('height = "10 m"', 'height = "6 m"')],
            ("reaches the ground", "hang it higher"),
        ),
    ],
)
def test_no_answer(call, design, changes, words):
    refused(call("figures", design(*changes)), 1, *words)


def test_unknown_verb(call):
    refused(call("figurs", PRESET), 2, "'figurs' is not a known verb; did you mean figures?")
    refused(call("sheets"), 2, "did you mean sheet?")
    refused(call("frobnicate", "x"), 2, "verbs are figures, sheet")


def test_file_that_is_called_like_a_verb(call, design, monkeypatch, tmp_path):
    design(name="figures")
    monkeypatch.chdir(tmp_path)
    # Without a terminal the desk says so, after it has found the file good.
    refused(call("./figures"), 2, "the desk needs a terminal")
    code, out, err = call("figures", "figures")
    assert (code, err) == (0, "")
    assert "Osk landing" in out


def test_desk_without_a_terminal():
    for arguments in ((), (PRESET,)):
        done = run(*arguments)
        refused((done.returncode, done.stdout, done.stderr), 2, "the desk needs a terminal")


@pytest.mark.parametrize(
    "arguments", [("figures",), ("figures", PRESET, "x"), ("tank",), ("--jsn",), ("sheet", "-q")]
)
def test_misuse(call, arguments):
    refused(call(*arguments), 2, "--help shows what would be right")


# By hand: L = 1/((2 pi f)^2 C), R = 2 pi f L / Q, RD = L/(C R), B = f/Q.
def test_tank(call):
    code, out, err = call("tank", "f=10.05MHz", "c=47pF", "Q=180", "--json")
    assert (code, err) == (0, "")
    document = json.loads(out)
    inductance = 1 / ((2 * math.pi * 10.05e6) ** 2 * 47e-12)
    resistance = 2 * math.pi * 10.05e6 * inductance / 180
    assert document["given"] == {"f_hz": 10.05e6, "c_f": 47e-12, "q": 180.0}
    assert document["values"]["l_h"] == pytest.approx(inductance)
    assert document["values"]["r_ohm"] == pytest.approx(resistance)
    assert document["values"]["rd_ohm"] == pytest.approx(inductance / 47e-12 / resistance)
    assert document["values"]["b_hz"] == pytest.approx(10.05e6 / 180)
    assert document["behaviour"]["unity_power_factor_resonance_hz"] < document["behaviour"]["lc_resonance_hz"]


def test_tank_as_text(call):
    code, out, err = call("tank", "f=10.05MHz", "c=47pF", "Q=180")
    assert (code, err) == (0, "")
    assert max(map(len, out.splitlines())) <= 79
    # 47 pF was typed to 1 %, so the inductance is known to 0.06 uH.
    assert re.search(r"L, inductance +5\.34 \+- 0\.06 uH", out)
    # f0 (1 - 1/(2 Q^2)) is 155 Hz lower.
    assert re.search(r"purely resistive +160 Hz below it", out)
    assert out == call("TANK".lower(), "F=10.05 MHz", "C=47 pF", "q=180")[1]


def test_tank_where_nothing_resonates(call):
    code, out, err = call("tank", "f=10MHz", "C=47pF", "Q=0.3")
    assert (code, err) == (0, "")
    assert "none: the loss is too large" in out
    behaviour = json.loads(call("tank", "f=10MHz", "C=47pF", "Q=0.3", "--json")[1])["behaviour"]
    assert behaviour["unity_power_factor_resonance_hz"] is behaviour["half_power_width_hz"] is None


@pytest.mark.parametrize(
    ("values", "words"),
    [
        (["f=10MHz"], ("2 more values", "L, C, R, RD, Q, B")),
        (["f=10MHz", "L=2uH"], ("one more value", "C = 126.7 pF", "one of R, RD, Q, B would do")),
        (["f=10MHz", "L=1uH", "C=100pF"], ("f, L and C contradict", "L = 2.533 uH (given 1 uH)")),
        (["f=10MHz", "B=100kHz", "Q=50", "L=1uH"], ("f, Q and B contradict",)),
        (["z=3"], ("'z' is not a known name", "f, L, C, R, RD, Q, B")),
        (["f"], ("write name=value",)),
        (["=3"], ("write name=value",)),
        (["f=10MHz", "F=11MHz"], ("given twice",)),
        (["f=0Hz"], ("f: '0Hz' is not above zero",)),
        (["C=-3pF"], ("C: '-3pF' is not above zero",)),
        (["C=3uH"], ("C: ", "where a capacitance is wanted")),
        (["f=10"], ("f: '10' has no unit",)),
        (["f=nan"], ("f: ",)),
        (["C=1e-60F"], ("C: ", "outside 0.001 pF to 1 F")),
        (["f=1e300MHz"], ("f: ",)),
    ],
)
def test_bad_tank(call, values, words):
    refused(call("tank", *values), 2, *words)


def test_several_faults_of_a_tank_at_once(call):
    refused(call("tank", "f=0Hz", "x=3", "Q=3m"), 2, "f: ", "'x'", "Q: ", lines=3)


def test_reader_that_goes_away():
    command = f'"{sys.executable}" -m trapdesk figures {PRESET} | head -n 1'
    done = subprocess.run(
        command, shell=True, cwd=ROOT, capture_output=True, text=True, timeout=60, check=False
    )
    assert len(done.stdout.splitlines()) == 1
    assert done.stderr == ""


def test_no_room_on_stdout():
    with open("/dev/full", "w") as full:
        done = run("sheet", PRESET, capture_output=False, stdout=full, stderr=subprocess.PIPE)
    assert done.returncode == 3
    assert done.stderr.startswith("trapdesk: standard output: the file may not be written")
    assert len(done.stderr.splitlines()) == 1


def test_closed_stdout():
    command = f'exec "{sys.executable}" -m trapdesk sheet {PRESET} >&-'
    done = subprocess.run(
        command, shell=True, cwd=ROOT, capture_output=True, text=True, timeout=60, check=False
    )
    assert done.returncode == 3
    assert len(done.stderr.splitlines()) == 1


@pytest.mark.parametrize("encoding", ["ascii", "latin-1", "utf-8"])
def test_any_encoding_of_the_terminal(design, encoding):
    path = design(('title = "Osk landing', 'title = "\u00d8sk \u2126 landing'))
    environment = os.environ | {"PYTHONIOENCODING": encoding, "PYTHONUTF8": "0"}
    for arguments in (("figures", path), ("sheet", path), ("figures", path, "--json")):
        done = run(*arguments, env=environment, text=False)
        assert (done.returncode, done.stderr) == (0, b"")
        text = done.stdout.decode(encoding)
        if "--json" in arguments:
            assert json.loads(text)["title"].startswith("\u00d8sk \u2126")
        else:
            assert ("\u00d8sk \u2126" in text) is (encoding == "utf-8")
            assert re.sub(r"[\u00d8\u2126]", "", text).isascii()


def test_interrupt(call, monkeypatch):
    def stopped(options):
        raise KeyboardInterrupt

    about, _, example, more = cli.VERBS["sheet"]
    monkeypatch.setitem(cli.VERBS, "sheet", (about, stopped, example, more))
    assert call("sheet", PRESET) == (130, "", "")
