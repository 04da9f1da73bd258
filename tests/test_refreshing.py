"""A refresh: what is a user's stays to the byte, what is ours is right, and nothing stops it half way."""

from __future__ import annotations

import multiprocessing
import os
import random
import re
import subprocess
import sys
import textwrap
import time
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.utils.cell import coordinate_to_tuple

from stripcheck.cli import main
from stripcheck.refreshing import Request, refresh_book
from stripcheck.rules import load_rules
from stripcheck.sheet.package import Package
from tests.book_parts import Parts, SheetText
from tests.filled_books import (
    DAY,
    KINDS,
    State,
    card_of,
    copy_direction,
    filled,
    is_own,
    move_rows,
    options_at_random,
    rows_of,
    sister_of,
    type_at_random,
    type_on_page,
    type_on_strips,
    verdicts_must_be,
    with_everything,
)
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences, same
from tests.user_content import CHAIN, chain_cells, foreign_parts, own_cells, set_calc_chain

ROUNDS = 25  # of four refreshes each
NATIVE = ("full", "short", "chance", "profile", "plain", "many tables")

pytestmark = pytest.mark.filterwarnings("ignore:.*extension is not supported:UserWarning")  # openpyxl, of what it would lose


def edited(kind: str, chance: random.Random, folder: Path, macros: bool = False) -> tuple[Path, State]:
    """A workbook with everything of a user's, edited at random, and what it stands for."""
    parts, state = with_everything(kind, macros), State(card_of(kind))
    if chance.random() < 0.7:
        move_rows(parts, chance)
    type_at_random(parts, state, chance)
    set_calc_chain(parts)
    path = folder / f"{kind}.{'xlsm' if macros else 'xlsx'}"
    parts.write(path)
    return path, state


def strips_part(path: Path) -> str:
    parts = Parts.read(path)
    return parts.text(parts.sheet("Strips"))


def formula_cells(parts: Parts) -> list[tuple[str, str]]:
    """The same of each cell with a formula."""
    again = Parts(parts)
    set_calc_chain(again)
    return chain_cells(again)


def refresh_and_look(path: Path, state: State, options: Sequence[str]) -> None:
    """Refresh a workbook; all that is a user's must be as it was, and all that is ours as `assess` has it."""
    own, native = is_own(Parts.read(path)), "INDEX(takeoff_verdict_words" in strips_part(path)
    foreign, cells, chain = foreign_parts(path), own_cells(path, own), chain_cells(Parts.read(path))
    assert len(foreign) > 30 and len(cells) > 80
    assert main(["refresh", str(path), *options]) == 0
    after = foreign_parts(path)
    changed = [name for name in foreign if after.get(name) != foreign[name]]
    assert len(after) == len(foreign) and changed in ([], [CHAIN])
    if changed:  # cells that have no formula any more must not stand in the order of calculation
        parts = Parts.read(path)
        live = set(formula_cells(parts))
        assert chain_cells(parts) == [cell for cell in chain if cell in live] != chain
    assert own_cells(path, own) == cells
    assert ("INDEX(takeoff_verdict_words" in strips_part(path)) == native
    assert verdicts_must_be(path, state) == []
    assert package_faults(path) == []


@pytest.mark.parametrize("number", range(ROUNDS))
def test_all_that_is_a_users_stays_and_all_that_is_ours_is_right(tmp_path: Path, number: int) -> None:
    chance, kind = random.Random(number), list(KINDS)[number % len(KINDS)]
    path, state = edited(kind, chance, tmp_path, macros=number % 5 == 0)
    for _ in range(2):
        refresh_and_look(path, state, options_at_random(kind, state, chance, tmp_path))
        before = Parts.read(path)
        assert main(["refresh", str(path)]) == 0  # once more: nothing is left to change but the time of the refresh
        after = Parts.read(path)
        assert [name for name in before if after[name] != before[name] and name != before.sheet("Method")] == []


@pytest.mark.parametrize("kind", NATIVE)
def test_an_office_recalculates_what_stands_beside_the_formulas(office, tmp_path: Path, kind: str) -> None:
    chance = random.Random(kind)
    path, state = edited(kind, chance, tmp_path)
    own = is_own(Parts.read(path))
    assert main(["refresh", str(path), *options_at_random(kind, state, chance, tmp_path)]) == 0
    with office.open(path) as book:
        book.recalculate()
        count, found = differences(book, path)
    ours = [one for one in found if not _is_own(own, one)]
    assert (count > 800, ours) == (True, [])


@pytest.mark.parametrize("kind", ["full", "short"])
def test_odd_words_in_cells_count_as_the_formulas_take_them(office, tmp_path: Path, kind: str) -> None:
    parts, path = Parts.read(filled(kind)), tmp_path / "book.xlsx"
    rows = rows_of(parts, "Strips")
    numbers = ("width", "elevation_start", "local_slope", "obstacle_height", "obstacle_distance", "approach_obstacle_height",
               "approach_obstacle_distance", "own_qnh", "tora", "lda", "slope_given", "heading")  # fmt: skip
    words = (("surface", "GRASS"), ("surface", "grass "), ("condition", "Wet"), ("take_off_here", "NO"), ("land_here", " no"),
             ("fault", "paced"), ("surface", 7.0), ("condition", 7.0))  # fmt: skip
    for row, key in zip(rows, numbers, strict=True):
        type_on_strips(parts, row, key, "12 m")
    for row, (key, word) in zip(rows[1:], words, strict=False):
        type_on_strips(parts, row, key, word)
    type_on_page(parts, "Day", "Ground condition", "WET")
    parts.write(path)
    assert main(["refresh", str(path)]) == 0
    with office.open(path) as book:
        book.recalculate()
        count, found = differences(book, path)
    assert (count > 1000, found) == (True, [])


def _is_own(own: object, difference: str) -> bool:
    title, _, cell = difference.split(":")[0].partition("!")
    return title == "My notes" or own(title, *coordinate_to_tuple(cell))  # type: ignore[operator]


# --- what other programs saved


def shown(path: Path) -> dict[tuple[str, str], object]:
    """Every cell as a reader without formulas sees it; blank ones left out."""
    book = openpyxl.load_workbook(path, data_only=True)
    return {(sheet.title, cell.coordinate): cell.value for sheet in book.worksheets for row in sheet.iter_rows() for cell in row
            if cell.value not in (None, "")}  # fmt: skip


def not_the_same(path: Path, other: Path) -> list[str]:
    """Where two workbooks show something else, but for the line that tells when they were filled."""
    one, two = shown(path), shown(other)
    return [f"{place}: {one.get(place)!r}, not {two.get(place)!r}" for place in sorted(one.keys() | two.keys())
            if not same(one.get(place), two.get(place), 1000.0) and "first filled" not in str(one.get(place))]  # fmt: skip


@pytest.mark.parametrize("kind", KINDS)
def test_a_refresh_of_what_was_just_filled_changes_no_value(tmp_path: Path, kind: str) -> None:
    path = tmp_path / "book.xlsx"
    Parts.read(filled(kind)).write(path)
    lines = refresh_book(Request(path))
    assert "Changed: 0 verdicts" in lines
    assert not_the_same(path, filled(kind)) == []


@pytest.mark.parametrize("kind", ["full", "profile", "none", "calc"])
def test_a_workbook_that_an_office_saved_is_refreshed_too(office, tmp_path: Path, kind: str) -> None:
    saved, expected = tmp_path / "saved.xlsx", tmp_path / "expected.xlsx"
    with office.open(filled(kind)) as book:
        book.recalculate()
        book.save_as(saved)
    parts = Parts.read(filled(kind))
    parts.write(expected)
    options = ["--takeoff-mass", "960", "--qnh", "1003"]
    before = foreign_parts(saved)
    assert main(["refresh", str(saved), *options]) == 0 and main(["refresh", str(expected), *options]) == 0
    assert not_the_same(saved, expected) == []
    changed = {name for name, digest in foreign_parts(saved).items() if before[name] != digest}
    assert changed == {"xl/workbook.xml"}  # which tells now to work all out when it is opened
    doors = [re.findall(r"(?i)<f[^>]*>STRIP[._]", Parts.read(path).text(parts.sheet("Strips"))) for path in (saved, expected)]
    assert len(doors[0]) == len(doors[1]) and bool(doors[0]) == (kind in ("calc", "excel"))
    if kind not in ("calc", "excel"):  # whose functions this office does not know
        with office.open(saved) as book:
            book.recalculate()
            assert differences(book, saved)[1] == []


@pytest.mark.parametrize("kind", ["full", "many tables", "excel"])
def test_a_workbook_without_results_gets_them(tmp_path: Path, kind: str) -> None:
    saved, expected = tmp_path / "saved.xlsx", tmp_path / "expected.xlsx"
    openpyxl.load_workbook(filled(kind)).save(saved)
    Parts.read(filled(kind)).write(expected)
    said = refresh_book(Request(saved, day={"qnh": "1003"}))
    assert any("no verdict before" in line for line in said)
    refresh_book(Request(expected, day={"qnh": "1003"}))
    assert not_the_same(saved, expected) == []


def test_shared_formulas_in_columns_of_ours_are_taken_over(tmp_path: Path) -> None:
    parts = Parts.read(filled("full"))
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    column, rows = sheet.headers(3)["Take-off margin [m]"], rows_of(parts, "Strips")
    letter = openpyxl.utils.get_column_letter(column)
    text = sheet.rows[rows[0]][column].partition("<f>")[2].partition("</f>")[0]
    first = f'<f t="shared" ref="{letter}{rows[0]}:{letter}{rows[-1] + 2}" si="3">{text}</f><v>1</v>'
    for row in (*rows, rows[-1] + 2):  # the last one is below the table, in a row of a user's
        sheet.put(row, column, first if row == rows[0] else '<f t="shared" si="3"/><v>1</v>')
    parts.put(parts.sheet("Strips"), str(sheet))
    path = tmp_path / "book.xlsx"
    parts.write(path)
    assert main(["refresh", str(path)]) == 0
    after = openpyxl.load_workbook(path)["Strips"]
    expected = openpyxl.load_workbook(filled("full"))["Strips"]
    assert [after.cell(row, column).value for row in rows] == [expected.cell(row, column).value for row in rows]
    below, last = after.cell(rows[-1] + 2, column), expected.cell(rows[-1], column)
    assert below.value == str(last.value).replace(str(rows[-1]), str(rows[-1] + 2))
    assert "shared" not in Parts.read(path).text(parts.sheet("Strips"))


@pytest.mark.parametrize("kind", ["excel", "calc", "lambda"])
def test_a_formula_of_a_door_stays_while_the_function_knows_all_that_counts(tmp_path: Path, kind: str) -> None:
    parts, path = with_everything(kind), tmp_path / "book.xlsx"
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    column = sheet.headers(3)["Take-off verdict"]
    live = [row for row in rows_of(parts, "Strips") if "<f" in sheet.rows[row][column]]
    assert len(live) >= 2
    type_on_strips(parts, live[0], "obstacle_height", 90.0)
    type_on_strips(parts, live[0], "obstacle_distance", 100.0)
    parts.write(path)
    state = State(card_of(kind), day={**DAY, "qnh": 1003})
    refresh_and_look(path, state, ["--qnh", "1003"])
    after = SheetText.of(Parts.read(path).text(parts.sheet("Strips")))
    assert [row for row in rows_of(parts, "Strips") if "<f" in after.rows[row][column]] == live[1:]
    refresh_and_look(path, State(card_of(kind), day={**state.day, "humidity": 60}), ["--humidity", "60"])
    assert "STRIP" not in "".join(re.findall("<f.*?</f>", Parts.read(path).text(parts.sheet("Strips"))))


# --- rows that were added


def test_ranges_and_formulas_reach_over_rows_that_were_added(office, tmp_path: Path) -> None:
    parts, path = Parts.read(filled("full")), tmp_path / "book.xlsx"
    last, chance = rows_of(parts, "Strips")[-1], random.Random(1)
    for row, way in ((last + 1, "17"), (last + 2, "35"), (last + 3, "09")):
        copy_direction(parts, 4, row, "XADD", chance, way)
    parts.write(path)
    assert main(["refresh", str(path)]) == 0
    book = openpyxl.load_workbook(path)
    strips, summary = book["Strips"], book["Summary"]
    assert [strips.cell(row, 1).value for row in range(last + 1, last + 4)] == ["row 1 1", "row 1 2", "row 2 1"]
    assert [summary.cell(row, 9).value for row in (21, 22)] == ["17/35", "09"]
    for sheet, end in ((strips, last + 3), (summary, 22)):
        ranges = [str(one.sqref) for one in (*sheet.conditional_formatting, *sheet.data_validations.dataValidation)]
        table = [cells for cells in ranges if not cells.startswith(("J5", "P5"))]  # there are the counts above the Summary
        assert len(table) > 2 and all(cells.endswith(str(end)) for cells in (*table, sheet.auto_filter.ref, sheet.dimensions))
        for column in range(5, 15):
            assert sheet.cell(end, column).style_id == sheet.cell(end - 3, column).style_id
    assert summary["P6"].value is not None and '$22,"' in summary["Q6"].value
    with office.open(path) as opened:
        opened.recalculate()
        assert differences(opened, path)[1] == []


# --- what is told, and what is refused


def test_what_changed_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    parts, path = Parts.read(filled("full")), tmp_path / "book.xlsx"
    type_on_strips(parts, 4, "tora", 300.0)
    type_on_strips(parts, 6, "take_off_here", "no")
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    sheet.type(9, sheet.headers(3)["Take-off margin [m]"], 999.0)
    parts.put(parts.sheet("Strips"), str(sheet))
    parts.write(path)
    capsys.readouterr()
    assert main(["refresh", str(path), "--temp", "20"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0] == f"{path}: 12 directions refreshed"
    assert lines[1] == "Typed over formulas, and formulas again: Strips!L9"
    assert lines[2].startswith("Changed: ") and "  XLRB 14, take-off: suitable -> unsuitable" in lines
    assert lines[-1].startswith("Planning aid only.")
    copy = next(line for line in lines if line.startswith("The version before: ")).removeprefix("The version before: ")
    assert (tmp_path / copy).read_bytes() != path.read_bytes() and not_the_same(tmp_path / copy, path) != []


def test_lines_of_the_method_tell_what_holds_now(tmp_path: Path) -> None:
    def told(path: Path) -> list[str]:
        return [str(row[0].value) for row in openpyxl.load_workbook(path)["Method"].iter_rows(max_row=30) if row[0].value]

    path = tmp_path / "book.xlsx"
    parts = Parts.read(filled("plain"))
    parts.write(path)
    default = "Ground condition: dry used, none was given"
    heat = "The day's temperature stands for every strip that has none of its own, whatever its elevation"
    slope = "Slope of 3.0% against you, both ways, where none is known"
    assert default in told(path) and heat not in told(path) and slope not in told(path)
    sister = sister_of("plain", tmp_path)
    options = ["--card", sister, "--rules", "us-private", "--temp", "20", "--ground", "wet", "--assume-slope", "3"]
    assert main(["refresh", str(path), *options]) == 0
    lines = told(path)
    assert default not in lines and f"{slope}; {heat}" in " ".join(lines)  # as many lines as there were
    assert "Aircraft card: sister.toml: Sister of Trial Heron" in lines
    assert all(any(line.startswith(words) for line in lines) for words in ("Rule set: us-private: ", "Refreshed: "))
    book = openpyxl.load_workbook(path, data_only=True)
    assert book["Strips"]["B1"].value == "Sister of Trial Heron: every direction"
    assert book["Summary"]["H4"].value == book["Aircraft"]["A1"].value == "Sister of Trial Heron"
    assert book["Summary"]["H13"].value == book["Rules"]["A1"].value == load_rules("us-private").title


@pytest.mark.parametrize(("options", "says"), [
    (["--card", "high-mule"], "filled for an aeroplane of another make"),
    (["--card", "nowhere.toml"], "nowhere.toml"),
    (["--rules", "none-such"], "none-such"),
    (["--takeoff-mass", "9000"], "take-off mass of 9000: the workbook allows up to 1,110 kg"),
    (["--takeoff-flap", "90"], "--takeoff-flap"),
    (["--qnh", "600"], "day: QNH: 600 is neither"),
    (["--temp", "20", "--isa-dev", "10"], "either a temperature or an ISA deviation"),
    (["-o", "other.csv"], "must end in .xlsx, as that of the workbook does"),
    (["-o", "nowhere/other.xlsx"], "the folder does not exist"),
])  # fmt: skip
def test_what_does_not_fit_is_refused_and_nothing_is_written(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], options: list[str], says: str
) -> None:
    path = tmp_path / "book.xlsx"
    Parts.read(filled("full")).write(path)
    before = path.read_bytes()
    options = [str(tmp_path / option) if option.startswith(("other", "nowhere/")) else option for option in options]
    assert main(["refresh", str(path), *options]) == 2
    assert says in capsys.readouterr().err
    assert path.read_bytes() == before and list(tmp_path.iterdir()) == [path]


def test_another_file_is_written_where_one_is_named(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path, other = tmp_path / "book.xlsx", tmp_path / "other.xlsx"
    Parts.read(filled("full")).write(path)
    before = path.read_bytes()
    arguments = ["refresh", str(path), "-o", str(other), "--qnh", "1001"]
    assert main(arguments) == 0
    assert path.read_bytes() == before and sorted(tmp_path.iterdir()) == [path, other]
    assert main(arguments) == 2 and "this file exists" in capsys.readouterr().err
    assert main([*arguments, "--force"]) == 0 and sorted(tmp_path.iterdir()) == [path, other]
    assert main(["refresh", str(path), "-o", str(path), "--force"]) == 0 and len(list(tmp_path.iterdir())) == 3


def test_a_workbook_that_is_open_or_of_another_kind_is_left_alone(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path, lock = tmp_path / "book.xlsx", tmp_path / ".~lock.book.xlsx#"
    Parts.read(filled("full")).write(path)
    lock.touch()
    assert main(["refresh", str(path)]) == 2
    assert "is open in a spreadsheet program" in capsys.readouterr().err
    lock.unlink()
    for name, says in (("nowhere.xlsx", "there is no such file"), ("a.ods", ".xlsx or .xlsm"), ("a.csv", ".xlsx or .xlsm")):
        assert main(["refresh", str(tmp_path / name)]) == 2 and says in capsys.readouterr().err
    openpyxl.Workbook().save(path)
    assert main(["refresh", str(path)]) == 2 and "no workbook that `stripcheck fill` made" in capsys.readouterr().err


def test_a_workbook_that_is_saved_meanwhile_is_left_as_it_was_saved(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "book.xlsx"
    Parts.read(filled("full")).write(path)
    save = Package.save

    def saved_meanwhile(self: Package, *arguments: object) -> None:
        save(self, *arguments)  # type: ignore[arg-type]
        path.write_bytes(path.read_bytes() + b"more")

    monkeypatch.setattr(Package, "save", saved_meanwhile)
    assert main(["refresh", str(path)]) == 2
    assert path.read_bytes().endswith(b"more") and list(tmp_path.iterdir()) == [path]


# --- whatever stops it


KILLS, PARALLEL = 200, 4


def refresh_quietly(path: str, qnh: str) -> None:
    with open(os.devnull, "w") as sys.stdout:
        refresh_book(Request(Path(path), day={"qnh": qnh}))


class Killing:
    """Refreshes of one workbook, each killed at a random moment, one after the other; looks at what is left."""

    def __init__(self, folder: Path, seed: int) -> None:
        # processes are forked from one that has loaded all, so that the kills hit the work itself
        self.processes = multiprocessing.get_context("forkserver")
        self.processes.set_forkserver_preload(["stripcheck.refreshing", "tests.test_refreshing"])
        self.path, self.chance, self.killed = folder / "book.xlsx", random.Random(seed), 0
        folder.mkdir()
        self.states = [Parts.read(filled("small"))]
        self.states[0].write(self.path)
        self.longest = max(self.run("1001"), self.run("1009"))

    def run(self, qnh: str) -> float:
        """Refresh to the end; the workbook as it is then is one that it may be. Returns how long it took [s]."""
        begin = time.monotonic()
        process = self.processes.Process(target=refresh_quietly, args=(str(self.path), qnh))
        process.start()
        process.join()
        assert process.exitcode == 0
        self.states.append(Parts.read(self.path))
        return time.monotonic() - begin

    def kill(self, times: int) -> None:
        for number in range(times):
            moment = self.chance.uniform(0.0, self.longest)
            process = self.processes.Process(target=refresh_quietly, args=(str(self.path), ("1001", "1009")[number % 2]))
            process.start()
            process.join(moment)
            if process.exitcode is None:
                self.killed += 1
                self.longest *= 1.05
                process.kill()
                process.join()
            else:  # about one in five comes to its end, so that the kills reach up to there
                self.longest *= 0.8
            assert self.is_whole()

    def is_whole(self) -> bool:
        """Whether the workbook is, but for the time of its refresh, one of those that it may be."""
        parts = Parts.read(self.path)
        method = parts.sheet("Method")
        return any(all(parts.get(name) == data for name, data in state.items() if name != method) for state in self.states)


def test_a_refresh_killed_at_any_moment_leaves_a_whole_workbook(tmp_path: Path) -> None:
    kills = [Killing(tmp_path / str(number), number) for number in range(PARALLEL)]
    with ThreadPoolExecutor(PARALLEL) as threads:
        list(threads.map(lambda one: one.kill(KILLS // PARALLEL), kills))
    assert KILLS // 2 < sum(one.killed for one in kills) < KILLS - 10
    for one in kills:
        folder = one.path.parent
        names = [path.name for path in folder.iterdir()]
        spare = [name for name in names if name.startswith(".stripcheck-")]
        assert all(name == "book.xlsx" or name.startswith("book 20") or name in spare for name in names)
        old = time.time() - 2 * 86_400
        for name in spare:
            os.utime(folder / name, (old, old))
        refresh_book(Request(one.path))  # which takes away what was left behind
        assert not [path for path in folder.iterdir() if path.name.startswith(".stripcheck-")]


def test_a_full_disk_leaves_the_workbook_as_it_was(tmp_path: Path) -> None:
    path = tmp_path / "book.xlsx"
    with_everything("full").write(path)
    before, size = path.read_bytes(), path.stat().st_size
    code = textwrap.dedent("""
        import resource, signal, sys
        from stripcheck.cli import main
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (int(sys.argv[2]), resource.RLIM_INFINITY))
        sys.exit(main(["refresh", sys.argv[1], "--qnh", "1001"]))
    """)
    for limit in (0, 1000, size // 2, size * 9 // 10):
        run = subprocess.run([sys.executable, "-c", code, str(path), str(limit)], capture_output=True, text=True)
        assert (run.returncode, run.stdout) == (2, "")
        assert run.stderr.startswith(f"stripcheck: {path}: can't be written (File too large); ") and run.stderr.count("\n") == 1
        assert path.read_bytes() == before and list(tmp_path.iterdir()) == [path]


def test_a_full_file_system_leaves_the_workbook_as_it_was(tmp_path: Path) -> None:
    if os.geteuid() != 0 or not sys.platform.startswith("linux"):
        pytest.skip("only root may mount a small file system; RLIMIT_FSIZE stands for it above")
    parts = with_everything("full")
    parts.write(tmp_path / "book.xlsx")
    size = (tmp_path / "book.xlsx").stat().st_size
    disk = tmp_path / "disk"
    disk.mkdir()
    mount = ["mount", "-t", "tmpfs", "-o", f"size={size + size // 2}", "tmpfs", str(disk)]
    mounted = subprocess.run(mount, capture_output=True)
    if mounted.returncode:
        pytest.skip("this system lets nobody mount a file system; RLIMIT_FSIZE stands for it above")
    try:
        path = disk / "book.xlsx"
        parts.write(path)
        before = path.read_bytes()
        run = subprocess.run([sys.executable, "-m", "stripcheck", "refresh", str(path)], capture_output=True, text=True)
        assert run.returncode == 2 and "No space left on device" in run.stderr and run.stderr.count("\n") == 1
        assert path.read_bytes() == before and list(disk.iterdir()) == [path]
    finally:
        subprocess.run(["umount", str(disk)], check=True)


def test_a_folder_that_can_not_be_written_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str],
                                                  monkeypatch: pytest.MonkeyPatch) -> None:  # fmt: skip
    path = tmp_path / "book.xlsx"
    Parts.read(filled("full")).write(path)
    real = open

    def refusing(name: Any, *arguments: Any, **more: Any) -> Any:  # as root every folder can be written
        if ".stripcheck-" in str(name):
            raise PermissionError(13, "Permission denied")
        return real(name, *arguments, **more)

    monkeypatch.setattr("builtins.open", refusing)
    assert main(["refresh", str(path)]) == 2
    assert "can't be written (Permission denied)" in capsys.readouterr().err and list(tmp_path.iterdir()) == [path]

