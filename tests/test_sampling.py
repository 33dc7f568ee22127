"""Latin hypercube, rank correlations and distributions, against their definitions and published moments."""

import numpy as np
import pytest
from scipy import stats

from appraise.case.money import Distribution
from appraise.errors import CaseError
from appraise.sampling import correlated, latin_hypercube, quantile, wanted_correlation

NUMBER = 4000


def drawn(**given: float | str) -> np.ndarray:
    """Values of a distribution at the middles of equal strata."""
    return quantile(Distribution(**given), (np.arange(NUMBER) + 0.5) / NUMBER)


def test_every_stratum_is_filled_once() -> None:
    probability = latin_hypercube(500, 3, np.random.default_rng(1))
    for column in probability.T:
        assert sorted(np.floor(column * 500).astype(int)) == list(range(500))


def test_the_seed_decides_bit_by_bit() -> None:
    first, again, other = (latin_hypercube(50, 2, np.random.default_rng(seed)) for seed in (7, 7, 8))
    assert (first == again).all()
    assert (first != other).any()


@pytest.mark.parametrize("rank", [0.6, -0.4, 0.9])
def test_the_wanted_rank_correlation_is_met_and_marginals_stay(rank: float) -> None:
    """Spearman's correlation of normal scores with correlation rho is (6/pi) asin(rho/2): Pearson, 1907."""
    random = np.random.default_rng(3)
    plain = latin_hypercube(NUMBER, 2, random)
    moved = correlated(plain, np.array([[1.0, rank], [rank, 1.0]]), random)
    assert (np.sort(moved, axis=0) == np.sort(plain, axis=0)).all()
    found = stats.spearmanr(moved[:, 0], moved[:, 1]).statistic
    assert found == pytest.approx(6.0 / np.pi * np.arcsin(rank / 2.0), abs=0.01)


def test_three_drivers_keep_all_their_pairs() -> None:
    labels = ("a", "b", "c")
    wanted = wanted_correlation(labels, [("a", "b", 0.5), ("c", "b", 0.3)])
    random = np.random.default_rng(5)
    moved = correlated(latin_hypercube(NUMBER, 3, random), wanted, random)
    found = stats.spearmanr(moved).statistic
    assert found[0, 1] == pytest.approx(6.0 / np.pi * np.arcsin(0.25), abs=0.015)
    assert found[1, 2] == pytest.approx(6.0 / np.pi * np.arcsin(0.15), abs=0.015)
    assert found[0, 2] == pytest.approx(0.0, abs=0.015)


def test_correlations_that_cannot_be_are_refused() -> None:
    with pytest.raises(CaseError) as caught:
        wanted_correlation(("a", "b", "c"), [("a", "b", 0.9), ("b", "c", 0.9), ("a", "c", -0.9)])
    assert str(caught.value).startswith(
        "draws.correlations: no draws can have all these rank correlations at once (least eigenvalue "
    )


def test_triangular_has_its_published_moments() -> None:
    """Mean (a + m + b)/3, variance (a² + b² + m² − ab − am − bm)/18, textbook; 0.8, 1, 1.5 recomputed."""
    values = drawn(kind="triangular", low=0.8, mode=1.0, high=1.5)
    assert values.mean() == pytest.approx(1.1, abs=1e-5)
    assert values.std() == pytest.approx(0.147196, abs=1e-4)
    p10, p50, p90 = quantile(
        Distribution(kind="triangular", low=0.8, mode=1.0, high=1.5), np.array([0.1, 0.5, 0.9])
    )
    assert (p10, p50, p90) == (
        pytest.approx(0.918322, abs=5e-7),
        pytest.approx(1.081670, abs=5e-7),
        pytest.approx(1.312917, abs=5e-7),
    )


def test_pert_is_the_beta_distribution_with_weight_four() -> None:
    """Mean (a + 4m + b)/6, alpha 2.142857, beta 3.857143 for 0.8, 1, 1.5; deviation 0.126773, recomputed."""
    values = drawn(kind="pert", low=0.8, mode=1.0, high=1.5)
    assert values.mean() == pytest.approx(1.05, abs=1e-5)
    assert values.std() == pytest.approx(0.126773, abs=1e-4)
    p10, p90 = quantile(Distribution(kind="pert", low=0.8, mode=1.0, high=1.5), np.array([0.1, 0.9]))
    assert (p10, p90) == (pytest.approx(0.890435, abs=5e-7), pytest.approx(1.227270, abs=5e-7))


def test_lognormal_is_given_by_its_ten_and_ninety_per_cent_points() -> None:
    """−30 and +50 % as P10 and P90: sigma 0.29735, median 1.0247, mean 1.0710; recomputed."""
    shape = Distribution(kind="lognormal", p10=0.7, p90=1.5)
    p10, p50, p90 = quantile(shape, np.array([0.1, 0.5, 0.9]))
    assert (p10, p90) == (pytest.approx(0.7, rel=1e-12), pytest.approx(1.5, rel=1e-12))
    assert p50 == pytest.approx(1.0247, abs=5e-5)
    assert np.log(p90 / p50) / stats.norm.ppf(0.9) == pytest.approx(0.29735, abs=5e-6)


def test_normal_and_uniform_are_those_of_scipy() -> None:
    probability = np.array([0.01, 0.3, 0.99])
    normal = quantile(Distribution(kind="normal", mean=5.0, standard_deviation=2.0), probability)
    assert normal == pytest.approx(5.0 + 2.0 * stats.norm.ppf(probability))
    uniform = quantile(Distribution(kind="uniform", low=-1.0, high=3.0), probability)
    assert uniform == pytest.approx(-1.0 + 4.0 * probability)
