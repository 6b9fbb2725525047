"""Planted faults of each kind are found, in lists of any origin."""

from collections.abc import Callable
from pathlib import Path

import pytest
from PIL import Image
from sklearn.datasets import load_sample_image

from curator.editions.audit import audit_path
from curator.editions.step import write_edition
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.progress import Silent
from curator.recipe import parse_recipe

_GOOD = ["a/1.jpg,a/2.jpg,1", "b/1.jpg,b/2.jpg,1", "a/1.jpg,b/1.jpg,0", "a/2.jpg,b/2.jpg,0"]


def _csv(path: Path, rows: list[str]) -> Path:
    path.write_text("\n".join(["photo_a,photo_b,label", *rows]) + "\n")
    return path


def _kinds(path: Path, **options: object) -> set[str]:
    return {fault.kind for fault in audit_path(path, **options).faults}  # type: ignore[arg-type]


def test_a_good_list_is_sound(tmp_path: Path) -> None:
    report = audit_path(_csv(tmp_path / "pairs.csv", _GOOD))
    assert report.sound
    assert report.checked == {"lists": 1, "rows": 4}


@pytest.mark.parametrize(
    ("row", "kind"),
    [
        ("a/2.jpg,a/1.jpg,1", "repeated-pair"),
        ("a/2.jpg,a/1.jpg,0", "contradictory-pair"),
        ("a/3.jpg,a/3.jpg,1", "self-pair"),
        ("a/3.jpg,b/3.jpg,1", "mated-across-identities"),
        ("a/3.jpg,a/4.jpg,0", "non-mated-within-identity"),
    ],
)
def test_planted_rows_are_found(tmp_path: Path, row: str, kind: str) -> None:
    assert kind in _kinds(_csv(tmp_path / "pairs.csv", [*_GOOD, row]))


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("pairs.csv", "photo_a,photo_b,label\n"),
        ("triplets.csv", "anchor,positive,negative\n"),
        ("pairs.txt", "10\t0\n"),
    ],
)
def test_lists_without_a_row_are_not_sound(tmp_path: Path, name: str, text: str) -> None:
    (tmp_path / name).write_text(text)
    assert _kinds(tmp_path / name) == _kinds(tmp_path) == {"nothing-to-check"}
    _csv(tmp_path / "val.csv", _GOOD)
    assert _kinds(tmp_path) == set()


def test_an_edition_without_a_row_says_so_when_it_is_written(
    made_ledger: Callable[..., Ledger], recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger(people=1) as ledger:
        report = write_edition(ledger, parse_recipe(recipe_text), recipe_text, tmp_path / "e", progress=Silent())
    assert {row["rows"] for row in report.lists.values()} == {0}
    assert "audit: nothing-to-check: no list holds a row" in report.shortfalls
    assert _kinds(tmp_path / "e") == {"nothing-to-check"}


def test_imbalance(tmp_path: Path) -> None:
    assert "imbalance" in _kinds(_csv(tmp_path / "pairs.csv", _GOOD[:2]))


def test_leaks_between_the_lists_of_a_folder(tmp_path: Path) -> None:
    _csv(tmp_path / "train.csv", _GOOD)
    _csv(tmp_path / "test.csv", ["c/1.jpg,c/2.jpg,1", "c/1.jpg,d/1.jpg,0"])
    assert _kinds(tmp_path) == set()
    assert _kinds(tmp_path, echoes=[("a/1.jpg", "c/2.jpg")]) == {"leak-echo"}
    assert _kinds(tmp_path, echoes=[("a/1.jpg", "a/2.jpg")]) == {"trivial-pair"}
    _csv(tmp_path / "val.csv", ["a/8.jpg,a/9.jpg,1", "e/1.jpg,a/9.jpg,0"])
    assert _kinds(tmp_path) == {"leak-identity"}


def test_leaks_and_losses_seen_from_the_photos_alone(tmp_path: Path) -> None:
    image = Image.fromarray(load_sample_image("china.jpg"))
    root = tmp_path / "photos"
    for name, box in (("a/1.jpg", (0, 0, 300, 300)), ("a/2.jpg", (100, 0, 500, 400)), ("b/1.jpg", (0, 100, 200, 400)),
                      ("c/1.jpg", (300, 0, 600, 300)), ("c/2.jpg", (200, 200, 600, 400))):  # fmt: skip
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        image.crop(box).save(root / name, quality=95)
    lists = tmp_path / "lists"
    lists.mkdir()
    _csv(lists / "train.csv", ["a/1.jpg,a/2.jpg,1", "a/1.jpg,b/1.jpg,0"])
    _csv(lists / "test.csv", ["c/1.jpg,c/2.jpg,1", "c/1.jpg,d/1.jpg,0"])
    assert _kinds(lists, photos=root) == {"missing-photo"}
    (root / "d").mkdir()
    (root / "d" / "1.jpg").write_bytes((root / "a" / "2.jpg").read_bytes())
    assert _kinds(lists, photos=root) == {"leak-identical-photo", "leak-near-copy"}
    Image.open(root / "a" / "2.jpg").resize((200, 200)).save(root / "d" / "1.jpg", quality=95)
    assert _kinds(lists, photos=root) == {"leak-near-copy"}


def test_lfw_text(tmp_path: Path) -> None:
    path = tmp_path / "pairs.txt"
    path.write_text("2\t1\nann\t1\t2\nann\t1\tben\t1\ncat\t1\t2\ncat\t1\tdan\t1\n")
    assert audit_path(path).sound
    path.write_text("2\t1\nann\t1\t2\nann\t1\tben\t1\nann\t1\t3\ncat\t1\tdan\t1\n")
    assert _kinds(path) == {"leak-fold"}
    path.write_text("ann\t1\t2\nann\t1\tben\t1\n")
    with pytest.raises(BadInput, match="lacks the first line"):
        audit_path(path)
    path.write_text("1\t2\nann\t1\t2\nann\t1\tben\t1\n")
    with pytest.raises(BadInput, match="promises"):
        audit_path(path)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("photo_a,label\nx,1\n", "lacks the column 'photo_b'"),
        ("photo_a,photo_b,label\nx,y,yes\n", "neither 1"),
        ("photo_a,photo_b,label\nx,,1\n", "a photo is missing"),
    ],
)
def test_what_is_no_list_is_refused(tmp_path: Path, text: str, words: str) -> None:
    (tmp_path / "pairs.csv").write_text(text)
    with pytest.raises(BadInput, match=words):
        audit_path(tmp_path / "pairs.csv")
    with pytest.raises(BadInput, match="does not exist"):
        audit_path(tmp_path / "gone")


def test_an_edition_that_was_touched(made_ledger: Callable[..., Ledger], recipe_text: str, tmp_path: Path) -> None:
    out = tmp_path / "e"
    with made_ledger() as ledger:
        write_edition(ledger, parse_recipe(recipe_text), recipe_text, out, progress=Silent())
    assert _kinds(out) == set()
    (out / "data" / "extra.txt").write_text("x")
    assert _kinds(out) == {"extra-file"}
    (out / "data" / "extra.txt").unlink()
    whole = (out / "data" / "verdicts.csv").read_bytes()
    (out / "data" / "verdicts.csv").write_bytes(whole + b" ")
    assert _kinds(out) == {"digest-mismatch"}
    (out / "data" / "verdicts.csv").unlink()
    assert _kinds(out) == {"missing-file"}
    (out / "data" / "verdicts.csv").write_bytes(whole)
    for name in ("photos.parquet", "pairs/train.parquet", "triplets/train.parquet"):
        whole = (out / "data" / name).read_bytes()
        (out / "data" / name).write_bytes(whole[:40] + b"no more")
        assert _kinds(out) == {"digest-mismatch", "unreadable-file"}
        (out / "data" / name).unlink()
        assert "missing-file" in _kinds(out)
        (out / "data" / name).write_bytes(whole)
    manifest = out / "manifest-sha256.txt"
    manifest.write_text(manifest.read_text() + f"{'0' * 64}  ../../outside\n")
    assert _kinds(out) == {"digest-mismatch", "outside-file"}


_TRIPLETS = ["a/1.jpg,a/2.jpg,b/1.jpg", "b/1.jpg,b/2.jpg,a/1.jpg"]


def _triplets(path: Path, rows: list[str]) -> Path:
    path.write_text("\n".join(["anchor,positive,negative", *rows]) + "\n")
    return path


@pytest.mark.parametrize(
    ("row", "kind"),
    [
        ("b/1.jpg,b/2.jpg,c/1.jpg", None),
        ("b/1.jpg,b/2.jpg,a/1.jpg", "repeated-triplet"),
        ("a/1.jpg,a/1.jpg,b/1.jpg", "self-pair"),
        ("a/1.jpg,b/2.jpg,c/1.jpg", "mated-across-identities"),
        ("a/1.jpg,a/2.jpg,a/3.jpg", "non-mated-within-identity"),
    ],
)
def test_triplets_are_audited_too(tmp_path: Path, row: str, kind: str | None) -> None:
    path = _triplets(tmp_path / "train.csv", [*_TRIPLETS, row])
    assert _kinds(path) == ({kind} if kind else set())
    assert audit_path(path).checked == {"lists": 1, "rows": 0, "triplets": 3}


def test_a_triplet_list_and_a_pair_list_may_leak_into_each_other(tmp_path: Path) -> None:
    _triplets(tmp_path / "train.csv", _TRIPLETS)
    _csv(tmp_path / "test.csv", ["c/1.jpg,c/2.jpg,1", "c/1.jpg,b/9.jpg,0"])
    assert _kinds(tmp_path) == {"leak-identity"}


def test_one_list_may_name_its_splits(tmp_path: Path) -> None:
    path = tmp_path / "all.csv"
    rows = ["a/1.jpg,a/2.jpg,1,train", "a/1.jpg,b/1.jpg,0,train", "c/1.jpg,c/2.jpg,1,test", "c/1.jpg,{}/1.jpg,0,test"]
    for stranger, kinds in (("d", set()), ("b", {"leak-identity"})):
        path.write_text("\n".join(["photo_a,photo_b,label,split", *rows]).format(stranger))
        assert _kinds(path) == kinds


def test_of_two_formats_of_one_list_one_is_read(made_ledger: Callable[..., Ledger], recipe_text: str,
                                                tmp_path: Path) -> None:  # fmt: skip
    # A folder called name=value must not be taken for a column.
    out = tmp_path / "split=x"
    with made_ledger() as ledger:
        write_edition(ledger, parse_recipe(recipe_text), recipe_text, out, progress=Silent())
    assert _kinds(out / "data" / "pairs") == set()
    assert audit_path(out / "data" / "pairs").checked == {"lists": 3, "rows": 144}
    assert _kinds(out) == set()


def test_names_with_odd_line_breaks_are_one_name(tmp_path: Path) -> None:
    odd = [f"a{mark}/1.jpg,a{mark}/2.jpg,1" for mark in ("\u2028", "\x85", "\x0b", "\x1c")]
    even = [f"a{mark}/1.jpg,b/1.jpg,0" for mark in ("\u2028", "\x85", "\x0b", "\x1c")]
    report = audit_path(_csv(tmp_path / "pairs.csv", [*odd, *even]))
    assert (report.faults, report.checked["rows"]) == ([], 8)
    quoted = ['"a, ""b""\r\nc/1.jpg","a, ""b""\r\nc/2.jpg",1', '"a, ""b""\r\nc/1.jpg",d/1.jpg,0']
    assert audit_path(_csv(tmp_path / "pairs.csv", quoted)).sound
