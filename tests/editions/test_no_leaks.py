"""Whatever the collection: what is split and sampled is looked over row by row, and nothing leaks.

The checker walks rows and photos with sets; it shares nothing with ties, assignment or sampling.
"""

import itertools
from collections import Counter

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.domain import Change, EchoGroup, EchoLink, PairAnswer, Readings, Roll, Scope
from curator.editions.assembling import assemble
from curator.editions.material import Lists, Material
from curator.pairs.trust import fit_trust
from curator.recipe import parse_recipe
from curator.splits.assignment import Sizes, assign
from curator.splits.leaks import leaks
from curator.splits.ties import tied_groups, ties
from curator.verdicts import Settled

_RECIPE = parse_recipe("""
[split]
shares = { train = 0.5, val = 0.2, test = 0.3 }
[pairs]
train = 40
val = 10
test = 20
per_identity = 8
trust_floor = 0.5
[triplets]
train = 12
test = 6
rule = "random"
[folds]
count = 3
""")


def _readings(n: int, embeddings: np.ndarray) -> Readings:
    zero, nothing = np.zeros(n), np.zeros(n, dtype=np.int32)
    codes = np.zeros(n, dtype=np.uint64)
    return Readings(
        (None,) * n, np.zeros(n, dtype=np.int64), nothing, nothing, codes, codes, codes, zero, zero, zero, zero,
        nothing, zero, np.zeros((n, 4)), np.zeros((n, 5, 2)), embeddings, np.ones(n, dtype=bool),
    )  # fmt: skip


def _made(roll: Roll, echoes: list[EchoGroup], settled: Settled, seed: int) -> tuple[Lists, dict[str, str]]:
    rng = np.random.default_rng(seed)
    k = len(roll.identities)
    group_of = tied_groups(roll, ties(roll, echoes, [], settled, ["session"]))
    weights = np.zeros((int(group_of.max()) + 1, 1))
    np.add.at(weights, group_of, 1.0)
    shares = np.array([0.5, 0.2, 0.3])
    placed, _ = assign(Sizes(weights, np.ones(1)), shares, fixed=np.full(len(weights), -1), rng=rng)
    split_of = {name: ("train", "val", "test")[placed[group_of[i]]] for i, name in enumerate(roll.identities)}
    x = rng.normal(size=(k, 16))[roll.identity_of] + 0.2 * rng.normal(size=(len(roll), 16))
    x = (x / np.linalg.norm(x, axis=1, keepdims=True)).astype(np.float32)
    everywhere = np.ones(len(roll), dtype=bool)
    trust = fit_trust(x, everywhere, roll.identity_of, k, pair_answers={}, photo_answers={}, seed=1)
    fine = rng.random(len(roll)) < 0.9
    material = Material(roll, _readings(len(roll), x), trust, split_of, group_of, fine, echoes, settled)
    return assemble(material, _RECIPE, lambda _: None), split_of


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_nothing_leaks(data: st.DataObject) -> None:
    sizes = data.draw(st.lists(st.integers(1, 6), min_size=2, max_size=16))
    owner = np.repeat(np.arange(len(sizes), dtype=np.int32), sizes)
    photos = tuple(f"i{k:02d}/{n}" for k, size in enumerate(sizes) for n in range(size))
    sessions = data.draw(st.lists(st.sampled_from(["", "", "", "s1", "s2", "s3"]), min_size=len(photos),
                                  max_size=len(photos)))  # fmt: skip
    identities = tuple(f"i{k:02d}" for k in range(len(sizes)))
    roll = Roll(photos, ("",) * len(photos), identities, owner, {"session": tuple(sessions)})
    two = st.lists(st.sampled_from(photos), min_size=2, max_size=2, unique=True).map(lambda pair: tuple(sorted(pair)))
    next_to = st.integers(0, len(photos) - 2).map(lambda k: photos[k : k + 2])
    bursts = data.draw(st.lists(two | next_to, max_size=6))
    echoes = [EchoGroup("e", Scope.WITHIN_IDENTITY, p, (EchoLink(*p, Change.BURST, 0, 1.0),), p[0]) for p in bursts]
    answers = data.draw(st.dictionaries(two | next_to, st.sampled_from(PairAnswer), max_size=6))
    settled = Settled(answers, {})
    lists, split_of = _made(roll, echoes, settled, data.draw(st.integers(0, 9)))

    assert leaks(roll, split_of, echoes, [], settled, ["session"], least=0.1) == ()
    held: dict[str, set[str]] = {}
    for split, rows in lists.pairs.items():
        _check_pairs(rows, split, answers, bursts)
        for row in rows:
            for photo in (row["photo_a"], row["photo_b"]):
                held.setdefault(photo, set()).add(split)
    for split, rows in lists.triplets.items():
        for row in rows:
            a, p, n = row["anchor"], row["positive"], row["negative"]
            assert a.split("/")[0] == p.split("/")[0] != n.split("/")[0]
            assert tuple(sorted((a, p))) not in bursts
            assert answers.get(tuple(sorted((a, p)))) in (None, PairAnswer.SAME)
            for photo in (a, p, n):
                held.setdefault(photo, set()).add(split)
    whole = {photo: session for photo, session in zip(photos, sessions, strict=True) if session}
    for one, other in itertools.combinations(held, 2):
        tied = one.split("/")[0] == other.split("/")[0] or tuple(sorted((one, other))) in bursts
        tied |= one in whole and whole.get(one) == whole.get(other)
        assert len(held[one]) == 1
        assert not tied or held[one] == held[other]


def _check_pairs(rows: list[dict], split: str, answers: dict, bursts: list) -> None:
    asked = {"train": 40, "val": 10, "test": 20}[split]
    use: Counter[str] = Counter()
    seen = set()
    folds: dict[str, set[int]] = {}
    for row in rows:
        pair = tuple(sorted((row["photo_a"], row["photo_b"])))
        people = {photo.split("/")[0] for photo in pair}
        assert people == {row["identity_a"], row["identity_b"]}
        assert (len(people) == 1) == bool(row["label"])
        assert pair not in bursts
        assert answers.get(pair) in (None, PairAnswer.SAME if row["label"] else PairAnswer.DIFFERENT)
        assert row["reviewed"] == (pair in answers)
        assert pair not in seen
        seen.add(pair)
        use.update(people)
        for person in people:
            folds.setdefault(person, set()).add(row["fold"])
    assert len(rows) <= asked
    assert sum(row["label"] for row in rows) * 2 == len(rows)
    assert max(use.values(), default=0) <= 8
    assert all(len(found) == 1 for found in folds.values())
