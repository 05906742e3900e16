"""What a sample supports: Student's t, the hypergeometric bound, cluster sampling and agreement, against scipy and others."""

import math
from collections.abc import Sequence
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.stats import hypergeom
from scipy.stats import t as student_t
from statsmodels.stats.proportion import proportion_confint

from fieldapp.reckoning.sampling import (
    SampledBay,
    cluster_variance,
    limits_of_agreement,
    mean_lower_bound_mm,
    short_bays_at_most,
    t_probability,
    t_quantile,
)

# --- Student's t -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("probability", [0.55, 0.75, 0.9, 0.95, 0.975, 0.99, 0.995, 0.9995])
def test_t_is_scipy_s_for_all_samples_to_two_hundred_and_one_bays(probability: float) -> None:
    degrees = np.arange(1, 201)
    expected = student_t.ppf(probability, degrees)
    ours = [t_quantile(probability, int(n)) for n in degrees]
    assert ours == pytest.approx(list(expected), rel=1e-9)


@pytest.mark.parametrize("degrees", [1, 2, 3, 4, 5, 9, 10, 29, 30, 101, 400, 1999])
def test_the_probability_of_t_is_scipy_s(degrees: int) -> None:
    at = np.linspace(0.0, 12.0, 49)
    ours = [t_probability(float(t), degrees) for t in at]
    assert ours == pytest.approx(list(student_t.cdf(at, degrees)), abs=1e-12)


@pytest.mark.parametrize(
    ("probability", "degrees", "printed"),
    # As tables in textbooks print it (from memory).
    [(0.95, 1, 6.314), (0.95, 4, 2.132), (0.95, 9, 1.833), (0.95, 19, 1.729), (0.975, 4, 2.776), (0.95, 120, 1.658)],
)
def test_t_is_what_textbooks_print(probability: float, degrees: int, printed: float) -> None:
    assert t_quantile(probability, degrees) == pytest.approx(printed, abs=0.0005)


def test_t_of_one_half_is_nothing() -> None:
    assert t_quantile(0.5, 7) == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize(
    ("probability", "degrees"), [(0.49, 5), (1.0, 5), (1.1, 5), (-0.1, 5), (math.nan, 5), (0.95, 0), (0.95, -1)]
)
def test_t_outside_its_range_is_refused(probability: float, degrees: int) -> None:
    with pytest.raises(ValueError, match="degree of freedom"):
        t_quantile(probability, degrees)


# --- how many bays can still be short --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("total", "read", "short", "at_most"),
    [
        # 20 of 60 bays read, none short: P(none seen) is 0.0767 with 6 short and 0.0483 with 7 (computed with scipy).
        (60, 20, 0, 6),
        # Only all of 60 supports 'every bay'.
        (60, 60, 0, 0),
        (60, 60, 4, 4),
        # By hand. One of 20 read, not short: with 18 short P = 2/20 = 0.1, with 19 it is 1/20, which is not more than 5 %.
        (20, 1, 0, 18),
        # One of 21: with 19 short 2/21 = 0.095, with 20 1/21 = 0.0476.
        (21, 1, 0, 19),
        # One of 10 read and short: the other nine can all be short too.
        (10, 1, 1, 10),
        # 19 of 20 read, none short: one short bay would be missed with probability 1/20 exactly, which is not more.
        (20, 19, 0, 0),
        # 18 of 20: with one short 2/20, with two 2 x 1 / (20 x 19) = 0.005.
        (20, 18, 0, 1),
        # Nothing read, nothing known.
        (12, 0, 0, 12),
        (1, 1, 0, 0),
        (1, 0, 0, 1),
        (0, 0, 0, 0),
    ],
)
def test_reading_some_bays_leaves_so_many_that_can_be_short(total: int, read: int, short: int, at_most: int) -> None:
    assert short_bays_at_most(total, read, short) == at_most


def test_for_every_small_surface_the_bound_is_scipy_s() -> None:
    compared = 0
    for total in range(1, 26):
        read, short, in_all = np.meshgrid(
            np.arange(total + 1), np.arange(total + 1), np.arange(total + 1), indexing="ij"
        )
        chance = hypergeom.cdf(short, total, in_all, read)
        # Chances are whole numbers over C(25, 12) = 5.2 million at most, so what is nearer to 1/20 than 1e-9 is 1/20, which
        # is not more than 5 %.
        possible = (chance > 0.05) & (np.abs(chance - 0.05) > 1e-9)
        largest = np.where(possible, in_all, -1).max(axis=2)
        for n in range(total + 1):
            for x in range(n + 1):
                assert short_bays_at_most(total, n, x) == largest[n, x], (total, n, x)
                compared += 1
    # Sum over N of (N + 1)(N + 2)/2 for N = 1 to 25, that is C(28, 3) - 1.
    assert compared == 3275


@settings(max_examples=200, deadline=None)
@given(data=st.data(), total=st.integers(26, 400))
def test_for_surfaces_of_any_size_the_bound_is_scipy_s(data: st.DataObject, total: int) -> None:
    read = data.draw(st.integers(1, total), label="read")
    short = data.draw(st.one_of(st.integers(0, min(5, read)), st.integers(0, read)), label="short")
    in_all = np.arange(total + 1)
    chance = hypergeom.cdf(short, total, in_all, read)
    assume(np.abs(chance - 0.05).min() > 1e-9)
    assert short_bays_at_most(total, read, short) == in_all[chance > 0.05].max()


@settings(max_examples=60, deadline=None)
@given(total=st.integers(1, 60), data=st.data())
def test_the_bound_is_exact_in_whole_numbers(total: int, data: st.DataObject) -> None:
    # Fractions: P(X <= x) = sum over k of C(D, k) C(N - D, n - k) / C(N, n), from its definition.
    read = data.draw(st.integers(0, total))
    short = data.draw(st.integers(0, read))

    def chance(in_all: int) -> Fraction:
        ways = sum(math.comb(in_all, k) * math.comb(total - in_all, read - k) for k in range(short + 1))
        return Fraction(ways, math.comb(total, read))

    at_most = short_bays_at_most(total, read, short)
    assert chance(at_most) > Fraction(1, 20)
    assert at_most == total or chance(at_most + 1) <= Fraction(1, 20)


@pytest.mark.parametrize(
    ("read", "short", "upper"),
    [
        # One-sided 95 % upper limits of Clopper and Pearson; for none short they are 1 - 0.05^(1/n). Computed with scipy.
        (10, 0, 0.2589),
        (20, 0, 0.1391),
        (30, 0, 0.0950),
        (60, 0, 0.0487),
        (100, 0, 0.0295),
        # NIST/SEMATECH e-Handbook 7.2.4.2: 4 of 20, 90 % two-sided.
        (20, 4, 0.4010),
    ],
)
def test_on_a_large_surface_the_bound_is_clopper_and_pearson_s(read: int, short: int, upper: float) -> None:
    _, limit = proportion_confint(short, read, alpha=0.10, method="beta")
    assert limit == pytest.approx(upper, abs=5e-5)
    # The finite surface's bound rises towards it; at 20,000 bays they agree to half a thousandth.
    shares = [short_bays_at_most(total, read, short) / total for total in (200, 2000, 20000)]
    assert shares == sorted(shares)
    assert shares[-1] <= limit
    assert shares[-1] == pytest.approx(limit, abs=5e-4)


@pytest.mark.parametrize("counts", [(10, 11, 0), (10, 5, 6), (10, 5, -1), (10, -1, 0), (-1, 0, 0)])
def test_more_read_than_there_are_or_more_short_than_read_is_refused(counts: tuple[int, int, int]) -> None:
    with pytest.raises(ValueError, match="short <= read <= total"):
        short_bays_at_most(*counts)


# --- the mean of a surface -------------------------------------------------------------------------------------------

#: Five bays of four points, of forty bays.
FIVE_BAYS = (
    (2.0, 2.1, 1.9, 2.0),
    (2.6, 2.7, 2.5, 2.6),
    (1.6, 1.7, 1.5, 1.6),
    (2.3, 2.2, 2.4, 2.3),
    (2.9, 3.0, 2.8, 2.9),
)
#: Five bays of unequal size, and the sum of depths in each.
SIZES = (4.0, 4.0, 2.0, 6.0, 4.0)
TOTALS = (8.0, 10.4, 3.2, 13.8, 11.6)


def sampled(bays: Sequence[Sequence[float]], areas: Sequence[float] | None = None) -> list[SampledBay]:
    """Bays with numpy's means and sample variances."""
    return [
        SampledBay(
            area_m2=area,
            mean_mm=float(np.mean(depths)),
            variance_mm2=float(np.var(depths, ddof=1)) if len(depths) > 1 else None,
            points=len(depths),
        )
        for depths, area in zip(bays, areas or [1.0] * len(bays), strict=True)
    ]


def test_points_of_one_bay_are_no_independent_sample() -> None:
    # Computed with numpy: standard error between bays 0.22672, with finite population correction (5 of 40) 0.21207; the
    # twenty points taken as independent would give 0.10528.
    between, within = cluster_variance(sampled(FIVE_BAYS), 40)
    assert math.sqrt(between) == pytest.approx(0.21207, abs=5e-6)
    # Within a bay s^2 = 0.02/3; (5/40) x 5 x (0.02/3/4) / 25 = 4.1667e-5.
    assert within == pytest.approx(4.16667e-5, rel=1e-5)
    without_correction, _ = cluster_variance(sampled(FIVE_BAYS), 10**9)
    assert math.sqrt(without_correction) == pytest.approx(0.22672, abs=5e-6)


def test_a_mean_over_the_limit_is_not_yet_shown_to_be_over_it() -> None:
    # Mean 2.28, limit 2.0. t(0.95, 4) = 2.131847 (scipy); sqrt(0.21207^2 + 4.1667e-5) = 0.21217; 2.28 - 0.45231 = 1.8277.
    # Points taken as independent would give 2.28 - 1.729 x 0.10528 = 2.098 and 'prove' it.
    found = mean_lower_bound_mm(sampled(FIVE_BAYS), 40)
    assert found == pytest.approx(1.8277, abs=1e-4)
    # Nearly all between bays: 2.28 - 2.131847 x 0.22672 = 1.79667 where the surface is endless.
    assert mean_lower_bound_mm(sampled(FIVE_BAYS), 10**9) == pytest.approx(1.7967, abs=1e-4)


def test_unequal_bays_weigh_by_their_size() -> None:
    # Sizes 4, 4, 2, 6, 4, totals 8.0, 10.4, 3.2, 13.8, 11.6: mean 47/20 = 2.35, not the 2.28 of the bays' means. Ratio
    # estimate with finite population correction: residuals -1.4, 1.0, -1.5, -0.3, 2.2, squares 10.14; sqrt(0.875/5 x 10.14/4)
    # / 4 = 0.16651.
    bays = [SampledBay(area, total / area, None, 1) for area, total in zip(SIZES, TOTALS, strict=True)]
    between, within = cluster_variance(bays, 40)
    assert math.sqrt(between) == pytest.approx(0.16651, abs=5e-6)
    assert within == 0.0
    assert mean_lower_bound_mm(bays, 40) == pytest.approx(2.35 - 2.131847 * 0.16651, abs=2e-5)


def test_where_all_bays_are_read_only_the_spread_within_them_is_left() -> None:
    # n = N = 5, equal areas: between 0; within 5 x (0.02/3/4) / 25 = 3.3333e-4; 2.28 - 2.131847 x 0.0182574 = 2.24108.
    between, within = cluster_variance(sampled(FIVE_BAYS), 5)
    assert between == 0.0
    assert within == pytest.approx(3.33333e-4, rel=1e-5)
    assert mean_lower_bound_mm(sampled(FIVE_BAYS), 5) == pytest.approx(2.24108, abs=1e-5)


def test_within_bays_the_weights_are_squared() -> None:
    # Areas 1 and 3: weights 0.5 and 1.5. s^2 = 2 at 2 points each (depths 9, 11 and 19, 21), n = N = 2:
    # (0.25 x 2/2 + 2.25 x 2/2) / 4 = 0.625. Mean (10 + 60)/4 = 17.5; t(0.95, 1) = 6.313752 (scipy).
    bays = sampled(((9.0, 11.0), (19.0, 21.0)), (1.0, 3.0))
    assert cluster_variance(bays, 2) == pytest.approx((0.0, 0.625), rel=1e-12)
    assert mean_lower_bound_mm(bays, 2) == pytest.approx(17.5 - 6.313752 * math.sqrt(0.625), abs=1e-5)
    # Of 4 bays: e = 0.5 x -7.5 and 1.5 x 2.5, squares 28.125; between 0.5 x 28.125 / 2 = 7.03125; within 0.3125.
    assert cluster_variance(bays, 4) == pytest.approx((7.03125, 0.3125), rel=1e-12)


@pytest.mark.parametrize(
    ("bays", "total"),
    [
        (((76.0, 80.0),), 10),  # one bay tells nothing of how bays differ
        (((76.0, 80.0),), 1),
        (((76.0,), (80.0, 82.0)), 2),  # all bays read, one at a single point: nothing tells how depth varies inside it
    ],
)
def test_too_few_bays_or_points_support_no_bound(bays: tuple[tuple[float, ...], ...], total: int) -> None:
    assert mean_lower_bound_mm(sampled(bays), total) is None


def test_single_points_support_a_bound_while_bays_are_left_unread() -> None:
    # 76 and 80 of many bays: mean 78, standard error 2, t(0.95, 1) = 6.313752.
    found = mean_lower_bound_mm(sampled(((76.0,), (80.0,))), 10**9)
    assert found == pytest.approx(78.0 - 2.0 * 6.313752, abs=1e-4)


def test_even_bays_support_their_own_mean() -> None:
    assert mean_lower_bound_mm(sampled(((80.0, 80.0), (80.0, 80.0))), 9) == 80.0


# --- agreement -------------------------------------------------------------------------------------------------------


def test_bland_and_altman_s_peak_flow_meters_agree_as_published() -> None:
    # Bland and Altman 1986, first readings of 17 people by two meters in l/min; all pairs from memory. The paper prints
    # -2.1 and 38.8 and, with 2 sd, -79.7 to 75.5; with 1.96 sd, as in the paper of 1999, -78.10 to 73.86.
    large = (494, 395, 516, 434, 476, 557, 413, 442, 650, 433, 417, 656, 267, 478, 178, 423, 427)
    small = (512, 430, 520, 428, 500, 600, 364, 380, 658, 445, 432, 626, 260, 477, 259, 350, 451)
    found = limits_of_agreement([float(a - b) for a, b in zip(large, small, strict=True)])
    assert found is not None
    assert found.pairs == 17
    assert found.bias_mm == pytest.approx(-2.1, abs=0.05)
    assert found.sd_mm == pytest.approx(38.8, abs=0.05)
    assert found.bias_mm - 2.0 * found.sd_mm == pytest.approx(-79.7, abs=0.1)
    assert found.bias_mm + 2.0 * found.sd_mm == pytest.approx(75.5, abs=0.1)
    assert (found.lower_mm, found.upper_mm) == pytest.approx((-78.10, 73.86), abs=0.005)


def test_a_probe_reads_deeper_than_cores_by_its_bias() -> None:
    # An invented example; computed with numpy: bias 1.8, sd 0.9487, limits -0.0594 to 3.6594.
    probe = (51.0, 64.0, 76.0, 48.0, 70.0, 83.0, 57.0, 61.0, 79.0, 66.0)
    cores = (49.5, 62.0, 75.0, 47.5, 67.0, 80.5, 56.5, 58.5, 77.5, 63.0)
    found = limits_of_agreement([a - b for a, b in zip(probe, cores, strict=True)])
    assert found is not None
    assert found.bias_mm == pytest.approx(1.8, abs=5e-5)
    assert found.sd_mm == pytest.approx(0.9487, abs=5e-5)
    assert (found.lower_mm, found.upper_mm) == pytest.approx((-0.0594, 3.6594), abs=5e-5)


def test_two_pairs_are_the_fewest_that_agree_or_not() -> None:
    assert limits_of_agreement([]) is None
    assert limits_of_agreement([1.0]) is None
    found = limits_of_agreement([1.0, 3.0])
    # Mean 2, sd sqrt(2) = 1.414214, limits 2 -+ 2.771859.
    assert found is not None
    assert (found.pairs, found.bias_mm) == (2, 2.0)
    assert (found.lower_mm, found.upper_mm) == pytest.approx((-0.771859, 4.771859), abs=1e-6)


@given(differences=st.lists(st.floats(-50.0, 50.0), min_size=2, max_size=40))
def test_bias_and_spread_are_numpy_s(differences: list[float]) -> None:
    found = limits_of_agreement(differences)
    assert found is not None
    assert found.bias_mm == pytest.approx(float(np.mean(differences)), rel=1e-9, abs=1e-9)
    assert found.sd_mm == pytest.approx(float(np.std(differences, ddof=1)), rel=1e-9, abs=1e-9)
    assert found.upper_mm - found.lower_mm == pytest.approx(2 * 1.96 * found.sd_mm, rel=1e-9, abs=1e-9)
