"""Check backend `statevector`: the text read by our own reader, run gate by gate in numpy."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from encoder_forge.qasm.program import Apply


def run_columns(operations: Sequence[Apply], wires: int, states: np.ndarray) -> np.ndarray:
    """Apply a sequence of unitaries to several states at once.

    Parameters
    ----------
    operations : sequence of Apply
    wires : int
    states : ndarray of complex, shape (2^wires, c)
        One state a column.

    Returns
    -------
    ndarray of complex, shape (2^wires, c)

    Notes
    -----
    Neighbouring gates on the same one or two wires are multiplied into one small matrix first; each of those
    then costs O(2^wires c).
    """
    tensor = np.asarray(states, dtype=complex).reshape([2] * wires + [-1])
    for wires_on, matrix in _fused(operations):
        tensor = _applied(matrix, wires_on, tensor)
    return tensor.reshape(1 << wires, -1)


def _applied(matrix: np.ndarray, on: tuple[int, ...], tensor: np.ndarray) -> np.ndarray:
    k = len(on)
    product = np.tensordot(matrix.reshape([2] * (2 * k)), tensor, axes=(range(k, 2 * k), on))
    return np.moveaxis(product, range(k), on)


def _fused(operations: Sequence[Apply]) -> list[tuple[tuple[int, ...], np.ndarray]]:
    """Merge gates into blocks of at most two wires where nothing stands between them."""
    done: list[tuple[tuple[int, ...], np.ndarray]] = []
    open_blocks: dict[int, tuple[tuple[int, ...], np.ndarray]] = {}

    def close(wire: int) -> None:
        block = open_blocks.get(wire)
        if block is not None:
            done.append(block)
            for w in block[0]:
                del open_blocks[w]

    for operation in operations:
        on, matrix = operation.wires, operation.matrix
        block = open_blocks.get(on[0])
        if block is not None and set(on) <= set(block[0]):
            merged = (block[0], _widened(matrix, on, block[0]) @ block[1])
        elif len(on) > 2:
            for wire in on:
                close(wire)
            done.append((on, matrix))
            continue
        else:
            merged = (on, matrix)
            for wire in on:
                held = open_blocks.get(wire)
                if held is not None and len(held[0]) == 1:
                    merged = (on, merged[1] @ _widened(held[1], held[0], on))
                else:
                    close(wire)
        for wire in merged[0]:
            open_blocks[wire] = merged
    for wire in list(open_blocks):
        close(wire)
    return done


def _widened(matrix: np.ndarray, on: tuple[int, ...], onto: tuple[int, ...]) -> np.ndarray:
    """Return the matrix of a gate on wires `on`, seen on the one or two wires `onto`."""
    if on == onto:
        return matrix
    if len(on) == 2:
        return matrix.reshape(2, 2, 2, 2).transpose(1, 0, 3, 2).reshape(4, 4)
    identity = np.eye(2)
    return np.kron(matrix, identity) if on[0] == onto[0] else np.kron(identity, matrix)
