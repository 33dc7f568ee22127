"""The one pass over a saved workbook that adds what openpyxl has no call for.

Cached values of formulas (without them previewers, phones and pandas see nothing), descriptions of charts
for screen readers, label formats that do not follow their source, and fixed times in the archive, so that the
same study gives the same bytes.
"""

from __future__ import annotations

import io
import re
from collections.abc import Mapping, Sequence
from datetime import datetime, timedelta
from xml.sax.saxutils import escape, quoteattr
from zipfile import ZIP_DEFLATED, ZipFile, ZipInfo

from appraise import __version__
from appraise.workbook.values import ERROR_CODES, SheetFault, Value, clean_text, stored_text

ARCHIVE_TIME = (1980, 1, 1, 0, 0, 0)  # the earliest a zip archive knows
DAY_ZERO = datetime(1899, 12, 30)  # of the dates that the format counts, from March 1900 on
STAMP = b"2000-01-01T00:00:00Z"

_FORMULA_CELL = re.compile(
    rb'<c r="([A-Z]{1,3}[0-9]{1,7})"((?: s="[0-9]+")?)(?: t="[a-zA-Z]+")?>'
    rb"<f([^>]*)>(.*?)</f><v\s*/?>(?:</v>)?</c>",
    re.DOTALL,
)
_FORMULA = re.compile(rb"<f[ >/]")
_PICTURE_NAME = re.compile(rb'<((?:\w+:)?cNvPr)((?: (?!descr=)\w+="[^"]*")*)\s*(/?)>')
_TIME = re.compile(rb"(<dcterms:(created|modified)[^>]*>)[^<]*(</dcterms:)")
_MAKER = re.compile(rb"<Application>[^<]*</Application>\s*<AppVersion>[^<]*</AppVersion>")
_LABEL_FORMAT = re.compile(rb'(<(?:\w+:)?numFmt formatCode="[^"]*")\s*(/>)')


def packed(
    saved: bytes, cached: Sequence[Mapping[str, Value]], descriptions: Sequence[Sequence[str]]
) -> bytes:
    """The finished archive.

    saved : the workbook as openpyxl saved it
    cached : for each sheet in its order, address of every formula cell -> its value
    descriptions : for each sheet that has charts, in order, the description of every chart
    Raises SheetFault where a formula or a chart is left without.
    """
    values = {f"xl/worksheets/sheet{number}.xml": one for number, one in enumerate(cached, 1)}
    alts = {f"xl/drawings/drawing{number}.xml": one for number, one in enumerate(descriptions, 1)}
    result = io.BytesIO()
    with ZipFile(io.BytesIO(saved)) as source, ZipFile(result, "w", ZIP_DEFLATED, compresslevel=6) as target:
        absent = (values.keys() | alts.keys()) - set(source.namelist())
        if absent:
            raise SheetFault(f"the saved workbook has no {', '.join(sorted(absent))}")
        for name in source.namelist():
            part = source.read(name)
            if name.startswith("xl/worksheets/sheet"):
                part = with_values(part, values.get(name, {}), name)
            elif name.startswith("xl/drawings/drawing"):
                part = with_descriptions(part, alts.get(name, ()), name)
            elif name.startswith("xl/charts/chart"):
                part = _LABEL_FORMAT.sub(rb'\1 sourceLinked="0"\2', part)
            elif name == "docProps/core.xml":
                part = _TIME.sub(rb"\g<1>" + STAMP + rb"\g<3>", part)
            elif name == "docProps/app.xml":
                part = _MAKER.sub(maker(__version__), part)
            target.writestr(_entry(name), part)
    return result.getvalue()


def maker(version: str) -> bytes:
    """Which program wrote the file; the format takes a version as "1.0203" only."""
    major, minor, patch = (int(number) for number in version.split(".")[:3])
    told = f"<Application>appraise</Application><AppVersion>{major}.{minor:02d}{patch:02d}</AppVersion>"
    return told.encode()


def with_values(part: bytes, values: Mapping[str, Value], name: str) -> bytes:
    """A sheet's XML with the value of every formula. Raises SheetFault if any is left over."""
    filled = 0

    def fill(found: re.Match[bytes]) -> bytes:
        nonlocal filled
        address, style, attributes, formula = found.groups()
        try:
            kind, text = _stored(values[address.decode()])
        except KeyError:
            raise SheetFault(f"{name}: no value for the formula in {address.decode()}") from None
        filled += 1
        return b'<c r="%b"%b%b><f%b>%b</f><v>%b</v></c>' % (address, style, kind, attributes, formula, text)

    done = _FORMULA_CELL.sub(fill, part)
    there = len(_FORMULA.findall(part))
    if not filled == there == len(values):
        raise SheetFault(f"{name}: {there} formulas, {len(values)} values, {filled} filled")
    return done


def with_descriptions(part: bytes, descriptions: Sequence[str], name: str) -> bytes:
    """A drawing's XML with the description of every chart. Raises SheetFault where numbers differ."""
    there = len(_PICTURE_NAME.findall(part))
    if there != len(descriptions):
        raise SheetFault(f"{name}: {there} charts, {len(descriptions)} descriptions")
    following = iter(descriptions)

    def describe(found: re.Match[bytes]) -> bytes:
        text = quoteattr(clean_text(next(following)), {"\n": "&#10;"}).encode()
        return b"<%b%b descr=%b%b>" % (found[1], found[2], text, found[3])

    return _PICTURE_NAME.sub(describe, part)


def _stored(value: Value) -> tuple[bytes, bytes]:
    """Type attribute and text of a cached value."""
    if isinstance(value, bool):
        return b' t="b"', b"1" if value else b"0"
    if isinstance(value, datetime):
        return b"", repr((value - DAY_ZERO) / timedelta(days=1)).encode()
    if isinstance(value, int | float):
        return b"", repr(value).encode()
    if value in ERROR_CODES:
        return b' t="e"', str(value).encode()
    return b' t="str"', escape(stored_text(value or "")).encode()


def _entry(name: str) -> ZipInfo:
    """An archive entry that carries no clock and no operating system."""
    entry = ZipInfo(name, ARCHIVE_TIME)
    entry.compress_type = ZIP_DEFLATED
    entry.create_system = 0
    entry.external_attr = 0
    return entry
