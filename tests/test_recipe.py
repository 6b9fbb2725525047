"""Recipes are checked key by key."""

import pytest

from curator.errors import BadInput
from curator.recipe import DEFAULT_RECIPE_TEXT, parse_recipe


def test_the_default_recipe() -> None:
    recipe = parse_recipe(DEFAULT_RECIPE_TEXT)
    assert recipe.split.shares == {"train": 0.7, "val": 0.15, "test": 0.15}
    assert recipe.pairs.counts == {"train": 4000, "val": 800, "test": 800}
    assert recipe.triplets.counts == {"train": 10000}
    assert recipe.folds == 10
    assert recipe.formats == ("parquet", "csv")


def test_what_is_left_out_takes_its_default() -> None:
    recipe = parse_recipe("")
    assert recipe.split.seed == 7
    assert recipe.pairs.counts == {}
    assert recipe.folds == 0


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("[split", "not valid TOML"),
        ("[colours]", "'colours' .* is not known"),
        ("split = 3", "'split' .* must be a table"),
        ("[split]\nshare = 1", "'split.share' .* is not known"),
        ("[split]\nshares = { train = 0.5 }", "must add up to 1"),
        ("[split]\nshares = { train = 0.5, exam = 0.5 }", "'split.shares.exam' .* is not known"),
        ("[split]\nshares = { train = 2.0, val = -1.0 }", "from 0 to 1"),
        ("[split]\nseed = -1", "at least 0"),
        ("[split]\nseed = true", "whole number"),
        ("[split]\nbalance = 'club'", "list of texts"),
        ("[split]\nbalance = ['club', 'club']", "twice"),
        ("[pairs]\ntrain = 3", "must be even"),
        ("[pairs]\nbands = { easy = 0.5, hard = 0.6 }", "must add up to 1"),
        ("[pairs]\nper_identity = 0", "at least 1"),
        ("[triplets]\nrule = 'harder'", "semi-hard, hard, random"),
        ("[folds]\ncount = 1", "0 .none. or at least 2"),
        ("[write]\nformats = ['xml']", "parquet, csv, lfw-text"),
        ("[write]\nformats = []", "at least one"),
    ],
)
def test_complaints(text: str, words: str) -> None:
    with pytest.raises(BadInput, match=words):
        parse_recipe(text)
