"""The Method sheet: how the figures come about, what was taken for granted, and the tables that formulas look up."""

from __future__ import annotations

import math
from datetime import datetime

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck import __version__
from stripcheck.caution import CAUTION
from stripcheck.chain import Chain
from stripcheck.sheet import styles
from stripcheck.sheet.formulas import RUN_TABLE
from stripcheck.sheet.pages import Pages, words_places, write_header, write_heading

SHEET = "Method"
TABLE_ROW = 6
GRANTED, METHODS = "Taken for granted", "Method"  # headings
NOTHING_GRANTED = "Nothing: every value was given."
LINE = 125  # characters that fit on a line of the page

METHOD = (
    "Air: ISO 2533 standard atmosphere. QNH and elevation give the pressure at the strip, pressure and temperature the "
    "density; humidity counts through the virtual temperature.",
    "Speeds: stall speeds of the card, carried to mass and flap through the lift coefficient. Lift-off, screen, approach and "
    "touchdown speeds are multiples of them.",
    "Thrust: a fixed-pitch propeller by its linearised polar, a constant-speed one as an actuator disk; both calibrated on "
    "the manual's figures on the card.",
    "Book first: where the card holds the manual's tables, their figure counts as printed, linear between figures; the model "
    "only carries it on: manual x model(strip) / model(manual's conditions). The manual's own corrections go before physics.",
    "Beyond the book: higher, hotter or heavier than the manual's figures go, a verdict is at best marginal.",
    "Ground roll: ground speed over acceleration, summed along the run with thrust, drag, lift, rolling friction, slope and "
    "wind. A run whose acceleration falls below 2 % of g counts as no lift-off, a landing roll likewise as no stop.",
    "50 ft: after lift-off a round pull-up and the energy method; before touchdown a straight path and a round flare. Ground "
    "that rises under a climb or falls away under an approach counts; ground that helps gives nothing.",
    "Rules: the longer governs of (a) the physics with slope and surface, and (b) the distance on level dry pavement times the "
    "published corrections; then the safety factor. Wind counts by the shares of the Rules sheet.",
    "Obstacles: ahead, the height over them with and without the factor; behind, the 50 ft point moves up the strip until the "
    "approach path clears them by 50 ft. No obstacle in the list means none is assessed.",
    "Soft ground never shortens a landing here: its drag is not credited, and its braking is that of the wet surface or less.",
    "Elevation is the highest of those known. One mean slope stands for the whole strip, unless its slope profile is given.",
)
SOURCES = (
    "ISO 2533:1975, Standard Atmosphere; U.S. Standard Atmosphere, 1976.",
    "WMO-No. 8, Guide to Instruments and Methods of Observation: humidity formulae.",
    "J. D. Anderson, Aircraft Performance and Design: ground run, ground effect, approach and flare.",
    "J. T. Lowry, Performance of Light Aircraft: linearised propeller polar.",
    "FAA AC 23-8 series, from memory: power of piston engines with the root of the temperature.",
    "Actuator-disk momentum theory; R. F. Gagg and E. V. Farrar, SAE Transactions 29, 1934: power lapse.",
    "W. H. Mason, notes to a take-off program, Virginia Tech; D. P. Raymer, Aircraft Design: friction coefficients.",
    "Flaps: D. P. Raymer; H. Glauert, thin-aerofoil theory; A. D. Young, R&M 2622, in the form of B. W. McCormick.",
)


def write_method(pages: Pages, chain: Chain, taken: list[str], made_from: list[tuple[str, str]]) -> Worksheet:
    """The page. ``taken`` lists every default and assumed value, ``made_from`` label and text of the inputs."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    sheet.sheet_view.showGridLines = False
    for column, width in zip("ABCDEFGHIJ", (120, 3, 14, 44, 14, 44, 12, 12, 12, 12), strict=True):
        sheet.column_dimensions[column].width = width
    sheet["A1"], sheet["A1"].font = "Method, sources and what was taken for granted", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    now = datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %Z")
    facts = [f"{label}: {text}" for label, text in (*made_from, ("Filled", f"{now} by stripcheck {__version__}"))]
    row = 4
    for heading, lines in (
        ("Made from", facts),
        (GRANTED, taken or [NOTHING_GRANTED]),
        (METHODS, METHOD),
        ("Sources", SOURCES),
    ):
        write_heading(sheet, row, heading)
        for line in lines:
            row += 1
            sheet.cell(row, 1, line).font = styles.BODY
            sheet.cell(row, 1).alignment = styles.WRAP
            sheet.row_dimensions[row].height = 13.5 * math.ceil(len(line) / LINE)
        row += 2
    _tables(pages, sheet, chain)
    styles.set_print(sheet)
    sheet.page_setup.fitToHeight = 1
    sheet.print_area = f"A1:A{row}"
    return sheet


def _tables(pages: Pages, sheet: Worksheet, chain: Chain) -> None:
    """Words of the findings, and nodes and weights of the sums."""
    sheet.cell(TABLE_ROW - 2, 3, "Tables that the formulas look up; leave them as they are").font = styles.HEADING
    titles: list[str] = []
    column = 3
    for step in chain.steps:
        if step.words:
            titles.append(step.label)
            words_places(pages, sheet, "ABCDEFGHIJ"[column - 1], TABLE_ROW, step)
            column += 1
    for name, values in RUN_TABLE.items():
        titles.append(name)
        letter = "ABCDEFGHIJ"[column - 1]
        for at, value in enumerate(values, TABLE_ROW):
            sheet[f"{letter}{at}"], sheet[f"{letter}{at}"].font = float(value), styles.SMALL
        pages.name(name, sheet, f"{letter}{TABLE_ROW}:{letter}{TABLE_ROW + len(values) - 1}")
        column += 1
    write_header(sheet, TABLE_ROW - 1, tuple(titles), 3)
