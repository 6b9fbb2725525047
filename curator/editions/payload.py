"""The files of an edition as bytes: the same lists, recipe and verdicts give the same bytes."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable, Mapping
from typing import Any

import numpy as np
import pyarrow

from curator.domain import Verdict
from curator.editions import lists as _lists
from curator.editions.croissant import UNDATED, croissant_bytes
from curator.editions.material import Lists, Material
from curator.editions.plan import similarities_of
from curator.editions.report import report_bytes
from curator.recipe import Recipe
from curator.review.verdict_csv import write_verdicts


def lfw_files(made: Lists, recipe: Recipe) -> dict[str, bytes]:
    """The pair lists as the LFW text layout, where the recipe asks for it; a shortfall for each that it cannot hold."""
    files = {}
    for split, rows in made.pairs.items() if "lfw-text" in recipe.formats else ():
        name = f"pairs/{split}"
        try:
            files[f"{name}.lfw.txt"] = _lists.lfw_bytes(_lists.table(_lists.PAIRS, rows))
        except ValueError as error:
            made.shortfalls.append(f"{name}: not written as lfw-text, for {error}")
    return files


def payload(
    material: Material,
    recipe: Recipe,
    recipe_text: str,
    made: Lists,
    standing: Mapping[str, Any],
    verdicts: Iterable[Verdict],
    *,
    went: Callable[[int], None],
) -> dict[str, bytes]:
    """Path below data/ to bytes, but for what `lfw_files` makes. `went` hears of each list made; it may raise."""
    files: dict[str, bytes] = {}
    described: dict[str, pyarrow.Table] = {}
    sources = [(f"pairs/{split}", _lists.PAIRS, rows) for split, rows in made.pairs.items()]
    sources += [(f"triplets/{split}", _lists.TRIPLETS, rows) for split, rows in made.triplets.items()]
    for name, schema, rows in sources:
        table = _lists.table(schema, rows)
        if "parquet" in recipe.formats:
            files[f"{name}.parquet"], described[f"{name}.parquet"] = _lists.parquet_bytes(table), table
        if "csv" in recipe.formats:
            files[f"{name}.csv"], described[f"{name}.csv"] = _lists.csv_bytes(table), table
        went(1)
    photos = _photo_table(material)
    files["photos.parquet"], described["photos.parquet"] = _lists.parquet_bytes(photos), photos
    went(1)
    files["recipe.toml"] = recipe_text.encode()
    ordered = sorted(verdicts, key=lambda v: (v.photo_a, v.photo_b, v.annotator, v.at, v.answer.value))
    files["verdicts.csv"] = write_verdicts(ordered).encode()
    dated = max((verdict.at[:10] for verdict in ordered), default=UNDATED)
    files["croissant.json"] = croissant_bytes(files, described, dated)
    files["standing.json"] = (json.dumps(standing, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()
    files["report.html"] = report_bytes(standing, {split: similarities_of(rows) for split, rows in made.pairs.items()})
    return files


def _photo_table(material: Material) -> pyarrow.Table:
    roll, readings = material.roll, material.readings
    rows = []
    for i in np.flatnonzero(material.fine).tolist():
        identity = roll.identities[int(roll.identity_of[i])]
        left, top, width, height = (None if np.isnan(v) else round(float(v), 2) for v in readings.frame[i])
        row: dict[str, Any] = {
            "photo": roll.photos[i],
            "sha256": roll.digests[i],
            "identity": identity,
            "split": material.split_of.get(identity, ""),
            "width": int(readings.width[i]),
            "height": int(readings.height[i]),
            "frame_left": left,
            "frame_top": top,
            "frame_width": width,
            "frame_height": height,
        }
        row |= {f"attribute:{name}": values[i] for name, values in roll.attributes.items()}
        rows.append(row)
    return _lists.table(_lists.photo_schema(sorted(roll.attributes)), rows)
