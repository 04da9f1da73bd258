"""Calibration: the few coefficients of a card that its book points can tell, by least squares on the chain itself.

Each stage fits only what its figures can identify: thrust on the take-off rolls, then the airborne factor on the rest
of the way to 50 ft, the braking factor on the landing rolls, and the airborne landing factor on the rest of the way
from 50 ft. Residuals are logarithms of model over book, so that long and short distances weigh alike.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from stripcheck.chain import Chain, evaluate
from stripcheck.errors import InputError
from stripcheck.rules import load_rules
from stripcheck.units import to_si

NOT_REACHED = 3.0  # residual where the model gives no distance at all: e^3 times too long
TECHNIQUES = (0.4, 2.5)  # an airborne factor outside of this says that the card's figures don't belong together
QUALITIES = (0.25, 0.92)  # useful share of the shaft power of a constant-speed propeller at low speed
BRAKING = (0.3, 2.0)  # braking factor: 1 is the ground table's figure
SLOPE_OF_THRUST = -1.5e-4  # b over a [m2/N] of a usual fixed-pitch propeller; common practice, no source


@dataclass(frozen=True)
class BookPoints:
    """Take-off or landing figures of a manual, SI, one entry for each point: level dry pavement, still air."""

    pressure_altitude: np.ndarray
    temperature: np.ndarray
    mass: np.ndarray
    flap: np.ndarray
    roll: np.ndarray
    distance: np.ndarray  # to or from 50 ft; NaN where the manual gives the roll only


@dataclass(frozen=True)
class Fit:
    """Calibrated values by chain key, what was left over at each book point, and remarks in words."""

    values: dict[str, float]
    residuals: list[tuple[str, float, float]]  # label, book [m], model [m]
    remarks: list[str]


def calibrate(chain: Chain, card: Mapping[str, Any], takeoff: BookPoints, landing: BookPoints, where: str) -> Fit:
    """Fit the free coefficients of a card.

    ``card`` holds the card's other values by chain key [SI]. ``where`` names the file in messages.
    Raises InputError where the book figures can't be reached with credible coefficients.
    """
    values: dict[str, Any] = {**card, "takeoff_technique": 1.0, "landing_technique": 1.0, "braking_quality": 1.0}
    remarks: list[str] = []
    if "rated_power" in values:
        values |= _fit_quality(chain, values, takeoff, where)
    else:
        values |= _fit_polar(chain, values, takeoff, where, remarks)
    values["takeoff_technique"] = _fit_airborne(chain, values, takeoff, "takeoff", where, remarks)
    values["braking_quality"] = _fit_braking(chain, values, landing, where)
    values["landing_technique"] = _fit_airborne(chain, values, landing, "landing", where, remarks)
    fitted = {key: float(value) for key, value in values.items() if key not in card}
    return Fit(fitted, _residuals(chain, values, takeoff, landing), remarks)


def _model(chain: Chain, values: Mapping[str, Any], points: BookPoints, side: str) -> dict[str, np.ndarray]:
    """The chain at the book's own conditions: level dry pavement, standard QNH, still air, no factors."""
    size = len(points.roll)
    inputs: dict[str, Any] = {item.key: np.nan for item in chain.inputs if item.where in ("strip", "day")}
    inputs |= load_rules("manual-only").values | dict(values)
    inputs |= {
        "fault": False, "land_here": True, "take_off_here": True, "surface": 0, "condition": 0, "day_condition": 0,
        "tora": 5000.0, "lda": 5000.0, "slope_given": 0.0, "elevation_field": points.pressure_altitude,
        "qnh": to_si(1013.25, "hPa"), "temperature": points.temperature, "wind_speed": 0.0,
        "mass_takeoff": points.mass, "mass_landing": points.mass, "takeoff_flap": points.flap,
        "landing_flap": points.flap,
    }  # fmt: skip
    return {key: np.broadcast_to(value, size) for key, value in evaluate(chain, inputs).items()}


def _log_ratio(model: np.ndarray, book: np.ndarray) -> np.ndarray:
    with np.errstate(all="ignore"):
        return np.where(np.isfinite(model), np.log(model / book), NOT_REACHED)


def _fit_quality(chain: Chain, values: dict[str, Any], points: BookPoints, where: str) -> dict[str, float]:
    def residuals(p: np.ndarray) -> np.ndarray:
        return _log_ratio(_model(chain, values | {"propulsive_quality": p[0]}, points, "takeoff")["takeoff_roll"],
                          points.roll)  # fmt: skip

    (quality,) = least_squares(residuals, np.array([0.8]), np.array([0.1]), np.array([1.5]))
    if not QUALITIES[0] <= quality <= QUALITIES[1]:
        raise InputError(
            f"{where}: the take-off rolls of the book need {quality:.0%} of the shaft power as useful power, which is "
            f"not credible ({QUALITIES[0]:.0%} to {QUALITIES[1]:.0%}): check power, mass, stall speeds and the rolls"
        )
    return {"propulsive_quality": float(quality)}


def _fit_polar(chain: Chain, values: dict[str, Any], points: BookPoints, where: str,
               remarks: list[str]) -> dict[str, float]:  # fmt: skip
    def residuals(p: np.ndarray) -> np.ndarray:
        b = p[1] if len(p) > 1 else SLOPE_OF_THRUST * p[0]
        trial = values | {"static_thrust": p[0], "thrust_slope": b}
        return _log_ratio(_model(chain, trial, points, "takeoff")["takeoff_roll"], points.roll)

    weight = values["max_takeoff_mass"] * 9.80665
    low, high = 0.05 * weight, 1.2 * weight
    (a,) = least_squares(residuals, np.array([0.5 * weight]), np.array([low]), np.array([high]))
    b = SLOPE_OF_THRUST * a
    if len(points.roll) > 1 and np.ptp(np.log(points.roll)) > 0.25:
        start = np.array([a, b])
        a, b = least_squares(residuals, start, np.array([low, 6.0 * b]), np.array([high, 0.1 * b]))
    else:
        remarks.append(
            "one take-off point, or points close together: only the static thrust could be fitted; its loss with "
            "speed is a typical value"
        )
    if not 0.1 * weight <= a <= weight:
        raise InputError(
            f"{where}: the take-off rolls of the book need a static thrust of {a:,.0f} N for a weight of {weight:,.0f} N, "
            "which is not credible: check mass, stall speeds and the rolls"
        )
    return {"static_thrust": float(a), "thrust_slope": float(b)}


def _fit_airborne(chain: Chain, values: dict[str, Any], points: BookPoints, side: str, where: str,
                  remarks: list[str]) -> float:  # fmt: skip
    """Geometric mean of book over model for the airborne part, which is exact for a plain factor."""
    given = np.isfinite(points.distance)
    if not given.any():
        remarks.append(f"no {side} distance over 50 ft in the book: the airborne part is the model's own")
        return 1.0
    model = _model(chain, values, points, side)
    part = model["airborne_distance"] if side == "takeoff" else model["landing_air"]
    factor = float(np.exp(-np.mean(_log_ratio(part, points.distance - points.roll)[given])))
    if not TECHNIQUES[0] <= factor <= TECHNIQUES[1]:
        raise InputError(
            f"{where}: from the {side} roll to the distance over 50 ft the book is {factor:.2f} times the model, which "
            f"is not credible ({TECHNIQUES[0]} to {TECHNIQUES[1]}): check the speeds and both distances; well below 1 the "
            "drag or the screen speed of the card is too high, well above 1 too low"
        )
    return factor


def _fit_braking(chain: Chain, values: dict[str, Any], points: BookPoints, where: str) -> float:
    def residuals(p: np.ndarray) -> np.ndarray:
        return _log_ratio(_model(chain, values | {"braking_quality": p[0]}, points, "landing")["landing_roll"],
                          points.roll)  # fmt: skip

    (quality,) = least_squares(residuals, np.array([1.0]), np.array([0.1]), np.array([4.0]))
    if not BRAKING[0] <= quality <= BRAKING[1]:
        raise InputError(
            f"{where}: the landing rolls of the book need {quality:.2f} times the braking of dry pavement, which is not "
            f"credible ({BRAKING[0]} to {BRAKING[1]}): check the stall speeds, the touchdown factor and the rolls"
        )
    return float(quality)


def _residuals(chain: Chain, values: dict[str, Any], takeoff: BookPoints, landing: BookPoints) -> list:  # type: ignore[type-arg]
    rows = []
    for side, points, roll, whole in (("take-off", takeoff, "takeoff_roll", "physics_takeoff"),
                                      ("landing", landing, "landing_roll", "physics_landing")):  # fmt: skip
        model = _model(chain, values, points, side)
        for i in range(len(points.roll)):
            rows.append((f"{side} {i + 1}: roll", float(points.roll[i]), float(model[roll][i])))
            if np.isfinite(points.distance[i]):
                rows.append((f"{side} {i + 1}: 50 ft", float(points.distance[i]), float(model[whole][i])))
    return rows


def least_squares(residuals: Callable[[np.ndarray], np.ndarray], start: np.ndarray, low: np.ndarray,
                  high: np.ndarray) -> np.ndarray:  # fmt: skip
    """Parameters between two bounds that make the sum of squared residuals least: damped Gauss-Newton.

    Source: Levenberg-Marquardt, as in any text on numerical methods; differences for the slopes.

    >>> least_squares(lambda p: np.log(p / 2.0), np.array([1.0]), np.array([0.1]), np.array([9.0])).round(6)
    array([2.])
    """
    low, high = np.minimum(low, high), np.maximum(low, high)
    p: np.ndarray = np.clip(start, low, high)
    damping = 1e-3
    r = residuals(p)
    for _ in range(60):
        steps = 1e-6 * np.maximum(np.abs(p), 1e-9)
        slopes = np.stack([(residuals(p + step * unit) - r) / step
                           for step, unit in zip(steps, np.eye(len(p)), strict=True)], axis=1)  # fmt: skip
        normal = slopes.T @ slopes
        move = np.linalg.lstsq(normal + damping * np.diag(np.diag(normal)), -slopes.T @ r, rcond=None)[0]
        trial: np.ndarray = np.clip(p + move, low, high)
        r_trial = residuals(trial)
        better = r_trial @ r_trial < r @ r
        if better and np.allclose(trial, p, rtol=1e-10, atol=0.0):
            return trial
        p, r = (trial, r_trial) if better else (p, r)
        damping = damping / 5.0 if better else damping * 4.0
        if damping > 1e12:
            break
    return p
