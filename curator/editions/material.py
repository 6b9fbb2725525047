"""What lists are made of, and what is told of them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from curator.domain import Bools, EchoGroup, Ints, Readings, Roll
from curator.editions.sampling import Pool
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
    left_out: Mapping[int, str] = field(default_factory=dict)
    """Place along the roll to the reason, for the photos that may not be used."""


@dataclass(frozen=True)
class Owed:
    """Candidates of one kind left out because their trust is under the floor, or unclear, and nobody settled them."""

    pairs: Pool
    mated: bool
    unclear: Bools
    """Along the pairs: whether people could not tell, or what they said raises the question."""


@dataclass
class Lists:
    """Rows of every list, and what is told of them."""

    pairs: dict[str, list[dict[str, Any]]] = field(default_factory=dict)
    triplets: dict[str, list[dict[str, Any]]] = field(default_factory=dict)
    owed: dict[str, list[Owed]] = field(default_factory=dict)
    """Split to the candidate pairs that it owes a review."""
    shortfalls: list[str] = field(default_factory=list)
