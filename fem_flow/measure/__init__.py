"""Numbers from fields, one short file a family: every figure with its unit, its definition and what it is of.

A new figure is one function that yields `Number`s; it is listed in `FAMILIES` of `fem_flow.measure.all`, and its name, unit and
definition stand in `fem_flow.case.quantities`.
"""
