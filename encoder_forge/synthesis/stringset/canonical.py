"""Canonical forms: one mask for all sets that differ by wire order and X flips.

Wire permutations and X cost nothing, so a search over sets is a search over *classes* of sets under the
hyperoctahedral group of order 2^n n! (3,840 for five wires). The canonical form of a set is the smallest
integer among the masks of its class.

Up to four wires a table over all 2^16 masks holds it. On five wires a mask falls into two halves of 16 bits
along any of five wires, either half first: ten splits. With the first half on top, an image's upper half is
an image of that half under the 384 elements of the four-wire group, so the smallest upper half is found by
table. Elements that reach it form a coset of its stabiliser; the smallest lower half over that coset is again
found by table, one for each of the 402 classes of halves, filled on first use. That is O(1) table look-ups
for a mask, a quarter of a microsecond or so, in place of 3,840 images.
"""

from __future__ import annotations

from functools import cache
from itertools import permutations

import numpy as np

from encoder_forge.synthesis.stringset.masks import MAX_WIRES, swap_wires

_CHUNK = 1 << 15
"""Masks treated at once: the ten splits of a chunk stay in the processor's cache."""


@cache
def group_positions(wires: int) -> np.ndarray:
    """Return where each element of the group sends each string: shape (2^n n!, 2^n), the identity first.

    >>> group_positions(3).shape
    (48, 8)
    """
    strings = np.arange(1 << wires)
    rows: list[np.ndarray] = []
    for order in permutations(range(wires)):
        moved = np.zeros_like(strings)
        for source, destination in enumerate(order):
            moved |= ((strings >> (wires - 1 - source)) & 1) << (wires - 1 - destination)
        rows.extend(moved ^ flips for flips in range(1 << wires))
    positions = np.array(rows)
    positions.setflags(write=False)
    return positions


class SmallForms:
    """Canonical forms of every mask of at most four wires, by table.

    Attributes
    ----------
    low, high : ndarray of uint16, shape (2^n n!, 256)
        Image of a mask's lower and upper byte under each group element; their union is the mask's image.
    form : ndarray of uint16, shape (2^(2^n),)
        Canonical form of each mask.
    element : ndarray of int, same shape
        A group element that takes the mask to its canonical form.
    kind : ndarray of int, same shape
        Number of the mask's class, classes counted by rising canonical form.
    """

    def __init__(self, wires: int) -> None:
        positions = group_positions(wires)
        self.low = _byte_images(positions[:, :8])
        self.high = _byte_images(positions[:, 8:])
        count = 1 << (1 << wires)
        self.form = np.zeros(count, dtype=np.uint16)
        self.element = np.zeros(count, dtype=np.int64)
        self.kind = np.full(count, -1, dtype=np.int64)
        backwards = _inverse_elements(positions)
        self._stabilisers: list[np.ndarray] = []
        for mask in range(count):
            if self.kind[mask] >= 0:
                continue  # an image of a smaller mask
            images = self.low[:, mask & 255] | self.high[:, mask >> 8]
            self.form[images] = mask
            self.element[images] = backwards
            self.kind[images] = len(self._stabilisers)
            self._stabilisers.append(np.flatnonzero(images == mask))
        self._smallest = np.zeros((len(self._stabilisers), count if wires == 4 else 0), dtype=np.uint16)
        self._filled = np.zeros(len(self._stabilisers), dtype=bool)

    def smallest_images(self, kinds: np.ndarray, masks: np.ndarray) -> np.ndarray:
        """Return the smallest image of each mask under the stabiliser of the class `kinds` (four wires)."""
        for kind in np.flatnonzero(np.bincount(kinds, minlength=len(self._filled)) * ~self._filled):
            row = self._smallest[kind]
            row[:] = 0xFFFF
            for element in self._stabilisers[kind]:
                images = self.high[element][:, None] | self.low[element][None, :]
                np.minimum(row, images.reshape(-1), out=row)
            self._filled[kind] = True
        return self._smallest[kinds, masks]


@cache
def small_forms(wires: int) -> SmallForms:
    """Return the tables for at most four wires, built once a process (about 20 ms for four)."""
    return SmallForms(wires)


def canonical(masks: np.ndarray, wires: int) -> np.ndarray:
    """Return the canonical form of each set.

    Parameters
    ----------
    masks : ndarray of uint32, shape (count,)
    wires : int
        At most five.

    Returns
    -------
    ndarray of uint32, shape (count,)
        Smallest mask of each set's class.

    Examples
    --------
    >>> canonical(np.array([0b1010, 0b1001], dtype=np.uint32), 2).tolist()
    [3, 6]
    """
    masks = np.asarray(masks, dtype=np.uint32)
    if wires > MAX_WIRES:
        raise ValueError(f"canonical forms reach {MAX_WIRES} wires, not {wires}")
    if wires < MAX_WIRES:
        return small_forms(wires).form[masks].astype(np.uint32)
    result = np.empty_like(masks)
    for start in range(0, len(masks), _CHUNK):
        result[start : start + _CHUNK] = _canonical_chunk(masks[start : start + _CHUNK])
    return result


def orbit(mask: int, wires: int) -> np.ndarray:
    """Return the images of one set under every element of the group, repeats included, by brute force."""
    positions = group_positions(wires)
    members = np.array([i for i in range(1 << wires) if (mask >> i) & 1], dtype=np.int64)
    return np.bitwise_or.reduce(np.uint32(1) << positions[:, members].astype(np.uint32), axis=1, initial=0)


def _canonical_chunk(masks: np.ndarray) -> np.ndarray:
    tables = small_forms(4)
    first, second = _splits(masks)
    upper = tables.form[first]
    best = upper.min(axis=0)
    split, column = np.nonzero(upper == best)
    half, rest = first[split, column], second[split, column]
    element = tables.element[half]
    moved = tables.low[element, rest & 255] | tables.high[element, rest >> 8]
    lower = np.full(len(masks), 0xFFFF, dtype=np.uint16)
    np.minimum.at(lower, column, tables.smallest_images(tables.kind[half], moved))
    return (best.astype(np.uint32) << np.uint32(16)) | lower


def _splits(masks: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return both halves of each mask along each wire, either one first: two arrays (10, count) of uint16."""
    first = np.empty((2 * MAX_WIRES, len(masks)), dtype=np.uint16)
    second = np.empty_like(first)
    for wire in range(MAX_WIRES):
        leading = swap_wires(masks, 0, wire, MAX_WIRES)
        first[2 * wire] = second[2 * wire + 1] = leading & np.uint32(0xFFFF)
        second[2 * wire] = first[2 * wire + 1] = leading >> np.uint32(16)
    return first, second


def _byte_images(positions: np.ndarray) -> np.ndarray:
    """Return the union of moved bits for each of 256 bytes; positions has shape (elements, at most 8)."""
    images = np.zeros((len(positions), 256), dtype=np.uint16)
    for bit in range(positions.shape[1]):
        holders = (np.arange(256) >> bit) & 1
        images |= (holders[None, :] << positions[:, bit][:, None]).astype(np.uint16)
    return images


def _inverse_elements(positions: np.ndarray) -> np.ndarray:
    """Return for each group element the number of its inverse."""
    number = {row.tobytes(): i for i, row in enumerate(np.ascontiguousarray(positions))}
    return np.array([number[np.argsort(row).astype(positions.dtype).tobytes()] for row in positions])
