"""Cells read as numbers, yes or no, and texts; a cell that can't be read gives a fault, and the rest goes on."""

from __future__ import annotations

import datetime
import math
import re
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from stripcheck.errors import InputError
from stripcheck.units import KINDS, read_quantity, unit_scale

BLANKS = frozenset(("", "-", "--", "\u2013", "\u2014", "?", "n/a", "#n/a", "na", "nil", "none", "null", "nan",
                    "tbd", "tba", "unk", "unknown"))  # fmt: skip

YES = frozenset(("1", "yes", "y", "true", "x", "ja", "j", "oui", "si", "closed", "wahr", "vrai"))
NO = frozenset(("0", "no", "n", "false", "nein", "non", "open", "falsch", "faux"))

_PLAIN_NUMBER = re.compile(r"[-+]?(?:\d+\.?\d*|\.\d+)", re.ASCII)
_NUMBER_HEAD = re.compile(r"[-+]?\d[\d.,' \u00a0]*", re.ASCII)


class Fault(NamedTuple):
    """A cell that can't be used: index of the runway [0 = first], header of its column, and what is wrong."""

    row_index: int
    header: str
    message: str


def is_blank(cell: object) -> bool:
    """Whether a cell says nothing: empty, a dash, a question mark, "n/a" and the like.

    >>> is_blank(" - "), is_blank("N/A"), is_blank(0)
    (True, True, False)
    """
    return cell is None or (isinstance(cell, str) and cell.strip().lower() in BLANKS)


def as_text(cell: object) -> str:
    """A cell as text: whole numbers without ".0", dates as 2024-09-27, blanks as "".

    >>> as_text(9.0), as_text(datetime.date(2024, 9, 27))
    ('9', '2024-09-27')
    """
    return "" if is_blank(cell) else as_written(cell)


def as_written(cell: object) -> str:
    """A cell as text, as ``as_text`` gives it, but with "n/a" and the like kept.

    >>> as_written("UNK"), as_written(None)
    ('UNK', '')
    """
    if cell is None:
        return ""
    if isinstance(cell, float) and cell.is_integer():
        return str(int(cell))
    if isinstance(cell, datetime.datetime):
        return cell.isoformat(" ") if cell.time() != datetime.time() else cell.date().isoformat()
    return str(cell).strip()


def harmless(text: str) -> str:
    """A text with an apostrophe before it where a spreadsheet would take it for a formula.

    >>> harmless("=1+1"), harmless("Otter Bend")
    ("'=1+1", 'Otter Bend')
    """
    return "'" + text if text.startswith(("=", "+", "-", "@", "\t", "\r")) else text


def read_yes(cell: object) -> bool | None:
    """True or False for a yes-or-no cell, None for a blank one. Raises InputError for anything else.

    >>> read_yes("Yes"), read_yes(0.0), read_yes("")
    (True, False, None)
    """
    if is_blank(cell):
        return None
    word = as_text(cell).lower()
    if word in YES:
        return True
    if word in NO:
        return False
    raise InputError(f'"{as_text(cell)}" is neither yes nor no; write "yes" or "no"')


def read_numbers(
    cells: Sequence[object], kind: str, unit: str, header: str, local_marks: bool
) -> tuple[NDArray[np.float64], list[Fault]]:
    """A column of cells as SI numbers, NaN where a cell is blank or can't be read, and the faults.

    ``kind``: a kind of ``stripcheck.units.KINDS``; ``unit``: of a bare number, "" = the default of the kind;
    ``local_marks``: whether the file may write decimal commas and thousands points (its delimiter is ";").

    >>> read_numbers(["620", "2300 ft", "-", "far"], "length", "", "Length", False)[0]
    array([620.  , 701.04,    nan,    nan])
    """
    marks = decimal_marks(cells, kind) if local_marks else None
    known: dict[object, float | str] = {}
    numbers = np.full(len(cells), np.nan)
    faults = []
    for index, cell in enumerate(cells):
        if cell == "":
            continue
        key = cell if type(cell) is str else (type(cell), cell)  # True and 1.0 are equal, but not both numbers
        if key not in known:
            known[key] = _number_or_fault(cell, kind, unit, marks)
        value = known[key]
        if isinstance(value, str):
            faults.append(Fault(index, header, value))
        else:
            numbers[index] = value
    return numbers, faults


def _number_or_fault(cell: object, kind: str, unit: str, marks: str | None) -> float | str:
    """SI value of a cell, or the sentence that tells why there is none."""
    if is_blank(cell):
        return math.nan
    if isinstance(cell, str):
        plain = cell if marks is None else _english(cell, marks)
        if _PLAIN_NUMBER.fullmatch(plain) and (unit or kind != "pressure"):
            factor, offset = unit_scale(unit or KINDS[kind][0], kind)
            return float(plain) * factor + offset
        cell = plain
    elif isinstance(cell, datetime.date | datetime.time | datetime.timedelta):
        return f'"{as_text(cell)}" is a date or time where a number belongs; format the cell as a number'
    try:
        return read_quantity(cell, kind, unit)
    except InputError as error:
        return str(error)


def _english(text: str, decimal_marks: str) -> str:
    """A number with local marks, such as "2.300,5 ft", as "2300.5 ft"."""
    head = _NUMBER_HEAD.match(text)
    if head is None:
        return text
    marks: dict[str, str | int | None] = {mark: "." if mark in decimal_marks else "" for mark in ".,"}
    return head[0].translate(str.maketrans(marks)) + text[head.end() :]


def decimal_marks(cells: Sequence[object], kind: str) -> str:
    """The decimal marks of a column in a file that may have "," or "."; the other mark parts thousands.

    A mark that is followed by one, two or more than three digits somewhere, or stands after a lone 0, is the
    decimal one. Where every mark is followed by three digits, a length or an elevation has no decimals
    ("2.300" is 2300: nobody surveys a strip to the millimetre); in another quantity either mark is decimal,
    for none of them reaches thousands.
    """
    texts = [cell for cell in cells if isinstance(cell, str)]
    for decimal, other in ((",", "."), (".", ",")):
        shape = re.compile(rf"[-+]?(?:0*[{decimal}]\d+|[\d{other} ]*[{decimal}](?:\d{{1,2}}|\d{{4,}}))(?!\d)")
        if any(shape.match(text) for text in texts):
            return decimal
    return "" if kind in ("length", "altitude") else ".,"
