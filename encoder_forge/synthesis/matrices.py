"""Matrices of gate sequences, as synthesis declares them (the check has its own, from the text)."""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np

from encoder_forge.gates import Gate, expand, u_matrix

_ROOT = 1 / math.sqrt(2)
_FIXED: dict[str, np.ndarray] = {
    "x": np.array([[0, 1], [1, 0]], dtype=complex),
    "z": np.diag([1, -1]).astype(complex),
    "h": np.array([[_ROOT, _ROOT], [_ROOT, -_ROOT]], dtype=complex),
    "s": np.diag([1, 1j]),
    "sdg": np.diag([1, -1j]),
    "t": np.diag([1, np.exp(0.25j * math.pi)]),
    "tdg": np.diag([1, np.exp(-0.25j * math.pi)]),
    "cx": np.eye(4, dtype=complex)[[0, 1, 3, 2]],
    "cz": np.diag([1, 1, 1, -1]).astype(complex),
    "swap": np.eye(4, dtype=complex)[[0, 2, 1, 3]],
}


def gate_matrix(gate: Gate) -> np.ndarray:
    """Return the matrix of a gate without a body, first wire most significant, up to global phase."""
    match gate.name:
        case "U":
            return u_matrix(*gate.angles)
        case "ry":
            return u_matrix(gate.angles[0], 0.0, 0.0)
        case "rx":
            return u_matrix(gate.angles[0], -math.pi / 2, math.pi / 2)
        case "rz":
            return np.diag([np.exp(-0.5j * gate.angles[0]), np.exp(0.5j * gate.angles[0])])
    return _FIXED[gate.name]


def sequence_matrix(gates: Iterable[Gate], wires: int) -> np.ndarray:
    """Return the matrix of a sequence on `wires` wires (at most 12 or so), wire 0 most significant.

    Returns
    -------
    ndarray of complex, shape (2^wires, 2^wires)
        Up to global phase.
    """
    tensor = np.eye(1 << wires, dtype=complex).reshape([2] * wires + [-1])
    for gate in expand(gates):
        k = len(gate.wires)
        matrix = gate_matrix(gate).reshape([2] * (2 * k))
        product = np.tensordot(matrix, tensor, axes=(range(k, 2 * k), gate.wires))
        tensor = np.moveaxis(product, range(k), gate.wires)
    return tensor.reshape(1 << wires, -1)
