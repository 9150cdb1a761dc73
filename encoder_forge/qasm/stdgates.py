"""Matrices of the OpenQASM 3 standard gates, for the reader.

Written from the language's own definitions (OpenQASM 3 specification, standard library stdgates.inc), apart
from the table that circuits are made with, so that reading text back is a check of writing it. First qubit
most significant; equal to the specification up to global phase for gates that are not controlled.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

_I = np.eye(2, dtype=complex)
_X = np.array([[0, 1], [1, 0]], dtype=complex)
_Y = np.array([[0, -1j], [1j, 0]], dtype=complex)
_Z = np.diag([1, -1]).astype(complex)
_H = np.array([[1, 1], [1, -1]], dtype=complex) / math.sqrt(2)
_SX = np.array([[1 + 1j, 1 - 1j], [1 - 1j, 1 + 1j]], dtype=complex) / 2


def _u(theta: float, phi: float, lam: float) -> np.ndarray:
    c, s = math.cos(theta / 2), math.sin(theta / 2)
    return np.array(
        [[c, -cmath.exp(1j * lam) * s], [cmath.exp(1j * phi) * s, cmath.exp(1j * (phi + lam)) * c]]
    )


def _p(lam: float) -> np.ndarray:
    return np.diag([1, cmath.exp(1j * lam)])


def _rx(theta: float) -> np.ndarray:
    c, s = math.cos(theta / 2), math.sin(theta / 2)
    return np.array([[c, -1j * s], [-1j * s, c]])


def _ry(theta: float) -> np.ndarray:
    c, s = math.cos(theta / 2), math.sin(theta / 2)
    return np.array([[c, -s], [s, c]], dtype=complex)


def _rz(theta: float) -> np.ndarray:
    return np.diag([cmath.exp(-0.5j * theta), cmath.exp(0.5j * theta)])


def controlled(matrix: np.ndarray) -> np.ndarray:
    """Return the matrix of the gate with one control in front."""
    n = len(matrix)
    result = np.eye(2 * n, dtype=complex)
    result[n:, n:] = matrix
    return result


def _swap() -> np.ndarray:
    return np.eye(4, dtype=complex)[[0, 2, 1, 3]]


@dataclass(frozen=True, slots=True)
class StandardGate:
    """Shape and matrix of one standard gate."""

    qubits: int
    angles: int
    matrix: Callable[..., np.ndarray]


def _fixed(qubits: int, matrix: np.ndarray) -> StandardGate:
    return StandardGate(qubits, 0, lambda: matrix)


STANDARD_GATES: dict[str, StandardGate] = {
    "U": StandardGate(1, 3, _u),
    "u3": StandardGate(1, 3, _u),
    "u2": StandardGate(1, 2, lambda phi, lam: _u(math.pi / 2, phi, lam)),
    "u1": StandardGate(1, 1, _p),
    "p": StandardGate(1, 1, _p),
    "phase": StandardGate(1, 1, _p),
    "id": _fixed(1, _I),
    "x": _fixed(1, _X),
    "y": _fixed(1, _Y),
    "z": _fixed(1, _Z),
    "h": _fixed(1, _H),
    "s": _fixed(1, _p(math.pi / 2)),
    "sdg": _fixed(1, _p(-math.pi / 2)),
    "t": _fixed(1, _p(math.pi / 4)),
    "tdg": _fixed(1, _p(-math.pi / 4)),
    "sx": _fixed(1, _SX),
    "rx": StandardGate(1, 1, _rx),
    "ry": StandardGate(1, 1, _ry),
    "rz": StandardGate(1, 1, _rz),
    "cx": _fixed(2, controlled(_X)),
    "CX": _fixed(2, controlled(_X)),
    "cy": _fixed(2, controlled(_Y)),
    "cz": _fixed(2, controlled(_Z)),
    "ch": _fixed(2, controlled(_H)),
    "cp": StandardGate(2, 1, lambda lam: controlled(_p(lam))),
    "cphase": StandardGate(2, 1, lambda lam: controlled(_p(lam))),
    "crx": StandardGate(2, 1, lambda theta: controlled(_rx(theta))),
    "cry": StandardGate(2, 1, lambda theta: controlled(_ry(theta))),
    "crz": StandardGate(2, 1, lambda theta: controlled(_rz(theta))),
    "cu": StandardGate(
        2, 4, lambda theta, phi, lam, gamma: controlled(cmath.exp(1j * gamma) * _u(theta, phi, lam))
    ),
    "swap": _fixed(2, _swap()),
    "ccx": _fixed(3, controlled(controlled(_X))),
    "cswap": _fixed(3, controlled(_swap())),
}

TWO_QUBIT_COUNT = {
    "swap": 3, "ccx": 6, "cswap": 8, "crx": 2, "cry": 2, "crz": 2,
    "cp": 2, "cphase": 2, "cu": 2,
}  # fmt: skip
"""CX that a standard gate of two or three qubits expands to (textbook expansions), where not one."""
