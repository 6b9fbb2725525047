"""Names: readable, NFC, one photo each, whatever the bytes on disk."""

import unicodedata

from hypothesis import given
from hypothesis import strategies as st

from curator.intake.naming import composed, names_of

# Few letters, so that spellings of one name and names of unreadable bytes do meet.
_PIECES = ["a", "\u00c5", "A\u030a", "\u212b", "\\", "\\xff", "x"]
_RAW = st.lists(st.sampled_from([*(piece.encode() for piece in _PIECES), b"\xff", b"\xed\xa0\x80"]), min_size=1)


@given(st.sets(_RAW.map(b"".join), min_size=1, max_size=12))
def test_no_two_photos_share_a_name(raws: set[bytes]) -> None:
    names, notes = names_of(raws)
    assert names.keys() == raws
    assert len(set(names.values())) == len(raws)
    assert all(name.encode() for name in names.values())
    gave_way = [raw for raw in raws if names[raw] != composed(raw)]
    assert len(gave_way) == len(notes)
    for raw in raws:
        if unicodedata.normalize("NFC", raw.decode("utf-8", "replace")).encode() == raw:
            assert names[raw] == raw.decode()


def test_the_three_spellings_of_one_letter() -> None:
    """U+00C5, U+0041 U+030A and U+212B have one NFC form (Unicode Standard Annex 15)."""
    spellings = ["\u212b.png", "A\u030a.png", "\u00c5.png"]
    assert {composed(name.encode()) for name in spellings} == {"\u00c5.png"}
    names, _ = names_of(name.encode() for name in spellings)
    assert names["\u00c5.png".encode()] == "\u00c5.png"
    assert set(names.values()) == set(spellings)
    # Without the composed one, the first in byte order has the composed name.
    names, _ = names_of(name.encode() for name in spellings[:2])
    assert names["A\u030a.png".encode()] == "\u00c5.png"


def test_a_file_called_what_unreadable_bytes_are_written_as() -> None:
    names, notes = names_of([b"a/\xff.png", b"a/\\xff.png"])
    assert names == {b"a/\\xff.png": "a/\\xff.png", b"a/\xff.png": "a/\\\\xff.png"}
    assert len(notes) == 1
