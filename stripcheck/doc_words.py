"""What is written by hand for the reference pages: the prose, and the tables that no part of the program holds."""

from __future__ import annotations

from typing import NamedTuple

from stripcheck.book_tables import GIVES
from stripcheck.flap_lift import FLAP_KINDS
from stripcheck.steps import POWERS


class Entry(NamedTuple):
    """An entry of a file that a user writes: its part, name and chain key; ``takes``, ``usual`` and ``meaning`` where
    the chain does not tell them. ``usual`` empty: the entry is needed."""

    part: str
    name: str
    key: str = ""
    takes: str = ""
    usual: str = ""
    meaning: str = ""


RULE_ENTRIES = (
    Entry("", "title", "", "text", "", "Shown above every result"),
    Entry("", "issue", "", "text", "", "Issue or date of the text that the figures come from"),
    Entry("", "citation", "", "text", "", "Where to find that text"),
    Entry("", "status", "", "read, memory or own", "", "Whether the figures were read, recalled, or are your own"),
    Entry("", "note", "", "text", "nothing", "What a user of the set must know"),
    Entry("", "physics_counts", "physics_counts"),
    Entry("", "corrections_count", "corrections_count"),
    Entry("wind", "headwind_credit", "headwind_credit"),
    Entry("wind", "tailwind_count", "tailwind_count"),
    Entry("takeoff", "safety_factor", "takeoff_factor"),
    Entry("takeoff", "short_to", "takeoff_factor_to"),
    Entry("takeoff", "long_safety_factor", "takeoff_factor_long", usual="safety_factor"),
    Entry("takeoff", "long_from", "takeoff_factor_from"),
    Entry("landing", "safety_factor", "landing_factor"),
    Entry("landing", "short_to", "landing_factor_to"),
    Entry("landing", "long_safety_factor", "landing_factor_long", usual="safety_factor"),
    Entry("landing", "long_from", "landing_factor_from"),
    Entry("slope", "takeoff_each_percent_up", "upslope_takeoff"),
    Entry("slope", "landing_each_percent_down", "downslope_landing"),
    Entry("slope", "corrections_hold_to", "slope_limit"),
    Entry("site", "obstacle_clearance", "obstacle_margin"),
    Entry("site", "least_width", "least_width"),
    Entry("site", "least_width_light", "least_width_light"),
    Entry("site", "light_mass", "light_mass"),
    Entry("site", "greatest_slope", "greatest_slope"),
    Entry("site", "greatest_local_slope", "greatest_local_slope"),
    Entry("site", "free_gradient", "free_gradient"),
    Entry("site", "free_distance", "free_distance"),
)

CARD_ENTRIES = (
    Entry("aeroplane", "name", "", "text", "", "Shown above every result"),
    Entry("aeroplane", "note", "", "text", "nothing", "Shown under the name"),
    Entry("mass", "empty", "", "kg", "", "Empty mass; only to see that the others are credible"),
    Entry("mass", "max_takeoff", "max_takeoff_mass"),
    Entry("mass", "max_landing", "max_landing_mass", usual="max_takeoff"),
    Entry("mass", "stall_speeds_at", "", "kg", "max_takeoff", "Mass at which the manual states the stall speeds"),
    Entry("wing", "area", "wing_area"),
    Entry("wing", "span", "span"),
    Entry("wing", "height_above_ground", "wing_height", usual="0.15 of the span"),
    Entry("engine", "kind", "", ", ".join(POWERS), POWERS[0], "How the power falls with height"),
    Entry("engine", "rated_power", "rated_power"),
    Entry("engine", "critical_altitude", "", "ft", "", "Turbo-normalised only: up to where the rated power lasts"),
    Entry("engine", "flat_rated_to", "", "ft", "", "Flat rated only: up to where the rated power lasts"),
    Entry("engine", "at_isa_deviation", "", "K", "0 K", "Warmth above standard at which that altitude holds"),
    Entry("propeller", "kind", "", "fixed pitch or constant speed", "", "Decides how thrust is computed"),
    Entry("propeller", "diameter", "propeller_diameter"),
    Entry("drag", "parasite", "parasite_drag"),
    Entry("drag", "span_efficiency", "efficiency"),
    Entry("drag", "lift_in_the_run", "ground_lift"),
    Entry("[flap]", "setting", "", "text", "", "Name of the setting, as the manual calls it"),
    Entry("[flap]", "deflection", "", "°", "", "From up to down; two settings or more"),
    Entry("[flap]", "stall_speed", "", "kt", "", "Calibrated airspeed, wings level, power off. With a part `[flaps]` only "
          "the first setting needs one"),
    Entry("[flap]", "stall_speed_ias", "", "kt", "stall_speed", "Indicated airspeed, in place of stall_speed; needs "
          "`[[position_error]]`"),
    Entry("[flap]", "drag", "", "number", "estimated", "Drag coefficient added to the one with flaps up"),
    Entry("[flap]", "uses", "", "list of take-off, landing", "both", "What the manual allows the setting for"),
    Entry("flaps", "kind", "", ", ".join(FLAP_KINDS), "needed in this part", "Kind of flap. The part is only for what is to be "
          "estimated"),
    Entry("flaps", "chord", "", "%", "needed in this part", "Flap chord over wing chord"),
    Entry("flaps", "span", "", "%", "needed in this part", "Length of both flaps together over the span of the wing"),
    Entry("flaps", "extended_chord", "", "%", "100 %", "Fowler only: wing chord with the flap right out over that with it in"),
    Entry("[position_error]", "flap", "", "name of a setting", "every one without rows of its own", "Setting of this row"),
    Entry("[position_error]", "ias", "", "kt", "needed in this part", "Indicated airspeed; rising from row to row"),
    Entry("[position_error]", "cas", "", "kt", "needed in this part", "Calibrated airspeed at that indicated one"),
    Entry("speeds", "lift_off", "lift_off_factor"),
    Entry("speeds", "screen", "screen_factor"),
    Entry("speeds", "approach", "approach_factor"),
    Entry("speeds", "touchdown", "touchdown_factor"),
    Entry("landing", "shallowest_approach", "approach_shallowest"),
    Entry("landing", "steepest_approach", "approach_steepest"),
    Entry("landing", "time_before_braking", "free_roll_seconds"),
    Entry("limits", "crosswind", "crosswind_limit"),
    Entry("limits", "tailwind", "tailwind_limit"),
    Entry("usual", "takeoff_mass", "mass_takeoff", usual="max_takeoff"),
    Entry("usual", "landing_mass", "mass_landing", usual="max_landing"),
    Entry("usual", "takeoff_flap", "", "name of a setting", "", "Setting used unless told otherwise"),
    Entry("usual", "landing_flap", "", "name of a setting", "", "Setting used unless told otherwise"),
    Entry("book", "climb_speed", "", "kt", "needed with rates of climb", "Calibrated airspeed of the manual's rates of climb"),
    Entry("[book.table]", "gives", "", "; ".join(GIVES), "", "What its figures are; level dry pavement, still air. Two figures "
          "stand in pairs under each temperature"),
    Entry("[book.table]", "flap", "", "name of a setting", "", "Of this table"),
    Entry("[book.table]", "mass", "", "kg", "the greatest for that use", "Of this table"),
    Entry("[book.table]", "lift_off_speed", "", "kt", "may be left out",
          "Take-off tables: calibrated; then the lift-off factor is fitted"),
    Entry("[book.table]", "unit", "", "m, ft or ft/min", "m; ft/min for climb", "Of its figures"),
    Entry("[book.table]", "pressure_altitudes", "", "list of ft", "needed, or `file`", "Of its lines; rising"),
    Entry("[book.table]", "temperatures", "", "list of °C", "needed, or `file`", "Of its columns; rising"),
    Entry("[book.table]", "values", "", "list of lists", "needed, or `file`", "The figures of each pressure altitude; "
          '`"-"` for a hole'),
    Entry("[book.table]", "file", "", "name of a file", "typed", "The same grid as .csv, .xlsx, .xls or .ods, beside the card"),
    Entry("[book.table]", "sheet", "", "name of a sheet", "the first", "Of that file, if it is a workbook"),
    *(
        Entry(part, name, "", takes, "dry_grass, and physics" if name == "wet_grass" else "physics", f"{side}: {words}")
        for side, part in (("Take-off", "book.corrections.takeoff"), ("Landing", "book.corrections.landing"))
        for name, takes, words in (
            ("headwind", '`["10 %", "9 kt"]`', "so much off the distance for each so much headwind"),
            ("tailwind", '`["10 %", "2 kt"]`', "so much added for each so much tailwind"),
            ("dry_grass", "%", "share of the roll that dry grass adds to the distance"),
            ("wet_grass", "%", "share of the roll that wet grass adds"),
        )
    ),
    Entry("[book.takeoff]", "pressure_altitude", "", "ft", "", "Of a single figure of the manual"),
    Entry("[book.takeoff]", "temperature", "", "°C", "", "Of this point"),
    Entry("[book.takeoff]", "mass", "", "kg", "max_takeoff", "Of this point"),
    Entry("[book.takeoff]", "flap", "", "name of a setting", "", "Of this point"),
    Entry("[book.takeoff]", "roll", "", "m", "", "Take-off roll on level dry pavement in still air"),
    Entry("[book.takeoff]", "to_50ft", "", "m", "may be left out", "Distance to 50 ft, roll included"),
    Entry("[book.takeoff]", "lift_off_speed", "", "kt", "may be left out", "Calibrated; then the lift-off factor is fitted"),
    Entry("[book.landing]", "pressure_altitude", "", "ft", "", "Of a single figure of the manual"),
    Entry("[book.landing]", "temperature", "", "°C", "", "Of this point"),
    Entry("[book.landing]", "mass", "", "kg", "max_landing", "Of this point"),
    Entry("[book.landing]", "flap", "", "name of a setting", "", "Of this point"),
    Entry("[book.landing]", "roll", "", "m", "", "Landing roll on level dry pavement in still air"),
    Entry("[book.landing]", "from_50ft", "", "m", "may be left out", "Distance from 50 ft, roll included"),
)

COLUMN_MEANINGS = {
    "strip": "Identifier of the strip",
    "code": "Another identifier; used where there is no column for the strip",
    "name": "Name of the strip",
    "runway": "Both ends, such as 09/27, or one of them",
    "designator": "Name of one end",
    "length": "Length between the ends",
    "usable": "Length usable for take-off and landing, either way",
    "tora": "Length usable for take-off",
    "lda": "Length usable for landing",
    "width": "Width",
    "surface": "Surface, in any spelling of the list below",
    "condition": "dry, wet or soft",
    "closed": "Whether it is closed",
    "elevation": "Elevation of the strip, or of an end",
    "slope": "Mean slope; positive: rising from the end named first to the other",
    "local_slope": "Steepest part, without sign",
    "profile": "Slope profile: distance:height points from the end named first, such as `0:0, 200:3.5, 450:12`",
    "heading": "True heading from an end to the other",
    "displaced": "Distance of the displaced threshold from its end",
    "latitude": "Latitude of an end",
    "longitude": "Longitude of an end",
    "obstacle_height": "Height of the obstacle above the end",
    "obstacle_distance": "Distance of the obstacle from the end",
    "temperature": "Air temperature at this strip",
    "qnh": "QNH at this strip",
    "wind_from": "True direction that the wind comes from at this strip",
    "wind_speed": "Wind at this strip",
    "land_towards": "The only direction to land in, such as 09",
    "take_off_towards": "The only direction to take off in, such as 27",
    "one_way": "Whether it is one-way",
    "survey_date": "Date of the survey; shown, not used",
    "notes": "Notes; shown, not used",
}
PLACES = {"strip": "once", "end": "for each end", "both": "once, or for each end"}

LEFT_OUT = (
    ("closed", "The list, or the airports file, says that the runway or the airfield is closed"),
    ("helipad", "A roof, a deck or a helicopter pad by its surface, by its name (such as H1) or by the airports file; "
                "or an area under 60 m that is about square and has no runway name"),
    ("water", "The surface is water"),
)  # fmt: skip
CONTRADICTIONS = (
    "A cell that is no number, or whose unit does not measure that quantity.",
    "A runway that a spreadsheet has turned into a date, such as 9-Mar for 09/03.",
    "A displaced threshold beyond the other end of the runway.",
    "Ends that differ in elevation by more than 30 % of the length.",
    "An obstacle with a height but no distance, or the other way round. A height of 0 says that there is none.",
    "A slope profile that can't be read, is steeper than 30 % somewhere, does not reach from end to end (within 2 % or 10 m), "
    "or rises otherwise than the slope or the elevations of the ends say (by more than 1 % of slope).",
    "`Land on` or `Leave by` naming neither end; or `One-way` without telling which way.",
    "A row with more cells than the header, as when a comma in a note is not within quotes.",
    "Slopes in a workbook that are all below 0.3 %: they may be cells formatted as percent, a hundred times too small.",
)




METHOD_INTRO = """
Each verdict is the end of a chain of small steps, from the pressure on the altimeter to the metres that are
left over. In a filled workbook each step is a column of the sheet Strips, or a row of the sheet Aircraft
where it is the same for every strip, with a live formula, its unit and its source, so that any verdict can
be followed back cell by cell. (A list of more than {0:,} directions keeps the main columns only, unless you
ask for `--detail full`.) This page lists the same steps from the same tables."""
GIVEN_INTRO = """
What you type, and the unit of a plain number. *Key* is the name by which Python functions know it. A blank
means "not known": nothing is filled in silently, and what stands in for it is listed on the sheet Method."""
TABLES_GIVEN = """
A card with tables of the manual brings these, from its part `[[book.table]]`. All tables of a side have common
lines and columns; a page is a table for one flap setting and one mass."""
STEPS_INTRO = """
*Only where* names what must hold, or be known, before a step has a value; without it the cell stays empty
and the verdict says why. Lengths are in metres, speeds in knots: inside, all is computed in SI units.
*Level dry pavement* is the same run or flight as a flight manual's table means it; the published
corrections are put on that one."""
WITH_TABLES = """
The manual's figure is used as it stands at the manual's own conditions, and the model carries it from there
to the strip: answer = manual x model(strip) / model(manual's conditions). These steps are added where the
card has tables for that side; a step that stands above too is then made from these values. A rate of climb
is carried by the difference, not the ratio: it may be near nil."""
WITH_CORRECTIONS = """
Where the card holds the manual's own correction for wind or for grass, it goes before the physics, which is
left with what the manual does not tell: slope, other ground, and a wind for which it has no correction. The
distance by physics stays as a step beside it. The rule set's published corrections still count, and the longer governs."""
FINDINGS_INTRO = """
Take-off and landing are judged apart, for each direction. The findings are gone through from the top; the
first that holds decides, and its words are the limiting reason. A suitable strip is one for which none of
the others holds."""
BOTH_INTRO = """
The summary takes the better direction in and the better direction out: first by verdict (*suitable*, then
*marginal*, then *not assessed*, then *unsuitable*), then by margin. Together they read: {}. As soon as one
side is not assessed, so is the pair."""
RULES_INTRO = """
A rule set says how much of a wind counts, which published corrections are put on a distance, by what factor
it is then multiplied, and what a site must offer. `--rules NAME` takes a shipped set, `--rules FILE.toml`
your own. The set's values stand on the sheet Rules of a filled workbook, where each can be changed.

Two distances are compared, and the longer governs: the one that physics gives for the slope and the
surface, and the one on level dry pavement times the published corrections. The published corrections give
nothing back for a slope that helps, and so a downhill take-off or an uphill landing counts as a level one
under the sets that use them. *Physics counts* and *Published corrections count* switch either off.

Rules change and differ from country to country. The shipped figures are only as good as their status says;
the current local text governs."""
GROUND_INTRO = """
Friction coefficients of free and of braked wheels, the same for every set. *None*: a strip with that ground
is not assessed. Braking is multiplied by the factor that the aircraft card was calibrated to.

[1] W. H. Mason, notes to a take-off program, Virginia Tech. [2] D. P. Raymer, Aircraft Design, and J. D.
Anderson, Aircraft Performance and Design (from memory). [3] Common practice, no source: between its
neighbours, on the careful side."""
OWN_RULES = """
Write a text file whose name ends in `.toml`, and name it with `--rules`. A misspelt entry is refused, and
so is a figure that can't be right. Write each figure with its unit, in quotes: `"5 %"`, never 0.05, which
would be read as 0.05 %. A small one, for an invented operator:

```toml
title = "Our operations manual"
issue = "Revision 3"
citation = "Operations manual, part B, chapter 4"
status = "own"

[wind]
headwind_credit = "50 %"
tailwind_count = "150 %"

[takeoff]
safety_factor = 1.33

[landing]
safety_factor = 1.43

[takeoff_surface.grass]
dry = 1.20
wet = 1.30
```

All entries; *needed* ones have no usual value."""
SURFACE_FACTORS = """
Published surface corrections go into `[takeoff_surface.WORD]` and `[landing_surface.WORD]`, with the
entries {0}, each a factor of 1 or more. WORD is one of {1} (in quotes where it has a space:
`[takeoff_surface."long grass"]`), or `every` for all that have no figure of their own. What is left out is
1: then the physics of that surface governs."""
CARD_INTRO = """
A card is a text file, ending in `.toml`, that holds one aeroplane's figures. `--card FILE.toml` takes your
own, `--card NAME` a shipped one: {0}. The shipped aeroplanes are invented; copy one and put your own
manual's figures in their place."""
WALK_INTRO = """
The {0} is invented, and so is its manual: its figures come from this program's model, rounded as a manual rounds, so that
they belong together. With your own manual the steps are the same."""
WALK_PAGES = """
**1. Find these pages.**

- Data: empty mass 480 kg, greatest mass 750 kg. Wing 15.2 m², span 10.4 m. Engine 86 kW, fixed-pitch
  propeller of 1.85 m.
- Limits: crosswind 12 kt, tailwind 5 kt.
- Stall speeds at 750 kg, power off, calibrated: flaps up 44 kt, 15° 41 kt, 35° 38 kt.
- The two tables below, with their notes."""
WALK_TAKEOFF = """
*Take-off* [m], roll / to 50 ft: 750 kg, flaps 15°, level dry pavement, no wind. Lift off at 45 kt, 50 kt at
50 ft, calibrated. Subtract 10 % for each 9 kt of headwind; add 10 % for each 2 kt of tailwind. On dry grass
add 15 % of the roll."""
WALK_LANDING = """
*Landing* [m], roll / from 50 ft: 750 kg, flaps 35°, level dry pavement, no wind. 50 kt at 50 ft, calibrated.
Subtract 10 % for each 9 kt of headwind; add 10 % for each 2 kt of tailwind."""
WALK_TYPE = """
**2. Type them into a text file**, here `my-card.toml`. A speed is divided by the stall speed of its flap
setting: 45 / 41 = 1.10. A figure that the manual leaves out is `"-"`. What no page tells is left out too:
the program then takes a usual value and says so."""
EXAMPLE_CARD = """
[aeroplane]
name = "Tarn Wader 115"
note = "Invented two-seater, fixed-pitch propeller."

[mass]
empty = "480 kg"
max_takeoff = "750 kg"

[wing]
area = "15.2 m²"
span = "10.4 m"

[engine]
rated_power = "86 kW"

[propeller]
kind = "fixed pitch"
diameter = "1.85 m"

[[flap]]
setting = "up"
deflection = "0°"
stall_speed = "44 kt"

[[flap]]
setting = "15"
deflection = "15°"
stall_speed = "41 kt"

[[flap]]
setting = "35"
deflection = "35°"
stall_speed = "38 kt"
uses = ["landing"]

[speeds]
lift_off = 1.10
screen = 1.22
approach = 1.32

[limits]
crosswind = "12 kt"
tailwind = "5 kt"

[usual]
takeoff_flap = "15"
landing_flap = "35"

[[book.table]]
gives = "take-off roll and to 50 ft"
flap = "15"
mass = "750 kg"
pressure_altitudes = [0, 2000, 4000, 6000]
temperatures = [0, 15, 30]
values = [
    [135, 365, 145, 395, 160, 430],
    [160, 445, 175, 490, 190, 535],
    [195, 560, 210, 625, 230, 695],
    [235, 745, 255, 845, "-", "-"],
]

[[book.table]]
gives = "landing roll and from 50 ft"
flap = "35"
mass = "750 kg"
pressure_altitudes = [0, 3000, 6000]
temperatures = [0, 15, 30]
values = [
    [115, 320, 120, 325, 125, 330],
    [130, 330, 135, 335, 140, 345],
    [140, 345, 145, 350, 155, 360],
]

[book.corrections.takeoff]
headwind = ["10 %", "9 kt"]
tailwind = ["10 %", "2 kt"]
dry_grass = "15 %"

[book.corrections.landing]
headwind = ["10 %", "9 kt"]
tailwind = ["10 %", "2 kt"]
"""
WALK_REPORT = """
**3. Ask for the report.** It is a page long; these are its main parts. (`--picture my-card.png` draws it too.)"""
REPORT_COMMAND = """
stripcheck card my-card.toml
"""
WALK_READ = """
**4. Read it.**

- *Fitted* is what no manual prints. Factors near 1 say that the figures belong together; one far from 1 says
  that a speed, a mass or a distance is wrong.
- *Held* and *assumed* list every usual value. Look whether the manual does tell one of them.
- *The card against the manual:* a few per cent are usual, and rounding alone makes up to {0:.0f} % of the
  shortest roll here. A single figure far out is most likely a slip.
- *Warnings* should say "none".

Where the tables reach, the manual's figures are used as they stand, whatever these differences."""
WALK_FILL = """
**5. Fill a workbook.** A list of two strips, `my-strips.csv`, the first of which is the manual's own page:"""
EXAMPLE_LIST = """
Strip,Runway,Length [m],Elevation [ft],Slope [%],Heading,Surface
Proof,09/27,800,0,0,90,paved
Home,09/27,620,900,1,90,grass
"""
EXAMPLE_COMMAND = """
stripcheck fill my-strips.csv --card my-card.toml --rules manual-only --temp 15 -o my-strips.xlsx
"""
WALK_PROOF = """
On the sheet Strips the distances required of *Proof* are {takeoff:.0f} m and {landing:.0f} m, those of the
manual at sea level and 15 °C. If yours are not the manual's, a figure was mistyped. Those of *Home* are what
the manual does not print. Then take your rule set in place of `manual-only`, and your own list.
`stripcheck strip` puts a single strip on one page; `stripcheck demo` fills a workbook for a shipped aeroplane."""
CARD_ADVICE = """
- *Stall speeds* are best the calibrated ones, at the mass named under `stall_speeds_at`. An indicated one
  can be several knots low, and every distance goes with its square. Where the manual prints only that, or
  none for a setting, see *Flaps* below.
- *Conditions* of a table are level dry pavement in still air. A table for grass, or with a factor in it, is
  none; leave it out.
- *A chart in place of a table:* read figures off it where the lines of the paper cross, and type them as a
  table. *A few figures only:* type each as `[[book.takeoff]]` or `[[book.landing]]`, far apart, such as sea
  level on a cold day and a high, hot one, heavy and light.
- *Feet:* `unit = "ft"` in a table, `"1050 ft"` in a single figure."""
CARD_ENTRIES_INTRO = """
Numbers carry their unit, in quotes. *Needed* entries have no usual value. A usual value of speeds, drag or landing that
was used is listed as taken for granted. Parts in double brackets come again for each setting, table or point."""
GRID_FILES = """
A table may stand in a file beside the card, as the manual prints it: a line of temperatures, below it a line
for each pressure altitude, which stands in the first cell. Title lines above are passed over. Bare numbers
are ft and °C. One figure for each temperature, here {0}:"""
GRID_PAIRS = """
With two figures, each temperature has two columns and stands above the first; a line of words may follow,
here {0}:"""
BOOK_FIRST = """
A manual's table holds for level dry pavement in still air. The strip is none of that. So the manual's figure
is taken as it is, and physics only carries it on:

```text
distance = manual's figure x model(strip) / model(manual's conditions)
```
"""
BOOK_FIRST_MORE = """
The manual's conditions are the strip's pressure altitude and temperature and your mass, as far as the tables
go, and the nearest flap setting that has tables. On level dry pavement in still air the model cancels out,
and the manual's figure comes out to the metre. A flap setting without tables is carried by the model, and no
verdict marks it.

*Between its figures* a table is read linearly in pressure altitude, temperature and mass, as manuals ask for
(multilinear interpolation). That is exact at each figure and never goes past its neighbours, as a curve
could; and since distances grow faster and faster with height, heat and mass, a straight line between two
figures lies on the long side.

*Holes.* One between other figures is put between them, and said so. One at an edge stays a hole: there the
conditions are beyond the book, and the model carries the nearest figure on.

*Beyond the book.* Higher, hotter or heavier than the figures go, the nearest figure is carried on by the
model, and the verdict is at best *marginal* ("{0}"). Where the model itself has no distance at the edge of
the table, it is *unsuitable* ("{1}"). Lower, colder or lighter than the tables is carried in the same way and
not marked: it is easier than what the manual prints, and if it cost a verdict, more heat could better one.
How far beyond shows in three columns for each side on the sheet Strips, such as "{2}"; negative is the easy
side. A card of single figures only is beyond the book where the air is thinner (by density altitude) than at
any of them.

*Only rolls, or only distances over 50 ft:* the other one follows in the model's proportion; a card needs at
least one roll for each side. *Rates of climb* correct the gradient with which the aeroplane climbs away and
clears obstacles; beyond their tables counts as beyond the book where there is an obstacle to clear."""
CORRECTIONS = """
What the manual says about wind and grass can be entered, and then governs in place of the physics, which is
left with slope, other ground and, for what is not entered, wind or grass. A share for grass is one of the
roll. Wet grass without a share of its own, and soft grass, take the nearest one, and the physics adds what
the ground is worse than that. The distance by physics stands beside it on the sheet Strips. The rule set
still decides how much of a wind counts, and its published corrections count too: the longer governs. However
strong a headwind, no more than half of the distance is taken off."""
FLAPS = """
Any number of settings, from up to down by deflection. Each stall speed is best the calibrated one of the
manual. It is taken as the equivalent airspeed, which at sea level it is; elsewhere the difference is below
0.1 kt at such speeds. Between two settings the greatest lift coefficient is interpolated, not the speed.

*Only indicated stall speeds.* Write `stall_speed_ias`, and the manual's airspeed calibration as rows of
`[[position_error]]`. A setting with rows of its own uses those, every other one the rows that name no flap.
Between rows it is linear. A stall speed outside of them is refused: a calibration often ends above the
stall, and what an airspeed system does there can't be told.

```toml
[[position_error]]
ias = "40 kt"
cas = "46 kt"

[[position_error]]
ias = "60 kt"
cas = "62 kt"
```

*A setting without a stall speed.* Measure the flaps and add the part below; *span* is the length of both
flaps together over the span of the wing, from tip to tip.

```toml
[flaps]
kind = "slotted"
chord = "25 %"
span = "50 %"
```

The greatest lift coefficient then rises, from the setting before it, by {0} of what a published method
gives (Raymer, from memory): the section's increment in the table below, times {1}, times the span; scaled
in proportion to deflection, up to the one in the table, and to the flap's effectiveness by thin-aerofoil
theory, up to a chord of {2}. It never goes beyond the next setting that has a speed. So the stall speed
comes out rather too high than too low. Take-off points of the book need a true one: calibrated at a speed
that is too high, thrust and climb would come out too strong.

*A setting without drag.* With flaps of that size the drag is estimated too (Young, in McCormick's form,
from memory): the factor in the table, times chord to the power of 1.38, times span, times the square of the
sine of the deflection. What a flap over part of the span adds to the induced drag is not in it. Without the
part, drag is that of {3}.

Whatever is estimated is listed as taken for granted, and called *estimated* on the sheet Aircraft."""
CALIBRATION = """
What no manual prints is fitted to its figures by least squares, best-known first: thrust on the take-off
rolls; then thrust, what it loses to speed (fixed pitch) or parasite drag (constant speed), and an airborne
factor together on all take-off figures; braking on the landing rolls; an airborne factor from 50 ft to
touchdown. What the figures don't tell well enough is held at its usual value, and the report says so: one
take-off point tells the thrust and the airborne factor, no more.

Bounds: static thrust {0[0]} to {0[1]} of the weight, and never more than the power can give; useful share of
the shaft power {1[0]} to {1[1]}; airborne factors {2[0]} to {2[1]}; braking {3[0]} to {3[1]} of the ground
table's. A card that needs more is refused, and so is one whose model is more than {refuse} shorter than a
figure of the manual. A figure that is missed by more than {tell} is told: look for a slip in it. Tables are
used as they stand, whatever the fit; it matters for what they leave out.

What the fit leaves over, for the shipped cards:"""
TRUST = """
- The card is as good as the manual's table, flown by the manual's technique, in an aeroplane in that
  condition. A tired engine or a dented propeller is not on it.
- Within its tables the card is the manual. Beyond them, at other flaps, and on cards with a few single
  figures it is a calibrated model, and the further from the figures, the more of an estimate. Beyond the
  book costs the *suitable*; another flap setting, or another mass than that of single figures, does not.
- Slope, surface, wind and soft ground are physics with the coefficients of the ground table. The scatter of
  real ground is wider than that of any aeroplane: walk the strip.
- Ground effect, flap drag and lift in the run are single figures. They matter most where the aeroplane
  barely accelerates, and there the verdict is at best marginal.
- Nothing is assumed about reverse thrust, short-field tricks or flaps pulled at lift-off."""
LISTS_INTRO = """
A list is any table with one runway in a row: .csv, .txt, .tsv, .xlsx, .xlsm, .xls or .ods. Title lines
above the header are passed over. Delimiter, encoding and decimal comma are found out. The open runway data
that is published as runways.csv is read as it is; an airports.csv beside it adds names and elevations.
Columns that are not understood are carried along into the workbook as they are. Nothing in your list is
ever changed."""
COLUMNS_INTRO = """
Headers come in any order; capitals, accents, underscores, hyphens and dots don't matter. A column for the
strip (or its name) and one for a length are needed; all others help. A unit may stand in the header, in
brackets or after the word: `Length [ft]`, `elevation_ft`. A cell may carry its own: `2300 ft`. Else the
unit is the one below, and the sheet Left out says that it was taken for granted. Headings and winds are
true; a header that says magnetic is carried and not used.

A column about one end says which: `Elevation end 1`, `End 2 elevation`, `elevation 1`, or `le_elevation_ft`
and `he_elevation_ft` as in the open data. End 1 is the end named first: in 09/27 it is where a landing on
09 begins."""
WHICH_WAY = """
Every runway becomes two directions, and each is assessed. On a one-way strip `Land on` names the direction
of landing and `Leave by` that of the take-off, such as 09 and 27; the other direction is then closed to it.
`One-way` alone can't say which way and is a fault.

Slope comes from the column, or from the elevations of both ends over the length. With neither, the strip is
not assessed unless the day assumes a slope. A slope profile tells more: points `distance:height` from the
end named first, heights above that end, parted by commas, semicolons or strokes; bare numbers are metres, a
point may say `650 ft:11 ft`. The take-off roll and the braked roll are then computed along it, in the order
in which each direction meets it. The true heading comes from the column, else from the
coordinates of the ends, else from the runway's name, which is then a doubt.

TORA, LDA and usable length shorten what counts; they never lengthen the runway. A displaced threshold
shortens the landing over it. An obstacle near an end is met in the take-off towards that end, and in the
landing over it. Its height is above that end, its distance from it."""
SURFACE_RULE = """
A spelling is read word by word, in small letters without accents. A quality mark at the end (-G, -F, -P,
-E) and a pavement strength code are dropped. Every word must be known; one that is not makes the surface
unknown, for it might be the worst part. Of several surfaces the one that drags most on the wheels counts,
the order from least to most drag being {}. Two exceptions: what is grassed, or grass over or on something,
is grass; and ice mixed with anything else is unknown. `long`, `tall` or `high` with grass is long grass.
Single letters are unknown, and so are *unpaved*, *hard* and *mixed*: they name no surface. An unknown
surface is not assessed, and the sheet Left out counts its spellings."""
SURFACE_REST = """
Words for the condition: {}. The worse of this and of the column Condition counts. Words that change
nothing: {}."""
LEFT_OUT_INTRO = """
Three kinds of runway get no row, because no aeroplane on wheels uses them. Each is listed on the sheet Left
out, and the counts add up: rows read are rows kept and rows left out."""
FAULTS_INTRO = """
A row with a fault stays in the workbook. It is not assessed, and the limiting reason says what is wrong and
what would be right. With `--strict` the first one stops everything. Besides numbers out of their limits
these are faults:"""
DOUBTS = """
What is missing or was worked out is listed on the sheet Left out as *in doubt*: a heading taken from the
runway's name, headings or names of the two ends that are not opposite, a heading more than 45 degrees off
the runway's name, a usable length greater than the runway's, a surface, length, elevation or heading that
is not known, a unit that was taken for granted, and a header that is nearly one that is understood. A doubt
by itself does not change a verdict; what is missing does."""

FILES = """
Whatever writes a file writes it beside the old one, brings it to the disk and only then puts it in its place.
A full disk, a folder without the right to write, a process that is killed or a power cut leave the old file
whole; a hidden `.stripcheck-...tmp` that was left behind is cleared away a day later. A link stays a link. A file
that Excel or LibreOffice has open, which their lock files `~$name` and `.~lock.name#` tell, is never replaced.

What changes a workbook or list of yours keeps the version before as `strips 2026-12-01 142305.xlsx` in the same
folder, the date and time at which it was replaced. None is written over, and of each file the ten newest stay."""

HOSTILE_FILES = """
A list may come from anywhere. Before a workbook is read it is gone through once, in little memory; macros are
never run, links, addresses and other files never followed, and a text that begins with `=` stays a text, in the
workbook and in a .csv. What can't be trusted is refused with one sentence:"""

REFUSED = (
    "a file that is something else by its content, such as an .xls that is a web page, a .csv that is a workbook, a picture; "
    "also a binary workbook (.xlsb)",
    "a workbook with a password, and one that is damaged, breaks off, or says what is not true of its parts",
    "a document type or entities in any part, parts whose names lead elsewhere or come twice, text that is not UTF-8",
    "cells that reach over more than {cells:,} places, counted from A1 and over all sheets; formats of blank cells don't count",
    "a workbook of more than {book:,.0f} MB, of {inflated:,.0f} MB unpacked, or of {parts:,} parts; a part other than a sheet "
    "of more than {part:,.0f} MB; a large part that unpacks to more than {ratio} times its size; texts that come again and "
    "again and make {shared:,.0f} MB",
    "an .xls of more than {xls:,.0f} MB; a text list of more than {text:,.0f} MB, with a row of more than {line:,} "
    "characters, more than {list_columns:,} columns with something in them, or zero bytes",
    "a cell of more than {cell:,} characters",
    "a card or rule set of more than {toml:.0f} MB, or with parts that nest without end",
)

LARGEST = """
The largest workbook that this program writes is within these limits: 44,000 runways in full detail, 370 MB, 3,000 MB
unpacked. Going through that one takes half a minute; a list of 1,000 runways takes less than a second."""
FUNCTIONS_INTRO = """
The same functions work in Excel on Windows through Python ([excel.md](excel.md)) and in the other programs
that have a door of stripcheck. Names and arguments are the same everywhere. LAMBDA names, which need no
Python, take ranges too, but not everything else that is told here: [no-python.md](no-python.md).

**A cell or a range.** Every argument but aircraft, rules and unit takes one cell, a column, a row or a whole
range, and the result has the same shape: one formula fills a column. Single cells count for all; a column
and a row together make a table.

**Units.** A plain number is read in the unit in square brackets; a text carries its own, such as `"2300 ft"`,
`"86 °F"` or `"29.92 inHg"`. A plain pressure of 800 to 1100 is hPa and one of 24 to 32.5 inHg; any other is
refused. Where the result has a unit, one more argument at the end asks for another, such as
`"lb"`.

**Left out and empty.** What may be left out has its usual value in brackets. A cell that is empty is not left
out, since it could as well be forgotten: "{0}" stands in the result then.

**What is wrong** stands in its cell as a sentence, and the rest of a range is computed. A number is never
guessed.

**Aircraft and rules** are the name of a shipped card or rule set, the path of a file of your own, which is
read again when it has changed, or a range: the sheet Aircraft (columns A to I) or Rules (columns A to F) of a
filled workbook as it is, such as `Aircraft!A1:I201`. A range must hold every value; blank limits and factors
are refused.

**Tables of the manual** are in that range too: on the sheet Aircraft of a card with tables, rows with the
manual's figures stand folded at the end, outside what is printed. They follow the sheet Manual, so that a
figure typed over or deleted there counts. The row "{2}" tells how far the range goes; one that ends
before is refused. A workbook of LAMBDA names has no such rows on its
sheet Aircraft: from that one the calibrated model answers alone, and the verdict is at best marginal, the
reason being "{1}".

**Distances without rules** count the wind as the set `manual-only` does: half of a headwind and one and a
half times a tailwind. With rules, verdict, margin, greatest mass, hottest air and best flap follow the set.

**What these functions do not see:** crosswind, the width of a strip, its steepest part, and obstacles, except
where an argument asks for one. A verdict here is one without them; a filled workbook judges everything.
Speeds are equivalent airspeeds."""
