"""An audit of a runway list: what makes a verdict untrustworthy, row by row, with a suggestion and nothing changed.

What the reader of lists finds is taken from there; the checks that only an audit makes are in the modules beside this one.
Runways that are left out (closed, helicopter pads, water) get no verdict and no finding.
"""

from __future__ import annotations

import datetime
from collections import Counter, defaultdict
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from stripcheck.errors import InputError
from stripcheck.register.audit_case import HEADER, Case, Hit
from stripcheck.register.audit_duplicates import duplicate_hits
from stripcheck.register.audit_kinds import BAD_VALUE, DOUBTFUL, KINDS, SEVERITIES, UNUSABLE, Kind
from stripcheck.register.audit_numbers import number_hits
from stripcheck.register.audit_rows import row_hits
from stripcheck.register.columns import Found
from stripcheck.register.read_table import Table, read_table
from stripcheck.register.reader import Reading, read_runways

SURVEY_AGE = 5.0  # [years] usual limit for the age of a survey; common practice, no source
OLDEST_LIMIT = 100.0  # [years]

Place = tuple[int, int, str]  # row and column in the file (1 = first; column 0 = the whole row), and header


@dataclass(frozen=True)
class Finding:
    """One thing found: ``row`` and ``place`` (column, 1 = first, 0 = the whole row) in the file, strip, runway, header of the
    column, kind, what is wrong, and a suggested correction ("" where none can be given)."""

    row: int
    place: int
    strip: str
    runway: str
    column: str
    kind: Kind
    what: str
    fix: str


@dataclass(frozen=True)
class Audit:
    """The findings about a list or a filled workbook, the worst severity first, then by row.

    ``table``: the list as read; ``rows_read``, ``left_out``: runways; ``sheet``: of a workbook, "" for a text file.
    """

    source: Path
    sheet: str
    table: Table
    rows_read: int
    left_out: int
    findings: list[Finding]

    @property
    def counts(self) -> list[tuple[Kind, int]]:
        """Kinds that were found, with their numbers, the worst severity first, then the most frequent."""
        found = Counter(finding.kind for finding in self.findings)
        kinds = sorted(found, key=lambda kind: (SEVERITIES.index(kind.severity), -found[kind], KINDS.index(kind)))
        return [(kind, found[kind]) for kind in kinds]

    @property
    def worst_rows(self) -> list[list[Finding]]:
        """The findings of each row that has any, the worst row first; what is only missing counts less than what is wrong."""
        rows: dict[int, list[Finding]] = defaultdict(list)
        for finding in self.findings:
            rows[finding.row].append(finding)
        return sorted(rows.values(), key=_badness)


def audit_list(
    path: str | Path,
    *,
    airports: str | Path | None = None,
    sheet: str | None = None,
    survey_age: float = SURVEY_AGE,
    today: datetime.date | None = None,
) -> Audit:
    """Find what makes verdicts from a runway list untrustworthy.

    ``path``, ``airports``, ``sheet``: as in ``read_list``. ``survey_age`` [years]: limit for the age of a survey.
    ``today``: date from which it counts, the present one if not given. Raises InputError for a file that can't be used and
    for a limit that is none.

    >>> import tempfile
    >>> folder = tempfile.TemporaryDirectory()
    >>> file = Path(folder.name) / "strips.csv"
    >>> _ = file.write_text("Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\\nCreek,09/27,620,turf,,2\\n")
    >>> for finding in audit_list(file).findings:
    ...     print(finding.row, finding.kind.severity, finding.kind.name)
    2 unusable elevation missing
    2 worth a look heading from the name only
    """
    check_age(survey_age)
    path = Path(path)
    table = read_table(path, sheet)
    reading = read_runways(table, path, airports)
    findings = find(reading, lambda hit: _place(reading, hit), survey_age, today)
    return Audit(path, table.sheet, table, reading.runways.count, _left_out(reading), findings)


def check_age(survey_age: float) -> None:
    """Raise InputError unless a limit [years] for the age of a survey makes sense."""
    if not 0.0 < survey_age <= OLDEST_LIMIT:
        raise InputError(f"a survey age of {survey_age:g} years: more than 0 and at most {OLDEST_LIMIT:g} would be right")


def find(
    reading: Reading,
    place: Callable[[Hit], Place],
    survey_age: float,
    today: datetime.date | None,
) -> list[Finding]:
    """All findings about runways that are kept, in order. ``place``: tells where a hit stands in the file."""
    case = Case(reading)
    kept = {HEADER, *case.kept}
    strips, runways = reading.texts["strip"][0], reading.texts["runway"][0]
    hits = [*row_hits(case, survey_age, today or datetime.date.today()), *number_hits(case), *duplicate_hits(case)]
    unusable = {(hit.at, hit.key) for hit in hits if hit.kind is BAD_VALUE}
    findings = []
    for hit in dict.fromkeys(hits):  # what is told of a column for both ends comes twice
        is_there = hit.kind.name.endswith("missing") and (hit.at, hit.key) in unusable  # there, but no good, as is told
        if hit.at in kept and not is_there:
            row, column, header = place(hit)
            named = ("", "") if hit.at == HEADER else (strips[hit.at], runways[hit.at])
            findings.append(Finding(row, column, *named, header, hit.kind, hit.what, hit.fix))
    return in_order(findings)


def in_order(findings: list[Finding]) -> list[Finding]:
    """Findings with the worst severity first, then by row."""
    return sorted(findings, key=lambda finding: (SEVERITIES.index(finding.kind.severity), finding.row))


def column_of(reading: Reading, hit: Hit) -> Found | None:
    """The column of the list that a hit is about, None where it is a matter of the whole row."""
    found = reading.runways.found
    ends = ((hit.key, hit.end), (hit.key, 0), (hit.key, 1), (hit.key, 2))
    return next((found[end] for end in ends if end in found), None)


def _place(reading: Reading, hit: Hit) -> Place:
    """Where a hit stands in a list; a value that the list has no column for is a matter of the whole row."""
    table = reading.runways.table
    if hit.at == HEADER:
        return table.header_row, table.places[table.headers.index(hit.key)] if hit.key in table.headers else 0, hit.key
    item = column_of(reading, hit)
    row = table.row_numbers[hit.at]
    return (row, table.places[item.position], item.header) if item else (row, 0, "")


def _left_out(reading: Reading) -> int:
    return sum(reason is not None for reason in reading.reasons)


def _badness(findings: list[Finding]) -> tuple[int, ...]:
    wrong = Counter(finding.kind.severity for finding in findings if not finding.kind.name.endswith("missing"))
    return -wrong[UNUSABLE], -wrong[DOUBTFUL], -len(findings), findings[0].row
