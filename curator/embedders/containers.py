"""Reading the weight files' container format: numbers, matrices, and tensors found by scanning.

The format (dlib serialization): an integer is one head byte (low 4 bits: how many bytes follow, top bit: negative)
and its magnitude, little-endian; a float is two integers, mantissa and exponent, value = mantissa * 2**exponent;
a matrix is minus rows, minus columns, then floats; a tensor is the integers 2, n, k, rows, columns, then raw
little-endian float32.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

_TENSOR_HEAD = b"\x01\x02"
_LARGEST_WEIGHT = 1e6


@dataclass
class Reader:
    """A cursor over the bytes of a container. Every method raises `ValueError` where the bytes do not fit."""

    data: bytes
    at: int = 0

    def integer(self) -> int:
        if self.at >= len(self.data):
            raise ValueError("the data ends inside a number")
        head = self.data[self.at]
        length = head & 0x0F
        end = self.at + 1 + length
        if not 1 <= length <= 8 or end > len(self.data):
            raise ValueError("not an integer of the container format")
        magnitude = int.from_bytes(self.data[self.at + 1 : end], "little")
        self.at = end
        return -magnitude if head & 0x80 else magnitude

    def number(self) -> float:
        mantissa = self.integer()
        exponent = self.integer()
        return float(np.ldexp(float(mantissa), exponent))

    def numbers(self, count: int) -> list[float]:
        return [self.number() for _ in range(count)]

    def matrix(self) -> NDArray[np.float64]:
        rows, columns = abs(self.integer()), abs(self.integer())
        return np.array(self.numbers(rows * columns)).reshape(rows, columns)


def tensors(data: bytes) -> list[NDArray[np.float32]]:
    """All tensors of more than 8 finite elements, flattened, in the order of the file."""
    found: list[NDArray[np.float32]] = []
    at = 0
    while (at := data.find(_TENSOR_HEAD, at)) >= 0:
        values, end = _tensor(data, at)
        if values is None:
            at += 1
        else:
            found.append(values)
            at = end
    return found


def _tensor(data: bytes, at: int) -> tuple[NDArray[np.float32] | None, int]:
    reader = Reader(data, at)
    try:
        reader.integer()
        shape = [reader.integer() for _ in range(4)]
    except ValueError:
        return None, at
    size = int(np.prod(shape, dtype=object))
    end = reader.at + 4 * size
    # Four equal twos are the tail of a neighbouring header, not a weight of these networks.
    if min(shape) < 1 or size <= 8 or end > len(data) or shape == [2, 2, 2, 2]:
        return None, at
    values = np.frombuffer(data, "<f4", size, reader.at)
    if not np.isfinite(values).all() or float(np.abs(values).max()) > _LARGEST_WEIGHT:
        return None, at
    return values, end
