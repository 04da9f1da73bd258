"""The type that equations speak of: a float, a NumPy array, or anything else that answers NumPy's protocols."""

from __future__ import annotations

from typing import Any

# A float, an array, or a cell expression (see stripcheck/sheet/cell.py). NumPy's protocols are dynamic, so a
# narrower static type would have to be cast away at every line of every equation.
Number = Any
