"""The LibreOffice fixture itself: it must really calculate, and must not hide an error or a blank.

Expected values are plain arithmetic; LibreOffice's error codes are from its own help page "Error Codes in
LibreOffice Calc".
"""

from __future__ import annotations

import contextlib
import os
import signal
import subprocess
import sys
import time
import zipfile
from pathlib import Path

import openpyxl
import pytest
from openpyxl.worksheet.properties import PageSetupProperties

from tests.office import WORKER, Office, OfficeError, find_soffice, missing_parts, provide_office, render

# Long enough for a busy machine to end a process that has been killed.
END_SECONDS = 20


@pytest.fixture
def small_book(tmp_path: Path) -> Path:
    """A book with a number, a text, a blank, formulas and one error; openpyxl writes no cached values."""
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Small"
    sheet.append([2.5, "gravel", None, "=A1*2", "=1/0", '=""', "=A1>1", "=NA()", "=C1"])
    book.create_sheet("Other sheet")["B2"] = "=Small!D1+1"
    for page in book.worksheets:  # one page each, whatever the fonts of the machine
        page.sheet_properties.pageSetUpPr = PageSetupProperties(fitToPage=True)
    path = tmp_path / "small.xlsx"
    book.save(path)
    return path


def with_cached_value(path: Path, formula: str, cached: str) -> None:
    """Put a cached value beside a formula of the first sheet, as a spreadsheet program would have left it."""
    with zipfile.ZipFile(path) as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    sheet = parts["xl/worksheets/sheet1.xml"].decode()
    for empty in ("<v></v>", "<v/>", "<v />"):
        sheet = sheet.replace(f"<f>{formula}</f>{empty}", f"<f>{formula}</f><v>{cached}</v>")
    assert f"<v>{cached}</v>" in sheet
    with zipfile.ZipFile(path, "w") as archive:
        for name, content in parts.items():
            archive.writestr(name, sheet if name == "xl/worksheets/sheet1.xml" else content)


def test_numbers_texts_blanks_and_errors_come_back_as_such(office: Office, small_book: Path) -> None:
    with office.open(small_book) as book:
        assert book.sheets() == ["Small", "Other sheet"]
        expected = [2.5, "gravel", None, 5.0, "#ERR:532", "", 1.0, "#ERR:32767", 0.0, None]
        assert book.values("Small", "A1:J2") == [expected, [None] * 10]
        # An area that starts elsewhere: blanks and errors stay in their own cells.
        assert book.values("Small", "C1:E1") == [[None, 5.0, "#ERR:532"]]
        assert book.value("Other sheet", "B2") == 6.0


def test_stale_cached_values_are_calculated_afresh(office: Office, small_book: Path) -> None:
    with_cached_value(small_book, "A1*2", "77")
    with office.open(small_book) as book:
        assert book.value("Small", "D1") == 77.0  # trusted on load: so loading alone would prove nothing
        book.recalculate()
        assert book.value("Small", "D1") == 5.0
        assert book.value("Other sheet", "B2") == 6.0


def test_what_depends_on_a_set_cell_follows(office: Office, small_book: Path) -> None:
    with office.open(small_book) as book:
        book.set("Small", {"A1": 10, "B1": "=1+1", "C1": "12", "E1": None})
        assert book.values("Small", "A1:E1") == [[10.0, "=1+1", "12", 20.0, None]]
        assert book.value("Other sheet", "B2") == 21.0


def test_very_many_errors_are_all_reported(office: Office, tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    assert book.active is not None
    for _ in range(600):
        book.active.append(["=1/0", 1])
    book.save(tmp_path / "errors.xlsx")
    with office.open(tmp_path / "errors.xlsx") as opened:
        rows = opened.values("Sheet", "A1:B600")
    assert rows == [["#ERR:532", 1.0]] * 500 + [["#ERR:?", 1.0]] * 100


@pytest.mark.parametrize("ending", [".xlsx", ".ods"])
def test_a_saved_book_opens_again_with_its_formulas(
    office: Office, small_book: Path, tmp_path: Path, ending: str
) -> None:
    saved = tmp_path / f"saved{ending}"
    with office.open(small_book) as book:
        book.set("Small", {"A1": 4})
        book.save_as(saved)
    with office.open(saved) as book:
        assert book.value("Small", "D1") == 8.0
        book.set("Small", {"A1": 5})
        assert book.value("Other sheet", "B2") == 11.0


def test_two_books_are_open_at_once_and_leave_no_litter(office: Office, small_book: Path) -> None:
    second = small_book.with_name("b.xlsx")
    with office.open(small_book) as one, office.open(small_book.rename(second)) as two:
        one.set("Small", {"A1": 1})
        assert one.value("Small", "D1") == 2.0
        assert two.value("Small", "D1") == 5.0
        assert [path.name for path in small_book.parent.iterdir()] == ["b.xlsx"]


def test_pages_are_drawn(office: Office, small_book: Path, tmp_path: Path) -> None:
    pictures = render(small_book, tmp_path / "pictures", dpi=30, office=office)
    assert [picture.name for picture in pictures] == ["small-1.png", "small-2.png"]
    assert all(picture.read_bytes().startswith(b"\x89PNG") for picture in pictures)


def test_questions_that_make_no_sense_are_refused_in_words(office: Office, small_book: Path) -> None:
    with pytest.raises(OfficeError, match="there is no such file"):
        office.open(small_book.with_name("missing.xlsx"))
    broken = small_book.with_name("broken.xlsx")
    broken.write_bytes(small_book.read_bytes()[:2000])
    with pytest.raises(OfficeError, match="can't open this file"):
        office.open(broken)
    with office.open(small_book) as book:
        with pytest.raises(OfficeError, match="no sheet 'Nowhere'; the sheets are"):
            book.values("Nowhere", "A1")
        with pytest.raises(OfficeError, match="not a cell or range"):
            book.values("Small", "A0:??")
        with pytest.raises(OfficeError, match=r"must end in \.xlsx or \.ods"):
            book.save_as(small_book.with_suffix(".csv"))
        assert book.value("Small", "D1") == 5.0  # and the office still answers


def group_is_alive(group: int) -> bool:
    """Tell whether a process group still has a member that is not a zombie, from Linux's /proc."""
    for stat in Path("/proc").glob("[0-9]*/stat"):
        with contextlib.suppress(OSError):  # a process may end while it is looked at
            state, _, process_group = stat.read_text().rpartition(")")[2].split()[:3]
            if int(process_group) == group and state != "Z":
                return True
    return False


def wait_until_gone(group: int) -> bool:
    deadline = time.monotonic() + END_SECONDS
    while group_is_alive(group) and time.monotonic() < deadline:
        time.sleep(0.1)
    return not group_is_alive(group)


def test_a_second_office_runs_beside_the_first_and_ends_whole(office: Office, small_book: Path) -> None:
    with Office() as second:
        group = os.getpgid(second._worker.pid)
        with second.open(small_book) as book:
            assert book.value("Small", "D1") == 5.0
        assert group_is_alive(group)
    assert wait_until_gone(group)
    second.close()
    with pytest.raises(OfficeError, match="has been closed"):
        second.open(small_book)
    with office.open(small_book) as book:
        assert book.value("Small", "D1") == 5.0


def test_nothing_outlives_a_killed_test_run(tmp_path: Path) -> None:
    script = (
        "import sys, os, time; sys.path.insert(0, sys.argv[1]); from tests.office import Office; "
        "o = Office(); print(os.getpgid(o._worker.pid), flush=True); time.sleep(600)"
    )
    run = subprocess.Popen(
        [sys.executable, "-c", script, str(WORKER.parents[1])],
        stdout=subprocess.PIPE,
        text=True,
        env={**os.environ, "TMPDIR": str(tmp_path)},  # a killed run can't tidy up its own
    )
    assert run.stdout is not None
    group = int(run.stdout.readline())
    run.stdout.close()
    assert group_is_alive(group)
    run.send_signal(signal.SIGKILL)
    run.wait()
    assert wait_until_gone(group)


def test_missing_parts_are_named(monkeypatch: pytest.MonkeyPatch, office: Office) -> None:
    assert missing_parts() == []
    soffice = find_soffice()
    assert soffice is not None and soffice.name == "soffice.bin"
    monkeypatch.setattr("tests.office.find_soffice", lambda: None)
    monkeypatch.setattr("tests.office.os.geteuid", lambda: 1000)
    assert provide_office().startswith("These tests need LibreOffice. Type: sudo apt-get update && ")


def test_root_installs_what_is_missing(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    # An apt-get that only writes down how it is called: LibreOffice is on this machine already.
    calls = tmp_path / "calls"
    fake = tmp_path / "apt-get"
    fake.write_text(f'#!/bin/sh\necho "$DEBIAN_FRONTEND $@" >> {calls}\n')
    fake.chmod(0o755)
    monkeypatch.setenv("PATH", f"{tmp_path}{os.pathsep}{os.environ['PATH']}")
    monkeypatch.setattr("tests.office.os.geteuid", lambda: 0)
    monkeypatch.setattr("tests.office.find_soffice", lambda: None)
    assert "LibreOffice" in provide_office()
    assert calls.read_text().splitlines() == [
        "noninteractive update",
        "noninteractive install --yes --no-install-recommends "
        "libreoffice-calc python3-uno python3-numpy python3-pint poppler-utils fonts-dejavu fonts-liberation",
    ]
