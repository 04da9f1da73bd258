"""Calibration: the few coefficients of a card that its book points can tell, by least squares on the chain itself.

Well-conditioned coefficients come first: thrust on the take-off rolls; then thrust, what it loses to speed (fixed pitch) or
parasite drag (constant speed), and the airborne factor together on all take-off figures, as far as these tell them apart;
then braking on the landing rolls, and the airborne landing factor on the rest of the way from 50 ft. Residuals are logarithms
of model over book, so that long and short distances weigh alike. A coefficient that the figures leave less well known than
``KNOWN_ENOUGH`` is held at its typical value, and said to be.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from functools import cache
from types import MappingProxyType
from typing import Any

import numpy as np

from stripcheck.atmosphere import G0, RHO0
from stripcheck.chain import Chain, evaluate
from stripcheck.errors import InputError
from stripcheck.links import disk_area_of
from stripcheck.rules import load_rules
from stripcheck.thrust import static_disk_thrust
from stripcheck.units import to_si

NOT_REACHED = 3.0  # residual where the model gives no distance at all: e^3 times too long
SCATTER = 0.015  # least standard error of a printed figure [-]: rounding to 5 m, and what no model meets; common practice
KNOWN_ENOUGH = 0.6  # standard error over the typical value [-], above which a coefficient is held at that
QUALITIES = (0.25, 0.92)  # useful share of the shaft power of a constant-speed propeller at low speed
TECHNIQUES = (0.4, 2.5)  # an airborne factor outside of this says that the card's figures don't belong together
BRAKING = (0.3, 1.43)  # 1 is the ground table's 0.35 on dry pavement; 0.5 is the best of its sources, see stripcheck/surface.py
LIFT_OFFS = (1.0, 1.5)  # lift-off speed over stall speed
THRUSTS = (0.1, 1.0)  # static thrust of a fixed-pitch propeller over the greatest weight
DRAGS = (0.4, 2.5)  # parasite drag over the card's own; and never outside of the two below
LEAST_DRAG, MOST_DRAG = 0.012, 0.15
LEAST_TIME = 1e-6  # before braking [s]
DRAG_TOLD = 0.15  # a fit that moves parasite drag by more than this share says so among the remarks
MISFIT_TOLD = 0.10  # a printed figure that the fitted model misses by more than this share is told
SHORTEST = 0.75  # a model below this share of a printed distance makes the card unsafe: it is refused
SLOPE_OF_THRUST = -1.5e-4  # b over a [m2/N] of a usual fixed-pitch propeller; common practice, no source
SLOPES = (0.2, 4.0)  # the same over the usual one; wide, since what the card has wrong in drag counts in it too
TYPICAL = "held at its typical value"
ON_BOUND = "on the bound of what is credible"
NOT_CREDIBLE = "held at 1: the figures would need one that is not credible"
NO_DISTANCE = "held: no distance over 50 ft in the book"
DRAGGING = ("thrust_slope", "parasite_drag")
TAKEOFF = (("takeoff_roll", "roll"), ("physics_takeoff", "distance"))  # chain key and column of the book
LANDING = (("landing_roll", "roll"), ("physics_landing", "distance"))
NAMES = {
    "static_thrust": "static thrust",
    "thrust_slope": "thrust's loss with speed",
    "propulsive_quality": "propulsive quality",
    "parasite_drag": "parasite drag",
    "takeoff_technique": "airborne take-off factor",
    "braking_quality": "braking factor",
    "free_roll_seconds": "time before braking",
    "landing_technique": "airborne landing factor",
    "lift_off_factor": "lift-off speed over stall",
}


@dataclass(frozen=True)
class BookPoints:
    """Take-off or landing figures of a manual, SI, one entry for each point: level dry pavement, still air."""

    pressure_altitude: np.ndarray
    temperature: np.ndarray
    mass: np.ndarray
    flap: np.ndarray
    roll: np.ndarray
    distance: np.ndarray  # to or from 50 ft; NaN where the manual gives the roll only
    lift_off: np.ndarray = field(default_factory=lambda: np.array(np.nan))  # EAS [m/s]; NaN where not given

    def __post_init__(self) -> None:
        object.__setattr__(self, "lift_off", np.broadcast_to(self.lift_off, np.shape(self.roll)))


@dataclass(frozen=True)
class Fit:
    """Calibrated values by chain key, what was left over at each book point, and remarks in words."""

    values: dict[str, float]
    residuals: list[tuple[str, float, float]]  # label, book [m], model [m]
    remarks: list[str]
    fitted: list[tuple[str, float, float | str]]  # chain key, value, its relative standard error [-] or why it is held


@dataclass
class _Work:
    """A card while it is calibrated: its values so far, how well each is known, and what is to be told."""

    chain: Chain
    values: dict[str, Any]
    where: str
    most_thrust: float  # static thrust [N] above which none is credible for a fixed-pitch propeller
    known: dict[str, float | str] = field(default_factory=dict)
    remarks: list[str] = field(default_factory=list)


@dataclass(frozen=True)
class _Solution:
    """Values by chain key, their relative standard errors [-], the keys that ended on a bound, and whether all is reached."""

    values: dict[str, float]
    errors: dict[str, float]
    bounded: frozenset[str]
    reached: bool  # whether the model gives a distance at every point
    told_apart: bool  # whether the figures leave every value known well enough


def calibrate(chain: Chain, card: Mapping[str, Any], takeoff: BookPoints, landing: BookPoints, where: str,
              rated_power: float | None = None, diameter: float | None = None) -> Fit:  # fmt: skip
    """Fit the free coefficients of a card.

    ``card`` holds the card's other values by chain key [SI]. ``where`` names the file in messages. ``rated_power`` [W]
    and propeller ``diameter`` [m] bound the static thrust of a fixed-pitch propeller, where given.
    Raises InputError where the book figures can't be reached with credible coefficients.
    """
    start = {"takeoff_technique": 1.0, "landing_technique": 1.0, "braking_quality": 1.0}
    work = _Work(chain, {**card, **start}, where, THRUSTS[1] * card["max_takeoff_mass"] * G0)
    _fit_lift_off(work, takeoff)
    if "rated_power" in card:
        _fit_quality(work, takeoff)
        _fit_takeoff(work, takeoff, "propulsive_quality", "parasite_drag")
    else:
        _fit_static_thrust(work, takeoff, rated_power, diameter)
        _fit_takeoff(work, takeoff, "static_thrust", "thrust_slope")
        work.known["parasite_drag"] = "held: it acts like the thrust's loss with speed, and both can't be told apart"
    _fit_landing(work, landing)
    residuals = _residuals(work, takeoff, landing)
    _tell_misfit(work, residuals)
    fitted = [(key, float(work.values[key]), work.known[key]) for key in NAMES if key in work.known]
    values = {key: value for key, value, _ in fitted if key not in card or value != card[key]}
    return Fit(values, residuals, work.remarks, fitted)


def _fit_lift_off(work: _Work, points: BookPoints) -> None:
    """Geometric mean of the lift-off speeds over the stall speeds, which is exact for a plain factor."""
    given = np.isfinite(points.lift_off)
    if not given.any():
        work.known["lift_off_factor"] = "held: no lift-off speeds in the book"
        return
    stall = at_book_conditions(work.chain, work.values, points, ("stall_takeoff",))["stall_takeoff"]
    ratios = np.log(points.lift_off / stall)[given]
    factor = float(np.exp(ratios.mean()))
    if not LIFT_OFFS[0] <= factor <= LIFT_OFFS[1]:
        raise InputError(
            f"{work.where}: the lift-off speeds of the book are {factor:.2f} times the stall speed, which is not credible "
            f"({LIFT_OFFS[0]} to {LIFT_OFFS[1]}): check both speeds, and that both are of the same kind (IAS or CAS)"
        )
    if factor > work.values["screen_factor"]:
        raise InputError(
            f"{work.where}: the lift-off speeds of the book are {factor:.2f} times the stall speed, which is above the speed "
            f"at 50 ft ({work.values['screen_factor']:.2f} times): give screen in [speeds], or check the lift-off speeds"
        )
    work.values["lift_off_factor"] = factor
    work.known["lift_off_factor"] = float(max(np.std(ratios), SCATTER) / np.sqrt(len(ratios)))


def _fit_quality(work: _Work, points: BookPoints) -> None:
    """Propulsive quality of a constant-speed propeller, on the rolls alone."""
    found = _solve(work, ("propulsive_quality",), points, TAKEOFF[:1])
    quality = found.values["propulsive_quality"]
    if not QUALITIES[0] <= quality <= QUALITIES[1]:
        raise InputError(
            f"{work.where}: the take-off rolls of the book ({_span(points.roll)}) need {quality:.0%} of the shaft power as "
            f"useful power, which is not credible ({QUALITIES[0]:.0%} to {QUALITIES[1]:.0%}) for "
            f"{work.values['rated_power'] / 1000.0:.0f} kW on a propeller of {work.values['propeller_diameter']:.2f} m: check "
            "rated_power, diameter, mass, stall speeds and the rolls"
        )
    _take(work, found)


def _fit_static_thrust(work: _Work, points: BookPoints, rated_power: float | None, diameter: float | None) -> None:
    """Static thrust of a fixed-pitch propeller, on the rolls alone.

    No propeller pulls more than the ideal disk of its diameter on the rated power (actuator-disk momentum theory).
    """
    found = _solve(work, ("static_thrust",), points, TAKEOFF[:1])
    thrust, weight = found.values["static_thrust"], work.values["max_takeoff_mass"] * G0
    needs = f"{work.where}: the take-off rolls of the book ({_span(points.roll)}) need a static thrust of {thrust:,.0f} N"
    if not THRUSTS[0] * weight <= thrust <= work.most_thrust:
        raise InputError(
            f"{needs} for a weight of {weight:,.0f} N, which is not credible: check mass, stall speeds and the rolls"
        )
    if rated_power is not None and diameter is not None:
        work.most_thrust = min(work.most_thrust, float(static_disk_thrust(rated_power, RHO0, disk_area_of(diameter))))
        if thrust > work.most_thrust:
            raise InputError(
                f"{needs}, and no propeller of {diameter:.2f} m gives more than {work.most_thrust:,.0f} N on "
                f"{rated_power / 1000.0:.0f} kW: check rated_power, diameter, mass, stall speeds and the rolls"
            )
    _take(work, found)


def _fit_takeoff(work: _Work, points: BookPoints, thrust: str, further: str) -> None:
    """As many coefficients on all take-off figures as these tell apart."""
    factor = ("takeoff_technique",) if np.isfinite(points.distance).any() else ()
    given = work.values[further]
    found = _solve(work, (thrust, further, *factor), points, TAKEOFF)
    spare = len(points.roll) + np.isfinite(points.distance).sum() - 2 - len(factor)
    told = found.told_apart and (spare > 0 or further == "thrust_slope")  # drag takes a figure more than there are coefficients
    if not told or not found.reached or found.bounded - {further}:
        found = _solve(work, (thrust, *factor), points, TAKEOFF)
        work.known[further] = TYPICAL
    if not found.reached or found.bounded - {further}:
        found = _solve_without_factor(work, thrust, further, points)
    _take(work, found)
    few = "one take-off point" if len(points.roll) == 1 else "take-off points too few or too close together"
    moved = f"{NAMES[further]} moved from {given:.3g} to {work.values[further]:.3g}"
    if work.known[further] == TYPICAL:
        work.remarks.append(f"{few}: only the {NAMES[thrust]} could be fitted; the {NAMES[further]} is a typical value")
    elif work.known[further] == ON_BOUND:
        work.remarks.append(f"{moved}, the bound of what is credible: it makes up for what else is not as the card has it")
    elif work.known.get("takeoff_technique") == NOT_CREDIBLE:
        work.remarks.append(f"{moved}, in place of an airborne take-off factor that would not be credible")
    elif further == "parasite_drag" and abs(work.values[further] / given - 1.0) > DRAG_TOLD:
        work.remarks.append(f"{moved} by the take-off figures")
    if not factor:
        work.known["takeoff_technique"] = NO_DISTANCE
        work.remarks.append("no takeoff distance over 50 ft in the book: the airborne part is the model's own")


def _solve_without_factor(work: _Work, thrust: str, further: str, points: BookPoints) -> _Solution:
    """Drag, or the loss of thrust with speed, moved in place of an airborne factor that is not credible."""
    found = _solve(work, (thrust, further), points, TAKEOFF)
    if found.reached and not found.bounded:
        work.known["takeoff_technique"] = NOT_CREDIBLE
        return found
    bound = found.values[further]
    found = _solve(work, (thrust, "takeoff_technique"), points, TAKEOFF, {further: bound})
    if not found.reached or found.bounded:
        raise InputError(
            f"{work.where}: the take-off rolls of the book ({_span(points.roll)}) and its distances over 50 ft "
            f"({_span(points.distance)}) don't belong together: no credible {NAMES[thrust]}, {NAMES[further]} and airborne "
            f"factor ({TECHNIQUES[0]} to {TECHNIQUES[1]}) gives both; check mass, wing, stall speeds, speeds and the figures"
        )
    return replace(found, values={**found.values, further: bound}, bounded=frozenset({further}))


def _fit_landing(work: _Work, points: BookPoints) -> None:
    """Braking, and the airborne factor where the book has distances from 50 ft."""
    factor = ("landing_technique",) if np.isfinite(points.distance).any() else ()
    found = _solve(work, ("braking_quality", *factor), points, LANDING)
    braking = found.values["braking_quality"]
    if "braking_quality" in found.bounded and braking > 1.0 and work.values["free_roll_seconds"] > 0.0:
        found = _solve_time(work, factor, points, braking)
    rolls = f"the landing rolls of the book ({_span(points.roll)})"
    if "braking_quality" in found.bounded or found.values.get("free_roll_seconds", 1.0) <= LEAST_TIME:
        raise InputError(
            f"{work.where}: {rolls} need {'more' if braking > 1.0 else 'less'} than {braking:.2f} times the braking of dry "
            "pavement, which is not credible: check the stall speeds, the touchdown factor and the rolls"
        )
    technique = found.values.get("landing_technique", 1.0)
    if "landing_technique" in found.bounded:
        raise InputError(
            f"{work.where}: {rolls} and its distances over 50 ft ({_span(points.distance)}) don't belong together: from 50 ft "
            f"to touchdown the book is {'more' if technique > 1.0 else 'less'} than {technique:.2f} times the model, which is "
            "not credible; check the stall speeds, the approach factor and the figures"
        )
    _take(work, found)
    if not factor:
        work.known["landing_technique"] = NO_DISTANCE
        work.remarks.append("no landing distance over 50 ft in the book: the airborne part is the model's own")


def _solve_time(work: _Work, factor: tuple[str, ...], points: BookPoints, braking: float) -> _Solution:
    """Time before braking shortened in place of brakes that are better than is credible."""
    given = work.values["free_roll_seconds"]
    found = _solve(work, ("free_roll_seconds", *factor), points, LANDING, {"braking_quality": braking})
    work.known["braking_quality"] = ON_BOUND
    work.remarks.append(
        f"the landing rolls would need better brakes than are credible: {NAMES['free_roll_seconds']} moved from {given:.1f} s "
        f"to {found.values['free_roll_seconds']:.1f} s"
    )
    return replace(found, values={**found.values, "braking_quality": braking})


def _take(work: _Work, found: _Solution) -> None:
    work.values = _trial(work.values, found.values)
    work.known |= found.errors | dict.fromkeys(found.bounded, ON_BOUND)


def _span(distances: np.ndarray) -> str:
    low, high = np.nanmin(distances), np.nanmax(distances)
    return f"{low:.0f} m" if low == high else f"{low:.0f} to {high:.0f} m"


def _trial(values: Mapping[str, Any], changes: Mapping[str, float]) -> dict[str, Any]:
    """The values with changes; the loss of thrust with speed follows the static thrust until it is fitted itself."""
    follows = {"thrust_slope": SLOPE_OF_THRUST * changes["static_thrust"]} if "static_thrust" in changes else {}
    return {**values, **follows, **changes}


def _bounds(work: _Work, key: str) -> tuple[float, float, float]:
    """Where a coefficient starts, and its bounds: wide for the first look at the thrust, credible from then on."""
    value = work.values.get(key, np.nan)
    if key == "static_thrust":
        weight = work.values["max_takeoff_mass"] * G0
        first = (0.5 * weight, 0.5 * THRUSTS[0] * weight, 1.2 * THRUSTS[1] * weight)
        return first if np.isnan(value) else (value, THRUSTS[0] * weight, work.most_thrust)
    if key == "propulsive_quality":
        return (0.8, 0.1, 1.5) if np.isnan(value) else (value, *QUALITIES)
    if key == "thrust_slope":
        return value, SLOPES[0] * value, SLOPES[1] * value
    if key == "parasite_drag":
        return value, max(DRAGS[0] * value, LEAST_DRAG), max(min(DRAGS[1] * value, MOST_DRAG), value)
    if key == "free_roll_seconds":
        return value, 0.0, value
    return (1.0, *(BRAKING if key == "braking_quality" else TECHNIQUES))


def _solve(work: _Work, keys: tuple[str, ...], points: BookPoints, figures: tuple[tuple[str, str], ...],
           held: Mapping[str, float] = MappingProxyType({})) -> _Solution:  # fmt: skip
    """Least squares for some coefficients on some kinds of figures, others ``held`` at other values than so far."""
    wanted = tuple(key for key, _ in figures)
    book = np.stack([getattr(points, name) for _, name in figures])
    printed = np.isfinite(book)
    if printed.sum() < len(keys):
        return _Solution({}, {}, frozenset(), False, False)
    start, low, high = np.array([_bounds(work, key) for key in keys]).T

    def residuals(p: np.ndarray) -> np.ndarray:
        trial = _trial(work.values, {**held, **dict(zip(keys, p * start, strict=True))})
        found = at_book_conditions(work.chain, trial, points, wanted)
        model = np.stack([found[key] for key in wanted])
        with np.errstate(all="ignore"):
            return np.asarray(np.where(np.isfinite(model), np.log(model / book), NOT_REACHED)[printed])

    first = np.ones(len(keys))
    if len(keys) > 1 and keys[1] in DRAGGING:  # from the side where the model flies, should it not with the usual value
        eased = np.where(np.arange(len(keys)) == 1, low / start, first)
        first = min(first, eased, key=lambda p: float((residuals(p) == NOT_REACHED).sum()))
    p = least_squares(residuals, first, low / start, high / start)
    r = residuals(p)
    errors = _errors(p, r, _slopes(residuals, p, r))
    with np.errstate(divide="ignore"):  # a time before braking may come to nil
        relative = errors / np.abs(p)
    edge = np.minimum(np.abs(p - low / start), np.abs(p - high / start)) < 1e-6
    return _Solution(
        dict(zip(keys, (float(value) for value in p * start), strict=True)),
        dict(zip(keys, (float(error) for error in relative), strict=True)),
        frozenset(key for key, at in zip(keys, edge, strict=True) if at),
        bool((r != NOT_REACHED).all()), bool((errors <= KNOWN_ENOUGH).all()),
    )  # fmt: skip


def _errors(p: np.ndarray, r: np.ndarray, slopes: np.ndarray) -> np.ndarray:
    """Standard errors of a solution, from the slopes and the scatter of the figures about the model."""
    spare = len(r) - len(p)
    scatter = max(SCATTER, float(np.sqrt(r @ r / spare)) if spare else 0.0)
    normal = slopes.T @ slopes
    return scatter * np.sqrt(np.diag(np.linalg.pinv(normal, hermitian=True))) if np.linalg.matrix_rank(normal) == len(p) \
        else np.full(len(p), np.inf)


@cache
def _rules() -> dict[str, Any]:
    return dict(load_rules("manual-only").values)


def at_book_conditions(chain: Chain, values: Mapping[str, Any], points: BookPoints,
                       keys: tuple[str, ...] | None = None) -> dict[str, np.ndarray]:  # fmt: skip
    """Steps of the chain, or all, at the points' conditions: level dry pavement, standard QNH, still air, no factors.

    ``values`` [SI] by chain key; inputs that are not among them are unknown. Raises KeyError for a key of no step.
    """
    inputs: dict[str, Any] = {item.key: np.nan for item in chain.inputs}
    inputs |= _rules() | dict(values)
    inputs |= {
        "fault": False, "land_here": True, "take_off_here": True, "surface": 0, "condition": 0, "day_condition": 0,
        "tora": 5000.0, "lda": 5000.0, "slope_given": 0.0, "elevation_field": points.pressure_altitude,
        "qnh": to_si(1013.25, "hPa"), "temperature": points.temperature, "wind_speed": 0.0,
        "mass_takeoff": points.mass, "mass_landing": points.mass, "takeoff_flap": points.flap,
        "landing_flap": points.flap,
    }  # fmt: skip
    return evaluate(chain, inputs, keys)


def _residuals(work: _Work, takeoff: BookPoints, landing: BookPoints) -> list[tuple[str, float, float]]:
    rows = []
    for side, points, figures in (("take-off", takeoff, TAKEOFF), ("landing", landing, LANDING)):
        roll, whole = at_book_conditions(work.chain, work.values, points, tuple(key for key, _ in figures)).values()
        for i in range(len(points.roll)):
            rows.append((f"{side} {i + 1}: roll", float(points.roll[i]), float(roll[i])))
            if np.isfinite(points.distance[i]):
                rows.append((f"{side} {i + 1}: 50 ft", float(points.distance[i]), float(whole[i])))
    return rows


def _tell_misfit(work: _Work, residuals: list[tuple[str, float, float]]) -> None:
    """Says where the model is farthest from the book; refuses a card whose model is far shorter than the manual."""
    label, book, model = min(residuals, key=lambda row: row[2] / row[1])
    if model < SHORTEST * book:
        raise InputError(
            f"{work.where}: the figures of the book don't belong together: with the best credible coefficients {label} comes "
            f"out at {model:.0f} m where the book has {book:.0f} m; check that figure and those beside it for a slip"
        )
    label, book, model = max(residuals, key=lambda row: abs(np.log(row[2] / row[1])))
    if abs(model / book - 1.0) > MISFIT_TOLD:
        work.remarks.append(
            f"farthest out is {label}: {book:.0f} m in the book, {model:.0f} m by the card ({model / book - 1.0:+.0%}); where "
            "that is one figure alone, look for a slip in it"
        )


def least_squares(residuals: Callable[[np.ndarray], np.ndarray], start: np.ndarray, low: np.ndarray,
                  high: np.ndarray) -> np.ndarray:  # fmt: skip
    """Parameters between two bounds that make the sum of squared residuals least: damped Gauss-Newton.

    Source: Levenberg-Marquardt, as in any text on numerical methods; differences for the slopes. A parameter that a
    step would push through its bound stands still for that step.

    >>> least_squares(lambda p: np.log(p / 2.0), np.array([1.0]), np.array([0.1]), np.array([9.0])).round(6)
    array([2.])
    """
    low, high = np.minimum(low, high), np.maximum(low, high)
    p: np.ndarray = np.clip(start, low, high)
    damping = 1e-3
    r = residuals(p)
    slopes = _slopes(residuals, p, r)
    for _ in range(60):
        downhill = -slopes.T @ r
        free = ~((p <= low) & (downhill < 0.0) | (p >= high) & (downhill > 0.0))
        normal = slopes[:, free].T @ slopes[:, free]
        move = np.zeros_like(p)
        move[free] = np.linalg.lstsq(normal + damping * np.diag(np.diag(normal)), downhill[free], rcond=None)[0]
        trial: np.ndarray = np.clip(p + move, low, high)
        r_trial = residuals(trial)
        better = bool(r_trial @ r_trial < r @ r)
        still = np.allclose(trial, p, rtol=1e-10, atol=0.0)
        if better:
            p, r = trial, r_trial
        if still:
            break
        if better:
            slopes = _slopes(residuals, p, r)
        damping = damping / 5.0 if better else damping * 4.0
    return p


def _slopes(residuals: Callable[[np.ndarray], np.ndarray], p: np.ndarray, r: np.ndarray) -> np.ndarray:
    steps = 1e-6 * np.maximum(np.abs(p), 1e-9)
    return np.stack([(residuals(p + step * unit) - r) / step for step, unit in zip(steps, np.eye(len(p)), strict=True)], axis=1)
