"""The page on one strip: what stands on it, that it agrees with the library, and that it fits a narrow screen."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from stripcheck import assess, load_rules, read_day, solve
from stripcheck.caution import CAUTION
from stripcheck.chance import chance
from stripcheck.compare import compare_flaps
from stripcheck.errors import InputError
from stripcheck.one_strip import WIDTH, one_strip, typed_strip
from tests.aircraft import trial_heron
from tests.test_laws import CARDS

STRIP = {"tora": 620.0, "lda": 600.0, "elevation_field": 2300.0, "slope_given": 2.5, "surface": "grass", "heading": 82.0,
         "obstacle_height": 700.0, "obstacle_distance": 1500.0}  # fmt: skip
DAY = read_day({"temperature": 22, "wind_from": 250, "wind_speed": 5})
RULES = load_rules("uk-leaflet")


def page(strip: Any = STRIP, card: Any = None, day: Any = DAY, rules: Any = RULES, **more: Any) -> list[str]:
    return one_strip(strip, card or trial_heron(), day, rules, **more)


def part(lines: list[str], heading: str) -> list[str]:
    """The lines under a heading, up to the next blank one."""
    start = next(i for i, line in enumerate(lines) if line.startswith(heading))
    return lines[start + 1 : next((i for i, line in enumerate(lines) if i > start and not line), len(lines))]


def test_the_page_says_what_the_library_says() -> None:
    lines = page(takeoff_mass=900)
    both = (solve.both_directions(STRIP), trial_heron(), DAY, RULES)
    result = assess(*both, takeoff_mass=900)
    odds = chance(*both, takeoff_mass=900)
    for side, heading in (("landing", "LANDING"), ("takeoff", "TAKE-OFF")):
        told = part(lines, heading)
        for i, name in enumerate(("08", "26")):
            assert f"  {name}  {result[f'{side}_verdict'][i]}: {result[f'{side}_reason'][i]}" in told
            assert told[3 * i + 1].endswith(f"margin {result[f'{side}_margin'][i]:,.0f} m")
            assert told[3 * i + 2].endswith(f": {odds.texts(side)[i]}")
    limits = part(lines, "STILL SUITABLE")
    for label, answer in (
        ("Most landing mass", solve.most_landing_mass(*both, takeoff_mass=900)),
        ("Most take-off mass", solve.most_takeoff_mass(*both, takeoff_mass=900)),
        ("Hottest air, landing", solve.hottest(*both, side="landing", takeoff_mass=900)),
        ("Hottest air, take-off", solve.hottest(*both, takeoff_mass=900)),
        ("Wind along, landing", solve.least_headwind(*both, side="landing", takeoff_mass=900)),
        ("Wind along, take-off", solve.least_headwind(*both, takeoff_mass=900)),
    ):
        row = next(line for line in limits if line.strip().startswith(label))
        assert [row[24:60].strip(), row[60:].strip()] == answer.texts()
    abort = solve.abort_point(*both, takeoff_mass=900)
    told = part(lines, "LAST PLACE TO GIVE UP")
    assert told == [f"  08  {abort.texts()[0]}", f"      {abort.check_texts()[0]}",
                    f"  26  {abort.texts()[1]}", f"      {abort.check_texts()[1]}"]  # fmt: skip
    assert part(lines, "WIND AT WHICH") == [
        f"  Landing: {solve.break_even_wind(*both, takeoff_mass=900).texts()[0]}",
        f"  Take-off: {solve.break_even_wind(*both, side='takeoff', takeoff_mass=900).texts()[0]}",
    ]
    assert part(lines, "LAST PLACE TO GO AROUND") == [f"  08  {solve.commit_point(*both, takeoff_mass=900).texts()[0]}"]


def test_the_flaps_are_those_of_the_better_direction() -> None:
    lines = page(takeoff_mass=900)
    both = solve.both_directions(STRIP)
    result = assess(both, trial_heron(), DAY, RULES, takeoff_mass=900)
    for side, heading in (("landing", "FLAPS COMPARED, LANDING"), ("takeoff", "FLAPS COMPARED, TAKE-OFF")):
        better = int(np.argmax(result.si(f"{side}_margin")))
        assert next(line for line in lines if line.startswith(heading)).startswith(f"{heading} ON {('08', '26')[better]} ")
        one = {key: column[better : better + 1] for key, column in both.items()}
        flaps = compare_flaps(one, trial_heron(), DAY, RULES, takeoff_mass=900)
        rows = part(lines, heading)
        best = flaps.best_landing if side == "landing" else flaps.best_takeoff
        assert rows[-1] == f"  Most margin: flap {best}"
        margins = flaps.landing_margin if side == "landing" else flaps.takeoff_margin
        told = rows[-5:-1]
        assert [row.split()[0] for row in told] == ["up", "10", "20", "30"]
        assert all(f"{margin:,.0f} m" in row for margin, row in zip(margins, told, strict=True))
    assert "not allowed" in part(lines, "FLAPS COMPARED, TAKE-OFF")[-2]


HARD = {
    "nothing known": ({"tora": 500.0, "lda": 500.0, "surface": "grass"}, {}),
    "no heading in wind": ({key: value for key, value in STRIP.items() if key != "heading"}, {}),
    "ice": ({**STRIP, "surface": "ice"}, {}),
    "snow": ({**STRIP, "surface": "snow"}, {}),
    "soft paving": ({**STRIP, "surface": "paved", "condition": "soft"}, {}),
    "very short": ({**STRIP, "tora": 60.0, "lda": 50.0}, {}),
    "very long": ({**STRIP, "tora": 5000.0, "lda": 5000.0}, {}),
    "very steep": ({**STRIP, "slope_given": 28.0}, {"one_way": True}),
    "over the greatest mass": (STRIP, {"takeoff_mass": 1300, "landing_mass": 1300}),
    "trees both ways": ({**STRIP, "approach_obstacle_height": 60.0, "approach_obstacle_distance": 150.0}, {"one_way": True}),
}  # fmt: skip


PAGES = [*((case, "heron") for case in HARD), *(("trees both ways", name) for name in CARDS)]


@pytest.mark.parametrize(("case", "name"), PAGES)
def test_a_page_for_whatever_is_asked(case: str, name: str) -> None:
    """Every line fits, none is without meaning, and the caution is the last word."""
    strip, more = HARD[case]
    lines = page(strip, CARDS.get(name, trial_heron()), **more)
    text = "\n".join(lines)
    assert all(len(line) <= WIDTH and line == line.rstrip() for line in lines)
    assert "nan" not in text and "None" not in text and "inf" not in text
    assert " ".join(text.split()).endswith(CAUTION)
    for heading in ("LANDING", "TAKE-OFF", "STILL SUITABLE", "FLAPS COMPARED, LANDING", "FLAPS COMPARED, TAKE-OFF"):
        assert part(lines, heading)


def test_a_slope_profile_is_followed() -> None:
    lines = page({**STRIP, "slope_given": None, "profile": "0:0, 200:2, 610:18"})
    assert "slope profile" in " ".join(lines[:2])
    assert "not assessed" not in "".join(part(lines, "LANDING") + part(lines, "STILL SUITABLE") + part(lines, "WIND AT WHICH"))
    assert part(lines, "LAST PLACE TO GIVE UP") == ["  08  not assessed", "  26  not assessed"]


def test_what_is_not_known_is_not_assessed() -> None:
    lines = page(HARD["nothing known"][0], day=read_day({"temperature": 20}))
    assert lines[0] == "Strip A/B: 500 m, grass, dry, elevation not known, slope not known"
    assert part(lines, "LANDING")[0] == "  A   not assessed: elevation not known"
    assert "air not known" in lines[2]
    limits = part(lines, "STILL SUITABLE")
    assert all(row.count("not assessed") == 2 for row in limits[1:])


def test_a_one_way_strip_is_told_for_its_one_way() -> None:
    lines = page(one_way=True)
    assert "land on 08 only, take off on 26 only" in " ".join(lines[:2])
    assert part(lines, "LANDING")[-1] == "  26  unsuitable: one-way strip: no landing in this direction"
    assert part(lines, "TAKE-OFF")[0] == "  08  unsuitable: one-way strip: no take-off in this direction"
    limits = part(lines, "STILL SUITABLE")
    assert [limits[1][60:], limits[2][24:26]] == ["-", "- "]
    assert not any(line.startswith("WIND AT WHICH") for line in lines)
    assert part(lines, "LAST PLACE TO GIVE UP")[0].startswith("  26 ") and len(part(lines, "LAST PLACE TO GIVE UP")) == 2
    assert any(line.startswith("FLAPS COMPARED, LANDING ON 08") for line in lines)
    assert any(line.startswith("FLAPS COMPARED, TAKE-OFF ON 26") for line in lines)


def test_every_default_that_was_used_is_told() -> None:
    lines = page(day=read_day({"temperature": 22}))
    told = [line for line in lines if line.startswith("Taken for granted: ")]
    assert any("QNH: 1013.25 used" in line for line in told) and any("Wind: 0.0 used" in line for line in told)
    assert any(line.startswith("Day: 22 °C") and line.endswith("calm") for line in lines)


def test_typed_numbers_have_units_and_lengths_a_default() -> None:
    """2,034 ft is 619.9632 m (1 ft = 0.3048 m)."""
    strip = typed_strip({"length": "2034 ft", "lda": "600", "elevation_field": "700 m", "surface": "Wet turf",
                         "slope_given": "-2.5", "heading": "82", "obstacle": "60/400",
                         "obstacle_behind": "20 m / 0.2 km", "tora": None})  # fmt: skip
    assert strip["tora"] == strip["length"] == pytest.approx(619.9632) and strip["lda"] == 600.0
    assert strip["elevation_field"] == pytest.approx(2296.588, abs=1e-3) and strip["slope_given"] == pytest.approx(-2.5)
    assert (strip["surface"], strip["condition"]) == ("grass", "wet")
    assert (strip["obstacle_height"], strip["obstacle_distance"]) == (pytest.approx(60.0), pytest.approx(400.0))
    assert strip["approach_obstacle_height"] == pytest.approx(65.617, abs=1e-3)
    assert strip["approach_obstacle_distance"] == pytest.approx(200.0)


@pytest.mark.parametrize(
    ("changed", "sentence"),
    [
        ({"length": "long"}, 'Length: "long" is not a number'),
        ({"length": "-700"}, "Length of -700: a runway is between 90 m and 6,000 m long"),
        ({"length": ""}, "give --length, or both --tora and --lda"),
        ({"length": None, "tora": "500"}, "give --length, or both --tora and --lda"),
        ({"elevation_field": "60000"}, "Field elevation of 60000: an elevation lies between"),
        ({"slope_given": "45"}, "Slope given of 45: a slope lies between -30 % and 30 %"),
        ({"heading": "900"}, "Heading of 900: a heading lies between"),
        ({"surface": "porridge"}, 'the word "porridge" is not one that stripcheck knows; write one of: paved, gravel'),
        ({"surface": ""}, "--surface: no surface is given"),
        ({"obstacle": "60"}, "--obstacle 60: a height and a distance such as"),
        ({"obstacle_behind": "/400"}, "--obstacle-behind /400: a height and a distance such as"),
        ({"obstacle": "tall/400"}, 'Obstacle on climb-out, height: "tall" is not a number'),
        ({"profile": "0:0"}, "a profile has 2 to 30 points"),
    ],
)
def test_what_cannot_be_right_is_refused(changed: dict[str, Any], sentence: str) -> None:
    typed = {"length": "620", "elevation_field": "2300", "surface": "grass", **changed}
    with pytest.raises(InputError) as refused:
        typed_strip(typed)
    assert sentence in str(refused.value)
