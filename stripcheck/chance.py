"""The chance of needing more than the strip has: what is not known exactly, carried through the chain.

Temperature, wind, slope, mass, surface and technique each have a standard error. A fixed sample of normal deviates, the
same for each row and in every run, is sent through the chain, and the share of it that does not fit is the chance. It is
about what happens, so that no safety factor counts and the wind is the actual one along the strip, ahead and behind in
full; the chain's own limit to half of flying speed stays. Where the rule set's published corrections govern the unfactored
distance, they govern here.

It stands beside the margin, never instead of it: it knows nothing of mistakes, gusts or a failing engine.

References
----------
[1] Halton's sequence, not scrambled, in the bases 2, 3, 5, 7, 11 and 13; then each dimension by rank, so that every
    single error is spread evenly (as in Latin hypercube sampling). Texts on quasi-Monte Carlo methods.
[2] Inverse of the normal distribution: Python's statistics.NormalDist.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from functools import cache
from math import floor, log10
from statistics import NormalDist
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck import links
from stripcheck.assessment import Result, prepare
from stripcheck.card import Card
from stripcheck.chain import Chain, Input, evaluate
from stripcheck.day import Day
from stripcheck.errors import InputError
from stripcheck.numeric import Number
from stripcheck.rules import Rules
from stripcheck.solve import SIDES, verdict_words, wind_along
from stripcheck.units import to_si
from stripcheck.verdict import NOT_ASSESSED

Array = NDArray[Any]

POINTS = 1024  # of the sample; the chance is then good to about 0.01
BASES = (2, 3, 5, 7, 11, 13)
AT_ONCE = 400_000  # rows times points in one go, which bounds the memory to some 100 MB
_CENTRES = ("air_temperature", "headwind", "takeoff_slope", "landing_slope")
_ERROR = Input("surface_error", "Error of the surface friction", "", "strip")


@dataclass(frozen=True)
class Errors:
    """Standard errors of what goes in. The usual values are common practice, no source.

    ``temperature`` [K] of the air at the strip; ``wind`` [m/s] along the strip; ``slope`` [-]; ``mass`` [-], relative;
    ``surface`` [-], relative, of the friction: more for rolling wheels is less for braked ones; ``technique`` [-],
    relative, of the distance. Relative errors multiply as often as they divide. Raises InputError for one that is negative
    or no number.
    """

    temperature: float = 3.0
    wind: float = to_si(3.0, "kt")
    slope: float = 0.005
    mass: float = 0.02
    surface: float = 0.20
    technique: float = 0.05

    def __post_init__(self) -> None:
        for field in fields(self):
            value = getattr(self, field.name)
            if not 0.0 <= value < np.inf:
                raise InputError(f"standard error of {field.name} = {value}: 0 or more is expected")


@dataclass(frozen=True)
class Chance:
    """Chance [-] of needing more than the strip has, by row; NaN where a side is not assessed."""

    takeoff: Array
    landing: Array
    points: int

    def texts(self, side: str) -> list[str]:
        """The chances of a side, "takeoff" or "landing", in words."""
        return [in_words(value, self.points) for value in {"takeoff": self.takeoff, "landing": self.landing}[side].tolist()]


def chance(strips: Mapping[str, Any], card: Card | str, day: Day | Mapping[str, Any], rules: Rules | str = "manual-only", *,
           errors: Errors | None = None, points: int = POINTS, **loading: Any) -> Chance:  # fmt: skip
    """The chance, for each row, that the unfactored distance is longer than the strip, or that the run never ends.

    ``errors``: the usual ones where none are given; ``points`` of the sample. A take-off must lift off, climb and reach
    50 ft within the length usable for it; a landing must stop within what the obstacle on the approach leaves of the
    length usable for it. An assumed slope, and the one that stands for a slope profile, have the error of any slope.
    Other arguments and errors as for ``assess``.

    >>> strip = {"tora": [150.0, 1000.0], "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"}
    >>> chance(strip, "ridge-runner", {"temperature": 22}, takeoff_mass=950).texts("takeoff")
    ['nearly certain', 'under 1 in 1,000']
    """
    return chance_of(prepare(strips, card, day, rules, **loading), errors, points)


def chance_of(case: Result, errors: Errors | None = None, points: int = POINTS) -> Chance:
    """The chance for what `prepare` gives. Raises InputError for a sample without points."""
    if points < 1:
        raise InputError(f"a sample of {points} points can't be right; 1 or more is expected")
    known = {side: case.si(f"{side}_known") & (_verdicts(case, side) != NOT_ASSESSED) for side in SIDES}
    deviates, spread = _deviates(points), errors or Errors()
    shares = {side: np.full(case.size, np.nan) for side in known}
    chain, rows = _uncertain(case.chain), max(AT_ONCE // points, 1)
    for start in range(0, case.size, rows):
        block = slice(start, min(start + rows, case.size))
        for side, fails in _failures(case, chain, block, deviates, spread).items():
            shares[side][block] = fails.reshape(-1, points).mean(axis=1)
    takeoff, landing = (np.where(known[side], shares[side], np.nan) for side in SIDES)
    return Chance(takeoff, landing, points)


def _verdicts(case: Result, side: str) -> Array:
    return np.asarray(np.array(verdict_words(case, side))[case.si(f"{side}_finding") - 1])


@cache
def _deviates(points: int) -> Array:
    """Normal deviates, one row for each error. Sources: [1], [2].

    >>> sample = _deviates(1024)
    >>> sample.shape, bool(np.abs(sample.mean(axis=1)).max() < 1e-9), bool(np.abs(sample.std(axis=1) - 1.0).max() < 1e-3)
    ((6, 1024), True, True)
    """
    ranks = np.array([np.argsort(np.argsort(_radical_inverse(points, base))) for base in BASES])
    evenly = np.array([NormalDist().inv_cdf((place + 0.5) / points) for place in range(points)])
    return np.asarray(evenly[ranks])


def _radical_inverse(points: int, base: int) -> Array:
    """The numbers 1, 2, ... with their digits in a base mirrored behind the point. Source: [1].

    >>> _radical_inverse(4, 2)
    array([0.5  , 0.25 , 0.75 , 0.125])
    """
    number, share, place = np.arange(1, points + 1), np.zeros(points), 1.0
    while number.any():
        place /= base
        share += place * (number % base)
        number = number // base
    return share


def _failures(case: Result, chain: Chain, block: slice, deviates: Array, errors: Errors) -> dict[str, Array]:
    """Whether each row of a block, at each point of the sample in turn, needs more than the strip has, by side."""
    points, columns = deviates.shape[1], _columns(case)
    base = {key: np.repeat(case.si(key)[block], points) for key in _CENTRES}
    given = {key: np.repeat(value[block], points) if key in columns else value for key, value in case.given.items()}
    off = {field.name: np.tile(deviate, len(base["headwind"]) // points) * getattr(errors, field.name)
           for field, deviate in zip(fields(errors), deviates, strict=True)}  # fmt: skip
    slopes = {f"profile_{side}_slope": np.clip(base[f"{side}_slope"] + off["slope"], *links.SLOPES) for side in SIDES}
    changed = {
        **given, **slopes, **wind_along(base["headwind"] + off["wind"]),
        "own_temperature": np.clip(base["air_temperature"] + off["temperature"], *links.TEMPERATURES),
        **{f"mass_{side}": given[f"mass_{side}"] * np.exp(off["mass"]) for side in SIDES},
        "headwind_credit": 1.0, "tailwind_count": 1.0, "surface_error": np.exp(off["surface"]),
    }  # fmt: skip
    found = evaluate(chain, changed, ("takeoff_distance", "landing_distance", "landing_available"))
    share = np.exp(off["technique"])
    fits = {"takeoff": found["takeoff_distance"] * share <= changed["tora"],
            "landing": found["landing_distance"] * share <= found["landing_available"]}  # fmt: skip
    return {side: ~fit for side, fit in fits.items()}


def _columns(case: Result) -> set[str]:
    """Keys of the inputs that have one value for each row."""
    tables = {item.key for item in case.chain.inputs if item.kind == "range"}
    return {key for key, value in case.given.items() if np.ndim(value) and key not in tables}


def _uncertain(chain: Chain) -> Chain:
    """The chain with the friction of each row multiplied by an error of its own; for braked wheels divided by it."""
    changes = {"rolling": _rolling_off, "braking": _braking_off}
    steps = [replace(step, function=changes[step.key], inputs=(*step.inputs, _ERROR.key)) if step.key in changes else step
             for step in chain.steps]  # fmt: skip
    return Chain((*chain.inputs, _ERROR), tuple(steps))


def _rolling_off(column: Number, row: Number, error: Number) -> Number:
    return links.from_table(column, row) * error


def _braking_off(column: Number, row: Number, error: Number) -> Number:
    return links.from_table(column, row) / error


def in_words(share: float, points: int = POINTS) -> str:
    """A chance [-], found with so many points, in words; NaN is "not assessed".

    >>> [in_words(share) for share in (0.0, 0.003, 0.04, 0.34, 0.97, 1.0, np.nan)]
    ['under 1 in 1,000', 'about 1 in 300', 'about 1 in 20', 'about 3 in 10', 'over 9 in 10', 'nearly certain', 'not assessed']
    """
    if np.isnan(share):
        return NOT_ASSESSED
    if share == 0.0:
        return f"under 1 in {_one_digit(points):,}"
    if share == 1.0:
        return "nearly certain"
    if share > 0.95:
        return "over 9 in 10"
    return f"about {round(10.0 * share)} in 10" if share >= 0.15 else f"about 1 in {_one_digit(1.0 / share):,}"


def _one_digit(value: float) -> int:
    """A number to its first digit, not above itself, so that a chance never looks smaller than it is."""
    scale = 10 ** max(floor(log10(value) + 1e-12), 0)
    return int(floor(value / scale + 1e-9) * scale)
