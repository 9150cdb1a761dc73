"""Analytic figures of an encoder that keeps a given set of eigenstrings, computed apart from any circuit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from encoder_forge.errors import InputError
from encoder_forge.source.model import Source
from encoder_forge.spectrum.amplitudes import all_strings, component_table, kept_indicator, product_vector
from encoder_forge.spectrum.moments import mean_products
from encoder_forge.spectrum.records import AnalyticFigures, Policy, TypicalBasis
from encoder_forge.spectrum.roundtrip import (
    MAX_MIXED_QUBITS,
    MAX_STRINGS,
    Branches,
    split_unitary,
    string_fidelities,
)

__all__ = ["kept_set_figures", "string_fidelities"]

_WORST_TIE = 1e-12
"""Fidelities closer than this tie for the worst string, so that rounding does not pick among equals."""


def kept_set_figures(
    source: Source,
    basis: TypicalBasis,
    kept_strings: Sequence[int] | np.ndarray,
    policy: Policy,
    unitary: np.ndarray | None = None,
    kept: tuple[int, ...] | None = None,
) -> AnalyticFigures:
    """Return the figures of an encoder that carries `kept_strings` onto trash = 0.

    Parameters
    ----------
    source : Source
        What feeds the block; not necessarily the source that `basis` was made for.
    basis : TypicalBasis
        The eigenstrings that `kept_strings` are numbers of.
    kept_strings : sequence of int
        Any number of them; all figures describe this set, not the best one.
    policy : "discard", "substitute" or "herald"
    unitary : ndarray of complex, shape (2^wires, 2^wires), optional
        The encoder's whole action, wire 0 most significant, scratch wires last. The figures of `discard`,
        and the total entanglement fidelity of `herald`, rest on it.
    kept : tuple of int, optional
        The kept wires, given with `unitary`; all others are trash or scratch.

    Returns
    -------
    AnalyticFigures

    Raises
    ------
    InputError
        For strings that repeat or lie outside the block, or a unitary that does not fit.

    Notes
    -----
    P = sum of the kept strings' weights. For pure letters, with P_x the weight of letter string x on the kept
    set and q eigenstring 0: substitute E[P_x^2] + E[(1 - P_x) |<q|x>|^2]; herald E[P_x^2]; the averages
    factorise, see `moments`. Always P^2 <= E[P_x^2] <= ensemble fidelity <= P when eigenstring 0 is kept.
    Cost: O(n^2 4^q 2^(nq)) for n letters of q qubits, and for `discard` that many times the dropped values.
    """
    strings = np.asarray(kept_strings, dtype=int)
    inside = bool(np.all((strings >= 0) & (strings < 1 << basis.wires)))
    if len(np.unique(strings)) != len(strings) or not inside:
        raise InputError(
            f"kept strings {strings.tolist()}: accepted: distinct numbers from 0 to {(1 << basis.wires) - 1}"
        )
    branches = None
    if unitary is not None and kept is not None and policy != "substitute":
        branches = split_unitary(unitary, kept, basis.wires)
    case = _Case(source, basis, strings, policy, unitary, kept, branches)
    weight = _weight(case)
    ensemble = _ensemble(case)
    return AnalyticFigures(
        typical_weight=weight,
        entanglement_fidelity=weight**2,
        entanglement_fidelity_total=_total_entanglement_fidelity(case, weight),
        ensemble_fidelity=ensemble.mean,
        ensemble_bracket=_bracket(case, ensemble, weight),
        ensemble_fidelity_accepted=(
            ensemble.mean / weight
            if policy == "herald" and ensemble.mean is not None and weight > 0
            else None
        ),
        herald_probability=1 - weight if policy == "herald" else None,
        letter_fidelity=ensemble.by_letter,
        worst_string=ensemble.worst,
        worst_fidelity=ensemble.worst_value,
        notes=ensemble.notes,
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Case:
    source: Source
    basis: TypicalBasis
    strings: np.ndarray
    policy: Policy
    unitary: np.ndarray | None
    kept: tuple[int, ...] | None
    branches: Branches | None

    @property
    def listable(self) -> bool:
        """Whether the letter strings are few enough to be taken one by one."""
        return len(self.source.letters) ** self.basis.block <= MAX_STRINGS

    @property
    def indicator(self) -> np.ndarray:
        return kept_indicator(self.basis, self.strings)


@dataclass(frozen=True, slots=True)
class _Ensemble:
    mean: float | None = None
    by_letter: tuple[tuple[str, float], ...] | None = None
    worst: tuple[str, ...] | None = None
    worst_value: float | None = None
    notes: tuple[str, ...] = ()


def _weight(case: _Case) -> float:
    """Return Tr(T sigma^n), from the diagonal of the average letter in the eigenbasis."""
    table = component_table(case.source, case.basis.rotation)
    diagonal = np.einsum("l,lar->a", case.source.priors, abs(table) ** 2)
    return float(product_vector(diagonal, case.basis.block)[case.strings].sum())


def _total_entanglement_fidelity(case: _Case, weight: float) -> float | None:
    """Return sum over Kraus operators A of |Tr(A sigma)|^2.

    substitute has the operators T and |q><s| for each s that is not kept: P^2 + sum |<q|sigma|s>|^2, where
    the sum vanishes for eigenvectors of sigma. herald decodes as discard does.
    """
    if case.policy == "substitute":
        table = component_table(case.source, case.basis.rotation)
        row = np.einsum("l,lr,lar->a", case.source.priors, table[:, 0, :], table.conj())
        coherences = product_vector(abs(row) ** 2, case.basis.block)
        return weight**2 + float(coherences @ (1 - case.indicator))
    if case.branches is None:
        return None
    rho = case.source.average_state
    letter = np.zeros((1 << case.basis.letter_qubits,) * 2, dtype=complex)
    letter[: len(rho), : len(rho)] = rho
    state = np.ones((1, 1), dtype=complex)
    for _ in range(case.basis.block):
        state = np.kron(state, letter)
    return float(np.sum(abs(case.branches.traces(state)) ** 2))


def _ensemble(case: _Case) -> _Ensemble:
    if case.policy == "discard" and case.branches is None:
        return _Ensemble(notes=("no ensemble fidelity: policy discard needs the encoder's whole unitary",))
    if not case.source.pure and case.basis.wires > MAX_MIXED_QUBITS:
        text = (
            f"no ensemble fidelity: letters are mixed and the block has {case.basis.wires} qubits; "
            f"Uhlmann's fidelity is computed, by brute force, up to {MAX_MIXED_QUBITS}"
        )
        return _Ensemble(notes=(text,))
    if case.listable:
        return _from_strings(case)
    count = len(case.source.letters) ** case.basis.block
    if not case.source.pure:
        text = f"no ensemble fidelity: letters are mixed and make {count} strings; listed up to {MAX_STRINGS}"
        return _Ensemble(notes=(text,))
    return _from_moments(case, count)


def _from_strings(case: _Case) -> _Ensemble:
    """Average over the list of letter strings."""
    letters = all_strings(case.source, case.basis.block)
    fidelities = string_fidelities(
        case.source, case.basis, case.strings, case.policy, letters, case.unitary, case.kept
    )
    chances = np.prod(case.source.priors[letters], axis=1)
    by_letter = []
    for number, letter in enumerate(case.source.letters):
        share = chances * np.mean(letters == number, axis=1)
        if letter.prior > 0:
            by_letter.append((letter.label, float(share @ fidelities / share.sum())))
    possible = np.flatnonzero(chances > 0)
    lowest = fidelities[possible].min()
    worst = possible[np.argmax(fidelities[possible] <= lowest + _WORST_TIE)]
    return _Ensemble(
        mean=float(chances @ fidelities),
        by_letter=tuple(by_letter),
        worst=tuple(case.source.letters[i].label for i in letters[worst]),
        worst_value=float(fidelities[worst]),
    )


def _from_moments(case: _Case, count: int) -> _Ensemble:
    """Average over too many strings to list: exactly, by factorised sums."""
    values = _discard_moments(case) if case.policy == "discard" else _kept_set_moments(case)
    return _Ensemble(
        mean=float(case.source.priors @ values),
        by_letter=tuple(
            (letter.label, float(value))
            for letter, value in zip(case.source.letters, values, strict=True)
            if letter.prior > 0
        ),
        notes=(f"no worst string: there are {count} letter strings, listed up to {MAX_STRINGS}",),
    )


def _kept_set_moments(case: _Case) -> np.ndarray:
    """Return, letter by letter, E[P_x^2], with E[(1 - P_x) |<q|x>|^2] for `substitute`."""
    table = abs(component_table(case.source, case.basis.rotation)[:, :, 0]) ** 2
    priors, indicator = case.source.priors, case.indicator
    values = mean_products(indicator, indicator, table, priors)
    if case.policy == "substitute":
        guess = np.zeros_like(indicator)
        guess[0] = 1
        values = values + mean_products(guess, 1 - indicator, table, priors)
    return values


def _discard_moments(case: _Case) -> np.ndarray:
    """Return, letter by letter, E[sum over Kraus operators A of |<x|A|x>|^2]."""
    assert case.branches is not None
    block, size = case.basis.block, 1 << case.basis.letter_qubits
    operators = case.branches.kraus().reshape((-1, *(size,) * (2 * block)))
    pairs = [axis for i in range(block) for axis in (1 + i, 1 + block + i)]
    operators = operators.transpose(0, *pairs).reshape(len(operators), -1)
    states = component_table(case.source)[:, :, 0]
    table = np.einsum("la,lb->lab", states.conj(), states).reshape(len(states), -1)
    return mean_products(operators, operators, table, case.source.priors)


def _bracket(case: _Case, ensemble: _Ensemble, weight: float) -> tuple[float, float] | None:
    """Return [E P_x^2, P] where the ensemble fidelity of pure letters is out of reach."""
    if ensemble.mean is not None or not case.source.pure:
        return None
    table = abs(component_table(case.source, case.basis.rotation)[:, :, 0]) ** 2
    indicator = case.indicator
    if case.basis.block == 1:
        return float(case.source.priors @ (table @ indicator) ** 2), weight
    values = mean_products(indicator, indicator, table, case.source.priors)
    return float(case.source.priors @ values), weight
