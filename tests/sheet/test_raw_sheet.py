"""A worksheet part read with the places of its cells, whatever program wrote it."""

from __future__ import annotations

from xml.parsers.expat import ExpatError

import pytest

from stripcheck.sheet.raw_sheet import read_sheet


def part(rows: str) -> bytes:
    return f"<worksheet><sheetData>{rows}</sheetData></worksheet>".encode()


@pytest.mark.parametrize(("cell", "value"), [
    ('<c r="A1"><v>1.5</v></c>', 1.5), ('<c r="A1" t="n"><v> 2 </v></c>', 2.0), ('<c r="A1" t="s"><v>1</v></c>', "two"),
    ('<c r="A1" t="str"><f>B1</f><v>a_x000D_b</v></c>', "a\rb"), ('<c r="A1" t="b"><v>1</v></c>', True),
    ('<c r="A1" t="e"><f>1/0</f><v>#DIV/0!</v></c>', "#DIV/0!"), ('<c r="A1"/>', None), ('<c r="A1" t="n"></c>', None),
    ('<c r="A1" t="str"><f>B1</f><v></v></c>', ""), ('<c r="A1"><f>B1</f><v/></c>', None), ('<c r="A1"><f>B1</f></c>', None),
    ('<c r="A1" t="inlineStr"><is><r><t>rich </t></r><r><rPr><b/></rPr><t>text</t></r><rPh sb="0" eb="1"><t>aloud</t></rPh>'
     "</is></c>", "rich text"),
])  # fmt: skip
def test_a_cell_has_the_value_that_it_shows(cell: str, value: object) -> None:
    found = read_sheet(part(f'<row r="1">{cell}</row>'), ("one", "two")).value(1, 1)
    assert found == value and type(found) is type(value)


@pytest.mark.parametrize(("cell", "formula"), [
    ("<c><f>A1&amp;&quot;&lt;&#65;&quot;</f><v>1</v></c>", 'A1&"<A"'), ("<c><v>1</v></c>", None), ("<c><f/></c>", ""),
    ('<c><f t="shared" si="3"/><v>1</v></c>', ""), ('<c><f t="array" ref="A1:A9" ca="1">SUM(B1:B9)</f></c>', "SUM(B1:B9)"),
    ('<x:c xmlns:x="u"><x:f aca="false">A1>B1</x:f></x:c>', "A1>B1"), ("<c><f\n>\nA1\n</f></c>", "\nA1\n"),
])  # fmt: skip
def test_a_cell_has_the_formula_that_stands_there(cell: str, formula: str | None) -> None:
    found = read_sheet(part(f'<row r="1">{cell}</row>'), ()).rows[0].cells[1]
    assert found.formula == formula and found.live == (formula is not None) and found.whole().decode() == cell


def test_cells_and_rows_without_names_stand_one_after_the_other() -> None:
    sheet = read_sheet(part('<row><c><v>1</v></c><c r="D1"><v>2</v></c><c><v>3</v></c></row><row/><row r="7"/><row/>'), ())
    assert [row.number for row in sheet.rows] == [1, 2, 7, 8]
    assert {column: cell.value for column, cell in sheet.rows[0].cells.items()} == {1: 1.0, 4: 2.0, 5: 3.0}


def test_places_are_those_of_the_bytes_also_behind_letters_of_several() -> None:
    data = part('<row r="1" x="öö>"><c r="A1" t="inlineStr"><is><t>Fjällö — €</t></is></c><c r="B1"><v>5</v></c></row>')
    row = read_sheet(data, ()).rows[0]
    assert row.cells[2].whole() == b'<c r="B1"><v>5</v></c>'
    assert data[row.stop : row.end] == b"</row>" and data[row.inside : row.inside + 2] == b"<c"


def test_comments_and_sections_taken_literally_are_no_cells() -> None:
    rows = '<row r="1"><!-- <c r="A1"/> --><c r="B1" t="inlineStr"><is><t><![CDATA[<c r="A1">]]></t></is></c></row>'
    sheet = read_sheet(part(rows), ())
    assert list(sheet.rows[0].cells) == [2] and sheet.value(1, 2) == '<c r="A1">'


@pytest.mark.parametrize("data", [
    b"<worksheet><sheetData>", b"<worksheet/>", part('<row r="x"/>'), part('<row r="2"/><row r="1"/>'),
    part('<row r="1"><c r="A1"><v>one</v></c></row>'), part('<row r="1"><c r="?1"/></row>'),
    part('<row r="1"><c r="A1" t="s"><v>9</v></c></row>'),
    b'<!DOCTYPE a [<!ENTITY b "c">]><worksheet><sheetData></sheetData></worksheet>',
])  # fmt: skip
def test_a_damaged_part_is_refused(data: bytes) -> None:
    with pytest.raises((ValueError, IndexError, ExpatError)):
        read_sheet(data, ("one",))
