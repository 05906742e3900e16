"""Shares of a bay's area that go with the points of its grid."""

import itertools
from collections.abc import Sequence


def strip_shares(at_mm: Sequence[float] | None, count: int, length_mm: float) -> tuple[float, ...]:
    """Shares of a length for points along it; they add up to 1.

    Equal where no positions are given. Otherwise each point's strip reaches half way to the next point, and the outer ones
    to the ends (nearest-point strips; with points on both ends these are the weights of the trapezoid rule).

    Args:
        at_mm: Rising positions of the points from one end, or None. [mm]
        count: How many points there are.
        length_mm: The whole length. [mm]
    """
    if at_mm is None:
        return (1.0 / count,) * count
    bounds = [0.0, *((a + b) / 2.0 for a, b in itertools.pairwise(at_mm)), length_mm]
    return tuple((end - start) / length_mm for start, end in itertools.pairwise(bounds))


def point_areas_m2(area_m2: float, row_shares: Sequence[float], col_shares: Sequence[float]) -> tuple[float, ...]:
    """Areas of the points of a bay, row by row from the top, left to right; they add up to the bay's area. [m2]"""
    return tuple(area_m2 * row * col for row in row_shares for col in col_shares)
