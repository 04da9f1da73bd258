"""Slope profiles as texts: what is read, what is refused, and the profile as met from the other end."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck.errors import InputError
from stripcheck.profile import Profile, check_length, profile_column, read_profile

HILL = Profile((0.0, 200.0, 450.0), (0.0, 3.5, 12.0))


@st.composite
def profiles(draw: st.DrawFn) -> Profile:
    """Profiles of one to six parts, each 10 to 300 m long and of -15 to +15 %."""
    parts = draw(st.lists(st.tuples(st.integers(10, 300), st.integers(-150, 150)), min_size=1, max_size=6))
    distances, heights = [0.0], [0.0]
    for length, slope in parts:
        distances.append(distances[-1] + length)
        heights.append(heights[-1] + length * slope / 1000.0)
    return Profile(tuple(distances), tuple(heights))


@pytest.mark.parametrize(
    "text",
    [
        "0:0, 200:3.5, 450:12",
        " 0 : 0 ;200 m: 3.5 ;450:12 m;",
        "0:0 / 200:3,5 / 450:12",
        "0 m: 0 ft, 200:11.48294 ft, 1476.378 ft: 39.370079 ft",
        "0:0,200:3.5,0.45 km:12",
    ],
)
def test_texts_that_are_read(text: str) -> None:
    """Feet by the foot of 0.3048 m, given to seven digits and so to 1e-6."""
    profile = read_profile(text)
    assert profile.distances == pytest.approx(HILL.distances, rel=1e-6)
    assert profile.heights == pytest.approx(HILL.heights, rel=1e-6)


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("0:0", "has 2 to 30 points, this one has 1"),
        (",", "has 2 to 30 points, this one has 0"),
        (", ".join(f"{10 * i}:0" for i in range(31)), "has 2 to 30 points, this one has 31"),
        ("5:0, 200:3", "begins with 0:0, this one with 5:0"),
        ("0:350, 200:353", "begins with 0:0, this one with 0:350"),
        ("0:0, 200:3, 200:4", "must rise from point to point; 200 m comes after 200 m"),
        ("0:0, 200:3, 150:4", "must rise from point to point; 150 m comes after 200 m"),
        ("0:0, 100:30.1", "has 30.1% of slope between 0 m and 100 m, more than 30%"),
        ("0:0, 100:2, 110:-2", "has -40.0% of slope between 100 m and 110 m"),
        ("0:0, 200:3,5", '"5" is not a point of a profile; write distance:height with a decimal point'),
        ("0:0, 200:3:4", '"200:3:4" is not a point'),
        ("0:0, 200:", '"200:" is not a point'),
        ("0:0, 200 kg:3", '"200 kg:3" is not a point'),
        ("0:0, far:3", '"far:3" is not a point'),
        ("0:0, nan:3", '"nan:3" is not a point'),
        ("0:0, 1e999:3", '"1e999:3" is not a point'),
    ],
)
def test_texts_that_are_refused(text: str, sentence: str) -> None:
    with pytest.raises(InputError) as caught:
        read_profile(text)
    assert sentence in str(caught.value)


def test_a_slope_of_30_per_cent_is_the_last_that_is_read() -> None:
    assert read_profile("0:0, 100:30, 200:0").steepest == pytest.approx(0.30, rel=1e-14)


def test_points_by_hand() -> None:
    """12 m over 450 m; 3.5 over 200 and 8.5 over 250; from the other end the last part first, and downhill."""
    assert HILL.length == 450.0 and HILL.mean_slope == pytest.approx(12.0 / 450.0)
    assert HILL.slopes == pytest.approx((0.0175, 0.034)) and HILL.steepest == pytest.approx(0.034)
    assert HILL.reversed() == Profile((0.0, 250.0, 450.0), (0.0, -8.5, -12.0))


@given(profiles())
def test_the_other_end_and_back(profile: Profile) -> None:
    """Slopes change sign and order; twice is no change, to rounding."""
    other = profile.reversed()
    assert other.slopes == pytest.approx([-slope for slope in profile.slopes[::-1]], abs=1e-12)
    assert other.reversed().distances == pytest.approx(profile.distances, rel=1e-12)
    assert other.reversed().heights == pytest.approx(profile.heights, abs=1e-9)


@given(profiles())
def test_text_and_back(profile: Profile) -> None:
    """To the micrometre that the text keeps."""
    back = read_profile(str(profile))
    assert back.distances == pytest.approx(profile.distances, abs=1e-6)
    assert back.heights == pytest.approx(profile.heights, abs=1e-6)


def test_points_on_a_straight_line_are_left_out() -> None:
    assert read_profile("0:0, 100:1, 250:2.5, 450:4.5").without_straight_points() == Profile((0.0, 450.0), (0.0, 4.5))
    assert HILL.without_straight_points() == HILL
    bent = read_profile("0:0, 100:1, 200:2, 300:5, 400:8")
    assert bent.without_straight_points() == Profile((0.0, 200.0, 400.0), (0.0, 2.0, 8.0))


@given(profiles())
def test_straight_points_change_no_height(profile: Profile) -> None:
    """Within the tolerance of slope, 1e-9, over the longest profile."""
    kept = profile.without_straight_points()
    assert np.interp(profile.distances, kept.distances, kept.heights) == pytest.approx(profile.heights, abs=1e-5)


@pytest.mark.parametrize(
    ("length", "usable", "fits"),
    [(450, 450, True), (459, 300, True), (461, 300, False), (441, 400, True), (439, 400, False), (math.nan, 300, True),
     (math.nan, 461, False), (math.nan, math.nan, True)],
)  # fmt: skip
def test_a_profile_reaches_from_end_to_end(length: float, usable: float, fits: bool) -> None:
    """Within 10 m on a short strip; where only a usable length is known, the strip may well be longer than that."""
    if fits:
        check_length(HILL, length, usable)
    else:
        with pytest.raises(InputError, match="ends at 450 m but the strip at"):
            check_length(HILL, length, usable)


def test_two_per_cent_of_a_long_strip() -> None:
    check_length(Profile((0.0, 981.0), (0.0, 9.0)), 1000.0, 1000.0)
    with pytest.raises(InputError, match="ends at 979 m but the strip at 1000 m"):
        check_length(Profile((0.0, 979.0), (0.0, 9.0)), 1000.0, 1000.0)


def test_columns() -> None:
    column = [str(HILL), None, "", " ", math.nan, HILL]
    lengths = np.full(6, 450.0)
    assert profile_column(column, lengths, lengths) == [HILL, None, None, None, None, HILL]
    assert profile_column(str(HILL), lengths[:2], lengths[:2]) == [HILL, HILL]
    assert profile_column(HILL, lengths[:1], lengths[:1]) == [HILL]
    assert profile_column(None, lengths[:2], lengths[:2]) == [None, None]


@pytest.mark.parametrize(
    ("column", "sentence"),
    [
        (["", "0:0"], "strips: profile, row 2: a profile has 2 to 30 points"),
        (["", "0:0, 600:3"], "strips: profile, row 2: the profile ends at 600 m but the strip at 450 m"),
        (["", 3.0], "strips: profile, row 2: 3.0 is not a profile; write a text such as"),
    ],
)
def test_columns_that_are_refused(column: list[object], sentence: str) -> None:
    with pytest.raises(InputError) as caught:
        profile_column(column, [450.0, 450.0], [450.0, 450.0])
    assert str(caught.value).startswith(sentence)


def test_points_that_are_no_profile() -> None:
    with pytest.raises(InputError, match="a distance and a height at every point"):
        Profile((0.0, 100.0), (0.0, 1.0, 2.0))
    with pytest.raises(InputError, match="a distance and a height at every point"):
        Profile((0.0, 100.0), (0.0, math.nan))
