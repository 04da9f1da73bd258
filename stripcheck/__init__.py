"""stripcheck: can one aeroplane get in, and out again, of short, sloping, unpaved strips on a given day?"""

from __future__ import annotations

from typing import Any

__version__ = "0.1.0"
__all__ = ["assess", "load_card", "load_rules", "read_day"]


def __getattr__(name: str) -> Any:
    """Import the Python door only when it is asked for, so that the command line starts at once."""
    homes = {"assess": "assessment", "load_card": "card", "load_rules": "rules", "read_day": "day"}
    if name not in homes:
        raise AttributeError(f"module 'stripcheck' has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(f"stripcheck.{homes[name]}"), name)
