"""Units, roundings and limits: constants against pint and exact definitions, and where floating point would lie."""

import math
from collections.abc import Callable

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.reckoning import units
from fieldapp.reckoning.limits import at_least, at_most, depth_meets, depth_over, least_meeting_mm
from fieldapp.reckoning.rounding import half_up, sixteenths
from fieldapp.reckoning.wording import Wording, bay_list, count, listed

PINT: pint.UnitRegistry[float] = pint.UnitRegistry()
IP, SI = Wording("ip"), Wording("si")

# --- constants -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("ours", "unit", "in_records"),
    [
        (units.MM_PER_INCH, "inch", "mm"),
        (units.M_PER_FOOT, "foot", "m"),
        (units.M2_PER_FT2, "foot**2", "m**2"),
        (units.M3_PER_FT3, "foot**3", "m**3"),
        (units.M3_PER_BOARD_FOOT, "foot**2 * inch", "m**3"),
        (units.KG_PER_LB, "pound", "kg"),
        (units.KG_PER_GRAIN, "grain", "kg"),
        (units.PA_PER_INHG, "inch_Hg", "Pa"),
        (units.PA_PER_PSI, "psi", "Pa"),
        (units.KG_M3_PER_PCF, "pound / foot**3", "kg / m**3"),
        (units.J_PER_BTU, "Btu", "J"),
        (units.RSI_PER_R, "hour * foot**2 * delta_degF / Btu", "m**2 * kelvin / watt"),
        (units.NG_PER_PERM, "grain / (hour * foot**2 * inch_Hg)", "ng / (Pa * s * m**2)"),
        (units.NG_M_PER_PERM_INCH, "grain * inch / (hour * foot**2 * inch_Hg)", "ng / (Pa * s * m)"),
    ],
)
def test_every_constant_agrees_with_an_independent_library(ours: float, unit: str, in_records: str) -> None:
    # Computed with pint. Its Btu differs from the International Table Btu by 1.4e-7, hence 1e-6.
    assert ours == pytest.approx(PINT.Quantity(1.0, unit).to(in_records).magnitude, rel=1e-6)


@pytest.mark.parametrize(
    ("ours", "worked_by_hand"),
    [
        # Exact by the international yard and pound, 1959.
        (units.MM_PER_INCH, 25.4),
        (units.M2_PER_FT2, 0.09290304),
        (units.M3_PER_FT3, 0.028316846592),
        (units.KG_PER_GRAIN, 0.00006479891),
        # 1 ft2 x 1 in = 0.3048 x 0.3048 x 0.0254 m3 = 1/12 ft3 = 2.359737216 litres.
        (units.M3_PER_BOARD_FOOT, 0.002359737216),
        # 13595.1 kg/m3 x 9.80665 m/s2 x 0.0254 m.
        (units.PA_PER_INHG, 3386.388640341),
        # 3600 x 0.09290304 / (1055.05585262 x 1.8); computed with scipy.constants.
        (units.RSI_PER_R, 0.176110183683),
        (1.0 / units.RSI_PER_R, 5.678263341114),
        # 64798.91e3 ng / (3600 s x 0.09290304 m2 x 3386.388640341 Pa); computed with pint.
        (units.NG_PER_PERM, 57.21349467094),
        (units.NG_M_PER_PERM_INCH, 1.453222764642),
        # 0.45359237 / 0.028316846592.
        (units.KG_M3_PER_PCF, 16.018463373960),
    ],
)
def test_constants_are_their_definitions_to_twelve_digits(ours: float, worked_by_hand: float) -> None:
    assert ours == pytest.approx(worked_by_hand, rel=2e-12)


@pytest.mark.parametrize(
    ("value", "factor", "expected"),
    [
        # Densities in lb/ft3 -> kg/m3; computed with pint.
        *[
            (pcf, units.KG_M3_PER_PCF, kg_m3)
            for pcf, kg_m3 in [
                (0.4, 6.407),
                (0.5, 8.009),
                (0.7, 11.213),
                (1.5, 24.028),
                (1.7, 27.231),
                (1.8, 28.833),
                (2.0, 32.037),
                (2.4, 38.444),
                (2.8, 44.852),
                (3.0, 48.055),
            ]
        ],
        # A lowest core density of 28 kg/m3 is 1.747983 lb/ft3, not 1.75; computed with pint.
        (28.0, 1.0 / units.KG_M3_PER_PCF, 1.748),
        # 60 ng/(Pa s m2) is 1.0487 perm, so not 'one perm'; computed with pint.
        (60.0, 1.0 / units.NG_PER_PERM, 1.049),
        # RSI 3.5 is, not is RSI 3.522; computed with pint.
        (3.5, 1.0 / units.RSI_PER_R, 19.874),
        (20.0, units.RSI_PER_R, 3.522),
        # R-6 per inch of depth is RSI 1.0567 in 25.4 mm; computed with pint.
        (6.0, units.RSI_PER_R, 1.057),
        # 3 1/4 in is 82.55 mm and not the soft 83 mm; 50 mm is 1.9685 in and not 2 in. Exact.
        (3.25, units.MM_PER_INCH, 82.55),
        (50.0, 1.0 / units.MM_PER_INCH, 1.969),
    ],
)
def test_soft_conversions_of_the_trade_are_not_equalities(value: float, factor: float, expected: float) -> None:
    assert value * factor == pytest.approx(expected, abs=0.0005)


@pytest.mark.parametrize(
    ("r_per_inch", "conductivity"),
    # 0.144227889 / R per inch, W/(m K); computed with pint.
    [(3.5, 0.041208), (3.7, 0.038981), (6.0, 0.024038), (6.2, 0.023263), (6.5, 0.022189), (7.0, 0.020604)],
)
def test_r_per_inch_and_conductivity_are_the_same_foam(r_per_inch: float, conductivity: float) -> None:
    assert 0.0254 / (r_per_inch * units.RSI_PER_R) == pytest.approx(conductivity, abs=5e-7)


def test_a_temperature_difference_has_no_offset() -> None:
    # 5 F above the dew point is 2.778 K, and 3 K is 5.4 F: a difference, so no 32 is taken off. By definition.
    assert units.fahrenheit_difference_from_k(3.0) == pytest.approx(5.4, rel=1e-12)
    assert units.fahrenheit_difference_from_k(25.0 / 9.0) == pytest.approx(5.0, rel=1e-12)
    assert units.fahrenheit_difference_from_k(0.0) == 0.0
    assert units.fahrenheit_from_c(-40.0) == pytest.approx(-40.0, rel=1e-12)
    assert units.fahrenheit_from_c(100.0) == pytest.approx(212.0, rel=1e-12)
    # The printed temperature is rounded half up too: 22.5 C is 72.5 F.
    assert (IP.temperature(22.5), SI.temperature(22.5)) == ("73 °F", "23 °C")


# --- floating point --------------------------------------------------------------------------------------------------


def test_three_inches_meet_76_2_mm_though_the_computer_says_they_are_less() -> None:
    assert 3 * 25.4 < 76.2  # the hazard: 76.19999999999999
    assert depth_meets(3 * 25.4, 76.2)
    assert depth_meets(76.2, 3 * 25.4)
    assert not depth_over(76.2, 3 * 25.4)


def test_every_sixteenth_of_an_inch_meets_itself_however_it_was_converted() -> None:
    # To and fro between inches and millimetres, and after rounding to tenths of a millimetre (half of these fail bare >=).
    for number in range(12 * 16 + 1):
        inches = number / 16.0
        for depth_mm in (inches * 25.4, inches * 25.4 / 25.4 * 25.4, round(inches * 25.4, 1), inches * 0.0254 * 1000.0):
            assert depth_meets(depth_mm, inches * 25.4)
            assert not depth_over(depth_mm, inches * 25.4)
            assert sixteenths(depth_mm) == number


def test_a_tenth_of_a_millimetre_short_is_short() -> None:
    assert not depth_meets(76.1, 76.2)
    assert depth_over(76.3, 76.2)
    assert not depth_meets(47 / 16 * 25.4, 76.2)  # 2 15/16 in against 3 in
    assert not depth_meets(50.0, 50.8)  # 50 mm are not 2 in
    assert not depth_meets(0.0, 0.1)


def test_a_missing_number_never_meets_a_limit() -> None:
    # nan < 2 is False, so a comparison the other way round would let it pass.
    assert not depth_meets(math.nan, 50.8)
    assert not at_least(math.nan, 1.0)
    assert not at_most(math.nan, 1.0)


@pytest.mark.parametrize("limit", [0.02, 3.5222036736700004, 57.2, 28.0])
def test_figures_other_than_depths_meet_within_the_rounding_of_arithmetic_and_no_more(limit: float) -> None:
    assert at_least(limit * (1 - 1e-12), limit)
    assert at_most(limit * (1 + 1e-12), limit)
    assert not at_least(limit * (1 - 1e-6), limit)
    assert not at_most(limit * (1 + 1e-6), limit)


@given(depth_mm=st.floats(0.0, 1000.0), limit_mm=st.floats(0.0, 1000.0))
def test_all_comparisons_of_a_depth_are_one_comparison(depth_mm: float, limit_mm: float) -> None:
    # Loops compare with `least_meeting_mm`; the one function and they may not part.
    assert depth_meets(depth_mm, limit_mm) == (depth_mm >= least_meeting_mm(limit_mm))
    assert depth_meets(depth_mm, limit_mm) or depth_mm < limit_mm
    assert not depth_over(depth_mm, limit_mm) or depth_mm > limit_mm


# --- rounding --------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "places", "text"),
    [
        # Half up as people round (16 CFR 460.11 rounds R to the nearest tenth); Python's round gives 12, 6.2, 2.67, 1.0.
        (12.5, 0, "13"),
        (6.25, 1, "6.3"),
        (2.675, 2, "2.68"),
        (1.005, 2, "1.01"),
        (0.5, 0, "1"),
        (2.5, 0, "3"),
        (-2.5, 0, "-3"),
        (0.125, 2, "0.13"),
        (12.499999999999998, 0, "12"),
        (19.96, 1, "20.0"),
        # Nothing is written as minus nothing.
        (-0.4, 0, "0"),
        (-0.0, 1, "0.0"),
        (1e-7, 2, "0.00"),
        (123456.75, 1, "123456.8"),
    ],
)
def test_rounding_is_half_up_on_the_digits_that_a_person_sees(value: float, places: int, text: str) -> None:
    assert str(half_up(value, places)) == text


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_only_finite_numbers_are_rounded(value: float) -> None:
    with pytest.raises(ValueError, match="finite"):
        half_up(value)


def test_thirty_seconds_of_an_inch_round_up_to_the_next_sixteenth() -> None:
    for number in range(12 * 16):
        middle_mm = (number + 0.5) / 16.0 * 25.4
        assert sixteenths(middle_mm) == number + 1
        assert sixteenths(middle_mm - 0.001) == number


@pytest.mark.parametrize(
    ("depth_mm", "inches", "millimetres"),
    [
        # Worked by hand: 73 mm = 2.874 in = 45.98 sixteenths; 82.55 mm = 3 1/4 in; 31.75 mm = 1 1/4 in; 0.8 mm = 0.504/16.
        (73.0, "2 7/8 in", "73 mm"),
        (82.55, "3 1/4 in", "83 mm"),
        (31.75, "1 1/4 in", "32 mm"),
        (76.2, "3 in", "76 mm"),
        (50.0, "1 15/16 in", "50 mm"),
        (12.5, "1/2 in", "13 mm"),
        (0.8, "1/16 in", "1 mm"),
        (0.0, "0 in", "0 mm"),
    ],
)
def test_depths_are_written_as_a_tape_reads(depth_mm: float, inches: str, millimetres: str) -> None:
    assert (IP.depth(depth_mm), SI.depth(depth_mm)) == (inches, millimetres)


@pytest.mark.parametrize(
    ("written", "text"),
    [
        (IP.r(6.25 * units.RSI_PER_R), "R-6.3"),
        (SI.r(4.065), "RSI 4.07"),
        (IP.u(0.0625 / units.RSI_PER_R), "U-0.063"),
        (SI.u(0.2555), "U 0.256 W/(m²K)"),
        (IP.permeance(0.865 * units.NG_PER_PERM), "0.87 perm"),
        (SI.permeance(49.95), "50.0 ng/(Pa s m²)"),
        (IP.area(412.5 * units.M2_PER_FT2), "413 ft²"),
        (SI.area(38.25), "38.3 m²"),
        (SI.density(33.65), "33.7 kg/m³"),
        (SI.foam(0.0905), "91 litres"),
        (IP.foam(2.35 * units.M3_PER_BOARD_FOOT), "2.4 board feet"),
        (IP.foam(0.01 * units.M3_PER_BOARD_FOOT), "under 0.1 board feet"),
        (SI.mass(12.5), "13 kg"),
        (SI.mass(5.35), "5.4 kg"),
        # At two places 0.004 lb/ft3 would read as plus-minus nothing, so it gets a third.
        (IP.plus_minus(0.004 * units.KG_M3_PER_PCF), "± 0.004 pcf"),
        (SI.plus_minus(0.25), "± 0.3 kg/m³"),
        (SI.percent(0.125), "13 %"),
    ],
)
def test_figures_are_written_half_up_in_the_units_of_the_job(written: str, text: str) -> None:
    assert written == text


def test_more_than_nothing_is_not_written_as_nothing_nor_less_than_all_as_all() -> None:
    assert [SI.percent(share) for share in (0.0, 0.004, 0.005, 0.994, 0.996, 1.0)] == [
        "0 %",
        "under 1 %",
        "1 %",
        "99 %",
        "over 99 %",
        "100 %",
    ]


@pytest.mark.parametrize(
    ("written", "text"),
    [
        # 101 mm is 3.976 in, 63.6 sixteenths: it rounds to 4 in, misses 4 in, and must not be printed as 4 in.
        (IP.depth_held(101.0, 101.6), "just under 4 in"),
        (IP.depth_held(101.6, 101.6), "4 in"),
        (IP.depth_held(101.56, 101.6), "4 in"),
        (IP.depth_held(100.0, 101.6), "3 15/16 in"),
        (SI.depth_held(75.8, 76.0), "just under 76 mm"),
        (SI.depth_held(76.2, 76.0), "76 mm"),
        (IP.depth_held_below(83.0, 82.55), "just over 3 1/4 in"),
        (SI.depth_held_below(83.0, 82.55), "just over 83 mm"),
        (IP.depth_held_below(82.55, 82.55), "3 1/4 in"),
        # prints was asked.
        (IP.r_held(19.96 * units.RSI_PER_R, 20 * units.RSI_PER_R), "just under R-20.0"),
        (IP.r_held(20.0 * units.RSI_PER_R, 20 * units.RSI_PER_R), "R-20.0"),
        (IP.r_held(19.6 * units.RSI_PER_R, 20 * units.RSI_PER_R), "R-19.6"),
        (SI.r_held(3.5, 20 * units.RSI_PER_R), "RSI 3.50"),
        (SI.r_held(3.5199, 3.5222), "just under RSI 3.52"),
        # 57.3 ng is 1.0015 perm: it prints as 1.00 perm and is over 57.2.
        (IP.permeance_held(57.3, 57.2), "just over 1.00 perm"),
        (SI.permeance_held(57.23, 57.2), "just over 57.2 ng/(Pa s m²)"),
        (IP.permeance_held(57.2, 57.2), "1.00 perm"),
        (SI.density_held(27.96, 28.0, None), "just under 28.0 kg/m³"),
        (SI.density_held(32.037, None, 32.0), "just over 32.0 kg/m³"),
        (IP.density_held(32.037, None, 32.0), "just over 2.00 pcf"),
        (SI.density_held(30.0, 28.0, 32.0), "30.0 kg/m³"),
        (SI.percent_held(0.051, 0.05), "just over 5 %"),
        (SI.percent_held(0.05, 0.05), "5 %"),
        (SI.percent_held(0.06, 0.05), "6 %"),
    ],
)
def test_a_figure_that_misses_its_limit_is_never_written_equal_to_it(written: str, text: str) -> None:
    assert written == text


@given(
    limit=st.floats(0.1, 400.0),
    off=st.floats(-2.0, 2.0),
    words=st.sampled_from([IP, SI]),
)
def test_no_near_miss_of_any_quantity_is_written_as_its_limit(limit: float, off: float, words: Wording) -> None:
    value = max(limit + off, 0.0)
    lower: list[tuple[Callable[[float, float], str], Callable[[float], str], bool]] = [
        (words.depth_held, words.depth, depth_meets(value, limit)),
        (words.r_held, words.r, at_least(value, limit)),
        (lambda v, low: words.density_held(v, low, None), words.density, at_least(value, limit)),
        (words.depth_held_below, words.depth, not depth_over(value, limit)),
        (words.permeance_held, words.permeance, at_most(value, limit)),
        (lambda v, high: words.density_held(v, None, high), words.density, at_most(value, limit)),
    ]
    for held, plain, meets in lower:
        assert (held(value, limit) == plain(limit)) <= meets
        if meets:
            assert held(value, limit) == plain(value)


# --- names and numbers in sentences ----------------------------------------------------------------------------------


def test_bays_are_named_in_runs_of_three_and_more() -> None:
    labels = [str(number) for number in range(1, 25)]
    assert bay_list(["9", "10", "11", "16", "20", "21"], labels) == "bays 9 to 11, 16, 20 and 21"
    assert bay_list(["5"], labels) == "bay 5"
    assert bay_list(["5", "6"], labels) == "bays 5 and 6"
    assert bay_list([], labels) == "no bay"
    assert (listed(["a"]), listed(["a", "b"]), listed(["a", "b", "c"])) == ("a", "a and b", "a, b and c")
    assert (count(1, "bay"), count(0, "bay"), count(1204, "point")) == ("1 bay", "0 bays", "1,204 points")


# --- yields ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("density_pcf", "board_feet"),
    # A set of 1000 lb gives 1000 x 12 / density board feet: arithmetic. What stands in place at 2.4 lb/ft3 overall yields
    # a sixth less than its core density of 2.0 would promise.
    [(2.0, 6000.0), (2.4, 5000.0), (2.5, 4800.0), (0.5, 24000.0), (0.6, 20000.0)],
)
def test_a_thousand_pound_set_yields_twelve_thousand_over_its_density(density_pcf: float, board_feet: float) -> None:
    set_kg = 1000.0 * units.KG_PER_LB
    assert units.board_feet_per_set(set_kg, density_pcf * units.KG_M3_PER_PCF) == pytest.approx(board_feet, rel=1e-12)


def test_the_foam_on_fifteen_hundred_square_feet_weighs_what_arithmetic_says() -> None:
    # 1500 ft2 x 3 in x 2.0 lb/ft3 = 1500 x 0.25 x 2 = 750 lb; that is 4500 board feet.
    assert units.board_feet_per_set(750.0 * units.KG_PER_LB, 2.0 * units.KG_M3_PER_PCF) == pytest.approx(4500.0)
    # 76.2 mm x 32.037 kg/m3 = 2.441 kg/m2.
    mass_kg_m2 = 0.0762 * 2.0 * units.KG_M3_PER_PCF
    assert mass_kg_m2 == pytest.approx(2.441, abs=0.0005)
