"""The reckoning: formulas, statistics, published tables, units, rounding and the words for their results.

This folder is pure. It may not read files, clocks, networks or databases, draw random numbers or log,
and it imports nothing of this project from outside itself. A test reads every import to prove it.
"""
