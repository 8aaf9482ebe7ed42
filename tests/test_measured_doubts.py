"""What measured values leave in doubt, against scipy's multivariate normal distribution.

Each case draws logarithms of inductance and capacitance from the readings' own doubts by scipy, with nothing
of the project's sampling, and holds the ensemble's traps and the antenna's dips against them.
"""

import math

import numpy as np
import pytest
from scipy import stats

from trapdesk.design.design import with_value
from trapdesk.design.measured_part import Measured
from trapdesk.services.antenna.solve import solve
from trapdesk.services.trap.built import build
from trapdesk.services.trap.measured_trap import doubts_of
from trapdesk.services.trials.advice import improvements
from trapdesk.services.trials.beliefs import beliefs, draw
from trapdesk.services.trials.causes import trap_first_order
from trapdesk.services.trials.ensemble import Ensemble
from trapdesk.services.trials.traps import STAGES, Traps, TrialTraps
from trapdesk.store import store

PLAIN = store.preset("80-40-flat")[0]
TRAP = build(PLAIN.antenna.trap)
F, L = TRAP.resonance, 1.03 * TRAP.inductance
C = 1 / ((2 * math.pi * F) ** 2 * L)
MANY = 20_000
PARTS = ("coil", "turns", "pitch", "former", "capacitor", "self_capacitance", "ratio")


def hung(*readings):
    """Return relative covariance of (ln L, ln C) after independent readings: rows of slopes over sigma."""
    rows = np.array(readings)
    return np.linalg.inv(rows.T @ rows)


def of_resonance(sigma):
    return np.array([-0.5, -0.5]) / sigma


def of_inductance(sigma):
    return np.array([1.0, 0.0]) / sigma


def of_capacitance(sigma):
    return np.array([0.0, 1.0]) / sigma


def kept(covariance):
    """Return what is kept of a trap with such a covariance: all three values, each with its own doubt."""
    turn = np.array([-0.5, -0.5])
    return {
        "resonance": F, "resonance_doubt": F * math.sqrt(turn @ covariance @ turn),
        "inductance": L, "inductance_doubt": L * math.sqrt(covariance[0, 0]),
        "capacitance": C, "capacitance_doubt": C * math.sqrt(covariance[1, 1]),
    }  # fmt: skip


FREQUENCY_AND_COIL = hung(of_resonance(0.004), of_inductance(0.01))
FREQUENCY_AND_CAPACITOR = hung(of_resonance(0.004), of_capacitance(0.01))
ALL = hung(of_resonance(0.003), of_inductance(0.02), of_capacitance(0.01))
COIL_AND_CAPACITOR = hung(of_inductance(0.01), of_capacitance(0.02))
PAIR = {"resonance": F, "resonance_doubt": 0.004 * F}
CASES = {
    "resonance and coil": ({**PAIR, "inductance": L, "inductance_doubt": 0.01 * L}, FREQUENCY_AND_COIL),
    "resonance and coil, kept": (kept(FREQUENCY_AND_COIL), FREQUENCY_AND_COIL),
    "resonance and capacitor": (
        {**PAIR, "capacitance": C, "capacitance_doubt": 0.01 * C},
        FREQUENCY_AND_CAPACITOR,
    ),
    "resonance and capacitor, kept": (kept(FREQUENCY_AND_CAPACITOR), FREQUENCY_AND_CAPACITOR),
    "all three, kept": (kept(ALL), ALL),
    "coil and capacitor": (
        {"inductance": L, "inductance_doubt": 0.01 * L, "capacitance": C, "capacitance_doubt": 0.02 * C},
        COIL_AND_CAPACITOR,
    ),
    "coil and capacitor, kept": (kept(COIL_AND_CAPACITOR), COIL_AND_CAPACITOR),
}


def with_measured(**values):
    return with_value(PLAIN, "antenna.trap.measured", Measured(**values))


def made(design, count=MANY):
    """Return the ensemble of a design, and its traps with nothing in doubt but what they are made of."""
    ensemble = Ensemble(solve(design))
    draws = ensemble.draws(3, 0, count)
    draws = {name: draws[name] for name in PARTS if name in draws}
    return ensemble, ensemble.traps(draws, STAGES[0], count)


def logarithms(ensemble, traps, which):
    """Return ln L and ln C of one of the traps of every trial."""
    return np.log([ensemble.trap.inductance * traps.inductance[which], traps.capacitance[which]])


@pytest.mark.parametrize(("values", "covariance"), CASES.values(), ids=CASES)
def test_traps_scatter_as_the_readings_say(values, covariance):
    ensemble, traps = made(with_measured(**values))
    turn = np.array([-0.5, -0.5])
    for which in (0, 1):
        found = logarithms(ensemble, traps, which)
        drawn = stats.multivariate_normal(np.log([L, C]), covariance).rvs(MANY, random_state=which).T
        # Four standard errors of either sample: of a variance 2 / n, of a correlation less than 1 / n.
        error = 4 * math.sqrt(2 / MANY + 2 / MANY)
        for direction in ([1, 0], [0, 1], turn, [1, -1]):
            mine, theirs = np.array(direction) @ found, np.array(direction) @ drawn
            assert mine.var() == pytest.approx(theirs.var(), rel=error)
            assert mine.mean() == pytest.approx(theirs.mean(), abs=4 * mine.std() * math.sqrt(2 / MANY))
        assert np.corrcoef(found)[0, 1] == pytest.approx(np.corrcoef(drawn)[0, 1], abs=error)
        resonance = turn @ found
        scaled = (resonance - resonance.mean()) / resonance.std()
        assert stats.kstest(scaled, stats.norm.cdf).pvalue > 1e-4
    # Each trap was measured by itself.
    pair = [logarithms(ensemble, traps, which)[0] for which in (0, 1)]
    assert abs(np.corrcoef(pair)[0, 1]) < 4 / math.sqrt(MANY)


@pytest.mark.parametrize("name", ["resonance and coil", "all three, kept"])
def test_dips_scatter_as_those_of_traps_drawn_by_another_hand(name):
    values, covariance = CASES[name]
    count = 4000
    ensemble, traps = made(with_measured(**values), count)
    drawn = stats.multivariate_normal(np.log([L, C]), covariance).rvs(2 * count, random_state=5)
    drawn = np.exp(drawn).reshape(2, count, 2)
    others = Traps(
        inductance=drawn[:, :, 0] / ensemble.trap.inductance,
        capacitance=drawn[:, :, 1],
        q=np.ones((2, count)),
    )
    features = ensemble.features({}, count, None)
    for role in ensemble.roles:
        mine, theirs = (
            np.concatenate([piece.dip for piece in pieces])
            for pieces in ensemble.outcome(role, features, [traps, others])
        )
        assert mine.std() == pytest.approx(theirs.std(), rel=4 * math.sqrt(1 / count))
        assert mine.mean() == pytest.approx(theirs.mean(), abs=4 * mine.std() * math.sqrt(2 / count))


def test_a_resonance_alone_leaves_the_ratio_as_doubtful_as_the_capacitor():
    ensemble, traps = made(with_measured(resonance=F, resonance_doubt=0.002 * F))
    inductance, capacitance = logarithms(ensemble, traps, 0)
    resonance = -0.5 * (inductance + capacitance)
    assert resonance.std() == pytest.approx(0.002, rel=4 / math.sqrt(2 * MANY))
    # 5 % either way, all alike, of the capacitor that is fitted; the coil makes up for it.
    believed = stats.uniform(math.log(0.95), math.log(1.05 / 0.95))
    assert ensemble.varying["capacitor"].ends == (-0.05, 0.05)
    assert capacitance.std() == pytest.approx(stats.uniform(-0.05, 0.1).std(), rel=0.02)
    assert believed.ppf(0.0) <= (capacitance - math.log(TRAP.capacitance)).min()
    assert np.corrcoef(inductance, capacitance)[0, 1] < -0.95
    assert trap_first_order(ensemble) == pytest.approx(resonance.std(), rel=0.02)


def test_a_coil_alone_leaves_the_capacitor_as_believed():
    ensemble, traps = made(with_measured(inductance=L, inductance_doubt=0.01 * L))
    inductance, capacitance = logarithms(ensemble, traps, 0)
    assert inductance.std() == pytest.approx(0.01, rel=0.02)
    assert capacitance.std() == pytest.approx(stats.uniform(-0.05, 0.1).std(), rel=0.02)
    assert abs(np.corrcoef(inductance, capacitance)[0, 1]) < 4 / math.sqrt(MANY)


def test_a_tuned_trap_keeps_the_doubt_of_its_ratio():
    values, covariance = CASES["resonance and coil"]
    ensemble = Ensemble(solve(with_measured(**values)))
    draws = ensemble.draws(3, 0, MANY)
    draws = {name: draws[name] for name in PARTS if name in draws}
    traps = ensemble.traps(draws, STAGES[1], MANY)
    inductance, capacitance = logarithms(ensemble, traps, 0)
    assert (inductance + capacitance).std() < 1e-12
    assert capacitance.std() == pytest.approx(math.sqrt(covariance[1, 1]), rel=0.02)


def test_even_a_vague_q_stays_above_nothing():
    ensemble = Ensemble(solve(with_measured(q=200.0, q_doubt=90.0)))
    traps = ensemble.traps(ensemble.draws(1, 0, MANY), STAGES[0], MANY)
    assert traps.q.min() > 0
    assert np.log(traps.q).std() == pytest.approx(0.45, rel=0.02)


def test_doubts_that_do_not_go_together_keep_that_of_the_resonance():
    for inductance, capacitance in ((0.001, 0.05), (0.05, 0.001), (0.001, 0.001)):
        left = doubts_of(
            Measured(
                resonance=F, resonance_doubt=0.003 * F,
                inductance=L, inductance_doubt=inductance * L,
                capacitance=C, capacitance_doubt=capacitance * C,
            )
        )  # fmt: skip
        assert math.hypot(left.coil, left.capacitor) / 2 == pytest.approx(0.003)


@pytest.mark.parametrize("name", store.presets())
@pytest.mark.parametrize("factor", [0.1, 0.9, 1.1, 4.0])
def test_a_trap_far_from_the_computed_one_is_an_ensemble_too(name, factor):
    plain = store.preset(name)[0]
    trap = build(plain.antenna.trap)
    told = Measured(
        resonance=trap.resonance, resonance_doubt=1e3,
        inductance=trap.inductance * factor, inductance_doubt=trap.inductance * factor / 50,
    )  # fmt: skip
    design = with_value(plain, "antenna.trap.measured", told)
    built = build(design.antenna.trap)
    varying = beliefs(design, built)
    assert built.fitted > 0 and varying["ratio"].size == pytest.approx(0.02)
    of_traps = TrialTraps(design, built, varying)
    traps = of_traps.made(draw(varying, 1, 0, 500), STAGES[0], 500)
    assert (traps.capacitance > 0).all() and np.isfinite(traps.inductance).all()


def test_values_without_a_doubt_are_certain():
    design = with_measured(resonance=F, inductance=L, q=200.0)
    varying = beliefs(design, build(design.antenna.trap))
    assert not {*PARTS, "q"} & set(varying)


def test_nobody_is_told_to_measure_what_was_measured():
    ensemble = Ensemble(solve(with_measured(**CASES["all three, kept"][0])))
    found = improvements(ensemble, trials=200)
    assert not {"match_traps", "tighter_capacitor"} & {step.code for step in (*found.steps, *found.then)}
