"""Spectrum -> TypicalBasis: the eigenstrings of a block, and which of them an optimal encoder keeps."""

from __future__ import annotations

import numpy as np

from encoder_forge.errors import InputError, LimitError
from encoder_forge.source.model import Source
from encoder_forge.spectrum.letter import refuse_copies, tie_groups
from encoder_forge.spectrum.records import Spectrum, TypicalBasis
from encoder_forge.tolerances import EIGENVALUE_TIE

MAX_BLOCK_QUBITS = 12
"""Blocks up to here are written down string by string; longer ones are only summed, see `types`."""


def typical_basis(source: Source, spectrum: Spectrum, block: int, kept_qubits: int) -> TypicalBasis:
    """Return what an encoder of a block has to keep.

    Parameters
    ----------
    source : Source
        Of model `iid` or `block`.
    spectrum : Spectrum
        Of that source.
    block : int
        Letters in the block; 1 for model `block`.
    kept_qubits : int
        m, from 1 to one less than the block's qubits.

    Returns
    -------
    TypicalBasis

    Raises
    ------
    InputError
        For a block length below one, or m that does not compress the block.
    LimitError
        Above 12 block qubits; the message says what would fit.

    Notes
    -----
    O(block 2^wires). The best set of 2^m eigenstrings is the heaviest (Schumacher, Phys. Rev. A 51, 2738
    (1995)). Strings of weight zero, those through unused levels included, fill it when the others are too
    few.
    """
    refuse_copies(source)
    _check_request(source, block, kept_qubits)
    weights = string_weights(spectrum.eigenvalues, source.letter_qubits, block)
    required, free, optimal = _best_strings(weights, 1 << kept_qubits)
    return TypicalBasis(
        block=block,
        letter_qubits=source.letter_qubits,
        kept_qubits=kept_qubits,
        rotation=padded_basis(spectrum, source.letter_qubits),
        weights=weights,
        required=required,
        free=free,
        optimal_weight=optimal,
    )


def _check_request(source: Source, block: int, kept_qubits: int) -> None:
    check_block(source, block)
    qubits = block * source.letter_qubits
    if qubits > MAX_BLOCK_QUBITS:
        longest = MAX_BLOCK_QUBITS // source.letter_qubits
        raise LimitError(
            f"a block of {block} letters has {qubits} qubits; its strings are listed one by one up to "
            f"{MAX_BLOCK_QUBITS} qubits; "
            + (f"nearest: --block {longest}" if source.model == "iid" else "accepted: a smaller block_qubits")
        )
    if qubits == 1:
        raise InputError("a block of one qubit cannot be compressed; accepted: --block 2 or more")
    if not 1 <= kept_qubits < qubits:
        raise InputError(
            f"--keep {kept_qubits} does not compress a block of {qubits} qubits; accepted: 1 to {qubits - 1}"
        )


def check_block(source: Source, block: int) -> None:
    """Require a block length that the source's model has.

    Raises
    ------
    InputError
    """
    if block < 1:
        raise InputError(f"--block {block}: accepted: a whole number of letters, 1 or more")
    if source.model == "block" and block != 1:
        raise InputError(
            f"--block {block}: each letter of {source.name} is a whole block of "
            f"{source.block_qubits} qubits; accepted: no --block, or --block 1"
        )


def string_weights(eigenvalues: np.ndarray, letter_qubits: int, block: int) -> np.ndarray:
    """Return the weight of every eigenstring of an iid block, shape (2^(block*letter_qubits),).

    Strings of the same type (how often each distinct eigenvalue occurs) get the very same number: products
    are taken type by type, not string by string, where rounding would split ties.

    >>> string_weights(np.array([0.75, 0.25]), 1, 2).tolist()
    [0.5625, 0.1875, 0.1875, 0.0625]
    """
    levels = np.zeros(1 << letter_qubits)
    levels[: len(eigenvalues)] = eigenvalues
    if block == 1:
        return levels
    groups = tie_groups(levels)
    group_of_level = np.repeat(np.arange(len(groups)), [stop - start for start, stop in groups])
    base = block + 1
    types, inverse = np.unique(_types_by_number(group_of_level, block, base), return_inverse=True)
    counts = (types[:, None] // base ** np.arange(len(groups))) % base
    values = np.array([levels[start] for start, _ in groups])
    weights: np.ndarray = np.prod(values**counts, axis=1)[inverse]
    return weights


def _types_by_number(group_of_level: np.ndarray, block: int, base: int) -> np.ndarray:
    """Return each string's type as one number: the counts of the levels' groups as digits.

    At most 8 groups and 13^2 or 5^8 types within the limits, far inside 64 bits.
    """
    digit = base**group_of_level
    types = np.zeros(1, dtype=np.int64)
    for _ in range(block):
        types = (types[:, None] + digit[None, :]).ravel()
    return types


def _best_strings(weights: np.ndarray, dimension: int) -> tuple[np.ndarray, np.ndarray, float]:
    """Return required strings, free strings of the boundary weight, and the weight of the best set.

    When the boundary class just fits, its strings are required and none is free.
    """
    boundary = np.partition(weights, len(weights) - dimension)[len(weights) - dimension]
    tied = abs(weights - boundary) <= EIGENVALUE_TIE * np.maximum(weights, boundary)
    required = (weights > boundary) & ~tied
    missing = dimension - np.count_nonzero(required)
    if np.count_nonzero(tied) == missing:
        return required | tied, np.zeros_like(tied), float(weights[required | tied].sum())
    return required, tied, float(weights[required].sum() + missing * boundary)


def padded_basis(spectrum: Spectrum, letter_qubits: int) -> np.ndarray:
    """Return the eigenbasis extended by the unused computational levels, shape (2^q, 2^q)."""
    rotation = np.eye(1 << letter_qubits, dtype=complex)
    d = len(spectrum.eigenbasis)
    rotation[:d, :d] = spectrum.eigenbasis
    return rotation
