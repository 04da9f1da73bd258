"""The pages Aircraft, Day, Rules, Manual and Method of a refreshed workbook: what follows from what is typed there."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from datetime import datetime
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter

from stripcheck.card import Card
from stripcheck.chain import Input
from stripcheck.day import DEFAULTS
from stripcheck.inputs import DAY, SIDE_WORDS
from stripcheck.rules import Rules
from stripcheck.sheet import method
from stripcheck.sheet.book import ASSUMED_SLOPE, SAME_TEMPERATURE, from_card, from_rules, granted_by_card, granted_by_day
from stripcheck.sheet.filled_pages import MANUAL, SI, VALUE
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.manual_again import write_again
from stripcheck.sheet.package import cell_of
from stripcheck.sheet.refreshed import BookEdits, Computed, plain_value

FLAP_COLUMNS = {"flap_deflection": "flap_deflections", "flap_lift": "flap_lifts"}  # chain key -> name of its cells


class PageEdits:
    """The edits to the pages. ``doubts``: what can't be shown, in a sentence each; ``replaced``: cells of steps where a formula
    was typed over."""

    def __init__(self, work: BookEdits, computed: Computed, card: Card | None, rules: Rules | None) -> None:
        self.work, self.computed, self.book = work, computed, computed.book
        self.card, self.rules = card, rules
        self.doubts: list[str] = []
        self.replaced: list[str] = []

    def write(self) -> None:
        """All edits."""
        self._write_named()
        self._write_flaps()
        self._write_figures()
        Notes(self.work, self.computed, self.card, self.rules).write()

    def _write_named(self) -> None:
        """Values in SI, and the steps that are the same for all strips."""
        for key, item in self.book.chain.by_key.items():
            place = cell_of(self.work.package.names.get(key, ""))
            if place is None or place[0] not in self.work.pages.raw:
                continue
            title, row, column = place
            if not isinstance(item, Input):
                value, shown = self.computed.once(key)
                if self._is_typed_over(title, row, column):
                    self.work.by_title[title].set(row, column, value, self._formula(key))
                    self.replaced.append(f"{title}!{get_column_letter(column)}{row}")
                self.work.show(title, row, column, value)
                self.work.show(title, row, VALUE, shown)
            elif item.kind == "number" and column == SI:
                self.work.show(title, row, column, plain_value(np.ravel(self.book.inputs[key])[0]))

    def _is_typed_over(self, title: str, row: int, column: int) -> bool:
        cell = self.work.pages.raw[title].cell(row, column)
        fresh = column in self.work.by_title[title].cells.get(row, {})
        return self.work.pages.live and not fresh and (cell is None or not cell.live)

    def _formula(self, key: str) -> str:
        chain = self.book.chain
        places = self.work.page_places(chain)
        places |= {step.key: Place(step.key) for step in chain.steps if self.work.named(step.key)}
        return self.work.formulas(chain, places, [key])[key]

    def _write_flaps(self) -> None:
        for key, name in FLAP_COLUMNS.items():
            place = cell_of(self.work.package.names.get(name, "").split(":")[0])
            if place is not None:
                for at, value in enumerate(np.ravel(self.book.inputs[key]).tolist()):
                    self.work.show(place[0], place[1] + at, place[2], value)

    def _write_figures(self) -> None:
        """The manual's tables as loaded, and the rows that repeat the manual's figures."""
        pages = self.work.pages
        rows, sides = pages.aircraft, pages.sides(pages.aircraft)
        if not sides:
            return
        for (number, column), figure in pages.figures.items():
            self.work.show("Aircraft", number, column, figure)
        found = self._results(rows, sides)
        if found is None:
            self.doubts.append(
                f"sheet {MANUAL}: it has formulas of your own, or no mass and flap; its tables as loaded are worked out when "
                "the workbook is opened"
            )
            return
        for (row, column), value in found.items():
            self.work.show(MANUAL, row, column, value)

    def _results(self, rows: Sequence[Sequence[Any]], sides: Sequence[str]) -> dict[tuple[int, int], Any] | None:
        keys = [f"{side}_book_{part}" for side in sides for part in ("mass", "flap")]
        if not all(np.isfinite(self.computed.found[key]).all() for key in keys):
            return None
        again = write_again(rows, sides, len(self.book.aeroplane.flaps), self.computed.found)
        return again.on(self.work.pages.raw[MANUAL], self.work.pages.live)


class Notes:
    """The lines of the sheet Method that tell what the workbook was made from, and what was taken for granted."""

    def __init__(self, work: BookEdits, computed: Computed, card: Card | None, rules: Rules | None) -> None:
        self.work, self.inputs = work, computed.book.inputs
        self.card, self.rules = card, rules
        self.edits, self.raw = work.by_title[method.SHEET], work.pages.raw[method.SHEET]

    def write(self) -> None:
        """All edits."""
        for number in [row.number for row in self.raw.rows]:
            text = self._text(number)
            if text.startswith(("Filled: ", "Refreshed: ")):
                self._set(number, refreshed_now(text))
            for label, told in self._made_from():
                if text.startswith(f"{label}: "):
                    self._set(number, f"{label}: {told}")
        self._write_granted()

    def _made_from(self) -> Iterator[tuple[str, str]]:
        if self.card is not None:
            yield from_card(self.card)
        if self.rules is not None:
            yield from_rules(self.rules)

    def _text(self, row: int) -> str:
        value = self.raw.value(row, 1)
        return value if isinstance(value, str) else ""

    def _set(self, row: int, text: str) -> None:
        if self._text(row) != text:
            self.edits.set(row, 1, text)

    def _write_granted(self) -> None:
        """What is taken for granted, in the lines that there are; one that is too many goes on in the last."""
        numbers = [row.number for row in self.raw.rows]
        heads = {self._text(number): number for number in reversed(numbers)}
        start, stop = (heads.get(heading, 0) for heading in (method.GRANTED, method.METHODS))
        lines = [number for number in numbers if start < number < stop]
        if len(lines) < 2:
            return
        before = [text for number in lines if (text := self._text(number)) and text != method.NOTHING_GRANTED]
        after = self._granted(before) or [method.NOTHING_GRANTED]
        room = len(lines) - 1  # a blank line stands before the next heading
        after = [*after[: room - 1], "; ".join(after[room - 1 :])] if len(after) > room else after
        for number, text in zip(lines, [*after, *[""] * len(lines)], strict=False):
            self._set(number, text)

    def _granted(self, before: Sequence[str]) -> list[str]:
        """The lines that still hold, and those that hold now."""
        of_day = tuple(f"{item.label}: {DEFAULTS[item.key]} used" for item in DAY if item.key in DEFAULTS)
        rest = [text for text in before if not text.startswith((ASSUMED_SLOPE, SAME_TEMPERATURE, *of_day))]
        if self.card is not None:
            aircraft = self.work.pages.raw["Aircraft"]  # as it was: it tells what the card before took for granted
            of_card = {aircraft.value(row.number, 1) for row in aircraft.rows}
            reach = tuple(f"{word}: " for word in SIDE_WORDS.values())
            rest = [text for text in rest if text not in of_card and not text.startswith(reach)]
            rest = [*granted_by_card(self.card), *rest]
        defaults = [text for text in before if text.startswith(of_day) and self._is_default(text)]
        return [*defaults, *rest, *granted_by_day(self.inputs)]

    def _is_default(self, text: str) -> bool:
        item = next(item for item in DAY if text.startswith(f"{item.label}: "))
        value = self.work.pages.value("Day", self.work.pages.row_of(item), VALUE)
        return value == DEFAULTS[item.key] and item.key not in self.work.pages.told


def refreshed_now(text: str) -> str:
    """The line that tells when a workbook was filled, as it reads after a refresh at this moment."""
    now = datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %Z")
    told = text.split("; first filled ")[-1].removeprefix("Filled: ")
    return f"Refreshed: {now}; first filled {told}"

