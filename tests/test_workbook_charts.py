"""Charts as the file holds them: what is left unsaid there, programs guess differently."""

import io
import zipfile
from collections.abc import Sequence
from dataclasses import replace
from xml.etree.ElementTree import Element

import pytest
from defusedxml.ElementTree import fromstring

from appraise.workbook.cells import Page, Sheet, SheetFault
from appraise.workbook.charts import (
    HATCHED_SLOT,
    Axis,
    Chart,
    Series,
    area_duration_chart,
    bar_chart,
    line_chart,
    scatter_chart,
    tornado_chart,
)
from appraise.workbook.write import book_bytes

C = "{http://schemas.openxmlformats.org/drawingml/2006/chart}"
A = "{http://schemas.openxmlformats.org/drawingml/2006/main}"
XDR = "{http://schemas.openxmlformats.org/drawingml/2006/spreadsheetDrawing}"

FIRST = Series("first", "Data", "D2:G2")
SECOND = Series("second", "Data", "D3:G3")
YEARS = ("Data", "D1:G1")
AT = {"alt": "what it shows", "anchor": "B10"}

CHARTS = {
    "line": line_chart("Title", [FIRST, SECOND], YEARS, x="year", y="EUR/MWh", **AT),
    "scatter": scatter_chart(
        "Title",
        [
            Series("dome", "Data", "D2:G2", x="D1:G1", smooth=True),
            Series("states", "Data", "D3:G3", x="D1:G1", line=False, markers=True),
        ],
        x="entropy, kJ/(kg K)",
        y="temperature, °C",
        **AT,
    ),
    "clustered": bar_chart("Title", [FIRST, SECOND], YEARS, x="year", y="EUR", labels="0.0", **AT),
    "stacked": bar_chart("Title", [FIRST, SECOND], YEARS, x="year", y="EUR", stacked=True, **AT),
    "lying": bar_chart("Title", [FIRST, SECOND], YEARS, x="option", y="EUR", horizontal=True, **AT),
    "tornado": tornado_chart("Title", FIRST, SECOND, YEARS, y="change of NPV, EUR", **AT),
    "duration": area_duration_chart("Title", [FIRST, SECOND], YEARS, x=Axis("hour", step=1000), y="MW", **AT),
}


def data_sheet(charts: Sequence[Chart]) -> Sheet:
    page = Page("Data")
    page.row_of(1, "Year", "", [2027, 2028, 2029, 2030], "year heading")
    page.row_of(2, "first", "", [1.5, None, -3.0, "n/a"])
    page.row_of_formulas(3, "second", "", lambda c: f"={c}1*2", [4054.0, 4056.0, 4058.0, 4060.0])
    for chart in charts:
        page.chart(chart)
    return page.finish()


def parts_with(*charts: Chart) -> dict[str, Element]:
    data = book_bytes([data_sheet(charts)], title="t", author="a", subject="s", footer="f")
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        return {
            name: fromstring(archive.read(name))
            for name in archive.namelist()
            if name.startswith(("xl/charts/chart", "xl/drawings/drawing"))
        }


def xml_of(chart: Chart) -> Element:
    return parts_with(chart)["xl/charts/chart1.xml"]


def vals(element: Element, path: str) -> list[str | None]:
    return [
        found.get("val") for found in element.iterfind(".//" + "/".join(C + step for step in path.split("/")))
    ]


def axes(element: Element) -> list[Element]:
    return [found for found in element.iter() if found.tag in (C + "valAx", C + "catAx", C + "dateAx")]


@pytest.fixture(params=CHARTS)
def kind(request: pytest.FixtureRequest) -> str:
    return str(request.param)


def test_axes_are_shown_titled_and_not_linked_to_their_source(kind: str) -> None:
    found = axes(xml_of(CHARTS[kind]))
    assert len(found) == 2
    for axis in found:
        assert vals(axis, "delete") == ["0"]
        assert [one.get("sourceLinked") for one in axis.iterfind(C + "numFmt")] == ["0"]
        assert vals(axis, "majorTickMark") == ["out"]
        assert vals(axis, "minorTickMark") == ["none"]
        assert vals(axis, "title/overlay") == ([] if kind == "tornado" and axis is found[0] else ["0"])
        assert len(vals(axis, "axPos")) == 1
    assert [vals(axis, "axPos") for axis in found] == (
        [["l"], ["b"]] if kind in ("lying", "tornado") else [["b"], ["l"]]
    )
    assert [len(axis.findall(C + "majorGridlines")) for axis in found] == [1 if kind == "scatter" else 0, 1]


def test_nothing_lies_over_the_drawing(kind: str) -> None:
    chart = xml_of(CHARTS[kind])
    assert vals(chart, "chart/title/overlay") == ["0"]
    assert vals(chart, "legend/overlay") == ["0"]
    assert vals(chart, "roundedCorners") == ["0"]
    assert vals(chart, "plotVisOnly") == ["0"]
    assert vals(chart, "varyColors") == ["0"]


def test_values_are_stored_beside_the_references(kind: str) -> None:
    chart = xml_of(CHARTS[kind])
    numbers = [
        (ref.findtext(C + "f"), {pt.get("idx"): pt.findtext(C + "v") for pt in ref.iter(C + "pt")})
        for tag in ("val", "yVal")
        for holder in chart.iter(C + tag)
        for ref in holder.iter(C + "numRef")
    ]
    # The empty cell and the text are gaps, the formula's values are those that Python computed.
    first, second = (
        ("Data!$D$2:$G$2", {"0": 1.5, "2": -3.0}),
        ("Data!$D$3:$G$3", {"0": 4054.0, "1": 4056.0, "2": 4058.0, "3": 4060.0}),
    )
    assert [(f, {i: float(v or "") for i, v in points.items()}) for f, points in numbers] == [first, second]
    assert {count for holder in chart.iter(C + "numCache") for count in vals(holder, "ptCount")} == {"4"}


def test_categories_are_text_except_where_their_distance_counts() -> None:
    for kind, tag in [
        ("line", "strRef"),
        ("clustered", "strRef"),
        ("tornado", "strRef"),
        ("duration", "numRef"),
    ]:
        for category in xml_of(CHARTS[kind]).iter(C + "cat"):
            assert [one.tag for one in category] == [C + tag]
            assert [float(one.text or "") for one in category.iter(C + "v")] == [2027, 2028, 2029, 2030]


def test_lines_are_smooth_only_where_asked() -> None:
    assert vals(xml_of(CHARTS["line"]), "ser/smooth") == ["0", "0"]
    scatter = xml_of(CHARTS["scatter"])
    assert vals(scatter, "ser/smooth") == ["1", "0"]
    assert vals(scatter, "scatterStyle") == ["lineMarker"]
    assert vals(scatter, "ser/marker/symbol") == ["none", "diamond"]


def test_series_differ_by_more_than_colour(kind: str) -> None:
    series = list(xml_of(CHARTS[kind]).iter(C + "ser"))
    if kind == "scatter":
        assert [one.find(f"{C}spPr/{A}ln/{A}noFill") is None for one in series] == [True, False]
    elif kind == "line":
        assert vals_of_dash(series) == ["solid", "dash"]
    else:
        assert [one.find(f"{C}spPr/{A}solidFill") is not None for one in series] == [True, False]
        assert [one.find(f"{C}spPr/{A}pattFill") is not None for one in series] == [False, True]


def vals_of_dash(series: Sequence[Element]) -> list[str | None]:
    return [dash.get("val") for one in series for dash in one.iterfind(f"{C}spPr/{A}ln/{A}prstDash")]


def test_negative_bars_keep_their_fill() -> None:
    for kind in ("clustered", "stacked", "tornado"):
        assert vals(xml_of(CHARTS[kind]), "ser/invertIfNegative") == ["0", "0"]


def test_the_ends_of_a_driver_are_one_hue_full_and_hatched() -> None:
    low, high = replace(FIRST, slot=HATCHED_SLOT), replace(SECOND, slot=0)
    chart = xml_of(tornado_chart("T", low, high, YEARS, y="y", **AT))
    hatched, full = chart.iter(C + "ser")
    (pattern,), (fill,) = hatched.iter(A + "pattFill"), full.findall(f"{C}spPr/{A}solidFill/{A}srgbClr")
    assert [one.get("val") for one in pattern.findall(f"{A}fgClr/{A}srgbClr")] == [fill.get("val")]
    assert list(full.iter(A + "pattFill")) == []


def test_tornado_has_its_first_bar_on_top_and_its_scale_below() -> None:
    chart = xml_of(CHARTS["tornado"])
    category, value = axes(chart)
    assert vals(category, "scaling/orientation") == ["maxMin"]
    assert vals(category, "tickLblPos") == ["low"]
    assert vals(value, "crosses") == ["max"]
    assert vals(value, "tickLblPos") == ["nextTo"]
    assert (vals(chart, "overlap"), vals(chart, "gapWidth")) == (["100"], ["35"])
    assert (vals(chart, "barDir"), vals(chart, "grouping")) == (["bar"], ["clustered"])


def test_bars_stack_or_stand_side_by_side() -> None:
    stacked, side_by_side = xml_of(CHARTS["stacked"]), xml_of(CHARTS["clustered"])
    assert (vals(stacked, "grouping"), vals(stacked, "overlap")) == (["stacked"], ["100"])
    assert (vals(side_by_side, "grouping"), vals(side_by_side, "overlap")) == (["clustered"], ["0"])


def test_label_formats_do_not_follow_their_source() -> None:
    formats = [
        one for labels in xml_of(CHARTS["clustered"]).iter(C + "dLbls") for one in labels.iter(C + "numFmt")
    ]
    assert formats
    assert {(one.get("formatCode"), one.get("sourceLinked")) for one in formats} == {("0.0", "0")}


def test_hours_keep_their_distances() -> None:
    chart = xml_of(CHARTS["duration"])
    (axis,) = chart.iter(C + "dateAx")
    assert (vals(axis, "baseTimeUnit"), vals(axis, "auto"), vals(axis, "majorUnit")) == (
        ["days"],
        ["0"],
        ["1000"],
    )
    assert vals(chart, "grouping") == ["stacked"]


def test_every_chart_is_described_in_its_own_words() -> None:
    words = ['rises from "50" & more', "<falls>\nlater"]
    charts = [
        line_chart("T", [FIRST], YEARS, x="x", y="y", alt=alt, anchor=anchor)
        for alt, anchor in zip(words, ("A10", "A30"), strict=True)
    ]
    drawing = parts_with(*charts)["xl/drawings/drawing1.xml"]
    assert [one.get("descr") for one in drawing.iter(XDR + "cNvPr")] == words


def test_titles_may_follow_a_cell_and_labels_another() -> None:
    labelled = Series("old", "Data", "D3:G3", label_cell="A3")
    chart = line_chart("T", [labelled], YEARS, x="x", y="y", title_cell=("Data", "A2"), **AT)
    found = xml_of(chart)
    title = found.find(f"{C}chart/{C}title/{C}tx/{C}strRef")
    label = found.find(f".//{C}ser/{C}tx/{C}strRef")
    assert title is not None
    assert label is not None
    assert [title.findtext(C + "f"), title.findtext(f".//{C}v")] == ["Data!$A$2", "first"]
    assert [label.findtext(C + "f"), label.findtext(f".//{C}v")] == ["Data!$A$3", "second"]


def test_a_direct_label_replaces_its_legend_entry() -> None:
    direct = Series("first", "Data", "D2:G2", direct=True)
    found = xml_of(line_chart("T", [direct, SECOND], YEARS, x="x", y="y", **AT))
    assert vals(found, "dLbls/dLbl/idx") == ["3"]
    assert vals(found, "dLbls/dLbl/showSerName") == ["1"]
    assert vals(found, "legend/legendEntry/idx") == ["0"]
    alone = xml_of(line_chart("T", [direct], YEARS, x="x", y="y", **AT))
    assert list(alone.iter(C + "legend")) == []


def test_limits_of_an_axis_are_kept() -> None:
    chart = bar_chart("T", [FIRST], YEARS, x="x", y=Axis("y", "0.00", -5.0, 5.0, 2.5), **AT)
    value = axes(xml_of(chart))[1]
    assert (vals(value, "scaling/min"), vals(value, "scaling/max")) == (["-5"], ["5"])
    assert vals(value, "majorUnit") == ["2.5"]


def test_every_bar_is_named_and_years_may_be_named_by_steps() -> None:
    for kind in ("clustered", "tornado"):
        assert vals(xml_of(CHARTS[kind]), "catAx/tickLblSkip") == ["1"]
    yearly = replace(CHARTS["line"], x=Axis("year", "0", step=3.0))
    assert vals(xml_of(yearly), "catAx/tickLblSkip") == ["3"]
    assert vals(xml_of(yearly), "catAx/tickMarkSkip") == ["3"]


def test_text_may_be_larger_where_a_page_is_printed_smaller() -> None:
    large = xml_of(replace(CHARTS["clustered"], points=12.5))
    assert {look.get("sz") for look in large.iter(A + "defRPr")} == {"1250", "1450", "1150"}


def test_a_chart_needs_series_description_and_x() -> None:
    with pytest.raises(SheetFault, match="without a series"):
        line_chart("T", [], YEARS, x="x", y="y", **AT)
    with pytest.raises(SheetFault, match="without a description"):
        line_chart("T", [FIRST], YEARS, x="x", y="y", alt=" ", anchor="A1")
    with pytest.raises(SheetFault, match="series 'first' has no x"):
        scatter_chart("T", [FIRST], x="x", y="y", **AT)
