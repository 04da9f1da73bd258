"""Ground runs along slope profiles, and the constant slope that stands for a profile.

A run is followed part by part: within a part the law of acceleration is the chain's own, and the speed at its end is
the one at which the chain's own sum for the run gives the part's length. The *equivalent slope* is then the constant
slope on which the chain's run is as long. It depends on the aeroplane and the day as the run does.

Beyond the last point of a profile the slope of its last part goes on.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck import ground_run
from stripcheck.atmosphere import G0
from stripcheck.chain import Chain, evaluate
from stripcheck.numeric import Number
from stripcheck.profile import Profile
from stripcheck.thrust import disk_root

Array = NDArray[np.float64]

KEYS = ("profile_takeoff_slope", "profile_takeoff_roll", "profile_landing_slope", "profile_landing_roll",
        "profile_takeoff_usable", "profile_landing_usable", "profile_climb_slope", "profile_approach_slope")  # fmt: skip
SAME_LENGTH = 1e-9  # of a part's length, or metres: what the speed at its end may be off by
SAME_ROLL = 1e-10  # of a roll: what the roll on the equivalent slope may be off by
NEWTON_STEPS = 20  # for the speed at the end of a part; 12 were enough in 60,000 random runs
SECANT_STEPS = 16  # for the equivalent slope; 8 were enough in them
STEEP = 0.9  # sine: steeper than any part of a profile
NEAR = 1e-6  # m: a point nearer than this tells no slope


@dataclass(frozen=True)
class SquareLaw:
    """How a run gains speed: ``start + square V^2`` on level ground, as for ``ground_run.speed_run``; one entry a row.

    A braked roll is such a run backwards. ``harder``: +1 where rising ground makes the run longer, -1 where falling
    ground does.
    """

    start: Array
    square: Array
    wind: Array
    harder: float

    def acceleration(self, sine: Array, speed: Array) -> Array:
        """Acceleration [m/s2] at an airspeed [m/s] on ground of a sine [-]."""
        return np.asarray(ground_run.acceleration_at(self._start_on(sine), self.square, speed))

    def least(self, sine: Array, slow: Array, fast: Array) -> Array:
        """Least acceleration [m/s2] between two airspeeds [m/s]."""
        return np.asarray(ground_run.least_speed_run_acceleration(self._start_on(sine), self.square, slow, fast))

    def length(self, sine: Array, slow: Array, fast: Array) -> Array:
        """Length [m] of the run between two airspeeds [m/s]."""
        return np.asarray(ground_run.speed_run_between(self._start_on(sine), self.square, self.wind, slow, fast))

    def _start_on(self, sine: Array) -> Array:
        return self.start - self.harder * G0 * sine


@dataclass(frozen=True)
class DiskLaw:
    """The same on the thrust of an actuator disk, as for ``ground_run.disk_run``; ``lost`` on level ground."""

    thrust: Array
    lost: Array
    square: Array
    disk_speed: Array
    wind: Array
    harder: float = 1.0

    def acceleration(self, sine: Array, speed: Array) -> Array:
        """Acceleration [m/s2] at an airspeed [m/s] on ground of a sine [-]."""
        return np.asarray(ground_run.disk_acceleration(*self._on(sine), self._root(speed)))

    def least(self, sine: Array, slow: Array, fast: Array) -> Array:
        """Least acceleration [m/s2] between two airspeeds [m/s]."""
        return np.asarray(ground_run.least_disk_acceleration(*self._on(sine), self._root(slow), self._root(fast)))

    def length(self, sine: Array, slow: Array, fast: Array) -> Array:
        """Length [m] of the run between two airspeeds [m/s]."""
        return np.asarray(ground_run.disk_run_between(*self._on(sine), self.wind, self._root(slow), self._root(fast)))

    def _on(self, sine: Array) -> tuple[Array, Array, Array, Array]:
        return self.thrust, self.lost + G0 * sine, self.square, self.disk_speed

    def _root(self, speed: Array) -> Array:
        return np.asarray(disk_root(speed / self.disk_speed))


Law = SquareLaw | DiskLaw


@dataclass(frozen=True)
class Tracks:
    """Profiles side by side, one in a row: distances and heights [m] of the points, and slopes [-] of the parts.

    After its last point a row has distances without end, heights that are NaN, and the slope of its last part.
    ``ends`` are the distances where the parts end; the last part has no end.
    """

    distances: Array
    heights: Array
    slopes: Array
    ends: Array
    lengths: Array


def tracks_of(profiles: Sequence[Profile]) -> Tracks:
    """The profiles side by side, without points at which the slope does not change.

    >>> tracks_of([Profile((0.0, 100.0, 450.0), (0.0, 2.0, 9.0)), Profile((0.0, 300.0, 500.0), (0.0, 3.0, 9.0))]).slopes
    array([[0.02, 0.02],
           [0.01, 0.03]])
    """
    bent = [profile.without_straight_points() for profile in profiles]
    points = max(len(profile.distances) for profile in bent)
    distances, heights = np.full((len(bent), points), np.inf), np.full((len(bent), points), np.nan)
    slopes, ends = np.empty((len(bent), points - 1)), np.full((len(bent), points - 1), np.inf)
    for row, profile in enumerate(bent):
        parts = len(profile.slopes)
        distances[row, : parts + 1], heights[row, : parts + 1] = profile.distances, profile.heights
        slopes[row, :parts], slopes[row, parts:] = profile.slopes, profile.slopes[-1]
        ends[row, : parts - 1] = profile.distances[1:-1]
    return Tracks(distances, heights, slopes, ends, np.array([profile.length for profile in bent]))


def roll_along(law: Law, tracks: Tracks, begin: Array, first: Array, last: Array) -> Array:
    """Length [m] of a run along profiles, from a place [m] and an airspeed [m/s] to another airspeed.

    A take-off run goes from the wind to lift-off speed, a braked roll from touchdown speed to the wind. NaN where the
    acceleration, or deceleration, falls below ``ground_run.LEAST_ACCELERATION`` on the way. That is on the safe side: who
    comes to a short steep part with speed may lose some and lift off beyond it all the same, and one who comes to it
    slower may gain all along.

    >>> law = SquareLaw(np.array([2.0]), np.array([-0.0005]), np.array([0.0]), 1.0)
    >>> level = tracks_of([Profile((0.0, 600.0), (0.0, 0.0))])
    >>> roll_along(law, level, np.array([0.0]), np.array([0.0]), np.array([30.0])).round(3)
    array([254.892])
    """
    place, speed = begin.copy(), first.copy()
    roll = np.full(begin.shape, np.nan)
    rolling = np.isfinite(begin + first + last)
    for part in range(tracks.slopes.shape[1]):
        here = np.flatnonzero(rolling & (place < tracks.ends[:, part]))
        sine, room = ground_run.slope_sine(tracks.slopes[here, part]), tracks.ends[here, part] - place[here]
        needed = _needed(_rows(law, here), sine, speed[here], last[here])
        arrives = np.isfinite(needed) & (needed <= room)
        roll[here] = np.where(arrives, place[here] - begin[here] + needed, np.nan)
        rolling[here] = False
        left = ~arrives & np.isfinite(room)
        on = here[left]
        speed[on], rolling[on] = _speed_after(_rows(law, on), sine[left], speed[on], last[on], room[left])
        place[on] = tracks.ends[on, part]
    return roll


def _rows(law: Law, which: NDArray[np.intp]) -> Law:
    """The law for some of its rows."""
    columns: dict[str, Any] = {key: value[which] for key, value in vars(law).items() if isinstance(value, np.ndarray)}
    return replace(law, **columns)


def _needed(law: Law, sine: Array, one: Array, other: Array) -> Array:
    """Length [m] of a run between two airspeeds; without end where it does not accelerate all along."""
    slow, fast = np.minimum(one, other), np.maximum(one, other)
    runs = law.least(sine, slow, fast) >= ground_run.LEAST_ACCELERATION
    return np.where(runs, law.length(sine, slow, fast), np.inf)


def _speed_after(law: Law, sine: Array, speed: Array, goal: Array, room: Array) -> tuple[Array, NDArray[np.bool_]]:
    """Airspeed [m/s] after a length [m] on the way from one airspeed to another, and whether it gets so far.

    Newton's method on the square of ground speed, in which the length is nearly straight; where it would leave the
    bracket, the bracket is halved. The count is fixed.
    """
    towards = np.sign(goal - speed)
    near, far = np.square(speed - law.wind), np.square(goal - law.wind)
    square = 0.5 * (near + far)
    for _ in range(NEWTON_STEPS):
        reached = law.wind + np.sqrt(square)
        needed = _needed(law, sine, speed, reached)
        near, far = np.where(needed <= room, square, near), np.where(needed <= room, far, square)
        newton = square + towards * 2.0 * law.acceleration(sine, reached) * (room - needed)
        square = np.where((newton - near) * (newton - far) <= 0.0, newton, 0.5 * (near + far))
    reached = law.wind + np.sqrt(square)
    off = np.abs(_needed(law, sine, speed, reached) - room)
    return reached, off <= SAME_LENGTH * np.maximum(room, 1.0)


def equivalent_slope(law: Law, tracks: Tracks, roll: Array, one: Array, other: Array) -> Array:
    """The constant slope [-] on which the run between two airspeeds [m/s] is as long as a roll [m] along profiles.

    NaN where the roll is, and where the run would not accelerate all along that slope.

    >>> law = SquareLaw(np.array([2.0]), np.array([-0.0005]), np.array([0.0]), 1.0)
    >>> bent = tracks_of([Profile((0.0, 100.0, 600.0), (0.0, 6.0, 6.0))])
    >>> roll = roll_along(law, bent, np.array([0.0]), np.array([0.0]), np.array([30.0]))
    >>> equivalent_slope(law, bent, roll, np.array([0.0]), np.array([30.0])).round(4)
    array([0.0191])
    """
    slow, fast = np.minimum(one, other), np.maximum(one, other)
    against = law.harder * tracks.slopes
    spare = (law.least(np.zeros_like(roll), slow, fast) - ground_run.LEAST_ACCELERATION) / G0
    spare = np.clip(spare, -STEEP, STEEP)  # sine of the slope that leaves just the least acceleration
    steep = np.minimum(against.max(axis=1), spare / np.sqrt(1.0 - np.square(spare)))
    gentle = np.minimum(against.min(axis=1), steep)

    def too_short(slope: Array) -> Array:
        """How much the run on a slope is too short; of the inverse of a length, which is nearly straight over slope."""
        return 1.0 / law.length(ground_run.slope_sine(law.harder * slope), slow, fast) - 1.0 / roll

    found = _crossing(too_short, gentle, steep)
    slope = law.harder * found
    fits = np.abs(law.length(ground_run.slope_sine(slope), slow, fast) - roll) <= SAME_ROLL * roll
    return np.where(fits, slope, np.nan)


def _crossing(function: Callable[[Array], Array], one: Array, other: Array) -> Array:
    """Where a function crosses zero between two places; the secant kept within them (the "Illinois" rule).

    Source: any text on numerical methods.
    """
    low, high = np.minimum(one, other), np.maximum(one, other)
    at_one, at_other = function(one), function(other)
    nearest, off = np.where(np.abs(at_one) < np.abs(at_other), one, other), np.minimum(np.abs(at_one), np.abs(at_other))
    for _ in range(SECANT_STEPS):
        with np.errstate(invalid="ignore", divide="ignore"):
            secant = (one * at_other - other * at_one) / (at_other - at_one)
        middle = np.clip(np.where(at_other == at_one, other, secant), low, high)
        at_middle = function(middle)
        crossed = at_middle * at_other < 0.0
        one, at_one = np.where(crossed, other, one), np.where(crossed, at_other, 0.5 * at_one)
        other, at_other = middle, at_middle
        nearer = np.abs(at_middle) < off
        nearest, off = np.where(nearer, middle, nearest), np.where(nearer, np.abs(at_middle), off)
    return nearest


def steepest_climb(tracks: Tracks, place: Array) -> Array:
    """Slope [-] above which no ground rises, seen from a place [m] of a profile on to its end.

    >>> steepest_climb(tracks_of([Profile((0.0, 300.0, 450.0), (0.0, 0.0, 9.0))]), np.array([250.0]))
    array([0.045])
    """
    return np.asarray(np.max(_seen(tracks, place, np.inf, -np.inf), axis=1))


def steepest_fall(tracks: Tracks, place: Array, until: Array | float = np.inf) -> Array:
    """Slope [-] below which no ground falls, seen from a place [m] of a profile on to another.

    >>> steepest_fall(tracks_of([Profile((0.0, 300.0, 450.0), (0.0, 0.0, -9.0))]), np.array([100.0]), 280.0)
    array([0.])
    """
    return np.asarray(np.min(_seen(tracks, place, until, np.inf), axis=1))


def _seen(tracks: Tracks, place: Array, until: Array | float, nothing: float) -> Array:
    """Slopes [-] from a place to the points beyond it, up to the first one past ``until``, and the slope at the place."""
    rows = np.arange(len(place))
    part = np.sum(place[:, None] >= tracks.ends, axis=1)
    local = tracks.slopes[rows, part]
    height = tracks.heights[rows, part] + local * (place - tracks.distances[rows, part])
    away = tracks.distances[:, 1:] - place[:, None]
    begun = tracks.distances[:, :-1] < np.broadcast_to(until, place.shape)[:, None]
    counts = (away > NEAR) & np.isfinite(away) & begun
    slopes = (tracks.heights[:, 1:] - height[:, None]) / np.where(counts, away, 1.0)
    return np.column_stack([local, np.where(counts, slopes, nothing)])


def profile_slopes(chain: Chain, values: Mapping[str, Number], profiles: Sequence[Profile | None]) -> dict[str, Array]:
    """What the profiles of some rows mean to an aeroplane on a day: a column for each of `KEYS`, NaN without a profile.

    ``values`` as `stripcheck.chain.evaluate` takes them, ``profiles`` one for each row, from the end where its direction
    begins. The results, SI:

    - ``profile_takeoff_slope``, ``profile_landing_slope``: the constant slopes with which the chain's ``takeoff_roll`` and
      ``braked_roll`` are as long as along the profile; ``profile_takeoff_roll``, ``profile_landing_roll``: those rolls;
      ``profile_takeoff_usable``, ``profile_landing_usable``: the usable lengths for which they hold.
      Where there is no such slope (something is not known; the aeroplane does not accelerate, or slow down, all along)
      the slope is the one of the profile's parts that is most against the run, and the roll is 0. On that constant slope
      the aeroplane does not accelerate all along either; and if conditions change, the run on it is the longer one.
    - ``profile_climb_slope``: the slope above which no ground rises between lift-off and the end of the strip;
      ``profile_approach_slope``: the slope below which no ground falls between threshold and touchdown.

    Where less than the whole strip is usable, nothing tells which part: the run may begin at the first end, or so that
    the usable length ends at the far end, and the more adverse of the two counts. A landing comes to the brakes after
    the air distance over ground of ``profile_approach_slope`` and the free roll. Later is on the safe side: who is at
    touchdown speed farther on also comes to a stand farther on.
    """
    size = len(profiles)
    rows = np.array([row for row, profile in enumerate(profiles) if profile is not None], dtype=np.intp)
    found = {key: np.full(size, np.nan) for key in KEYS}
    if not rows.size:
        return found
    tracks = tracks_of([profile for profile in profiles if profile is not None])
    given = _Given(chain, _values_of_rows(chain, values, rows, size), rows.size)
    with np.errstate(all="ignore"):
        for key, column in {**_takeoff(given, tracks), **_landing(given, tracks)}.items():
            found[key][rows] = column
    return found


@dataclass(frozen=True)
class _Given:
    """A chain and its values for the rows that have profiles."""

    chain: Chain
    values: dict[str, Number]
    size: int

    def on(self, slope: Array | float, *keys: str) -> list[Array]:
        """Steps of the chain on a constant slope [-]."""
        steps = evaluate(self.chain, {**self.values, **dict.fromkeys(KEYS, np.nan), "slope_given": slope}, keys)
        return [np.array(np.broadcast_to(steps[key], self.size), dtype=float) for key in keys]

    def starts(self, tracks: Tracks, usable: str) -> list[Array]:
        """Places [m] at which a usable length may begin: the first end and, where any differs, the last that it fits to."""
        left = np.maximum(tracks.lengths - np.broadcast_to(self.values[usable], self.size), 0.0)
        return [np.zeros(self.size), left] if left.any() else [left]


def _values_of_rows(chain: Chain, values: Mapping[str, Number], rows: NDArray[np.intp], size: int) -> dict[str, Number]:
    tables = {item.key for item in chain.inputs if item.kind == "range"}
    columns = {key for key, value in values.items() if key not in tables and np.shape(value) == (size,)}
    return {key: value[rows] if key in columns else value for key, value in values.items()}


def _takeoff(given: _Given, tracks: Tracks) -> dict[str, Array]:
    law, lift_off = _takeoff_law(given)
    starts = given.starts(tracks, "tora")
    rolls = [roll_along(law, tracks, begin, law.wind, lift_off) for begin in starts]
    climbs = [steepest_climb(tracks, begin + roll) for begin, roll in zip(starts, rolls, strict=True)]
    roll = np.max(rolls, axis=0)
    slope = equivalent_slope(law, tracks, roll, law.wind, lift_off)
    hardest, known = tracks.slopes.max(axis=1), np.isfinite(slope)
    return {
        "profile_takeoff_slope": np.where(known, slope, hardest),
        "profile_takeoff_roll": np.where(known, roll, 0.0),
        "profile_takeoff_usable": given.values["tora"],
        "profile_climb_slope": np.where(known, np.max(climbs, axis=0), hardest),
    }


def _takeoff_law(given: _Given) -> tuple[Law, Array]:
    """The law of the take-off run on level ground, and lift-off speed [m/s]."""
    if "disk_speed" in given.chain.by_key:
        thrust, lost, square, disk_speed, wind, lift_off = given.on(
            0.0, "thrust_acceleration", "lost", "square", "disk_speed", "run_wind", "lift_off_tas"
        )
        return DiskLaw(thrust, lost, square, disk_speed, wind), lift_off
    start, square, wind, lift_off = given.on(0.0, "start", "square", "run_wind", "lift_off_tas")
    return SquareLaw(start, square, wind, 1.0), lift_off


def _landing(given: _Given, tracks: Tracks) -> dict[str, Array]:
    start, square, wind, touchdown, available = given.on(
        0.0, "braked_start", "braked_square", "landing_wind", "touchdown_tas", "landing_available"
    )
    law = SquareLaw(start, square, wind, -1.0)
    lost = given.values["lda"] - available  # to an obstacle on the approach
    flown = [_approach(given, tracks, begin + lost) for begin in given.starts(tracks, "lda")]
    rolls = [roll_along(law, tracks, begin, touchdown, wind) for begin, _ in flown]
    falls = [fall for _, fall in flown]
    roll = np.max(rolls, axis=0)
    slope = equivalent_slope(law, tracks, roll, touchdown, wind)
    hardest, known = tracks.slopes.min(axis=1), np.isfinite(slope)
    return {
        "profile_landing_slope": np.where(known, slope, hardest),
        "profile_landing_roll": np.where(known, roll, 0.0),
        "profile_landing_usable": given.values["lda"],
        "profile_approach_slope": np.where(known, np.min(falls, axis=0), hardest),
    }


def _approach(given: _Given, tracks: Tracks, threshold: Array) -> tuple[Array, Array]:
    """Place [m] where the brakes bite, and the slope [-] below which no ground falls until touchdown.

    What is seen from the threshold to the far end gives a touchdown that is not too near; the ground up to there counts.
    """
    whole = steepest_fall(tracks, threshold)
    (farthest,) = given.on(whole, "landing_air")
    fall = np.where(np.isfinite(farthest), steepest_fall(tracks, threshold, threshold + farthest), whole)
    air, free = given.on(fall, "landing_air", "free_roll")
    return threshold + air + free, fall
