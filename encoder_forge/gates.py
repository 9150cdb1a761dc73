"""The gates that circuits of this project are made of: one record, one table.

Matrices follow the ket convention (first wire most significant). The names are those of OpenQASM 3 and its
stdgates.inc; `rccx`, `rcccx` and its inverse are relative-phase Toffolis, which permute basis strings as the
Toffoli does up to phases and are spelled out by `gate` definitions in emitted text.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True, slots=True)
class Gate:
    """One gate on named wires.

    Attributes
    ----------
    name : str
        A key of `GATES`.
    wires : tuple of int
        Controls first, target last.
    angles : tuple of float
        In radians.
    """

    name: str
    wires: tuple[int, ...]
    angles: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class GateKind:
    """What a gate name means.

    Attributes
    ----------
    wires, angles : int
        How many of each the gate takes.
    two_qubit_gates : int
        Two-qubit gates after expansion to one- and two-qubit gates (a swap is three).
    inverse : callable
        Angles of the gate to (name, angles) of its inverse.
    body : tuple of Gate
        Expansion on wires 0, 1, ...; empty for gates that every reader knows.
    """

    wires: int
    angles: int
    two_qubit_gates: int
    inverse: Callable[[tuple[float, ...]], tuple[str, tuple[float, ...]]]
    body: tuple[Gate, ...] = ()


def u_matrix(theta: float, phi: float, lam: float) -> np.ndarray:
    """Return the 2x2 matrix of OpenQASM's U(theta, phi, lambda), up to global phase (angles in radians)."""
    c, s = math.cos(theta / 2), math.sin(theta / 2)
    return np.array(
        [[c, -cmath.exp(1j * lam) * s], [cmath.exp(1j * phi) * s, cmath.exp(1j * (phi + lam)) * c]],
        dtype=complex,
    )


def _itself(name: str) -> Callable[[tuple[float, ...]], tuple[str, tuple[float, ...]]]:
    return lambda angles: (name, angles)


def _negated(name: str) -> Callable[[tuple[float, ...]], tuple[str, tuple[float, ...]]]:
    return lambda angles: (name, tuple(-a for a in angles))


def _named(name: str) -> Callable[[tuple[float, ...]], tuple[str, tuple[float, ...]]]:
    return lambda angles: (name, ())


def _u_inverse(angles: tuple[float, ...]) -> tuple[str, tuple[float, ...]]:
    theta, phi, lam = angles
    return "U", (-theta, -lam, -phi)


_Q = math.pi / 4

# Margolus's gate: a Toffoli but for one sign, three CX, its own inverse
# (Song and Klappenecker, Quantum Inf. Comput. 4, 361 (2004), show three to be the minimum).
_RCCX_BODY = (
    Gate("ry", (2,), (_Q,)), Gate("cx", (1, 2)), Gate("ry", (2,), (_Q,)), Gate("cx", (0, 2)),
    Gate("ry", (2,), (-_Q,)), Gate("cx", (1, 2)), Gate("ry", (2,), (-_Q,)),
)  # fmt: skip

# Three controls, six CX, relative phases (Maslov, Phys. Rev. A 93, 022311 (2016), fig. 4).
_RCCCX_BODY = (
    Gate("h", (3,)), Gate("t", (3,)), Gate("cx", (2, 3)), Gate("tdg", (3,)), Gate("h", (3,)),
    Gate("cx", (0, 3)), Gate("t", (3,)), Gate("cx", (1, 3)), Gate("tdg", (3,)),
    Gate("cx", (0, 3)), Gate("t", (3,)), Gate("cx", (1, 3)), Gate("tdg", (3,)),
    Gate("h", (3,)), Gate("t", (3,)), Gate("cx", (2, 3)), Gate("tdg", (3,)), Gate("h", (3,)),
)  # fmt: skip

_SELF_INVERSE_BODY = {"t": "tdg", "tdg": "t"}
_RCCCXDG_BODY = tuple(
    Gate(_SELF_INVERSE_BODY.get(g.name, g.name), g.wires) for g in reversed(_RCCCX_BODY)
)

GATES: dict[str, GateKind] = {
    "x": GateKind(1, 0, 0, _itself("x")),
    "z": GateKind(1, 0, 0, _itself("z")),
    "h": GateKind(1, 0, 0, _itself("h")),
    "s": GateKind(1, 0, 0, _named("sdg")),
    "sdg": GateKind(1, 0, 0, _named("s")),
    "t": GateKind(1, 0, 0, _named("tdg")),
    "tdg": GateKind(1, 0, 0, _named("t")),
    "rx": GateKind(1, 1, 0, _negated("rx")),
    "ry": GateKind(1, 1, 0, _negated("ry")),
    "rz": GateKind(1, 1, 0, _negated("rz")),
    "U": GateKind(1, 3, 0, _u_inverse),
    "cx": GateKind(2, 0, 1, _itself("cx")),
    "cz": GateKind(2, 0, 1, _itself("cz")),
    "swap": GateKind(2, 0, 3, _itself("swap")),
    "rccx": GateKind(3, 0, 3, _itself("rccx"), _RCCX_BODY),
    "rcccx": GateKind(4, 0, 6, _named("rcccxdg"), _RCCCX_BODY),
    "rcccxdg": GateKind(4, 0, 6, _named("rcccx"), _RCCCXDG_BODY),
}


def inverse(gate: Gate) -> Gate:
    """Return the inverse of one gate.

    >>> inverse(Gate("ry", (0,), (0.5,)))
    Gate(name='ry', wires=(0,), angles=(-0.5,))
    """
    name, angles = GATES[gate.name].inverse(gate.angles)
    return Gate(name, gate.wires, angles)


def inverse_sequence(gates: Iterable[Gate]) -> tuple[Gate, ...]:
    """Return the gate-by-gate inverse of a sequence: each gate's inverse, in reverse order."""
    return tuple(inverse(gate) for gate in reversed(tuple(gates)))


def expand(gates: Iterable[Gate]) -> tuple[Gate, ...]:
    """Replace every gate that has a body by that body."""
    result: list[Gate] = []
    for gate in gates:
        body = GATES[gate.name].body
        if body:
            result.extend(Gate(g.name, tuple(gate.wires[w] for w in g.wires), g.angles) for g in body)
        else:
            result.append(gate)
    return tuple(result)


def two_qubit_gates(gates: Iterable[Gate]) -> int:
    """Count two-qubit gates after expansion (a swap counts three).

    >>> two_qubit_gates([Gate("rccx", (0, 1, 2)), Gate("cx", (0, 1)), Gate("x", (0,))])
    4
    """
    return sum(GATES[gate.name].two_qubit_gates for gate in gates)


def depth(gates: Iterable[Gate], wires: int) -> int:
    """Return the depth of the expanded sequence: the longest chain of gates that share wires.

    >>> depth([Gate("cx", (0, 1)), Gate("x", (2,)), Gate("cx", (1, 2))], 3)
    2
    """
    level = [0] * wires
    for gate in expand(gates):
        top = 1 + max(level[w] for w in gate.wires)
        for w in gate.wires:
            level[w] = top
    return max(level, default=0)
