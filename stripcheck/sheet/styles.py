"""How the workbook looks: number formats by unit, fills, fonts, and the colours of the verdicts.

Verdict colours are steps of brightness as much as of hue (after the colour-blind-safe set published by M. Okabe and
K. Ito), so that they hold in grey print; the word always stands beside them.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from openpyxl.formatting.rule import CellIsRule
from openpyxl.styles import Alignment, Border, Font, PatternFill, Protection, Side
from openpyxl.styles.differential import DifferentialStyle
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE, UNSUITABLE

FORMATS = {
    "m": '#,##0" m"', "ft": '#,##0" ft"', "kt": '0.0" kt"', "%": '0.0" %"', "°": '0"°"', "°C": '0.0" °C"',
    "hPa": '0.0" hPa"', "K": '0.0" K"', "m/s²": "0.000", "kg/m³": "0.0000", "N": '#,##0" N"', "kW": '#,##0" kW"',
    "kg": '#,##0" kg"', "ft/min": '#,##0" ft/min"', "%/kt": '0.00" %/kt"', "s": '0.0" s"', "m²": '0.00" m²"', "": "0.0000",
}  # fmt: skip

_GREY_LINE = Side(style="thin", color="BFBFBF")
LINE = Border(bottom=_GREY_LINE)
BOX = Border(*(Side(style="thin", color="8C8C8C"),) * 4)

TITLE = Font(name="Calibri", size=16, bold=True, color="1F2A36")
HEADING = Font(name="Calibri", size=12, bold=True, color="1F2A36")
BODY = Font(name="Calibri", size=10)
SMALL = Font(name="Calibri", size=9, color="555555")
BOLD = Font(name="Calibri", size=10, bold=True)
HEADER = Font(name="Calibri", size=10, bold=True, color="FFFFFF")
CAUTION_FONT = Font(name="Calibri", size=10, bold=True, italic=True, color="7A2E00")

HEADER_FILL = PatternFill("solid", fgColor="2F4254")
BAND_FILL = PatternFill("solid", fgColor="DCE3EA")
INPUT_FILL = PatternFill("solid", fgColor="FFF9DB")
CALIBRATED_FILL = PatternFill("solid", fgColor="EFE9F7")

WRAP = Alignment(wrap_text=True, vertical="top")
CENTRE = Alignment(horizontal="center", vertical="center", wrap_text=True)
INDENT = Alignment(horizontal="left", vertical="center", indent=1)
INDENT_WRAP = Alignment(horizontal="left", vertical="center", indent=1, wrap_text=True)
RIGHT = Alignment(horizontal="right")
MIDDLE = Alignment(vertical="center")
LEFT = Alignment(horizontal="left")
UNLOCKED = Protection(locked=False)

# background, text, bold
VERDICT_COLOURS = {
    SUITABLE: ("CFE6F5", "10314A", False),
    MARGINAL: ("F6D77A", "3D2C00", True),
    UNSUITABLE: ("B3440B", "FFFFFF", True),
    NOT_ASSESSED: ("E4E4E4", "444444", False),
}
BOTH_COLOURS = {
    "in and out": SUITABLE,
    "in and out, marginal": MARGINAL,
    "IN BUT NOT OUT": UNSUITABLE,
    "out but not in": UNSUITABLE,
    "neither in nor out": UNSUITABLE,
    "not assessed": NOT_ASSESSED,
}


def number_format(unit: str) -> str:
    """Number format that shows a value in a unit.

    >>> number_format("m")
    '#,##0" m"'
    """
    return FORMATS[unit]


def colour_words(sheet: Worksheet, reference: str, words: dict[str, str]) -> None:
    """Give cells of a range the colour of the verdict that each of some words stands for."""
    for word, verdict in words.items():
        back, text, bold = VERDICT_COLOURS[verdict]
        style = DifferentialStyle(
            font=Font(color=text, bold=bold, italic=verdict == NOT_ASSESSED),
            fill=PatternFill("solid", fgColor=back, bgColor=back),
        )
        rule = CellIsRule(operator="equal", formula=[f'"{word}"'])
        rule.dxf = style
        sheet.conditional_formatting.add(reference, rule)


def colour_verdicts(sheet: Worksheet, reference: str) -> None:
    """Give the cells of a range the colours of the verdicts that they hold."""
    colour_words(sheet, reference, {word: word for word in VERDICT_COLOURS})


def heights_for(texts: Sequence[str], width: float) -> np.ndarray | None:
    """Row heights [points] for texts that wrap in a column of a width [characters]; None where all fit on one line."""
    lines = np.array([-(-len(text) // int(width)) for text in texts])
    return np.where(lines > 1, 13.5 * lines, np.nan) if (lines > 1).any() else None


def write_caution(sheet: Worksheet, cell: str, caution: str) -> None:
    """Write the caution where it is always seen."""
    sheet[cell] = caution
    sheet[cell].font = CAUTION_FONT


def set_print(sheet: Worksheet, title_rows: str = "", columns: str = "", portrait: bool = False) -> None:
    """Landscape pages, fitted to the width, with a repeated header and page numbers."""
    sheet.page_setup.orientation = "portrait" if portrait else "landscape"
    sheet.page_setup.paperSize = sheet.PAPERSIZE_A4
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = 1, 0
    sheet.sheet_properties.pageSetUpPr.fitToPage = True
    sheet.page_margins.left = sheet.page_margins.right = 0.4
    sheet.page_margins.top, sheet.page_margins.bottom, sheet.page_margins.footer = 0.5, 0.8, 0.4
    sheet.oddFooter.left.text = "&A"
    sheet.oddFooter.center.text = "Planning aid only. Flight manual, local rules and pilot in command decide."
    sheet.oddFooter.right.text = "Page &P of &N"
    if title_rows:
        sheet.print_title_rows = title_rows
    if columns:
        sheet.print_title_cols = columns
