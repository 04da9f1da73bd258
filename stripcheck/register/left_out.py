"""Runways in a list that are no strips for an aeroplane on wheels: closed, helicopter pads, water."""

from __future__ import annotations

import numpy as np

from stripcheck.register.runway_ends import is_helipad
from stripcheck.register.runways import Runways, closed_cells
from stripcheck.register.surface_words import Surface

PAD_LENGTH = 60.0  # [m] common practice, no source
PAD_SQUARE = 0.20  # [fraction of the length] within which length and width count as about equal

Reason = tuple[str, str]


def reasons_to_leave_out(runways: Runways, surfaces: list[Surface], types: list[str]) -> list[Reason | None]:
    """Kind and sentence for each runway that is left out, None for one that is kept.

    ``surfaces``: of each runway; ``types``: type of its airfield in the airports file, "" = not known. The
    rule, the first that fits: the list or the airports file says closed; the surface, the type or a name such
    as H1 says helicopter pad; an area under 60 m that is about square and whose ends have no names is a pad;
    the surface is water.
    """
    closed = closed_cells(runways)
    small = _small_squares(runways)
    reasons: list[Reason | None] = []
    for index, surface in enumerate(surfaces):
        ends = runways.first[index], runways.second[index]
        reason: Reason | None = None
        if closed[index]:
            reason = ("closed", "the list says that the runway is closed")
        elif types[index] == "closed":
            reason = ("closed", "the airports file says that the airfield is closed")
        elif surface.word == "helipad":
            reason = ("helipad", "the surface is a roof, a deck or a helicopter pad")
        elif types[index] == "heliport":
            reason = ("helipad", "the airports file says that it is a heliport")
        elif is_helipad(*ends):
            reason = ("helipad", "the runway has the name of a helicopter pad")
        elif small[index] and not runways.named[index]:
            reason = ("helipad", "it is a small square without runway names")
        elif surface.word == "water":
            reason = ("water", "the surface is water")
        reasons.append(reason)
    return reasons


def _small_squares(runways: Runways) -> list[bool]:
    """Whether each area is under 60 m long and about as wide; its length is not a runway's, and so was kept apart."""
    length, width = runways.sizes["length"], runways.sizes["width"]
    return list((length < PAD_LENGTH) & (np.abs(length - width) <= PAD_SQUARE * length))
