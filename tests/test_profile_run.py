"""Runs along slope profiles and equivalent slopes: limits, order, laws. Integrations are in tests/outside/test_profiles.py.

Aeroplanes and strips are invented.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck import ground_run
from stripcheck.assessment import prepare
from stripcheck.card import Card
from stripcheck.chain import evaluate
from stripcheck.inputs import STRIP
from stripcheck.profile import Profile, read_profile
from stripcheck.profile_run import (
    KEYS,
    SquareLaw,
    equivalent_slope,
    profile_slopes,
    roll_along,
    steepest_climb,
    steepest_fall,
    tracks_of,
)
from stripcheck.verdict import LANDING_FINDINGS, TAKEOFF_FINDINGS
from tests.aircraft import trial_heron, trial_mule
from tests.test_profile import profiles

G = 9.80665
CARDS = pytest.mark.parametrize("card", [trial_heron(), trial_mule()], ids=["fixed pitch", "constant speed"])


def strip_of(profile: Profile, wind: float = 0.0, **more: Any) -> dict[str, Any]:
    """A strip of that length and mean slope."""
    return {
        "length": profile.length, "tora": profile.length, "lda": profile.length, "elevation_field": 1200.0,
        "slope_given": 100.0 * profile.mean_slope, "surface": "grass", "condition": "dry", "heading": 90.0,
        "own_wind_from": 90.0 if wind >= 0 else 270.0, "own_wind_speed": abs(wind), **more,
    }  # fmt: skip


def found_for(card: Card, profile: Profile, wind: float = 0.0, **more: Any) -> tuple[Any, dict[str, Any], dict[str, float]]:
    """The chain, all its values with the results for the profile among them, and the results alone."""
    made = prepare(strip_of(profile, wind, **more), card, {"temperature": 20}, "manual-only")
    found = profile_slopes(made.chain, made.given, [profile])
    return made.chain, {**made.given, **found}, {key: float(column[0]) for key, column in found.items()}


def step(chain: Any, values: Mapping[str, Any], key: str) -> float:
    return float(np.broadcast_to(evaluate(chain, values, (key,))[key], 1)[0])


def finding(chain: Any, values: Mapping[str, Any], side: str) -> str:
    findings = TAKEOFF_FINDINGS if side == "takeoff" else LANDING_FINDINGS
    return findings[int(step(chain, values, f"{side}_finding")) - 1].words


@CARDS
@pytest.mark.parametrize("wind", [-6.0, 0.0, 12.0])
@pytest.mark.parametrize("text", ["0:0, 900:0", "0:0, 900:27", "0:0, 300:9, 900:27", "0:0, 100:-2, 250:-5, 900:-18"])
def test_a_straight_profile_is_its_mean_slope(card: Card, wind: float, text: str) -> None:
    """1e-9 as asked for; to rounding, as seen."""
    profile = read_profile(text)
    chain, values, found = found_for(card, profile, wind)
    slopes = ("profile_takeoff_slope", "profile_landing_slope", "profile_climb_slope", "profile_approach_slope")
    assert [found[key] for key in slopes] == pytest.approx([profile.mean_slope] * 4, abs=1e-9)
    on_the_mean = {**values, **dict.fromkeys(KEYS, math.nan)}
    assert found["profile_takeoff_roll"] == pytest.approx(step(chain, on_the_mean, "takeoff_roll"), rel=1e-9)
    assert found["profile_landing_roll"] == pytest.approx(step(chain, on_the_mean, "braked_roll"), rel=1e-9)


def many(seed: int) -> tuple[np.random.Generator, list[Profile], dict[str, Any]]:
    """Random profiles of one to six parts of -12 to +12 %, and their strips with winds along them, as columns."""
    rng = np.random.default_rng(seed)
    hills = []
    for parts in rng.integers(1, 7, 300):
        distances = np.concatenate([[0.0], np.cumsum(rng.uniform(20.0, 300.0, parts))])
        heights = np.concatenate([[0.0], np.cumsum(rng.uniform(-0.12, 0.12, parts) * np.diff(distances))])
        hills.append(Profile(tuple(distances.tolist()), tuple(heights.tolist())))
    winds = rng.uniform(-10.0, 25.0, len(hills))
    lengths = [max(hill.length, 30.0) for hill in hills]
    strips = strip_of(hills[0], 0.0, length=lengths, tora=lengths, lda=lengths, own_wind_speed=np.abs(winds),
                      own_wind_from=np.where(winds >= 0.0, 90.0, 270.0))  # fmt: skip
    return rng, hills, strips


@CARDS
def test_equivalent_slopes_give_the_chain_s_own_rolls(card: Card) -> None:
    """1e-9 for the chain's own sums on a slope found to 1e-10; and it is one between the gentlest and the steepest part.

    Where there is none, the chain says on the slope given instead that the aeroplane does not lift off, or not stop.
    """
    _, hills, strips = many(31)
    made = prepare(strips, card, {"temperature": 20}, "manual-only")
    found = profile_slopes(made.chain, made.given, hills)
    chain = evaluate(made.chain, {**made.given, **found}, ("takeoff_roll", "lifts_off", "braked_roll", "stops"))
    gentlest, steepest = (np.array([edge(hill.slopes) for hill in hills]) for edge in (min, max))
    for side, key, can, hardest in (("takeoff", "takeoff_roll", "lifts_off", steepest),
                                    ("landing", "braked_roll", "stops", gentlest)):  # fmt: skip
        slope, roll = found[f"profile_{side}_slope"], found[f"profile_{side}_roll"]
        assert ((slope >= gentlest - 1e-12) & (slope <= steepest + 1e-12)).all()
        runs = roll > 0.0
        assert 100 < runs.sum() < 300
        np.testing.assert_allclose(chain[key][runs], roll[runs], rtol=1e-9)
        assert not chain[can][~runs].any()
        np.testing.assert_allclose(slope[~runs], hardest[~runs], atol=1e-9)


@CARDS
def test_without_a_run_the_chain_says_so(card: Card) -> None:
    """A ramp of 28 % after a start on the level, downhill of 25 % after the touchdown: unsuitable, with the right words.

    Once the values change and the run would be possible, the roll of 0 is no longer that of the conditions.
    """
    chain, values, found = found_for(card, read_profile("0:0, 50:0, 450:112"))
    assert (found["profile_takeoff_slope"], found["profile_takeoff_roll"]) == (pytest.approx(0.28), 0.0)
    assert finding(chain, values, "takeoff") == "does not lift off"
    chain, values, found = found_for(card, read_profile("0:0, 250:0, 700:-112.5"))
    assert (found["profile_landing_slope"], found["profile_landing_roll"]) == (pytest.approx(-0.25), 0.0)
    assert not step(chain, values, "stops")


def test_what_is_not_known_has_no_run() -> None:
    """No temperature: the slope most against each run, and a roll of 0, so that neither is taken from the mean slope."""
    profile = read_profile("0:0, 200:8, 450:9")
    made = prepare(strip_of(profile), trial_heron(), {"wind_speed": 0}, "manual-only")
    found = profile_slopes(made.chain, made.given, [profile])
    assert found["profile_takeoff_slope"][0] == pytest.approx(0.04)
    assert found["profile_landing_slope"][0] == pytest.approx(0.004)
    assert found["profile_takeoff_roll"][0] == found["profile_landing_roll"][0] == 0.0


@CARDS
def test_rows_without_a_profile_have_nothing_and_columns_are_as_single_rows(card: Card) -> None:
    hills: list[Profile | None] = [read_profile("0:0, 200:8, 600:9"), None, read_profile("0:0, 400:1, 600:9"), None,
                                   read_profile("0:0, 100:-3, 250:2, 600:4")]  # fmt: skip
    strips = strip_of(read_profile("0:0, 600:9"), 0.0, tora=[600.0, 500.0, 550.0, 600.0, 600.0],
                      own_wind_speed=[0.0, 5.0, 8.0, 2.0, 3.0])  # fmt: skip
    made = prepare(strips, card, {"temperature": 20}, "manual-only")
    found = profile_slopes(made.chain, made.given, hills)
    assert set(found) == set(KEYS)
    for row, hill in enumerate(hills):
        one = {item.key: made.given[item.key][row : row + 1] for item in STRIP}
        alone = profile_slopes(made.chain, {**made.given, **one}, [hill])
        for key in KEYS:
            assert math.isfinite(found[key][row]) == (hill is not None)
            assert found[key][row] == pytest.approx(alone[key][0], rel=1e-12, nan_ok=True)
    none = profile_slopes(made.chain, made.given, [None] * 5)
    assert all(np.isnan(column).all() and len(column) == 5 for column in none.values())


@CARDS
def test_which_comes_first_counts(card: Card) -> None:
    """Down and then up, or up and then down: the same mean slope. Height is speed: downhill first lifts off sooner.

    Landing: uphill first stops sooner. Met from the other end, one is the other.
    """
    valley, hill = read_profile("0:0, 500:-20, 1000:0"), read_profile("0:0, 500:20, 1000:0")
    (_, _, down), (_, _, up) = found_for(card, valley), found_for(card, hill)
    assert down["profile_takeoff_roll"] < 0.9 * up["profile_takeoff_roll"]
    assert down["profile_takeoff_slope"] == pytest.approx(-0.04) and up["profile_takeoff_slope"] == pytest.approx(0.04)
    dip = read_profile("0:0, 280:0, 380:-4, 480:0, 900:0")  # the brakes bite just before it, and hold just beyond its middle
    bump = Profile(dip.distances, tuple(-height for height in dip.heights))
    (_, _, down), (_, _, up) = found_for(card, dip), found_for(card, bump)
    assert down["profile_landing_roll"] > 1.1 * up["profile_landing_roll"]
    assert found_for(card, valley.reversed())[2] == pytest.approx(found_for(card, valley)[2], rel=1e-12)


def law_of(start: float, square: float, wind: float = 0.0, harder: float = 1.0) -> SquareLaw:
    return SquareLaw(np.array([start]), np.array([square]), np.array([wind]), harder)


def roll_of(law: SquareLaw, profile: Profile, first: float, last: float, begin: float = 0.0) -> float:
    return float(roll_along(law, tracks_of([profile]), np.array([begin]), np.array([first]), np.array([last]))[0])


@pytest.mark.parametrize("text", ["0:0, 60:3, 200:1, 500:9", "0:0, 90:-9, 150:-9, 500:20", "0:0, 170:0, 171:0.1, 500:0"])
def test_energy_is_kept_at_constant_force(text: str) -> None:
    """V^2 / 2 = a x - g times what the way rose, in calm air: arithmetic, to rounding. And the same braked."""
    profile = read_profile(text)
    for law, first, last in ((law_of(2.0, 0.0), 0.0, 25.0), (law_of(3.0, 0.0, harder=-1.0), 25.0, 0.0)):
        roll = roll_of(law, profile, first, last, 20.0)
        ends = np.clip(np.array(profile.distances), 20.0, 20.0 + roll)
        climbed = float(np.sum(np.sin(np.arctan(profile.slopes)) * np.diff(ends)))
        assert law.start[0] * roll - law.harder * G * climbed == pytest.approx(0.5 * 25.0**2, rel=1e-12)


def test_order_where_the_heights_are_the_same() -> None:
    """Lift-off beyond the end of hill and valley, on ground of one height: only drag is left to tell them apart.

    Who goes through the valley is faster on the way and loses more to drag; without drag the runs are equally long.
    """
    valley, hill = read_profile("0:0, 100:-4, 200:0, 900:0"), read_profile("0:0, 100:4, 200:0, 900:0")
    for square, longer in ((-0.0008, True), (0.0, False)):
        through, over = (roll_of(law_of(2.0, square), profile, 0.0, 32.0) for profile in (valley, hill))
        assert min(through, over) > 200.0
        assert (through > over * 1.001) if longer else through == pytest.approx(over, rel=1e-12)


def steepened(rng: np.random.Generator, profile: Profile) -> Profile:
    """One part of 0 to 6 % more, and all the ground beyond it so much higher."""
    part = int(rng.integers(len(profile.slopes)))
    rise = rng.uniform(0.0, 0.06) * (profile.distances[part + 1] - profile.distances[part])
    return Profile(profile.distances, tuple(height + rise * (i > part) for i, height in enumerate(profile.heights)))


@CARDS
def test_higher_ground_ahead_never_shortens_a_take_off(card: Card) -> None:
    """By 1e-9 of the roll, for the sums. That the take-off is refused is no law: see ``roll_along``."""
    rng, hills, strips = many(32)
    made = prepare(strips, card, {"temperature": 20}, "manual-only")
    raised = [steepened(rng, hill) for hill in hills]
    before, after = (profile_slopes(made.chain, made.given, some)["profile_takeoff_roll"] for some in (hills, raised))
    runs = (before > 0.0) & (after > 0.0)
    assert runs.sum() > 100 and (after[runs] > before[runs] * (1.0 + 1e-6)).sum() > 50
    assert (after[runs] >= before[runs] * (1.0 - 1e-9)).all()


def test_higher_ground_ahead_never_lengthens_a_braked_roll() -> None:
    rng, hills, _ = many(33)
    size = len(hills)
    law = SquareLaw(np.full(size, 2.6), np.full(size, 0.0004), np.full(size, -3.0), -1.0)
    begin, ends = rng.uniform(0.0, 400.0, size), (np.full(size, 24.0), np.full(size, -3.0))
    raised = [steepened(rng, hill) for hill in hills]
    before, after = (roll_along(law, tracks_of(some), begin, *ends) for some in (hills, raised))
    runs = np.isfinite(before)
    assert runs.sum() > 200 and (after[runs] < before[runs] * (1.0 - 1e-6)).sum() > 50
    assert (after[runs] <= before[runs] * (1.0 + 1e-9)).all()


def test_who_brakes_later_stops_later() -> None:
    """Why the touchdown is taken rather too far than too near."""
    rng, hills, _ = many(34)
    size = len(hills)
    law = SquareLaw(np.full(size, 2.6), np.full(size, 0.0004), np.full(size, 2.0), -1.0)
    ends, tracks = (np.full(size, 24.0), np.full(size, 2.0)), tracks_of(hills)
    begin = rng.uniform(0.0, 300.0, size)
    later = begin + rng.uniform(1.0, 100.0, size)
    first, second = begin + roll_along(law, tracks, begin, *ends), later + roll_along(law, tracks, later, *ends)
    runs = np.isfinite(first + second)
    assert runs.sum() > 200 and (second[runs] >= first[runs] * (1.0 - 1e-9)).all()


@pytest.mark.parametrize(("usable", "roll"), [("tora", "takeoff"), ("lda", "landing")])
@CARDS
def test_of_a_part_of_the_strip_the_more_adverse_one_counts(card: Card, usable: str, roll: str) -> None:
    """900 m of a strip of 1,400 m: from the first end, where it begins, or to the far end."""
    profile = read_profile("0:0, 150:6, 900:12, 1100:12, 1400:0")
    _, _, part = found_for(card, profile, 0.0, **{usable: 900.0})
    first = Profile((0.0, 150.0, 900.0), (0.0, 6.0, 12.0))
    last = Profile((0.0, 400.0, 600.0, 900.0), (0.0, 3.2, 3.2, -8.8))
    ends = [found_for(card, one)[2] for one in (first, last)]
    assert part[f"profile_{roll}_roll"] == pytest.approx(max(end[f"profile_{roll}_roll"] for end in ends), rel=1e-9)
    assert ends[0][f"profile_{roll}_roll"] != pytest.approx(ends[1][f"profile_{roll}_roll"], rel=1e-3)
    assert part["profile_climb_slope"] >= max(end["profile_climb_slope"] for end in ends) - 1e-12 or roll == "landing"


@CARDS
def test_the_braked_roll_begins_after_the_approach_and_the_free_roll(card: Card) -> None:
    """By the chain's own distances on level ground; an obstacle on the approach moves it on by what it takes."""
    profile = read_profile("0:0, 330:0, 420:-3, 900:1")
    for more in ({}, {"approach_obstacle_height": 80.0, "approach_obstacle_distance": 250.0}):
        chain, values, found = found_for(card, profile, 0.0, **more)
        level = {**values, **dict.fromkeys(KEYS, math.nan), "slope_given": 0.0}
        place = sum(step(chain, level, key) for key in ("landing_air", "free_roll"))
        lost = profile.length - step(chain, level, "landing_available")
        assert (lost > 20.0) == bool(more)
        start, square, wind, speed = (step(chain, level, key) for key in ("braked_start", "braked_square", "landing_wind",
                                                                          "touchdown_tas"))  # fmt: skip
        assert found["profile_approach_slope"] == pytest.approx(0.0, abs=1e-12)
        truth = roll_of(law_of(start, square, wind, -1.0), profile, speed, wind, lost + place)
        assert found["profile_landing_roll"] == pytest.approx(truth, rel=1e-9)


@CARDS
def test_ground_that_falls_under_the_approach_counts(card: Card) -> None:
    """Steep below the threshold, level where it comes down: the chain's air distance on that slope, and no less."""
    profile = read_profile("0:0, 200:-8, 1000:-8")
    chain, values, found = found_for(card, profile)
    assert found["profile_approach_slope"] == pytest.approx(-0.04)
    level = {**values, **dict.fromkeys(KEYS, math.nan), "slope_given": found["profile_approach_slope"]}
    assert step(chain, level, "landing_air") > 200.0  # so that all of the fall is passed in the air
    assert found["profile_landing_slope"] == pytest.approx(0.0, abs=1e-12)


@given(profile=profiles(), share=st.floats(0.0, 1.2), on=st.floats(0.0, 1.0))
def test_no_ground_lies_outside_of_what_is_seen(profile: Profile, share: float, on: float) -> None:
    """Between a place and the end of a profile, or another place, by heights read off the profile."""
    place = share * profile.length
    until = place + on * max(profile.length - place, 0.0)
    tracks, at = tracks_of([profile]), np.array([place])
    climb, fall = float(steepest_climb(tracks, at)[0]), float(steepest_fall(tracks, at)[0])
    near = float(steepest_fall(tracks, at, until)[0])
    assert fall <= near + 1e-12
    height = float(np.interp(place, profile.distances, profile.heights))
    for ahead in np.linspace(place, profile.length, 40)[1:] if place < profile.length - 1e-3 else ():
        slope = (float(np.interp(ahead, profile.distances, profile.heights)) - height) / (ahead - place)
        assert fall - 1e-6 <= slope <= climb + 1e-6
        assert ahead > until or slope >= near - 1e-6
    if place >= profile.length:
        assert climb == fall == near == pytest.approx(profile.slopes[-1], abs=1e-9)


def test_beyond_the_last_point_the_slope_goes_on() -> None:
    assert roll_of(law_of(1.0, 0.0), read_profile("0:0, 100:3"), 0.0, 30.0) == pytest.approx(
        0.5 * 30.0**2 / (1.0 - G * math.sin(math.atan(0.03))), rel=1e-12
    )


def test_the_least_acceleration_counts_where_it_is_met() -> None:
    """A part that is left before the speed at which it would hold the aeroplane does not count, one that is not does."""
    law = law_of(2.0, -0.0005)  # on 15 % it gains 0.55 m/s2 at rest and nothing at 33 m/s
    assert roll_of(law, read_profile("0:0, 40:6, 1400:6"), 0.0, 36.0) > 200.0
    assert math.isnan(roll_of(law, read_profile("0:0, 1300:195, 1400:195"), 0.0, 36.0))
    for share, rolls in ((0.0201, True), (0.0199, False)):
        slope = math.tan(math.asin((2.0 - share * G) / G))
        profile = Profile((0.0, 100.0, 110.0, 800.0), (0.0, 0.0, 10.0 * slope, 10.0 * slope))
        assert math.isnan(roll_of(law_of(2.0, 0.0), profile, 0.0, 30.0)) != rolls


def test_no_equivalent_slope_where_the_run_on_it_would_not_accelerate() -> None:
    """A ramp of 10 %, then the level, where 0.27 m/s2 is left at lift-off: the run is longer than on any slope that would do.

    On the steepest slope that there is for a roll, 2 % of g is left.
    """
    profile, law, lift_off = read_profile("0:0, 240:25, 900:25"), law_of(2.3, -0.0027), np.array([27.4])
    roll = roll_of(law, profile, 0.0, 27.4)
    cap = math.tan(math.asin((2.3 - 0.0027 * 27.4**2 - 0.02 * G) / G))
    longest = float(ground_run.speed_run(2.3 - G * math.sin(math.atan(cap)), -0.0027, 0.0, 27.4))
    assert 1.05 * longest < roll
    tracks, rest = tracks_of([profile]), np.array([0.0])
    assert math.isnan(equivalent_slope(law, tracks, np.array([roll]), rest, lift_off)[0])
    assert equivalent_slope(law, tracks, np.array([longest]), rest, lift_off)[0] == pytest.approx(cap, abs=1e-9)
