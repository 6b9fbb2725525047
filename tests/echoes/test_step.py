"""The step: what it keeps, what makes it search again, and that it can be stopped."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from PIL import Image
from sklearn.datasets import load_sample_image

from curator.domain import Assignment, Change, PairAnswer, Scope, Verdict
from curator.echoes import registration, step
from curator.echoes.registration import Prepared, Registered
from curator.errors import Stopped
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent


@pytest.fixture
def ledger(tmp_path: Path) -> Iterator[Ledger]:
    root = tmp_path / "photos"
    photo = Image.fromarray(load_sample_image("china.jpg"))
    flat = Image.new("RGB", (60, 60), "grey")
    for name, image in {
        "p/1.png": photo,
        "p/2.png": photo.resize((320, 213)),
        "q/1.png": photo.transpose(Image.Transpose.FLIP_LEFT_RIGHT),
        "q/flat.png": flat,
        "p/flat.png": flat,
    }.items():
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        image.save(root / name)
    with Ledger.create(tmp_path / "ledger", root) as made:
        run(root, made, framing="whole", workers=1, progress=Silent())
        yield made


def test_flat_files_of_the_same_bytes_are_echoes_and_register_nothing(ledger: Ledger) -> None:
    groups = {group.photos: group for group in step.find_echoes(ledger, progress=Silent())}
    assert set(groups) == {("p/1.png", "p/2.png", "q/1.png"), ("p/flat.png", "q/flat.png")}
    (link,) = groups[("p/flat.png", "q/flat.png")].links
    assert (link.change, link.distance, link.agreement) == (Change.IDENTICAL, 0, 1.0)
    changes = {(link.a, link.b): link.change for link in groups[("p/1.png", "p/2.png", "q/1.png")].links}
    assert changes[("p/1.png", "p/2.png")] == Change.RESIZED
    assert changes[("p/1.png", "q/1.png")] == Change.MIRRORED


def test_verdicts_and_splits_cost_no_search(ledger: Ledger, monkeypatch: pytest.MonkeyPatch) -> None:
    before = step.find_echoes(ledger, progress=Silent())

    def refused(*_: object) -> None:
        raise AssertionError("searched again")

    monkeypatch.setattr(step, "candidates", refused)
    with ledger.writing():
        ledger.put_verdicts([Verdict("p/1.png", "q/1.png", PairAnswer.SAME, "ada", "2031-05-01T10:00:00+00:00")])
        ledger.put_split(Assignment({"p": "train", "q": "test"}, 1, 0.0), "")
    after = step.find_echoes(ledger, progress=Silent())
    assert [group.photos for group in after] == [group.photos for group in before]
    assert {group.scope for group in before} == {Scope.ACROSS_IDENTITIES}
    assert {group.scope for group in after} == {Scope.ACROSS_SPLITS}


def test_a_changed_roll_is_searched_again(ledger: Ledger) -> None:
    assert len(step.find_echoes(ledger, progress=Silent())) == 2
    (ledger.photo_root / "q" / "flat.png").unlink()
    run(ledger.photo_root, ledger, framing="whole", workers=1, progress=Silent())
    (group,) = step.find_echoes(ledger, progress=Silent())
    assert group.photos == ("p/1.png", "p/2.png", "q/1.png")


class _Impatient(Silent):
    def stop_wanted(self) -> bool:
        return True


def test_it_can_be_stopped_and_begun_again(ledger: Ledger) -> None:
    with pytest.raises(Stopped):
        step.find_echoes(ledger, progress=_Impatient())
    assert len(step.find_echoes(ledger, progress=Silent())) == 2


class _StoppedAfter(Silent):
    def __init__(self, asked: int) -> None:
        super().__init__()
        self.asked = asked

    def stop_wanted(self) -> bool:
        self.asked -= 1
        return self.asked < 0


def test_what_was_settled_before_a_stop_is_not_settled_again(ledger: Ledger, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(step, "_PART", 1)
    settled: list[int] = []
    register_many = registration.register_many

    def counted(a: list[Prepared], b: list[Prepared]) -> list[Registered]:
        settled.append(len(a))
        return register_many(a, b)

    monkeypatch.setattr(registration, "register_many", counted)
    # Asked once for the thumbnails, then before each part: the first part is done, the second is not.
    with pytest.raises(Stopped):
        step.find_echoes(ledger, progress=_StoppedAfter(2))
    assert sum(settled) == 1
    after = step.find_echoes(ledger, progress=Silent())
    with_a_stop = sum(settled)
    # Deleted findings are searched for again, in one go.
    with ledger.writing():
        ledger.put_finding("echo-links", "", None)
    settled.clear()
    assert step.find_echoes(ledger, progress=Silent()) == after
    assert sum(settled) == with_a_stop > 1


def test_parts_are_not_held_beside_the_whole(ledger: Ledger, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(step, "_PART", 1)
    names: list[str] = []
    put = Ledger.put_finding

    def noted(self: Ledger, kind: str, key: str, document: object) -> None:
        names.append(kind)
        put(self, kind, key, document)

    monkeypatch.setattr(Ledger, "put_finding", noted)
    step.find_echoes(ledger, progress=Silent())
    parts = set(names) - {"echo-links"}
    assert len(parts) > 1
    assert all(ledger.finding(name, "") is None for name in parts)
