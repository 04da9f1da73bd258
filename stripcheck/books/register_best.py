"""Of the two directions of a runway the better one, in and out, as formulas and as values: what Fleet and Months show."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from stripcheck.books.register_levels import Fleet
from stripcheck.books.register_reading import Reading
from stripcheck.chain import Chain, Step
from stripcheck.sheet import summary
from stripcheck.sheet.cases import FIRST_ROW, STEP
from stripcheck.sheet.strips import shown

CLOSED = "closed"
WORDS = (*summary.BOTH, CLOSED)
SIDES = ("landing", "takeoff")


@dataclass(frozen=True)
class Best:
    """The better direction of each runway on one day for one aeroplane, and the texts and numbers of that direction."""

    fleet: Fleet
    reading: Reading
    chain: Chain

    def better(self, side: str, runway: int, day: int = 0) -> int:
        """Which of the two directions is the better for a side: 0 or 1."""
        row = self.fleet.row(runway, day)
        first, second = (cases.values[f"{side}_score"][row] for cases in self.fleet.ends)
        return 0 if first >= second else 1

    def is_first(self, side: str, runway: int, day: int = 0) -> str:
        """Formula of the same, as a truth."""
        one, other = self.scores(side, runway, day)
        return f"{one}>={other}"

    def scores(self, side: str, runway: int, day: int = 0) -> tuple[str, str]:
        row = self.fleet.row(runway, day)
        one, other = (cases.cell(f"{side}_score", row) for cases in self.fleet.ends)
        return one, other

    def picked(self, side: str, part: str, runway: int, day: int = 0) -> tuple[str, Any]:
        """Formula and value of a step of the better direction: its verdict, reason or margin."""
        row, key = self.fleet.row(runway, day), f"{side}_{part}"
        one, other = (cases.cell(key, row) for cases in self.fleet.ends)
        value = self._values(key, self.better(side, runway, day))[row]
        return f"IF({self.is_first(side, runway, day)},{one},{other})", _plain(value)

    def direction(self, side: str, runway: int, day: int = 0) -> tuple[str, str]:
        """Formula and value of the name of the better direction."""
        names = [self.reading.at(f"end_{end}", FIRST_ROW + runway) for end in (1, 2)]
        value = self.reading.values[f"end_{self.better(side, runway, day) + 1}"][runway]
        return f"IF({self.is_first(side, runway, day)},{names[0]},{names[1]})", value

    def both(self, runway: int, day: int = 0) -> tuple[str, str]:
        """Formula and value of the words for in and out together."""
        ranks, values = [], []
        for side in SIDES:
            one, other = self.scores(side, runway, day)
            ranks.append(f"MAX(1,ROUND(MAX({one},{other})/{STEP:.0f},0))")
            row = self.fleet.row(runway, day)
            best = max(float(cases.values[f"{side}_score"][row]) for cases in self.fleet.ends)
            values.append(max(1, round(best / STEP)))
        word = summary.BOTH[int(summary.in_and_out(np.int64(values[0]), np.int64(values[1]))) - 1]
        return f"INDEX({_TABLE},{ranks[0]},{ranks[1]})", word

    def unless_closed(self, runway: int, text: str, value: Any, instead: str = CLOSED) -> tuple[str, Any]:
        """A formula and its value, blank for a row that is not in use, and another word for a strip that is closed."""
        used, closed = (self.reading.at(key, FIRST_ROW + runway) for key in ("used", "closed"))
        whole = f'IF({used},IF({closed}="yes","{instead}",{text}),"")'
        if not self.reading.values["used"][runway]:
            return whole, ""
        return whole, instead if self.reading.values["closed"][runway].lower() == "yes" else value

    def _values(self, key: str, end: int) -> Sequence[Any]:
        step = self.chain.by_key[key]
        assert isinstance(step, Step)
        cases = self.fleet.ends[end]
        faults = list(self.reading.values["fault"]) * (cases.rows // self.reading.rows)
        found: Sequence[Any] = shown(step, cases.values[key], faults)
        return found


def _plain(value: Any) -> Any:
    if isinstance(value, float | np.floating):
        return "" if np.isnan(value) else float(value)
    return value


def _table() -> str:
    """The words for in and out together by the two ranks, as a table in a formula."""
    rows = (
        ",".join(f'"{summary.BOTH[int(summary.in_and_out(np.int64(one), np.int64(other))) - 1]}"' for other in range(1, 5))
        for one in range(1, 5)
    )
    return "{" + ";".join(rows) + "}"


_TABLE = _table()
