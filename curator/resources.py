"""The one door to the files of `resources/`: inside the wheel they lie in the package, in a checkout beside it."""

from __future__ import annotations

from pathlib import Path

_IN_WHEEL = Path(__file__).parent / "_resources"
_IN_CHECKOUT = Path(__file__).parent.parent / "resources"


def resource(*parts: str) -> Path:
    """The path of a file or folder of `resources/`, e.g. `resource("embedders", "default.toml")`."""
    root = _IN_WHEEL if _IN_WHEEL.is_dir() else _IN_CHECKOUT
    return root.joinpath(*parts)
