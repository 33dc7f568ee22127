"""The measures of all options side by side on the Cash flow sheet: live, and the run's own value beside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from appraise.measures import Measures, payback
from appraise.workbook.calendar_rows import MEASURES_TOP, ROW_POINTS
from appraise.workbook.cash_flow_block import Block
from appraise.workbook.cash_flow_calendar import TAX_LEFT
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page
from appraise.workbook.naming import name_of

if TYPE_CHECKING:
    from appraise.study import Study

LINES_OF_WORDS = {"irr_reason": 3, "payback_note": 2, "discounted_payback_note": 2}
NOTHING = "n/a"
NOT_REACHED = "not reached"
NOTHING_TO_PAY = "nothing to pay back"
LOWEST_RATE = -0.5
"""Rates of return below this are not looked for: spreadsheets do not find them."""

REINVESTED = 'IF(in_finance_reinvestment_rate="",in_finance_discount_rate,in_finance_reinvestment_rate)'


@dataclass(frozen=True, slots=True)
class _Measure:
    """One row for one option: `name` of the live cell, its formula, and the value of the run."""

    name: str
    label: str
    unit: str
    style: str
    formula: str
    expect: object


class MeasuresTable:
    """Rows of measures, two columns an option: live in the chosen scenario, as run in the reference one."""

    def __init__(self, study: Study, page: Page, blocks: Sequence[Block]) -> None:
        self.study, self.page, self.blocks = study, page, blocks
        self.currency = study.case.study.currency
        self.money = f"thousand {self.currency}"

    def write(self) -> int:
        """The table; returns the first free row."""
        page, row = self.page, MEASURES_TOP + 1
        title = "Measures against the baseline: live in the chosen scenario, as run in the reference scenario"
        page.put(MEASURES_TOP, LABEL, title, "section")
        page.put(row, LABEL, "Measure", "heading_left")
        page.put(row, UNIT, "unit", "heading")
        page.put(row + 1, LABEL, "Money in thousands, prices as they are", "heading_left")
        page.put(row + 1, UNIT, None, "heading")
        page.height(row, 44)
        for number, block in enumerate(self.blocks):
            col = TOTAL + 2 * number
            page.put(row, col, block.name, "heading")
            page.merge(row, col, row, col + 1)
            page.headings(row + 1, ["live", "as run"], first=col)
            for offset, measure in enumerate(self._measures(block), 2):
                if number == 0:
                    page.put(row + offset, LABEL, measure.label, "label")
                    page.put(row + offset, UNIT, measure.unit, "unit")
                self._put(row + offset, col, block, measure)
        return row + len(self._measures(self.blocks[0])) + 2 if self.blocks else row + 2

    def _put(self, row: int, col: int, block: Block, measure: _Measure) -> None:
        """The live cell and, beside it, what the run has; words stand over both columns."""
        name = name_of(measure.name, block.key)
        if measure.style == "text":
            self._words(row, col, name, measure)
            return
        self.page.formula(row, col, measure.formula, measure.expect, measure.style, name)
        kind = "text_right" if isinstance(measure.expect, str) else measure.style.split()[0]
        self.page.put(row, col + 1, measure.expect, f"{kind} as run")

    def _words(self, row: int, col: int, name: str, measure: _Measure) -> None:
        """A remark, in a row as tall as the longest that its formula may come to."""
        self.page.formula(row, col, measure.formula, measure.expect, "note_wrap", name)
        self.page.merge(row, col, row, col + 1)
        self.page.height(row, LINES_OF_WORDS[measure.name] * ROW_POINTS)

    def _measures(self, block: Block) -> list[_Measure]:
        run = self.study.measures[self.study.reference][block.option]
        return [
            *self._rates(block, run),
            *self._paybacks(block),
            *self._prices(block, run),
            *self._sums(block, run),
        ]

    def _rates(self, block: Block, run: Measures) -> list[_Measure]:
        net = block.time.row(block.net)
        changes, last = f"SUM({block.time.row(block.changes)})", f"{block.years[-1]}{block.sign}"
        gains, losses = f"SUMPRODUCT(({net}>0)*{net})", f"SUMPRODUCT(({net}<0)*{net})"
        end = "(spend_years+years_counted-1)"
        npv = name_of("npv", block.key)
        found = f"AND({changes}=1,SUMPRODUCT({net},{1 + LOWEST_RATE}^-t_index)*{last}>0)"
        guess = f"(-{gains}/{losses})^(2/{end})-1"
        rate = run.irr if run.irr is not None and run.irr > LOWEST_RATE else None
        spent = f"(C{block.line('capital')}+C{block.line('grant')})"
        return [
            _Measure("npv", "Net present value", self.money, "thousand bold", f"=C{block.net}", run.npv),
            _Measure(
                "irr",
                "Internal rate of return, above −50 %",
                "per year",
                "percent2",
                f'=IF({found},IRR({net},{guess}),"{NOTHING}")',
                NOTHING if rate is None else rate,
            ),
            _Measure(
                "irr_reason",
                "  where there is none, why",
                "",
                "text",
                f'=IF({changes}=1,"",'
                f'IF({changes}>1,"several sign changes: "&{changes}&", so the rate may not be unique",'
                f'IF({last}>0,"no sign change: every flow is a gain",'
                f'IF({last}<0,"no sign change: every flow is a loss","no sign change: no flows at all"))))',
                run.irr_reason or "",
            ),
            _Measure(
                "mirr",
                "Modified rate of return",
                "per year",
                "percent2",
                f'=IF(OR({gains}=0,{losses}=0),"{NOTHING}",(SUMPRODUCT(({net}>0)*{net}*(1+{REINVESTED})^({end}-t_index))'
                f"/-SUMPRODUCT(({net}<0)*{net}*discount_factor))^(1/{end})-1)",
                NOTHING if run.mirr is None else run.mirr,
            ),
            _Measure(
                "profitability",
                "Profitability: 1 + NPV / (capital − grant)",
                "–",
                "number2",
                f'=IF({spent}<0,1-{npv}/{spent},"{NOTHING}")',
                NOTHING if run.profitability_index is None else run.profitability_index,
            ),
        ]

    def _paybacks(self, block: Block) -> list[_Measure]:
        flow = block.flow
        ways = (
            ("payback", "Payback, years of operation", block.simple, block.cumulative, block.net, flow.net),
            (
                "discounted_payback",
                "Discounted payback, years of operation",
                block.discount_payback,
                block.cumulative_discounted,
                block.discounted,
                flow.discounted,
            ),
        )
        made = []
        for name, label, marks, running, source, flows in ways:
            cells, sums, least = block.time.row(marks), block.time.row(running), block.rounding(source)
            back = payback(flows, block.time.spend)
            made.append(
                _Measure(
                    name,
                    label,
                    "a",
                    "number1",
                    f'=IF(MIN({sums})>=-{least},"{NOTHING_TO_PAY}",'
                    f'IF(COUNT({cells})=0,"{NOT_REACHED}",MIN({cells})))',
                    payback_words(back.note) if back.years is None else back.years,
                )
            )
            cell = name_of(name, block.key)
            made.append(
                _Measure(
                    f"{name}_note",
                    "  and afterwards",
                    "",
                    "text",
                    f"=IF(ISNUMBER({cell}),IF(SUMPRODUCT((t_index-spend_years>{cell})*({sums}<-{least}))>0,"
                    f'"falls below zero again",""),"")',
                    "falls below zero again" if back.years is not None and back.note else "",
                )
            )
        return made

    def _prices(self, block: Block, run: Measures) -> list[_Measure]:
        """Levelised cost, and the first-year prices at which nothing is gained."""
        npv = name_of("npv", block.key)
        power, premium, carbon = (f"C{block.line(line)}" for line in ("power", "premium", "carbon"))
        energy = block.time.row(block.energy("power"))
        worth = f"({TAX_LEFT}*SUMPRODUCT({energy},value_weight))"
        measures = [
            _Measure(
                "levelised",
                "Levelised cost of the extra power",
                f"{self.currency}/MWh",
                "number2",
                f'=IF({worth}=0,"{NOTHING}",-({npv}-{TAX_LEFT}*({power}+{premium}))/{worth})',
                NOTHING if run.levelised_cost is None else run.levelised_cost,
            )
        ]
        for kind, label, unit, line, value in (
            ("power", "power", "MWh", power, run.break_even_power_price),
            ("fuel", "fuel", "MWh", f"C{block.line('fuel')}", run.break_even_fuel_price),
            (
                "carbon",
                "carbon",
                "t",
                f"({carbon}+C{block.line('peak_carbon')})",
                run.break_even_carbon_price,
            ),
        ):
            measures.append(
                _Measure(
                    f"even_{kind}",
                    f"Break-even {label} price, path scaled",
                    f"{self.currency}/{unit}",
                    "number2",
                    f'=IF({line}=0,"{NOTHING}",INDEX(chosen__{kind},1,spend_years+1)*(1-{npv}/({TAX_LEFT}*{line})))',
                    NOTHING if value is None else value,
                )
            )
        return measures

    def _sums(self, block: Block, run: Measures) -> list[_Measure]:
        increment = name_of("capital_increment", block.key)
        total, npv = name_of("capital_total", block.key), name_of("npv", block.key)
        net = block.time.row(block.net)
        first, last = block.line("power"), block.line("network_fee")
        lines = f"{block.years[0]}{first}:{block.years[-1]}{last}"
        gain = self.study.year_figures[self.study.reference][block.option].first_year_gain
        return [
            _Measure(
                "extra_capital",
                "Capital above the baseline's, price-year money",
                self.money,
                "thousand",
                f"={increment}",
                float(block.flow.capital),
            ),
            _Measure(
                "largest_capital",
                "Largest capital of the option without a loss",
                self.money,
                "thousand",
                f'=IF(OR(SUMPRODUCT(ABS({net}))=0,unit_of_capital>=0),"{NOTHING}",{total}-{npv}/unit_of_capital)',
                NOTHING if run.largest_capex is None else run.largest_capex,
            ),
            _Measure(
                "first_gain",
                "Gain of the first year, before tax",
                self.money,
                "thousand",
                f"=SUM(INDEX({lines},0,spend_years+1))",
                gain,
            ),
        ]


def payback_words(note: str | None) -> str:
    """What stands in place of the years where there are none."""
    return NOTHING_TO_PAY if note is not None and note.startswith("nothing") else NOT_REACHED
