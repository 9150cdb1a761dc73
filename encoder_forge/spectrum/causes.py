"""Plain sentences about a source: whether it can be compressed, and what makes it so."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from encoder_forge.source.model import Letter, Source
from encoder_forge.spectrum.entropy import entropy_bits
from encoder_forge.tolerances import COMPRESSIBLE, EIGENVALUE_ZERO

_SAME = 1e-12
"""Letter states whose density matrices differ by less than this (Frobenius) are one state; pairs of letters
with Tr(rho_i rho_j) below it are orthogonal. Both are rounding of states given to full precision."""


@dataclass(frozen=True, slots=True)
class _States:
    """The distinct letter states that occur, with their joint priors.

    Attributes
    ----------
    letters : tuple of Letter
        One representative for each distinct state of positive prior.
    priors : ndarray
    repeated : tuple of str
        Labels of letters whose state another letter has too.
    overlap : bool
        Whether any two of them are not orthogonal.
    """

    letters: tuple[Letter, ...]
    priors: np.ndarray
    repeated: tuple[str, ...]
    overlap: bool

    @property
    def pure(self) -> bool:
        return all(letter.pure for letter in self.letters)

    @property
    def equal_priors(self) -> bool:
        return bool(np.ptp(self.priors) < COMPRESSIBLE)


def explain(
    source: Source, eigenvalues: np.ndarray, entropy: float, holevo: float, compressible: bool
) -> tuple[str, ...]:
    """Return sentences on a source; the first says whether it is compressible and why.

    Parameters
    ----------
    source : Source
        Of model `iid` or `block`.
    eigenvalues : ndarray, shape (d,)
        Of the average state, falling.
    entropy, holevo : float
        S and chi in bits.
    compressible : bool

    Notes
    -----
    The causes are found by asking what would be without them. With rank r below the qubits' 2^q levels,
    levels are unused. With the same states at equal priors: an entropy still below log2 r is due to the
    states (their overlap, or uneven noise in orthogonal mixed letters), and what the actual priors take off
    it is due to unequal priors.
    """
    states = _distinct_states(source)
    verdict = (
        _why_compressible(source, states, eigenvalues, entropy)
        if compressible
        else _why_not(source, states, entropy)
    )
    return (verdict, *_further_notes(source, states, eigenvalues, entropy, holevo))


def _distinct_states(source: Source) -> _States:
    """Merge letters of the same state; the Gram matrix Tr(rho_i rho_j) tells which they are."""
    letters = [letter for letter in source.letters if letter.prior > 0]
    gram = _overlaps(letters)
    own = np.diagonal(gram)
    distance2 = own[:, None] + own[None, :] - 2 * gram
    first = np.argmax(distance2 < _SAME, axis=1)
    kept = np.unique(first)
    priors = np.bincount(first, [letter.prior for letter in letters], minlength=len(letters))[kept]
    repeated = tuple(
        letter.label for i, letter in enumerate(letters) if np.count_nonzero(first == first[i]) > 1
    )
    among = gram[np.ix_(kept, kept)]
    overlap = bool(np.any(among[~np.eye(len(kept), dtype=bool)] > _SAME))
    return _States(tuple(letters[i] for i in kept), priors, repeated, overlap)


def _overlaps(letters: list[Letter]) -> np.ndarray:
    """Return Tr(rho_i rho_j) for all pairs, from the letters' eigenvectors."""
    vectors = np.concatenate([letter.vectors for letter in letters])
    roots = np.sqrt(np.concatenate([letter.weights for letter in letters]))
    squares = abs((vectors.conj() * roots[:, None]) @ (vectors * roots[:, None]).T) ** 2
    starts = np.cumsum([0] + [len(letter.weights) for letter in letters[:-1]])
    result: np.ndarray = np.add.reduceat(np.add.reduceat(squares, starts, axis=0), starts, axis=1)
    return result


def _unit(source: Source) -> str:
    return "block" if source.model == "block" else "letter"


def _qubits(number: float) -> str:
    return f"{number:g} qubit{'s' * (number != 1)}"


def _why_compressible(source: Source, states: _States, eigenvalues: np.ndarray, entropy: float) -> str:
    unit, q = _unit(source), source.letter_qubits
    head = f"compressible: S = {entropy:.6g} bits a {unit} is below its {_qubits(q)}, because "
    if len(states.letters) == 1:
        if states.pure:
            return f"{head}every {unit} is the same pure state; nothing needs to be kept"
        return f"{head}the one {unit} sent has an uneven mixture of its own"
    rank = int(np.count_nonzero(eigenvalues))
    even = entropy_bits(_spectrum_at_equal_priors(states))
    causes = []
    if even < np.log2(rank) - COMPRESSIBLE:
        causes.append(f"{unit}s overlap" if states.overlap else f"the mixed {unit}s' own noise is uneven")
    if not states.equal_priors and entropy < even - COMPRESSIBLE:
        causes.append("priors are unequal" + " (one state's letters counted as one)" * bool(states.repeated))
    if rank < 1 << q:
        causes.append(f"levels are unused ({rank} of {1 << q} occur)")
    return head + (_joined(causes) or "the average state is not uniform over its levels")


def _why_not(source: Source, states: _States, entropy: float) -> str:
    unit, q = _unit(source), source.letter_qubits
    head = f"not compressible: S = {entropy:.6g} bits a {unit} fills its {_qubits(q)}; "
    if len(states.letters) == 1:
        return f"{head}the one {unit} sent is maximally mixed"
    if not states.overlap and states.pure:
        return f"{head}the {unit}s are orthogonal, have equal priors and use every level"
    if not states.overlap:
        return f"{head}the {unit}s are orthogonal, and their noise and priors add up to maximal mixing"
    if states.pure:
        return f"{head}although {unit}s overlap, their average state is maximally mixed"
    return f"{head}the {unit}s are mixed, and their average state is maximally mixed"


def _spectrum_at_equal_priors(states: _States) -> np.ndarray:
    """Return the spectrum that the states would have at equal priors, by the smaller of two Gram matrices."""
    share = 1 / len(states.letters)
    rows = np.concatenate([x.vectors * np.sqrt(share * x.weights)[:, None] for x in states.letters])
    small = rows @ rows.conj().T if rows.shape[0] < rows.shape[1] else rows.T @ rows.conj()
    values = np.linalg.eigvalsh(small)
    values[values < EIGENVALUE_ZERO] = 0.0
    result: np.ndarray = values / values.sum()
    return result


def _joined(parts: list[str]) -> str:
    return " and ".join([", ".join(parts[:-1]), parts[-1]] if len(parts) > 1 else parts)


def _further_notes(
    source: Source, states: _States, eigenvalues: np.ndarray, entropy: float, holevo: float
) -> list[str]:
    unit = _unit(source)
    notes = []
    if len(states.letters) > 1 and states.pure and not states.overlap:
        merged = ", one state's letters counted as one" if states.repeated else ""
        notes.append(
            f"classical case: the {unit}s are orthogonal, and S is the Shannon entropy of the priors{merged}"
        )
    if not states.pure:
        notes.append(
            f"mixed {unit}s: S = {entropy:.6g} is the rate this encoder approaches; the Holevo quantity "
            f"chi = {holevo:.6g} is a lower bound for any scheme, not a promise that one reaches it"
        )
    silent = [letter.label for letter in source.letters if letter.prior == 0]
    if silent:
        notes.append(f"never sent (prior 0), without effect here: {', '.join(silent)}")
    if states.repeated:
        notes.append(f"{unit}s with a state in common: {', '.join(states.repeated)}")
    equal = _equal_eigenvalues(eigenvalues)
    if equal:
        notes.append(f"equal eigenvalues ({equal}): their eigenvectors are a free choice")
    return notes


def _equal_eigenvalues(eigenvalues: np.ndarray) -> str:
    """Spell the multiplicities of repeated non-zero eigenvalues, such as '2 x 0.25'."""
    values, counts = np.unique(eigenvalues[eigenvalues > 0], return_counts=True)
    pairs = [f"{c} x {v:.6g}" for v, c in zip(values[::-1], counts[::-1], strict=True) if c > 1]
    return ", ".join(pairs[:8]) + (", ..." if len(pairs) > 8 else "")
