"""Slope profiles in a filled workbook: the values are the arrays', and the workbook tells when they no longer hold."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import openpyxl
import pytest
from openpyxl.utils import get_column_letter

from stripcheck import assess
from stripcheck.cli import main
from stripcheck.verdict import MOVED, NOT_ASSESSED
from tests.sheet.recalculated import differences
from tests.sheet.test_book import cells_of, strips_of

LIST = """\
Strip,Runway,Length [m],Elevation [ft],Surface,Profile,Slope [%]
XAAA,09/27,900,2300,grass,"0:0, 250:0, 900:26",
XBBB,10/28,900,2600,gravel,,1.2
XCCC,11/29,900,2300,grass,"0:0, 100:-2, 900:9",
"""
SHEET_KEYS = ("takeoff_slope", "landing_slope", "climb_slope", "approach_slope")


@pytest.fixture
def book_path(tmp_path: Path) -> Path:
    listed, path = tmp_path / "list.csv", tmp_path / "book.xlsx"
    listed.write_text(LIST, encoding="utf-8")
    assert main(["fill", str(listed), "--card", "ridge-runner", "--rules", "manual-only", "--temp", "20", "-o", str(path),
                 "--quiet", "--detail", "full"]) == 0  # fmt: skip
    return path


def test_the_workbook_has_what_assess_gives_along_the_profile(office, book_path) -> None:
    with office.open(book_path) as book:
        count, found = differences(book, book_path)
        assert (count > 500, found) == (True, [])
        rows = book.values("Strips", "A1:HZ9")
    strip = {"tora": 900.0, "lda": 900.0, "length": 900.0, "elevation_field": 2300.0, "surface": "grass",
             "profile": ["0:0, 250:0, 900:26", "0:0, 650:-26, 900:-26"]}  # fmt: skip
    result = assess(strip, "ridge-runner", {"temperature": 20})
    # the workbook shows slopes to a millionth of a per cent
    for key, header in (("takeoff_distance", "Take-off distance to 50 ft, unfactored, TOD [m]"),
                        ("landing_distance", "Landing distance from 50 ft, unfactored, LD [m]")):  # fmt: skip
        assert strips_of(book_path, rows, header)[:2] == pytest.approx(result[key], rel=1e-7)
    assert np.ptp(result["takeoff_slope"]) > 2.0


def test_a_workbook_whose_mass_is_changed_says_that_its_profiles_no_longer_hold(office, book_path) -> None:
    mass = cells_of(book_path, "Aircraft", "A")["Take-off mass"].replace("A", "B")
    with office.open(book_path) as book:
        before = book.values("Strips", "A1:HZ9")
        book.set("Aircraft", {mass: 900.0})
        book.recalculate()
        after = book.values("Strips", "A1:HZ9")
        book.set("Aircraft", {mass: 1050.0})
        book.recalculate()
        again = book.values("Strips", "A1:HZ9")
    verdicts, reasons = (strips_of(book_path, after, header) for header in ("Take-off verdict", "Take-off: limiting reason"))
    profiled = [0, 1, 4, 5]
    assert [verdicts[row] for row in profiled] == [NOT_ASSESSED] * 4
    assert [reasons[row] for row in profiled] == [MOVED] * 4
    assert verdicts[2:4] == strips_of(book_path, before, "Take-off verdict")[2:4] == ["suitable", "suitable"]
    for header in ("Take-off verdict", "Take-off: limiting reason"):
        assert strips_of(book_path, again, header) == strips_of(book_path, before, header)


def test_a_shorter_usable_length_moves_where_a_run_begins_so_that_its_profile_no_longer_holds(office, book_path) -> None:
    headers = [cell.value for cell in openpyxl.load_workbook(book_path)["Strips"][3]]
    tora = get_column_letter(headers.index("Usable for take-off [m]") + 1)
    with office.open(book_path) as book:
        book.set("Strips", {f"{tora}4": 700.0, f"{tora}6": 850.0})
        book.recalculate()
        after = book.values("Strips", "A1:HZ9")
    assert strips_of(book_path, after, "Take-off: limiting reason")[0] == MOVED
    landings = strips_of(book_path, after, "Landing: limiting reason")
    assert MOVED not in landings and MOVED not in strips_of(book_path, after, "Take-off: limiting reason")[1:]


def test_an_asterisk_is_no_surface_condition_or_flap(office, book_path) -> None:
    headers = [cell.value for cell in openpyxl.load_workbook(book_path)["Strips"][3]]
    surface, condition = (get_column_letter(headers.index(title) + 1) for title in ("Surface", "Condition"))
    flap = cells_of(book_path, "Aircraft", "A")["Landing flap"].replace("A", "B")
    with office.open(book_path) as book:
        book.set("Strips", {f"{surface}6": "*", f"{condition}7": "*"})
        book.set("Aircraft", {flap: "*"})
        book.recalculate()
        after = book.values("Strips", "A1:HZ9")
    assert strips_of(book_path, after, "Take-off verdict")[2:4] == [NOT_ASSESSED] * 2
    assert strips_of(book_path, after, "Landing verdict") == [NOT_ASSESSED] * 6
