"""Recipes are checked key by key."""

import re
from collections.abc import Sequence
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from curator.domain import SPLITS
from curator.errors import BadInput
from curator.recipe import (
    BANDS,
    DEFAULT_RECIPE_TEXT,
    PairsRecipe,
    Recipe,
    SplitRecipe,
    TripletsRecipe,
    parse_recipe,
    recipe_toml,
)


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
        ("[split]\nseed = 9223372036854775808", "at most 9223372036854775807"),
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


_texts = st.lists(st.text(), max_size=3, unique=True).map(tuple)


def _shares(names: Sequence[str]) -> st.SearchStrategy[dict[str, float]]:
    """Shares of some of `names` that add up to 1 as closely as floats do."""
    weights = st.dictionaries(st.sampled_from(names), st.floats(0.001, 1), min_size=1)
    return weights.map(lambda told: {name: weight / sum(told.values()) for name, weight in told.items()})


def _counts(step: int) -> st.SearchStrategy[dict[str, int]]:
    return st.dictionaries(st.sampled_from(SPLITS), st.integers(0, 10**6).map(lambda count: count * step))


_recipes = st.builds(
    Recipe,
    st.builds(SplitRecipe, _shares(SPLITS), st.integers(0, 2**62), _texts, _texts, st.text()),
    st.builds(
        PairsRecipe,
        _counts(2),
        _shares(BANDS),
        _texts,
        st.floats(0, 1),
        st.integers(1, 10**6),
        st.floats(0, 1),
    ),
    st.builds(TripletsRecipe, _counts(1), st.sampled_from(["semi-hard", "hard", "random"]), st.floats(0, 4)),
    st.integers(0, 99).filter(lambda count: count != 1),
    st.lists(st.sampled_from(["parquet", "csv", "lfw-text"]), min_size=1, unique=True).map(tuple),
)


@given(_recipes)
def test_a_written_recipe_reads_back_equal(recipe: Recipe) -> None:
    assert parse_recipe(recipe_toml(recipe)) == recipe


def test_every_key_is_written_in_the_order_of_the_default() -> None:
    recipe = parse_recipe(DEFAULT_RECIPE_TEXT)
    keys = [
        [found[1] for line in text.splitlines() if (found := re.match(r"(\[?\w+)", line))]
        for text in (DEFAULT_RECIPE_TEXT, recipe_toml(recipe))
    ]
    assert keys[0] == keys[1]


def test_lists_not_asked_for_stand_as_comments() -> None:
    assert "\n# val = 0\n" in recipe_toml(parse_recipe(""))


def test_what_a_form_may_hold_wrongly_is_complained_of_when_read() -> None:
    recipe = parse_recipe("")
    wrong = replace(recipe, split=replace(recipe.split, shares={"train": 0.5, "ex am": 0.5}))
    with pytest.raises(BadInput, match=r"'split\.shares\.ex am' .* is not known"):
        parse_recipe(recipe_toml(wrong))
    with pytest.raises(BadInput, match="UTF-8"):
        recipe_toml(replace(recipe, split=replace(recipe.split, keep_from="a\udcff")))
