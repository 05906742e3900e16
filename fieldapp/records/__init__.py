"""Records: what a record is, what is refused and why, in which order they stand, and the job they fold to.

This folder is pure. It may not read files, clocks, networks or databases, nor draw random numbers; of this project it
imports only the reckoning. A test reads every import to prove it.
"""
