"""The reference pages in docs/ are those that the program makes now, and what is written by hand in them holds."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from stripcheck.card import load_card
from stripcheck.caution import CAUTION
from stripcheck.doc_pages import PAGES, write_pages
from stripcheck.doc_words import CARD_ENTRIES, COLUMN_MEANINGS, LEFT_OUT, OWN_RULES, RULE_ENTRIES, Entry
from stripcheck.errors import InputError
from stripcheck.register.columns import COLUMNS
from stripcheck.register.reader import read_list
from stripcheck.rules import load_rules
from stripcheck.steps import POWERS, build_chain
from stripcheck.verdict import FAULT, LANDING_FINDINGS, TAKEOFF_FINDINGS

ROOT = Path(__file__).parent.parent
CARDS = ROOT / "stripcheck" / "cards"
LEAST_RULES = 'title = "a"\nissue = "b"\ncitation = "c"\nstatus = "own"\n'


@pytest.fixture(scope="module")
def pages(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    """The pages as they are written now, by name."""
    folder = tmp_path_factory.mktemp("docs")
    write_pages(folder)
    return {path.name: path.read_text(encoding="utf-8") for path in folder.iterdir()}


def test_there_are_four_pages(pages: dict[str, str]) -> None:
    assert set(pages) == set(PAGES) == {"method.md", "rules.md", "lists.md", "aircraft-card.md"}


@pytest.mark.parametrize("name", PAGES)
def test_page_is_current(pages: dict[str, str], name: str) -> None:
    written = (ROOT / "docs" / name).read_text(encoding="utf-8")
    assert written == pages[name], f"docs/{name} is not current: run python -m stripcheck.doc_pages docs"


@pytest.mark.parametrize("name", PAGES)
def test_every_page_shows_the_caution(pages: dict[str, str], name: str) -> None:
    assert f"> {CAUTION}\n" in pages[name]


def test_method_page_has_every_step_and_every_finding(pages: dict[str, str]) -> None:
    page = pages["method.md"]
    chains = [build_chain("fixed pitch"), *(build_chain("constant speed", power) for power in POWERS)]
    keys = {item.key for chain in chains for item in (*chain.inputs, *chain.steps)}
    assert {key for key in keys if f"| `{key}` |" not in page} == set()
    sources = {step.source for chain in chains for step in chain.steps}
    assert {source for source in sources if f"| {source} |" not in page} == set()
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


def card_texts() -> list[str]:
    """The shipped cards, and one with a turbo-normalised engine: together they have every entry."""
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
'''


def test_entries_of_a_card_are_all_there_and_no_other(tmp_path: Path) -> None:
    for part, names in entries_of(CARD_ENTRIES).items():
        told = [entries_told(text + MORE_PARTS, part, tmp_path / "card.toml") for text in card_texts()]
        assert set().union(*told) == names


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


def test_needed_entries_of_a_card_are_needed_and_the_others_are_not(pages: dict[str, str], tmp_path: Path) -> None:
    path = tmp_path / "card.toml"
    fixed, flat, turbo = card_texts()
    needed = [entry for entry in CARD_ENTRIES if is_needed(entry, pages["aircraft-card.md"])]
    assert len(needed) > 20
    for entry in needed:
        text = next(text for text in (fixed, flat, turbo) if has(text, entry))
        path.write_text(without(text, entry), encoding="utf-8")
        with pytest.raises(InputError, match=f"{entry.name} is missing"):
            load_card(str(path))
    for entry in CARD_ENTRIES:
        if entry not in needed and entry.name not in ("to_50ft", "from_50ft", "kind") and has(fixed, entry):
            fixed = without(fixed, entry)
    path.write_text(fixed, encoding="utf-8")
    assert len(load_card(str(path)).assumed) == 11  # ten of card.TYPICAL, and the height of the wing
