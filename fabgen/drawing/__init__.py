"""One neutral drawing model: paths, arcs, dimensions, text, views, sheets.

Depends on: units, errors, stock, theory, job, sizing.records, parts, checks.records.
"""
