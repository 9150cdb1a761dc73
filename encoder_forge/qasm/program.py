"""What a piece of OpenQASM 3 text says, once read: operations on numbered wires and bits."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True, slots=True, eq=False)
class Apply:
    """A unitary on some wires.

    Attributes
    ----------
    name : str
    matrix : ndarray of complex, shape (2^k, 2^k)
        First wire most significant.
    wires : tuple of int
        The k wires.
    two_qubit_gates : int
        What it counts as after expansion.
    """

    name: str
    matrix: np.ndarray
    wires: tuple[int, ...]
    two_qubit_gates: int


@dataclass(frozen=True, slots=True)
class Measure:
    """A measurement in the computational basis into a bit."""

    wire: int
    bit: int


@dataclass(frozen=True, slots=True)
class Reset:
    """A wire brought to |0> whatever it held."""

    wire: int


@dataclass(frozen=True, slots=True)
class When:
    """Operations that happen when bits, read as a number with the first bit least significant, equal a value.

    Attributes
    ----------
    bits : tuple of int
    value : int
    then, otherwise : tuple of operations
    """

    bits: tuple[int, ...]
    value: int
    then: tuple[Operation, ...]
    otherwise: tuple[Operation, ...] = ()


Operation = Apply | Measure | Reset | When


@dataclass(frozen=True, slots=True)
class Program:
    """One text, read.

    Attributes
    ----------
    wires, bits : int
        How many; registers are numbered through in the order of their declaration.
    operations : tuple of Apply, Measure, Reset or When
    registers : dict of str to tuple of int
        The classical registers' names and the bits they hold.
    reader : str
        "own" or "importer": which reader took the text.
    """

    wires: int
    bits: int
    operations: tuple[Operation, ...]
    registers: dict[str, tuple[int, ...]]
    reader: str

    @property
    def unitary_part(self) -> tuple[Apply, ...]:
        """Everything before the first measurement, reset or condition."""
        part: list[Apply] = []
        for operation in self.operations:
            if not isinstance(operation, Apply):
                break
            part.append(operation)
        return tuple(part)

    @property
    def two_qubit_gates(self) -> int:
        """Two-qubit gates of the whole text, expanded; those under a condition counted as if it held."""
        return _count(self.operations)

    @property
    def depth(self) -> int:
        """Longest chain of operations that share wires; a condition counts as the operations inside it."""
        level = [0] * max(1, self.wires)
        for wires in _touched(self.operations):
            top = 1 + max(level[w] for w in wires)
            for w in wires:
                level[w] = top
        return max(level)


def _count(operations: tuple[Operation, ...]) -> int:
    total = 0
    for operation in operations:
        if isinstance(operation, Apply):
            total += operation.two_qubit_gates
        elif isinstance(operation, When):
            total += _count(operation.then) + _count(operation.otherwise)
    return total


def _touched(operations: tuple[Operation, ...]) -> list[tuple[int, ...]]:
    result: list[tuple[int, ...]] = []
    for operation in operations:
        if isinstance(operation, Apply):
            result.append(operation.wires)
        elif isinstance(operation, When):
            result.extend(_touched(operation.then + operation.otherwise))
        else:
            result.append((operation.wire,))
    return result
