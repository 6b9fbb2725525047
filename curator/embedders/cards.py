"""Embedder cards: TOML that says how a frozen ONNX model wants its pictures and how its outputs are compared."""

from __future__ import annotations

import hashlib
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from curator.embedders import building
from curator.errors import BadInput
from curator.resources import resource

DEFAULT_CARD = "default-face"
BUILTIN_FACE = "builtin:face"
_BOX = re.compile(r"box:(\d*\.?\d+),(\d*\.?\d+),(\d*\.?\d+),(\d*\.?\d+)")


@dataclass(frozen=True)
class Card:
    """How to use one embedder. A pixel becomes (value - mean) * scale, channel by channel."""

    name: str
    file: str
    """`builtin:face`, or the path of an ONNX file."""
    size: int
    """Side of the square input in pixels."""
    channel_order: str
    """`rgb` or `bgr`; mean and scale are in this order."""
    layout: str
    """`nchw` or `nhwc`."""
    mean: tuple[float, float, float]
    scale: tuple[float, float, float]
    dimensions: int
    measure: str
    """`cosine` or `euclidean`."""
    framing: str
    """`face`, `whole`, or `box:left,top,width,height` in fractions of the photo."""
    mirror_average: bool = False
    """Average each embedding with that of the mirrored crop: a little more accurate, twice the work."""
    output: str = ""
    """Name of the model's output; empty: its first."""
    digest: str = ""
    """SHA-256 of the model file."""

    def fingerprint(self) -> str:
        """Short and stable: changes whenever the embeddings would."""
        told = repr((self.size, self.channel_order, self.layout, self.mean, self.scale, self.mirror_average))
        made = hashlib.sha256(f"{self.digest} {self.measure} {self.output} {told}".encode()).hexdigest()
        return f"{self.name}@{made[:12]}"


_KINDS: dict[str, tuple[type, ...]] = {
    "file": (str,),
    "size": (int,),
    "channel_order": (str,),
    "layout": (str,),
    "mean": (list, int, float),
    "scale": (list, int, float),
    "dimensions": (int,),
    "measure": (str,),
    "framing": (str,),
    "mirror_average": (bool,),
    "output": (str,),
}
_OPTIONAL = {"mirror_average", "output"}
_CHOICES = {
    "channel_order": ("rgb", "bgr"),
    "layout": ("nchw", "nhwc"),
    "measure": ("cosine", "euclidean"),
}


def load_card(name_or_path: str | None = None) -> Card:
    """A card by its name in `resources/embedders/` or by the path of a TOML file; None is the default face card.

    Raises `BadInput` with the offending key or path.
    """
    chosen = name_or_path or DEFAULT_CARD
    path = Path(chosen)
    if not chosen.endswith(".toml"):
        path = resource("embedders", f"{chosen}.toml")
        if not path.is_file():
            known = ", ".join(sorted(file.stem for file in resource("embedders").glob("*.toml")))
            raise BadInput(
                f"There is no embedder card '{chosen}'; known are {known}, or give the path of a .toml file."
            )
    try:
        told = tomllib.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise BadInput(f"The embedder card {path} could not be read: {error.strerror}.") from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise BadInput(f"The embedder card {path} is not valid TOML: {error}.") from error
    return _checked(path, told)


def check_framing(framing: str) -> str:
    """The framing itself, if it is one. Raises `BadInput`."""
    box = _BOX.fullmatch(framing)
    if framing not in ("face", "whole") and box is None:
        raise BadInput(f"'{framing}' is no framing: use face, whole, or box:left,top,width,height in fractions.")
    if box is not None:
        left, top, width, height = (float(part) for part in box.groups())
        if width <= 0 or height <= 0 or left + width > 1 or top + height > 1:
            raise BadInput(f"The framing '{framing}' does not lie inside the photo.")
    return framing


def _checked(path: Path, told: Mapping[str, Any]) -> Card:
    unknown = sorted(set(told) - set(_KINDS))
    if unknown:
        raise BadInput(f"The embedder card {path} has the unknown key '{unknown[0]}'.")
    for key, kinds in _KINDS.items():
        if key not in told and key not in _OPTIONAL:
            raise BadInput(f"The embedder card {path} lacks '{key}'.")
        value = told.get(key)
        wrong_bool = isinstance(value, bool) and bool not in kinds
        if key in told and (wrong_bool or not isinstance(value, kinds)):
            raise BadInput(f"'{key}' in the embedder card {path} is of the wrong type.")
    for key, choices in _CHOICES.items():
        if told[key] not in choices:
            raise BadInput(f"'{key}' in the embedder card {path} must be {' or '.join(choices)}, not '{told[key]}'.")
    for key in ("size", "dimensions"):
        if told[key] < 1:
            raise BadInput(f"'{key}' in the embedder card {path} must be at least 1.")
    try:
        check_framing(told["framing"])
    except BadInput as error:
        raise BadInput(f"In the embedder card {path}: {error}") from error
    file, digest = _model_file(path, told["file"])
    return Card(
        name=path.stem,
        file=file,
        size=told["size"],
        channel_order=told["channel_order"],
        layout=told["layout"],
        mean=_triple(path, "mean", told["mean"]),
        scale=_triple(path, "scale", told["scale"]),
        dimensions=told["dimensions"],
        measure=told["measure"],
        framing=told["framing"],
        mirror_average=told.get("mirror_average", False),
        output=told.get("output", ""),
        digest=digest,
    )


def _triple(path: Path, key: str, value: Any) -> tuple[float, float, float]:
    values = value if isinstance(value, list) else [value] * 3
    if len(values) != 3 or not all(isinstance(v, int | float) and not isinstance(v, bool) for v in values):
        raise BadInput(f"'{key}' in the embedder card {path} must be one number or three.")
    return float(values[0]), float(values[1]), float(values[2])


def _model_file(path: Path, file: str) -> tuple[str, str]:
    if file == BUILTIN_FACE:
        return file, building.EMBEDDER_DIGEST
    model = path.parent / file
    try:
        with model.open("rb") as opened:
            return str(model), hashlib.file_digest(opened, "sha256").hexdigest()
    except OSError as error:
        raise BadInput(
            f"The model {model} named by the embedder card {path} could not be read: {error.strerror}."
        ) from error
