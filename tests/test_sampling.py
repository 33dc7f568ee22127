"""Latin hypercube, rank correlations and distributions, against their definitions and published moments."""

import numpy as np
import pytest
from published import values as published_values
from scipy import optimize, stats

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


def test_rank_correlation_of_normal_scores() -> None:
    """What the draws come to at a wanted 0.6, to the digits printed but for the sampling: 0.5819."""
    row, random = published_values("risk", "Rank correlation")["spearman"], np.random.default_rng(3)
    row.check(6.0 / np.pi * np.arcsin(0.6 / 2.0))
    moved = correlated(latin_hypercube(NUMBER, 2, random), np.array([[1.0, 0.6], [0.6, 1.0]]), random)
    assert stats.spearmanr(moved[:, 0], moved[:, 1]).statistic == pytest.approx(row.value, abs=0.01)


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


TRIANGLE = Distribution(kind="triangular", low=0.8, mode=1.0, high=1.5)
PERT = Distribution(kind="pert", low=0.8, mode=1.0, high=1.5)


def figures(distribution: Distribution) -> dict[str, float]:
    """Moments and points of a distribution from its quantiles alone, at the middles of fine strata."""
    strata = 400_000
    values = quantile(distribution, (np.arange(strata) + 0.5) / strata)
    p10, p50, p90 = quantile(distribution, np.array([0.1, 0.5, 0.9]))
    found = {"mean": values.mean(), "deviation": values.std(), "p10": p10, "median": p50, "p50": p50}
    return found | {"p90": p90, "sigma": np.log(p90 / p10) / (2.0 * stats.norm.ppf(0.9))}


def checked(table: str, found: dict[str, float]) -> None:
    for name, row in published_values("risk", table).items():
        row.check(found[name])


def test_triangular() -> None:
    checked("Triangular", figures(TRIANGLE))


def test_pert_is_a_beta_distribution() -> None:
    """Its two shape parameters follow from mean and variance over the unit span."""
    found = figures(PERT)
    mean, deviation = (found["mean"] - 0.8) / 0.7, found["deviation"] / 0.7
    weight = mean * (1.0 - mean) / deviation**2 - 1.0
    checked("PERT", found | {"alpha": mean * weight, "beta": (1.0 - mean) * weight})


def test_lognormal_is_given_by_its_ten_and_ninety_per_cent_points() -> None:
    study = Distribution(kind="lognormal", p10=0.7, p90=1.5)
    assert quantile(study, np.array([0.1, 0.9])) == pytest.approx([0.7, 1.5], rel=1e-12)
    checked("Lognormal, class 4", figures(study))
    checked("Lognormal, class 5", figures(Distribution(kind="lognormal", p10=0.5, p90=2.0)))


def test_triangular_from_its_ten_and_ninety_per_cent_points() -> None:
    """The ends at which the distribution has them, found on its quantiles."""

    def miss(ends: np.ndarray) -> np.ndarray:
        shape = Distribution(kind="triangular", low=ends[0], mode=1.0, high=ends[1])
        return quantile(shape, np.array([0.1, 0.9])) - [0.7, 1.5]

    low, high = optimize.fsolve(miss, [0.5, 1.7], xtol=1e-12)
    checked("Triangular, class 4", {"low": low, "high": high})


def test_normal_and_uniform_are_those_of_scipy() -> None:
    probability = np.array([0.01, 0.3, 0.99])
    normal = quantile(Distribution(kind="normal", mean=5.0, standard_deviation=2.0), probability)
    assert normal == pytest.approx(5.0 + 2.0 * stats.norm.ppf(probability))
    uniform = quantile(Distribution(kind="uniform", low=-1.0, high=3.0), probability)
    assert uniform == pytest.approx(-1.0 + 4.0 * probability)
