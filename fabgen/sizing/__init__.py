"""From a job to a Feed: every size, rounded, with its predicted behaviour.

Depends on: units, errors, stock, theory, job, fields.
"""
