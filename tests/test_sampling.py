"""Random numbers: the generator against its published vector, the transforms against scipy."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from trapdesk.engine.sampling import (
    chance_above,
    normal_probability,
    normal_quantile,
    quantiles,
    squares_at,
    uniform,
)


def test_raw_bits_are_those_of_the_published_generator():
    # Known answer of philox4x64-10 for counter and key of nothing, from memory of the authors' test vectors.
    bits = np.random.Philox(key=0, counter=2**256 - 1).random_raw(4)
    wanted = (0x16554D9ECA36314C, 0xDB20FE9D672D0FDC, 0xD7E772CEE186176B, 0x7E68B68AEC7BA23B)
    assert tuple(int(word) for word in bits) == wanted


def test_first_numbers_stay_what_they_are():
    # Block 1 of the same vectors' generator, taken from its raw bits by hand: (upper 53 bits + 1/2) / 2^53.
    bits = np.random.Philox(key=5 | 9 << 64).random_raw(3)
    by_hand = [((int(word) >> 11) + 0.5) / 2**53 for word in bits]
    assert uniform(5, 9, 0, 3).tolist() == by_hand


@settings(deadline=None, max_examples=50)
@given(st.integers(0, 2**64 - 1), st.integers(0, 300), st.integers(0, 50), st.integers(0, 50))
def test_any_piece_of_a_stream_is_the_same(seed, stream, begin, count):
    whole = uniform(seed, stream, 0, 120)
    assert (uniform(seed, stream, begin, count) == whole[begin : begin + count]).all()


def test_streams_and_seeds_have_nothing_in_common():
    columns = np.array([uniform(seed, stream, 0, 20_000) for seed in (1, 2) for stream in (0, 1, 2)])
    off = np.corrcoef(columns) - np.eye(6)
    assert np.abs(off).max() < 4 / np.sqrt(20_000)
    for column in columns:
        assert stats.kstest(column, "uniform").pvalue > 1e-4


def test_quantile_against_scipy():
    p = np.concatenate([np.logspace(-300, -1, 2000), np.linspace(1e-6, 1 - 1e-6, 5001)])
    expect = stats.norm.ppf(p)
    assert np.abs(normal_quantile(p) - expect).max() < 1e-13 * np.abs(expect).max()
    assert np.allclose(normal_quantile(1 - 1e-9), stats.norm.ppf(1 - 1e-9), rtol=1e-14)


def test_probability_against_scipy():
    x = np.linspace(-8.4, 8.4, 20_001)
    assert np.abs(normal_probability(x) - stats.norm.cdf(x)).max() < 1e-15
    assert np.abs(normal_probability(x[:9000]) / stats.norm.cdf(x[:9000]) - 1).max() < 1e-11


def test_arrays_are_scalars_one_by_one():
    p = np.array([0.001, 0.2, 0.5, 0.93])
    assert [float(normal_quantile(value)) for value in p] == normal_quantile(p).tolist()
    assert [float(normal_probability(value)) for value in p] == normal_probability(p).tolist()


@pytest.mark.parametrize("value", [0.0, 1.0, -0.1, np.nan])
def test_no_quantile_outside_chances(value):
    with pytest.raises(ValueError, match="probability"):
        normal_quantile(value)


@pytest.mark.parametrize(("name", "given"), [("seed", (-1, 0, 0, 1)), ("stream", (0, 2**64, 0, 1))])
def test_seed_and_stream_have_limits(name, given):
    with pytest.raises(ValueError, match=name):
        uniform(*given)


def test_counts_have_limits_and_nan_has_no_probability():
    with pytest.raises(ValueError, match="count"):
        uniform(1, 1, 0, -1)
    with pytest.raises(ValueError, match="value"):
        normal_probability(np.nan)


@pytest.mark.parametrize("count", [1, 2, 3, 500])
def test_quantiles_are_those_of_another_implementation(count):
    values = np.random.default_rng(count).standard_normal((3, 2, count))
    chances = (0.0, 0.001, 0.05, 0.5, 0.95, 1.0)
    expect = stats.mstats.mquantiles(values.reshape(6, count), chances, alphap=1, betap=1, axis=1)
    assert quantiles(values, chances).reshape(6, 6).T == pytest.approx(np.asarray(expect), rel=1e-14)


@pytest.mark.parametrize(("values", "chances"), [([], [0.5]), ([1.0], [1.5]), ([1.0], [np.nan])])
def test_quantiles_of_nothing_are_refused(values, chances):
    with pytest.raises(ValueError, match="values|chances"):
        quantiles(values, chances)


@pytest.mark.parametrize("count", [1, 2, 3, 5, 10, 100])
def test_sums_of_squares_are_nearly_those_of_scipy(count):
    # What the cube root leaves: 3 % of one square at 3.09 sigma, by the exact quantiles.
    exact = stats.chi2.isf(stats.norm.sf(3.09), count)
    assert exact < squares_at(count, 3.09) < 1.031 * exact
    chances = np.array([0.5, 0.3, 0.1, 0.05, 0.01])
    found = chance_above(stats.chi2.isf(chances, count), count)
    assert found == pytest.approx(chances, rel=0.06)
    back = squares_at(count, [0.0, 1.0, 2.5])
    assert chance_above(back, count) == pytest.approx(stats.norm.sf([0.0, 1.0, 2.5]), rel=1e-9)


def test_sums_of_squares_refuse():
    with pytest.raises(ValueError, match="count must be"):
        squares_at(0, 3.0)
    with pytest.raises(ValueError, match="square must be"):
        chance_above(-1.0, 3)
    with pytest.raises(ValueError, match="count must be"):
        chance_above(1.0, np.nan)
