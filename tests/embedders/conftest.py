"""Made-up models and cards."""

from collections.abc import Callable, Sequence
from pathlib import Path

import numpy as np
import onnx
import pytest
from onnx import TensorProto, helper, numpy_helper


@pytest.fixture
def mean_model(tmp_path: Path) -> Callable[..., Path]:
    """A model whose output is the mean of each input channel: easy to foresee by hand."""

    def made(layout: str = "nchw", side: int = 4, outputs: Sequence[str] = ("mean",), batch: int | str = "n") -> Path:
        shape = [batch, 3, side, side] if layout == "nchw" else [batch, side, side, 3]
        axes = numpy_helper.from_array(np.array([2, 3] if layout == "nchw" else [1, 2]), "axes")
        nodes = [helper.make_node("ReduceMean", ["picture", "axes"], [name], keepdims=0) for name in outputs]
        graph = helper.make_graph(
            nodes,
            "means",
            [helper.make_tensor_value_info("picture", TensorProto.FLOAT, shape)],
            [helper.make_tensor_value_info(name, TensorProto.FLOAT, [batch, 3]) for name in outputs],
            [axes],
        )
        model = helper.make_model(graph, opset_imports=[helper.make_opsetid("", 18)], ir_version=8)
        path = tmp_path / "means.onnx"
        onnx.save(model, path)
        return path

    return made


@pytest.fixture
def card_file(tmp_path: Path) -> Callable[..., str]:
    """A user's card beside the made-up model; options replace its lines, None leaves one out."""

    def made(**options: object) -> str:
        told: dict[str, object] = {
            "file": '"means.onnx"',
            "size": 4,
            "channel_order": '"rgb"',
            "layout": '"nchw"',
            "mean": "[0, 0, 0]",
            "scale": 1.0,
            "dimensions": 3,
            "measure": '"euclidean"',
            "framing": '"whole"',
        }
        told.update(options)
        path = tmp_path / "own.toml"
        path.write_text("".join(f"{key} = {value}\n" for key, value in told.items() if value is not None))
        return str(path)

    return made
