"""Multinomial probabilities for large counts, to nearly full precision.

The textbook way, a difference of log-gammas, loses digits as the counts grow: at a million trials the terms
are about 1e7 and cancel to about 10, so that nine of sixteen digits are gone. The saddle-point form sums
small terms only: C. Loader, Fast and Accurate Computation of Binomial Probabilities (2000). Only the
difference between a count and its mean is taken in extended precision, where the machine has it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

Extended = np.longdouble

_SERIES = (1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360)
"""Stirling's series: ln k! = (k + 1/2) ln k - k + ln(2 pi)/2 + 1/(12 k) - 1/(360 k^3) + ..."""
_SMALL = 16
_HALF_LOG_2PI = 0.5 * math.log(2 * math.pi)


def stirling_errors(counts: np.ndarray) -> np.ndarray:
    """Return ln k! minus Stirling's formula (k + 1/2) ln k - k + ln(2 pi)/2, and zero for k = 0.

    >>> round(float(stirling_errors(np.array([1]))[0]), 14)
    0.08106146679533
    """
    inverse = 1.0 / np.maximum(counts, 1)
    inverse2 = inverse * inverse
    total = np.zeros_like(inverse)
    for coefficient in reversed(_SERIES):
        total = total * inverse2 + coefficient
    total *= inverse
    small = np.flatnonzero(counts < _SMALL)
    total[small] = _SMALL_ERRORS[counts[small]]
    return total


def _small_error(k: int) -> float:
    """Return the Stirling error of a small count from the factorial itself."""
    x = Extended(max(k, 1))
    half_log_2pi = Extended("0.918938533204672741780329736405617639861")
    return float(np.log(Extended(math.factorial(k))) - (x + Extended(0.5)) * np.log(x) + x - half_log_2pi)


_SMALL_ERRORS = np.array([0.0, *(_small_error(k) for k in range(1, _SMALL))])


def deviances(counts: np.ndarray, means: np.ndarray) -> np.ndarray:
    """Return k ln(k/M) + M - k, by a series without cancellation where k is near M; means are positive.

    With v = (k-M)/(k+M) the series is (k-M) v + 2 k (v^3/3 + v^5/5 + ...).
    """
    distance = (counts - means).astype(float)
    k, m = counts.astype(float), np.broadcast_to(means.astype(float), counts.shape)
    result: np.ndarray = k * np.log(np.maximum(k, 1) / m) - distance
    near = np.flatnonzero(abs(distance) < 0.1 * (k + m))
    k, distance = k[near], distance[near]
    ratio = distance / (k + m[near])
    square = ratio * ratio
    series = np.zeros_like(k)
    for j in range(8, 0, -1):
        series = (series + 1 / (2 * j + 1)) * square
    result[near] = distance * ratio + 2 * k * ratio * series
    return result


def log_multinomial(counts: Sequence[np.ndarray], probabilities: Sequence[np.floating]) -> np.ndarray:
    """Return the natural log of the multinomial probability of many count vectors at once.

    Parameters
    ----------
    counts : sequence of ndarray of int, each of shape (t,)
        One array for each outcome; entries at one place sum to the number of trials.
    probabilities : sequence of extended float
        One for each outcome; positive, sum one.

    Returns
    -------
    ndarray, shape (t,)

    Notes
    -----
    With M_j = n p_j: n!/(prod k_j!) prod p_j^k_j
    = sqrt(2 pi n) / prod' sqrt(2 pi k_j) exp(delta(n) - sum delta(k_j) - sum D(k_j, M_j)),
    the primed product over k_j > 0, delta the Stirling error, D the deviance. O(t) for each outcome.

    Examples
    --------
    >>> three = log_multinomial([np.array([1]), np.array([2])], [Extended(0.25), Extended(0.75)])
    >>> round(float(np.exp(three[0])), 12)
    0.421875
    """
    trials = sum(counts[1:], counts[0])
    if trials.max() == trials.min():
        trials = trials[:1]
    result = stirling_errors(trials) + _half_logs(trials)
    for k, p in zip(counts, probabilities, strict=True):
        means = np.maximum(trials, 1) * Extended(p)
        result = result - (stirling_errors(k) + _half_logs(k) + deviances(k, means))
    return np.where(trials > 0, result, 0.0)


def _half_logs(counts: np.ndarray) -> np.ndarray:
    """Return ln(2 pi k)/2, and zero for k = 0."""
    result: np.ndarray = np.where(counts > 0, np.log(np.maximum(counts, 1)) / 2 + _HALF_LOG_2PI, 0.0)
    return result


def compositions(total: int, parts: int) -> np.ndarray:
    """Return all ways to write numbers up to `total` as `parts` counts, shape (ways, parts).

    Counts sum to at most `total`; what is left belongs to whatever comes after. O(ways * parts).

    >>> compositions(2, 1).tolist()
    [[0], [1], [2]]
    >>> len(compositions(300, 2))
    45451
    """
    table = np.zeros((1, 0), dtype=np.int64)
    left = np.array([total])
    for _ in range(parts):
        repeats = left + 1
        starts = np.repeat(np.cumsum(repeats) - repeats, repeats)
        column = np.arange(len(starts)) - starts
        table = np.column_stack([np.repeat(table, repeats, axis=0), column])
        left = np.repeat(left, repeats) - column
    return table
