"""The reference pages in docs/ are those that the program makes now, and what is written by hand in them holds."""

from __future__ import annotations

import csv
import re
import shlex
import shutil
from pathlib import Path

import numpy as np
import pytest

from stripcheck.book_tables import parse_grid
from stripcheck.card import Card, load_card, shipped_cards
from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.doc_pages import PAGES, write_pages
from stripcheck.doc_words import CARD_ENTRIES, COLUMN_MEANINGS, LEFT_OUT, OWN_RULES, RULE_ENTRIES, Entry
from stripcheck.doors.functions import FUNCTIONS
from stripcheck.errors import InputError
from stripcheck.inputs import REACH
from stripcheck.register.columns import COLUMNS
from stripcheck.register.reader import read_list
from stripcheck.rules import load_rules
from stripcheck.steps import POWERS, SIDES, build_chain
from stripcheck.units import from_si
from stripcheck.verdict import FAULT, LANDING_FINDINGS, SUITABLE, TAKEOFF_FINDINGS
from tests.aircraft import trial_heron, trial_mule
from tests.manual_cards import figures

ROOT = Path(__file__).parent.parent
CARDS = ROOT / "stripcheck" / "cards"
LEAST_RULES = 'title = "a"\nissue = "b"\ncitation = "c"\nstatus = "own"\n'


@pytest.fixture(scope="module")
def pages(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    """The pages as they are written now, by name."""
    folder = tmp_path_factory.mktemp("docs")
    write_pages(folder)
    return {path.name: path.read_text(encoding="utf-8") for path in folder.iterdir()}


def test_there_are_five_pages(pages: dict[str, str]) -> None:
    assert set(pages) == set(PAGES) == {"method.md", "rules.md", "lists.md", "aircraft-card.md", "functions.md"}


def test_functions_page_has_every_function_with_its_answer(pages: dict[str, str]) -> None:
    rows = [line for line in pages["functions.md"].splitlines() if line.startswith("| `STRIP_")]
    assert sorted(row.split("`")[1] for row in rows) == sorted(function.full_name for function in FUNCTIONS)
    by_name = {row.split("`")[1]: row for row in rows}
    assert by_name["STRIP_SLOPE"].endswith("| `=STRIP_SLOPE(2380,2410,620)` | 1.47484 % |")
    assert "humidity [%] (*0*)" in by_name["STRIP_DENSITY_ALT"] and "condition (*dry*)" in by_name["STRIP_ROLLING"]


@pytest.mark.parametrize("name", PAGES)
def test_page_is_current(pages: dict[str, str], name: str) -> None:
    written = (ROOT / "docs" / name).read_text(encoding="utf-8")
    assert written == pages[name], f"docs/{name} is not current: run python -m stripcheck.doc_pages docs"


@pytest.mark.parametrize("name", PAGES)
def test_every_page_shows_the_caution(pages: dict[str, str], name: str) -> None:
    assert f"> {CAUTION}\n" in pages[name]


@pytest.mark.parametrize("name", PAGES)
def test_no_paragraph_comes_twice_and_none_is_half_made(pages: dict[str, str], name: str) -> None:
    paragraphs = [part for part in pages[name].split("\n\n") if len(part) > 80 and not part.startswith("|")]
    assert len(paragraphs) > 5
    assert name == "rules.md" or len(set(paragraphs)) == len(paragraphs)  # rule sets may say the same of themselves
    assert re.search(r"\{\w*(\[\d\])?\}", pages[name]) is None


def test_method_page_has_every_step_and_every_finding(pages: dict[str, str]) -> None:
    page = pages["method.md"]
    kinds = [("fixed pitch", POWERS[0]), *(("constant speed", power) for power in POWERS)]
    sides, both, none = frozenset(SIDES), frozenset(REACH), frozenset[str]()
    held = [(none, none), (sides, none), (none, both), (sides, both), *((frozenset({side}), none) for side in SIDES)]
    chains = [build_chain(*kind, *what) for kind in kinds for what in held]
    inputs = {item.key for chain in chains for item in chain.inputs}
    assert {key for key in inputs if f"`{key}`" not in page} == set()
    steps = {(step.key, step.source) for chain in chains for step in chain.steps}
    assert len(steps) > 250
    assert {step for step in steps if f"| {step[1]} | `{step[0]}` |" not in page} == set()
    for findings in (TAKEOFF_FINDINGS, LANDING_FINDINGS):
        for number, finding in enumerate(findings, 1):
            if finding.words != FAULT:
                assert f"| {number} | {finding.verdict} | {finding.words} |" in page


def test_every_column_has_its_meaning_and_no_other() -> None:
    assert set(COLUMN_MEANINGS) == {column.key for column in COLUMNS}


def test_kinds_that_are_left_out_are_those_of_the_reader(tmp_path: Path) -> None:
    path = tmp_path / "list.csv"
    rows = ("Strip,Runway,Length [m],Surface,Closed", "A,09/27,600,grass,yes", "B,H1,24,grass,", "C,18/36,900,water,")
    path.write_text("\n".join(rows), encoding="utf-8")
    assert [item.what for item in read_list(path).left_out] == [kind for kind, _ in LEFT_OUT]


def test_rule_set_in_the_text_can_be_loaded(tmp_path: Path) -> None:
    path = tmp_path / "ours.toml"
    path.write_text(re.search(r"```toml\n(.*?)```", OWN_RULES, re.S)[1], encoding="utf-8")  # type: ignore[index]
    values = load_rules(str(path)).values
    assert (values["takeoff_factor"], values["landing_factor"], values["headwind_credit"]) == (1.33, 1.43, 0.5)


def entries_of(table: tuple[Entry, ...]) -> dict[str, set[str]]:
    """Entries of a page's table by part."""
    parts: dict[str, set[str]] = {}
    for entry in table:
        parts.setdefault(entry.part, set()).add(entry.name)
    return parts


def entries_told(text: str, part: str, path: Path) -> set[str]:
    """The entries of a part that the program itself tells when it meets one that it does not know."""
    header = f"[{part}]\n"
    place = text.index(header) + len(header) if part else 0
    path.write_text(text[:place] + "unheard_of = 1\n" + text[place:], encoding="utf-8")
    with pytest.raises(InputError, match="the entries are: ") as caught:
        (load_card if "[aeroplane]" in text else load_rules)(str(path))
    return set(str(caught.value).partition("the entries are: ")[2].split(", "))


def test_entries_of_a_rule_set_are_all_there_and_no_other(tmp_path: Path) -> None:
    for part, names in entries_of(RULE_ENTRIES).items():
        text = LEAST_RULES + (f"[{part}]\n" if part else "")
        told = entries_told(text, part, tmp_path / "set.toml")
        parts = {name for name in told if name in entries_of(RULE_ENTRIES) or name.endswith("_surface")}
        assert told - parts == names


def test_needed_entries_of_a_rule_set_are_needed_and_the_others_are_not(tmp_path: Path) -> None:
    path = tmp_path / "set.toml"
    needed = [entry.name for entry in RULE_ENTRIES if not entry.key and not entry.usual]
    assert needed == ["title", "issue", "citation", "status"]
    path.write_text(LEAST_RULES, encoding="utf-8")
    load_rules(str(path))
    for name in needed:
        path.write_text(re.sub(rf"^{name} = .*\n", "", LEAST_RULES, flags=re.M), encoding="utf-8")
        with pytest.raises(InputError, match=f"{name} is missing"):
            load_rules(str(path))


def card_texts(folder: Path) -> list[str]:
    """The shipped cards, and one with a turbo-normalised engine: together they have every entry. Their tables in files are
    put into the folder."""
    for file in CARDS.glob("*.csv"):
        shutil.copy(file, folder)
    fixed, flat = ((CARDS / f"{name}.toml").read_text(encoding="utf-8") for name in ("ridge-runner", "high-mule"))
    return [fixed, flat, flat.replace("flat rated", "turbo-normalised").replace("flat_rated_to", "critical_altitude")]


# parts that a shipped card does without, and what must be in them
MORE_PARTS = '''
[flaps]
kind = "Fowler"
chord = "25 %"
span = "50 %"

[[position_error]]
ias = "40 kt"
cas = "42 kt"

[[position_error]]
ias = "60 kt"
cas = "61 kt"

[book.corrections.takeoff]
headwind = ["10 %", "9 kt"]

[book.corrections.landing]
headwind = ["10 %", "9 kt"]

[[book.takeoff]]
pressure_altitude = "0 ft"
temperature = "15 °C"
flap = "TAKE-OFF"
roll = "200 m"

[[book.landing]]
pressure_altitude = "0 ft"
temperature = "15 °C"
flap = "LANDING"
roll = "170 m"
'''


def with_more_parts(text: str) -> str:
    """A card's text with the parts that it does without."""
    names = {use: re.search(rf'^{use}_flap = "(.*)"$', text, re.M)[1] for use in ("takeoff", "landing")}  # type: ignore[index]
    return text + MORE_PARTS.replace("TAKE-OFF", names["takeoff"]).replace("LANDING", names["landing"])


def test_entries_of_a_card_are_all_there_and_no_other(tmp_path: Path) -> None:
    parts = entries_of(CARD_ENTRIES)
    deeper = {part.strip("[]").partition(".")[2].partition(".")[0] for part in parts}  # such as table of [[book.table]]
    texts = [with_more_parts(text) for text in card_texts(tmp_path)]
    for part, names in parts.items():
        told = set().union(*(entries_told(text, part, tmp_path / "card.toml") for text in texts))
        assert told - (deeper if part == "book" else set()) == names


def without(text: str, entry: Entry) -> str:
    """A card's text with the first such entry of the part taken away."""
    before, header, after = text.partition(f"[{entry.part}]\n")
    return before + header + re.sub(rf"^{entry.name} = .*\n", "", after, count=1, flags=re.M)


def has(text: str, entry: Entry) -> bool:
    part = text.partition(f"[{entry.part}]\n")[2].split("\n[")[0]
    return re.search(rf"^{entry.name} = ", part, flags=re.M) is not None


def is_needed(entry: Entry, page: str) -> bool:
    """Whether the page's table calls an entry needed."""
    row = rf"\| `\[{re.escape(entry.part)}\]` \| `{entry.name}` \| [^|]* \| \*needed\* \|"
    return re.search(row, page) is not None


# entries of which another one, or none of that part, may stand instead; or which belong to something else on the card
INSTEAD = {"climb_speed", "pressure_altitudes", "temperatures", "values", "to_50ft", "from_50ft", "kind", "chord", "span",
           "ias", "cas"}  # fmt: skip


def test_needed_entries_of_a_card_are_needed_and_the_others_are_not(pages: dict[str, str], tmp_path: Path) -> None:
    path = tmp_path / "card.toml"
    texts = [with_more_parts(text) for text in card_texts(tmp_path)]
    needed = [entry for entry in CARD_ENTRIES if is_needed(entry, pages["aircraft-card.md"])]
    assert len(needed) > 25
    for entry in needed:
        text = next(text for text in texts if has(text, entry))
        path.write_text(without(text, entry), encoding="utf-8")
        with pytest.raises(InputError, match=f"{entry.name} is missing"):
            load_card(str(path))
    fixed, *_ = card_texts(tmp_path)
    for entry in CARD_ENTRIES:
        if entry not in needed and entry.name not in INSTEAD and has(fixed, entry):
            fixed = without(fixed, entry)
    path.write_text(fixed, encoding="utf-8")
    assert len(load_card(str(path)).assumed) == 12  # ten of card.TYPICAL, the height of the wing, the mass of the first table


def blocks(page: str, kind: str) -> list[str]:
    """The blocks of code of a kind in a page."""
    return re.findall(rf"^```{kind}\n(.*?)^```$", page, re.S | re.M)


@pytest.fixture
def walk(pages: dict[str, str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with the card and the list of the walk from a manual to a workbook, as a reader would copy them."""
    page = pages["aircraft-card.md"]
    (tmp_path / "my-card.toml").write_text(blocks(page, "toml")[0], encoding="utf-8")
    (tmp_path / "my-strips.csv").write_text(blocks(page, "csv")[0], encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def command(page: str, start: str) -> list[str]:
    """The arguments of a command that the page tells to type."""
    line = next(line for text in blocks(page, "sh") for line in text.splitlines() if line.startswith(start))
    return shlex.split(line)[1:]


def test_report_in_the_page_is_what_the_command_prints(
    walk: Path, pages: dict[str, str], capsys: pytest.CaptureFixture[str]
) -> None:
    page = pages["aircraft-card.md"]
    assert main(command(page, "stripcheck card")) == 0
    printed = iter(capsys.readouterr().out.splitlines())
    shown = [line for line in next(text for text in blocks(page, "text") if "FITTED" in text).splitlines() if line.strip("., ")]
    assert all(line in printed for line in shown)  # each after the one before it
    assert {"WARNINGS", "  none"} <= set(shown)
    assert sum(re.search(r" \d+ +[\d.]+ % +[+-][\d.]+ %$", line) is not None for line in shown) == 4


def test_what_the_page_says_of_the_report_is_so(walk: Path, pages: dict[str, str]) -> None:
    """The factors of the invented manual are near 1, its differences a few per cent, its rounding as told."""
    card = load_card("my-card.toml")
    factors = [card.fit.values[key] for key in ("takeoff_technique", "braking_quality", "landing_technique")]
    assert factors == pytest.approx([1.0, 1.0, 1.0], abs=0.15)
    assert max(abs(model / book - 1.0) for _, book, model in card.fit.residuals) < 0.03
    assert not card.fit.remarks
    told = re.search(r"rounding alone makes up to (\d+) % of the\s+shortest roll", pages["aircraft-card.md"])
    shortest = min(book for label, book, _ in card.fit.residuals if label.endswith("roll"))
    assert told is not None and float(told[1]) == pytest.approx(250.0 / shortest, abs=0.5)


def test_workbook_of_the_walk_is_filled_and_has_the_manuals_figures(walk: Path, pages: dict[str, str]) -> None:
    page = pages["aircraft-card.md"]
    typed = command(page, "stripcheck fill")
    assert main(typed) == 0
    assert (walk / typed[-1]).is_file()
    typed[-1] = "my-strips-table.csv"  # the same as a table that can be read here
    assert main(typed) == 0
    with (walk / typed[-1]).open(encoding="utf-8-sig", newline="") as file:
        rows = [row for row in csv.DictReader(file) if row["Strip"] == "Proof"]
    said = re.search(r"distances required of \*Proof\* are (\d+) m and (\d+) m", " ".join(page.split()))
    assert said is not None
    for row in rows:
        assert float(row["Take-off distance required, TODR [m]"]) == pytest.approx(float(said[1]), abs=1e-6)
        assert float(row["Landing distance required, LDR [m]"]) == pytest.approx(float(said[2]), abs=1e-6)
        assert (row["Take-off verdict"], row["Landing verdict"]) == (SUITABLE, SUITABLE)


def test_pages_of_the_invented_manual_are_what_its_card_holds(walk: Path, pages: dict[str, str]) -> None:
    """Every figure of the two printed tables stands at its place in the card's tables, and every hole is one."""
    card = load_card("my-card.toml")
    text = pages["aircraft-card.md"].partition("**2. ")[0]
    printed = re.findall(r"^\| ([\d,]+) ft \| (.*) \|$", text, re.M)
    assert len(printed) == 7
    for side, lines in (("takeoff", printed[:4]), ("landing", printed[4:])):
        roll, whole = (card.tables[side].printed[figure][0] for figure in ("roll", "distance"))
        for i, (altitude, cells) in enumerate(lines):
            assert card.tables[side].altitudes[i] == pytest.approx(float(altitude.replace(",", "")) * 0.3048)
            pairs = [[float(n) for n in cell.split("/")] if "/" in cell else [np.nan] * 2 for cell in cells.split("|")]
            np.testing.assert_array_equal(np.array(pairs), np.stack([roll[i], whole[i]], axis=1))


def test_speeds_of_the_invented_manual_are_those_of_its_card(walk: Path, pages: dict[str, str]) -> None:
    card = load_card("my-card.toml")
    text = " ".join(pages["aircraft-card.md"].split())
    stalls = [float(from_si(flap.stall_speed, "kt")) for flap in card.flaps]
    assert stalls == pytest.approx([44.0, 41.0, 38.0])
    assert "calibrated: flaps up 44 kt, 15° 41 kt, 35° 38 kt" in text
    assert "Lift off at 45 kt, 50 kt at 50 ft" in text
    factors = [card.values[f"{name}_factor"] for name in ("lift_off", "screen", "approach")]
    assert factors == pytest.approx([45.0 / 41.0, 50.0 / 41.0, 50.0 / 38.0], abs=0.005)  # typed with two decimals


def test_corners_of_the_shipped_grids_read_as_the_cards_tables(pages: dict[str, str]) -> None:
    """The pieces in the page are grids themselves, and their figures those that the shipped card holds."""
    card = load_card("high-mule")
    climb, takeoff = blocks(pages["aircraft-card.md"], "csv")[1:]
    heaviest = [mass for _, mass in card.tables["takeoff"].pages].index(2800.0)
    for piece, side, page, names in ((climb, "climb", 0, ("rate",)), (takeoff, "takeoff", heaviest, ("roll", "distance"))):
        tables = card.tables[side]
        altitudes, temperatures, cells, _ = parse_grid(list(csv.reader(piece.splitlines())), "piece", len(names))
        np.testing.assert_allclose(altitudes, tables.altitudes[: len(altitudes)])
        np.testing.assert_allclose(temperatures, tables.temperatures[: len(temperatures)])
        for place, figure in enumerate(names):
            shown = np.array([[float(cell) for cell in row[place :: len(names)]] for row in cells])
            held = tables.printed[figure][page][: len(altitudes), : len(temperatures)]
            np.testing.assert_allclose(shown, from_si(held, "ft/min" if figure == "rate" else "m"))


@pytest.mark.parametrize("card", [trial_heron(), trial_mule()], ids=["fixed pitch", "constant speed"])
@pytest.mark.parametrize(("side", "flap"), [("takeoff", "10"), ("landing", "30")])
def test_straight_lines_between_figures_lie_on_the_long_side(card: Card, side: str, flap: str) -> None:
    """What the page says of linear reading, on the model: the mean of eight corners is no shorter than the middle."""
    altitudes, temperatures = np.arange(0.0, 8001.0, 1000.0), np.arange(-10.0, 31.0, 5.0)
    light, middle, heavy = (np.stack(figures(card, side, flap, mass, altitudes, temperatures)) for mass in (850, 900, 950))
    corners = [grid[:, i : i + 7 : 2, j : j + 7 : 2] for grid in (light, heavy) for i in (0, 2) for j in (0, 2)]
    over = np.mean(corners, axis=0) / middle[:, 1::2, 1::2] - 1.0
    assert over.shape == (2, 4, 4)
    assert (over[np.isfinite(over)] > 0.0).all()
    assert np.isfinite(over).mean() > 0.5  # the others are where the aeroplane does not climb away


def test_summary_of_a_shipped_cards_residuals_counts_all_of_them(pages: dict[str, str]) -> None:
    page = pages["aircraft-card.md"].partition("## Calibration")[2]
    for name in shipped_cards():
        card = load_card(name)
        part = page.partition(f"### {card.name}")[2].partition("\n#")[0]
        rows = re.findall(r"^\| (take-off|landing): (roll|50 ft) \| (\d+) \| ([\d.]+) % \| ([+-][\d.]+) % \|$", part, re.M)
        assert len(rows) == 4
        assert sum(int(count) for *_, count, _, _ in rows) == len(card.fit.residuals)
        worst = max(abs(model / book - 1.0) for _, book, model in card.fit.residuals)
        assert max(abs(float(greatest)) for *_, greatest in rows) == pytest.approx(100.0 * worst, abs=0.05)
        assert all(float(rms) <= abs(float(greatest)) for *_, rms, greatest in rows)
