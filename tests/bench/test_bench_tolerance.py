"""How long an ensemble takes, in yardsticks: its ports, and trials at four stages on both bands."""

import pytest

from tests.bench.yardstick import ratio, record
from trapdesk.services.antenna.solve import solve
from trapdesk.services.trials.ensemble import Ensemble
from trapdesk.services.trials.tolerance import tolerance
from trapdesk.store import store


@pytest.fixture(scope="module")
def ensemble():
    return Ensemble(solve(store.preset("80-40-flat")[0]))


def test_ports_and_their_derivatives(ensemble):
    record("ports near a wire", ratio(lambda: Ensemble(ensemble.figures), 5), limit=25.0)


@pytest.mark.parametrize(("trials", "limit"), [(1_000, 9.0), (10_000, 80.0)])
def test_trials_with_all_that_is_said_of_them(ensemble, trials, limit):
    took = ratio(lambda: tolerance(ensemble.figures, trials=trials, ensemble=ensemble), 5)
    record(f"ensemble of {trials}, four stages", took, limit=limit)
