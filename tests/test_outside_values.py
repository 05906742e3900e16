"""Formulas against values from outside the project; the source stands beside each."""

from collections.abc import Callable, Sequence
from fractions import Fraction
from math import log, pi, sqrt

import numpy as np
import pint
import pytest
from scipy import stats
from statsmodels.stats.proportion import proportion_confint

from fieldapp.reckoning import units
from fieldapp.reckoning.density import cylinder_m3, density_kg_m3, plus_minus_kg_m3
from fieldapp.reckoning.limits import depth_meets
from fieldapp.reckoning.resistance import (
    PerMetre,
    Table,
    delivered_rsi,
    films_rsi,
    parallel_u,
    steel_frame_rsi,
    tapered_u,
    wood_frame_u,
)
from fieldapp.reckoning.rounding import half_up, sixteenths
from fieldapp.reckoning.sampling import (
    SampledBay,
    cluster_variance,
    limits_of_agreement,
    mean_lower_bound_mm,
    short_bays_at_most,
    t_probability,
    t_quantile,
)
from fieldapp.reckoning.strips import strip_shares
from fieldapp.reckoning.units import MM_PER_INCH, NG_M_PER_PERM_INCH, NG_PER_PERM, RSI_PER_R
from fieldapp.reckoning.vapour import permeance_ng, vapour_class

# --- units ---------------------------------------------------------------------------------------------------------------

pint_units: pint.UnitRegistry[float] = pint.UnitRegistry()


@pytest.mark.parametrize(
    ("ours", "theirs", "to"),
    [
        (units.RSI_PER_R, "hour * foot**2 * delta_degF / Btu", "meter**2 * kelvin / watt"),
        (units.NG_PER_PERM, "grain / hour / foot**2 / inch_Hg_32F", "nanogram / second / meter**2 / pascal"),
        (units.KG_M3_PER_PCF, "pound / foot**3", "kilogram / meter**3"),
        (units.M3_PER_BOARD_FOOT, "foot**2 * inch", "meter**3"),
        (units.M2_PER_FT2, "foot**2", "meter**2"),
        (units.PA_PER_PSI, "psi", "pascal"),
        (units.KG_PER_LB, "pound", "kilogram"),
    ],
)
def test_units_agree_with_an_independent_library(ours: float, theirs: str, to: str) -> None:
    # pint. Its Btu differs from the International Table Btu by 1.4e-7, so 1e-6.
    pint_units.define("inch_Hg_32F = 13595.1 * kilogram / meter**3 * 9.80665 * meter / second**2 * 0.0254 * meter")
    assert float(pint_units.Quantity(1, theirs).to(to).magnitude) == pytest.approx(ours, rel=1e-6)


@pytest.mark.parametrize(
    ("ours", "value"),
    [
        (units.RSI_PER_R, 0.176110184),  # scipy.constants, International Table Btu
        (units.NG_PER_PERM, 57.21349467),  # closed form with the conventional inch of mercury at 0 C
        (units.NG_M_PER_PERM_INCH, 1.453222765),
        (units.KG_M3_PER_PCF, 16.018463374),
        (units.M3_PER_BOARD_FOOT, 0.002359737216),  # 1/12 ft3
    ],
)
def test_constants_to_the_digits_that_are_published(ours: float, value: float) -> None:
    assert ours == pytest.approx(value, rel=5e-9)


def test_rsi_3_5_is_not_r_20() -> None:
    # 3.5 / 0.176110184 = 19.874, arithmetic; the metric label flatters.
    assert pytest.approx(19.87392, abs=5e-6) == 3.5 / RSI_PER_R


def test_a_difference_of_temperatures_has_no_offset() -> None:
    # 2.778 K = 5 F degrees, 3 C above = 5.4 F degrees above; arithmetic.
    assert units.fahrenheit_difference_from_k(3.0) == pytest.approx(5.4)
    assert units.fahrenheit_from_c(3.0) == pytest.approx(37.4)


def test_a_thousand_pounds_yield_six_thousand_board_feet_at_two_pounds_a_cubic_foot() -> None:
    # Trade posts and arithmetic: bf = lb x 12 / pcf. 2.0 -> 6000; in place 2.4 -> 5000, the yield by core density flatters.
    for pcf, board_feet in ((2.0, 6000), (2.4, 5000), (2.5, 4800), (0.5, 24000)):
        found = units.board_feet_per_set(1000 * units.KG_PER_LB, pcf * units.KG_M3_PER_PCF)
        assert found == pytest.approx(board_feet, rel=1e-9)


# --- rounding and limits ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "places", "text"),
    [
        (12.5, 0, "13"),  # half up, as people round; half to even gives 12
        (6.25, 1, "6.3"),  # likewise 6.2
        (0.125, 2, "0.13"),  # a format specifier gives 0.12
        (2.5, 0, "3"),
        (-0.04, 1, "0.0"),  # no negative nothing
        (19.6, 0, "20"),
    ],
)
def test_figures_are_rounded_half_up(value: float, places: int, text: str) -> None:
    assert str(half_up(value, places)) == text


def test_three_inches_typed_meet_three_inches_asked_in_millimetres() -> None:
    # 3 * 25.4 is 76.19999999999999 in floating point (IEEE 754), a hair under 76.2.
    assert 3 * MM_PER_INCH < 76.2
    assert depth_meets(3 * MM_PER_INCH, 76.2)
    assert not depth_meets(76.1, 76.2)


def test_every_sixteenth_to_twelve_inches_meets_itself_however_it_was_converted() -> None:
    for steps in range(1, 193):
        exact = Fraction(steps, 16)
        there_and_back = float(exact) * MM_PER_INCH / MM_PER_INCH * MM_PER_INCH
        for typed in (float(exact) * MM_PER_INCH, there_and_back):
            assert depth_meets(typed, float(exact * Fraction(254, 10)))
            assert sixteenths(typed) == steps


# --- ISO 6946 --------------------------------------------------------------------------------------------------------------

#: R0, R1, rectangle, triangle thickest at its apex, triangle thinnest at its apex: U in W/(m2K). ISO 6946:2007 annex C (annex E
#: in :2017); formulas from memory, values computed twice from outside this project (closed form and brute force).
ISO_6946 = [
    (0.50, 2.0, 0.804719, 1.011797, 0.597641),
    (0.20, 1.5, 1.426711, 1.900544, 0.952877),
    (0.14, 4.0, 0.846702, 1.252673, 0.440731),
    (1.00, 0.5, 0.810930, 0.865581, 0.756279),
    (0.30, 3.5, 0.725421, 1.003772, 0.447071),
]


def fine_grid(taper_rsi: float, area_of_strip: Callable[[float], float]) -> tuple[list[float], list[float]]:
    """Depths (in a foam of 1 m2K/W per metre) and areas of many strips across a taper from nothing to taper_rsi."""
    count = 4000
    middles = [(strip + 0.5) / count for strip in range(count)]
    return [taper_rsi * middle * 1000.0 for middle in middles], [area_of_strip(middle) for middle in middles]


@pytest.mark.parametrize(("series", "taper", "rectangle", "thick_apex", "thin_apex"), ISO_6946)
def test_a_fine_grid_over_a_taper_converges_to_the_closed_forms_of_iso_6946(
    series: float, taper: float, rectangle: float, thick_apex: float, thin_apex: float
) -> None:
    shapes = [(rectangle, lambda _: 1.0), (thick_apex, lambda m: 1.0 - m), (thin_apex, lambda m: m)]
    for expected, area_of_strip in shapes:
        depths, areas = fine_grid(taper, area_of_strip)
        assert parallel_u(depths, areas, PerMetre(1.0), series) == pytest.approx(expected, rel=2e-6)
    assert tapered_u(series, taper) == pytest.approx(rectangle, abs=5e-7)
    assert (thick_apex + thin_apex) / 2 == pytest.approx(rectangle, abs=1e-6)


def test_a_wedge_of_foam_from_one_inch_to_three_delivers_less_than_its_mean_depth() -> None:
    # ISO 6946: lambda 0.024, 25.4 -> 76.2 mm, the rest 0.3585: U 0.431747, R 2.3162; at the mean depth it would be U 0.404013.
    foam = PerMetre(1 / 0.024)
    depths = [25.4 + 50.8 * (strip + 0.5) / 2000 for strip in range(2000)]
    assert parallel_u(depths, [1.0] * 2000, foam, 0.3585) == pytest.approx(0.431747, abs=1e-6)
    assert 1 / (0.3585 + foam.rsi(50.8)) == pytest.approx(0.404013, abs=1e-6)


def test_the_tiniest_taper_is_no_trouble() -> None:
    # R1 -> 0: U -> 1/R0 = 2.0; a naive triangular form returns -54.6 here.
    assert tapered_u(0.5, 1e-9) == pytest.approx(2.0, rel=1e-8)
    assert tapered_u(0.5, 0.0) == 2.0


def test_foam_alone_from_one_inch_to_three_at_r6_has_twelve_over_ln_3() -> None:
    # R_eff = 12 / ln 3 = 10.9229 where the mean depth says 12: no films, so a taper on 6 of constant foam.
    assert 1 / (log(3) / 12) == pytest.approx(1 / tapered_u(6.0, 12.0), rel=1e-12)


# --- framing ---------------------------------------------------------------------------------------------------------------

R6_PER_INCH = PerMetre(6.0 * RSI_PER_R / 0.0254)
#: Films 0.17 + 0.68, siding 0.62, OSB 0.62, gypsum 0.45 h ft2 F/Btu: the set that reproduces code U-factors.
SERIES_R = 2.54


@pytest.mark.parametrize(
    ("cavity_r", "framing_in", "more_r", "printed"),
    [
        (13.0, 3.5, 0.0, "0.084"),  # IECC 2021 R402.1.2, wood wall, zones 0-2 (from memory), reproduced by calculation
        (20.0, 5.5, 0.0, "0.060"),  # zone 3
        (20.0, 5.5, 5.0, "0.045"),  # zones 4-8, with R-5 continuous
        (30.0, 7.25, 0.0, "0.045"),  # R-30 in a 2x8
    ],
)
def test_wood_framing_reproduces_the_codes_u_factors_to_the_printed_digit(
    cavity_r: float, framing_in: float, more_r: float, printed: str
) -> None:
    series = (SERIES_R + more_r) * RSI_PER_R
    clear = 1 / (series + cavity_r * RSI_PER_R)
    u = wood_frame_u(clear, 0.25, framing_in * MM_PER_INCH, series)
    assert str(half_up(u * RSI_PER_R, 3)) == printed


def test_r_30_squeezed_into_a_2x6_passes_the_r_table_and_fails_the_u_factor() -> None:
    # 0.04959 > 0.045 (parallel path with 25 % framing; softwood in 5.5 in, from memory).
    series = SERIES_R * RSI_PER_R
    u = wood_frame_u(1 / (series + 30 * RSI_PER_R), 0.25, 5.5 * MM_PER_INCH, series) * RSI_PER_R
    assert u == pytest.approx(0.04959, abs=3e-5)
    assert u > 0.045


@pytest.mark.parametrize(
    ("depth_in", "spacing_in", "cavity_r", "effective_r"),
    [
        # ANSI/ASHRAE/IES 90.1 table A9.2-2; the factor 0.46 at R-13, 16 in was seen quoted, the others are from memory.
        (3.5, 16, 11, 5.5),
        (3.5, 16, 13, 6.0),
        (3.5, 16, 15, 6.4),
        (3.5, 24, 11, 6.6),
        (3.5, 24, 13, 7.2),
        (3.5, 24, 15, 7.8),
        (6, 16, 19, 7.1),
        (6, 16, 21, 7.4),
        (6, 24, 19, 8.6),
        (6, 24, 21, 9.0),
        (8, 16, 25, 7.8),
        (8, 24, 25, 9.6),
        (3.5, 16, 14, 6.2),  # half way between two rows: interpolation is allowed
    ],
)
def test_steel_studs_leave_the_printed_part_of_the_cavitys_r(
    depth_in: float, spacing_in: float, cavity_r: float, effective_r: float
) -> None:
    found = steel_frame_rsi(cavity_r * RSI_PER_R, depth_in * MM_PER_INCH, spacing_in * MM_PER_INCH)
    assert found is not None
    assert found / RSI_PER_R == pytest.approx(effective_r, rel=1e-9)


@pytest.mark.parametrize(
    ("cavity_r", "depth_in", "spacing_in"), [(21, 3.5, 16), (10, 3.5, 16), (13, 4, 16), (13, 3.5, 12)]
)
def test_steel_studs_outside_the_table_get_no_figure(cavity_r: float, depth_in: float, spacing_in: float) -> None:
    # 90.1 appendix A: extrapolation beyond values in a table is not allowed. R-21 foam in 3.5 in is outside.
    assert steel_frame_rsi(cavity_r * RSI_PER_R, depth_in * MM_PER_INCH, spacing_in * MM_PER_INCH) is None


@pytest.mark.parametrize(
    ("assembly", "inside_r", "outside_r"),
    [
        ("wall", 0.68, 0.17),  # ASHRAE 90.1-2016 appendix A
        ("sloped-roof", 0.61, 0.17),
        ("attic-floor", 0.61, 0.17),
        ("floor", 0.92, 0.17),  # heat down; from memory
        ("rim", 0.68, 0.17),
        ("foundation", 0.68, 0.17),
    ],
)
def test_films_are_those_of_still_air_and_winter_wind(assembly: str, inside_r: float, outside_r: float) -> None:
    # Kept to 0.001 m2K/W.
    expected = float(half_up(inside_r * RSI_PER_R, 3)) + float(half_up(outside_r * RSI_PER_R, 3))
    assert films_rsi(assembly) == pytest.approx(expected)
    assert films_rsi(assembly, 0.2, 0.1) == pytest.approx(0.3)


def test_trade_typical_depths_give_trade_typical_r() -> None:
    # Common practice, no source: closed cell about R-6 an inch, open cell about; PNNL's Building America Solution Center
    # shows 3 in closed as R-19 at 6.3 an inch.
    assert PerMetre(6.0 * RSI_PER_R / 0.0254).rsi(76.2) / RSI_PER_R == pytest.approx(18.0)
    assert PerMetre(3.5 * RSI_PER_R / 0.0254).rsi(139.7) / RSI_PER_R == pytest.approx(19.25)
    assert PerMetre(3.5 * RSI_PER_R / 0.0254).rsi(139.7) < PerMetre(6.0 * RSI_PER_R / 0.0254).rsi(88.9)


# --- a maker's table ---------------------------------------------------------------------------------------------------------

#: Depth in, R: 1 -> 5.7, 2 -> 12.0, 3.5 -> 23.1, 5.5 -> 36.7; an invented table of the usual shape.
MAKERS = Table(tuple((d * MM_PER_INCH, r * RSI_PER_R) for d, r in ((1, 5.7), (2, 12.0), (3.5, 23.1), (5.5, 36.7))))


@pytest.mark.parametrize(("depth_in", "r"), [(1, 5.7), (2, 12.0), (3.5, 23.1), (5.5, 36.7), (2.75, 17.55)])
def test_a_makers_table_is_read_by_straight_lines_and_no_inch_is_multiplied(depth_in: float, r: float) -> None:
    # 16 CFR 460.17 forbids multiplying the R of one inch: 5.5 x 5.7 would be 31.35.
    assert MAKERS.rsi(depth_in * MM_PER_INCH) / RSI_PER_R == pytest.approx(r)
    assert not MAKERS.beyond_tested(depth_in * MM_PER_INCH)


@pytest.mark.parametrize(("depth_in", "r"), [(7.5, 36.7 / 5.5 * 7.5), (0.5, 5.7 / 2), (0.0, 0.0)])
def test_outside_the_table_there_is_a_figure_and_a_warning_but_bare_claims_nothing(depth_in: float, r: float) -> None:
    assert MAKERS.rsi(depth_in * MM_PER_INCH) / RSI_PER_R == pytest.approx(r)
    assert MAKERS.beyond_tested(depth_in * MM_PER_INCH) == (depth_in > 0)


# --- vapour ----------------------------------------------------------------------------------------------------------------


def inches(*depths: float) -> list[float]:
    return [depth * MM_PER_INCH for depth in depths]


def test_permeance_of_an_uneven_bay_is_the_mean_of_its_points_permeances_not_that_of_its_mean_depth() -> None:
    # 2.0 perm inch, depths 2.0, 2.2, 1.4, 2.6 in (arithmetic): 1.0267 perm, class III, where the mean depth says 0.9756, II.
    found = permeance_ng(inches(2.0, 2.2, 1.4, 2.6), [1.0] * 4, 2.0 * NG_M_PER_PERM_INCH)
    assert found is not None
    assert found / NG_PER_PERM == pytest.approx(1.0267, abs=5e-5)
    assert vapour_class(found) == "III"
    at_mean = permeance_ng(inches(2.05), [1.0], 2.0 * NG_M_PER_PERM_INCH)
    assert at_mean is not None
    assert at_mean / NG_PER_PERM == pytest.approx(0.9756, abs=5e-5)
    assert vapour_class(at_mean) == "II"


def test_two_inches_are_not_fifty_millimetres() -> None:
    # 2.0 perm inch rated at 2 in is 1.000 perm; sprayed 50 mm it is 25.4 x 2 / 50 = 1.016 perm.
    found = permeance_ng([50.0], [1.0], 2.0 * NG_M_PER_PERM_INCH)
    assert found is not None
    assert found / NG_PER_PERM == pytest.approx(1.016, rel=1e-9)


@pytest.mark.parametrize(
    ("permeance", "expected"),
    [
        # 0.1, 1 and 10 perm (International Residential Code 2021, table R702.7(1)) in ng/(Pa s m2).
        (5.72, "I"),
        (5.73, "II"),
        (57.2, "II"),
        (57.3, "III"),  # 1.0015 perm: at the boundary, and over it
        (58.5, "III"),  # meets a metric 60, and is 1.0225 perm
        (572.0, "III"),
        (573.0, None),
    ],
)
def test_classes_end_at_a_tenth_one_and_ten_perm(permeance: float, expected: str | None) -> None:
    assert vapour_class(permeance) == expected


def test_where_a_point_is_bare_nothing_resists_and_no_permeance_is_given() -> None:
    assert permeance_ng([50.0, 0.0], [1.0, 1.0], 2.3) is None
    assert permeance_ng([], [], 2.3) is None


# --- density ---------------------------------------------------------------------------------------------------------------


def test_a_core_of_two_inches_by_one_and_a_half_weighing_2_60_g_is_2_10_pcf() -> None:
    # Arithmetic: pi/4 x 50.8^2 x 38.1 mm3 = 77.222 cm3; 2.60 g -> 33.669 kg/m3 = 2.102 pcf. One mm more in diameter: 2.022.
    volume = cylinder_m3(50.8, 38.1)
    assert volume * 1e6 == pytest.approx(77.222, abs=5e-4)
    density = density_kg_m3(2.60, volume)
    assert density == pytest.approx(33.669, abs=5e-4)
    assert density / units.KG_M3_PER_PCF == pytest.approx(2.102, abs=5e-4)
    wider = density_kg_m3(2.60, cylinder_m3(51.8, 38.1))
    assert wider / units.KG_M3_PER_PCF == pytest.approx(2.022, abs=5e-4)


def test_plus_minus_counts_the_diameter_twice_and_adds_in_quadrature() -> None:
    # JCGM 100:2008, 5.1: relative parts 0.05/2/2.60, 2 x 0.5/2/50.8, 0.5/2/38.1 in quadrature, by hand:
    # sqrt(0.0096154^2 + 0.0098425^2 + 0.0065617^2) = 0.0152442; x 33.669 = 0.51326.
    found = plus_minus_kg_m3(33.669, 2.60, 0.05, ((50.8, 2), (38.1, 1)), 0.5)
    assert found == pytest.approx(0.51326, abs=5e-5)


def test_what_28_kg_m3_is_in_pounds() -> None:
    # CAN/ULC-S705.1: at least 28 kg/m3; 1.747983 pcf by arithmetic.
    assert pytest.approx(1.747983, abs=5e-7) == 28 / units.KG_M3_PER_PCF
    assert pytest.approx(32.037, abs=5e-4) == 2.0 * units.KG_M3_PER_PCF


# --- strips ----------------------------------------------------------------------------------------------------------------


def test_points_that_are_not_evenly_spaced_carry_the_strips_next_to_them() -> None:
    # Bay 92.5 in high, points at 6, 30, 48, 90 in: strips 18, 21, 30, 23.5 in, by hand.
    shares = strip_shares(inches(6, 30, 48, 90), 4, 92.5 * MM_PER_INCH)
    assert [share * 92.5 for share in shares] == pytest.approx([18.0, 21.0, 30.0, 23.5])
    assert sum(shares) == pytest.approx(1.0)


def test_points_on_both_edges_have_the_weights_of_the_trapezoid_rule() -> None:
    # 3 x 3 grid with its edges, centre 1 in, the rest 3: mean 2.5 (weights 1/16, 2/16, 4/16), not 25/9.
    shares = strip_shares([0.0, 500.0, 1000.0], 3, 1000.0)
    assert shares == pytest.approx((0.25, 0.5, 0.25))
    mean = sum(r * c * (1.0 if (i, j) == (1, 1) else 3.0) for i, r in enumerate(shares) for j, c in enumerate(shares))
    assert mean == pytest.approx(2.5)


# --- statistics ------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("probability", [0.6, 0.9, 0.95, 0.975, 0.99, 0.999])
def test_student_t_agrees_with_scipy(probability: float) -> None:
    for degrees in [*range(1, 60), 99, 100, 159, 400, 1001]:
        assert t_quantile(probability, degrees) == pytest.approx(float(stats.t.ppf(probability, degrees)), rel=1e-9)
        assert t_probability(1.7, degrees) == pytest.approx(float(stats.t.cdf(1.7, degrees)), rel=1e-12)


@pytest.mark.parametrize(("probability", "degrees"), [(0.4, 5), (1.0, 5), (0.95, 0), (float("nan"), 3)])
def test_student_t_refuses_what_has_no_answer(probability: float, degrees: int) -> None:
    with pytest.raises(ValueError, match="found"):
        t_quantile(probability, degrees)


def test_most_short_bays_agrees_with_scipy_for_every_small_surface() -> None:
    for total in range(1, 22):
        for read in range(1, total + 1):
            for short in range(read + 1):
                possible = [
                    d for d in range(total + 1) if float(stats.hypergeom.cdf(short, total, d, read)) > 0.05 + 1e-12
                ]
                assert short_bays_at_most(total, read, short) == max(possible)


def test_twenty_of_sixty_bays_without_a_short_one_still_leave_six_that_may_be() -> None:
    # Hypergeometric: P(none seen) = 0.0767 for 6 short, 0.0483 for 7. Only 60 of 60 supports 'every bay'.
    assert short_bays_at_most(60, 20, 0) == 6
    assert short_bays_at_most(60, 60, 0) == 0


@pytest.mark.parametrize(("short", "read"), [(0, 10), (0, 20), (0, 60), (1, 29), (2, 40), (3, 60)])
def test_in_a_very_large_surface_the_bound_is_the_one_of_clopper_and_pearson(short: int, read: int) -> None:
    # statsmodels, exact (beta), two-sided at 10 % = one-sided at 5 %; 0 of 20 gives 13.9 %, where 0/20 suggests nothing.
    _, upper = proportion_confint(short, read, alpha=0.10, method="beta")
    assert short_bays_at_most(200_000, read, short) / 200_000 == pytest.approx(float(upper), abs=1e-3)


@pytest.mark.parametrize("numbers", [(10, 11, 0), (10, 5, 6), (10, 5, -1)])
def test_a_sample_larger_than_its_surface_is_refused(numbers: tuple[int, int, int]) -> None:
    with pytest.raises(ValueError, match="needs 0 <= short <= read <= total"):
        short_bays_at_most(*numbers)


#: Five bays of four points, of forty: a worked example of cluster sampling, computed outside the project with statsmodels.
FIVE_BAYS: Sequence[Sequence[float]] = (
    (2.0, 2.1, 1.9, 2.0),
    (2.6, 2.7, 2.5, 2.6),
    (1.6, 1.7, 1.5, 1.6),
    (2.3, 2.2, 2.4, 2.3),
    (2.9, 3.0, 2.8, 2.9),
)


def sampled(bays: Sequence[Sequence[float]], areas: Sequence[float]) -> list[SampledBay]:
    return [
        SampledBay(a, float(np.mean(b)), float(np.var(b, ddof=1)), len(b)) for a, b in zip(areas, bays, strict=True)
    ]


def test_the_error_of_a_sample_by_bays_is_twice_what_its_points_suggest() -> None:
    # SE by bays with finite population correction 0.21207; without regard to bays it would be 0.10528.
    between, within = cluster_variance(sampled(FIVE_BAYS, [1.0] * 5), 40)
    assert sqrt(between) == pytest.approx(0.21207, abs=5e-6)
    # Within, by hand: (5/40) x sum(s^2/k)/25 with s^2 = 0.02/3 in each bay: 0.125 x 5 x 0.0016667 / 25.
    assert within == pytest.approx(0.125 * 5 * (0.02 / 3 / 4) / 25, rel=1e-9)
    # One-sided 95 %, t(4) = 2.13185 (any table): 2.28 - 2.13185 x sqrt(0.21207^2 + 0.0000417).
    bound = mean_lower_bound_mm(sampled(FIVE_BAYS, [1.0] * 5), 40)
    assert bound == pytest.approx(2.28 - 2.131847 * sqrt(0.212073**2 + 4.1667e-5), abs=2e-5)


def test_bays_of_unequal_size_weigh_by_their_size() -> None:
    # Sizes 4, 4, 2, 6, 4, totals 8.0, 10.4, 3.2, 13.8, 11.6: ratio mean 2.35, SE 0.16651 with correction for 40 bays.
    means, areas = [2.0, 2.6, 1.6, 2.3, 2.9], [4.0, 4.0, 2.0, 6.0, 4.0]
    bays = [SampledBay(area, mean, 0.0, 4) for area, mean in zip(areas, means, strict=True)]
    between, _ = cluster_variance(bays, 40)
    assert sqrt(between) == pytest.approx(0.16651, abs=5e-6)


def test_where_all_bays_are_read_only_their_insides_are_uncertain() -> None:
    bays = sampled(FIVE_BAYS, [1.0] * 5)
    between, within = cluster_variance(bays, 5)
    assert between == 0.0
    assert within > 0.0
    bays[0].variance_mm2 = None
    assert mean_lower_bound_mm(bays, 5) is None
    assert mean_lower_bound_mm(bays[:1], 40) is None


def test_limits_of_agreement_of_the_peak_flow_meters() -> None:
    # Bland and Altman, Lancet 1986, 17 subjects, large against mini meter; data from memory: mean -2.1, sd 38.8 as printed.
    large = [494, 395, 516, 434, 476, 557, 413, 442, 650, 433, 417, 656, 267, 478, 178, 423, 427]
    mini = [512, 430, 520, 428, 500, 600, 364, 380, 658, 445, 432, 626, 260, 477, 259, 350, 451]
    found = limits_of_agreement([a - b for a, b in zip(large, mini, strict=True)])
    assert found is not None
    assert (found.pairs, half_up(found.bias_mm, 1), half_up(found.sd_mm, 1)) == (17, half_up(-2.1, 1), half_up(38.8, 1))
    assert found.lower_mm == pytest.approx(-78.10, abs=0.005)
    assert found.upper_mm == pytest.approx(73.86, abs=0.005)


def test_limits_of_agreement_of_a_probe_against_cores() -> None:
    # Computed outside the project: bias +1.8000, sd 0.9487, limits -0.0594 and 3.6594 mm.
    probe = [51, 64, 76, 48, 70, 83, 57, 61, 79, 66]
    core = [49.5, 62, 75, 47.5, 67, 80.5, 56.5, 58.5, 77.5, 63]
    found = limits_of_agreement([a - b for a, b in zip(probe, core, strict=True)])
    assert found is not None
    expected = pytest.approx((1.8, 0.9487, -0.0594, 3.6594), abs=5e-5)
    assert (found.bias_mm, found.sd_mm, found.lower_mm, found.upper_mm) == expected
    assert limits_of_agreement([1.0]) is None


def test_the_arithmetic_of_a_disc_is_not_forgotten() -> None:
    # pi/4 in the volume of a cylinder: a unit disc of 1 m is 0.785398 m2 (any handbook).
    assert cylinder_m3(1000.0, 1000.0) == pytest.approx(pi / 4)


def test_no_mean_over_no_points_and_no_bare_foam_without_films() -> None:
    with pytest.raises(ValueError, match="at least one depth"):
        delivered_rsi([], [], R6_PER_INCH, 0.15)
    with pytest.raises(ValueError, match="series_rsi must be more than 0"):
        delivered_rsi([0.0], [1.0], R6_PER_INCH, 0.0)
