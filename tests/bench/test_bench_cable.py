"""How long lines and cable traps take, in yardsticks."""

import numpy as np

from tests.bench.yardstick import ratio, record
from trapdesk.engine import cable_winding, cables, rings


def test_turns_of_a_cable_trap():
    line = cables.Line(z0=50.0, velocity_factor=0.66)

    def solve():
        rings._whole_rings.cache_clear()
        return cable_winding.cable_trap_turns(7.1e6, line, 0.05, 4.95e-3, 3.6e-3)

    record("turns of a cable trap", ratio(solve), limit=4.0)


def test_line_over_two_bands():
    line = cables.Line(z0=50.0, velocity_factor=0.66, skin_loss=1.3e-5)
    frequency = np.linspace(7e6, 14.35e6, 202)
    load = 60 + 1e-4j * (frequency - 10e6)

    def solve():
        return cables.line_figures(*cables.propagation(line, frequency), 20.0, load, 50.0, 100.0)

    record("line in use, 202 points", ratio(solve), limit=1.5)
