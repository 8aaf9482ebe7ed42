"""What varies: distributions against scipy, and the trap alone against an independent computation.

Source of the trap's spread: tests/reference/tolerance.json, quadrature of the exact distribution checked by
closed forms; of single quantities: scipy's distributions.
"""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from tests.cases import reference
from trapdesk.design.design import Antenna, Band, Bands, Design, Lengths, with_value
from trapdesk.design.doubts import CUT, Doubts, Meaning
from trapdesk.design.fields import SOLVE
from trapdesk.design.parts import GivenCapacitor, GivenCoil, Sealing, Trap
from trapdesk.design.rules import check
from trapdesk.engine.ground import Ground
from trapdesk.engine.resonator import lc_resonance
from trapdesk.engine.sampling import normal_probability, normal_quantile, uniform
from trapdesk.engine.soils import SOILS, UNKNOWN_SOIL, GroundKind
from trapdesk.services.trap.built import build
from trapdesk.services.trials.beliefs import Belief, beliefs, draw, soil_at
from trapdesk.services.trials.causes import deviation
from trapdesk.services.trials.traps import STAGES, TrialTraps

MANY = 400_000


def design_of(inductance: float, capacitance: float, **doubts) -> Design:
    return Design(
        bands=Bands(
            upper=Band(name="40 m", low=7e6, high=7.2e6), lower=Band(name="80 m", low=3.5e6, high=3.8e6)
        ),
        antenna=Antenna(
            lengths=Lengths(end=SOLVE),
            trap=Trap(
                coil=GivenCoil(inductance=inductance), capacitor=GivenCapacitor(capacitance=capacitance)
            ),
        ),
        doubts=Doubts(**doubts),
    )


MEANINGS = {
    Meaning.LIMITS: stats.uniform(-0.05, 0.1),
    Meaning.TWO_SIGMA: stats.truncnorm(-CUT, CUT, scale=0.025),
    Meaning.THREE_SIGMA: stats.truncnorm(-CUT, CUT, scale=0.05 / 3),
    Meaning.MEASURED: stats.truncnorm(-CUT, CUT, scale=0.05),
}


@pytest.mark.parametrize("alike", [0.0, 0.5, 1.0])
@pytest.mark.parametrize("meaning", Meaning)
def test_a_doubt_is_what_its_meaning_says(meaning, alike):
    belief = Belief(size=0.05, meaning=meaning, pair=True, alike=alike)
    pair = draw({"capacitor": belief}, 3, 0, 20_000)["capacitor"]
    for values in pair.T:
        assert stats.kstest(values, MEANINGS[meaning].cdf).pvalue > 1e-4
    assert deviation(belief) == pytest.approx(MEANINGS[meaning].std(), rel=2e-3)
    assert np.abs(pair).max() <= belief.reach
    # Both traps share `alike` of their variance; uniform values keep 6/pi asin(r/2) of it.
    expect = alike if belief.is_normal else 6 / math.pi * math.asin(alike / 2)
    assert np.corrcoef(pair.T)[0, 1] == pytest.approx(expect, abs=0.03)


def test_a_range_is_anywhere_between():
    values = draw({"creep": Belief(low=0.0, high=0.003, between=True)}, 3, 0, 20_000)["creep"]
    assert stats.kstest(values, stats.uniform(0.0, 0.003).cdf).pvalue > 1e-4


def test_what_one_quantity_draws_hangs_on_no_other():
    one = {"capacitor": Belief(size=0.05, pair=True, alike=0.5)}
    more = one | {"site": Belief(size=0.01), "coil": Belief(size=0.02, pair=True)}
    assert (draw(one, 7, 0, 99)["capacitor"] == draw(more, 7, 0, 99)["capacitor"]).all()
    assert (draw(more, 7, 40, 20)["site"] == draw(more, 7, 0, 99)["site"][40:60]).all()
    assert not np.array_equal(draw(more, 7, 0, 9)["site"], draw(more, 8, 0, 9)["site"])


def spread_of(given: dict, stream: int) -> np.ndarray:
    """Return relative errors of a part by one of the reference's distributions."""
    kind, p = given["kind"], given["p"]
    if kind == "truncnormal":
        chances, cut = uniform(11, stream, 0, MANY), p[1] / p[0]
        tail = normal_probability(-cut)
        return p[0] * normal_quantile(tail + (1 - 2 * tail) * chances)
    meaning = {"uniform": Meaning.LIMITS, "normal": Meaning.MEASURED}[kind]
    name = "capacitor" if stream else "coil"
    return draw({name: Belief(size=p[0], meaning=meaning, pair=True)}, 11, 0, MANY)[name][:, 0]


@pytest.mark.parametrize("case", [c for c in reference("tolerance", "tol-") if "temp" not in c.id])
def test_trap_alone_scatters_as_the_reference_says(case):
    given, expect = case["inputs"], case["expected"]
    inductance = given["l_h"] * (1 + spread_of(given["l_dist"], 0))
    capacitance = given["c_f"] * (1 + spread_of(given["c_dist"], 1))
    found = lc_resonance(inductance, capacitance)
    # Five standard errors of what random trials can tell: of a mean, a deviation, a share, a quantile.
    error = expect["std_hz"] / math.sqrt(MANY)
    assert found.mean() == pytest.approx(expect["mean_hz"], abs=5 * error)
    assert found.std() == pytest.approx(expect["std_hz"], rel=5 / math.sqrt(2 * MANY))
    inside = ((found >= given["window_lo_hz"]) & (found <= given["window_hi_hz"])).mean()
    share = expect["yield_in_window"]
    assert inside == pytest.approx(share, abs=5 * math.sqrt(share * (1 - share) / MANY))
    for name, value in expect["quantiles_hz"].items():
        chance = int(name[1:]) / 100
        below = (found < value).mean()
        assert below == pytest.approx(chance, abs=5 * math.sqrt(chance * (1 - chance) / MANY))
    if "worst_low_hz" in expect:
        assert expect["worst_low_hz"] <= found.min() and found.max() <= expect["worst_high_hz"]


@pytest.mark.parametrize("case", reference("tolerance", "tol-temp"))
def test_trap_drifts_with_temperature_as_the_reference_says(case):
    given, expect = case["inputs"], case["expected"]
    design = design_of(
        given["l_h"], given["c_f"], coil_drift=given["tc_l_per_k"], capacitor_drift=given["tc_c_per_k"]
    )
    traps = TrialTraps(design, build(replace(design.antenna.trap)), {})
    draws = {"temperature": np.array([0.0, given["delta_t_k"]])}
    cold, hot = traps.resonance(traps.made(draws, STAGES[0], 2))[0]
    assert cold == pytest.approx(expect["f0_hz"], rel=1e-10)
    assert hot == pytest.approx(expect["f_hot_hz"], rel=1e-10)


def test_small_doubts_scatter_as_the_first_order_formula_says():
    # df/f = -(dL/L + dC/C)/2 in its limit: the next order is the doubt itself.
    design = design_of(6.2e-6, 81e-12, coil=1e-4, capacitor=1e-4, alike=0.0)
    trap = build(design.antenna.trap)
    varying = {n: b for n, b in beliefs(design, trap).items() if n in ("coil", "capacitor")}
    traps = TrialTraps(design, trap, varying)
    found = traps.resonance(traps.made(draw(varying, 2, 0, MANY), STAGES[0], MANY))[0]
    parts = 1e-4 / 2, 1e-4 / math.sqrt(3)
    assert found.std() / found.mean() == pytest.approx(math.hypot(*parts) / 2, rel=5 / math.sqrt(2 * MANY))


def test_a_trap_that_stays_open_is_shifted_by_no_closing():
    design = design_of(6.2e-6, 81e-12)
    assert "sealing" not in beliefs(design, build(design.antenna.trap))


def test_tuning_leaves_the_reading_error_and_sealing():
    design = with_value(design_of(6.2e-6, 81e-12), "antenna.trap.weather.sealing", Sealing.TAPE)
    trap = build(design.antenna.trap)
    varying = beliefs(design, trap)
    traps = TrialTraps(design, trap, varying)
    draws = draw(varying, 4, 0, 2000)
    draws.pop("temperature")
    sealed_first = replace(STAGES[1], sealed_first=True)
    read = traps.resonance(traps.made(draws, sealed_first, 2000)) / trap.resonance - 1
    assert np.allclose(read, draws["tuning"].T, atol=1e-12)
    sealed = traps.resonance(traps.made(draws, STAGES[1], 2000)) / trap.resonance
    # Tuned as much too high as the sheet says, 1.25 %, then lowered by what sealing does take.
    assert np.allclose(sealed, (1 + draws["tuning"].T) * (1 - draws["sealing"].T) / 0.9875, rtol=1e-12)


def test_everything_can_be_switched_off():
    sizes = (
        "coil turns pitch former capacitor q self_capacitance tuning marking fastening height soil coating"
    )
    off = dict.fromkeys((*sizes.split(), "site", "aim", "temperature"), 0.0)
    ends = "sealing_least sealing_most rain_least rain_most creep_most sag_most"
    design = design_of(6.2e-6, 81e-12, **off, **dict.fromkeys(ends.split(), 0.0))
    assert not check(design)
    assert beliefs(design, build(design.antenna.trap)) == {}


@pytest.mark.parametrize(
    ("size", "meaning", "refused"),
    [
        (1.0, "limits", True),
        (0.9, "limits", False),
        (0.6, "2 sigma", True),
        (0.4, "2 sigma", False),
        (0.8, "3 sigma", True),
        (0.3, "measured", True),
        (0.2, "measured", False),
    ],
)
def test_no_doubt_reaches_a_negative_capacitance(size, meaning, refused):
    breaches = check(design_of(6.2e-6, 81e-12, capacitor=size, capacitor_meaning=Meaning(meaning)))
    assert [b.where for b in breaches] == (["doubts.capacitor"] if refused else [])


def test_a_range_upside_down_is_refused():
    breaches = check(design_of(6.2e-6, 81e-12, rain_least=0.02, rain_most=0.01))
    assert [b.where for b in breaches] == ["doubts.rain_least"]


def test_soil_goes_from_the_driest_to_the_wettest():
    middle = Ground(kind=GroundKind.SOIL, conductivity=5e-3, permittivity=13.0)
    for place, name in ((-1.0, "dry ground"), (1.0, "wet ground")):
        found = soil_at(middle, True, place)
        assert found.conductivity == pytest.approx(SOILS[name].conductivity)
        assert found.permittivity == pytest.approx(SOILS[name].permittivity)
    assert soil_at(middle, True, 0.0).conductivity == pytest.approx(UNKNOWN_SOIL.conductivity)
    wetter = soil_at(middle, False, 1.0)
    assert wetter.conductivity == pytest.approx(1e-2) and wetter.permittivity == pytest.approx(13 * 1.25)
