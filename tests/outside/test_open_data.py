"""The main job on the whole open data set: real gaps, real mistakes, 599 spellings of surface."""

import re
from pathlib import Path

import pytest
from python_calamine import CalamineWorkbook

from stripcheck.cli import main
from stripcheck.sheet.summary import BOTH
from stripcheck.verdict import VERDICTS
from tests import open_data
from tests.sheet.recalculated import differences

VERIFICATION = Path(__file__).parents[2] / "docs" / "verification.md"


@pytest.fixture(scope="module")
def filled(tmp_path_factory):
    folder = tmp_path_factory.mktemp("open")
    output = folder / "open.xlsx"
    assert main([*open_data.arguments(open_data.unpack(folder), output), "--quiet"]) == 0
    return output


def test_every_runway_is_in_a_verdict_or_left_out(filled):
    """Counted in the finished file, not in the program that made it."""
    book = CalamineWorkbook.from_path(filled)
    rows = book.get_sheet_by_name("Summary").to_python(skip_empty_area=False)
    header = rows[13]
    column = {title: header.index(title) for title in ("In and out", "Land: verdict", "Take off: verdict")}
    strips = [row for row in rows[14:] if row[column["Land: verdict"]]]
    left_out = [row for row in book.get_sheet_by_name("Left out").to_python(skip_empty_area=False)[4:] if row[3] == "left out"]
    assert len(strips) + len(left_out) == open_data.RUNWAYS

    text = VERIFICATION.read_text(encoding="utf-8")
    for title, words in (("Land: verdict", VERDICTS), ("Take off: verdict", VERDICTS), ("In and out", BOTH)):
        found = [row[column[title]] for row in strips]
        counts = {word: found.count(word) for word in words}
        assert sum(counts.values()) == len(strips)
        for word, count in counts.items():
            assert re.search(rf"^\| {re.escape(title)} \| {re.escape(word)} \| {count:,} \|$", text, re.MULTILINE), (
                f"docs/verification.md does not say: | {title} | {word} | {count:,} |"
            )
    assert f"| Left out | | {len(left_out):,} |" in text


def test_a_sample_recalculates_to_the_values_it_was_written_with(office, tmp_path):
    """Every formula of 300 real runways, drawn with a fixed step, in LibreOffice."""
    runways = open_data.unpack(tmp_path)
    lines = runways.read_text(encoding="utf-8").splitlines()
    runways.write_text("\n".join([lines[0], *lines[1 :: len(lines) // 300]]), encoding="utf-8")
    output = tmp_path / "sample.xlsx"
    command = ["fill", str(runways), "--card", "high-mule", "--rules", "au-small", "--temp", "31", "--temp-at", "900",
               "--wind", "240/12", "--assume-slope", "2", "--detail", "short", "-o", str(output), "--quiet"]  # fmt: skip
    assert main(command) == 0
    book = office.open(output)
    book.recalculate()
    count, found = differences(book, output)
    book.close()
    assert found == []
    assert count > 12_000
