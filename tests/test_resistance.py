"""Resistance of foam: by depth, uneven, tapered and between framing; against ISO 6946, code figures and printed tables."""

import math
from collections.abc import Callable, Iterable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from fieldapp.reckoning.resistance import (
    FILMS_RSI,
    STEEL_EFFECTIVE_R,
    WOOD_RSI_PER_M,
    PerMetre,
    Resistance,
    Table,
    delivered_rsi,
    films_rsi,
    parallel_u,
    steel_frame_rsi,
    tapered_u,
    wood_frame_u,
)
from fieldapp.reckoning.units import RSI_PER_R
from fieldapp.reckoning.wording import Wording

INCH = 25.4
#: A foam of RSI 1 per millimetre, so that depths in a test are resistances.
AS_RESISTANCE = PerMetre(1000.0)
#: R-6 per inch, about what closed cell gives (common practice, no source).
R6 = PerMetre(6.0 * RSI_PER_R / 0.0254)
#: Films 0.17 and 0.68, siding 0.62, OSB 0.62 and gypsum 0.45 h ft2 F/Btu (siding and OSB from memory).
SERIES_RSI = (0.17 + 0.62 + 0.62 + 0.45 + 0.68) * RSI_PER_R


def made_table(*rows: tuple[float, float]) -> Table:
    """A table from rows of inches and R."""
    return Table(tuple((depth_in * INCH, r * RSI_PER_R) for depth_in, r in rows))


#: An invented data sheet of closed-cell foam.
TABLE = made_table((1.0, 5.7), (2.0, 12.0), (3.5, 23.1), (5.5, 36.7))

# --- by depth --------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("depth_in", "r"),
    [
        (1.0, 5.7),
        (2.0, 12.0),
        (3.5, 23.1),
        (5.5, 36.7),  # not 31.35, which is 5.5 times the first inch: 16 CFR 460.17 forbids that
        (2.75, 17.55),  # half way between 12.0 and 23.1; not 16.5
        (1.5, 8.85),  # half way between 5.7 and 12.0
        (4.5, 29.9),  # half way between 23.1 and 36.7
    ],
)
def test_a_table_is_read_at_its_depths_and_in_straight_lines_between_them(depth_in: float, r: float) -> None:
    assert TABLE.rsi(depth_in * INCH) / RSI_PER_R == pytest.approx(r, rel=1e-12)
    assert not TABLE.beyond_tested(depth_in * INCH)


@pytest.mark.parametrize(
    ("depth_in", "r"),
    [
        (7.5, 36.7 / 5.5 * 7.5),  # 50.05 by the last row's own R per inch; not 36.7, as a clamping library says
        (0.5, 5.7 / 1.0 * 0.5),  # 2.85 by the first row's; not 5.7
    ],
)
def test_outside_the_tested_depths_there_is_a_figure_and_a_flag(depth_in: float, r: float) -> None:
    assert TABLE.rsi(depth_in * INCH) / RSI_PER_R == pytest.approx(r, rel=1e-12)
    assert TABLE.beyond_tested(depth_in * INCH)


@pytest.mark.parametrize(
    ("depth_mm", "beyond"),
    [
        (0.0, False),
        (0.05, False),
        (0.1, True),
        (25.3, True),
        (25.36, False),
        (25.4, False),
        (139.7, False),
        (139.8, True),
    ],
)
def test_a_bare_point_claims_nothing_and_the_edges_of_a_table_are_tested(depth_mm: float, beyond: bool) -> None:
    # 25.4 mm and 139.7 mm are the table's first and last depth; a twentieth of a millimetre is conversion.
    assert TABLE.beyond_tested(depth_mm) is beyond
    assert TABLE.rsi(0.0) == 0.0
    assert not R6.beyond_tested(depth_mm)


def test_rules_of_thumb_hold() -> None:
    # Common practice, no source: closed cell R-6 and open cell per inch; 3 in of closed are R-18, 5.5 in of open
    # and a 2x6 bay full of open cell insulates less than 3.5 in of closed.
    open_cell = PerMetre(3.5 * RSI_PER_R / 0.0254)
    assert R6.rsi(3 * INCH) / RSI_PER_R == pytest.approx(18.0)
    assert open_cell.rsi(5.5 * INCH) / RSI_PER_R == pytest.approx(19.25)
    assert open_cell.rsi(5.5 * INCH) < R6.rsi(3.5 * INCH)


# --- films -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("assembly", "inside_r"),
    [
        # h ft2 F/Btu, as in ANSI/ASHRAE/IES 90.1-2016 appendix A; 0.92 (heat down) from memory. Outside 0.17 (15 mph).
        ("wall", 0.68),
        ("rim", 0.68),
        ("foundation", 0.68),
        ("sloped-roof", 0.61),
        ("attic-floor", 0.61),
        ("floor", 0.92),
    ],
)
def test_films_are_the_published_ones_to_a_thousandth(assembly: str, inside_r: float) -> None:
    inside, outside = FILMS_RSI[assembly]
    assert inside == round(inside_r * RSI_PER_R, 3)
    assert outside == round(0.17 * RSI_PER_R, 3)
    assert films_rsi(assembly) == inside + outside
    assert films_rsi(assembly, inside_rsi=0.0) == outside
    assert films_rsi(assembly, outside_rsi=0.1) == inside + 0.1
    assert films_rsi(assembly, 0.2, 0.0) == 0.2


# --- uneven ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("depths_in", "weights", "r_per_inch", "total_r"),
    [
        # Total R = 1 / mean(1 / (2.54 + R per inch x depth)); computed with numpy.
        ([1.0, 3.0], [1.0, 1.0], 6.0, 12.0641),
        ([1.5, 2.5, 3.0, 3.0, 2.0], [1.0] * 5, 6.2, 16.5874),
        ([3.0, 0.0], [95.0, 5.0], 6.0, 15.1662),
        ([3.0, 0.0], [39.0, 1.0], 6.0, 17.4487),
        ([3.0, 3.0, 1.0, 3.0], [18.0, 21.0, 30.0, 23.5], 6.0, 14.1098),
        ([2.0, 3.0, 0.5], [10.0, 10.0, 5.0], 6.0, 12.0358),
        ([3.5, 3.5, 3.5, 1.5], [1.0] * 4, 6.0, 18.6831),
    ],
)
def test_uneven_foam_delivers_the_mean_of_conductances(
    depths_in: list[float], weights: list[float], r_per_inch: float, total_r: float
) -> None:
    foam = PerMetre(r_per_inch * RSI_PER_R / 0.0254)
    depths_mm = [depth * INCH for depth in depths_in]
    found = delivered_rsi(depths_mm, weights, foam, SERIES_RSI)
    assert found / RSI_PER_R == pytest.approx(total_r - 2.54, abs=1e-4)
    assert parallel_u(depths_mm, weights, foam, SERIES_RSI) * RSI_PER_R == pytest.approx(1.0 / total_r, rel=1e-5)


def test_foam_by_itself_averages_as_a_harmonic_mean() -> None:
    # 1 in and 3 in of R-6 foam with nothing in series: 2 / (1/6 + 1/18) = 9, not the 12 of the mean depth.
    assert delivered_rsi([INCH, 3 * INCH], [1.0, 1.0], R6, 1e-9) / RSI_PER_R == pytest.approx(9.0, rel=1e-6)


@given(split=st.floats(0.0, 0.99), even_r=st.floats(3.0, 60.0))
def test_a_two_level_split_costs_the_square_of_the_split(split: float, even_r: float) -> None:
    # Half at R(1 + d), half at R(1 - d), R the total: 2 / (1/(1+d) + 1/(1-d)) = 1 - d^2, exactly.
    series_r = 0.01 * even_r
    depths = [(even_r * (1 + sign * split) - series_r) for sign in (1, -1)]
    found = delivered_rsi(depths, [1.0, 1.0], AS_RESISTANCE, series_r)
    assert found + series_r == pytest.approx(even_r * (1 - split**2), rel=1e-9)


def test_a_tenth_more_and_a_tenth_less_foam_costs_under_a_hundredth() -> None:
    # Foam R-18 in a total of 20.54, half 10 % over and half 10 % under: d = 1.8 / 20.54, so 20.54 (1 - d^2) = 20.3823.
    found = delivered_rsi([1.1 * 3 * INCH, 0.9 * 3 * INCH], [1.0, 1.0], R6, SERIES_RSI)
    assert found / RSI_PER_R + 2.54 == pytest.approx(20.3823, abs=5e-5)


def test_parallel_paths_are_the_upper_limit_and_no_other_method() -> None:
    # R-20 between studs of on 25 % of a wall, 2.54 in series: parallel paths give 16.719, isothermal planes 16.083
    # (1 / (0.75/20 + 0.25/6.88) + 2.54), their mean 16.40. Ours is the first.
    found = delivered_rsi([20.0, 6.88], [0.75, 0.25], AS_RESISTANCE, 2.54) + 2.54
    assert found == pytest.approx(16.719, abs=5e-4)


def test_a_mean_over_no_points_or_with_nothing_in_series_is_refused() -> None:
    with pytest.raises(ValueError, match="at least one depth"):
        parallel_u([], [], R6, 0.15)
    for series_rsi in (0.0, -0.1, math.nan):
        with pytest.raises(ValueError, match="series_rsi"):
            parallel_u([0.0, 76.2], [1.0, 1.0], R6, series_rsi)
    with pytest.raises(ValueError, match="shorter"):
        parallel_u([76.2, 76.2], [1.0], R6, 0.15)


# --- tapered: ISO 6946 -----------------------------------------------------------------------------------------------

#: (R0, R1, rectangle, triangle thickest at its apex, triangle thinnest at its apex). U in W/(m2K); ISO 6946:2007 annex C,
#: :2017 annex E, formulae from memory, values computed by brute force.
TAPERS = (
    (0.50, 2.0, 0.804719, 1.011797, 0.597641),
    (0.20, 1.5, 1.426711, 1.900544, 0.952877),
    (0.14, 4.0, 0.846702, 1.252673, 0.440731),
    (1.00, 0.5, 0.810930, 0.865581, 0.756279),
    (0.30, 3.5, 0.725421, 1.003772, 0.447071),
)
STRIPS = [(number + 0.5) / 4000.0 for number in range(4000)]


@pytest.mark.parametrize(("series_rsi", "taper_rsi", "rectangle", "thick_apex", "thin_apex"), TAPERS)
def test_a_wedge_of_foam_delivers_what_iso_6946_says_not_its_mean(
    series_rsi: float, taper_rsi: float, rectangle: float, thick_apex: float, thin_apex: float
) -> None:
    even = [1.0] * len(STRIPS)
    ramp = [taper_rsi * at for at in STRIPS]
    assert parallel_u(ramp, even, AS_RESISTANCE, series_rsi) == pytest.approx(rectangle, abs=1e-6)
    assert tapered_u(series_rsi, taper_rsi) == pytest.approx(rectangle, abs=6e-7)
    # Strips of a triangle, counted from its apex, have areas in proportion to how far they lie from it.
    assert parallel_u(ramp[::-1], STRIPS, AS_RESISTANCE, series_rsi) == pytest.approx(thick_apex, abs=1e-6)
    assert parallel_u(ramp, STRIPS, AS_RESISTANCE, series_rsi) == pytest.approx(thin_apex, abs=1e-6)
    # Identity: two such triangles make the rectangle.
    assert (thick_apex + thin_apex) / 2.0 == pytest.approx(rectangle, abs=1.1e-6)
    # The mean depth promises less heat loss than there is, by 1.3 to 44.8 % of it in this table.
    assert 1.0 / (series_rsi + taper_rsi / 2.0) < 0.988 * rectangle


@pytest.mark.parametrize(
    ("series_rsi", "corners_rsi", "u"),
    # A triangle whose corners have resistances 0, R1 and R2 (ISO 6946, from memory; values computed by brute force).
    [(0.3, (0.0, 1.0, 2.5), 0.793847), (0.14, (0.0, 0.5, 4.0), 0.891411), (0.5, (0.0, 2.0, 3.0), 0.516862)],
)
def test_any_triangle_delivers_what_iso_6946_says(
    series_rsi: float, corners_rsi: tuple[float, float, float], u: float
) -> None:
    depths = list(_middles_of_small_triangles(corners_rsi, 300))
    # What a grid of 300 parts a side still lacks, falling as 1/parts^2, is under 3e-5.
    assert parallel_u(depths, [1.0] * len(depths), AS_RESISTANCE, series_rsi) == pytest.approx(u, abs=3e-5)


def _middles_of_small_triangles(corners: tuple[float, float, float], parts: int) -> Iterable[float]:
    """Heights of a plane over the middles of the parts^2 equal triangles into which a triangle is cut."""
    a, b, c = corners
    for row in range(parts):
        for col in range(parts - row):
            x, y = (row + 1 / 3) / parts, (col + 1 / 3) / parts
            yield a + (b - a) * x + (c - a) * y
            if col < parts - row - 1:
                x, y = (row + 2 / 3) / parts, (col + 2 / 3) / parts
                yield a + (b - a) * x + (c - a) * y


def test_foam_that_is_deep_at_the_studs_and_thin_between_them_is_a_wedge() -> None:
    # 25.4 mm to 76.2 mm at 0.024 W/(m K), 0.3585 m2K/W for all else. ISO 6946: R0 = 0.3585 + 0.0254/0.024 = 1.416833,
    # R1 = 0.0508/0.024 = 2.116667, U = ln(1 + R1/R0)/R1 = 0.43175. The 50.8 mm between its ends would promise 0.40401.
    foam = PerMetre(1.0 / 0.024)
    assert tapered_u(0.3585 + foam.rsi(25.4), foam.rsi(76.2) - foam.rsi(25.4)) == pytest.approx(0.43175, abs=5e-6)
    for points, close in ((4, 3e-3), (40, 3e-5), (400, 5e-6)):
        depths = [25.4 + 50.8 * (number + 0.5) / points for number in range(points)]
        assert parallel_u(depths, [1.0] * points, foam, 0.3585) == pytest.approx(0.43175, abs=close)
        assert delivered_rsi(depths, [1.0] * points, foam, 0.3585) == pytest.approx(1 / 0.43175 - 0.3585, abs=8 * close)
    assert parallel_u([50.8], [1.0], foam, 0.3585) == pytest.approx(0.40401, abs=5e-6)


@pytest.mark.parametrize("taper_rsi", [0.0, 1e-300, 1e-16, 4.9e-13, 5.1e-13, 1e-12, 1e-9, 1e-6, 1e-3])
def test_a_hardly_tapered_layer_is_an_even_one(taper_rsi: float) -> None:
    # ln(1 + x)/x = 1 - x/2 + x^2/3 - ...; written without log1p it loses all digits here (at 1e-16 it gives 0, and the
    # triangle's naive formula gives -54.6 at 1e-9 instead of 2).
    x = taper_rsi / 0.5
    assert tapered_u(0.5, taper_rsi) == pytest.approx((1.0 - x / 2.0 + x * x / 3.0) / 0.5, rel=1e-8)
    assert tapered_u(0.5, taper_rsi) == pytest.approx((1.0 - x / 2.0 + x * x / 3.0 - x**3 / 4.0) / 0.5, rel=1e-11)


@given(series_rsi=st.floats(0.05, 3.0), taper_rsi=st.floats(0.01, 8.0))
def test_the_closed_form_of_a_taper_is_its_integral(series_rsi: float, taper_rsi: float) -> None:
    # Computed with scipy: the mean of 1/(R0 + R1 t) for t from 0 to 1.
    integral, _ = quad(lambda at: 1.0 / (series_rsi + taper_rsi * at), 0.0, 1.0, epsabs=1e-13, epsrel=1e-12)
    assert tapered_u(series_rsi, taper_rsi) == pytest.approx(integral, rel=1e-9)


# --- wood framing ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("cavity_r", "outside_r", "framing_in", "u", "printed"),
    [
        # 0.17 + siding 0.62 + OSB 0.62 + 0.45 + 0.68 in series, 25 % framing (computed by parallel paths); the first three
        # are the U-factors of the IECC 2021 for these walls to the printed digit: 0.084, 0.060, 0.045 (from memory).
        (13.0, 0.0, 3.5, 0.08439, "U-0.084"),
        (20.0, 0.0, 5.5, 0.05981, "U-0.060"),
        (20.0, 5.0, 5.5, 0.04457, "U-0.045"),
        # R-30 in a 2x8 reaches 0.045; the same R-30 of foam squeezed in a 2x6 does not, though the R-value table is met.
        (30.0, 0.0, 7.25, 0.04460, "U-0.045"),
        (30.0, 0.0, 5.5, 0.04959, "U-0.050"),
    ],
)
def test_wood_framed_walls_have_the_u_factors_of_the_code(
    cavity_r: float, outside_r: float, framing_in: float, u: float, printed: str
) -> None:
    series_rsi = SERIES_RSI + outside_r * RSI_PER_R
    clear_u = parallel_u([cavity_r * RSI_PER_R], [1.0], AS_RESISTANCE, series_rsi)
    found = wood_frame_u(clear_u, 0.25, framing_in * INCH, series_rsi)
    # 8.67 RSI/m for wood is a thirtieth of a percent off per inch, and studs are rounded to.
    assert found * RSI_PER_R == pytest.approx(u, abs=2e-5)
    assert Wording("ip").u(found) == printed


@pytest.mark.parametrize(
    ("framing_in", "printed_r"),
    # Softwood at 1.25 h ft2 F/(Btu in): 3.5 in 4.38, 5.5 in 6.88, 7.25 in 9.06 (from memory).
    [(3.5, 4.38), (5.5, 6.88), (7.25, 9.06)],
)
def test_a_stud_resists_as_softwood_does(framing_in: float, printed_r: float) -> None:
    assert WOOD_RSI_PER_M * framing_in * 0.0254 / RSI_PER_R == pytest.approx(printed_r, rel=1e-3)
    assert 1.0 / wood_frame_u(9.9, 1.0, framing_in * INCH, 0.15) == pytest.approx(
        0.15 + printed_r * RSI_PER_R, rel=1e-3
    )


@pytest.mark.parametrize(
    ("share", "total_r"),
    # R-20 in a 2x6, series 2.54, framing path 2.54 + 6.88 = 9.42, cavity path 22.54: 1 / ((1 - f)/22.54 + f/9.42).
    [(0.0, 22.54), (1.5 / 16.0, 19.94), (0.25, 16.72), (1.0, 9.42)],
)
def test_framing_counts_by_its_share_of_the_whole_wall(share: float, total_r: float) -> None:
    clear_u = 1.0 / (22.54 * RSI_PER_R)
    assert 1.0 / wood_frame_u(clear_u, share, 5.5 * INCH, SERIES_RSI) / RSI_PER_R == pytest.approx(total_r, abs=0.005)


def test_unequal_bays_between_framing_average_by_area_and_in_parallel() -> None:
    # Bays of 10, 10 and 5 ft2 with 2, 3 and 0.5 in of R-6 foam, studs of on 25 %: 1/(0.75/12.0358 + 0.25/9.42)
    # = 11.254 (computed with numpy); ours takes 8.67 RSI/m for wood, a thirtieth of a percent off 6.88.
    clear_u = parallel_u([2 * INCH, 3 * INCH, 0.5 * INCH], [10.0, 10.0, 5.0], R6, SERIES_RSI)
    assert 1.0 / wood_frame_u(clear_u, 0.25, 5.5 * INCH, SERIES_RSI) / RSI_PER_R == pytest.approx(11.254, abs=0.002)


# --- steel framing ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("depth_in", "spacing_in", "cavity_r", "effective_r"),
    [
        # ANSI/ASHRAE/IES 90.1 table A9.2-2, effective R as printed (which is not always R times the printed factor: 13 x
        # 0.46 = 5.98); from memory but for the 0.46 at R-13, 16 in.
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
        # Straight lines between rows, by hand.
        (3.5, 16, 12, 5.75),
        (3.5, 16, 14, 6.2),
        (3.5, 24, 14.5, 7.65),
        (6, 16, 20, 7.25),
        (6, 24, 19.5, 8.7),
    ],
)
def test_cavities_between_steel_studs_have_the_printed_effective_r(
    depth_in: float, spacing_in: float, cavity_r: float, effective_r: float
) -> None:
    found = steel_frame_rsi(cavity_r * RSI_PER_R, depth_in * INCH, spacing_in * INCH)
    assert found is not None
    assert found / RSI_PER_R == pytest.approx(effective_r, rel=1e-9)


@pytest.mark.parametrize(
    ("depth_in", "spacing_in", "cavity_r"),
    [
        (3.5, 16, 21),  # closed-cell foam in a 3.5 in cavity: no row
        (3.5, 16, 15.1),
        (3.5, 16, 10.9),
        (3.5, 24, 0),
        (6, 16, 18.9),
        (6, 24, 21.1),
        (8, 16, 24.9),
        (8, 24, 25.1),
        (4, 16, 13),  # no such depth
        (3.5, 19.2, 13),  # no such spacing
        (3.625, 16, 13),  # 92 mm studs are not the table's
        (6, 12, 19),
    ],
)
def test_nothing_is_extrapolated_from_the_steel_table(depth_in: float, spacing_in: float, cavity_r: float) -> None:
    assert steel_frame_rsi(cavity_r * RSI_PER_R, depth_in * INCH, spacing_in * INCH) is None


def test_the_steel_table_has_the_rows_that_are_tested_and_no_more() -> None:
    assert sum(len(rows) for rows in STEEL_EFFECTIVE_R.values()) == 12


def test_soft_metric_studs_are_the_studs_of_the_table() -> None:
    # 89 mm at 406 mm and at 610 mm are 3.5 in at 16 in and 24 in, as metric drawings write them.
    for spacing_mm, effective_r in ((406.0, 6.0), (610.0, 7.2)):
        found = steel_frame_rsi(13 * RSI_PER_R, 89.0, spacing_mm)
        assert found is not None
        assert found / RSI_PER_R == pytest.approx(effective_r, rel=1e-9)


# --- in general ------------------------------------------------------------------------------------------------------

RESISTANCES: list[tuple[Resistance, Callable[[float], float]]] = [
    (R6, lambda depth_mm: 6.0 * RSI_PER_R * depth_mm / INCH),
    (
        TABLE,
        # numpy draws the straight lines; through zero below the first row, and by the last row's R per depth beyond it.
        lambda depth_mm: float(
            np.interp(depth_mm / INCH, [0.0, 1.0, 2.0, 3.5, 5.5, 55.0], [0.0, 5.7, 12.0, 23.1, 36.7, 367.0]) * RSI_PER_R
        ),
    ),
]


@pytest.mark.parametrize(("resistance", "by_numpy"), RESISTANCES)
@given(
    points=st.lists(st.tuples(st.floats(0.0, 300.0), st.floats(0.01, 5.0)), min_size=1, max_size=30),
    series_rsi=st.floats(0.01, 4.0),
)
def test_parallel_heat_flow_is_what_numpy_averages(
    resistance: Resistance,
    by_numpy: Callable[[float], float],
    points: list[tuple[float, float]],
    series_rsi: float,
) -> None:
    depths, areas = zip(*points, strict=True)
    expected = np.average([1.0 / (series_rsi + by_numpy(depth)) for depth in depths], weights=areas)
    assert parallel_u(depths, areas, resistance, series_rsi) == pytest.approx(float(expected), rel=1e-9)
    assert delivered_rsi(depths, areas, resistance, series_rsi) == pytest.approx(
        1.0 / float(expected) - series_rsi, rel=1e-9, abs=1e-9
    )
