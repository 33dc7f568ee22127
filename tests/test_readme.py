"""The README keeps its word: commands are those of the complete check, excerpts are real, lists complete."""

import re
import tomllib
from collections import defaultdict
from pathlib import Path

import pytest

from appraise import cli
from appraise.capex import capital
from appraise.case.load import case_from
from appraise.case.model import Case
from appraise.chain import solve_physics
from appraise.output import balance_table
from appraise.results import run_summary, study_json
from appraise.study import Study, balances
from appraise.workbook.book import SHEETS

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
CHECK = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
LEFT_OUT = "[...]"


def blocks(language: str) -> list[str]:
    """Fenced blocks of one language."""
    return re.findall(rf"^```{language}\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)


def excerpt(command: str) -> list[str]:
    """The pieces of output that the README shows for a command."""
    (block,) = (block for block in blocks("console") if block.startswith(f"$ {command}\n"))
    return [piece for piece in block.removeprefix(f"$ {command}\n").split(f"{LEFT_OUT}\n") if piece]


def follows(pieces: list[str], text: str) -> None:
    """Every piece stands in the text, the first at its start, each after the one before."""
    at = 0
    for piece in pieces:
        found = text.find(piece.rstrip("\n"), at)
        assert found >= 0, f"no such output:\n{piece}"
        assert found == 0 or at > 0, "the excerpt does not begin where the output does"
        at = found + len(piece)


def test_the_two_commands_come_first_and_are_those_of_the_complete_check():
    demo, tests = (block.rstrip("\n") for block in blocks("sh")[:2])
    assert demo == (
        "python3 -m venv .venv && .venv/bin/pip install . && .venv/bin/appraise run inputs/marrowby.toml"
    )
    assert tests == ".venv/bin/pip install '.[test]' && .venv/bin/python -m pytest"
    lines = CHECK.splitlines()
    assert lines.index(demo) < lines.index(tests)
    assert README.index(tests) < README.index("\n## ")


def test_the_heat_balance_is_the_real_one(marrowby_study: Study):
    title = f"{marrowby_study.case.study.title}, design point: 40 MW, 98/46 °C"
    follows(
        excerpt("appraise balance inputs/marrowby.toml"),
        balance_table(balances(marrowby_study.case), title, states=False),
    )


def test_the_summary_is_the_real_one(marrowby_study: Study):
    text = f"{run_summary(marrowby_study)}\nwrote reports/marrowby.xlsx"
    follows(excerpt("appraise run inputs/marrowby.toml"), text)


def test_the_option_of_the_readme_is_solved_beside_the_others(marrowby_study: Study):
    (text,) = blocks("toml")
    demo = (ROOT / "inputs" / "marrowby.toml").read_text(encoding="utf-8")
    solved = {one.key: one for one in balances(case_from(tomllib.loads(f"{demo}\n{text}")))}
    added = set(solved) - {balance.key for balance in marrowby_study.balances}
    assert added == {"three-stage"}
    three, two = solved["three-stage"], solved["two-stage-subcooled"]
    assert three.extra_power_per_heat > two.extra_power_per_heat > 0.0


def edited_as_told(demo: str) -> str:
    """The demo with the bid of the README, in every list that the README names."""
    names = README.split("is added to `only` of")[1].split("`share_of` of")[0]
    named = re.findall(r"`([a-z-]+)`", names)
    *pay, priced = named
    assert priced == "condensers-unbid"
    for key in pay:
        head, found, rest = demo.partition(f'key = "{key}"\n')
        assert found, key
        demo = head + found + rest.replace('only = ["two-stage', 'only = ["three-stage", "two-stage', 1)
    demo = demo.replace('share_of = ["condenser",', f'share_of = ["{priced}", "condenser",')
    return f"{demo}\n{blocks('toml')[0]}"


def test_the_bid_of_the_readme_is_complete(marrowby_study: Study):
    """Every kind of item that the two-stage option with drain cooler pays for, the bid pays for too."""
    demo = (ROOT / "inputs" / "marrowby.toml").read_text(encoding="utf-8")
    case = case_from(tomllib.loads(edited_as_told(demo)))
    physics = solve_physics(case, marrowby_study.hours)
    bought = {one.option: one.items for one in capital(case, physics.sizes)}
    bid, other = defaultdict[str, float](float), defaultdict[str, float](float)
    for paid, option in ((bid, "three-stage"), (other, "two-stage-subcooled")):
        for item in bought[option]:
            paid[item.key] += item.amount
    assert set(other) - set(bid) == {"tail", "condenser"}
    assert set(bid) - set(other) == {"tail-as-bid", "condensers-unbid"}
    assert all(amount > 0.0 for amount in bid.values())
    assert bid["installation"] == pytest.approx(0.35 * (bid["condensers-unbid"] + bid["drain-cooler"]))


def test_the_hours_of_the_readme_are_those_of_the_demo():
    (block,) = blocks("csv")
    assert (ROOT / "inputs" / "marrowby-year.csv").read_text(encoding="utf-8").startswith(block)


def rows(section: str) -> list[str]:
    """First cells of the table of a section."""
    part = README.split(f"\n## {section}\n")[1].split("\n## ")[0]
    cells = [line.split("|")[1].strip() for line in part.splitlines() if line.startswith("|")]
    return cells[2:]


def test_the_sheets_are_those_of_the_workbook(marrowby_study: Study):
    assert rows("The workbook") == [sheet(marrowby_study).title for sheet in SHEETS]


def test_the_commands_are_those_of_the_program():
    shown = [name for name, command in cli.program.commands.items() if not command.hidden]
    assert [row.strip("`").split()[1] for row in rows("Commands, exit statuses, JSON")] == shown


def test_the_parts_of_the_json_are_named(marrowby_study: Study):
    parts = set(study_json(marrowby_study)) - {"study"}
    assert parts <= set(re.findall(r"`(\w+)`", README))


@pytest.mark.parametrize("text", [README, DEVELOPERS], ids=["README", "DEVELOPERS"])
def test_links_and_paths_lead_somewhere(text: str):
    for link in re.findall(r"\]\((?!https?:)([^)#]+)\)", text):
        assert (ROOT / link).exists(), link
    for path in re.findall(r"`((?:appraise|tests|inputs|\.ci)/[\w./-]*)`", text):
        assert (ROOT / path).exists(), path


def test_the_map_names_every_module():
    """Modules of the workbook by their folder alone, for they grow with its sheets."""
    package = Path(cli.__file__).parent
    named = set(re.findall(r"`(\w+)`", DEVELOPERS))
    for path in package.rglob("*.py"):
        if path.parent.name != "workbook" and path.stem not in ("__init__", "__main__"):
            assert path.stem in named, f"DEVELOPERS.md does not name {path.stem}"


def test_every_table_of_the_case_is_in_the_demo():
    """What the README points to as the commented example has it all."""
    demo = tomllib.loads((ROOT / "inputs" / "marrowby.toml").read_text(encoding="utf-8"))
    assert set(Case.model_fields) - set(demo) <= {"draws"}
