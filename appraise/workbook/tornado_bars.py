"""How the bars of the Tornado sheet are made: one line a driver in the case's order, ends, swing and rank."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from appraise.case.money import Driver
from appraise.case.paths import value_in_force
from appraise.sensitivity import Bar, Change, Tornado
from appraise.workbook.cells import Page, area, ref
from appraise.workbook.input_rows import input_rows
from appraise.workbook.naming import name_of
from appraise.workbook.tornado_drivers import AS_RUN, LiveBar, driver_unit, live_bar, shown_in, value_now

if TYPE_CHECKING:
    from appraise.study import Study

NO_VALUE = "no value"
NO_EFFECT = "no effect"

COLUMNS = (
    ("driver", "Driver, in the order of the case"),
    ("how", "live or as run"),
    ("now", "in the run"),
    ("low_text", "low"),
    ("high_text", "high"),
    ("low", "end or change, low"),
    ("high", "end or change, high"),
    ("worth", "NPV per unit"),
    ("run_low", "NPV at low, run"),
    ("run_high", "NPV at high, run"),
    ("rank", "rank"),
    ("npv_low", "NPV at low"),
    ("npv_high", "NPV at high"),
    ("swing", "swing"),
    ("path", "path"),
    ("reason", "remark"),
    ("unit", "unit"),
)
AT = {name: number for number, (name, _) in enumerate(COLUMNS, 1)}


class Bars:
    """The list of one option; `order` holds the drivers' positions from the widest bar down."""

    def __init__(
        self, study: Study, page: Page, tornado: Tornado, drivers: Sequence[Driver], top: int
    ) -> None:
        self.study, self.case, self.page, self.tornado, self.top = study, study.case, page, tornado, top
        self.drivers, self.key = drivers, tornado.option
        self.units = {row.path: row.unit for row in input_rows(study.case)}
        self.option = [option.key for option in study.case.options].index(tornado.option)
        left = list(tornado.bars)
        self.bars: list[Bar] = []
        for driver in drivers:
            asked = (driver.label, driver.path, driver.low, driver.high)
            found = next(bar for bar in left if (bar.label, bar.path, bar.low, bar.high) == asked)
            left.remove(found)
            self.bars.append(found)
        self.live = [self._live(driver, bar) for driver, bar in zip(drivers, self.bars, strict=True)]
        self.base_row, self.first = top + 2, top + 3
        self.order = sorted(range(len(drivers)), key=lambda index: (-self.swing(index), index))

    def _live(self, driver: Driver, bar: Bar) -> LiveBar:
        """How a bar follows; one without width tells nothing of its slope."""
        live = live_bar(self.study, self.option, driver, bar)
        if live.way == "run":
            return live
        ends = {self._units(driver, live, change) for change in (driver.low, driver.high)}
        return live if len(ends) == 2 else AS_RUN

    # -- what the sorted table shows

    def column(self, name: str) -> str:
        """Cells of one column of the list."""
        return area(self.first, AT[name], self.first + len(self.drivers) - 1, AT[name], absolute=True)

    def how(self, index: int) -> str:
        """Whether a bar follows the inputs."""
        return "as run" if self.live[index].way == "run" else "live"

    def now(self, index: int) -> str:
        """The driver's value in the run."""
        return value_now(self.case, self.drivers[index], self.unit(index))

    def unit(self, index: int) -> str:
        """Unit of the driver."""
        return driver_unit(self.drivers[index].path, self.case.study.reference_scenario, self.units)

    def text(self, index: int, end: Change | None) -> str:
        """An end as a reader would say it."""
        return shown_in(end, self.unit(index))

    def swing(self, index: int) -> float:
        """Width of a bar, base included, to the cent: rounding must not decide the order."""
        return round(self.bars[index].swing, 2)

    def remark(self, index: int) -> str:
        """What the sorted table says of a bar: why an end has no value, or that the driver has no effect."""
        return self.reason(index) or ("" if self.swing(index) else NO_EFFECT)

    def reason(self, index: int) -> str:
        """Why an end has no value, "" where both have."""
        bar = self.bars[index]
        ends = (("low", bar.reason_low), ("high", bar.reason_high))
        return "; ".join(f"{end}: {' '.join(reason.split())}" for end, reason in ends if reason)

    # -- the list

    def write(self) -> None:
        """Heading and one line a driver."""
        name = self.case.options[self.option].name
        self.page.put(self.top, 1, f"{name}: how the bars are made", "section")
        for col in range(2, len(COLUMNS) + 1):
            self.page.put(self.top, col, None, "section")
        self.page.headings(self.top + 1, [title for _, title in COLUMNS])
        self.page.height(self.top + 1, 30)
        self.page.put(self.base_row, AT["driver"], "no driver moved", "label")
        self.page.put(self.base_row, AT["run_low"], self.tornado.base_npv, "money as run")
        npv = f"={name_of('npv', self.key)}"
        self.page.formula(self.base_row, AT["npv_low"], npv, self.tornado.base_npv, "money bold")
        for index in range(len(self.drivers)):
            self._line(self.first + index, index)

    def _line(self, row: int, index: int) -> None:
        page, driver, bar, live = self.page, self.drivers[index], self.bars[index], self.live[index]
        page.put(row, AT["driver"], driver.label, "label")
        page.put(row, AT["how"], self.how(index), "text_centre")
        page.put(row, AT["now"], self.now(index), "text_right as run")
        page.put(row, AT["low_text"], self.text(index, driver.low), "text_right as run")
        page.put(row, AT["high_text"], self.text(index, driver.high), "text_right as run")
        page.put(row, AT["run_low"], bar.npv_low, "money as run")
        page.put(row, AT["run_high"], bar.npv_high, "money as run")
        page.put(row, AT["reason"], self.reason(index), "note")
        page.put(row, AT["path"], driver.path, "label_indent")
        page.put(row, AT["unit"], self.unit(index), "unit")
        if live.worth:
            page.formula(row, AT["worth"], f"={live.worth}", self._worth(index), "money")
        for end, change in (("low", driver.low), ("high", driver.high)):
            self._end(row, index, end, change)
        self._width(row, index)

    def _end(self, row: int, index: int, end: str, change: Change | None) -> None:
        """The end's value or change, and the net present value there."""
        page, live, bar = self.page, self.live[index], self.bars[index]
        value = bar.npv_low if end == "low" else bar.npv_high
        npv, cell = name_of("npv", self.key), ref(row, AT[end])
        if value is None:
            page.put(row, AT[f"npv_{end}"], NO_VALUE, "text_right as run")
            return
        share = isinstance(change, str)
        if live.way == "run":
            base = ref(self.base_row, AT["run_low"], True)
            formula = f"={npv}+({ref(row, AT[f'run_{end}'])}-{base})"
        else:
            self._amount(row, end, change)
            worth, net = ref(row, AT["worth"]), name_of("net", self.key)
            moved = f"{live.now}*{cell}" if share else f"({cell}-{live.now})"
            rate = f"{live.now}*(1+{cell})" if share else cell
            formula = {
                "scale": f"={npv}+{cell}*{worth}",
                "flat": f"={npv}+{cell}*{worth}-{live.removed}",
                "level": f"={npv}+{moved}*{worth}",
                "rate": f"=SUMPRODUCT({net},(1+{rate})^-t_index)",
            }[live.way]
        page.formula(row, AT[f"npv_{end}"], formula, value, "money")

    def _amount(self, row: int, end: str, change: Change | None) -> None:
        """The number at the end, or the share by which the present value changes."""
        if isinstance(change, str):
            self.page.put(row, AT[end], float(change.rstrip("% ")) / 100.0, "percent1 as run")
        else:
            self.page.put(row, AT[end], change, "general as run")

    def _worth(self, index: int) -> float:
        """Python's value per unit: from the two ends of the run."""
        bar, driver, live = self.bars[index], self.drivers[index], self.live[index]
        assert bar.npv_low is not None
        assert bar.npv_high is not None
        low, high = (self._units(driver, live, change) for change in (driver.low, driver.high))
        return (bar.npv_high - bar.npv_low) / (high - low)

    def _units(self, driver: Driver, live: LiveBar, change: Change | None) -> float:
        if not isinstance(change, str):
            assert change is not None
            return float(change)
        share = float(change.rstrip("% ")) / 100.0
        return share if live.way == "scale" else float(value_in_force(self.case, driver.path)) * (1.0 + share)

    def _width(self, row: int, index: int) -> None:
        page, npv = self.page, name_of("npv", self.key)
        ends = area(row, AT["npv_low"], row, AT["npv_high"])
        swing, swings = ref(row, AT["swing"]), self.column("swing")
        formula = f"=ROUND(MAX({npv},{ends})-MIN({npv},{ends}),2)"
        page.formula(row, AT["swing"], formula, self.swing(index), "money2 bold")
        above = f"{ref(self.first, AT['swing'], True)}:{ref(row, AT['swing'], 'column')}"
        rank = f"=RANK({swing},{swings})+SUMPRODUCT(--({above}={swing}))-1"
        page.formula(row, AT["rank"], rank, self.order.index(index) + 1, "integer")
