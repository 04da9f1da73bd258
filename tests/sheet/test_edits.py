"""Edits to a worksheet part: what is changed reads as it should, and everything else stays to the byte."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st
from openpyxl.utils import get_column_letter

from stripcheck.sheet.edits import Edits, Growth, cell_bytes
from stripcheck.sheet.raw_sheet import RawSheet, read_sheet
from stripcheck.sheet.stream import ROW


def sheet(rows: str, head: str = "", tail: str = "", prefix: str = "") -> RawSheet:
    p = prefix
    space = f' xmlns{":" + p[:-1] if p else ""}="http://schemas.openxmlformats.org/spreadsheetml/2006/main"'
    part = f"<{p}worksheet{space}>{head}<{p}sheetData>{rows}</{p}sheetData>{tail}</{p}worksheet>"
    return read_sheet(part.encode(), ("one", "two"))


def text(edits: Edits) -> str:
    return b"".join(edits.pieces()).decode()


def rows(edits: Edits) -> str:
    found = re.search(r"<(\w+:)?sheetData>(.*)</(\w+:)?sheetData>", text(edits), re.DOTALL)
    assert found is not None
    return found[2]


def read_again(edits: Edits) -> RawSheet:
    return read_sheet(text(edits).encode(), ("one", "two"))


def test_without_an_edit_nothing_changes() -> None:
    before = sheet('<row r="2" spans="1:3"><c r="B2" s="3" t="s"><v>1</v></c></row>', '<dimension ref="B2"/>', "<x/>")
    assert text(Edits(before)).encode() == before.data


def test_a_cell_is_put_in_its_place_and_keeps_its_style() -> None:
    edits = Edits(sheet('<row r="2"><c r="B2" s="3" t="s"><v>1</v></c><c r="D2"><f>B2</f><v>4</v></c></row>'))
    edits.set(2, 2, 5.0)
    edits.set(2, 3, "new", style="9")
    edits.set(2, 4, 7.5, f"B{ROW}*1.5")
    edits.set(2, 5, None)
    assert rows(edits) == (
        '<row r="2"><c r="B2" s="3"><v>5.0</v></c><c r="C2" s="9" t="inlineStr"><is><t xml:space="preserve">new</t></is></c>'
        '<c r="D2"><f>B2*1.5</f><v>7.5</v></c><c r="E2"/></row>'
    )


def test_new_rows_stand_in_order_and_a_row_without_cells_gets_some() -> None:
    edits = Edits(sheet('<row r="3" ht="20" customHeight="1"/><row r="5" spans="1:1"><c r="A5"><v>1</v></c></row>'))
    for row in (1, 3, 4, 5, 9):
        edits.set(row, 2, float(row))
    made = read_again(edits)
    assert [(row.number, made.value(row.number, 2)) for row in made.rows] == [(n, float(n)) for n in (1, 3, 4, 5, 9)]
    assert '<row r="3" ht="20" customHeight="1">' in rows(edits)
    assert '<row r="5"><c r="A5">' in rows(edits)  # the hint at the columns in use would be wrong now


def test_the_dimension_reaches_over_what_is_put_in() -> None:
    edits = Edits(sheet('<row r="3"><c r="B3"/></row>', '<dimension ref="B3"/>'))
    edits.set(3, 2, 1.0)
    assert '<dimension ref="B3"/>' in text(edits)
    edits.set(7, 5, 1.0)
    assert '<dimension ref="B3:E7"/>' in text(edits)


def test_a_part_with_a_prefix_gets_cells_with_it() -> None:
    edits = Edits(sheet('<x:row r="1"><x:c r="A1"><x:f>1+1</x:f><x:v>3</x:v></x:c></x:row>', prefix="x:"))
    edits.result(1, 1, 2.0)
    edits.set(1, 2, "text")
    edits.set(2, 1, 3.0, "A1+1")
    assert rows(edits) == (
        '<x:row r="1"><x:c r="A1"><x:f>1+1</x:f><x:v>2.0</x:v></x:c><x:c r="B1" t="inlineStr"><x:is>'
        '<x:t xml:space="preserve">text</x:t></x:is></x:c></x:row>'
        '<x:row r="2"><x:c r="A2"><x:f>A1+1</x:f><x:v>3.0</x:v></x:c></x:row>'
    )


@pytest.mark.parametrize(("value", "expected"), [
    (2.5, '<c r="A1" s="4" cm="1"><f t="array" ref="A1">F(1)</f><v>2.5</v></c>'),
    ("a<b", '<c r="A1" s="4" cm="1" t="str"><f t="array" ref="A1">F(1)</f><v>a&lt;b</v></c>'),
    (True, '<c r="A1" s="4" cm="1" t="b"><f t="array" ref="A1">F(1)</f><v>1</v></c>'),
    ("", '<c r="A1" s="4" cm="1" t="str"><f t="array" ref="A1">F(1)</f><v></v></c>'),
    (None, '<c r="A1" s="4" cm="1"><f t="array" ref="A1">F(1)</f></c>'),
])  # fmt: skip
@pytest.mark.parametrize("old", ["<v>1</v>", "<v />", "<v/>", ""])
def test_a_result_is_put_beside_a_formula_which_stays(value: object, expected: str, old: str) -> None:
    edits = Edits(sheet(f'<row r="1"><c r="A1" s="4" cm="1" t="e"><f t="array" ref="A1">F(1)</f>{old}</c></row>'))
    edits.result(1, 1, value)  # type: ignore[arg-type]
    assert rows(edits) == f'<row r="1">{expected}</row>'


def test_a_result_goes_only_where_a_formula_is() -> None:
    edits = Edits(sheet('<row r="1"><c r="A1"><v>1</v></c><c r="B1"/></row>'))
    for column in (1, 2, 3):
        edits.result(1, column, 5.0)
    assert edits.cells == {}


def test_texts_that_a_part_can_not_hold_are_written_so_that_it_can() -> None:
    edits = Edits(sheet('<row r="1"/>'))
    typed = "a & b < c \x07 _x0041_ \r\n" + "x" * 40_000
    edits.set(1, 1, typed)
    shown = read_again(edits).value(1, 1)
    assert isinstance(shown, str) and shown.startswith("a & b < c � _x0041_ \r\n") and len(shown) == 32_767


def test_no_number_is_an_empty_cell() -> None:
    assert cell_bytes(1, 1, "", float("nan")) == b'<c r="A1"/>'
    assert cell_bytes(1, 1, "", float("nan"), "A2") == b'<c r="A1" t="str"><f>A2</f><v></v></c>'


# --- shared formulas


SHARED = (
    '<row r="1"><c r="A1" s="2"><f t="shared" ref="A1:A3" si="0">B1*$C$1&amp;"&lt;A1"</f><v>1</v></c></row>'
    '<row r="2"><c r="A2" s="2"><f t="shared" si="0"/><v>2</v></c></row>'
    '<row r="3"><c r="A3"><f t="shared" si="0"></f><v>3</v></c></row>'
)


def test_who_shares_the_formula_of_a_replaced_cell_gets_it_for_itself() -> None:
    edits = Edits(sheet(SHARED))
    edits.set(1, 1, 9.0)
    edits.result(3, 1, 8.0)
    assert rows(edits) == (
        '<row r="1"><c r="A1" s="2"><v>9.0</v></c></row>'
        '<row r="2"><c r="A2" s="2"><f>B2*$C$1&amp;"&lt;A1"</f><v>2</v></c></row>'
        '<row r="3"><c r="A3"><f>B3*$C$1&amp;"&lt;A1"</f><v>8.0</v></c></row>'
    )


def test_a_shared_formula_stays_shared_while_its_first_cell_does() -> None:
    edits = Edits(sheet(SHARED))
    edits.set(2, 1, 9.0)
    edits.result(1, 1, 7.0)
    assert rows(edits).count('t="shared"') == 2 and '<c r="A2" s="2"><v>9.0</v></c>' in rows(edits)


def test_formulas_that_are_gone_are_told() -> None:
    cells = '<c r="A1"><f>1</f></c><c r="B1"><f>1</f></c><c r="C1"><v>1</v></c><c r="D1"><f>1</f></c>'
    edits = Edits(sheet(f'<row r="1">{cells}</row>'))
    edits.set(1, 1, 1.0)
    edits.set(1, 2, 1.0, "1+0")
    edits.set(1, 3, 1.0)
    edits.result(1, 4, 1.0)
    assert edits.formulas_gone == [(1, 1)]


# --- ranges


TAIL = (
    '<autoFilter ref="A3:D6"/><conditionalFormatting sqref="B4:B6 C9"><cfRule/></conditionalFormatting>'
    '<conditionalFormatting sqref="D4:D6"><cfRule/></conditionalFormatting><conditionalFormatting sqref="B4:C5"/>'
    '<dataValidations><dataValidation prompt="sqref=&quot;A1:A2&quot; &gt;" sqref=\'A4:C6\' type="list">'
    "<formula1>A4:A6</formula1>"
    "</dataValidation></dataValidations><extLst><x14:f><xm:sqref>B4:B6</xm:sqref></x14:f></extLst>"
)


def test_ranges_over_a_table_that_grew_cover_its_new_rows() -> None:
    edits = Edits(sheet('<row r="4"><c r="A4"/></row>', tail=TAIL))
    edits.set(8, 1, 1.0)
    edits.grow(Growth(4, 6, 8, (1, 2, 3)))
    tail = text(edits).partition("</sheetData>")[2].removesuffix("</worksheet>")
    expected = TAIL.replace("A3:D6", "A3:D8").replace('sqref="B4:B6 C9"', 'sqref="B4:B8 C9"').replace("'A4:C6'", "'A4:C8'")
    assert tail == expected  # D is not of the table, B4:C5 did not reach to its end, and the rest is no range of the kind


# --- at random


PLACES = st.tuples(st.integers(1, 12), st.integers(1, 30))
FORBIDDEN = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")


def line(row: int, cells: dict[tuple[int, int], str]) -> str:
    here = [(f"{get_column_letter(column)}{row}", inside) for (at, column), inside in sorted(cells.items()) if at == row]
    made = (f'<c r="{name}">{inside}</c>' if inside else f'<c r="{name}" s="1" />' for name, inside in here)
    return f'<row r="{row}">{"".join(made)}</row>'


@given(
    st.dictionaries(PLACES, st.sampled_from(["", "<v>1</v>", "<f>A1</f><v>2</v>"]), max_size=40),
    st.dictionaries(PLACES, st.one_of(st.floats(-1e6, 1e6), st.text(max_size=5)), max_size=20),
)
def test_any_cells_can_be_changed_and_the_others_stay(cells: dict[tuple[int, int], str],
                                                      changes: dict[tuple[int, int], float | str]) -> None:  # fmt: skip
    before = sheet("".join(line(row, cells) for row in sorted({row for row, _ in cells})))
    edits = Edits(before)
    for (row, column), value in changes.items():
        edits.set(row, column, value)
    after = read_again(edits)
    for (row, column), value in changes.items():
        shown = after.value(row, column)
        plain = FORBIDDEN.sub("\ufffd", value) if isinstance(value, str) else value
        assert shown == plain or (shown is None and value == "")
    for row, column in set(cells) - set(changes):
        own, other = before.cell(row, column), after.cell(row, column)
        assert own is not None and other is not None and own.whole() == other.whole()
    assert all(list(row.cells) == sorted(row.cells) for row in after.rows)
