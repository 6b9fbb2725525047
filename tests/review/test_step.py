"""Verdicts put into a ledger, and how far annotators agree."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from curator.domain import PhotoFile, Reading
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.review.step import agreement, get_verdicts, put_verdicts

HEADER = "photo_a,photo_b,verdict,annotator,at\n"


@pytest.fixture
def ledger(tmp_path: Path) -> Iterator[Ledger]:
    (tmp_path / "photos").mkdir()
    names = [f"r-{i}/1.jpg" for i in range(6)]
    files = [PhotoFile(n.encode(), n, n[:3], 10, 20, f"{i:064x}") for i, n in enumerate(names)]
    with Ledger.create(tmp_path / "ledger", tmp_path / "photos") as opened:
        with opened.writing():
            opened.set_maker("made up", framing="whole", card="made up")
            opened.put_chunk(files, [Reading(digest=f"{i:064x}") for i in range(6)], maker="made up")
        yield opened


def put(ledger: Ledger, rows: list[str]) -> tuple[int, int]:
    path = ledger.path.parent / "verdicts.csv"
    path.write_text(HEADER + "\n".join(rows) + "\n", encoding="utf-8")
    report = put_verdicts(ledger, path)
    return report.new, report.repeated


def said(a: int, b: int | None, answer: str, who: str, day: int = 1) -> str:
    return f"r-{a}/1.jpg,{'' if b is None else f'r-{b}/1.jpg'},{answer},{who},2026-03-{day:02d}T08:00:00Z"


def test_a_repeat_is_harmless_and_a_bad_row_leaves_nothing(ledger: Ledger) -> None:
    rows = [said(0, 1, "same", "Ida"), said(2, None, "belongs", "Ida")]
    assert put(ledger, rows) == (2, 0)
    assert put(ledger, [*rows, said(3, None, "unusable", "Ida")]) == (1, 2)
    with pytest.raises(BadInput, match="line 3"):
        put(ledger, [said(4, None, "belongs", "Ida"), "nobody.jpg,,belongs,Ida,2026-03-01"])
    assert len(get_verdicts(ledger)) == 3


def test_no_such_file_and_no_text(ledger: Ledger, tmp_path: Path) -> None:
    with pytest.raises(BadInput, match=r"none\.csv"):
        put_verdicts(ledger, tmp_path / "none.csv")
    (tmp_path / "odd.csv").write_bytes(b"\xff\xfe\x00")
    with pytest.raises(BadInput, match="UTF-8"):
        put_verdicts(ledger, tmp_path / "odd.csv")


def test_agreement_counts_what_two_answered_and_lists_conflicts(ledger: Ledger) -> None:
    rows = [said(0, 1, "same", "Ida"), said(1, 0, "same", "Jon"), said(0, 2, "different", "Ida")]
    rows += [said(0, 2, "different", "Jon"), said(0, 3, "same", "Ida"), said(0, 3, "different", "Jon")]
    rows += [said(0, 4, "different", "Ida"), said(0, 4, "same", "Jon"), said(5, None, "belongs", "Ida")]
    put(ledger, rows)
    report = agreement(ledger)
    assert (report.annotators, report.items, report.fleiss) == (("Ida", "Jon"), 4, None)
    # Two of four agreed, and two of four would by chance.
    assert report.cohen == pytest.approx(0.0)
    # Coincidences: o(same, different) = 4 of 8; expected 2 * 4 * 4 / 7 = 32 / 7.
    assert report.krippendorff == pytest.approx(1 - 4 / (32 / 7))
    assert report.conflicts == (("r-0/1.jpg", "r-3/1.jpg"), ("r-0/1.jpg", "r-4/1.jpg"))


def test_a_later_word_counts(ledger: Ledger) -> None:
    later = [said(0, 1, "same", "Ida", day=2), said(0, 2, "different", "Ida"), said(0, 2, "different", "Jon")]
    put(ledger, [*later, said(0, 1, "same", "Jon"), said(0, 1, "different", "Ida", day=1)])
    report = agreement(ledger)
    assert report.conflicts == ()
    assert report.cohen == pytest.approx(1.0)


def test_undefined_agreement_is_none(ledger: Ledger) -> None:
    report = agreement(ledger)
    assert (report.items, report.cohen, report.krippendorff) == (0, None, None)
    put(ledger, [said(0, 1, "same", "Ida"), said(0, 1, "same", "Jon")])
    report = agreement(ledger)
    assert (report.items, report.cohen, report.krippendorff) == (1, None, None)
