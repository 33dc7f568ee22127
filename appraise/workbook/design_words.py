"""What the Design choice sheet says in words: for the option as stated, and about its costs."""

from __future__ import annotations

from dataclasses import dataclass

from appraise.capex import OptionCapital
from appraise.case.load import Case
from appraise.case.plant import Option
from appraise.optimum import FLAT, Curve, DesignChoice, Value
from appraise.workbook.scenario_words import thousands


@dataclass(frozen=True, slots=True)
class Stated:
    """The option as stated: its keys with the case's values filled in, and its net present value."""

    terminal_difference_K: float
    cold_share: float
    stages: int
    drain_route: str
    existing_area_factor: float
    npv: float

    @classmethod
    def of(cls, case: Case, option: Option, npv: float) -> Stated:
        """Of an option of a case."""
        return cls(
            case.new_condenser_of(option).terminal_difference_K,
            case.shares_of(option)[0],
            option.stages,
            option.drain_route,
            option.existing_area_factor,
            npv,
        )

    def value(self, key: str) -> Value:
        """By the key of a curve."""
        return self.cold_share if key == "shares" else getattr(self, key)


def value_words(key: str, value: Value) -> str:
    """A value of a key with its unit."""
    if isinstance(value, str):
        return value
    if key == "shares":
        return f"{value * 100.0:.0f} %"
    if key == "terminal_difference_K":
        return f"{value:.1f} K"
    return f"{value:.2f} times" if key == "existing_area_factor" else f"{value:g}"


def curve_words(curve: Curve, stated: Stated, currency: str, caveat: str = "") -> str:
    """What a curve means for the option as stated; `caveat` goes with every gain."""
    now = value_words(curve.key, stated.value(curve.key))
    if curve.best is None or curve.best_npv is None:
        return f"{curve.label}: none of the values can be built."
    best = value_words(curve.key, curve.best)
    if curve.best_npv <= 0.0:
        return f"{curve.label}: does not pay at any value tried; {best} loses least."
    gain = curve.best_npv - stated.npv
    flat = curve.flat
    ends = "" if flat is None else " to ".join(value_words(curve.key, end) for end in flat)
    if gain <= FLAT * curve.best_npv:
        if flat is None:
            return f"{curve.label}: as stated ({now}) nothing tried is better by more than 1 %."
        return (
            f"{curve.label}: as stated ({now}) it is on the flat top of the curve, {ends}: nothing to gain."
        )
    words = f"{curve.label}: {best} instead of {now} would add {thousands(gain, currency)}{caveat}"
    built = [value for value, npv in zip(curve.values, curve.npv, strict=True) if npv is not None]
    if len(built) > 2 and curve.best in (built[0], built[-1]):
        words += ", and more may lie beyond that last value that was tried or can be built"
    return words + (f"; from {ends} it makes no difference to speak of." if ends else ".")


def joint_words(choice: DesignChoice, currency: str, caveat: str = "") -> str:
    """The best of terminal difference and share together; `caveat` as for a curve."""
    difference, share, npv = choice.best_difference_K, choice.best_cold_share, choice.best_joint_npv
    if difference is None or share is None or npv is None:
        return "Terminal difference and share together: none of the points can be built."
    ends = choice.joint_difference_K, choice.joint_cold_share
    at_end = difference in (ends[0][0], ends[0][-1]) or share in (ends[1][0], ends[1][-1])
    beyond = ", at the edge of what was tried: more may lie beyond" if at_end else ""
    return (
        f"Both together: of the points tried, {difference:g} K with {share * 100.0:.0f} % of the rise in the "
        f"cold stage is best, at {thousands(npv, currency)}{caveat}, against "
        f"{thousands(choice.stated_npv, currency)} as stated{beyond}."
    )


def follows_all(capital: OptionCapital) -> bool:
    """Whether every cost of an option follows its size: some by correlation, none a given amount."""
    return bool(_names(capital, "correlation")) and not _names(capital, "quotation")


def caveat_of(key: str, capital: OptionCapital) -> str:
    """What a gain by this key leaves out of the costs, to stand behind its amount."""
    sizes = {item.size[0] for item in capital.items if item.size is not None and item.stage is None}
    if key == "existing_area_factor" and not sizes & {"area_m2", "condensing_area_m2"}:
        return " before the price of that surface, with which no cost grows"
    if key == "drain_route" and "condensate_pump_kW" not in sizes:
        return " without a cost of the route itself"
    return "" if follows_all(capital) else " at costs that do not all follow the size"


def cost_words(capital: OptionCapital) -> str:
    """Which costs follow the size, which do not, and what that does to the curves."""
    follow = _names(capital, "correlation")
    fixed = _names(capital, "quotation")
    if not follow:
        start = "Caution: no cost of this option follows its size, for none comes from a correlation"
        end = (
            "so every size costs the same and the curves show only what is earned: they always favour more "
            "surface. Ask for quotations of two sizes, or use correlations, before a size is chosen by them."
        )
        return f"{start}; {end}"
    words = f"Costs that follow the size, by correlation: {', '.join(follow)}"
    shares = _names(capital, "share")
    if shares:
        words += f"; shares of other items move with those: {', '.join(shares)}"
    if not fixed:
        return f"{words}. No item is a fixed amount."
    return (
        f"{words}. Caution: amounts given stay the same at every point, whatever its size: "
        f"{', '.join(fixed)}. More stages, or larger ones, would need more than is paid for here, so the "
        "curves favour what is larger; have those items quoted again before the design is moved far."
    )


def _names(capital: OptionCapital, basis: str) -> list[str]:
    """Items of one basis, each once."""
    return list(dict.fromkeys(item.name for item in capital.items if item.basis == basis))
