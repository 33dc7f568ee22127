"""Samples of the drivers: Latin hypercube, wanted rank correlations, and the distributions themselves.

Arrays are [draw, driver].
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from scipy import stats

from appraise.case.money import Distribution
from appraise.errors import CaseError, Problem
from appraise.numerics import Array

_P90 = 1.2815515655446004  # 0.9 quantile of the standard normal distribution
_PERT_WEIGHT = 4.0


def latin_hypercube(number: int, drivers: int, random: np.random.Generator) -> Array:
    """Probabilities in (0, 1): each driver has one draw in each of `number` equal strata, in random order.

    McKay, Beckman, Conover, Technometrics 21 (1979) 239.
    """
    strata = np.argsort(random.random((number, drivers)), axis=0)
    return np.asarray((strata + random.random((number, drivers))) / number)


def correlated(probability: Array, wanted: Array, random: np.random.Generator) -> Array:
    """Reorder each driver's draws so that their ranks correlate as wanted; the draws themselves stay.

    Iman, Conover, Communications in Statistics B 11 (1982) 311: normal scores in random order are freed of
    their own correlation, given the wanted one, and lend their ranks. wanted : [driver, driver], positive
    definite; the correlation of the scores, so that Spearman's comes out near (6/pi) asin(rho/2).
    """
    number, drivers = probability.shape
    scores = stats.norm.ppf(np.arange(1, number + 1) / (number + 1.0))
    score = np.stack([random.permutation(scores) for _ in range(drivers)], axis=1)
    own = np.linalg.cholesky(np.corrcoef(score, rowvar=False).reshape(drivers, drivers))
    target = np.linalg.cholesky(wanted)
    coloured = score @ np.linalg.solve(own.T, target.T)
    ranks = np.argsort(np.argsort(coloured, axis=0), axis=0)
    return np.take_along_axis(np.sort(probability, axis=0), ranks, axis=0)


def wanted_correlation(labels: Sequence[str], pairs: Sequence[tuple[str, str, float]]) -> Array:
    """Matrix of the wanted rank correlations [driver, driver].

    Raises CaseError where no set of draws can have them all at once.
    """
    matrix = np.eye(len(labels))
    place = {label: index for index, label in enumerate(labels)}
    for one, other, rank in pairs:
        matrix[place[one], place[other]] = matrix[place[other], place[one]] = rank
    least = float(np.linalg.eigvalsh(matrix).min())
    if least <= 1e-9:
        message = (
            f"no draws can have all these rank correlations at once (least eigenvalue {least:.3g}); "
            "allowed: a positive definite set"
        )
        raise CaseError([Problem("draws.correlations", message)])
    return matrix


def quantile(distribution: Distribution, probability: Array) -> Array:
    """Value of a distribution at probabilities [draw].

    PERT is the beta distribution with weight 4 on the mode; lognormal is given by its 10 and 90 % points.
    """
    d = distribution
    return np.asarray(_frozen(d).ppf(probability), dtype=float)


def _frozen(d: Distribution) -> stats.distributions.rv_frozen:
    """The distribution as scipy has it."""
    if d.kind == "normal":
        assert d.mean is not None
        assert d.standard_deviation is not None
        return stats.norm(d.mean, d.standard_deviation)
    if d.kind == "lognormal":
        assert d.p10 is not None
        assert d.p90 is not None
        sigma = np.log(d.p90 / d.p10) / (2.0 * _P90)
        return stats.lognorm(sigma, scale=np.sqrt(d.p10 * d.p90))
    assert d.low is not None
    assert d.high is not None
    span = d.high - d.low
    if d.kind == "uniform":
        return stats.uniform(d.low, span)
    assert d.mode is not None
    share = (d.mode - d.low) / span
    if d.kind == "triangular":
        return stats.triang(share, d.low, span)
    return stats.beta(1.0 + _PERT_WEIGHT * share, 1.0 + _PERT_WEIGHT * (1.0 - share), d.low, span)
