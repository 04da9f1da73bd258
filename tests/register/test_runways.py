"""What is read of each runway, and its mistakes. The strips are invented."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest

from stripcheck.errors import InputError
from stripcheck.register import Directions, read_list

Read = Callable[..., Directions]


@pytest.mark.parametrize(
    ("header", "cell", "says"),
    [
        ("Width", "abc", '"abc" is not a number'),
        ("Width", "-5", "a runway is at most 500 m wide"),
        ("Width", "600", "a runway is at most 500 m wide"),
        ("Elevation", "-2000", "an elevation lies between -430 m"),
        ("Elevation", "5501 m", "an elevation lies between -430 m"),
        ("Slope", "31", "a slope lies between -30 % and 30 %"),
        ("Local slope", "-1", "a greatest local slope lies between 0 % and 30 %"),
        ("Heading", "361", "a heading lies between 0 and 360 degrees"),
        ("Displaced threshold", "-1", "a displaced threshold lies between"),
        ("Displaced threshold 1", "600", "lies beyond the other end of the runway"),
        ("Temperature", "61", "a temperature lies between -60 °C and 60 °C"),
        ("QNH", "500", "neither a pressure in hPa (800 to 1100) nor in inHg"),
        ("QNH", "500 hPa", "a QNH lies between 800 hPa and 1,100 hPa"),
        ("Wind speed", "200", "a wind speed lies between"),
        ("Wind from", "VRB", '"VRB" is not a number'),
        ("Closed", "maybe", "neither yes nor no"),
        ("Land on", "31", "is neither end of runway 09/27"),
        ("Leave by", "uphill", "is neither end of runway 09/27"),
        ("One-way", "yes", "one-way, but not which way"),
        ("Obstacle height", "10", "an obstacle needs a distance"),
        ("Obstacle distance end 2", "300", "an obstacle needs a height"),
    ],
)
def test_a_bad_cell_is_a_fault_of_its_row_and_of_no_other(read: Read, header: str, cell: str, says: str) -> None:
    text = f"Strip;Runway;Length;{header}\nOtter Bend;09/27;600;{cell}\nCrag;09/27;700;\n"
    strips = read(text)
    assert strips.texts["fault"][0] == strips.texts["fault"][1]
    assert strips.texts["fault"][0].startswith(f'column "{header}": ')
    assert says in strips.texts["fault"][0]
    assert strips.texts["fault"][2:] == ["", ""]
    with pytest.raises(InputError) as error:
        read(text, strict=True)
    assert str(error.value).startswith(f'strips.csv row 2, column "{header}": ')


@pytest.mark.parametrize("length", ["89", "6001", "-600", "far", "0"])
def test_a_length_that_is_none_leaves_no_usable_length(read: Read, length: str) -> None:
    strips = read(f"Strip,Runway,Length,TORA,LDA\nOtter Bend,09/27,{length},500,500\n")
    assert strips.texts["fault"][0].startswith('column "Length": ')
    for key in ("length", "tora", "lda"):
        assert str(strips.numbers[key].tolist()) == "[nan, nan]"


def test_a_row_with_too_many_cells(read: Read) -> None:
    strips = read("Strip,Runway,Length\nOtter Bend, Lower,09/27,600\n")
    assert "the row has 4 cells but the header only 3" in strips.texts["fault"][0]


def test_a_runway_that_became_a_date(read: Read) -> None:
    strips = read("Strip,Runway,Length\nOtter Bend,27-Sep,600\n")
    assert strips.texts["fault"][0].startswith('column "Runway": "27-Sep" is a date')
    assert strips.texts["runway"] == ["A/B", "A/B"]


@pytest.mark.parametrize(
    ("slopes", "read_as"),
    [([0.02, 0.05], None), ([2, 0.05], [0.02, 0.0005]), (["2 %", "0.05 %"], [0.02, 0.0005]), ([0, 0], [0.0, 0.0])],
)
def test_slopes_that_may_be_percent_cells(tmp_path: Path, slopes: list[object], read_as: list[float] | None) -> None:
    book = openpyxl.Workbook()
    assert book.active is not None
    for row in (["Strip", "Runway", "Length", "Slope"], *(["A", "09/27", 600, slope] for slope in slopes)):
        book.active.append(row)
    book.save(tmp_path / "a.xlsx")
    strips = read_list(tmp_path / "a.xlsx")
    if read_as is None:
        assert "is 0.02 %, or 2 % if the cell is formatted as percent" in strips.texts["fault"][0]
    else:
        assert strips.texts["fault"] == [""] * 4
        assert strips.numbers["slope_given"][::2] == pytest.approx(read_as, rel=1e-12)
