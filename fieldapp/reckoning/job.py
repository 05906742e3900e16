"""One job in, one result out: no clock, no network, no randomness."""

from fieldapp.reckoning.inputs import CountedJob
from fieldapp.reckoning.results import JobResult, PlaceResult, worst
from fieldapp.reckoning.sampling import limits_of_agreement
from fieldapp.reckoning.surface import reckon_surface
from fieldapp.reckoning.wording import Wording


def reckon(job: CountedJob) -> JobResult:
    """Reckon a whole job; a place from its surfaces, the job from all of them (without any: unproven)."""
    wording = Wording(job.units)
    surfaces = tuple(reckon_surface(surface, job.climate_zone, wording) for surface in job.surfaces)
    return JobResult(
        key=job.key,
        name=job.name,
        units=job.units,
        purpose=job.purpose,
        result=worst([surface.result for surface in surfaces]),
        agreement=limits_of_agreement(job.pair_differences_mm),
        places=tuple(
            PlaceResult(place.key, place.name, worst([s.result for s in surfaces if s.place == place.key]))
            for place in job.places
        ),
        surfaces=surfaces,
    )
