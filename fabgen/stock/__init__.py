"""Tables of metals, linings, wire, sheet, connectors, screws, tolerances and plastics; a source per row.

Depends on: units, errors.
"""
