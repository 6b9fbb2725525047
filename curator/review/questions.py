"""Which pairs to ask people about, in which order, and why each is asked."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from enum import StrEnum
from itertools import islice

import numpy as np

from curator.domain import Doubt, DoubtKind, EchoGroup, Ints, PhotoAnswer, Roll
from curator.pairs.mining import hard_mated, hard_non_mated
from curator.pairs.similarity import between
from curator.pairs.trust import TrustModel
from curator.review.reasoning import Reasoned, reason
from curator.verdicts import Settled, pair_key

_POOL = 3
"""Pairs mined for each question wanted where the least trusted among them are asked."""
_MOST_SEARCHED = 8_000
"""Photos whose nearest strangers are looked for, all with all; of more, only those most like strangers."""


class Order(StrEnum):
    """The orders in which pairs are asked."""

    MOST_INFORMATIVE = "most-informative"
    HARDEST_MATED = "hardest-mated"
    HARDEST_NON_MATED = "hardest-non-mated"
    RANDOM = "random"


@dataclass(frozen=True, slots=True)
class Question:
    """A pair for a person to answer."""

    photo_a: str
    photo_b: str
    identity_a: str
    identity_b: str
    label: int
    """1 mated by folder, 0 not."""
    similarity: float
    trust: float
    gain: float
    """How many wrong pairs an answer may settle: the doubt in the label times the pairs that hang on it."""
    why: str
    """One sentence for the person."""
    open: bool = True
    """No standing verdict has answered it."""


@dataclass(frozen=True)
class Matter:
    """All that questions are drawn from."""

    roll: Roll
    trust: TrustModel
    photos: Ints
    """Places along the roll of the photos that may be asked about, ascending."""
    doubts: tuple[Doubt, ...]
    settled: Settled
    same_shot: Mapping[str, frozenset[str]]
    """Photo to the echo groups it is in: one of copies at most, and any number of bursts."""
    follows: Reasoned
    """What the verdicts imply."""
    answered: bool
    """Ask pairs with a standing verdict too."""

    def may_ask(self, a: str, b: str) -> bool:
        """Whether two photos are a pair worth a person's time: not of one shot, and with no answer, said or implied."""
        if a == b or self.same_shot.get(a, frozenset()) & self.same_shot.get(b, frozenset()):
            return False
        if self.answered:
            return True
        return pair_key(a, b) not in self.settled.pairs and self.follows.photos(a, b).answer is None


def matter_of(
    roll: Roll,
    trust: TrustModel,
    embedded: Iterable[int],
    doubts: tuple[Doubt, ...],
    echoes: Iterable[EchoGroup],
    settled: Settled,
    *,
    answered: bool = False,
) -> Matter:
    """The matter for questions: photos that people set aside or moved away are not asked about."""
    gone = {photo for photo, answer in settled.photos.items() if answer != PhotoAnswer.BELONGS}
    photos = np.array([i for i in embedded if roll.photos[i] not in gone], dtype=np.int64)
    groups: dict[str, set[str]] = defaultdict(set)
    for group in echoes:
        for photo in group.photos:
            groups[photo].add(group.id)
    same_shot = {photo: frozenset(ids) for photo, ids in groups.items()}
    return Matter(roll, trust, photos, doubts, settled, same_shot, reason(settled, roll), answered)


def questions(matter: Matter, order: Order, limit: int, rng: np.random.Generator) -> tuple[Question, ...]:
    """Up to `limit` questions in the order asked for; no pair twice, none of two copies of one shot."""
    found = _FINDERS[order](matter, limit, rng)
    kept: dict[tuple[str, str], Question] = {}
    for question in found:
        if not matter.may_ask(question.photo_a, question.photo_b):
            continue
        key = pair_key(question.photo_a, question.photo_b)
        if key not in kept or question.gain > kept[key].gain:
            kept[key] = question
    chosen = list(kept.values())
    return tuple(_varied(chosen)[:limit] if order == Order.MOST_INFORMATIVE else chosen[:limit])


def about(matter: Matter, pairs: Iterable[tuple[str, str]]) -> tuple[Question, ...]:
    """Questions about given pairs, in their order; pairs with a photo that is not embedded on the roll are left out."""
    place = matter.roll.index_of()
    allowed = set(matter.photos.tolist())
    found: list[Question] = []
    for first, second in pairs:
        a, b = place.get(first, -1), place.get(second, -1)
        if a in allowed and b in allowed and a != b:
            label = int(matter.roll.identity_of[a] == matter.roll.identity_of[b])
            found += _asked(matter, np.array([a]), np.array([b]), label, "You wanted this pair asked.")
    return tuple(found)


def _varied(found: list[Question]) -> list[Question]:
    """By gain, but every identity's first question before any identity's second: no bad folder may fill the desk."""
    met: Counter[str] = Counter()
    ranked = []
    for question in sorted(found, key=lambda q: (-q.gain, q.photo_a, q.photo_b)):
        sides = {question.identity_a, question.identity_b}
        ranked.append((max(met[side] for side in sides), question))
        met.update(sides)
    return [question for _, question in sorted(ranked, key=lambda item: item[0])]


def _most_informative(matter: Matter, limit: int, _: np.random.Generator) -> list[Question]:
    found = _of_doubts(matter)
    for label in (1, 0):
        why = (
            "Filed under one name, yet these two look unlike."
            if label
            else "Filed under two names, yet these two look alike."
        )
        found += _asked(matter, *_mined(matter, label, limit * _POOL), label, why)
    return found


def _hardest(label: int, why: str) -> Callable[..., list[Question]]:
    def found(matter: Matter, limit: int, _: np.random.Generator) -> list[Question]:
        return _asked(matter, *_mined(matter, label, limit), label, why)

    return found


def _mined(matter: Matter, label: int, wanted: int) -> tuple[Ints, Ints]:
    """The hardest `wanted` pairs that may be asked, hardest first.

    As many more are mined as could have to be passed over, so that answers given never leave the desk empty.
    """
    sizes = Counter(group for groups in matter.same_shot.values() for group in groups)
    passed_over = sum(n * (n - 1) // 2 for n in sizes.values())
    if not matter.answered:
        passed_over += len(matter.settled.pairs)
    mine, photos = (hard_mated, matter.photos) if label else (hard_non_mated, _searched(matter))
    i, j, _ = mine(matter.trust.embeddings, photos, matter.roll.identity_of, wanted + passed_over)
    names = matter.roll.photos
    pairs = zip(i.tolist(), j.tolist(), strict=True)
    chosen = np.array(
        list(islice((pair for pair in pairs if matter.may_ask(names[pair[0]], names[pair[1]])), wanted)),
        dtype=np.int64,
    ).reshape(-1, 2)
    return chosen[:, 0], chosen[:, 1]


def _searched(matter: Matter) -> Ints:
    """The photos among which like strangers are looked for: all, or of many those likeliest to have one.

    Half are the photos most like another identity. The others are what these may be like: the most typical photos of
    those identities, which need not look like strangers themselves.
    """
    photos, trust = matter.photos, matter.trust
    if len(photos) <= _MOST_SEARCHED:
        return photos
    alike = np.nan_to_num(trust.nearest_similarity[photos], nan=-np.inf)
    order = photos[np.argsort(-alike, kind="stable")]
    leading, rest = order[: _MOST_SEARCHED // 2], order[_MOST_SEARCHED // 2 :]
    turn = np.full(len(trust.core.counts) + 1, len(photos))
    # Photos that are near no identity hold -1, and so take their turn at the spare last place.
    np.minimum.at(turn, trust.nearest[leading], np.arange(len(leading)))
    own = np.nan_to_num(trust.own[rest], nan=-np.inf)
    met = rest[np.lexsort((-own, turn[matter.roll.identity_of[rest]]))]
    return np.sort(np.concatenate([leading, met[: _MOST_SEARCHED - len(leading)]]))


def _random(matter: Matter, limit: int, rng: np.random.Generator) -> list[Question]:
    """A uniform sample, half of all mated and half of all non-mated pairs, in a shuffled order."""
    identity = matter.roll.identity_of[matter.photos]
    order = np.argsort(identity, kind="stable")
    photos, identity = matter.photos[order], identity[order]
    starts = np.flatnonzero(np.r_[True, identity[1:] != identity[:-1]]) if len(photos) else np.zeros(0, dtype=np.int64)
    sizes = np.diff(np.r_[starts, len(photos)])
    mated = sizes * (sizes - 1) // 2
    i, j = _mated_sample(photos, starts, mated, limit, rng)
    a, b = _non_mated_sample(photos, identity, limit, rng)
    why = "One of a random sample, for estimating how many labels are wrong."
    found = _asked(matter, i, j, 1, why) + _asked(matter, a, b, 0, why)
    return [found[k] for k in rng.permutation(len(found))]


def _mated_sample(photos: Ints, starts: Ints, mated: Ints, limit: int, rng: np.random.Generator) -> tuple[Ints, Ints]:
    total = int(mated.sum())
    drawn = rng.choice(total, size=min(limit, total), replace=False) if total else np.zeros(0, dtype=np.int64)
    ends = np.cumsum(mated)
    group = np.searchsorted(ends, drawn, side="right")
    # The k-th pair (first < second) of a group, counted by its second member: k = second * (second - 1) / 2 + first.
    k = drawn - (ends - mated)[group]
    second = ((1 + np.sqrt(1 + 8 * k.astype(np.float64))) / 2).astype(np.int64)
    second -= second * (second - 1) // 2 > k
    second += (second + 1) * second // 2 <= k
    first = k - second * (second - 1) // 2
    return photos[starts[group] + first], photos[starts[group] + second]


def _non_mated_sample(photos: Ints, identity: Ints, limit: int, rng: np.random.Generator) -> tuple[Ints, Ints]:
    if len(set(identity.tolist())) < 2:
        empty = np.zeros(0, dtype=np.int64)
        return empty, empty
    # Pairs of places are drawn until enough are of two people; uniform over all of them, repeats fall out later.
    a, b = rng.integers(len(photos), size=(2, 20 * limit + 100))
    apart = identity[a] != identity[b]
    return photos[a[apart][:limit]], photos[b[apart][:limit]]


def _asked(matter: Matter, i: Ints, j: Ints, label: int, why: str, gain: float | None = None) -> list[Question]:
    """Questions about pairs of places along the roll; `gain` as given, else the doubt in the label itself."""
    roll, trust = matter.roll, matter.trust
    similarity = between(trust.embeddings, i, j)
    trusted = trust.mated(i, j) if label else trust.non_mated(i, j)
    found = []
    for a, b, s, t in zip(i.tolist(), j.tolist(), similarity.tolist(), trusted.tolist(), strict=True):
        photos = (roll.photos[a], roll.photos[b])
        names = (roll.identities[roll.identity_of[a]], roll.identities[roll.identity_of[b]])
        is_open = pair_key(*photos) not in matter.settled.pairs
        worth = (1 - t) if gain is None else gain
        found.append(Question(*photos, *names, label, round(s, 4), round(t, 4), round(worth, 4), why, is_open))
    return found


def _of_doubts(matter: Matter) -> list[Question]:
    """What would settle each open doubt: the most typical photos speak for their people."""
    roll, place = matter.roll, matter.roll.index_of()
    typical = _Typical(matter)
    found: list[Question] = []

    def ask(a: int | None, b: int | None, label: int, why: str, gain: float) -> None:
        if a is not None and b is not None and a != b:
            found.extend(_asked(matter, np.array([a]), np.array([b]), label, why, gain))

    for doubt in matter.doubts:
        if doubt.settled:
            continue
        if doubt.kind == DoubtKind.MISFILED_PHOTO:
            photo = place[doubt.photos[0]]
            home, *others = (typical.place_of[name] for name in doubt.identities)
            hang = typical.count(home) - 1
            why = _WHY_MISFILED.format(roll.identities[home])
            ask(photo, typical.of(home, without=photo), 1, why, doubt.probability * hang)
            for other in others:
                why = _WHY_BELONGS.format(roll.identities[other], roll.identities[home])
                ask(photo, typical.of(other), 0, why, doubt.probability * typical.count(other))
        elif doubt.kind == DoubtKind.ONE_PERSON_TWO_FOLDERS:
            one, two = (typical.place_of[name] for name in doubt.identities)
            why = f"{doubt.identities[0]} and {doubt.identities[1]} may be one person."
            ask(typical.of(one), typical.of(two), 0, why, doubt.probability * typical.count(one) * typical.count(two))
        elif doubt.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER:
            parts = [[place[name] for name in part] for part in doubt.evidence["parts"]]
            why = f"{doubt.identities[0]} may hold two people; here is one photo of each part."
            hang = len(parts[0]) * len(parts[1])
            ask(typical.among(parts[0]), typical.among(parts[1]), 1, why, doubt.probability * hang)
    return found


_WHY_MISFILED = "Both are filed under {}, but the first may not belong there."
_WHY_BELONGS = "The first looks more like {} than like {}, under which it is filed."


class _Typical:
    """The most typical photos of each identity: those most like its others."""

    def __init__(self, matter: Matter) -> None:
        roll, own = matter.roll, np.nan_to_num(matter.trust.own, nan=-np.inf)
        self.place_of = {name: i for i, name in enumerate(roll.identities)}
        self._own = own
        self._allowed = set(matter.photos.tolist())
        photos = matter.photos[np.lexsort((matter.photos, -own[matter.photos], roll.identity_of[matter.photos]))]
        self._of: dict[int, list[int]] = {}
        for photo in photos.tolist():
            self._of.setdefault(int(roll.identity_of[photo]), []).append(photo)

    def count(self, identity: int) -> int:
        return len(self._of.get(identity, ()))

    def of(self, identity: int, *, without: int = -1) -> int | None:
        return next((photo for photo in self._of.get(identity, ()) if photo != without), None)

    def among(self, photos: Iterable[int]) -> int | None:
        return max((p for p in photos if p in self._allowed), key=lambda p: (self._own[p], -p), default=None)


_FINDERS: Mapping[Order, Callable[[Matter, int, np.random.Generator], list[Question]]] = {
    Order.MOST_INFORMATIVE: _most_informative,
    Order.HARDEST_MATED: _hardest(1, "One of the mated pairs that look least alike."),
    Order.HARDEST_NON_MATED: _hardest(0, "One of the non-mated pairs that look most alike."),
    Order.RANDOM: _random,
}
