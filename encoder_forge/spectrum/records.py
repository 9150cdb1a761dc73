"""What the spectral stage hands on: the letter spectrum, the typical basis, analytic figures."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

Policy = Literal["discard", "substitute", "herald"]
"""What becomes of a block found outside the typical subspace."""


@dataclass(frozen=True, eq=False)
class Spectrum:
    """Spectral decomposition of the average letter state, with the entropies that follow.

    Attributes
    ----------
    eigenvalues : ndarray, shape (d,)
        Falling, sum one; values below `tolerances.EIGENVALUE_ZERO` are exactly zero.
    eigenbasis : ndarray of complex, shape (d, d)
        Eigenvectors as columns, in the order of the eigenvalues. Within equal eigenvalues the basis is the
        one closest to the computational basis (see `letter.canonical_basis`), so that it does not depend on
        the linear algebra library; phases make each column's leading entry real and positive.
    entropy_bits : float
        von Neumann entropy S of the average state.
    prior_entropy_bits : float
        Shannon entropy of the priors.
    holevo_bits : float
        Holevo quantity chi.
    entropy_variance_bits2 : float
        V = Tr rho (log2 rho + S)^2.
    purity : float
        Tr rho^2.
    compressible : bool
    notes : tuple of str
        Plain sentences; the first says whether the source is compressible and why.
    """

    eigenvalues: np.ndarray
    eigenbasis: np.ndarray
    entropy_bits: float
    prior_entropy_bits: float
    holevo_bits: float
    entropy_variance_bits2: float
    purity: float
    compressible: bool
    notes: tuple[str, ...]

    def __post_init__(self) -> None:
        self.eigenvalues.setflags(write=False)
        self.eigenbasis.setflags(write=False)


@dataclass(frozen=True, eq=False)
class TypicalBasis:
    """What an encoder has to keep: the eigenstrings of a block, with the freedom among equal weights.

    An eigenstring is a basis index of block * letter_qubits bits, letter 0 most significant; each letter's
    bits spell the index of a column of `rotation`.

    Attributes
    ----------
    block : int
        Letters in the block (1 for model `block`).
    letter_qubits : int
        Qubits q of one letter.
    kept_qubits : int
        m; 2^m eigenstrings are to be kept.
    rotation : ndarray of complex, shape (2^q, 2^q)
        Unitary whose columns are the letter's eigenvectors, unused levels last.
    weights : ndarray, shape (2^(block*q),)
        Weight of every eigenstring under the block state; sums to one; unused levels have zero.
    required : ndarray of bool, same shape
        Strings that every optimal set contains.
    free : ndarray of bool, same shape
        Strings of the boundary weight, any of which may fill the set up to 2^m.
    optimal_weight : float
        Weight of the best 2^m strings.
    """

    block: int
    letter_qubits: int
    kept_qubits: int
    rotation: np.ndarray
    weights: np.ndarray
    required: np.ndarray
    free: np.ndarray
    optimal_weight: float

    def __post_init__(self) -> None:
        for array in (self.rotation, self.weights, self.required, self.free):
            array.setflags(write=False)

    @property
    def wires(self) -> int:
        """Qubits of the whole block."""
        return self.block * self.letter_qubits

    @property
    def dimension(self) -> int:
        """How many eigenstrings are kept, 2^m."""
        return 1 << self.kept_qubits

    @property
    def forbidden(self) -> np.ndarray:
        """Strings that no optimal set contains."""
        return ~(self.required | self.free)

    @property
    def most_probable(self) -> int:
        """The eigenstring q that a receiver guesses after a failure: every letter its top eigenvector."""
        return 0


@dataclass(frozen=True, slots=True)
class AnalyticFigures:
    """What an encoder that keeps a given set of eigenstrings achieves on a source, without noise.

    Attributes
    ----------
    typical_weight : float
        P, the trace of the block state on the kept strings.
    entanglement_fidelity : float
        P^2, the accepted branch alone: exact for strings that are eigenvectors of the block state, a lower
        bound otherwise.
    entanglement_fidelity_total : float or None
        Summed over all Kraus operators of the round trip; None where it needs the circuit's atypical map and
        none was given. It then lies in [entanglement_fidelity, typical_weight].
    ensemble_fidelity : float or None
        Average over letter strings under the failure policy (for `herald`: blocks flagged count zero);
        Uhlmann's squared fidelity where letters are mixed. None where out of reach; a note says why.
    ensemble_bracket : tuple of (float, float), or None
        Bounds on the ensemble fidelity where it is None though letters are pure.
    ensemble_fidelity_accepted, herald_probability : float or None
        For `herald`: the average given acceptance, and the probability 1 - P of a raised flag.
    letter_fidelity : tuple of (str, float), or None
        For each letter label that occurs, the average over strings given that letter at a place drawn at
        random.
    worst_string : tuple of str, or None
        Labels of the letter string with the lowest fidelity, `worst_fidelity` its value.
    worst_fidelity : float or None
    notes : tuple of str
        Why a figure is None.
    """

    typical_weight: float
    entanglement_fidelity: float
    entanglement_fidelity_total: float | None
    ensemble_fidelity: float | None
    ensemble_bracket: tuple[float, float] | None
    ensemble_fidelity_accepted: float | None
    herald_probability: float | None
    letter_fidelity: tuple[tuple[str, float], ...] | None
    worst_string: tuple[str, ...] | None
    worst_fidelity: float | None
    notes: tuple[str, ...]
