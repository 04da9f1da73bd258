"""The Left out sheet: every runway of the list that has no row, and every doubt about one that has."""

from __future__ import annotations

from collections import Counter

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.caution import CAUTION
from stripcheck.register import Directions, unknown_surfaces
from stripcheck.sheet import styles
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.sheet.stream import Table, TextColumn

SHEET = "Left out"
HEADER_ROW, FIRST_ROW = 4, 5
TITLES = ("Row in the list", "Strip", "Runway", "Left out or doubted", "Kind", "Reason")
WIDTHS = (10, 14, 12, 16, 30, 90, 3, 34, 9, 3, 26, 9)


def write_skeleton(pages: Pages, directions: Directions) -> Worksheet:
    """Headers and one row that carries the styles."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    sheet["A1"], sheet["A1"].font = "Left out, and in doubt", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    kept = directions.n // 2
    text = f"{directions.rows_read} runways read from {directions.source}: {kept} kept, {len(directions.left_out)} left out."
    sheet["A3"], sheet["A3"].font = text, styles.BODY
    write_header(sheet, HEADER_ROW, TITLES)
    write_header(sheet, HEADER_ROW, ("Kind", "Runways"), 8)
    write_header(sheet, HEADER_ROW, ("Surface not understood", "Runways"), 11)
    sheet.row_dimensions[HEADER_ROW].height = 30
    for number, width in enumerate(WIDTHS):
        sheet.column_dimensions["ABCDEFGHIJKL"[number]].width = width
        cell = sheet.cell(FIRST_ROW, number + 1)
        cell.font, cell.quotePrefix, cell.alignment = styles.BODY, number in (1, 2, 10), styles.INDENT
    sheet.freeze_panes = f"A{FIRST_ROW}"
    rows = max(len(directions.left_out) + len(directions.doubts), 1)
    sheet.auto_filter.ref = f"A{HEADER_ROW}:F{FIRST_ROW + rows - 1}"
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")
    return sheet


def table_of(directions: Directions) -> Table:
    """The rows: what is left out, then the doubts; beside them counts by kind, and the surfaces not understood."""
    rows = [(item, "left out") for item in directions.left_out] + [(item, "in doubt") for item in directions.doubts]
    kinds = Counter((fate, item.what) for item, fate in rows)
    counts = [(f"{fate}: {what}", number) for (fate, what), number in kinds.most_common()]
    surfaces = [(spelling or "(blank)", number) for spelling, number in unknown_surfaces(directions)]
    size = max(len(rows), len(counts), len(surfaces), 1)
    columns: list[list[object]] = [
        [item.row for item, _ in rows],
        [item.strip for item, _ in rows],
        [item.runway for item, _ in rows],
        [fate for _, fate in rows],
        [item.what for item, _ in rows],
        [item.reason for item, _ in rows],
        [],
        [kind for kind, _ in counts],
        [number for _, number in counts],
        [],
        [spelling for spelling, _ in surfaces],
        [number for _, number in surfaces],
    ]
    return Table(FIRST_ROW, [TextColumn(column + [None] * (size - len(column))) for column in columns])
