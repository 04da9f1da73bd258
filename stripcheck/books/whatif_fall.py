"""What each factor adds: a waterfall from the book's figure to the distance required, as a table and as a chart.

The inputs become today's one after another, in the better direction, and each step is what the distance then gains or loses.
A step without a figure of its own is not assessed, and counts in the next that has one, so that the steps always add up.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import charts
from stripcheck.books.charts import DARK, PALE, RED, Look, Row
from stripcheck.books.whatif_cases import rows_of
from stripcheck.books.whatif_layout import BEST_ROW, SIDE_LETTER, TABLES, WORDS, Layout
from stripcheck.books.whatif_page import shown
from stripcheck.books.whatif_tables import LABELS, label, names, write
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.verdict import NOT_ASSESSED

FIRST = 35  # row of the two tables of the sheet Charts
LETTERS = {"landing": tuple("ABDEF"), "takeoff": tuple("HIKLM")}  # step, meaning, word, change, so far
MEANINGS = {
    "Book figure": "greatest mass, sea level, 15 °C, level, paved, dry, calm",
    "Mass": "today's mass instead of the greatest",
    "Height": "today's elevation and QNH, standard temperature there",
    "Heat": "today's temperature and humidity",
    "Slope": "today's slope, by physics",
    "Surface": "today's surface and condition, by physics",
    "Wind": "today's wind, as the rules count it",
    "Rule set": "published corrections, where they ask for more",
    "Safety factor": "of the rules, on the whole distance",
}
STEPS = tuple(MEANINGS)
TOTAL = "Required"
TOTAL_MEANS = "the sum; at the right as the page What if has it"
LEGEND = (
    "One input after another becomes today's, in the better direction and with today's flap. A step that has no figure of its "
    "own is not assessed, and counts in the next that has one."
)
FAR, CHANGE = '#,##0.0" m"', '+#,##0.0" m";-#,##0.0" m";0.0" m"'
SMALL = 0.05  # m: less than that is no change


def steps(figures: Sequence[float | None]) -> tuple[list[float | None], list[float | None]]:
    """Change by each figure, and the distance so far [m]; None where there is none.

    >>> steps([300.0, 280.0, None, 350.0])
    ([300.0, -20.0, None, 70.0], [300.0, 280.0, 280.0, 350.0])
    """
    far: list[float | None] = [figures[0]]
    changes: list[float | None] = [figures[0]]
    for figure in figures[1:]:
        before = far[-1]
        known = figure is not None and before is not None
        changes.append(figure - before if figure is not None and before is not None else None)
        far.append(figure if known else before)
    return changes, far


def write_fall(pages: Pages, sheet: Worksheet, tables: Worksheet, layout: Layout, cases: Cases, side: str) -> Any:
    """The table of a side on the sheet Charts, and its chart."""
    letters = LETTERS[side]
    heading = f"{LABELS[side]}: from the book to today, {WORDS[side].lower()} "
    name = names(layout)[Layout.best(cases, side) - 1]
    pages.formula(sheet, f"{letters[0]}{FIRST - 2}", f'"{heading}"&{layout.best_name(side)}', heading + name)
    sheet[f"{letters[0]}{FIRST - 2}"].font = styles.HEADING
    write_header(sheet, FIRST - 1, ("Step", "What becomes today's", "", "", "Change", "So far"), ord(letters[0]) - ord("A") + 1)
    cells, figures = _figures(layout, cases, side)
    changes, far = steps(figures)
    for k, step in enumerate(STEPS):
        _write_step(pages, sheet, letters, k, step, cells[k], changes[k], far[k])
    _write_total(pages, sheet, letters, cells[-1], figures[-1], changes)
    return _chart(pages, sheet, tables, layout, side, changes, far, figures[-1])


def _figures(layout: Layout, cases: Cases, side: str) -> tuple[list[str], list[float | None]]:
    """The cell of each step's distance, and what it holds now."""
    first, last = rows_of("factors", len(layout.flaps[side]))
    best, distance, required = Layout.best(cases, side) - 1, f"{side}_distance", f"{side}_required"
    rows = [(distance, row) for row in range(first, last + 1)]
    way = f"{TABLES}!${SIDE_LETTER[side]}${BEST_ROW}"
    cells = [cases.cell(key, row) for key, row in rows]
    cells += [f"INDEX({cases.range(key, 0, 1)},{way})" for key in (distance, required)]
    values = [shown(cases, key, row) for key, row in (*rows, (distance, best), (required, best))]
    return cells, [float(value) if value != "" else None for value in values]


def _write_step(pages: Pages, sheet: Worksheet, letters: tuple[str, ...], k: int, step: str, cell: str, change: float | None,
                far: float | None) -> None:  # fmt: skip
    row, (name, meaning, word, delta, so_far) = FIRST + k, letters
    label(sheet, f"{name}{row}", step)
    label(sheet, f"{meaning}{row}", MEANINGS[step])
    sheet[f"{meaning}{row}"].font = styles.SMALL
    sheet[f"{chr(ord(meaning) + 1)}{row}"].border = styles.LINE
    above = f"{so_far}{row - 1}"
    known = f"AND(ISNUMBER({cell}),ISNUMBER({above}))" if k else f"ISNUMBER({cell})"
    added, kept = (f"{cell}-{above}", above) if k else (cell, f'"{NOT_ASSESSED}"')
    write(pages, sheet, f"{delta}{row}", f'IF({known},{added},"{NOT_ASSESSED}")', _told(change), CHANGE if k else FAR)
    write(pages, sheet, f"{so_far}{row}", f"IF({known},{cell},{kept})", _told(far), FAR)
    at = f"{delta}{row}"
    words = f'IF({at}>{SMALL},"adds",IF({at}<-{SMALL},"takes off","no change"))' if k else '"begin with"'
    now = ("adds" if change > SMALL else "takes off" if change < -SMALL else "no change") if change is not None else ""
    told = NOT_ASSESSED if change is None else now if k else "begin with"
    write(pages, sheet, f"{word}{row}", f'IF(ISNUMBER({at}),{words},"{NOT_ASSESSED}")', told)
    for letter in (word, delta, so_far):
        sheet[f"{letter}{row}"].alignment = styles.RIGHT


def _told(value: float | None) -> float | str:
    return NOT_ASSESSED if value is None else value


def _write_total(pages: Pages, sheet: Worksheet, letters: tuple[str, ...], cell: str, figure: float | None,
                 changes: Sequence[float | None]) -> None:  # fmt: skip
    """The sum of the changes, and beside it the distance required as the page has it."""
    row, (name, meaning, word, delta, so_far) = FIRST + len(STEPS), letters
    label(sheet, f"{name}{row}", TOTAL)
    label(sheet, f"{meaning}{row}", TOTAL_MEANS)
    known = figure is not None and changes[0] is not None
    both = f"AND(ISNUMBER({cell}),ISNUMBER({delta}{FIRST}))"
    total = sum(change for change in changes if change is not None) if known else None
    write(pages, sheet, f"{delta}{row}", f'IF({both},SUM({delta}{FIRST}:{delta}{row - 1}),"{NOT_ASSESSED}")', _told(total), FAR)
    write(pages, sheet, f"{so_far}{row}", f'IF(ISNUMBER({cell}),{cell},"{NOT_ASSESSED}")', _told(figure), FAR)
    write(pages, sheet, f"{word}{row}", f'IF(ISNUMBER({delta}{row}),"in all","{NOT_ASSESSED}")',
          "in all" if known else NOT_ASSESSED)  # fmt: skip
    for number in range(ord(name), ord(so_far) + 1):
        sheet[f"{chr(number)}{row}"].font, sheet[f"{chr(number)}{row}"].fill = styles.BOLD, styles.BAND_FILL
    sheet[f"{meaning}{row}"].font = styles.SMALL
    for letter in (word, delta, so_far):
        sheet[f"{letter}{row}"].alignment = styles.RIGHT


def write_legend(sheet: Worksheet) -> int:
    """What the tables show, below them; returns its row."""
    row = FIRST + len(STEPS) + 1
    sheet[f"A{row}"], sheet[f"A{row}"].font = LEGEND, styles.SMALL
    return row


def _chart(pages: Pages, sheet: Worksheet, tables: Worksheet, layout: Layout, side: str, changes: Sequence[float | None],
           far: Sequence[float | None], required: float | None) -> Any:  # fmt: skip
    """Bars that stand on an invisible base, each from where the one before it ended."""
    first, (name, _, _, delta, so_far) = layout.fall_row[side], LETTERS[side]
    write_header(tables, first - 1, (f"{LABELS[side]}, step", "Base [m]", "Distance [m]", "Adds [m]", "Takes off [m]"), 5)
    for k, step in enumerate((*STEPS, TOTAL)):
        row, at = first + k, f"{sheet.title}!${delta}${FIRST + k}"
        end = k in (0, len(STEPS))
        change = changes[k] if k < len(STEPS) else (required if changes[0] is not None else None)
        here, above = f"{sheet.title}!${so_far}${FIRST + k}", f"{sheet.title}!${so_far}${FIRST + k - 1}"
        known = f"ISNUMBER({at})"
        sign = "0" if end else "+0;-0;0"
        text = f'IF({known}," "&TEXT(ROUND({at},0),"{sign}"),": {NOT_ASSESSED}")'
        told = f"{step} {_rounded(change, end)}" if change is not None else f"{step}: {NOT_ASSESSED}"
        write(pages, tables, f"E{row}", f"{sheet.title}!${name}${FIRST + k}&{text}", told)
        low = 0.0 if end or change is None else min(far[k - 1] or 0.0, far[k] or 0.0)
        now = change or 0.0
        parts = {"F": (f"MIN({above},{here})", low), "G": (at, now), "H": (f"MAX({at},0)", max(now, 0.0)),
                 "I": (f"MAX(-{at},0)", max(-now, 0.0))}  # fmt: skip
        for letter, (text, value) in parts.items():
            drawn = (letter == "G") == end
            write(pages, tables, f"{letter}{row}", f"IF({known},{text},0)" if drawn else "0", value if drawn else 0.0, FAR)
    cells = {letter: f"{TABLES}!${letter}${first}:${letter}${first + len(STEPS)}" for letter in "EFGHI"}
    rows = [
        Row("Base", cells["F"], Look(pattern="none")),
        Row("Distance", cells["G"], Look(DARK)),
        Row("Adds", cells["H"], Look(RED, "wdUpDiag")),
        Row("Takes off", cells["I"], Look(PALE)),
    ]
    title = f"{LABELS[side]}: from the book figure to the length required, better direction"
    return charts.bars(pages, title, cells["E"], rows, ("Step", "Distance [m]"), stacked=True, unnamed=1)


def _rounded(value: float, plain: bool) -> str:
    """A number of metres as TEXT writes it: half away from zero, with its sign unless it is ``plain`` or nothing."""
    whole = int(abs(value) + 0.5)
    return f"{whole}" if plain or not whole else f"{'-' if value < 0.0 else '+'}{whole}"
