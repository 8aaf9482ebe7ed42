"""Rummage: combinations by hand, rows against the full solve, ranking against trying everything by force."""

import json
import math
from dataclasses import replace
from itertools import combinations_with_replacement

import pytest

from trapdesk.design.box import Box, Cable, Capacitor, Core, Former, TurnStep, Wire
from trapdesk.design.coil_kinds import Solenoid
from trapdesk.design.fields import SOLVE
from trapdesk.errors import NoAnswer
from trapdesk.faces import cli, rummage_out
from trapdesk.services.antenna.solve import solve
from trapdesk.services.box import winders
from trapdesk.services.box.by_yield import TRIALS, by_yield, ranked
from trapdesk.services.box.combos import PIECES, WAYS, combos
from trapdesk.services.box.offers import END_ROOM
from trapdesk.services.box.parts import stub_part
from trapdesk.services.box.rummage import rummage, take
from trapdesk.services.box.search import Search, tank
from trapdesk.services.compare.port_grid import PortGrid
from trapdesk.services.trap.built import build, wanted_resonance
from trapdesk.services.trials.tolerance import quick_yield, yield_of
from trapdesk.store import store
from trapdesk.store.box_read import find_box


def preset(name="40-20-vee"):
    return store.preset(name)[0]


def finished(design, box, rows=20):
    return list(rummage(design, box, rows))[-1]


PIPE = Former(name="pipe", diameter=0.04, length=0.08, count=2)
ENAMELLED = Wire(name="enamelled", diameter=1.6e-3, coating=5e-5, length=20.0)
DISC = Capacitor(capacitance=47e-12, voltage=3e3, count=2)
SMALL = Box(formers=(PIPE,), wires=(ENAMELLED,), capacitors=(DISC,))


# Combinations ---------------------------------------------------------------------------------------------


def by_hand(kinds):
    """Return every combination as (way, pieces sorted): C, loss, tolerance, volts; by plain circuit rules."""

    def beside(a, b):
        c = a[0] + b[0]
        mixed = [(a[0] * x + b[0] * y) / c for x, y in zip(a[1:3], b[1:3], strict=True)]
        return (c, *mixed, min(a[3], b[3]))

    def after(a, b):
        c = 1 / (1 / a[0] + 1 / b[0])
        mixed = [c * (x / a[0] + y / b[0]) for x, y in zip(a[1:3], b[1:3], strict=True)]
        # The charge is the same on both: the volts of each go with 1/C.
        return (c, *mixed, min(a[3] * a[0] / c, b[3] * b[0] / c))

    one = [(k.capacitance, 1 / k.q, k.tolerance, k.voltage) for k in kinds]
    held = [int(k.count) for k in kinds]
    found = {(0, (i,)): one[i] for i in range(len(kinds))}
    for i, j in combinations_with_replacement(range(len(kinds)), 2):
        found[1, (i, j)] = beside(one[i], one[j])
        found[2, (i, j)] = after(one[i], one[j])
        for k in range(len(kinds)):
            found[5, (i, j, k)] = beside(after(one[i], one[j]), one[k])
            found[6, (i, j, k)] = after(beside(one[i], one[j]), one[k])
    for i, j, k in combinations_with_replacement(range(len(kinds)), 3):
        found[3, (i, j, k)] = beside(beside(one[i], one[j]), one[k])
        found[4, (i, j, k)] = after(after(one[i], one[j]), one[k])
    return {
        key: value for key, value in found.items() if all(2 * key[1].count(i) <= held[i] for i in set(key[1]))
    }


KINDS = (
    Capacitor(capacitance=22e-12, tolerance=0.05, voltage=1e3, q=800, count=6),
    Capacitor(capacitance=47e-12, tolerance=0.1, voltage=3e3, q=2000, count=2),
    Capacitor(capacitance=100e-12, tolerance=0.02, voltage=500.0, q=300, count=4),
    Capacitor(capacitance=68e-12, tolerance=0.02, voltage=500.0, q=300, count=1),
)


def test_combinations_are_those_by_hand():
    found, expected = combos(KINDS, 0.0, 1.0), by_hand(KINDS)
    assert len(found) == len(expected)
    for n in range(len(found)):
        pieces = tuple(int(m) for m in found.members[n] if m >= 0)
        c, loss, tolerance, volts = expected[int(found.way[n]), pieces]
        assert len(pieces) == PIECES[found.way[n]]
        assert found.capacitance[n] == pytest.approx(c, rel=1e-12)
        assert found.loss[n] == pytest.approx(loss, rel=1e-12)
        assert found.tolerance[n] == pytest.approx(tolerance, rel=1e-12)
        assert found.voltage[n] == pytest.approx(volts, rel=1e-12)
        assert found.spare[n] == min(KINDS[i].count - 2 * pieces.count(i) for i in pieces)


def test_a_single_piece_is_not_enough_for_two_traps():
    assert not len(combos(KINDS[3:], 0.0, 1.0))
    assert not len(combos((), 0.0, 1.0))


def test_worst_case_tolerance_is_that_of_the_corners():
    way = WAYS.index("({0} - {1}) + {2}")
    found = combos(KINDS[:3], 0.0, 1.0)
    a, b, c = KINDS[:3]
    n = next(n for n in range(len(found)) if found.way[n] == way and list(found.members[n]) == [0, 1, 2])

    def value(sign):
        one, two, three = (k.capacitance * (1 + 1e-3 * sign * k.tolerance) for k in (a, b, c))
        return one * two / (one + two) + three

    slope = (value(1) - value(-1)) / 2e-3 / value(0)
    assert found.tolerance[n] == pytest.approx(slope, rel=1e-4)


# Figures of a row -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", store.presets())
def test_interpolated_wires_are_the_solved_ones(name):
    design = preset(name)
    wanted = wanted_resonance(design.antenna.trap)
    traps = [
        build(tank(wanted, 1 / (2 * math.pi * wanted * x), 200.0, design.antenna.trap.body))
        for x in (70.0, 640.0)
    ]
    grid = PortGrid(design, traps)
    for x, q in ((100.0, 120.0), (260.0, 300.0), (550.0, 80.0)):
        trap = tank(wanted, 1 / (2 * math.pi * wanted * x), q, design.antenna.trap.body)
        quick = grid.outcome(build(trap))
        full = solve(replace(design, antenna=replace(design.antenna, trap=trap)))
        # Between solved wires the matrices are a polynomial; what is left is far below any doubt.
        assert quick.inner == pytest.approx(full.lengths.inner, abs=2e-3)
        assert quick.end == pytest.approx(full.lengths.end, abs=4e-3)
        for role, band in full.bands.items():
            of = quick.bands[role]
            assert of.loss == pytest.approx(band.shares.trap, rel=2e-3)
            assert of.peak_voltage == pytest.approx(band.worst_stress.peak_voltage, rel=2e-3)
            assert of.worst_swr == pytest.approx(band.worst_swr, rel=3e-3)
            assert (of.width is None) == (band.width is None)
            if band.width:
                assert of.width == pytest.approx(band.width, rel=6e-3)


def test_rows_are_confirmed_by_the_full_solve():
    design = preset()
    found = finished(design, find_box(), 6)
    costs = [float(row.cost.total) for row in found.rows[:6]]
    assert costs == sorted(costs)
    best = {row.kind: row for row in reversed(found.rows)}
    assert set(best) == {"solenoid", "stub", "cable", "toroid"}
    for row in best.values():
        full = solve(take(design, row))
        assert full.trap.resonance == pytest.approx(found.resonance, rel=2e-6)
        assert full.design.antenna.trap.body >= row.length
        for role, band in full.bands.items():
            assert row.outcome.bands[role].loss == pytest.approx(band.shares.trap, rel=4e-3)
            assert row.outcome.bands[role].peak_voltage == pytest.approx(
                band.worst_stress.peak_voltage, rel=3e-3
            )
            assert row.outcome.bands[role].width == pytest.approx(band.width, rel=6e-3)


def test_a_row_typed_by_hand_gives_the_same_trap():
    box = Box(
        formers=(replace(PIPE, diameter=0.032),),
        wires=(ENAMELLED,),
        capacitors=(replace(DISC, capacitance=10e-12),),
    )
    design = preset("20-10-flat")
    found = finished(design, box)
    coil = found.rows[0].trap.coil
    typed = Solenoid(
        former=0.032, wire=1.6e-3, insulation=5e-5, pitch=round(coil.pitch, 5), turns=found.rows[0].turns
    )
    disc = replace(found.rows[0].trap, resonance=SOLVE, coil=typed)
    figures = solve(replace(design, antenna=replace(design.antenna, trap=disc)))
    # The pitch as printed is right to half a hundredth of a millimetre, and moves half of that at most.
    assert figures.trap.resonance == pytest.approx(found.resonance, rel=5e-6 / coil.pitch / 2)
    assert found.rows[0].diameter == pytest.approx(figures.trap.coil.diameter)


def test_a_row_holds_to_the_box():
    design, box = preset(), find_box()
    for row in finished(design, box).rows:
        held = {f.name: f for f in (*box.formers, *box.cores)}[row.former]
        wire = {w.name: w for w in (*box.wires, *box.cables)}[row.wire]
        assert 2 * row.wire_length <= wire.length
        for i in set(row.pieces):
            assert 2 * row.pieces.count(i) <= box.capacitors[i].count
        assert row.voltage is None or row.volts <= row.voltage
        if row.stub is not None:
            cable = {c.name: c for c in box.cables}[row.stub.cable]
            assert row.stub.left == pytest.approx(cable.length - 2 * (row.stub.length + row.stub.snip))
            assert row.stub.left >= 0
        if row.kind in ("solenoid", "stub"):
            assert row.length + 2 * END_ROOM <= held.length
            assert row.trap.coil.pitch >= wire.closest * (1 - 1e-6)
            assert 2 * row.turns == int(2 * row.turns)


def test_taking_a_row_changes_the_trap_alone():
    design = preset()
    row = finished(design, SMALL).rows[0]
    taken = take(design, row)
    assert taken.antenna.trap == row.trap
    assert replace(taken, antenna=design.antenna) == design
    assert wanted_resonance(taken.antenna.trap) == pytest.approx(
        wanted_resonance(design.antenna.trap), rel=2e-6
    )


def test_a_set_length_stays():
    design = preset()
    fixed = replace(
        design, antenna=replace(design.antenna, lengths=replace(design.antenna.lengths, inner=5.1))
    )
    row = finished(fixed, SMALL).rows[0]
    full = solve(take(fixed, row))
    assert row.outcome.inner == 5.1
    assert row.outcome.end == pytest.approx(full.lengths.end, abs=4e-3)


# Stubs, whole turns, yield --------------------------------------------------------------------------------

COAX = Cable(
    name="coax", impedance=50.0, velocity_factor=0.66, outside=5e-3, shield=3.6e-3, loss=0.05, loss_at=14e6,
    voltage=2e3, length=3.0,
)  # fmt: skip


def test_a_stub_serves_as_capacitor_and_holds_to_cable_and_rating():
    box = replace(SMALL, capacitors=(), cables=(COAX,))
    row = next(row for row in finished(preset(), box).rows if row.kind == "stub")
    assert row.pieces == ()
    w = 2 * math.pi * wanted_resonance(preset().antenna.trap)
    # An open line without loss: B = tan(w s / v) / Z0, and 1 / cos(w s / v) the volts at its end.
    angle = w * row.stub.length / (0.66 * 299792458.0)
    assert math.tan(angle) / 50.0 == pytest.approx(w * row.capacitance, rel=1e-4)
    assert row.voltage == pytest.approx(2e3 * math.cos(angle), rel=1e-4)
    assert row.volts <= row.voltage
    assert row.stub.left == pytest.approx(3.0 - 2 * (row.stub.length + row.stub.snip))
    shorter = replace(row.trap, resonance=SOLVE, capacitor=stub_part(COAX, row.stub.length - 0.001))
    assert build(shorter).resonance - row.resonance == pytest.approx(0.001 * row.stub.slope, rel=0.01)
    # Cut as long as it is told to be, it is low by all that it and the coil may be off.
    longer = replace(row.trap, resonance=SOLVE, capacitor=stub_part(COAX, row.stub.length + row.stub.snip))
    assert build(longer).resonance == pytest.approx(row.resonance * (1 - row.off), rel=0.01)
    assert not any(r.kind == "stub" for r in finished(preset(), replace(box, cables=(WEAK,))).rows)
    short = replace(COAX, length=2 * row.stub.length)
    for other in finished(preset(), replace(box, cables=(short,))).rows:
        assert other.kind != "stub" or other.stub.left >= 0


WEAK = replace(COAX, voltage=300.0)


def test_of_parallel_line_only_stubs_are_made():
    line = Cable(name="ladder", type="window line", length=8.0)
    rows = finished(preset(), replace(SMALL, capacitors=(), cables=(line,))).rows
    assert {row.kind for row in rows} == {"stub"}
    assert rows[0].voltage is None


def test_a_former_may_want_whole_turns():
    kinds = tuple(Capacitor(capacitance=c * 1e-12, voltage=3e3, count=4) for c in (22, 33, 47, 56))
    pipes = [replace(PIPE, name=f"{d}", diameter=d / 1e3) for d in (32, 40, 50, 63)]
    box = replace(SMALL, formers=tuple(pipes), capacitors=kinds)
    free = finished(preset(), box).rows
    assert any(row.turns != int(row.turns) for row in free)
    whole = replace(box, formers=tuple(replace(f, turn_step=TurnStep.WHOLE) for f in pipes))
    rows = finished(preset(), whole).rows
    assert rows
    assert all(row.turns == int(row.turns) for row in rows)


def test_traps_that_are_looked_at_closer_are_the_best_of_all(monkeypatch):
    design, box = preset(), find_box()
    search = Search(design, box, wanted_resonance(design.antenna.trap))
    joined = search.capacitors(box)
    pairs = [("solenoid", 3, 3), ("solenoid", 5, 4), ("solenoid", 8, 1), ("stub", 9, 2)]
    few = [search.offers(box, pair, joined) for pair in pairs]
    monkeypatch.setattr(winders, "FEWEST", 100_000)
    every = [search.offers(box, pair, joined) for pair in pairs]
    assert [[(o.turns, o.pieces, o.stub) for o in offers] for offers in few] == [
        [(o.turns, o.pieces, o.stub) for o in offers] for offers in every
    ]


def test_rows_go_by_yield_as_far_as_the_trials_tell_them_apart():
    row = finished(preset(), SMALL).rows[0]

    def like(passed, points):
        priced = replace(row.cost, loss=points, width=0, volts=0, size=0, pieces=0, adjustment=0, spare=0)
        return replace(row, within=None if passed is None else yield_of(passed, 1000), cost=priced)

    rows = [like(None, 1), like(500, 2), like(900, 9), like(905, 10), like(520, 1), like(300, 0)]
    # Of 900 and 905 in a thousand, and of 500 and 520, either may be the better one: cost decides.
    order = [(r.within and r.within.passed, r.cost.loss) for r in ranked(rows)]
    assert order == [(900, 9), (905, 10), (520, 1), (500, 2), (300, 0), (None, 1)]


def test_yield_of_a_row_is_that_of_its_design():
    design = preset()
    found = finished(design, SMALL)
    last = list(by_yield(design, found, "wet"))[-1]
    assert (last.stage, last.finished) == ("wet", True)
    expected = quick_yield(take(design, found.rows[0]), trials=TRIALS, stage="wet")
    assert next(r for r in last.rows if r.former == found.rows[0].former).within == expected


# Progress and shortage ------------------------------------------------------------------------------------


def test_rows_appear_as_they_are_found_and_stopping_keeps_them():
    progress = rummage(preset(), find_box(), 20)
    first = next(progress)
    assert len(first.rows) == 1
    assert not first.finished
    second = next(progress)
    progress.close()
    assert len(second.rows) == 2
    assert first.rows[0] in second.rows
    assert solve(take(preset(), second.rows[0])).trap is not None


def test_an_interrupt_keeps_what_was_found():
    progress = rummage(preset(), find_box(), 20)

    def interrupted():
        yield next(progress)
        yield next(progress)
        raise KeyboardInterrupt

    found = rummage_out.last(interrupted())
    assert len(found.rows) == 2
    assert "Stopped early" in "\n".join(rummage_out.lines(preset(), find_box(), found))


def short(box, name="40-20-vee"):
    found = finished(preset(name), box)
    assert not found.rows
    assert found.finished
    return found.shortage


def test_small_box_is_enough():
    assert finished(preset(), SMALL).rows


def enough(box, part):
    """Return whether a box becomes enough with one part more, put into its list."""
    table, entry = part
    return bool(finished(preset(), replace(box, **{table: (*getattr(box, table), entry)})).rows)


@pytest.mark.parametrize(
    ("changes", "lacks"),
    [
        ({"capacitors": (replace(DISC, count=1),)}, "pieces"),
        ({"capacitors": (replace(DISC, voltage=300.0),)}, "rating"),
        ({"formers": (replace(PIPE, length=0.024),)}, "former"),
        ({"wires": (replace(ENAMELLED, length=1.0),)}, "wire"),
        ({"capacitors": (), "cables": (replace(COAX, length=0.1),)}, "cable"),
    ],
)
def test_what_is_short_is_named_and_one_part_mends_it(changes, lacks):
    box = replace(SMALL, **changes)
    found = short(box)
    assert lacks in found.lacks
    assert found.nearest is not None
    assert found.parts
    for part in found.parts:
        assert enough(box, part)
    words = "\n".join(rummage_out.lines(preset(), box, finished(preset(), box)))
    assert rummage_out.LACKS[lacks].split()[1] in words
    assert "enough:" in words


@pytest.mark.parametrize("missing", ["formers", "wires", "capacitors"])
def test_a_list_with_nothing_in_it_is_named(missing):
    box = replace(SMALL, **{missing: ()})
    found = short(box)
    assert found.missing == (missing,)
    assert found.parts
    assert all(enough(box, part) for part in found.parts)


def test_a_former_thinner_than_the_wire_is_left_alone():
    box = replace(SMALL, formers=(PIPE, Former(name="straw", diameter=1.5e-3 + 2e-3, length=0.2, count=2)))
    rows = finished(preset(), replace(box, wires=(replace(ENAMELLED, diameter=4e-3), ENAMELLED))).rows
    assert rows
    assert all(row.former != "straw" or row.wire == "enamelled" for row in rows)


def test_a_ring_core_is_wound_with_whole_turns():
    core = Core(name="ring", inductance_index=4.9e-9, outer=0.05, inner=0.032, height=0.014, q=200, count=2)
    kinds = tuple(Capacitor(capacitance=c * 1e-12, voltage=3e3, count=4) for c in (22, 33, 47, 56))
    box = Box(wires=(replace(ENAMELLED, diameter=0.8e-3),), cores=(core,), capacitors=kinds)
    row = finished(preset(), box).rows[0]
    assert row.kind == "toroid"
    assert row.turns == int(row.turns)
    # The default of 1.5 pF that the winding adds lies beside the capacitor.
    total = row.capacitance + 1.5e-12
    wanted = 1 / ((2 * math.pi * wanted_resonance(preset().antenna.trap)) ** 2 * total)
    assert row.turns**2 * core.inductance_index == pytest.approx(wanted, rel=0.052)
    assert row.resonance == pytest.approx(wanted_resonance(preset().antenna.trap), rel=1e-6)


def test_a_design_without_a_trap_has_nothing_to_look_for():
    design = preset()
    bare = replace(
        design, antenna=replace(design.antenna, trap=None, lengths=replace(design.antenna.lengths, end=None))
    )
    with pytest.raises(NoAnswer, match="no trap to build"):
        next(rummage(bare, SMALL))


# Command line ---------------------------------------------------------------------------------------------


def run(capsys, *arguments):
    code = cli.main(["rummage", *arguments])
    out = capsys.readouterr()
    return code, out.out, out.err


BOX = """format = 1
kind = "box"
[[formers]]
name = "pipe"
diameter = "40 mm"
length = "8 cm"
count = 2
[[wires]]
name = "enamelled"
diameter = "1.6 mm"
coating = "0.05 mm"
length = "20 m"
[[capacitors]]
capacitance = "47 pF"
voltage = "3 kV"
count = 2
"""


def test_command_line_prints_rows_with_reasons(capsys, tmp_path):
    path = tmp_path / "box.toml"
    path.write_text(BOX, "utf-8")
    code, out, err = run(capsys, "40-20-vee", "--box", str(path))
    assert (code, err) == (0, "")
    assert out.isascii()
    assert max(map(len, out.splitlines())) <= 79
    assert "turns of enamelled on pipe" in " ".join(out.split())
    assert "first: least cost of all" in out


def test_command_line_json(capsys, tmp_path):
    path = tmp_path / "box.toml"
    path.write_text(BOX, "utf-8")
    code, out, _ = run(capsys, "40-20-vee", "--box", str(path), "--json")
    found = json.loads(out)
    assert code == 0
    row = found["rows"][0]
    assert (row["rank"], row["kind"], row["former"]) == (1, "solenoid", "pipe")
    assert row["resonance_hz"] == pytest.approx(14.05e6, rel=1e-5)
    assert set(row["bands"]) == {"upper", "lower"}
    assert found["shortage"] is None


def test_command_line_orders_by_yield(capsys, tmp_path):
    path = tmp_path / "box.toml"
    path.write_text(BOX, "utf-8")
    code, out, _ = run(capsys, "40-20-vee", "--box", str(path), "--for-yield", "wet")
    assert code == 0
    assert "Ordered by yield, wet" in out
    assert "first by its yield" in out
    assert max(map(len, out.splitlines())) <= 79
    code, out, _ = run(capsys, "40-20-vee", "--box", str(path), "--for-yield", "wet", "--json")
    found = json.loads(out)
    within = found["rows"][0]["yield"]
    assert found["for_yield"] == "wet"
    assert within["low"] <= within["share"] <= within["high"]
    assert within["share"] == within["passed"] / within["trials"]


def test_a_bad_entry_does_not_lose_the_rest(capsys, tmp_path):
    path = tmp_path / "box.toml"
    path.write_text(BOX + '[[capacitors]]\ncapacitance = "4x7"\n', "utf-8")
    code, out, err = run(capsys, "40-20-vee", "--box", str(path))
    assert code == 2
    assert "turns of enamelled" in out
    assert "capacitors, row 2: capacitance" in err


def test_nothing_buildable_is_no_answer(capsys, tmp_path):
    path = tmp_path / "box.toml"
    path.write_text(
        BOX.replace('"47 pF"\nvoltage = "3 kV"\ncount = 2', '"47 pF"\nvoltage = "300 V"'), "utf-8"
    )
    code, out, err = run(capsys, "40-20-vee", "--box", str(path))
    assert code == 1
    assert "enough:" in out
    assert "no two equal traps" in err


@pytest.mark.parametrize("rows", ["0", "1000"])
def test_rows_outside_are_refused(capsys, rows):
    code, out, err = run(capsys, "40-20-vee", "--rows", rows)
    assert (code, out) == (2, "")
    assert "1 to 200" in err


def test_a_row_is_taken_into_a_new_file(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    file = tmp_path / "mine.toml"
    words = ["rummage", "20-10-flat", "--rows", "1", "--take", "2"]
    assert cli.main([*words, "--out", "mine.toml"]) == 0
    assert "trap of row 2 is in mine.toml" in capsys.readouterr().out
    # Read back it is the design with the row's trap, and solved it resonates where it was asked to.
    design, row = store.load(file), finished(preset("20-10-flat"), find_box(), 1).rows[1]
    assert design == take(preset("20-10-flat"), row)
    assert solve(design).trap.resonance == pytest.approx(28.2e6, rel=1e-6)
    before = file.read_bytes()
    assert cli.main([*words, "--out", str(file)]) == 3
    assert "nothing is written over" in capsys.readouterr().err
    assert file.read_bytes() == before


@pytest.mark.parametrize(
    ("more", "said"),
    [
        (["--take", "1"], "--out and a file"),
        (["--out", "new.toml"], "--take and the number"),
        (["--take", "99", "--out", "new.toml"], "1 to "),
        (["--take", "0", "--out", "new.toml"], "1 to "),
    ],
)
def test_a_row_half_said_or_not_there_is_refused(tmp_path, monkeypatch, capsys, more, said):
    monkeypatch.chdir(tmp_path)
    assert cli.main(["rummage", "20-10-flat", "--rows", "1", *more]) == 2
    assert said in capsys.readouterr().err
    assert not list(tmp_path.iterdir())
