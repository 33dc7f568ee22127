"""Capital: the order of index, exchange, location and shares; ranges; what is refused and what is said."""

import re
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from money_case import money_case
from published import published, values

from appraise.capex import capital, estimate_class
from appraise.case.money import SIZE_NAMES
from appraise.correlations import Source
from appraise.errors import CaseError
from appraise.published_costs import PUBLISHED
from appraise.sizing import OptionSize, StageSize

ROOT = Path(__file__).parents[1]
LAW = settings(derandomize=True, deadline=None, max_examples=60)
NOTHING = StageSize(1, False, **dict.fromkeys(SIZE_NAMES, 0.0))
BASE = OptionSize("single", (NOTHING,))
INDEX = {"year": [1982, 2001, 2010, 2013, 2020, 2023], "value": [314.0, 394.3, 550.8, 567.3, 596.2, 797.9]}


def two_stage(*new: dict[str, float], existing: dict[str, float] | None = None) -> OptionSize:
    """New stages from the cold end and the existing one as the hottest, each with the sizes given."""
    cold = [replace(NOTHING, stage=i + 1, new=True, **size) for i, size in enumerate(new)]
    hot = replace(NOTHING, stage=len(new) + 1, **(existing or {}))
    return OptionSize("two-stage", (*cold, hot))


def priced(items, size: OptionSize | None = None, price_year: int = 2023, currency: str = "EUR", **capex):
    """Capital of the baseline and of the option."""
    named = [{"name": item["key"]} | item for item in items]
    study = {"price_year": price_year, "currency": currency}
    case = money_case(study=study, capex={"items": named} | capex)
    return capital(case, (BASE, size or two_stage({"area_m2": 300.0})))


def amounts(bought) -> dict[str, float]:
    return {item.key: item.amount for item in bought.items}


OWN = {"size": "area_m2", "reference_cost": 1000.0, "reference_size": 100.0, "exponent": 0.6} | {
    "minimum": 10.0,
    "maximum": 400.0,
    "fixed": 50.0,
}


# --- order of the factors ----------------------------------------------------------------------------------


def test_quotation_is_indexed_exchanged_and_located_in_this_order() -> None:
    """100 USD of 2020 x 797.9/596.2 x 0.9 EUR/USD x 1.1."""
    quoted = {"key": "tail", "amount": 100.0, "currency": "USD", "year": 2020}
    _, option = priced([quoted], index=INDEX, exchange={"USD": 0.9}, location_factor=1.1)
    (item,) = option.items
    assert item.amount == pytest.approx(100.0 * 797.9 / 596.2 * 0.9 * 1.1, rel=1e-14)
    assert (item.basis, item.year, item.currency, item.units) == ("quotation", 2020, "USD", 1)
    assert (item.exchange, item.location_factor) == (0.9, 1.1)
    assert item.index_factor == pytest.approx(797.9 / 596.2, rel=1e-14)


def test_index_is_linear_between_its_years() -> None:
    _, option = priced([{"key": "a", "amount": 1.0, "year": 2021}], index=INDEX)
    assert option.total == pytest.approx(797.9 / (596.2 + (797.9 - 596.2) / 3.0), rel=1e-14)


def test_price_year_money_needs_no_index() -> None:
    _, option = priced([{"key": "a", "amount": 7.0}])
    assert option.total == 7.0


def test_shares_come_after_location_and_may_stand_on_shares() -> None:
    items = [
        {"key": "fee", "share_of": "works", "share": 0.5},
        {"key": "works", "share_of": "all", "share": 0.2},
        {"key": "a", "amount": 100.0},
        {"key": "b", "amount": 300.0},
        {"key": "setting", "share_of": ["a", "b"], "share": 0.1},
    ]
    _, option = priced(items, location_factor=2.0)
    # "all" is every amount and correlation, 800, not the shares; the order of the file stays.
    assert list(amounts(option)) == ["fee", "works", "a", "b", "setting"]
    assert option.total == pytest.approx(80.0 + 160.0 + 200.0 + 600.0 + 80.0, rel=1e-14)
    assert next(item for item in option.items if item.key == "works").note == "0.2 of all"


def test_multiplier_is_on_the_total() -> None:
    items = [
        {"key": "a", "amount": 100.0, "low": -0.1, "high": 0.5},
        {"key": "b", "share_of": "a", "share": 0.1},
    ]
    _, option = priced(items, multiplier=2.0)
    assert amounts(option) == pytest.approx({"a": 100.0, "b": 10.0})
    assert option.total == pytest.approx(220.0)
    assert option.low == pytest.approx(2.0 * (90.0 + 8.0))
    assert option.high == pytest.approx(2.0 * (150.0 + 13.0))


# --- published indices and factors -------------------------------------------------------------------------

CEPCI = published("cost", "CEPCI") + published("cost", "CEPCI, 1983 to 1985")
BY_YEAR = {int(row.given["year"]): row.value for row in sorted(CEPCI, key=lambda row: row.given["year"])}
WHOLE_INDEX = {"year": list(BY_YEAR), "value": list(BY_YEAR.values())}


@pytest.mark.parametrize("row", CEPCI, ids=str)
def test_money_of_every_year_of_the_index(row) -> None:
    _, option = priced([{"key": "a", "amount": 1.0, "year": int(row.given["year"])}], index=WHOLE_INDEX)
    row.check(BY_YEAR[2023] / option.items[0].index_factor)


def sources() -> dict[str, Source]:
    """Sources of the published correlations, by author."""
    return {
        re.split(r"-\d{4}-", name)[0].replace("-", "_"): found.source for name, found in PUBLISHED.items()
    }


def test_indices_of_the_sources() -> None:
    """At the base date, and the average of its year."""
    rows = values("cost", "CEPCI of the sources") | values("cost", "CEPCI of January 2010")
    assert rows.keys() == sources().keys()
    for author, source in sources().items():
        rows[author].check(source.index)
        assert source.annual_index == BY_YEAR[source.year]


@pytest.mark.parametrize("file", ["inputs", "appraise/starter"])
def test_index_of_the_demo(file: str) -> None:
    """Its years from 2024 on are invented, and it says so."""
    text = (ROOT / file / "marrowby.toml").read_text(encoding="utf-8")
    index = tomllib.loads(text)["capex"]["index"]
    for year, value in zip(index["year"], index["value"], strict=True):
        assert year >= 2024 or value == BY_YEAR[year]


def test_escalation_to_2023() -> None:
    rows = values("cost", "Escalation to 2023")
    items = [
        {"key": "of-1982", "amount": 1.0, "year": 1982},
        {"key": "turton", "correlation": {"name": "turton-2001-shell-and-tube-u-tube"}},
        {"key": "towler", "correlation": {"name": "towler-2010-shell-and-tube-u-tube"}},
    ]
    _, option = priced(items, currency="USD", index=WHOLE_INDEX)
    for item in option.items:
        rows[item.key.replace("-", "_")].check(item.index_factor)


def shares_of(row, *names: str) -> list[dict]:
    """Items that are each a percentage of the equipment, as given beside a printed total."""
    return [{"key": name, "share_of": "equipment", "share": row.given[name] / 100.0} for name in names]


RETROFIT = ("erection", "instruments", "piping", "electrical")


@pytest.mark.parametrize("edition", ["Peters and Timmerhaus, 4th ed.", "Peters and Timmerhaus, 5th ed."])
def test_ratio_factors_add_up(edition: str) -> None:
    """From delivered equipment to installed in an existing house, to direct and to all cost."""
    rows = values("cost", edition)
    direct = (
        *RETROFIT,
        *(name for name in ("buildings", "yard", "service", "land") if name in rows["total"].given),
    )
    for name, parts in (("retrofit", RETROFIT), ("direct", direct), ("total", tuple(rows["total"].given))):
        if name in rows:
            items = [{"key": "equipment", "amount": 100.0}, *shares_of(rows[name], *parts)]
            rows[name].check(priced(items)[1].total)


@pytest.mark.parametrize("example", ["Loh, low pressure", "Loh, example"])
def test_setting_and_bulk_materials(example: str) -> None:
    """Setting and each material as shares of the exchanger, labour as a share of its material."""
    row = values("cost", example)["total"]
    amount = row.given.get("amount", 1.0)
    materials = [name.removesuffix("_labour") for name in row.given if name.endswith("_labour")]
    items = [{"key": "equipment", "amount": amount}, *shares_of(row, "setting", *materials)]
    for name in materials:
        labour = row.given[f"{name}_labour"] / 100.0
        whole, rest = int(labour), labour % 1.0  # a share is at most 1
        parts = [1.0] * whole + [rest]
        items += [{"key": f"{name}-{i}", "share_of": name, "share": share} for i, share in enumerate(parts)]
    row.check(priced(items)[1].total)


# --- whom an item belongs to -------------------------------------------------------------------------------


def test_the_baseline_buys_only_what_names_it() -> None:
    items = [
        {"key": "tail", "amount": 100.0},
        {"key": "retubing", "amount": 30.0, "only": "single"},
        {"key": "both", "amount": 5.0, "only": ["single", "two-stage"]},
    ]
    base, option = priced(items)
    assert amounts(base) == {"retubing": 30.0, "both": 5.0}
    assert amounts(option) == {"tail": 100.0, "both": 5.0}
    assert (option.total, option.avoided, option.extra) == (105.0, 35.0, 70.0)
    assert (base.total, base.extra) == (35.0, 0.0)


def test_share_of_an_item_that_another_option_buys_is_nothing() -> None:
    items = [{"key": "a", "amount": 9.0, "only": "single"}, {"key": "b", "share_of": "a", "share": 0.5}]
    _, option = priced(items)
    assert amounts(option) == {"b": 0.0}


# --- correlations ------------------------------------------------------------------------------------------


def test_own_correlation_by_hand() -> None:
    """50 + 1000 x (300/100)^0.6."""
    _, option = priced([{"key": "shell", "correlation": OWN}])
    (item,) = option.items
    assert item.amount == pytest.approx(50.0 + 1000.0 * 3.0**0.6, rel=1e-14)
    assert (item.basis, item.size, item.units, item.warnings) == ("correlation", ("area_m2", 300.0), 1, ())


def test_option_takes_the_sum_of_sizes_and_new_stage_each_its_own() -> None:
    size = two_stage({"area_m2": 100.0}, {"area_m2": 200.0}, existing={"area_m2": 50.0})
    together = {"key": "a", "correlation": OWN}
    apart = {"key": "b", "correlation": OWN, "per": "new_stage"}
    pieces = {"key": "c", "amount": 10.0, "per": "new_stage"}
    _, option = priced([together, apart, pieces], size)
    costs = [(item.key, item.stage, item.amount) for item in option.items]
    assert costs == [
        ("a", None, pytest.approx(50.0 + 1000.0 * 3.5**0.6)),
        ("b", 1, pytest.approx(1050.0)),
        ("b", 2, pytest.approx(50.0 + 1000.0 * 2.0**0.6)),
        ("c", 1, 10.0),
        ("c", 2, 10.0),
    ]


def test_equal_parallel_units_above_the_range_and_says_so() -> None:
    _, option = priced([{"key": "a", "correlation": OWN}], two_stage({"area_m2": 900.0}))
    (item,) = option.items
    assert item.units == 3
    assert item.amount == pytest.approx(3.0 * (50.0 + 1000.0 * 3.0**0.6), rel=1e-14)
    assert item.warnings == ("900 m2 is above the range up to 400 m2: 3 equal parallel units",)
    _, exact = priced([{"key": "a", "correlation": OWN}], two_stage({"area_m2": 800.0}))
    assert exact.items[0].units == 2


def test_below_the_range_is_refused_by_name_and_range() -> None:
    with pytest.raises(CaseError) as caught:
        priced([{"key": "a", "correlation": OWN}], two_stage({"area_m2": 5.0}))
    assert str(caught.value) == (
        'capex.items.a.correlation: 5 m2 needed by option "two-stage"; '
        "allowed: 10 to 400 m2, the range of the correlation"
    )


def test_parallel_units_may_be_too_small_too() -> None:
    narrow = OWN | {"minimum": 300.0}
    with pytest.raises(
        CaseError, match=r"225 m2 in each of 2 parallel units needed by option \"two-stage\", stage 1"
    ):
        priced([{"key": "a", "correlation": narrow, "per": "new_stage"}], two_stage({"area_m2": 450.0}))


def test_nothing_bought_costs_nothing_and_says_so() -> None:
    items = [
        {"key": "cooler", "correlation": OWN | {"size": "drain_area_m2"}},
        {"key": "each", "correlation": OWN, "per": "new_stage"},
        {"key": "piece", "amount": 5.0, "per": "new_stage"},
    ]
    _, option = priced(items, OptionSize("two-stage", (NOTHING,)))
    said = [(item.key, item.amount, item.units, item.note, item.warnings) for item in option.items]
    assert said == [
        ("cooler", 0.0, 0, "drain_area_m2 is 0: nothing is bought", ()),
        ("each", 0.0, 0, "no new stage", ()),
        ("piece", 0.0, 0, "no new stage", ()),
    ]
    assert option.total == 0.0


def test_published_correlation_starts_from_its_own_index_not_the_mean_of_its_year() -> None:
    """January 2010 stood at 532.9, the year's mean at 550.8: 78 692 USD of Towler become 117 823 of 2023."""
    named = "towler-2010-shell-and-tube-u-tube"
    _, option = priced([{"key": "shell", "correlation": {"name": named}}], index=INDEX, exchange={"USD": 0.9})
    (item,) = option.items
    assert item.amount == pytest.approx(78_692.0 * 797.9 / 532.9 * 0.9, rel=1e-5)
    assert item.index_factor == pytest.approx(797.9 / 532.9, rel=1e-14)
    assert (item.year, item.currency) == (2010, "USD")
    assert "Towler" in item.source
    assert item.note == "purchased, without erection"


@pytest.mark.parametrize("named", PUBLISHED)
def test_every_published_correlation_can_be_asked_for(named) -> None:
    """At the middle of its range, with the size in our unit."""
    found = PUBLISHED[named]
    middle = (found.minimum * found.maximum) ** 0.5
    size = two_stage({found.size: middle / found.per_size_unit})
    index = {"year": [1982, 1986, *INDEX["year"][1:]], "value": [314.0, 318.4, *INDEX["value"][1:]]}
    _, option = priced(
        [{"key": "a", "correlation": {"name": named}}], size, index=index, exchange={"USD": 1.0}
    )
    assert option.total == pytest.approx(found.cost(middle) * 797.9 / found.source.index, rel=1e-12)


def test_material_and_pressure_of_a_published_correlation() -> None:
    wanted = {"name": "turton-2001-shell-and-tube-u-tube-installed", "material": "carbon-steel-stainless"}
    item = {"key": "a", "correlation": wanted | {"pressure_bar_gauge": 16.0}}
    _, option = priced([item], index=INDEX, exchange={"USD": 1.0})
    assert option.total == pytest.approx(568_123.0, abs=0.5)
    assert option.items[0].note.startswith("installed; ")


def test_old_money_is_doubtful() -> None:
    items = [{"key": "old", "amount": 1.0, "year": 2010}, {"key": "fair", "amount": 1.0, "year": 2013}]
    _, option = priced(items, index=INDEX)
    old, fair = option.items
    assert old.warnings == ("money of 2010, 13 years before the price year: an order of magnitude only",)
    assert fair.warnings == ()


# --- what is refused, all at once --------------------------------------------------------------------------


def test_all_faults_are_told_at_once_and_each_once() -> None:
    items = [
        {"key": "a", "correlation": {"name": "towler-1999-boat"}},
        {"key": "b", "correlation": {"name": "turton-2001-steam-turbine-drive", "material": "tin"}},
        {"key": "c", "correlation": {"name": "seider-2013-condensing-steam-turbine", "size": "area_m2"}},
        {
            "key": "d",
            "correlation": {"name": "turton-2001-centrifugal-pump"},
            "year": 2010,
            "currency": "EUR",
        },
        {"key": "e", "correlation": OWN | {"minimum": 301.0}, "only": ["single", "two-stage"]},
    ]
    with pytest.raises(CaseError) as caught:
        priced(items, index={"year": [2010, 2023], "value": [550.8, 797.9]})
    told = [str(problem) for problem in caught.value.problems]
    assert told[0].startswith(
        'capex.items.a.correlation.name: "towler-1999-boat" given; allowed: turton-2001'
    )
    assert told[1:] == [
        'capex.items.b.correlation.material: "tin" given; allowed: none, the source gives no factor',
        "capex.index.year: 2001 missing; required: the base year of the correlation of b",
        "capex.exchange.USD: missing; required by b: a number above 0",
        'capex.items.c.correlation.size: "area_m2" given; allowed: a size in MW, such as tail_shaft_MW',
        "capex.index.year: 2013 missing; required: the base year of the correlation of c",
        "capex.exchange.USD: missing; required by c: a number above 0",
        "capex.items.d.year: 2010 given; allowed: 2001, that of the published correlation",
        "capex.items.d.currency: EUR given; allowed: USD, that of the published correlation",
        "capex.index.year: 2001 missing; required: the base year of the correlation of d",
        "capex.exchange.USD: missing; required by d: a number above 0",
        'capex.items.e.correlation: 300 m2 needed by option "two-stage"; '
        "allowed: 301 to 400 m2, the range of the correlation",
    ]


def test_money_of_another_year_needs_an_index() -> None:
    with pytest.raises(CaseError) as caught:
        priced([{"key": "a", "amount": 1.0, "year": 2020}])
    assert str(caught.value) == "capex.index: missing; required to bring a from 2020 to 2023"


# --- laws --------------------------------------------------------------------------------------------------


@LAW
@given(st.floats(1.0, 1e7), st.floats(0.0, 1.0), st.integers(2001, 2023), st.floats(0.5, 2.0))
def test_splitting_an_item_in_two_changes_nothing(amount, part, year, factor) -> None:
    whole = [{"key": "a", "amount": amount, "year": year}]
    parts = [
        {"key": f"a{i}", "amount": amount * share, "year": year} for i, share in enumerate((part, 1 - part))
    ]
    share = [{"key": "s", "share_of": "all", "share": 0.2}]
    one, two = (
        priced(items + share, index=INDEX, location_factor=factor, multiplier=1.1)[1]
        for items in (whole, parts)
    )
    for name in ("total", "low", "high"):
        assert getattr(two, name) == pytest.approx(getattr(one, name), rel=1e-12)
    assert estimate_class(one) == estimate_class(two)


@LAW
@given(st.floats(10.0, 3000.0), st.floats(1.001, 1.5))
def test_more_surface_costs_more_across_the_parallel_units(area, factor) -> None:
    smaller, larger = (
        priced([{"key": "a", "correlation": OWN}], two_stage({"area_m2": a}))[1].total
        for a in (area, area * factor)
    )
    assert larger > smaller


# --- class of the estimate ---------------------------------------------------------------------------------


def test_estimate_class_follows_what_the_equipment_rests_on() -> None:
    shell = {"key": "shell", "correlation": OWN | {"fixed": 0.0, "exponent": 0.0}}  # 1000
    shares = {"key": "rest", "share_of": "all", "share": 0.9}
    for quoted, number, share in ((999.0, 5, "50 %"), (1000.0, 4, "50 %"), (3000.0, 4, "75 %")):
        _, option = priced([shell, {"key": "tail", "amount": quoted}, shares])
        found, text = estimate_class(option)
        assert found == number
        assert f"{share} of the equipment rests on amounts given, taken as quotations" in text
        assert "AACE International 18R-97" in text
    assert estimate_class(priced([])[1])[0] == 5


@pytest.mark.parametrize("number", [4, 5])
def test_usual_accuracy_is_that_of_the_class(number: int) -> None:
    rows = (
        values("cost", "Estimate of class 5")
        if number == 5
        else values("cost", "Estimate of class 4, wide ends")
        | values("cost", "Estimate of class 4, narrow ends")
    )
    quoted = [{"key": "tail", "amount": 1.0}] if number == 4 else []
    found, text = estimate_class(priced(quoted)[1])
    assert found == number
    ends = re.search(r"accuracy (-\d+) to (-\d+) % and \+(\d+) to \+(\d+) %", text)
    assert ends is not None
    for name, end in zip(("low_narrow", "low_wide", "high_narrow", "high_wide"), ends.groups(), strict=True):
        rows[name].check(float(end))


def test_an_item_without_a_band_has_the_narrow_one_of_a_screening() -> None:
    rows, (item,) = values("cost", "Estimate of class 5"), priced([{"key": "a", "amount": 100.0}])[1].items
    rows["low_narrow"].check(item.low - 100.0)
    rows["high_narrow"].check(item.high - 100.0)
