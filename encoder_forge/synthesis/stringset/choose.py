"""Choose among equally good sets the one whose circuit is cheapest.

An optimal set holds every string above the boundary weight and any of those at it. The cost of a set depends
on its class alone, so few combinations are looked up one by one; when there are very many, the classes are
walked by rising cost and each one's images are held against the two conditions.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import comb

import numpy as np

from encoder_forge.synthesis.stringset.canonical import group_positions
from encoder_forge.synthesis.stringset.masks import strings_of
from encoder_forge.synthesis.stringset.table import ClassTable, class_table

ENUMERATED = 1 << 17
"""Up to so many combinations are looked up one by one (a few hundredths of a second)."""

_BATCH = 64
"""Classes whose images are formed at once (3,840 images of up to 16 strings each)."""


@dataclass(frozen=True, slots=True)
class Choice:
    """A cheapest set.

    Attributes
    ----------
    mask : int
        Its strings.
    cost : int
        Two-qubit gates that carry it onto a subcube, the minimum over all admissible sets.
    considered : int
        Sets looked up, or images of classes held against the conditions.
    """

    mask: int
    cost: int
    considered: int


def cheapest_set(required: int, free: int, wires: int, kept: int) -> Choice:
    """Return the cheapest set of 2^kept strings that holds `required` and is filled from `free`.

    Parameters
    ----------
    required, free : int
        Masks, disjoint.
    wires, kept : int
        At most five; 2^kept strings are chosen.

    Returns
    -------
    Choice
        The smallest mask among the cheapest.

    Raises
    ------
    ValueError
        If no set of this size meets the conditions.

    Examples
    --------
    >>> cheapest_set(required=0b00010111, free=0, wires=3, kept=2)
    Choice(mask=23, cost=5, considered=1)
    """
    missing = (1 << kept) - required.bit_count()
    if required & free or missing < 0 or missing > free.bit_count():
        raise ValueError(
            f"no set of {1 << kept} strings holds {required.bit_count()} required ones and is filled "
            f"from {free.bit_count()} free ones"
        )
    table = class_table(wires, kept)
    if comb(free.bit_count(), missing) <= ENUMERATED:
        return _by_enumeration(table, required, free, missing)
    return _by_classes(table, required, free)


def subsets(mask: int, size: int) -> np.ndarray:
    """Return the masks of all subsets of `mask` with `size` members, rising.

    >>> subsets(0b1011, 2).tolist()
    [3, 9, 10]
    """
    by_size = [np.zeros(1, dtype=np.uint32)] + [np.empty(0, dtype=np.uint32)] * size
    for string in strings_of(mask):
        bit = np.uint32(1 << string)
        for count in range(size, 0, -1):
            by_size[count] = np.concatenate([by_size[count], by_size[count - 1] | bit])
    return np.sort(by_size[size])


def _by_enumeration(table: ClassTable, required: int, free: int, missing: int) -> Choice:
    masks = subsets(free, missing) | np.uint32(required)
    costs = table.costs_of(masks)
    best = int(np.argmin(costs))  # the first of equals: the smallest mask
    return Choice(int(masks[best]), int(costs[best]), len(masks))


def _by_classes(table: ClassTable, required: int, free: int) -> Choice:
    positions = group_positions(table.wires).astype(np.uint32)
    allowed = np.uint32(required | free)
    considered = 0
    for cost in range(table.largest_cost + 1):
        layer = table.layer(cost)
        winners = []
        for start in range(0, len(layer), _BATCH):
            batch = layer[start : start + _BATCH].tolist()
            members = np.array([strings_of(form) for form in batch], dtype=np.intp)
            images = np.bitwise_or.reduce(np.uint32(1) << positions[:, members], axis=2)
            considered += images.size
            fits = (images & np.uint32(required) == required) & (images & ~allowed == 0)
            winners.extend(images[fits].tolist())
        if winners:
            return Choice(min(winners), cost, considered)
    raise ValueError("no class of sets meets the conditions")
