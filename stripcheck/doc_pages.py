"""The reference pages of the documentation, made from the tables that the program itself runs on.

``python -m stripcheck.doc_pages docs`` writes method.md, rules.md, lists.md and aircraft-card.md into a folder. The
prose is written here by hand; every table comes from the chain, the inputs, the rule sets, the cards, the surface table
and the columns of the register, so that no page can tell another story than the program.
"""

from __future__ import annotations

import math
import sys
import tempfile
from collections.abc import Callable, Iterable, Sequence
from pathlib import Path
from typing import NamedTuple

from stripcheck import verdict
from stripcheck.calibrate import BRAKING, QUALITIES, TECHNIQUES
from stripcheck.card import TYPICAL, load_card, shipped_cards
from stripcheck.chain import Chain, Input, Step
from stripcheck.inputs import CARD, CONSTANT_SPEED, DAY, FIXED_PITCH, POWER_LIMIT, RULES, STRIP
from stripcheck.register import surface_words
from stripcheck.register.columns import COLUMNS, Column
from stripcheck.register.limits import LIMITS
from stripcheck.rules import Rules, load_rules, shipped_rules
from stripcheck.sheet.method import METHOD, SOURCES
from stripcheck.sheet.summary import BOTH
from stripcheck.steps import (
    AIR_STEPS,
    AIRCRAFT_STEPS,
    CONSTANT_SPEED_STEPS,
    FIXED_PITCH_STEPS,
    LANDING_DISTANCE_STEPS,
    POWERS,
    TAKEOFF_DISTANCE_STEPS,
    TAKEOFF_KNOWN,
    build_chain,
)
from stripcheck.surface import CONDITIONS, GROUNDS, SURFACES
from stripcheck.units import KINDS, from_si, tidy

MADE = "*This page is made by `python -m stripcheck.doc_pages docs`; change the program, not the page.*"
MANY = 15  # inputs above which a step's list of them says nothing to a reader
STATUS_WORDS = {
    "read": "figures taken from the text",
    "memory": "figures from memory: compare with the text before use",
    "own": "the project's own, no publication",
}


def table(headers: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    """A Markdown table.

    >>> print(table(("a", "b"), [("1", "x|y")]))
    | a | b |
    | --- | --- |
    | 1 | x\\|y |
    """
    lines = [headers, ["---"] * len(headers), *rows]
    return "\n".join("| " + " | ".join(cell.replace("|", "\\|") for cell in line) + " |" for line in lines)


def code(text: str) -> str:
    return f"`{text}`" if text else ""


def figure(value: float, unit: str, nothing: str = "none") -> str:
    """A number in the unit that users see; ``value`` [SI], NaN for nothing.

    >>> figure(0.05, "%"), figure(math.nan, "m")
    ('5 %', 'none')
    """
    return nothing if math.isnan(value) else f"{tidy(float(from_si(value, unit))):,g} {unit}".strip()


def method_page() -> str:
    """docs/method.md: what is given, every step, and the findings."""
    return _joined(
        "# How a verdict comes about",
        f"> {verdict.CAUTION}",
        MADE,
        METHOD_INTRO,
        "## In short",
        "\n".join(f"- {line}" for line in METHOD),
        "## What is given",
        GIVEN_INTRO,
        *_given_tables(),
        "## Step by step",
        STEPS_INTRO,
        *_step_tables(),
        "## Findings and verdicts",
        FINDINGS_INTRO,
        "### Take-off",
        _findings(verdict.TAKEOFF_FINDINGS),
        "### Landing",
        _findings(verdict.LANDING_FINDINGS),
        "### In and out",
        BOTH_INTRO.format(", ".join(f"*{words}*" for words in BOTH)),
        "## Sources",
        "\n".join(f"- {line}" for line in SOURCES),
    )




def _given_tables() -> list[str]:
    parts: list[str] = []
    card = (*CARD, *FIXED_PITCH, *CONSTANT_SPEED, POWER_LIMIT)
    for heading, items in (("The strip", STRIP), ("The day", DAY), ("The aeroplane", card), ("The rules", RULES)):
        rows = [(item.label, item.unit, item.help, code(item.key)) for item in items]
        parts += [f"### {heading}", table(("Value", "Unit", "Meaning", "Key"), rows)]
    return parts


def _step_tables() -> list[str]:
    fixed, constant = build_chain("fixed pitch"), build_chain("constant speed")
    powers = [build_chain("constant speed", power).by_key["power"] for power in POWERS]
    power_steps = [step for step in powers if isinstance(step, Step)]
    limited = build_chain("constant speed", POWERS[-1])
    groups: tuple[tuple[str, Sequence[Step], Chain], ...] = (
        ("The aeroplane at its mass and flaps", AIRCRAFT_STEPS, fixed),
        ("Air, wind and ground", AIR_STEPS, fixed),
        ("Take-off: speeds", TAKEOFF_KNOWN, fixed),
        ("Take-off run with a fixed-pitch propeller", FIXED_PITCH_STEPS, fixed),
        (f"Shaft power with a constant-speed propeller: {', '.join(POWERS)}", power_steps, limited),
        ("Take-off run with a constant-speed propeller", CONSTANT_SPEED_STEPS, constant),
        ("Take-off: to 50 ft, over the obstacle, factors", TAKEOFF_DISTANCE_STEPS, fixed),
        ("Take-off: verdict", verdict.TAKEOFF_STEPS, fixed),
        ("Landing", LANDING_DISTANCE_STEPS, fixed),
        ("Landing: verdict", verdict.LANDING_STEPS, fixed),
    )
    headers = ("Step", "Sign", "Unit", "From", "Only where", "Source", "Key")
    parts: list[str] = []
    for heading, steps, chain in groups:
        parts += [f"### {heading}", table(headers, [_step_row(step, chain) for step in steps])]
    return parts


def _step_row(step: Step, chain: Chain) -> tuple[str, ...]:
    labels = [chain.by_key[key].label for key in dict.fromkeys(step.inputs)]
    from_what = "; ".join(labels) if len(labels) <= MANY else "what the findings below read"
    unit = "yes or no" if step.truth else "words" if step.words else step.unit
    guard = chain.by_key[step.guard].label if step.guard else ""
    return step.label, step.symbol, unit, from_what, guard, step.source, code(step.key)


def _findings(findings: tuple[verdict.Finding, ...]) -> str:
    words = [finding.words.replace(verdict.FAULT, "(what is wrong with this row of the list)") for finding in findings]
    rows = [(str(n), finding.verdict, text) for n, (finding, text) in enumerate(zip(findings, words, strict=True), 1)]
    return table(("", "Verdict", "Limiting reason"), rows)


def rules_page() -> str:
    """docs/rules.md: the shipped sets, the ground table, and how to write one's own."""
    sets = [load_rules(name) for name in shipped_rules()]
    overview = [(code(rules.name), rules.title, figure(_number(rules, "takeoff_factor"), ""),
                 figure(_number(rules, "landing_factor"), ""), STATUS_WORDS[rules.status]) for rules in sets]  # fmt: skip
    parts = [part for rules in sets for part in _rule_set(rules)]
    return _joined(
        "# Rule sets",
        f"> {verdict.CAUTION}",
        MADE,
        RULES_INTRO,
        table(("Name", "Title", "Take-off factor", "Landing factor", "Status"), overview),
        *parts,
        "## Ground table",
        GROUND_INTRO,
        _ground_table(),
        "## Your own set",
        OWN_RULES,
        _entries_table(RULE_ENTRIES, RULES, _usual_rules()),
        SURFACE_FACTORS,
    )




def _number(rules: Rules, key: str) -> float:
    value = rules.values[key]
    assert isinstance(value, float | int)
    return float(value)


def _rule_set(rules: Rules) -> list[str]:
    facts = [("Issue", rules.issue), ("Citation", rules.citation), ("Status", STATUS_WORDS[rules.status])]
    plain = [item for item in RULES if item.kind != "range" and not item.key.startswith("reference_")]
    figures = [(item.label, _rule_value(rules, item)) for item in plain]
    return [
        f"## {rules.title}",
        f"`--rules {rules.name}`",
        table(("", ""), facts),
        " ".join(rules.note.split()),
        table(("Rule", "Figure"), figures),
        _surface_corrections(rules),
    ]


def _rule_value(rules: Rules, item: Input) -> str:
    if item.kind == "flag":
        return "yes" if rules.values[item.key] else "no"
    return figure(_number(rules, item.key), item.unit)


def _surface_corrections(rules: Rules) -> str:
    takeoff, landing = rules.values["ground_takeoff_factor"], rules.values["ground_landing_factor"]
    rows = [(ground.name, f"{one:g}", f"{other:g}")
            for ground, one, other in zip(GROUNDS, takeoff, landing, strict=False) if (one, other) != (1.0, 1.0)]  # type: ignore[arg-type]  # fmt: skip
    if not rows:
        return "No published surface corrections: the physics of the surface governs."
    return "Published surface corrections (1 for all other ground: there the physics governs):\n\n" + table(
        ("Ground", "Take-off", "Landing"), rows
    )


def _ground_table() -> str:
    rows = [(ground.name, figure(ground.rolling, ""), figure(ground.braking, ""), ground.source) for ground in GROUNDS]
    return table(("Ground", "Rolling", "Braking", "Source"), rows)


def _usual_rules() -> dict[str, str]:
    """The value of each rule where a set says nothing: read from a set that does."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "empty.toml"
        path.write_text('title = "-"\nissue = "-"\ncitation = "-"\nstatus = "own"\n', encoding="utf-8")
        rules = load_rules(str(path))
    return {item.key: _rule_value(rules, item) for item in RULES if item.kind != "range"}


def _entries_table(entries: tuple[Entry, ...], items: Sequence[Input], usual: dict[str, str]) -> str:
    known = {item.key: item for item in items}
    rows = []
    for entry in entries:
        item = known.get(entry.key)
        takes = entry.takes or ("yes or no" if item and item.kind == "flag" else item.unit if item else "")
        meaning = entry.meaning or (f"{item.label}. {item.help}".strip(" .") if item else "")
        stands_in = entry.usual or usual.get(entry.key, "") or "*needed*"
        rows.append((code(f"[{entry.part}]") if entry.part else "", code(entry.name), takes or "number", stands_in, meaning))
    return table(("Part", "Entry", "Takes", "Usual", "Meaning"), rows)


def card_page() -> str:
    """docs/aircraft-card.md: the entries of a card, how to make one, and how far to trust it."""
    usual = {entry.key: f"{TYPICAL[entry.part, entry.name]}, and said so" for entry in CARD_ENTRIES
             if (entry.part, entry.name) in TYPICAL}  # fmt: skip
    parts = [part for name in shipped_cards() for part in _calibration(name)]
    return _joined(
        "# The aircraft card",
        f"> {verdict.CAUTION}",
        MADE,
        CARD_INTRO,
        "## Making a card from a flight manual",
        CARD_RECIPE,
        "## Entries",
        "Numbers carry their unit, in quotes. *Needed* entries have no usual value; parts in double brackets come again "
        "for each setting or point.",
        _entries_table(CARD_ENTRIES, (*CARD, *CONSTANT_SPEED), usual),
        "## Calibration",
        CALIBRATION.format(TECHNIQUES, QUALITIES, BRAKING),
        *parts,
        "## How far to trust it",
        TRUST,
    )




def _calibration(name: str) -> list[str]:
    card = load_card(name)
    labels = {item.key: item for item in (*CARD, *FIXED_PITCH, *CONSTANT_SPEED)}
    fitted = [(labels[key].label, f"{tidy(float(from_si(value, labels[key].unit))):.3g} {labels[key].unit}".strip())
              for key, value in card.fit.values.items()]  # fmt: skip
    rows = [(label, f"{book:.0f}", f"{model:.1f}", f"{model / book - 1.0:+.1%}") for label, book, model in card.fit.residuals]
    return [
        f"### {card.name}",
        card.note,
        table(("Fitted", "Value"), fitted),
        table(("Book point", "Book [m]", "Card [m]", "Difference"), rows),
    ]


def lists_page() -> str:
    """docs/lists.md: columns, surface words, what is left out, faults and doubts."""
    return _joined(
        "# Runway lists",
        f"> {verdict.CAUTION}",
        MADE,
        LISTS_INTRO,
        "## Columns",
        COLUMNS_INTRO,
        table(("It tells", "Plain number in", "Comes", "Header words"), [_column_row(column) for column in COLUMNS]),
        "## Which way",
        WHICH_WAY,
        "## Surface words",
        SURFACE_RULE,
        _surface_table(),
        SURFACE_REST,
        "## What is left out",
        LEFT_OUT_INTRO,
        table(("Kind", "When"), LEFT_OUT),
        "## Faults",
        FAULTS_INTRO,
        "\n".join(f"- {line}" for line in CONTRADICTIONS),
        "A number outside of these limits is a fault too:",
        _limits_table(),
        "## Doubts",
        DOUBTS,
    )




def _column_row(column: Column) -> tuple[str, str, str, str]:
    unit = KINDS[column.kind][0] if column.kind in KINDS else column.kind
    unit = "hPa or inHg" if column.kind == "pressure" else unit
    words = ", ".join(word for word in column.words if word)
    return COLUMN_MEANINGS[column.key], unit, PLACES[column.scope], words


def _surface_table() -> str:
    meanings = {
        surface_words.NO_FIGURES: "no figures: not assessed",
        surface_words.TREATED: "dirt; with gravel or sand, that one",
        "water": "left out",
        "helipad": "left out",
    }
    rows = [(meanings.get(word, word), ", ".join(spellings.split())) for word, spellings in surface_words._WORDS.items()]
    return table(("Counts as", "Words"), rows)


def _condition_words() -> str:
    by_condition: dict[str, list[str]] = {}
    for word, condition in surface_words._CONDITIONS.items():
        by_condition.setdefault(condition, []).append(word)
    return "; ".join(f"*{condition}* for {', '.join(words)}" for condition, words in by_condition.items())


def _limits_table() -> str:
    rows = [(COLUMN_MEANINGS[key], limits.sentence) for key, limits in LIMITS.items()]
    return table(("Column", "Limits"), rows)


def _joined(*parts: str) -> str:
    return "\n\n".join(part.strip() for part in parts if part.strip()) + "\n"


PAGES: dict[str, Callable[[], str]] = {
    "method.md": method_page,
    "rules.md": rules_page,
    "lists.md": lists_page,
    "aircraft-card.md": card_page,
}


def write_pages(folder: Path) -> None:
    """Write every page into a folder that exists."""
    for name, page in PAGES.items():
        (folder / name).write_text(page(), encoding="utf-8")


if __name__ == "__main__":
    write_pages(Path(sys.argv[1]))
