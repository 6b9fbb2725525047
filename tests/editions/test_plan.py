"""A plan tells what is written then, and writes nothing; owed pairs are named; steps are counted and stops heeded."""

import itertools
from collections import Counter, defaultdict
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow.parquet
import pytest

from curator.domain import PairAnswer, PhotoAnswer, Roll, Verdict
from curator.editions.material import Lists, Owed
from curator.editions.plan import EditionPlan, owed_pairs
from curator.editions.sampling import Pool
from curator.editions.step import plan_edition, write_edition
from curator.errors import BadInput, Stopped
from curator.ledger import Ledger
from curator.progress import Silent
from curator.recipe import Recipe, parse_recipe

MadeLedger = Callable[..., Ledger]

_AT = "2026-05-01T10:00:00+00:00"


def _strict(text: str) -> Recipe:
    """Under a floor that some pairs fall below."""
    recipe = parse_recipe(text)
    return replace(recipe, pairs=replace(recipe.pairs, trust_floor=0.99999))


def _planned(ledger: Ledger, recipe: Recipe) -> EditionPlan:
    return plan_edition(ledger, recipe, progress=Silent())


def _rows(out: Path, name: str) -> list[dict[str, Any]]:
    return list(pyarrow.parquet.read_table(out / "data" / f"{name}.parquet").to_pylist())


def test_a_plan_is_what_is_written_and_leaves_no_trace(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger() as ledger:
        with ledger.writing():
            ledger.put_verdicts([Verdict("id000/0.jpg", "", PhotoAnswer.UNUSABLE, "ada", _AT)])
        recipe = _strict(recipe_text.replace('"csv"', '"lfw-text"').replace("test = 24", "test = 240"))
        plan = _planned(ledger, recipe)
        assert (ledger.split(), ledger.editions()) == (None, [])
        report = write_edition(ledger, recipe, recipe_text, tmp_path / "e", progress=Silent())
        split = ledger.split()
    assert split is not None
    assert plan.split.assignment == split[0]
    told = (report.lists, report.expected_wrong_labels, report.shortfalls, report.owed_reviews, report.leaks)
    assert (plan.lists, plan.expected_wrong_labels, plan.shortfalls, plan.owed_reviews, plan.leaks) == told
    assert any("lfw-text" in text for text in plan.shortfalls)
    assert any("pairs/test" in text for text in plan.shortfalls)
    assert plan.left_out == {"verdict: unusable": ("id000/0.jpg",)}
    assert plan.asked == {"pairs/train": 100, "pairs/val": 20, "pairs/test": 240, "triplets/train": 40}
    photos = _rows(tmp_path / "e", "photos")
    assert {split: row["photos"] for split, row in plan.splits.items()} == Counter(row["split"] for row in photos)


def test_bands_and_histograms_count_the_rows_that_are_written(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger() as ledger:
        plan = _planned(ledger, parse_recipe(recipe_text))
        write_edition(ledger, parse_recipe(recipe_text), recipe_text, tmp_path / "e", progress=Silent())
    edges = plan.similarities.edges
    for split in ("train", "val", "test"):
        rows = _rows(tmp_path / "e", f"pairs/{split}")
        counted = Counter((row["band"], row["label"]) for row in rows)
        for band, row in plan.bands[split].items():
            assert (row.mated, row.non_mated) == (counted[band, 1], counted[band, 0])
        for label, counts in ((1, plan.similarities.mated[split]), (0, plan.similarities.non_mated[split])):
            values = [row["similarity"] for row in rows if row["label"] == label]
            slow = [sum(low <= v < high for v in values) for low, high in itertools.pairwise(edges)]
            slow[-1] += sum(v == edges[-1] for v in values)
            assert list(counts) == slow
            assert sum(counts) == len(values) > 0


def test_owed_pairs_are_under_the_floor_in_no_list_and_gone_once_reviewed(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    recipe = _strict(recipe_text)
    with made_ledger() as ledger:
        plan = _planned(ledger, recipe)
        write_edition(ledger, recipe, recipe_text, tmp_path / "e", progress=Silent())
        listed = {
            (row["photo_a"], row["photo_b"]) for split in plan.bands for row in _rows(tmp_path / "e", f"pairs/{split}")
        }
        assert Counter(pair.split for pair in plan.owed) == plan.owed_reviews
        assert len(plan.owed) > 4
        owner = {pair: (pair.photo_a.split("/")[0], pair.photo_b.split("/")[0]) for pair in plan.owed}
        for pair in plan.owed:
            assert pair.trust < 0.99999
            assert pair.photo_a < pair.photo_b
            assert (pair.photo_a, pair.photo_b) not in listed
            assert pair.label == (owner[pair][0] == owner[pair][1])
            assert {plan.split.assignment.split_of[name] for name in owner[pair]} == {pair.split}
        first, second, *_ = plan.owed
        answer = PairAnswer.SAME if first.label else PairAnswer.DIFFERENT
        with ledger.writing():
            ledger.put_verdicts(
                [
                    Verdict(first.photo_a, first.photo_b, answer, "ada", _AT),
                    Verdict(second.photo_a, second.photo_b, PairAnswer.CANNOT_TELL, "ada", _AT),
                ]
            )
        again = {(pair.photo_a, pair.photo_b): pair for pair in _planned(ledger, recipe).owed}
    assert (first.photo_a, first.photo_b) not in again
    *_, last = again
    assert last == (second.photo_a, second.photo_b)
    assert [pair.unclear for pair in again.values()] == [False] * (len(again) - 1) + [True]


def test_owed_pairs_come_hardest_first_of_each_split_and_kind_in_turn() -> None:
    rng = np.random.default_rng(5)
    roll = Roll(tuple(f"p{k:03d}" for k in range(100)), ("",) * 100, (), np.zeros(0, dtype=np.int32), {})
    made = Lists()
    for split in ("train", "test"):
        made.owed[split] = []
        for mated in (True, False):
            n = int(rng.integers(5, 30))
            a = rng.integers(0, 50, n)
            pool = Pool(a, a + rng.integers(1, 50, n), rng.random(n).round(1), rng.random(n), np.zeros(n, dtype=int))
            made.owed[split].append(Owed(pool, mated, rng.random(n) < 0.3))
    everything = owed_pairs(roll, made, 10_000)
    assert len(everything) == sum(len(kind.pairs.a) for kinds in made.owed.values() for kind in kinds)
    turns: dict[tuple[str, int], list[tuple[bool, float]]] = defaultdict(list)
    for pair in everything:
        turns[pair.split, pair.label].append((pair.unclear, pair.similarity if pair.label else -pair.similarity))
    assert all(turn == sorted(turn) for turn in turns.values())
    assert [(pair.split, pair.label) for pair in everything[:6]] == [
        ("train", 1), ("train", 0), ("test", 1), ("test", 0), ("train", 1), ("train", 0)
    ]  # fmt: skip
    for limit in (0, 1, 7, 20):
        assert owed_pairs(roll, made, limit) == everything[:limit]


def test_a_plan_names_what_it_cannot_match_on(made_ledger: MadeLedger, recipe_text: str) -> None:
    with made_ledger(people=4) as ledger, pytest.raises(BadInput, match="'age' that the recipe matches on"):
        _planned(ledger, parse_recipe(recipe_text.replace('match_on = ["band"]', 'match_on = ["age"]')))


class _Heard(Silent):
    """Hears what is done of each task, and wants a stop in `stop_in`."""

    def __init__(self, stop_in: str = "") -> None:
        super().__init__()
        self.stop_in, self.tasks = stop_in, dict[str, list[int | None]]()

    def begin(self, task: str, total: int | None) -> None:
        self.task = task
        self.tasks[task] = [total, 0]

    def advance(self, n: int = 1) -> None:
        self.tasks[self.task][1] = (self.tasks[self.task][1] or 0) + n

    def stop_wanted(self) -> bool:
        return bool(self.stop_in) and self.task == self.stop_in


def test_steps_are_counted_to_their_totals(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path) -> None:
    heard = _Heard()
    with made_ledger() as ledger:
        write_edition(ledger, parse_recipe(recipe_text), recipe_text, tmp_path / "e", progress=heard)
    files = sum(path.is_file() for path in (tmp_path / "e" / "data").rglob("*"))
    assert heard.tasks["sampling the lists"] == [184, 184]
    assert heard.tasks["making the files"] == [5, 5]
    assert heard.tasks["writing the edition"] == [files, files]


@pytest.mark.parametrize(
    "task", ["assigning identities to splits", "sampling the lists", "making the files", "writing the edition"]
)
def test_a_stop_leaves_nothing(made_ledger: MadeLedger, recipe_text: str, tmp_path: Path, task: str) -> None:
    with made_ledger() as ledger:
        before = sorted(tmp_path.iterdir())
        with pytest.raises(Stopped):
            write_edition(ledger, parse_recipe(recipe_text), recipe_text, tmp_path / "e", progress=_Heard(task))
        assert sorted(tmp_path.iterdir()) == before
        assert (ledger.split(), ledger.editions()) == (None, [])


def test_a_stop_that_comes_when_all_is_written_changes_nothing(
    made_ledger: MadeLedger, recipe_text: str, tmp_path: Path
) -> None:
    with made_ledger(people=4) as ledger:
        heard = _Heard("auditing the edition")
        report = write_edition(ledger, parse_recipe(recipe_text), recipe_text, tmp_path / "e", progress=heard)
        assert "auditing the edition" in heard.tasks
        assert [row.data_digest for row in ledger.editions()] == [report.data_digest]
