"""Lists of invented runways, uglier than real ones: units in cells, words of many spellings, contradictions, nonsense."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np

HEADERS = (
    "Strip",
    "Name",
    "Runway",
    "le_latitude_deg",
    "le_longitude_deg",
    "he_latitude_deg",
    "he_longitude_deg",
    "Heading",
    "Length [ft]",
    "Usable length",
    "TORA end 1",
    "TORA end 2",
    "LDA",
    "LDA end 2",
    "Displaced threshold",
    "Displaced threshold end 2",
    "Width",
    "Elevation",
    "Elevation end 1",
    "Elevation end 2",
    "Slope",
    "Greatest local slope",
    "Slope profile",
    "Surface",
    "Condition",
    "Obstacle height end 1",
    "Obstacle distance end 1",
    "Obstacle height end 2",
    "Obstacle distance end 2",
    "Land on",
    "Leave by",
    "One-way",
    "Closed",
    "Surveyed",
    "Notes",
    "Months closed",
    "Owner",
)
RUNWAYS = (
    "09/27",
    "9/27",
    "Rwy 18",
    "04L/22R",
    "N/S",
    "NE-SW",
    "A/B",
    "07",
    "H1",
    "",
    "9-Mar",
    "09/27/31",
    "22 / 04",
    "36/18",
    "RWY 13/31",
    "1/19",
    "17",
    "x/y",
    "03/30",
)
SURFACES = (
    "grass",
    "TURF-G",
    "Gravel, oiled",
    "Soft sand",
    "asphalt",
    "murram",
    "long wet grass",
    "moon dust",
    "",
    "G",
    "ice",
    "water",
    "CON",
    "Compacted snow",
    "n/a",
    "mats",
)


def write_ugly(path: Path, rows: int, seed: int, ugliness: float = 0.05) -> Path:
    """Write a list of so many runways; so great a share of the cells is nonsense."""
    random = np.random.default_rng(seed)
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file)
        writer.writerow(HEADERS)
        writer.writerows(_row(random, number, ugliness) for number in range(rows))
    return path


def _row(random: np.random.Generator, number: int, ugliness: float) -> list[object]:
    def some(value: object, share: float) -> object:
        if random.random() < ugliness:
            return random.choice(["far", "?", "-", "12 kg", "1,5", "-9999", "99999", "NaN", "0", " 7 ", "3 ft", "1e3"])
        return value if random.random() < share else ""

    runway = str(random.choice(RUNWAYS))
    length, low = int(random.integers(300, 5200)), int(random.integers(-200, 9000))
    rise = random.normal(0.0, 0.05) * length
    one = [end.strip() for end in runway.replace("RWY", "").replace("-", "/").split("/")]
    way = random.random()
    first, second = (one[0], one[-1]) if way < 0.15 else (one[-1], f"{one[0]} only") if way < 0.2 else ("", "")
    metres = length * 0.3048
    latitude, longitude, course = random.uniform(-60, 60), random.uniform(-179, 179), random.uniform(0, 2 * np.pi)
    north = metres * np.cos(course) / 111_195.0
    east = metres * np.sin(course) / 111_195.0 / np.cos(np.radians(latitude))
    there = random.random() < 0.5
    place = [f"{value:.6f}" if there else "" for value in (latitude, longitude, latitude + north, longitude + east)]
    profile = f"0:0, {metres * 0.4:.0f}:{metres * 0.004:.1f}, {metres:.0f}:{metres * 0.02:.1f}"
    profiled = random.random() < 0.1
    return [
        some(f"U{number:03d}", 0.97),
        some(f'Strip "{number}"', 0.9),
        runway,
        *place,
        some(int(random.integers(0, 361)), 0.4),
        some(random.choice([f"{length}", f"{metres:.1f} m", f"{length} ft"]), 0.95),
        some(f"{metres * 0.9:.0f}", 0.1),
        some(f"{metres * random.uniform(0.5, 1.2):.0f}", 0.15),
        some(f"{metres * 0.8:.0f} m", 0.1),
        some(f"{metres * random.uniform(0.5, 1.2):.0f}", 0.15),
        some(f"{metres * 0.7:.0f}", 0.1),
        some(int(random.integers(0, 200)), 0.15),
        some(int(random.integers(20, 90)), 0.1),
        some(int(random.integers(0, 60)), 0.7),
        some(random.choice([f"{low}", f"{low * 0.3048:.1f} m"]), 0.5),
        some(low, 0.6),
        some(round(low + rise), 0.6),
        "" if profiled else some(round(float(random.normal(0, 5)), 1), 0.3),
        some(round(float(random.uniform(0, 15)), 1), 0.2),
        profile if profiled else some("0:0, up:3", 0.01),
        random.choice(SURFACES),
        random.choice(["", "", "", "dry", "wet", "boggy", "soft", "frosty"]),
        *_obstacle(random),
        *_obstacle(random),
        some(first, 1.0),
        some(second, 1.0),
        random.choice(["", "", "", "", "yes", "no", "maybe"]),
        random.choice(["", "", "", "", "", "no", "yes", "perhaps"]),
        random.choice(["2024-05-01", "", "spring 2020"]),
        random.choice(["", "=1+1", "wet in May", "- none"]),
        random.choice(["", "", "Jun-Aug", "Nov - Feb", "when it snows"]),
        random.choice(["nobody", "", "=A1"]),
    ]


def _obstacle(random: np.random.Generator) -> tuple[object, object]:
    kind = random.random()
    height, distance = f"{random.integers(5, 90)} ft", int(random.integers(50, 1500))
    return (
        ("", "")
        if kind < 0.6
        else (height, "")
        if kind < 0.65
        else ("", distance)
        if kind < 0.7
        else (0, "")
        if kind < 0.75
        else (height, distance)
    )
