"""The default models: found in their package, checked, written out as ONNX and arrays into the user's cache.

Written on first use, beside the final name and renamed when whole, so that several processes may do it at once.
"""

from __future__ import annotations

import hashlib
import importlib.metadata
import io
import os
import tempfile
from collections.abc import Callable
from dataclasses import fields
from pathlib import Path

import numpy as np
import platformdirs

from curator.embedders import landmarks
from curator.embedders.containers import tensors
from curator.errors import EnvironmentFailed

_PACKAGE = "face-recognition-models"
_EMBEDDER_FILE = "dlib_face_recognition_resnet_model_v1.dat"
_DETECTOR_FILE = "mmod_human_face_detector.dat"
_LANDMARK_FILE = "shape_predictor_5_face_landmarks.dat"
_DIGESTS = {
    _EMBEDDER_FILE: "55533b28a95800a551ba546ba62fe69625c7e95a7061c338adffead08719da30",
    _DETECTOR_FILE: "4cb19393e2fbaf2b1609a9319ad5386618c886a6234ec1b971f3e87c85d87fe6",
    _LANDMARK_FILE: "c4b1e9804792707d3a405c2c16a80a20269e6675021f64a41d30fffafbc41888",
}
_FORMAT = "3"
"""Raise it when what is written changes: older files are then left alone and new ones made."""

EMBEDDER_DIGEST = _DIGESTS[_EMBEDDER_FILE]


def cache_folder() -> Path:
    """The user's cache for built models; the environment's PAIRWRIGHT_CACHE names another place."""
    chosen = os.environ.get("PAIRWRIGHT_CACHE")
    return Path(chosen) if chosen else platformdirs.user_cache_path("pairwright")


def embedder_path() -> Path:
    """The default embedder as an ONNX file, built where it is missing. Raises `EnvironmentFailed`."""
    return _built("embedder", ".onnx", _EMBEDDER_FILE, _embedder)


def detector_path() -> Path:
    """The face detector as an ONNX file, built where it is missing. Raises `EnvironmentFailed`."""
    return _built("detector", ".onnx", _DETECTOR_FILE, _detector)


def forests() -> landmarks.Forests:
    """The landmark regressor. Raises `EnvironmentFailed`."""
    path = _built("landmarks", ".npz", _LANDMARK_FILE, lambda data: _packed(landmarks.parse(data)))
    try:
        with path.open("rb") as file, np.load(file) as arrays:
            return landmarks.Forests(**{field.name: arrays[field.name] for field in fields(landmarks.Forests)})
    except OSError:
        # Another process may just be replacing it. Parsing the source takes seconds, but does not end the run.
        return landmarks.parse(_source(_LANDMARK_FILE))


def prepare() -> None:
    """Build all three now, so that worker processes find them ready."""
    embedder_path()
    detector_path()
    forests()


def forget(path: Path) -> None:
    """Drop a damaged file of the cache; the next use builds it again. Raises `EnvironmentFailed`."""
    try:
        path.unlink(missing_ok=True)
    except OSError as error:
        raise EnvironmentFailed(f"The damaged model {path} could not be removed: {error.strerror}.") from error


def _built(name: str, ending: str, source: str, build: Callable[[bytes], bytes]) -> Path:
    """The file of the cache that was built from `source`; its name ends with the digest of what was written.

    Weights damaged on the disk would still load, and silently give other embeddings: so the digest is checked.
    """
    folder, stem = cache_folder(), f"{name}-{_FORMAT}-{_DIGESTS[source][:12]}"
    for path in sorted(folder.glob(f"{stem}-*{ending}")):
        if _is_whole(path):
            return path
        forget(path)
    data = build(_source(source))
    path = folder / f"{stem}-{_short_digest(data)}{ending}"
    _write(path, data)
    return path


def _is_whole(path: Path) -> bool:
    try:
        return path.stem.endswith(f"-{_short_digest(path.read_bytes())}")
    except OSError:
        return False


def _short_digest(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()[:12]


def _source(name: str) -> bytes:
    try:
        listed = importlib.metadata.distribution(_PACKAGE).files or []
        path = next(Path(str(file.locate())) for file in listed if file.name == name)
        data = path.read_bytes()
    except (importlib.metadata.PackageNotFoundError, StopIteration, OSError) as error:
        raise EnvironmentFailed(
            f"The default face models are not there ({name} of the package {_PACKAGE}); install the package again."
        ) from error
    if hashlib.sha256(data).hexdigest() != _DIGESTS[name]:
        raise EnvironmentFailed(f"{path} is not the file it should be (its SHA-256 differs); install {_PACKAGE} again.")
    return data


def _write(path: Path, data: bytes) -> None:
    try:
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        # mkstemp makes the file private and its name unlike that of any other process.
        handle, beside = tempfile.mkstemp(dir=path.parent, prefix=path.name)
        try:
            with os.fdopen(handle, "wb") as file:
                file.write(data)
                file.flush()
                os.fsync(file.fileno())
            Path(beside).replace(path)
        except OSError:
            # A full disk is no place to leave half a model on.
            Path(beside).unlink(missing_ok=True)
            raise
    except OSError as error:
        raise EnvironmentFailed(f"The models could not be written to {path.parent}: {error.strerror}.") from error


def _embedder(data: bytes) -> bytes:
    # Where the models are built already, as in every reading process, the library that writes them is not loaded.
    from curator.embedders import networks

    return bytes(networks.embedder(tensors(data)).SerializeToString())


def _detector(data: bytes) -> bytes:
    from curator.embedders import networks

    return bytes(networks.detector(tensors(data)).SerializeToString())


def _packed(forests: landmarks.Forests) -> bytes:
    buffer = io.BytesIO()
    np.savez(buffer, **{field.name: getattr(forests, field.name) for field in fields(forests)})
    return buffer.getvalue()
