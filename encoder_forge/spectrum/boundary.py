"""The K heaviest eigenstrings of an iid block, equal weights taken in lexicographic order.

All strings over a boundary weight belong to the set, and of those at it the first few: the strings before one
string b. Numbers of strings are exact integers.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from encoder_forge.spectrum.letter import tie_groups
from encoder_forge.spectrum.multinomials import compositions
from encoder_forge.tolerances import EIGENVALUE_TIE


@dataclass(frozen=True, slots=True, eq=False)
class LetterLevels:
    """Eigen-indices of non-zero eigenvalue, and the distinct levels they fall into.

    Attributes
    ----------
    level_of_index : ndarray of int, shape (R,)
        Rising; eigen-indices with equal eigenvalues share a level.
    logs : ndarray, shape (D,)
        log2 of the distinct eigenvalues, falling.
    """

    level_of_index: np.ndarray
    logs: np.ndarray

    @property
    def multiplicities(self) -> list[int]:
        """How many eigen-indices each level has."""
        return np.bincount(self.level_of_index).tolist()


def letter_levels(eigenvalues: np.ndarray) -> LetterLevels:
    """Return the levels of a letter.

    >>> letter_levels(np.array([0.5, 0.25, 0.25, 0.0])).level_of_index.tolist()
    [0, 1, 1]
    """
    falling = eigenvalues[eigenvalues > 0]
    groups = tie_groups(falling)
    index = np.repeat(np.arange(len(groups)), [stop - start for start, stop in groups])
    return LetterLevels(index, np.log2([falling[start] for start, _ in groups]))


@dataclass(frozen=True, slots=True, eq=False)
class BoundarySet:
    """The set of the K heaviest strings.

    Attributes
    ----------
    log_weight : float
        log2 of the boundary weight.
    first_out : tuple of int
        Eigen-indices of b, the lexicographically first string of the boundary weight that is left out.
    tolerance : float
        Log-weights closer than this are equal.
    """

    log_weight: float
    first_out: tuple[int, ...]
    tolerance: float


def full_types(levels: LetterLevels, block: int) -> np.ndarray:
    """Return the counts of every type of a block, shape (types, D)."""
    heads = compositions(block, len(levels.logs) - 1)
    return np.column_stack([heads, block - heads.sum(axis=1)])


def boundary_set(levels: LetterLevels, block: int, dimension: int) -> BoundarySet:
    """Return the set of the `dimension` heaviest strings.

    Parameters
    ----------
    levels : LetterLevels
    block : int
    dimension : int
        K, at least one and less than the number of strings of non-zero weight.

    Notes
    -----
    O(T log T) for T types, and O(n R B) to find b among the boundary's B types.
    """
    types = full_types(levels, block)
    logs = types @ levels.logs
    tolerance = 1.5 * EIGENVALUE_TIE + 8 * np.finfo(float).eps * float(abs(logs).max())
    order = np.argsort(-logs, kind="stable")
    left, start = dimension, 0
    while True:
        stop = start
        while stop < len(order) and logs[order[start]] - logs[order[stop]] <= tolerance:
            stop += 1
        tied = [tuple(types[i].tolist()) for i in order[start:stop]]
        size = sum(_strings_of(t, levels.multiplicities) for t in tied)
        if left < size:
            return BoundarySet(float(logs[order[start]]), _unranked(tied, levels, block, left), tolerance)
        left, start = left - size, stop


def _strings_of(counts: tuple[int, ...], multiplicities: list[int]) -> int:
    """Return how many strings have a type: a multinomial times g^k for each degenerate level."""
    number, left = 1, sum(counts)
    for k, g in zip(counts, multiplicities, strict=True):
        number *= math.comb(left, k) * g**k
        left -= k
    return number


def _unranked(tied: list[tuple[int, ...]], levels: LetterLevels, block: int, rank: int) -> tuple[int, ...]:
    """Return the string of a set of types that has `rank` others before it."""
    string: list[int] = []
    for _ in range(block):
        for index, level in enumerate(levels.level_of_index.tolist()):
            left = [_without(t, level) for t in tied if t[level] > 0]
            number = sum(_strings_of(t, levels.multiplicities) for t in left)
            if rank < number:
                string.append(index)
                tied = left
                break
            rank -= number
    return tuple(string)


def _without(counts: tuple[int, ...], level: int) -> tuple[int, ...]:
    return (*counts[:level], counts[level] - 1, *counts[level + 1 :])
