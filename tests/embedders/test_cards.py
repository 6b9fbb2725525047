"""Cards: what they say is done, and each complaint is one clear sentence."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import onnx
import pytest
from onnx import TensorProto, helper

from curator.embedders.cards import check_framing, load_card
from curator.embedders.session import Embedder
from curator.errors import BadInput

_COLOUR = np.zeros((2, 4, 4, 3), dtype=np.uint8)
_COLOUR[0] = (10, 20, 30)
_COLOUR[1] = (40, 0, 0)


@pytest.mark.parametrize("layout", ["nchw", "nhwc"])
@pytest.mark.parametrize(("order", "expected"), [("rgb", [10, 20, 30]), ("bgr", [30, 20, 10])])
def test_layout_and_channel_order_are_followed(
    mean_model: Callable[..., Path], card_file: Callable[..., str], layout: str, order: str, expected: list[int]
) -> None:
    mean_model(layout)
    card = load_card(card_file(layout=f'"{layout}"', channel_order=f'"{order}"'))
    assert Embedder(card).embed(_COLOUR)[0].tolist() == expected


def test_mean_scale_and_cosine(mean_model: Callable[..., Path], card_file: Callable[..., str]) -> None:
    mean_model()
    card = load_card(card_file(mean="[10, 10, 10]", scale="[0.5, 1.0, 2.0]"))
    assert Embedder(card).embed(_COLOUR)[0].tolist() == [0.0, 10.0, 40.0]
    unit = Embedder(load_card(card_file(measure='"cosine"'))).embed(_COLOUR)
    np.testing.assert_allclose(np.linalg.norm(unit, axis=1), 1.0, rtol=1e-6)


def test_mirror_average_is_the_mean_of_both(mean_model: Callable[..., Path], card_file: Callable[..., str]) -> None:
    mean_model()
    crops = np.random.default_rng(3).integers(0, 256, (2, 4, 4, 3), dtype=np.uint8)
    plain = Embedder(load_card(card_file())).embed(crops)
    averaged = Embedder(load_card(card_file(mirror_average="true"))).embed(crops)
    np.testing.assert_allclose(averaged, plain, rtol=1e-5)


def test_a_model_for_single_pictures_takes_batches_too(
    mean_model: Callable[..., Path], card_file: Callable[..., str]
) -> None:
    mean_model(batch=1)
    assert Embedder(load_card(card_file())).embed(_COLOUR).tolist() == [[10, 20, 30], [40, 0, 0]]


def test_a_model_that_looks_at_its_whole_batch_still_embeds_each_picture_alone(
    tmp_path: Path, card_file: Callable[..., str]
) -> None:
    # Dynamic quantization takes one scale from all pictures of a batch.
    nodes = [
        helper.make_node("DynamicQuantizeLinear", ["picture"], ["q", "scale", "zero"]),
        helper.make_node("DequantizeLinear", ["q", "scale", "zero"], ["coarse"]),
        helper.make_node("GlobalAveragePool", ["coarse"], ["pooled"]),
        helper.make_node("Flatten", ["pooled"], ["mean"]),
    ]
    shapes = {"picture": ["n", 3, 4, 4], "mean": ["n", 3]}
    inward, outward = (helper.make_tensor_value_info(name, TensorProto.FLOAT, shape) for name, shape in shapes.items())
    graph = helper.make_graph(nodes, "coarse", [inward], [outward])
    model = helper.make_model(graph, opset_imports=[helper.make_opsetid("", 18)], ir_version=8)
    onnx.save(model, tmp_path / "means.onnx")
    embedder = Embedder(load_card(card_file()))
    dark_and_bright = np.stack([_COLOUR[0] // 3, _COLOUR[1] * 6])
    together = embedder.embed(dark_and_bright)
    alone = np.concatenate([embedder.embed(picture[None]) for picture in dark_and_bright])
    np.testing.assert_array_equal(together, alone)
    np.testing.assert_allclose(together[0], dark_and_bright[0, 0, 0], atol=0.05)


def test_no_crops_give_no_embeddings(mean_model: Callable[..., Path], card_file: Callable[..., str]) -> None:
    mean_model()
    assert Embedder(load_card(card_file())).embed(_COLOUR[:0]).shape == (0, 3)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"colour": 1}, "unknown key 'colour'"),
        ({"size": None}, "lacks 'size'"),
        ({"size": '"big"'}, "'size'.*wrong type"),
        ({"size": "true"}, "'size'.*wrong type"),
        ({"size": 0}, "at least 1"),
        ({"layout": '"chwn"'}, "nchw or nhwc"),
        ({"measure": '"manhattan"'}, "cosine or euclidean"),
        ({"mean": "[1, 2]"}, "one number or three"),
        ({"framing": '"half"'}, "no framing"),
        ({"framing": '"box:0.5,0,0.6,1"'}, "inside the photo"),
        ({"file": '"gone.onnx"'}, "gone.onnx.*could not be read"),
        ({"size": "="}, "not valid TOML"),
    ],
)
def test_complaints_about_the_card(
    mean_model: Callable[..., Path], card_file: Callable[..., str], options: dict[str, object], words: str
) -> None:
    mean_model()
    with pytest.raises(BadInput, match=words):
        load_card(card_file(**options))


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"dimensions": 128}, "gives 3 numbers, not 128"),
        ({"size": 5}, "does not fit"),
        ({"layout": '"nhwc"'}, "does not fit"),
        ({"output": '"features"'}, "no output 'features'"),
    ],
)
def test_complaints_about_a_model_that_does_not_fit(
    mean_model: Callable[..., Path], card_file: Callable[..., str], options: dict[str, object], words: str
) -> None:
    mean_model()
    with pytest.raises(BadInput, match=words):
        Embedder(load_card(card_file(**options)))


def test_a_file_that_is_no_model(tmp_path: Path, card_file: Callable[..., str]) -> None:
    (tmp_path / "means.onnx").write_bytes(b"not a model")
    with pytest.raises(BadInput, match="could not be opened"):
        Embedder(load_card(card_file()))


def test_unknown_names_list_the_known_ones() -> None:
    with pytest.raises(BadInput, match=r"default-face.*whole-photo"):
        load_card("nonesuch")
    with pytest.raises(BadInput, match="could not be read"):
        load_card("nowhere/card.toml")


def test_the_fingerprint_tells_what_changes_the_embeddings(
    mean_model: Callable[..., Path], card_file: Callable[..., str]
) -> None:
    mean_model()
    prints = {load_card(card_file(scale=scale)).fingerprint() for scale in (1.0, 2.0)}
    prints.add(load_card(card_file(mirror_average="true")).fingerprint())
    mean_model("nhwc")
    prints.add(load_card(card_file()).fingerprint())
    assert len(prints) == 4
    assert load_card(card_file()).fingerprint() in prints


@pytest.mark.parametrize("framing", ["face", "whole", "box:0,0,1,1", "box:.1,.2,.5,.5"])
def test_framings(framing: str) -> None:
    assert check_framing(framing) == framing
