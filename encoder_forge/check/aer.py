"""Check backend `aer`: the text read by Qiskit's importer, run by the Aer simulator.

Nothing of this project stands between the text and the matrix, so it also checks the default backend.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from encoder_forge.bits import flip_endian
from encoder_forge.errors import MachineError
from encoder_forge.qasm.program import Apply


def run_columns(operations: Sequence[Apply], wires: int, states: np.ndarray) -> np.ndarray:
    """Apply a sequence of unitaries to several states at once; see `statevector.run_columns`.

    Raises
    ------
    MachineError
        If Aer does not finish (it reports too little memory only in its result).
    """
    from qiskit import QuantumCircuit
    from qiskit.circuit.library import UnitaryGate
    from qiskit_aer import AerSimulator

    circuit = QuantumCircuit(wires)
    for operation in operations:
        matrix = flip_endian(operation.matrix, len(operation.wires))
        circuit.append(UnitaryGate(matrix, check_input=False), list(operation.wires))
    circuit.save_unitary()
    result = AerSimulator(method="unitary").run(circuit).result()
    if not result.success:
        raise MachineError(f"the Aer simulator did not finish: {result.status}")
    unitary = flip_endian(np.asarray(result.get_unitary(circuit)), wires)
    return unitary @ states
