"""Numbers of the container format: round trips against a writer made from its description."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from curator.embedders.containers import Reader, tensors


def _integer(value: int) -> bytes:
    size = max(1, (abs(value).bit_length() + 7) // 8)
    return bytes([size | (0x80 if value < 0 else 0)]) + abs(value).to_bytes(size, "little")


def _number(value: float) -> bytes:
    mantissa, exponent = np.frexp(value)
    return _integer(int(mantissa * 2**53)) + _integer(int(exponent) - 53)


@given(st.integers(-(2**63), 2**63))
def test_integers(value: int) -> None:
    assert Reader(_integer(value)).integer() == value


@given(st.floats(-1e6, 1e6))
def test_numbers(value: float) -> None:
    assert Reader(_number(value)).number() == value


def test_a_matrix() -> None:
    data = _integer(-2) + _integer(-3) + b"".join(_number(v) for v in range(6))
    assert Reader(data).matrix().tolist() == [[0, 1, 2], [3, 4, 5]]


def test_tensors_are_found_between_other_things() -> None:
    values = np.linspace(-1, 1, 12, dtype=np.float32)
    head = b"".join(_integer(v) for v in (2, 3, 1, 2, 2))
    found = tensors(b"words" + head + values.tobytes() + b"\x01\x02more" + head + values[::-1].tobytes())
    assert [part.tolist() for part in found] == [values.tolist(), values[::-1].tolist()]


@pytest.mark.parametrize("data", [b"", b"\x00", b"\x03\x01"])
def test_what_is_no_integer_is_refused(data: bytes) -> None:
    with pytest.raises(ValueError, match=r"integer|number"):
        Reader(data).integer()
