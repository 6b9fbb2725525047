"""What an intake would find is told before it begins, by looking at folders alone."""

from pathlib import Path

import pytest

from curator.errors import BadInput, Stopped
from curator.intake.step import look_ahead, run
from curator.ledger import Ledger
from curator.progress import Silent


class _StopsAfter(Silent):
    def __init__(self, folders: int) -> None:
        super().__init__()
        self.left = folders

    def stop_wanted(self) -> bool:
        self.left -= 1
        return self.left < 0


def _root(tmp_path: Path, sidecar: str | None = None) -> Path:
    root = tmp_path / "photos"
    for name in ("a/1.png", "a/2.png", "b/1.png", "outside.png", "b/notes.txt"):
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        (root / name).write_bytes(b"not even a picture")
    if sidecar is not None:
        (root / "attributes.csv").write_text(sidecar)
    return root


def test_it_counts_what_intake_then_takes_in(tmp_path: Path, photo_root: Path) -> None:
    ahead = look_ahead(photo_root, progress=Silent())
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        report = run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
    assert (ahead.photos, ahead.identities) == (report.photos, report.identities)
    assert ahead.skipped == report.skipped


def test_it_tells_attributes_sizes_and_who_is_alone(tmp_path: Path) -> None:
    ahead = look_ahead(_root(tmp_path, "identity,club,age_band\na,heron,\nb,weir,adult\n"), progress=Silent())
    assert (ahead.photos, ahead.identities, ahead.alone, ahead.most) == (3, 2, 1, 2)
    assert ahead.size == 3 * len(b"not even a picture")
    assert ahead.attributes == ("club", "age_band")
    assert ahead.skipped == {"not photos": 1, "photos outside any identity folder": 1}
    assert look_ahead(_root(tmp_path / "other"), progress=Silent()).attributes is None


def test_a_csv_that_intake_would_refuse_is_told_of(tmp_path: Path) -> None:
    ahead = look_ahead(_root(tmp_path, "who,club\na,heron\n"), progress=Silent())
    assert "neither a 'photo' nor an 'identity' column" in ahead.fault
    assert ahead.photos == 3


def test_it_heeds_a_stop_and_refuses_what_is_no_folder(tmp_path: Path) -> None:
    root = _root(tmp_path)
    with pytest.raises(Stopped):
        look_ahead(root, progress=_StopsAfter(1))
    with pytest.raises(BadInput):
        look_ahead(root / "nowhere", progress=Silent())
