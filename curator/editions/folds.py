"""Folds of the test part: tied groups of identities dealt out so that folds hold as many photos as can be."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints


def deal(groups: Ints, photos: Ints, count: int) -> NDArray[np.int64]:
    """The fold (k,) of each identity, given its tied group (k,) and its number of photos (k,).

    Largest groups first, each to the fold with the fewest photos; identities of one group share a fold.
    """
    names, place = np.unique(groups, return_inverse=True)
    weight = np.bincount(place, weights=photos, minlength=len(names))
    load = np.zeros(count)
    fold_of_group = np.zeros(len(names), dtype=np.int64)
    for group in np.lexsort((np.arange(len(names)), -weight)):
        fold_of_group[group] = int(np.argmin(load))
        load[fold_of_group[group]] += weight[group]
    return fold_of_group[place]
