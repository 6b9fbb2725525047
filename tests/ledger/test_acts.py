"""What was said in one go is taken back and restored in one go, and nothing said is ever removed."""

import sqlite3
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from curator.domain import Assignment, EchoAnswer, EchoVerdict, PairAnswer, PhotoAnswer, PhotoFile, Reading, Verdict
from curator.ledger import Ledger
from curator.ledger.schema import RECORD

_AT = "2026-05-01T10:00:00+00:00"


def _verdict(n: int) -> Verdict:
    return Verdict(f"a/{n}.jpg", "", PhotoAnswer.UNUSABLE, "ada", _AT)


def test_an_act_is_taken_back_and_restored_whole(ledger: Ledger) -> None:
    echo = EchoVerdict("a/1.jpg", "b/1.jpg", EchoAnswer.KEEP_FIRST, "ada", _AT)
    with ledger.writing():
        first = ledger.put_act("set 2 photos aside", annotator="ada", verdicts=[_verdict(1), _verdict(2)])
        second = ledger.put_act("settled an echo", annotator="ada", verdicts=[_verdict(3)], echo_verdicts=[echo])
        assert first is not None
        assert second is not None
        assert (first.n, second.n) == (2, 2)
        ledger.take_back(second.number)
        assert ledger.verdicts() == [_verdict(1), _verdict(2)]
        assert ledger.echo_verdicts() == []
        assert [(act.name, act.standing) for act in ledger.acts()] == [
            ("settled an echo", False),
            ("set 2 photos aside", True),
        ]
        ledger.restore(second.number)
    assert ledger.verdicts() == [_verdict(1), _verdict(2), _verdict(3)]
    assert ledger.echo_verdicts() == [echo]
    assert [act.number for act in ledger.acts(limit=1)] == [second.number]


def test_an_act_with_nothing_new_in_it_is_none(ledger: Ledger) -> None:
    with ledger.writing():
        ledger.put_act("once", annotator="ada", verdicts=[_verdict(1)])
        assert ledger.put_act("twice", annotator="ada", verdicts=[_verdict(1)]) is None
    assert [act.name for act in ledger.acts()] == ["once"]


def test_a_split_is_an_act(ledger: Ledger) -> None:
    with ledger.writing():
        ledger.put_split(Assignment({"a": "train"}, 7, 0.0), "first")
        ledger.put_split(Assignment({"a": "test"}, 8, 0.0), "second")
        ledger.take_back(ledger.acts()[0].number)
    assert ledger.split() == (Assignment({"a": "train"}, 7, 0.0), "first")
    assert ledger.acts()[0].name == "put 1 identities to splits, seed 8"


@settings(max_examples=30, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(turns=st.lists(st.tuples(st.integers(0, 3), st.booleans()), max_size=12))
def test_the_last_turn_of_an_act_counts(tmp_path: Path, root: Path, turns: list[tuple[int, bool]]) -> None:
    folder = tmp_path / f"ledger-{len(list(tmp_path.iterdir()))}"
    standing = dict.fromkeys(range(4), True)
    with Ledger.create(folder, root) as ledger, ledger.writing():
        acts = [ledger.put_act(f"act {n}", annotator="ada", verdicts=[_verdict(n)]) for n in range(4)]
        for n, stands in turns:
            act = acts[n]
            assert act is not None
            (ledger.restore if stands else ledger.take_back)(act.number)
            standing[n] = stands
        assert ledger.verdicts() == [_verdict(n) for n in range(4) if standing[n]]


@pytest.mark.parametrize("table", ["act", "act_turn", "echo_answer"])
def test_no_word_can_be_changed_or_removed(ledger: Ledger, tmp_path: Path, table: str) -> None:
    with ledger.writing():
        echo = EchoVerdict("a/1.jpg", "b/1.jpg", EchoAnswer.NOT_AN_ECHO, "ada", _AT)
        act = ledger.put_act("settled an echo", annotator="ada", echo_verdicts=[echo])
        assert act is not None
        ledger.take_back(act.number)
    other = sqlite3.connect(tmp_path / "ledger" / "record.sqlite")
    for statement in (f"DELETE FROM {table}", f"UPDATE {table} SET at = ''"):
        with pytest.raises(sqlite3.IntegrityError, match="only ever added"):
            other.execute(statement)
    other.close()


def test_a_ledger_of_the_first_schema_is_brought_up_and_keeps_its_verdicts(tmp_path: Path, root: Path) -> None:
    folder = tmp_path / "old"
    folder.mkdir()
    old = sqlite3.connect(folder / "record.sqlite")
    for statement in RECORD[0]:
        old.execute(statement)
    old.execute("PRAGMA user_version=1")
    old.execute(
        "INSERT INTO verdict (photo_a, photo_b, answer, annotator, at, shown) VALUES (?, ?, ?, ?, ?, '')",
        ("a/1.jpg", "b/1.jpg", "same", "ada", _AT),
    )
    old.commit()
    old.close()
    with Ledger.create(folder, root) as ledger:
        assert ledger.verdicts() == [Verdict("a/1.jpg", "b/1.jpg", PairAnswer.SAME, "ada", _AT)]
        assert ledger.acts() == []


def test_a_part_of_the_roll_is_looked_at_without_the_rest(ledger: Ledger, fill: Callable[[Ledger], None]) -> None:
    fill(ledger)
    with ledger.writing():
        ledger.put_attributes({"a/1.jpg": {"club": "heron", "season": ""}, "b/1.jpg": {"club": "weir"}})
    assert ledger.identity_counts() == [("a", 3), ("b", 1)]
    assert ledger.photos_of("a") == [("a/1.jpg", "a" * 64), ("a/2.jpg", "e" * 64), ("a/3.jpg", "")]
    assert ledger.photos_of("none") == []
    assert [ledger.more_photos_than(n) for n in (0, 3, 4, 9)] == [True, True, False, False]
    assert ledger.attribute_values() == {"club": {"heron": 1, "weir": 1}}
    assert ledger.identities_with("club", "weir") == {"b"}
    assert ledger.attributes_of(["a/1.jpg", "a/2.jpg"]) == {"a/1.jpg": {"club": "heron", "season": ""}, "a/2.jpg": {}}
    assert ledger.digests_of(["a/1.jpg", "a/3.jpg", "none"]) == {"a/1.jpg": "a" * 64}


def test_single_readings_are_those_of_the_columns(
    ledger: Ledger, photo_file: Callable[..., PhotoFile], reading: Callable[..., Reading]
) -> None:
    with ledger.writing():
        ledger.set_maker("m1", framing="face", card="default")
        ledger.put_chunk(
            [photo_file("a/1.jpg", "a" * 64), photo_file("a/2.jpg", "e" * 64)],
            [reading("a" * 64), Reading(digest="e" * 64, why="empty file")],
            maker="m1",
        )
    columns = ledger.readings(ledger.roll())
    known = ledger.readings_of(["a" * 64, "e" * 64, "f" * 64])
    assert sorted(known) == ["a" * 64, "e" * 64]
    one = known["a" * 64]
    assert (one.dct, one.difference, one.faces) == (columns.dct[0], columns.difference[0], columns.faces[0])
    assert one.frame == tuple(columns.frame[0])
    assert one.landmarks == tuple(map(tuple, columns.landmarks[0].tolist()))
    assert one.embedding is not None
    np.testing.assert_array_equal(one.embedding, columns.embeddings[0])
    assert known["e" * 64].why == "empty file"
    assert known["e" * 64].embedding is None


def test_arrays_hang_on_their_key(ledger: Ledger) -> None:
    values = np.arange(6, dtype=np.float32).reshape(2, 3)
    with ledger.writing():
        ledger.put_array("centres", "k1", values[:, ::-1])
    known = ledger.array("centres", "k1")
    assert known is not None
    np.testing.assert_array_equal(known, values[:, ::-1])
    assert known.dtype == np.float32
    assert ledger.array("centres", "k2") is None


def test_the_stamp_changes_with_the_roll_and_with_what_read_it(
    ledger: Ledger, photo_file: Callable[..., PhotoFile], reading: Callable[..., Reading]
) -> None:
    stamps = [ledger.roll_stamp()]
    with ledger.writing():
        ledger.set_maker("m1", framing="face", card="default")
        stamps.append(ledger.roll_stamp())
        ledger.put_chunk([photo_file("a/1.jpg", "a" * 64)], [reading("a" * 64)], maker="m1")
        stamps.append(ledger.roll_stamp())
        ledger.remove_files([b"a/1.jpg"])
        stamps.append(ledger.roll_stamp())
        ledger.put_verdicts([_verdict(1)])
    assert len(set(stamps)) == 4
    assert ledger.roll_stamp() == stamps[-1]


def test_the_verdicts_on_a_few_photos_are_those_among_all(ledger: Ledger) -> None:
    pair = Verdict("a/1.jpg", "a/2.jpg", PairAnswer.SAME, "ada", _AT)
    with ledger.writing():
        ledger.put_act("said", annotator="ada", verdicts=[pair, *(_verdict(n) for n in range(1, 40))])
        fallen = ledger.put_act("said more", annotator="ada", verdicts=[_verdict(50)])
        assert fallen is not None
        ledger.take_back(fallen.number)
    asked = ["a/1.jpg", "a/7.jpg", "a/50.jpg", "b/1.jpg"]
    slow = [v for v in ledger.verdicts() if not v.photo_b and v.photo_a in asked]
    assert ledger.photo_verdicts_of(asked) == slow
    assert len(slow) == 2


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    steps=st.lists(
        st.one_of(
            st.tuples(st.just("put"), st.integers(0, 5), st.sampled_from("abc")),
            st.tuples(st.just("take off"), st.integers(0, 5), st.just("")),
        ),
        max_size=15,
    )
)
def test_the_counts_of_identities_follow_the_roll(
    tmp_path: Path, root: Path, steps: list[tuple[str, int, str]]
) -> None:
    filed: dict[int, str] = {}
    with Ledger.create(tmp_path / f"ledger-{len(list(tmp_path.iterdir()))}", root) as ledger, ledger.writing():
        for what, number, identity in steps:
            raw = f"{number}".encode()
            if what == "put":
                file = PhotoFile(raw, f"{identity}/{number}", identity, 1, 1, "d" * 64)
                ledger.put_chunk([file], [], maker="m")
                filed[number] = identity
            else:
                ledger.remove_files([raw])
                filed.pop(number, None)
            slow = sorted((name, list(filed.values()).count(name)) for name in set(filed.values()))
            assert ledger.identity_counts() == slow
