"""What is best and why: once in words from numbers, once as formulas that follow the inputs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from appraise.workbook.cash_flow_measures import NOTHING_TO_PAY
from appraise.workbook.scenario_words import grouped, grouped_formula, thousands, thousands_formula

if TYPE_CHECKING:
    from appraise.study import Study


@dataclass(frozen=True, slots=True)
class Cells:
    """Rows of cells over all options on the Decision sheet, and the best option in the chosen scenario."""

    names: str
    npv: str
    capital: str
    payback: str
    discounted: str
    worst: str
    times: str
    regret: str
    others: str  # net present values of all but the best
    above: str  # what the capital may exceed its estimate by
    below: str  # what it may fall short of it by
    best: str  # place of the best option, from 1
    baseline: int  # place of the baseline, from 1
    scenario: str  # title of the chosen scenario

    def of_best(self, row: str) -> str:
        """The best option's value of a row."""
        return f"INDEX({row},1,{self.best})"

    @property
    def second(self) -> str:
        """Place of the second best option, from 1."""
        return f"MATCH(MAX({self.others}),{self.others},0)"

    @property
    def calmest(self) -> str:
        """Place of the option with the least of the largest regrets, from 1."""
        return f"MATCH(MIN({self.regret}),{self.regret},0)"


@dataclass(frozen=True, slots=True)
class Best:
    """The best option of the chosen scenario in numbers.

    payback, discounted : years, or a word why there are none. times : scenarios of `scenarios` in which it is
    best. calmest, least_regret : of the option that leaves least to regret. second, behind : the second best
    option and how far it is off, "" where there is one option only. above : what the best's capital may
    exceed its estimate by. below : what the second's may fall short of it by.
    """

    name: str
    npv: float
    capital: float
    payback: float | str
    discounted: float | str
    worst: float
    is_baseline: bool
    scenario: str
    times: int
    scenarios: int
    regret: float
    calmest: str
    least_regret: float
    second: str
    behind: float
    above: float
    below: float


BASIS_FORMULA = (
    '="Present values at "&FIXED(in_finance_discount_rate*100,1)&" % a year, after "'
    '&FIXED(in_finance_tax_rate*100,1)&" % tax, "'
    '&IF(in_finance_basis="real","real, in money of "&in_study_price_year,"nominal")'
    '&". Positive: better than the plant as it stands."'
)
"""Formula of `basis`."""


def basis(study: Study) -> str:
    """What the present values rest on, and what their sign means."""
    finance, year = study.case.finance, study.case.study.price_year
    money = f"real, in money of {year}" if finance.basis == "real" else "nominal"
    return (
        f"Present values at {finance.discount_rate * 100.0:,.1f} % a year, after "
        f"{finance.tax_rate * 100.0:,.1f} % tax, {money}. Positive: better than the plant as it stands."
    )


def verdict(best: Best, currency: str) -> str:
    """What is best in the chosen scenario, and what to do next."""
    if best.is_baseline:
        return f"Best in scenario “{best.scenario}”: the plant as it stands; no option earns its capital."
    return (
        f"Best in scenario “{best.scenario}”: “{best.name}”, worth {thousands(best.npv, currency)} more than "
        f"leaving the plant as it stands; take it to quotations."
    )


def verdict_formula(cells: Cells, currency: str) -> str:
    """Formula of `verdict`."""
    worth = thousands_formula(cells.of_best(cells.npv), currency)
    return (
        f'="Best in scenario “"&{cells.scenario}&"”: "&IF({cells.best}={cells.baseline},'
        f'"the plant as it stands; no option earns its capital.",'
        f'"“"&{cells.of_best(cells.names)}&"”, worth "&{worth}'
        f'&" more than leaving the plant as it stands; take it to quotations.")'
    )


def reason(best: Best, currency: str) -> str:
    """Why: capital, payback and what the worst scenario makes of it."""
    if best.is_baseline:
        return "Every option costs more than the extra power brings at these prices."
    worst = "still gains" if best.worst >= 0 else "loses"
    return (
        f"It asks for {thousands(best.capital, currency)} of capital and {_back(best)}; "
        f"in its worst scenario it {worst} {thousands(abs(best.worst), currency)}."
    )


def _back(best: Best) -> str:
    if isinstance(best.payback, str):
        none = best.payback == NOTHING_TO_PAY
        return "has nothing to pay back" if none else "does not pay it back in operation"
    years = best.discounted
    later = "discounted it does not" if isinstance(years, str) else f"{grouped(years, 1)} discounted"
    return f"pays it back in {grouped(best.payback, 1)} years of operation, undiscounted ({later})"


def reason_formula(cells: Cells, currency: str) -> str:
    """Formula of `reason`."""
    capital = thousands_formula(cells.of_best(cells.capital), currency)
    back, worst, later = (cells.of_best(row) for row in (cells.payback, cells.worst, cells.discounted))
    return (
        f"=IF({cells.best}={cells.baseline},"
        f'"Every option costs more than the extra power brings at these prices.",'
        f'"It asks for "&{capital}&" of capital and "&'
        f'IF(ISNUMBER({back}),"pays it back in "&{grouped_formula(back, 1)}'
        f'&" years of operation, undiscounted ("'
        f'&IF(ISNUMBER({later}),{grouped_formula(later, 1)}&" discounted","discounted it does not")&")",'
        f'IF({back}="{NOTHING_TO_PAY}","has nothing to pay back","does not pay it back in operation"))'
        f'&"; in its worst scenario it "&IF({worst}>=0,"still gains ","loses ")'
        f'&{thousands_formula(f"ABS({worst})", currency)}&".")'
    )


def standing(best: Best, currency: str) -> str:
    """How it does in the other scenarios, and whether the second best option is within the capital's band."""
    who = "The plant as it stands" if best.is_baseline else "It"
    regret = thousands(best.regret, currency)
    against = f" is {regret}; least is that of “{best.calmest}”, {thousands(best.least_regret, currency)}"
    if best.regret == best.least_regret:
        against = f", {regret}, is the least of all"
    text = f"{who} is best in {best.times} of {best.scenarios} scenarios; its largest regret{against}."
    band = best.below if best.is_baseline else best.above
    if not best.second or best.behind >= band:
        return text
    whose, end = ("its capital", "lower") if best.is_baseline else ("the capital of the best", "higher")
    return (
        f"{text} “{best.second}” is only {thousands(best.behind, currency)} behind, and {whose} may come out "
        f"{thousands(band, currency)} {end}: quotations must decide between the two."
    )


def standing_formula(cells: Cells, currency: str, several: bool) -> str:
    """Formula of `standing`; `several` options, or the baseline alone."""
    is_baseline = f"{cells.best}={cells.baseline}"
    regret, least = cells.of_best(cells.regret), f"MIN({cells.regret})"
    text = (
        f'=IF({is_baseline},"The plant as it stands","It")&" is best in "&{cells.of_best(cells.times)}'
        f'&" of "&ROWS(scenario_titles)&" scenarios; its largest regret"'
        f'&IF({regret}={least},", "&{thousands_formula(regret, currency)}&", is the least of all",'
        f'" is "&{thousands_formula(regret, currency)}&"; least is that of “"'
        f'&INDEX({cells.names},1,{cells.calmest})&"”, "&{thousands_formula(least, currency)})&"."'
    )
    if not several:
        return text
    behind = f"({cells.of_best(cells.npv)}-MAX({cells.others}))"
    band = f"IF({is_baseline},INDEX({cells.below},1,{cells.second}),{cells.of_best(cells.above)})"
    return (
        f'{text}&IF({behind}>={band},""," “"&INDEX({cells.names},1,{cells.second})&"” is only "'
        f'&{thousands_formula(behind, currency)}&" behind, and "'
        f'&IF({is_baseline},"its capital","the capital of the best")&" may come out "'
        f'&{thousands_formula(band, currency)}&IF({is_baseline}," lower"," higher")'
        f'&": quotations must decide between the two.")'
    )


def origin(study: Study) -> str:
    """Of which day the study is, which revision, and by whom."""
    about = study.case.study
    parts = (f"Study of {study.dated}", f"revision {about.revision}" if about.revision else "", about.author)
    return " · ".join(part for part in parts if part)


def question(baseline: str, options: int, years: int, first_year: int) -> str:
    """What the study was asked."""
    ways = "one way" if options == 1 else f"{options} ways"
    return (
        f"Is it worth the money to get more power from the same heat at this plant? Compared are {ways} of "
        f"rebuilding it with the plant as it stands, the baseline (“{baseline}”), over {years} years of "
        f"operation from {first_year}, each hour of a year solved, all heat delivered in every case."
    )
