"""Every finding can be met, in its words and with its verdict; and the order among them.

One case for each finding of both sides: a plain good strip, changed in what the finding is about. The words are those
that a pilot reads, so that they stand here in full.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import pytest

from stripcheck import assess, load_rules
from stripcheck.assessment import Result
from stripcheck.caution import CAUTION
from stripcheck.rules import Rules
from stripcheck.verdict import (
    BEYOND,
    FAULT,
    LANDING_FINDINGS,
    MARGINAL,
    MOVED,
    NO_FIGURE,
    NOT_ASSESSED,
    SUITABLE,
    TAKEOFF_FINDINGS,
    UNSUITABLE,
    VERDICTS,
)
from tests.aircraft import heavy_tables, trial_heron, trial_mule

GOOD = {
    "tora": 1400.0, "lda": 1400.0, "width": 30.0, "elevation_field": 1000.0, "slope_given": 0.5, "surface": "grass",
    "condition": "dry", "heading": 90.0, "own_wind_speed": 0.0,
}  # fmt: skip
DAY = {"temperature": 20}
Case = dict[str, Any]
NAN = np.array([np.nan])


def assessed(case: Case) -> Result:
    """A case: strip columns, and under names with a star what is no strip column."""
    strip = {**GOOD, **{key: value for key, value in case.items() if not key.startswith("*")}}
    rules = case.get("*rules", "manual-only")
    loading = {key: case[f"*{key}"] for key in ("takeoff_mass", "landing_mass") if f"*{key}" in case}
    return assess(strip, case.get("*card", trial_heron)(), case.get("*day", DAY), rules, **loading)


def with_blank_factor(side: str) -> Rules:
    """A rule set in whose ground table the factor of dry grass has been wiped out."""
    rules = load_rules("uk-leaflet")
    column = np.array(rules.values[f"ground_{side}_factor"])
    column[9] = np.nan
    return Rules(**{**vars(rules), "values": {**rules.values, f"ground_{side}_factor": column}})


NOTHING_COUNTS = Rules(**{
    **vars(load_rules("manual-only")),
    "values": {**load_rules("manual-only").values, "physics_counts": False, "corrections_count": False},
})  # fmt: skip
TAILWIND = {"own_wind_speed": 11.0, "own_wind_from": 270.0}
CROSSWIND = {"own_wind_speed": 30.0, "own_wind_from": 180.0}

# words -> case; the first part holds for both sides
BOTH: dict[str, Case] = {
    FAULT: {"fault": 'row 12: length "abc" is not a number'},
    "elevation not known": {"elevation_field": None},
    "elevation not credible": {"elevation_field": 30000.0},
    "QNH not known or not credible": {"own_qnh": 500.0},
    "temperature not known or not credible": {"*day": {}},
    "wind direction, wind speed or heading not known": {"heading": None, "own_wind_speed": 8.0, "own_wind_from": 90.0},
    "surface or its condition not known": {"surface": "moss"},
    "slope not known": {"slope_given": None},
    "slope not credible": {"slope_given": 35.0},
    "no figures for this surface in this condition": {"surface": "snow"},
    "the rules count neither physics nor corrections": {"*rules": NOTHING_COUNTS},
    MOVED: {"profile_takeoff_slope": 1.0, "profile_takeoff_roll": 900.0, "profile_landing_slope": 1.0,
            "profile_landing_roll": 900.0},
    "crosswind above the limit": CROSSWIND,
    "tailwind above the limit": TAILWIND,
    "narrower than the site criterion": {"width": 8.0, "*rules": "au-small"},
    "width not known, and the site criterion asks for one": {"width": None, "*rules": "au-small"},
    "steeper than the site criterion": {"slope_given": 2.5, "*rules": "au-small"},
    "a part is steeper than the site criterion": {"local_slope": 4.0, "*rules": "au-small"},
    "obstacle on the climb-out stands in the area to be kept free":
        {"obstacle_height": 140.0, "obstacle_distance": 600.0, "tora": 3000.0, "*rules": "au-small"},
    "obstacle on the approach stands in the area to be kept free":
        {"approach_obstacle_height": 140.0, "approach_obstacle_distance": 600.0, "*rules": "au-small"},
}  # fmt: skip
TAKEOFF: dict[str, Case] = BOTH | {
    "obstacle without height or without distance": {"obstacle_height": 100.0},
    "one-way strip: no take-off in this direction": {"take_off_here": "no"},
    "length usable for take-off not known": {"tora": None},
    "take-off mass or flap missing or not in the card": {"*takeoff_mass": NAN},
    "a value needed is missing": {"*rules": with_blank_factor("takeoff")},
    "over the greatest take-off mass": {"*takeoff_mass": 1111.0},
    "does not lift off": {"surface": "sand", "condition": "soft", "slope_given": 6.0},
    "does not climb away": {"surface": "paved", "slope_given": 8.5},
    "take-off distance longer than the strip": {"tora": 300.0},
    "does not clear the obstacle on the climb-out": {"obstacle_height": 330.0, "obstacle_distance": 100.0},
    # single figures reach to 7,930 ft density altitude
    BEYOND: {"elevation_field": 7000.0, "tora": 4000.0},
    # the table, at the greatest mass, has no figure up there, and at that mass the model no longer climbs
    NO_FIGURE: {"*card": heavy_tables, "*takeoff_mass": 750.0, "elevation_field": 11500.0, "tora": 5000.0},
    "take-off fits only without the safety factor": {"tora": 600.0, "*rules": "uk-leaflet"},
    "clears the obstacle on the climb-out by less than is asked":
        {"obstacle_height": 275.0, "obstacle_distance": 100.0, "*rules": "us-135"},
    "barely accelerates near lift-off":
        {"*card": trial_mule, "surface": "sand", "condition": "dry", "slope_given": 0.0, "tora": 4000.0,
         "elevation_field": 10000.0, "*takeoff_mass": 900.0},
    "steeper uphill than the rules allow for": {"slope_given": 3.0, "*rules": "part-cat-b"},
    "take-off fits, factors included": {},
}  # fmt: skip
LANDING: dict[str, Case] = BOTH | {
    "obstacle without height or without distance": {"approach_obstacle_distance": 100.0},
    "one-way strip: no landing in this direction": {"land_here": "no"},
    "slope not credible": {"slope_given": -35.0},
    "length usable for landing not known": {"lda": None},
    "landing mass or flap missing or not in the card": {"*landing_mass": NAN},
    "a value needed is missing": {"*rules": with_blank_factor("landing")},
    "over the greatest landing mass": {"*landing_mass": 1111.0},
    "ground drops away too steeply for the approach": {"slope_given": -9.0},
    "does not stop": {"surface": "ice", "slope_given": -3.0},
    "obstacle on the approach leaves too little to land on":
        {"lda": 600.0, "approach_obstacle_height": 120.0, "approach_obstacle_distance": 100.0},
    "landing distance longer than the strip": {"lda": 300.0},
    BEYOND: {"elevation_field": 7000.0},
    "landing fits only without the safety factor": {"lda": 550.0, "*rules": "uk-leaflet"},
    "steeper downhill than the rules allow for": {"slope_given": -3.0, "*rules": "part-cat-b"},
    "steeper than the site criterion": {"slope_given": -2.5, "*rules": "au-small"},
    "landing fits, factors included": {},
}  # fmt: skip
SIDES = {"takeoff": (TAKEOFF_FINDINGS, TAKEOFF), "landing": (LANDING_FINDINGS, LANDING)}


def every_finding() -> Iterator[Any]:
    for side, (findings, _) in SIDES.items():
        for number, finding in enumerate(findings):
            yield pytest.param(side, number, id=f"{side}: {finding.words}")


@pytest.mark.parametrize(("side", "number"), list(every_finding()))
def test_every_finding_can_be_met(side: str, number: int) -> None:
    findings, cases = SIDES[side]
    finding = findings[number]
    case = cases[finding.words]
    result = assessed(case)
    words = case["fault"] if finding.words == FAULT else finding.words
    assert result[f"{side}_reason"] == [words]
    assert result[f"{side}_verdict"] == [finding.verdict]
    assert result.si(f"{side}_finding")[0] == number + 1


@pytest.mark.parametrize("side", SIDES)
def test_no_case_without_its_finding(side: str) -> None:
    findings, cases = SIDES[side]
    assert {finding.words for finding in findings} == set(cases)
    assert len({finding.words for finding in findings}) == len(findings)


@pytest.mark.parametrize("side", SIDES)
def test_the_order_of_the_findings(side: str) -> None:
    """Forbidden, not assessed, unsuitable, marginal, suitable: what comes first decides."""
    verdicts = [finding.verdict for finding in SIDES[side][0]]
    assert verdicts[0] == UNSUITABLE
    order = [NOT_ASSESSED, UNSUITABLE, MARGINAL, SUITABLE]
    places = [order.index(verdict) for verdict in verdicts[1:]]
    assert places == sorted(places) and set(places) == {0, 1, 2, 3}
    assert verdicts.count(SUITABLE) == 1


def test_what_comes_first_decides() -> None:
    """Forbidden and without an elevation: forbidden. Too short and without an elevation: not assessed."""
    result = assessed({"elevation_field": None, "tora": 100.0, "take_off_here": ["no", "yes"]})
    assert result["takeoff_verdict"] == [UNSUITABLE, NOT_ASSESSED]


def test_unsuitable_has_no_margin_to_show_where_there_is_no_distance() -> None:
    result = assessed(TAKEOFF["does not lift off"])
    for key in ("takeoff_roll", "takeoff_distance", "takeoff_required", "takeoff_margin"):
        assert np.isnan(result[key][0])


@pytest.mark.parametrize("case", [case for words, case in TAKEOFF.items() if "known" in words or words == FAULT])
def test_not_assessed_shows_no_distance(case: Case) -> None:
    if assessed(case)["takeoff_verdict"] == [NOT_ASSESSED] and "fault" not in case:
        assert np.isnan(assessed(case)["takeoff_distance"][0])


def test_one_side_does_not_hang_on_the_other() -> None:
    result = assessed({"tora": None})
    assert (result["takeoff_verdict"], result["landing_verdict"]) == ([NOT_ASSESSED], [SUITABLE])
    result = assessed({"lda": None, "land_here": "no"})
    assert (result["takeoff_verdict"], result["landing_verdict"]) == ([SUITABLE], [UNSUITABLE])


@pytest.mark.parametrize("missing", ["obstacle_height", "obstacle_distance"])
def test_half_an_obstacle_is_not_no_obstacle(missing: str) -> None:
    """An obstacle whose height or distance is missing can't be judged: the take-off is not assessed, with a reason."""
    strip = {"obstacle_height": 200.0, "obstacle_distance": 100.0, missing: None}
    result = assessed(strip)
    assert result["takeoff_verdict"] == [NOT_ASSESSED]
    assert "obstacle" in result["takeoff_reason"][0]


@pytest.mark.parametrize("missing", ["approach_obstacle_height", "approach_obstacle_distance"])
def test_half_an_obstacle_behind_is_not_no_obstacle(missing: str) -> None:
    strip = {"approach_obstacle_height": 200.0, "approach_obstacle_distance": 100.0, missing: None}
    result = assessed(strip)
    assert result["landing_verdict"] == [NOT_ASSESSED]
    assert "obstacle" in result["landing_reason"][0]


def test_assumed_slope_stands_in_the_adverse_way() -> None:
    """Unknown slope: uphill for the take-off and downhill for the landing, if the day assumes one."""
    result = assessed({"slope_given": None, "*day": {"temperature": 20, "assumed_slope": 2}})
    assert result["takeoff_slope"][0] == pytest.approx(2.0) and result["landing_slope"][0] == pytest.approx(-2.0)
    assert result["takeoff_verdict"] == [SUITABLE]


def test_words() -> None:
    assert VERDICTS == ("suitable", "marginal", "unsuitable", "not assessed")
    assert "Planning aid only" in CAUTION and "flight manual" in CAUTION
