"""What is put in comes out again; what people said is never lost; failures are sentences."""

import os
import sqlite3
import stat
import subprocess
import sys
import textwrap
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from curator.domain import Assignment, PairAnswer, PhotoAnswer, PhotoFile, Reading, Verdict
from curator.errors import BadInput, EnvironmentFailed
from curator.ledger import Ledger

_SAME = Verdict("a/1.jpg", "b/1.jpg", PairAnswer.SAME, "ada", "2026-05-01T10:00:00+00:00")


def test_photos_and_readings_come_back_along_the_roll(ledger: Ledger, fill: Callable[[Ledger], None]) -> None:
    fill(ledger)
    roll = ledger.roll()
    assert roll.photos == ("a/1.jpg", "a/2.jpg", "a/3.jpg", "b/1.jpg")
    assert roll.identities == ("a", "b")
    assert roll.identity_of.tolist() == [0, 0, 0, 1]
    readings = ledger.readings(roll)
    assert readings.why == (None, "empty file", "permission denied", None)
    assert readings.dct[0] == 2**64 - 1
    assert readings.embedded.tolist() == [True, False, False, True]
    np.testing.assert_array_equal(readings.embeddings[3], np.array([0.6, 0.8], dtype=np.float32))
    assert np.isnan(readings.sharpness[1])
    assert readings.landmarks[0, 4].tolist() == [1.0, 2.0]
    assert ledger.thumbnails(["a" * 64, "e" * 64]) == {"a" * 64: b"jpeg"}
    assert ledger.digests_read("m1") == {"a" * 64, "b" * 64, "e" * 64}
    assert ledger.digests_read("m2") == set()
    assert ledger.refusals("m1") == {"e" * 64: "empty file"}
    assert ledger.refusals("m2") == {}


def test_another_maker_has_read_nothing(ledger: Ledger, fill: Callable[[Ledger], None]) -> None:
    fill(ledger)
    with ledger.writing():
        ledger.set_maker("m2", framing="whole", card="default")
    assert ledger.readings(ledger.roll()).why[0] == "not read yet"


def test_derived_data_may_be_deleted_and_the_verdicts_stay(
    tmp_path: Path, root: Path, fill: Callable[[Ledger], None]
) -> None:
    with Ledger.create(tmp_path / "ledger", root) as ledger:
        fill(ledger)
        with ledger.writing():
            ledger.put_verdicts([_SAME])
    for file in (tmp_path / "ledger" / "derived").iterdir():
        file.unlink()
    (tmp_path / "ledger" / "derived").rmdir()
    with Ledger.open(tmp_path / "ledger") as ledger:
        assert ledger.verdicts() == [_SAME]
        assert ledger.digests_read("m1") == set()
        assert ledger.readings(ledger.roll()).why[0] == "not read yet"


def test_a_repeated_verdict_is_harmless_and_none_can_be_changed(ledger: Ledger, tmp_path: Path) -> None:
    single = Verdict("a/1.jpg", "", PhotoAnswer.UNUSABLE, "ada", "2026-05-01T10:00:00+00:00")
    with ledger.writing():
        assert ledger.put_verdicts([_SAME, single]) == 2
        assert ledger.put_verdicts([_SAME]) == 0
    assert ledger.verdicts() == [_SAME, single]
    other = sqlite3.connect(tmp_path / "ledger" / "record.sqlite")
    for statement in ("DELETE FROM verdict", "UPDATE verdict SET answer = 'different'"):
        with pytest.raises(sqlite3.IntegrityError, match="only ever added"):
            other.execute(statement)
    other.close()
    assert ledger.verdicts() == [_SAME, single]


def test_the_state_changes_with_the_roll_and_the_verdicts(ledger: Ledger, fill: Callable[[Ledger], None]) -> None:
    states = [ledger.state()]
    fill(ledger)
    states.append(ledger.state())
    with ledger.writing():
        ledger.put_verdicts([_SAME])
        states.append(ledger.state())
        ledger.put_attributes({"a/1.jpg": {"club": "heron"}})
        states.append(ledger.state())
        ledger.remove_files([b"b/1.jpg"])
        states.append(ledger.state())
    assert len(set(states)) == len(states)
    assert ledger.state() == states[-1]


def test_findings_hang_on_their_key(ledger: Ledger) -> None:
    with ledger.writing():
        ledger.put_finding("echoes", "k1", {"groups": [1]})
    assert ledger.finding("echoes", "k1") == {"groups": [1]}
    assert ledger.finding("echoes", "k2") is None


def test_splits_and_editions_are_kept(ledger: Ledger) -> None:
    assert ledger.split() is None
    with ledger.writing():
        ledger.put_split(Assignment({"a": "train"}, 7, 0.0), "first")
        ledger.put_split(Assignment({"a": "test", "b": "val"}, 8, 0.25), "second")
        assert ledger.put_edition(path="/e", data_digest="x", seed=8, recipe_text="second") == 1
        assert ledger.put_edition(path="/f", data_digest="x", seed=8, recipe_text="second") == 2
    assert ledger.split() == (Assignment({"a": "test", "b": "val"}, 8, 0.25), "second")
    assert [row.number for row in ledger.editions()] == [1, 2]


def test_a_second_writing_process_gets_a_sentence(ledger: Ledger) -> None:
    code = textwrap.dedent(
        """
        import sys
        from pathlib import Path
        from curator.errors import EnvironmentFailed
        from curator.ledger import Ledger
        with Ledger.open(Path(sys.argv[1])) as ledger:
            ledger.verdicts()
            try:
                with ledger.writing():
                    print("wrote")
            except EnvironmentFailed as error:
                print(error)
        """
    )
    command = [sys.executable, "-c", code, str(ledger.path)]
    with ledger.writing():
        busy = subprocess.run(command, capture_output=True, text=True, check=True)
    free = subprocess.run(command, capture_output=True, text=True, check=True)
    assert "is being written by another pairwright" in busy.stdout
    assert free.stdout.strip() == "wrote"


def test_writing_outside_the_lock_is_a_bug(ledger: Ledger) -> None:
    with pytest.raises(RuntimeError, match="writing"):
        ledger.put_verdicts([_SAME])


def test_a_failing_chunk_leaves_nothing_behind(
    ledger: Ledger, photo_file: Callable[..., PhotoFile], reading: Callable[..., Reading]
) -> None:
    twins = [photo_file("a/1.jpg", "a" * 64), PhotoFile(b"other", "a/1.jpg", "a", 1, 1, "b" * 64)]
    with ledger.writing(), pytest.raises(sqlite3.IntegrityError):
        ledger.put_chunk(twins, [reading("a" * 64)], maker="m1")
    assert len(ledger.roll()) == 0


def test_everything_is_private(ledger: Ledger) -> None:
    for path in [ledger.path, *ledger.path.rglob("*")]:
        mode = stat.S_IMODE(os.stat(path).st_mode)  # noqa: PTH116
        assert mode & 0o077 == 0, path


def test_wrong_places_are_refused_in_words(tmp_path: Path, root: Path) -> None:
    with pytest.raises(BadInput, match="holds no ledger"):
        Ledger.open(tmp_path / "nowhere")
    with pytest.raises(BadInput, match="inside the photo root"):
        Ledger.create(root / "ledger", root)
    (tmp_path / "full").mkdir()
    (tmp_path / "full" / "letter.txt").write_text("mine")
    with pytest.raises(BadInput, match="is no ledger"):
        Ledger.create(tmp_path / "full", root)


def test_a_photo_root_that_is_no_folder_leaves_nothing(tmp_path: Path) -> None:
    (tmp_path / "letter.txt").write_text("mine")
    for wrong in ("nowhere", "letter.txt"):
        with pytest.raises(BadInput, match=rf"{wrong} is no folder"):
            Ledger.create(tmp_path / "ledger", tmp_path / wrong)
    assert not (tmp_path / "ledger").exists()


def test_a_ledger_passes_to_another_root_until_it_knows_of_a_photo_or_a_verdict(
    tmp_path: Path, root: Path, photo_file: Callable[..., PhotoFile]
) -> None:
    path, other = tmp_path / "ledger", tmp_path / "other"
    other.mkdir()
    with Ledger.create(path, other) as ledger, ledger.writing():
        ledger.put_attributes({"a/1.jpg": {"club": "heron"}})
    with Ledger.create(path, root) as ledger, ledger.writing():
        assert ledger.photo_root == root
        ledger.put_chunk([photo_file("a/1.jpg")], [], maker="m")
        assert ledger.roll().attributes == {}
    for _ in range(2):  # with a photo; then with what was said about it alone
        with pytest.raises(BadInput, match=rf"belongs to the photo root {root}, not to {other}"):
            Ledger.create(path, other)
        with Ledger.create(path, root) as ledger, ledger.writing():
            ledger.put_act("said", annotator="ada", verdicts=[_SAME])
            ledger.take_back(1)
            ledger.remove_files([b"a/1.jpg"])


def test_damage_and_newer_schemas_are_told_in_words(tmp_path: Path, root: Path) -> None:
    path = tmp_path / "ledger"
    Ledger.create(path, root).close()
    derived = path / "derived" / "readings.sqlite"
    derived.write_bytes(b"no database at all" * 100)
    with pytest.raises(EnvironmentFailed, match=r"damaged.*may be deleted"):
        Ledger.open(path)
    derived.unlink()
    newer = sqlite3.connect(path / "record.sqlite")
    newer.execute("PRAGMA user_version=99")
    newer.close()
    with pytest.raises(EnvironmentFailed, match="newer pairwright"):
        Ledger.open(path)


_NAMES = st.text(st.characters(blacklist_categories=["Cs"], blacklist_characters="\0"), min_size=1, max_size=12)


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    names=st.sets(_NAMES, min_size=1, max_size=8), floats=st.lists(st.floats(-1, 1, width=32), min_size=3, max_size=3)
)
def test_any_name_and_any_vector_comes_back(
    tmp_path_factory: pytest.TempPathFactory, names: set[str], floats: list[float]
) -> None:
    base = tmp_path_factory.mktemp("round")
    vector = np.array(floats, dtype=np.float32)
    (base / "p").mkdir()
    ordered = sorted(names)
    files = [PhotoFile(f"i/{n}".encode(), f"i/{n}", "i", 1, 1, f"{k:064x}") for k, n in enumerate(ordered)]
    with Ledger.create(base / "l", base / "p") as ledger:
        with ledger.writing():
            ledger.set_maker("m", framing="whole", card="c")
            ledger.put_chunk(files, [Reading(digest=f.digest or "", embedding=vector) for f in files], maker="m")
        roll = ledger.roll()
        assert list(roll.photos) == sorted(f"i/{n}" for n in names)
        for row in ledger.readings(roll).embeddings:
            np.testing.assert_array_equal(row, vector)
        assert ledger.raw_of(roll.photos) == {f.name: f.raw for f in files}
