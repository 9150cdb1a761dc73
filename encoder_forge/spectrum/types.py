"""Exact sums over type classes: the weight of the best subspace of a long block, without listing strings."""

from __future__ import annotations

import math

import numpy as np

from encoder_forge.errors import InputError, LimitError
from encoder_forge.spectrum.ladders import HeadsAndTails, Ladder, SortedTypes, distinct_levels, tail_entries

LONGEST = 3_000_000
"""Longest block at all; with two levels its sums take about 0.5 GiB and a few seconds."""
MAX_SORTED_TYPES = 300_000
"""Types of three or more levels are listed up to here, and beyond looped over by heads and tails."""
MAX_HEADS = 1_000_000
"""Most heads looped over: about 0.3 GiB, and some seconds a question."""
MAX_TAIL_ENTRIES = 8_000_000
"""Most entries of a tail table, about 0.13 GiB."""
_SLACK = 2e-15
"""A weight this much under a target reaches it: rounding of a sum of order one."""
_WHOLE = 2.0**40
"""Below, dimensions are exact enough as floats to be rounded up to the integers they are."""


class TypeLadder:
    """Weights of the best subspaces of an iid block.

    Parameters
    ----------
    eigenvalues : ndarray, shape (d,)
        Of the average letter; zeros and repeats are welcome. For model `block`, those of the block state.
    block : int
        Letters in the block, 1 for model `block`.

    Raises
    ------
    InputError
        For a block length below one.
    LimitError
        For a block too long to sum; the message says what fits.

    Notes
    -----
    The best subspace of dimension K is spanned by the K heaviest eigenstrings (Schumacher, Phys. Rev. A 51,
    2738 (1995)). Strings of one type weigh the same and number a multinomial, so that sums run over types:
    n + 1 of them for two levels, C(n+D-1, D-1) for D. See `ladders` for the two ways and their cost.

    Examples
    --------
    Three letters |0> or |+>, as often one as the other, kept in two qubits:

    >>> ladder = TypeLadder(np.array([0.8535533905932737, 0.1464466094067263]), 3)
    >>> round(ladder.weight(2), 10)
    0.9419417382
    >>> ladder.least_kept(0.94)
    2
    """

    def __init__(self, eigenvalues: np.ndarray, block: int) -> None:
        if block < 1:
            raise InputError(f"--block {block}: accepted: a whole number of letters, 1 or more")
        levels = distinct_levels(eigenvalues)
        refuse_too_long(len(levels.logs), block)
        self.block = block
        self.rank_log2: float = block * math.log2(int(levels.multiplicities.sum()))
        """log2 of how many strings have any weight."""
        self._ladder: Ladder = (
            SortedTypes(levels, block) if is_sorted(len(levels.logs), block) else HeadsAndTails(levels, block)
        )

    def weight(self, kept_qubits: float) -> float:
        """Return P, the weight of the best 2^kept_qubits strings.

        Parameters
        ----------
        kept_qubits : float
            log2 of the kept dimension K; not necessarily whole.
        """
        return self._ladder.weight(float(kept_qubits)) if kept_qubits < self.rank_log2 else 1.0

    def weight_of(self, dimension: int) -> float:
        """Return P of the best `dimension` strings, an integer of any size."""
        return self.weight(math.log2(dimension)) if dimension > 0 else 0.0

    def least_dimension_log2(self, target: float) -> float:
        """Return log2 of the least kept dimension K whose weight reaches `target`.

        Exact while K < 2^40; above, K is taken as a real number, which moves the logarithm by less than
        1e-12.
        """
        log_dimension = min(self._ladder.log_dimension(target - _SLACK), self.rank_log2)
        dimension = 2.0 ** min(log_dimension, 1000.0)
        if dimension >= _WHOLE:
            return log_dimension
        return math.log2(max(1, math.ceil(dimension * (1 - 1e-12) - 1e-9)))

    def least_kept(self, target: float) -> int:
        """Return the least number of kept qubits m with weight(m) >= target.

        Zero where one string is enough.
        """
        kept = max(0, math.ceil(self.least_dimension_log2(target) - 1e-9))
        while kept > 0 and self.weight(kept - 1) >= target - _SLACK:
            kept -= 1
        while self.weight(kept) < target - _SLACK:
            kept += 1
        return kept


def is_sorted(levels: int, block: int) -> bool:
    """Return whether the types of a block are few enough to be listed."""
    return levels <= 2 or block == 1 or math.comb(block + levels - 1, levels - 1) <= MAX_SORTED_TYPES


def longest_block(levels: int) -> int:
    """Return the longest block that can be summed for letters with this many distinct eigenvalues.

    >>> [longest_block(levels) for levels in (1, 2, 3, 4, 8)]
    [3000000, 3000000, 3997, 1412, 26]
    """
    if levels <= 2:
        return LONGEST
    low, high = 1, 10_000
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (middle, high) if _fits(levels, middle) else (low, middle)
    return low


def _fits(levels: int, block: int) -> bool:
    return is_sorted(levels, block) or (
        math.comb(block + levels - 2, levels - 2) <= MAX_HEADS and tail_entries(block) <= MAX_TAIL_ENTRIES
    )


def refuse_too_long(levels: int, block: int) -> None:
    """Refuse a block that is too long to sum.

    Raises
    ------
    LimitError
    """
    longest = longest_block(levels)
    if block > longest and block > 1:
        raise LimitError(
            f"a block of {block} letters with {levels} distinct eigenvalue{'s' * (levels != 1)} is too long "
            f"to be summed; accepted: up to {longest}"
        )
