"""The chance beside the margin in a filled workbook and a result table: as found, and only as long as it holds."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest

from stripcheck.chance import chance
from stripcheck.cli import main
from stripcheck.sheet.strips import MOVED_ON
from tests.sheet.recalculated import differences
from tests.sheet.test_book import cells_of, strips_of

LIST = """\
Strip,Runway,Length [m],Elevation [ft],Surface,Slope [%]
XAAA,09/27,620,2300,grass,1
XBBB,10/28,480,2600,gravel,1.2
XCCC,11/29,600,2300,grass,
"""
HEADERS = {side: f"Chance of needing more, {word} [%]" for side, word in (("takeoff", "take-off"), ("landing", "landing"))}


def filled(tmp_path: Path, name: str) -> Path:
    listed, path = tmp_path / "list.csv", tmp_path / name
    listed.write_text(LIST, encoding="utf-8")
    assert main(["fill", str(listed), "--card", "ridge-runner", "--rules", "manual-only", "--temp", "20", "-o", str(path),
                 "--quiet", "--chance"]) == 0  # fmt: skip
    return path


def expected() -> dict[str, list[float]]:
    """By way of Python, for the directions of the first two strips."""
    strip = {"tora": [620.0, 620.0, 480.0, 480.0], "lda": [620.0, 620.0, 480.0, 480.0],
             "elevation_field": [2300.0, 2300.0, 2600.0, 2600.0], "slope_given": [1.0, -1.0, 1.2, -1.2],
             "surface": ["grass", "grass", "gravel", "gravel"]}  # fmt: skip
    found = chance(strip, "ridge-runner", {"temperature": 20})
    return {"takeoff": (100.0 * found.takeoff).tolist(), "landing": (100.0 * found.landing).tolist()}


def test_the_workbook_shows_the_chance_until_the_margin_moves(office, tmp_path) -> None:
    path = filled(tmp_path, "book.xlsx")
    mass = cells_of(path, "Aircraft", "A")["Take-off mass"].replace("A", "B")
    with office.open(path) as book:
        assert differences(book, path)[1] == []
        before = book.values("Strips", "A1:IZ9")
        book.set("Aircraft", {mass: 1000.0})
        book.recalculate()
        after = book.values("Strips", "A1:IZ9")
    for side, header in HEADERS.items():
        assert strips_of(path, before, header)[:4] == pytest.approx(expected()[side])
        assert [value or "" for value in strips_of(path, before, header)[4:]] == ["", ""]  # no slope: not assessed
    assert strips_of(path, after, HEADERS["takeoff"])[:4] == [MOVED_ON] * 4
    assert strips_of(path, after, HEADERS["landing"])[:4] == pytest.approx(expected()["landing"])


def test_the_result_table_has_the_chance_beside_the_margin(tmp_path) -> None:
    with filled(tmp_path, "table.csv").open(encoding="utf-8-sig", newline="") as file:
        rows = list(csv.DictReader(file))
    for side, header in HEADERS.items():
        assert [float(row[header]) for row in rows[:4]] == pytest.approx(expected()[side])
    assert not [header for header in rows[0] if "as filled" in header]
