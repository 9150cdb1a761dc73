"""Ensemble fidelity of the best subspaces of a block, policy `substitute`, without listing strings.

For a letter string x with weight P_x on the kept set T and the guess q = eigenstring 0, the fidelity is
P_x^2 + (1 - P_x) |<q|x>|^2. Its average over letters factorises over pairs of eigenstrings,
E[P_x^2] = sum over s, s' in T of prod_i M[s_i, s'_i] with M[a,b] = sum_l p_l |<a|l>|^2 |<b|l>|^2,
and T is recognised by a small automaton that reads a string letter by letter: it counts levels, and remembers
how the string compares with the first one left out. So the double sum is a dynamic programme over pairs of
the automaton's states.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from encoder_forge.source.model import Source
from encoder_forge.spectrum.amplitudes import component_table
from encoder_forge.spectrum.boundary import BoundarySet, LetterLevels, boundary_set, full_types, letter_levels
from encoder_forge.spectrum.records import Spectrum, TypicalBasis
from encoder_forge.spectrum.roundtrip import MAX_MIXED_QUBITS, MAX_STRINGS, string_fidelities
from encoder_forge.spectrum.typical import padded_basis, string_weights
from encoder_forge.tolerances import EIGENVALUE_TIE

LONGEST_BLOCKS = {1: 1024, 2: 512, 3: 48, 4: 16, 5: 12, 6: 9, 7: 7, 8: 6}
"""Distinct non-zero eigenvalues of a letter to the longest block that the dynamic programme takes: about a
second a figure."""


def why_no_ensemble(source: Source, spectrum: Spectrum, block: int) -> str | None:
    """Return the sentence that explains a missing ensemble fidelity, None where it can be had."""
    if not source.pure:
        qubits = block * source.letter_qubits
        if qubits <= MAX_MIXED_QUBITS and len(source.letters) ** block <= MAX_STRINGS:
            return None
        return (
            "no ensemble fidelity for mixed letters above "
            f"{MAX_MIXED_QUBITS} block qubits or {MAX_STRINGS} letter strings (Uhlmann's, by brute force)"
        )
    if source.model == "block":
        return None
    levels = len(letter_levels(spectrum.eigenvalues).logs)
    longest = LONGEST_BLOCKS[levels]
    if block <= longest:
        return None
    return f"no ensemble fidelity above blocks of {longest} letters with {levels} distinct eigenvalues"


def substitute_fidelity(source: Source, spectrum: Spectrum, block: int, dimension: int) -> float | None:
    """Return the ensemble fidelity of the `dimension` heaviest eigenstrings under policy `substitute`.

    Strings of equal weight are taken in lexicographic order.

    Parameters
    ----------
    source : Source
        Of model `iid` or `block`.
    spectrum : Spectrum
        Of that source.
    block : int
        Letters n; 1 for model `block`.
    dimension : int
        K, at least one.

    Returns
    -------
    float or None
        None where `why_no_ensemble` gives a reason.

    Notes
    -----
    O(n R^2 S^2) for R non-zero eigenvalues and S states of the automaton, about 2 n for two levels. Letters
    are pure: mixed ones are taken string by string.
    """
    if why_no_ensemble(source, spectrum, block) is not None:
        return None
    levels = letter_levels(spectrum.eigenvalues)
    if dimension >= len(levels.level_of_index) ** block:
        return 1.0
    if not source.pure or block == 1:
        return _string_by_string(source, spectrum, block, dimension)
    table = abs(component_table(source, padded_basis(spectrum, source.letter_qubits))[:, :, 0]) ** 2
    table = table[:, : len(levels.level_of_index)]
    pairs = np.einsum("l,la,lb->ab", source.priors, table, table)
    both, with_guess = _double_sums(levels, boundary_set(levels, block, dimension), pairs, block)
    return min(1.0, both + float(source.priors @ table[:, 0]) ** block - with_guess)


def _string_by_string(source: Source, spectrum: Spectrum, block: int, dimension: int) -> float:
    q = source.letter_qubits
    weights = string_weights(spectrum.eigenvalues, q, block)
    none = np.zeros(len(weights), dtype=bool)
    basis = TypicalBasis(block, q, 0, padded_basis(spectrum, q), weights, none, none, 0.0)
    fidelities = string_fidelities(source, basis, heaviest(weights, dimension), "substitute")
    chances = np.ones(1)
    for _ in range(block):
        chances = np.outer(chances, source.priors).ravel()
    return float(chances @ fidelities)


def heaviest(weights: np.ndarray, dimension: int) -> np.ndarray:
    """Return the numbers of the heaviest strings, ties in lexicographic order.

    >>> heaviest(np.array([0.4, 0.2, 0.2, 0.2]), 2).tolist()
    [0, 1]
    """
    boundary = np.sort(weights)[-dimension]
    tied = abs(weights - boundary) <= EIGENVALUE_TIE * np.maximum(weights, boundary)
    above = np.flatnonzero((weights > boundary) & ~tied)
    return np.sort(np.concatenate([above, np.flatnonzero(tied)[: dimension - len(above)]]))


def _double_sums(
    levels: LetterLevels, kept: BoundarySet, pairs: np.ndarray, block: int
) -> tuple[float, float]:
    """Return the sums of prod M[s_i, s'_i] over s, s' in T, and over s' in T with s = q.

    Works from the last letter to the first: values[s, s'] is the sum over all endings from a pair of states.
    """
    accepted = _accepted_states(levels, kept, block)
    values = np.outer(accepted, accepted)
    guess = accepted
    for position in reversed(range(block)):
        steps = _steps(levels, kept, block, position)
        rows = [values[step] for step in steps]
        values = np.zeros((len(steps[0]), len(steps[0])))
        for b, step in enumerate(steps):
            values += sum(pairs[a, b] * row for a, row in enumerate(rows))[:, step]
        guess = sum((pairs[0, a] * guess[step] for a, step in enumerate(steps)), np.zeros(len(steps[0])))
    start = _layer(levels, kept, block, 0).equal
    return float(values[start, start]), float(guess[start])


@dataclass(frozen=True, slots=True, eq=False)
class _Layer:
    """The automaton's states after some letters: open types twice, then equal to b so far, in, and out.

    Attributes
    ----------
    number : ndarray of int
        For each type its place among the open ones, which may still end on either side of the boundary, or
        -1 where every ending is over it, -2 where none reaches it.
    open : ndarray of int
        The open types. They come first for strings before b as far as read, and again for those after b.
    """

    number: np.ndarray
    open: np.ndarray

    @property
    def equal(self) -> int:
        return 2 * len(self.open)

    @property
    def inside(self) -> int:
        return self.equal + 1

    @property
    def outside(self) -> int:
        return self.equal + 2

    def states(self, types: np.ndarray, after: bool) -> np.ndarray:
        """Return the states of types, for strings before or after b."""
        number = self.number[types]
        closed = np.where(number == -1, self.inside, self.outside)
        return np.where(number < 0, closed, number + (len(self.open) if after else 0))


def _layer(levels: LetterLevels, kept: BoundarySet, block: int, position: int) -> _Layer:
    """Return the states after `position` letters."""
    logs = _types(levels.logs.size, position) @ levels.logs
    left = block - position
    reaches = logs + left * levels.logs[0] >= kept.log_weight - kept.tolerance
    stays_over = logs + left * levels.logs[-1] > kept.log_weight + kept.tolerance
    is_open = reaches & ~stays_over
    number = np.where(is_open, np.cumsum(is_open) - 1, np.where(stays_over, -1, -2))
    return _Layer(number, np.flatnonzero(is_open))


def _accepted_states(levels: LetterLevels, kept: BoundarySet, block: int) -> np.ndarray:
    """Return which states after the last letter accept: of the boundary types, strings before b."""
    boundary = len(_layer(levels, kept, block, block).open)
    return np.concatenate([np.ones(boundary), np.zeros(boundary), [0, 1, 0]])


def _steps(levels: LetterLevels, kept: BoundarySet, block: int, position: int) -> list[np.ndarray]:
    """Return, for each eigen-index, where every state goes when the letter at `position` has it."""
    now, then = (_layer(levels, kept, block, p) for p in (position, position + 1))
    following = _following(levels.logs.size, position)
    prefix = np.bincount(levels.level_of_index[list(kept.first_out[:position])], minlength=levels.logs.size)
    prefix_type = _type_number(tuple(prefix.tolist()))
    steps = []
    for index, level in enumerate(levels.level_of_index):
        read = following[level][now.open]
        if index == kept.first_out[position]:
            equal = then.equal
        else:
            after = index > kept.first_out[position]
            equal = int(then.states(following[level][[prefix_type]], after)[0])
        fixed = [equal, then.inside, then.outside]
        steps.append(np.concatenate([then.states(read, False), then.states(read, True), fixed]))
    return steps


@lru_cache(maxsize=1024)
def _types(levels: int, letters: int) -> np.ndarray:
    """Return the counts of all types of so many letters."""
    return full_types(LetterLevels(np.arange(levels), np.zeros(levels)), letters)


@lru_cache(maxsize=1024)
def _numbers(levels: int, letters: int) -> dict[tuple[int, ...], int]:
    return {tuple(counts): i for i, counts in enumerate(_types(levels, letters).tolist())}


def _type_number(counts: tuple[int, ...]) -> int:
    return _numbers(len(counts), sum(counts))[counts]


@lru_cache(maxsize=1024)
def _following(levels: int, letters: int) -> np.ndarray:
    """Return the number of each type once a letter of each level is added, shape (levels, types)."""
    numbers = _numbers(levels, letters + 1)
    types = _types(levels, letters)
    units = np.eye(levels, dtype=int)
    return np.array([[numbers[tuple(row)] for row in (types + unit).tolist()] for unit in units])
