"""Thermal resistance: from depth, through uneven foam, and through framing.

Everything is in m2K/W (RSI) and W/(m2K); heat is taken to flow straight through, in parallel paths.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import inf, log1p
from typing import Final

from fieldapp.reckoning.limits import DEPTH_TOLERANCE_MM, depth_meets, depth_over
from fieldapp.reckoning.units import MM_PER_INCH, RSI_PER_R


@dataclass(frozen=True, slots=True)
class PerMetre:
    """A foam whose resistance is in proportion to its depth."""

    rsi_per_m: float

    def rsi(self, depth_mm: float) -> float:
        """Resistance of a depth of foam, without films. [m2K/W]"""
        return self.rsi_per_m * depth_mm / 1000.0

    def beyond_tested(self, depth_mm: float) -> bool:
        """A single figure names no tested range."""
        return False


@dataclass(frozen=True, slots=True)
class Table:
    """A foam whose maker gives resistances at tested depths: rows of (depth_mm, rsi), depths rising."""

    rows: tuple[tuple[float, float], ...]

    def rsi(self, depth_mm: float) -> float:
        """Resistance of a depth of foam, without films. [m2K/W]

        Straight lines between the rows. Outside them the nearest row's own R per depth is used so that there is a figure at
        all, and `beyond_tested` says that it rests on no test (16 CFR 460.17 forbids selling by it).
        """
        first_depth, first_rsi = self.rows[0]
        if depth_mm <= first_depth:
            return first_rsi / first_depth * depth_mm
        low_depth, low_rsi = first_depth, first_rsi
        for high_depth, high_rsi in self.rows[1:]:
            if depth_mm <= high_depth:
                return low_rsi + (high_rsi - low_rsi) * (depth_mm - low_depth) / (high_depth - low_depth)
            low_depth, low_rsi = high_depth, high_rsi
        return low_rsi / low_depth * depth_mm

    def beyond_tested(self, depth_mm: float) -> bool:
        """True where a depth of foam lies outside the tested depths; a bare point (0) claims nothing."""
        if depth_mm <= DEPTH_TOLERANCE_MM:
            return False
        return not depth_meets(depth_mm, self.rows[0][0]) or depth_over(depth_mm, self.rows[-1][0])


Resistance = PerMetre | Table

#: Surface films (inside, outside) by assembly. [m2K/W] Inside: still air, 0.68, 0.61 and 0.92 h ft2 F/Btu for a wall, heat
#: going up and heat going down; outside 0.17, 15 mph wind. Source: film values as in ANSI/ASHRAE/IES 90.1-2016 appendix A
#: (0.92 from memory), rounded to 0.001.
FILMS_RSI: Final[dict[str, tuple[float, float]]] = {
    "wall": (0.120, 0.030),
    "rim": (0.120, 0.030),
    "foundation": (0.120, 0.030),
    "sloped-roof": (0.107, 0.030),
    "attic-floor": (0.107, 0.030),
    "floor": (0.162, 0.030),
}


def films_rsi(assembly: str, inside_rsi: float | None = None, outside_rsi: float | None = None) -> float:
    """Both surface films of an assembly; given ones go before the usual ones. [m2K/W]"""
    usual_inside, usual_outside = FILMS_RSI[assembly]
    return (usual_inside if inside_rsi is None else inside_rsi) + (
        usual_outside if outside_rsi is None else outside_rsi
    )


def conductance(area_m2: float, rsi: float) -> float:
    """Conductance of an area; without bound where nothing resists, as at a bare point without films. [W/K]"""
    return area_m2 / rsi if rsi > 0.0 else inf


def parallel_u(
    depths_mm: Sequence[float], areas_m2: Sequence[float], resistance: Resistance, series_rsi: float
) -> float:
    """Area-weighted mean conductance of uneven foam in series with something even. [W/(m2K)]

        U = sum( a_i / (Rs + R(d_i)) ) / sum( a_i )

    Args:
        depths_mm: Foam depth at each point; d_i. [mm]
        areas_m2: The area that goes with each point; a_i. [m2]
        resistance: The foam's resistance by depth; R.
        series_rsi: Resistance in series with the foam, more than zero; Rs. [m2K/W]
    Raises:
        ValueError: without points, or with nothing in series (a bare point would then conduct without bound).
    Source: parallel-path (isothermal upper limit) method, e.g. ISO 6946:2017 clause 6.7.2.2, upper limit; from memory.
    """
    if not depths_mm:
        raise ValueError("a mean over no points: at least one depth is needed")
    if not series_rsi > 0.0:
        raise ValueError(f"series_rsi must be more than 0, found {series_rsi}")
    conductance = 0.0
    area = 0.0
    for depth_mm, area_m2 in zip(depths_mm, areas_m2, strict=True):
        conductance += area_m2 / (series_rsi + resistance.rsi(depth_mm))
        area += area_m2
    return conductance / area


def delivered_rsi(
    depths_mm: Sequence[float], areas_m2: Sequence[float], resistance: Resistance, series_rsi: float
) -> float:
    """Resistance that uneven foam delivers to parallel heat flow, what is in series taken off again. [m2K/W]

    1 / U - Rs, with U of `parallel_u`
    """
    return 1.0 / parallel_u(depths_mm, areas_m2, resistance, series_rsi) - series_rsi


def tapered_u(series_rsi: float, taper_rsi: float) -> float:
    """U of a layer that tapers evenly from nothing to `taper_rsi` across a rectangle. [W/(m2K)]

        U = ln(1 + R1/R0) / R1

    Source: ISO 6946:2007 annex C, :2017 annex E, rectangular area; formula from memory, checked by brute force.
    """
    if taper_rsi < 1e-12 * series_rsi:
        return 1.0 / series_rsi
    return log1p(taper_rsi / series_rsi) / taper_rsi


#: Softwood along the path of heat: 1.25 h ft2 F/(Btu in); from memory. [m2K/W per m]
WOOD_RSI_PER_M: Final = 8.67


def wood_frame_u(clear_u: float, framing_share: float, framing_depth_mm: float, series_rsi: float) -> float:
    """U of foam between wood framing, by parallel paths. [W/(m2K)]

        U = (1 - f) Uc + f / (Rs + 8.67 D)

    Args:
        clear_u: U through the foam between the framing; Uc. [W/(m2K)]
        framing_share: Share of the area that is framing, 0 to 1; f.
        framing_depth_mm: Depth of the framing; D. [mm]
        series_rsi: Films and the other layers; Rs. [m2K/W]
    """
    framing_rsi = WOOD_RSI_PER_M * framing_depth_mm / 1000.0
    return (1.0 - framing_share) * clear_u + framing_share / (series_rsi + framing_rsi)


#: Effective R of insulated steel-stud cavities as printed: (depth in, spacing in) -> rows of (cavity R, effective R), in
#: h ft2 F/Btu. Source: ANSI/ASHRAE/IES 90.1 table A9.2-2 (formerly A9.2B), also IECC C402.1.4; the 0.46 for R-13 at
#: 16 in was seen quoted, all other rows are from memory and must be checked against the adopted code.
STEEL_EFFECTIVE_R: Final[dict[tuple[float, float], tuple[tuple[float, float], ...]]] = {
    (3.5, 16.0): ((11.0, 5.5), (13.0, 6.0), (15.0, 6.4)),
    (3.5, 24.0): ((11.0, 6.6), (13.0, 7.2), (15.0, 7.8)),
    (6.0, 16.0): ((19.0, 7.1), (21.0, 7.4)),
    (6.0, 24.0): ((19.0, 8.6), (21.0, 9.0)),
    (8.0, 16.0): ((25.0, 7.8),),
    (8.0, 24.0): ((25.0, 9.6),),
}


def steel_frame_rsi(cavity_rsi: float, framing_depth_mm: float, spacing_mm: float) -> float | None:
    """Effective resistance of a cavity between steel studs; None where it is outside the published table. [m2K/W]

    Between two rows of one depth and spacing a straight line is drawn; nothing is extrapolated (ANSI/ASHRAE/IES 90.1
    appendix A: interpolation is allowed, extrapolation is not). Depth and spacing must be the table's, within 2 mm.
    """
    cavity_r = cavity_rsi / RSI_PER_R
    for (depth_in, spacing_in), rows in STEEL_EFFECTIVE_R.items():
        if abs(framing_depth_mm - depth_in * MM_PER_INCH) > 2.0 or abs(spacing_mm - spacing_in * MM_PER_INCH) > 2.0:
            continue
        for (low_r, low_effective), (high_r, high_effective) in zip(rows, rows[1:] or rows, strict=False):
            if low_r - 1e-6 <= cavity_r <= high_r + 1e-6:
                share = (cavity_r - low_r) / (high_r - low_r) if high_r > low_r else 0.0
                return (low_effective + (high_effective - low_effective) * share) * RSI_PER_R
    return None
