"""Words for what records name by a code, and where things are."""

from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from fieldapp.records.record import Record
    from fieldapp.report.view import JobView

SORTS: Final = {
    "void": "void in the foam",
    "gap": "gap",
    "pulled-away": "foam pulled away from the framing",
    "shrinkage": "shrinkage",
    "blister": "blister",
    "scorched": "scorched foam",
    "brittle-or-dark": "brittle or dark foam",
    "soft-or-sticky": "soft or sticky foam",
    "odour": "odor that lasts",
    "lift-separated": "lifts separated",
    "cracked": "cracked foam",
    "missed": "missed spot",
    "scooped": "foam scooped out",
    "overspray": "overspray",
    "vent-path-closed": "vent path closed by foam",
    "foam-on-heat-source": "foam on a heat source",
    "box-filled": "electrical box filled with foam",
    "other": "other",
}
BLOCKED: Final = {
    "pipe-or-box": ("P", "pipe or box"),
    "no-access": ("N", "no access"),
    "already-covered": ("C", "already covered"),
    "unsafe": ("U", "unsafe"),
}
WHERE: Final = {
    "stud-edge": "at the stud's edge",
    "plate": "at the plate",
    "corner": "in a corner",
    "behind-pipe": "behind a pipe",
    "at-box": "at a box",
    "other": "elsewhere",
}
ASSEMBLIES: Final = {
    "wall": "wall",
    "sloped-roof": "sloped roof",
    "attic-floor": "attic floor",
    "rim": "rim",
    "floor": "floor",
    "foundation": "foundation",
}
BASES: Final = {
    "minimum": "minimum",
    "average-with-floor": "average with a floor",
    "average": "average",
    None: "basis not stated",
}
CHOSEN: Final = {
    "all": "all bays were to be read",
    "random": "the bays to read were picked at random",
    "every-kth": "the bays to read were picked at a fixed step",
    "where-it-looked-thin": "the bays to read were picked where they looked thin",
    None: "how the bays to read were picked is not stated",
}
CHECKS: Final = {
    "coverage": "Coverage",
    "mean-depth": "Mean depth",
    "lowest-depth": "Lowest depth",
    "under-spray": "Area under depth",
    "delivered-r": "Delivered R",
    "vapour": "Vapor rule",
    "density": "Density",
    "over-depth": "Greatest depth",
    "deficiencies": "Deficiencies",
}
ROLES: Final = {
    "inspector": "inspector",
    "applicator": "applicator",
    "witness": "witness",
    "received": "received (which is not agreed)",
}
BROKE: Final = {
    "in-foam": "broke in the foam",
    "at-substrate": "broke at the substrate",
    "between-lifts": "broke between lifts",
    None: "where it broke is not noted",
}


def check_name(check_id: str, vapor: str) -> str:
    """Name of a check; 'vapor' or 'vapour' as the job spells it."""
    return CHECKS[check_id].replace("Vapor", vapor.capitalize())


def ends(assembly: str) -> tuple[str, str]:
    """What the top and the bottom of a bay are called."""
    return ("ridge", "eave") if assembly == "sloped-roof" else ("top", "bottom")


def where_found(view: "JobView", record: "Record") -> str:
    """'bay 5 of North slope', or the surface's name."""
    bay_key, surface_key = record.body.get("bay"), record.body.get("surface")
    if bay_key and (bay := view.job.bay(bay_key)):
        owner = view.job.surface_of(bay_key)
        return f"bay {bay.name} of {owner.name}" if owner else f"bay {bay.name}"
    return next((surface.name for surface in view.job.surfaces if surface.key == surface_key), "this job")
