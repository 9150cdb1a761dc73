"""Entropy, its variance and purity of a spectrum, in bits."""

from __future__ import annotations

import numpy as np


def entropy_bits(probabilities: np.ndarray) -> float:
    """Return -sum p log2 p, with 0 log2 0 = 0: Shannon's of a distribution, von Neumann's of a spectrum.

    >>> entropy_bits(np.array([0.5, 0.25, 0.25, 0.0]))
    1.5
    """
    p = probabilities[probabilities > 0]
    return max(0.0, float(-np.sum(p * np.log2(p))))


def entropy_variance_bits2(probabilities: np.ndarray) -> float:
    """Return V = sum p (log2 p + S)^2, the spread of the surprise -log2 p; zero for a uniform spectrum.

    It sets how fast long blocks approach S qubits a letter, see `second_order`.

    >>> entropy_variance_bits2(np.array([0.5, 0.5]))
    0.0
    """
    p = probabilities[probabilities > 0]
    logs = np.log2(p)
    return float(np.sum(p * (logs - np.sum(p * logs)) ** 2))


def purity(probabilities: np.ndarray) -> float:
    """Return sum p^2, the trace of the squared state.

    >>> purity(np.array([0.5, 0.5]))
    0.5
    """
    return float(np.sum(probabilities**2))
