"""The recipe of the editions that are written in these tests."""

import pytest

RECIPE = """
[split]
shares = { train = 0.6, val = 0.2, test = 0.2 }
seed = 3
balance = ["club"]
[pairs]
train = 100
val = 20
test = 24
match_on = ["band"]
match_share = 0.5
[triplets]
train = 40
rule = "random"
[folds]
count = 2
[write]
formats = ["parquet", "csv"]
"""


@pytest.fixture
def recipe_text() -> str:
    return RECIPE
