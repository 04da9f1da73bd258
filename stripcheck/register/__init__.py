"""Runway lists in: any spreadsheet or text file of strips becomes runway directions ready to be assessed."""

from stripcheck.register.directions import Directions, LeftOut, unknown_surfaces
from stripcheck.register.reader import read_list

__all__ = ["Directions", "LeftOut", "read_list", "unknown_surfaces"]
