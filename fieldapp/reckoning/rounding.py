"""The one rounding of the project: half up, away from zero, on the decimal digits that a person would see.

Neither Python's `round` (half to even) nor format specifiers (binary halves) agree with what people and the phone's
JavaScript do; nothing else in the project rounds.
"""

from decimal import ROUND_HALF_UP, Decimal
from math import isfinite
from typing import Final

from fieldapp.reckoning.units import MM_PER_INCH

_QUANTA: Final = tuple(Decimal(1).scaleb(-places) for places in range(10))


def half_up(value: float, places: int = 0) -> Decimal:
    """Round half up to a number of decimal places (0 to 9), by the shortest decimal that stands for the float.

    Raises:
        ValueError: where value is not finite.
    """
    if not isfinite(value):
        raise ValueError(f"only finite numbers can be rounded, found {value}")
    rounded = Decimal(repr(float(value))).quantize(_QUANTA[places], ROUND_HALF_UP)
    return abs(rounded) if rounded.is_zero() else rounded


def sixteenths(depth_mm: float) -> int:
    """A length in whole sixteenths of an inch, half up. [1/16 in]"""
    # Nine places first, so that 3 in typed as 76.2 mm is exactly 48 sixteenths and not a hair less.
    return int(half_up(float(half_up(depth_mm / MM_PER_INCH * 16.0, 9))))
