"""Text that the project's own reader does not know, read by Qiskit's OpenQASM 3 importer."""

from __future__ import annotations

from typing import Any

import numpy as np

from encoder_forge.bits import flip_endian
from encoder_forge.errors import InputError
from encoder_forge.qasm.program import Apply, Measure, Operation, Program, Reset, When

_CX_COUNT = {
    "swap": 3, "ccx": 6, "cswap": 8, "crx": 2, "cry": 2, "crz": 2,
    "cp": 2, "cu1": 2, "cu3": 2, "cu": 2,
}  # fmt: skip
_MAX_MATRIX_QUBITS = 2


def import_program(text: str, name: str) -> Program:
    """Read text through Qiskit's importer.

    Parameters
    ----------
    text : str
    name : str
        What to call the text in a complaint.

    Raises
    ------
    InputError
        If the importer refuses it, or it holds operations that no encoder needs (loops, delays, parameters
        left open).
    """
    from qiskit import qasm3

    try:
        circuit = qasm3.loads(text)
    except Exception as error:  # the importer raises types of several packages
        reason = " ".join(str(error).strip().strip("'\"").split()) or type(error).__name__
        raise InputError(
            f"{name}: not OpenQASM 3 text that can be read ({reason}); accepted: what Qiskit's importer takes"
        ) from error
    if circuit.parameters:
        free = ", ".join(sorted(p.name for p in circuit.parameters))
        raise InputError(f"{name}: has open input parameters ({free}); accepted: bound angles only")
    operations = _operations(circuit, list(range(circuit.num_qubits)), list(range(circuit.num_clbits)), name)
    registers = {
        register.name: tuple(circuit.find_bit(bit).index for bit in register) for register in circuit.cregs
    }
    return Program(circuit.num_qubits, circuit.num_clbits, tuple(operations), registers, "importer")


def _operations(circuit: Any, wires: list[int], bits: list[int], name: str) -> list[Operation]:
    result: list[Operation] = []
    for item in circuit.data:
        operation = item.operation
        on = tuple(wires[circuit.find_bit(q).index] for q in item.qubits)
        into = tuple(bits[circuit.find_bit(c).index] for c in item.clbits)
        match operation.name:
            case "measure":
                result.append(Measure(on[0], into[0]))
            case "reset":
                result.append(Reset(on[0]))
            case "barrier":
                pass
            case "if_else":
                result.append(_when(circuit, operation, on, into, bits, name))
            case _:
                _gate(operation, on, result, name)
    return result


def _when(
    circuit: Any, operation: Any, on: tuple[int, ...], into: tuple[int, ...], bits: list[int], name: str
) -> When:
    if not isinstance(operation.condition, tuple):
        raise InputError(f"{name}: a condition on an expression; accepted: a bit, or register == number")
    subject, value = operation.condition
    members = [subject] if not hasattr(subject, "size") else list(subject)
    condition = tuple(bits[circuit.find_bit(bit).index] for bit in members)
    branches = [tuple(_operations(block, list(on), list(into), name)) for block in operation.blocks]
    return When(condition, int(value), *branches)


def _gate(operation: Any, on: tuple[int, ...], result: list[Operation], name: str) -> None:
    if len(on) <= _MAX_MATRIX_QUBITS or operation.name in _CX_COUNT:
        try:
            matrix = np.asarray(operation.to_matrix(), dtype=complex)
        except Exception:
            matrix = None
        if matrix is not None:
            count = _CX_COUNT.get(operation.name, 1) if len(on) > 1 else 0
            if len(on) > 1 and operation.name not in _CX_COUNT and operation.definition is not None:
                count = _two_qubit_count(operation)
            result.append(Apply(operation.name, flip_endian(matrix, len(on)), on, count))
            return
    if operation.definition is None:
        raise InputError(
            f"{name}: operation {operation.name!r} cannot be simulated; "
            "accepted: gates, measure, reset, if on bits"
        )
    for item in operation.definition.data:
        inner = tuple(on[operation.definition.find_bit(q).index] for q in item.qubits)
        _gate(item.operation, inner, result, name)


def _two_qubit_count(operation: Any) -> int:
    """Count the two-qubit gates that a gate's definition spells out (one for a gate known by name)."""
    from qiskit.circuit.library.standard_gates import get_standard_gate_name_mapping

    if operation.name in get_standard_gate_name_mapping() or operation.definition is None:
        return 1
    return sum(
        _CX_COUNT.get(item.operation.name, _two_qubit_count(item.operation))
        for item in operation.definition.data
        if len(item.qubits) > 1
    )
