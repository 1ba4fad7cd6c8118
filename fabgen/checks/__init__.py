"""Findings: what can go wrong between the sizes and a working feed, with limit, source and cure.

Depends on: units, errors, stock, theory, fields, job, sizing, parts.
"""
