"""A new interpreter for every call: what it loads, what it prints, and that it answers at all."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
HEAVY = {"CoolProp", "numpy", "pandas", "openpyxl", "scipy", "pydantic"}

# Runs the program, then writes the top names of everything that was loaded to standard error.
REPORTING = """
import json, sys
from appraise.cli import main
status = main(sys.argv[1:])
print(json.dumps(sorted({name.split(".")[0] for name in sys.modules})), file=sys.stderr)
sys.exit(status)
"""


def fresh(*arguments: str) -> tuple[subprocess.CompletedProcess[str], set[str]]:
    """The finished call, and what it had loaded at its end."""
    done = subprocess.run(
        [sys.executable, "-c", REPORTING, *arguments], cwd=ROOT, capture_output=True, text=True, check=False
    )
    *told, loaded = done.stderr.splitlines()
    assert not told, told
    return done, set(json.loads(loaded))


@pytest.mark.parametrize("command", [(), ("new",), ("check",), ("balance",), ("run",)])
def test_help_loads_nothing_heavy_and_prints_nothing_else(command: tuple[str, ...]) -> None:
    done, loaded = fresh(*command, "--help")
    assert done.returncode == 0
    assert done.stdout.startswith(f"Usage: {' '.join(('appraise', *command))} [OPTIONS]")
    assert "  --help " in done.stdout.splitlines()[-1] or not command
    assert not loaded & HEAVY


def test_version_loads_nothing_heavy() -> None:
    from appraise import __version__

    done, loaded = fresh("--version")
    assert done.stdout == f"appraise {__version__}\n"
    assert not loaded & HEAVY


def test_check_needs_neither_steam_tables_nor_workbooks() -> None:
    done, loaded = fresh("check", "inputs/marrowby.toml")
    assert done.returncode == 0
    assert not loaded & {"CoolProp", "openpyxl", "scipy", "pandas"}


def test_balance_needs_no_workbooks() -> None:
    done, loaded = fresh("balance", "inputs/marrowby.toml")
    assert done.returncode == 0
    assert "CoolProp" in loaded
    assert not loaded & {"openpyxl", "pandas"}


def test_the_module_is_the_program() -> None:
    called = [sys.executable, "-m", "appraise", "--help"]
    done = subprocess.run(called, cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout == fresh("--help")[0].stdout
    assert done.stderr == ""
