"""The scenario of the demonstration: the strips of the Lantern Range in lantern-range.csv.

All of it is invented: the district, the strips, their figures, and the people who look after them. Identifiers begin
with X, which begins no ICAO location indicator (from memory), so that none is taken for a real place.
"""
