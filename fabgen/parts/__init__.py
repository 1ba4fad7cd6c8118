"""From a Feed to parts: flat contours, bends, wire paths, solids. One part, one file, one public function.

Depends on: units, errors, stock, theory, job, sizing.records.
"""
