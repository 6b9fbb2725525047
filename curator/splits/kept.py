"""Which split an earlier edition gave each identity."""

from __future__ import annotations

from pathlib import Path

import pyarrow
import pyarrow.parquet

from curator.errors import BadInput


def kept_splits(edition: Path) -> dict[str, str]:
    """Identity to split, from an edition's data/photos.parquet. Raises `BadInput` where there is none."""
    path = edition / "data" / "photos.parquet"
    try:
        table = pyarrow.parquet.read_table(path, columns=["identity", "split"])
        pairs = list(zip(table["identity"].to_pylist(), table["split"].to_pylist(), strict=True))
    except (OSError, ValueError, KeyError, pyarrow.ArrowException) as error:
        raise BadInput(f"{edition} is no edition whose splits could be kept: {path} could not be read.") from error
    return {str(identity): str(split) for identity, split in pairs if split}
