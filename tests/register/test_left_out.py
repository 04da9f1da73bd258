"""What is no strip for an aeroplane on wheels. The strips are invented."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from stripcheck.register import Directions

Read = Callable[..., Directions]


@pytest.mark.parametrize(
    ("row", "what"),
    [
        ("A,09/27,600,turf,yes,20", "closed"),
        ("A,09/27,600,water,1,20", "closed"),
        ("A,09/27,600,WATER,no,20", "water"),
        ("A,H1,20,concrete,no,20", "helipad"),
        ("A,09/27,600,rooftop,,20", "helipad"),
        ("A,,24,concrete,,22", "helipad"),
    ],
)
def test_left_out_once_with_its_kind(read: Read, row: str, what: str) -> None:
    strips = read(f"Strip,Runway,Length,Surface,Closed,Width\n{row}\nB,09/27,600,turf,,20\n")
    assert [(left.row, left.strip, left.what) for left in strips.left_out] == [(2, "A", what)]
    assert (strips.rows_read, strips.n) == (2, 2)
    assert strips.texts["strip"] == ["B", "B"]


@pytest.mark.parametrize("row", ["A,09/27,55,turf,,50", "A,,300,turf,,300", "A,,55,turf,,20"])
def test_kept_however_odd(read: Read, row: str) -> None:
    strips = read(f"Strip,Runway,Length,Surface,Closed,Width\n{row}\n")
    assert strips.left_out == [] and strips.n == 2


def test_a_pad_with_an_odd_length_does_not_stop_a_strict_reading(read: Read) -> None:
    assert len(read("Strip,Runway,Length\nA,H1,12\n", strict=True).left_out) == 1


def test_types_of_the_airports_file(read: Read, tmp_path: Path) -> None:
    airports = "ident,type,name,elevation_ft\nX1,closed,One,5\nX2,heliport,Two,5\nX3,small_airport,Three,1000\n"
    (tmp_path / "airports.csv").write_text(airports)
    rows = "airport_ident,length_ft,le_ident,he_ident\nX1,2000,09,27\nX2,2000,09,27\nX3,2000,09,27\nX4,2000,09,27\n"
    strips = read(rows)
    assert [(left.strip, left.what) for left in strips.left_out] == [("X1", "closed"), ("X2", "helipad")]
    assert strips.texts["name"] == ["Three", "Three", "", ""]
    assert strips.numbers["elevation_field"][0] == pytest.approx(304.8, rel=1e-12)
