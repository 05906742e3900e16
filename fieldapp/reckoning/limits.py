"""The one place where a figure is held against a limit.

A depth meets a limit when it is no more than a twentieth of a millimetre under it: that absorbs the conversion of inches
to millimetres (3 x 25.4 is 76.19999999999999 in floating point) and nothing that a probe could tell. All other figures
meet within one part in 10^9, which absorbs the rounding of the arithmetic alone.
"""

from typing import Final

DEPTH_TOLERANCE_MM: Final = 0.05
RELATIVE_TOLERANCE: Final = 1e-9


def least_meeting_mm(limit_mm: float) -> float:
    """The least depth that still meets a limit; for loops over many points. [mm]"""
    return limit_mm - DEPTH_TOLERANCE_MM


def depth_meets(depth_mm: float, limit_mm: float) -> bool:
    """True where a depth reaches a limit. [mm]"""
    return depth_mm >= least_meeting_mm(limit_mm)


def depth_over(depth_mm: float, limit_mm: float) -> bool:
    """True where a depth passes a greatest depth. [mm]"""
    return depth_mm > limit_mm + DEPTH_TOLERANCE_MM


def at_least(value: float, limit: float) -> bool:
    """True where a figure other than a depth reaches a lower limit."""
    return value >= limit - abs(limit) * RELATIVE_TOLERANCE


def at_most(value: float, limit: float) -> bool:
    """True where a figure other than a depth keeps to an upper limit."""
    return value <= limit + abs(limit) * RELATIVE_TOLERANCE
