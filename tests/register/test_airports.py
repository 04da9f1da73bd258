"""The airports file. The airfields are invented."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from stripcheck.errors import InputError
from stripcheck.register.airports import Airport, read_airports

TEXT = """id,ident,type,name,elevation_ft,other
1,XA1,small_airport,"Otter Bend, North",1000,
2,XA2,closed,Crag,,
3,XA3,heliport,Pad,90000,
4,XA4,small_airport,Not wanted,5,
5,XA5,small_airport
"""


def test_airfields_that_are_wanted(tmp_path: Path) -> None:
    (tmp_path / "airports.csv").write_text(TEXT)
    found = read_airports(tmp_path / "airports.csv", {"XA1", "XA2", "XA3", "XA5"})
    assert found["XA1"] == Airport("Otter Bend, North", 304.8, "small_airport")
    assert found["XA2"].type == "closed" and math.isnan(found["XA2"].elevation)
    assert math.isnan(found["XA3"].elevation)
    assert sorted(found) == ["XA1", "XA2", "XA3"]


def test_a_file_of_something_else(tmp_path: Path) -> None:
    (tmp_path / "airports.csv").write_text("ident,name\nXA1,Otter Bend\n")
    with pytest.raises(InputError, match=r'airports\.csv: there is no column "elevation_ft"'):
        read_airports(tmp_path / "airports.csv", {"XA1"})
