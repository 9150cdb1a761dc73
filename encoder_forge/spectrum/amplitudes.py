"""Letters and letter strings as amplitudes, in the computational basis or in an eigenbasis."""

from __future__ import annotations

import numpy as np

from encoder_forge.source.model import Source
from encoder_forge.spectrum.records import TypicalBasis


def component_table(source: Source, rotation: np.ndarray | None = None) -> np.ndarray:
    """Return every letter's components, padded with zeros to one shape.

    Parameters
    ----------
    source : Source
    rotation : ndarray of complex, shape (2^q, 2^q), optional
        Basis to take amplitudes in, one vector a column; the computational basis by default.

    Returns
    -------
    ndarray of complex, shape (letters, 2^q, r)
        Column k of a letter is sqrt(weight) times its k-th eigenvector; r is the largest rank of a letter,
        one when all are pure.
    """
    size = 1 << source.letter_qubits
    rank = max(len(letter.weights) for letter in source.letters)
    table = np.zeros((len(source.letters), size, rank), dtype=complex)
    for number, letter in enumerate(source.letters):
        roots = np.sqrt(letter.weights)
        table[number, : letter.vectors.shape[1], : len(roots)] = letter.vectors.T * roots
    return table if rotation is None else np.einsum("ab,xar->xbr", rotation.conj(), table)


def string_components(table: np.ndarray, letters: np.ndarray) -> np.ndarray:
    """Return the components of letter strings: the tensor products of their letters' components.

    Parameters
    ----------
    table : ndarray of complex, shape (letters, size, r)
        From `component_table`.
    letters : ndarray of int, shape (x, block)
        Letter numbers of each string, letter 0 of the block first.

    Returns
    -------
    ndarray of complex, shape (x, size^block, r^block)
    """
    result = np.ones((len(letters), 1, 1), dtype=complex)
    for place in letters.T:
        result = np.einsum("xar,xbs->xabrs", result, table[place]).reshape(
            len(letters), result.shape[1] * table.shape[1], -1
        )
    return result


def all_strings(source: Source, block: int) -> np.ndarray:
    """Return all letter strings in lexicographic order, shape (letters^block, block).

    >>> from types import SimpleNamespace
    >>> all_strings(SimpleNamespace(letters="ab"), 2).tolist()
    [[0, 0], [0, 1], [1, 0], [1, 1]]
    """
    return np.indices([len(source.letters)] * block).reshape(block, -1).T


def product_vector(factor: np.ndarray, block: int) -> np.ndarray:
    """Return the tensor power of a vector, letter 0 most significant.

    >>> product_vector(np.array([1, 2]), 2).tolist()
    [1, 2, 2, 4]
    """
    result = np.ones(1, dtype=factor.dtype)
    for _ in range(block):
        result = np.outer(result, factor).ravel()
    return result


def kept_indicator(basis: TypicalBasis, kept_strings: np.ndarray) -> np.ndarray:
    """Return the 0/1 vector of a set of eigenstrings, shape (2^wires,)."""
    indicator = np.zeros(1 << basis.wires)
    indicator[kept_strings] = 1
    return indicator
