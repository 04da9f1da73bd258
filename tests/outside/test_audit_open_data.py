"""An audit of the whole open data set: thousands of real gaps and mistakes in seconds, and the table that docs show."""

from __future__ import annotations

import re
import time
from pathlib import Path

import pytest

from stripcheck.register import audit_kinds as kinds
from stripcheck.register.audit import Audit, audit_list
from tests import open_data

PAGE = Path(__file__).parents[2] / "docs" / "register.md"
SECONDS = 60.0  # it takes about 5 on one core; the machine may be busy


@pytest.fixture(scope="module")
def world(tmp_path_factory: pytest.TempPathFactory) -> Audit:
    runways = open_data.unpack(tmp_path_factory.mktemp("open"))
    start = time.perf_counter()
    found = audit_list(runways)
    assert time.perf_counter() - start < SECONDS
    return found


def test_thousands_of_mistakes_and_gaps(world: Audit) -> None:
    assert world.rows_read == open_data.RUNWAYS
    gaps = {kind for kind in kinds.KINDS if kind.name.endswith("missing")} | {kinds.HEADING_FROM_NAME}
    assert sum(count for kind, count in world.counts if kind in gaps) > 40_000
    assert sum(count for kind, count in world.counts if kind not in gaps) > 4_000


def test_the_table_in_the_docs_is_the_one_that_is_found(world: Audit) -> None:
    shown = re.findall(r"^\| ([a-z ]+) \| ([^|]+) \| ([\d,]+) \| ([\d,]+) \|$", PAGE.read_text(encoding="utf-8"), re.MULTILINE)
    found = [
        (kind.severity, kind.name, f"{count:,}", f"{len({item.row for item in world.findings if item.kind is kind}):,}")
        for kind, count in world.counts
    ]
    assert shown == found


@pytest.mark.parametrize(
    ("kind", "row", "what"),
    [
        # looked up in the file by hand
        (kinds.LENGTH_LONGER, "YBDG", "5,249 ft, but by their coordinates the ends lie 3,750 ft apart"),
        (kinds.FAR_FROM_FIELD, "US-1113", "10,461 km"),  # 94.04 east for 94.04 west
        (kinds.ABOVE_FIELD, "YJAK", "end 1 is at 347 ft, the field at 106 ft"),  # 106 m
        (kinds.HEADING_AGAINST_ENDS, "LKHS", "058°, but the bearing between the coordinates is 237°"),
        (kinds.TWICE, "LFDH", "the same strip and runway, with the same length"),
        (kinds.TWO_NAMES, "SVMZ", "SVMZ 07/25, has its ends in the same places"),
        (kinds.TWO_IDENTIFIERS, "FBMU", "AU-0115 05/23"),
        (kinds.NEARLY_TWICE, "USW", "14P 10/28"),
        (kinds.ENDS_TOO_STEEP, "UATE", "more than 30 %"),
    ],
)
def test_mistakes_that_are_known(world: Audit, kind: kinds.Kind, row: str, what: str) -> None:
    assert any(what in finding.what for finding in world.findings if finding.kind is kind and finding.strip == row)
