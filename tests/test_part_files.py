"""One trap of each kind from its file to figures, sheet and JSON; combinations in files; the verb coil."""

import json
from dataclasses import replace
from pathlib import Path

import pytest

from trapdesk.design.capacitor_kinds import CAPACITORS, SingleCapacitor
from trapdesk.design.coil_kinds import COILS
from trapdesk.design.design import Site, get, known_at, with_value
from trapdesk.design.fields import SOLVE
from trapdesk.design.measured_part import Measured
from trapdesk.design.rules import check
from trapdesk.engine.soils import GroundKind
from trapdesk.errors import BadInput, NoAnswer, TrapdeskError
from trapdesk.faces import cli, coil_out, json_out, layout, rows, sheet
from trapdesk.faces.desk import form
from trapdesk.services.antenna.solve import at_frequencies, solve
from trapdesk.store import store
from trapdesk.store.toml_read import DesignFault
from trapdesk.units import prints

DESIGNS = sorted((Path(__file__).parent / "designs").glob("*-trap.toml"))
COMBO = next(path for path in DESIGNS if path.stem == "combo-trap")


@pytest.fixture(scope="module", params=DESIGNS, ids=lambda path: path.stem)
def figures(request):
    return solve(store.load(request.param), site_effects=True)


def test_every_kind_has_its_example():
    designs = [store.load(path) for path in DESIGNS]
    assert {d.antenna.trap.coil.kind for d in designs} | {"given"} == set(COILS)
    kinds = {d.antenna.trap.capacitor.kind for d in designs if d.antenna.trap.capacitor is not None}
    assert kinds | {"parallel"} == {"given", "single", "stub", "series", "parallel"}


def test_carried_through(figures):
    lines = [*layout.summary_lines(figures), *layout.layout(rows.rows(figures))]
    lines += sheet.text(figures).splitlines()
    assert max(map(len, lines)) <= 79
    assert all(line.isascii() and line.isprintable() for line in lines)
    document = json.loads(json_out.text(sheet.document(figures)))
    trap = document["antenna"]["trap"]
    assert trap["resonance_hz"] == pytest.approx(14.05e6, rel=0.01)
    assert all(stress["peak_v"] > 0 for band in trap["stress"].values() for stress in band)
    assert {shift["what"] for shift in trap["shifts"]} >= {"rain", "ice", "sun", "cold"}
    assert (trap["capacitor"] is None) == (trap["coil"]["kind"] == "cable")
    keys = [row.key for row in rows.rows(figures)]
    assert len(keys) == len(set(keys))
    text = " ".join(sheet.text(figures).split())
    assert "build " in text
    assert "14.0" in text


def test_a_measured_cable_trap_moves_with_the_weather_like_an_unmeasured_one():
    bare = store.load(next(p for p in DESIGNS if p.stem == "cable-trap"))
    told = Measured(resonance=bare.antenna.trap.resonance, resonance_doubt=10e3)
    plain, measured = (
        {shift.what: shift.trap for shift in solve(design, site_effects=True).trap.shifts}
        for design in (bare, with_value(bare, "antenna.trap.measured", told))
    )
    assert measured == pytest.approx(plain, rel=0.02)


def test_findings_are_told_in_space_as_well():
    design = store.load(COMBO)
    space = replace(design, site=Site(ground=GroundKind.SPACE))
    plain, asked = solve(space), solve(space, site_effects=True)
    assert plain.findings
    assert {f.code for f in asked.findings} >= {f.code for f in plain.findings}


def test_class_2_ceramic_in_a_trap_is_remarked():
    design = store.load(next(p for p in DESIGNS if p.stem == "close-trap"))

    def remarks(text):
        capacitor = SingleCapacitor(print=prints.read(text))
        found = solve(with_value(design, "antenna.trap.capacitor", capacitor)).findings
        return {f.code: f.value for f in found}

    assert remarks("47pF 10% Y5V")["capacitor_varies"] == pytest.approx(0.82, rel=0.1)
    assert "capacitor_varies" not in remarks("47pF 10% C0G")


def test_a_cable_trap_leads_with_the_side_to_build_on():
    found = solve(store.load(next(p for p in DESIGNS if p.stem == "cable-trap")))
    trap = [row for row in rows.rows(found) if row.group == "trap"]
    assert [row.key.rpartition(".")[2] for row in trap[:4]] == ["build", "1", "turns", "wind"]
    assert "kHz a cm" in trap[1].value
    assert " to " in trap[2].value
    assert any(row.value.startswith("costs") and "of Q" in row.value for row in trap)


def test_a_text_with_lists_comes_back():
    text = COMBO.read_text("utf-8")
    design = store.read_text(text)
    assert store.to_text(design, text) == text
    assert store.read_text(store.to_text(design)) == design
    key = "antenna.trap.capacitor.members.2.members.2.length"
    assert get(design, key) == 0.4
    assert known_at(design, key).label == "stub length"
    edited = store.to_text(with_value(design, key, 0.45), text)
    assert edited == text.replace('"40 cm"', '"45 cm"')


def test_members_are_added_and_taken_out_where_they_belong():
    text = COMBO.read_text("utf-8")
    design = store.read_text(text)
    where = "antenna.trap.capacitor.members"
    outer, inner = get(design, where), get(design, f"{where}.2.members")
    longer = with_value(design, where, (*outer, outer[0]))
    deeper = with_value(design, f"{where}.2.members", (inner[0], inner[0], inner[1]))
    fewer = with_value(design, f"{where}.2.members", (*inner, inner[0]))
    for changed in (longer, deeper, fewer):
        edited = store.to_text(changed, text)
        assert store.read_text(edited) == changed
        assert edited.startswith("# One trap of its kind")
        back = store.to_text(design, edited)
        assert store.read_text(back) == design
        assert back.startswith("# One trap of its kind")


def test_inline_members_are_read_and_edited():
    text = COMBO.read_text("utf-8")
    head, tail = text[: text.index("[[antenna")], text[text.index("[site]") :]
    text = (
        head
        + 'members = [{kind = "single", print = "100p"}, {kind = "given", capacitance = "90 pF"}]\n'
        + tail
    )
    design = store.read_text(text)
    edited = store.to_text(with_value(design, "antenna.trap.capacitor.members.2.capacitance", 80e-12), text)
    assert edited == text.replace('"90 pF"', '"80 pF"')


@pytest.mark.parametrize(
    ("old", "new", "line"),
    [
        ('"101K 2kV N150"', '"101X"', "members.1.print: 'X': is no tolerance letter"),
        ('"47pF J 3kV"', '""', "members.2.members.1.print: nothing is given"),
        ('print = "101K 2kV N150"', "", "members.1.print: a value is missing"),
        ('"RG-58/U"', '"RG-5"', "members.2.members.2.cable: 'RG-5' is not one of"),
        ('kind = "parallel"', 'kind = "both"', "members.2.kind: 'both' is not one of"),
        ('length = "40 cm"', 'lenth = "40 cm"', "members.2.members.2.lenth: 'lenth' is not a known name"),
        ('former = "40 mm"', 'former = "3 mm"\nwire = "4 mm"', ""),
    ],
)
def test_a_bad_entry_is_named_and_hides_no_other(old, new, line):
    text = COMBO.read_text("utf-8")
    assert text.count(old) == 1
    bad = text.replace(old, new).replace("swr_limit = 2", "swr_limit = 0")
    if not line:
        with pytest.raises(TrapdeskError):
            store.read_text(bad)
        return
    with pytest.raises(DesignFault) as refused:
        store.read_text(bad)
    lines = str(refused.value).splitlines()
    assert any(f"antenna.trap.capacitor.{line}" in each for each in lines)
    assert any("station.swr_limit" in each for each in lines)


def test_a_list_that_is_none_is_refused():
    text = COMBO.read_text("utf-8")
    head, tail = text[: text.index("[[antenna")], text[text.index("[site]") :]
    for members, words in (("members = 3", "a number stands where a list is wanted"),
                           ("members = [3]", "members.1: a number stands where a table is wanted"),
                           ("members = []", "too few members")):  # fmt: skip
        with pytest.raises(DesignFault, match=words):
            store.read_text(f"{head}{members}\n{tail}")


EVERY_COIL = (
    "kind=solenoid former=40mm wire=AWG14 pitch=2.4mm turns=8 f=14.1MHz",
    "former=40mm wire=AWG14 L=2.7uH f=14.1MHz",
    "former=40mm wire=AWG14 length=25mm C=47pF f=14.1MHz",
    "kind=cable cable=RG-58/U former=50mm f=14.05MHz",
    "kind=cable former=50mm turns=6 terminals=shield f=7MHz",
    "kind=toroid inductance_index=4.9nH C=47pF f=14.05MHz",
    "kind=given inductance=3uH q=250 f=7.1MHz",
)


@pytest.mark.parametrize("typed", EVERY_COIL)
def test_the_verb_coil(typed, capsys):
    assert cli.main(["coil", *typed.split()]) == 0
    text = capsys.readouterr().out
    assert max(map(len, text.splitlines())) <= 79
    assert "inductance" in text
    assert cli.main(["coil", *typed.split(), "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["kind"] == "coil"
    assert document["inductance_h"] > 0
    assert document["given"]["kind"] in COILS


def test_coil_turns_for_an_inductance_give_it():
    answer = coil_out.answer_to("former=40mm wire=AWG14 pitch=2.4mm L=2.7uH f=14.1MHz".split())
    assert answer.inductance == pytest.approx(2.7e-6, rel=1e-6)
    assert answer.coil.turns is not SOLVE


@pytest.mark.parametrize(
    ("typed", "code", "words"),
    [
        ("kind=torid f=14MHz", 2, "kind: 'torid' is not one of"),
        ("former=2mm wire=3mm turns=5 f=14MHz", 2, "former: '2 mm' is less than 3 mm"),
        ("former=40mm pitch=1mm turns=5 f=14MHz", 2, "pitch: '1 mm' is not above 1.6 mm"),
        ("former=40mm turns=5", 2, "f: a value is missing"),
        ("former=40mm f=14MHz", 2, "turns: a value is missing; give turns, or the L"),
        ("formr=40mm turns=3 f=14MHz", 2, "did you mean former"),
        ("turns=5 L=2uH f=14MHz", 2, "L: has no use here"),
        ("turns=5 turns=6 f=14MHz", 2, "'turns' is given twice"),
        ("L=2uH C=47pF f=14MHz", 2, "only one of L and C may be given"),
        ("turns f=14MHz", 2, "cannot read 'turns'"),
        ("kind=cable L=2uH f=14MHz", 2, "L: has no use here"),
        ("f=14MHz L=1mH", 1, "no number of turns on this former"),
        ("kind=cable f=60MHz former=300mm", 1, "no number of turns of this cable"),
        ("kind=toroid wire=3mm inner=10mm outer=20mm L=8uH f=14MHz", 1, "do not fit"),
        ("former=40mm length=3mm L=8uH f=14MHz", 1, "do not fit"),
    ],
)
def test_coils_that_cannot_be(typed, code, words, capsys):
    assert cli.main(["coil", *typed.split()]) == code
    error = capsys.readouterr().err
    assert words in error
    assert "Traceback" not in error


def test_no_answer_is_raised_for_a_stub_past_a_quarter_wave():
    design = store.load(next(p for p in DESIGNS if p.stem == "stub-trap"))
    design = with_value(design, "antenna.trap.coil.turns", SOLVE)
    for length in (4.0, 9.0):
        with pytest.raises(NoAnswer, match="stub is too long"):
            solve(with_value(design, "antenna.trap.capacitor.length", length))
    # Far above its resonance a stub is no capacitor any more, and the antenna is still computed.
    figures = solve(with_value(design, "antenna.trap.capacitor.length", 0.45))
    high = at_frequencies(figures, [90e6, 99e6])
    assert all(one.stress.peak_voltage > 0 for one in high)


def test_the_desk_takes_every_kind_and_back():
    design = store.preset("40-20-vee")[0]
    figures = solve(design)
    for key, kinds in (("antenna.trap.coil", COILS), ("antenna.trap.capacitor", CAPACITORS)):
        for kind in kinds:
            changed = form.put(design, f"{key}.kind", kind, figures, iter([design]))
            assert check(changed) == ()
            assert get(changed, key).kind == kind
            back = form.put(changed, "antenna.trap.coil.kind", "solenoid", solve(changed), iter([design]))
            assert check(back) == ()


def test_a_print_is_typed_on_the_desk():
    design = store.load(COMBO)
    wanted = "antenna.trap.capacitor.members.1.print"
    row = next(row for row in form.rows(design, solve(design))["Trap"] if row.key == wanted)
    assert row.text == "101K 2kV N150"
    assert form.starting_text(row) == "101K 2kV N150"
    changed = form.put(design, row.key, form.read_row(row, "121J 3kV"), None, iter([]))
    assert get(changed, wanted).capacitance == pytest.approx(120e-12)
    with pytest.raises(BadInput, match="means nothing"):
        form.read_row(row, "xx")
