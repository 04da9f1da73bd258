"""The audit of a filled workbook: its inputs as they stand, typed over, in rows and columns of its sheet Strips."""

from __future__ import annotations

import datetime
from pathlib import Path

import openpyxl
import pytest

from stripcheck.cli import main
from stripcheck.register import audit_kinds as kinds
from stripcheck.sheet.audit_book import audit_book, is_filled

TODAY = datetime.date(2026, 1, 1)
LIST = (
    "Strip,Name,Runway,Heading end 1 [°],Length [m],Width [m],Surface,Condition,Elevation [ft],Elevation end 1 [ft],"
    "Elevation end 2 [ft],Slope [%],Obstacle height end 1 [ft],Obstacle distance end 1 [m],Land on,Leave by,Temperature [°C],"
    "Survey date,Slope profile\n"
    "XOTB,Otter Bend,09/27,90,600,20,grass,dry,1500,1480,1500,1,40,300,09,27,20,2025-04-30,\n"
    "XGRB,Grebe Pond,18/36,180,700,20,gravel,,900,,,,,,,,,2025-04-30,\"0:0, 700:7\"\n"
)  # fmt: skip


@pytest.fixture
def book(tmp_path: Path) -> Path:
    (tmp_path / "strips.csv").write_text(LIST, encoding="utf-8")
    given = ["--card", "ridge-runner", "--rules", "part-cat-b", "--temp", "20", "-o", str(tmp_path / "book.xlsx"), "--quiet"]
    assert main(["fill", str(tmp_path / "strips.csv"), *given]) == 0
    return tmp_path / "book.xlsx"


def typed(book: Path, row: int, title: str, value: object) -> str:
    """Type a value over a cell of the sheet Strips; returns the cell."""
    loaded = openpyxl.load_workbook(book)
    sheet = loaded["Strips"]
    cell = next(cell for cell in sheet[3] if cell.value == title)
    sheet.cell(row, cell.column).value = value
    loaded.save(book)
    return f"{cell.column_letter}{row}"


def found(book: Path) -> dict[kinds.Kind, tuple[int, int, str]]:
    audit = audit_book(book, today=TODAY)
    return {finding.kind: (finding.row, finding.place, finding.column) for finding in audit.findings}


def test_a_clean_book_has_no_findings(book: Path) -> None:
    assert is_filled(book, None)
    assert not is_filled(book, "Strips")  # a sheet that is named is a list
    audit = audit_book(book, today=TODAY)
    assert audit.findings == []
    assert (audit.rows_read, audit.sheet) == (2, "Strips")


def test_a_list_in_a_workbook_is_no_filled_one(tmp_path: Path) -> None:
    loaded = openpyxl.Workbook()
    loaded.active.title = "Strips"
    loaded.active.append(["Strip", "Direction", "Surface"])
    loaded.save(tmp_path / "list.xlsx")
    assert not is_filled(tmp_path / "list.xlsx", None)
    with pytest.raises(ValueError, match="did not fill|not a workbook"):
        audit_book(tmp_path / "list.xlsx")


@pytest.mark.parametrize(
    ("row", "title", "value", "kind"),
    [
        (4, "Length [m]", 650, kinds.ROWS_DISAGREE),
        (4, "Length [m]", "650 m", kinds.BAD_VALUE),
        (4, "Length [m]", 80, kinds.BAD_VALUE),
        (5, "Usable for landing [m]", 650, kinds.LDA_TOO_LONG),
        (4, "Slope given [%]", -1, kinds.SLOPE_AGAINST_ENDS),
        (4, "Elevation at start [ft]", 1530, kinds.ABOVE_FIELD),
        (5, "Heading [°]", 300, kinds.HEADINGS_NOT_OPPOSITE),
        (4, "Own temperature [°C]", 60, kinds.ODD_TEMPERATURE),
        (5, "Obstacle on climb-out, distance [m]", None, kinds.ROWS_DISAGREE),
        (4, "Obstacle on approach, distance [m]", None, kinds.HALF_OBSTACLE),
        (4, "Surface", "turf", kinds.STRANGE_SURFACE),
        (4, "Surface", None, kinds.NO_SURFACE),
        (4, "Condition", "boggy", kinds.STRANGE_CONDITION),
        (4, "Landing allowed", "perhaps", kinds.BAD_VALUE),
        (7, "Fault in the list", "the length is missing", kinds.FILLED_FAULT),
        (4, "Survey date", "2001-01-01", kinds.OLD_SURVEY),
        (4, "Notes", "One-way", None),
        (6, "Notes", "One-way, uphill", kinds.ONE_WAY_IN_NOTES),
    ],
)  # fmt: skip
def test_what_was_typed_over(book: Path, row: int, title: str, value: object, kind: kinds.Kind | None) -> None:
    cell = typed(book, row, title, value)
    places = found(book)
    if kind is None:
        assert places == {}
        return
    assert kind in places
    if kind is kinds.HEADINGS_NOT_OPPOSITE:
        assert places[kind][2] == title
    elif kind is kinds.HALF_OBSTACLE:  # shown at the height
        assert places[kind][0] == row
    elif kind is kinds.ROWS_DISAGREE and row == 5:  # told in the row of the direction that is named first
        assert places[kind][:1] == (4,)
    else:
        found_row, column, name = places[kind]
        assert (f"{openpyxl.utils.get_column_letter(column)}{found_row}", name) == (cell, title)


def test_a_slope_is_missing_where_the_profile_is_gone_too(book: Path) -> None:
    typed(book, 6, "Slope profile", None)
    assert found(book) == {}
    typed(book, 6, "Profile, take-off slope [%]", None)
    assert found(book)[kinds.NO_SLOPE][0] == 6


def test_rows_that_were_sorted_or_added_still_pair(book: Path) -> None:
    """The directions exchanged, and one row copied below under a new name: the copy stands alone."""
    loaded = openpyxl.load_workbook(book)
    sheet = loaded["Strips"]
    rows = [[cell.value for cell in sheet[row]] for row in (5, 4, 7, 6)]
    for row, values in enumerate([*rows, rows[2]], 4):
        for column, value in enumerate(values, 1):
            sheet.cell(row, column).value = value
    sheet["B8"], sheet["C8"] = "XTRN", "Tern Hollow"
    loaded.save(book)
    audit = audit_book(book, today=TODAY)
    assert audit.rows_read == 3
    assert [finding.what for finding in audit.findings if finding.kind is kinds.ROWS_DISAGREE] == []
