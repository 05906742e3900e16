"""Density of core samples, and how far it can be trusted."""

from math import pi, sqrt


def cylinder_m3(diameter_mm: float, length_mm: float) -> float:
    """Volume of a cylindrical core. [m3]"""
    return pi / 4.0 * diameter_mm * diameter_mm * length_mm * 1e-9


def prism_m3(width_mm: float, length_mm: float, depth_mm: float) -> float:
    """Volume of a rectangular core. [m3]"""
    return width_mm * length_mm * depth_mm * 1e-9


def density_kg_m3(mass_g: float, volume_m3: float) -> float:
    """Mass over volume. [kg/m3]"""
    return mass_g / 1000.0 / volume_m3


def plus_minus_kg_m3(
    density: float,
    mass_g: float,
    scale_step_g: float,
    sizes_mm: tuple[tuple[float, int], ...],
    calliper_step_mm: float,
) -> float:
    """What half a step of the scale and of the calliper can do to a density. [kg/m3]

        rho sqrt( (s / 2m)^2 + sum( (k_i c / 2x_i)^2 ) )

    Args:
        density: The density; rho. [kg/m3]
        mass_g: Mass of the core; m. [g]
        scale_step_g: Step of the scale; s. [g]
        sizes_mm: Each measured length with the power in which it enters the volume (a diameter's is 2); x_i, k_i. [mm]
        calliper_step_mm: Step of the calliper; c. [mm]
    Source: propagation of independent relative errors in quadrature (JCGM 100:2008, clause 5.1); arithmetic.
    """
    total = (scale_step_g / 2.0 / mass_g) ** 2
    for size_mm, power in sizes_mm:
        total += (power * calliper_step_mm / 2.0 / size_mm) ** 2
    return density * sqrt(total)
