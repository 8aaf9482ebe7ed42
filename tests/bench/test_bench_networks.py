"""How long a tuner's answer and its map of reach take, in yardsticks, for both bands together."""

import numpy as np

from tests.bench.yardstick import ratio, record
from tests.families import limits
from trapdesk.engine import matching, nearest
from trapdesk.engine.arms import Problem
from trapdesk.engine.ladder import carried
from trapdesk.engine.networks import NETWORKS, ladder_of, touchiness
from trapdesk.engine.reflection import swr

TUNER = NETWORKS["t-clc"]
WITHIN = limits(TUNER, coil=(0.1e-6, 30e-6), capacitor=(15e-12, 250e-12))
QUALITY = {"coil_q": 150.0, "capacitor_q": 2000.0}
BANDS = [(7.0e6, 7.2e6), (14.0e6, 14.35e6)]


def test_tuner_answer_for_both_bands():
    def answer():
        for low, high in BANDS:
            f = np.append(0.5 * (low + high), np.linspace(low, high, 33))
            away = f / f[0] - 1.0
            load = 60.0 + 800.0 * away + 2500j * away
            band = Problem(frequency=f, load=load, **QUALITY)
            setting = nearest.best_setting(TUNER, band, WITHIN)
            carried(ladder_of(TUNER, setting.values, band), load, 100.0)
            # The setting of the aim, left alone over the band.
            left = carried(ladder_of(TUNER, setting.values[:, :1], band), load, 100.0)
            swr(left.input_impedance)
            touchiness(TUNER, setting.values, band)

    record("tuner answer, 2 x 34 points", ratio(answer), limit=8.0)


def test_tuner_answer_out_of_reach():
    def answer():
        for low, high in BANDS:
            f = np.linspace(low, high, 34)
            band = Problem(frequency=f, load=1.5 - 900j * low / f, **QUALITY)
            assert not np.any(nearest.best_setting(TUNER, band, WITHIN).matched)

    record("tuner answer out of reach, 2 x 34 points", ratio(answer), limit=8.0)


def test_map_of_reach_for_both_bands():
    r, x = np.geomspace(5.0, 3000.0, 60), np.linspace(-1500.0, 1500.0, 30)

    def answer():
        for low, high in BANDS:
            matching.reach(TUNER, 0.5 * (low + high), r, x, WITHIN, **QUALITY)

    record("map of reach, 2 x 60 x 30 loads", ratio(answer), limit=8.0)
