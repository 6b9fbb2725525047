"""Sessions: crops in, embeddings out, whatever the model's own habits."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import onnxruntime
from numpy.typing import NDArray

from curator.domain import Pixels
from curator.embedders import building
from curator.embedders.cards import BUILTIN_FACE, Card
from curator.errors import BadInput, EnvironmentFailed

_BATCH = 16
"""Crops a run: past 8 a batch gains nothing in speed, and memory stays small."""


def open_session(path: Path, *, threads: int) -> Any:
    """An onnxruntime session that neither spins while idle nor writes warnings. Raises what onnxruntime raises."""
    options = onnxruntime.SessionOptions()
    options.intra_op_num_threads = threads
    options.inter_op_num_threads = 1
    options.log_severity_level = 3
    options.add_session_config_entry("session.intra_op.allow_spinning", "0")
    return onnxruntime.InferenceSession(str(path), options, providers=["CPUExecutionProvider"])


def open_built(path_of: Any, *, threads: int) -> Any:
    """A session over a model of our own building; a damaged one in the cache is built once more."""
    path = path_of()
    try:
        return open_session(path, threads=threads)
    except Exception:  # onnxruntime's exceptions share no base of their own
        building.forget(path)
    try:
        return open_session(path_of(), threads=threads)
    except Exception as error:
        raise EnvironmentFailed(f"The model {path} could not be opened: {_first_line(error)}.") from error


class Embedder:
    """One embedder, ready to run. Embeddings are bit for bit the same in any company, at any place in it.

    The default model convolves every picture of a batch on its own: batches of 1 to 64 crops, with one thread or
    two, gave identical bits. A model of the user's need not: one quantized dynamically takes its scales from the
    whole batch. Such a model therefore gets one picture at a time, which costs a fifth of the speed at most
    (6.1 against 5.1 ms a crop with a network like the default one).
    """

    def __init__(self, card: Card, *, threads: int = 1) -> None:
        """Raises `BadInput` where model and card do not fit, `EnvironmentFailed` where a default model is missing."""
        self.card = card
        if card.file == BUILTIN_FACE:
            self._session = open_built(building.embedder_path, threads=threads)
        else:
            try:
                self._session = open_session(Path(card.file), threads=threads)
            except Exception as error:
                raise BadInput(
                    f"The model {card.file} of the embedder card {card.name} could not be opened: {_first_line(error)}."
                ) from error
        self._input, self._output = self._check_fit()

    def embed(self, crops: Pixels) -> NDArray[np.float32]:
        """(n, size, size, 3) uint8 RGB crops to (n, dimensions) float32, unit length where the measure is cosine."""
        if len(crops) == 0:
            return np.zeros((0, self.card.dimensions), dtype=np.float32)
        parts = [self._run(crops[at : at + _BATCH]) for at in range(0, len(crops), _BATCH)]
        embeddings = np.concatenate(parts)
        if self.card.mirror_average:
            mirrored = [self._run(crops[at : at + _BATCH, :, ::-1]) for at in range(0, len(crops), _BATCH)]
            embeddings = (embeddings + np.concatenate(mirrored)) / np.float32(2)
        if self.card.measure == "cosine":
            lengths = np.linalg.norm(embeddings, axis=1, keepdims=True)
            embeddings = embeddings / np.maximum(lengths, np.float32(1e-12))
        return embeddings

    def _run(self, crops: Pixels) -> NDArray[np.float32]:
        card = self.card
        pictures = crops[..., ::-1] if card.channel_order == "bgr" else crops
        mean, scale = np.array(card.mean, dtype=np.float32), np.array(card.scale, dtype=np.float32)
        if card.layout == "nchw":
            # While the pictures are bytes: to move four times as much, in stretches of three, costs many times as much.
            pictures = pictures.transpose(0, 3, 1, 2)
            mean, scale = mean.reshape(-1, 1, 1), scale.reshape(-1, 1, 1)
        values = np.ascontiguousarray(pictures).astype(np.float32)
        values -= mean
        values *= scale
        if self._one_at_a_time:
            rows = [self._session.run([self._output], {self._input: values[i : i + 1]})[0] for i in range(len(values))]
            result = np.concatenate(rows)
        else:
            result = self._session.run([self._output], {self._input: values})[0]
        return np.asarray(result, dtype=np.float32).reshape(len(crops), -1)

    def _check_fit(self) -> tuple[str, str]:
        card = self.card
        inputs, outputs = self._session.get_inputs(), self._session.get_outputs()
        if len(inputs) != 1:
            raise BadInput(f"The model of the embedder card {card.name} has {len(inputs)} inputs; it must have one.")
        names = [output.name for output in outputs]
        if card.output and card.output not in names:
            raise BadInput(f"The model of the embedder card {card.name} has no output '{card.output}', only {names}.")
        side = [card.size, card.size]
        wanted = [None, 3, *side] if card.layout == "nchw" else [None, *side, 3]
        shape = inputs[0].shape
        fits = len(shape) == 4 and all(
            want is None or not isinstance(have, int) or have == want for have, want in zip(shape, wanted, strict=True)
        )
        if not fits or inputs[0].type != "tensor(float)":
            raise BadInput(
                f"The model of the embedder card {card.name} wants {inputs[0].type} of shape {shape}, "
                f"which a {card.layout} input of side {card.size} does not fit."
            )
        self._one_at_a_time = card.file != BUILTIN_FACE
        name = card.output or names[0]
        self._input, self._output = inputs[0].name, name
        try:
            got = self._run(np.zeros((1, card.size, card.size, 3), dtype=np.uint8))
        except Exception as error:
            raise BadInput(
                f"The model of the embedder card {card.name} does not run on a picture of side {card.size}: "
                f"{_first_line(error)}."
            ) from error
        if got.shape[1] != card.dimensions:
            raise BadInput(
                f"The model of the embedder card {card.name} gives {got.shape[1]} numbers, not {card.dimensions}."
            )
        return inputs[0].name, name


def _first_line(error: Exception) -> str:
    return (str(error).strip().splitlines() or [type(error).__name__])[0].rstrip(".")
