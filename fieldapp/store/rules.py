"""Who may write which record: rules that need nothing but the record and the account."""

from typing import Final

from fieldapp.records.fields import shown
from fieldapp.records.record import Record, Refusal
from fieldapp.store.people import Account

#: What an applicator writes freely in a job that is shared with the firm; withdrawals of their own facts alone.
_APPLICATOR_KINDS: Final = frozenset(
    {"touch-up", "repair", "spray", "conditions", "pull", "photo", "objection", "withdrawal"}
)
_APPLICATOR_SIGNS_AS: Final = ("applicator", "witness", "received")


def refused_for(record: Record, writer: Account | None) -> Refusal | None:
    """Why this account may not write this record; None where it may. Without a writer (the office's command) all may be."""
    if writer is None or writer.role == "office":
        return None
    if record.by != writer.name:
        return Refusal(record.id, "by", shown(record.by), f"{writer.name}, who is signed in")
    return _refused_for_applicator(record) if writer.role == "applicator" else None


def _refused_for_applicator(record: Record) -> Refusal | None:
    if record.kind in ("reading", "low-spot"):
        purpose = record.body["purpose"]
        return None if purpose == "self-check" else Refusal(record.id, "purpose", shown(purpose), "self-check")
    if record.kind == "signature":
        role = record.body["role"]
        allowed = f"one of {', '.join(_APPLICATOR_SIGNS_AS)}"
        return None if role in _APPLICATOR_SIGNS_AS else Refusal(record.id, "role", shown(role), allowed)
    if record.kind in _APPLICATOR_KINDS:
        return None
    allowed = f"of an applicator: self-checks, signature, {', '.join(sorted(_APPLICATOR_KINDS))}"
    return Refusal(record.id, "kind", shown(record.kind), allowed)
