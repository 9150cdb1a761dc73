"""Method `generic`: any typical subspace, through Qiskit's general synthesis.

The yardstick and the last resort. Two ways are tried and the cheaper is taken: the kept states completed to
a unitary (quantum Shannon decomposition, Shende, Bullock and Markov, IEEE Trans. CAD 25, 1000 (2006)), and
the inverse of the isometry that spreads the kept register over the block (Iten, Colbeck, Kukuljan, Home and
Christandl, Phys. Rev. A 93, 032318 (2016)). Both are tried in two gauges, since the basis of the kept
subspace is free: eigenstrings in order, and the basis of the same subspace closest to the computational one.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from encoder_forge.bits import flip_endian
from encoder_forge.errors import LimitError
from encoder_forge.gates import Gate
from encoder_forge.spectrum.letter import canonical_basis
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.encoder import Encoder

MAX_WIRES = 8
_GAUGE_WIRES = 5
"""Above this the second gauge is not tried: it doubles the time and general maps gain nothing."""
_BOTH_WAYS_WIRES = 6


def synthesise(basis: TypicalBasis) -> Encoder:
    """Synthesise an encoder for the first optimal set of eigenstrings.

    Parameters
    ----------
    basis : TypicalBasis

    Returns
    -------
    Encoder
        Kept wires first; eigenstring 0 on code 0.

    Raises
    ------
    LimitError
        Above 8 wires.

    Notes
    -----
    O(4^wires) two-qubit gates.
    """
    if basis.wires > MAX_WIRES:
        raise LimitError(
            f"generic synthesis of {basis.wires} wires would take about {4**basis.wires // 2} two-qubit "
            f"gates; the limit is {MAX_WIRES} wires"
        )
    strings = first_optimal_set(basis)
    states = eigenstates(basis, strings)
    gauges = {"eigenstrings": states}
    if basis.wires <= _GAUGE_WIRES:
        gauges["computational"] = _computational_gauge(states)
    ways = _ways(basis)
    tries = [(way, gauge, ways[way](columns)) for gauge, columns in gauges.items() for way in ways]
    way, gauge, circuit = min(tries, key=lambda t: (t[2].count_ops().get("cx", 0), t[2].depth()))
    return Encoder(
        method="generic",
        wires=basis.wires,
        kept=tuple(range(basis.kept_qubits)),
        trash=tuple(range(basis.kept_qubits, basis.wires)),
        scratch=(),
        gates=_gates(circuit),
        kept_strings=tuple(strings.tolist()),
        typical_weight=float(basis.weights[strings].sum()),
        unitary=_operator(circuit, basis.wires),
        details={"way": way, "gauge": gauge},
    )


def _ways(basis: TypicalBasis) -> dict[str, Callable[[np.ndarray], Any]]:
    """Return the ways worth trying: both, but above six wires only the one that wins there.

    The completed unitary is cheaper when one wire is trash, the isometry otherwise; the loser costs minutes.
    """
    ways: dict[str, Callable[[np.ndarray], Any]] = {"unitary": _completed, "isometry": _inverted}
    if basis.wires > _BOTH_WAYS_WIRES:
        del ways["isometry" if basis.wires - basis.kept_qubits == 1 else "unitary"]
    return ways


def first_optimal_set(basis: TypicalBasis) -> np.ndarray:
    """Return the required eigenstrings and the first free ones that fill the set, rising."""
    required, free = np.flatnonzero(basis.required), np.flatnonzero(basis.free)
    return np.sort(np.concatenate([required, free[: basis.dimension - len(required)]]))


def eigenstates(basis: TypicalBasis, strings: np.ndarray) -> np.ndarray:
    """Return eigenstrings as states, shape (2^wires, x), one a column."""
    states = np.ones((1, len(strings)), dtype=complex)
    mask = (1 << basis.letter_qubits) - 1
    for letter in reversed(range(basis.block)):
        digit = (strings >> (basis.letter_qubits * letter)) & mask
        states = np.einsum("ax,bx->abx", states, basis.rotation[:, digit]).reshape(-1, len(strings))
    return states


def _computational_gauge(states: np.ndarray) -> np.ndarray:
    """Return a basis of the same span that keeps the first state and is else close to basis strings."""
    rest = states[:, 1:]
    if not rest.shape[1]:
        return states
    return np.column_stack([states[:, 0], canonical_basis(rest @ rest.conj().T, rest.shape[1])])


def _completed(columns: np.ndarray) -> Any:
    """Return a circuit for the completed unitary, in `u` and `cx`."""
    from qiskit import QuantumCircuit
    from qiskit.circuit.library import UnitaryGate

    size, kept = columns.shape
    wires = size.bit_length() - 1
    projector = np.eye(size) - columns @ columns.conj().T
    rest = canonical_basis(projector, size - kept)
    # Row order: code c and trash t make index c * 2^trash + t, so the kept states go to multiples.
    rows = np.zeros((size, size), dtype=complex)
    step = size // kept
    clean = np.arange(size) % step == 0
    rows[clean], rows[~clean] = columns.conj().T, rest.conj().T
    circuit = QuantumCircuit(wires)
    circuit.append(UnitaryGate(flip_endian(rows, wires)), range(wires))
    return _in_basis(circuit)


def _inverted(columns: np.ndarray) -> Any:
    """Return the inverse of the isometry's circuit, in `u` and `cx`."""
    from qiskit import QuantumCircuit
    from qiskit.circuit.library import Isometry

    size, kept = columns.shape
    wires, inputs = size.bit_length() - 1, kept.bit_length() - 1
    rows = np.argsort(flip_endian(np.arange(size), wires))
    order = flip_endian(np.arange(kept), inputs)
    isometry = columns[rows][:, order]
    circuit = QuantumCircuit(wires)
    circuit.append(Isometry(isometry, 0, 0, epsilon=1e-9), range(wires))
    return _in_basis(_in_basis(circuit).inverse())


def _in_basis(circuit: Any) -> Any:
    """Rewrite in `u` and `cx`; inputs are not zero, and no permutation may hide in a layout."""
    from qiskit import transpile

    return transpile(
        circuit, basis_gates=["u", "cx"], optimization_level=1, qubits_initially_zero=False, seed_transpiler=0
    )


def _gates(circuit: Any) -> tuple[Gate, ...]:
    names = {"u": "U", "cx": "cx"}
    return tuple(
        Gate(
            names[item.operation.name],
            tuple(circuit.find_bit(q).index for q in item.qubits),
            tuple(float(p) for p in item.operation.params),
        )
        for item in circuit.data
    )


def _operator(circuit: Any, wires: int) -> np.ndarray:
    from qiskit.quantum_info import Operator

    return flip_endian(np.asarray(Operator(circuit).data), wires)
