"""Runway lists of invented strips, as awkward as real ones, drawn from a seeded generator."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np

HEADERS = ("Strip", "Name", "Runway", "Length [m]", "Width [m]", "Surface", "Condition", "Elevation end 1 [ft]",
           "Elevation end 2 [ft]", "Elevation [ft]", "Slope [%]", "Land on", "Leave by", "Obstacle height end 1 [ft]",
           "Obstacle distance end 1 [m]", "Obstacle height end 2 [ft]", "Obstacle distance end 2 [m]",
           "Displaced threshold end 1 [m]", "Temperature [°C]", "QNH [hPa]", "Wind from", "Wind speed [kt]",
           "Caretaker")  # fmt: skip
SURFACES = ("grass", "Gravel", "dirt", "ASP", "long grass", "sand", "moss of the moon", "ICE", "snow", "")


def write_list(path: Path, rows: int, seed: int) -> Path:
    """Write a list of so many strips. Every column is blank somewhere, some cells are nonsense."""
    rng = np.random.default_rng(seed)

    def some(value: object, share: float) -> object:
        return value if rng.random() < share else ""

    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file)
        writer.writerow(HEADERS)
        for i in range(rows):
            number = int(rng.integers(1, 19))
            ends = f"{number:02d}", f"{number + 18:02d}"
            length = int(rng.integers(250, 1500))
            low = int(rng.integers(-100, 9500))
            rise = rng.normal(0.0, 0.04) * length / 0.3048
            one_way = rng.random() < 0.2
            writer.writerow([
                f"X{i:03d}", f'Strip "{i}", invented', "/".join(ends), some(length if rng.random() > 0.03 else "long", 0.97),
                some(int(rng.integers(6, 40)), 0.8), rng.choice(SURFACES), some(rng.choice(["dry", "wet", "soft"]), 0.4),
                some(low, 0.9), some(round(low + rise), 0.9), some(low, 0.5), some(round(rng.normal(0.0, 4.0), 1), 0.2),
                ends[0] if one_way else "", ends[1] if one_way else "",
                *_obstacle(rng), *_obstacle(rng), some(int(rng.integers(20, 90)), 0.1),
                some(round(rng.uniform(-20.0, 42.0), 1), 0.3), some(round(rng.uniform(990.0, 1035.0), 1), 0.2),
                *((int(rng.integers(0, 360)), int(rng.integers(0, 25))) if rng.random() < 0.3 else ("", "")),
                rng.choice(["=1+1", "nobody", "@home", "12"]),
            ])  # fmt: skip
    return path


def _obstacle(rng: np.random.Generator) -> tuple[object, object]:
    if rng.random() < 0.7:
        return "", ""
    return int(rng.integers(10, 300)), int(rng.integers(50, 1500))
