"""The recipe of an edition: TOML, checked key by key; unknown keys are errors."""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from curator.domain import SPLITS
from curator.errors import BadInput

DEFAULT_RECIPE_TEXT = """\
[split]
shares = { train = 0.7, val = 0.15, test = 0.15 }
seed = 7
balance = []
keep_together = []
keep_from = ""
[pairs]
train = 4000
val = 800
test = 800
bands = { easy = 0.2, middle = 0.4, hard = 0.4 }
match_on = []
match_share = 0.5
per_identity = 60
trust_floor = 0.98
[triplets]
train = 10000
rule = "semi-hard"
margin = 0.2
[folds]
count = 10
[write]
formats = ["parquet", "csv"]
"""
BANDS = ("easy", "middle", "hard")
_FORMATS = ("parquet", "csv", "lfw-text")
_RULES = ("semi-hard", "hard", "random")
_LARGEST = 2**63 - 1


@dataclass(frozen=True)
class SplitRecipe:
    shares: Mapping[str, float] = field(default_factory=lambda: {"train": 0.7, "val": 0.15, "test": 0.15})
    seed: int = 7
    balance: tuple[str, ...] = ()
    keep_together: tuple[str, ...] = ()
    keep_from: str = ""


@dataclass(frozen=True)
class PairsRecipe:
    counts: Mapping[str, int] = field(default_factory=dict)
    """Split to rows; half mated, half non-mated."""
    bands: Mapping[str, float] = field(default_factory=lambda: {"easy": 0.2, "middle": 0.4, "hard": 0.4})
    match_on: tuple[str, ...] = ()
    match_share: float = 0.5
    per_identity: int = 60
    trust_floor: float = 0.98


@dataclass(frozen=True)
class TripletsRecipe:
    counts: Mapping[str, int] = field(default_factory=dict)
    rule: str = "semi-hard"
    margin: float = 0.2


@dataclass(frozen=True)
class Recipe:
    split: SplitRecipe
    pairs: PairsRecipe
    triplets: TripletsRecipe
    folds: int
    """Identity-disjoint folds of the test part; 0: none."""
    formats: tuple[str, ...]


def parse_recipe(text: str, source: str = "the recipe") -> Recipe:
    """A recipe from TOML. Missing keys take their defaults. Raises `BadInput` naming `source` and the key."""
    try:
        told = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise BadInput(f"{source} is not valid TOML: {error}.") from error
    top = _Table(source, "", told)
    recipe = Recipe(
        _split(top.table("split")),
        _pairs(top.table("pairs")),
        _triplets(top.table("triplets")),
        _folds(top.table("folds")),
        _formats(top.table("write")),
    )
    top.done()
    return recipe


def recipe_toml(recipe: Recipe) -> str:
    """The recipe as TOML that `parse_recipe` reads back to an equal one; whatever `recipe` holds is written unchecked.

    Lists of which no rows are asked stand as comments. Raises `BadInput` for texts that UTF-8 cannot hold.
    """
    split, pairs, triplets = recipe.split, recipe.pairs, recipe.triplets
    lines = [
        ("[split]", ""),
        (f"shares = {_inline(split.shares, SPLITS)}", ""),
        (f"seed = {split.seed}", ""),
        (f"balance = {_listed(split.balance)}", "attributes kept in proportion"),
        (f"keep_together = {_listed(split.keep_together)}", "photos with the same value never straddle splits"),
        (f"keep_from = {_quoted(split.keep_from)}", "an earlier edition whose identities keep their split"),
        ("[pairs]", "rows of each list: half mated, half non-mated"),
        *_counted(pairs.counts),
        (f"bands = {_inline(pairs.bands, BANDS)}", ""),
        (f"match_on = {_listed(pairs.match_on)}", "attributes that both photos of a non-mated pair share"),
        (f"match_share = {float(pairs.match_share)!r}", "of the non-mated pairs, so many are matched on these"),
        (f"per_identity = {pairs.per_identity}", "an identity appears in at most so many pairs"),
        (f"trust_floor = {float(pairs.trust_floor)!r}", "pairs below it need a review, else they are left out"),
        ("[triplets]", "rows of each list"),
        *_counted(triplets.counts),
        (f"rule = {_quoted(triplets.rule)}", "of " + ", ".join(_RULES)),
        (f"margin = {float(triplets.margin)!r}", "semi-hard negatives lie within it, in squared distance"),
        ("[folds]", ""),
        (f"count = {recipe.folds}", "identity-disjoint folds of the test part; 0: none"),
        ("[write]", ""),
        (f"formats = {_listed(recipe.formats)}", "of " + ", ".join(_FORMATS)),
    ]
    return "".join(f"{words:<29} # {why}\n" if why else f"{words}\n" for words, why in lines)


def _counted(counts: Mapping[str, int]) -> list[tuple[str, str]]:
    return [(f"{name} = {counts[name]}" if name in counts else f"# {name} = 0", "") for name in SPLITS]


def _inline(shares: Mapping[str, float], names: Sequence[str]) -> str:
    """An inline table; names that are not known come last, for the reader to complain of."""
    ordered = [*(name for name in names if name in shares), *(name for name in shares if name not in names)]
    inside = ", ".join(f"{name if name in names else _quoted(name)} = {float(shares[name])!r}" for name in ordered)
    return f"{{ {inside} }}" if inside else "{}"


def _listed(texts: Sequence[str]) -> str:
    return f"[{', '.join(map(_quoted, texts))}]"


def _quoted(text: str) -> str:
    """A basic string of TOML: escaped as in JSON, and the delete character too, which JSON lets stand."""
    try:
        text.encode()
    except UnicodeEncodeError as error:
        raise BadInput(f"{text!a} holds characters that cannot be written as UTF-8.") from error
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


class _Table:
    """One table of the recipe; takes its keys out one by one, and complains of those left over."""

    def __init__(self, source: str, name: str, told: Mapping[str, Any]) -> None:
        self.source, self.name, self.left = source, name, dict(told)

    def bad(self, key: str, words: str) -> BadInput:
        where = f"{self.name}.{key}" if self.name else key
        return BadInput(f"'{where}' in {self.source} {words}.")

    def done(self) -> None:
        for key in sorted(self.left):
            raise self.bad(key, "is not known")

    def table(self, key: str) -> _Table:
        value = self.left.pop(key, {})
        if not isinstance(value, dict):
            raise self.bad(key, "must be a table")
        return _Table(self.source, f"{self.name}.{key}" if self.name else key, value)

    def text(self, key: str, default: str, choices: tuple[str, ...] = ()) -> str:
        value = self.left.pop(key, default)
        if not isinstance(value, str):
            raise self.bad(key, "must be text")
        if choices and value not in choices:
            raise self.bad(key, f"must be one of {', '.join(choices)}, not '{value}'")
        return value

    def texts(self, key: str, default: tuple[str, ...], choices: tuple[str, ...] = ()) -> tuple[str, ...]:
        value = self.left.pop(key, list(default))
        if not isinstance(value, list) or not all(isinstance(item, str) for item in value):
            raise self.bad(key, "must be a list of texts")
        if len(set(value)) < len(value):
            raise self.bad(key, "names something twice")
        wrong = [item for item in value if choices and item not in choices]
        if wrong:
            raise self.bad(key, f"may hold {', '.join(choices)}, not '{wrong[0]}'")
        return tuple(value)

    def whole(self, key: str, default: int, least: int) -> int:
        value = self.left.pop(key, default)
        if isinstance(value, bool) or not isinstance(value, int) or value < least:
            raise self.bad(key, f"must be a whole number of at least {least}")
        if value > _LARGEST:
            raise self.bad(key, f"must be at most {_LARGEST}, which is what a ledger can hold")
        return value

    def number(self, key: str, default: float, least: float, most: float) -> float:
        value = self.left.pop(key, default)
        if isinstance(value, bool) or not isinstance(value, int | float) or not least <= value <= most:
            raise self.bad(key, f"must be a number from {least:g} to {most:g}")
        return float(value)

    def shares(self, key: str, default: Mapping[str, float], names: tuple[str, ...]) -> dict[str, float]:
        value = self.left.pop(key, dict(default))
        if not isinstance(value, dict) or not value:
            raise self.bad(key, "must be a table of shares")
        table = _Table(self.source, f"{self.name}.{key}", value)
        shares = {name: table.number(name, 0.0, 0.0, 1.0) for name in names if name in value}
        table.done()
        if abs(sum(shares.values()) - 1) > 1e-6:
            raise self.bad(key, f"must add up to 1, not {sum(shares.values()):g}")
        return shares


def _split(table: _Table) -> SplitRecipe:
    standard = SplitRecipe()
    recipe = SplitRecipe(
        table.shares("shares", standard.shares, SPLITS),
        table.whole("seed", standard.seed, 0),
        table.texts("balance", ()),
        table.texts("keep_together", ()),
        table.text("keep_from", ""),
    )
    table.done()
    return recipe


def _pairs(table: _Table) -> PairsRecipe:
    standard = PairsRecipe()
    counts = {name: table.whole(name, 0, 0) for name in SPLITS if name in table.left}
    for name, count in counts.items():
        if count % 2:
            raise table.bad(name, "must be even: half the rows are mated")
    recipe = PairsRecipe(
        counts,
        table.shares("bands", standard.bands, BANDS),
        table.texts("match_on", ()),
        table.number("match_share", standard.match_share, 0, 1),
        table.whole("per_identity", standard.per_identity, 1),
        table.number("trust_floor", standard.trust_floor, 0, 1),
    )
    table.done()
    return recipe


def _triplets(table: _Table) -> TripletsRecipe:
    counts = {name: table.whole(name, 0, 0) for name in SPLITS if name in table.left}
    recipe = TripletsRecipe(counts, table.text("rule", "semi-hard", _RULES), table.number("margin", 0.2, 0, 4))
    table.done()
    return recipe


def _folds(table: _Table) -> int:
    count = table.whole("count", 0, 0)
    if count == 1:
        raise table.bad("count", "must be 0 (none) or at least 2")
    table.done()
    return count


def _formats(table: _Table) -> tuple[str, ...]:
    formats = table.texts("formats", ("parquet", "csv"), _FORMATS)
    if not formats:
        raise table.bad("formats", "must name at least one format")
    table.done()
    return formats
