"""The report: what is said (`model` and its makers: pure, every number already text) and how it is drawn (`drawing`).

The makers may not read files or clocks, and import only reckoning and records. The drawing computes nothing; it alone
imports reportlab. A test reads every import to prove it.
"""
