"""Lists of an edition: folds stand alone, the cap never empties a list, triplets fill up."""

import itertools
from collections import Counter
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from curator.editions.assembling import assemble
from curator.editions.audit import audit_path
from curator.editions.lists import PAIRS, lfw_bytes, table
from curator.editions.material import Lists, Material
from curator.ledger import Ledger
from curator.pairs.step import load_trust
from curator.progress import Silent
from curator.recipe import parse_recipe
from curator.verdicts import Settled

_TEST = "[split]\nshares = { train = 0.0, test = 1.0 }\n[pairs]\n"


@pytest.fixture
def material(made_ledger: Callable[..., Ledger]) -> Material:
    with made_ledger(people=20) as ledger:
        roll, readings, trust = load_trust(ledger, progress=Silent())
    alone = np.arange(len(roll.identities))
    fine = np.ones(len(roll), dtype=bool)
    return Material(roll, readings, trust, dict.fromkeys(roll.identities, "test"), alone, fine, (), Settled({}, {}))


def _made(material: Material, text: str) -> Lists:
    return assemble(material, parse_recipe(_TEST + text), lambda _: None)


def test_a_cap_is_shared_between_mated_and_non_mated(material: Material) -> None:
    """20 people at 9 pairs each: 180 places, three for a mated and a non-mated pair together, so 60 of each fit."""
    lists = _made(material, "test = 600\nper_identity = 9\ntrust_floor = 0.0")
    rows = lists.pairs["test"]
    assert Counter(row["label"] for row in rows)[1] >= 55
    assert len(rows) % 2 == 0
    use = Counter(name for row in rows for name in {row["identity_a"], row["identity_b"]})
    assert max(use.values()) <= 9
    assert "pairs/test: 120 of 600 rows fit under the cap of an identity" in lists.shortfalls


def test_each_fold_is_balanced_and_stands_alone(material: Material) -> None:
    rows = _made(material, "test = 80\n[folds]\ncount = 4").pairs["test"]
    assert Counter((row["fold"], row["label"]) for row in rows) == {(f, k): 10 for f in range(4) for k in (0, 1)}
    people = [{row[end] for row in rows if row["fold"] == f for end in ("identity_a", "identity_b")} for f in range(4)]
    assert all(not one & other for one, other in itertools.combinations(people, 2))


def test_folds_of_rows_that_do_not_divide(material: Material) -> None:
    rows = _made(material, "test = 22\n[folds]\ncount = 4").pairs["test"]
    assert sorted(Counter(row["fold"] for row in rows).values()) == [4, 6, 6, 6]


@pytest.mark.parametrize("rule", ["random", "semi-hard", "hard"])
def test_triplets_fit_their_rule_and_anchors_take_turns(material: Material, rule: str) -> None:
    # These people lie far apart: only a wide margin leaves semi-hard negatives, and there are no hard ones.
    margin = 2.5 if rule == "semi-hard" else 0.2
    lists = _made(material, f"[triplets]\ntest = 100\nrule = '{rule}'\nmargin = {margin}")
    rows = lists.triplets["test"]
    for row in rows:
        near, far = 2 - 2 * row["similarity_ap"], 2 - 2 * row["similarity_an"]
        assert row["identity"] != row["negative_identity"]
        assert rule == "random" or (far <= near if rule == "hard" else near < far < near + margin)
    assert len({(row["anchor"], row["positive"], row["negative"]) for row in rows}) == len(rows)
    if rule == "hard":
        assert rows == []
        assert lists.shortfalls == ["triplets/test: 0 of 100 found that fit the rule and the floor"]
    else:
        assert lists.shortfalls == []
        assert set(Counter(row["identity"] for row in rows).values()) == {5}


def test_scarce_triplets_are_looked_for_until_found(material: Material) -> None:
    """Hardly any anchor has a semi-hard negative: one pass over as many anchors as rows would not do."""
    x = material.readings.embeddings.astype(np.float64)
    owner = material.roll.identity_of
    squared = ((x[:, None] - x[None]) ** 2).sum(axis=2)
    margin = 0.75
    fitting = {
        (a, p, n)
        for a, p in itertools.permutations(range(len(x)), 2)
        if owner[a] == owner[p]
        for n in np.flatnonzero(
            (owner != owner[a]) & (squared[a] > squared[a, p]) & (squared[a] < squared[a, p] + margin)
        )
    }
    wanted = len({(a, p) for a, p, _ in fitting}) // 2
    assert 0 < wanted < 150
    lists = _made(material, f"trust_floor = 0.0\n[triplets]\ntest = {wanted}\nmargin = {margin}")
    assert len(lists.triplets["test"]) == wanted


def test_folds_of_one_size_go_out_as_lfw_text_and_come_back(tmp_path: Path) -> None:
    rows = []
    for fold, (one, two) in enumerate((("ann", "ben"), ("cat", "dan"))):
        for label, a, b in (
            (1, f"{one}/{one}_0001", f"{one}/{one}_0002"),
            (0, f"{one}/{one}_0001", f"{two}/{two}_12345"),
        ):
            rows.append({"photo_a": f"{a}.jpg", "photo_b": f"{b}.jpg", "label": label, "fold": fold})
    (tmp_path / "pairs.txt").write_bytes(lfw_bytes(table(PAIRS, rows)))
    assert (tmp_path / "pairs.txt").read_text().splitlines() == [
        "2\t1", "ann\t1\t2", "ann\t1\tben\t12345", "cat\t1\t2", "cat\t1\tdan\t12345",
    ]  # fmt: skip
    assert audit_path(tmp_path / "pairs.txt").sound
