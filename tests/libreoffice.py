"""LibreOffice as a second opinion on workbooks: it computes every formula again, whatever values are stored.

Its profile is told to recalculate on loading; left alone it trusts the stored values and proves nothing.
"""

import math
import shutil
import subprocess
from collections.abc import Mapping, Sequence
from datetime import datetime
from pathlib import Path

import openpyxl
import pytest
from openpyxl.utils.escape import unescape

from appraise.workbook.addresses import ref
from appraise.workbook.cells import Sheet

TIMEOUT_S = 300
RELATIVE_TOLERANCE = 1e-9
ABSOLUTE_TOLERANCE = 1e-9  # for what should be zero: a difference of large numbers keeps this much

ALWAYS_RECALCULATE = """<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load">
<prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>
"""

Recalculated = dict[str, dict[str, object]]


def available() -> bool:
    """Whether LibreOffice can be run here."""
    return shutil.which("soffice") is not None


needs_libreoffice = pytest.mark.skipif(
    not available(), reason="LibreOffice (soffice) is not installed, nothing recalculates the workbook"
)


def recalculate(path: Path, folder: Path) -> Recalculated:
    """Sheet -> address -> value, as LibreOffice computes them from the formulas alone.

    folder : an existing folder for the profile and the recalculated copy
    """
    profile = folder / "profile"
    (profile / "user").mkdir(parents=True, exist_ok=True)
    (profile / "user" / "registrymodifications.xcu").write_text(ALWAYS_RECALCULATE, encoding="utf-8")
    out = folder / "recalculated"
    command = [
        "soffice",
        "--headless",
        "--norestore",
        f"-env:UserInstallation={profile.resolve().as_uri()}",
        "--convert-to",
        "xlsx:Calc MS Excel 2007 XML",
        "--outdir",
        str(out),
        str(path),
    ]
    run = subprocess.run(command, capture_output=True, text=True, timeout=TIMEOUT_S, check=False)
    copy = out / path.with_suffix(".xlsx").name
    if run.returncode or not copy.exists():
        raise RuntimeError(f"LibreOffice did not convert {path}: {run.stdout}{run.stderr}")
    return values_in(copy)


def values_in(path: Path) -> Recalculated:
    """Sheet -> address -> the value stored in a workbook."""
    book = openpyxl.load_workbook(path, data_only=True)
    return {
        page.title: {cell.coordinate: cell.value for row in page.iter_rows() for cell in row} for page in book
    }


def differences(sheets: Sequence[Sheet], found: Mapping[str, Mapping[str, object]]) -> list[str]:
    """Every formula whose value in `found` is another, as "Sheet!A1: =formula is x, expected y"."""
    return [
        f"{sheet.title}!{ref(*place)}: {cell.formula} is {value!r}, expected {cell.value!r}"
        for sheet in sheets
        for place, cell in sheet.cells.items()
        if cell.formula
        for value in [found[sheet.title].get(ref(*place))]
        if not same(value, cell.value)
    ]


def same(found: object, expected: object) -> bool:
    """Whether a formula's value is the one expected: numbers to 1e-9, all else exactly, "" as no value."""
    if isinstance(expected, bool) or isinstance(found, bool):
        return type(found) is type(expected) and found == expected
    if isinstance(expected, int | float):
        return isinstance(found, int | float) and math.isclose(
            found, expected, rel_tol=RELATIVE_TOLERANCE, abs_tol=ABSOLUTE_TOLERANCE
        )
    if isinstance(expected, datetime):
        return found == expected
    # "_x0041_" is stored as "_x005F_x0041_", which openpyxl leaves so in results of formulas.
    return (unescape(found) if isinstance(found, str) else found or "") == expected
