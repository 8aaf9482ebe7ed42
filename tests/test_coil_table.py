"""The quick coil against the solved rings it was fitted to, at shapes it was not fitted at."""

import numpy as np
import pytest

from trapdesk.engine import coil_table
from trapdesk.engine.coil_table import QUICK_ERROR, fit, in_range, quick_coil
from trapdesk.engine.rings import solenoid_rings


def shapes(count):
    random = np.random.default_rng(41)
    for _ in range(count):
        turns = max(1.0, round(2 * np.exp(random.uniform(0, np.log(60)))) / 2)
        yield np.exp(random.uniform(np.log(2.3), np.log(140))), random.uniform(0.13, 0.952), turns


def test_quick_coil_keeps_to_the_rings():
    for diameter, wire, turns in shapes(150):
        inductance, crowding = solenoid_rings(diameter, 1.0, wire, turns)
        quick = quick_coil(diameter, 1.0, wire, turns)
        assert abs(quick[0] / inductance - 1) < QUICK_ERROR["inductance"]
        assert abs(quick[1] / crowding - 1) < QUICK_ERROR["proximity"]


def test_array_equals_scalar():
    turns = np.arange(2.0, 30.0, 0.5)
    pitch = np.array([1e-3, 2e-3])[:, None]
    both = quick_coil(0.04, pitch, 0.8e-3, turns)
    for i, n in ((0, 3), (1, 40)):
        one = quick_coil(0.04, float(pitch[i, 0]), 0.8e-3, turns[n])
        assert both[0][i, n] == pytest.approx(one[0], rel=1e-12)
        assert both[1][i, n] == pytest.approx(one[1], rel=1e-12)


def test_inductance_scales_with_size():
    small, large = quick_coil(0.04, 2e-3, 1e-3, 9), quick_coil(0.12, 6e-3, 3e-3, 9)
    assert large[0] == pytest.approx(3 * small[0], rel=1e-12)
    assert large[1] == pytest.approx(small[1], rel=1e-12)


def test_table_is_what_its_generator_makes():
    for table, made in zip((coil_table._INDUCTANCE, coil_table._PROXIMITY), fit(), strict=True):
        assert np.abs(table - made).max() < 2e-5


@pytest.mark.parametrize("shape", [(1.0, 1.0, 0.5, 5), (40.0, 1.0, 0.99, 5), (40.0, 1.0, 0.05, 5)])
def test_shapes_outside_are_refused(shape):
    assert not in_range(*shape[:3])
    with pytest.raises(ValueError, match="pitches"):
        quick_coil(*shape)


@pytest.mark.parametrize("turns", [0.5, 81, np.nan])
def test_turns_outside_are_refused(turns):
    with pytest.raises(ValueError, match="turns"):
        quick_coil(40.0, 1.0, 0.5, turns)
