"""Verdicts and limiting reasons: the findings of an assessment in order; the first that holds decides.

Each side, take-off and landing, has its own list. Verdicts are the plain words of `VERDICTS`. The order is: what is
forbidden whatever the numbers, what keeps the side from being assessed, what makes it unsuitable, what makes it at
best marginal; and at last *suitable*.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from stripcheck import links
from stripcheck.chain import Step
from stripcheck.numeric import Number

SUITABLE, MARGINAL, UNSUITABLE, NOT_ASSESSED = VERDICTS = ("suitable", "marginal", "unsuitable", "not assessed")
FAULT = "{fault}"  # stands for the text of the row's fault where a reason is put into words

HALF_AN_OBSTACLE = "obstacle without height or without distance"
BEYOND = "beyond the book: higher, hotter or heavier"
NO_FIGURE = "too far beyond the book for any distance"
MOVED = "the slope profile was worked out for other conditions: refresh the workbook"
NO_RULE = "the rules count neither physics nor corrections"


@dataclass(frozen=True)
class Finding:
    """One reason for a verdict: ``holds`` tells from the ``inputs`` whether it is the case."""

    verdict: str
    words: str
    inputs: tuple[str, ...]
    holds: Callable[..., Number]


def _no(truth: Number) -> Number:
    return np.logical_not(truth)


def _neither(one: Number, other: Number) -> Number:
    return np.logical_not(one | other)


def _yes(truth: Number) -> Number:
    return truth


def _missing(value: Number) -> Number:
    return np.isnan(value)


def _unknown(limits: tuple[float, float]) -> Callable[..., Number]:
    return lambda value: _no(links.known(value, limits))


def _negative(value: Number) -> Number:
    return value < 0.0


def _above(value: Number, limit: Number) -> Number:
    return value > limit


def _not_within(value: Number, limit: Number) -> Number:
    """Above a limit, or no number at all."""
    return np.logical_not(value <= limit)


def _above_given(value: Number, limit: Number) -> Number:
    """Above a limit, where one is given."""
    return np.where(np.isfinite(limit), value > limit, False)


def _steeper(slope: Number, limit: Number) -> Number:
    return np.where(np.isfinite(limit), np.abs(slope) > limit, False)


def _steeper_down(slope: Number, limit: Number) -> Number:
    return np.where(np.isfinite(limit), -slope > limit, False)


def _steeper_part(part: Number, limit: Number) -> Number:
    return np.where(np.isfinite(limit) & np.isfinite(part), part > limit, False)


def _too_narrow(width: Number, asked: Number) -> Number:
    return np.where(np.isfinite(asked) & np.isfinite(width), width < asked, False)


def _width_missing(width: Number, asked: Number) -> Number:
    return np.where(np.isfinite(asked), np.isnan(width), False)


def _over(value: Number, limit: Number) -> Number:
    """Above a limit that must be there: one that was wiped out forbids."""
    return np.isnan(limit) | (value > limit)


def _tailwind_above(headwind: Number, limit: Number) -> Number:
    return _over(-headwind, limit)


def _below(given: Number, height: Number) -> Number:
    return np.where(given, height < 0.0, False)


def _below_margin(given: Number, height: Number, margin: Number) -> Number:
    return np.where(given, height < margin, False)


def _stands_in_free_area(given: Number, height: Number, distance: Number, gradient: Number, reach: Number) -> Number:
    """Whether an obstacle stands above the obstacle-free surface that a rule set asks for beyond the strip."""
    asked = np.isfinite(gradient) & np.isfinite(reach) & given
    return np.where(asked, (distance <= reach) & (height > gradient * distance), False)


def _obstacle_decides(distance: Number, available: Number, usable: Number) -> Number:
    return (distance > available) & (distance <= usable)


def _air_findings() -> tuple[Finding, ...]:
    return (
        Finding(NOT_ASSESSED, FAULT, ("fault",), _yes),
        Finding(NOT_ASSESSED, "elevation not known", ("elevation",), _missing),
        Finding(NOT_ASSESSED, "elevation not credible", ("elevation",), _unknown(links.ELEVATIONS)),
        Finding(NOT_ASSESSED, "QNH not known or not credible", ("qnh_used",), _unknown(links.PRESSURES)),
        Finding(NOT_ASSESSED, "temperature not known or not credible", ("air_known",), _no),
        Finding(NOT_ASSESSED, "wind direction, wind speed or heading not known", ("headwind",), _missing),
        Finding(NOT_ASSESSED, "surface or its condition not known", ("ground",), lambda row: row >= links.GROUND_UNKNOWN),
    )


def _site_findings(slope: str) -> tuple[Finding, ...]:
    ahead = ("obstacle_ahead", "obstacle_height", "obstacle_distance", "free_gradient", "free_distance")
    behind = ("obstacle_behind", "approach_obstacle_height", "approach_obstacle_distance", "free_gradient",
              "free_distance")  # fmt: skip
    return (
        Finding(MARGINAL, "narrower than the site criterion", ("width", "width_asked"), _too_narrow),
        Finding(MARGINAL, "width not known, and the site criterion asks for one", ("width", "width_asked"),
                _width_missing),
        Finding(MARGINAL, "steeper than the site criterion", (slope, "greatest_slope"), _steeper),
        Finding(MARGINAL, "a part is steeper than the site criterion", ("local_slope", "greatest_local_slope"),
                _steeper_part),
        Finding(MARGINAL, "obstacle on the climb-out stands in the area to be kept free", ahead, _stands_in_free_area),
        Finding(MARGINAL, "obstacle on the approach stands in the area to be kept free", behind, _stands_in_free_area),
    )  # fmt: skip


TAKEOFF_FINDINGS = (
    Finding(UNSUITABLE, "one-way strip: no take-off in this direction", ("take_off_here",), _no),
    *_air_findings(),
    Finding(NOT_ASSESSED, "slope not known", ("takeoff_slope",), _missing),
    Finding(NOT_ASSESSED, "slope not credible", ("takeoff_slope",), _unknown(links.SLOPES)),
    Finding(NOT_ASSESSED, "no figures for this surface in this condition", ("rolling",), _missing),
    Finding(NOT_ASSESSED, "length usable for take-off not known", ("tora",), _unknown(links.LENGTHS)),
    Finding(NOT_ASSESSED, "take-off mass or flap missing or not in the card", ("takeoff_set",), _no),
    Finding(NOT_ASSESSED, NO_RULE, ("physics_counts", "corrections_count"), _neither),
    Finding(NOT_ASSESSED, HALF_AN_OBSTACLE, ("ahead_whole",), _no),
    Finding(NOT_ASSESSED, "a value needed is missing", ("takeoff_known",), _no),
    Finding(NOT_ASSESSED, MOVED, ("profile_takeoff_roll", "takeoff_roll", "profile_takeoff_usable", "tora"),
            links.profile_moved),
    Finding(UNSUITABLE, "over the greatest take-off mass", ("mass_takeoff", "max_takeoff_mass"), _over),
    Finding(UNSUITABLE, "crosswind above the limit", ("crosswind", "crosswind_limit"), _over),
    Finding(UNSUITABLE, "tailwind above the limit", ("headwind", "tailwind_limit"), _tailwind_above),
    Finding(UNSUITABLE, "does not lift off", ("lifts_off",), _no),
    Finding(UNSUITABLE, "does not climb away", ("climbs",), _no),
    Finding(UNSUITABLE, NO_FIGURE, ("takeoff_distance",), _missing),
    Finding(UNSUITABLE, "take-off distance longer than the strip", ("takeoff_distance", "tora"), _above),
    Finding(UNSUITABLE, "does not clear the obstacle on the climb-out", ("obstacle_ahead", "over_obstacle"), _below),
    Finding(MARGINAL, "take-off fits only without the safety factor", ("takeoff_margin",), _negative),
    Finding(MARGINAL, "clears the obstacle on the climb-out by less than is asked",
            ("obstacle_ahead", "over_obstacle_factored", "obstacle_margin"), _below_margin),
    Finding(MARGINAL, "barely accelerates near lift-off", ("least_acceleration", "first_acceleration"),
            links.barely_of),
    Finding(MARGINAL, BEYOND, ("takeoff_beyond",), _yes),
    Finding(MARGINAL, "steeper uphill than the rules allow for", ("takeoff_slope", "slope_limit"),
            _above_given),
    *_site_findings("takeoff_slope"),
    Finding(SUITABLE, "take-off fits, factors included", (), lambda: True),
)  # fmt: skip

LANDING_FINDINGS = (
    Finding(UNSUITABLE, "one-way strip: no landing in this direction", ("land_here",), _no),
    *_air_findings(),
    Finding(NOT_ASSESSED, "slope not known", ("landing_slope",), _missing),
    Finding(NOT_ASSESSED, "slope not credible", ("landing_slope",), _unknown(links.SLOPES)),
    Finding(NOT_ASSESSED, "no figures for this surface in this condition", ("braking",), _missing),
    Finding(NOT_ASSESSED, "length usable for landing not known", ("lda",), _unknown(links.LENGTHS)),
    Finding(NOT_ASSESSED, "landing mass or flap missing or not in the card", ("landing_set",), _no),
    Finding(NOT_ASSESSED, NO_RULE, ("physics_counts", "corrections_count"), _neither),
    Finding(NOT_ASSESSED, HALF_AN_OBSTACLE, ("behind_whole",), _no),
    Finding(NOT_ASSESSED, "a value needed is missing", ("landing_known",), _no),
    Finding(NOT_ASSESSED, MOVED, ("profile_landing_roll", "braked_roll", "profile_landing_usable", "lda"), links.profile_moved),
    Finding(UNSUITABLE, "over the greatest landing mass", ("mass_landing", "max_landing_mass"), _over),
    Finding(UNSUITABLE, "crosswind above the limit", ("crosswind", "crosswind_limit"), _over),
    Finding(UNSUITABLE, "tailwind above the limit", ("headwind", "tailwind_limit"), _tailwind_above),
    Finding(UNSUITABLE, "ground drops away too steeply for the approach", ("path_closes",), _no),
    Finding(UNSUITABLE, "does not stop", ("stops",), _no),
    Finding(UNSUITABLE, "obstacle on the approach leaves too little to land on",
            ("landing_distance", "landing_available", "lda"), _obstacle_decides),
    Finding(UNSUITABLE, "landing distance longer than the strip", ("landing_distance", "landing_available"), _not_within),
    Finding(MARGINAL, "landing fits only without the safety factor", ("landing_margin",), _negative),
    Finding(MARGINAL, BEYOND, ("landing_beyond",), _yes),
    Finding(MARGINAL, "steeper downhill than the rules allow for", ("landing_slope", "slope_limit"),
            _steeper_down),
    *_site_findings("landing_slope"),
    Finding(SUITABLE, "landing fits, factors included", (), lambda: True),
)  # fmt: skip


def _first_that_holds(findings: tuple[Finding, ...], keys: tuple[str, ...]) -> Callable[..., Number]:
    """Function that gives the number [1, 2, ...] of the first finding that holds; the last one always does."""
    positions = [tuple(keys.index(key) for key in finding.inputs) for finding in findings[:-1]]

    def number_of_finding(*values: Number) -> Number:
        conditions = [
            finding.holds(*(values[i] for i in where))
            for finding, where in zip(findings[:-1], positions, strict=True)
        ]
        return np.select(conditions, list(range(1, len(findings))), len(findings))

    return number_of_finding


def _steps_of(side: str, label: str, findings: tuple[Finding, ...], late: tuple[str, ...]) -> tuple[Step, ...]:
    keys = tuple(dict.fromkeys(key for finding in findings for key in finding.inputs))
    number = f"{side}_finding"
    return (
        Step(number, "", "", f"{label}: number of the finding", "First finding that holds",
             _first_that_holds(findings, keys), keys, short=True, late=late),
        Step(f"{side}_verdict", "", "", f"{label} verdict", "Verdict of the finding", _yes, (number,),
             words=tuple(finding.verdict for finding in findings), short=True),
        Step(f"{side}_reason", "", "", f"{label}: limiting reason", "Words of the finding", _yes, (number,),
             words=tuple(finding.words for finding in findings), short=True),
    )  # fmt: skip


TAKEOFF_STEPS = _steps_of(
    "takeoff", "Take-off", TAKEOFF_FINDINGS,
    ("takeoff_known", "lifts_off", "climbs", "takeoff_distance", "takeoff_required"),
)  # fmt: skip
LANDING_STEPS = _steps_of(
    "landing", "Landing", LANDING_FINDINGS,
    ("landing_known", "path_closes", "stops", "landing_distance", "landing_required"),
)  # fmt: skip
