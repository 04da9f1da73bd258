"""A filled workbook read as it stands: what a user may do to one gives a right result, or one sentence and no change."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest

from stripcheck.cli import main
from stripcheck.sheet.filled import SHEETS
from tests.book_parts import Parts, SheetText, reorder, shift
from tests.filled_books import State, card_of, filled, rows_of, rows_shown, type_on_page, type_on_strips, verdicts_must_be
from tests.sheet.recalculated import differences


@pytest.fixture
def refresh(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Callable[..., str]:
    """Writes parts, refreshes them and returns what was said; where nothing is written, the file must be as it was."""

    def run(parts: Parts, *options: str, state: State | None = None, code: int = 0) -> str:
        path = tmp_path / "book.xlsx"
        parts.write(path)
        before, files = path.read_bytes(), sorted(tmp_path.glob("*"))
        capsys.readouterr()
        assert main(["refresh", str(path), *options]) == code
        said = capsys.readouterr()
        if code:
            assert path.read_bytes() == before and sorted(tmp_path.glob("*")) == files
            assert said.out == "" and said.err.count("\n") == 1 and said.err.startswith("stripcheck: ")
            return said.err
        if state is not None:
            assert verdicts_must_be(path, state) == []
        return said.out

    return run


def book(kind: str = "full") -> Parts:
    return Parts.read(filled(kind))


def column_of(parts: Parts, header: str, title: str = "Strips") -> int:
    return SheetText.of(parts.text(parts.sheet(title))).headers({"Strips": 3, "Summary": 14}[title])[header]


def take_out(parts: Parts, header: str, title: str = "Strips") -> Parts:
    shift(parts, title, column_of(parts, header, title), -1, columns=True)
    return parts


def edit(parts: Parts, title: str, change: Callable[[SheetText], None]) -> Parts:
    sheet = SheetText.of(parts.text(parts.sheet(title)))
    change(sheet)
    parts.put(parts.sheet(title), str(sheet))
    return parts


def rename_header(parts: Parts, header: str, other: str) -> Parts:
    return edit(parts, "Strips", lambda sheet: sheet.type(3, column_of(parts, header), other))


def row_on_page(parts: Parts, title: str, label: str) -> int:
    sheet = SheetText.of(parts.text(parts.sheet(title)))
    return next(row for row in sorted(sheet.rows) if sheet.shown(row, 1) == label)


# --- sheets


@pytest.mark.parametrize("title", SHEETS)
def test_a_sheet_that_was_renamed_is_missed(refresh, title: str) -> None:
    parts = book()
    parts.change("xl/workbook.xml", f'<sheet name="{title}"', f'<sheet name="Old {title}"')
    assert f'has no sheet "{title}"' in refresh(parts, code=2)


def test_two_sheets_are_missed_together_and_a_workbook_of_another_kind_is_told(refresh) -> None:
    parts = book()
    for title in ("Rules", "Method"):
        parts.change("xl/workbook.xml", f'<sheet name="{title}"', f'<sheet name="{title} 2"')
    assert 'no sheet "Rules" and "Method"' in refresh(parts, code=2)
    parts.change("xl/workbook.xml", '<sheet name="Strips"', '<sheet name="Mine"')
    assert "no workbook that `stripcheck fill` made" in refresh(parts, code=2)


def test_the_manuals_sheet_is_needed_where_the_aeroplane_has_tables(refresh) -> None:
    for kind in ("full", "many tables none"):
        parts = book(kind)
        parts.change("xl/workbook.xml", '<sheet name="Manual"', '<sheet name="Tables"')
        assert 'the sheet "Manual" is gone' in refresh(parts, code=2)


# --- columns of the sheet Strips


@pytest.mark.parametrize("header", ["Key", "Direction", "Take-off verdict", "Landing: limiting reason", "Landing margin [m]",
                                    "Usable for take-off [m]"])  # fmt: skip
@pytest.mark.parametrize("kind", ["short", "none"])
def test_a_column_that_is_needed_is_missed_by_its_header(refresh, kind: str, header: str) -> None:
    said = refresh(take_out(book(kind), header), code=2)
    assert "has lost" in said and f'"{header}"' in said
    said = refresh(rename_header(book(kind), header, "Mine"), code=2)
    assert "has lost" in said and f'"{header}"' in said


@pytest.mark.parametrize("kind", ["full", "none", "excel"])
def test_an_input_that_is_gone_is_missed_where_all_are_there(refresh, kind: str) -> None:
    for change in (take_out, lambda parts, header: rename_header(parts, header, "Mine")):
        said = refresh(change(book(kind), "Obstacle on climb-out, height [ft]"), code=2)
        assert 'has lost its column "Obstacle on climb-out, height [ft]"' in said


def test_an_input_that_is_gone_is_missed_in_a_short_workbook_by_the_formulas_that_read_it(refresh) -> None:
    header = "Obstacle on climb-out, height [ft]"
    assert "has lost a column that formulas read" in refresh(take_out(book("short"), header), code=2)
    said = refresh(rename_header(book("short"), header, "Trees"), code=2)
    assert 'whose header "Trees" is not known; give it back the header that it had' in said


def test_a_step_that_was_deleted_is_written_into_the_others(refresh, office, tmp_path: Path) -> None:
    parts = take_out(take_out(book(), "Wind used [kt]"), "Density altitude, DA [ft]")
    assert "#REF!" in parts.text(parts.sheet("Strips"))
    refresh(parts, state=State(card_of("full")))
    after = Parts.read(tmp_path / "book.xlsx")
    assert "#REF!" not in after.text(after.sheet("Strips"))
    with office.open(tmp_path / "book.xlsx") as opened:
        opened.recalculate()
        assert differences(opened, tmp_path / "book.xlsx")[1] == []


def test_a_step_whose_header_is_another_but_that_is_read_must_get_it_back(refresh) -> None:
    assert 'whose header "Mine" is not known' in refresh(rename_header(book(), "Wind used [kt]", "Mine"), code=2)


def test_a_users_column_of_the_same_header_is_not_taken_for_ours(refresh, tmp_path: Path) -> None:
    parts = book()
    rows = rows_of(parts, "Strips")
    for header in ("Usable for landing [m]", "Take-off margin [m]"):
        shift(parts, "Strips", 3, 1, columns=True)
        cells = {3: header, **dict.fromkeys(rows, 5.0)}
        edit(parts, "Strips", lambda sheet, cells=cells: [sheet.type(row, 3, value) for row, value in cells.items()])
    type_on_page(parts, "Day", "QNH", 1001.0)
    refresh(parts)
    shown = openpyxl.load_workbook(tmp_path / "book.xlsx", data_only=True)["Strips"]
    again, alone = tmp_path / "alone.xlsx", book()
    type_on_page(alone, "Day", "QNH", 1001.0)
    alone.write(again)
    assert main(["refresh", str(again)]) == 0
    expected = openpyxl.load_workbook(again, data_only=True)["Strips"]
    for row in rows:
        cells = [cell.value for cell in shown[row]]
        assert cells[2:4] == [5.0, 5.0] and cells[:2] + cells[4:] == [cell.value for cell in expected[row]]


def test_of_two_columns_of_the_same_header_in_a_workbook_of_values_neither_is_guessed(refresh) -> None:
    parts = book("none")
    shift(parts, "Strips", 3, 1, columns=True)
    edit(parts, "Strips", lambda sheet: sheet.type(3, 3, "Usable for landing [m]"))
    assert 'has the header "Usable for landing [m]" in the columns C and W' in refresh(parts, code=2)


def test_a_column_of_the_summary_is_missed_too(refresh) -> None:
    assert 'the sheet "Summary" has lost its column "Row in"' in refresh(take_out(book(), "Row in", "Summary"), code=2)


def test_headers_that_are_all_gone_are_missed(refresh) -> None:
    parts = book()
    edit(parts, "Strips", lambda sheet: sheet.rows.pop(3))
    assert "has lost its row of headers" in refresh(parts, code=2)


# --- rows of the sheet Strips


def test_a_sheet_without_rows_is_refused(refresh) -> None:
    parts = book()
    edit(parts, "Strips", lambda sheet: [sheet.rows.pop(row) for row in [row for row in sheet.rows if row > 3]])
    assert 'has no rows of strips any more' in refresh(parts, code=2)


def test_a_row_that_was_cleared_but_for_its_key_is_not_assessed(refresh, tmp_path: Path) -> None:
    parts = book()
    row = rows_of(parts, "Strips")[0]
    for key in ("tora", "lda", "length", "surface", "elevation_field", "elevation_start", "elevation_end", "heading", "width"):
        type_on_strips(parts, row, key, None)
    refresh(parts, state=State(card_of("full")))
    assert rows_shown(tmp_path / "book.xlsx")[0]["Take-off verdict"] == "not assessed"


def test_a_row_copied_with_its_key_becomes_a_strip_of_its_own(refresh, tmp_path: Path) -> None:
    parts = book()
    first, last = rows_of(parts, "Strips")[0], rows_of(parts, "Strips")[-1]
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    copied = {column: re.sub(rf"([A-Z]){first}\b", rf"\g<1>{last + 1}", cell) for column, cell in sheet.rows[first].items()}
    edit(parts, "Strips", lambda sheet: sheet.rows.update({last + 1: copied}))
    assert "13 directions refreshed" in refresh(parts, state=State(card_of("full")))
    keys = [row["Key"] for row in rows_shown(tmp_path / "book.xlsx")]
    assert len(set(keys)) == 13 and keys[-1] == "row 1 1"


def test_rows_that_were_sorted_without_their_keys_are_told(refresh) -> None:
    parts = book()
    rows = rows_of(parts, "Strips")
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    keys = {row: sheet.rows[row].pop(1) for row in rows}
    parts.put(parts.sheet("Strips"), str(sheet))
    reorder(parts, "Strips", rows, [*rows[2:], *rows[:2]])
    edit(parts, "Strips", lambda sheet: [sheet.rows[row].update({1: keys[row]}) for row in rows])
    said = refresh(parts, state=State(card_of("full")))
    assert "sheet Summary, row 15: XLRB has the key of row 4 on the sheet Strips, XTLF" in said
    assert said.count("has the key of row") == 6


def test_a_text_where_a_number_belongs_does_not_count_and_is_told(refresh) -> None:
    parts = book()
    type_on_strips(parts, rows_of(parts, "Strips")[0], "width", "12 m")
    type_on_page(parts, "Day", "QNH", "1013 hPa")
    said = refresh(parts)
    assert 'Width [m]: "12 m" is no number and does not count' in said
    assert 'sheet Day, QNH: "1013 hPa" is no number and does not count' in said


def test_a_formula_of_a_users_counts_with_its_result_and_without_one_nothing_is_guessed(refresh) -> None:
    def put(inside: str) -> Parts:
        parts = book()
        column, row = column_of(parts, "Usable for take-off [m]"), rows_of(parts, "Strips")[0]
        return edit(parts, "Strips", lambda sheet: sheet.put(row, column, inside))

    refresh(put("<f>1000/2</f><v>500</v>"), state=State(card_of("full")))
    assert "Usable for take-off [m]: is a formula without a result" in refresh(put("<f>1000/2</f>"), code=2)
    parts = book()
    edit(parts, "Day", lambda sheet: sheet.put(row_on_page(parts, "Day", "QNH"), 2, "<f>1000+3</f>"))
    assert "QNH: is a formula without a result" in refresh(parts, code=2)


def test_a_profile_that_can_not_be_read_or_does_not_fit_is_refused(refresh) -> None:
    for text, says in (("0:0, uphill", "is not a point of a profile"), ("0:0, 200:4", "the profile ends at 200 m but the")):
        parts = book("profile")
        type_on_strips(parts, rows_of(parts, "Strips")[2], "Slope profile", text)
        assert says in refresh(parts, code=2)


def test_a_profile_that_was_taken_out_or_changed_counts_no_more(refresh, tmp_path: Path) -> None:
    parts = book("profile")
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    profiled = [row for row in rows_of(parts, "Strips") if sheet.shown(row, sheet.headers(3)["Slope profile"])]
    assert len(profiled) == 4
    for row in profiled:
        type_on_strips(parts, row, "Slope profile", None)
    refresh(parts, state=State(card_of("profile")))
    assert all(row["Profile, take-off slope [%]"] is None for row in rows_shown(tmp_path / "book.xlsx"))


# --- the pages


def test_a_value_typed_over_the_formula_beside_it_is_the_one_that_counts(refresh) -> None:
    parts = book()
    edit(parts, "Day", lambda sheet: sheet.type(row_on_page(parts, "Day", "QNH"), 4, 99_000.0))
    refresh(parts, state=State(card_of("full"), day={"isa_deviation": 15, "qnh": 990, "wind_from": 310, "wind_speed": 8}))


def test_a_step_of_a_page_that_was_typed_over_becomes_a_formula_again(refresh, office, tmp_path: Path) -> None:
    parts = book()
    row = row_on_page(parts, "Aircraft", "Take-off mass of the tables used")
    edit(parts, "Aircraft", lambda sheet: sheet.type(row, 4, 900.0))
    assert f"Typed over formulas, and formulas again: Aircraft!D{row}" in refresh(parts, state=State(card_of("full")))
    with office.open(tmp_path / "book.xlsx") as opened:
        opened.recalculate()
        assert differences(opened, tmp_path / "book.xlsx")[1] == []


def test_a_label_that_was_typed_over_and_rows_of_a_users_above_do_no_harm(refresh) -> None:
    parts = book()
    edit(parts, "Day", lambda sheet: sheet.type(row_on_page(parts, "Day", "QNH"), 1, "Pressure by the tower"))
    for title in ("Day", "Aircraft", "Rules"):
        shift(parts, title, 3, 2)
    edit(parts, "Day", lambda sheet: (sheet.type(3, 1, "QNH"), sheet.type(3, 2, 950.0)))
    edit(parts, "Aircraft", lambda sheet: (sheet.type(3, 1, "Wing area"), sheet.type(3, 2, 2.0)))
    refresh(parts, state=State(card_of("full")))


@pytest.mark.parametrize(("title", "label"), [("Day", "Relative humidity"), ("Rules", "Least width"),
                                              ("Rules", "Take-off safety factor"), ("Aircraft", "Take-off mass"),
                                              ("Aircraft", "Wing area")])  # fmt: skip
def test_a_row_of_a_page_that_was_deleted_is_missed(refresh, title: str, label: str) -> None:
    parts = book()
    shift(parts, title, row_on_page(parts, title, label), -1)
    said = refresh(parts, code=2)
    assert label in said and ("has lost its row" in said or "has no row" in said)


@pytest.mark.parametrize("title", ["Day", "Aircraft", "Rules"])
def test_a_column_put_into_a_page_is_refused(refresh, title: str) -> None:
    parts = book()
    shift(parts, title, 2, 1, columns=True)
    assert f'columns of the sheet "{title}" were moved' in refresh(parts, code=2)


@pytest.mark.parametrize("name", ["takeoff_factor", "run_nodes", "takeoff_verdict_words", "ground_rolling", "flap_lifts"])
def test_a_name_that_the_formulas_read_is_missed(refresh, name: str) -> None:
    parts = book()
    text = parts.text("xl/workbook.xml")
    parts.put("xl/workbook.xml", re.sub(rf'<definedName name="{name}">[^<]*</definedName>', "", text))
    assert f'the name "{name}", which the formulas read, is gone' in refresh(parts, code=2)


def test_a_mass_or_flap_that_is_gone_leaves_nothing_assessed(refresh, tmp_path: Path) -> None:
    parts = book()
    type_on_page(parts, "Aircraft", "Take-off mass", None)
    type_on_page(parts, "Aircraft", "Landing flap", "half way")
    said = refresh(parts)
    assert 'sheet Aircraft, Landing flap: there is no flap setting "half way"' in said
    rows = rows_shown(tmp_path / "book.xlsx")
    assert {row[f"{side} verdict"] for row in rows for side in ("Take-off", "Landing")} <= {"not assessed", "unsuitable"}


def test_a_value_of_the_day_that_can_not_be_is_told(refresh) -> None:
    parts = book()
    type_on_page(parts, "Day", "QNH", 29.92)
    assert "sheet Day, QNH: 29.92 is not credible; 850 to 1085 hPa is expected" in refresh(parts)


def test_figures_typed_over_on_the_sheet_manual_count(refresh, office, tmp_path: Path) -> None:
    verdicts = {}
    for kind in ("many tables", "many tables none"):
        parts = book(kind)
        sheet = SheetText.of(parts.text(parts.sheet("Manual")))
        page = next(row for row in sorted(sheet.rows) if sheet.shown(row, 1).startswith("Page: "))
        figures = [(row, column) for row in range(page + 2, page + 7) for column in range(3, 7)]
        for row, column in figures:
            if sheet.shown(row, column):
                sheet.type(row, column, 3.0 * float(sheet.shown(row, column)))
        parts.put(parts.sheet("Manual"), str(sheet))
        type_on_page(parts, "Aircraft", "Take-off mass", 2200.0)
        assert "Changed: " in refresh(parts)
        verdicts[kind] = [row["Take-off margin [m]"] for row in rows_shown(tmp_path / "book.xlsx")]
        if kind == "many tables":
            with office.open(tmp_path / "book.xlsx") as opened:
                opened.recalculate()
                count, found = differences(opened, tmp_path / "book.xlsx")
            assert (count > 1500, found) == (True, [])
    assert verdicts["many tables"] == pytest.approx(verdicts["many tables none"], nan_ok=True)


def test_a_figure_that_was_cleared_in_a_workbook_of_values_is_refused(refresh) -> None:
    parts = book("many tables none")
    sheet = SheetText.of(parts.text(parts.sheet("Manual")))
    page = next(row for row in sorted(sheet.rows) if sheet.shown(row, 1).startswith("Page: "))
    sheet.type(page + 2, 3, None)
    parts.put(parts.sheet("Manual"), str(sheet))
    assert 'a figure on the sheet "Manual" is gone' in refresh(parts, code=2)


@pytest.mark.parametrize("kind", ["none", "many tables none"])
def test_formulas_of_a_users_do_not_make_a_workbook_of_values_one_of_formulas(refresh, tmp_path: Path, kind: str) -> None:
    parts = book(kind)
    for title in ("Aircraft", "Day", "Rules", "Manual", "Summary", "Strips"):
        edit(parts, title, lambda sheet: [sheet.put(max(sheet.rows) + 2, at, "<f>1+1</f><v>2</v>") for at in (2, 4, 11)])
    column, row = column_of(parts, "Landing margin [m]"), rows_of(parts, "Strips")[1]
    edit(parts, "Strips", lambda sheet: sheet.put(row, column, "<f>100+1</f><v>101</v>"))
    state = State(card_of(kind), day={"isa_deviation": 15, "qnh": 1001, "wind_from": 310, "wind_speed": 8})
    refresh(parts, "--qnh", "1001", state=state)
    after = Parts.read(tmp_path / "book.xlsx")
    texts = [after.text(after.sheet(title)) for title in SHEETS]
    assert {formula for text in texts for formula in re.findall("<f>.*?</f>", text)} == {"<f>1+1</f>"}
    assert rows_shown(tmp_path / "book.xlsx")[0]["QNH used, QNH [hPa]"] == 1001.0


def test_cells_that_were_merged_over_the_table_do_no_harm(refresh) -> None:
    parts = book()
    name, margin = (column_of(parts, header) for header in ("Name", "Take-off margin [m]"))
    edit(parts, "Strips", lambda sheet: [sheet.rows[5].pop(column) for column in (name, margin)])
    letters = [openpyxl.utils.get_column_letter(column) for column in (name, margin)]
    areas = "".join(f'<mergeCell ref="{letter}4:{letter}5"/>' for letter in letters)
    part = parts.sheet("Strips")
    parts.change(part, "<conditionalFormatting", f'<mergeCells count="2">{areas}</mergeCells><conditionalFormatting')
    refresh(parts, state=State(card_of("full")))
