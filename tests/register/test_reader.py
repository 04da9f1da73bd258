"""Whole lists. The strips and people are invented."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest

from stripcheck.register import Directions, read_list
from stripcheck.register.directions import NUMBER_KEYS, TEXT_KEYS
from tests.register.lists import write_ods, write_xls

Read = Callable[..., Directions]

UGLY = """Strips of the invented valley;;;;;;
;;;;;;
 Strip ;Rwy;Length (ft);Elev ft;Surface;Slope %;Looked after by
Otter Bend;9/27;2.300;1.250;Grass, wet;4,5;=cmd|' /c calc'!A0
Crag;18;2300ft;1 250;G;-;?

;;;;;;
Café;;700 m;n/a;Soft sand;;Ann Onymous
"""


def test_an_ugly_list(read: Read) -> None:
    strips = read(UGLY.encode("cp1252"))
    assert (strips.n, strips.rows_read, strips.source) == (6, 3, "strips.csv")
    assert strips.numbers["source_row"].tolist() == [4, 4, 5, 5, 8, 8]
    assert strips.texts["pair"][::2] == ["Otter Bend 09/27", "Crag 18/36", "Café A/B"]
    assert strips.texts["direction"] == ["09", "27", "18", "36", "A", "B"]
    assert strips.numbers["length"][::2] == pytest.approx([701.04, 701.04, 700.0], rel=1e-12)
    assert strips.numbers["elevation_field"][:4] == pytest.approx([381.0] * 4, rel=1e-12)
    assert strips.numbers["slope_given"][:2] == pytest.approx([0.045, -0.045], rel=1e-12)
    assert strips.texts["surface"][::2] == ["grass", "", "sand"]
    assert strips.texts["surface_given"][::2] == ["Grass, wet", "G", "Soft sand"]
    assert strips.texts["condition"][::2] == ["wet", "", "soft"]
    assert strips.carried == {"Looked after by": ["=cmd|' /c calc'!A0"] * 2 + ["?"] * 2 + ["Ann Onymous"] * 2}
    assert strips.texts["fault"] == [""] * 6


def test_every_key_is_there_with_n_values(read: Read) -> None:
    strips = read("Strip,Length\nA,600\nB,700\n")
    assert sorted(strips.numbers) == sorted(NUMBER_KEYS)
    assert sorted(strips.texts) == sorted(TEXT_KEYS)
    assert {array.shape for array in strips.numbers.values()} == {(4,)}
    assert {array.dtype.str for array in strips.numbers.values()} == {"<f8"}
    assert {len(values) for values in strips.texts.values()} == {4}


def test_one_way_strips(read: Read) -> None:
    strips = read(
        "Strip,Runway,Length,One way,Land on,Leave by\nA,09/27,600,yes,9,27\nB,09/27,600,,,9\nC,09/27,600,no,,\n"
    )
    assert strips.texts["land_here"] == ["yes", "no", "yes", "yes", "yes", "yes"]
    assert strips.texts["take_off_here"] == ["no", "yes", "yes", "no", "yes", "yes"]
    assert strips.texts["fault"] == [""] * 6


def test_the_same_runway_again_gets_a_key_of_its_own(read: Read) -> None:
    strips = read("Strip,Runway,Length\nA,09/27,600\nA,09/27,700\nA,09/27,800\nA 09/27#2,,5\n,18/36,600\n")
    assert strips.texts["pair"][::2] == ["A 09/27", "A 09/27#2", "A 09/27#3", "A 09/27#2 A/B", "row 6 18/36"]
    assert [doubt.row for doubt in strips.doubts if doubt.what == "strip not named"] == [6]


def test_the_condition_column_and_the_surface(read: Read) -> None:
    strips = read("Strip,Length,Surface,Condition\nA,600,soft grass,dry\nB,600,turf,WET\nC,600,turf,frosty\n")
    assert strips.texts["condition"][::2] == ["soft", "wet", "frosty"]


def test_headers_that_need_a_word_to_the_user(read: Read) -> None:
    strips = read("Title\nStrip,Length,Displaced threshold of 09\nA,600,50\n")
    told = [(doubt.row, doubt.what, doubt.reason) for doubt in strips.doubts if not doubt.strip]
    assert told == [
        (2, "column not understood", 'the column "Displaced threshold of 09" is carried but not used'),
        (2, "unit not named", 'the column "Length" has no unit: bare numbers are in m'),
    ]
    assert strips.carried["Displaced threshold of 09"] == ["50", "50"]


def test_carried_values_stay_as_they_were_read(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    assert book.active is not None
    day = datetime.date(2024, 9, 27)
    book.active.append(["Strip", "Length", "Fuel", "Opened", "Tower", "Remark", "Survey date"])
    book.active.append(["A", 600, 12.5, day, True, "  two  spaces ", day])
    book.save(tmp_path / "a.xlsx")
    strips = read_list(tmp_path / "a.xlsx")
    assert {key: values[0] for key, values in strips.carried.items()} == {"Fuel": 12.5, "Opened": day, "Tower": True}
    assert strips.texts["notes"][0] == "two  spaces"
    assert strips.texts["survey_date"] == ["2024-09-27"] * 2


def test_every_kind_of_file_gives_the_same(tmp_path: Path) -> None:
    rows: list[list[str | float]] = [
        ["Strip", "Runway", "Length [m]", "Slope [%]", "Surface"],
        ["A", "09/27", 600.0, 4.5, "turf"],
        ["B", "4", 700.5, -2.0, "gravel"],
    ]
    write_ods(tmp_path / "a.ods", rows)
    write_xls(tmp_path / "a.xls", rows)
    book = openpyxl.Workbook()
    assert book.active is not None
    for row in rows:
        book.active.append(row)
    book.save(tmp_path / "a.xlsx")
    (tmp_path / "a.csv").write_text("\n".join(",".join(str(cell) for cell in row) for row in rows))
    first, *others = (read_list(tmp_path / f"a.{kind}") for kind in ("csv", "xlsx", "ods", "xls"))
    assert first.texts["direction"] == ["09", "27", "04", "22"]
    for other in others:
        assert other.texts == first.texts
        for key, values in first.numbers.items():
            assert other.numbers[key].tolist() == pytest.approx(values.tolist(), rel=1e-12, nan_ok=True), key
