"""The ground under the wheels: rolling and braking coefficients by surface and condition.

One table, editable in every filled workbook. *Rolling* is the friction coefficient of free wheels in the take-off
run; *braking* that of braked wheels in the landing roll. Soft ground costs a take-off its rolling drag, but a landing
is never credited with it: the braking coefficient of soft ground is that of the wet surface or less, because a soft
patch may be anywhere or nowhere.

References
----------
[1] W. H. Mason, notes to his take-off program, Virginia Tech: dry concrete or asphalt 0.02, hard turf or gravel 0.04,
    short dry grass 0.05, long grass 0.10, soft ground 0.10 to 0.30; braking 0.20 to 0.40, good 0.30 to 0.35.
[2] Tables of rolling and braking coefficients in D. P. Raymer, Aircraft Design, and J. D. Anderson, Aircraft
    Performance and Design (from memory): dry concrete 0.03 to 0.05 and 0.3 to 0.5; wet concrete 0.05 and 0.15 to 0.3;
    ice 0.02 and 0.06 to 0.10; hard turf 0.05 and 0.4; firm dirt 0.04 and 0.3; soft turf 0.07 and 0.2; wet grass 0.08
    and 0.2.
[3] Common practice, no source: a figure between its neighbours in [1] and [2], on the careful side.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

SURFACES = ("paved", "gravel", "dirt", "grass", "long grass", "sand", "snow", "ice")
CONDITIONS = ("dry", "wet", "soft")
REFERENCE_GROUND = "paved, dry"  # what a flight manual's tables stand for


@dataclass(frozen=True)
class Ground:
    """One surface in one condition: coefficients [-] and where they come from; NaN where none is known."""

    surface: str
    condition: str
    rolling: float
    braking: float
    source: str

    @property
    def name(self) -> str:
        """The name that the sheets use, such as ``"grass, wet"``."""
        return f"{self.surface}, {self.condition}"


_NONE = math.nan
_ROWS = (
    ("paved", "dry", 0.03, 0.35, "[1] and [2]"),
    ("paved", "wet", 0.05, 0.20, "[2]"),
    ("paved", "soft", _NONE, _NONE, "a paved surface is not soft: say what the ground is"),
    ("gravel", "dry", 0.04, 0.30, "[1]"),
    ("gravel", "wet", 0.05, 0.25, "[3]"),
    ("gravel", "soft", 0.12, 0.20, "[1], soft ground; braking [3]"),
    ("dirt", "dry", 0.04, 0.30, "[2], firm dirt"),
    ("dirt", "wet", 0.07, 0.18, "[3]"),
    ("dirt", "soft", 0.15, 0.18, "[1], soft ground; braking [3]"),
    ("grass", "dry", 0.05, 0.30, "[1], short dry grass; braking [1]"),
    ("grass", "wet", 0.08, 0.20, "[2], wet grass"),
    ("grass", "soft", 0.15, 0.20, "[1], soft ground; braking [2], soft turf"),
    ("long grass", "dry", 0.10, 0.25, "[1], long grass; braking [3]"),
    ("long grass", "wet", 0.12, 0.18, "[3]"),
    ("long grass", "soft", 0.20, 0.18, "[1], soft ground; braking [3]"),
    ("sand", "dry", 0.10, 0.20, "[1], soft ground at its firmest; braking [3]"),
    ("sand", "wet", 0.12, 0.18, "[3]"),
    ("sand", "soft", 0.25, 0.18, "[1], soft ground; braking [3]"),
    ("snow", "dry", _NONE, _NONE, "no figures: depth and temperature decide"),
    ("snow", "wet", _NONE, _NONE, "no figures: depth and temperature decide"),
    ("snow", "soft", _NONE, _NONE, "no figures: depth and temperature decide"),
    ("ice", "dry", 0.02, 0.06, "[2]"),
    ("ice", "wet", 0.02, 0.04, "[3]"),
    ("ice", "soft", _NONE, _NONE, "no figures: ice is not soft"),
)

GROUNDS = tuple(Ground(*row) for row in _ROWS)
GROUND_NAMES = tuple(ground.name for ground in GROUNDS)


def ground(surface: str, condition: str) -> Ground:
    """Row of the table, coefficients [-], for a surface and a condition. Raises ValueError for words not in the table.

    >>> ground("grass", "wet").rolling
    0.08
    """
    return GROUNDS[SURFACES.index(surface) * len(CONDITIONS) + CONDITIONS.index(condition)]
