"""Sweeps in files: the rules of Touchstone to the letter, columns of text, what is refused with its line."""

import re
import tracemalloc

import numpy as np
import pytest
import skrf
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.cases import HERE, reference
from trapdesk.errors import FileFault
from trapdesk.store import sweep_files
from trapdesk.store.sweep_checks import SweepFault
from trapdesk.store.sweep_files import read, write_new
from trapdesk.store.touchstone import touchstone

FILES = HERE / "s1p"
ROWS = [(7.0 + 0.1 * i, 0.9 - 0.01 * i, 170.0 - 5 * i) for i in range(8)]


def written(tmp_path, text, name="a.s1p"):
    path = tmp_path / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode("ascii"))
    return path


def body(rows=ROWS, mark=" ", end="\n"):
    return "".join(mark.join(f"{value:.6g}" for value in row) + end for row in rows)


def refused(path, *words):
    with pytest.raises(FileFault) as caught:
        read(path)
    text = str(caught.value)
    assert caught.value.exit_code == 3
    assert len(text.splitlines()) == 1 and text.isprintable()
    for word in words:
        assert word in text
    return caught.value


# Which line each of the reference files breaks a rule in; 0 is the file as a whole.
BAD = {
    "s1p-bad-truncated": (22, "cut short"),
    "s1p-bad-zero-bytes": (0, "empty"),
    "s1p-bad-zero-reference": (1, "reference"),
    "s1p-bad-empty-data": (0, "no data lines"),
    "s1p-bad-two-points": (3, "2 points"),
    "s1p-bad-duplicate-freq": (8, "same frequency"),
    "s1p-bad-columns-short": (7, "2 columns"),
    "s1p-bad-two-port-content": (2, "two-port"),
    "s1p-bad-z-parameters": (1, "Z parameters"),
    "s1p-bad-nan": (7, "nan"),
    "s1p-bad-negative-freq": (2, "above zero"),
}


@pytest.mark.parametrize("case", reference("readings", "s1p-"))
def test_reference_files(case):
    path = FILES / case["inputs"]["file"].removeprefix("s1p/")
    if case["expected"].get("valid", True):
        sweep, notes = read(path)
        other = skrf.Network(path)
        assert sweep.frequency == pytest.approx(other.f, rel=1e-12)
        assert sweep.reflection == pytest.approx(other.s[:, 0, 0], abs=1e-12)
        assert (sweep.reference, notes) == (50.0, ())
        assert sweep.frequency.size == case["expected"].get("points", 401)
    else:
        line, word = BAD[case["id"]]
        fault = refused(path, word, *([f"line {line}: "] if line else []))
        assert line or not re.search(r"line \d", str(fault))


@pytest.mark.parametrize(
    ("option", "ordered"),
    [
        ("# MHz S MA R 50", "# MHz S MA R 50"),
        ("# mhz s ma r 50.0", "# MHz S MA R 50"),
        ("#MHZ R 50 MA S", "# MHz S MA R 50"),
        ("# S MHz", "# MHz S MA R 50"),
        ("#\tMHz", "# MHz S MA R 50"),
        ("# R 75 MHz", "# MHz S MA R 75"),
        ("# ri kHz R 1e2", "# kHz S RI R 100"),
    ],
)
def test_options_in_any_order(tmp_path, option, ordered):
    # scikit-rf wants the words in one order, so it reads the same data under an option line in that order.
    rows = body([(f, 0.5, -0.001 * a) for f, m, a in ROWS])
    sweep, _ = read(written(tmp_path, f"! what it is\n\n{option} ! why\n{rows}"))
    other = skrf.Network(written(tmp_path, f"{ordered}\n{rows}", "other.s1p"))
    assert sweep.frequency == pytest.approx(other.f, rel=1e-12)
    assert sweep.reflection == pytest.approx(other.s[:, 0, 0], abs=1e-12)
    assert sweep.reference == other.z0[0, 0].real


@pytest.mark.parametrize("end", ["\n", "\r\n", " ! a remark\n", "\r"])
def test_line_ends_and_remarks(tmp_path, end):
    sweep, _ = read(written(tmp_path, "# MHz" + end.replace(" ! a remark", "") + body(end=end)))
    assert sweep.frequency.size == len(ROWS)


def test_bare_option_line_means_gigahertz(tmp_path):
    sweep, notes = read(written(tmp_path, "#\n" + body()))
    assert sweep.frequency[0] == 7e9
    assert "GHz" in notes[0]


@pytest.mark.parametrize(("form", "unit"), [("ri", "Hz"), ("db", "kHz"), ("ma", "GHz")])
def test_two_ports_as_scikit_rf_writes_them(tmp_path, form, unit):
    rng = np.random.default_rng(1)
    s = 0.3 * (rng.normal(size=(9, 2, 2)) + 1j * rng.normal(size=(9, 2, 2)))
    s /= np.maximum(np.abs(s), 1)
    network = skrf.Network(f=np.linspace(7e6, 8e6, 9), s=s, f_unit="hz", z0=50)
    network.frequency.unit = unit
    network.write_touchstone("two", dir=tmp_path, form=form)
    sweep, _ = read(tmp_path / "two.s2p")
    assert sweep.frequency == pytest.approx(network.f, rel=1e-9)
    assert sweep.reflection == pytest.approx(s[:, 0, 0], abs=1e-9)
    assert sweep.transmission == pytest.approx(s[:, 1, 0], abs=1e-9)


def changed(i, row):
    return body([*ROWS[:i], row, *ROWS[i + 1 :]])


@pytest.mark.parametrize(
    ("text", "words"),
    [
        (body(), ("line 1", "option line")),
        ("! only\n", ("no option line",)),
        ("# MHz S MA R\n" + body(), ("line 1", "R has no number")),
        ("# MHz S MA R -50\n" + body(), ("line 1", "above 0")),
        ("# MHz S MA R nan\n" + body(), ("line 1", "finite")),
        ("# MHz S MA R 50 75\n" + body(), ("line 1", "75")),
        ("# MHz kHz\n" + body(), ("line 1", "twice")),
        ("# THz\n" + body(), ("line 1", "thz")),
        ("# MHz Y RI R 50\n" + body(), ("line 1", "Y parameters")),
        ("[Version] 2.0\n# MHz\n" + body(), ("line 1", "Touchstone 2")),
        ("# MHz\n[End]\n" + body(), ("line 2", "Touchstone 2")),
        ("# MHz\n" + changed(3, (7.3, 1.2, 10.0)), ("line 5", "1.2")),
        ("# MHz\n" + changed(3, (7.3, -0.5, 10.0)), ("line 5", "swapped")),
        ("# MHz\n" + changed(3, (7.05, 0.5, 10.0)), ("line 5", "line 4")),
        ("# MHz\n" + changed(3, (0.0, 0.5, 10.0)), ("line 5", "above")),
        ("# MHz\n" + body([(f, a, m) for f, m, a in ROWS]), ("line 2", "170", "swapped")),
        ("# MHz DB\n7 -3 1\n7.1 -3 2\n7.2 300 1\n8 -3 1\n9 -3 1\n", ("line 4", "300 dB")),
        ("# MHz\n" + body().replace("7.2 ", "7,2 "), ("line 4", "7,2")),
        ("# MHz\n" + body().replace("7.2 ", "1_7 "), ("line 4", "1_7")),
        ("# MHz\n" + body().replace("7.2 ", "1e999 "), ("line 4", "bound")),
        ("# MHz\n" + body() + "9 0.5 1 2\n", ("line 10", "4 columns")),
        (b"\xef\xbb\xbf# MHz\n" + body().encode(), ("line 1", "0xef")),
        (b"# MHz\n! 20 \xb0C\n" + body().encode(), ("line 2", "0xb0")),
        (b"# MHz\n7.0 0.9\x00 1\n", ("line 2", "0x00")),
        ("# MHz\n7 0.5 1\n", ("line 2", "1 points")),
    ],
)
def test_rules_of_touchstone(tmp_path, text, words):
    refused(written(tmp_path, text), *words)


def test_two_port_file_of_one_port_and_noise(tmp_path):
    refused(written(tmp_path, "# MHz\n" + body(), "a.s2p"), "line 2", ".s1p")
    two = "# MHz\n" + "".join(f"{7 + i} .5 0 .1 0 .1 0 .5 0\n" for i in range(6))
    refused(written(tmp_path, two + "1 2 .3 4 .5\n", "a.s2p"), "line 8", "noise")


def test_no_line_end_is_remarked_on(tmp_path):
    _, notes = read(written(tmp_path, "# MHz\n" + body().rstrip("\n")))
    assert "line 9" in notes[0]


def test_later_option_lines_count_for_nothing(tmp_path):
    sweep, notes = read(written(tmp_path, "# MHz\n" + body() + "# GHz RI R 75\n" + "9 0.5 10\n"))
    assert (sweep.frequency[-1], sweep.reference) == (9e6, 50.0)
    assert "line 10" in notes[0]


def test_huge_file_is_refused_unread(tmp_path):
    path = tmp_path / "huge.s1p"
    with open(path, "wb") as file:
        file.write(b"# MHz\n")
        file.truncate(100_000_000)
    tracemalloc.start()
    refused(path, "100 MB")
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak < 1_000_000


def test_files_that_are_none(tmp_path):
    refused(tmp_path / "none.s1p", "no such file")
    (tmp_path / "folder.s1p").mkdir()
    refused(tmp_path / "folder.s1p", "directory")
    refused(written(tmp_path, "x", "a.pdf"), ".s1p")
    refused(tmp_path / "nul\0.s1p")
    secret = written(tmp_path, "x", "b\x1b[31m.s1p")
    refused(secret, "\\x1b")


@settings(max_examples=200, deadline=None)
@given(st.binary(max_size=300))
def test_any_bytes_end_in_words(tmp_path_factory, data):
    folder = tmp_path_factory.mktemp("any")
    for name in ("a.s1p", "a.s2p", "a.csv"):
        path = folder / name
        path.write_bytes(data)
        try:
            read(path)
        except FileFault as fault:
            assert str(fault).isprintable()


@settings(max_examples=100, deadline=None)
@given(st.lists(st.text("0123456789.,;eE+-# MHzSRIDBA!\n\t", max_size=40), max_size=12))
def test_any_lines_end_in_words(tmp_path_factory, lines):
    folder = tmp_path_factory.mktemp("lines")
    for name, head in (("a.s1p", "# MHz\n"), ("a.csv", "f_MHz,r,x\n"), ("b.csv", "f_MHz;r;x\n")):
        path = folder / name
        path.write_text(head + "\n".join(lines), "ascii")
        try:
            read(path)
        except FileFault as fault:
            assert all(line.isprintable() for line in str(fault).splitlines())


F = np.linspace(7e6, 7.2e6, 6)
Z = np.linspace(30, 60, 6) + 1j * np.linspace(-40, 25, 6)
S = (Z - 50) / (Z + 50)


def table(head, columns, mark=",", comma=False):
    lines = [head]
    for row in zip(*columns, strict=True):
        text = mark.join(f"{value:.9f}" for value in row)
        lines.append(text.replace(".", ",") if comma else text)
    return "\n".join(lines) + "\n"


DEG = np.degrees(np.angle(S))


@pytest.mark.parametrize(
    "text",
    [
        table("frequency_hz,r_ohm,x_ohm", (F, Z.real, Z.imag)),
        table("Frequency (MHz);R;X", (F / 1e6, Z.real, Z.imag), ";"),
        table("Freq [kHz];Re(Z);Im(Z)", (F / 1e3, Z.real, Z.imag), ";", comma=True),
        table("f\tR\tX", (F / 1e6, Z.real, Z.imag), "\t", comma=True),
        table("freq R X", (F / 1e3, Z.real, Z.imag), "  "),
        table('"MHz","SWR","Resistance","Reactance"', (F / 1e6, F / F, Z.real, Z.imag)),
        table("freq,|Z|,theta", (F, np.abs(Z), np.degrees(np.angle(Z)))),
        table("freq,|Z|,phase (rad)", (F, np.abs(Z), np.angle(Z))),
        table("Freq(Hz), S11 Re, S11 Im", (F, S.real, S.imag)),
        table("Freq(Hz), real, imag", (F, S.real, S.imag)),
        table("Hz,S11(DB),S11(DEG)".replace("S11(DEG)", "S11 phase (deg)"), (F, 20 * np.log10(abs(S)), DEG)),
        table("freq,return loss (dB),phase", (F, -20 * np.log10(abs(S)), DEG)),
        table("freq,S11 mag,S11 angle (deg)", (F, abs(S), DEG)),
        table("freq,s11_magnitude,s11_phase (deg)", (F, abs(S), DEG)),
        "! saved\n# by\n" + table("f_hz,r,x", (F, Z.real, Z.imag)).replace("\n", "\r\n"),
        "\ufeff" + table("f_hz,r,x", (F, Z.real, Z.imag)),
    ],
)
def test_columns(tmp_path, text):
    path = tmp_path / "a.csv"
    path.write_text(text, "utf-8", newline="")
    sweep, _ = read(path)
    assert sweep.frequency == pytest.approx(F, rel=1e-6)
    assert sweep.reflection == pytest.approx(S, abs=1e-7)


def test_columns_of_swr_and_of_transmission(tmp_path):
    sweep, _ = read(written(tmp_path, table("MHz,VSWR", (F / 1e6, 1 + F / F)), "a.txt"))
    assert (sweep.reflection, list(sweep.swr)) == (None, [2.0] * 6)
    sweep, _ = read(written(tmp_path, table("MHz,Return Loss", (F / 1e6, 20 * F / F)), "a.csv"))
    # 20 dB is a reflection of 0.1, hence 1.1/0.9.
    assert sweep.swr == pytest.approx([1.1 / 0.9] * 6)
    sweep, _ = read(written(tmp_path, table("MHz,s21 db,s21 phase", (F / 1e6, -6 + 0 * F, DEG)), "a.tsv"))
    assert np.abs(sweep.transmission) == pytest.approx([10**-0.3] * 6)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", ("empty",)),
        ("\n\n", ("no data",)),
        ("f_hz,r,x\n", ("no data",)),
        (table("7,8,9", (F, Z.real, Z.imag)), ("line 1", "frequency_hz,r_ohm,x_ohm")),
        (table("r,x", (Z.real, Z.imag)), ("line 1", "no column of frequencies")),
        (table("f,this,that", (F, Z.real, Z.imag)), ("line 1", "nothing that was measured")),
        (table("f,r,r", (F, Z.real, Z.imag)), ("line 1", "twice")),
        (table("f,r,x", (F * 1e3, Z.real, Z.imag)), ("line 1", "unit of frequency")),
        (table("f_hz,x,r", (F, Z.real, Z.imag)), ("line 2", "swapped")),
        (table("f_hz,real,imag", (F, Z.real, Z.imag)), ("line 1", "S11 or Z")),
        (table("f_hz,r,x", (F[::-1], Z.real, Z.imag)), ("line 3", "rise")),
        (table("f_hz,r,x", (F[[0, 1, 1, 2, 3, 4]], Z.real, Z.imag)), ("line 4", "same frequency")),
        (table("f_hz,r,x", (F, Z.real, Z.imag)).replace("-14.0", "nan,0"), ("line 4",)),
        (table("f_hz,r,x", (F, Z.real, Z.imag * np.nan)), ("line 2", "nan")),
        (table("f_hz,r,x", (F[:3], Z.real[:3], Z.imag[:3])), ("line 4", "3 points")),
        (table("f,r,x", (F / 1e6, Z.real, Z.imag), comma=True), ("line 2", "decimals")),
        (table("f_hz,swr", (F, 0.5 + 0 * F)), ("line 2", "SWR")),
    ],
)
def test_columns_refused(tmp_path, text, words):
    refused(written(tmp_path, text, "a.csv"), *words)


def test_binary_columns_are_refused(tmp_path):
    refused(written(tmp_path, b"f,r,x\n7\0", "a.csv"), "line 2", "not text")
    refused(written(tmp_path, b"f,r,x\n\n\xff", "a.csv"), "line 3")


@settings(max_examples=50, deadline=None)
@given(
    st.lists(st.complex_numbers(max_magnitude=1e4), min_size=5, max_size=30),
    st.sampled_from([50.0, 75.0, 300.0]),
)  # fmt: skip
def test_written_file_is_read_by_us_and_by_scikit_rf(tmp_path_factory, impedances, reference_ohm):
    z = np.array([complex(abs(value.real), value.imag) for value in impedances])
    f = 7e6 + 1e3 * np.arange(z.size)
    path = tmp_path_factory.mktemp("out") / "feed.s1p"
    write_new(path, touchstone(f, z, reference_ohm, ["T\u00fcr \x1b[2J", "two\nlines"]))
    sweep, notes = read(path)
    other = skrf.Network(path)
    wave = (z - reference_ohm) / (z + reference_ohm)
    assert notes == ()
    assert sweep.reflection == pytest.approx(wave, abs=1e-11)
    assert other.s[:, 0, 0] == pytest.approx(wave, abs=1e-11)
    assert other.f == pytest.approx(f, rel=1e-11)
    assert sweep.reference == reference_ohm == other.z0[0, 0].real


def test_nothing_is_written_over(tmp_path):
    path = written(tmp_path, "mine")
    with pytest.raises(FileFault, match="written over"):
        write_new(path, "# Hz\n")
    assert path.read_text() == "mine"
    with pytest.raises(FileFault):
        write_new(tmp_path / "no" / "a.s1p", "# Hz\n")
    with pytest.raises(ValueError, match="rise"):
        touchstone([2.0, 1.0], [50, 50], 50.0)


def test_fault_is_a_file_fault():
    assert issubclass(SweepFault, FileFault)
    assert sweep_files.LARGEST_FILE < 100_000_000
