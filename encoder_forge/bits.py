"""Bit order: the only module that knows about it.

Strings and amplitudes are written as kets are: wire 0 leftmost, the most significant bit of a basis index.
Qiskit counts the other way round (qubit 0 is the least significant bit of a matrix index); `flip_endian`
passes between the two.
"""

from __future__ import annotations

import numpy as np


def bit_of(index: int, wire: int, wires: int) -> int:
    """Return the bit that basis string `index` of `wires` wires has on `wire` (0 is leftmost).

    >>> [bit_of(0b100, w, 3) for w in range(3)]
    [1, 0, 0]
    """
    return (index >> (wires - 1 - wire)) & 1


def wire_mask(wire: int, wires: int) -> int:
    """Return the basis index whose only set bit lies on `wire`.

    >>> wire_mask(0, 3)
    4
    """
    return 1 << (wires - 1 - wire)


def pick_bits(indices: np.ndarray, picked: tuple[int, ...], wires: int) -> np.ndarray:
    """Return, for each basis index, the number that the `picked` wires spell, the first most significant.

    >>> pick_bits(np.array([0b101, 0b011]), (2, 0), 3).tolist()
    [3, 2]
    """
    result = np.zeros_like(indices)
    for wire in picked:
        result = (result << 1) | ((indices >> (wires - 1 - wire)) & 1)
    return result


def ket(index: int, wires: int) -> str:
    """Spell a basis index as a bit string, wire 0 leftmost.

    >>> ket(4, 3)
    '100'
    """
    return format(index, f"0{wires}b") if wires else ""


def flip_endian(matrix: np.ndarray, wires: int) -> np.ndarray:
    """Reorder the rows and columns of a 2^wires square matrix between our bit order and Qiskit's.

    The map is its own inverse. A vector of length 2^wires is reordered likewise.
    """
    order = np.arange(1 << wires)
    flipped = np.zeros_like(order)
    for wire in range(wires):
        flipped |= ((order >> wire) & 1) << (wires - 1 - wire)
    return matrix[flipped] if matrix.ndim == 1 else matrix[np.ix_(flipped, flipped)]
