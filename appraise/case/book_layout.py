"""Where a workbook keeps the case it was made from: shared by its sheets and its reader.

`Inputs` has one value of the case in each row, under `HEADINGS`; `Hours` has the series of one year.
Rows and columns count from 1.
"""

INPUTS, HOURS = "Inputs", "Hours"

PATH, WORDS, VALUE, AS_RUN, CHANGED, UNIT, ACTS, NOTE = range(1, 9)
HEADINGS = ("path", "what it is", "value", "as run", "changed", "unit", "acts", "source or note")
HEADING_ROW = 4
ACTIONS = ("live", "run again", "text")
"""How a change acts; a row that names none of them in its column `ACTS` holds no value of the case."""
BLANK_NOTE = "blank:"
"""Begins a note that says what a blank stands for, and is no note of the case."""

HOURS_HEADER_ROW = 5  # the names of the columns
HOURS_HASH_ROW = 4
HOURS_FIRST_ROW = 9  # of the numbers
HASH_OF_FILE = "SHA-256 of the file: "
HASH_OF_ROWS = "SHA-256 of the rows as comma-separated text: "
