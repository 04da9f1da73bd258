"""Labels of the workbook's pages that are not those of an input: what writes a page and what reads one share them."""

from __future__ import annotations

PROPELLER, ENGINE = "Propeller", "Engine"
FLAP_HEADER = ("Setting", "Deflection [°]", "", "Deflection, SI", "Uses", "Stall speed [kt]", "At mass [kg]", "Drag added",
               "Greatest lift coefficient")  # fmt: skip
FLAP_LEAST, FLAP_MOST = "Least deflection", "Most deflection"  # the rows that close the flap table
GROUND_HEADER = ("Ground", "Rolling", "Braking", "Take-off corr.", "Source of the coefficients", "Landing corr.")
