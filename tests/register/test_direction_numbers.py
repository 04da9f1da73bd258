"""Numbers of each direction. The strips are invented; the expected numbers are arithmetic on the definitions."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from stripcheck.register import Directions

Read = Callable[..., Directions]


def of(strips: Directions, key: str) -> list[float]:
    return [float(value) for value in strips.numbers[key]]


def kinds(strips: Directions) -> list[str]:
    return [doubt.what for doubt in strips.doubts]


def test_lengths(read: Read) -> None:
    strips = read(
        "Strip,Runway,Length,Displaced threshold end 1,Displaced threshold end 2,Usable length,TORA end 1,LDA end 2\n"
        "A,09/27,1000,100,250,,,\n"
        "B,09/27,1000,100,,700,,\n"
        "C,09/27,1000,,,700,800,600\n"
        "D,09/27,1000,,300,,1100,900\n"
        "E,09/27,1000,,,950,,\n"
        "F,09/27,,,,,500,450\n"
        "G,09/27,,100,,700,,\n"
    )
    nan = math.nan
    assert of(strips, "tora") == pytest.approx(
        [1000, 1000, 700, 700, 800, 700, 1000, 1000, 950, 950, 500, nan, 700, 700], rel=1e-12, nan_ok=True
    )
    assert of(strips, "lda") == pytest.approx(
        [900, 750, 700, 700, 700, 600, 1000, 700, 950, 950, nan, 450, nan, 700], rel=1e-12, nan_ok=True
    )
    too_long = [doubt.row for doubt in strips.doubts if doubt.what.endswith("too long")]
    assert too_long == [5, 5]  # D: both usable lengths are more than there is


def test_slope_and_elevations_turn_round(read: Read) -> None:
    strips = read(
        "Strip,Runway,Length,Slope,Local slope,le_elevation_ft,he_elevation_ft,Elevation\nA,09/27,600,4,6,100,200,150\n"
    )
    assert of(strips, "slope_given") == pytest.approx([0.04, -0.04], rel=1e-12)
    assert of(strips, "local_slope") == pytest.approx([0.06, 0.06], rel=1e-12)
    assert of(strips, "elevation_start") == pytest.approx([30.48, 60.96], rel=1e-12)
    assert of(strips, "elevation_end") == pytest.approx([60.96, 30.48], rel=1e-12)
    assert of(strips, "elevation_field") == pytest.approx([45.72, 45.72], rel=1e-12)


def test_end_elevations_alone_give_no_slope(read: Read) -> None:
    strips = read("Strip,Runway,Length,le_elevation_ft,he_elevation_ft\nA,09/27,600,100,200\n")
    assert all(math.isnan(slope) for slope in of(strips, "slope_given"))


def test_obstacles_of_each_end(read: Read) -> None:
    strips = read(
        "Strip,Runway,Length,Obstacle height end 1,Obstacle distance end 1,"
        "Obstacle height end 2,Obstacle distance end 2\n"
        "A,09/27,600,10,100,20,200\nB,09/27,600,,,20,200\nC,09/27,600,0,,0,300\n"
    )
    nan = math.nan
    for key, expected in (
        ("obstacle_height", [20, 10, 20, nan, nan, nan]),
        ("obstacle_distance", [200, 100, 200, nan, nan, nan]),
        ("approach_obstacle_height", [10, 20, nan, 20, nan, nan]),
        ("approach_obstacle_distance", [100, 200, nan, 200, nan, nan]),
    ):
        assert of(strips, key) == pytest.approx(expected, rel=1e-12, nan_ok=True), key
    assert strips.texts["fault"] == [""] * 6


def test_an_obstacle_of_the_whole_strip_stands_at_both_ends(read: Read) -> None:
    strips = read("Strip,Runway,Length,Obstacle height,Obstacle distance\nA,09/27,600,50 ft,100\n")
    for key in ("obstacle_height", "approach_obstacle_height"):
        assert of(strips, key) == pytest.approx([15.24, 15.24], rel=1e-12)


@pytest.mark.parametrize(
    ("headers", "row", "degrees", "doubts"),
    [
        ("Runway,Heading", "09/27,95", [95, 275], []),
        ("Runway,Heading", ",95", [95, 275], []),
        ("Runway,le_heading_degT,he_heading_degT", "09/27,95,", [95, 275], []),
        ("Runway,le_heading_degT,he_heading_degT", "09/27,,275", [95, 275], []),
        ("Runway,le_heading_degT,he_heading_degT", "09/27,95,300", [95, 300], ["headings not opposite"]),
        ("Runway,Heading", "09/27,180", [180, 0], ["heading far from designator"]),
        ("Runway", "09/27", [90, 270], ["heading from designator"]),
        ("Runway", "NE/SW", [45, 225], ["heading from designator"]),
        ("Runway", "09/28", None, ["designators not opposite", "heading not known"]),
        ("Runway", "", None, ["heading not known"]),
        (
            "Runway,le_latitude_deg,le_longitude_deg,he_latitude_deg,he_longitude_deg",
            "18/36,0,0,-0.0054,0",
            [180, 0],
            [],
        ),
    ],
)
def test_headings(read: Read, headers: str, row: str, degrees: list[float] | None, doubts: list[str]) -> None:
    strips = read(f"Strip,Surface,Elevation (ft),Length (m),{headers}\nA,turf,5,600,{row}\n")
    assert kinds(strips) == doubts
    expected = [math.nan] * 2 if degrees is None else [math.radians(value) for value in degrees]
    assert of(strips, "heading") == pytest.approx(expected, abs=1e-9, nan_ok=True)


def test_weather_in_the_list(read: Read) -> None:
    strips = read("Strip,Length,Temp,QNH,Wind from,Wind,Width\nA,600,20,29.92,360,10,0\n")
    assert of(strips, "temperature") == pytest.approx([293.15] * 2, rel=1e-12)
    assert of(strips, "qnh") == pytest.approx([101320.748119] * 2, rel=1e-9)  # 1 inHg = 3386.388640341 Pa
    assert of(strips, "wind_speed") == pytest.approx([18520.0 / 3600.0] * 2, rel=1e-12)  # 1 kt = 1852 m/h
    assert of(strips, "wind_from") == pytest.approx([2.0 * math.pi] * 2, rel=1e-12)
    assert all(math.isnan(width) for width in of(strips, "width"))  # 0 is not known, never a width


def test_what_is_missing_is_told(read: Read) -> None:
    strips = read("Strip,Runway,Length [m],Surface\nA,09/27,,\n")
    assert sorted(kinds(strips)) == [
        "elevation not known", "heading from designator", "length not known", "surface not known"
    ]  # fmt: skip
    assert strips.texts["fault"] == ["", ""]
