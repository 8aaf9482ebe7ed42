"""Lists of a design at the desk: members added, edited, taken out, whatever the list holds."""

import pytest

from tests.desk.screens import go_to, noted, opened, pressed, screen, settled, text, typed
from trapdesk.design.design import get
from trapdesk.design.fields import walk
from trapdesk.design.rules import check
from trapdesk.faces.desk import form, lists
from trapdesk.faces.desk.optional import PARTS
from trapdesk.store import store


def furnished():
    """Return a design with everything that may be absent."""
    design = store.find().design
    for key in PARTS:
        design = form.put(design, key, "added", None, iter([design]))
    return form.put(design, "antenna.trap.capacitor.kind", "parallel", None, iter([design]))


LISTS = [key for key, known, _ in walk(furnished()) if known.dimension == "parts"]


def test_every_list_has_a_row():
    assert len(LISTS) >= 7
    rows = [row.key for drawer in form.rows(furnished(), None).values() for row in drawer]
    assert set(LISTS) <= set(rows)


@pytest.mark.parametrize("key", LISTS)
def test_members_come_and_go_and_every_state_can_be_kept(key):
    design = furnished()
    least = 2 if key.endswith(".members") else 0
    for count in (3, 1 + least, 5, least):
        design = form.put(design, key, count, None, iter([]))
        assert not check(design)
        assert len(get(design, key)) == count
        text_ = store.to_text(design)
        assert store.to_text(design, text_) == text_
    design = form.put(design, key, 3, None, iter([]))
    members = get(design, key)
    assert get(lists.without(design, key, 2), key) == (members[0], members[2])


@pytest.mark.parametrize("wrong", ["", "-1", "2.5", "41", "1e3", "many", "\u0663", "9" * 300])
def test_no_other_count_is_taken(wrong):
    row = next(row for row in form.rows(furnished(), None)["Tuner"] if row.key.endswith("taps"))
    with pytest.raises(form.BadInput, match="0 to 40"):
        form.read_row(row, wrong)


def test_what_was_wanted_stays_wanted_when_segments_come_and_go():
    design = store.find().design
    band = design.bands.upper
    one = form.put(design, "bands.upper.wanted", 1, None, iter([]))
    assert one.bands.upper.segments_wanted == (band.wanted_edges,)
    many = form.put(one, "bands.upper.wanted", 6, None, iter([]))
    assert not check(many)
    assert form.put(many, "bands.upper.wanted", 0, None, iter([])).bands.upper == band


async def test_segments_are_added_typed_into_and_taken_out_by_keys():
    async with opened() as (desk, pilot):
        first = desk.session.design
        await go_to(desk, pilot, "bands.lower.wanted")
        assert "one more, one less" in screen(desk)[-1]
        await pressed(desk, pilot, "plus", "plus")
        assert [part.low for part in desk.session.design.bands.lower.wanted][0] == 7.05e6
        await go_to(desk, pilot, "bands.lower.wanted.2.high")
        assert "take it out" in screen(desk)[-1]
        await typed(desk, pilot, "7.19 MHz", "enter")
        await settled(desk, pilot)
        assert desk.session.design.bands.lower.wanted[1].high == 7.19e6
        assert not desk.session.no_answer
        await pressed(desk, pilot, "delete")
        assert len(desk.session.design.bands.lower.wanted) == 1
        assert desk.drawers.row.key == "bands.lower.wanted"
        assert "taken out of its list" in text(desk)
        await pressed(desk, pilot, "minus")
        assert desk.session.design == first
        await pressed(desk, pilot, "minus")
        assert "as before" in text(desk)
        await pressed(desk, pilot, "u", "u", "u")
        assert desk.session.design.bands.lower.wanted[1].high != 7.19e6
        await settled(desk, pilot)


async def test_too_few_members_are_refused_in_words_of_the_desk():
    async with opened() as (desk, pilot):
        desk.session.take(furnished())
        await go_to(desk, pilot, "antenna.trap.capacitor.members")
        before = desk.session.design
        await pressed(desk, pilot, "minus")
        foot = " ".join(await noted(desk, pilot))
        assert desk.session.design is before
        assert "members" in foot
        assert "antenna." not in foot


async def test_refusals_name_rows_not_keys_of_the_file():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "bands.upper.high")
        await typed(desk, pilot, "14.1 MHz", "enter")
        foot = " ".join(await noted(desk, pilot))
        assert "wanted to" in foot
        assert "wanted from" in foot
        assert "_" not in foot
        await pressed(desk, pilot, "escape")


async def test_a_line_of_ones_own_begins_as_the_type_it_was():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "station.line")
        await pressed(desk, pilot, "enter")
        await go_to(desk, pilot, "station.line.type")
        await typed(desk, pilot, "e", "ctrl+u")
        await typed(desk, pilot, "own", "enter")
        line = desk.session.design.station.line
        assert (line.type, line.z0) == ("own", 50.0)
        assert len(line.losses) > 1
        await settled(desk, pilot)
        assert not desk.session.no_answer


async def test_digits_at_a_choice_do_nothing_but_say_so():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "antenna.trap")
        before = desk.session.design
        await pressed(desk, pilot, "1", "4", ".")
        assert desk.session.design is before
        assert "this is a choice" in " ".join(await noted(desk, pilot))
