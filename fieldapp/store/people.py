"""Who uses the server: plain values, without a database."""

from dataclasses import dataclass
from typing import Final, Literal

Role = Literal["office", "inspector", "applicator"]
ROLES: Final[tuple[Role, ...]] = ("office", "inspector", "applicator")
SignInKind = Literal["browser", "device"]


@dataclass(frozen=True, slots=True)
class Account:
    """A person who may sign in; `name` is what stands in `by` of their records, and never changes."""

    id: str
    name: str
    role: Role
    firm: str | None
    active: bool


@dataclass(frozen=True, slots=True)
class SignIn:
    """One sign-in of an account; `token` is there only when it was just made, since it is kept nowhere. Times RFC 3339."""

    id: str
    account: Account
    kind: SignInKind
    label: str
    made_at: str
    last_seen: str
    token: str = ""


@dataclass(frozen=True, slots=True)
class SignInEvent:
    """What happened at the door: 'signed-in', 'refused', 'throttled', 'signed-out' or 'revoked'."""

    at: str
    what: str
    name: str
    address: str
    label: str
    sign_in: str
