"""The record every synthesis method returns."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from encoder_forge.gates import Gate, depth, two_qubit_gates


@dataclass(frozen=True, eq=False)
class Encoder:
    """An encoder circuit's unitary part, with what it promises.

    Attributes
    ----------
    method : str
        Name in the registry.
    wires : int
        Circuit qubits, scratch included.
    kept, trash, scratch : tuple of int
        Wires by role after the circuit; kept wires in the order of the code's bits, most significant first.
    gates : tuple of Gate
        The unitary, in order of application.
    kept_strings : tuple of int
        The eigenstrings (see TypicalBasis) that are carried to trash = scratch = 0, rising; 2^m of them.
    typical_weight : float
        Their weight under the block state.
    unitary : ndarray of complex, shape (2^wires, 2^wires), or None
        The whole action as the method declares it, atypical strings included, up to global phase, computed
        without the emitted text; the analytic ensemble fidelity of policies `discard` and `herald` rests on
        it. None when the circuit is too wide to write a matrix down.
    minimum : str
        "" or what is proven about the gate count, in words.
    details : dict
        Further facts for the candidates' list (names to plain numbers or strings).
    """

    method: str
    wires: int
    kept: tuple[int, ...]
    trash: tuple[int, ...]
    scratch: tuple[int, ...]
    gates: tuple[Gate, ...]
    kept_strings: tuple[int, ...]
    typical_weight: float
    unitary: np.ndarray | None
    minimum: str = ""
    details: dict[str, str | int | float] = field(default_factory=dict)

    @property
    def two_qubit_gates(self) -> int:
        """Two-qubit gates of the expanded circuit."""
        return two_qubit_gates(self.gates)

    @property
    def depth(self) -> int:
        """Depth of the expanded circuit."""
        return depth(self.gates, self.wires)
