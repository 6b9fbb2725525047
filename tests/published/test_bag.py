"""The edition's container against the BagIt library and coreutils (RFC 8493), SHA-256 (FIPS 180-4, from memory), and
Parquet's magic bytes."""

import hashlib
import subprocess
from pathlib import Path

import bagit
import pyarrow
import pytest

from curator.editions.bag import write_bag
from curator.editions.lists import csv_bytes, parquet_bytes


@pytest.fixture
def bag(tmp_path: Path) -> Path:
    write_bag(
        tmp_path / "bag", {"a.txt": b"abc", "deep/b.txt": b""}, {"Bagging-Date": "2026-01-01"}, went=lambda _: None
    )
    return tmp_path / "bag"


def test_the_bagit_library_validates_it_and_sees_a_changed_byte(bag: Path) -> None:
    assert bagit.Bag(str(bag)).validate()
    (bag / "data" / "a.txt").write_bytes(b"abd")
    with pytest.raises(bagit.BagValidationError):
        bagit.Bag(str(bag)).validate()


def test_sha256sum_checks_it(bag: Path) -> None:
    for manifest in ("manifest-sha256.txt", "tagmanifest-sha256.txt"):
        subprocess.run(["sha256sum", "-c", "--quiet", manifest], cwd=bag, check=True)


def test_payload_oxum_of_abc(tmp_path: Path) -> None:
    write_bag(tmp_path / "bag", {"a.txt": b"abc"}, {}, went=lambda _: None)
    assert "Payload-Oxum: 3.1\n" in (tmp_path / "bag" / "bag-info.txt").read_text()


def test_sha256_of_the_standard(bag: Path) -> None:
    manifest = (bag / "manifest-sha256.txt").read_text()
    assert "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad  data/a.txt\n" in manifest
    assert "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855  data/deep/b.txt\n" in manifest
    assert hashlib.sha256(b"abc").hexdigest() in manifest


def test_parquet_begins_and_ends_with_its_magic_bytes() -> None:
    data = parquet_bytes(pyarrow.table({"a": [1]}))
    assert data[:4] == data[-4:] == b"PAR1"


def test_csv_is_rfc_4180() -> None:
    rows = pyarrow.table({"a": ['say "x"', "p,q", "plain"]})
    assert csv_bytes(rows) == b'a\r\n"say ""x"""\r\n"p,q"\r\nplain\r\n'
