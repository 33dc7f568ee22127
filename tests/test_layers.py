"""Who may import whom: physics knows no money, one module knows CoolProp, only the workbook openpyxl."""

import ast
from collections.abc import Iterator, Mapping
from graphlib import TopologicalSorter
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "appraise"
LONGEST_MODULE = 330  # lines

# From the ground up: a module imports only from those before it. The workbook is one floor: its modules may
# import each other as long as there is no circle, so that a new sheet needs no line here.
_FLOORS = """
    errors numerics workers
    case.words case.kinds case.fields case.network case.plant case.money case.model case.hours case.paths
    case.consistency case.doubts case.archive case.sheet_parts case.sheets case.book_layout
    case.book_hours case.book_rows case.book case.load
    steam steam_fits
    cycle.condensers cycle.turbine cycle.plant cycle.feedwater cycle.stages cycle.shells cycle.energy
    cycle.task cycle.rests cycle.sliding cycle.passes cycle.solve
    cycle.calibrate cycle.design cycle.limits cycle.balance
    demand operate year sizing
    correlations published_costs item_money capex estimates
    prices timeline cash_flow measures emissions
    trade chain moves sensitivity levers sampling response draws grid optimum checks study
    workbook
    tables output results files reference_keys reference_schema reference starting console cli __main__
"""
FLOORS = _FLOORS.split()

# Outside libraries that take time to load or that are meant to stay in one place: who may import them.
HEAVY = {
    "CoolProp": {"steam"},
    "openpyxl": {"workbook"},
    "click": {"cli", "console"},
    "pydantic": {"workbook", *(floor for floor in FLOORS if floor.startswith("case."))},
    "pydantic_core": {floor for floor in FLOORS if floor.startswith("case.")},
}


def module_name(path: Path) -> str:
    """`cycle.design` for appraise/cycle/design.py; a folder's own file has the folder's name."""
    parts = path.relative_to(PACKAGE).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


MODULES = {module_name(path): path for path in sorted(PACKAGE.rglob("*.py"))}
FOLDERS = {"", "case", "cycle", "workbook"}  # their own files hold a docstring, and the first the version


def floor_of(module: str) -> str:
    return "workbook" if module.startswith("workbook.") else module


def imported(module: str) -> Iterator[tuple[str, bool]]:
    """Absolute name of everything a module imports anywhere, and whether only for the type checker."""
    tree = ast.parse(MODULES[module].read_text(encoding="utf-8"))
    typing_only = {
        id(inner)
        for node in ast.walk(tree)
        if isinstance(node, ast.If) and ast.unparse(node.test) == "TYPE_CHECKING"
        for part in node.body
        for inner in ast.walk(part)
    }
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((alias.name, id(node) in typing_only) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{module}: relative import"
            for alias in node.names:
                whole = f"{node.module}.{alias.name}"
                is_module = whole.removeprefix("appraise.") in MODULES
                yield (whole if is_module else str(node.module)), id(node) in typing_only


def inner_imports(module: str) -> Iterator[tuple[str, bool]]:
    """The package's own modules that a module imports."""
    for name, typing_only in imported(module):
        if name.split(".")[0] == "appraise":
            yield name.removeprefix("appraise").lstrip("."), typing_only


def test_every_module_has_its_floor() -> None:
    assert len(set(FLOORS)) == len(FLOORS)
    assert {floor_of(module) for module in MODULES if module not in FOLDERS} <= set(FLOORS)


@pytest.mark.parametrize("module", sorted(set(MODULES) - FOLDERS))
def test_a_module_imports_only_from_below(module: str) -> None:
    height = FLOORS.index(floor_of(module))
    for name, _ in inner_imports(module):
        if name in FOLDERS:
            assert name == "", f"{module} imports the folder {name}"
            continue
        below = FLOORS.index(floor_of(name))
        same_floor = floor_of(name) == "workbook" == floor_of(module)
        assert below < height or same_floor, f"{module} imports {name}, which is not below it"


def test_no_circle_within_the_workbook() -> None:
    graph: Mapping[str, set[str]] = {
        module: {name for name, typing_only in inner_imports(module) if not typing_only and name in MODULES}
        for module in MODULES
    }
    tuple(TopologicalSorter(graph).static_order())  # raises CycleError, naming the circle


@pytest.mark.parametrize("folder", sorted(FOLDERS))
def test_a_folders_own_file_imports_nothing(folder: str) -> None:
    assert not list(imported(folder))


@pytest.mark.parametrize("library", sorted(HEAVY))
def test_a_library_stays_in_its_place(library: str) -> None:
    users = {floor_of(m) for m in MODULES for name, _ in imported(m) if name.split(".")[0] == library}
    assert users, f"nobody imports {library}"
    assert users <= HEAVY[library]


def test_only_the_command_line_and_its_door_know_the_command_line() -> None:
    users = {module for module in MODULES for name, _ in inner_imports(module) if name == "cli"}
    assert users == {"__main__"}


@pytest.mark.parametrize("module", sorted(MODULES))
def test_a_module_is_no_longer_than_one_can_read(module: str) -> None:
    lines = len(MODULES[module].read_text(encoding="utf-8").splitlines())
    assert lines <= LONGEST_MODULE
