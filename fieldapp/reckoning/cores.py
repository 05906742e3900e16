"""Core samples of a surface held against the foam's density limits."""

from collections.abc import Sequence

from fieldapp.reckoning.density import density_kg_m3, plus_minus_kg_m3
from fieldapp.reckoning.inputs import Core, Foam
from fieldapp.reckoning.limits import at_least, at_most
from fieldapp.reckoning.results import CoreResult, DensityFigures

#: Words of a core that its foam's limits say something about.
HELD = ("within", "light", "heavy", "unproven")


def core_result(core: Core, foam: Foam | None) -> CoreResult:
    """A core's density, its plus-minus and its word.

    Words: within, light, heavy, unproven (a limit lies inside the plus-minus), 'with skin' (not held against limits of core
    density) or 'no limits' (the foam names none).
    """
    density = density_kg_m3(core.mass_g, core.volume_m3)
    plus_minus = None
    if core.sizes_mm and core.scale_step_g is not None and core.calliper_step_mm is not None:
        plus_minus = plus_minus_kg_m3(density, core.mass_g, core.scale_step_g, core.sizes_mm, core.calliper_step_mm)
    return CoreResult(
        record=core.record,
        bay=core.bay,
        label=core.label or core.bay_label,
        kg_m3=density,
        plus_minus_kg_m3=plus_minus,
        word=_word(core, foam, density, plus_minus),
    )


def _word(core: Core, foam: Foam | None, density: float, plus_minus: float | None) -> str:
    low = foam.density_min_kg_m3 if foam else None
    high = foam.density_max_kg_m3 if foam else None
    if core.with_skin:
        return "with skin"
    if low is None and high is None:
        return "no limits"
    if plus_minus and any(limit is not None and abs(density - limit) <= plus_minus for limit in (low, high)):
        return "unproven"
    if low is not None and not at_least(density, low):
        return "light"
    if high is not None and not at_most(density, high):
        return "heavy"
    return "within"


def density_figures(cores: Sequence[Core], foam: Foam | None) -> DensityFigures:
    """Densities of all cores of a surface; mean of the cores' own densities. [kg/m3]"""
    each = tuple(core_result(core, foam) for core in cores)
    total = 0.0
    for core in each:
        total += core.kg_m3
    return DensityFigures(
        cores=len(each),
        mean_kg_m3=total / len(each) if each else None,
        min_kg_m3=min((core.kg_m3 for core in each), default=None),
        max_kg_m3=max((core.kg_m3 for core in each), default=None),
        each=each,
    )
