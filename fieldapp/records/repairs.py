"""What became of each deficiency: open, repaired (somebody proposes that it is mended), accepted (an inspector saw it)."""

from dataclasses import dataclass

from fieldapp.records.job import Job
from fieldapp.records.record import Record


@dataclass(frozen=True, slots=True)
class DeficiencyHistory:
    """A deficiency with its repairs and the acceptances of these by an inspector."""

    deficiency: Record
    repairs: tuple[Record, ...]
    acceptances: tuple[Record, ...]

    @property
    def state(self) -> str:
        """'open', 'repaired' or 'accepted'."""
        if self.acceptances:
            return "accepted"
        return "repaired" if self.repairs else "open"


def deficiency_histories(job: Job) -> tuple[DeficiencyHistory, ...]:
    """All deficiencies that stand, in order. Only an acceptance in the role of inspector closes one."""
    found: list[DeficiencyHistory] = []
    for deficiency in job.of("deficiency"):
        repairs = tuple(record for record in job.of("repair") if record.body["deficiency"] == deficiency.id)
        mended = {record.id for record in repairs}
        acceptances = tuple(
            record
            for record in job.of("acceptance")
            if record.body["repair"] in mended and record.body["role"] == "inspector"
        )
        found.append(DeficiencyHistory(deficiency, repairs, acceptances))
    return tuple(found)
