"""The result of reading a list. The strips are invented."""

from __future__ import annotations

from collections.abc import Callable

from stripcheck.register import Directions, unknown_surfaces

Read = Callable[..., Directions]


def test_unknown_surfaces_are_counted_by_runway(read: Read) -> None:
    strips = read("Strip,Length,Surface\nA,600,X\nB,600,turf\nC,600,X\nD,600,\n")
    assert unknown_surfaces(strips) == [("X", 2), ("", 1)]
