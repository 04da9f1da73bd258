"""What an audit can find, as data: the kinds of findings, how bad each is, and what it means for a verdict."""

from __future__ import annotations

from typing import NamedTuple

UNUSABLE, DOUBTFUL, LOOK = SEVERITIES = ("unusable", "doubtful", "worth a look")
MEANINGS = {
    UNUSABLE: "the row is not assessed until it is put right",
    DOUBTFUL: "the row gets a verdict, and the verdict may be wrong",
    LOOK: "unusual or missing; it may be right",
}


class Kind(NamedTuple):
    """A kind of finding: its name, its severity, and what it means, as one sentence."""

    name: str
    severity: str
    meaning: str


_ALL: list[Kind] = []


def _kind(severity: str, name: str, meaning: str) -> Kind:
    kind = Kind(name, severity, meaning)
    _ALL.append(kind)
    return kind


BAD_VALUE = _kind(UNUSABLE, "value unreadable or absurd", "a cell is no number, or outside of what its column can hold")
TOO_WIDE = _kind(UNUSABLE, "more cells than headers", "a value holds the delimiter, so that all after it may be shifted")
FILLED_FAULT = _kind(UNUSABLE, "fault noted when filled", "the workbook still carries the fault that the list had")
NO_LENGTH = _kind(UNUSABLE, "length missing", "there is no length that can be used")
NO_ELEVATION = _kind(UNUSABLE, "elevation missing", "neither the list nor an airports file tells how high the strip lies")
NO_SURFACE = _kind(UNUSABLE, "surface missing", "no surface is given")
STRANGE_SURFACE = _kind(UNUSABLE, "surface word unknown", "the surface can't be told from its spelling")
STRANGE_CONDITION = _kind(UNUSABLE, "condition word unknown", "the condition is none of dry, wet and soft")
NO_SLOPE = _kind(UNUSABLE, "slope missing", "no slope, no elevations of both ends and no profile; assessed only with an "
                 "assumed slope")  # fmt: skip
HALF_OBSTACLE = _kind(UNUSABLE, "obstacle half given", "a height without a distance, or a distance without a height")
DISPLACED_BEYOND = _kind(UNUSABLE, "threshold beyond the far end", "the displaced threshold lies beyond the runway")
ENDS_TOO_STEEP = _kind(UNUSABLE, "ends too far apart in height", "the ends differ by more than 30 % of the length")
PROFILE_DISAGREES = _kind(UNUSABLE, "profile against the rest", "the profile does not reach from end to end, or rises "
                          "otherwise than the slope or the elevations say")  # fmt: skip
ONE_WAY_UNTOLD = _kind(UNUSABLE, "one-way, both ways usable", "the strip is one-way, but the list does not say which way")
WAY_UNKNOWN = _kind(UNUSABLE, "way to land or leave unknown", "it names neither end of the runway")

LENGTH_LONGER = _kind(DOUBTFUL, "length greater than between the ends", "more than the coordinates of the ends leave room for")
HEADING_AGAINST_ENDS = _kind(DOUBTFUL, "heading against the coordinates", "the bearing from end to end is another: wind "
                             "components are wrong")  # fmt: skip
HEADING_AGAINST_NAME = _kind(DOUBTFUL, "heading against the runway name", "more than 45 degrees apart")
HEADINGS_NOT_OPPOSITE = _kind(DOUBTFUL, "headings not opposite", "the headings of the two ends don't belong to one runway")
NAMES_NOT_OPPOSITE = _kind(DOUBTFUL, "runway names not opposite", "the names of the two ends don't belong to one runway")
NO_HEADING = _kind(DOUBTFUL, "heading missing", "no heading, no coordinates and no name of a direction: not assessed in wind")
SLOPE_AGAINST_ENDS = _kind(DOUBTFUL, "slope against the end elevations", "the ends rise otherwise than the slope says")
LOCAL_BELOW_MEAN = _kind(DOUBTFUL, "steepest part less than the mean", "the greatest local slope is less than the mean slope")
ABOVE_FIELD = _kind(DOUBTFUL, "end above the field elevation", "the field elevation is that of the highest point")
BELOW_FIELD = _kind(DOUBTFUL, "end far below the field elevation", "lower than the field's slopes can account for")
ZERO_ELEVATION = _kind(DOUBTFUL, "elevation 0 for a blank", "the end is given at sea level, and the field is not there")
FIELD_AGAINST_AIRPORTS = _kind(DOUBTFUL, "elevation against the airports file", "the two field elevations differ")
TORA_TOO_LONG = _kind(DOUBTFUL, "usable for take-off longer than the strip", "the strip's length is used instead")
LDA_TOO_LONG = _kind(DOUBTFUL, "usable for landing longer than there is", "what the displaced threshold leaves is used instead")
FAR_FROM_FIELD = _kind(DOUBTFUL, "end far from the airfield", "the coordinates are not those of this strip")
TWICE = _kind(DOUBTFUL, "runway listed twice", "the same identifier and runway come again, and both get a verdict")
TWO_NAMES = _kind(DOUBTFUL, "one runway under two names", "two runways of one strip lie in the same place")
TWO_STRIPS = _kind(DOUBTFUL, "one identifier for two strips", "rows of one identifier have different names or places")
OLD_SURVEY = _kind(DOUBTFUL, "survey too old", "the survey is older than the limit")
FUTURE_SURVEY = _kind(DOUBTFUL, "survey in the future", "the date of the survey has not come yet")
ONE_WAY_IN_NOTES = _kind(DOUBTFUL, "one-way only in the notes", "both directions get a verdict")
DOWNHILL_LANDING = _kind(DOUBTFUL, "one-way against the slope", "one lands downhill or leaves uphill: slope or way may be the "
                         "wrong way round")  # fmt: skip
HALF_WIND = _kind(DOUBTFUL, "wind half given", "a direction without a speed, or a speed without a direction, is mixed with the "
                  "day's")  # fmt: skip
ODD_TEMPERATURE = _kind(DOUBTFUL, "own temperature out of the ordinary", "far from the standard air at this elevation")
ODD_QNH = _kind(DOUBTFUL, "own QNH out of the ordinary", "hardly ever so high or low; it may be the pressure at the strip")
UNIT_NOT_NAMED = _kind(DOUBTFUL, "unit not named", "bare numbers of the column are taken in the usual unit")
NOT_UNDERSTOOD = _kind(DOUBTFUL, "column not understood", "it is carried along, and not used")
ROWS_DISAGREE = _kind(DOUBTFUL, "the two directions disagree", "a value of the strip was changed in one direction only")

LENGTH_SHORTER = _kind(LOOK, "length less than between the ends", "the coordinates leave room for more")
HALF_COORDINATES = _kind(LOOK, "coordinates half given", "neither length nor heading can be checked with them")
ENDS_IN_ONE_PLACE = _kind(LOOK, "both ends in one place", "the coordinates of the two ends are the same")
IMPOSSIBLE_ENDS = _kind(LOOK, "coordinates that can't be", "the ends lie further apart than any runway is long")
HEADING_FROM_NAME = _kind(LOOK, "heading from the name only", "magnetic, and to the nearest ten degrees")
TWO_IDENTIFIERS = _kind(LOOK, "one runway under two identifiers", "runways of two identifiers lie in the same place")
NEARLY_TWICE = _kind(LOOK, "nearly the same name close by", "two identifiers may stand for one strip")
USABLE_SHORT = _kind(LOOK, "usable length under half of the strip", "the rest of the strip is left unused")
FAR_DISPLACED = _kind(LOOK, "threshold displaced over half of the strip", "little is left to land on")
STEEP = _kind(LOOK, "very steep", "few strips in use are steeper")
NO_WIDTH = _kind(LOOK, "width missing", "a rule set that asks for a width can't be satisfied")
ODD_WIDTH = _kind(LOOK, "width out of proportion", "wider than half of the length, or hardly wider than an undercarriage")
NO_SURVEY = _kind(LOOK, "survey date missing", "nobody can tell how old the figures are")
STRANGE_SURVEY = _kind(LOOK, "survey date unreadable", "its age can't be told")
SAME_WAY = _kind(LOOK, "land and leave the same way", "a one-way strip is usually left the other way")
CLOSED_IN_NOTES = _kind(LOOK, "closure in the notes", "the notes speak of a closure, and the row is not marked closed")
NOT_IN_AIRPORTS = _kind(LOOK, "not in the airports file", "the identifier may be misspelt or old")
NAMELESS = _kind(LOOK, "strip not named", "neither an identifier nor a name")

KINDS = tuple(_ALL)
