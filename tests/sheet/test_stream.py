"""The package writer, read back by readers that others wrote: openpyxl, python-calamine and ironcalc."""

from __future__ import annotations

import datetime
import io
import tracemalloc
import zipfile
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from openpyxl.comments import Comment
from openpyxl.formatting.rule import CellIsRule
from openpyxl.styles import Font
from openpyxl.worksheet.datavalidation import DataValidation
from python_calamine import CalamineWorkbook

from stripcheck.errors import InputError
from stripcheck.sheet import stream
from stripcheck.sheet.stream import ROW, FormulaColumn, NumberColumn, Table, TextColumn, write_book
from tests.ironcalc_book import Book as IroncalcBook
from tests.office import Office
from tests.sheet.package_check import package_faults

NAN = float("nan")
MAIN = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"

# what a list may hold that a careless writer would turn into a formula (common practice, no source)
HOSTILE = [
    "=cmd|' /C calc'!A0",
    "+1+1",
    "-2",
    "@SUM(A1)",
    "=1+1",
    "\t=1",
    "#REF!",
    "TRUE",
    "12",
    "1e5",
    "09/27",
]


def book_with(columns: int) -> openpyxl.Workbook:
    """A book of two sheets; in the first, row 2 has headers and row 3 is the template (odd cells bold)."""
    book = openpyxl.Workbook()
    strips = book.active
    strips.title = "Strips & <fields>"
    strips["A1"] = "Invented strips"
    strips["A1"].comment = Comment("All of them are invented.", "stripcheck")
    for number in range(1, columns + 1):
        strips.cell(2, number, f"Column {number}")
        if number % 2:
            strips.cell(3, number).font = Font(bold=True)
    strips.row_dimensions[3].height = 21
    book.create_sheet("Settings")["B2"] = 0.5
    return book


def write(folder: Path, columns: list, **more) -> Path:
    path = folder / "strips.xlsx"
    book = book_with(len(columns))
    assert write_book(book, {"Strips & <fields>": Table(3, columns)}, path, **more) == []
    assert package_faults(path) == []
    return path


def formulas(path: Path) -> list[tuple]:
    """Data rows as openpyxl reads them: formula cells as text."""
    return list(openpyxl.load_workbook(path).worksheets[0].iter_rows(min_row=3, values_only=True))


def shown(path: Path) -> list[tuple]:
    book = openpyxl.load_workbook(path, data_only=True)
    return list(book.worksheets[0].iter_rows(min_row=3, values_only=True))


def shown_by_calamine(path: Path) -> list[list]:
    return CalamineWorkbook.from_path(str(path)).get_sheet_by_index(0).to_python()[2:]


def sheet_xml(path: Path) -> ElementTree.Element:
    return ElementTree.fromstring(zipfile.ZipFile(path).read("xl/worksheets/sheet1.xml"))


# --- formulas and the values beside them


def test_formulas_and_their_values_come_back(tmp_path):
    lengths = np.array([620.0, 455.5, 1 / 3])
    halves = FormulaColumn(f"A{ROW}*Settings!$B$2+A{ROW}*0", lengths * 0.5)
    path = write(tmp_path, [NumberColumn(lengths), halves])
    assert [row[1] for row in formulas(path)] == [f"=A{r}*Settings!$B$2+A{r}*0" for r in (3, 4, 5)]
    # every digit survives: no tolerance
    assert [row[1] for row in shown(path)] == (lengths * 0.5).tolist()
    assert shown_by_calamine(path) == [[x, x * 0.5] for x in lengths.tolist()]


def test_other_programs_calculate_the_values_beside_the_formulas(tmp_path, office: Office):
    a, b = np.array([2.0, 9.0, 0.25, 7.7]), np.array([1.5, -3.0, 0.1, 1e-9])
    wants = {
        f"SQRT(A{ROW})+B{ROW}*Settings!$B$2": np.sqrt(a) + b * 0.5,
        f"SUMPRODUCT({{1,2}}*A{ROW})": 3 * a,
        f'IF(A{ROW}>B{ROW},A{ROW}&" > b","")&"<"': [f"{x:g} > b<" for x in a],
        f"AND(A{ROW}<3,B{ROW}<>0)": a < 3,
    }
    columns = [NumberColumn(a), NumberColumn(b), *(FormulaColumn(f, v) for f, v in wants.items())]
    path = write(tmp_path, columns)
    beside = [[float(v) if isinstance(v, bool) else v for v in row[2:]] for row in shown(path)]
    with office.open(path) as office_book:
        for book in (office_book, IroncalcBook(path)):
            book.recalculate()
            calculated = book.values("Strips & <fields>", "C3:F6")
            for wanted, row in zip(beside, calculated, strict=True):
                np.testing.assert_allclose(row[:2], wanted[:2], rtol=1e-14)
                assert row[2:] == wanted[2:]


def test_another_program_shows_the_values_without_calculating(tmp_path):
    # values that the formulas would not give: so they are read and not calculated
    columns = [FormulaColumn("1+1", np.array([7.0, 8.0])), FormulaColumn('"a"', ["suitable", "marginal"])]
    book = IroncalcBook(write(tmp_path, columns))
    assert book.values("Strips & <fields>", "A3:B4") == [[7.0, "suitable"], [8.0, "marginal"]]


def test_braces_percent_signs_and_quotes_in_a_formula_are_kept(tmp_path):
    formula = f"SUMPRODUCT({{1,2;3,4}}*A{ROW}%)&\"{{r}} <100%> & %b %s\"&'Strips & <fields>'!A{ROW}"
    path = write(tmp_path, [NumberColumn(np.ones(2)), FormulaColumn(formula, ["x", "y"])])
    assert [row[1] for row in formulas(path)] == ["=" + formula.replace(ROW, r) for r in "34"]


def test_a_formula_of_its_own_in_every_row(tmp_path):
    own = [f'COUNTIF($A$3:$A$5,">{i}")+{i}*B{ROW}' for i in range(3)]
    numbers = [NumberColumn(np.ones(3)), NumberColumn(np.zeros(3))]
    path = write(tmp_path, [*numbers, FormulaColumn(own, np.arange(3))])
    wanted = [f'=COUNTIF($A$3:$A$5,">{i}")+{i}*B{i + 3}' for i in range(3)]
    assert [row[2] for row in formulas(path)] == wanted
    assert [row[2] for row in shown(path)] == [0, 1, 2]


def test_kinds_of_values_beside_formulas(tmp_path):
    mixed = [1.5, "does not lift off", True, None]
    columns = [
        FormulaColumn("1", np.array([1.5, NAN, -0.0, 1e-300])),
        FormulaColumn("2", np.array([True, False, True, False])),
        FormulaColumn("3", ["suitable", "", "<&>", " two  blanks "]),
        FormulaColumn("4", mixed),
    ]
    path = write(tmp_path, columns)
    rows = list(sheet_xml(path).iter(f"{MAIN}row"))[2:]
    cells = [[(cell.get("t"), cell.findtext(f"{MAIN}v")) for cell in row] for row in rows]
    by_column = [list(column) for column in zip(*cells, strict=True)]
    assert by_column[0] == [(None, "1.5"), ("str", ""), (None, "0.0"), (None, "1e-300")]
    assert by_column[1] == [("b", "1"), ("b", "0")] * 2
    assert by_column[2] == [("str", "suitable"), ("str", ""), ("str", "<&>"), ("str", " two  blanks ")]
    assert by_column[3] == [(None, "1.5"), ("str", "does not lift off"), ("b", "1"), ("str", "")]
    assert shown_by_calamine(path)[0] == [1.5, True, "suitable", 1.5]


# --- values that users gave


def test_hostile_text_stays_text(tmp_path, office: Office):
    path = write(tmp_path, [TextColumn(HOSTILE), NumberColumn(np.arange(len(HOSTILE)))])
    cells = [row[0] for row in openpyxl.load_workbook(path).worksheets[0].iter_rows(min_row=3)]
    assert [cell.value for cell in cells] == HOSTILE
    assert {cell.data_type for cell in cells} == {"s"}
    assert [row[0] for row in shown_by_calamine(path)] == HOSTILE
    assert list(sheet_xml(path).iter(f"{MAIN}f")) == []
    with office.open(path) as book:
        book.recalculate()
        area = f"A3:A{len(HOSTILE) + 2}"
        assert [row[0] for row in book.values("Strips & <fields>", area)] == HOSTILE


def test_other_values_keep_their_kind(tmp_path):
    day, moment = datetime.date(2026, 5, 17), datetime.datetime(2026, 5, 17, 6, 30)
    given = [None, "", NAN, 0, -2.5, True, np.float64(1.25), np.int64(7), day, moment, datetime.time(6, 30)]
    path = write(tmp_path, [TextColumn(given), NumberColumn(np.full(len(given), NAN))])
    back = [row[0] for row in formulas(path)]
    midnight = datetime.datetime(2026, 5, 17)
    assert back == [None, None, None, 0, -2.5, True, 1.25, 7, midnight, moment, datetime.time(6, 30)]
    assert back[5] is True
    cells = openpyxl.load_workbook(path).worksheets[0]
    assert cells["A11"].number_format == "yyyy-mm-dd" and cells["A11"].font.bold


def test_a_date_format_of_the_template_is_kept(tmp_path):
    book = book_with(1)
    book.worksheets[0]["A3"].number_format = "d mmm yyyy"
    path = tmp_path / "strips.xlsx"
    days = TextColumn([datetime.date(2026, 5, 17), "unknown"])
    write_book(book, {"Strips & <fields>": Table(3, [days])}, path)
    cell = openpyxl.load_workbook(path).worksheets[0]["A3"]
    assert (cell.value, cell.number_format) == (datetime.datetime(2026, 5, 17), "d mmm yyyy")


def test_what_a_sheet_cannot_hold_as_it_is_becomes_text(tmp_path):
    zone = datetime.timezone(datetime.timedelta(hours=2))
    given = [
        datetime.date(1899, 5, 17),
        datetime.datetime(2026, 5, 17, 6, 30, tzinfo=zone),
        12345678901234567890,
        float("inf"),
    ]
    path = write(tmp_path, [TextColumn(given)])
    wanted = ["1899-05-17", "2026-05-17 06:30:00+02:00", "12345678901234567890", "inf"]
    assert [row[0] for row in formulas(path)] == wanted


def test_forbidden_characters_are_replaced_and_blanks_kept(tmp_path):
    fine = [" lead and trail ", "two\nlines\tand\r\nmore", "Ľubica 🛩"]
    texts = ["a\x00b\x01c\x0bd", "\ud800x", "\uffff", *fine]
    path = write(tmp_path, [TextColumn(texts)])
    wanted = ["a\ufffdb\ufffdc\ufffdd", "\ufffdx", "\ufffd", *fine]
    assert [row[0] for row in formulas(path)] == wanted


def test_text_that_looks_like_an_escape_is_escaped(tmp_path):
    # ECMA-376 part 1, 22.9.2.19 (from memory): _x0041_ is read as "A", and _x005F_ as the underscore
    path = write(tmp_path, [TextColumn(["_x0041_", "_x41_"]), FormulaColumn("1", ["_x0041_", "x_y"])])
    assert [t.text for t in sheet_xml(path).iter(f"{MAIN}t")][-2:] == ["_x005F_x0041_", "_x41_"]
    assert [v.text for v in sheet_xml(path).iter(f"{MAIN}v")][-2:] == ["_x005F_x0041_", "x_y"]


@settings(max_examples=60, deadline=None)
@given(st.lists(st.text(st.characters(exclude_categories=["Cc", "Cs", "Cn"]), max_size=30)))
def test_any_text_comes_back(tmp_path_factory, texts):
    # escapes and forbidden characters (categories Cc, Cs, Cn) have tests of their own
    texts = [*(text.replace("_x", "_y") for text in texts), "end"]
    path = write(tmp_path_factory.mktemp("any"), [TextColumn(texts), FormulaColumn("1", texts)])
    assert [(a or "", b or "") for a, b in shown(path)] == [(text, text) for text in texts]


def test_a_long_text_is_cut_and_reported(tmp_path):
    path = tmp_path / "strips.xlsx"
    texts = ["x" * 32_767, "y" * 40_000, "🛩" * 20_000, "z" * 20_000]
    cuts = write_book(book_with(1), {"Strips & <fields>": Table(3, [TextColumn(texts)])}, path)
    back = [row[0] for row in formulas(path)]
    # a small aeroplane counts as two characters in a sheet, and is not cut in half
    assert back == [texts[0], "y" * 32_767, "🛩" * 16_383, texts[3]]
    assert cuts == [
        f'sheet "Strips & <fields>", row {row}, column A: '
        "a text of 40,000 characters was cut to the 32,767 that a cell holds"
        for row in (4, 5)
    ]


# --- the rest of the book


def test_styles_and_everything_else_of_the_book_are_kept(tmp_path):
    book = book_with(3)
    strips = book.worksheets[0]
    strips.freeze_panes = "B3"
    strips.auto_filter.ref = "A2:C5"
    red = CellIsRule("equal", ['"unsuitable"'], font=Font(color="AA0000"))
    strips.conditional_formatting.add("C3:C5", red)
    choice = DataValidation("list", formula1='"yes,no"', sqref="A3:A5")
    strips.add_data_validation(choice)
    path = tmp_path / "strips.xlsx"
    words = TextColumn(["yes", None, "no"])
    numbers = NumberColumn(np.array([1.0, NAN, 3.0]))
    verdict = FormulaColumn(f'IF(B{ROW}=1,"suitable","unsuitable")', ["suitable", "unsuitable", "unsuitable"])
    write_book(book, {strips.title: Table(3, [words, numbers, verdict])}, path)
    assert package_faults(path) == []
    back = openpyxl.load_workbook(path)
    sheet = back.worksheets[0]
    assert [[cell.font.bold for cell in row] for row in sheet["A3:C5"]] == [[True, False, True]] * 3
    assert [sheet.row_dimensions[r].height for r in (2, 3, 4, 5)] == [None, 21, 21, 21]
    assert sheet["A1"].comment.text == "All of them are invented."
    assert [cell.value for cell in sheet[2]] == ["Column 1", "Column 2", "Column 3"]
    assert (sheet.freeze_panes, sheet.auto_filter.ref, sheet.dimensions) == ("B3", "A2:C5", "A1:C5")
    assert str(sheet.data_validations.dataValidation[0].sqref) == "A3:A5"
    assert [str(r.sqref) for r in sheet.conditional_formatting] == ["C3:C5"]
    assert sheet_xml(path).find(f"{MAIN}dimension").get("ref") == "A1:C5"
    assert back["Settings"]["B2"].value == 0.5
    assert back.calculation.fullCalcOnLoad is True
    assert (back.properties.creator, back.properties.lastModifiedBy) == ("stripcheck", None)


def test_several_large_sheets_and_a_sheet_without_styles(tmp_path):
    book = openpyxl.Workbook()
    book.active.append(["One"])
    book.create_sheet("Other")
    path = tmp_path / "strips.xlsx"
    one = Table(2, [NumberColumn(np.arange(250.0))])
    other = Table(1, [FormulaColumn(f"Sheet!A{ROW}", ["x", "y"])])
    steps: list[int] = []
    write_book(book, {"Sheet": one, "Other": other}, path, progress=steps.append)
    assert package_faults(path) == []
    back = openpyxl.load_workbook(path)
    assert [row[0] for row in back["Sheet"].values] == ["One", *range(250)]
    assert [row[0] for row in back["Other"].values] == ["=Sheet!A1", "=Sheet!A2"]
    assert sum(steps) == 252


def test_no_rows_at_all_leave_the_headers(tmp_path):
    none = np.array([])
    path = write(tmp_path, [TextColumn([]), NumberColumn(none), FormulaColumn(f"B{ROW}", none)])
    assert formulas(path) == []
    assert sheet_xml(path).find(f"{MAIN}dimension").get("ref") == "A1:C2"


# --- written whole or not at all


def test_a_failure_leaves_the_old_file_and_no_other(tmp_path):
    path = tmp_path / "strips.xlsx"
    path.write_bytes(b"the old file")

    def stop(_rows):
        raise RuntimeError("stopped by the user")

    table = Table(3, [NumberColumn(np.ones(5))])
    with pytest.raises(RuntimeError, match="stopped by the user"):
        write_book(book_with(1), {"Strips & <fields>": table}, path, progress=stop)
    assert path.read_bytes() == b"the old file"
    assert list(tmp_path.iterdir()) == [path]


# --- tables that don't fit


ONE = np.ones(1)


@pytest.mark.parametrize(
    ("columns", "says"),
    [
        ([NumberColumn(ONE), NumberColumn(np.ones(2))], "equal lengths"),
        ([], "equal lengths"),
        ([FormulaColumn(["1", "2"], ONE)], "column A: 2 formulas for 1 values"),
        ([FormulaColumn("=1", ONE)], 'without "="'),
        ([FormulaColumn("", ONE)], "not empty"),
        ([FormulaColumn("A1\x01", ONE)], "character that a sheet can't keep"),
        ([FormulaColumn(f"A{ROW}+" + "1" * 8_190, ONE)], "longer than 8,192"),
        ([NumberColumn(ONE), NumberColumn(np.array([np.inf]))], "column B, row 3: an infinite number"),
        ([FormulaColumn("1", [-float("inf")])], "column A, row 3: an infinite number"),
    ],
)
def test_wrong_tables_are_refused_before_anything_is_written(tmp_path, columns, says):
    with pytest.raises(ValueError, match=says):
        write_book(book_with(2), {"Strips & <fields>": Table(3, columns)}, tmp_path / "strips.xlsx")
    assert list(tmp_path.iterdir()) == []


def test_a_table_that_does_not_fit_the_skeleton_is_refused(tmp_path):
    path, title = tmp_path / "strips.xlsx", "Strips & <fields>"
    with pytest.raises(ValueError, match='no sheet "Elsewhere"'):
        write_book(book_with(1), {"Elsewhere": Table(3, [NumberColumn(ONE)])}, path)
    with pytest.raises(ValueError, match="row 3 of the skeleton is below the template row 2"):
        write_book(book_with(1), {title: Table(2, [NumberColumn(ONE)])}, path)
    with pytest.raises(ValueError, match="cell C3 is beyond the table"):
        write_book(book_with(3), {title: Table(3, [NumberColumn(ONE)])}, path)
    assert list(tmp_path.iterdir()) == []


def test_more_rows_than_a_sheet_holds_are_refused(tmp_path):
    table = Table(3, [NumberColumn(np.ones(1_048_575))])
    with pytest.raises(InputError, match="the list needs 1,048,577 rows, and a sheet holds 1,048,576"):
        write_book(book_with(1), {"Strips & <fields>": table}, tmp_path / "strips.xlsx")


def test_a_part_that_may_pass_two_gigabytes_is_still_read(tmp_path, monkeypatch, office: Office):
    # the limit is lowered, since a part of that size would take minutes; readers see the same kind of entry
    monkeypatch.setattr(stream, "_ZIP64_FROM", 0)
    path = write(
        tmp_path, [TextColumn(["grass", "gravel"]), FormulaColumn(f"ROW(A{ROW})", np.array([3.0, 4.0]))]
    )
    assert shown(path) == [("grass", 3), ("gravel", 4)]
    assert shown_by_calamine(path) == [["grass", 3.0], ["gravel", 4.0]]
    with office.open(path) as book:
        assert book.values("Strips & <fields>", "A3:B4") == [["grass", 3.0], ["gravel", 4.0]]


def test_many_rows_take_little_memory(tmp_path):
    # 20,000 rows of about 7,000 characters are 140 MB of XML; they are never in memory together
    formula = "+".join(f"SQRT(A{ROW}*{i}.5)" for i in range(40))
    ones = np.ones(20_000)
    columns = [NumberColumn(ones), *(FormulaColumn(formula, ones) for _ in range(8))]
    tracemalloc.start()
    write_book(book_with(9), {"Strips & <fields>": Table(3, columns)}, tmp_path / "strips.xlsx")
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak < 45e6


# --- the package check itself


def altered(path: Path, part: str, old: str, new: str | None) -> Path:
    """A copy of the package with a text of one part replaced, or without that part."""
    copy = io.BytesIO()
    with zipfile.ZipFile(path) as source, zipfile.ZipFile(copy, "w") as target:
        for name in source.namelist():
            data = source.read(name).decode()
            if name == part:
                assert old in data
                if new is None:
                    continue
                data = data.replace(old, new, 1)
            target.writestr(name, data)
    other = path.with_name("altered.xlsx")
    other.write_bytes(copy.getvalue())
    return other


@pytest.mark.parametrize(
    ("part", "old", "new", "says"),
    [
        ("xl/worksheets/sheet1.xml", "</row>", "", "not well-formed XML"),
        ("xl/worksheets/sheet1.xml", "<v>1.0</v>", "<v>#DIV/0!</v>", "formula cell A3 shows #DIV/0!"),
        ("xl/styles.xml", "", None, "target styles.xml is missing"),
        ("xl/styles.xml", "", None, "has a content type but is missing"),
        ("[Content_Types].xml", 'Extension="vml"', 'Extension="other"', "no content type"),
        (
            "xl/_rels/workbook.xml.rels",
            "<Relationship ",
            '<Relationship TargetMode="External" ',
            "external link",
        ),
        ("xl/workbook.xml", 'r:id="rId2"', 'r:id="rId99"', "relationship rId99 is not defined"),
    ],
)
def test_the_package_check_finds_what_is_wrong(tmp_path, part, old, new, says):
    path = write(tmp_path, [FormulaColumn("1", np.ones(2))])
    assert says in " | ".join(package_faults(altered(path, part, old, new)))


@pytest.mark.parametrize("target", [None, "../our%20list.xlsx"])
def test_each_row_has_a_link_of_its_own(tmp_path, target):
    """Inside the workbook, and to another; the last row has none."""
    book = openpyxl.Workbook()
    cell = book.active["B2"]
    cell.value, cell.hyperlink = "x", openpyxl.worksheet.hyperlink.Hyperlink(ref="B2", location="'A'!A1", target=target)
    places = ["'A & \"B\"'!C5", "'A'!C6"]
    table = Table(2, [NumberColumn(np.arange(3.0)), TextColumn(["one", "two", "three"])], links=places)
    write_book(book, {"Sheet": table}, tmp_path / "book.xlsx")
    outward = ["xl/worksheets/_rels/sheet1.xml.rels: external link to ../our list.xlsx"]  # meant
    assert package_faults(tmp_path / "book.xlsx") == (outward if target else [])
    sheet = openpyxl.load_workbook(tmp_path / "book.xlsx")["Sheet"]
    found = [sheet.cell(row, 2).hyperlink for row in (2, 3, 4)]
    assert [(link.location, link.target) for link in found[:2]] == [(place, target) for place in places]
    assert found[2] is None and sheet["A2"].hyperlink is None
