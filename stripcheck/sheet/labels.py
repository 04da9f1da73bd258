"""Labels of the workbook's pages that are not those of an input: what writes a page and what reads one share them."""

from __future__ import annotations

from stripcheck.inputs import SIDE_WORDS

PROPELLER, ENGINE, TABLES = "Propeller", "Engine", "Tables of the manual"
FLAP_HEADER = ("Setting", "Deflection [°]", "", "Deflection, SI", "Uses", "Stall speed [kt]", "At mass [kg]", "Drag added",
               "Greatest lift coefficient")  # fmt: skip
FLAP_LEAST, FLAP_MOST = "Least deflection", "Most deflection"  # the rows that close the flap table
GROUND_HEADER = ("Ground", "Rolling", "Braking", "Take-off corr.", "Source of the coefficients", "Landing corr.")

# The manual's figures at the end of the sheet Aircraft: rows of up to eight values; one with more goes on in the row below,
# under the same label. What stands behind REST in a label is for the reader alone.
FIGURES = {"roll": ("Roll", "m"), "distance": ("Over 50 ft", "m"), "rate": ("Rate of climb", "ft/min")}
FIRST_VALUE, VALUES_IN_ROW = 2, 8  # columns B to I
REST = ": "
CARRIED = " carried"  # behind a figure that is not the manual's, so that the cell holds a text


def table_row(side: str, what: str) -> str:
    """Label of a row of a side's tables: "figures", "pages", "temperatures", "page 1" ...

    >>> table_row("takeoff", "page 1")
    'Take-off tables, page 1'
    """
    return f"{SIDE_WORDS[side]} tables, {what}"


def figure_row(side: str, figure: str, page: int, line: int) -> str:
    """Label of a line of a page, both counted from 1.

    >>> figure_row("climb", "rate", 1, 2)
    'Climb, rate of climb [ft/min], page 1, line 2'
    """
    words, unit = FIGURES[figure]
    return f"{SIDE_WORDS[side]}, {words.lower()} [{unit}], page {page}, line {line}"
