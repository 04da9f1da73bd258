"""Comparison by flap setting, against the trade's facts and the chain itself.

Common practice, no source: at one and the same speed flaps down let the aeroplane descend more steeply and stop in less
runway than flaps up; flap lowers the stall speed and leaves more margin above it; it weakens the climb.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from stripcheck import assess
from stripcheck.compare import Comparison, compare_flaps
from stripcheck.errors import InputError
from stripcheck.units import from_si, to_si
from tests.aircraft import trial_heron, trial_mule
from tests.test_laws import CARDS, RANK

STRIP = {"tora": 650.0, "lda": 650.0, "elevation_field": 2300, "slope_given": 1.5, "surface": "grass", "heading": 90.0}
DAY = {"temperature": 22, "wind_from": 100, "wind_speed": 9}
ALL = {"heron": trial_heron(), "mule": trial_mule(), **CARDS}
EVERY = pytest.mark.parametrize("card", ALL.values(), ids=ALL)


def table(card: Any, **more: Any) -> Comparison:
    return compare_flaps(STRIP, card, DAY, "uk-leaflet", **more)


@EVERY
@pytest.mark.parametrize("speed", [None, 75])
def test_at_one_speed_more_flap_descends_more_steeply_and_stops_shorter(card: Any, speed: Any) -> None:
    flaps = table(card, common_speed=speed)
    assert (np.diff(flaps.descent_angle) > 0.0).all() and np.isfinite(flaps.descent_angle).all()
    assert (np.diff(flaps.stopping_distance) < 0.0).all()
    assert (np.diff(flaps.above_stall) > 0.0).all()


@EVERY
def test_more_flap_lowers_the_speeds_and_the_climb(card: Any) -> None:
    flaps = table(card)
    of_several = len({flap for tables in card.tables.values() for flap, _ in tables.pages}) > 3
    # tables of several settings each carry their own ratio of manual over model, which need not fall with flap
    physics = () if of_several else (flaps.climb_gradient, flaps.takeoff_roll)
    for falling in (flaps.stall_takeoff, flaps.stall_landing, flaps.lift_off, flaps.approach, *physics):
        assert (np.diff(falling) < 0.0).all()


@EVERY
def test_each_row_is_what_an_assessment_with_that_flap_says(card: Any) -> None:
    flaps = table(card)
    roll, climb = (next(key for key in keys if key in card.chain.by_key) for keys in (
        ("carried_takeoff_roll", "takeoff_roll"), ("carried_climb", "climb_gradient")))  # fmt: skip
    assert flaps.flaps == [flap.name for flap in card.flaps]
    for i, flap in enumerate(card.flaps):
        assert flaps.takeoff_allowed[i] == ("take-off" in flap.uses) and flaps.landing_allowed[i] == ("landing" in flap.uses)
        one = {"takeoff_flap": flap.name} if flaps.takeoff_allowed[i] else {}
        other = {"landing_flap": flap.name} if flaps.landing_allowed[i] else {}
        result = assess(STRIP, card, DAY, "uk-leaflet", **one, **other)
        if one:
            pairs = (("takeoff_distance", flaps.takeoff_distance), ("takeoff_margin", flaps.takeoff_margin),
                     ("stall_takeoff", flaps.stall_takeoff), ("lift_off_eas", flaps.lift_off),
                     (roll, flaps.takeoff_roll), (climb, flaps.climb_gradient))  # fmt: skip
            assert [float(result.si(key)[0]) for key, _ in pairs] == pytest.approx([found[i] for _, found in pairs], rel=1e-12)
            assert (result["takeoff_verdict"][0], result["takeoff_reason"][0]) == (
                flaps.takeoff_verdict[i], flaps.takeoff_reason[i])  # fmt: skip
        if other:
            pairs = (("landing_distance", flaps.landing_distance), ("landing_margin", flaps.landing_margin),
                     ("stall_landing", flaps.stall_landing), ("approach_eas", flaps.approach))  # fmt: skip
            assert [float(result.si(key)[0]) for key, _ in pairs] == pytest.approx([found[i] for _, found in pairs], rel=1e-12)
            assert result["landing_verdict"][0] == flaps.landing_verdict[i]


def test_the_touchdown_speed_is_that_of_the_least_flap() -> None:
    """There the stopping distance is the landing roll of the chain, carried where the card has tables."""
    for card in (trial_heron(), CARDS["high-mule"]):
        flaps, result = table(card), assess(STRIP, card, DAY, "uk-leaflet", landing_flap="up")
        key = "carried_landing_roll" if "carried_landing_roll" in card.chain.by_key else "landing_roll"
        assert flaps.touchdown_speed == pytest.approx(float(result.si("touchdown_eas")[0]), rel=1e-12)
        assert flaps.stopping_distance[0] == pytest.approx(float(result.si(key)[0]), rel=1e-9)


def test_descent_by_hand() -> None:
    """D/L from the polar at 70 kt: q = rho0 V^2 / 2, CL = W / (q S), CD = CD0 + dCD + CL^2 / (pi A e)."""
    flaps = table(trial_heron(), common_speed="70 kt", landing_mass=1000)
    q = 0.5 * 1.225 * (70.0 * 1852.0 / 3600.0) ** 2
    lift = 1000.0 * 9.80665 / (q * 16.3)
    for added, angle in zip((0.0, 0.008, 0.022, 0.045), flaps.descent_angle, strict=True):
        drag = 0.036 + added + lift**2 / (np.pi * 11.0**2 / 16.3 * 0.75)
        assert angle == pytest.approx(np.arctan(drag / lift), rel=1e-6)
    assert flaps.common_speed == pytest.approx(to_si(70.0, "kt"))
    assert from_si(flaps.above_stall, "kt") == pytest.approx(70.0 - np.array([53, 50, 48, 46]) * (1000 / 1110) ** 0.5, abs=1e-6)


def test_below_the_stall_there_is_no_descent() -> None:
    flaps = table(trial_heron(), common_speed=47, landing_mass=1000)
    assert np.isnan(flaps.descent_angle).tolist() == [True, True, False, False]
    assert (flaps.above_stall[:2] < 0.0).all() and (flaps.above_stall[2:] > 0.0).all()


def test_the_common_speed_is_the_usual_approach_speed_unless_told() -> None:
    flaps = table(trial_heron())
    assert flaps.common_speed == flaps.approach[-1]
    other = table(trial_heron(), landing_flap="20")
    assert other.common_speed == other.approach[2]


def test_the_best_setting_is_an_allowed_one_with_the_best_verdict() -> None:
    flaps = table(trial_heron(), takeoff_mass=900)
    usable = [i for i in range(4) if flaps.takeoff_allowed[i] and flaps.takeoff_verdict[i] == "suitable"]
    assert flaps.best_takeoff == flaps.flaps[max(usable, key=lambda i: flaps.takeoff_margin[i])]
    assert flaps.best_landing == flaps.flaps[int(np.argmax(flaps.landing_margin))]


def test_more_flap_shortens_the_run_and_weakens_the_climb_to_an_obstacle() -> None:
    """A ridge beyond a long strip: the setting with the greater margin does not clear them, and one with less is the best."""
    parted = 0
    for height in np.arange(300.0, 800.0, 10.0):
        ridge = {**STRIP, "tora": 900.0, "obstacle_height": height, "obstacle_distance": 1500.0}
        flaps = compare_flaps(ridge, trial_heron(), DAY, "uk-leaflet", takeoff_mass=950)
        most = int(np.argmax(np.where(flaps.takeoff_allowed, flaps.takeoff_margin, -np.inf)))
        if flaps.best_takeoff not in ("none", flaps.flaps[most]):
            best = flaps.flaps.index(flaps.best_takeoff)
            assert RANK[flaps.takeoff_verdict[best]] < RANK[flaps.takeoff_verdict[most]]
            assert flaps.climb_gradient[best] > flaps.climb_gradient[most]
            parted += 1
    assert parted


def test_none_is_said_in_words() -> None:
    short = compare_flaps({**STRIP, "tora": 150.0, "lda": 100.0}, trial_heron(), DAY)
    assert (short.best_takeoff, short.best_landing) == ("none", "none")
    assert set(short.takeoff_verdict) == {"unsuitable"}
    unknown = compare_flaps({**STRIP, "surface": ""}, trial_heron(), DAY)
    assert (unknown.best_takeoff, unknown.best_landing) == ("none", "none")
    assert np.isnan(unknown.takeoff_margin).all() and np.isnan(unknown.stopping_distance).all()
    assert np.isfinite(unknown.stall_landing).all()  # which no strip is needed for


def test_a_slope_profile_is_worked_out_for_each_setting() -> None:
    bent = {**STRIP, "slope_given": None, "profile": "0:0, 300:2, 650:14"}
    flaps = compare_flaps(bent, trial_heron(), DAY)
    result = assess(bent, trial_heron(), DAY, takeoff_flap="20", landing_flap="20")
    assert "not assessed" not in flaps.takeoff_verdict
    assert flaps.takeoff_margin[2] == pytest.approx(float(result.si("takeoff_margin")[0]), rel=1e-9)
    assert flaps.landing_margin[2] == pytest.approx(float(result.si("landing_margin")[0]), rel=1e-9)


def test_what_cannot_be_right_is_refused() -> None:
    with pytest.raises(InputError, match="one direction of one strip is expected, not 2 rows"):
        compare_flaps({**STRIP, "tora": [500.0, 600.0]}, trial_heron(), DAY)
    with pytest.raises(InputError, match="common speed of 0: a speed above 0 is expected"):
        compare_flaps(STRIP, trial_heron(), DAY, common_speed=0)
    with pytest.raises(InputError, match='there is no flap setting "99"'):
        compare_flaps(STRIP, trial_heron(), DAY, landing_flap="99")
