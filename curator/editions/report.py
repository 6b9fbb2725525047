"""report.html: the edition in one self-contained, printable file."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from html import escape
from typing import Any

import numpy as np

from curator.domain import Floats

_BINS = 40
_STYLE = """
body { font: 16px/1.5 Georgia, serif; max-width: 46rem; margin: 2rem auto; padding: 0 1rem; color: #2b2a27;
       background: #fbf9f4; }
h1, h2 { font-weight: normal; } h2 { margin-top: 2.2rem; }
table { border-collapse: collapse; } td, th { padding: .2rem 1rem .2rem 0; text-align: left; }
td.n { text-align: right; font-variant-numeric: tabular-nums; } .caution { border-left: 3px solid #8a5a2b;
       padding-left: 1rem; } svg { width: 100%; height: auto; }
"""
_CAUTIONS = (
    "Faces, and embeddings made of them, are biometric data. The law of the place where they are kept and used "
    "decides what is allowed (in the European Union among others GDPR Art. 9 and 17); ask those who are licensed to "
    "advise on it.",
    "Pairs that share a person are not independent: error rates measured on these lists are less certain than their "
    "numbers of rows suggest.",
    "Similarities and trust are of the embedder named below; another embedder would order the pairs otherwise.",
)


def report_bytes(standing: Mapping[str, Any], similarities: Mapping[str, tuple[Floats, Floats]]) -> bytes:
    """The report. `similarities`: split to mated and non-mated similarities of its pair list."""
    parts = [f"<h1>Edition</h1><p>Seed {standing['seed']}, embedder {escape(str(standing['maker']))}.</p>"]
    parts.append("<h2>Lists</h2>" + _table(("list", "rows", "mated", "non-mated"), _list_rows(standing["lists"])))
    parts.append(f"<p>Expected wrong labels in the pair lists: {standing['expected_wrong_labels']}.</p>")
    for split, (mated, non_mated) in similarities.items():
        parts.append(f"<h2>Similarity, {escape(split)}</h2>{_histogram(mated, non_mated)}")
    parts.append("<h2>Splits</h2>" + _table(("split", "identities", "photos"), _split_rows(standing["splits"])))
    parts.append("<h2>Left out</h2>" + _table(("reason", "photos"), sorted(standing["left_out"].items())))
    parts.append("<h2>Reviews owed</h2>" + _table(("split", "pairs under the trust floor"), _owed(standing)))
    if standing["shortfalls"]:
        parts.append("<h2>Shortfalls</h2><ul>" + "".join(f"<li>{escape(s)}</li>" for s in standing["shortfalls"]))
        parts.append("</ul>")
    parts.append("<h2>Cautions</h2>" + "".join(f"<p class='caution'>{escape(text)}</p>" for text in _CAUTIONS))
    body = "\n".join(parts)
    return (
        f"<!DOCTYPE html><html lang='en'><head><meta charset='utf-8'><title>Edition</title>"
        f"<style>{_STYLE}</style></head><body>\n{body}\n</body></html>\n"
    ).encode()


def _list_rows(lists: Mapping[str, Mapping[str, int]]) -> list[tuple[Any, ...]]:
    return [(name, row["rows"], row["mated"], row["non_mated"]) for name, row in lists.items()]


def _split_rows(splits: Mapping[str, Mapping[str, int]]) -> list[tuple[Any, ...]]:
    return [(name, row["identities"], row["photos"]) for name, row in splits.items()]


def _owed(standing: Mapping[str, Any]) -> list[tuple[str, int]]:
    return list(standing["owed_reviews"].items())


def _table(header: Sequence[str], rows: Sequence[Sequence[Any]]) -> str:
    head = "".join(f"<th>{escape(name)}</th>" for name in header)
    body = "".join(
        "<tr>" + "".join(f"<td{'' if isinstance(v, str) else ' class=n'}>{escape(str(v))}</td>" for v in row) + "</tr>"
        for row in rows
    )
    return f"<table><tr>{head}</tr>{body}</table>" if rows else "<p>None.</p>"


def _histogram(mated: Floats, non_mated: Floats) -> str:
    """Both distributions as outlines; told apart by line style and word as well as by colour."""
    everything = np.concatenate([mated, non_mated])
    if len(everything) == 0:
        return "<p>No pairs.</p>"
    low, high = float(everything.min()), float(everything.max())
    edges = np.linspace(low, high if high > low else low + 1, _BINS + 1)
    counts = [np.histogram(values, edges)[0] for values in (mated, non_mated)]
    tallest = max(1, *(int(part.max()) for part in counts))
    drawn = []
    for part, colour, dash, word in zip(
        counts, ("#1f5f8b", "#a0522d"), ("", " stroke-dasharray='6 4'"), ("mated", "non-mated"), strict=True
    ):
        points = " ".join(f"{20 + 14 * k},{150 - 130 * int(n) / tallest:.1f}" for k, n in enumerate(part))
        drawn.append(f"<polyline points='{points}' fill='none' stroke='{colour}' stroke-width='2'{dash}/>")
        peak = int(np.argmax(part))
        drawn.append(f"<text x='{24 + 14 * peak}' y='16' fill='{colour}' font-size='12'>{word}</text>")
    axis = f"<text x='20' y='168' font-size='12'>{low:.2f}</text><text x='550' y='168' font-size='12'>{high:.2f}</text>"
    return f"<svg viewBox='0 0 600 175' role='img' aria-label='similarity'>{''.join(drawn)}{axis}</svg>"
