"""The sheet Summary of a refreshed workbook: the better direction of each strip, new strips too, and what stands above."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from typing import Any

from openpyxl.utils import get_column_letter

from stripcheck.sheet import summary
from stripcheck.sheet.book import FACTS
from stripcheck.sheet.edits import Edits, Growth
from stripcheck.sheet.filled_pages import VALUE
from stripcheck.sheet.package import cell_of
from stripcheck.sheet.raw_sheet import RawCell, Value
from stripcheck.sheet.refreshed import BookEdits, Computed
from stripcheck.sheet.refreshed_strips import StripEdits
from stripcheck.verdict import VERDICTS

HEADERS = {key: header for key, header, *_ in summary.COLUMNS}
_LISTED = ("key_1", "key_2", "strip", "name", "runway")  # what a row tells of its strip; the rest is computed
_PARTS = {"in": "Landing", "out": "Take-off"}


class SummaryEdits:
    """The edits to the sheet Summary. Raises InputError where a column of it is gone."""

    def __init__(self, work: BookEdits, computed: Computed, directions: StripEdits) -> None:
        self.work, self.computed, self.book, self.directions = work, computed, computed.book, directions
        self.sheet = self.book.summary
        self.raw = self.sheet.raw
        self.edits = work.by_title.setdefault(summary.SHEET, Edits(self.raw))
        for header in HEADERS.values():
            if header not in self.sheet.columns:
                raise self.sheet.lost(header)
        self.columns = {key: self.sheet.columns[header] for key, header in HEADERS.items()}
        self.place = {key: at for at, key in enumerate(directions.keys)}
        below = (row.number for row in self.raw.rows if row.number > self.sheet.header_row)
        self.listed = [row for row in below if self._key(row, 1)]
        self.pairs = {row: (self._key(row, 1), self._key(row, 2)) for row in self.listed} | self._new_pairs()
        self.rank: dict[str, list[int]] = {"in": [], "out": [], "both": []}

    def write(self) -> None:
        """All edits."""
        formulas = self._formulas() if self.live else {}
        for row, pair in self.pairs.items():
            values = self._values(pair)
            if row not in self._was_listed:
                values |= self._identity(pair)
            for key, value in values.items():
                self._set(row, self.columns[key], value, formulas.get(key))
        self._write_facts()
        self._write_counts()
        if self.grown:
            self.edits.grow(Growth(self.listed[0], self.listed[-1], max(self.pairs), self.columns.values()))

    @property
    def live(self) -> bool:
        """Whether the sheet was filled with formulas, as the pages are."""
        return self.work.pages.live

    @property
    def grown(self) -> bool:
        """Whether strips were added below the last one."""
        return bool(self.listed) and max(self.pairs) > self.listed[-1]

    @property
    def gone(self) -> int:
        """How many strips of the summary have no direction on the sheet Strips any more."""
        return sum(all(key not in self.place for key in pair) for pair in self.pairs.values())

    def misnamed(self) -> list[str]:
        """A sentence for each strip that has another identifier here than its directions, renamed or sorted without keys."""
        told, strips = [], self.book.strips
        for row in self.listed:
            own = str(self.raw.value(row, self.columns["strip"]) or "")
            for key in self.pairs[row]:
                there = strips.rows[self.place[key]] if key in self.place else 0
                name = strips.text(there, "strip") if there else ""
                if own and name and own != name:
                    told.append(f"sheet Summary, row {row}: {own} has the key of row {there} on the sheet Strips, {name}")
                    break
        return told

    @cached_property
    def _was_listed(self) -> set[int]:
        return set(self.listed)

    def _key(self, row: int, number: int) -> str:
        return str(self.raw.value(row, self.columns[f"key_{number}"]) or "")

    def _new_pairs(self) -> dict[int, tuple[str, str]]:
        """Keys of the strips that have no row yet, by the row that they will have: the next one that is free."""
        told = {key for row in self.listed for key in (self._key(row, 1), self._key(row, 2))}
        last, made = max(self.listed, default=self.sheet.header_row), {}
        for key in self.directions.keys:
            if key not in told:
                last = next(row for row in range(last + 1, last + 2 + len(self.raw.rows)) if self._is_free(row))
                made[last] = self._pair_of(key)
                told |= set(made[last])
        return made

    def _pair_of(self, key: str) -> tuple[str, str]:
        """The keys of both directions of a strip by one of them; never a blank one, which the formulas would find anywhere."""
        other = f"{key[:-1]}1"
        return (other, key) if key.endswith(" 2") and other in self.place else (key, f"{key.removesuffix(' 1')} 2")

    def _is_free(self, number: int) -> bool:
        row = self.raw.by_number.get(number)
        return row is None or all(cell.value in (None, "") and not cell.live for cell in row.cells.values())

    def _formulas(self) -> dict[str, str]:
        letters = {key: get_column_letter(column) for key, column in self.columns.items()}
        return summary.row_formulas(self.directions.ranges, letters, self.sheet.header_row + 1)

    def _set(self, row: int, column: int, value: Value, formula: str | None) -> None:
        cell = self.raw.cell(row, column)
        style = cell.style if cell is not None and (cell.style or row in self._was_listed) else self._usual_style(column)
        self.edits.set(row, column, value, formula, style)

    def _usual_style(self, column: int) -> str:
        cells = (self.raw.cell(row, column) for row in reversed(self.listed))
        return next((cell.style for cell in cells if cell is not None and cell.style), "")

    # --- one strip

    def _values(self, pair: tuple[str, str]) -> dict[str, Any]:
        """What the computed columns show of a strip."""
        places = [self.place.get(key, -1) for key in pair]
        values: dict[str, Any] = {f"row_{i}": self._row_in_range(at) for i, at in enumerate(places, 1)}
        ranks = []
        for side, step, _ in summary.SIDES:
            at = self._better(places, step)
            values |= {f"{side}_{name}": value for name, value in self._side(at, step).items()}
            ranks.append(self._rank(step, at) if at >= 0 else 0)
            self.rank[side].append(ranks[-1])
        number = int(summary.in_and_out(*ranks)) if all(ranks) else len(summary.BOTH)
        self.rank["both"].append(number)
        return {**values, "both": summary.BOTH[number - 1]}

    def _side(self, at: int, step: str) -> dict[str, Any]:
        """Of the better direction of a side, by the ends of the keys; -1: of none."""
        if at < 0:
            return {"row": 0.0, "verdict": "", "direction": "", "margin": "", "share": "", "reason": ""}
        margin = self.computed.shown(f"{step}_margin")[at]
        length = float(self.book.inputs["tora" if step == "takeoff" else "lda"][at])
        return {
            "row": self._row_in_range(at),
            "verdict": self.computed.shown(f"{step}_verdict")[at],
            "direction": self.book.strips.text(self.book.strips.rows[at], "direction"),
            "margin": margin,
            "share": margin / length * 100.0 if margin != "" and length > 0.0 else "",
            "reason": self.computed.shown(f"{step}_reason")[at],
        }

    def _row_in_range(self, at: int) -> float:
        rows = self.book.strips.rows
        return float(rows[at] - rows[0] + 1) if at >= 0 else 0.0

    def _better(self, places: Sequence[int], step: str) -> int:
        """Index of the better direction; -1 where there is neither."""
        known = [at for at in places if at >= 0]
        if len(known) < 2:
            return known[0] if known else -1
        findings, margins = (self.computed.found[f"{step}_{part}"] for part in ("finding", "margin"))
        order = [0 if findings[at] == summary.FORBIDDEN else self._rank(step, at) for at in known]
        one, other = (float(margins[at]) for at in known)
        return known[0] if summary.first_is_better(order[0], one, order[1], other) else known[1]

    def _rank(self, step: str, at: int) -> int:
        return summary.RANKS.index(self.computed.shown(f"{step}_verdict")[at]) + 1

    def _identity(self, pair: tuple[str, str]) -> dict[str, Value]:
        """What the summary tells of a strip that is new on it."""
        sheet = self.book.strips
        rows = [sheet.rows[self.place[key]] for key in pair if key in self.place]
        ways = "/".join(sheet.text(row, "direction") or "?" for row in rows)
        told = (*pair, sheet.text(rows[0], "strip"), sheet.text(rows[0], "name"), ways)
        return dict(zip(_LISTED, told, strict=True))

    # --- above the rows

    def _write_facts(self) -> None:
        """What the verdicts stand on, which repeats cells of the pages."""
        labels: dict[str, str | None] = dict((*FACTS, ("Rules", "rules")))
        for row in self.raw.rows:
            if row.number >= self.sheet.header_row:
                return
            for cell in row.cells.values():
                value = self._repeated(cell.formula) if cell.live else None
                if value is not None:
                    self.edits.result(row.number, cell.column, value)
            label = row.cells.get(self.columns["strip"])
            if not self.live and label is not None and label.value in labels:
                self._write_fact(row.number, labels[str(label.value)])

    def _repeated(self, formula: str | None) -> Value:
        """What a formula shows that repeats a cell of a page; None for another formula."""
        text = formula or ""
        source = text.removeprefix("IF(ISNUMBER(").split(")")[0]
        place = cell_of(source)
        if place is None or place[0] not in self.work.pages.raw or (text != source and not text.startswith("IF(ISNUMBER(")):
            return None
        value = self.work.pages.value(*place)
        if text == source:
            return "" if value is None else value
        return value if isinstance(value, float) else "" if text.endswith('"")') else "not given"

    def _write_fact(self, row: int, key: str | None) -> None:
        """The same in a workbook of values."""
        pages = self.work.pages
        if key is None or key == "rules":
            self.edits.set(row, self.columns["name"], pages.title("Aircraft" if key is None else "Rules"))
            return
        self.edits.set(row, self.columns["name"], self._typed(key, "not given"))
        if key == "wind_speed":
            self.edits.set(row, self.columns["runway"], self._typed("wind_from", ""))

    def _typed(self, key: str, otherwise: str) -> Value:
        item: Any = self.book.chain.by_key[key]
        value = self.work.pages.value("Aircraft" if item.where == "card" else "Day", self.work.pages.row_of(item), VALUE)
        return value if isinstance(value, float) or (value and key.endswith("_flap")) else otherwise

    def _write_counts(self) -> None:
        """How many strips have each verdict; the places are found by the words, below the header of their table."""
        table: dict[int, str] = {}  # header of the table, by column
        for row in self.raw.rows:
            if row.number >= self.sheet.header_row:
                return
            for column, cell in sorted(row.cells.items()):
                if cell.value in summary.COUNTED:
                    table[column] = str(cell.value)
                elif table.get(column) == summary.COUNTED[0] and cell.value in VERDICTS:
                    number = summary.RANKS.index(str(cell.value)) + 1
                    for beside, side in enumerate(_PARTS, 1):
                        self._count(row.cells.get(column + beside), row.number, side, number, str(cell.value))
                elif table.get(column) == summary.COUNTED[1] and cell.value in summary.BOTH:
                    number = summary.BOTH.index(str(cell.value)) + 1
                    self._count(row.cells.get(column + 1), row.number, "both", number, str(cell.value))

    def _count(self, cell: RawCell | None, row: int, side: str, number: int, word: str) -> None:
        if cell is None or (self.live and not (cell.formula or "").startswith("COUNTIF(")):
            return
        count = float(self.rank[side].count(number))
        if not self.live:
            self.edits.set(row, cell.column, count)
        elif self.grown:
            letter = get_column_letter(self.columns["both" if side == "both" else f"{side}_verdict"])
            cells = f"${letter}${min(self.pairs)}:${letter}${max(self.pairs)}"
            self.edits.set(row, cell.column, count, f'COUNTIF({cells},"{word}")')
        else:
            self.edits.result(row, cell.column, count)

    def counts(self) -> list[str]:
        """How many strips have each verdict, in words."""
        lines = []
        for side, label in _PARTS.items():
            numbers = (self.rank[side].count(summary.RANKS.index(word) + 1) for word in VERDICTS)
            lines.append(f"{label}: " + ", ".join(f"{number} {word}" for number, word in zip(numbers, VERDICTS, strict=True)))
        both = ((self.rank["both"].count(number), words) for number, words in enumerate(summary.BOTH, 1))
        return [*lines, "In and out: " + "; ".join(f"{number} {words}" for number, words in both if number)]


