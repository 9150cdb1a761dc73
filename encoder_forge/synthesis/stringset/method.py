"""Method `stringset`: after the eigenbasis rotations, the cheapest gates between two sets of strings.

Once every letter is rotated into its eigenbasis, the typical subspace is spanned by basis strings, and an
encoder has only to carry that *set* onto strings with zero trash. Which string becomes which code, with which
phase, and what happens to all others is free, because the decoder is the exact inverse. The search over sets
spends all of that freedom at once, and that of ties between equal weights, and its minimum is proven.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import product
from math import comb

import numpy as np

from encoder_forge.errors import LimitError
from encoder_forge.gates import Gate
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.encoder import Encoder
from encoder_forge.synthesis.matrices import sequence_matrix
from encoder_forge.synthesis.rotation import Rotation, rotation_choices
from encoder_forge.synthesis.stringset.choose import Choice, cheapest_set
from encoder_forge.synthesis.stringset.circuit import descend, run_strings, write_gates
from encoder_forge.synthesis.stringset.masks import MAX_WIRES, mask_of, strings_of

_MODEL = "CX 1, relative-phase Toffoli 3, three-control 6"


@dataclass(frozen=True, slots=True)
class _Plan:
    """One way to rotate the letters, with the cheapest set that goes with it."""

    rotations: tuple[Rotation, ...]
    relabelled: np.ndarray
    choice: Choice

    @property
    def cost(self) -> int:
        return self.choice.cost + sum(rotation.two_qubit_gates for rotation in self.rotations)


def synthesise(basis: TypicalBasis) -> Encoder:
    """Synthesise the encoder of least cost in the gate model.

    Parameters
    ----------
    basis : TypicalBasis
        At most five wires, letters of at most three qubits.

    Returns
    -------
    Encoder
        Holds eigenstring 0 and puts it on code 0.

    Raises
    ------
    LimitError
        Above five wires, or for letters of more than three qubits.

    Notes
    -----
    Table look-ups only: under a second, and milliseconds unless very many strings tie. Letters of two and
    three qubits load Qiskit for their rotation.
    """
    if basis.wires > MAX_WIRES:
        raise LimitError(
            f"string sets are searched exactly up to {MAX_WIRES} wires, not {basis.wires}; "
            f"accepted for this source: --block {max(MAX_WIRES // basis.letter_qubits, 1)}"
        )
    plan = min(_plans(basis), key=lambda plan: plan.cost)
    path = descend(plan.choice.mask, basis.wires, basis.kept_qubits)
    monomial = write_gates(path, basis.wires, int(plan.relabelled[basis.most_probable]))
    gates = _rotation_layer(plan.rotations, basis.letter_qubits) + monomial
    labels = np.argsort(plan.relabelled)  # from strings as the circuit sees them back to eigenstrings
    kept_strings = np.sort(labels[list(strings_of(plan.choice.mask))])
    kept, trash = _roles(monomial, plan.relabelled[kept_strings], basis)
    return Encoder(
        method="stringset",
        wires=basis.wires,
        kept=kept,
        trash=trash,
        scratch=(),
        gates=gates,
        kept_strings=tuple(int(string) for string in kept_strings),
        typical_weight=float(basis.weights[kept_strings].sum()),
        unitary=sequence_matrix(gates, basis.wires),
        minimum=_minimum(basis, plan),
        details={"search": "table", "set_cost": plan.choice.cost, "sets_considered": plan.choice.considered},
    )


@cache
def known_gates(block: int, kept: int) -> int | None:
    """Return the fewest two-qubit gates for an optimal iid block of two-level letters, where known.

    Parameters
    ----------
    block, kept : int
        Letters and kept qubits; the two eigenvalues of a letter differ and neither is zero.

    Returns
    -------
    int or None
        None beyond the table's reach.

    Examples
    --------
    >>> [known_gates(*pair) for pair in ((3, 2), (4, 3), (4, 2), (5, 3), (5, 4), (6, 4))]
    [5, 5, 5, 10, 18, None]
    """
    if block > MAX_WIRES or not 0 <= kept <= block:
        return None
    required, free = rank_optimal(block, kept)
    return cheapest_set(required, free, block, kept).cost


def rank_optimal(block: int, kept: int) -> tuple[int, int]:
    """Return required and free strings, as masks, for the 2^kept of lowest Hamming weight.

    >>> rank_optimal(3, 2)
    (23, 0)
    """
    left = 1 << kept
    required = 0
    for ones in range(block + 1):
        level = sum(1 << s for s in range(1 << block) if s.bit_count() == ones)
        if comb(block, ones) > left:
            return required, level if left else 0
        required |= level
        left -= comb(block, ones)
    return required, 0


def _plans(basis: TypicalBasis) -> list[_Plan]:
    """Return one plan for each way to order the eigenvectors of each letter."""
    required, free = basis.required.copy(), basis.free.copy()
    if free[basis.most_probable]:  # the receiver's guess belongs to the set even when all weights tie
        required[basis.most_probable], free[basis.most_probable] = True, False
    plans = []
    for rotations in product(rotation_choices(basis), repeat=basis.block):
        relabelled = _relabelled(rotations, basis)
        labels = np.argsort(relabelled)
        choice = cheapest_set(
            mask_of(required[labels]), mask_of(free[labels]), basis.wires, basis.kept_qubits
        )
        plans.append(_Plan(rotations, relabelled, choice))
    return plans


def _relabelled(rotations: tuple[Rotation, ...], basis: TypicalBasis) -> np.ndarray:
    """Return the basis string on which the rotation layer puts each eigenstring."""
    result = np.zeros(1, dtype=np.int64)
    for rotation in rotations:
        result = ((result << basis.letter_qubits)[:, None] | np.array(rotation.order)).reshape(-1)
    return result


def _rotation_layer(rotations: tuple[Rotation, ...], letter_qubits: int) -> tuple[Gate, ...]:
    return tuple(
        Gate(gate.name, tuple(letter * letter_qubits + wire for wire in gate.wires), gate.angles)
        for letter, rotation in enumerate(rotations)
        for gate in rotation.gates
    )


def _roles(
    monomial: tuple[Gate, ...], strings: np.ndarray, basis: TypicalBasis
) -> tuple[tuple[int, ...], tuple[int, ...]]:
    """Return kept and trash wires, after running the gates over every kept string.

    Trash wires are those that read zero for all of them. Strings stay distinct under gates that permute
    them, so m other wires hold all 2^m codes.
    """
    images = run_strings(monomial, strings, basis.wires)
    union = int(np.bitwise_or.reduce(images, initial=0))
    busy = [bool((union >> (basis.wires - 1 - wire)) & 1) for wire in range(basis.wires)]
    kept = tuple(wire for wire in range(basis.wires) if busy[wire])
    if len(kept) != basis.kept_qubits or len(np.unique(images)) != basis.dimension:
        raise RuntimeError(f"{basis.dimension} kept strings landed on {len(kept)} wires: the gates are wrong")
    return kept, tuple(wire for wire in range(basis.wires) if not busy[wire])


def _minimum(basis: TypicalBasis, plan: _Plan) -> str:
    """Say what is proven: after one-qubit rotations everything, after wider ones the set part only."""
    if basis.letter_qubits == 1:
        return f"minimum in the gate model {_MODEL}"
    return (
        f"after the letters' rotations, {plan.choice.cost} two-qubit gates are the minimum in the gate model "
        f"{_MODEL}; the rotations themselves are not proven minimal"
    )
