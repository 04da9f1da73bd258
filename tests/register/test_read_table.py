"""Files as people save them. The strips are invented."""

from __future__ import annotations

import datetime
from pathlib import Path

import openpyxl
import pytest

from stripcheck.errors import InputError
from stripcheck.register.read_table import read_table
from tests.register.lists import write_ods, write_xls

ROWS: list[list[str | float]] = [
    ["Strip", "Runway", "Length [m]"],
    ["Otter Bend", "09/27", 620.0],
    ["Crag", "4", 480.5],
]


@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_text_files(tmp_path: Path, delimiter: str, encoding: str) -> None:
    lines = [
        ["Strip", "Length [m]", "Höhe (m)"],
        ["Grünau", "620", ""],
        [],
        ["  ", "", ""],
        ["Piña", "700", "1"],
    ]
    text = "\r\n".join(delimiter.join(line) for line in lines)
    (tmp_path / "a.csv").write_bytes(text.encode(encoding))
    table = read_table(tmp_path / "a.csv")
    assert table.headers == lines[0]
    assert table.cells == [["Grünau", "Piña"], ["620", "700"], ["", "1"]]
    assert table.row_numbers == [2, 5]
    assert (table.delimiter, table.sheet, table.source) == (delimiter, "", "a.csv")


def test_title_lines_short_rows_and_values_over_two_lines(tmp_path: Path) -> None:
    text = 'Strips of 2024\n\nStrip,Length,Notes\nA,600\nB,700,"two\nlines"\nC,800,x,,\nD,900,x,y\n'
    (tmp_path / "a.csv").write_text(text)
    table = read_table(tmp_path / "a.csv")
    assert table.header_row == 3
    assert table.row_numbers == [4, 5, 6, 7]
    assert table.cells[2] == ["", "two\nlines", "x", "x"]
    assert table.too_wide == {3: 4}


def test_a_windows_1252_byte_that_is_none_is_read_as_latin_1(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_bytes(b"Strip,Length\nA\x81\xe9,600\n")
    assert read_table(tmp_path / "a.csv").cells[0] == ["A\x81é"]


def test_xlsx_keeps_numbers_dates_and_row_numbers(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    assert book.active is not None
    book.active.title = "Cover"
    sheet = book.create_sheet("List")
    sheet["B3"], sheet["C3"], sheet["D3"], sheet["F3"] = "Strip", "Length", "Survey date", None
    sheet["B5"], sheet["C5"], sheet["D5"], sheet["F5"] = (
        "Otter Bend",
        620,
        datetime.date(2024, 9, 27),
        "loose remark",
    )
    sheet["B6"], sheet["C6"] = "Crag", "480 m"
    sheet.merge_cells("B8:D9")
    book.save(tmp_path / "a.xlsx")
    table = read_table(tmp_path / "a.xlsx")
    assert (table.sheet, table.where) == ("List", 'a.xlsx sheet "List"')
    assert table.row_numbers == [5, 6]
    assert table.cells[1] == [620.0, "480 m"]
    assert table.cells[2] == [datetime.date(2024, 9, 27), ""]
    assert table.cells[3] == ["loose remark", ""]
    with pytest.raises(InputError, match='there is no sheet "Other"; its sheets are Cover, List'):
        read_table(tmp_path / "a.xlsx", "Other")
    with pytest.raises(InputError, match='sheet "Cover": no usable column'):
        read_table(tmp_path / "a.xlsx", "Cover")


def test_ods_and_xls(tmp_path: Path) -> None:
    rows: list[list[str | float]] = [[], ["", ""], *ROWS]
    write_ods(tmp_path / "a.ods", rows)
    write_xls(tmp_path / "a.xls", rows)
    for name in ("a.ods", "a.xls"):
        table = read_table(tmp_path / name)
        assert [table.headers, *map(list, zip(*table.cells, strict=True))] == ROWS, name
        assert (table.sheet, table.row_numbers) == ("Strips", [4, 5])


@pytest.mark.parametrize(
    ("name", "content", "says"),
    [
        ("a.csv", b"", "the file is empty"),
        ("a.csv", b"\n\n", "there is no header row"),
        ("a.csv", b"foo,bar\n1,2\n", "there is no header row"),
        ("a.csv", b"Strip,Length\n\n", "there are no runways below the header row"),
        ("a.csv", b"PK\x03\x04\0\0", "this is a workbook and no text file; give it its own ending"),
        ("a.csv", b"Strip,Length\nA\0,600\n", "this is no text file"),
        ("a.csv", b'Strip,Length\n"A,600\nB,700\n', "line 3: broken quote marks"),
        ("a.csv", b"\xff\xfeS\0t\0r", "the text breaks off or is damaged"),
        ("a.xlsx", b"no workbook", "this is a text and no workbook; name it .csv if it is a list"),
        ("a.xls", b"no workbook", "this is a text and no workbook; name it .csv if it is a list"),
        ("a.ods", b"no workbook", "this is a text and no workbook; name it .csv if it is a list"),
        ("a.pdf", b"%PDF", '".pdf" is not a kind of runway list'),
    ],
)
def test_files_that_can_not_be_used(tmp_path: Path, name: str, content: bytes, says: str) -> None:
    (tmp_path / name).write_bytes(content)
    with pytest.raises(InputError) as error:
        read_table(tmp_path / name)
    assert says in str(error.value)
    assert name in str(error.value)


def test_no_file_a_directory_and_a_sheet_of_a_text_file(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("Strip,Length\nA,600\n")
    for path, sheet, says in (
        (tmp_path / "none.csv", None, "there is no such file"),
        (tmp_path, None, "this is a directory"),
        (tmp_path / "a.csv", "List", "a text file has no sheets"),
    ):
        with pytest.raises(InputError, match=says):
            read_table(path, sheet)
