"""What xlwings' Python side and the Excel door cost a call, over a stand-in for pywin32.

Excel, VBA and the way through COM come on top of it, and were not there to be measured.
"""

import contextlib
import time
from collections.abc import Callable

from stripcheck.doors.call import call
from stripcheck.doors.functions import BY_NAME, FUNCTIONS
from tests.doors.pywin32_stand_in import DOOR, MISSING, Cells, Workbook, windows_xlwings

MOST = 100e-6  # s, of a scalar call without the function's own work
LEAST_RATE = 100_000  # rows a second, of a column in one call
ROWS = 40_000


def best(function: Callable[[], object], calls: int, runs: int = 40) -> float:
    """Seconds a call, in the best of many runs: something else may be running in the others."""
    least = float("inf")
    for _ in range(runs):
        start = time.perf_counter()
        for _ in range(calls):
            function()
        least = min(least, (time.perf_counter() - start) / calls)
    return least


def test_a_scalar_call_and_a_column(capsys):
    longest = max(FUNCTIONS, key=lambda function: len(function.all_arguments))
    short = BY_NAME["DENSITY_ALT"]
    with windows_xlwings() as windows:
        com, book, caller = windows.server.XLPython(), Workbook(), Cells((None,))

        def udf(function, cells):
            left_out = [MISSING] * (len(function.all_arguments) - len(cells))
            return com.CallUDF(DOOR, function.full_name, [*cells, *left_out], book, caller)

        whole = best(lambda: udf(short, short.example), 100)
        own = best(lambda: call(short, *short.example), 100)
        column = Cells(*((float(row % 9000),) for row in range(ROWS)))
        rows = best(lambda: udf(short, (column, 1008.0, 31.0)), 1, runs=7)
        with contextlib.ExitStack() as nothing:  # the functions' own work left out
            kept = windows.door.call
            nothing.callback(setattr, windows.door, "call", kept)
            windows.door.call = lambda function, *cells: 1.0
            assert udf(longest, longest.example) == 1.0
            costs = {function.name: best(lambda f=function: udf(f, f.example), 100) for function in (short, longest)}
    with capsys.disabled():
        print(f"\nExcel door: xlwings' side of a scalar call {1e6 * costs[short.name]:.0f} us ({short.name}), "
              f"{1e6 * costs[longest.name]:.0f} us ({longest.name}, {len(longest.all_arguments)} arguments); "
              f"{short.name} whole {1e6 * whole:.0f} us, of which {1e6 * own:.0f} us its own; "
              f"a column of {ROWS:,} cells {ROWS / rows:,.0f} rows/s")  # fmt: skip
    assert max(costs.values()) <= MOST
    assert ROWS / rows >= LEAST_RATE
