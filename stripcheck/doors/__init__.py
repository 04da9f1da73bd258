"""Doors: the same functions in the cells of Excel, Calc, and any spreadsheet that knows LAMBDA, from one registry."""
