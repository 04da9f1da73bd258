"""A new list beside a register: which runway is which, what counts as a change, and what is left aside."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck.register.merge import CHANGED, GONE, NEW, Change, Merge, compare
from stripcheck.register.own_words import Quantity, in_unit, same_quantity
from stripcheck.register.read_table import read_table
from stripcheck.register.reader import read_runways

Compare = Callable[[str, str], Merge]

FEET, METRES = (0.3048, 0.0), (1.0, 0.0)


@pytest.fixture
def merge(tmp_path: Path) -> Compare:
    """Compares two lists given as texts."""

    def write_and_compare(register: str, other: str) -> Merge:
        readings = []
        for name, text in (("register.csv", register), ("new.csv", other)):
            (tmp_path / name).write_text(text)
            readings.append(read_runways(read_table(tmp_path / name), tmp_path / name))
        return compare(*readings)

    return write_and_compare


def told(merge: Merge) -> list[tuple[str, str, str, str, str]]:
    return [(change.kind, change.strip, change.column, change.old, change.new) for change in merge.changes]


def only(merge: Merge) -> Change:
    assert len(merge.changes) == 1, told(merge)
    return merge.changes[0]


HEAD = "Strip,Name,Runway,Length [m],Elevation end 1 [ft],Elevation end 2 [ft],Slope [%],Surface\n"
OTTER = "XOTB,Otter Bend,09/27,701,1500,1520,0.9,turf\n"


# --- what counts as a change


def test_the_same_list_changes_nothing(merge: Compare) -> None:
    found = merge(HEAD + OTTER, HEAD + OTTER)
    assert not found.changes and not found.unclear and not found.kept and not found.lost
    assert found.matched == {"identifier": 1}


def test_units_and_spellings_are_no_change(merge: Compare) -> None:
    found = merge(
        HEAD + OTTER,
        "RWY;Ident;Aerodrome name;Length (ft);Elevation end 1 (m);Elevation end 2 (m);Gradient;Sfc\n"
        "9/27;xotb;OTTER  BEND;2300;457;463.3;0.9 %;Grass\n",
    )
    assert told(found) == []


@pytest.mark.parametrize(
    ("column", "cell", "new", "value"),
    [
        ("Length [m]", "702", "702", 702.0),
        ("Length (ft)", "2303", "702", 702.0),  # 701.95 m
        ("Length", "0.7 km", "700", 700.0),
        ("Elevation end 1 (m)", "460", "1509", 1509.0),
        ("Slope", "-0.9", "-0.9", -0.9),
        ("Slope", "1.2 %", "1.2", 1.2),
    ],
)
def test_a_number_that_differs(merge: Compare, column: str, cell: str, new: str, value: float) -> None:
    change = only(merge(HEAD + OTTER, f"Strip,Name,Runway,{column},Usable length\nXOTB,Otter Bend,09/27,{cell},\n"))
    assert (change.kind, change.new, change.hindered) == (CHANGED, new, "")
    assert change.column.split(" [")[0] == column.split(" [")[0].split(" (")[0]
    assert [write.value for write in change.writes] == [value]


def test_a_number_keeps_the_form_of_its_cell(merge: Compare) -> None:
    head = "Strip,Runway,Length\n"
    found = merge(head + "XOTB,09/27,2300 ft\nXTRN,18/36,700\n", head + "XOTB,09/27,732\nXTRN,18/36,2000 ft\n")
    assert [(change.old, change.new) for change in found.changes] == [("2300 ft", "2402 ft"), ("700", "609.6")]


def test_a_decimal_comma_stays_one(merge: Compare) -> None:
    found = merge("Strip;Runway;Length;Slope\nXOTB;09/27;620;1,5\n", "Strip,Runway,Length,Slope\nXOTB,09/27,620.5,2.5\n")
    assert [change.writes[0].text for change in found.changes] == ["620,5", "2,5"]


def test_blanks_delete_nothing(merge: Compare) -> None:
    found = merge(HEAD + OTTER, HEAD + "XOTB,,09/27,701,n/a,,-,\n")
    assert not found.changes
    assert found.kept == {"Name": 1, "Elevation end 1 [ft]": 1, "Elevation end 2 [ft]": 1, "Slope [%]": 1, "Surface": 1}


def test_nothing_said_in_two_ways_is_no_change(merge: Compare) -> None:
    head = "Strip,Runway,Length,Closed,Displaced threshold end 1,Obstacle height end 1,Obstacle distance end 1,Land on\n"
    assert told(merge(head + "XOTB,09/27,700,,,,,\n", head + "XOTB,09/27,700,no,0,0,,both\n")) == []
    shown = told(merge(head + "XOTB,09/27,700,yes,60,50,300,09\n", head + "XOTB,09/27,700,no,0,0,,both\n"))
    assert [(column, new) for *_, column, _, new in shown] == [
        ("Land on", "both"), ("Closed", "no"), ("Displaced threshold end 1", "0"), ("Obstacle height end 1", "0"),
    ]  # fmt: skip


def test_a_surface_with_another_meaning(merge: Compare) -> None:
    head = "Strip,Runway,Length,Surface,Condition\n"
    change = only(merge(head + "XOTB,09/27,700,Short wet grass,\n", head + "XOTB,09/27,700,grass,dry\n"))
    # the old spelling would keep it wet
    assert (change.column, change.old, change.new) == ("Surface, Condition", "Short wet grass, (blank)", "grass, dry")
    change = only(merge(head + "XOTB,09/27,700,Grass,\n", head + "XOTB,09/27,700,soft turf,\n"))
    assert (change.column, change.new) == ("Condition", "soft")
    change = only(merge(head + "XOTB,09/27,700,Grass,\n", head + "XOTB,09/27,700,clinker,\n"))
    assert (change.column, change.new) == ("Surface", "clinker")
    # a register that keeps to the words of the table stays with them
    change = only(merge(head + "XOTB,09/27,700,grass,\n", head + "XOTB,09/27,700,GVL,\n"))
    assert change.new == "gravel"


def test_a_condition_without_a_column(merge: Compare) -> None:
    head = "Strip,Runway,Length,Surface\n"
    change = only(merge(head + "XOTB,09/27,700,Turf\n", head + "XOTB,09/27,700,wet grass\n"))
    assert (change.column, change.new) == ("Surface", "wet grass")


def test_notes_of_the_register_are_kept_unless_marked(merge: Compare) -> None:
    head = "Strip,Runway,Length,Notes\n"
    found = merge(head + "XOTB,09/27,700,Ask Ada\nXTRN,18/36,600,\n", head + "XOTB,09/27,700,New\nXTRN,18/36,600,Gate\n")
    assert [(change.new, change.by_hand) for change in found.changes] == [("New", True), ("Gate", False)]


# --- which way round


BOTH_ENDS = (
    "Strip,Runway,Heading,Length,Elevation end 1,Elevation end 2,Slope,Slope profile,Displaced threshold end 1,"
    "Displaced threshold end 2,TORA end 1,TORA end 2,Obstacle height end 1,Obstacle distance end 1,"
    "Obstacle height end 2,Obstacle distance end 2,Land on,Leave by,Latitude end 1,Longitude end 1,Latitude end 2,"
    "Longitude end 2\n"
)
ONE_WAY = (
    'XGLN,04/22,48,900,3760,4126,12.4,"0:0, 450:50, 900:111.6",60,0,880,870,30,200,300,150,04,22,47.5,8.1,47.506,8.108\n'
)
TURNED = (
    'XGLN,22/04,228,900,4126,3760,-12.4,"0:0, 450:-61.6, 900:-111.6",0,60,870,880,300,150,30,200,04,22,47.506,8.108,47.5,8.1\n'
)


def test_the_other_end_first_is_no_change(merge: Compare) -> None:
    assert told(merge(BOTH_ENDS + ONE_WAY, BOTH_ENDS + TURNED)) == []


def test_changes_told_from_the_other_end(merge: Compare) -> None:
    other = TURNED.replace("-12.4", "-13").replace(",228,", ",230,").replace("3760", "3750").replace(",300,150,", ",330,160,")
    other = other.replace("04,22,47", "22,04,47")
    assert told(merge(BOTH_ENDS + ONE_WAY, BOTH_ENDS + other)) == [
        (CHANGED, "XGLN", "Land on, Leave by", "04, 22", "22, 04"),
        (CHANGED, "XGLN", "Slope", "12.4", "13"),
        (CHANGED, "XGLN", "Heading", "48", "50"),
        (CHANGED, "XGLN", "Elevation end 1", "3760", "3750"),
        (CHANGED, "XGLN", "Obstacle height end 2, Obstacle distance end 2", "300, 150", "330, 160"),
    ]


def test_where_the_ends_cant_be_told_nothing_about_them_is_compared(merge: Compare) -> None:
    head = "Strip,Length,Slope,Elevation end 1\n"
    found = merge(head + "XOTB,700,2,100\n", head + "XOTB,710,-2,140\n")
    assert [change.column for change in found.changes] == ["Length"]
    assert "which end is which can't be told" in found.remarks[0]


# --- what belongs together, what is lost


def test_an_obstacle_changes_whole_or_not_at_all(merge: Compare) -> None:
    head = "Strip,Runway,Length,Obstacle height end 1,Obstacle distance end 1\n"
    change = only(merge(head + "XOTB,09/27,700,60,600\n", head + "XOTB,09/27,700,20,100\n"))
    assert [write.value for write in change.writes] == [20.0, 100.0]
    found = merge(head + "XOTB,09/27,700,60,600\n", head + "XOTB,09/27,700,20,\n")
    assert not found.changes and "half of an obstacle" in found.remarks[0]
    found = merge("Strip,Runway,Length\nXOTB,09/27,700\n", head + "XOTB,09/27,700,20,100\n")
    assert not found.changes and found.lost == {"Obstacle height end 1": 1, "Obstacle distance end 1": 1}


def test_what_cant_be_read_is_told_and_not_merged(merge: Compare) -> None:
    head = "Strip,Runway,Length,Width,Closed,Land on\n"
    found = merge(head + "XOTB,09/27,700,20,no,\n", head + "XOTB,09/27,far,9000,perhaps,14\n")
    assert not found.changes
    assert len(found.remarks) == 4 and all("row 2 of the new list, XOTB 09/27" in text for text in found.remarks)


def test_an_end_that_cant_be_told_from_the_column_for_both(merge: Compare) -> None:
    head = "Strip,Runway,Length,Displaced threshold,Elevation end 1\n"
    found = merge(head + "XOTB,09/27,700,60,100\n", head + "XOTB,09/27,700,800,far\n")  # beyond the other end
    assert not found.changes and len(found.remarks) == 2


def test_a_profile_that_fits_neither_list_is_no_change(merge: Compare) -> None:
    head = "Strip,Runway,Length,Slope profile\n"
    row = 'XOTB,09/27,{},"0:0, 300:3, 620:5"\n'
    assert [change.column for change in merge(head + row.format(900), head + row.format(620)).changes] == ["Length"]


def test_what_is_as_unreadable_in_both_is_not_told(merge: Compare) -> None:
    head = "Strip,Runway,Length\n"
    found = merge(head + "XPAD,H1,24\nXOTB,09/27,far\n", head + "XPAD,H1,24\nXOTB,09/27,26\n")
    assert not found.changes and found.remarks == ['row 3 of the new list, XOTB 09/27: "26" in "Length" can\'t be used']


def test_a_new_runway(merge: Compare) -> None:
    found = merge(HEAD + OTTER, HEAD + OTTER + "XNEW,New Hollow,9,2000 ft,450 m,460 m,,GVL\n")
    change = only(found)
    assert (change.kind, change.strip, change.runway, change.hindered) == (NEW, "XNEW", "09/27", "")
    assert [write.value for write in change.writes] == ["XNEW", "New Hollow", "09/27", 609.6, "GVL", 1476.0, 1509.0]


@pytest.mark.parametrize(
    ("head", "row", "why"),
    [
        ("Displaced threshold end 1", "60", "displaced threshold"),
        ("Closed", "yes", "closed"),
        ("Land on", "09", "land on"),
        ("Obstacle height", "20", "fault"),
        ("TORA", "500", "tora"),
        ("TORA", "700", ""),
        ("Displaced threshold end 1", "0", ""),
        ("Width", "far", "fault"),
        ("Survey date", "2026-01-01", ""),
    ],
)
def test_a_new_runway_that_would_lose_something_is_not_merged(merge: Compare, head: str, row: str, why: str) -> None:
    register = "Strip,Runway,Length\nXOTB,09/27,700\n"
    change = only(merge(register, f"Strip,Runway,Length,{head}\nXOTB,09/27,700,\nXNEW,09/27,700,{row}\n"))
    assert (why in change.hindered) if why else not change.hindered


def test_one_column_for_both_ends(merge: Compare) -> None:
    register = "Strip,Runway,Length,LDA\nXOTB,09/27,700,600\n"
    head = "Strip,Runway,Length,LDA end 1,LDA end 2\n"
    assert only(merge(register, head + "XOTB,09/27,700,500,500\n")).new == "500"
    found = merge(register, head + "XOTB,09/27,700,500,600\n")
    assert not found.changes and "differs by end" in found.remarks[0]


def test_gone_runways_are_marked_never_deleted(merge: Compare) -> None:
    head = "Strip,Runway,Length,Closed\n"
    found = merge(head + "XOTB,09/27,700,\nXTRN,18/36,500,YES\nXHRN,05/23,500,no\n", "Strip,Runway,Length\nXOTB,09/27,700\n")
    assert told(found) == [(GONE, "XHRN", "Closed", "no", "YES")] and found.closed_gone == 1
    change = only(merge("Strip,Runway,Length\nXTRN,18/36,500\nXOTB,09/27,700\n", "Strip,Runway,Length\nXOTB,09/27,700\n"))
    assert not change.writes and "no column Closed" in change.hindered


# --- which is which


def test_a_runway_named_anew(merge: Compare) -> None:
    head = "Strip,Runway,Length,Land on,Leave by\n"
    found = merge(head + "XOTB,09/27,700,09,27\n", head + "XOTB,28/10,700,10,28\n")
    change = only(found)
    assert (change.column, change.new) == ("Runway, Land on, Leave by", "10/28, 10, 28")
    assert found.matched == {"strip": 1}


def test_columns_of_the_ends_go_before_that_of_the_runway(merge: Compare) -> None:
    head = "Strip,Runway,le_ident,he_ident,Length\n"
    change = only(merge(head + "XOTB,10/28,09,27,700\n", "Strip,Runway,Length\nXOTB,10/28,700\n"))
    assert (change.column, change.new) == ("le_ident, he_ident", "10, 28")


def test_a_single_name_is_not_written_for_the_other_end(merge: Compare) -> None:
    head = "Strip,Runway,Heading,Length\n"
    change = only(merge(head + "XOTB,,10,700\n", head + "XOTB,X,192,700\n"))
    assert (change.column, change.new) == ("Heading", "12")


def test_another_runway_of_the_strip_is_new(merge: Compare) -> None:
    found = merge("Strip,Runway,Length,Closed\nXOTB,09/27,700,\n", "Strip,Runway,Length\nXOTB,14/32,700\n")
    assert [change.kind for change in found.changes] == [GONE, NEW]


def test_by_place_and_name(merge: Compare) -> None:
    head = "Strip,Name,Runway,Length,Latitude end 1,Longitude end 1\n"
    found = merge(head + "XOTB,Otter Bend,09/27,700,47.5,8.1\n", head + "ZZOT,Otterbend airstrip,09/27,900,47.51,8.1\n")
    assert found.matched == {"place and name": 1}
    assert [change.column for change in found.changes] == [
        "Strip", "Name", "Length", "Latitude end 1"
    ]  # fmt: skip
    far = merge(head + "XOTB,Otter Bend,09/27,700,47.5,8.1\n", head + "ZZOT,Otterbend,09/27,700,48.5,8.1\n")
    assert not far.matched


def test_by_name_runway_and_length_where_no_place_is_known(merge: Compare) -> None:
    head = "Strip,Name,Runway,Length\n"
    found = merge(head + "XOTB,Otter Bend,09/27,700\n", head + "ZZOT,Otterbend,27/09,2300 ft\n")
    assert found.matched == {"name, runway and length": 1} and found.matched.total() == 1
    assert not merge(head + "XOTB,Otter Bend,09/27,700\n", head + "ZZOT,Otterbend,09/27,900\n").matched


def test_what_may_be_several_is_left_aside(merge: Compare) -> None:
    head = "Strip,Name,Runway,Length,Closed\n"
    found = merge(
        head + "XOTB,Otter Bend,09/27,700,\nXOTC,Otter Bend,09/27,700,\nXHRN,Heron,05/23,500,\nXHRN,Heron,23/05,510,\n",
        head + "ZZOT,Otterbend,09/27,700,\nXHRN,Heron,05/23,500,yes\n",
    )
    assert not found.changes
    assert len(found.unclear) == 2
    assert "more than once in the register" in found.unclear[0] and "more than one may be the same" in found.unclear[1]


def test_one_identifier_far_apart_is_left_aside(merge: Compare) -> None:
    head = "Strip,Runway,Length,Latitude end 1,Longitude end 1,Closed\n"
    found = merge(head + "XOTB,09/27,700,47.5,8.1,\n", head + "XOTB,09/27,700,57.5,8.1,\n")
    assert not found.changes and "the same identifier, but 1,11" in found.unclear[0]


def test_the_fingerprint_knows_other_values_and_not_other_notes_of_the_user(merge: Compare) -> None:
    head = "Strip,Runway,Length,Caretaker\n"
    one, same, other = (
        merge(head + row, head + "XOTB,09/27,700,\n").fingerprint
        for row in ("XOTB,09/27,710,Ada\n", "XOTB,09/27,710,Bram\n", "XOTB,09/27,711,Ada\n")
    )
    assert one == same != other


# --- numbers in two units


@given(st.integers(90, 6000), st.sampled_from((0, 1)))
def test_a_number_converted_and_rounded_is_the_same(whole: int, decimals: int) -> None:
    metres = Quantity(float(whole), METRES, "length")
    feet = Quantity(round(whole / 0.3048, decimals) * 0.3048, FEET, "length")
    assert same_quantity(metres, feet) and same_quantity(feet, metres)


@given(st.decimals(1, 6000, places=2).map(float), st.sampled_from((FEET, METRES)), st.sampled_from((FEET, METRES)))
def test_what_is_written_is_the_same_as_what_was_given(
    number: float, given_in: tuple[float, float], unit: tuple[float, float]
) -> None:
    given_number = Quantity(number * given_in[0], given_in, "length")
    written = Quantity(in_unit(given_number, unit) * unit[0], unit, "length")
    assert same_quantity(written, given_number)
    assert abs(written.si - given_number.si) <= given_number.rounding + 1e-9


@given(st.integers(90, 6000), st.floats(0.9, 100.0))
def test_more_than_rounding_is_a_change(whole: int, more: float) -> None:
    feet = Quantity(round((whole + more) / 0.3048) * 0.3048, FEET, "length")
    assert not same_quantity(Quantity(float(whole), METRES, "length"), feet)
