"""`stripcheck merge` as a user meets it: what is accepted is written, and nothing else, in both kinds of register."""

from __future__ import annotations

import csv
import hashlib
import io
import random
import re
import zipfile
from dataclasses import dataclass
from datetime import datetime
from importlib.resources import files
from pathlib import Path

import openpyxl
import pytest
from openpyxl.styles import Font, PatternFill
from openpyxl.worksheet.datavalidation import DataValidation

from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.errors import InputError
from stripcheck.merging import MergeRequest, run_merge
from stripcheck.safe_file import dated_copies
from stripcheck.sheet.review import FIRST_ROW, TITLES
from tests.office import Office
from tests.sheet.package_check import package_faults

SHIPPED = Path(str(files("stripcheck") / "scenario" / "lantern-range.csv"))
NOW = datetime(2026, 3, 4, 5, 6)
HEADER_ROW = 3  # of the register as a workbook

Row = dict[str, str]
FT = 0.3048


def shipped_rows() -> list[Row]:
    with SHIPPED.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


# --- the two forms of a register


def as_csv(folder: Path, data: bytes = SHIPPED.read_bytes()) -> Path:
    path = folder / "register.csv"
    path.write_bytes(data)
    return path


def as_book(folder: Path) -> Path:
    """The shipped list as an operator's workbook: a title, columns and sheets of his own, formulas, formats."""
    book = openpyxl.Workbook()
    sheet = book.active
    sheet.title = "Register"
    sheet["A1"] = "Strips of the Lantern Range"
    rows = shipped_rows()
    headers = [*rows[0], "Length [ft] as a check", "Mine"]
    for column, header in enumerate(headers, 1):
        sheet.cell(HEADER_ROW, column, header).font = Font(bold=True)
    for number, row in enumerate(rows, HEADER_ROW + 1):
        for column, (header, text) in enumerate(row.items(), 1):
            cell = sheet.cell(number, column, _typed(header, text))
            cell.fill = PatternFill("solid", fgColor="FFF9DB")
        sheet.cell(number, len(row) + 1, f"=IF(ISNUMBER(E{number}),E{number}/0.3048,\"\")").number_format = "0"
        sheet.cell(number, len(row) + 2, f"note {number}")
    sheet.conditional_formatting.add("E4:E99", openpyxl.formatting.rule.CellIsRule("lessThan", ["500"]))
    check = DataValidation(type="list", formula1='"yes,no"')
    check.add("W4:W99")
    sheet.add_data_validation(check)
    sums = book.create_sheet("Sums")
    sums["A1"], sums["A2"] = "=SUM(Register!E4:E99)", "=A1/2"
    mine = book.create_sheet("My sheet")
    mine["A1"], mine["A2"] = "=1+1", "Nothing to do with it"
    path = folder / "register.xlsx"
    book.save(path)
    return path


def _typed(header: str, text: str) -> object:
    if header == "Survey date" and text:
        return datetime.fromisoformat(text).date()
    if re.search(r"\[(m|ft|%|°)", header) and re.fullmatch(r"-?[\d.]+", text):
        return float(text)
    return text or None


def contents(path: Path) -> dict[str, Row]:
    """The rows of a register by strip and runway, every cell as a text; the formulas of the workbook as they are written."""
    if path.suffix == ".csv":
        with path.open(encoding="utf-8-sig", newline="") as file:
            rows = list(csv.DictReader(file))
    else:
        sheet = openpyxl.load_workbook(path)["Register"]
        lines = [[_text(cell.value) for cell in line] for line in sheet.iter_rows(min_row=HEADER_ROW)]
        rows = [dict(zip(lines[0], line, strict=True)) for line in lines[1:] if any(line)]
    found = {f"{row['Strip']} {row['Runway']}": row for row in rows}
    assert len(found) == len(rows)
    return found


def _text(value: object) -> str:
    if isinstance(value, datetime):
        return value.date().isoformat()
    return "" if value is None else f"{value:.12g}" if isinstance(value, float | int) else str(value)


# --- a new list with random edits


@dataclass
class Truth:
    """What was done to the list: new values by strip and runway, then header; rows that are new, and gone."""

    edits: dict[str, Row]
    new: dict[str, Row]
    gone: list[str]


# header -> least and greatest step of an edit, in the header's unit: far above what rounding in another unit can do
STEPS = {
    "Length [m]": (5.0, 60.0), "Width [m]": (3.0, 9.0), "Elevation end 1 [ft]": (10.0, 20.0),
    "Elevation end 2 [ft]": (10.0, 20.0),
    "Slope [%]": (0.5, 2.0), "Greatest local slope [%]": (1.0, 2.0), "Heading [° true]": (2.0, 4.0),
}  # fmt: skip
OBSTACLE = ("Obstacle height end 2 [ft]", "Obstacle distance end 2 [m]")
TEXTS = {"Name": ("Upper Anvil", "Nether Bellows"), "Survey date": ("2026-02-02",), "Surface": ("Tarmac",)}
SAME_OR_WET = ("Asphalt", "Short wet grass", "Soft sand")  # for these tarmac is no change, or the condition changes too


def edited(random_numbers: random.Random) -> Truth:
    """Edits to some rows, some rows gone, some new ones."""
    truth = Truth({}, {}, [])
    for row in shipped_rows():
        key = f"{row['Strip']} {row['Runway']}"
        fate = 1.0 if row["Runway"] == "H1" else random_numbers.random()
        if fate < 0.12:
            truth.gone.append(key)
        elif fate < 0.6:
            truth.edits[key] = _edits(row, random_numbers)
    for number in range(random_numbers.randint(0, 4)):
        row = dict.fromkeys(shipped_rows()[0], "")
        row |= {"Strip": f"XN{number:02}", "Name": f"=New Strip {number}", "Runway": "18/36",
                "Surface": "Turf", "Length [m]": str(400 + 70 * number), "Elevation end 1 [ft]": "2000",
                "Elevation end 2 [ft]": "2020"}  # fmt: skip
        truth.new[f"{row['Strip']} 18/36"] = row
    return truth


def _edits(row: Row, random_numbers: random.Random) -> Row:
    made: Row = {}
    for header in random_numbers.sample([*STEPS, "Name", "Survey date", "Surface", "Obstacle"], random_numbers.randint(1, 4)):
        if header in STEPS:
            low, high = STEPS[header]
            old = float(row[header]) if re.fullmatch(r"[\d.]+", row[header]) else 500.0 if "Length" in header else 5.0
            made[header] = f"{old + round(random_numbers.uniform(low, high), 1):.12g}"
        elif header == "Obstacle":
            made |= dict(zip(OBSTACLE, ("77", f"{random_numbers.randint(150, 400)}"), strict=True))
        elif row[header] not in SAME_OR_WET:
            made[header] = random_numbers.choice(TEXTS[header])
    if "Elevation end 1 [ft]" in made or "Elevation end 2 [ft]" in made:
        made.pop("Slope [%]", None)
    return {header: value for header, value in made.items() if value != row[header]}


def write_new_list(path: Path, truth: Truth, random_numbers: random.Random) -> None:
    """The list with the edits, in other units, another order of columns and rows, some runways from the other end."""
    rows = [row | truth.edits.get(key, {}) for key, row in ((f"{row['Strip']} {row['Runway']}", row) for row in shipped_rows())
            if key not in truth.gone]  # fmt: skip
    turned = [_turned(row) if random_numbers.random() < 0.5 and "/" in row["Runway"] else row for row in rows]
    turned += truth.new.values()
    random_numbers.shuffle(turned)
    feet, metres = random_numbers.random() < 0.7, random_numbers.random() < 0.7
    converted = [_converted(row, feet, metres) for row in turned]
    headers = list(converted[0])
    random_numbers.shuffle(headers)
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, headers, delimiter=random_numbers.choice(",;\t"), extrasaction="ignore")
        writer.writeheader()
        writer.writerows(converted)


def _turned(row: Row) -> Row:
    """A row as it reads from the other end."""
    made = dict(row)
    for header in [header for header in row if "end 1" in header]:
        other = header.replace("end 1", "end 2")
        made[header], made[other] = row[other], row[header]
    made["Runway"] = "/".join(reversed(row["Runway"].split("/")))
    if row["Slope [%]"]:
        made["Slope [%]"] = f"{-float(row['Slope [%]']):.12g}"
    if row["Heading [° true]"]:
        made["Heading [° true]"] = f"{(float(row['Heading [° true]']) + 180.0) % 360.0:.12g}"
    return made


def _converted(row: Row, feet: bool, metres: bool) -> Row:
    """Lengths in whole feet, elevations in whole metres and heights of obstacles in tenths of a metre, where wanted."""
    made: Row = {}
    for header, text in row.items():
        number = float(text) if re.fullmatch(r"-?[\d.]+", text) else None
        if feet and header == "Length [m]":
            made["RWY length (ft)"] = text if number is None else str(round(number / FT))
        elif metres and "Elevation" in header:
            made[header.replace("[ft]", "[m]")] = text if number is None else str(round(number * FT))
        elif metres and "Obstacle height" in header:
            made[header.replace("[ft]", "[m]")] = text if number is None else f"{number * FT:.1f}"
        else:
            made[header] = text
    return made


def same_value(header: str, shown: str, wanted: str) -> bool:
    """Whether a cell shows what was edited: numbers within the rounding of the new list's units."""
    if header not in (*STEPS, *OBSTACLE):
        return shown == wanted
    if "" in (shown, wanted):
        return shown == wanted
    rounding = {"Length [m]": 0.5 * FT, "Elevation": 0.5 / FT, "Obstacle height": 0.05 / FT}
    allowed = next((most for part, most in rounding.items() if header.startswith(part)), 0.0)
    return abs(float(shown) - float(wanted)) <= 2.0 * allowed + 1e-9  # rounded by the new list, and in the register's unit


@pytest.mark.parametrize("kind", ["csv", "xlsx"])
@pytest.mark.parametrize("seed", range(8))
def test_exactly_what_is_accepted_is_merged(tmp_path: Path, kind: str, seed: int) -> None:
    numbers = random.Random(seed)
    register = as_csv(tmp_path) if kind == "csv" else as_book(tmp_path)
    before, parts = contents(register), hashes(register) if kind == "xlsx" else {}
    lines = register.read_bytes().splitlines(keepends=True)
    truth = edited(numbers)
    new_list, review = tmp_path / "new.csv", tmp_path / "review.xlsx"
    write_new_list(new_list, truth, numbers)

    run_merge(MergeRequest(register, new_list, review=review))
    assert contents(register) == before
    accepted = mark(review, lambda line: numbers.random() < 0.5)
    # all that was done is offered, and nothing else
    offered = all_lines(review)
    assert {f"{line['Strip']} {line['Runway']}" for line in offered if line["Kind"] == "new"} == set(truth.new)
    gone = {key for key in truth.gone if before[key]["Closed"] != "yes"}
    assert {f"{line['Strip']} {line['Runway']}" for line in offered if line["Kind"] == "gone"} == gone
    changed: dict[str, set[str]] = {}
    for line in offered:
        if line["Kind"] == "changed":
            changed.setdefault(f"{line['Strip']} {line['Runway']}", set()).update(line["Column"].split(", "))
    expected = {key: set(edits) for key, edits in truth.edits.items() if edits}
    assert {key: headers - set(OBSTACLE) for key, headers in changed.items()} == {
        key: headers - set(OBSTACLE) for key, headers in expected.items()
    }

    run_merge(MergeRequest(register, new_list, accept_from=review, source="A test", now=NOW))
    after = contents(register)
    wanted = {key: dict(row) for key, row in before.items()}
    for line in accepted:
        key = f"{line['Strip']} {line['Runway']}"
        if line["Kind"] == "gone":
            wanted[key]["Closed"] = "yes"
        elif line["Kind"] == "changed":
            for header in line["Column"].split(", "):
                wanted[key][header] = truth.edits[key][header]
    new_keys = {f"{line['Strip']} {line['Runway']}" for line in accepted if line["Kind"] == "new"}
    assert set(after) == set(wanted) | new_keys
    for key, row in wanted.items():
        for header, text in row.items():
            touched = text != before[key][header]
            assert same_value(header, after[key][header], text) if touched else after[key][header] == text, (key, header)
    for key in new_keys:
        for header in before["XLRB 14/32"]:
            wanted_text = truth.new[key].get(header, "")
            if header == "Name" and kind == "csv":
                wanted_text = "'" + wanted_text  # begins with "="
            if header == "Length [ft] as a check":
                assert re.fullmatch(r'=IF\(ISNUMBER\(E(\d+)\),E\1/0\.3048,""\)', after[key][header])
            elif header in ("Source", "Mine"):
                assert not after[key][header]
            else:
                assert same_value(header, after[key][header], wanted_text), (key, header)
    touched_keys = {f"{line['Strip']} {line['Runway']}" for line in accepted}
    if kind == "csv":
        now = register.read_bytes().splitlines(keepends=True)
        for line, old, key in zip(now[1:], lines[1:], before, strict=False):
            assert (line == old) == (key not in touched_keys)
        assert len(now) == len(lines) + len(new_keys)
    elif accepted:
        now_parts = hashes(register)
        changed_parts = {name for name in now_parts if now_parts[name] != parts.get(name)}
        assert changed_parts == {"xl/worksheets/sheet1.xml", "xl/worksheets/sheet2.xml", "xl/worksheets/sheet4.xml",
                                 "xl/workbook.xml", "xl/_rels/workbook.xml.rels", "[Content_Types].xml"}  # fmt: skip
        assert set(parts) < set(now_parts) and not package_faults(register)

    # the log tells each of them, and what was accepted is no longer a change
    if accepted:
        logged = log_of(register)
        assert [(row[2], row[3], row[4], row[5]) for row in logged[1:]] == [
            (line["Strip"], line["Runway"], line["Kind"], line["Column"]) for line in accepted
        ]
        assert {(row[0], row[1]) for row in logged[1:]} == {("2026-03-04 05:06", "A test")}
    keys = {line["Key"] for line in accepted}
    again = tmp_path / "again.xlsx"
    run_merge(MergeRequest(register, new_list, review=again))
    left, expected_left = all_lines(again), [line for line in offered if line["Key"] not in keys]
    assert [_change(line) for line in left] == [_change(line) for line in expected_left]


@pytest.mark.parametrize("kind", ["csv", "xlsx"])
def test_merging_twice_changes_nothing_the_second_time(tmp_path: Path, kind: str) -> None:
    register = as_csv(tmp_path) if kind == "csv" else as_book(tmp_path)
    numbers = random.Random(99)
    write_new_list(tmp_path / "new.csv", edited(numbers), numbers)
    said = run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    assert any("merged" in line for line in said)
    data, copies = register.read_bytes(), dated_copies(register)
    assert len(copies) == 1
    said = run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    assert said[-1] == "Nothing was written: nothing of what is accepted is left to change"
    assert register.read_bytes() == data and dated_copies(register) == copies


def _change(line: dict[str, str]) -> tuple[str, ...]:
    return tuple(line[title] for title in ("Kind", "Strip", "Runway", "Column"))


def all_lines(review: Path) -> list[dict[str, str]]:
    sheet = openpyxl.load_workbook(review)["Review"]
    rows = [[_text(cell.value) for cell in row] for row in sheet.iter_rows(min_row=FIRST_ROW, max_col=len(TITLES))]
    return [dict(zip(TITLES, row, strict=True)) for row in rows if row[0]]


def mark(review: Path, wanted: object, word: str = "yes") -> list[dict[str, str]]:
    """Mark rows of a review as a user would; returns those that were."""
    book = openpyxl.load_workbook(review)
    marked = []
    for number, line in enumerate(all_lines(review), FIRST_ROW):
        if not line["Remark"].startswith("can't") and wanted(line):  # type: ignore[operator]
            book["Review"].cell(number, TITLES.index("Accept") + 1, word)
            marked.append(line)
    book.save(review)
    return marked


def hashes(path: Path) -> dict[str, str]:
    with zipfile.ZipFile(path) as package:
        return {name: hashlib.sha256(package.read(name)).hexdigest() for name in package.namelist()}


def log_of(register: Path) -> list[list[str]]:
    if register.suffix == ".csv":
        text = register.with_name("register changes.csv").read_text(encoding="utf-8-sig")
        return list(csv.reader(io.StringIO(text)))
    sheet = openpyxl.load_workbook(register)["Change log"]
    return [[_text(cell.value) for cell in row] for row in sheet.iter_rows()]


# --- the command line


HEAD = "Strip,Name,Runway,Length [m],Surface,Elevation end 1 [ft],Elevation end 2 [ft],Closed,Notes\n"
OLD = HEAD + "XOTB,Otter Bend,09/27,620,turf,1500,1510,,Ask Ada\nXTRN,Tern Hollow,05/23,500,grass,900,900,,\n"
FRESH = HEAD + "XOTB,Otter Bend,09/27,380,turf,1500,1510,,\nXNEW,=1+1,18/36,900,turf,100,110,,\n"
DAY = ["--card", "ridge-runner", "--rules", "part-cat-b", "--temp", "20"]


@pytest.fixture
def lists(tmp_path: Path) -> tuple[Path, Path]:
    for name, text in (("register.csv", OLD), ("new.csv", FRESH)):
        (tmp_path / name).write_text(text)
    return tmp_path / "register.csv", tmp_path / "new.csv"


def test_a_dry_run_tells_and_writes_nothing(lists: tuple[Path, Path], capsys: pytest.CaptureFixture[str]) -> None:
    names = sorted(lists[0].parent.iterdir())
    assert main(["merge", *map(str, lists), *DAY]) == 0
    said = capsys.readouterr().out.splitlines()
    assert said == [
        "register.csv: 2 runways; new.csv: 2",
        "In both: 1 (1 by identifier)",
        "",
        "New: 1",
        "  XNEW 18/36  Strip: XNEW; Name: =1+1; Runway: 18/36; Length [m]: 900; Surface: turf; Elevation end 1 [ft]: 100; "
        "Elevation end 2 [ft]: 110",
        "      in: suitable, out: suitable",
        "",
        "Gone: 1",
        "  row 3 XTRN 05/23  to be marked: Closed = yes",
        "      in: marginal, out: unsuitable -> left out (closed)",
        "",
        "Changed: 1 in 1 runways",
        "  row 2 XOTB 09/27  Length [m]: 620 -> 380",
        "      in: suitable -> unsuitable, out: marginal -> unsuitable",
        "",
        "Not in the new list, kept: Notes (1)",
        "",
        "Verdicts compared for Ridge Runner 180, EU and UK Part-CAT, performance class B, no stopway or clearway, "
        "on the day given",
        "",
        "Nothing was written: add --accept new, changed, gone or all, or --review REVIEW.xlsx",
        CAUTION,
    ]
    assert sorted(lists[0].parent.iterdir()) == names and lists[0].read_text() == OLD


def test_the_verdicts_are_those_of_a_filled_list(tmp_path: Path) -> None:
    """Before and after a merge, each runway's verdicts by `fill` are those that the review told."""
    register, numbers = as_csv(tmp_path), random.Random(5)
    write_new_list(tmp_path / "new.csv", edited(numbers), numbers)
    typed = {"card": DAY[1], "rules": DAY[3], "day": {"temperature": "20"}}
    before = filled_verdicts(register, tmp_path)
    run_merge(MergeRequest(register, tmp_path / "new.csv", review=tmp_path / "review.xlsx", **typed))
    told: dict[str, str] = {}
    for line in all_lines(tmp_path / "review.xlsx"):
        told[f"{line['Strip']} {line['Runway']}"] = line["Verdicts"].split("with all changes of the runway: ")[-1]
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    after = filled_verdicts(register, tmp_path)
    assert sum(text not in ("no change", "") for text in told.values()) > 8
    for key in (set(before) | set(after)) - {"XLCP H1/B"}:
        text = told.get(key, "no change")
        if key not in before:
            assert text == f"in: {after[key][0]}, out: {after[key][1]}"
        elif key not in after:
            assert text == f"in: {before[key][0]}, out: {before[key][1]} -> left out (closed)"
        else:
            sides = zip(("in", "out"), before[key], after[key], strict=True)
            flips = ", ".join(f"{side}: {old} -> {new}" for side, old, new in sides if old != new)
            assert text == (flips or "no change"), key


def filled_verdicts(register: Path, folder: Path) -> dict[str, tuple[str, str]]:
    """Verdicts in and out of each strip on the sheet Summary."""
    assert main(["fill", str(register), "-o", str(folder / "filled.xlsx"), *DAY, "--force", "--quiet"]) == 0
    rows = [[_text(cell) for cell in row]
            for row in openpyxl.load_workbook(folder / "filled.xlsx", data_only=True)["Summary"].iter_rows(values_only=True)]
    header = next(at for at, row in enumerate(rows) if {"Strip", "In and out"} <= {*row})
    places = [rows[header].index(title) for title in ("Strip", "Runway", "Land: verdict", "Take off: verdict")]
    lines = [[row[place] for place in places] for row in rows[header + 1 :] if row[places[0]]]
    return {f"{strip} {runway}": (land, leave) for strip, runway, land, leave in lines}


def test_accepting_by_kind(lists: tuple[Path, Path], capsys: pytest.CaptureFixture[str]) -> None:
    register = lists[0]
    assert main(["merge", *map(str, lists), "--accept", "changed", "--accept", "gone"]) == 0
    assert register.read_text() == OLD.replace("620", "380").replace("900,900,,", "900,900,yes,")
    assert "merged 0 new, 1 changed, 1 gone; written down in register changes.csv" in capsys.readouterr().out
    assert main(["merge", *map(str, lists), "--accept", "new", "--source", "Letter of Ada"]) == 0
    assert register.read_text().splitlines()[-1] == "XNEW,'=1+1,18/36,900,turf,100,110,,"
    log = log_of(register)
    assert [row[4] for row in log] == ["What", "changed", "gone", "new"] and log[-1][1] == "Letter of Ada"
    assert len(dated_copies(register)) == 2
    assert dated_copies(register)[0].read_text() == OLD


def test_another_file_may_be_written(lists: tuple[Path, Path], tmp_path: Path) -> None:
    out = tmp_path / "out.csv"
    assert main(["merge", *map(str, lists), "--accept", "all", "-o", str(out)]) == 0
    assert lists[0].read_text() == OLD and out.read_text() != OLD
    assert (tmp_path / "out changes.csv").exists() and not dated_copies(lists[0])
    assert main(["merge", *map(str, lists), "--accept", "all", "-o", str(out)]) == 2
    assert main(["merge", *map(str, lists), "--accept", "all", "-o", str(out), "--force"]) == 0


@pytest.mark.parametrize(
    ("more", "said"),
    [
        (["--card", "ridge-runner"], "both are needed"),
        (["--card", "ridge-runner", "--rules", "part-cat-b"], "no temperature"),
        (["--accept", "new", "--review", "r.xlsx"], "can't go together"),
        (["--review", "r.csv"], "must end in .xlsx"),
        (["--accept-from", "none.xlsx"], "there is no such file"),
        (["--accept", "new", "-o", "out.xlsx"], "must end in .csv"),
        (["--sheet", "Mine"], "has no sheets"),
    ],
)
def test_what_is_refused(lists: tuple[Path, Path], more: list[str], said: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["merge", *map(str, lists), *more]) == 2
    assert said in capsys.readouterr().err
    assert lists[0].read_text() == OLD


def test_files_that_cant_be_a_register(lists: tuple[Path, Path], tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for name in ("register.xls", "register.ods"):
        (tmp_path / name).write_bytes(b"x")
        assert main(["merge", str(tmp_path / name), str(lists[1])]) == 2
    assert main(["merge", str(lists[0]), str(lists[0])]) == 2
    filled = tmp_path / "filled.xlsx"
    assert main(["fill", str(lists[0]), "-o", str(filled), *DAY]) == 0
    assert main(["merge", str(filled), str(lists[1])]) == 2
    assert "merge into the list it was filled from" in capsys.readouterr().err


@pytest.mark.parametrize("kind", ["csv", "xlsx"])
def test_an_open_register_is_left_alone(tmp_path: Path, kind: str) -> None:
    register = as_csv(tmp_path) if kind == "csv" else as_book(tmp_path)
    (tmp_path / "new.csv").write_text(FRESH)
    before = register.read_bytes()
    (tmp_path / f".~lock.{register.name}#").touch()
    with pytest.raises(InputError, match="is open in a spreadsheet program"):
        run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    assert register.read_bytes() == before
    assert run_merge(MergeRequest(register, tmp_path / "new.csv"))  # looking is free


def test_the_log_being_open_is_found_before_anything_is_written(lists: tuple[Path, Path]) -> None:
    register = lists[0]
    register.with_name("register changes.csv").write_text("Mine\n")
    with pytest.raises(InputError, match="no change log"):
        run_merge(MergeRequest(*lists, accept=("all",)))
    register.with_name(".~lock.register changes.csv#").touch()
    with pytest.raises(InputError, match=r"register changes.csv: is open"):
        run_merge(MergeRequest(*lists, accept=("all",)))
    assert register.read_text() == OLD


# --- the review


def test_a_review_of_other_lists_is_refused(lists: tuple[Path, Path], tmp_path: Path) -> None:
    review = tmp_path / "review.xlsx"
    run_merge(MergeRequest(*lists, review=review))
    mark(review, lambda line: True)
    lists[1].write_text(FRESH.replace("380", "381"))
    with pytest.raises(InputError, match="of other lists, or one has changed since"):
        run_merge(MergeRequest(*lists, accept_from=review))
    with pytest.raises(InputError, match="no review of a merge"):
        openpyxl.Workbook().save(tmp_path / "other.xlsx")
        run_merge(MergeRequest(*lists, accept_from=tmp_path / "other.xlsx"))
    assert lists[0].read_text() == OLD


def test_marks_that_say_nothing_clear_are_refused(lists: tuple[Path, Path], tmp_path: Path) -> None:
    review = tmp_path / "review.xlsx"
    for word, said in (("perhaps", "neither yes nor no"), ("no", "nothing of what is accepted"), ("", "nothing of what is")):
        run_merge(MergeRequest(*lists, review=review, force=True))
        mark(review, lambda line: True, word)
        if said == "neither yes nor no":
            with pytest.raises(InputError, match=said):
                run_merge(MergeRequest(*lists, accept_from=review))
        else:
            assert said in run_merge(MergeRequest(*lists, accept_from=review))[-1]
    assert lists[0].read_text() == OLD
    lists[0].write_text(OLD.replace(",Closed", ",Fenced"))
    run_merge(MergeRequest(*lists, review=review, force=True))
    book = openpyxl.load_workbook(review)
    at = next(number for number, line in enumerate(all_lines(review), FIRST_ROW) if line["Kind"] == "gone")
    book["Review"].cell(at, TITLES.index("Accept") + 1, "yes")
    book.save(review)
    with pytest.raises(InputError, match="XTRN 05/23 is marked yes and can't be merged: the register has no column Closed"):
        run_merge(MergeRequest(*lists, accept_from=review))


def test_what_a_review_shows(lists: tuple[Path, Path], tmp_path: Path) -> None:
    review = tmp_path / "review.xlsx"
    lists[1].write_text(FRESH.replace("380,turf,1500,1510,,", "380,turf,1500,1510,,Call Bram"))
    assert main(["merge", *map(str, lists), *DAY, "--review", str(review)]) == 0
    sheet = openpyxl.load_workbook(review)["Review"]
    assert sheet["A2"].value == CAUTION
    assert sheet.column_dimensions["K"].hidden
    (choice,) = sheet.data_validations.dataValidation
    assert choice.formula1 == '"yes,no"' and str(choice.sqref) == f"J{FIRST_ROW}:J{FIRST_ROW + 3}"
    lines = all_lines(review)
    flip = "suitable -> unsuitable, out: marginal -> unsuitable"
    assert [(line["Kind"], line["Column"], line["Verdicts"]) for line in lines] == [
        ("changed", "Length [m]", f"in: {flip}"),
        ("changed", "Notes", f"no change; with all changes of the runway: in: {flip}"),
        ("gone", "Closed", "in: marginal, out: unsuitable -> left out (closed)"),
        ("new", "", "in: suitable, out: suitable"),
    ]
    assert lines[1]["Remark"] == "the register has notes of its own" and not any(line["Accept"] for line in lines)
    assert all(cell.data_type != "f" for row in sheet.iter_rows() for cell in row) and not package_faults(review)
    # sorted by the user, and with his own notes to the right: the keys go with the rows
    book = openpyxl.load_workbook(review)
    rows = [[cell.value for cell in row] for row in book["Review"].iter_rows(min_row=FIRST_ROW, max_row=FIRST_ROW + 3)]
    for at, row in enumerate(reversed(rows)):
        for column, value in enumerate(row, 1):
            book["Review"].cell(FIRST_ROW + at, column, value)
        book["Review"].cell(FIRST_ROW + at, TITLES.index("Accept") + 1, "Yes" if row[4] == "Notes" else None)
        book["Review"].cell(FIRST_ROW + at, len(TITLES) + 1, "my own")
    book.save(review)
    assert main(["merge", *map(str, lists), "--accept-from", str(review)]) == 0
    assert lists[0].read_text() == OLD.replace("Ask Ada", "Call Bram")


# --- text files


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_a_text_register_keeps_its_form(tmp_path: Path, encoding: str, end: str) -> None:
    lines = ['Liste der Plätze', '"Strip";Name;Runway;"Length";Elevation;Note of mine',
             '"XOTB"; "Otter" Bend;9/27;"1.620,5";500;a "b"',
             'XTRN;"Tern; Höllow";05/23;500;0900;"two\nlines"', "", "XHRN;Heron;18/36;700;100"]  # fmt: skip
    register = tmp_path / "register.csv"
    register.write_bytes(end.join(lines).encode(encoding))
    rows = "XOTB,09/27,1640.25\nXTRN,05/23,510\nXHRN,18/36,700\nXNEW,18/36,700\n"
    (tmp_path / "new.csv").write_text("Strip,Runway,Length\n" + rows)
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    lines[2] = lines[2].replace("1.620,5", "1640,25")
    lines[3] = lines[3].replace("500", "510")
    assert register.read_bytes() == end.join([*lines, "XNEW;;18/36;700;;", ""]).encode(encoding)


def test_a_sign_that_the_encoding_lacks_is_refused(tmp_path: Path) -> None:
    register = tmp_path / "register.csv"
    register.write_bytes(OLD.replace("Otter", "Ötter").encode("cp1252"))
    (tmp_path / "new.csv").write_text(FRESH.replace("=1+1", "Łąka"), encoding="utf-8")
    before = register.read_bytes()
    with pytest.raises(InputError, match='written in cp1252, which has no "Ł"'):
        run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    assert register.read_bytes() == before and not (tmp_path / "register changes.csv").exists()


def test_a_number_that_would_change_how_others_are_read_is_refused(tmp_path: Path) -> None:
    register = tmp_path / "register.csv"
    text = "Strip;Runway;Length\nXOTB;09/27;2.300 ft\nXTRN;05/23;2,500 ft\n"  # marks between thousands of both kinds
    register.write_text(text)
    (tmp_path / "new.csv").write_text("Strip,Runway,Length\nXOTB,09/27,2300 ft\nXTRN,05/23,500.25 ft\n")
    with pytest.raises(InputError, match="would not be read as it is meant after the merge, so nothing was written"):
        run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    assert register.read_text() == text


# --- lists of all kinds


NUMBERS = ("620", "2300 ft", "-", "far", "1,250", "0", "0.4", "12.5", "99999", "", "", "-3", "360", "29.92", "2.300,5", "700 m",
           "5%")  # fmt: skip
WORDS = {
    "Strip": ("XA", "XB", "xc", "XD", ""), "Name": ("Otter", "Otter Bend", "Heron", "=1+1", ""),
    "Runway": ("09/27", "27/09", "9", "10/28", "N/S", "H1", "", "X", "9-Mar", "18L/36R"), "le_ident": ("09", "18", ""),
    "he_ident": ("27", "36", ""), "Surface": ("turf", "wet grass", "clinker", "GVL", "", "soft sand", "water"),
    "Condition": ("dry", "wet", "boggy", "frosty", ""), "Closed": ("yes", "no", "", "x", "perhaps"),
    "Slope profile": ("0:0, 300:3, 620:5", "0:0,620:400", "", "bad"), "Land on": ("09", "27", "both", "", "14", "9 only"),
    "Leave by": ("09", "27", "", "18"), "One-way": ("yes", "no", ""), "Survey date": ("2024-01-02", "May", ""),
    "Notes": ("a, b", 'say "x"', "line\nbreak", "", "@x"), "Latitude end 1": ("47.5", "47.51", ""),
    "Longitude end 1": ("8.1", ""), "Mine": ("q", ""),
}  # fmt: skip
ALL_HEADERS = (
    *WORDS, "Length", "Usable length", "TORA", "TORA end 1", "LDA", "Width", "Elevation", "Elevation end 1 [m]",
    "Elevation end 2", "Slope", "Max slope", "Heading", "Heading end 2", "Displaced threshold", "Displaced end 1",
    "Displaced end 2", "Obstacle height", "Obstacle distance", "Obstacle height end 1", "Obstacle distance end 1",
    "Obstacle height end 2", "QNH", "Wind from", "Wind speed",
)  # fmt: skip


def write_messy(path: Path, numbers: random.Random) -> None:
    headers = list(dict.fromkeys(["Strip", "Length", *numbers.sample(ALL_HEADERS, numbers.randint(3, 22))]))
    numbers.shuffle(headers)
    rows = [[numbers.choice(WORDS.get(header, NUMBERS)) for header in headers] for _ in range(numbers.randint(1, 9))]
    if path.suffix == ".csv":
        with path.open("w", newline="", encoding=numbers.choice(("utf-8", "utf-8-sig", "utf-16"))) as file:
            quoting = numbers.choice((csv.QUOTE_MINIMAL, csv.QUOTE_ALL))
            writer = csv.writer(file, delimiter=numbers.choice(",;\t"), quoting=quoting,
                                lineterminator=numbers.choice(("\n", "\r\n")))  # fmt: skip
            writer.writerows([headers, *rows])
        return
    book = openpyxl.Workbook()
    for row in [headers, *rows]:
        book.active.append([float(text) if text.replace(".", "", 1).isdigit() else text.lstrip("=") or None for text in row])
    book.save(path)


@pytest.mark.parametrize("kind", ["csv", "xlsx"])
@pytest.mark.parametrize("seed", range(25))
def test_messy_lists_are_merged_once_or_refused(tmp_path: Path, kind: str, seed: int) -> None:
    numbers = random.Random(seed)
    register, new_list = tmp_path / f"register.{kind}", tmp_path / "new.csv"
    write_messy(register, numbers)
    write_messy(new_list, numbers)
    request = MergeRequest(register, new_list, accept=("all",), card=DAY[1], rules=DAY[3], day={"isa_deviation": "5"})
    before = register.read_bytes()
    try:
        run_merge(request)
    except InputError:
        assert register.read_bytes() == before
        return
    data = register.read_bytes()
    assert run_merge(request)[-1].startswith("Nothing was written") and register.read_bytes() == data


# --- workbooks


def test_new_runways_go_into_spare_rows(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    for row in csv.reader(io.StringIO(OLD)):
        sheet.append([_typed(header, text) for header, text in zip(next(csv.reader(io.StringIO(HEAD))), row, strict=True)])
    for number in range(2, 8):
        sheet.cell(number, 10, f'=IF(D{number}="","",D{number}*2)').font = Font(italic=True)
        sheet.cell(number, 4).number_format = '0" m"'
    sheet["A6"] = None
    sheet["J4"] = "=D4*3"  # an own formula of a spare row stays
    sheet["K5"] = "mine"  # not a free row
    register = tmp_path / "register.xlsx"
    book.save(register)
    rows = "".join(f"XN{n},New {n},18/36,{600 + n},turf,10,20,,\n" for n in range(5))
    (tmp_path / "new.csv").write_text(OLD + rows)
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("all",)))
    made = openpyxl.load_workbook(register).active
    assert [made.cell(number, 1).value for number in range(2, 11)] == [
        "XOTB", "XTRN", "XN0", None, "XN1", "XN2", "XN3", "XN4", None
    ]  # fmt: skip
    assert [made.cell(number, 10).value for number in (4, 6, 7, 8, 9)] == [
        "=D4*3", *(f'=IF(D{number}="","",D{number}*2)' for number in (6, 7, 8, 9))
    ]  # fmt: skip
    assert made["D8"].number_format == '0" m"' and made["J9"].font.italic and made["K5"].value == "mine"


def test_formulas_of_all_kinds_are_copied_down(tmp_path: Path) -> None:
    """A formula that cells share, one of the newer kind, and one that fills several cells, which is not copied."""
    book = openpyxl.Workbook()
    for row in csv.reader(io.StringIO(OLD)):
        book.active.append(row)
    book.save(tmp_path / "plain.xlsx")
    register = tmp_path / "register.xlsx"
    with zipfile.ZipFile(tmp_path / "plain.xlsx") as source, zipfile.ZipFile(register, "w") as target:
        for name in source.namelist():
            part = source.read(name)
            if name == "xl/worksheets/sheet1.xml":
                first = b'<c r="J2"><f t="shared" ref="J2:J3" si="0">D2&amp;"m"</f><v>1</v></c>'
                second = (b'<c r="J3"><f t="shared" si="0"/><v>2</v></c>'
                          b'<c r="K3" cm="1"><f t="array" ref="K3">SUM(D3*2)</f></c>'
                          b'<c r="L3"><f t="array" ref="L2:L3">D2:D3</f></c>')  # fmt: skip
                rows = part.split(b"</row>")
                part = b"</row>".join([rows[0], rows[1] + first, rows[2] + second, *rows[3:]])
            target.writestr(name, part)
    (tmp_path / "new.csv").write_text(OLD + "XNEW,New,18/36,600,turf,10,20,,\n")
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("new",)))
    xml = zipfile.ZipFile(register).read("xl/worksheets/sheet1.xml").decode()
    assert '<c r="J4"><f>D4&amp;"m"</f></c><c r="K4" cm="1"><f t="array" ref="K4">SUM(D4*2)</f></c></row>' in xml
    assert '<c r="J3"><f t="shared" si="0"/><v>2</v></c>' in xml  # reads nothing but its row, which was not touched


def test_cells_with_formulas_are_kept(tmp_path: Path) -> None:
    register = as_book(tmp_path)
    book = openpyxl.load_workbook(register)
    book["Register"]["E4"] = "=1100+80"
    book.save(register)
    # a formula without a result reads as a blank; a spreadsheet program would have put it there
    data = zipfile.ZipFile(register).read("xl/worksheets/sheet1.xml").decode()
    with zipfile.ZipFile(register) as source, zipfile.ZipFile(tmp_path / "with.xlsx", "w") as target:
        for name in source.namelist():
            part = source.read(name)
            if name == "xl/worksheets/sheet1.xml":
                part = data.replace("<f>1100+80</f><v />", "<f>1100+80</f><v>1180</v>").encode()
            target.writestr(name, part)
    (tmp_path / "with.xlsx").replace(register)
    (tmp_path / "new.csv").write_text("Strip,Runway,Length [m]\nXLRB,14/32,1150\nXLRB,05/23,600\n")
    said = run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("changed",)))
    assert "      can't be merged: the register's cell holds a formula, which is kept" in said
    sheet = openpyxl.load_workbook(register)["Register"]
    assert (sheet["E4"].value, sheet["E5"].value) == ("=1100+80", 600)
    # the formula reads no cell, so its result holds; those of the row that was changed, and of the sums, do not
    shown = openpyxl.load_workbook(register, data_only=True)
    assert shown["Register"]["E4"].value == 1180 and shown["Sums"]["A1"].value is None


def test_a_spreadsheet_program_opens_it_and_works_it_out(tmp_path: Path, office: Office) -> None:
    register = as_book(tmp_path)
    with office.open(register) as opened:
        opened.recalculate()
        opened.save_as(register)  # with results, as a user's file has them
    old = openpyxl.load_workbook(register, data_only=True)
    total = old["Sums"]["A1"].value
    (tmp_path / "new.csv").write_text("Strip,Runway,Length [m]\nXLRB,14/32,1150\nXNEW,18/36,700\n")
    said = run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("changed", "new")))
    assert said[-1] == (
        "4 formulas that hang on the list have no result until a spreadsheet program opens the file and saves it, on: "
        "Register, Sums"
    )
    assert openpyxl.load_workbook(register, data_only=True)["Sums"]["A1"].value is None  # no old sum that reads as a new one
    with office.open(register) as opened:
        assert opened.value("Sums", "A1") == total - 30 + 700
        assert opened.value("Register", "AG4") == pytest.approx(1150 / 0.3048)
        assert opened.value("Register", "AG40") == pytest.approx(700 / 0.3048)
        assert opened.value("Register", "AG5") == pytest.approx(620 / 0.3048)
        assert opened.value("Change log", "H2") == "1150"


def test_the_log_goes_on_where_the_user_moved_it(tmp_path: Path) -> None:
    register = as_book(tmp_path)
    (tmp_path / "new.csv").write_text("Strip,Runway,Length [m]\nXLRB,14/32,1150\n")
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("changed",)))
    book = openpyxl.load_workbook(register)
    book["Change log"].insert_rows(1, 2)
    book["Change log"].insert_cols(2)
    book.save(register)
    (tmp_path / "new.csv").write_text("Strip,Runway,Length [m]\nXLRB,14/32,1140\n")
    parts = hashes(register)
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("changed",), now=NOW))
    sheet = openpyxl.load_workbook(register)["Change log"]
    assert [cell.value for cell in sheet[5]] == ["2026-03-04 05:06", None, "new.csv", "XLRB", "14/32", "changed", "Length [m]",
                                                 "1150", "1140"]  # fmt: skip
    now = hashes(register)
    assert {name for name in now if now[name] != parts[name]} == {
        "xl/worksheets/sheet1.xml", "xl/worksheets/sheet2.xml", "xl/worksheets/sheet4.xml"
    }  # fmt: skip
    book = openpyxl.load_workbook(register)
    book["Change log"].delete_rows(3)
    book.save(register)
    (tmp_path / "new.csv").write_text("Strip,Runway,Length [m]\nXLRB,14/32,1130\n")
    with pytest.raises(InputError, match="has no row with the headers"):
        run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("changed",)))


def test_texts_are_never_formulas(tmp_path: Path) -> None:
    register = as_book(tmp_path)
    (tmp_path / "new.csv").write_text('Strip,Name,Runway,Length [m],Notes\n=A1,"=HYPERLINK(""x"")",18/36,700,@SUM(1)\n')
    run_merge(MergeRequest(register, tmp_path / "new.csv", accept=("new",)))
    sheet = openpyxl.load_workbook(register)
    cells = [cell for name in ("Register", "Change log") for row in sheet[name].iter_rows() for cell in row]
    assert all(cell.value.startswith("=IF(ISNUMBER(E") for cell in cells if cell.data_type == "f")
    xml = zipfile.ZipFile(register).read("xl/worksheets/sheet1.xml").decode()
    assert '<is><t xml:space="preserve">=HYPERLINK("x")</t></is>' in xml


def test_the_page_in_the_docs(tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    """What docs/register.md shows is what the command says and does."""
    page = (Path(__file__).parents[1] / "docs" / "register.md").read_text(encoding="utf-8").split("\n## Merge")[1]
    blocks = re.findall(r"```(?:csv|text)\n(.*?)```", page, re.DOTALL)
    monkeypatch.chdir(tmp_path)
    for name, text in zip(("strips.csv", "survey.csv"), blocks, strict=False):
        Path(name).write_text(text, encoding="utf-8")
    command = re.search(r"`stripcheck (merge strips.csv survey.csv .*?)` says", page)
    assert command is not None and main(command[1].split()) == 0
    assert capsys.readouterr().out == blocks[2]
    accept = ["--accept", "changed", "--accept", "new", "--source", "Survey of May"]
    assert main(["merge", "strips.csv", "survey.csv", *accept]) == 0
    assert Path("strips.csv").read_text(encoding="utf-8") == blocks[3] and len(blocks) == 4
