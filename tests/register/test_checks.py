"""Values of a runway that contradict each other. The strips are invented."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from stripcheck.register import Directions

Read = Callable[..., Directions]


def test_ends_that_differ_too_much(read: Read) -> None:
    strips = read("Strip,Runway,Length,Elevation 1 [m],Elevation 2 [m]\nA,09/27,600,100,281\nB,09/27,600,100,279\n")
    assert "differ by more than 30 %" in strips.texts["fault"][0]
    assert strips.texts["fault"][2] == ""


@pytest.mark.parametrize(("displaced", "faulty"), [("599", False), ("600", True), ("601", True)])
def test_a_threshold_lies_within_the_runway(read: Read, displaced: str, faulty: bool) -> None:
    strips = read(f"Strip,Runway,Length,Displaced threshold 2\nA,09/27,600,{displaced}\n")
    assert ("lies beyond the other end" in strips.texts["fault"][0]) == faulty
    assert strips.numbers["lda"].tolist()[0] == 600.0
    assert str(strips.numbers["lda"].tolist()[1]) == ("nan" if faulty else "1.0")


PROFILE = '"0:0, 200:3.5, 450:12"'


@pytest.mark.parametrize(
    ("columns", "cells", "fault"),
    [
        ("Length", "450", ""),
        ("Length", "460", ""),
        ("Length", "440", ""),
        ("Length", "461", "the profile ends at 450 m but the strip at 461 m"),
        ("Length", "439", "the profile ends at 450 m but the strip at 439 m"),
        ("TORA", "300", ""),
        ("TORA", "480", "the profile ends at 450 m but the strip at 480 m"),
        ("Length,Slope", "450,2.7", ""),
        ("Length,Slope", "450,-2.7", "rises by 2.7% from end to end, but the slope by -2.7%"),
        ("Length,Elevation 1 [m],Elevation 2 [m]", "450,300,312", ""),
        ("Length,Elevation 1 [m],Elevation 2 [m]", "450,312,300", "but the elevations of the ends by -2.7%"),
    ],
)
def test_a_profile_agrees_with_the_rest(read: Read, columns: str, cells: str, fault: str) -> None:
    strips = read(f"Strip,Runway,Strip profile,{columns}\nA,09/27,{PROFILE},{cells}\n")
    assert strips.texts["fault"][0].startswith('column "Strip profile": ' if fault else "")
    assert fault in strips.texts["fault"][0] and bool(fault) == bool(strips.texts["fault"][0])
    assert [profile is None for profile in strips.profiles] == [bool(fault)] * 2


@pytest.mark.parametrize(
    ("land", "leave", "one_way", "faulty"),
    [("09", "27", "yes", False), ("09", "", "yes", True), ("", "27", "yes", True), ("09", "", "", False)],
)
def test_a_one_way_strip_says_both_ways(read: Read, land: str, leave: str, one_way: str, faulty: bool) -> None:
    strips = read(f"Strip,Runway,Length,Land on,Leave by,One-way\nA,09/27,600,{land},{leave},{one_way}\n")
    assert bool(strips.texts["fault"][0]) == faulty
