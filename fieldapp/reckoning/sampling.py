"""What a sample supports: bounds by published methods, exact and short enough to stand in two languages."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import atan, comb, cos, pi, sin, sqrt

CONFIDENCE = 0.95


def t_probability(t: float, degrees: int) -> float:
    """P(T <= t) of Student's t for t >= 0 and whole degrees of freedom.

    Source: Abramowitz and Stegun, Handbook of Mathematical Functions, 26.7.3 (odd) and 26.7.4 (even): A(t|n), which is
    P(|T| <= t), as a finite series in theta = atan(t / sqrt(n)).
    """
    theta = atan(t / sqrt(degrees))
    cos2 = cos(theta) ** 2
    if degrees % 2:
        term = cos(theta)
        series = 0.0
        for k in range(1, degrees - 1, 2):
            series += term
            term *= cos2 * (k + 1) / (k + 2)
        both = (theta + sin(theta) * series) * 2.0 / pi
    else:
        term = 1.0
        series = 0.0
        for k in range(0, degrees - 1, 2):
            series += term
            term *= cos2 * (k + 1) / (k + 2)
        both = sin(theta) * series
    return 0.5 + both / 2.0


@lru_cache(maxsize=256)
def t_quantile(probability: float, degrees: int) -> float:
    """t with P(T <= t) = probability (0.5 to less than 1), by bisection of `t_probability`.

    Raises:
        ValueError: outside these ranges.
    """
    if not 0.5 <= probability < 1.0 or degrees < 1:
        raise ValueError(f"probability 0.5 to 1 and at least 1 degree of freedom, found {probability}, {degrees}")
    low, high = 0.0, 1.0
    while t_probability(high, degrees) < probability:
        high *= 2.0
    # Forty-eight halvings leave 1e-14 of the bracket; each costs a series as long as half the degrees of freedom.
    for _ in range(48):
        middle = (low + high) / 2.0
        if t_probability(middle, degrees) < probability:
            low = middle
        else:
            high = middle
    return (low + high) / 2.0


@dataclass(slots=True)  # not frozen: one is made for every bay
class SampledBay:
    """A bay that was read: its area [m2], mean depth [mm], within-bay variance [mm2] (None with one point) and points."""

    area_m2: float
    mean_mm: float
    variance_mm2: float | None
    points: int


def cluster_variance(bays: Sequence[SampledBay], bays_total: int) -> tuple[float, float]:
    """Variance of the area-weighted mean depth of a surface read by bays, between and within them. [mm2], [mm2]

        between = (1 - n/N) [ sum( e_b^2 ) / (n - 1) ] / n,  e_b = w_b (m_b - m),  w_b = A_b / mean(A)
        within  = (n/N) sum( w_b^2 s_b^2 / k_b ) / n^2

    Source: two-stage (cluster) sampling with finite population correction, e.g. Cochran, Sampling Techniques, 3rd
    edition, chapters 9A and 11; from memory.
    """
    n = len(bays)
    area = 0.0
    weighted = 0.0
    for bay in bays:
        area += bay.area_m2
        weighted += bay.area_m2 * bay.mean_mm
    mean_area = area / n
    mean_mm = weighted / area
    squares = 0.0
    within = 0.0
    for bay in bays:
        weight = bay.area_m2 / mean_area
        squares += (weight * (bay.mean_mm - mean_mm)) ** 2
        if bay.variance_mm2 is not None:
            within += weight * weight * bay.variance_mm2 / bay.points
    read_share = n / bays_total
    between = (1.0 - read_share) * squares / (n - 1) / n
    return between, read_share * within / (n * n)


def mean_lower_bound_mm(bays: Sequence[SampledBay], bays_total: int) -> float | None:
    """One-sided 95 % lower bound of a surface's mean depth, from the bays read. [mm]

        m - t(0.95, n - 1) sqrt(between + within)

    None under two bays, and where all bays are read but one of them at a single point (nothing then tells how depth
    varies inside it).
    """
    n = len(bays)
    if n < 2 or (n >= bays_total and any(bay.variance_mm2 is None for bay in bays)):
        return None
    between, within = cluster_variance(bays, bays_total)
    area = 0.0
    weighted = 0.0
    for bay in bays:
        area += bay.area_m2
        weighted += bay.area_m2 * bay.mean_mm
    return weighted / area - t_quantile(CONFIDENCE, n - 1) * sqrt(between + within)


@lru_cache(maxsize=1024)
def short_bays_at_most(bays_total: int, bays_read: int, bays_short: int) -> int:
    """The most bays of a surface that can still be short when so many of a random sample were (95 %, one-sided, exact).

    The largest D with P(X <= x) > 0.05, X hypergeometric: n bays drawn from N of which D are short.

    Raises:
        ValueError: where more bays are read than there are, or more are short than read.
    """
    if not 0 <= bays_short <= bays_read <= bays_total:
        raise ValueError(f"needs 0 <= short <= read <= total, found {bays_short}, {bays_read}, {bays_total}")

    def still_possible(short_in_all: int) -> bool:
        # Whole numbers throughout: 20 P(X <= x) > 1, without dividing. Each term follows from the one before.
        good = bays_total - short_in_all
        found = max(0, bays_read - good)
        term = comb(short_in_all, found) * comb(good, bays_read - found)
        ways = term
        while found < min(bays_short, short_in_all):
            term = term * (short_in_all - found) * (bays_read - found) // ((found + 1) * (good - bays_read + found + 1))
            found += 1
            ways += term
        return 20 * ways > in_all

    in_all = comb(bays_total, bays_read)
    low, high = bays_short, bays_total - (bays_read - bays_short)
    while low < high:
        middle = (low + high + 1) // 2
        if still_possible(middle):
            low = middle
        else:
            high = middle - 1
    return low


@dataclass(frozen=True, slots=True)
class Agreement:
    """How two sets of readings of the same points agree; all in mm but the count."""

    pairs: int
    bias_mm: float
    sd_mm: float
    lower_mm: float
    upper_mm: float


def limits_of_agreement(differences_mm: Sequence[float]) -> Agreement | None:
    """Mean difference and the limits bias -+ 1.96 sd between which most differences lie; None under two pairs. [mm]

    Source: Bland and Altman, Measuring agreement in method comparison studies, Stat. Methods Med. Res. 8 (1999) 135-160.
    """
    pairs = len(differences_mm)
    if pairs < 2:
        return None
    total = 0.0
    for difference in differences_mm:
        total += difference
    bias = total / pairs
    squares = 0.0
    for difference in differences_mm:
        squares += (difference - bias) ** 2
    sd = sqrt(squares / (pairs - 1))
    return Agreement(pairs, bias, sd, bias - 1.96 * sd, bias + 1.96 * sd)
