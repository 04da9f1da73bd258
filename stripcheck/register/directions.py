"""A runway list as the assessment needs it: one entry for each direction in which a runway can be used."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from stripcheck.profile import Profile

NUMBER_KEYS = (
    "source_row", "length", "tora", "lda", "width", "elevation_start", "elevation_end", "elevation_field",
    "slope_given", "local_slope", "heading", "obstacle_height", "obstacle_distance",
    "approach_obstacle_height", "approach_obstacle_distance", "temperature", "qnh", "wind_from", "wind_speed",
)  # fmt: skip

TEXT_KEYS = (
    "strip", "name", "runway", "direction", "pair", "surface_given", "surface", "condition", "land_here",
    "take_off_here", "survey_date", "notes", "fault",
)  # fmt: skip


class LeftOut(NamedTuple):
    """A runway that is left out, or a doubt about one that is kept.

    ``row``: row in the list. ``strip``, ``runway``: which one. ``what``: short kind ("closed", "helipad",
    "surface not known"...), the same for all runways of that kind. ``reason``: a sentence.
    """

    row: int
    strip: str
    runway: str
    what: str
    reason: str


@dataclass
class Directions:
    """Runway directions, two for each runway: the even entries begin at end 1, the odd ones at end 2.

    ``n``: number of directions. ``numbers``: arrays of n, SI, NaN = missing:

    - source_row: row in the list
    - length [m]: physical length; tora [m]: usable for take-off; lda [m]: usable for landing
    - width [m]
    - elevation_start, elevation_end [m]: at the end where the direction begins, and at the other;
      elevation_field [m]
    - slope_given [fraction]: + = rising in this direction; local_slope [fraction, >= 0]
    - heading [rad, true]
    - obstacle_height, obstacle_distance [m]: beyond the far end, met in a take-off
    - approach_obstacle_height, approach_obstacle_distance [m]: before the end where the direction begins, passed in a
      landing. Heights are above, and distances from, that end of the runway. A displaced threshold is not added to
      the distance, which errs on the near side
    - temperature [K], qnh [Pa], wind_from [rad, true], wind_speed [m/s]

    ``texts``: lists of n: strip, name, runway ("09/27"), direction ("09"), pair (key of the runway, never
    twice), surface_given (as spelt), surface (table word or ""), condition ("", "dry", "wet", "soft" or as
    given), land_here and take_off_here ("yes" or "no"), survey_date, notes, fault ("" or why the row can't be
    assessed).

    ``carried``: columns that are not understood, header -> n values as read. ``left_out``: runways that are
    not strips for aeroplanes, each once. ``doubts``: what is missing or worked out in the runways that are
    kept. ``source``: name of the file. ``rows_read``: runways in the list; always ``rows_read ==
    len(left_out) + n / 2``. ``profiles``: slope profile of each direction, from the end where it begins, None where the
    list has none or none that can be used. ``positions``: latitude and longitude [rad] of the end where each direction
    begins, shape (n, 2), else of the airfield, NaN where neither is told.
    """

    n: int
    numbers: dict[str, NDArray[np.float64]]
    texts: dict[str, list[str]]
    carried: dict[str, list[object]]
    left_out: list[LeftOut]
    doubts: list[LeftOut]
    source: str
    rows_read: int
    profiles: list[Profile | None] = field(default_factory=list)
    positions: NDArray[np.float64] = field(default_factory=lambda: np.empty((0, 2)))


def unknown_surfaces(directions: Directions) -> list[tuple[str, int]]:
    """Spellings of surface that could not be read, with the number of runways [-], the most frequent first.

    >>> texts = {"surface": ["", "", "grass", "grass"], "surface_given": ["X", "X", "turf", "turf"]}
    >>> unknown_surfaces(Directions(4, {}, texts, {}, [], [], "", 2))
    [('X', 1)]
    """
    pairs = zip(directions.texts["surface"][::2], directions.texts["surface_given"][::2], strict=True)
    return Counter(given for word, given in pairs if not word).most_common()
