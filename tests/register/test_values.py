"""Cells as people type them. Feet by definition: 1 ft = 0.3048 m (international yard and pound agreement, 1959)."""

from __future__ import annotations

import datetime
import math

import numpy as np
import pytest

from stripcheck.errors import InputError
from stripcheck.register.values import as_text, is_blank, read_numbers, read_yes


def numbers(cells: list[object], kind: str = "length", unit: str = "", local_marks: bool = False) -> list[float]:
    values, faults = read_numbers(cells, kind, unit, "Header", local_marks)
    assert faults == []
    return [float(value) for value in values]


def test_lengths_as_typed() -> None:
    cells: list[object] = [
        "620",
        620,
        620.0,
        "2300ft",
        "2300 ft",
        "1 250",
        "1,250",
        " 620 m ",
        "0.62 km",
        "1250 FT",
    ]
    expected = [620, 620, 620, 701.04, 701.04, 1250, 1250, 620, 620, 381]
    assert numbers(cells) == pytest.approx(expected, rel=1e-12)


def test_the_unit_of_the_header_holds_for_bare_numbers_only() -> None:
    assert numbers(["1000", "1000 m"], unit="ft") == pytest.approx([304.8, 1000.0], rel=1e-12)


def test_blanks_are_missing_and_no_fault() -> None:
    cells: list[object] = ["", " ", "-", "n/a", "?", "unknown", None, "—"]
    assert all(math.isnan(value) for value in numbers(cells))
    assert all(is_blank(cell) for cell in cells)


@pytest.mark.parametrize(
    ("cells", "kind", "expected"),
    [
        (["2.300", "1.250"], "length", [2300, 1250]),  # three digits after every mark: thousands
        (["2,300"], "length", [2300]),
        (["2.300,5", "1.250"], "length", [2300.5, 1250]),
        (["620,5", "1.250"], "length", [620.5, 1250]),
        (["620.5", "1.250"], "length", [620.5, 1.25]),  # another number shows that the point is decimal
        (["0,750"], "length", [0.75]),
        (["2.300 m"], "length", [2300]),
        (["4,5", "1.25"], "slope", [0.045, 1.25]),
        (["1,250"], "slope", [0.0125]),
        (["-7.250"], "angle", [math.radians(-7.25)]),
        (["far"], "length", None),
    ],
)
def test_decimal_commas_where_the_delimiter_is_a_semicolon(
    cells: list[object], kind: str, expected: list[float] | None
) -> None:
    if expected is None:
        assert read_numbers(cells, kind, "", "Header", True)[1][0].row_index == 0
    else:
        assert numbers(cells, kind, local_marks=True) == pytest.approx(expected, rel=1e-12)


def test_pressures_tell_their_unit() -> None:
    assert numbers(["1013", "29.92", "1013 hPa"], "pressure") == pytest.approx(
        [101300, 101320.748119, 101300], rel=1e-9
    )


@pytest.mark.parametrize(
    ("cell", "kind", "says"),
    [
        ("abc", "length", "is not a number"),
        (True, "length", "is not a number"),
        ("620/700", "length", "unit"),
        (datetime.date(2024, 1, 5), "length", "is a date or time"),
        ("5", "pressure", "neither a pressure"),
        ("=1+1", "length", "is not a number"),
        ("1_000", "length", "unit"),
        ("inf", "length", "is not a number"),
        ("620 kg", "length", "unit"),
        ("1:20", "slope", "unit"),
    ],
)
def test_what_is_no_number_is_a_fault(cell: object, kind: str, says: str) -> None:
    values, faults = read_numbers(["", cell, ""], kind, "", "Header", False)
    assert np.isnan(values).all()
    assert [(fault.row_index, fault.header) for fault in faults] == [(1, "Header")]
    assert says in faults[0].message


def test_a_tick_is_no_length_of_one_metre() -> None:
    values, faults = read_numbers([1.0, True, 1], "length", "", "Header", False)
    assert values[0] == values[2] == 1.0 and np.isnan(values[1])
    assert [fault.row_index for fault in faults] == [1]


def test_yes_and_no() -> None:
    assert [read_yes(cell) for cell in ("yes", "Y", 1.0, True, "x", "ja")] == [True] * 6
    assert [read_yes(cell) for cell in ("no", "N", 0, False, "open")] == [False] * 5
    assert [read_yes(cell) for cell in ("", "-", None)] == [None] * 3
    with pytest.raises(InputError, match='"maybe" is neither yes nor no'):
        read_yes("maybe")


def test_texts() -> None:
    cells = [
        9.0,
        9.5,
        "  Otter ",
        None,
        "n/a",
        datetime.datetime(2024, 9, 27),
        datetime.datetime(2024, 9, 27, 6, 30),
    ]
    assert [as_text(cell) for cell in cells] == [
        "9",
        "9.5",
        "Otter",
        "",
        "",
        "2024-09-27",
        "2024-09-27 06:30:00",
    ]
