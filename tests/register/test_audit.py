"""What an audit finds: each kind has a list that shows it and one that just does not. The strips are invented."""

from __future__ import annotations

import csv
import datetime
import math
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck.errors import InputError
from stripcheck.register import audit_kinds as kinds
from stripcheck.register.audit import Audit, Finding, audit_list
from stripcheck.register.audit_duplicates import likeness, plain_name
from stripcheck.register.audit_rows import survey_dates

TODAY = datetime.date(2026, 1, 1)
LATITUDE, LONGITUDE = 47.12345, 11.54321
# [m] metres in a degree of longitude there; source: radius of a parallel of the WGS 84 ellipsoid, written anew
DEGREE = math.radians(6_378_137.0 * math.cos(math.radians(LATITUDE))) / math.sqrt(
    1.0 - 0.00669438 * math.sin(math.radians(LATITUDE)) ** 2
)


def east(metres: float) -> str:
    """Longitude of a point that lies east of end 1."""
    return f"{LONGITUDE + metres / DEGREE:.7f}"


CLEAN = {
    "Strip": "XOTB", "Name": "Otter Bend", "Runway": "09/27", "Heading end 1 [°]": "90", "Heading end 2 [°]": "270",
    "Length [m]": "600", "TORA end 1 [m]": "", "LDA end 1 [m]": "", "Width [m]": "20", "Surface": "grass", "Condition": "",
    "Elevation [ft]": "1500", "Elevation end 1 [ft]": "1500", "Elevation end 2 [ft]": "1500", "Slope [%]": "0",
    "Greatest local slope [%]": "", "Slope profile": "", "Displaced threshold end 1 [m]": "",
    "Latitude end 1 [°]": str(LATITUDE), "Longitude end 1 [°]": str(LONGITUDE),
    "Latitude end 2 [°]": str(LATITUDE), "Longitude end 2 [°]": east(600.0),
    "Obstacle height end 2 [ft]": "", "Obstacle distance end 2 [m]": "", "Temperature [°C]": "", "QNH [hPa]": "",
    "Wind from [°]": "", "Wind speed [kt]": "", "Land on": "", "Leave by": "", "One-way": "", "Survey date": "2025-04-30",
    "Notes": "Sheep in the morning", "Closed": "",
}  # fmt: skip
NOWHERE = {header: "" for header in CLEAN if header.startswith(("Latitude", "Longitude"))}
NO_ENDS = {"Elevation end 1 [ft]": "", "Elevation end 2 [ft]": ""}
NO_HEADINGS = {"Heading end 1 [°]": "", "Heading end 2 [°]": ""}
AWAY = {  # a strip of its own, 5 km east
    "Strip": "XGRB", "Name": "Grebe Pond", "Longitude end 1 [°]": east(5000.0), "Longitude end 2 [°]": east(5600.0),
}  # fmt: skip


def write(folder: Path, *changes: dict[str, str]) -> Path:
    path = folder / "strips.csv"
    with path.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.DictWriter(stream, list(CLEAN))
        writer.writeheader()
        writer.writerows({**CLEAN, **change} for change in changes or ({},))
    return path


def audit(folder: Path, *changes: dict[str, str], **options: Any) -> Audit:
    return audit_list(write(folder, *changes), today=TODAY, **options)


# kind -> what is changed in the clean strip to show it, and what just does not
PAIRS: dict[kinds.Kind, tuple[dict[str, str], dict[str, str]]] = {
    kinds.BAD_VALUE: ({"Length [m]": "89"}, {"Length [m]": "90"}),
    kinds.NO_LENGTH: ({"Length [m]": ""}, {"Length [m]": "", "TORA end 1 [m]": "600"}),
    kinds.NO_ELEVATION: ({"Elevation [ft]": "", **NO_ENDS}, {"Elevation [ft]": ""}),
    kinds.NO_SURFACE: ({"Surface": "unknown"}, {"Surface": "turf"}),
    kinds.STRANGE_SURFACE: ({"Surface": "Clinker"}, {"Surface": "Cinders"}),
    kinds.STRANGE_CONDITION: ({"Condition": "frosty"}, {"Condition": "boggy"}),
    kinds.NO_SLOPE: ({"Slope [%]": "", "Elevation end 2 [ft]": ""}, {"Slope [%]": ""}),
    kinds.HALF_OBSTACLE: ({"Obstacle height end 2 [ft]": "60"}, {"Obstacle height end 2 [ft]": "0"}),
    kinds.DISPLACED_BEYOND: ({"Displaced threshold end 1 [m]": "600"}, {"Displaced threshold end 1 [m]": "599"}),
    kinds.ENDS_TOO_STEEP: ({"Elevation end 2 [ft]": "909"}, {"Elevation end 2 [ft]": "910"}),  # 30 % of 600 m is 590.6 ft
    kinds.PROFILE_DISAGREES: ({"Slope profile": "0:0, 600:6.1"}, {"Slope profile": "0:0, 600:5.9"}),
    kinds.ONE_WAY_UNTOLD: ({"One-way": "yes", "Land on": "09"}, {"One-way": "yes", "Land on": "09", "Leave by": "27"}),
    kinds.WAY_UNKNOWN: ({"Land on": "18"}, {"Land on": "9"}),
    # 5 % of the length, and 15.7 m of rounding: four decimals of a degree
    kinds.LENGTH_LONGER: ({"Length [m]": "650"}, {"Length [m]": "646"}),
    kinds.LENGTH_SHORTER: ({"Length [m]": "555"}, {"Length [m]": "558"}),
    # 5 degrees, and 1.5 of rounding over 600 m
    kinds.HEADING_AGAINST_ENDS: ({"Heading end 1 [°]": "97"}, {"Heading end 1 [°]": "96"}),
    kinds.HEADING_AGAINST_NAME: ({"Heading end 1 [°]": "136"}, {"Heading end 1 [°]": "135"}),
    kinds.HEADINGS_NOT_OPPOSITE: ({"Heading end 2 [°]": "281"}, {"Heading end 2 [°]": "279"}),
    kinds.NAMES_NOT_OPPOSITE: ({"Runway": "09/28"}, {"Runway": "9/27"}),
    kinds.NO_HEADING: ({**NO_HEADINGS, **NOWHERE, "Runway": "A/B"}, {**NO_HEADINGS, "Runway": "A/B"}),
    kinds.HEADING_FROM_NAME: ({**NO_HEADINGS, **NOWHERE}, NO_HEADINGS),
    kinds.SLOPE_AGAINST_ENDS: ({"Slope [%]": "1.1"}, {"Slope [%]": "0.9"}),
    kinds.LOCAL_BELOW_MEAN: ({"Slope [%]": "0.9", "Greatest local slope [%]": "0.6"},
                             {"Slope [%]": "0.9", "Greatest local slope [%]": "0.8"}),
    kinds.ABOVE_FIELD: ({"Elevation end 1 [ft]": "1517"}, {"Elevation end 1 [ft]": "1516"}),  # 5 m are 16.4 ft
    kinds.BELOW_FIELD: ({"Elevation end 1 [ft]": "1342"}, {"Elevation end 1 [ft]": "1343"}),  # 48 m are 157.5 ft
    kinds.ZERO_ELEVATION: ({"Elevation [ft]": "50", "Elevation end 1 [ft]": "0"},
                           {"Elevation [ft]": "49", "Elevation end 1 [ft]": "0"}),
    kinds.TORA_TOO_LONG: ({"TORA end 1 [m]": "601"}, {"TORA end 1 [m]": "600"}),
    kinds.LDA_TOO_LONG: ({"Displaced threshold end 1 [m]": "100", "LDA end 1 [m]": "501"},
                         {"Displaced threshold end 1 [m]": "100", "LDA end 1 [m]": "500"}),
    kinds.OLD_SURVEY: ({"Survey date": "2020-12-30"}, {"Survey date": "2021-01-01"}),
    kinds.FUTURE_SURVEY: ({"Survey date": "2026-01-02"}, {"Survey date": "2026-01-01"}),
    kinds.STRANGE_SURVEY: ({"Survey date": "last spring"}, {"Survey date": "30.4.2025"}),
    kinds.NO_SURVEY: ({"Survey date": "tbd"}, {"Survey date": "2025"}),
    kinds.ONE_WAY_IN_NOTES: ({"Notes": "One-way, they say"}, {"Notes": "One-way", "Land on": "09", "Leave by": "27"}),
    kinds.CLOSED_IN_NOTES: ({"Notes": "Closed in winter"}, {"Notes": "Enclosed by trees"}),
    kinds.DOWNHILL_LANDING: ({**NO_ENDS, "Land on": "09", "Slope [%]": "-2.1"},
                             {**NO_ENDS, "Land on": "09", "Slope [%]": "-1.9"}),
    kinds.SAME_WAY: ({"Land on": "09", "Leave by": "09"}, {"Land on": "09", "Leave by": "27"}),
    kinds.HALF_WIND: ({"Wind speed [kt]": "8"}, {"Wind speed [kt]": "0"}),
    kinds.ODD_TEMPERATURE: ({"Temperature [°C]": "47.1"}, {"Temperature [°C]": "47.0"}),  # standard: 12.03 °C at 1,500 ft
    kinds.ODD_QNH: ({"QNH [hPa]": "949"}, {"QNH [hPa]": "951"}),
    kinds.HALF_COORDINATES: ({"Latitude end 2 [°]": ""}, NOWHERE),
    kinds.ENDS_IN_ONE_PLACE: ({"Longitude end 2 [°]": east(4.5)}, {"Longitude end 2 [°]": east(5.5)}),
    kinds.IMPOSSIBLE_ENDS: ({"Longitude end 2 [°]": east(6010.0)}, {"Longitude end 2 [°]": east(5990.0)}),
    kinds.USABLE_SHORT: ({"TORA end 1 [m]": "299"}, {"TORA end 1 [m]": "300"}),
    kinds.FAR_DISPLACED: ({"Displaced threshold end 1 [m]": "301"}, {"Displaced threshold end 1 [m]": "300"}),
    kinds.STEEP: ({**NO_ENDS, "Slope [%]": "-15.1"}, {**NO_ENDS, "Slope [%]": "-14.9"}),
    kinds.NO_WIDTH: ({"Width [m]": "0"}, {"Width [m]": "30"}),
    kinds.ODD_WIDTH: ({"Width [m]": "4.9"}, {"Width [m]": "5"}),
    kinds.NAMELESS: ({"Strip": "", "Name": ""}, {"Strip": ""}),
}  # fmt: skip

# kind -> rows after the clean one that show it, and that just do not
ROWS: dict[kinds.Kind, tuple[dict[str, str], dict[str, str]]] = {
    kinds.TWICE: ({"Runway": "27/09", "Heading end 1 [°]": "270", "Heading end 2 [°]": "90"}, {"Runway": "18/36"}),
    kinds.TWO_NAMES: ({"Runway": "10/28", "Latitude end 1 [°]": "47.12395", "Latitude end 2 [°]": "47.12395"},  # 55.6 m north
                      {"Runway": "10/28", "Latitude end 1 [°]": "47.12405", "Latitude end 2 [°]": "47.12405"}),
    kinds.TWO_STRIPS: ({"Runway": "18/36", "Name": "Grebe Pond"}, {"Runway": "18/36", "Name": "Otterbend Strip"}),
    kinds.TWO_IDENTIFIERS: ({"Strip": "XGRB", "Name": "Grebe Pond"}, AWAY),
    kinds.NEARLY_TWICE: ({**AWAY, "Name": "Otterbend Airstrip", "Longitude end 1 [°]": east(2900.0),
                          "Longitude end 2 [°]": east(3500.0)}, {**AWAY, "Name": "Otterbend Airstrip"}),
}  # fmt: skip
ELSEWHERE = {kinds.TOO_WIDE, kinds.FIELD_AGAINST_AIRPORTS, kinds.FAR_FROM_FIELD, kinds.NOT_IN_AIRPORTS, kinds.UNIT_NOT_NAMED,
             kinds.NOT_UNDERSTOOD}  # fmt: skip
IN_A_WORKBOOK = {kinds.FILLED_FAULT, kinds.ROWS_DISAGREE}  # tests/sheet/test_audit_book.py


def named(found: Audit, kind: kinds.Kind) -> list[Finding]:
    return [finding for finding in found.findings if finding.kind is kind]


def test_every_kind_is_tried() -> None:
    assert {*PAIRS, *ROWS} | ELSEWHERE | IN_A_WORKBOOK == set(kinds.KINDS)
    assert len({kind.name for kind in kinds.KINDS}) == len(kinds.KINDS)


def test_a_clean_list_has_no_findings(tmp_path: Path) -> None:
    assert audit(tmp_path, {}, AWAY).findings == []


@pytest.mark.parametrize("kind", PAIRS, ids=lambda kind: kind.name)
def test_a_kind_is_found_where_it_is_and_not_beside_it(tmp_path: Path, kind: kinds.Kind) -> None:
    shows, just_not = PAIRS[kind]
    (finding,) = named(audit(tmp_path, AWAY, shows), kind)
    assert finding.row == 3
    assert finding.what and finding.fix
    assert not named(audit(tmp_path, AWAY, just_not), kind)


@pytest.mark.parametrize("kind", ROWS, ids=lambda kind: kind.name)
def test_rows_against_each_other(tmp_path: Path, kind: kinds.Kind) -> None:
    shows, just_not = ROWS[kind]
    (finding,) = named(audit(tmp_path, {}, shows), kind)
    assert finding.row == 3 and "row 2" in finding.what
    assert not named(audit(tmp_path, {}, just_not), kind)


@pytest.mark.parametrize(
    ("change", "column", "place", "what", "fix"),
    [
        ({"Length [m]": "1969"}, "Length [m]", 6, "1,969 m, but by their coordinates the ends lie 600 m apart",
         "metres and feet"),
        ({"Slope [%]": "-3", "Elevation end 2 [ft]": "1559"}, "Slope [%]", 15,
         "-3.0 %, but the elevations of the ends make it 3.0 %", "told from the other end"),
        ({"Heading end 1 [°]": "270", "Heading end 2 [°]": "90"}, "Heading end 1 [°]", 4, "270°, but the bearing",
         "090° at this end"),
        ({"Runway": "27/09", "Heading end 1 [°]": "270", "Heading end 2 [°]": "90"}, "Heading end 1 [°]", 4, "the bearing",
         "exchange the coordinates"),
        ({"Longitude end 2 [°]": east(-520.0), "Latitude end 2 [°]": "47.12615", "Runway": "30/12", "Heading end 1 [°]": "320",
          "Heading end 2 [°]": "120"}, "Heading end 1 [°]", 4, "320°, but the bearing", "300°"),
        ({"Elevation end 2 [ft]": "457"}, "Elevation end 2 [ft]", 14, "end 2 is at 457 ft, the field at 1,500 ft",
         "metres and feet"),
        ({"Temperature [°C]": "59"}, "Temperature [°C]", 25, "59 °C is 47 K off", "15 °C, if the number is in °F"),
        ({"QNH [hPa]": "900", "Elevation [ft]": "3000", **NO_ENDS}, "QNH [hPa]", 26, "a QNH of 900 hPa", "(QFE)"),
        ({"Width [m]": "700"}, "Width [m]", 9, '"700"', "correct or clear"),
        ({"Width [m]": "400", "Length [m]": "200"}, "Width [m]", 9, "400 m wide and 200 m long", "may be exchanged"),
    ],
)  # fmt: skip
def test_what_is_said_and_where(tmp_path: Path, change: dict[str, str], column: str, place: int, what: str, fix: str) -> None:
    found = [finding for finding in audit(tmp_path, change).findings if finding.column == column]
    assert any(what in finding.what and fix in finding.fix and finding.place == place for finding in found), found


def test_a_heading_that_is_the_name_times_ten(tmp_path: Path) -> None:
    change = {"Longitude end 2 [°]": east(590.0), "Latitude end 2 [°]": "47.12245"}  # bearing 101
    (finding,) = named(audit(tmp_path, change), kinds.HEADING_AGAINST_ENDS)
    assert finding.what == "the heading is 090°, but the bearing between the coordinates is 101°"
    assert finding.fix.endswith("looks like the runway's name times ten, which is magnetic")


def test_coarse_coordinates_prove_nothing(tmp_path: Path) -> None:
    change = {"Latitude end 1 [°]": "47.12", "Latitude end 2 [°]": "47.12", "Longitude end 1 [°]": "11.54",
              "Longitude end 2 [°]": "11.55", "Heading end 1 [°]": "110", "Heading end 2 [°]": "290"}  # fmt: skip
    assert not {kinds.LENGTH_SHORTER, kinds.HEADING_AGAINST_ENDS} & {kind for kind, _ in audit(tmp_path, change).counts}


def test_coordinates_of_displaced_thresholds_are_no_mistake(tmp_path: Path) -> None:
    change = {"Length [m]": "700", "Displaced threshold end 1 [m]": "100"}
    assert not named(audit(tmp_path, change), kinds.LENGTH_LONGER)
    assert named(audit(tmp_path, {**change, "Displaced threshold end 1 [m]": ""}), kinds.LENGTH_LONGER)


def test_parallel_runways_are_two(tmp_path: Path) -> None:
    """50 m apart: two strips side by side when they are named so, one renamed strip when not."""
    north = {"Latitude end 1 [°]": "47.12390", "Latitude end 2 [°]": "47.12390"}
    left, right = {"Runway": "09R/27L"}, {"Runway": "09L/27R", **north}
    assert not named(audit(tmp_path, left, right), kinds.TWO_NAMES)
    assert named(audit(tmp_path, left, {**left, "Runway": "09L/27R"}), kinds.TWO_NAMES)
    assert named(audit(tmp_path, {}, {"Runway": "10/28", **north}), kinds.TWO_NAMES)


def test_nearly_the_same_name_without_places(tmp_path: Path) -> None:
    one = {**NOWHERE}
    other = {**NOWHERE, "Strip": "XOBD", "Name": "Otterbend"}
    assert named(audit(tmp_path, one, other), kinds.NEARLY_TWICE)
    assert not named(audit(tmp_path, one, {**other, "Runway": "18/36"}), kinds.NEARLY_TWICE)
    assert not named(audit(tmp_path, one, {**other, "Length [m]": "700"}), kinds.NEARLY_TWICE)
    assert not named(audit(tmp_path, one, {**other, "Name": "North Otter Bend"}), kinds.NEARLY_TWICE)


def test_two_runways_without_names_are_not_one_listed_twice(tmp_path: Path) -> None:
    bare = {"Runway": "", **NO_HEADINGS, **NOWHERE}
    assert not named(audit(tmp_path, bare, {**bare, "Length [m]": "700"}), kinds.TWICE)
    assert named(audit(tmp_path, bare, bare), kinds.TWICE)


def test_places_of_one_identifier_far_apart(tmp_path: Path) -> None:
    far = {"Runway": "18/36", "Longitude end 1 [°]": east(16_000.0), "Longitude end 2 [°]": east(16_600.0)}
    (finding,) = named(audit(tmp_path, {}, far), kinds.TWO_STRIPS)
    assert "lies 16 km away" in finding.what


AIRPORTS = "ident,type,name,elevation_ft,latitude_deg,longitude_deg\nXOTB,small_airport,Otter Bend,{},{},{}\n"


@pytest.mark.parametrize(
    ("kind", "shows", "just_not"),
    [
        (kinds.FIELD_AGAINST_AIRPORTS, (1550, LATITUDE, LONGITUDE), (1549, LATITUDE, LONGITUDE)),  # 15 m are 49.2 ft
        (kinds.FAR_FROM_FIELD, (1500, LATITUDE, east(-9500.0)), (1500, LATITUDE, east(-9300.0))),  # end 2 lies 600 m further
    ],
)
def test_against_the_airports_file(tmp_path: Path, kind: kinds.Kind, shows: Any, just_not: Any) -> None:
    file = tmp_path / "places.csv"
    file.write_text(AIRPORTS.format(*shows))
    assert [finding.row for finding in named(audit(tmp_path, airports=file), kind)] == [2]
    file.write_text(AIRPORTS.format(*just_not))
    assert not named(audit(tmp_path, airports=file), kind)


@pytest.mark.parametrize(
    ("latitude", "longitude", "slip"),
    [(LATITUDE, -LONGITUDE, "sign of the longitude"), (-LATITUDE, LONGITUDE, "sign of the latitude"),
     (LONGITUDE, LATITUDE, "exchanged"), (20.0, 30.0, "check the coordinates")],
)  # fmt: skip
def test_the_slip_that_took_a_strip_away(tmp_path: Path, latitude: float, longitude: float, slip: str) -> None:
    file = tmp_path / "places.csv"
    file.write_text(AIRPORTS.format(1500, latitude, longitude))
    (finding,) = named(audit(tmp_path, airports=file), kinds.FAR_FROM_FIELD)
    assert finding.what.startswith("both ends lie") and slip in finding.fix


def test_a_strip_that_the_airports_file_does_not_know(tmp_path: Path) -> None:
    file = tmp_path / "places.csv"
    file.write_text(AIRPORTS.format(1500, LATITUDE, LONGITUDE))
    found = audit(tmp_path, {}, AWAY, airports=file)
    assert [finding.row for finding in named(found, kinds.NOT_IN_AIRPORTS)] == [3]


def test_headers_and_wide_rows(tmp_path: Path) -> None:
    path = tmp_path / "strips.csv"
    path.write_text("A list of strips\nStrip,,Runway,Length,Displaced threshold of 09,Surface\nXA,,09/27,600,,grass,,more\n")
    found = audit_list(path, today=TODAY)
    places = {finding.kind: (finding.row, finding.place, finding.column) for finding in found.findings}
    assert places[kinds.UNIT_NOT_NAMED] == (2, 4, "Length")
    assert places[kinds.NOT_UNDERSTOOD] == (2, 5, "Displaced threshold of 09")
    assert places[kinds.TOO_WIDE] == (3, 0, "")
    assert places[kinds.NO_SLOPE] == (3, 0, "")
    path.write_text("Strip,Runway,Length [m],Displaced threshold end 1 [m],Surface\nXA,09/27,600,,grass\n")
    kept = {kind for kind, _ in audit_list(path, today=TODAY).counts}
    assert not kept & {kinds.UNIT_NOT_NAMED, kinds.NOT_UNDERSTOOD, kinds.TOO_WIDE}


def test_what_is_left_out_is_not_audited(tmp_path: Path) -> None:
    found = audit(tmp_path, {"Closed": "yes", "Length [m]": "", "Surface": ""}, {"Surface": "water"}, AWAY)
    assert found.findings == []
    assert (found.rows_read, found.left_out) == (3, 2)


def test_order_counts_and_worst_rows(tmp_path: Path) -> None:
    found = audit(tmp_path, {"Width [m]": ""}, {**AWAY, "QNH [hPa]": "949", "Surface": "Clinker"},
                  {**AWAY, "Strip": "XTRN", "Name": "Tern Hollow", "Runway": "18/36", **NOWHERE, **NO_HEADINGS,
                   "Surface": ""})  # fmt: skip
    order = [kinds.SEVERITIES.index(finding.kind.severity) for finding in found.findings]
    assert order == sorted(order)
    assert [(kind, count) for kind, count in found.counts if kind.severity != kinds.LOOK] == [
        (kinds.NO_SURFACE, 1), (kinds.STRANGE_SURFACE, 1), (kinds.ODD_QNH, 1)]  # fmt: skip
    # a word that is wrong comes before one that is only missing
    assert [findings[0].row for findings in found.worst_rows] == [3, 4, 2]


@pytest.mark.parametrize("limit", [0.0, -1.0, 101.0, math.nan])
def test_a_limit_that_is_none(tmp_path: Path, limit: float) -> None:
    with pytest.raises(InputError, match="survey age"):
        audit(tmp_path, survey_age=limit)


def test_the_limit_of_the_survey_is_the_user_s(tmp_path: Path) -> None:
    old = {"Survey date": "2024-12-30"}
    assert named(audit(tmp_path, old, survey_age=1.0), kinds.OLD_SURVEY)
    assert not named(audit(tmp_path, old, survey_age=1.1), kinds.OLD_SURVEY)


@pytest.mark.parametrize(
    ("text", "dates"),
    [
        ("2024-10-20", ["2024-10-20"]),
        ("2024-10-20 12:30:00", ["2024-10-20"]),
        ("20.10.2024", ["2024-10-20"]),
        ("3/4/2024", ["2024-04-03", "2024-03-04"]),
        ("12/2024", ["2024-12-31"]),
        ("2024-02", ["2024-02-29"]),
        ("2024", ["2024-12-31"]),
        ("13/2024", []),
        ("9999-12", []),
        ("40.40.2024", []),
        ("May", []),
    ],
)
def test_dates_of_surveys(text: str, dates: list[str]) -> None:
    assert [date.isoformat() for date in survey_dates(text)] == dates


@given(st.text(max_size=12))
def test_no_text_breaks_the_reading_of_dates(text: str) -> None:
    assert all(isinstance(date, datetime.date) for date in survey_dates(text))


@given(st.text(max_size=20), st.text(max_size=20))
def test_likeness_is_a_share(one: str, other: str) -> None:
    one, other = plain_name(one), plain_name(other)
    assert 0.0 <= likeness(one, other) <= 1.0
    assert likeness(one, one) == 1.0


words = st.sampled_from(
    ["", "-", "0", "1", "-1", "90", "600", "1e9", "nan", "=1+1", "09/27", "09", "yes", "x", "2025-01-01", "60 ft"]
)


@given(st.lists(st.dictionaries(st.sampled_from(list(CLEAN)), words, max_size=8), min_size=1, max_size=6))
def test_whatever_stands_in_the_cells(tmp_path_factory: pytest.TempPathFactory, rows: list[dict[str, str]]) -> None:
    found = audit(tmp_path_factory.mktemp("any"), *rows)
    assert all(finding.what and finding.kind in kinds.KINDS and finding.row >= 1 for finding in found.findings)
    assert sum(count for _, count in found.counts) == len(found.findings) == sum(map(len, found.worst_rows))
