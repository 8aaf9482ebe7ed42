"""Boxes as files: what is read, and every fault by its list, row and key."""

import pytest

from trapdesk.design.box import TABLES
from trapdesk.errors import FileFault
from trapdesk.store import box_read, store
from trapdesk.store.box_read import BoxFault, boxes, find_box, load_box, read_box

HEAD = 'format = 1\nkind = "box"\n'
FORMER = '[[formers]]\nname = "pipe"\ndiameter = "40 mm"\nlength = "8 cm"\ncount = 2\n'
WIRE = '[[wires]]\nname = "enamelled"\ngauge = "AWG 14"\ncoating = "0.05 mm"\nlength = "20 m"\n'
CORE = '[[cores]]\nname = "r"\ninductance_index = "5 nH"\nouter = "2 cm"\ninner = "3 cm"\nheight = "1 cm"\n'
CAPACITOR = '[[capacitors]]\ncapacitance = "47 pF"\nvoltage = "3 kV"\ncount = 2\n'


def faults(text):
    with pytest.raises(BoxFault) as caught:
        read_box(text)
    return [str(fault) for fault in caught.value.faults], caught.value.box


def test_ready_box_is_large_enough():
    box = find_box()
    least = {"formers": 12, "wires": 8, "cables": 3, "cores": 4, "capacitors": 40}
    for name, count in least.items():
        held = getattr(box, name)
        assert len(held) >= count
        assert len(set(held)) == len(held)
    assert box_read.READY_BOX in boxes()


def test_a_box_is_no_design():
    assert not set(boxes()) & set(store.presets())
    with pytest.raises(store.DesignFault, match="not a design"):
        store.read_text(HEAD + FORMER)


def test_a_design_is_no_box():
    texts, _ = faults(store.preset(store.FIRST_PRESET)[1])
    assert "not a box" in texts[0]


def test_values_are_read_in_si(tmp_path):
    path = tmp_path / "mine.toml"
    path.write_text(HEAD + FORMER + WIRE + CAPACITOR, "utf-8")
    box = load_box(path)
    assert box.formers[0].diameter == pytest.approx(0.04)
    assert box.wires[0].diameter == pytest.approx(1.628e-3, rel=1e-3)
    assert box.wires[0].closest == pytest.approx(1.728e-3, rel=1e-3)
    assert box.capacitors[0].capacitance == pytest.approx(47e-12)
    assert box == find_box(path)


def test_an_empty_box_is_refused():
    texts, _ = faults(HEAD)
    assert "empty" in texts[0]
    assert "[[formers]]" in texts[0]


def test_one_bad_entry_does_not_hide_the_others():
    bad = '[[formers]]\nname = "stick"\ndiameter = "4 cm"\n'
    cable = '[[cables]]\nname = "brown coax"\nlength = "10 m"\n'
    print_ = '[[capacitors]]\nname = "blue disc"\ncapacitance = "4x7"\n'
    texts, box = faults(HEAD + FORMER + bad + WIRE + CAPACITOR + cable + print_)
    assert any(t.startswith("formers, row 2 (stick): length:") for t in texts)
    for key in ("impedance", "velocity_factor", "outside", "shield", "loss", "loss_at"):
        assert any(t.startswith(f"cables, row 1 (brown coax): {key}:") for t in texts)
    assert any(t.startswith("capacitors, row 2 (blue disc): capacitance:") and "4x7" in t for t in texts)
    assert len(texts) == 8
    assert (len(box.formers), len(box.wires), len(box.capacitors)) == (1, 1, 1)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        (FORMER.replace("count = 2", "count = 1.5"), "whole number"),
        (FORMER.replace("40 mm", "40"), "no unit"),
        (FORMER.replace('"40 mm"', "true"), "a value is wanted"),
        (FORMER.replace("40 mm", "1 mm"), "less than 3 mm"),
        (FORMER.replace("8 cm", "80 m"), "more than 20 m"),
        (FORMER.replace("count", "cuont"), "did you mean count"),
        (FORMER.replace("formers", "former"), "did you mean [[formers]]"),
        (FORMER.replace("[[formers]]", "[formers]"), "list of tables"),
        (WIRE + 'diameter = "1 mm"\n', "given twice"),
        (WIRE + 'material = "cheese"\n', "not one of"),
        ('[[wires]]\nname = 3\ndiameter = "1 mm"\nlength = "1 m"\n', "text is wanted"),
        (
            CORE,
            "not below",
        ),
        ('format = 7\nkind = "box"\n', "format"),
    ],
)
def test_faults_say_what_is_wrong(text, says):
    texts, _ = faults(text if text.startswith("format") else HEAD + text)
    assert len(texts) == 1
    assert says in texts[0]
    assert len(texts[0]) < 250


def test_a_former_says_what_turns_it_takes():
    texts, _ = faults(HEAD + FORMER + 'turn_step = "third"\n')
    assert "half, whole" in texts[0]
    box = read_box(HEAD + FORMER + 'turn_step = "whole"\n' + FORMER)
    assert [former.turn_step for former in box.formers] == ["whole", "half"]


def test_parallel_line_needs_no_jacket_and_is_not_wound():
    own = '[[cables]]\nname = "twin"\nmake = "parallel"\nimpedance = "300 ohm"\nvelocity_factor = 0.8\n'
    box = read_box(HEAD + own + 'loss = "0.04 dB/m"\nloss_at = "30 MHz"\nlength = "9 m"\n')
    listed = read_box(HEAD + '[[cables]]\nname = "ladder"\ntype = "window line"\nlength = "9 m"\n')
    assert not box.cables[0].is_wound
    assert not listed.cables[0].is_wound
    texts, _ = faults(HEAD + own + 'length = "9 m"\n')
    assert [text.split(": ")[1] for text in texts] == ["loss", "loss_at"]


def test_a_former_thinner_than_every_wire_is_named():
    thin = '[[formers]]\nname = "needle"\ndiameter = "4 mm"\nlength = "9 cm"\n'
    thick = '[[wires]]\nname = "rod"\ndiameter = "6 mm"\nlength = "9 m"\n'
    texts, _ = faults(HEAD + thin + thick)
    assert texts[0].startswith("formers, row 1 (needle): diameter:")


def test_many_faults_are_counted():
    texts, _ = faults(HEAD + '[[formers]]\nname = "x"\n' * 60)
    assert len(texts) == 41
    assert texts[-1].endswith("mend these first")


def test_no_such_file_and_no_toml(tmp_path):
    with pytest.raises(FileFault):
        load_box(tmp_path / "none.toml")
    with pytest.raises(FileFault):
        read_box("[[formers")


def test_every_list_of_the_registry_is_read():
    assert set(TABLES) == {"formers", "wires", "cables", "cores", "capacitors"}
