"""The default chain against the package its weights were trained with.

Source: values computed once with the dlib package (its version stands in data/dlib_values.json) on
data/portrait.png, a drawn portrait, and data/portrait_crop.png, its aligned crop. dlib gives landmarks as whole pixels.
data/portrait_chip.png is dlib's own aligned crop (`get_face_chip`, 150 pixels, padding .25) by the first of these.
"""

import json
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from curator.domain import Pixels
from curator.embedders import building
from curator.embedders.alignment import aligned_crop
from curator.embedders.cards import load_card
from curator.embedders.faces import FaceFinder
from curator.embedders.landmarks import predict
from curator.embedders.session import Embedder

_DATA = Path(__file__).parent / "data"
_RECORDED = json.loads((_DATA / "dlib_values.json").read_text())


def _picture(name: str) -> Pixels:
    with Image.open(_DATA / name) as image:
        return np.asarray(image.convert("RGB"))


def test_the_embedding_is_dlibs() -> None:
    got = Embedder(load_card()).embed(_picture("portrait_crop.png")[None])[0]
    np.testing.assert_allclose(got, _RECORDED["embedding"], atol=1e-3)


@pytest.mark.parametrize("known", _RECORDED["landmarks"], ids=lambda known: str(known["box"]))
def test_the_landmarks_are_dlibs_to_the_pixel(known: dict[str, list[int]]) -> None:
    left, top, right, bottom = known["box"]
    got = predict(building.forests(), [_picture("portrait.png")], [(left, top, right, bottom)])[0]
    # Rounded as dlib rounds; the distance from the rounding edge is kept so that 1e-3 either way is agreement.
    np.testing.assert_allclose(got, known["landmarks"], atol=0.5 + 1e-3)


def test_the_aligned_crop_lies_where_dlibs_does() -> None:
    landmarks = np.array(_RECORDED["landmarks"][0]["landmarks"], dtype=np.float64)
    portrait, chip = _picture("portrait.png"), _picture("portrait_chip.png").astype(np.int64)

    def difference(shift: tuple[float, float]) -> float:
        return float(np.abs(aligned_crop(Image.fromarray(portrait), landmarks + shift) - chip).mean())

    # Rounding differs, so grey values do a little; a fifth of a pixel off would differ more.
    here = difference((0.0, 0.0))
    assert here < 2.5
    assert all(difference(shift) > here for shift in [(0.2, 0.0), (-0.2, 0.0), (0.0, 0.2), (0.0, -0.2)])


def test_the_face_is_found_where_dlib_finds_it() -> None:
    known = _RECORDED["detection"]
    enlarged = np.asarray(
        Image.fromarray(_picture("portrait.png")).resize(known["enlarged_to"], Image.Resampling.BICUBIC)
    )
    (box, score), *others = FaceFinder().boxes(Image.fromarray(enlarged))
    left, top, right, bottom = known["box"]
    common = max(0.0, min(box[0] + box[2], right) - max(box[0], left)) * max(
        0.0, min(box[1] + box[3], bottom) - max(box[1], top)
    )
    together = box[2] * box[3] + (right - left) * (bottom - top) - common
    # Our pyramid has other levels than dlib's, so the boxes agree as boxes do, not to the pixel.
    assert common / together > 0.6
    assert score == pytest.approx(known["score"], abs=0.2)
    assert others == []
