"""Who may sign in, who may write and see what, and what a stranger can find out: nothing."""

import dataclasses
import re
import threading
from collections.abc import Iterator
from contextlib import suppress
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest
from werkzeug import security

from fieldapp.store import accounts as accounts_module
from fieldapp.store.accounts import LASTS_S, PASSWORD_METHOD, AccountRefused, Accounts
from fieldapp.store.links import Links
from fieldapp.store.people import Account, SignIn
from fieldapp.store.store import DATABASE, Store
from fieldapp.store.throttle import LIMITS, SignInRefused
from tests.jobs import JOB, SURFACE, Notebook
from tests.sheets import key
from tests.stores import FIRM, PASSWORD, QUICK, Clock, opened, person, states

HOUR, DAY = 3600.0, 86_400.0


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def store(tmp_path: Path, clock: Clock) -> Iterator[Store]:
    with opened(tmp_path / "data", clock) as made:
        yield made


def enter(store: Store, name: str = "Ada", password: str = PASSWORD, address: str = "10.0.0.1") -> SignIn:
    return store.accounts.sign_in(name, password, kind="device", label="a phone", address=address)


def refused(store: Store, name: str = "Ada", password: str = "wrong", address: str = "10.0.0.1") -> int | None:
    with pytest.raises(SignInRefused) as caught:
        enter(store, name, password, address)
    return caught.value.retry_after_s


# The first account


def test_the_first_account_is_made_once_by_the_token_that_was_printed(store: Store) -> None:
    token = store.accounts.first_account_token()
    assert token is not None
    with pytest.raises(AccountRefused, match="token"):
        store.accounts.make_first(token[:-1] + ("A" if token[-1] != "A" else "B"), "Ada", PASSWORD)
    assert store.accounts.make_first(token, "Ada", PASSWORD).role == "office"
    with pytest.raises(AccountRefused, match="token"):
        store.accounts.make_first(token, "Eve", PASSWORD)
    assert store.accounts.first_account_token() is None


def test_a_restart_prints_another_token_and_the_one_before_is_void(store: Store) -> None:
    first, second = store.accounts.first_account_token(), store.accounts.first_account_token()
    assert first is not None
    assert second is not None
    assert not store.accounts.is_first_token(first)
    assert store.accounts.is_first_token(second)


def test_a_token_that_was_not_used_is_void_once_there_is_an_account(store: Store) -> None:
    token = store.accounts.first_account_token()
    assert token is not None
    person(store, "Ada", "office")
    with pytest.raises(AccountRefused, match="token"):
        store.accounts.make_first(token, "Eve", PASSWORD)


def test_of_two_who_use_the_first_token_at_once_one_makes_an_account(store: Store) -> None:
    token = store.accounts.first_account_token()
    assert token is not None
    made: list[Account] = []
    barrier = threading.Barrier(4)

    def make(name: str) -> None:
        barrier.wait()
        with suppress(AccountRefused):
            made.append(store.accounts.make_first(token, name, PASSWORD))

    threads = [threading.Thread(target=make, args=(f"Person {number}",)) for number in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(made) == 1
    assert store.accounts.all() == made


# Accounts


@pytest.mark.parametrize(
    ("name", "role", "password", "firm", "field"),
    [
        ("", "office", PASSWORD, None, "name"),
        ("  ", "office", PASSWORD, None, "name"),
        ("x" * 61, "office", PASSWORD, None, "name"),
        ("a\nb", "office", PASSWORD, None, "name"),
        ("a\u202eb", "office", PASSWORD, None, "name"),
        ("Ada", "admin", PASSWORD, None, "role"),
        ("Ada", "applicator", PASSWORD, None, "firm"),
        ("Ada", "applicator", PASSWORD, " ", "firm"),
        ("Ada", "office", "short", None, "password"),
        ("Ada", "office", "x" * 1001, None, "password"),
        ("Ada Lovelace", "office", "ada lovelace", None, "password"),
    ],
)
def test_an_account_that_is_none_is_refused_by_field(
    store: Store, name: str, role: str, password: str, firm: str | None, field: str
) -> None:
    with pytest.raises(AccountRefused) as caught:
        store.accounts.make(name, role, password, firm)
    assert caught.value.field == field
    assert password not in str(caught.value)
    assert store.accounts.all() == []


@pytest.mark.parametrize("alike", ["ada", "ADA", " Ada ", "Ａda"])
def test_a_name_that_people_would_take_for_another_is_taken(store: Store, alike: str) -> None:
    person(store, "Ada")
    with pytest.raises(AccountRefused, match="name"):
        person(store, alike)


def test_the_name_of_an_ended_account_is_never_given_again(store: Store) -> None:
    ended = person(store, "Ada")
    store.accounts.deactivate(ended.id)
    with pytest.raises(AccountRefused, match="name"):
        person(store, "Ada")


def test_the_last_account_of_the_office_stays(store: Store) -> None:
    first, second = person(store, "Ada", "office"), person(store, "Ben", "office")
    store.accounts.deactivate(first.id)
    with pytest.raises(AccountRefused, match="last account"):
        store.accounts.deactivate(second.id)


def test_a_password_is_kept_as_scrypt_and_a_token_as_its_digest(tmp_path: Path) -> None:
    with Store(tmp_path) as store:
        person(store, "Ada")
        token = enter(store).token
        hashed = store.database.value("SELECT password FROM accounts")
        assert hashed.startswith(f"{PASSWORD_METHOD}$")
        # 256 bits in base64 without padding are 43 letters (RFC 4648).
        assert len(token) == 43
    kept = b"".join(path.read_bytes() for path in tmp_path.rglob("*") if path.is_file())
    assert token.encode() not in kept
    assert PASSWORD.encode() not in kept
    assert (tmp_path / DATABASE).is_file()


# Signing in


def test_somebody_who_signs_in_is_known_by_the_token_and_by_nothing_else(store: Store) -> None:
    ada = person(store, "Ada")
    made = enter(store, " ADA ")
    assert made.account == ada
    assert store.accounts.who(made.token) == dataclasses.replace(made, token="")
    for other in ("", made.token[:-1], made.token + "A", made.token.swapcase(), made.id, "\ud800"):
        assert store.accounts.who(other) is None


def test_a_sign_in_ends_by_signing_out_revoking_a_new_password_or_the_end_of_the_account(store: Store) -> None:
    ada = person(store, "Ada")
    person(store, "Ben", "office")
    ways: list[Any] = [
        lambda made: store.accounts.sign_out(made.token),
        lambda made: store.accounts.revoke(made.id),
        lambda _made: store.accounts.set_password(ada.id, PASSWORD),
        lambda _made: store.accounts.deactivate(ada.id),
    ]
    for end in ways:
        made, other = enter(store), enter(store, "Ben")
        end(made)
        assert store.accounts.who(made.token) is None
        assert store.accounts.who(other.token) is not None
        assert made.id not in [sign_in.id for sign_in in store.accounts.sign_ins()]
    assert refused(store, password=PASSWORD) is None


def test_the_old_password_is_no_longer_good(store: Store) -> None:
    ada = person(store, "Ada")
    store.accounts.set_password(ada.id, "another one 8")
    assert refused(store, password=PASSWORD) is None
    assert enter(store, password="another one 8").account == ada


@pytest.mark.parametrize("kind", ["browser", "device"])
def test_a_sign_in_that_is_used_lasts_and_one_that_is_not_ends(store: Store, clock: Clock, kind: Any) -> None:
    person(store, "Ada")
    made = store.accounts.sign_in("Ada", PASSWORD, kind=kind, label="", address="")
    for _ in range(3):
        clock.now += LASTS_S[kind] - 1.0
        assert store.accounts.who(made.token) is not None
    clock.now += LASTS_S[kind] + 61.0
    assert store.accounts.who(made.token) is None


def test_when_somebody_was_seen_is_written_once_a_minute(store: Store, clock: Clock) -> None:
    person(store, "Ada")
    made = enter(store)
    seen = set()
    for _ in range(180):
        clock.now += 1.0
        store.accounts.who(made.token)
        seen.add(store.accounts.sign_ins()[0].last_seen)
    assert len(seen) == 4


def test_what_happened_at_the_door_is_listed(store: Store) -> None:
    person(store, "Ada")
    refused(store, "nobody")
    made = enter(store)
    store.accounts.revoke(made.id)
    found = [(event.what, event.name, event.address, event.sign_in) for event in store.accounts.events()]
    assert found == [
        ("revoked", "Ada", "", made.id),
        ("signed-in", "Ada", "10.0.0.1", made.id),
        ("refused", "nobody", "10.0.0.1", ""),
    ]


# What a stranger finds out


def test_an_unknown_name_costs_the_same_work_as_a_known_one(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    person(store, "Ada")
    ended = person(store, "Ben")
    store.accounts.deactivate(ended.id)
    work: list[tuple[str, str]] = []
    real = security.check_password_hash

    def counted(hashed: str, password: str) -> bool:
        work.append((re.sub(r"\$.*", "", hashed), password))
        return real(hashed, password)

    monkeypatch.setattr(accounts_module, "check_password_hash", counted)
    for name in ("Ada", "Ben", "nobody", "", "\ud800"):
        assert refused(store, name) is None
    assert work == [(QUICK, "wrong")] * 5


def test_the_stand_in_for_nobody_has_the_form_of_a_true_hash(store: Store) -> None:
    # Werkzeug hashes only what has the form method$salt$hash; anything else it would answer at once.
    true_hash = security.generate_password_hash("x", QUICK)
    assert [len(part) for part in store.accounts._nobody.split("$")] == [len(part) for part in true_hash.split("$")]


# The throttle


def test_after_five_wrong_passwords_the_right_one_waits_too(store: Store, clock: Clock) -> None:
    person(store, "Ada")
    for _ in range(5):
        assert refused(store) is None
    assert refused(store, password=PASSWORD) == 300
    clock.now += 299.0
    assert refused(store, password=PASSWORD) == 1
    clock.now += 1.0
    assert enter(store).account.name == "Ada"


def test_the_throttle_survives_a_restart(tmp_path: Path, clock: Clock) -> None:
    with opened(tmp_path, clock) as store:
        person(store, "Ada")
        for _ in range(5):
            refused(store)
    with opened(tmp_path, clock) as store:
        assert refused(store, password=PASSWORD) == 300


def test_an_unknown_name_is_throttled_like_a_known_one(store: Store) -> None:
    person(store, "Ada")
    told = {name: [refused(store, name) for _ in range(7)] for name in ("Ada", "nobody")}
    assert told["Ada"] == told["nobody"] == [None] * 5 + [300] * 2


def test_one_who_is_locked_out_elsewhere_still_enters_from_here(store: Store) -> None:
    person(store, "Ada")
    for _ in range(6):
        refused(store, address="10.6.6.6")
    assert enter(store, address="10.0.0.1").account.name == "Ada"


def test_one_address_tries_only_so_many_names(store: Store) -> None:
    most = LIMITS[1].most
    assert [refused(store, f"name {number}") for number in range(most + 1)] == [None] * most + [900]


def test_one_name_is_tried_only_so_often_from_everywhere(store: Store, clock: Clock) -> None:
    person(store, "Ada")
    most = LIMITS[2].most
    told = [refused(store, address=f"10.1.{number}.1") for number in range(most + 1)]
    assert told == [None] * most + [3600]
    clock.now += HOUR
    assert enter(store).account.name == "Ada"


def test_knocking_on_does_not_lengthen_the_wait_nor_fill_the_list(store: Store, clock: Clock) -> None:
    person(store, "Ada")
    for _ in range(5):
        refused(store)
    for _ in range(50):
        refused(store)
        clock.now += 5.0
    assert len(store.accounts.events()) == 6
    clock.now += 50.0
    assert enter(store).account.name == "Ada"


def test_many_tries_at_once_are_counted_one_after_the_other(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    person(store, "Ada")
    checked: list[str] = []

    def never(_hashed: str, password: str) -> bool:
        checked.append(password)
        return False

    monkeypatch.setattr(accounts_module, "check_password_hash", never)
    barrier = threading.Barrier(20)

    def guess(number: int) -> None:
        barrier.wait()
        with suppress(SignInRefused):
            enter(store, password=f"guess {number}")

    threads = [threading.Thread(target=guess, args=(number,)) for number in range(20)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(checked) == 5


def test_a_crowd_that_signs_in_rightly_from_one_address_is_let_in(store: Store) -> None:
    for number in range(60):
        person(store, f"Phone {number}")
    assert len({enter(store, f"Phone {number}").token for number in range(60)}) == 60


def test_many_who_sign_in_rightly_at_once_by_one_name_are_let_in(store: Store) -> None:
    person(store, "Ada")
    made: list[SignIn] = []
    barrier = threading.Barrier(12)

    def work() -> None:
        barrier.wait()
        made.append(enter(store))

    threads = [threading.Thread(target=work) for _ in range(12)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len({sign_in.token for sign_in in made}) == 12


# Who may write what


def inspection(by: str = "inspector-1") -> Notebook:
    book = Notebook.begun(bays=1)
    for record in book.records:
        record["by"] = by
    return book


@pytest.fixture
def roles(store: Store) -> dict[str, Account]:
    store.accounts.share_job(JOB, FIRM)
    return {
        "office": person(store, "office-1", "office"),
        "inspector": person(store, "inspector-1"),
        "applicator": person(store, "crew-1", "applicator", FIRM),
    }


def by(account: Account, book: Notebook, kind: str, body: dict[str, Any]) -> dict[str, Any]:
    book.write(kind, body)
    return {**book.records[-1], "by": account.name}


POINT = {"bay": key(100), "row": 0, "col": 0, "round": 1, "depth_mm": 100.0}
SPOT = {"bay": key(100), "round": 1, "depth_mm": 90.0, "where": "plate"}
SIGNED = {"name": "Demo", "statement": "read", "strokes": [], "covers": "0" * 64}

WRITES: list[tuple[str, dict[str, Any], bool]] = [
    ("reading", {**POINT, "purpose": "self-check"}, True),
    ("reading", {**POINT, "purpose": "inspection"}, False),
    ("low-spot", {**SPOT, "purpose": "self-check"}, True),
    ("low-spot", {**SPOT, "purpose": "inspection"}, False),
    ("touch-up", {"bay": key(100), "round": 2}, True),
    ("repair", {"deficiency": key(5)}, True),
    ("acceptance", {"repair": key(5), "role": "inspector"}, False),
    ("spray", {"surfaces": [SURFACE], "foam": key(2)}, True),
    ("conditions", {"air_c": 20.0}, True),
    ("pull", {"bay": key(100), "by_hand": True}, True),
    ("photo", {"sha256": "0" * 64, "media_type": "image/jpeg", "bytes": 1, "width": 1, "height": 1}, True),
    ("objection", {"about": SURFACE, "text": "measured beside the pipe"}, True),
    ("deficiency", {"surface": SURFACE, "sort": "gap", "severity": "note"}, False),
    ("core", {"bay": key(100), "method": "displacement", "volume_ml": 100.0, "mass_g": 3.0}, False),
    ("covered", {"bays": [key(100)]}, False),
    ("visit", {"asked": "all"}, False),
    ("signature", {**SIGNED, "role": "applicator"}, True),
    ("signature", {**SIGNED, "role": "witness"}, True),
    ("signature", {**SIGNED, "role": "received"}, True),
    ("signature", {**SIGNED, "role": "inspector"}, False),
    ("place", {"key": key(60), "name": "Unit 1"}, False),
    ("surface", {"key": SURFACE, "removed": True}, False),
    ("job", {"key": JOB, "name": "Mine now", "units": "si"}, False),
    ("something-new", {}, False),
]


@pytest.mark.parametrize(
    ("kind", "body", "allowed"), WRITES, ids=[f"{kind}-{n}" for n, (kind, _, _) in enumerate(WRITES)]
)
def test_an_applicator_writes_self_checks_and_answers_and_nothing_of_the_inspectors(
    store: Store, roles: dict[str, Account], kind: str, body: dict[str, Any], allowed: bool
) -> None:
    book = inspection()
    store.records.accept(book.records, roles["inspector"])
    record = by(roles["applicator"], book, kind, body)
    assert states(store.records.accept([record], roles["applicator"])) == ["accepted" if allowed else "refused"]
    assert states(store.records.accept([{**record, "by": "inspector-1"}], roles["inspector"])) == [
        "refused" if allowed else "accepted"
    ]


def test_nobody_but_the_office_writes_under_another_name(store: Store, roles: dict[str, Account]) -> None:
    book = inspection(by="somebody")
    told = {role: set(states(store.records.accept(book.records, roles[role]))) for role in ("inspector", "applicator")}
    assert told == {"inspector": {"refused"}, "applicator": {"refused"}}
    (first, *_) = store.records.accept(book.records, roles["inspector"])
    assert (first.field, first.found) == ("by", "somebody")
    assert set(states(store.records.accept(book.records, roles["office"]))) == {"accepted"}


def test_an_applicator_writes_and_reads_only_jobs_that_are_shared_with_the_firm(
    store: Store, roles: dict[str, Account]
) -> None:
    crew, book = roles["applicator"], inspection()
    store.records.accept(book.records, roles["inspector"])
    other_firm = person(store, "crew-2", "applicator", "Demo crew 3")
    record = by(crew, book, "conditions", {"air_c": 20.0})
    (told,) = store.records.accept([{**record, "by": "crew-2"}], other_firm)
    assert (told.state, told.field) == ("refused", "job")
    assert store.records.pull(other_firm, 0).records == []
    assert not store.accounts.may_see(other_firm, JOB)
    assert states(store.records.accept([record], crew)) == ["accepted"]
    assert len(store.records.pull(crew, 0).records) == len(book.records)
    store.accounts.unshare(JOB, FIRM)
    assert store.records.pull(crew, 0).records == []
    assert store.records.pull(crew, 0, job=JOB).records == []
    # What it sent while it could is still acknowledged when it asks again; anything new is refused.
    assert states(store.records.accept([record], crew)) == ["already-there"]
    assert states(store.records.accept([by(crew, book, "conditions", {"air_c": 21.0})], crew)) == ["refused"]


def test_only_the_author_or_the_office_withdraws_a_fact(store: Store, roles: dict[str, Account]) -> None:
    book = inspection()
    reading = book.read(0, 90.0)
    store.records.accept(book.records, roles["inspector"])
    second = person(store, "inspector-2")
    body = {"record": reading, "reason": "mis-keyed"}
    told = {
        account.name: states(store.records.accept([by(account, book, "withdrawal", body)], account))
        for account in (roles["applicator"], second, roles["inspector"], roles["office"])
    }
    assert told == {
        "crew-1": ["refused"],
        "inspector-2": ["refused"],
        "inspector-1": ["accepted"],
        "office-1": ["accepted"],
    }


def test_a_withdrawal_that_comes_before_its_fact_waits_and_then_acts(store: Store, roles: dict[str, Account]) -> None:
    book = inspection()
    reading = book.read(0, 90.0)
    first = book.withdraw(reading)
    book.withdraw(first)
    inspector = roles["inspector"]
    late = [book.records[-3]]
    early = [record for record in book.records if record["id"] != reading]
    outcomes = store.records.accept(list(reversed(early)), inspector)
    assert set(states(outcomes)) == {"accepted"}
    assert [o.seq for o in outcomes[:2]] == [None, None]
    assert set(states(store.records.accept(early, inspector))) == {"already-there"}
    store.records.accept(late, inspector)
    assert {record.id for record in store.records.of_job(JOB)} == {record["id"] for record in book.records}
    assert store.records.receipt("d-1") == len(book.records)
    view = store.jobs.view(JOB)
    assert view is not None
    # The withdrawal of the withdrawal: the reading counts again.
    assert [record.id for record in view.job.of("reading")] == [reading]


def test_a_withdrawal_sent_ahead_of_anothers_fact_never_acts(store: Store, roles: dict[str, Account]) -> None:
    book = inspection()
    reading = book.read(0, 90.0)
    ahead = by(roles["applicator"], book, "withdrawal", {"record": reading, "reason": "not wanted"})
    store.records.accept([ahead], roles["applicator"])
    store.records.accept(book.records[:-1], roles["inspector"])
    view = store.jobs.view(JOB)
    assert view is not None
    assert [record.id for record in view.job.of("reading")] == [reading]
    assert store.records.find(ahead["id"]) is None
    assert ahead not in store.records.pull(roles["office"], 0).records


def test_a_waiting_withdrawals_id_is_not_given_to_another_record(store: Store, roles: dict[str, Account]) -> None:
    book = inspection()
    waiting = by(roles["inspector"], book, "withdrawal", {"record": key(1), "reason": "later"})
    store.records.accept([waiting], roles["inspector"])
    other = {**by(roles["inspector"], book, "visit", {}), "id": waiting["id"]}
    (told,) = store.records.accept([other], roles["inspector"])
    assert (told.state, told.field) == ("refused", "id")


# Links


def test_a_link_opens_its_job_until_it_expires_or_is_revoked(store: Store, clock: Clock) -> None:
    links = Links(store.database, clock)
    lasting, short = links.make(JOB, "Ada", 30, "contractor"), links.make(JOB, "Ada", 1, "contractor")
    assert (links.open(lasting), links.open(short)) == (JOB, JOB)
    clock.now += DAY
    assert (links.open(lasting), links.open(short)) == (JOB, None)
    newest, _ = links.of_job(JOB)
    assert newest.made_at <= newest.expires_at
    for link in links.of_job(JOB):
        links.revoke(link.id)
    assert links.open(lasting) is None


def test_a_link_with_any_one_letter_changed_opens_nothing(store: Store) -> None:
    token = store.links.make(JOB, "Ada", 30, "")
    letters = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-_"
    changed = {token[:at] + letter + token[at + 1 :] for at in range(len(token)) for letter in letters} - {token}
    assert [other for other in changed if store.links.open(other)] == []
    assert store.links.open(token) == JOB


@pytest.mark.parametrize("days", [0, -1, 367])
def test_a_link_for_ever_or_for_no_time_is_refused(store: Store, days: int) -> None:
    with pytest.raises(ValueError, match="1 to 366"):
        store.links.make(JOB, "Ada", days, "")


def test_tokens_are_not_alike(store: Store) -> None:
    tokens = sorted(store.links.make(JOB, "Ada", 1, "") for _ in range(100))
    assert all(a[:8] != b[:8] for a, b in pairwise(tokens))


def test_accounts_hash_as_the_documentation_says_unless_told(store: Store) -> None:
    # OWASP's password storage sheet: scrypt with N = 2^17 r 8 p 1, or its equals of less memory and more p; Werkzeug's default
    # of N = 2^15 r 8 p 1 takes a tenth of a second here (from memory). A throttle stands in front of it.
    assert Accounts(store.database)._method == "scrypt:32768:8:1"
