"""Types of an iid block in order of their weight, and the sums over them from the heaviest down.

A type says how often each distinct eigenvalue occurs in a string; all its strings have one weight. `log`
means log2 throughout, since a million letters have more strings than any float can count.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from encoder_forge.spectrum.letter import tie_groups
from encoder_forge.spectrum.multinomials import Extended, compositions, log_multinomial

_LN2 = np.log(Extended(2))


@dataclass(frozen=True, slots=True, eq=False)
class Levels:
    """The distinct non-zero eigenvalues of a letter, falling.

    Attributes
    ----------
    logs : ndarray of extended float, shape (D,)
        log2 of the eigenvalues.
    multiplicities : ndarray of int, shape (D,)
    probabilities : ndarray of extended float, shape (D,)
        Multiplicity times eigenvalue; sum one.
    """

    logs: np.ndarray
    multiplicities: np.ndarray
    probabilities: np.ndarray


def distinct_levels(eigenvalues: np.ndarray) -> Levels:
    """Merge equal eigenvalues and drop zeros.

    >>> distinct_levels(np.array([0.5, 0.25, 0.25, 0.0])).multiplicities.tolist()
    [1, 2]
    """
    falling = np.sort(eigenvalues[eigenvalues > 0])[::-1].astype(Extended)
    falling /= falling.sum()
    groups = tie_groups(falling)
    shares = np.array([falling[start:stop].sum() for start, stop in groups], dtype=Extended)
    counts = np.array([stop - start for start, stop in groups])
    return Levels(np.log2(shares / counts), counts, shares)


class Ladder(ABC):
    """What can be asked of the types of a block."""

    @abstractmethod
    def weight(self, log_dimension: float) -> float:
        """Return the weight of the heaviest 2^log_dimension strings."""

    @abstractmethod
    def log_dimension(self, target: float) -> float:
        """Return log2 of how many of the heaviest strings reach the weight `target`, a real number."""


class SortedTypes(Ladder):
    """All types listed and sorted: each question is then a search in cumulative sums.

    Parameters
    ----------
    levels : Levels
    block : int

    Notes
    -----
    O(T log T) for T types, O(log T) a question. Between two rungs the sums are linear in the dimension: a
    partly filled class weighs its share.
    """

    def __init__(self, levels: Levels, block: int) -> None:
        counts = _types(len(levels.logs), block)
        logs = sum((k * log for k, log in zip(counts, levels.logs, strict=True)), np.zeros(1, Extended))
        order = np.argsort(-logs, kind="stable")
        logs, counts = logs[order], [k[order] for k in counts]
        log_mass = log_multinomial(counts, list(levels.probabilities))
        self._mass = np.exp(log_mass)
        self._log_count = log_mass / _LN2 - logs
        self._below = np.concatenate([[Extended(0)], np.cumsum(self._mass, dtype=Extended)])
        self._beyond = np.cumsum(self._mass[::-1], dtype=Extended)[::-1]
        self._log_below = np.concatenate([[Extended(-np.inf)], np.logaddexp2.accumulate(self._log_count)])

    def weight(self, log_dimension: float) -> float:
        """Return the weight of the heaviest 2^log_dimension strings."""
        rung = int(np.searchsorted(self._log_below, log_dimension, side="right")) - 1
        if rung >= len(self._mass):
            return 1.0
        share = np.exp2(log_dimension - self._log_count[rung])
        share *= 1 - np.exp2(self._log_below[rung] - log_dimension)
        part = share * self._mass[rung]
        # Close to one, what is missing has more digits than what is there.
        if self._below[rung] > 0.5:
            return min(1.0, float(1 - (self._beyond[rung] - part)))
        return float(self._below[rung] + part)

    def log_dimension(self, target: float) -> float:
        """Return log2 of how many of the heaviest strings reach the weight `target`, a real number."""
        target = min(Extended(target), self._below[-1])
        rung = int(np.searchsorted(self._below, target, side="left")) - 1
        share = (target - self._below[rung]) / self._mass[rung]
        return float(np.logaddexp2(self._log_below[rung], np.log2(share) + self._log_count[rung]))


def _types(levels: int, block: int) -> list[np.ndarray]:
    """Return the counts of every type, one array a level."""
    if block == 1:
        return list(np.eye(levels, dtype=np.int64))
    heads = compositions(block, levels - 1)
    return [*heads.T, block - heads.sum(axis=1)]


class HeadsAndTails(Ladder):
    """Types of three or more levels, never listed: a loop over all counts but two, binomial tails for those.

    Parameters
    ----------
    levels : Levels
    block : int

    Notes
    -----
    A head fixes the counts of all levels but the first two; the r letters left have i times the second
    level. For a threshold t, the strings of log-weight at least t are, head by head, those with i up to a
    bound, so that their number and weight are looked up in cumulative tables. Bisecting t until it cannot
    move encloses the dimension asked for; what lies between has weight 2^t a string, ties included. O(n^2)
    memory for the tables, O(H) for H heads, about 60 H steps a question.
    """

    def __init__(self, levels: Levels, block: int) -> None:
        self._range = (float(block * levels.logs[-1]) - 1, float(block * levels.logs[0]) + 1)
        tail = levels.probabilities[:2].sum()
        heads = compositions(block, len(levels.logs) - 2)
        counts = list(heads.T)
        left = block - heads.sum(axis=1)
        log_mass = log_multinomial([*counts, left], [*levels.probabilities[2:], tail])
        logs = sum((k * log for k, log in zip(counts, levels.logs[2:], strict=True)), np.zeros(1, Extended))
        self._mass = np.exp(log_mass).astype(float)
        self._log_count = (log_mass / _LN2 - logs - left * np.log2(tail)).astype(float)
        self._top = (logs + left * levels.logs[0]).astype(float)
        self._step = float(levels.logs[0] - levels.logs[1])
        self._left = left
        # Entry r(r+1)/2 + r + i + 1 is the sum up to i of r letters; the one before i = 0 is the empty sum.
        self._offset = left * (left + 3) // 2 + 1
        self._log_tails, self._tails = _tail_tables(levels, block)

    def weight(self, log_dimension: float) -> float:
        """Return the weight of the heaviest 2^log_dimension strings."""
        if log_dimension >= self._log_number(self._range[0]):
            return 1.0
        low, high = self._enclose(lambda threshold: self._log_number(threshold) <= log_dimension)
        above = self._log_number(high)
        if above >= log_dimension:
            return min(1.0, self._weight_above(high))
        rest = log_dimension + np.log2(-np.expm1((above - log_dimension) * float(_LN2)))
        return min(1.0, self._weight_above(high) + float(np.exp2(rest + low)))

    def log_dimension(self, target: float) -> float:
        """Return log2 of how many of the heaviest strings reach the weight `target`, a real number."""
        target = min(target, self._weight_above(self._range[0]))
        low, high = self._enclose(lambda threshold: self._weight_above(threshold) < target)
        missing = target - self._weight_above(high)
        return float(np.logaddexp2(self._log_number(high), np.log2(missing) - low))

    def _enclose(self, holds: Callable[[float], bool]) -> tuple[float, float]:
        """Return neighbouring floats around the threshold above which a condition holds."""
        low, high = self._range
        while True:
            middle = low + (high - low) / 2
            if not low < middle < high:
                return low, high
            low, high = (low, middle) if holds(middle) else (middle, high)

    def _places(self, threshold: float) -> np.ndarray:
        """Return, for each head, the table entry that sums its strings of log-weight at least a threshold."""
        last = np.floor((self._top - threshold) / self._step)
        return self._offset + np.clip(last, -1, self._left).astype(np.int64)

    def _log_number(self, threshold: float) -> float:
        logs = self._log_count + self._log_tails[self._places(threshold)]
        peak = logs.max()
        return float(peak + np.log2(np.exp2(logs - peak).sum())) if peak > -np.inf else -np.inf

    def _weight_above(self, threshold: float) -> float:
        return float(self._mass @ self._tails[self._places(threshold)])


def tail_entries(block: int) -> int:
    """Return how many entries each tail table has."""
    return (block + 1) * (block + 4) // 2


def _tail_tables(levels: Levels, block: int) -> tuple[np.ndarray, np.ndarray]:
    """Return the sums of number (log2) and of probability over i, for every r, laid end to end.

    For r letters of the first two levels, i of them the second: numbers C(r, i) g_0^(r-i) g_1^i and binomial
    probabilities.
    """
    pair = levels.probabilities[:2] / levels.probabilities[:2].sum()
    logs = np.log2(pair / levels.multiplicities[:2])
    log_tails = np.full(tail_entries(block), -np.inf)
    tails = np.zeros(tail_entries(block))
    start = 0
    for r in range(block + 1):
        second = np.arange(r + 1)
        log_mass = log_multinomial([r - second, second], list(pair))
        log_count = log_mass / _LN2 - (r - second) * logs[0] - second * logs[1]
        inside = slice(start + 1, start + r + 2)
        log_tails[inside] = np.logaddexp2.accumulate(log_count)
        tails[inside] = np.cumsum(np.exp(log_mass))
        start += r + 2
    return log_tails, tails
