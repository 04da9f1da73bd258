"""Programs: only what is wanted runs, in few buffers, over any number of rows. Numbers are in test_recording.py."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from stripcheck.program import BLOCK, Program
from stripcheck.recording import Recorder


def test_only_what_is_wanted_runs() -> None:
    x = Recorder().column("x", np.dtype(float))
    np.exp(x)  # nothing wants it
    program = Program({"y": np.sqrt(x + 1.0) * 2.0})
    assert [node.function for node in program.order] == [None, np.add, np.sqrt, np.multiply]


@pytest.mark.parametrize("rows", [1, BLOCK - 1, BLOCK, BLOCK + 1, 2 * BLOCK + 5])
def test_any_number_of_rows(rows: int) -> None:
    x = np.linspace(0.0, 1.0, rows)
    node = Recorder().column("x", x.dtype)
    found = Program({"y": 2.0 * node - 1.0, "x": node}).run({"x": x}, rows)
    np.testing.assert_array_equal(found["y"], 2.0 * x - 1.0)
    np.testing.assert_array_equal(found["x"], x)


def test_few_buffers_serve_a_long_program() -> None:
    recorder = Recorder()
    result: Any = recorder.column("x", np.dtype(float))
    for i in range(50):
        result = np.sqrt(result + float(i + 1))
    program = Program({"y": result})
    assert len(program.order) == 101 and program.counts[8] <= 2


def test_rows_of_a_sum_run_one_after_the_other() -> None:
    recorder = Recorder()
    x, y = (recorder.column(key, np.dtype(float)) for key in "xy")
    total = np.tensordot(np.ones(3), 1.0 / (x + y * np.multiply.outer(np.array([0.1, 0.5, 0.8]), x)), 1)
    rows = [node.row for node in Program({"sum": total}).order if node.stage == 1]
    assert rows == sorted(rows) and set(rows) == {0, 1, 2}


def test_a_result_that_others_read_is_kept() -> None:
    """Two results are the same node, and a third one is made from them in place of what nothing else needs."""
    x = Recorder().column("x", np.dtype(float))
    root = np.sqrt(x)
    found = Program({"root": root, "same": root, "more": root + 1.0}).run({"x": np.array([4.0, 9.0])}, 2)
    assert found["root"].tolist() == found["same"].tolist() == [2.0, 3.0]
    assert found["more"].tolist() == [3.0, 4.0]
