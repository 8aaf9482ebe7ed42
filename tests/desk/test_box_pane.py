"""The box on the desk: rows in the order of their yield, asked for by keys alone."""

import asyncio

from tests.desk.screens import LONGEST, opened, pressed, settled, text, typed
from trapdesk.faces.desk.panes.jobs import RUMMAGE
from trapdesk.services.box.by_yield import ranked

BOX = """
format = 1
kind = "box"
title = "two pipes"

[[formers]]
name = "pipe"
diameter = "40 mm"
length = "30 cm"
count = 2

[[formers]]
name = "thin pipe"
diameter = "25 mm"
length = "30 cm"
count = 2

[[wires]]
name = "copper"
diameter = "1.6 mm"
length = "20 m"

[[capacitors]]
capacitance = "47 pF"
voltage = "3 kV"
count = 4
"""


async def worked_out(desk, pilot):
    await settled(desk, pilot)
    await asyncio.wait_for(desk.session.aside.settled(), LONGEST)
    await pilot.pause()


async def test_rows_are_ordered_by_their_yield_when_asked_and_by_cost_again(tmp_path):
    file = tmp_path / "pipes.toml"
    file.write_text(BOX)
    async with opened() as (desk, pilot):
        await pressed(desk, pilot, "B", "b", "ctrl+u")
        await typed(desk, pilot, str(file), "enter")
        await worked_out(desk, pilot)
        by_cost = desk.session.aside.found(RUMMAGE.name).found
        assert all(row.within is None for row in by_cost.rows)
        await pressed(desk, pilot, "y", "ctrl+u")
        await typed(desk, pilot, "soaked", "enter")
        assert "soaked is no stage: as_cut, tuned, aimed, wet" in text(desk)
        await pressed(desk, pilot, "y")
        await pressed(desk, pilot, "enter")
        await worked_out(desk, pilot)
        found = desk.session.aside.found(RUMMAGE.name).found
        assert found.stage == "wet"
        assert len(found.rows) == len(by_cost.rows) >= 2
        assert list(found.rows) == list(ranked(list(found.rows)))
        assert all(0 < row.within.share <= 1 for row in found.rows)
        assert "Ordered by yield, wet" in text(desk)
        await pressed(desk, pilot, "y", "ctrl+u")
        await pressed(desk, pilot, "enter")
        await worked_out(desk, pilot)
        assert desk.session.aside.found(RUMMAGE.name).found.rows == by_cost.rows
