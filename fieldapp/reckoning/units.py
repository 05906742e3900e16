"""Exact constants between the units that records hold (SI) and the units that people in North America read.

Records and reckoning hold mm, m2, m3, kg/m3, C, ng/(Pa s m2) and m2K/W; conversion happens only where text is made.
Sources: the inch, pound, gallon and grain are exact by definition (international yard and pound, 1959); the Btu is the
International Table Btu; the inch of mercury is the conventional one at 0 C (13595.1 kg/m3 x 9.80665 m/s2).
"""

from typing import Final

MM_PER_INCH: Final = 25.4
M_PER_FOOT: Final = 0.3048
M2_PER_FT2: Final = M_PER_FOOT * M_PER_FOOT
KG_PER_LB: Final = 0.45359237
KG_PER_GRAIN: Final = KG_PER_LB / 7000.0
J_PER_BTU: Final = 1055.05585262
PA_PER_INHG: Final = 13595.1 * 9.80665 * 0.0254
PA_PER_PSI: Final = KG_PER_LB * 9.80665 / (0.0254 * 0.0254)

#: Thermal resistance: 1 h ft2 F/Btu in m2K/W.
RSI_PER_R: Final = 3600.0 * M2_PER_FT2 / (J_PER_BTU * 1.8)
#: Permeance: 1 perm (grain/(h ft2 inHg)) in ng/(Pa s m2).
NG_PER_PERM: Final = KG_PER_GRAIN * 1e12 / (3600.0 * M2_PER_FT2 * PA_PER_INHG)
#: Permeability: 1 perm inch in ng/(Pa s m).
NG_M_PER_PERM_INCH: Final = NG_PER_PERM * 0.0254
#: Density: 1 lb/ft3 in kg/m3.
KG_M3_PER_PCF: Final = KG_PER_LB / (M_PER_FOOT**3)
#: Volume: 1 board foot (1 ft2 x 1 in) in m3.
M3_PER_BOARD_FOOT: Final = M2_PER_FT2 * 0.0254
#: Volume: 1 ft3 in m3.
M3_PER_FT3: Final = M_PER_FOOT**3


def fahrenheit_from_c(temperature_c: float) -> float:
    """A temperature in degrees Fahrenheit. [F]"""
    return temperature_c * 1.8 + 32.0


def fahrenheit_difference_from_k(difference_k: float) -> float:
    """A temperature *difference* in Fahrenheit degrees; it has no offset. [F]"""
    return difference_k * 1.8


def board_feet_per_set(set_kg: float, density_kg_m3: float) -> float:
    """Theoretical yield of a set of chemicals: its mass over the density that it cures to. [board feet]

    Source: arithmetic; 1000 lb at 2.0 lb/ft3 give 6000 board feet.
    """
    return set_kg / density_kg_m3 / M3_PER_BOARD_FOOT
