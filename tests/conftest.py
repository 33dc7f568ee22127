"""What every test has: arithmetic that raises, steady draws of examples, the demo study, solved once."""

import os
from collections.abc import Iterator

# One thread and one process for each worker: they share the processors already.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
if "PYTEST_XDIST_WORKER" in os.environ:
    os.environ.setdefault("APPRAISE_PROCESSES", "1")

import numpy as np
import pytest
import study_fixture
from hypothesis import settings

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
