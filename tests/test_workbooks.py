"""The shipped workbooks are the ones that the present code makes."""

from pathlib import Path

import openpyxl
import pytest

from stripcheck.cli import main

FOLDER = Path(__file__).parents[1] / "workbooks"
# each with the command that makes it anew: stripcheck demo -o workbooks/lantern-range.xlsx --force
COMMANDS = {
    "lantern-range.xlsx": ["demo"], "trip.xlsx": ["trip", "--demo"], "what-if.xlsx": ["whatif", "--demo"],
    "register.xlsx": ["register", "--demo"],
}  # fmt: skip


@pytest.fixture(scope="module", params=COMMANDS)
def shipped_and_fresh(request, tmp_path_factory):
    path = tmp_path_factory.mktemp("demo") / request.param
    assert main([*COMMANDS[request.param], "-o", str(path)]) == 0
    return FOLDER / request.param, path


@pytest.mark.parametrize("values", [False, True], ids=["formulas", "values"])
def test_the_shipped_workbook_is_current(shipped_and_fresh, values):
    """Cell by cell; only the date differs."""
    shipped, made = (openpyxl.load_workbook(path, data_only=values) for path in shipped_and_fresh)
    assert shipped.sheetnames == made.sheetnames
    compared = 0
    for sheet in made.worksheets:
        for row in sheet.iter_rows():
            for cell in row:
                old = shipped[sheet.title][cell.coordinate].value
                if str(cell.value).startswith("Filled: "):
                    continue
                compared += cell.value is not None
                if isinstance(cell.value, float) and isinstance(old, float | int):
                    # machines differ in the last digits of powers and sines
                    assert old == pytest.approx(cell.value, rel=1e-9, abs=1e-6), f"{sheet.title}!{cell.coordinate}"
                else:
                    assert old == cell.value, f"{sheet.title}!{cell.coordinate}"
    assert compared > 8_000


@pytest.mark.parametrize("name", COMMANDS)
def test_it_is_small_enough_to_send(name):
    assert (FOLDER / name).stat().st_size < 1_000_000
