"""Editions: what was asked is written, twice the same, and what people said is obeyed."""

import json
import os
import stat
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pyarrow.parquet
import pytest

from curator.domain import EchoAnswer, EchoVerdict, PairAnswer, PhotoAnswer, Verdict
from curator.editions.step import audit, plan_edition, write_edition
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.progress import Silent
from curator.recipe import parse_recipe

MadeLedger = Callable[..., Ledger]


def _written(ledger: Ledger, text: str, out: Path) -> Any:
    return write_edition(ledger, parse_recipe(text), text, out, progress=Silent())


def _rows(out: Path, name: str) -> list[dict[str, Any]]:
    return list(pyarrow.parquet.read_table(out / "data" / f"{name}.parquet").to_pylist())


def _data(out: Path) -> dict[str, bytes]:
    return {p.relative_to(out).as_posix(): p.read_bytes() for p in sorted((out / "data").rglob("*")) if p.is_file()}


def test_the_asked_rows_are_written_and_audit_sound(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger() as ledger:
        report = _written(ledger, recipe_text, tmp_path / "e")
        assert audit(tmp_path / "e", ledger=ledger, progress=Silent()).faults == []
    # The folds of so few people hold hardly any matched strangers; nothing else may be short.
    assert all(text.startswith("pairs/test, non-mated") for text in report.shortfalls)
    assert report.lists["pairs/train"] == {"rows": 100, "mated": 50, "non_mated": 50}
    assert report.lists["triplets/train"]["rows"] == 40
    rows = _rows(tmp_path / "e", "pairs/train")
    bands = Counter((row["label"], row["band"]) for row in rows)
    assert bands == {(k, b): n for k in (0, 1) for b, n in (("easy", 10), ("middle", 20), ("hard", 20))}
    use = Counter(name for row in rows for name in {row["identity_a"], row["identity_b"]})
    assert max(use.values()) <= 3 * min(use.values()) + 3
    assert {row["fold"] for row in _rows(tmp_path / "e", "pairs/test")} == {0, 1}


def test_non_mated_pairs_are_matched(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger() as ledger:
        _written(ledger, recipe_text.replace("match_share = 0.5", "match_share = 1.0"), tmp_path / "e")
    non_mated = [row for row in _rows(tmp_path / "e", "pairs/train") if not row["label"]]
    assert all(int(row["identity_a"][2:]) % 2 == int(row["identity_b"][2:]) % 2 for row in non_mated)


def test_repeated_editions_are_the_same_bytes_in_any_order_of_intake(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    for order in (0, 1):
        with made_ledger(f"ledger{order}", order=order) as ledger:
            _written(ledger, recipe_text, tmp_path / f"e{order}")
    assert _data(tmp_path / "e0") == _data(tmp_path / "e1")


def test_another_seed_gives_other_lists(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger() as ledger:
        _written(ledger, recipe_text, tmp_path / "a")
        _written(ledger, recipe_text.replace("seed = 3", "seed = 4"), tmp_path / "b")
        assert [row.seed for row in ledger.editions()] == [3, 4]
    assert _rows(tmp_path / "a", "pairs/train") != _rows(tmp_path / "b", "pairs/train")


def test_verdicts_are_obeyed(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    at = "2026-05-01T10:00:00+00:00"
    with made_ledger() as ledger:
        with ledger.writing():
            ledger.put_verdicts(
                [
                    Verdict("id000/0.jpg", "", PhotoAnswer.UNUSABLE, "ada", at),
                    Verdict("id001/0.jpg", "id002/0.jpg", PairAnswer.SAME, "ada", at),
                ]
            )
        report = _written(ledger, recipe_text, tmp_path / "e")
        assert report.left_out == {"verdict: unusable": 1}
        split = ledger.split()
        assert split is not None
        assert split[0].split_of["id001"] == split[0].split_of["id002"]
    photos = {row["photo"] for row in _rows(tmp_path / "e", "photos")}
    assert "id000/0.jpg" not in photos
    assert b"id000/0.jpg,,unusable,ada" in (tmp_path / "e" / "data" / "verdicts.csv").read_bytes()


def test_a_roll_too_small_says_what_is_short(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger(people=4) as ledger:
        report = _written(ledger, recipe_text, tmp_path / "e")
        assert audit(tmp_path / "e", progress=Silent()).faults == []
    assert any("pairs/train" in text for text in report.shortfalls)
    assert any("folds" in text for text in report.shortfalls)


def test_an_edition_is_never_written_over_another(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger() as ledger:
        _written(ledger, recipe_text, tmp_path / "e")
        with pytest.raises(BadInput, match="is there already"):
            _written(ledger, recipe_text, tmp_path / "e")
        with pytest.raises(BadInput, match="never written to"):
            _written(ledger, recipe_text, ledger.photo_root / "e")


def test_kept_identities_stay_in_their_split(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger("first", people=12) as ledger:
        _written(ledger, recipe_text, tmp_path / "a")
    text = recipe_text.replace("seed = 3", f'seed = 9\nkeep_from = "{tmp_path / "a"}"')
    with made_ledger("second") as ledger:
        _written(ledger, text, tmp_path / "b")
    before = {row["identity"]: row["split"] for row in _rows(tmp_path / "a", "photos")}
    after = {row["identity"]: row["split"] for row in _rows(tmp_path / "b", "photos")}
    assert {name: after[name] for name in before} == before


def test_everything_is_private_and_told(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    with made_ledger() as ledger:
        _written(ledger, recipe_text, tmp_path / "e")
    for path in (tmp_path / "e").rglob("*"):
        assert stat.S_IMODE(path.stat().st_mode) & 0o077 == 0
    standing = json.loads((tmp_path / "e" / "data" / "standing.json").read_text())
    assert standing["seed"] == 3
    assert b"biometric" in (tmp_path / "e" / "data" / "report.html").read_bytes()
    assert str(tmp_path).encode() not in b"".join(_data(tmp_path / "e").values())


def test_croissant_carries_what_the_specification_requires(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger() as ledger:
        _written(ledger, recipe_text, tmp_path / "e")
    told = json.loads((tmp_path / "e" / "data" / "croissant.json").read_text())
    required = ("@context", "@type", "conformsTo", "description", "license", "name", "url", "creator", "datePublished")
    assert all(told[key] for key in (*required, "distribution"))
    assert {"contentUrl", "encodingFormat", "sha256"} <= set(told["distribution"][0])
    assert {record["name"] for record in told["recordSet"]} >= {"pairs-train", "photos"}


def test_lfw_text_is_refused_in_words_where_names_do_not_allow_it(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger() as ledger:
        report = _written(ledger, recipe_text.replace('"csv"', '"lfw-text"'), tmp_path / "e")
    assert any("lfw-text" in text and "NAME_0001.jpg" in text for text in report.shortfalls)


def test_what_an_earlier_edition_parted_and_is_now_one_person_is_left_out(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger() as ledger:
        _written(ledger, recipe_text, tmp_path / "a")
        split = ledger.split()
        assert split is not None
        one, other = (
            next(name for name, held in sorted(split[0].split_of.items()) if held == asked)
            for asked in ("train", "test")
        )
        with ledger.writing():
            at = "2026-05-01T10:00:00+00:00"
            ledger.put_verdicts([Verdict(f"{one}/0.jpg", f"{other}/0.jpg", PairAnswer.SAME, "ada", at)])
        text = recipe_text.replace("seed = 3", f'seed = 3\nkeep_from = "{tmp_path / "a"}"')
        report = _written(ledger, text, tmp_path / "b")
    assert report.leaks == 0
    assert report.left_out == {"tied to another split of the earlier edition": 6}
    assert f"{other} was in test and is now tied to {one} of train: it is left out" in report.shortfalls
    assert {row["identity"]: row["split"] for row in _rows(tmp_path / "b", "photos")}.get(one) == "train"
    assert other not in {row["identity"] for row in _rows(tmp_path / "b", "photos")}


def test_a_session_that_ties_nearly_all_is_named_as_what_spoils_the_shares(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    text = recipe_text.replace('balance = ["club"]', 'keep_together = ["club"]')
    with made_ledger() as ledger, ledger.writing():
        roll = ledger.roll()
        club = ["north" if k < 17 else "south" for k in roll.identity_of.tolist()]
        clubs = {photo: {"club": name, "band": "x"} for photo, name in zip(roll.photos, club, strict=True)}
        ledger.put_attributes(clubs)
        report = _written(ledger, text, tmp_path / "e")
    assert "split train: 85% of identities and 85% of photos, not 60%" in report.shortfalls
    assert any("17 of 20 identities are tied to one another" in told for told in report.shortfalls)
    assert any("the same club north (16 of 16 ties)" in told for told in report.shortfalls)


def test_a_folder_that_is_no_text_is_refused_before_anything_is_written(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    out = tmp_path / os.fsdecode(b"e-\xff")
    with made_ledger() as ledger:
        with pytest.raises(BadInput, match="no UTF-8 text"):
            _written(ledger, recipe_text, out)
        assert ledger.editions() == []
    assert not out.exists()


def test_a_photo_set_aside_as_an_echo_stays_out(made_ledger: MadeLedger, recipe_text: str) -> None:
    with made_ledger() as ledger:
        kept, aside = [name for name, _ in ledger.photos_of(ledger.roll().identities[0])][:2]
        with ledger.writing():
            verdict = EchoVerdict(kept, aside, EchoAnswer.KEEP_FIRST, "ada", "2026-05-01T10:00:00+00:00")
            ledger.put_act("kept one", annotator="ada", echo_verdicts=[verdict])
        plan = plan_edition(ledger, parse_recipe(recipe_text), progress=Silent())
    assert plan.left_out["set aside as an echo"] == (aside,)
