"""Planted echoes are found and named; different pictures are not tied; groups are what links make of them."""

import io
from pathlib import Path

import numpy as np
import pytest
from PIL import Image, ImageDraw, ImageEnhance, ImageOps
from sklearn.datasets import load_sample_image

from curator.domain import Change, EchoLink, Readings, Roll, Scope
from curator.echoes.groups import group
from curator.echoes.people import same_people
from curator.echoes.registration import COARSE, FINE, Prepared, Registered, prepare, register
from curator.echoes.settlement import BURST_FROM, COPY_FROM, Facts, settled_change
from curator.echoes.step import compare, find_echoes
from curator.errors import BadInput
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent


@pytest.fixture(scope="module")
def picture() -> Image.Image:
    return Image.fromarray(load_sample_image("china.jpg"))


def _prepared(image: Image.Image) -> Prepared:
    grey = image.convert("L")
    small, large = (np.asarray(grey.resize((s, s), Image.Resampling.BOX), dtype=float) for s in (COARSE, FINE))
    return prepare(small, large)


def _jpeg(image: Image.Image, quality: int) -> Image.Image:
    buffer = io.BytesIO()
    image.save(buffer, "JPEG", quality=quality)
    return Image.open(buffer).convert("RGB")


def _cropped(image: Image.Image, left: float, top: float, right: float, bottom: float) -> Image.Image:
    w, h = image.size
    return image.crop((int(left * w), int(top * h), int(right * w), int(bottom * h)))


def _labelled(image: Image.Image) -> Image.Image:
    copy = image.copy()
    w, h = copy.size
    ImageDraw.Draw(copy).rectangle((w * 0.55, h * 0.65, w * 0.9, h * 0.95), fill="white")
    return copy


_CHANGES = {
    "quality 30": lambda image: _jpeg(image, 30),
    "half size": lambda image: image.resize((320, 213)),
    "crop 8 % all round": lambda image: _cropped(image, 0.08, 0.08, 0.92, 0.92),
    "crop from one corner": lambda image: _cropped(image, 0.0, 0.0, 0.88, 0.88),
    "brighter": lambda image: ImageEnhance.Brightness(image).enhance(1.2),
    "less contrast": lambda image: ImageEnhance.Contrast(image).enhance(0.7),
    "a pasted label": _labelled,
}


@pytest.mark.parametrize("name", list(_CHANGES))
def test_a_changed_copy_agrees(picture: Image.Image, name: str) -> None:
    changed = _CHANGES[name](picture)
    for a, b in ((picture, changed), (changed, picture)):
        registered = register(_prepared(a), _prepared(b))
        assert registered.agreement >= COPY_FROM, registered


def test_the_matrix_says_where_the_crop_lies(picture: Image.Image) -> None:
    crop = _cropped(picture, 0.1, 0.05, 0.95, 0.9)
    matrix = register(_prepared(picture), _prepared(crop)).matrix
    np.testing.assert_allclose(matrix @ [0.1, 0.05, 1.0], [0.0, 0.0], atol=0.02)
    np.testing.assert_allclose(matrix @ [0.95, 0.9, 1.0], [1.0, 1.0], atol=0.02)


def test_other_pictures_do_not_agree(picture: Image.Image) -> None:
    other = Image.fromarray(load_sample_image("flower.jpg"))
    for image in (other, ImageOps.mirror(picture), ImageOps.flip(picture)):
        assert register(_prepared(picture), _prepared(image)).agreement < 0.8


_FACTS = Facts("a", 100, 100, 100.0, 40.0)


@pytest.mark.parametrize(
    ("other", "registered", "mirrored", "change"),
    [
        (Facts("a", 100, 100, 100, 40), (1.0, 0.0, 1.0), False, Change.IDENTICAL),
        (Facts("b", 100, 100, 100, 40), (1.0, 0.0, 1.0), False, Change.RE_ENCODED),
        (Facts("b", 50, 50, 100, 40), (1.0, 0.0, 1.0), False, Change.RESIZED),
        (Facts("b", 100, 100, 130, 40), (1.0, 0.0, 1.0), False, Change.RETOUCHED),
        (Facts("b", 100, 100, 100, 40), (1.0, 0.1, 1.0), False, Change.RETOUCHED),
        (Facts("b", 90, 90, 100, 40), (1.0, 0.0, 1.1), False, Change.CROPPED),
        (Facts("b", 100, 100, 100, 40), (1.0, 0.0, 1.0), True, Change.MIRRORED),
        (Facts("b", 100, 100, 100, 40), (BURST_FROM + 0.001, 0.0, 1.0), False, Change.BURST),
        (Facts("b", 100, 100, 100, 40), (BURST_FROM + 0.001, 0.0, 1.0), True, None),
        (Facts("b", 100, 100, 100, 40), (0.9, 0.0, 1.0), False, None),
    ],
)
def test_changes_are_named(
    other: Facts, registered: tuple[float, float, float], mirrored: bool, change: Change | None
) -> None:
    agreement, disagreeing, scale = registered
    matrix = np.array([[scale, 0, (1 - scale) / 2], [0, scale, (1 - scale) / 2]])
    assert settled_change(_FACTS, other, Registered(matrix, agreement, disagreeing), mirrored=mirrored) == change


def _roll(names: list[str]) -> tuple[Roll, Readings]:
    identities = sorted({name.split("/")[0] for name in names})
    n = len(names)
    roll = Roll(
        tuple(names),
        tuple(f"{k:064x}" for k in range(n)),
        tuple(identities),
        np.array([identities.index(name.split("/")[0]) for name in names], dtype=np.int32),
        {},
    )
    sizes = np.arange(10, 10 + n, dtype=np.int32)
    flat = np.full(n, 5.0)
    none = np.zeros(n, dtype=np.uint64)
    readings = Readings(
        (None,) * n, np.full(n, 9), sizes, sizes, none, none, none, flat, flat, flat, flat, np.ones(n, dtype=np.int32),
        flat, np.zeros((n, 4)), np.zeros((n, 5, 2)), np.zeros((n, 2), dtype=np.float32), np.zeros(n, dtype=bool),
    )  # fmt: skip
    return roll, readings


def _link(a: str, b: str, change: Change = Change.RESIZED) -> EchoLink:
    return EchoLink(a, b, change, 0, 1.0)


def test_copies_chain_and_bursts_do_not() -> None:
    roll, readings = _roll(["a/1", "a/2", "a/3", "a/4", "b/1"])
    links = [
        _link("a/1", "a/2"),
        _link("a/2", "b/1"),
        _link("a/2", "a/3", Change.BURST),
        _link("a/3", "a/4", Change.BURST),
    ]
    groups = group(links, roll, readings, None)
    assert [set(g.photos) for g in groups] == [{"a/1", "a/2", "b/1"}, {"a/2", "a/3"}, {"a/3", "a/4"}]
    assert [g.scope for g in groups] == [Scope.ACROSS_IDENTITIES, Scope.WITHIN_IDENTITY, Scope.WITHIN_IDENTITY]
    assert groups[0].suggested_keep == "b/1"  # the largest
    assert group(links[::-1], roll, readings, None) == groups
    assert len({g.id for g in groups}) == 3


def test_a_split_makes_a_leak_of_an_echo() -> None:
    roll, readings = _roll(["a/1", "b/1"])
    (found,) = group([_link("a/1", "b/1")], roll, readings, {"a": "train", "b": "test"})
    assert found.scope == Scope.ACROSS_SPLITS


@pytest.fixture
def roots(tmp_path: Path, picture: Image.Image) -> tuple[Path, Path]:
    flower = Image.fromarray(load_sample_image("flower.jpg"))
    for root, name, image in (
        ("one", "p/1.png", picture),
        ("one", "p/2.png", picture.crop((0, 0, 300, 200))),
        ("one", "q/1.png", flower),
        ("one", "q/2.png", flower.crop((100, 100, 500, 400))),
        ("two", "x/1.png", picture.resize((320, 213))),
        ("two", "y/1.png", ImageOps.flip(flower)),
    ):
        path = tmp_path / root / name
        path.parent.mkdir(parents=True, exist_ok=True)
        image.save(path)
    return tmp_path / "one", tmp_path / "two"


def test_two_roots_compared(roots: tuple[Path, Path]) -> None:
    found = compare(*roots, framing="whole", workers=1, progress=Silent())
    assert [(link.a, link.b, link.change) for link in found.echoes] == [("p/1.png", "x/1.png", Change.RESIZED)]
    assert found.photos == (4, 2)
    assert found.identities == (2, 2)


def test_a_root_is_not_compared_with_itself(roots: tuple[Path, Path]) -> None:
    with pytest.raises(BadInput, match="same folder"):
        compare(roots[0], roots[0], progress=Silent())
    with pytest.raises(BadInput, match=r"one/p lies inside \S*one:"):
        compare(roots[0], roots[0] / "p", progress=Silent())


@pytest.mark.parametrize("empty_first", [True, False])
def test_a_root_without_photos_shares_nothing_that_could_be_told(
    roots: tuple[Path, Path], tmp_path: Path, *, empty_first: bool
) -> None:
    empty = tmp_path / "empty"
    (empty / "p").mkdir(parents=True)
    (empty / "p" / "letter.txt").write_text("mine")
    pair = (empty, roots[1]) if empty_first else (roots[0], empty)
    with pytest.raises(BadInput, match=r"empty holds no photos"):
        compare(*pair, progress=Silent())


def test_echoes_of_a_ledger_are_found_once_and_kept(roots: tuple[Path, Path], tmp_path: Path) -> None:
    (roots[0] / "r").mkdir()
    (roots[0] / "r" / "copy.png").write_bytes((roots[0] / "q" / "1.png").read_bytes())
    with Ledger.create(tmp_path / "ledger", roots[0]) as ledger:
        run(roots[0], ledger, framing="whole", workers=1, progress=Silent())
        (found,) = find_echoes(ledger, progress=Silent())
        assert set(found.photos) == {"q/1.png", "r/copy.png"}
        assert found.links[0].change == Change.IDENTICAL
        assert find_echoes(ledger, progress=Silent()) == (found,)


def test_the_same_person_is_found_across_two_roots() -> None:
    rng = np.random.default_rng(2)
    centres = rng.normal(size=(8, 16))
    centres /= np.linalg.norm(centres, axis=1, keepdims=True)
    names, vectors = [], []
    for k in range(8):
        for photo in range(4):
            side = "a" if k < 4 else "b"
            names.append(f"{side}/{k}/{photo}")
            # The last identity of the second root is the first of the first.
            vectors.append(centres[0 if k == 7 else k] + 0.05 * rng.normal(size=16))
    identities = sorted({name.rpartition("/")[0] for name in names})
    roll, readings = _roll([f"i/{k}" for k in range(len(names))])
    owner = np.array([identities.index(name.rpartition("/")[0]) for name in names], dtype=np.int32)
    roll = Roll(tuple(names), roll.digests, tuple(identities), owner, {})
    readings.embedded[:] = True
    filled = Readings(**{**readings.__dict__, "embeddings": np.array(vectors, dtype=np.float32)})
    assert [(row.identity_a, row.identity_b) for row in same_people(roll, filled)] == [("0", "7")]
