"""Workbooks to be read: small ones of the two sheets that matter, and other cells put into them."""

import io
import re
from collections.abc import Callable, Iterator, Mapping
from pathlib import Path
from types import SimpleNamespace
from typing import Any
from zipfile import ZipFile

from cases import minimal_case, write_case

from appraise.case.load import LoadedCase, load_case
from appraise.case.model import Case
from appraise.workbook.hours import hours_sheet
from appraise.workbook.input_rows import input_rows
from appraise.workbook.inputs import inputs_sheet
from appraise.workbook.write import book_bytes

INPUTS, HOURS = "xl/worksheets/sheet1.xml", "xl/worksheets/sheet2.xml"


def two_sheets(loaded: LoadedCase, case: Case | None = None) -> bytes:
    """A workbook with the sheets `Inputs` and `Hours` alone, of the case that was read or of another."""
    study: Any = SimpleNamespace(case=case or loaded.case, capital=(), hours=loaded.hours, loaded=loaded)
    sheets = [inputs_sheet(study), hours_sheet(study)]
    return book_bytes(sheets, title="t", author="a", subject="s", footer="f")


def small_book(folder: Path, data: Mapping[str, Any] | None = None, **more: Any) -> Path:
    """A small case written to a folder, and the workbook of it in a folder of its own."""
    loaded = load_case(write_case(folder, data or minimal_case(), **more))
    path = folder / "book" / "book.xlsx"
    path.parent.mkdir()
    path.write_bytes(two_sheets(loaded))
    return path


def with_parts(content: bytes, change: Callable[[str, bytes], bytes | None]) -> bytes:
    """The archive with every part changed, or left out where the change is None."""
    result = io.BytesIO()
    with (
        ZipFile(io.BytesIO(content)) as source,
        ZipFile(result, "w") as target,
    ):
        for name in source.namelist():
            part = change(name, source.read(name))
            if part is not None:
                target.writestr(name, part)
    return result.getvalue()


def with_part(content: bytes, name: str, change: Callable[[bytes], bytes | None]) -> bytes:
    """The archive with one part changed or left out."""
    return with_parts(content, lambda other, part: change(part) if other == name else part)


def with_cells(content: bytes, cells: Mapping[str, str], sheet: str = INPUTS) -> bytes:
    """The workbook with other XML for some cells, by address; "{style}" in it is the style of the old one."""

    def change(part: bytes) -> bytes:
        text = part.decode()
        for address, xml in cells.items():
            pattern = rf'<c r="{address}" s="(\d+)"[^>]*?(?:/>|>.*?</c>)'
            new, times = re.subn(pattern, lambda old: xml.replace("{style}", old[1]), text, flags=re.DOTALL)  # noqa: B023
            assert times == 1, address
            text = new
        return text.encode()

    return with_part(content, sheet, change)


def addresses(case: Case, content: bytes) -> dict[str, str]:
    """Address of the value of every input, by path."""
    with ZipFile(io.BytesIO(content)) as archive:
        text = archive.read(INPUTS).decode()
    rows = dict(
        (path, row)
        for row, path in re.findall(r'<c r="A(\d+)"[^>]*><is><t(?: [^>]*)?>([^<]*)</t></is></c>', text)
    )
    return {row.path: f"C{rows[row.path]}" for row in input_rows(case) if row.path in rows}


def typed(address: str, value: object) -> tuple[str, str]:
    """Address and XML of a cell with a value typed into it, its style kept."""
    if value is None:
        return address, f'<c r="{address}" s="{{style}}"/>'
    if isinstance(value, bool):
        return address, f'<c r="{address}" s="{{style}}" t="b"><v>{int(value)}</v></c>'
    if isinstance(value, str):
        return address, f'<c r="{address}" s="{{style}}" t="inlineStr"><is><t>{value}</t></is></c>'
    return address, f'<c r="{address}" s="{{style}}"><v>{value!r}</v></c>'


def with_inputs(content: bytes, case: Case, values: Mapping[str, object]) -> bytes:
    """The workbook with other values of some inputs, by path."""
    at = addresses(case, content)
    return with_cells(content, dict(typed(at[path], value) for path, value in values.items()))


def arrays_of(loaded: LoadedCase) -> Iterator[tuple[str, bytes | None]]:
    """The bits of all columns of the hours."""
    hours = loaded.hours
    for name in ("time", "heat_MW", "outdoor_C", "supply_C", "return_C", "power_price"):
        values = getattr(hours, name)
        yield name, None if values is None else values.tobytes()
    for name, values in hours.other_prices.items():
        yield name, values.tobytes()
