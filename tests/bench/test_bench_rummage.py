"""How long a look through the ready box takes, in yardsticks."""

from tests.bench.yardstick import ratio, record
from trapdesk.engine.coil_table import quick_coil
from trapdesk.engine.rings import _whole_rings
from trapdesk.services.box.by_yield import by_yield
from trapdesk.services.box.rummage import rummage
from trapdesk.services.box.winders import TURNS
from trapdesk.store import store
from trapdesk.store.box_read import find_box

DESIGN, BOX = store.preset("40-20-vee")[0], find_box()


def test_first_rows():
    def look():
        _whole_rings.cache_clear()
        return next(rummage(DESIGN, BOX, 20))

    assert look().rows
    record("rummage, first row", ratio(look, runs=3), limit=100.0)


def test_twenty_rows():
    def look():
        _whole_rings.cache_clear()
        return list(rummage(DESIGN, BOX, 20))[-1]

    found = look()
    assert len(found.rows) >= 20
    assert all(len(row.outcome.bands) == 2 for row in found.rows)
    record("rummage, 20 rows through the ready box", ratio(look, runs=3), limit=600.0)


def test_yield_of_a_row():
    *_, found = rummage(DESIGN, BOX, 1)

    def look():
        return next(by_yield(DESIGN, found, "wet"))

    assert look().rows[0].within is not None
    record("rummage, yield of a row", ratio(look, runs=3), limit=150.0)


def test_quick_coils():
    record("quick coil at 117 turns", ratio(lambda: quick_coil(0.04, 2e-3, 1e-3, TURNS)), limit=0.5)
