"""The Summary sheet: one row for each strip, with the better direction in and the better direction out."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.caution import CAUTION
from stripcheck.numeric import Number
from stripcheck.register import Directions
from stripcheck.sheet import styles
from stripcheck.sheet.cell import Cell, formula, where
from stripcheck.sheet.pages import Pages, note, write_header
from stripcheck.sheet.stream import ROW, FormulaColumn, Table, TextColumn
from stripcheck.sheet.strips import FIRST_ROW as STRIPS_ROW
from stripcheck.sheet.strips import direction_keys
from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE, UNSUITABLE, VERDICTS

SHEET = "Summary"
HEADER_ROW, FIRST_ROW = 14, 15
# from worst to best: one direction that is known to be usable is enough, one that is not known may yet be
RANKS = (UNSUITABLE, NOT_ASSESSED, MARGINAL, SUITABLE)
FORBIDDEN = 1  # number of the finding of a one-way strip's wrong direction, which ranks below all verdicts
BOTH = ("in and out", "in and out, marginal", "IN BUT NOT OUT", "out but not in", "neither in nor out", "not assessed")
COUNTED = ("Verdict", "In and out")  # headers of the tables of counts, above the rows
SIDES = (("in", "landing", "Land"), ("out", "takeoff", "Take off"))


def first_is_better(rank_1: Number, margin_1: Number, rank_2: Number, margin_2: Number) -> Number:
    """Whether direction 1 is the better: by rank of its verdict [1 to 4; 0 for a forbidden direction], then by
    margin [m], a known one first."""
    both = np.isfinite(margin_1) & np.isfinite(margin_2)
    by_margin = np.where(both, margin_1 >= margin_2, np.logical_not(np.isfinite(margin_2)))
    return (rank_1 > rank_2) | ((rank_1 == rank_2) & by_margin)


def in_and_out(rank_in: Number, rank_out: Number) -> Number:
    """Number [1, 2, ...] of the words of BOTH for the ranks of the better direction in and of that out.

    >>> int(in_and_out(4, 1))
    3
    """
    unknown = (rank_in == 2) | (rank_out == 2)
    lands, leaves = rank_in >= 3, rank_out >= 3
    return np.select(
        [unknown, lands & leaves & (rank_in + rank_out == 8), lands & leaves, lands, leaves], [6, 1, 2, 3, 4], 5
    )


def ranks_of(verdict_codes: np.ndarray, words: tuple[str, ...]) -> np.ndarray:
    """Rank [1 to 4] of each verdict, from the number of its words."""
    ranks: np.ndarray = np.array([RANKS.index(word) + 1 for word in words])[verdict_codes - 1]
    return ranks


def summarise(values: Mapping[str, np.ndarray], words: Mapping[str, tuple[str, ...]]) -> dict[str, np.ndarray]:
    """The better direction of each strip, in and out, over arrays whose rows come in pairs.

    ``values`` holds the steps of the chain, ``words`` those of the two verdicts. Gives, for "in" and "out", the
    index of the better row and its rank, and the number of the words of BOTH.
    """
    found: dict[str, np.ndarray] = {}
    for side, step, _ in SIDES:
        rank = ranks_of(values[f"{step}_verdict"], words[f"{step}_verdict"])
        order = np.where(values[f"{step}_finding"] == FORBIDDEN, 0, rank)
        margin = values[f"{step}_margin"]
        first = first_is_better(order[::2], margin[::2], order[1::2], margin[1::2])
        found[side] = np.arange(0, len(rank), 2) + np.where(first, 0, 1)
        found[f"{side}_rank"] = rank[found[side]]
    found["both"] = in_and_out(found["in_rank"], found["out_rank"])
    return found


COLUMNS = (
    ("key_1", "Key 1", 4, ""),
    ("key_2", "Key 2", 4, ""),
    ("row_1", "Row 1", 4, ""),
    ("row_2", "Row 2", 4, ""),
    ("in_row", "Row in", 4, ""),
    ("out_row", "Row out", 4, ""),
    ("strip", "Strip", 12, "Identifier in the list"),
    ("name", "Name", 26, "Name in the list"),
    ("runway", "Runway", 10, "Both directions"),
    ("both", "In and out", 21, "Whether you get in, and out again"),
    ("in_verdict", "Land: verdict", 13, "Verdict for the better landing direction"),
    ("in_direction", "Land on", 9, "Direction in which to land"),
    ("in_margin", "Land: margin [m]", 10, "Length available less length required; negative: missing"),
    ("in_share", "Land: margin [%]", 9, "Margin as a share of the length available"),
    ("in_reason", "Land: limiting reason", 48, "What decides the verdict"),
    ("out_verdict", "Take off: verdict", 13, "Verdict for the better take-off direction"),
    ("out_direction", "Leave by", 9, "Direction in which to take off"),
    ("out_margin", "Take off: margin [m]", 10, "Length available less length required; negative: missing"),
    ("out_share", "Take off: margin [%]", 9, "Margin as a share of the length available"),
    ("out_reason", "Take off: limiting reason", 48, "What decides the verdict"),
)
HIDDEN = 6
LETTERS = {key: get_column_letter(number) for number, (key, *_) in enumerate(COLUMNS, 1)}


def write_skeleton(pages: Pages, strips: int, facts: list[str]) -> Worksheet:
    """Title, caution, the facts of this filling, counts, headers, colours, and one row that carries the styles.

    ``facts`` are the labels of what the verdicts stand on; the values beside them come later.
    """
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    last = FIRST_ROW + max(strips, 1) - 1
    left = LETTERS["strip"]
    sheet[f"{left}1"], sheet[f"{left}1"].font = "Can I get in, and out again?", styles.TITLE
    styles.write_caution(sheet, f"{left}2", CAUTION)
    write_header(sheet, HEADER_ROW, tuple(header for _, header, _, _ in COLUMNS))
    sheet.row_dimensions[HEADER_ROW].height = 44
    for number, (key, _, width, text) in enumerate(COLUMNS, 1):
        letter = get_column_letter(number)
        dimension = sheet.column_dimensions[letter]
        dimension.width, dimension.hidden = width, number <= HIDDEN
        if text:
            sheet.cell(HEADER_ROW, number).comment = note(text, 240, 70)
        cell = sheet.cell(FIRST_ROW, number)
        cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.MIDDLE
        cells = f"{letter}{FIRST_ROW}:{letter}{last}"
        if key.endswith("_verdict"):
            styles.colour_verdicts(sheet, cells)
            cell.alignment = styles.CENTRE
        elif key.endswith("_margin"):
            cell.number_format = styles.number_format("m")
        elif key.endswith("_share"):
            cell.number_format = styles.number_format("%")
        elif key == "both":
            styles.colour_words(sheet, cells, styles.BOTH_COLOURS)
            cell.alignment, cell.font = styles.CENTRE, styles.BOLD
        elif key in ("in_direction", "out_direction", "runway"):
            cell.alignment = styles.CENTRE
        elif key.endswith("_reason"):
            cell.alignment = styles.INDENT_WRAP
    sheet.freeze_panes = f"{LETTERS['both']}{FIRST_ROW}"
    sheet.auto_filter.ref = f"{left}{HEADER_ROW}:{LETTERS['out_reason']}{last}"
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")
    sheet.print_area = f"{left}1:{LETTERS['out_reason']}{last}"
    for row, label in enumerate(facts, 4):
        sheet[f"{left}{row}"], sheet[f"{left}{row}"].font = label, styles.SMALL
        sheet[f"{LETTERS['name']}{row}"].font = styles.BODY
    return sheet


def write_counts(pages: Pages, sheet: Worksheet, strips: int, counts: Mapping[str, Mapping[str, int]]) -> None:
    """Live counts of each verdict and of each pair of verdicts, beside the facts."""
    last = FIRST_ROW + max(strips, 1) - 1
    write_header(sheet, 4, (COUNTED[0], "Land", "Take off"), 16)
    for row, verdict in enumerate(VERDICTS, 5):
        sheet.cell(row, 16, verdict).font = styles.BODY
        for number, (side, _, _) in enumerate(SIDES, 17):
            column = LETTERS[f"{side}_verdict"]
            cell = f"{get_column_letter(number)}{row}"
            text = f'COUNTIF(${column}${FIRST_ROW}:${column}${last},"{verdict}")'
            pages.formula(sheet, cell, text, counts[side].get(verdict, 0))
            sheet[cell].font = styles.BODY
    styles.colour_verdicts(sheet, "P5:P8")
    write_header(sheet, 4, (COUNTED[1], "Strips"), 10)
    for row, words in enumerate(BOTH, 5):
        sheet.cell(row, 10, words).font = styles.BODY
        column = LETTERS["both"]
        text = f'COUNTIF(${column}${FIRST_ROW}:${column}${last},"{words}")'
        pages.formula(sheet, f"K{row}", text, counts["both"].get(words, 0))
        sheet[f"K{row}"].font = styles.BODY
    styles.colour_words(sheet, "J5:J10", styles.BOTH_COLOURS)


def table_of(directions: Directions, letters: Mapping[str, str], values: Mapping[str, Any],
             best: Mapping[str, np.ndarray]) -> Table:  # fmt: skip
    """The rows. ``letters`` tells the columns of the Strips sheet by key, ``values`` holds their values as shown."""
    texts, keys = directions.texts, direction_keys(directions)
    count = directions.n // 2
    column = {key: f"Strips!${letter}${STRIPS_ROW}:${letter}${STRIPS_ROW + directions.n - 1}"
              for key, letter in letters.items()}  # fmt: skip
    formulas = row_formulas(column, LETTERS, FIRST_ROW)
    found = row_values(values, best)
    made: dict[str, Any] = {"key_1": TextColumn(keys[::2]), "key_2": TextColumn(keys[1::2])}
    made |= {f"row_{i}": FormulaColumn(formulas[f"row_{i}"], np.arange(i, directions.n + 1, 2, dtype=float)) for i in (1, 2)}
    made |= {key: TextColumn(texts[key][::2]) for key in ("strip", "name", "runway")}
    made |= {key: FormulaColumn(formulas[key], value) for key, value in found.items()}
    if any(len(column.values) != count for column in made.values()):
        raise ValueError("the summary's columns are not equally long")
    longest = [max(pair, key=len) for pair in zip(made["in_reason"].values, made["out_reason"].values, strict=True)]
    return Table(FIRST_ROW, [made[key] for key, *_ in COLUMNS], styles.heights_for(longest, 56))


def row_values(values: Mapping[str, Any], best: Mapping[str, np.ndarray]) -> dict[str, Any]:
    """What the computed columns show, but the places of the two directions: ``values`` of the directions' rows as shown."""
    made: dict[str, Any] = {}
    for side, step, _ in SIDES:
        made[f"{side}_row"] = best[side] + 1.0
        for name, source in _SHOWN.items():
            made[f"{side}_{name}"] = _picked(values[source.format(step)], best[side])
        made[f"{side}_share"] = values[f"{step}_margin_share"][best[side]]
    made["both"] = [BOTH[int(i) - 1] for i in best["both"]]
    return made


# columns of the summary that show one of the better direction -> key of the column among the strips
_SHOWN = {"verdict": "{}_verdict", "direction": "direction", "margin": "{}_margin", "reason": "{}_reason"}


def row_formulas(column: Mapping[str, str], letters: Mapping[str, str], first: int) -> dict[str, str]:
    """The formula of each computed column, with ``ROW``.

    ``column``: ranges of the Strips sheet by key; ``letters``: this sheet's columns by key; ``first``: its first row.
    """
    made: dict[str, str] = {}
    for i in (1, 2):
        # rows stand where they were written unless somebody sorted them: look there first
        guess = f"2*(ROW()-{first})+{i}"
        key = f"${letters[f'key_{i}']}{ROW}"
        there = f'IFERROR(INDEX({column["key"]},{guess}),"")={key}'
        made[f"row_{i}"] = f"IF({there},{guess},IFERROR(MATCH({key},{column['key']},0),0))"
    for side, step, _ in SIDES:
        chosen = f"${letters[f'{side}_row']}{ROW}"
        made[f"{side}_row"] = _better_row(column, letters, step)
        for name, source in _SHOWN.items():
            made[f"{side}_{name}"] = f'IF({chosen}>0,INDEX({column[source.format(step)]},{chosen}),"")'
        length = column["tora" if step == "takeoff" else "lda"]
        margin = f"${letters[f'{side}_margin']}{ROW}"
        made[f"{side}_share"] = f'IF(ISNUMBER({margin}),{margin}/INDEX({length},{chosen})*100,"")'
    ranks = [Cell(f"MATCH(${letters[f'{side}_verdict']}{ROW},{RANK_LIST},0)", depth=1) for side, _, _ in SIDES]
    words = ",".join(f'"{word}"' for word in BOTH)
    made["both"] = f'IFERROR(CHOOSE({formula(in_and_out(*ranks))},{words}),"not assessed")'
    return made


RANK_LIST = "{" + ",".join(f'"{word}"' for word in RANKS) + "}"


def _better_row(column: Mapping[str, str], letters: Mapping[str, str], step: str) -> str:
    """Formula for the row, among the strips, of the better direction; 0 where neither direction is found."""
    cells = []
    for i in (1, 2):
        row = f"${letters[f'row_{i}']}{ROW}"
        rank = Cell(f"MATCH(INDEX({column[f'{step}_verdict']},{row}),{RANK_LIST},0)", depth=2)
        finding = Cell(f"INDEX({column[f'{step}_finding']},{row})", depth=1)
        cells.append(where(finding == float(FORBIDDEN), 0.0, rank))
        cells.append(Cell(f"INDEX({column[f'{step}_margin']},{row})", depth=1))
    better = first_is_better(*cells)
    row_1, row_2 = (f"${letters[f'row_{i}']}{ROW}" for i in (1, 2))
    return f"IF(AND({row_1}>0,{row_2}>0),IF({formula(better)},{row_1},{row_2}),MAX({row_1},{row_2}))"


def _picked(values: Any, rows: np.ndarray) -> Any:
    return [values[i] for i in rows] if isinstance(values, list) else values[rows]
