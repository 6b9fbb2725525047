"""Group-disjointness held against scikit-learn's splitters, whose groups never straddle a split either.

Source: scikit-learn's GroupShuffleSplit (its test_size is a share of groups, not of rows) and the 17-row docstring
example of StratifiedGroupKFold.
"""

import numpy as np
from sklearn.model_selection import GroupShuffleSplit, StratifiedGroupKFold

from curator.editions.folds import deal
from curator.splits.assignment import Sizes, assign


def test_a_share_of_groups_is_not_a_share_of_photos() -> None:
    """900 photos of one person and 10 of each of ten: scikit-learn's fifth of the groups holds 30 of 1,000 photos;
    ours weighs people and photos together, and keeps both shares as near as one giant allows."""
    groups = np.concatenate([np.zeros(900, dtype=int), np.repeat(np.arange(1, 11), 10)])
    ((_, test),) = GroupShuffleSplit(n_splits=1, test_size=0.2, random_state=0).split(groups, groups=groups)
    assert (len(set(groups[test])), len(test)) == (3, 30)
    photos = np.bincount(groups).astype(float)
    sizes = Sizes(np.stack([np.ones(11), photos], axis=1), np.ones(2))
    shares = np.array([0.8, 0.2])
    split_of, _ = assign(sizes, shares, fixed=np.full(11, -1), rng=np.random.default_rng(0))
    people = np.bincount(split_of, minlength=2) / 11
    held = np.bincount(split_of, weights=photos, minlength=2) / 1000
    theirs = np.array([abs(3 / 11 - 0.2), abs(30 / 1000 - 0.2)])
    assert (np.array([people[1], held[1]]) - 0.2 <= 0.2).all()
    assert np.abs(np.array([people[1], held[1]]) - 0.2).sum() <= theirs.sum() + 0.2


def test_folds_share_no_group_as_theirs_do_not() -> None:
    labels = np.array([0, 0, 1, 1, 1, 1, 1, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0])
    groups = np.array([1, 1, 2, 2, 3, 3, 3, 4, 5, 5, 5, 5, 6, 6, 7, 8, 8])
    theirs = [set(groups[test]) for _, test in StratifiedGroupKFold(3).split(labels, labels, groups)]
    assert theirs == [{3, 6, 7}, {1, 2, 8}, {4, 5}]
    names, photos = np.unique(groups, return_counts=True)
    fold_of = deal(names, photos, 3)
    ours = [set(names[fold_of == fold].tolist()) for fold in range(3)]
    assert set.union(*ours) == set(names.tolist())
    assert sum(len(part) for part in ours) == len(names)
    weight = [photos[fold_of == fold].sum() for fold in range(3)]
    assert max(weight) - min(weight) <= max(np.bincount(groups))
