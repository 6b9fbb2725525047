"""The answer sheet of a drawn set: the faults planted in it, and who is truly shown on each photo.

As JSON, paths relative to the photo root:
{"seed": n, "people": n, "libjpeg": text, "pillow": text,
 "doubts": [{"kind", "photos": [...], "identities": [...], "detail"}],
 "echoes": [{"change", "scope", "photos": [original, copy]}],
 "true_person": {photo: person id}}

`kind`, `change` and `scope` are the words of `curator.domain`. A photo that shows nobody's face, or cannot be
opened, has no true person; one that shows two people has the one it is filed under.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from curator.domain import Change, DoubtKind, Scope
from curator.errors import BadInput


@dataclass(frozen=True)
class PlantedDoubt:
    """A fault planted for the doubts to find."""

    kind: DoubtKind
    photos: tuple[str, ...]
    identities: tuple[str, ...]
    detail: str


@dataclass(frozen=True)
class PlantedEcho:
    """A photo and the echo made of it."""

    change: Change
    scope: Scope
    original: str
    copy: str


@dataclass(frozen=True)
class AnswerSheet:
    """All answers. `libjpeg` and `pillow` tell which versions wrote the files, for comparing bytes."""

    seed: int
    people: int
    libjpeg: str
    pillow: str
    doubts: tuple[PlantedDoubt, ...]
    echoes: tuple[PlantedEcho, ...]
    true_person: Mapping[str, str]


def sheet_text(sheet: AnswerSheet) -> str:
    """The sheet as JSON text; the same sheet gives the same text."""
    document = {
        "seed": sheet.seed,
        "people": sheet.people,
        "libjpeg": sheet.libjpeg,
        "pillow": sheet.pillow,
        "doubts": [
            {"kind": d.kind, "photos": list(d.photos), "identities": list(d.identities), "detail": d.detail}
            for d in sheet.doubts
        ],
        "echoes": [{"change": e.change, "scope": e.scope, "photos": [e.original, e.copy]} for e in sheet.echoes],
        "true_person": dict(sorted(sheet.true_person.items())),
    }
    return json.dumps(document, indent=1, ensure_ascii=False) + "\n"


def parse_sheet(text: str) -> AnswerSheet:
    """The sheet of a JSON text. Raises ValueError, KeyError or TypeError where it is not one."""
    document: dict[str, Any] = json.loads(text)
    doubts = tuple(
        PlantedDoubt(DoubtKind(d["kind"]), tuple(d["photos"]), tuple(d["identities"]), d["detail"])
        for d in document["doubts"]
    )
    echoes = []
    for entry in document["echoes"]:
        original, copy = entry["photos"]
        echoes.append(PlantedEcho(Change(entry["change"]), Scope(entry["scope"]), original, copy))
    return AnswerSheet(
        seed=int(document["seed"]),
        people=int(document["people"]),
        libjpeg=str(document["libjpeg"]),
        pillow=str(document["pillow"]),
        doubts=doubts,
        echoes=tuple(echoes),
        true_person={str(k): str(v) for k, v in document["true_person"].items()},
    )


def read_answer_sheet(path: Path) -> AnswerSheet:
    """Read a sheet from disk. Raises BadInput where the file is missing or is no answer sheet."""
    try:
        return parse_sheet(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise BadInput(f"cannot read the answer sheet {path}: {error.strerror}") from error
    except (ValueError, KeyError, TypeError) as error:
        raise BadInput(f"{path} is not an answer sheet of a drawn set") from error
