"""The registry of check backends: how text is read, and how its unitaries are run."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from encoder_forge.check import aer, statevector
from encoder_forge.qasm.importer import import_program
from encoder_forge.qasm.program import Apply, Program
from encoder_forge.qasm.reader import read_program


@dataclass(frozen=True, slots=True)
class Backend:
    """One way to run text.

    Attributes
    ----------
    read : callable
        (text, name) to Program.
    columns : callable
        (unitaries, wires, states of shape (2^wires, c)) to states of the same shape.
    max_wires : int
        Widest text it takes: 4^wires amplitudes must fit in memory several times over.
    about : str
        One line for the documentation.
    """

    read: Callable[[str, str], Program]
    columns: Callable[[Sequence[Apply], int, np.ndarray], np.ndarray]
    max_wires: int
    about: str


BACKENDS: dict[str, Backend] = {
    "statevector": Backend(read_program, statevector.run_columns, 12, "own reader, dense numpy simulation"),
    "aer": Backend(import_program, aer.run_columns, 12, "Qiskit's importer, Aer's unitary simulation"),
}
