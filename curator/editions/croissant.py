"""The edition described in Croissant 1.0, so that dataset loaders read its lists."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from typing import Any

import pyarrow

_CONTEXT = {
    "@language": "en",
    "@vocab": "https://schema.org/",
    "citeAs": "cr:citeAs",
    "column": "cr:column",
    "conformsTo": "dct:conformsTo",
    "cr": "http://mlcommons.org/croissant/",
    "data": {"@id": "cr:data", "@type": "@json"},
    "dataType": {"@id": "cr:dataType", "@type": "@vocab"},
    "dct": "http://purl.org/dc/terms/",
    "extract": "cr:extract",
    "field": "cr:field",
    "fileObject": "cr:fileObject",
    "fileProperty": "cr:fileProperty",
    "format": "cr:format",
    "includes": "cr:includes",
    "isLiveDataset": "cr:isLiveDataset",
    "jsonPath": "cr:jsonPath",
    "key": "cr:key",
    "md5": "cr:md5",
    "parentField": "cr:parentField",
    "path": "cr:path",
    "recordSet": "cr:recordSet",
    "references": "cr:references",
    "regex": "cr:regex",
    "repeated": "cr:repeated",
    "replace": "cr:replace",
    "sc": "https://schema.org/",
    "separator": "cr:separator",
    "source": "cr:source",
    "subField": "cr:subField",
    "transform": "cr:transform",
}
_FORMATS = {".parquet": "application/x-parquet", ".csv": "text/csv"}
_KINDS = {"string": "sc:Text", "double": "sc:Float", "bool": "sc:Boolean"}
UNDATED = "1970-01-01"
"""Payloads bear no date, so that they repeat byte for byte; the true one stands in bag-info.txt."""


def croissant_bytes(files: Mapping[str, bytes], tables: Mapping[str, pyarrow.Table], dated: str) -> bytes:
    """`files`: path below data/ to bytes; `tables`: path of each table file to its table; `dated`: ISO date."""
    distribution = [
        {
            "@type": "cr:FileObject",
            "@id": name,
            "name": name,
            "contentUrl": name,
            "encodingFormat": _FORMATS[name[name.rindex(".") :]],
            "sha256": hashlib.sha256(files[name]).hexdigest(),
        }
        for name in sorted(tables)
    ]
    # One record set a list: of a list written in two formats the Parquet file speaks for both.
    chosen = {name.rpartition(".")[0]: name for name in sorted(tables)}
    document: dict[str, Any] = {
        "@context": _CONTEXT,
        "@type": "sc:Dataset",
        "conformsTo": "http://mlcommons.org/croissant/1.0",
        "name": "pairwright-edition",
        "description": "Pair and triplet lists for training and judging face verification; without the photos.",
        "license": "https://schema.org/license",
        "url": "urn:pairwright:edition",
        "creator": {"@type": "sc:Organization", "name": "the holder of the photos"},
        "datePublished": dated,
        "version": "1.0.0",
        "distribution": distribution,
        "recordSet": [_record_set(stem, name, tables[name]) for stem, name in sorted(chosen.items())],
    }
    return (json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()


def _record_set(stem: str, file: str, table: pyarrow.Table) -> dict[str, Any]:
    name = stem.replace("/", "-")
    return {
        "@type": "cr:RecordSet",
        "@id": name,
        "name": name,
        "field": [
            {
                "@type": "cr:Field",
                "@id": f"{name}/{column.name}",
                "name": column.name,
                "dataType": _KINDS.get(str(column.type), "sc:Integer"),
                "source": {"fileObject": {"@id": file}, "extract": {"column": column.name}},
            }
            for column in table.schema
        ],
    }
