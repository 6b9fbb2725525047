"""What lists are made of, and what is told of them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from curator.domain import Bools, EchoGroup, Ints, Readings, Roll
from curator.pairs.trust import TrustModel
from curator.verdicts import Settled


@dataclass(frozen=True)
class Material:
    """What lists are made of."""

    roll: Roll
    readings: Readings
    trust: TrustModel
    split_of: Mapping[str, str]
    group_of: Ints
    """Along the identities: the tied group."""
    fine: Bools
    """Along the roll: whether the photo may be used."""
    echoes: Iterable[EchoGroup]
    settled: Settled


@dataclass
class Lists:
    """Rows of every list, and what is told of them."""

    pairs: dict[str, list[dict[str, Any]]] = field(default_factory=dict)
    triplets: dict[str, list[dict[str, Any]]] = field(default_factory=dict)
    owed: dict[str, int] = field(default_factory=dict)
    """Split to candidate pairs left out because their trust is under the floor and nobody settled them."""
    shortfalls: list[str] = field(default_factory=list)
