"""The default embedder and detector as ONNX graphs, built from the tensors of their weight files.

Layer lists follow the published architecture of the two networks; gains, offsets and batch norms are folded into
the convolutions before them, in float64, which spares the sessions a third of their nodes.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
import onnx
from numpy.typing import NDArray
from onnx import TensorProto, helper, numpy_helper

MEANS = (122.782, 117.001, 104.298)
DIVISOR = 256.0
_OPSET = 17
_IR_VERSION = 8
_BATCH_NORM_EPSILON = 1e-4

Weights = NDArray[np.floating[Any]]


class _Graph:
    """Collects nodes; each method appends one layer and returns the name of its output."""

    def __init__(self) -> None:
        self.nodes: list[onnx.NodeProto] = []
        self.initializers: list[onnx.TensorProto] = []

    def constant(self, values: Weights | NDArray[np.int64]) -> str:
        name = f"w{len(self.initializers)}"
        self.initializers.append(numpy_helper.from_array(np.ascontiguousarray(values), name))
        return name

    def node(self, kind: str, inputs: Sequence[str], **options: Any) -> str:
        name = f"n{len(self.nodes)}"
        self.nodes.append(helper.make_node(kind, list(inputs), [name], **options))
        return name

    def conv(self, x: str, weights: Weights, bias: Weights, *, stride: int = 1, pad: int = 0) -> str:
        inputs = [x, self.constant(weights.astype(np.float32)), self.constant(bias.astype(np.float32))]
        return self.node("Conv", inputs, strides=[stride] * 2, pads=[pad] * 4)

    def relu(self, x: str) -> str:
        return self.node("Relu", [x])

    def pad_end(self, x: str, channels: int = 0, side: int = 0) -> str:
        return self.node("Pad", [x, self.constant(np.array([0, 0, 0, 0, 0, channels, side, side]))])

    def model(
        self,
        output: str,
        in_shape: Sequence[int | str],
        out_shape: Sequence[int | str],
        in_kind: int = TensorProto.FLOAT,
    ) -> onnx.ModelProto:
        self.nodes.append(helper.make_node("Identity", [output], ["output"]))
        graph = helper.make_graph(
            self.nodes,
            "pairwright",
            [helper.make_tensor_value_info("input", in_kind, in_shape)],
            [helper.make_tensor_value_info("output", TensorProto.FLOAT, out_shape)],
            self.initializers,
        )
        model = helper.make_model(graph, opset_imports=[helper.make_opsetid("", _OPSET)], ir_version=_IR_VERSION)
        onnx.checker.check_model(model)
        return model


def _split_filters(tensor: Weights, shape: tuple[int, int, int, int]) -> tuple[Weights, Weights]:
    """A convolution's tensor into weights (out, in, rows, columns) and biases (out,), float64."""
    size = int(np.prod(shape))
    if tensor.size != size + shape[0]:
        raise ValueError(f"a convolution of shape {shape} cannot have {tensor.size} numbers")
    return tensor[:size].reshape(shape).astype(np.float64), tensor[size:].astype(np.float64)


def _scaled(weights: Weights, bias: Weights, gain: Weights, offset: Weights) -> tuple[Weights, Weights]:
    return weights * gain[:, None, None, None], bias * gain + offset


def embedder(tensors: Sequence[Weights]) -> onnx.ModelProto:
    """Input (n, 3, 150, 150) float32, normalised by `MEANS` and `DIVISOR`; output (n, 128)."""
    graph, source = _Graph(), iter(tensors)

    def layer(x: str, inward: int, outward: int, side: int, *, stride: int = 1, pad: int = 0) -> str:
        weights, bias = _split_filters(next(source), (outward, inward, side, side))
        affine = next(source).astype(np.float64)
        folded = _scaled(weights, bias, affine[:outward], affine[outward:])
        return graph.conv(x, *folded, stride=stride, pad=pad)

    def block(x: str, channels: int) -> str:
        inner = graph.relu(layer(x, channels, channels, 3, pad=1))
        return graph.relu(graph.node("Add", [layer(inner, channels, channels, 3, pad=1), x]))

    def down(x: str, inward: int, outward: int, side: int) -> tuple[str, int]:
        inner = graph.relu(layer(x, inward, outward, 3, stride=2))
        inner = layer(inner, outward, outward, 3, pad=1)
        skip = graph.node("AveragePool", [x], kernel_shape=[2, 2], strides=[2, 2])
        convolved, pooled = (side - 3) // 2 + 1, side // 2
        wide = max(convolved, pooled)
        if convolved < wide:
            inner = graph.pad_end(inner, side=wide - convolved)
        if inward < outward or pooled < wide:
            skip = graph.pad_end(skip, channels=outward - inward, side=wide - pooled)
        return graph.relu(graph.node("Add", [inner, skip])), wide

    x = graph.relu(layer("input", 3, 32, 7, stride=2))
    x, side = graph.node("MaxPool", [x], kernel_shape=[3, 3], strides=[2, 2]), 35
    for _ in range(3):
        x = block(x, 32)
    for inward, outward, blocks in ((32, 64, 3), (64, 128, 2), (128, 256, 2), (256, 256, 0)):
        x, side = down(x, inward, outward, side)
        for _ in range(blocks):
            x = block(x, outward)
    x = graph.node("Flatten", [graph.node("GlobalAveragePool", [x])])
    x = graph.node("MatMul", [x, graph.constant(next(source).reshape(256, 128).astype(np.float32))])
    return graph.model(x, ["n", 3, 150, 150], ["n", 128])


_DETECTOR_LAYERS = (  # channels in, channels out, stride, padding; all 5 x 5
    (3, 16, 2, 0),
    (16, 32, 2, 0),
    (32, 32, 2, 0),
    (32, 45, 1, 2),
    (45, 45, 1, 2),
    (45, 45, 1, 2),
)


def detector(tensors: Sequence[Weights]) -> onnx.ModelProto:
    """Input (1, h, w, 3) uint8, a picture as it is (the normalisation is folded in); output (1, 1, rows, columns).

    Output cell (x, y) is centred on input pixel (8x + 14, 8y + 14); its window is 80 x 80; above 0 is a face.
    """
    graph, source = _Graph(), iter(tensors)
    x = graph.node("Transpose", [graph.node("Cast", ["input"], to=TensorProto.FLOAT)], perm=[0, 3, 1, 2])
    for number, (inward, outward, stride, pad) in enumerate(_DETECTOR_LAYERS):
        weights, bias = _folded_batch_norm(source, inward, outward)
        if number == 0:
            # No padding before this layer, so the means can go into the bias without touching the border.
            means = np.array(MEANS)[None, :, None, None]
            bias = bias - (weights * means / DIVISOR).sum(axis=(1, 2, 3))
            weights = weights / DIVISOR
        x = graph.relu(graph.conv(x, weights, bias, stride=stride, pad=pad))
    weights, bias = _split_filters(next(source), (1, 45, 9, 9))
    answer = graph.conv(x, weights, bias, pad=4)
    return graph.model(answer, [1, "h", "w", 3], [1, 1, "rows", "columns"], TensorProto.UINT8)


def _folded_batch_norm(source: Iterator[Weights], inward: int, outward: int) -> tuple[Weights, Weights]:
    weights, bias = _split_filters(next(source), (outward, inward, 5, 5))
    affine = next(source).astype(np.float64)
    next(source), next(source)  # the batch statistics of the last training step
    mean, variance = next(source).astype(np.float64), next(source).astype(np.float64)
    gain = affine[:outward] / np.sqrt(variance + _BATCH_NORM_EPSILON)
    return _scaled(weights, bias, gain, affine[outward:] - mean * gain)
