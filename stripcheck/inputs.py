"""Every value that an assessment reads from the strip, the day, the aircraft card and the rules, as data.

``unit`` is what a user types and the sheets show. The texts serve as column headers, cell labels and help everywhere.
"""

from __future__ import annotations

from stripcheck.chain import Input


def _strip(key: str, label: str, unit: str, help_text: str, kind: str = "number") -> Input:
    return Input(key, label, unit, "strip", help_text, kind)


STRIP = (
    _strip("fault", "Fault in the list", "", "Why a value of this row can't be used; clear it once mended", "fault"),
    _strip("land_here", "Landing allowed", "", 'Whether one may land in this direction: "yes" or "no"', "flag"),
    _strip("take_off_here", "Take-off allowed", "", 'Whether one may take off in this direction: "yes" or "no"', "flag"),
    _strip("surface", "Surface", "", "Surface word of the ground table on the Rules sheet", "choice"),
    _strip("condition", "Condition", "", "dry, wet or soft; blank takes the one of the Day sheet", "choice"),
    _strip("length", "Length", "m", "Length of the strip between its ends, for the slope"),
    _strip("tora", "Usable for take-off", "m", "Length usable for the take-off in this direction"),
    _strip("lda", "Usable for landing", "m", "Length usable for the landing in this direction"),
    _strip("width", "Width", "m", "Width of the strip"),
    _strip("elevation_start", "Elevation at start", "ft", "Elevation of the end where this direction starts"),
    _strip("elevation_end", "Elevation at end", "ft", "Elevation of the far end"),
    _strip("elevation_field", "Field elevation", "ft", "Published elevation of the strip"),
    _strip("slope_given", "Slope given", "%", "Mean slope in this direction, uphill positive; blank: from elevations"),
    _strip("profile_takeoff_slope", "Profile, take-off slope", "%",
           "Constant slope on which the take-off roll is as long as along the slope profile, for the conditions as filled"),
    _strip("profile_takeoff_roll", "Profile, take-off roll", "m", "Take-off roll for which that slope was worked out"),
    _strip("profile_takeoff_usable", "Profile, usable for take-off", "m", "Usable length for which that slope was worked out"),
    _strip("profile_landing_slope", "Profile, landing slope", "%",
           "Constant slope on which the braked roll is as long as along the slope profile, for the conditions as filled"),
    _strip("profile_landing_roll", "Profile, braked roll", "m", "Braked roll for which that slope was worked out"),
    _strip("profile_landing_usable", "Profile, usable for landing", "m", "Usable length for which that slope was worked out"),
    _strip("profile_climb_slope", "Profile, ground under the climb", "%",
           "Steepest line from lift-off to the ground of the profile ahead, for the conditions as filled"),
    _strip("profile_approach_slope", "Profile, ground under the approach", "%",
           "Slope below which no ground of the profile falls until touchdown, for the conditions as filled"),
    _strip("local_slope", "Greatest local slope", "%", "Steepest part of the strip, without sign"),
    _strip("heading", "Heading", "°", "True heading of this direction"),
    _strip("obstacle_height", "Obstacle on climb-out, height", "ft", "Height above the far end of the strip"),
    _strip("obstacle_distance", "Obstacle on climb-out, distance", "m", "Distance beyond the far end of the strip"),
    _strip("approach_obstacle_height", "Obstacle on approach, height", "ft", "Height above the threshold landed over"),
    _strip("approach_obstacle_distance", "Obstacle on approach, distance", "m", "Distance before the threshold"),
    _strip("own_temperature", "Own temperature", "°C", "Air temperature at this strip; blank: from the Day sheet"),
    _strip("own_qnh", "Own QNH", "hPa", "QNH at this strip; blank: from the Day sheet"),
    _strip("own_wind_from", "Own wind from", "°", "True direction that this strip's wind comes from"),
    _strip("own_wind_speed", "Own wind", "kt", "Wind speed at this strip; blank: from the Day sheet"),
)

DAY = (
    Input("qnh", "QNH", "hPa", "day", "Altimeter setting"),
    Input("temperature", "Temperature", "°C", "day", "Outside air temperature; used where no ISA deviation is given"),
    Input("temperature_elevation", "Temperature taken at", "ft", "day",
          "Elevation of that temperature; blank: the same temperature at every strip"),
    Input("isa_deviation", "ISA deviation", "K", "day", "Warmer (+) or colder (-) than standard, at every strip"),
    Input("humidity", "Relative humidity", "%", "day", "Blank: dry air, unless a dew point is given"),
    Input("dew_point", "Dew point", "°C", "day", "Goes before the relative humidity"),
    Input("wind_from", "Wind from", "°", "day", "True direction that the wind comes from"),
    Input("wind_speed", "Wind", "kt", "day", "Wind speed; 0 is calm"),
    Input("day_condition", "Ground condition", "", "day", "dry, wet or soft, where the strip says nothing", "choice"),
    Input("assumed_slope", "Slope assumed", "%", "day",
          "Where no slope is known: uphill for take-off and downhill for landing; blank: not assessed"),
)  # fmt: skip

CARD = (
    Input("mass_takeoff", "Take-off mass", "kg", "card", "Mass for this assessment"),
    Input("mass_landing", "Landing mass", "kg", "card", "Mass for this assessment"),
    Input("takeoff_flap", "Take-off flap", "°", "card", "Flap deflection for take-off"),
    Input("landing_flap", "Landing flap", "°", "card", "Flap deflection for landing"),
    Input("max_takeoff_mass", "Greatest take-off mass", "kg", "card", "From the flight manual"),
    Input("max_landing_mass", "Greatest landing mass", "kg", "card", "From the flight manual"),
    Input("crosswind_limit", "Crosswind limit", "kt", "card", "Limit or greatest demonstrated crosswind"),
    Input("tailwind_limit", "Tailwind limit", "kt", "card", "Greatest tailwind for take-off and landing"),
    Input("wing_area", "Wing area", "m²", "card"),
    Input("span", "Span", "m", "card"),
    Input("wing_height", "Wing above ground", "m", "card", "Height of the wing when the aeroplane rolls"),
    Input("efficiency", "Span efficiency", "", "card", "Oswald factor of the drag polar"),
    Input("parasite_drag", "Parasite drag coefficient", "", "card", "Flaps up, gear as in take-off and landing"),
    Input("ground_lift", "Lift coefficient in the run", "", "card", "In the ground attitude"),
    Input("flap_deflection", "Flap deflections", "°", "card", "Settings of the flap table", "range"),
    Input("flap_lift", "Greatest lift coefficient by flap", "", "card", "From the stall speeds", "range"),
    Input("flap_drag", "Drag added by flap", "", "card", "Drag coefficient added by each setting", "range"),
    Input("flap_least", "Least flap", "°", "card", "First setting of the flap table"),
    Input("flap_most", "Most flap", "°", "card", "Last setting of the flap table"),
    Input("lift_off_factor", "Lift-off speed over stall", "", "card", "Lift-off speed as a multiple of stall speed"),
    Input("screen_factor", "Screen speed over stall", "", "card", "Speed at 50 ft after take-off, and in the climb"),
    Input("approach_factor", "Approach speed over stall", "", "card", "Speed at 50 ft before landing"),
    Input("touchdown_factor", "Touchdown speed over stall", "", "card", "Speed at touchdown"),
    Input("approach_shallowest", "Shallowest approach", "%", "card", "Least gradient of descent on the approach"),
    Input("approach_steepest", "Steepest approach", "%", "card", "Greatest gradient of descent on the approach"),
    Input("free_roll_seconds", "Time before braking", "s", "card", "From touchdown until the brakes bite"),
    Input("takeoff_technique", "Airborne take-off factor", "", "card", "Calibrated on the manual's 50 ft distance"),
    Input("landing_technique", "Airborne landing factor", "", "card", "Calibrated on the manual's 50 ft distance"),
    Input("braking_quality", "Braking factor", "", "card", "Calibrated on the manual's landing roll"),
)
FIXED_PITCH = (
    Input("static_thrust", "Static thrust", "N", "card", "Calibrated: a of the linearised propeller polar"),
    Input("thrust_slope", "Thrust lost to speed", "m²", "card", "Calibrated: b of the linearised propeller polar"),
)
CONSTANT_SPEED = (
    Input("rated_power", "Rated power", "kW", "card", "At the propeller shaft"),
    Input("propeller_diameter", "Propeller diameter", "m", "card"),
    Input("propulsive_quality", "Propulsive quality", "", "card", "Calibrated: useful share of the shaft power"),
)
POWER_LIMIT = Input("limit_sigma", "Density ratio at the rating's end", "", "card",
                    "Critical altitude as a density ratio; end of a flat rating: over the temperature ratio")  # fmt: skip

RULES = (
    Input("headwind_credit", "Headwind credited", "%", "rules", "Share of a headwind that may be counted"),
    Input("tailwind_count", "Tailwind counted", "%", "rules", "Share of a tailwind that must be counted"),
    Input("physics_counts", "Physics counts", "", "rules", "yes: the computed slope and surface effect may govern", "flag"),
    Input("corrections_count", "Published corrections count", "", "rules", "yes: they govern where they are longer", "flag"),
    Input("takeoff_factor", "Take-off safety factor", "", "rules", "On the take-off distance to 50 ft"),
    Input("takeoff_factor_to", "That take-off factor holds up to", "m", "rules", "Distance up to which that factor holds"),
    Input("takeoff_factor_long", "Take-off factor, long distances", "", "rules", "Straight between the two"),
    Input("takeoff_factor_from", "Long take-off factor holds from", "m", "rules", "Distance from which the long factor holds"),
    Input("landing_factor", "Landing safety factor", "", "rules", "On the landing distance from 50 ft"),
    Input("landing_factor_to", "That landing factor holds up to", "m", "rules", "Distance up to which that factor holds"),
    Input("landing_factor_long", "Landing factor, long distances", "", "rules", "Straight between the two"),
    Input("landing_factor_from", "Long landing factor holds from", "m", "rules", "Distance from which the long factor holds"),
    Input("upslope_takeoff", "Take-off, each 1 % uphill", "%", "rules", "Added to the distance"),
    Input("downslope_landing", "Landing, each 1 % downhill", "%", "rules", "Added to the distance"),
    Input("slope_limit", "Corrections hold to a slope of", "%", "rules",
          "Against you; steeper is at best marginal; blank: no limit"),
    Input("obstacle_margin", "Clearance over obstacles", "ft", "rules", "Height over an obstacle after take-off"),
    Input("least_width", "Least width", "m", "rules", "Site criterion; blank: none"),
    Input("least_width_light", "Least width, light aeroplane", "m", "rules", "Site criterion; blank: none"),
    Input("light_mass", "Light aeroplane up to", "kg", "rules", "Greatest take-off mass of a light aeroplane"),
    Input("greatest_slope", "Greatest mean slope", "%", "rules", "Site criterion; blank: none"),
    Input("greatest_local_slope", "Greatest local slope", "%", "rules", "Site criterion; blank: none"),
    Input("free_gradient", "Obstacle-free gradient", "%", "rules", "Site criterion; blank: none"),
    Input("free_distance", "Obstacle-free over a distance of", "m", "rules", "Beyond each end of the strip"),
    Input("reference_rolling", "Rolling, paved and dry", "", "rules", "First row of the ground table"),
    Input("reference_braking", "Braking, paved and dry", "", "rules", "First row of the ground table"),
    Input("ground_rolling", "Rolling", "", "rules", "Friction coefficient of free wheels", "range"),
    Input("ground_braking", "Braking", "", "rules", "Friction coefficient of braked wheels", "range"),
    Input("ground_takeoff_factor", "Take-off correction", "", "rules", "Published factor for the surface", "range"),
    Input("ground_landing_factor", "Landing correction", "", "rules", "Published factor for the surface", "range"),
)  # fmt: skip

SIDE_WORDS = {"takeoff": "Take-off", "landing": "Landing", "climb": "Climb"}
REACH = {
    side: Input(f"{side}_reach", f"{SIDE_WORDS[side]} figures reach to a density altitude of", "ft", "card",
                "Thinnest air of the manual's figures on this card; beyond it the verdict is at best marginal")
    for side in ("takeoff", "landing")
}  # fmt: skip


def table_inputs(side: str) -> tuple[Input, ...]:
    """The inputs of one side's tables of the manual, take-off, landing or climb, which stand on the sheet Manual."""
    word = SIDE_WORDS[side]
    figures = {"climb": (("rate", "rate of climb"),)}.get(side, (("roll", "roll"), ("distance", "distance over 50 ft")))
    rows = (
        ("altitudes", "pressure altitudes"),
        ("temperatures", "temperatures"),
        *((f"{key}_table", label) for key, label in figures),
        ("hottest", "hottest figure of each line"),
        ("coldest", "coldest figure of each line"),
        ("highest", "highest line of each page"),
        ("page_mass", "mass of each page"),
        ("page_flap", "flap of each page"),
        ("page_below", "mass of the page below"),
        ("page_above", "mass of the page above"),
        ("book_flaps", "flap of the tables used, by setting"),
        ("least_masses", "least mass of the tables, by setting"),
        ("most_masses", "greatest mass of the tables, by setting"),
    )
    speed = (Input("climb_speed", "Climb speed", "kt", "card", "Of the manual's rates of climb, CAS"),)
    tables = tuple(Input(f"{side}_{key}", f"{word} tables: {label}", "", "card", "", "range") for key, label in rows)
    return (*tables, *speed) if side == "climb" else tables


def manual_inputs(side: str) -> tuple[Input, ...]:
    """The manual's own corrections for one side, take-off or landing."""
    word = SIDE_WORDS[side]
    governs = "Of the manual; goes before the physics; blank: the physics"
    return (
        Input(f"{side}_manual_head", f"Manual, {word.lower()}: each knot of headwind takes off", "%/kt", "card", governs),
        Input(f"{side}_manual_tail", f"Manual, {word.lower()}: each knot of tailwind adds", "%/kt", "card", governs),
        Input(f"{side}_manual_dry", f"Manual, {word.lower()}: dry grass adds, of the roll", "%", "card", governs),
        Input(f"{side}_manual_wet", f"Manual, {word.lower()}: wet grass adds, of the roll", "%", "card", governs),
    )
