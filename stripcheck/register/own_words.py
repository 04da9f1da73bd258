"""Values as a register would write them: in the unit of its column, in the words that it uses, with its decimal mark."""

from __future__ import annotations

import datetime
import math
import re
from collections import Counter
from functools import cache, cached_property
from typing import NamedTuple

from stripcheck.register.reader import Reading
from stripcheck.register.runways import Runways
from stripcheck.register.surface_words import read_surface
from stripcheck.register.values import NO, YES, as_text, as_written, decimal_marks, harmless
from stripcheck.surface import SURFACES
from stripcheck.units import KINDS, PRESSURE_INHG, tidy, unit_scale

Value = float | str | datetime.date
Key = tuple[str, int]  # of a column: what it tells, and of which end (0: the whole runway)

HAIR = 1e-9  # of the value: two readings of one number in one unit
# [SI] Two numbers in different units are the same where they differ by no more than half of the last digit that one of them
# shows, for one is the other, converted and rounded; and never by more than this. Less than any survey of a strip is good for.
MOST_ROUNDING = {
    "length": 0.5, "altitude": 0.5, "speed": 0.5 * 1852.0 / 3600.0, "temperature": 0.5, "pressure": 50.0, "slope": 0.0005,
    "angle": math.radians(0.5),
}  # fmt: skip
LIKELY_PERCENT = 0.3  # a number below this in a cell of percent: what ``Runways`` refuses a column for
MOST_DECIMALS = 6
SAME_COORDINATE = math.radians(1e-5)  # 1 m on the ground: coordinates serve to find a strip and its bearing
LONGEST_TEXT = 32_767  # [characters] that a cell holds

_WITH_UNIT = re.compile(r"[-+]?[\d.,' \u00a0]*\d[.,]?\s*([^\d\s.,].*)", re.DOTALL)
_CONTROLS = re.compile("[\x00-\x08\x0b-\x1f\x7f\ud800-\udfff\ufffe\uffff]")


class Quantity(NamedTuple):
    """A number in SI, the unit in which it was written (factor and offset, see ``unit_scale``), and its kind."""

    si: float
    unit: tuple[float, float]
    kind: str

    @property
    def shown(self) -> float:
        """The number as it was written."""
        factor, offset = self.unit
        return tidy((self.si - offset) / factor) + 0.0

    @property
    def rounding(self) -> float:
        """Half of the last digit shown [SI], no more than ``MOST_ROUNDING``."""
        half = 0.5 * 10.0 ** -_decimals(self.shown) * abs(self.unit[0])
        return min(half, MOST_ROUNDING[self.kind])


def _decimals(number: float) -> int:
    return len(f"{number:.{MOST_DECIMALS}f}".rstrip("0").partition(".")[2])


def same_quantity(one: Quantity, other: Quantity, coordinate: bool = False) -> bool:
    """Whether two numbers are the same: exactly in one unit, within the rounding in two.

    >>> metres, feet = (1.0, 0.0), (0.3048, 0.0)
    >>> same_quantity(Quantity(701.04, feet, "length"), Quantity(701.0, metres, "length"))
    True
    >>> same_quantity(Quantity(701.0, metres, "length"), Quantity(702.0, metres, "length"))
    False
    """
    between = abs(one.si - other.si)
    if one.kind == "angle":
        between = abs((one.si - other.si + math.pi) % (2.0 * math.pi) - math.pi)
    allowed = HAIR * max(abs(one.si), abs(other.si), 1e-3)
    if coordinate:
        allowed = SAME_COORDINATE
    elif one.unit != other.unit:
        allowed += max(one.rounding, other.rounding)
    return between <= allowed


def in_unit(given: Quantity, unit: tuple[float, float]) -> float:
    """A number in another unit, with the fewest decimals that keep it within the rounding of the number as it was written.

    >>> in_unit(Quantity(701.0, (1.0, 0.0), "length"), (0.3048, 0.0))
    2300.0
    """
    if unit == given.unit:
        return given.shown
    exact = (given.si - unit[1]) / unit[0]
    tries = (round(exact, decimals) for decimals in range(MOST_DECIMALS))
    close = (number for number in tries if abs(number - exact) * abs(unit[0]) <= given.rounding)
    return float(next(close, tidy(exact))) + 0.0


def quantity(runways: Runways, at: Key, index: int) -> Quantity | None:
    """The number in a cell with the unit in which it stands there; None where it is blank or can't be used."""
    if at not in runways.numbers or math.isnan(si := float(runways.numbers[at][index])):
        return None
    item = runways.found[at]
    kind = item.column.kind
    return Quantity(si, unit_scale(_unit_of(runways.table.cells[item.position][index], kind, item.unit), kind), kind)


def _unit_of(cell: object, kind: str, unit: str) -> str:
    own = _WITH_UNIT.fullmatch(cell.strip()) if isinstance(cell, str) else None
    if own:
        return own[1].strip()
    if kind == "pressure" and not unit:
        number = float(str(cell).replace(",", "."))
        return "inHg" if PRESSURE_INHG[0] <= number <= PRESSURE_INHG[1] else "hPa"
    return unit or KINDS[kind][0]


def clean_text(cell: object) -> str:
    """A cell as a text that any file can hold: without control characters, blanks such as "n/a" as ""."""
    return clean(as_text(cell))


def clean(text: str) -> str:
    """A text without control characters, with plain line ends, no longer than a cell holds.

    >>> clean("mown\\r\\nin May" + chr(7))
    'mown\\nin May'
    """
    return _CONTROLS.sub(" ", text.replace("\r\n", "\n").replace("\r", "\n")).strip()[:LONGEST_TEXT]


def same_text(one: str, other: str) -> bool:
    """Whether two texts read the same: capitals, blanks and an apostrophe put before a sign don't count.

    >>> same_text("Otter  Bend", "otter bend"), same_text("'=1+1", "=1+1")
    (True, True)
    """
    return _plain(one) == _plain(other)


def _plain(text: str) -> str:
    return " ".join(harmless(text).casefold().split())


class OwnWords:
    """How a register writes things."""

    def __init__(self, reading: Reading) -> None:
        self.runways, self.table = reading.runways, reading.runways.table
        self.is_text = bool(self.table.delimiter)
        self._mark, self.yes, self._holds_dates = cache(self._find_mark), cache(self._find_yes), cache(self._find_dates)

    def number(self, at: Key, given: Quantity, index: int | None) -> Value:
        """A number for a cell: in the unit of the number that stands there, else of its column; a text where that is one."""
        item = self.runways.found[at]
        cell = "" if index is None else self.table.cells[item.position][index]
        old = None if index is None else quantity(self.runways, at, index)
        if isinstance(cell, str) and old is not None:
            own = _WITH_UNIT.fullmatch(cell.strip())
            if own:
                return f"{self._written(at, in_unit(given, old.unit))} {own[1].strip()}"
        usual = old.unit if old is not None else unit_scale(item.unit or KINDS[given.kind][0], given.kind)
        return in_unit(given, usual)

    def text(self, at: Key, value: Value) -> str:
        """A value as a text file holds it."""
        if isinstance(value, float):
            return self._written(at, value)
        return value.isoformat() if isinstance(value, datetime.date) else harmless(value)

    def _written(self, at: Key, number: float) -> str:
        return f"{number:.12g}".replace(".", self._mark(at) if self.is_text else ".")

    def _find_mark(self, at: Key) -> str:
        """The decimal mark of a column; only files with ";" between cells may have another one than the point."""
        if self.table.delimiter != ";":
            return "."
        cells = self.table.cells[self.runways.found[at].position]
        marks = decimal_marks(cells, self.runways.found[at].column.kind)
        if len(marks) == 1:
            return marks
        if marks:  # either mark is decimal
            return "," if any(isinstance(cell, str) and "," in cell for cell in cells) else "."
        return "." if any(isinstance(cell, str) and "," in cell for cell in cells) else ","

    def _find_yes(self, at: Key, value: bool) -> str:
        """The word that the column uses most for yes or no."""
        words = YES if value else NO
        counts = Counter(cell.strip() for cell in self.runways.cells(*at) or () if isinstance(cell, str))
        return next((text for text, _ in counts.most_common() if text.lower() in words), "yes" if value else "no")

    def surface(self, word: str, given: str) -> str:
        """A surface without a condition: the table's word where the register keeps to those, else as given."""
        return word if self._keeps_to_words or read_surface_pair(given) != (word, "") else given

    @cached_property
    def _keeps_to_words(self) -> bool:
        texts = {text.casefold() for text in self.runways.texts("surface") if text}
        return bool(texts) and texts <= set(SURFACES)

    def date(self, at: Key, text: str) -> Value:
        """A date as a date where the column of a workbook holds dates, else as a text."""
        day = as_date(text)
        return day if day is not None and self._holds_dates(at) else text

    def _find_dates(self, at: Key) -> bool:
        return any(isinstance(cell, datetime.date) for cell in self.runways.cells(*at) or ())

    @cached_property
    def percent_slopes(self) -> bool:
        """Whether slopes of a workbook were refused because their cells may be formatted as percent."""
        cells = self.runways.cells("slope")
        if cells is None or self.is_text:
            return False
        numbers = (cells[index] for index in self.runways.unreadable["slope", 0])
        return any(isinstance(number, float | int) and abs(number) < LIKELY_PERCENT for number in numbers)


def read_surface_pair(text: str) -> tuple[str, str]:
    """Table word and condition of a spelling."""
    surface = read_surface(text)
    return surface.word, surface.condition


def as_date(cell: object) -> datetime.date | None:
    """The date in a cell, None where it is none that can be told.

    >>> as_date("2025-04-11"), as_date("11/04/2025")
    (datetime.date(2025, 4, 11), None)
    """
    try:
        return datetime.date.fromisoformat(as_written(cell))
    except ValueError:
        return None
