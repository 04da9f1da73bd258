"""The caution that stands wherever a verdict does; by itself, so that the command line can show it without NumPy."""

CAUTION = (
    "Planning aid only. The approved flight manual, the rules of the local authority and the pilot in command decide."
)
