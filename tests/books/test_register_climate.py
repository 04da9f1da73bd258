"""Climate tables: read from text files with columns in any order, or refused with a sentence."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from stripcheck.books.register_climate import read_climate
from stripcheck.errors import InputError

MONTHS = ("Jan", "February", "mar", "4", "05", "June", "Jul", "AUG", "sep", "Oct.", "November", "12")


def _table(tmp_path: Path, header: str, cells: list[str]) -> Path:
    path = tmp_path / "climate.csv"
    path.write_text(
        "\n".join([header, *(f"{month}{cell}" for month, cell in zip(MONTHS, cells, strict=True))]) + "\n", encoding="utf-8"
    )
    return path


def test_months_temperatures_ground_and_pressure_are_read(tmp_path: Path) -> None:
    climate = read_climate(_table(tmp_path, "Month;Ground;Temp (°F);QNH;Taken at [m]", ["; Wet;50;1010;700"] * 12))
    assert climate.temperatures == pytest.approx([283.15] * 12)
    assert climate.pressures == (101000.0,) * 12
    assert climate.grounds == ("wet",) * 12
    assert climate.taken_at == pytest.approx(700.0)
    assert climate.told == ()


def test_what_is_taken_for_granted_is_told(tmp_path: Path) -> None:
    climate = read_climate(_table(tmp_path, "Month,Temperature [°C]", [f",{number}" for number in range(12)]))
    assert climate.temperatures[11] == pytest.approx(284.15)
    assert climate.grounds == ("dry",) * 12
    assert math.isnan(climate.taken_at)
    assert len(climate.told) == 3


def test_a_month_without_temperature_stays_unknown(tmp_path: Path) -> None:
    climate = read_climate(_table(tmp_path, "Month,Temperature,Ground", [",,dry", *[",12,"] * 11]))
    assert math.isnan(climate.temperatures[0])
    assert climate.grounds[1] == ""


@pytest.mark.parametrize(
    ("header", "cells", "said"),
    [
        ("Month,QNH", [",1013"] * 12, 'a header such as "Temperature'),
        ("When,Temperature", [",12"] * 12, 'a header such as "Month"'),
        ("Month,Temperature", [",warm"] * 12, "is not a number"),
        ("Month,Temperature", [",120"] * 12, "not credible"),
        ("Month,Temperature,QNH", [",12,500"] * 12, "neither a pressure"),
        ("Month,Temperature,Ground", [",12,icy"] * 12, 'ground "icy"'),
        ("Month,Temperature,Elevation", [*[",12,700"] * 11, ",12,800"], "several elevations"),
    ],
)
def test_bad_tables_are_refused(tmp_path: Path, header: str, cells: list[str], said: str) -> None:
    with pytest.raises(InputError, match=said):
        read_climate(_table(tmp_path, header, cells))


@pytest.mark.parametrize(
    ("lines", "said"), [(["Jan,12"], "Feb, Mar"), (["Jan,12", "Jan,13"], "comes twice"), (["Smarch,12"], "is no month")]
)
def test_months_that_are_missing_or_strange_are_told(tmp_path: Path, lines: list[str], said: str) -> None:
    path = tmp_path / "climate.csv"
    path.write_text("\n".join(["Month,Temperature", *lines]) + "\n")
    with pytest.raises(InputError, match=said):
        read_climate(path)
