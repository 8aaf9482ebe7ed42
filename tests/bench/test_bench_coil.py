"""How long the coil and the special functions take, in yardsticks."""

import numpy as np

from tests.bench.yardstick import ratio, record
from trapdesk.design.coil_kinds import Solenoid
from trapdesk.design.fields import SOLVE
from trapdesk.engine import coils, rings, special
from trapdesk.services.trap.coils import build_coil


def test_coil_of_25_turns():
    def solve():
        rings._whole_rings.cache_clear()
        return coils.coil_at(coils.winding(0.05, 1.5e-3, 1e-3, 25), 7.1e6, 1.7241e-8)

    record("solenoid, 25 turns at pitch 1.5 d", ratio(solve), limit=4.0)


def test_close_wound_coil_of_25_turns():
    def solve():
        rings._whole_rings.cache_clear()
        return coils.coil_at(coils.winding(0.05, 1.1e-3, 1e-3, 25), 7.1e6, 1.7241e-8)

    record("solenoid, 25 turns at pitch 1.1 d", ratio(solve), limit=8.0)


def test_turns_of_a_coil():
    coil = Solenoid(former=0.063, wire=2e-3, pitch=4e-3, turns=SOLVE)

    def solve():
        rings._whole_rings.cache_clear()
        return build_coil(coil, 7.1e6, lambda own: 8e-6, 7.1e6)

    record("turns for 8 uH", ratio(solve), limit=4.0)


def test_bessel_table_look_up():
    x = np.random.default_rng(1).uniform(0.0, 200.0, 20_000)
    record("J0 and J1 of 20000 points", ratio(lambda: special.bessel_j01(x)), limit=0.08)
