"""Speed and memory of the field computation, printed as tables of ratios. Not collected by pytest.

Run: ``python -m tests.bench.fields --help``.
"""
