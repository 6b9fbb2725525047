"""Verdict CSV: round trips, and refusals that name the line."""

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from curator.domain import PairAnswer, PhotoAnswer, Verdict
from curator.errors import BadInput
from curator.review.verdict_csv import parse_verdicts, write_verdicts

HEADER = "photo_a,photo_b,verdict,annotator,at\r\n"
PHOTOS = {name: name for name in ("r-1/1.jpg", 'r-1/a, "b".jpg', "r-2/Åre.jpg")}
NAMES = st.sampled_from(sorted(PHOTOS))
ANNOTATORS = st.text(st.characters(exclude_categories=("Cs", "Cc")), min_size=1).filter(lambda s: s == s.strip() != "")
TIMES = st.datetimes(timezones=st.timezones()).map(lambda moment: moment.isoformat())


@given(st.lists(st.tuples(NAMES, NAMES, st.sampled_from(list(PairAnswer)), ANNOTATORS, TIMES)))
def test_pairs_come_back_as_they_went(rows: list[tuple[str, str, PairAnswer, str, str]]) -> None:
    verdicts = [Verdict(*row) for row in rows if row[0] != row[1]]
    assert parse_verdicts(write_verdicts(verdicts), "v.csv", PHOTOS) == verdicts


def test_names_meet_in_nfc_and_naive_times_are_utc() -> None:
    text = HEADER + unicodedata.normalize("NFD", "r-2/Åre.jpg") + ",,unusable,Ida,2026-03-01T10:00:00\r\n"
    [verdict] = parse_verdicts(text, "v.csv", PHOTOS)
    assert verdict == Verdict("r-2/Åre.jpg", "", PhotoAnswer.UNUSABLE, "Ida", "2026-03-01T10:00:00+00:00")


@pytest.mark.parametrize(
    ("row", "words"),
    [
        ("r-1/1.jpg,r-9/9.jpg,same,Ida,2026-03-01", "r-9/9.jpg"),
        ("r-1/1.jpg,r-2/Åre.jpg,belongs,Ida,2026-03-01", "belongs"),
        ("r-1/1.jpg,,same,Ida,2026-03-01", "same"),
        ("r-1/1.jpg,,belongs,Ida,yesterday", "yesterday"),
        ("r-1/1.jpg,,belongs, ,2026-03-01", "annotator"),
        (",r-1/1.jpg,same,Ida,2026-03-01", "photo_a"),
        ("r-1/1.jpg,r-1/1.jpg,same,Ida,2026-03-01", "itself"),
        ("r-1/1.jpg,,belongs,Ida", "4 fields"),
    ],
)
def test_wrong_rows_are_refused_with_file_and_line(row: str, words: str) -> None:
    text = HEADER + "r-1/1.jpg,,belongs,Ida,2026-03-01\r\n" + row + "\r\n"
    with pytest.raises(BadInput, match=r"v\.csv, line 3: .*") as caught:
        parse_verdicts(text, "v.csv", PHOTOS)
    assert words in str(caught.value)


@pytest.mark.parametrize("text", ["", "a,b\r\n", HEADER.replace("at", "when")])
def test_a_wrong_header_is_refused(text: str) -> None:
    with pytest.raises(BadInput, match="must begin with"):
        parse_verdicts(text, "v.csv", PHOTOS)


def test_broken_quotes_are_refused() -> None:
    with pytest.raises(BadInput, match="not valid CSV"):
        parse_verdicts(HEADER + 'r-1/1.jpg,,"belongs"x,Ida,2026-03-01\r\n', "v.csv", PHOTOS)
