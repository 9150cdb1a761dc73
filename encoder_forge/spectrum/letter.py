"""A source becomes a Spectrum: eigenvalues and eigenbasis of the average letter, and the entropies."""

from __future__ import annotations

import numpy as np

from encoder_forge.errors import NotYetError
from encoder_forge.source.model import Source
from encoder_forge.spectrum.causes import explain
from encoder_forge.spectrum.entropy import entropy_bits, entropy_variance_bits2, purity
from encoder_forge.spectrum.records import Spectrum
from encoder_forge.tolerances import COMPRESSIBLE, EIGENVALUE_TIE, EIGENVALUE_ZERO

_PIVOT_TIE = 1e-9
"""Diagonal entries closer than this count as equal when a pivot is chosen: far above rounding, so that the
choice is the same on every machine, and far below what separates the pivots of distinct directions."""


def letter_spectrum(source: Source) -> Spectrum:
    """Decompose the average letter state of a source.

    Parameters
    ----------
    source : Source
        Model `iid`, or `block`, where the letters are whole blocks.

    Returns
    -------
    Spectrum
        Entropies in bits a letter. The Holevo quantity is chi = S(rho) - sum_i p_i S(rho_i).

    Raises
    ------
    NotYetError
        For model `copies`.

    Notes
    -----
    O(d^3) for dimension d. S is the least rate, in qubits a letter, at which blocks can be kept with fidelity
    one in the limit (Schumacher, Phys. Rev. A 51, 2738 (1995); Jozsa and Schumacher, J. Mod. Opt. 41, 2343
    (1994)).
    """
    refuse_copies(source)
    eigenvalues, eigenbasis = _decompose(source.average_state)
    entropy = entropy_bits(eigenvalues)
    of_letters = sum(letter.prior * entropy_bits(letter.weights) for letter in source.letters)
    compressible = entropy < source.letter_qubits - COMPRESSIBLE
    holevo = max(0.0, entropy - of_letters)
    return Spectrum(
        eigenvalues=eigenvalues,
        eigenbasis=eigenbasis,
        entropy_bits=entropy,
        prior_entropy_bits=entropy_bits(source.priors),
        holevo_bits=holevo,
        entropy_variance_bits2=entropy_variance_bits2(eigenvalues),
        purity=purity(eigenvalues),
        compressible=compressible,
        notes=explain(source, eigenvalues, entropy, holevo, compressible),
    )


def refuse_copies(source: Source) -> None:
    """Refuse a source of identical copies.

    Raises
    ------
    NotYetError
    """
    if source.model == "copies":
        raise NotYetError(
            f"{source.name}: found model 'copies', which this version cannot compute yet; "
            "accepted: 'iid' and 'block'"
        )


def _decompose(rho: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return falling eigenvalues, equal within a tie, and the canonical eigenbasis, one vector a column."""
    values, vectors = np.linalg.eigh(rho)
    values, vectors = values[::-1].copy(), vectors[:, ::-1].copy()
    values[values < EIGENVALUE_ZERO] = 0.0
    for start, stop in tie_groups(values):
        if stop - start > 1:
            values[start:stop] = values[start:stop].mean()
            group = vectors[:, start:stop]
            vectors[:, start:stop] = canonical_basis(group @ group.conj().T, stop - start)
    return values / values.sum(), _with_canonical_phases(vectors)


def tie_groups(falling: np.ndarray) -> list[tuple[int, int]]:
    """Return the runs [start, stop) of eigenvalues that count as equal; zeros tie with zeros only.

    >>> tie_groups(np.array([0.5, 0.25, 0.25, 0.0]))
    [(0, 1), (1, 3), (3, 4)]
    """
    groups: list[tuple[int, int]] = []
    start = 0
    for i in range(1, len(falling) + 1):
        if i < len(falling) and _tie(falling[start], falling[i]):
            continue
        groups.append((start, i))
        start = i
    return groups


def _tie(larger: float, smaller: float) -> bool:
    return larger - smaller < EIGENVALUE_TIE and (smaller > 0 or larger == 0)


def canonical_basis(projector: np.ndarray, rank: int) -> np.ndarray:
    """Return the orthonormal basis of a projector's range that lies closest to the coordinate axes.

    A degenerate eigenspace has no eigenbasis of its own; the linear algebra library returns any. This one
    depends on the subspace alone: of the projector's columns, those with the largest diagonal entry left
    (ties to the lowest index) are orthonormalised in turn. A subspace spanned by coordinate vectors gets
    these vectors, which spares an encoder gates.

    Parameters
    ----------
    projector : ndarray of complex, shape (n, n)
        Hermitian, idempotent, of rank at least `rank`.
    rank : int
        How many vectors are wanted.

    Returns
    -------
    ndarray of complex, shape (n, rank)
        One vector a column, in the order of the pivots, phases canonical.

    Notes
    -----
    A pivoted Cholesky factorisation with every column orthogonalised twice: O(n rank^2).

    Examples
    --------
    >>> canonical_basis(np.diag([1.0, 0.0, 1.0]), 2).real.tolist()
    [[1.0, 0.0], [0.0, 0.0], [0.0, 1.0]]
    """
    basis = np.zeros((len(projector), rank), dtype=complex)
    left = np.real(np.diagonal(projector)).copy()
    for k in range(rank):
        pivot = int(np.flatnonzero(left >= left.max() - _PIVOT_TIE)[0])
        vector = projector[:, pivot].astype(complex)
        for _ in range(2):
            vector -= basis[:, :k] @ (basis[:, :k].conj().T @ vector)
        vector /= np.linalg.norm(vector)
        basis[:, k] = vector
        left -= abs(vector) ** 2
    return _with_canonical_phases(basis)


def _with_canonical_phases(columns: np.ndarray) -> np.ndarray:
    """Make each column's entry of largest modulus real and positive, the lowest index among ties."""
    moduli = abs(columns)
    leading = np.argmax(moduli >= moduli.max(axis=0) - _PIVOT_TIE, axis=0)
    entries = columns[leading, np.arange(columns.shape[1])]
    result = columns * (entries.conj() / abs(entries))
    result[leading, np.arange(columns.shape[1])] = abs(entries)
    return result + 0.0
