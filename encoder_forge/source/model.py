"""The records that describe a source: what a file says, checked and normalised."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

Model = Literal["iid", "copies", "block"]


@dataclass(frozen=True, eq=False)
class Letter:
    """One letter: a quantum state with its prior probability.

    Attributes
    ----------
    label : str
        Unique within the source.
    prior : float
        Probability of the letter; the priors of a source sum to one.
    weights : ndarray, shape (r,)
        Eigenvalues of the letter's density matrix that are not zero, falling; r = 1 for a pure letter.
    vectors : ndarray of complex, shape (r, d)
        The eigenvectors that belong to them, one a row, each of norm one.
    """

    label: str
    prior: float
    weights: np.ndarray
    vectors: np.ndarray

    def __post_init__(self) -> None:
        self.weights.setflags(write=False)
        self.vectors.setflags(write=False)

    @property
    def pure(self) -> bool:
        """Whether the letter is a pure state."""
        return len(self.weights) == 1

    @property
    def density(self) -> np.ndarray:
        """The letter's density matrix, shape (d, d)."""
        return np.einsum("r,ri,rj->ij", self.weights, self.vectors, self.vectors.conj())


@dataclass(frozen=True, slots=True)
class SourceFile:
    """One file that a source was read from.

    Attributes
    ----------
    name : str
        Path relative to the source file's folder, with forward slashes; the source file itself comes first.
    content : bytes
        The file as read.
    """

    name: str
    content: bytes


@dataclass(frozen=True, eq=False)
class Source:
    """A characterised source.

    Attributes
    ----------
    name, revision : str
        As the file gives them.
    model : "iid", "copies" or "block"
        Blocks of independent letters, identical copies of one letter, or letters that are whole blocks.
    letters : tuple of Letter
        At least one, but for `copies` of an unknown pure qubit, where it may be empty.
    block_qubits : int or None
        For model `block`: how many qubits a block has.
    notes : tuple of str
        What was silently mended on reading (small drifts renormalised, counts turned into priors).
    files : tuple of SourceFile
        The source file and its array files.
    sha256 : str
        Digest over all files.
    """

    name: str
    revision: str
    model: Model
    letters: tuple[Letter, ...]
    block_qubits: int | None
    notes: tuple[str, ...]
    files: tuple[SourceFile, ...]
    sha256: str

    @property
    def letter_dimension(self) -> int:
        """Dimension d of a letter's state space (for `block`: 2^block_qubits)."""
        return self.letters[0].vectors.shape[1] if self.letters else 2

    @property
    def letter_qubits(self) -> int:
        """Qubits q = ceil(log2 d) that one letter lies on."""
        return max(1, (self.letter_dimension - 1).bit_length())

    @property
    def priors(self) -> np.ndarray:
        """The priors, shape (letters,)."""
        return np.array([letter.prior for letter in self.letters])

    @property
    def pure(self) -> bool:
        """Whether all letters are pure."""
        return all(letter.pure for letter in self.letters)

    @property
    def average_state(self) -> np.ndarray:
        """The average letter state rho = sum_i p_i rho_i, shape (d, d)."""
        d = self.letter_dimension
        rho = np.zeros((d, d), dtype=complex)
        for letter in self.letters:
            rho += letter.prior * letter.density
        return rho
