"""What every test has: arithmetic that raises, steady draws of examples, calls, the demo study."""

import os
from collections.abc import Iterator
from pathlib import Path

# One thread and one process for each worker: they share the processors already.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
if "PYTEST_XDIST_WORKER" in os.environ:
    os.environ.setdefault("APPRAISE_PROCESSES", "1")

import numpy as np
import pytest
import study_fixture
from calls import Answer, Call
from cases import minimal_case, write_case
from hypothesis import settings

from appraise import cli
from appraise.case.load import LoadedCase
from appraise.study import Study

settings.register_profile("steady", derandomize=True, deadline=None)
settings.load_profile("steady")


@pytest.fixture(scope="session", autouse=True)
def loud_arithmetic() -> Iterator[None]:
    """An invalid operation, an overflow or a division by zero is an error, never a silent NaN."""
    with np.errstate(invalid="raise", over="raise", divide="raise"):
        yield


@pytest.fixture(scope="session")
def marrowby() -> LoadedCase:
    """The demo case with its hours."""
    return study_fixture.marrowby()


@pytest.fixture(scope="session")
def marrowby_study(loud_arithmetic: None) -> Study:
    """Everything that the demo case asks for."""
    return study_fixture.marrowby_study()


@pytest.fixture
def call(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Call:
    """Calls the program in a folder of its own."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("APPRAISE_DEBUG", raising=False)

    def called(*arguments: str) -> Answer:
        capsys.readouterr()
        status = cli.main(arguments)
        told = capsys.readouterr()
        assert "Traceback" not in told.out + told.err
        return Answer(status, told.out, told.err)

    return called


@pytest.fixture
def case(tmp_path: Path) -> Path:
    """The small case in the folder of the calls."""
    return write_case(tmp_path, minimal_case())
