"""One file format a module, one small interface: dxf, step, stl, threemf, pdf, csv, touchstone, record.

Depends on: drawing, parts and what they may use.
"""
