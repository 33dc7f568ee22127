"""The page of keys, the JSON schema and the page of published values say what the program does."""

import copy
import json
import re
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import published_page
import pytest
from cases import minimal_case
from published import STATUS_WORDS

from appraise.case.fields import Curve, PricePath
from appraise.case.load import case_from
from appraise.case.model import Case
from appraise.errors import CaseError
from appraise.reference import anchor, json_schema, key_reference, main, reference_files
from appraise.reference_keys import places, table_keys
from appraise.workbook.input_sections import MEANINGS
from appraise.workbook.input_words import WORDS

ROOT = Path(__file__).parents[1]
INPUTS = ROOT / "inputs"
SCHEMA = json_schema()
PAGE = key_reference()
CASES = sorted([*INPUTS.glob("*.toml"), *(ROOT / "appraise" / "starter").glob("*.toml")])


def demo() -> dict[str, Any]:
    return tomllib.loads((INPUTS / "marrowby.toml").read_text(encoding="utf-8"))


# -- a checker of the few words of JSON Schema 2020-12 that the schema uses

SAID = {"$schema", "title", "description", "default", "$defs"}  # no limits
TYPES = {"object": dict, "array": list, "string": str, "boolean": bool}


def is_of(kind: str, value: object) -> bool:
    if kind in ("number", "integer"):
        number = isinstance(value, int | float) and not isinstance(value, bool)
        return number and (kind == "number" or float(value) == int(value))
    return isinstance(value, TYPES[kind])


def refused(value: Any, schema: dict[str, Any], at: str = "") -> Iterator[str]:
    """The places that a schema refuses, each with the word that does."""
    for word, limit in schema.items():
        match word:
            case "type" if not is_of(limit, value):
                yield f"{at} {word}"
            case "enum" if value not in limit:
                yield f"{at} {word}"
            case "anyOf" if all(list(refused(value, one, at)) for one in limit):
                yield f"{at} {word}"
            case "$ref":
                yield from refused(value, SCHEMA["$defs"][limit.removeprefix("#/$defs/")], at)
            case "type" | "enum" | "anyOf" | "properties" | "items":
                pass
            case _ if word not in SAID and not holds(word, limit, value, schema):
                yield f"{at} {word}"
    if isinstance(value, dict) and schema.get("type") == "object":
        known, others = schema.get("properties", {}), schema["additionalProperties"]
        for key, one in value.items():
            below = known.get(key, others)
            if below is not False:
                yield from refused(one, below, f"{at}.{key}".lstrip("."))
    if isinstance(value, list) and schema.get("type") == "array":
        for index, one in enumerate(value):
            yield from refused(one, schema["items"], f"{at}[{index + 1}]")


def holds(word: str, limit: Any, value: Any, schema: dict[str, Any]) -> bool:
    """One limit; of a value of another type it says nothing. Raises KeyError for a word it does not know."""
    kind, rule = {
        "minimum": ("number", lambda: value >= limit),
        "maximum": ("number", lambda: value <= limit),
        "exclusiveMinimum": ("number", lambda: value > limit),
        "exclusiveMaximum": ("number", lambda: value < limit),
        "pattern": ("string", lambda: re.search(limit, value) is not None),
        "minLength": ("string", lambda: len(value) >= limit),
        "minItems": ("array", lambda: len(value) >= limit),
        "maxItems": ("array", lambda: len(value) <= limit),
        "required": ("object", lambda: set(limit) <= set(value)),
        "additionalProperties": (
            "object",
            lambda: limit is not False or set(value) <= set(schema["properties"]),
        ),
    }[word]
    return not is_of(kind, value) or rule()


def schema_refuses(data: object) -> bool:
    return bool(list(refused(data, SCHEMA)))


def reader_refuses(data: dict[str, Any]) -> bool:
    try:
        case_from(data)
    except CaseError:
        return True
    return False


# -- files


@pytest.mark.parametrize("name", sorted(reference_files()))
def test_the_files_are_as_they_would_be_written(name: str):
    told = f"inputs/{name} is old: run python -m appraise.reference"
    assert (INPUTS / name).read_text(encoding="utf-8") == reference_files()[name], told


def test_both_files_go_into_any_folder_and_are_named(tmp_path: Path, capsys: pytest.CaptureFixture[str]):
    main(tmp_path / "new")
    new = tmp_path / "new"
    assert capsys.readouterr().out == f"wrote {new / 'keys.md'}\nwrote {new / 'case.schema.json'}\n"
    assert {path.name: path.read_text(encoding="utf-8") for path in (tmp_path / "new").iterdir()} == (
        reference_files()
    )


# -- the page


def section(heading: str) -> str:
    return PAGE.split(f"\n## `{heading}`\n")[1].split("\n## ")[0]


@pytest.mark.parametrize("place", list(places()), ids=lambda place: place.way)
def test_every_key_of_every_table_has_a_row_with_meaning(place):
    rows = [
        re.split(r" (?<!\\)\| ", line[2:-2]) for line in section(place.heading).splitlines() if "| `" in line
    ]
    assert [row[0] for row in rows] == [f"`{key.name}`" for key in table_keys(place.model)]
    for name, default, _, allowed, meaning in rows:
        assert default, name
        assert allowed, name
        assert meaning, name


def bare(text: str) -> str:
    """Letters alone, so that `price_year` and "price year" are the same."""
    return re.sub(r"[^a-z]", "", text.lower())


@pytest.mark.parametrize("place", list(places()), ids=lambda place: place.way)
def test_a_meaning_says_more_than_its_key(place):
    for key in table_keys(place.model):
        assert bare(key.meaning) not in bare(key.name), key.name


def test_words_on_the_sheet_of_inputs_are_short_and_meanings_lead_to_keys():
    assert max(len(words) for table in WORDS.values() for words in table.values()) < 45
    keys = {f"{key.owner}.{key.name}" for place in places() for key in table_keys(place.model)}
    keys |= {f"{table.__name__}.{key.name}" for table in (Curve, PricePath) for key in table_keys(table)}
    assert set(MEANINGS) <= keys


def test_no_table_of_the_demo_is_missing():
    ways = {place.way.split(".")[0] for place in places()} | {"notes"}
    assert ways == set(Case.model_fields)


def test_rows_of_the_page_by_hand():
    assert (
        "| `mechanical_efficiency` | `0.985` | – | a number above 0, at most 1 | shaft of the "
        "blading to shaft of the generator, gear included |" in (section("[plant.turbine]"))
    )
    assert (
        '| `deaerator_control` | `"fixed"` |  | "fixed" or "sliding" | fixed = constant '
        "pressure; sliding = 5 % under its bleed, to a minimum |" in section("[plant.feed]")
    )
    assert "| `drain_approach_K` | as in `[new_condenser]` | K | a number above 0, at most 50 |" in (
        section("[options.new_condenser]")
    )
    assert (
        "| `discount_rate` | **required** | fraction | a number from 0 to 1 | discount rate, on the stated "
        "basis |" in section("[finance]")
    )
    assert (
        "| a list of shares above 0, sum 1 | share of the temperature rise of each stage, cold to hot |"
        in (section("[[options]]"))
    )
    assert "| a list of calendar years, rising | years of the cost index |" in section("[capex.index]")
    assert "| `carbon` | `0` | money/t |" in section("[scenarios.NAME]")
    assert "| `exchange` | none | money/foreign | by name, each a number above 0 |" in section("[capex]")


def test_links_lead_to_headings():
    headings = {anchor(line.removeprefix("## ")) for line in PAGE.splitlines() if line.startswith("## ")}
    assert set(re.findall(r"\]\(#([^)]*)\)", PAGE)) <= headings


# -- the schema


@pytest.mark.parametrize("path", CASES, ids=lambda path: f"{path.parent.name}/{path.name}")
def test_the_schema_accepts_the_cases_that_are_kept(path: Path):
    assert list(refused(tomllib.loads(path.read_text(encoding="utf-8")), SCHEMA)) == []


def tables_of(data: Any, way: tuple[str | int, ...] = ()) -> Iterator[tuple[str | int, ...]]:
    """Every way to a table of a case, notes left out."""
    if isinstance(data, dict) and way != ("notes",):
        yield way
        for key, one in data.items():
            yield from tables_of(one, (*way, key))
    elif isinstance(data, list):
        for index, one in enumerate(data):
            yield from tables_of(one, (*way, index))


def at(data: Any, way: tuple[str | int, ...]) -> Any:
    for step in way:
        data = data[step]
    return data


def test_an_unknown_key_is_refused_in_every_table():
    free = {("scenarios",), ("capex", "exchange")}  # names are the user's
    for way in tables_of(demo()):
        data = demo()
        at(data, way)["no_such_key"] = 1.0
        assert way in free or list(refused(data, SCHEMA)), way


def test_what_the_schema_requires_is_what_the_reader_requires():
    for way in tables_of(demo()):
        for key in at(demo(), way):
            data = demo()
            del at(data, way)[key]
            if schema_refuses(data):
                assert reader_refuses(data), (way, key)
    for key in ("study", "plant", "tail", "new_condenser", "options", "year", "scenarios", "finance"):
        data = demo()
        del data[key]
        assert schema_refuses(data), key


POOL = (-1e9, 0, 0.5, 3, 1e9, True, "", "no such word", "07-20", "-20%", [], [1.0], ["a", "b"], {})


def changed(data: dict[str, Any], way: tuple[str | int, ...], key: str, value: object) -> dict[str, Any]:
    again = copy.deepcopy(data)
    at(again, way)[key] = value
    return again


@pytest.mark.parametrize("value", POOL, ids=str)
def test_the_schema_refuses_nothing_that_the_reader_accepts(value: object):
    """And where a whole value is of the wrong kind, both refuse it."""
    data = minimal_case()
    for way in tables_of(data):
        for key in at(data, way):
            other = changed(data, way, key, value)
            if schema_refuses(other):
                assert reader_refuses(other), (way, key, value)


@pytest.mark.parametrize(
    ("path", "good", "bad"),
    [
        ("plant.turbine.efficiency", 1, 1.01),
        ("plant.turbine.efficiency", 0.001, 0),
        ("plant.boiler.blowdown_share", 0.49, 0.5),
        ("plant.boiler.efficiency", 0.9, 1.2),
        ("plant.boiler.efficiency", {"load": [0.5, 1.0], "value": [0.8, 0.9]}, {"load": [1.0]}),
        ("plant.feed.deaerator_control", "sliding", "floating"),
        ("finance.tax_rate", 0.99, 1),
        ("finance.basis", "nominal", "Nominal"),
        ("study.years", 50, 51),
        ("study.years", 20, 20.5),
        ("study.currency", "EUR", "EURO"),
        ("study.title", "ä\nb", " \n"),
        ("study.date", "2028-02-29", "2026-02-30"),
        ("year.outages", [{"from": "02-29", "to": "03-31"}], [{"from": "02-30", "to": "03-31"}]),
        ("year.extra_running", True, 1),
        ("scenarios.central.power", {"start": 60.0, "change_per_year": 0.01}, {"change_per_year": 0.01}),
        ("scenarios.central.power", {"year": [2028], "value": [60.0]}, {"year": [2028], "start": 60.0}),
        ("capex.spend", [0.5, 0.5], []),
        ("capex.exchange", {"USD": 0.9}, {"USD": 0.0}),
        ("draws.seed", 0, -1),
        ("notes", {"tail": {"efficiency": "maker"}}, {"tail": {"efficiency": 1.0}}),
    ],
)
def test_limits_of_the_schema_are_those_of_the_reader(path: str, good: object, bad: object):
    *way, key = path.split(".")
    for value, wrong in ((good, False), (bad, True)):
        data = demo()
        data["drivers"] = []
        data["draws"] = {}
        at(data, tuple(way))[key] = value
        assert schema_refuses(data) is wrong, value
        assert reader_refuses(data) is wrong, value


def test_the_schema_is_plain_json_and_its_references_lead_somewhere():
    text = json.dumps(SCHEMA, allow_nan=False)
    assert set(re.findall(r'"#/\$defs/(\w+)"', text)) == set(SCHEMA["$defs"])


# -- the page of published values


def test_the_page_of_published_values_is_as_it_would_be_written():
    told = "run python tests/published_page.py"
    assert published_page.PAGE.read_text(encoding="utf-8") == published_page.page(), told
    developers = published_page.DEVELOPERS.read_text(encoding="utf-8")
    assert published_page.with_summary(developers) == developers, told


def test_every_status_is_a_known_one():
    for file in published_page.files():
        assert {
            word for status in published_page.by_status(file) for word in status.split(", ")
        } <= STATUS_WORDS


def test_every_published_table_is_named_by_a_test():
    for file in published_page.files():
        for table in published_page.contents(file):
            assert published_page.checked_in(file, table["table"]), f"{file}: {table['table']}"
