"""Water vapour through foam: permeance by depth, and the classes of vapour retarders."""

from collections.abc import Sequence
from typing import Final

from fieldapp.reckoning.limits import DEPTH_TOLERANCE_MM, at_most
from fieldapp.reckoning.units import NG_PER_PERM

#: Upper limits of the vapour retarder classes: 0.1, 1 and 10 perm. [ng/(Pa s m2)] Source: International Residential Code
#: 2021, table R702.7(1), by ASTM E96 procedure A.
#: The limits themselves belong to the class, so they are exact: a sheet of '1 perm' is class II.
CLASS_LIMITS_NG: Final = (("I", 0.1 * NG_PER_PERM), ("II", NG_PER_PERM), ("III", 10.0 * NG_PER_PERM))

#: A retarder by itself must be of class II or better. [ng/(Pa s m2)]
SEPARATE_RETARDER_NG: Final = NG_PER_PERM


def permeance_ng(depths_mm: Sequence[float], areas_m2: Sequence[float], permeability_ng_m: float) -> float | None:
    """Water-vapour permeance of uneven foam, flows in parallel. [ng/(Pa s m2)]

        M = sum( a_i mu / d_i ) / sum( a_i )

    Args:
        depths_mm: Foam depth at each point; d_i. [mm]
        areas_m2: The area that goes with each point; a_i. [m2]
        permeability_ng_m: Permeability of the foam; mu. [ng/(Pa s m)]
    Returns:
        The permeance; None without points or where one is bare, since nothing there resists.
    Source: Fick's law for parallel paths; plain arithmetic.
    """
    flow = 0.0
    area = 0.0
    for depth_mm, area_m2 in zip(depths_mm, areas_m2, strict=True):
        if depth_mm <= DEPTH_TOLERANCE_MM:
            return None
        flow += area_m2 / depth_mm
        area += area_m2
    return flow * permeability_ng_m * 1000.0 / area if area > 0.0 else None


def vapour_class(permeance: float) -> str | None:
    """Class of a vapour retarder ('I', 'II', 'III'), or None where the permeance is above class III."""
    for name, limit_ng in CLASS_LIMITS_NG:
        if at_most(permeance, limit_ng):
            return name
    return None


def sheet_must_be_inside(climate_zone: str) -> bool:
    """True in zones 4C and 5 to 8, where a retarder belongs on the side that is warm in winter.

    Source: International Residential Code R702.7, editions to 2018 (class I or II in zones 5 to 8 and marine 4).
    """
    return climate_zone == "4C" or climate_zone[0] in "5678"
