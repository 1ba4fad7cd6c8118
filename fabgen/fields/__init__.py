"""The moment method: surfaces, mesh, edge functions, kernel, system, far field, sweep. SI units inside.

Depends on: units, errors, theory.
"""
