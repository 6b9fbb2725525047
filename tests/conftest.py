"""Made-up people for the rooms that weigh labels."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pytest
from numpy.typing import NDArray


@dataclass
class Crowd:
    """Unit embeddings (n, d) of photos, the folder each is filed under, and the person each shows."""

    embeddings: NDArray[np.float32]
    folder: NDArray[np.int32]
    person: NDArray[np.int32]


@pytest.fixture
def crowd() -> Callable[..., Crowd]:
    """Photos of people as directions in space with noise about them, and faces that share a common part.

    With the defaults similarity is about .95 within a person and .75 between strangers, as of the default embedder.
    """

    def made(sizes: list[int], *, seed: int = 1, noise: float = 0.23, common: float = 1.7, d: int = 64) -> Crowd:
        rng = np.random.default_rng(seed)
        person = np.repeat(np.arange(len(sizes), dtype=np.int32), sizes)
        shared = rng.normal(size=d)
        centre = common * shared / np.linalg.norm(shared) + _unit(rng.normal(size=(len(sizes), d)))
        x = _unit(centre)[person] + noise * _unit(rng.normal(size=(len(person), d))) * rng.uniform(
            0.6, 1.3, (len(person), 1)
        )
        return Crowd(_unit(x).astype(np.float32), person.copy(), person)

    return made


def _unit(x: NDArray[np.float64]) -> NDArray[np.float64]:
    unit: NDArray[np.float64] = x / np.linalg.norm(x, axis=1, keepdims=True)
    return unit
