"""The letter strings a check is made on, and their states."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from encoder_forge.source.model import Source

MAX_EXACT_STRINGS = 4096
SAMPLES = 4096


@dataclass(frozen=True, slots=True, eq=False)
class LetterStrings:
    """Letter strings with the weights under which figures are averaged over them.

    Attributes
    ----------
    letters : ndarray of int, shape (x, block)
        Letter numbers, letter 0 of the block first.
    weights : ndarray, shape (x,)
        Sum one: probabilities when `exact`, else shares among the sample.
    exact : bool
        Whether all strings are there.
    samples : int
        Strings drawn, repeats included; 0 when exact.
    """

    letters: np.ndarray
    weights: np.ndarray
    exact: bool
    samples: int


def choose_strings(source: Source, block: int, rng: np.random.Generator) -> LetterStrings:
    """Return all letter strings where they number at most 4,096, else a sample drawn from the priors.

    Parameters
    ----------
    source : Source
    block : int
    rng : numpy.random.Generator
    """
    count = len(source.letters)
    if count**block <= MAX_EXACT_STRINGS:
        numbers = np.indices([count] * block).reshape(block, -1).T
        return LetterStrings(numbers, np.prod(source.priors[numbers], axis=1), True, 0)
    drawn = rng.choice(count, size=(SAMPLES, block), p=source.priors)
    letters, repeats = np.unique(drawn, axis=0, return_counts=True)
    return LetterStrings(letters, repeats / SAMPLES, False, SAMPLES)


def string_components(source: Source, letters: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return one letter string's state as a mixture of orthogonal pure states on the block's wires.

    Parameters
    ----------
    source : Source
    letters : ndarray of int, shape (block,)

    Returns
    -------
    states : ndarray of complex, shape (2^(block*q), r)
        One component a column; r = 1 for pure letters.
    weights : ndarray, shape (r,)
    """
    states, weights = np.ones((1, 1), dtype=complex), np.ones(1)
    for number in letters:
        letter = source.letters[number]
        padded = np.zeros((1 << source.letter_qubits, len(letter.weights)), dtype=complex)
        padded[: letter.vectors.shape[1]] = letter.vectors.T
        states = np.einsum("ar,bs->abrs", states, padded).reshape(len(states) * len(padded), -1)
        weights = np.outer(weights, letter.weights).ravel()
    return states, weights


def pure_states(source: Source, letters: np.ndarray) -> np.ndarray:
    """Return the states of many strings of pure letters, shape (2^(block*q), x), one a column."""
    table = np.zeros((1 << source.letter_qubits, len(source.letters)), dtype=complex)
    for number, letter in enumerate(source.letters):
        table[: letter.vectors.shape[1], number] = letter.vectors[0]
    states = np.ones((1, len(letters)), dtype=complex)
    for column in letters.T:
        states = np.einsum("ax,bx->abx", states, table[:, column]).reshape(-1, len(letters))
    return states


def sample_interval(values: np.ndarray, weights: np.ndarray, samples: int) -> tuple[float, float]:
    """Return an interval for the mean of values in [0, 1] that holds with at least 95 %.

    Empirical Bernstein bound, two-sided (Maurer and Pontil, COLT 2009, theorem 4): valid at any sample size,
    whatever the distribution.
    """
    mean = float(weights @ values)
    variance = float(weights @ (values - mean) ** 2) * samples / (samples - 1)
    log = math.log(2 / 0.025)
    half = math.sqrt(2 * variance * log / samples) + 7 * log / (3 * (samples - 1))
    return max(0.0, mean - half), min(1.0, mean + half)
