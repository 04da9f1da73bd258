"""The reference pages of the documentation, made from the tables that the program runs on.

``python -m stripcheck.doc_pages docs`` writes method.md, rules.md, lists.md, aircraft-card.md and functions.md into a
folder. The prose is written by hand in stripcheck/doc_words.py; every table comes from the chain, the inputs, the rule
sets, the cards, the surface table, the columns of the register and the registry of functions, so that no page can tell
another story than the program.
"""

from __future__ import annotations

import csv
import math
import re
import sys
import tempfile
import textwrap
from collections.abc import Callable, Collection, Iterable, Sequence
from importlib.resources import files
from pathlib import Path
from typing import TypeGuard

import numpy as np

from stripcheck import doc_words as prose
from stripcheck import verdict
from stripcheck.calibrate import BRAKING, MISFIT_TOLD, QUALITIES, SHORTEST, TECHNIQUES, THRUSTS
from stripcheck.card import TYPICAL, Card, load_card, shipped_cards
from stripcheck.card_report import report
from stripcheck.caution import CAUTION
from stripcheck.chain import Chain, Input, Step
from stripcheck.doors.aircraft import NO_REACH
from stripcheck.doors.call import EMPTY, call
from stripcheck.doors.excel_setup import formula_of
from stripcheck.doors.functions import FUNCTIONS, Argument, Function
from stripcheck.flap_lift import FLAP_KINDS, FULL_CHORD, WING_SHARE
from stripcheck.flaps import LIFT_CREDIT, TYPICAL_FLAPS
from stripcheck.inputs import (
    CARD,
    CONSTANT_SPEED,
    DAY,
    FIXED_PITCH,
    POWER_LIMIT,
    REACH,
    RULES,
    SIDE_WORDS,
    STRIP,
    manual_inputs,
    table_inputs,
)
from stripcheck.register import safe_limits, surface_words
from stripcheck.register.columns import COLUMNS, Column
from stripcheck.register.limits import LIMITS
from stripcheck.rules import Rules, load_rules, shipped_rules
from stripcheck.sheet.book import SHORT_ABOVE
from stripcheck.sheet.labels import TABLES
from stripcheck.sheet.method import METHOD, SOURCES
from stripcheck.sheet.summary import BOTH
from stripcheck.steps import (
    AIR_STEPS,
    AIRCRAFT_STEPS,
    CONSTANT_SPEED_STEPS,
    ENGINE_AIR,
    FIXED_PITCH_STEPS,
    LANDING_DISTANCE_STEPS,
    POWERS,
    PROPELLERS,
    SIDES,
    TAKEOFF_DISTANCE_STEPS,
    TAKEOFF_KNOWN,
    build_chain,
)
from stripcheck.surface import CONDITIONS, GROUNDS, SURFACES
from stripcheck.toml_fields import MAX_FILE
from stripcheck.units import KINDS, from_si, tidy

MADE = "*This page is made by `python -m stripcheck.doc_pages docs`; change the program, not the page.*"
WIDTH = 110  # characters of a line of prose
MANY = 15  # inputs above which a step's list of them says nothing to a reader
Row = tuple[str, ...]
PAGES_READ = "mass and flap of the tables' pages"  # four inputs of many steps, in one word
ROUNDED_BY = 5.0  # m: as the distances of the invented manual are
REPORT_SHOWN = ("FITTED", "WHAT THE", "THE CARD AGAINST", "WARNINGS")  # headings of a card's report
SUMMARY_LINES = 6  # of the differences: a heading, titles, and a line for each of four kinds of figures
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


def folded(text: str) -> str:
    """Paragraphs with their lines broken anew, for a text that something was put into.

    >>> folded("one\\ntwo\\n\\nthree")
    'one two\\n\\nthree'
    """
    return "\n\n".join(
        textwrap.fill(paragraph.strip(), WIDTH, break_long_words=False, break_on_hyphens=False)
        for paragraph in text.split("\n\n")
    )


def code(text: str) -> str:
    """A text as code, nothing for nothing."""
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
        f"> {CAUTION}",
        MADE,
        folded(prose.METHOD_INTRO.format(SHORT_ABOVE)),
        "## In short",
        "\n".join(f"- {line}" for line in METHOD),
        "## What is given",
        prose.GIVEN_INTRO,
        *_given_tables(),
        "## Step by step",
        prose.STEPS_INTRO,
        *_step_tables(),
        "## With tables of the manual",
        folded(prose.WITH_TABLES),
        *_further_tables("from tables", [(side, frozenset({side}), frozenset()) for side in SIDES]),
        "## With the manual's own corrections",
        folded(prose.WITH_CORRECTIONS),
        *_further_tables("with corrections", [(side, frozenset(), frozenset({side})) for side in REACH]),
        "## Findings and verdicts",
        prose.FINDINGS_INTRO,
        "### Take-off",
        _findings(verdict.TAKEOFF_FINDINGS),
        "### Landing",
        _findings(verdict.LANDING_FINDINGS),
        "### In and out",
        folded(prose.BOTH_INTRO.format("; ".join(f"*{words}*" for words in BOTH))),
        "## Sources",
        "\n".join(f"- {line}" for line in SOURCES),
    )


def _given_tables() -> list[str]:
    parts: list[str] = []
    card = (*CARD, *FIXED_PITCH, *CONSTANT_SPEED, POWER_LIMIT, *REACH.values())
    own = [item for side in REACH for item in manual_inputs(side)]
    groups: tuple[tuple[str, str, Sequence[Input]], ...] = (
        ("The strip", "", STRIP),
        ("The day", "", DAY),
        ("The aeroplane", "", card),
        ("The manual's tables", folded(prose.TABLES_GIVEN), [item for item in table_inputs("climb") if item.kind == "number"]),
        ("The manual's own corrections", "", own),
        ("The rules", "", RULES),
    )
    for heading, words, items in groups:
        rows = [(item.label, item.unit, item.help, code(item.key)) for item in items]
        parts += [f"### {heading}", words, table(("Value", "Unit", "Meaning", "Key"), rows)]
        if words:
            parts.append(_table_ranges())
    return parts


def _table_ranges() -> str:
    """What a chain reads of the manual's tables, in one row for take-off, landing and climb."""
    keys: dict[str, list[str]] = {}
    for side in SIDES:
        for item in table_inputs(side):
            if item.kind == "range":
                keys.setdefault(item.label.partition(": ")[2], []).append(item.key)
    return table(("Of the tables", "Keys"), [(label, _listed(names)) for label, names in keys.items()])


def _step_tables() -> list[str]:
    fixed, constant = (build_chain(kind) for kind in PROPELLERS)
    engines = {power: build_chain("constant speed", power) for power in POWERS}
    felt = tuple(
        (f"What the engine feels, and its shaft power: {power}", (*ENGINE_AIR[power], *_steps_of(chain, "power")), chain)
        for power, chain in engines.items()
    )
    groups: tuple[tuple[str, Sequence[Step], Chain], ...] = (
        ("The aeroplane at its mass and flaps", AIRCRAFT_STEPS, fixed),
        ("Air, wind and ground", AIR_STEPS, fixed),
        ("Take-off: speeds", TAKEOFF_KNOWN, fixed),
        ("Take-off run with a fixed-pitch propeller", FIXED_PITCH_STEPS, fixed),
        *felt,
        ("Take-off run with a constant-speed propeller", CONSTANT_SPEED_STEPS, constant),
        ("Take-off: to 50 ft, over the obstacle, factors", TAKEOFF_DISTANCE_STEPS, fixed),
        ("Take-off: verdict", verdict.TAKEOFF_STEPS, fixed),
        ("Landing", LANDING_DISTANCE_STEPS, fixed),
        ("Landing: verdict", verdict.LANDING_STEPS, fixed),
        ("How far the manual's figures reach, without tables", _reach_steps(fixed), fixed),
    )
    return [part for heading, steps, chain in groups for part in _step_table(heading, steps, chain)]


def _step_table(heading: str, steps: Sequence[Step], chain: Chain) -> list[str]:
    return _rows_table(heading, [_step_row(step, chain) for step in steps])


def _rows_table(heading: str, rows: Collection[Row]) -> list[str]:
    headers = ("Step", "Sign", "Unit", "From", "Only where", "Source", "Key")
    return [f"### {heading}", table(headers, rows)] if rows else []


def _steps_of(chain: Chain, *keys: str) -> list[Step]:
    return [step for step in (chain.by_key[key] for key in keys) if isinstance(step, Step)]


def _reach_steps(chain: Chain) -> list[Step]:
    found = [chain.by_key[f"{side}_{key}"] for side in REACH for key in ("beyond_reach", "beyond")]
    return [step for step in found if isinstance(step, Step)]


def _further_tables(what: str, cases: Iterable[tuple[str, frozenset[str], frozenset[str]]]) -> list[str]:
    """The steps that tables or corrections of the manual add or change, side by side: of either propeller, then of each."""
    parts: list[str] = []
    for side, tables, corrections in cases:
        fixed = _added([("fixed pitch", POWERS[0])], tables, corrections)
        constant = _added([("constant speed", power) for power in POWERS], tables, corrections)
        either = {work: row for work, row in fixed.items() if work in constant}
        heading = f"{SIDE_WORDS[side]} {what}"
        parts += _rows_table(heading, either.values())
        for kind, rows in zip(PROPELLERS, (fixed, constant), strict=True):
            own = [row for work, row in rows.items() if work not in either]
            parts += _rows_table(f"{heading}, {kind.replace(' ', '-')} propeller", own)
    return parts


def _added(kinds: Iterable[tuple[str, str]], tables: frozenset[str], corrections: frozenset[str]) -> dict[object, Row]:
    """Rows of the steps that chains have by tables or corrections and lack without, or then have from other values."""
    rows: dict[object, Row] = {}
    for kind in kinds:
        chain = build_chain(*kind, tables, corrections)
        known = {_work(step) for step in build_chain(*kind).steps}
        rows |= {_work(step): _step_row(step, chain) for step in chain.steps if _work(step) not in known}
    return rows


def _work(step: Step) -> tuple[object, ...]:
    return step.key, step.function, step.inputs


def _step_row(step: Step, chain: Chain) -> Row:
    labels = list(dict.fromkeys(PAGES_READ if "_page_" in key else chain.by_key[key].label for key in step.inputs))
    from_what = "; ".join(labels) if len(labels) <= MANY else "what the findings below read"
    unit = "yes or no" if step.truth else "words" if step.words else step.unit
    guard = chain.by_key[step.guard].label if step.guard else ""
    return step.label, step.symbol, unit, from_what, guard, step.source, code(step.key)


def _findings(findings: tuple[verdict.Finding, ...]) -> str:
    said = {verdict.FAULT: "(what is wrong with this row of the list)"}
    rows = [(str(n), finding.verdict, said.get(finding.words, finding.words)) for n, finding in enumerate(findings, 1)]
    return table(("", "Verdict", "Limiting reason"), rows)


def rules_page() -> str:
    """docs/rules.md: the shipped sets, the ground table, and how to write one's own."""
    sets = [load_rules(name) for name in shipped_rules()]
    overview = [
        (code(one.name), one.title, _factor(one, "takeoff"), _factor(one, "landing"), STATUS_WORDS[one.status])
        for one in sets
    ]
    parts = [part for one in sets for part in _rule_set(one)]
    return _joined(
        "# Rule sets",
        f"> {CAUTION}",
        MADE,
        prose.RULES_INTRO,
        "## Shipped sets",
        table(("Name", "Title", "Take-off factor", "Landing factor", "Status"), overview),
        *parts,
        "## Ground table",
        prose.GROUND_INTRO,
        _ground_table(),
        "## Your own set",
        prose.OWN_RULES,
        _entries_table(prose.RULE_ENTRIES, RULES, _usual_rules()),
        folded(prose.SURFACE_FACTORS.format(_listed(CONDITIONS), _listed(SURFACES))),
    )


def _number(rules: Rules, key: str) -> float:
    return float(np.asarray(rules.values[key]))


def _factor(rules: Rules, side: str) -> str:
    """The safety factor of a side; a range where it grows with the distance."""
    short, long = _number(rules, f"{side}_factor"), _number(rules, f"{side}_factor_long")
    return f"{short:g}" if short == long else f"{short:g} to {long:g}"


def _rule_set(rules: Rules) -> list[str]:
    facts = [f"- `--rules {rules.name}`", f"- Issue: {rules.issue}", f"- Citation: {rules.citation}",
             f"- Status: {STATUS_WORDS[rules.status]}"]  # fmt: skip
    figures = [(item.label, _rule_value(rules, item)) for item in RULES if _tells_something(rules, item)]
    return [
        f"### {rules.title}",
        "\n".join(facts),
        " ".join(rules.note.split()),
        table(("Rule", "Figure"), figures),
        _surface_corrections(rules),
    ]


def _tells_something(rules: Rules, item: Input) -> bool:
    """Whether a set's figure is worth a line: not what it leaves blank, nor where a factor grows that doesn't."""
    if item.kind == "range" or item.key.startswith("reference_"):
        return False
    side, _, growing = item.key.partition("_factor_")
    if growing and _number(rules, f"{side}_factor") == _number(rules, f"{side}_factor_long"):
        return False
    return item.kind == "flag" or not math.isnan(_number(rules, item.key))


def _rule_value(rules: Rules, item: Input) -> str:
    if item.kind == "flag":
        return "yes" if rules.values[item.key] else "no"
    return figure(_number(rules, item.key), item.unit)


def _surface_corrections(rules: Rules) -> str:
    pairs = np.column_stack([rules.values["ground_takeoff_factor"], rules.values["ground_landing_factor"]])
    rows = [
        (ground.name, f"{takeoff:g}", f"{landing:g}")
        for ground, (takeoff, landing) in zip(GROUNDS, pairs, strict=False)  # the last pair stands for unknown ground
        if (takeoff, landing) != (1.0, 1.0)
    ]
    if not rows:
        return "No published surface corrections: the physics of the surface governs."
    said = "Published surface corrections (1 for all other ground: there the physics governs):"
    return f"{said}\n\n{table(('Ground', 'Take-off', 'Landing'), rows)}"


def _ground_table() -> str:
    rows = [(ground.name, figure(ground.rolling, ""), figure(ground.braking, ""), ground.source) for ground in GROUNDS]
    return table(("Ground", "Rolling", "Braking", "Source"), rows)


def _usual_rules() -> dict[str, str]:
    """The value of each rule where a set says nothing: read from a set that does."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "empty.toml"
        path.write_text('title = "-"\nissue = "-"\ncitation = "-"\nstatus = "own"\n', encoding="utf-8")
        rules = load_rules(str(path))
    return {
        item.key: str(rules.values[item.key]).lower() if item.kind == "flag" else _rule_value(rules, item)
        for item in RULES
        if item.kind != "range"
    }


def _entries_table(entries: tuple[prose.Entry, ...], items: Sequence[Input], usual: dict[str, str]) -> str:
    known = {item.key: item for item in items}
    rows = [
        (
            code(f"[{entry.part}]") if entry.part else "",
            code(entry.name),
            entry.takes or _taken_by(known[entry.key]),
            entry.usual or usual.get(entry.key, "*needed*"),
            entry.meaning or f"{known[entry.key].label}. {known[entry.key].help}".strip(" ."),
        )
        for entry in entries
    ]
    return table(("Part", "Entry", "Takes", "Usual", "Meaning"), rows)


def _taken_by(item: Input) -> str:
    return "true or false" if item.kind == "flag" else item.unit or "number"


def _listed(words: Iterable[str]) -> str:
    return ", ".join(code(word) for word in words)


def card_page() -> str:
    """docs/aircraft-card.md: the entries of a card, how to make one, and how far to trust it."""
    usual = {entry.key: TYPICAL[entry.part, entry.name] for entry in prose.CARD_ENTRIES
             if (entry.part, entry.name) in TYPICAL}  # fmt: skip
    return _joined(
        "# The aircraft card",
        f"> {CAUTION}",
        MADE,
        folded(prose.CARD_INTRO.format(_listed(shipped_cards()))),
        "## A card from a manual in fifteen minutes",
        *_walk(),
        "## What matters",
        prose.CARD_ADVICE,
        "## Book first",
        prose.BOOK_FIRST,
        folded(prose.BOOK_FIRST_MORE.format(verdict.BEYOND, verdict.NO_FIGURE, _beyond_column())),
        "## The manual's own corrections",
        prose.CORRECTIONS,
        "## Tables in files",
        *_grid_files(),
        "## Flaps",
        prose.FLAPS.format(figure(LIFT_CREDIT, "%"), WING_SHARE, figure(FULL_CHORD, "%"), TYPICAL_FLAPS),
        _flap_kinds(),
        "## Calibration",
        folded(prose.CALIBRATION.format(
            THRUSTS, QUALITIES, TECHNIQUES, BRAKING, tell=figure(MISFIT_TOLD, "%"), refuse=figure(1.0 - SHORTEST, "%")
        )),
        *(part for name in shipped_cards() for part in _calibration(load_card(name))),
        "## How far to trust it",
        prose.TRUST,
        "## All entries",
        prose.CARD_ENTRIES_INTRO,
        _entries_table(prose.CARD_ENTRIES, (*CARD, *CONSTANT_SPEED), usual),
    )


def _walk() -> list[str]:
    """The walk from an invented manual to a filled workbook; what the program says is what it says now."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "my-card.toml"
        path.write_text(prose.EXAMPLE_CARD.lstrip(), encoding="utf-8")
        card = load_card(str(path))
    takeoff, landing = (card.tables[side].printed["distance"][0] for side in ("takeoff", "landing"))
    rounding = ROUNDED_BY / 2.0 / np.nanmin(card.tables["landing"].printed["roll"])
    return [
        folded(prose.WALK_INTRO.format(card.name)),
        prose.WALK_PAGES,
        prose.WALK_TAKEOFF,
        _manual_page(card, "takeoff"),
        prose.WALK_LANDING,
        _manual_page(card, "landing"),
        prose.WALK_TYPE,
        block("toml", prose.EXAMPLE_CARD),
        prose.WALK_REPORT,
        block("sh", prose.REPORT_COMMAND),
        block("text", "\n...\n\n".join(_parts_of_report(report(card)))),
        prose.WALK_READ.format(100.0 * rounding),
        prose.WALK_FILL,
        block("csv", prose.EXAMPLE_LIST),
        block("sh", prose.EXAMPLE_COMMAND),
        folded(prose.WALK_PROOF.format(takeoff=takeoff[0, 1], landing=landing[0, 1])),
    ]


def _parts_of_report(lines: list[str]) -> list[str]:
    """The parts of a card's report that a reader looks at first, the differences without the single figures."""
    parts = {part.partition("\n")[0]: part for part in "\n".join(lines).split("\n\n")}
    shown = [part for heading, part in parts.items() if heading.startswith(REPORT_SHOWN)]
    return ["\n".join(part.splitlines()[:SUMMARY_LINES]) + "\n" for part in shown]


def block(kind: str, text: str) -> str:
    """A text as a block of code.

    >>> print(block("sh", "ls"))
    ```sh
    ls
    ```
    """
    return f"```{kind}\n{text.strip()}\n```"


def _manual_page(card: Card, side: str) -> str:
    """The first page of a side as a manual prints it."""
    tables = card.tables[side]
    pairs = zip(tables.printed["roll"][0], tables.printed["distance"][0], tables.altitudes, strict=True)
    rows = [(figure(altitude, "ft"), *(f"{roll:.0f} / {whole:.0f}" if np.isfinite(roll + whole) else "-"
                                       for roll, whole in zip(rolls, wholes, strict=True)))
            for rolls, wholes, altitude in pairs]  # fmt: skip
    return table(("Pressure altitude", *(figure(value, "°C") for value in tables.temperatures)), rows)


def _grid_files() -> list[str]:
    """How the two shapes of a grid look in a file: the beginnings of two that are shipped."""
    parts: list[str] = []
    for words, name in ((prose.GRID_FILES, "high-mule-climb.csv"), (prose.GRID_PAIRS, "high-mule-takeoff-2800.csv")):
        with (files("stripcheck") / "cards" / name).open(encoding="utf-8") as file:
            rows = list(csv.reader(file))
        piece = "\n".join(",".join(f'"{cell}"' if "," in cell else cell for cell in row[:5]) for row in rows[:5])
        parts += [folded(words.format(f"the corner of {code(name)}")), block("csv", piece)]
    return parts


def _beyond_column() -> str:
    return build_chain(PROPELLERS[0], tables=frozenset({"takeoff"})).by_key["takeoff_beyond_temperature"].label


def _flap_kinds() -> str:
    rows = [(name, f"{kind.lift:g}" + (" times the extended chord" if name == "Fowler" else ""),
             figure(kind.landing_deflection, "°"), f"{kind.drag:g}") for name, kind in FLAP_KINDS.items()]  # fmt: skip
    return table(("Kind", "Lift of the section", "At", "Drag factor"), rows)


def _calibration(card: Card) -> list[str]:
    labels = {item.key: item for item in (*CARD, *FIXED_PITCH, *CONSTANT_SPEED)}
    fitted = [(labels[key].label, f"{from_si(value, labels[key].unit):,.4g} {labels[key].unit}".strip(),
               known if isinstance(known, str) else _known_to(known)) for key, value, known in card.fit.fitted]  # fmt: skip
    kinds: dict[str, list[float]] = {}
    for label, book, model in card.fit.residuals:
        kinds.setdefault(re.sub(r" \d+:", ":", label), []).append(model / book - 1.0)
    rows = [(kind, str(len(off)), _per_cent(np.sqrt(np.mean(np.square(off)))).lstrip("+"), _per_cent(max(off, key=abs)))
            for kind, off in kinds.items()]  # fmt: skip
    return [
        f"### {card.name}",
        card.note,
        table(("Coefficient", "Value", "Known to"), fitted),
        table(("The card against the manual", "Figures", "Typical difference (rms)", "Greatest"), rows),
    ]


def _known_to(error: float) -> str:
    """A relative standard error in words.

    >>> _known_to(0.034), _known_to(0.0004)
    ('3 %', 'under 1 %')
    """
    return "under 1 %" if error < 0.01 else f"{100.0 * error:.0f} %"


def _per_cent(share: float) -> str:
    return f"{round(100.0 * share, 1) + 0.0:+.1f} %"  # + 0.0 takes the sign from a zero, which rounding alone decides


def _refused() -> list[str]:
    megabytes = {
        "book": safe_limits.MAX_BOOK_FILE, "inflated": safe_limits.MAX_INFLATED, "part": safe_limits.MAX_PART,
        "shared": safe_limits.MAX_SHARED_TEXT, "xls": safe_limits.MAX_XLS_FILE, "text": safe_limits.MAX_TEXT_FILE,
        "toml": MAX_FILE,
    }  # fmt: skip
    counts = {
        "cells": safe_limits.MAX_CELLS, "parts": safe_limits.MAX_PARTS, "ratio": safe_limits.MAX_RATIO,
        "line": safe_limits.MAX_LINE, "list_columns": safe_limits.MAX_LIST_COLUMNS, "cell": safe_limits.MAX_CELL_TEXT,
    }  # fmt: skip
    told = counts | {key: size / 1e6 for key, size in megabytes.items()}
    return [line.format(**told) for line in prose.REFUSED]


def lists_page() -> str:
    """docs/lists.md: columns, surface words, what is left out, faults and doubts."""
    return _joined(
        "# Runway lists",
        f"> {CAUTION}",
        MADE,
        prose.LISTS_INTRO,
        "## Columns",
        prose.COLUMNS_INTRO,
        table(("It tells", "Plain number in", "Comes", "Header words"), [_column_row(column) for column in COLUMNS]),
        "## Which way",
        prose.WHICH_WAY,
        "## Surface words",
        folded(prose.SURFACE_RULE.format(", ".join(surface_words.RANK))),
        _surface_table(),
        folded(prose.SURFACE_REST.format(_condition_words(), ", ".join(sorted(surface_words._PLAIN_WORDS)))),
        "## What is left out",
        prose.LEFT_OUT_INTRO,
        table(("Kind", "When"), prose.LEFT_OUT),
        "## Faults",
        prose.FAULTS_INTRO,
        "\n".join(f"- {line}" for line in prose.CONTRADICTIONS),
        "A number outside of these limits is a fault too:",
        "\n".join(f"- {limits.sentence}" for limits in LIMITS.values()),
        "## Doubts",
        prose.DOUBTS,
        "## Files",
        prose.FILES,
        "## Hostile files",
        prose.HOSTILE_FILES,
        "\n".join(f"- {line}" for line in _refused()),
        prose.LARGEST,
    )


def _column_row(column: Column) -> tuple[str, str, str, str]:
    unit = KINDS[column.kind][0] if column.kind in KINDS else column.kind
    unit = "hPa or inHg" if column.kind == "pressure" else unit
    headers = ", ".join(word for word in column.words if word)
    return prose.COLUMN_MEANINGS[column.key], unit, prose.PLACES[column.scope], headers


def _surface_table() -> str:
    meanings = {
        surface_words.NO_FIGURES: "no figures: not assessed",
        surface_words.TREATED: "dirt; with gravel or sand, that one",
        "water": "left out",
        "helipad": "left out",
    }
    rows = [
        (meanings.get(word, word), ", ".join(spellings.split())) for word, spellings in surface_words._WORDS.items()
    ]
    return table(("Counts as", "Words"), rows)


def _condition_words() -> str:
    by_condition: dict[str, list[str]] = {}
    for word, condition in surface_words._CONDITIONS.items():
        by_condition.setdefault(condition, []).append(word)
    return "; ".join(f"*{condition}* for {', '.join(words)}" for condition, words in by_condition.items())


def functions_page() -> str:
    """docs/functions.md: every function of the spreadsheet doors, by category, each with an example and its answer."""
    by_category: dict[str, list[Function]] = {}
    for function in FUNCTIONS:
        by_category.setdefault(function.category, []).append(function)
    return _joined(
        "# Functions for the sheet",
        f"> {CAUTION}",
        MADE,
        folded(prose.FUNCTIONS_INTRO.format(EMPTY, NO_REACH, TABLES)),
        *(part for category, functions in by_category.items() for part in _functions_table(category, functions)),
    )


def _functions_table(category: str, functions: Sequence[Function]) -> list[str]:
    rows = [
        (code(function.full_name), "; ".join(map(_argument, function.arguments)),
         "text" if function.unit is None else function.unit or "number", function.help, code(formula_of(function)),
         _answer(function))
        for function in functions
    ]  # fmt: skip
    return [f"## {category}", table(("Function", "Arguments", "Result", "Meaning", "Example", "Answer"), rows)]


def _argument(argument: Argument) -> str:
    """An argument with its unit, and what stands for it where it is left out."""
    unit = KINDS[argument.kind][0] if argument.kind in KINDS else ""
    unit = "hPa or inHg" if argument.kind == "pressure" else unit
    name = argument.name.lower() if argument.name[1:].islower() else argument.name
    usual = "" if argument.required else f" (*{f'{argument.default:g}' if _is_float(argument.default) else argument.default}*)"
    return f"{name} [{unit}]{usual}" if unit else f"{name}{usual}"


def _is_float(value: object) -> TypeGuard[float]:
    return isinstance(value, float)


def _answer(function: Function) -> str:
    found = call(function, *function.example)
    return found if isinstance(found, str) else f"{found:,.6g} {function.unit}".strip()


def _joined(*parts: str) -> str:
    return "\n\n".join(part.strip() for part in parts if part.strip()) + "\n"


PAGES: dict[str, Callable[[], str]] = {
    "method.md": method_page,
    "rules.md": rules_page,
    "lists.md": lists_page,
    "aircraft-card.md": card_page,
    "functions.md": functions_page,
}


def write_pages(folder: Path) -> None:
    """Write every page into a folder that exists."""
    for name, page in PAGES.items():
        (folder / name).write_text(page(), encoding="utf-8")


if __name__ == "__main__":
    write_pages(Path(sys.argv[1] if len(sys.argv) > 1 else "docs"))
