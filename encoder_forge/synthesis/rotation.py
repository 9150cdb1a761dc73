"""The eigenbasis rotation of one letter: gates that turn its eigenvectors into basis states.

A rotation takes eigenvector j to |order[j]>, up to a phase of its own. Those phases are free because an
encoder is a subspace, and so is the order, because the set of strings to keep is relabelled with it. Spending
both is worth a third of a two-qubit letter's gates: a general two-qubit unitary takes three CX, one that may
be followed by any diagonal takes two (Shende, Markov and Bullock, Phys. Rev. A 69, 062321 (2004)), and many
that are met in practice take one or none.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass
from itertools import permutations
from typing import Any

import numpy as np

from encoder_forge.bits import flip_endian
from encoder_forge.errors import LimitError
from encoder_forge.gates import Gate, two_qubit_gates
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.matrices import gate_matrix, sequence_matrix

MAX_LETTER_QUBITS = 3

TOLERANCE = 1e-10
"""Largest accepted error of an entry of the rotated eigenvectors; rounding stays near 1e-15."""

_EXACT = 4e-15
"""Entries closer than this to 0 or to each other are taken as meant to be equal."""


@dataclass(frozen=True, slots=True)
class Rotation:
    """Gates on wires 0 .. q-1 that take eigenvector j to |order[j]> up to phase.

    Attributes
    ----------
    gates : tuple of Gate
    order : tuple of int
        One basis state for each column of the eigenbasis.
    """

    gates: tuple[Gate, ...]
    order: tuple[int, ...]

    @property
    def two_qubit_gates(self) -> int:
        """Two-qubit gates of one letter's rotation."""
        return two_qubit_gates(self.gates)


def letter_rotation(basis: TypicalBasis, order: tuple[int, ...] | None = None) -> tuple[Gate, ...]:
    """Return gates that take column j of `basis.rotation` to e^{i f_j} |order[j]>.

    Parameters
    ----------
    basis : TypicalBasis
        Letters of one to three qubits.
    order : tuple of int, optional
        A permutation of the 2^q basis states; the identity when left out.

    Returns
    -------
    tuple of Gate
        On wires 0 .. q-1. One-qubit letters take one gate or none; two-qubit letters at most two CX, and
        the fewest that any diagonal afterwards allows; three-qubit letters Qiskit's count or less.

    Raises
    ------
    LimitError
        If a letter has more than three qubits.
    RuntimeError
        If the gates miss the basis states by more than `TOLERANCE`: a defect here or in a library.
    """
    qubits = basis.letter_qubits
    if qubits > MAX_LETTER_QUBITS:
        raise LimitError(
            f"eigenbasis rotations are synthesised for letters of up to {MAX_LETTER_QUBITS} qubits, "
            f"not {qubits}; use the generic method"
        )
    order = order or tuple(range(1 << qubits))
    target = np.empty((1 << qubits, 1 << qubits), dtype=complex)
    target[list(order)] = basis.rotation.conj().T
    gates = _rotation_gates(target, qubits)
    _verify(gates, target, qubits)
    return gates


def rotation_choices(basis: TypicalBasis) -> tuple[Rotation, ...]:
    """Return the rotations worth trying, each with another order of the eigenvectors.

    Two orders that differ by X gates or by an exchange of wires serve alike, for both are free in the
    search over sets that follows. Of the 24 orders of a two-qubit letter three remain; for a three-qubit
    letter two are tried, the given one and the one nearest to the computational basis.
    """
    size = 1 << basis.letter_qubits
    if basis.letter_qubits == 1:
        return (Rotation(letter_rotation(basis), (0, 1)),)
    if basis.letter_qubits == 2:
        best: dict[int, Rotation] = {}
        for one, two in permutations((1, 2, 3), 2):
            order = (0, one, two, one ^ two)
            rotation = Rotation(letter_rotation(basis, order), order)
            paired = order.index(3)  # the eigenvector opposite to 0: what X and wire exchange cannot alter
            if paired not in best or rotation.two_qubit_gates < best[paired].two_qubit_gates:
                best[paired] = rotation
        return tuple(best[paired] for paired in sorted(best, reverse=True))
    orders = dict.fromkeys([tuple(range(size)), _nearest_order(basis.rotation)])
    return tuple(Rotation(letter_rotation(basis, order), order) for order in orders)


def one_qubit_rotation(target: np.ndarray, wire: int = 0) -> tuple[Gate, ...]:
    """Return at most one gate equal to a 2 x 2 unitary up to phases of its rows.

    >>> one_qubit_rotation(np.array([[1, 1], [1, -1]]) / 2**0.5)
    (Gate(name='h', wires=(0,), angles=()),)
    >>> one_qubit_rotation(np.array([[0, 1j], [1, 0]]))
    (Gate(name='x', wires=(0,), angles=()),)
    """
    kept, moved = complex(target[0, 0]), complex(target[0, 1])
    if abs(moved) < _EXACT:
        return ()
    if abs(kept) < _EXACT:
        return (Gate("x", (wire,)),)
    ratio = moved / kept
    if abs(ratio.imag) > _EXACT * abs(ratio):
        return (Gate("U", (wire,), (2 * math.atan(abs(ratio)), 0.0, cmath.phase(-ratio))),)
    if abs(ratio.real - 1) < _EXACT:
        return (Gate("h", (wire,)),)
    return (Gate("ry", (wire,), (-2 * math.atan(ratio.real),)),)


def _rotation_gates(target: np.ndarray, qubits: int) -> tuple[Gate, ...]:
    """Return gates equal to `target` up to phases of its rows."""
    if qubits == 1:
        return one_qubit_rotation(target)
    if np.allclose(np.abs(target), np.eye(len(target)), rtol=0, atol=_EXACT):
        return ()
    if qubits == 2:
        return _two_qubit_rotation(target)
    return _three_qubit_rotation(target)


def _two_qubit_rotation(target: np.ndarray) -> tuple[Gate, ...]:
    """Take the cheapest of the diagonals that may save a CX; what is left of it is phases of rows."""
    tries = [_merge(_synthesise(_zz(angle) @ target, 2), 2) for angle in _saving_angles(target)]
    return min(tries, key=two_qubit_gates)


def _zz(angle: float) -> np.ndarray:
    phase = cmath.exp(1j * angle)
    return np.diag([phase, phase.conjugate(), phase.conjugate(), phase])


def _saving_angles(target: np.ndarray) -> list[float]:
    """Return angles t for which exp(i t Z Z) target takes fewest CX.

    With U of determinant one and G = U (Y Y) U^T (Y Y), two CX suffice when tr G is real, one when tr G = 0
    and G^2 = -1, none when G = 1 or -1 (Shende, Markov and Bullock 2004). The diagonal turns tr G into
    cos 2t tr G + i sin 2t tr(ZZ G). One angle makes that real, one makes its real part largest, and one
    brings tr G^2 nearest to -4, which it reaches only if G^2 = -1 and thus tr G = 0.
    """
    yy = np.fliplr(np.diag([-1.0, 1.0, 1.0, -1.0]))
    unit = target / np.linalg.det(target) ** 0.25
    g = unit @ yy @ unit.T @ yy
    signs = np.array([1.0, -1.0, -1.0, 1.0])
    plain, signed = np.trace(g), np.sum(signs * np.diag(g))
    plus, minus = np.diag((1 + signs) / 2), np.diag((1 - signs) / 2)
    turning = np.trace(plus @ g @ plus @ g) + np.conj(np.trace(minus @ g @ minus @ g))
    return [
        0.5 * math.atan2(-plain.imag, signed.real),
        0.5 * math.atan2(-signed.imag, plain.real),
        (math.pi - cmath.phase(turning)) / 4,
    ]


def _three_qubit_rotation(target: np.ndarray) -> tuple[Gate, ...]:
    """Let Qiskit decompose, then shorten the last block on two wires by the diagonal that is free."""
    for wire in range(3):
        factors = _factors(target, wire)
        if factors is not None:
            others = [w for w in range(3) if w != wire]
            pair_gates = _two_qubit_rotation(factors[1])
            return one_qubit_rotation(factors[0], wire) + tuple(
                Gate(g.name, tuple(others[w] for w in g.wires), g.angles) for g in pair_gates
            )
    gates = _merge(_synthesise(target, 3), 3)
    before, ending, pair = _split_last_block(gates)
    local = [Gate(g.name, tuple(pair.index(w) for w in g.wires), g.angles) for g in ending]
    shorter = _two_qubit_rotation(sequence_matrix(local, 2)) if len(pair) == 2 else tuple(local)
    if two_qubit_gates(shorter) < two_qubit_gates(ending):
        ending = tuple(Gate(g.name, tuple(pair[w] for w in g.wires), g.angles) for g in shorter)
    return _merge(before + ending, 3)


def _factors(target: np.ndarray, wire: int) -> tuple[np.ndarray, np.ndarray] | None:
    """Split a three-qubit unitary into one on `wire` and one on the other two, if it is such a product."""
    tensor = np.moveaxis(target.reshape((2,) * 6), (wire, 3 + wire), (0, 1)).reshape(4, 16)
    left, sizes, right = np.linalg.svd(tensor)
    if sizes[1] > 1e-13 * sizes[0]:
        return None
    return left[:, 0].reshape(2, 2) * math.sqrt(2), right[0].reshape(4, 4) * 2


def _split_last_block(gates: tuple[Gate, ...]) -> tuple[tuple[Gate, ...], tuple[Gate, ...], tuple[int, ...]]:
    """Split off the gates on the pair of the last CX, as far back as nothing else touches that pair."""
    pair: tuple[int, ...] = next((tuple(sorted(g.wires)) for g in reversed(gates) if len(g.wires) == 2), ())
    before: list[Gate] = []
    ending: list[Gate] = []
    open_block = True
    for gate in reversed(gates):
        inside = set(gate.wires) <= set(pair)
        open_block = open_block and (inside or len(gate.wires) == 1)
        (ending if open_block and inside else before).append(gate)
    return tuple(reversed(before)), tuple(reversed(ending)), pair


def _synthesise(target: np.ndarray, qubits: int) -> tuple[Gate, ...]:
    """Return CX and U gates for a whole unitary of two or three qubits, by Qiskit."""
    from qiskit import QuantumCircuit, transpile
    from qiskit.circuit.library import CXGate, UnitaryGate
    from qiskit.synthesis import TwoQubitBasisDecomposer

    matrix = flip_endian(target, qubits)
    if qubits == 2:
        circuit = TwoQubitBasisDecomposer(CXGate(), euler_basis="U")(matrix)
    else:
        circuit = QuantumCircuit(qubits)
        circuit.append(UnitaryGate(matrix), range(qubits))
    # The inputs are not zero, and level 1 moves no wire into an output layout.
    circuit = transpile(
        circuit, basis_gates=["u", "cx"], optimization_level=1, qubits_initially_zero=False, seed_transpiler=0
    )
    return tuple(_gate(circuit, item) for item in circuit.data)


def _gate(circuit: Any, item: Any) -> Gate:
    name = {"u": "U", "cx": "cx"}[item.operation.name]
    wires = tuple(circuit.find_bit(qubit).index for qubit in item.qubits)
    return Gate(name, wires, tuple(float(angle) for angle in item.operation.params))


def _merge(gates: tuple[Gate, ...], wires: int) -> tuple[Gate, ...]:
    """Merge runs of one-qubit gates; on each wire's last run the phases of its rows are dropped."""
    runs = [np.eye(2, dtype=complex) for _ in range(wires)]
    merged: list[Gate] = []
    for gate in gates:
        if len(gate.wires) == 1:
            runs[gate.wires[0]] = gate_matrix(gate) @ runs[gate.wires[0]]
            continue
        for wire in gate.wires:
            merged.extend(_one_qubit_gate(runs[wire], wire))
            runs[wire] = np.eye(2, dtype=complex)
        merged.append(gate)
    for wire, run in enumerate(runs):
        merged.extend(one_qubit_rotation(run, wire))
    return tuple(merged)


def _one_qubit_gate(matrix: np.ndarray, wire: int) -> tuple[Gate, ...]:
    """Return at most one gate equal to a 2 x 2 unitary up to global phase."""
    unit = matrix / cmath.sqrt(complex(np.linalg.det(matrix)))
    theta = 2 * math.atan2(abs(unit[1, 0]), abs(unit[0, 0]))
    total, difference = 2 * cmath.phase(unit[1, 1]), 2 * cmath.phase(unit[1, 0])
    phi, lam = (total + difference) / 2, (total - difference) / 2
    gate = Gate("U", (wire,), (theta, phi, lam))
    if abs(unit[1, 0]) < _EXACT and abs(math.sin(total / 2)) < _EXACT:
        return ()
    return (gate,)


def _nearest_order(eigenbasis: np.ndarray) -> tuple[int, ...]:
    """Return the order that sends each eigenvector to the basis state it resembles most."""
    from scipy.optimize import linear_sum_assignment

    return tuple(int(row) for row in linear_sum_assignment(-(np.abs(eigenbasis.T) ** 2))[1])


def _verify(gates: tuple[Gate, ...], target: np.ndarray, qubits: int) -> None:
    """Hold the gates' matrix against the target's rows, each up to its phase."""
    made = sequence_matrix(gates, qubits)
    overlaps = np.einsum("ij,ij->i", made, target.conj())
    phases = overlaps / np.maximum(np.abs(overlaps), 1e-300)
    error = float(np.abs(made - phases[:, None] * target).max())
    if not error <= TOLERANCE:
        raise RuntimeError(
            f"the rotation of a {qubits}-qubit letter misses its eigenvectors by {error:.1e}; "
            f"at most {TOLERANCE:.0e} is accepted. This is a defect: please report it with the source file"
        )
