"""What the Draws sheet says in words: options, error of the method, distributions."""

from __future__ import annotations

from collections.abc import Sequence

from appraise.case.money import Correlated, Distribution
from appraise.draws import METHOD_LIMIT, MethodError, OptionRisk
from appraise.workbook.scenario_words import grouped, thousands

MORE_CHECKED = 200
"""Draws to be solved in full for a chance to half a point."""

RANKS = (
    "Rank correlation: +1, the value always rises with the driver; −1, it always falls; 0, it does not "
    "follow. Drivers drawn together lend each other their effect."
)


def per_cent(share: float, decimals: int = 0) -> str:
    """A share as "12 %"."""
    return f"{share * 100.0:.{decimals}f} %"


def method_of_draws(number: int, scenario: str, currency: str) -> str:
    """What was done, and what the chances are worth."""
    return (
        f"{number:,} times all drivers with a distribution were drawn at once and the study was made again "
        f"with them, in the scenario {scenario}. The chances are as good as the distributions: they tell how "
        f"much the drivers leave open, not what was left out of them. Money in thousand {currency}, cells "
        f"hold {currency}."
    )


def option_words(name: str, risk: OptionRisk, baseline: bool, currency: str) -> str:
    """What the draws say about one option."""
    best = per_cent(risk.chance_best)
    if baseline:
        return f"“{name}”, worth 0 by definition, is best in {best} of the draws: in those no option pays."
    return (
        f"“{name}” is worth more than the plant as it stands in {per_cent(risk.chance_npv_positive)} of the "
        f"draws and best of all in {best}; nine draws in ten lie between {grouped(risk.p5 / 1000.0)} and "
        f"{thousands(risk.p95, currency)}."
    )


def method_words(error: MethodError | None) -> str:
    """What the error of the method means for the chances."""
    if error is None:
        return (
            "All drivers drawn act on prices, capital or finance alone: the money of every draw was computed "
            "in full, and the only error is that of the number of draws."
        )
    finer = f" (`--verify {MORE_CHECKED}` would)" if error.checked < MORE_CHECKED else ""
    held = error.root_mean_square <= METHOD_LIMIT
    meaning = (
        f"That is within the limit: the error is small beside the spread; {error.checked} draws cannot check "
        f"a chance finer than {100.0 / error.checked:.0f} points{finer}."
        if held
        else "That is above the limit: read mean and chances with this allowance."
    )
    return (
        f"Plant, year and capital of the draws come from a response fitted to {error.nodes} full solutions. "
        f"{error.checked} draws, none of them used for the fit, were also solved in full with all hours: the "
        f"response is off by {per_cent(error.root_mean_square, 1)} of the standard deviation of the value "
        f"(root mean square; limit {per_cent(METHOD_LIMIT)}), at most by {per_cent(error.largest, 1)}. "
        f"{meaning}"
    )


def together_words(pairs: Sequence[Correlated]) -> str:
    """Which drivers were drawn together."""
    if not pairs:
        return "Every driver is drawn independently of the others."
    said = "; ".join(
        f"{one} with {other}, rank correlation {shown_number(pair.rank)}"
        for pair in pairs
        for one, other in [pair.between]
    )
    return f"Drawn together: {said}. All other pairs are independent."


def distribution_words(d: Distribution, unit: str = "") -> str:
    """A distribution as a reader would say it: "PERT: low 2, mode 3, high 7"; fractions in per cent."""
    share = unit.startswith("%")
    keys = ("mean", "standard_deviation", "low", "mode", "high", "p10", "p90")
    known = [(key, getattr(d, key)) for key in keys if getattr(d, key) is not None]
    said = ", ".join(
        f"{key.upper() if key in ('p10', 'p90') else key.replace('_', ' ')} "
        + (f"{shown_number(100.0 * value)} %" if share else shown_number(value))
        for key, value in known
    )
    return f"{'PERT' if d.kind == 'pert' else d.kind}: {said}"


def shown_number(value: float) -> str:
    """A number as short as it is exact, with a true minus."""
    return f"{value:,.10g}".replace("-", "−")
