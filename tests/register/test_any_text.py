"""Whatever stands in the cells: a list is read, or refused with one sentence, and never breaks."""

from __future__ import annotations

import csv
import tempfile
from pathlib import Path

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from stripcheck.errors import InputError
from stripcheck.register import read_list
from stripcheck.register.limits import outside

HEADERS = ["Strip", "Runway", "Length", "Surface", "Elev 1 ft", "Slope", "Heading", "Temp", "QNH", "Wind", "Closed"]
HEADERS += ["Land on", "Displaced threshold", "Obstacle height", "Obstacle distance end 2", "Other"]

LIKELY = [
    "600",
    "2.300",
    "1,5",
    "4 %",
    "09",
    "09/27",
    "yes",
    "-",
    "n/a",
    "1013",
    "29.92 inHg",
    "12 **",
    "5 kg/",
    "°",
    "1e400",
]
CELLS = st.one_of(st.sampled_from(LIKELY), st.text(st.characters(codec="utf-8", exclude_characters="\0"), max_size=12))


@given(
    rows=st.lists(st.lists(CELLS, max_size=len(HEADERS) + 1), min_size=1, max_size=4),
    delimiter=st.sampled_from(",;\t|"),
)
@settings(max_examples=150)
def test_any_cells(rows: list[list[str]], delimiter: str) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "a.csv"
        with path.open("w", encoding="utf-8", newline="") as stream:
            csv.writer(stream, delimiter=delimiter).writerows([HEADERS, *rows])
        try:
            strips = read_list(path)
        except InputError as error:
            assert "\n" not in str(error)
            assert not any(cell.strip() for row in rows for cell in row)  # only a list without runways is refused
            return
    assert strips.rows_read == len(strips.left_out) + strips.n // 2
    for key in ("length", "heading", "temperature", "qnh", "wind_speed", "obstacle_height"):
        assert not outside(key, strips.numbers[key]).any()
    unusable = np.array([bool(fault) for fault in strips.texts["fault"]])
    assert np.all(unusable | ~np.isinf(strips.numbers["lda"]))
