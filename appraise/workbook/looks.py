"""How cells look: a kind of content ("money"), alone or with a variant ("money input").

A style name is a kind, or a kind and a variant with a space between: `"percent1"`, `"money total"`,
`"year heading"`. What a look means never rests on colour alone: inputs have a dotted frame, values of the run
are in italics, totals carry a rule above, so that a page printed in grey reads the same.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

FONT = "Calibri"  # Carlito has the same widths where Calibri is missing
BODY_POINTS = 10.0
REDUCED_CHART_POINTS = 12.5  # text of charts on wide sheets, which are printed at about two thirds
REDUCED_YEARS_POINTS = 10.5  # of those with years along the axis, which stand close

SLATE = "2F3E4E"
ACCENT = "1D6A72"
GREY = "595959"
RULE = "A6A6A6"
PALE = "EEF1F4"
INPUT_FILL = "E2ECF7"
WHITE = "FFFFFF"
BLACK = "000000"
GOOD = "1E5B3A"
GOOD_FILL = "E3F1E8"
BAD = "8C1C13"
CAUTION = "7A4B00"
CAUTION_FILL = "FCEBCB"

GENERAL = "General"
TEXT_FORMAT = "@"

NUMBER_FORMATS: Mapping[str, str] = {
    "general": GENERAL,
    "number": "#,##0.00",
    "integer": "#,##0",
    "number1": "#,##0.0",
    "number2": "#,##0.00",
    "number3": "#,##0.000",
    "number4": "#,##0.0000",
    "money": '#,##0;-#,##0;"–"',
    "money2": '#,##0.00;-#,##0.00;"–"',
    "thousand": '#,##0.0,;-#,##0.0,;"–"',  # of money: the cell holds all of it, the page shows thousands
    "tiny": "0.0E+00",  # residuals, which have no decimal that matters
    "percent0": "0%",
    "percent1": "0.0%",
    "percent2": "0.00%",
    "year": "0",
    "factor": "0.0000",
    "date": "yyyy-mm-dd",
    "hour": "yyyy-mm-dd hh:mm",
}


@dataclass(frozen=True, slots=True)
class Look:
    """One cell style. Colours are RRGGBB; borders name a line style of the format; "" is none of either."""

    number_format: str = GENERAL
    points: float = BODY_POINTS
    bold: bool = False
    italic: bool = False
    colour: str = BLACK
    fill: str = ""
    top: str = ""
    bottom: str = ""
    frame: str = ""
    border_colour: str = RULE
    across: str = "general"
    upright: str = "center"
    wrap: bool = False
    shrink: bool = False
    indent: int = 0
    unlocked: bool = False


@dataclass(frozen=True, slots=True)
class Highlight:
    """What a conditional format does to a cell: font colour, weight and fill."""

    colour: str
    fill: str
    bold: bool = True
    italic: bool = False


HIGHLIGHTS: Mapping[str, Highlight] = {
    "ok": Highlight(GOOD, GOOD_FILL),
    "fail": Highlight(WHITE, BAD),
    "caution": Highlight(CAUTION, CAUTION_FILL),
    "negative": Highlight(BAD, "", bold=False),
    "chosen": Highlight(SLATE, PALE),
    "faded": Highlight(RULE, "", bold=False, italic=True),
}

# A number that outgrows its column is written smaller, not as a row of #.
_NUMBERS: Mapping[str, Look] = {
    kind: Look(number_format=code, across="right", shrink=True) for kind, code in NUMBER_FORMATS.items()
}

_TEXTS: Mapping[str, Look] = {
    "text": Look(across="left"),
    "text_wrap": Look(across="left", wrap=True),
    "text_right": Look(across="right", shrink=True),
    "text_centre": Look(across="center"),
}

_FIXED: Mapping[str, Look] = {
    "title": Look(points=16, bold=True, colour=SLATE, across="left"),
    "subtitle": Look(points=11, colour=GREY, across="left"),
    "section": Look(points=12, bold=True, colour=SLATE, bottom="medium", border_colour=SLATE, across="left"),
    "heading": Look(bold=True, colour=WHITE, fill=SLATE, across="center", wrap=True),
    "heading_left": Look(bold=True, colour=WHITE, fill=SLATE, across="left", wrap=True),
    "label": Look(across="left"),
    "label_indent": Look(across="left", indent=1),
    "label_wrap": Look(across="left", wrap=True),
    "label_total": Look(bold=True, top="thin", border_colour=SLATE, across="left"),
    "unit": Look(colour=GREY, across="left"),
    "unit_total": Look(colour=GREY, top="thin", border_colour=SLATE, across="left"),
    "note": Look(points=9, colour=GREY, across="left"),
    "note_wrap": Look(points=9, colour=GREY, across="left", wrap=True),
    "note_wrap_indent": Look(points=9, colour=GREY, across="left", wrap=True, indent=1),
    "verdict": Look(points=14, bold=True, colour=ACCENT, across="left", wrap=True),
    "ok": Look(bold=True, colour=GOOD, fill=GOOD_FILL, across="center"),
    "fail": Look(bold=True, colour=WHITE, fill=BAD, across="center"),
    "caution": Look(bold=True, colour=CAUTION, fill=CAUTION_FILL, across="center"),
    # Looks like an input in the legend, but stays locked.
    "sample_input": Look(fill=INPUT_FILL, frame="dotted", border_colour=ACCENT, across="right"),
    "link": Look(colour=ACCENT, across="left", bottom="hair", border_colour=ACCENT),
}


def _variants(kind: str, look: Look) -> dict[str, Look]:
    """The look under every variant of its kind."""
    # Typed over, "07-06" or "-20%" would become a date or a number, were the cell not told to hold text.
    typed = TEXT_FORMAT if kind in _TEXTS else look.number_format
    frame = replace(look, fill=INPUT_FILL, frame="dotted", border_colour=ACCENT, unlocked=True)
    return {
        kind: look,
        f"{kind} input": replace(frame, number_format=typed),
        f"{kind} as run": replace(look, italic=True, colour=GREY),
        f"{kind} as run total": replace(
            look, italic=True, bold=True, colour=GREY, top="thin", border_colour=SLATE
        ),
        f"{kind} helper": replace(look, points=9, colour=GREY),
        f"{kind} total": replace(look, bold=True, top="thin", border_colour=SLATE),
        f"{kind} bold": replace(look, bold=True),
        f"{kind} key": replace(look, bold=True, points=14, colour=SLATE, bottom="thin"),
        f"{kind} heading": replace(
            look, bold=True, colour=WHITE, fill=SLATE, across="center", wrap=True, shrink=False
        ),
    }


STYLES: Mapping[str, Look] = {
    **{
        name: look
        for kind, base in {**_NUMBERS, **_TEXTS}.items()
        for name, look in _variants(kind, base).items()
    },
    **_FIXED,
}

LEGEND: tuple[tuple[str, str, str], ...] = (
    ("sample_input", "input", "may be changed: unlocked, pale blue, dotted frame"),
    ("general", "live", "a formula: follows the inputs"),
    ("general as run", "as run", "in italics: value of the run, does not follow a changed input"),
    ("general total", "total", "sum of the rows above it"),
)
"""Style, sample text and meaning of what a reader has to tell apart."""


def is_input(style: str) -> bool:
    """Whether cells of this style are left unlocked."""
    return STYLES[style].unlocked
