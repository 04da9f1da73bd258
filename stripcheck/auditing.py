"""What ``stripcheck audit`` does: audit a list or a filled workbook, tell the user, and write .csv and .xlsx."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from stripcheck.caution import CAUTION
from stripcheck.errors import InputError
from stripcheck.register.audit import SURVEY_AGE, Audit, Finding, audit_list
from stripcheck.register.values import harmless
from stripcheck.safe_file import refuse_if_open, whole_or_not_at_all
from stripcheck.sheet.audit_book import audit_book, is_filled
from stripcheck.sheet.audit_sheet import TITLES, cell_name, write_sheets

WORST = 12  # rows that the terminal shows: about a screen
MOST_OF_A_ROW = 6  # findings of one row that it shows


@dataclass(frozen=True)
class AuditRequest:
    """What to audit, and where the findings go: a list or filled workbook, files to write, and options."""

    list: Path
    airports: str | None = None
    sheet: str | None = None
    survey_age: float = SURVEY_AGE
    csv: Path | None = None
    xlsx: Path | None = None
    force: bool = False


def run_audit(request: AuditRequest) -> list[str]:
    """Do the job and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    outputs = [path for path in (request.csv, request.xlsx) if path is not None]
    for path, ending in ((request.csv, ".csv"), (request.xlsx, ".xlsx")):
        if path is not None:
            _check_output(path, ending, request)
    if is_filled(request.list, request.sheet):
        if request.airports is not None:
            raise InputError(f"{request.list}: this is a filled workbook, which needs no airports file; leave --airports out")
        audit = audit_book(request.list, survey_age=request.survey_age)
    else:
        audit = audit_list(request.list, airports=request.airports, sheet=request.sheet, survey_age=request.survey_age)
    if request.csv is not None:
        write_findings(audit, request.csv)
    if request.xlsx is not None:
        write_sheets(audit, request.xlsx)
    written = [f"All findings: {' and '.join(map(str, outputs))}"] if outputs else []
    return [*told(audit), "", *(written or ["All findings: add --csv OUT.csv or --xlsx OUT.xlsx"])]


def _check_output(path: Path, ending: str, request: AuditRequest) -> None:
    if path.suffix.lower() != ending:
        raise InputError(f"{path}: the name of this file must end in {ending}")
    for given in (request.list, Path(request.airports or request.list)):
        if path.exists() and given.exists() and path.samefile(given):
            raise InputError(f"{path}: this is a file that is read; choose another name for what is written")
    if path.exists() and not request.force:
        raise InputError(f"{path}: this file exists; choose another name, or add --force to replace it")
    refuse_if_open(path)
    if not path.resolve().parent.is_dir():
        raise InputError(f"{path}: the folder does not exist")


def told(audit: Audit) -> list[str]:
    """The audit as a page for the terminal: a table of kinds and counts, and the worst rows."""
    rows = audit.worst_rows
    where = f'{audit.source.name} sheet "{audit.sheet}"' if audit.sheet else audit.source.name
    lines = [f"{where}: {audit.rows_read:,} runways read, {audit.left_out:,} left out (closed, helicopter pads, water)"]
    if not rows:
        return [*lines, "Nothing found. That is no proof that the figures are right."]
    lines += [f"{len(audit.findings):,} findings in {len(rows):,} rows", "", *_table(audit)]
    shown = rows[:WORST]
    lines += ["", f"The worst {len(shown)} of {len(rows):,} rows:" if len(rows) > WORST else "Row by row, the worst first:"]
    return [*lines, *(line for findings in shown for line in _row(findings))]


def _table(audit: Audit) -> Iterator[str]:
    width = max(len(kind.name) for kind, _ in audit.counts)
    yield f"{'Severity':12}  {'Kind':{width}}  {'Findings':>8}"
    for kind, count in audit.counts:
        yield f"{kind.severity:12}  {kind.name:{width}}  {count:8,}"


def _row(findings: list[Finding]) -> Iterator[str]:
    first = findings[0]
    yield f"row {first.row}  {first.strip} {first.runway}".rstrip()
    for finding in findings[:MOST_OF_A_ROW]:
        column = f"{finding.column}: " if finding.column else ""
        fix = f" -> {finding.fix}" if finding.fix else ""
        yield f"  {finding.kind.severity}: {column}{finding.what}{fix}"
    if len(findings) > MOST_OF_A_ROW:
        yield f"  and {len(findings) - MOST_OF_A_ROW} more"


def write_findings(audit: Audit, path: Path) -> None:
    """All findings as a table, whole or not at all. Text that a spreadsheet would take for a formula gets an apostrophe."""
    with whole_or_not_at_all(path) as file:
        text = io.TextIOWrapper(file, encoding="utf-8-sig", newline="")
        writer = csv.writer(text)
        writer.writerow([*TITLES, "Caution"])
        for finding in audit.findings:
            texts = (finding.strip, finding.runway, finding.column, cell_name(finding), finding.kind.severity,
                     finding.kind.name, finding.what, finding.fix)  # fmt: skip
            writer.writerow([finding.row, *map(harmless, texts), CAUTION])
        text.detach()  # which empties the buffer; the file itself is closed by who opened it
