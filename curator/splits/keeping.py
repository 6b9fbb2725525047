"""What the splits of an earlier edition decide for tied groups of identities."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints
from curator.errors import BadInput


@dataclass(frozen=True)
class Kept:
    fixed: NDArray[np.int64]
    """The split of each tied group that the earlier edition decides, -1 elsewhere."""
    left_out: Mapping[str, str]
    """Identities that can neither keep their split nor leave it, so that they are in none: and why, in words."""


def decide(
    identities: Sequence[str], photos: Ints, group_of: Ints, earlier: Mapping[str, str], names: Sequence[str]
) -> Kept:
    """`photos` and `group_of` (k,) go along `identities`; `earlier`: identity to split; `names`: the splits there are.

    Where identities of one group were in several splits, the split that held most of its photos keeps it, and the
    identities of the others are left out: moved, they would have been trained on and judged with. Raises `BadInput`.
    """
    fixed = np.full(int(group_of.max()) + 1 if len(group_of) else 0, -1, dtype=np.int64)
    members: dict[int, list[int]] = defaultdict(list)
    for i, identity in enumerate(identities):
        if identity in earlier:
            if earlier[identity] not in names:
                raise BadInput(
                    f"The earlier edition has {identity} in '{earlier[identity]}', to which the recipe gives no share."
                )
            members[int(group_of[i])].append(i)
    left_out: dict[str, str] = {}
    for group, places in sorted(members.items()):
        weight: Counter[str] = Counter()
        for i in places:
            weight[earlier[identities[i]]] += int(photos[i])
        kept = min(weight, key=lambda name: (-weight[name], names.index(name)))
        fixed[group] = names.index(kept)
        stays = next(identities[i] for i in places if earlier[identities[i]] == kept)
        for i in places:
            was = earlier[identities[i]]
            if was != kept:
                why = f"{identities[i]} was in {was} and is now tied to {stays} of {kept}: it is left out"
                left_out[identities[i]] = why
    return Kept(fixed, left_out)
