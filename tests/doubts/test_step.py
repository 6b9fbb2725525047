"""Doubts and mined pairs of a whole ledger."""

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from curator.domain import DoubtKind, PairAnswer, PairKind, PhotoAnswer, PhotoFile, Reading, Verdict
from curator.doubts.step import find_doubts
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.pairs.step import load_trust, mined_pairs
from curator.progress import Silent

STRAY = "r-03/0000.jpg"
AT = "2026-03-01T10:00:00+00:00"


@pytest.fixture
def ledger(tmp_path: Path, crowd: Callable[..., Any]) -> Iterator[Ledger]:
    """Fifteen people of six photos, one of them filed under another, and one unreadable file."""
    (tmp_path / "photos").mkdir()
    people = crowd([6] * 15)
    people.folder[0] = 3
    names = [f"r-{folder:02d}/{i:04d}.jpg" for i, folder in enumerate(people.folder)]
    digests = [f"{i:064x}" for i in range(91)]
    files = [PhotoFile(n.encode(), n, n[:4], 9, 9, d) for n, d in zip([*names, "r-05/bad.jpg"], digests, strict=True)]
    fine: dict[str, Any] = {"width": 200, "height": 200, "sharpness": 90.0, "brightness": 120.0, "contrast": 40.0}
    readings = [
        Reading(digest=d, embedding=x, faces=1, **fine) for d, x in zip(digests, people.embeddings, strict=False)
    ]
    readings.append(Reading(digest=digests[-1], why="it is no picture of a known format"))
    with Ledger.create(tmp_path / "ledger", tmp_path / "photos") as opened:
        with opened.writing():
            opened.set_maker("made up", framing="face", card="made up")
            opened.put_chunk(files, readings, maker="made up")
        yield opened


def test_doubts_are_found_sorted_kept_and_settled(ledger: Ledger) -> None:
    doubts = find_doubts(ledger, progress=Silent())
    raised = {(d.kind, d.photos) for d in doubts if d.probability >= 0.5}
    expected = {(DoubtKind.MISFILED_PHOTO, (STRAY,)), (DoubtKind.UNREADABLE_FILE, ("r-05/bad.jpg",))}
    assert raised == expected
    assert [d.probability for d in doubts] == sorted((d.probability for d in doubts), reverse=True)
    assert find_doubts(ledger, progress=Silent()) == doubts
    with ledger.writing():
        ledger.put_verdicts([Verdict("r-05/bad.jpg", "", PhotoAnswer.UNUSABLE, "Ida", AT)])
    assert {d.photos: d.settled for d in find_doubts(ledger, progress=Silent()) if d.probability >= 0.5} == {
        (STRAY,): False,
        ("r-05/bad.jpg",): True,
    }


def test_mined_pairs_carry_trust_and_verdict(ledger: Ledger) -> None:
    hard = mined_pairs(ledger, kind=PairKind.HARD_MATED, limit=5, progress=Silent())
    assert all(STRAY in (p.a, p.b) and p.label == 1 and p.trust < 0.5 and p.verdict is None for p in hard)
    with ledger.writing():
        ledger.put_verdicts([Verdict(hard[0].b, hard[0].a, PairAnswer.SAME, "Ida", AT)])
    again = mined_pairs(ledger, kind=PairKind.HARD_MATED, limit=1, progress=Silent())[0]
    assert (again.a, again.b, again.verdict, again.trust) == (hard[0].a, hard[0].b, PairAnswer.SAME, 0.99)
    every = mined_pairs(ledger, kind=None, limit=4, progress=Silent())
    assert {p.kind for p in every} >= {PairKind.HARD_MATED, PairKind.HARD_NON_MATED}
    assert all(p.label == (p.kind == PairKind.HARD_MATED) and p.a < p.b for p in every)
    strangers = [p for p in every if p.kind == PairKind.HARD_NON_MATED]
    assert all(STRAY in (p.a, p.b) and p.trust < 0.5 for p in strangers)


def test_bad_limits_and_empty_ledgers_are_refused(ledger: Ledger, tmp_path: Path) -> None:
    with pytest.raises(BadInput, match="at least 1"):
        mined_pairs(ledger, kind=None, limit=0, progress=Silent())
    with Ledger.create(tmp_path / "empty", tmp_path / "photos") as empty:
        assert find_doubts(empty, progress=Silent()) == ()
        with pytest.raises(BadInput, match="run intake first"):
            load_trust(empty, progress=Silent())


def test_trust_is_the_same_at_each_look(ledger: Ledger) -> None:
    _, readings, trust = load_trust(ledger, progress=Silent())
    _, _, again = load_trust(ledger, progress=Silent())
    assert np.array_equal(trust.belonging, again.belonging)
    assert readings.embedded.sum() == 90
