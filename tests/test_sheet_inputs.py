"""The sheet of inputs: the whole case is there, once, with limits, and what was changed is marked."""

from collections import Counter
from collections.abc import Iterator
from itertools import pairwise
from types import UnionType
from typing import Annotated, Any, Union, get_args, get_origin

import pytest
from full_case import full_case
from libreoffice import differences, needs_libreoffice
from sheet_trial import Money, address_of, recalculated, value_of
from study_fixture import marrowby

from appraise.case.fields import Curve, PricePath, Table, keys_of
from appraise.case.kinds import Kind
from appraise.case.model import Case
from appraise.workbook.addresses import cells_in
from appraise.workbook.cells import DEFAULT_HEIGHT, ListRule, NumberRule, Sheet
from appraise.workbook.input_rows import acts, input_rows
from appraise.workbook.input_sections import BLANKS, SECTIONS
from appraise.workbook.input_words import WORDS
from appraise.workbook.inputs import CHANGED, PAGE_POINTS, VALUE, inputs_sheet
from appraise.workbook.looks import STYLES, is_input
from appraise.workbook.naming import input_name

CASES = {"demo": lambda: marrowby().case, "full": full_case}


@pytest.fixture(params=list(CASES))
def case(request: pytest.FixtureRequest) -> Case:
    return CASES[request.param]()


def sheet_of(case: Case) -> Sheet:
    return inputs_sheet(Money(case, ()))  # type: ignore[arg-type]


# --- the whole case, once ----------------------------------------------------------------------------------


def rebuilt(pairs: Iterator[tuple[str, Any]]) -> dict[str, Any]:
    """The mapping of a case from paths and values, as a reader of the sheet would put it together."""
    data: dict[str, Any] = {}
    for path, value in pairs:
        if value is None:
            continue
        *way, last = path.split(".")
        node: Any = data
        for step in way:
            node = _below(node, step, {})
        if "[" in last:
            name, _, number = last.rstrip("]").partition("[")
            elements = node.setdefault(name, [])
            assert len(elements) == int(number)
            elements.append(value)
        else:
            node[last] = value
    for holder, name in ((data, "options"), (data["capex"], "items")):
        holder[name] = [{"key": key} | table for key, table in holder.get(name, {}).items()]
    return data


def _below(node: Any, step: str, empty: Any) -> Any:
    name, _, number = step.rstrip("]").partition("[")
    if not number:
        return node.setdefault(name, empty)
    tables = node.setdefault(name, [])
    while len(tables) <= int(number):
        tables.append({})
    return tables[int(number)]


def test_the_rows_carry_the_whole_case(case: Case) -> None:
    again = Case.model_validate(rebuilt((row.path, row.value) for row in input_rows(case)))
    without_notes = case.model_copy(update={"notes": again.notes})
    assert again == without_notes


def test_every_value_stands_once_under_its_name(case: Case) -> None:
    sheet = sheet_of(case)
    named = {cell.name: cell.value for cell in sheet.cells.values() if cell.name.startswith("in_")}
    assert named == {input_name(row.path): row.value for row in input_rows(case)}
    assert max(Counter(row.path for row in input_rows(case)).values()) == 1


def test_path_value_and_value_as_run_stand_side_by_side(case: Case) -> None:
    sheet = sheet_of(case)
    by_path = {
        cell.value: row for (row, col), cell in sheet.cells.items() if col == 1 and cell.style == "note"
    }
    for row in input_rows(case):
        at = by_path[row.path]
        assert sheet.cells[at, VALUE].value == sheet.cells[at, VALUE + 1].value == row.value


def test_only_the_values_are_unlocked(case: Case) -> None:
    for (_, col), cell in sheet_of(case).cells.items():
        assert is_input(cell.style) == cell.name.startswith("in_")
        assert not is_input(cell.style) or col == VALUE


def test_lists_are_named_as_a_whole() -> None:
    sheet = sheet_of(full_case())
    for path, values in (
        ("capex.spend", (0.3, 0.7)),
        ("scenarios.central.power.year", (2028, 2040)),
        ("finance.depreciation.shares", (0.5, 0.3)),
        ("plant.boiler.efficiency.value", (0.85, 0.89)),
    ):
        places = cells_in(sheet.names[input_name(path)])
        assert tuple(sheet.cells[place].value for place in places) == values


def test_notes_stand_beside_their_value_or_the_first_of_a_table() -> None:
    notes = {row.path: row.note for row in input_rows(full_case())}
    assert notes["plant.turbine.efficiency"] == "a test"
    assert notes["capex.index.year[0]"] == "a table"
    assert notes["capex.index.year[1]"] == ""
    assert notes["finance.reinvestment_rate"] == "blank: the discount rate"


@pytest.mark.parametrize(
    ("path", "unit"),
    [
        ("plant.live_steam.pressure_bar", "bar"),
        ("plant.peak_boiler.co2_kg_per_MWh", "kg/MWh"),
        ("new_condenser.u_drain_W_m2K", "W/(m²·K)"),
        ("year.heat_signature.slope_MW_per_K", "MW/K"),
        ("year.change_per_year", "%/a"),
        ("scenarios.central.power.value[0]", "EUR/MWh"),
        ("scenarios.central.power.year[0]", "year"),
        ("scenarios.central.fuel.start", "EUR/MWh"),
        ("scenarios.central.fuel.change_per_year", "%/a"),
        ("scenarios.low.carbon", "EUR/t"),
        ("capex.items.tail.amount", "USD"),
        ("capex.items.shell.correlation.reference_cost", "EUR"),
        ("capex.items.shell.correlation.maximum", "m²"),
        ("capex.exchange.SEK", "EUR/SEK"),
        ("study.years", "a"),
        ("plant.boiler.efficiency.load[0]", "–"),
        ("finance.basis", ""),
    ],
)
def test_units(path: str, unit: str) -> None:
    assert {row.path: row.unit for row in input_rows(full_case())}[path] == unit


@pytest.mark.parametrize(
    ("path", "how"),
    [
        ("scenarios.central.power.value[0]", "live"),
        ("scenarios.central.power_premium.years", "live"),
        ("scenarios.central.power_premium.not_below", "run again"),
        ("scenarios.central.price_column", "run again"),
        ("scenarios.central.title", "text"),
        ("finance.depreciation.shares[0]", "live"),
        ("opex.overhauls[0].amount", "live"),
        ("capex.multiplier", "live"),
        ("capex.items.tail.amount", "live"),
        ("capex.items.tail.currency", "run again"),
        ("capex.items.shell.correlation.reference_cost", "run again"),
        ("capex.items.pump.correlation.name", "run again"),
        ("capex.items.tail.source", "text"),
        ("capex.tie_in.multiplier", "live"),
        ("capex.tie_in.from", "run again"),
        ("plant.boiler.co2_kg_per_MWh", "run again"),
        ("study.years", "live"),
        ("study.currency", "run again"),
        ("year.availability", "run again"),
    ],
)
def test_how_a_change_acts(path: str, how: str) -> None:
    assert acts(path) == how


# --- words and limits --------------------------------------------------------------------------------------


def tables_below(annotation: Any) -> Iterator[type[Table]]:
    """Every table class that a declared type holds, at any depth."""
    origin = get_origin(annotation)
    if origin in (Annotated, Union, UnionType, tuple) or origin is not None:
        for inner in get_args(annotation):
            yield from tables_below(inner)
    elif isinstance(annotation, type) and issubclass(annotation, Table):
        yield annotation
        for field in annotation.model_fields.values():
            yield from tables_below(field.annotation)


def test_every_key_of_every_table_has_its_words() -> None:
    for model in set(tables_below(Case)) - {Case}:
        name = "Curve" if issubclass(model, Curve) else model.__name__.removeprefix("Own")
        missing = set(keys_of(model)) - set(WORDS[name])
        assert not missing, f"{name}: {missing}"


def test_words_blanks_and_sections_name_what_exists() -> None:
    models = {m.__name__: m for m in tables_below(Case)} | {"Curve": Curve, "PricePath": PricePath}
    for name, words in WORDS.items():
        assert set(words) <= set(keys_of(models[name])), name
    for full in BLANKS:
        name, _, key = full.partition(".")
        assert key in keys_of(models[name]), full
    assert {row.section for row in input_rows(full_case())} >= set(SECTIONS)


def rules_of(sheet: Sheet) -> dict[tuple[int, int], ListRule | NumberRule]:
    return {cells_in(rule.area)[0]: rule for rule in sheet.rules if isinstance(rule, ListRule | NumberRule)}


def rule_at(sheet: Sheet, path: str) -> ListRule | NumberRule:
    _, address = address_of([sheet], input_name(path))
    return rules_of(sheet)[cells_in(address)[0]]


def test_every_number_has_limits_that_hold_it_and_follow_the_reader(case: Case) -> None:
    sheet = sheet_of(case)
    for row in input_rows(case):
        if isinstance(row.value, bool) or not isinstance(row.value, int | float):
            continue
        if row.key in ("low", "high") and row.path.startswith("drivers"):
            continue  # a number or a text like "-20%"
        rule = rule_at(sheet, row.path)
        assert isinstance(rule, NumberRule)
        assert rule.low is not None
        assert rule.high is not None
        assert rule.low <= row.value <= rule.high, row.path
        for end in (rule.low, rule.high):
            if row.path != "study.years" and abs(end) < 1e15:
                assert isinstance(row.kind, Kind)
                assert row.kind(int(end) if rule.whole else end) == end, row.path


def test_what_is_true_or_false_stays_so_when_it_is_typed_again(case: Case) -> None:
    """In a cell formatted as text, a typed TRUE would be a text, and no formula takes that for true."""
    cells = sheet_of(case).cells.values()
    found = [STYLES[c.style].number_format for c in cells if isinstance(c.value, bool) and c.name]
    assert found
    assert set(found) == {"General"}


def test_pages_are_full_but_not_too_full_and_end_before_a_heading() -> None:
    sheet = sheet_of(marrowby().case)
    last = max(row for row, _ in sheet.cells)
    ends = [0, *sheet.printing.breaks_after, last]
    tall = [
        sum(sheet.heights.get(row, DEFAULT_HEIGHT) for row in range(first + 1, end + 1))
        for first, end in pairwise(ends)
    ]
    assert max(tall) <= PAGE_POINTS
    assert min(tall) > 0.5 * PAGE_POINTS
    for end in ends[1:-1]:
        assert all(
            sheet.cells[row, 1].style != "section" for row in (end, end - 1) if (row, 1) in sheet.cells
        )


def test_limits_of_a_few() -> None:
    sheet = sheet_of(marrowby().case)
    tax, years = rule_at(sheet, "finance.tax_rate"), rule_at(sheet, "study.years")
    assert isinstance(tax, NumberRule)
    assert isinstance(years, NumberRule)
    assert (tax.low, tax.message) == (0.0, "Allowed: a number from 0 to below 1.")
    assert tax.high == pytest.approx(1.0, abs=1e-8)
    assert tax.high < 1.0
    assert (years.low, years.high, years.whole) == (1, marrowby().case.study.years, True)
    basis = rule_at(sheet, "finance.basis")
    assert isinstance(basis, ListRule)
    assert basis.choices == ("real", "nominal")
    reference = rule_at(sheet, "study.reference_scenario")
    assert isinstance(reference, ListRule)
    assert reference.source == "=scenario_names"


# --- what was changed --------------------------------------------------------------------------------------


@needs_libreoffice
def test_formulas_come_to_what_was_expected(case: Case, tmp_path) -> None:
    sheet = sheet_of(case)
    assert differences([sheet], recalculated([sheet], tmp_path)) == []


@needs_libreoffice
def test_changes_are_marked_and_counted(tmp_path) -> None:
    """Numbers, texts, truth values and blanks; rounding alone is no change, a number as text is one."""
    sheet, typed = (
        sheet_of(full_case()),
        {
            "tail.efficiency": 0.81,
            "plant.condenser.terminal_difference_K": 3.0 * (1 + 1e-14),
            "plant.condenser.flow_exponent": "0.5",
            "plant.feed.deaerator_control": "Fixed",
            "options.two.bypass": True,
            "plant.boiler.max_fuel_MW": 60.0,
            "plant.turbine.generator_limit_MW": None,
            "finance.discount_rate": 0.07,
            "capex.items.tail.amount": 1.1e6,
            "opex.overhauls[0].amount": 3e4,
            "year.supply_offset_K": 0,
            "study.author": "somebody",
            "scenarios.central.title": "",
        },
    )
    same = {"plant.condenser.terminal_difference_K", "opex.overhauls[0].amount", "year.supply_offset_K"}
    found = recalculated([sheet], tmp_path, {input_name(path): value for path, value in typed.items()})
    rows = {
        path: cells_in(address_of([sheet], input_name(path))[1])[0][0]
        for path in (row.path for row in input_rows(full_case()))
    }
    column = "ABCDEFGH"[CHANGED - 1]
    marked = {path for path, row in rows.items() if found["Inputs"][f"{column}{row}"] == "changed"}
    assert marked == set(typed) - same
    assert value_of([sheet], found, "changed_live") == 2
    assert value_of([sheet], found, "changed_technical") == 6
    assert found["Inputs"]["A6"] == (
        "Heat balances, hours and sizes are still those of the run: run this workbook again."
    )


@needs_libreoffice
def test_scenarios_are_listed_with_names_and_live_titles(tmp_path) -> None:
    sheet = sheet_of(full_case())
    found = recalculated([sheet], tmp_path, {input_name("scenarios.low.title"): "Low prices"})
    for name, expected in (
        ("scenario_names", ["central", "low"]),
        ("scenario_titles", ["Central", "Low prices"]),
    ):
        places = sheet.names[name].replace("$", "")
        column, first = places[0], int(places.partition(":")[0][1:])
        assert [found["Inputs"][f"{column}{first + i}"] for i in range(2)] == expected
