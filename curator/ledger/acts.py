"""What people said, act by act: the statements over verdicts, answers about echoes, and what was taken back."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from datetime import UTC, datetime

from curator.domain import Act, EchoAnswer, EchoVerdict, PairAnswer, PhotoAnswer, Verdict
from curator.ledger.browsing import batched_names
from curator.ledger.database import Database

STANDING = "(act IS NULL OR act NOT IN (SELECT act FROM fallen_act))"
"""The condition that keeps what was not taken back."""


class _NothingNew(Exception):
    """Ends the transaction of an act in which nothing was new."""


def put_act(
    record: Database,
    name: str,
    annotator: str,
    verdicts: Iterable[Verdict],
    echo_verdicts: Iterable[EchoVerdict],
) -> Act | None:
    at = datetime.now(UTC).isoformat(timespec="milliseconds")
    try:
        with record.transaction():
            number = begin_act(record, name, annotator, at)
            n = put_verdicts(record, verdicts, number) + _put_echo_verdicts(record, echo_verdicts, number)
            if n == 0:
                raise _NothingNew
    except _NothingNew:
        return None
    return Act(number, name, annotator, at, n, True)


def begin_act(record: Database, name: str, annotator: str, at: str) -> int:
    """A new act's number; inside a transaction that adds what was done in it."""
    record.execute("INSERT INTO act (name, annotator, at) VALUES (?, ?, ?)", (name, annotator, at))
    return int(record.rows("SELECT max(number) FROM act")[0][0])


def put_verdicts(record: Database, verdicts: Iterable[Verdict], act: int | None) -> int:
    """Inside a transaction. An exact repeat is passed over: it stays with the act in which it was first said."""
    return record.execute_many(
        """INSERT INTO verdict (photo_a, photo_b, answer, annotator, at, shown, act, digest_a, digest_b)
           VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7,
                   (SELECT digest FROM photo WHERE name = ?1), (SELECT digest FROM photo WHERE name = ?2))
           ON CONFLICT DO NOTHING""",
        ((v.photo_a, v.photo_b, v.answer.value, v.annotator, v.at, v.shown, act) for v in verdicts),
    )


def _put_echo_verdicts(record: Database, verdicts: Iterable[EchoVerdict], act: int) -> int:
    return record.execute_many(
        """INSERT INTO echo_answer (photo_a, photo_b, answer, annotator, at, act, digest_a, digest_b)
           VALUES (?1, ?2, ?3, ?4, ?5, ?6,
                   (SELECT digest FROM photo WHERE name = ?1), (SELECT digest FROM photo WHERE name = ?2))""",
        ((v.photo_a, v.photo_b, v.answer.value, v.annotator, v.at, act) for v in verdicts),
    )


def put_turn(record: Database, act: int, *, standing: bool) -> None:
    with record.transaction():
        record.execute(
            "INSERT INTO act_turn (act, standing, at) VALUES (?, ?, ?)",
            (act, int(standing), datetime.now(UTC).isoformat(timespec="milliseconds")),
        )


def acts(record: Database, limit: int | None) -> list[Act]:
    rows = record.rows(
        """SELECT number, name, annotator, at,
                  (SELECT count(*) FROM verdict WHERE act = number)
                  + (SELECT count(*) FROM echo_answer WHERE act = number)
                  + (SELECT count(*) FROM split WHERE act = number),
                  number NOT IN (SELECT act FROM fallen_act)
           FROM act ORDER BY number DESC LIMIT ?""",
        (-1 if limit is None else limit,),
    )
    return [Act(number, name, annotator, at, n, bool(standing)) for number, name, annotator, at, n, standing in rows]


def verdicts(record: Database) -> list[Verdict]:
    rows = record.rows(
        f"SELECT photo_a, photo_b, answer, annotator, at, shown FROM verdict WHERE {STANDING} ORDER BY id"
    )
    return [
        Verdict(a, b, PairAnswer(answer) if b else PhotoAnswer(answer), annotator, at, shown)
        for a, b, answer, annotator, at, shown in rows
    ]


def photo_verdicts(record: Database, photos: Sequence[str]) -> list[Verdict]:
    """Of single photos, those about these."""
    found = []
    for some in batched_names(photos):
        marks = ", ".join("?" * len(some))
        found += record.rows(
            f"""SELECT id, photo_a, answer, annotator, at, shown FROM verdict
                WHERE photo_b = '' AND photo_a IN ({marks}) AND {STANDING}""",
            some,
        )
    return [Verdict(photo, "", PhotoAnswer(answer), *rest) for _, photo, answer, *rest in sorted(found)]


def echo_verdicts(record: Database) -> list[EchoVerdict]:
    rows = record.rows(f"SELECT photo_a, photo_b, answer, annotator, at FROM echo_answer WHERE {STANDING} ORDER BY id")
    return [EchoVerdict(a, b, EchoAnswer(answer), annotator, at) for a, b, answer, annotator, at in rows]
