"""The result of reading a list. The strips are invented."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from stripcheck.register import Directions, unknown_surfaces

Read = Callable[..., Directions]


def test_a_profile_is_turned_for_the_other_direction(read: Read) -> None:
    strips = read('Strip,Runway,Length,Profile\nA,09/27,450,"0:0, 200:3.5, 450:12"\nB,18/36,600,\n')
    assert [str(profile) for profile in strips.profiles] == ["0:0, 200:3.5, 450:12", "0:0, 250:-8.5, 450:-12", "None", "None"]


@pytest.mark.parametrize(("text", "told"), [("0:0/450:9", True), ("0 m:0 m/450 m:9 m", False)])
def test_metres_of_a_profile_are_told_when_taken_for_granted(read: Read, text: str, told: bool) -> None:
    strips = read(f"Strip,Runway,Length [m],Profile\nA,09/27,450,{text}\n")
    reasons = [doubt.reason for doubt in strips.doubts if doubt.what == "unit not named"]
    assert reasons == (['the column "Profile" has points without units: heights too are in m'] if told else [])


def test_profiles_of_runways_that_are_left_out_are_left_out(read: Read) -> None:
    strips = read("Strip,Runway,Length,Closed,Profile\nA,09/27,600,yes,0:0/600:6\nB,09/27,500,,0:0/500:5\n")
    assert [profile.length for profile in strips.profiles if profile] == [500.0, 500.0]
    assert len(read("Strip,Length\nA,600\n").profiles) == 2


def test_a_profile_that_can_t_be_read_is_a_fault_of_the_row(read: Read) -> None:
    strips = read("Strip,Length,Profile\nA,600,uphill\nB,600,n/a\n")
    assert strips.texts["fault"][0].startswith('column "Profile": "uphill" is not a point of a profile; write distance:height')
    assert strips.texts["fault"][2] == "" and strips.profiles == [None] * 4


def test_unknown_surfaces_are_counted_by_runway(read: Read) -> None:
    strips = read("Strip,Length,Surface\nA,600,X\nB,600,turf\nC,600,X\nD,600,\n")
    assert unknown_surfaces(strips) == [("X", 2), ("", 1)]
