"""Planning writes nothing and says what making does; a split that was made is told of against what is known now."""

from collections.abc import Callable
from pathlib import Path

import pytest

from curator.domain import PairAnswer, Verdict
from curator.errors import BadInput, Stopped
from curator.ledger import Ledger
from curator.progress import Silent
from curator.recipe import parse_recipe
from curator.splits.step import make_split, plan_split, present_split

MadeLedger = Callable[..., Ledger]

_TEXT = '[split]\nshares = { train = 0.6, val = 0.2, test = 0.2 }\nseed = 3\nbalance = ["club"]\n'


def test_a_plan_is_what_is_made_and_leaves_no_trace(made_ledger: MadeLedger) -> None:
    with made_ledger() as ledger:
        planned = plan_split(ledger, parse_recipe(_TEXT), progress=Silent())
        assert ledger.split() is None
        assert present_split(ledger, progress=Silent()) is None
        made = make_split(ledger, parse_recipe(_TEXT), _TEXT, progress=Silent())
        assert made == planned
        assert ledger.split() == (planned.assignment, _TEXT)
        assert present_split(ledger, progress=Silent()) == made
        plan_split(ledger, parse_recipe(_TEXT.replace("3", "4")), progress=Silent())
        assert present_split(ledger, progress=Silent()) == made


def test_what_came_after_a_split_shows_as_a_leak_and_a_parted_group(made_ledger: MadeLedger) -> None:
    with made_ledger() as ledger:
        made = make_split(ledger, parse_recipe(_TEXT), _TEXT, progress=Silent())
        split_of = made.assignment.split_of
        one, other = (min(name for name in split_of if split_of[name] == asked) for asked in ("train", "test"))
        photos = (f"{one}/0.jpg", f"{other}/0.jpg")
        with ledger.writing():
            ledger.put_verdicts([Verdict(*photos, PairAnswer.SAME, "ada", "2026-05-01T10:00:00+00:00")])
        told = present_split(ledger, progress=Silent())
        assert told is not None
        assert told.assignment == made.assignment
        assert (made.leaks, told.leaks) == (0, 1)
        assert told.leaking == (f"the person of {' and '.join(sorted(photos))} is in test and train",)
        (group,) = (group for group in told.groups if one in group.identities)
        assert (group.splits, group.split) == (("train", "test"), "")
        assert {photos, photos[::-1]} & {tie.photos for tie in group.ties if tie.why == "a verdict 'same'"}
        again = plan_split(ledger, parse_recipe(_TEXT), progress=Silent())
        assert again.leaks == 0
        assert all(group.split for group in again.groups)


def test_identities_that_came_or_went_after_a_split(made_ledger: MadeLedger) -> None:
    with made_ledger(people=4) as ledger:
        made = make_split(ledger, parse_recipe(_TEXT), _TEXT, progress=Silent())
        with ledger.writing():
            named = ledger.files()
            ledger.remove_files([raw for raw in named if named[raw].identity == "id000"])
        told = present_split(ledger, progress=Silent())
        assert told is not None
        assert made.in_no_split == told.in_no_split == ()
        assert sum(row.identities for row in told.shares.values()) == 3
    with made_ledger("grown", people=12) as ledger:
        with ledger.writing():
            ledger.put_split(made.assignment, _TEXT)
        told = present_split(ledger, progress=Silent())
        assert told is not None
        assert told.in_no_split == tuple(f"id{k:03d}" for k in range(4, 12))


def test_a_split_is_told_of_without_the_edition_and_attributes_it_was_made_with(
    made_ledger: MadeLedger, tmp_path: Path
) -> None:
    text = _TEXT + f'keep_together = ["band"]\nkeep_from = "{tmp_path / "gone"}"\n'
    with made_ledger(people=4) as ledger:
        with pytest.raises(BadInput, match="is no edition"):
            plan_split(ledger, parse_recipe(text), progress=Silent())
        plain = _TEXT + 'keep_together = ["band"]\n'
        made = make_split(ledger, parse_recipe(plain), plain, progress=Silent())
        assert {tie.why for tie in made.ties} >= {"the same band band 0", "the same band band 1"}
        with ledger.writing():
            ledger.put_split(made.assignment, text)
            ledger.put_attributes({})
        progress = Silent()
        told = present_split(ledger, progress=progress)
    assert told is not None
    assert "gone is no edition" in progress.notes[-1]
    assert (told.balance, told.conflicts) == ((), ())


def test_a_stop_leaves_no_split(made_ledger: MadeLedger) -> None:
    class Impatient(Silent):
        def stop_wanted(self) -> bool:
            return True

    with made_ledger(people=4) as ledger:
        with pytest.raises(Stopped):
            make_split(ledger, parse_recipe(_TEXT), _TEXT, progress=Impatient())
        assert ledger.split() is None
