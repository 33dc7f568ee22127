"""Inputs bent at random: each is worked out soundly, or refused with the place of its fault."""

import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from cases import SERIES, toml_text
from fuzz import trial
from fuzz.mutate import outcomes, summary
from fuzz.mutations import CASE, SERIES_TEXT, Attempt
from fuzz.seeds import quick_case, rich_case

from appraise import output, study
from appraise.errors import CaseError, Problem, SolveError

NUMBER = 200
BALANCE = ("balance", CASE, "--json", "-")


def attempt(case: dict[str, Any], *arguments: str) -> Attempt:
    """An attempt on a case that is not bent."""
    files = {CASE: toml_text(case).encode(), SERIES: SERIES_TEXT.encode()}
    return Attempt(0, "nothing bent", files, arguments or BALANCE)


def test_bent_inputs_are_worked_out_or_refused() -> None:
    result = summary(outcomes(range(NUMBER)))
    assert result["failures"] == []
    assert result["accepted"] + result["refused"] == result["generated"] == NUMBER
    # Neither branch may be empty, or nothing was tried.
    assert result["accepted"] > NUMBER // 5
    assert result["refused"] > NUMBER // 5
    assert len(result["refused_by_reason"]) > 20


@pytest.mark.parametrize("case", [quick_case(), rich_case()])
def test_what_is_bent_was_sound_before(tmp_path: Path, case: dict[str, Any]) -> None:
    assert trial.tried(attempt(case), tmp_path).kind == "accepted"


def raising(error: BaseException) -> Callable[..., Any]:
    def failing(*arguments: Any) -> Any:
        raise error

    return failing


def endless(*arguments: Any) -> Any:
    while True:
        time.sleep(0.001)


@pytest.mark.parametrize(
    ("instead", "told"),
    [
        (raising(ZeroDivisionError("here")), "status 1: internal error: ZeroDivisionError: here"),
        (raising(SolveError("no root")), "status 1: Error: no root"),
        (raising(SystemExit("left")), "escaped: SystemExit"),
        (raising(CaseError([Problem("somewhere", "wrong")])), "a fault without a place"),
        (raising(CaseError([Problem("plant.feed", "one\n  and")])), "a refusal without form"),
        (raising(CaseError([Problem("plant.feed", "")])), "a fault without a place"),
        (endless, "more than 0.5 s"),
    ],
)
def test_a_failure_is_seen(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, instead: Callable[..., Any], told: str
) -> None:
    monkeypatch.setattr(study, "balances", instead)
    monkeypatch.setattr(trial, "LONGEST", 0.5 if instead is endless else trial.LONGEST)
    outcome = trial.tried(attempt(quick_case()), tmp_path)
    assert outcome.kind == "failed"
    assert outcome.reason.startswith(told)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ('{"options": [{"key": "a", "closure": NaN}]}', "JSON: NaN in the JSON"),
        ('{"options": [', "JSON: "),
        ('{"options": [{"key": "a", "closure": 1e-6}]}', "closure 1e-06 of a"),
        ('{"checks": [{"name": "closure over all hours", "passed": false, "value": 1}]}', "check closure"),
    ],
)
def test_unsound_results_are_seen(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, text: str, told: str
) -> None:
    monkeypatch.setattr(output, "json_text", lambda content: text)
    outcome = trial.tried(attempt(quick_case()), tmp_path)
    assert outcome.kind == "failed"
    assert outcome.reason.startswith(told)


def test_a_file_left_behind_is_seen(tmp_path: Path) -> None:
    (tmp_path / "left.tmp").write_bytes(b"")
    assert trial.tried(attempt(quick_case()), tmp_path).reason == "files left: ['left.tmp'], status 0"
