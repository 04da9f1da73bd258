"""`stripcheck audit` as a user meets it: the page, the .csv, the .xlsx with its links, and what it refuses."""

from __future__ import annotations

import csv
import re
from pathlib import Path

import openpyxl
import pytest

from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.register.audit_kinds import KINDS
from tests.sheet.package_check import package_faults

UGLY = (
    "Our strips\n"
    "Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%],Survey date,Notes\n"
    "XOTB,09/27,620,turf,1500,1,2001-04-30,=1+1\n"
    "=XGRB,18/36,40,Clinker,900,,2001-04-30,\n"
)


@pytest.fixture
def strips(tmp_path: Path) -> Path:
    path = tmp_path / "our strips.csv"
    path.write_text(UGLY)
    return path


def as_workbook(path: Path) -> Path:
    """The same list as a workbook, with an empty column before it."""
    book = openpyxl.Workbook()
    book.active.title = "Mine & 'yours'"
    for line in csv.reader(UGLY.splitlines()):
        cells = [float(cell) if cell.isdigit() else cell for cell in line]
        book.active.append([None, *(f"'{cell}" if str(cell).startswith("=") else cell for cell in cells)])
    book.save(path)
    return path


def test_the_page(strips: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["audit", str(strips)]) == 0
    said = capsys.readouterr().out.splitlines()
    assert said[0] == "our strips.csv: 2 runways read, 0 left out (closed, helicopter pads, water)"
    assert [line.split() for line in said if line.startswith("unusable ")] == [
        ["unusable", "value", "unreadable", "or", "absurd", "1"],
        ["unusable", "surface", "word", "unknown", "1"],
        ["unusable", "slope", "missing", "1"],
    ]
    assert "row 4  =XGRB 18/36" in said
    assert '  unusable: Length [m]: "40": a runway is between 90 m and 6,000 m long -> correct or clear the cell' in said
    assert said[-2:] == ["All findings: add --csv OUT.csv or --xlsx OUT.xlsx", CAUTION]


def test_a_clean_list(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "strips.csv"
    path.write_text("Strip,Runway,Heading [°],Length [m],Surface,Elevation [ft],Slope [%]\nXOTB,09/27,90,620,turf,1500,1\n")
    assert main(["audit", str(path)]) == 0
    said = capsys.readouterr().out
    assert "Nothing found. That is no proof" in said and CAUTION in said


def test_many_rows_are_shown_to_a_limit(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "strips.csv"
    path.write_text("Strip,Runway,Length [m],Surface\n" + "".join(f"X{n},09/27,{600 + n},\n" for n in range(200)))
    assert main(["audit", str(path)]) == 0
    said = capsys.readouterr().out
    assert "The worst 12 of 200 rows:" in said and said.count("\nrow ") == 12


def test_the_table_of_findings(strips: Path, tmp_path: Path) -> None:
    assert main(["audit", str(strips), "--csv", str(tmp_path / "out.csv")]) == 0
    with (tmp_path / "out.csv").open(encoding="utf-8-sig", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert {row["Caution"] for row in rows} == {CAUTION}
    (length,) = [row for row in rows if row["Kind"] == "value unreadable or absurd"]
    assert (length["Row"], length["Strip"], length["Column"], length["Cell"]) == ("4", "'=XGRB", "Length [m]", "C4")
    assert not [cell for row in rows for cell in row.values() if cell.startswith(("=", "+", "-", "@"))]


def test_the_workbook_of_a_text_list_holds_a_copy_of_it(strips: Path, tmp_path: Path) -> None:
    assert main(["audit", str(strips), "--xlsx", str(tmp_path / "out.xlsx")]) == 0
    assert package_faults(tmp_path / "out.xlsx") == []
    book = openpyxl.load_workbook(tmp_path / "out.xlsx")
    assert book.sheetnames == ["Audit", "Kinds", "List"]
    sheet, copy = book["Audit"], book["List"]
    assert sheet["A2"].value == book["Kinds"]["A2"].value == CAUTION
    assert sheet.auto_filter.ref == f"A4:I{sheet.max_row}"
    lines = list(csv.reader(UGLY.splitlines()))
    for number in (2, 3, 4):
        assert [copy.cell(number, column).value or "" for column in range(1, 9)] == lines[number - 1]
    assert copy["A4"].data_type == copy["H3"].data_type == "s"  # text, and no formulas
    for row in range(5, sheet.max_row + 1):
        link = sheet.cell(row, 5).hyperlink
        place = link.location.removeprefix("'List'!")
        assert link.target is None
        assert copy[place].row == sheet.cell(row, 1).value
        if sheet.cell(row, 4).value:
            assert sheet.cell(row, 5).value == place
            assert copy.cell(2, copy[place].column).value == sheet.cell(row, 4).value
    counts = {row[1].value: row[2].value for row in book["Kinds"].iter_rows(min_row=5) if row[2].value}
    assert sum(counts.values()) == sheet.max_row - 4


def test_the_workbook_of_a_workbook_links_to_it(tmp_path: Path) -> None:
    (tmp_path / "sub").mkdir()
    listed = as_workbook(tmp_path / "our strips.xlsx")
    assert main(["audit", str(listed), "--xlsx", str(tmp_path / "sub" / "out.xlsx")]) == 0
    # a link to the list is meant; nothing else is wrong
    (outward,) = package_faults(tmp_path / "sub" / "out.xlsx")
    assert outward.endswith("external link to ../our strips.xlsx")
    book = openpyxl.load_workbook(tmp_path / "sub" / "out.xlsx")
    assert book.sheetnames == ["Audit", "Kinds"]
    sheet = book["Audit"]
    (row,) = [row for row in range(5, sheet.max_row + 1) if sheet.cell(row, 7).value == "value unreadable or absurd"]
    assert {sheet.cell(number, 5).hyperlink.target for number in range(5, sheet.max_row + 1)} == {"../our%20strips.xlsx"}
    link = sheet.cell(row, 5).hyperlink
    assert (link.target, link.location) == ("../our%20strips.xlsx", "'Mine & ''yours'''!D4")
    assert openpyxl.load_workbook(listed).active["D4"].value == 40  # the empty column counts


def test_a_filled_workbook(strips: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    given = ["--card", "ridge-runner", "--rules", "part-cat-b", "--temp", "20", "-o", str(tmp_path / "book.xlsx"), "--quiet"]
    assert main(["fill", str(strips), *given]) == 0
    assert main(["audit", str(tmp_path / "book.xlsx"), "--xlsx", str(tmp_path / "out.xlsx")]) == 0
    assert 'book.xlsx sheet "Strips": 2 runways read' in capsys.readouterr().out
    links = openpyxl.load_workbook(tmp_path / "out.xlsx")["Audit"]
    sheet = openpyxl.load_workbook(tmp_path / "book.xlsx")["Strips"]
    for row in range(5, links.max_row + 1):
        link = links.cell(row, 5).hyperlink
        assert link.target == "book.xlsx"
        cell = sheet[link.location.removeprefix("'Strips'!")]
        assert cell.row == links.cell(row, 1).value
        assert links.cell(row, 4).value in (None, sheet.cell(3, cell.column).value)
    assert main(["audit", str(tmp_path / "book.xlsx"), "--airports", str(strips)]) == 2
    assert "leave --airports out" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("more", "says"),
    [
        (["--csv", "out.xlsx"], "must end in .csv"),
        (["--xlsx", "out.csv"], "must end in .xlsx"),
        (["--csv", "old.csv"], "add --force"),
        (["--csv", "our strips.csv", "--force"], "choose another name"),
        (["--csv", "nowhere/out.csv"], "the folder does not exist"),
        (["--survey-age", "0"], "survey age of 0 years"),
        (["--airports", "no.csv"], "no such file"),
        (["--sheet", "Mine"], "a text file has no sheets"),
    ],
)
def test_what_is_refused(strips: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str],
                         more: list[str], says: str) -> None:  # fmt: skip
    monkeypatch.chdir(tmp_path)
    (tmp_path / "old.csv").write_text("mine")
    before = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    assert main(["audit", strips.name, *more]) == 2
    said = capsys.readouterr().err
    assert says in said and said.count("\n") == 1
    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == before


def test_an_old_file_is_replaced_when_forced(strips: Path, tmp_path: Path) -> None:
    (tmp_path / "old.csv").write_text("mine")
    assert main(["audit", str(strips), "--csv", str(tmp_path / "old.csv"), "--force"]) == 0
    assert "Caution" in (tmp_path / "old.csv").read_text(encoding="utf-8-sig")


def test_the_page_in_the_docs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """What docs/register.md shows is what the command says, and the kinds that it lists are all there are."""
    page = (Path(__file__).parents[1] / "docs" / "register.md").read_text(encoding="utf-8").split("\n## Refresh")[0]
    blocks = dict(re.findall(r"^```(csv|text)\n(.*?)^```$", page, re.DOTALL | re.MULTILINE))
    (tmp_path / "ugly.csv").write_text(blocks["csv"], encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    assert main(["audit", "ugly.csv"]) == 0
    assert capsys.readouterr().out == blocks["text"]
    listed = re.findall(r"^\| ([a-z ]+) \| ([^|]+) \| ([^|\d][^|]*) \|$", page, re.MULTILINE)
    assert listed == [(kind.severity, kind.name, kind.meaning) for kind in KINDS]
