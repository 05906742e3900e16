"""Water vapour through foam, its classes, and the density of cores; against published classes and hand-worked cores."""

import math

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import hmean

from fieldapp.reckoning.cores import core_result, density_figures
from fieldapp.reckoning.density import cylinder_m3, density_kg_m3, plus_minus_kg_m3, prism_m3
from fieldapp.reckoning.inputs import Core, Foam
from fieldapp.reckoning.limits import at_most
from fieldapp.reckoning.resistance import PerMetre
from fieldapp.reckoning.units import KG_M3_PER_PCF, NG_M_PER_PERM_INCH, NG_PER_PERM
from fieldapp.reckoning.vapour import (
    CLASS_LIMITS_NG,
    SEPARATE_RETARDER_NG,
    permeance_ng,
    sheet_must_be_inside,
    vapour_class,
)

INCH = 25.4
PINT: pint.UnitRegistry[float] = pint.UnitRegistry()

# --- permeance -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("perm_inch", "depths_mm", "perm"),
    [
        # Permeability over depth, by hand: 2.0 perm-in at 2 in is 1 perm.
        (2.0, [50.8], 1.0),
        # 50 mm are not 2 in: 2.0 x 25.4 / 50 = 1.016 perm.
        (2.0, [50.0], 1.016),
        # 1.6 perm-in at 0.9 in: 1.778 perm; 1.067 in would give 1.5.
        (1.6, [0.9 * INCH], 1.7778),
        (1.6, [1.6 / 1.5 * INCH], 1.5),
        # 2.0, 2.2, 1.4 and 2.6 in: mean of 2/d = (1 + 0.90909 + 1.42857 + 0.76923)/4 = 1.0267; 2/mean(d) is 0.9756, and the
        # thinnest point alone 1.4286.
        (2.0, [2.0 * INCH, 2.2 * INCH, 1.4 * INCH, 2.6 * INCH], 1.0267),
        (2.0, [2.05 * INCH], 0.9756),
        (2.0, [1.4 * INCH], 1.4286),
        # Open cell: 30 perm-in at 3 in about 10 perm (from memory: 25 to 50 perm-in).
        (30.0, [3.0 * INCH], 10.0),
    ],
)
def test_vapour_flows_through_uneven_foam_in_parallel(perm_inch: float, depths_mm: list[float], perm: float) -> None:
    found = permeance_ng(depths_mm, [1.0] * len(depths_mm), perm_inch * NG_M_PER_PERM_INCH)
    assert found is not None
    assert found / NG_PER_PERM == pytest.approx(perm, abs=5e-5)


def test_a_perm_inch_over_an_inch_is_a_perm_by_an_independent_library() -> None:
    # Computed with pint: 1.3 perm-in at 2 in.
    expected = PINT.Quantity(1.3 / 2.0, "grain / (hour * foot**2 * inch_Hg)").to("ng / (Pa * s * m**2)").magnitude
    assert permeance_ng([50.8], [0.9], 1.3 * NG_M_PER_PERM_INCH) == pytest.approx(expected, rel=1e-6)


@given(
    points=st.lists(st.tuples(st.floats(0.5, 300.0), st.floats(0.01, 5.0)), min_size=1, max_size=20),
    permeability_ng_m=st.floats(0.5, 60.0),
)
def test_the_even_depth_of_the_same_permeance_is_the_harmonic_mean(
    points: list[tuple[float, float]], permeability_ng_m: float
) -> None:
    depths, areas = zip(*points, strict=True)
    found = permeance_ng(depths, areas, permeability_ng_m)
    assert found is not None
    harmonic_mm = float(hmean(depths, weights=areas))  # computed with scipy
    assert found == pytest.approx(permeability_ng_m * 1000.0 / harmonic_mm, rel=1e-9)
    arithmetic_mm = math.fsum(d * a for d, a in points) / math.fsum(areas)
    assert found >= permeability_ng_m * 1000.0 / arithmetic_mm * (1 - 1e-12)


def test_the_harmonic_mean_of_a_bay_is_less_than_its_mean() -> None:
    # 4 / (1/2.0 + 1/2.2 + 1/1.4 + 1/2.6) = 1.948 in, mean 2.05 in.
    found = permeance_ng([d * INCH for d in (2.0, 2.2, 1.4, 2.6)], [1.0] * 4, 2.0 * NG_M_PER_PERM_INCH)
    assert found is not None
    assert 2.0 * NG_PER_PERM / found == pytest.approx(1.948, abs=5e-4)


def test_area_goes_with_each_point() -> None:
    # 3 parts at 1 in, 1 part at 4 in, 2 perm-in: (3 x 2 + 1 x 0.5)/4 = 1.625 perm.
    found = permeance_ng([INCH, 4 * INCH], [3.0, 1.0], 2.0 * NG_M_PER_PERM_INCH)
    assert found is not None
    assert found / NG_PER_PERM == pytest.approx(1.625, rel=1e-12)


@pytest.mark.parametrize("depths_mm", [[], [0.0], [76.2, 0.0], [0.0, 76.2], [76.2, -1.0]])
def test_a_bare_point_resists_nothing_so_there_is_no_figure(depths_mm: list[float]) -> None:
    assert permeance_ng(depths_mm, [1.0] * len(depths_mm), 2.0) is None


# --- classes ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("permeance", "name"),
    [
        # International Residential Code 2021 table R702.7(1): I to 0.1 perm, II to 1, III to 10.
        (0.0, "I"),
        (0.05 * NG_PER_PERM, "I"),
        (5.72, "I"),
        (5.73, "II"),
        (0.5 * NG_PER_PERM, "II"),
        (57.2, "II"),
        (57.3, "III"),  # 1.0015 perm; by 57.4 ng to the perm it would have been 0.998
        (58.5, "III"),  # keeps 60 ng/(Pa s m2), and is 1.0225 perm
        (60.0, "III"),  # 1.0487 perm
        (5.0 * NG_PER_PERM, "III"),
        (572.0, "III"),
        (572.2, None),
        (30.0 * NG_PER_PERM, None),
    ],
)
def test_classes_of_retarders_end_at_a_tenth_one_and_ten_perm(permeance: float, name: str | None) -> None:
    assert vapour_class(permeance) == name


@pytest.mark.parametrize(("perm", "name"), [(0.1, "I"), (1.0, "II"), (10.0, "III")])
def test_a_data_sheet_that_says_one_perm_is_at_the_limit_and_not_over_it(perm: float, name: str) -> None:
    # International Residential Code 2021 table R702.7(1): class II is 'over 0.1 to 1.0 perm', the limit included. Converted
    # (1 perm is 57.21349 ng/(Pa s m2), computed with pint) it is a hair over the rounded 57.2.
    one_ng = PINT.Quantity(perm, "grain / (hour * foot**2 * inch_Hg)").to("ng / (Pa * s * m**2)").magnitude
    assert vapour_class(float(one_ng)) == name
    assert at_most(perm * NG_PER_PERM, SEPARATE_RETARDER_NG) is (perm <= 1.0)


def test_class_limits_are_perms_written_to_three_digits() -> None:
    # Computed with pint: 1 perm is 57.2135 ng/(Pa s m2) with mercury at 0 C, which rounds to 57.2.
    assert [limit / NG_PER_PERM for _, limit in CLASS_LIMITS_NG] == pytest.approx([0.1, 1.0, 10.0], rel=3e-4)
    assert pytest.approx(NG_PER_PERM, rel=3e-4) == SEPARATE_RETARDER_NG


@pytest.mark.parametrize(
    ("zone", "inside"),
    [
        # Zones 5 to 8 and marine 4: International Residential Code R702.7, editions to 2018 (seen quoted).
        *[(zone, True) for zone in ("4C", "5", "5A", "5B", "6", "6A", "6B", "7", "8")],
        *[(zone, False) for zone in ("1A", "2A", "2B", "3A", "3B", "3C", "4", "4A", "4B")],
    ],
)
def test_where_it_is_cold_outside_a_sheet_belongs_inside(zone: str, inside: bool) -> None:
    assert sheet_must_be_inside(zone) is inside


# --- density ---------------------------------------------------------------------------------------------------------


def test_a_core_of_two_inches_across_weighs_what_its_volume_says() -> None:
    # Diameter 50.8 mm, length 38.1 mm: pi/4 x 50.8^2 x 38.1 = 77222 mm3; 2.60 g / 77.222 cm3 = 33.669 kg/m3 = 2.102 pcf.
    volume_m3 = cylinder_m3(50.8, 38.1)
    assert volume_m3 * 1e6 == pytest.approx(77.222, abs=0.0005)
    assert density_kg_m3(2.60, volume_m3) == pytest.approx(33.669, abs=0.0005)
    assert density_kg_m3(2.60, volume_m3) / KG_M3_PER_PCF == pytest.approx(2.102, abs=0.0005)


def test_a_millimetre_of_diameter_is_four_percent_of_density() -> None:
    # (50.8 / 51.8)^2 = 0.9618: 2.102 becomes 2.022 pcf, -3.8 %.
    wrong = density_kg_m3(2.60, cylinder_m3(51.8, 38.1))
    assert wrong / KG_M3_PER_PCF == pytest.approx(2.022, abs=0.0005)
    assert wrong / density_kg_m3(2.60, cylinder_m3(50.8, 38.1)) - 1.0 == pytest.approx(-0.038, abs=0.0005)


def test_a_prism_is_width_by_length_by_depth() -> None:
    # 50 x 60 x 40 mm = 120 cm3; 4.2 g in it are 35 kg/m3.
    assert prism_m3(50.0, 60.0, 40.0) == pytest.approx(120e-6, rel=1e-12)
    assert density_kg_m3(4.2, prism_m3(50.0, 60.0, 40.0)) == pytest.approx(35.0, rel=1e-12)


@pytest.mark.parametrize(
    ("mass_g", "scale_step_g", "sizes_mm", "calliper_step_mm", "relative"),
    [
        # By hand. Scale 0.1 g: 0.05/2.6 = 1.9231 %. Calliper 0.1 mm: diameter twice 0.05/50.8 = 0.1969 %, length 0.05/38.1 =
        # 0.1312 %. In quadrature sqrt(1.9231^2 + 0.1969^2 + 0.1312^2) = 1.9376 %.
        (2.6, 0.1, ((50.8, 2), (38.1, 1)), 0.1, 0.019376),
        # A tape in whole millimetres instead: 2 x 0.5/50.8 = 1.9685 %, 0.5/38.1 = 1.3123 %; with 0.01 g, 0.1923 %: 2.3736 %.
        (2.6, 0.01, ((50.8, 2), (38.1, 1)), 1.0, 0.023736),
        # A prism's three sizes enter once each: 4.2 g on 0.1 g 1.1905 %; 0.5/50 = 1 %, 0.5/60 = 0.8333 %, 0.5/40 = 1.25 %:
        # sqrt(1.4172 + 1 + 0.6944 + 1.5625) = 2.1619 %.
        (4.2, 0.1, ((50.0, 1), (60.0, 1), (40.0, 1)), 1.0, 0.021619),
    ],
)
def test_half_a_step_of_scale_and_calliper_is_the_plus_minus(
    mass_g: float,
    scale_step_g: float,
    sizes_mm: tuple[tuple[float, int], ...],
    calliper_step_mm: float,
    relative: float,
) -> None:
    # Independent relative errors in quadrature, JCGM 100:2008 clause 5.1; a diameter's counts twice.
    found = plus_minus_kg_m3(33.669, mass_g, scale_step_g, sizes_mm, calliper_step_mm)
    assert found / 33.669 == pytest.approx(relative, abs=1e-6)


def core(
    mass_g: float, *, volume_m3: float = 100e-6, steps: tuple[float, float] | None = None, with_skin: bool = False
) -> Core:
    """A core of 100 cm3, so that its density is ten times its mass; `steps` are the scale's and the calliper's."""
    return Core(
        record="",
        bay="",
        bay_label="7",
        label="",
        mass_g=mass_g,
        volume_m3=volume_m3,
        sizes_mm=((50.8, 2), (49.3, 1)) if steps else (),
        scale_step_g=steps[0] if steps else None,
        calliper_step_mm=steps[1] if steps else None,
        with_skin=with_skin,
    )


def foam(low: float | None = None, high: float | None = None) -> Foam:
    return Foam(
        key="", name="", cell="closed", resistance=PerMetre(40.0), density_min_kg_m3=low, density_max_kg_m3=high
    )


#: At least 28 kg/m3 is CAN/ULC-S705.1's limit for medium-density foam; the upper one is invented.
LIMITS = foam(28.0, 40.0)
#: 0.1 g on a 2.8 g core alone is 1.8 % of 28 kg/m3, so about half a kg/m3 either way.
COARSE = (0.1, 0.1)


@pytest.mark.parametrize(
    ("sample", "sheet", "word"),
    [
        (core(2.80), LIMITS, "within"),  # 28.0 meets 28
        (core(2.79), LIMITS, "light"),
        (core(4.00), LIMITS, "within"),
        (core(4.01), LIMITS, "heavy"),
        (core(2.79), foam(None, 40.0), "within"),
        (core(4.01), foam(28.0), "within"),  # S705.1 names no greatest density
        (core(2.79), foam(), "no limits"),
        (core(2.79), None, "no limits"),
        (core(2.79, with_skin=True), LIMITS, "with skin"),  # limits are for core density, skins are denser
        (core(4.01, with_skin=True), LIMITS, "with skin"),
        # By hand: 0.05/2.8 = 1.786 %, 2 x 0.05/50.8 = 0.197 %, 0.05/49.3 = 0.101 %: 1.800 % of 28, about 0.5 kg/m3.
        (core(2.80, steps=COARSE), LIMITS, "unproven"),
        (core(2.84, steps=COARSE), LIMITS, "unproven"),
        (core(2.76, steps=COARSE), LIMITS, "unproven"),
        (core(2.86, steps=COARSE), LIMITS, "within"),
        (core(2.74, steps=COARSE), LIMITS, "light"),
        (core(3.96, steps=COARSE), LIMITS, "unproven"),  # 0.05/3.96 = 1.26 % of 39.6: 0.51
        (core(4.06, steps=COARSE), LIMITS, "heavy"),
        (core(2.76, steps=COARSE), foam(None, 40.0), "within"),
        (core(2.76, steps=COARSE, with_skin=True), LIMITS, "with skin"),
    ],
)
def test_a_core_is_light_heavy_or_too_near_a_limit_to_say(sample: Core, sheet: Foam | None, word: str) -> None:
    assert core_result(sample, sheet).word == word


def test_two_pounds_a_cubic_foot_are_not_32_kg_m3() -> None:
    # Model codes write 2.0 pcf (32 kg/m3): 2.0 pcf are 32.037. The limit that was typed governs.
    sample = core(2.0 * KG_M3_PER_PCF / 10.0)
    assert core_result(sample, foam(None, 32.0)).word == "heavy"
    assert core_result(sample, foam(None, 2.0 * KG_M3_PER_PCF)).word == "within"
    assert core_result(core(3.2), foam(32.0)).word == "within"
    assert core_result(core(3.2), foam(2.0 * KG_M3_PER_PCF)).word == "light"


def test_the_least_and_greatest_core_are_each_core_s_own_density() -> None:
    # 2.6 g in 77.222 cm3 and 1.2 g in 42.471 cm3: 33.669 and 28.255 kg/m3. (Pooled they would be 31.75.)
    cores = [core(2.6, volume_m3=77.222e-6), core(1.2, volume_m3=42.471e-6)]
    found = density_figures(cores, LIMITS)
    assert found.cores == 2
    assert found.min_kg_m3 == pytest.approx(28.255, abs=0.0005)
    assert found.max_kg_m3 == pytest.approx(33.669, abs=0.0005)
    # (33.669 + 28.255) / 2
    assert found.mean_kg_m3 == pytest.approx(30.962, abs=0.0005)
    assert [each.word for each in found.each] == ["within", "within"]
    assert [each.label for each in found.each] == ["7", "7"]


def test_without_cores_there_is_no_density() -> None:
    found = density_figures([], LIMITS)
    assert (found.cores, found.mean_kg_m3, found.min_kg_m3, found.max_kg_m3, found.each) == (0, None, None, None, ())
