"""Columns of invented strips as messy as real lists are: gaps, words that are not known, values that can't be."""

from __future__ import annotations

import numpy as np

from stripcheck.inputs import STRIP

# least and most in SI, beyond what is credible at either end, and the share of rows without a value
RANGES = {
    "length": (250.0, 1500.0, 0.1), "tora": (0.0, 1600.0, 0.1), "lda": (0.0, 1600.0, 0.1), "width": (4.0, 40.0, 0.3),
    "elevation_start": (-100.0, 3000.0, 0.3), "elevation_end": (-100.0, 3000.0, 0.3),
    "elevation_field": (-600.0, 5800.0, 0.2), "slope_given": (-0.12, 0.16, 0.3), "local_slope": (0.0, 0.2, 0.5),
    "heading": (0.0, 6.2832, 0.1), "obstacle_height": (0.0, 80.0, 0.5), "obstacle_distance": (0.0, 2000.0, 0.5),
    "approach_obstacle_height": (0.0, 80.0, 0.5), "approach_obstacle_distance": (0.0, 2000.0, 0.5),
    "own_temperature": (250.0, 340.0, 0.6), "own_qnh": (84000.0, 109000.0, 0.8), "own_wind_from": (0.0, 6.2832, 0.5),
    "own_wind_speed": (0.0, 20.0, 0.5), "profile_takeoff_slope": (-0.1, 0.1, 0.9), "profile_takeoff_roll": (100.0, 900.0, 0.5),
    "profile_landing_slope": (-0.1, 0.1, 0.9), "profile_landing_roll": (100.0, 500.0, 0.5),
    "profile_takeoff_usable": (0.0, 1600.0, 0.97), "profile_landing_usable": (0.0, 1600.0, 0.97),
    "profile_climb_slope": (-0.1, 0.1, 0.9), "profile_approach_slope": (-0.1, 0.1, 0.9),
}  # fmt: skip


def messy_columns(rows: int, seed: int) -> dict[str, np.ndarray]:
    """A column in SI for each value of the strip; now and then an infinite one."""
    random = np.random.default_rng(seed)
    columns: dict[str, np.ndarray] = {}
    for item in STRIP:
        if item.kind == "number":
            low, high, gaps = RANGES[item.key]
            column = random.uniform(low, high, rows)
            column[random.random(rows) < gaps] = np.nan
            column[random.random(rows) < 0.002] = random.choice([np.inf, -np.inf])
            columns[item.key] = column
        elif item.kind == "choice":
            columns[item.key] = random.integers(-1, 8 if item.key == "surface" else 3, rows)
        else:
            columns[item.key] = random.random(rows) < (0.02 if item.kind == "fault" else 0.95)
    columns["own_wind_speed"][random.random(rows) < 0.2] = 0.0
    for side in ("obstacle", "approach_obstacle"):  # most obstacles have both figures or neither
        height, distance = columns[f"{side}_height"], columns[f"{side}_distance"]
        half = (np.isfinite(height) != np.isfinite(distance)) & (random.random(rows) < 0.95)
        height[half] = distance[half] = np.nan
    return columns
