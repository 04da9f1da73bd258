"""A workbook as its parts: read whatever program wrote it, and written with nothing changed but what is to be."""

from __future__ import annotations

import hashlib
import zipfile
from pathlib import Path

import openpyxl
import pytest

from stripcheck.errors import InputError
from stripcheck.sheet.edits import Edits
from stripcheck.sheet.package import Package, cell_of, worked_out_on_load
from tests.book_parts import Parts
from tests.filled_books import filled, with_everything
from tests.sheet.package_check import package_faults
from tests.user_content import chain_cells, set_calc_chain


def written(package: Package, edits: dict[str, Edits], path: Path) -> Parts:
    with path.open("wb") as file:
        package.save(package.with_edits(edits), file)
    return Parts.read(path)


@pytest.fixture
def book(tmp_path: Path) -> Path:
    path = tmp_path / "book.xlsx"
    with_everything("full").write(path)
    return path


def test_without_an_edit_all_parts_are_as_they_were_and_in_their_order(book: Path, tmp_path: Path) -> None:
    with Package(book) as package:
        after = written(package, {"Day": Edits(package.sheet("Day"))}, tmp_path / "after.xlsx")
    assert list(after.items()) == list(Parts.read(book).items())


def test_one_cell_changes_one_part(book: Path, tmp_path: Path) -> None:
    before = Parts.read(book)
    with Package(book) as package:
        edits = Edits(package.sheet("Day"))
        edits.set(6, 2, 1003.0)
        after = written(package, {"Day": edits}, tmp_path / "after.xlsx")
    assert [name for name in before if before[name] != after[name]] == [before.sheet("Day")]
    assert openpyxl.load_workbook(tmp_path / "after.xlsx")["Day"]["B6"].value == 1003
    assert package_faults(tmp_path / "after.xlsx") == []


def test_a_new_part_can_be_added(book: Path, tmp_path: Path) -> None:
    with Package(book) as package, (tmp_path / "after.xlsx").open("wb") as file:
        package.save({}, file, {"xl/extra.xml": b"<x/>"})
    assert list(Parts.read(tmp_path / "after.xlsx").items()) == [*Parts.read(book).items(), ("xl/extra.xml", b"<x/>")]


def test_a_large_sheet_is_copied_and_edited_too(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("stripcheck.sheet.package._IN_MEMORY", 1000)  # above which a part is held on disk
    with Package(filled("full")) as package:
        edits = {title: Edits(package.sheet(title)) for title in package.sheets}
        for one in edits.values():
            one.set(1, 30, "here")
        after = written(package, edits, tmp_path / "after.xlsx")
    assert all(b"here" in after[after.sheet(title)] for title in edits)


# --- formulas are worked out when the file is opened, and the order of calculation names no cell without one


@pytest.mark.parametrize(("before", "after"), [
    ('<sheets></sheets><calcPr calcId="191029"/>', '<sheets></sheets><calcPr calcId="191029" fullCalcOnLoad="1"/>'),
    ('<x:calcPr fullCalcOnLoad="0" calcId="1"></x:calcPr>', '<x:calcPr calcId="1" fullCalcOnLoad="1"></x:calcPr>'),
    ('<calcPr fullCalcOnLoad="true"/>', '<calcPr fullCalcOnLoad="true"/>'),
    ("<sheets></sheets><definedNames></definedNames><oleSize/>",
     '<sheets></sheets><definedNames></definedNames><calcPr fullCalcOnLoad="1"/><oleSize/>'),
    ("<x:sheets></x:sheets>", '<x:sheets></x:sheets><x:calcPr fullCalcOnLoad="1"/>'),
])  # fmt: skip
def test_a_workbook_is_told_to_work_all_out_when_it_is_opened(before: str, after: str) -> None:
    assert worked_out_on_load(before.encode()).decode() == after
    assert worked_out_on_load(after.encode()).decode() == after


def test_a_changed_workbook_that_was_not_told_so_is_told(book: Path, tmp_path: Path) -> None:
    parts = Parts.read(book)
    parts.change("xl/workbook.xml", ' fullCalcOnLoad="1"', "")
    parts.write(book)
    with Package(book) as package:
        assert list(package.with_edits({"Day": Edits(package.sheet("Day"))})) == []
        edits = Edits(package.sheet("Day"))
        edits.set(6, 2, 1003.0)
        after = written(package, {"Day": edits}, tmp_path / "after.xlsx")
    changed = {name for name in parts if parts[name] != after[name]}
    assert changed == {parts.sheet("Day"), "xl/workbook.xml"}
    assert after.text("xl/workbook.xml").replace(' fullCalcOnLoad="1"', "") == parts.text("xl/workbook.xml")


def test_a_cell_without_its_formula_leaves_the_order_of_calculation(book: Path, tmp_path: Path) -> None:
    before = Parts.read(book)
    set_calc_chain(before)
    with Package(book) as package:
        edits = {title: Edits(package.sheet(title)) for title in ("Summary", "Day")}
        first = {title: next((row.number, cell.column) for row in one.sheet.rows for cell in row.cells.values() if cell.live)
                 for title, one in edits.items()}  # fmt: skip
        for title, (row, column) in first.items():
            edits[title].set(row, column, 1.0)
        after = written(package, edits, tmp_path / "after.xlsx")
    gone = set(chain_cells(before)) - set(chain_cells(after))
    assert len(gone) == 2 and {sheet for sheet, _ in gone} == {"1", "5"}
    assert [entry for entry in chain_cells(before) if entry not in gone] == chain_cells(after)


# --- other programs' files


def test_a_strict_file_and_one_with_prefixes_are_read(book: Path, tmp_path: Path) -> None:
    parts = Parts.read(book)
    for name in [name for name in parts if name.endswith((".xml", ".rels"))]:
        text = parts.text(name).replace("http://schemas.openxmlformats.org/spreadsheetml/2006/main",
                                        "http://purl.oclc.org/ooxml/spreadsheetml/main")  # fmt: skip
        parts.put(name, text.replace("http://schemas.openxmlformats.org/officeDocument/2006/relationships",
                                     "http://purl.oclc.org/ooxml/officeDocument/relationships"))  # fmt: skip
    parts.write(tmp_path / "strict.xlsx")
    with Package(book) as plain, Package(tmp_path / "strict.xlsx") as strict:
        assert (strict.sheets, strict.names, strict.texts) == (plain.sheets, plain.names, plain.texts)
        assert strict.sheet("Day").value(6, 2) == plain.sheet("Day").value(6, 2) == 1015.0


def test_shared_texts_are_read_without_what_is_only_read_aloud(book: Path) -> None:
    with Package(book) as package:
        assert package.texts == ["Ask  Ada first", "海", "  two spaces & a line\r\n"]


@pytest.mark.parametrize(("reference", "place"), [
    ("'Day'!$D$6", ("Day", 6, 4)), ("Day!D6", ("Day", 6, 4)), ("'It''s'!$AA$10", ("It's", 10, 27)), ("Day!$D$6:$D$9", None),
    ("#REF!", None), ("Day!#REF!", None), ("SUM(Day!D6)", None), ("12", None), ("", None),
])  # fmt: skip
def test_a_reference_to_one_cell_is_understood(reference: str, place: tuple[str, int, int] | None) -> None:
    assert cell_of(reference) == place


# --- what is no workbook


def test_a_file_that_is_no_workbook_is_refused(tmp_path: Path) -> None:
    for data in (b"", b"PK\x03\x04 cut off", b"Strip,Length\n", bytes(1000)):
        (tmp_path / "book.xlsx").write_bytes(data)
        with pytest.raises(InputError):
            Package(tmp_path / "book.xlsx")
    with pytest.raises(InputError, match="No such file"):
        Package(tmp_path / "nowhere.xlsx")


@pytest.mark.parametrize("part", ["xl/workbook.xml", "_rels/.rels", "xl/_rels/workbook.xml.rels", "[Content_Types].xml"])
def test_a_workbook_without_a_part_that_it_needs_is_refused_or_read_without_it(tmp_path: Path, part: str) -> None:
    parts = Parts.read(filled("full"))
    del parts[part]
    parts.write(tmp_path / "book.xlsx")
    try:
        with Package(tmp_path / "book.xlsx") as package:
            assert part == "[Content_Types].xml" and "Strips" in package.sheets
    except InputError:
        assert part != "[Content_Types].xml"


def test_a_sheet_that_is_missing_or_damaged_is_told(tmp_path: Path) -> None:
    parts = Parts.read(filled("full"))
    day = parts.sheet("Day")
    parts.put(day, parts.text(day).replace("<v>1015.0</v>", "<v>many</v>").replace("<v>1015</v>", "<v>many</v>"))
    del parts[parts.sheet("Rules")]
    parts.write(tmp_path / "book.xlsx")
    with Package(tmp_path / "book.xlsx") as package:
        for title, says in (("Rules", "there is no sheet"), ("Nowhere", "there is no sheet"), ("Day", "the file is damaged")):
            with pytest.raises(InputError, match=f'{says}|the sheet "{title}" can'):
                package.sheet(title)


def test_the_packages_check_comes_first(tmp_path: Path) -> None:
    path = tmp_path / "bomb.xlsx"
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
        for name, data in Parts.read(filled("full")).items():
            package.writestr(name, data)
        package.writestr("xl/media/zeros.bin", bytes(60_000_000))
    digest = hashlib.sha256(path.read_bytes()).hexdigest()
    with pytest.raises(InputError, match="times its size"):
        Package(path)
    assert hashlib.sha256(path.read_bytes()).hexdigest() == digest
