"""Method `drop`: the trivial baseline. Keep some wires of the eigenbasis, drop the rest and guess them.

No entangling gate beyond the letters' own eigenbasis rotations; the price is typical weight.
"""

from __future__ import annotations

from itertools import combinations

import numpy as np

from encoder_forge.bits import wire_mask
from encoder_forge.errors import LimitError
from encoder_forge.gates import Gate
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.encoder import Encoder
from encoder_forge.synthesis.matrices import sequence_matrix
from encoder_forge.synthesis.rotation import letter_rotation

MAX_WIRES = 8


def synthesise(basis: TypicalBasis) -> Encoder:
    """Keep the wires whose loss costs least.

    Eigenvalues fall with the eigen-index, so the dropped wires are best guessed as zero.

    Parameters
    ----------
    basis : TypicalBasis

    Returns
    -------
    Encoder

    Raises
    ------
    LimitError
        Above 8 wires.
    """
    if basis.wires > MAX_WIRES:
        raise LimitError(f"dropping wires is tried up to {MAX_WIRES} wires; the block has {basis.wires}")
    strings = np.arange(1 << basis.wires)
    best: tuple[float, tuple[int, ...]] = (-1.0, ())
    for trash in combinations(reversed(range(basis.wires)), basis.wires - basis.kept_qubits):
        mask = sum(wire_mask(w, basis.wires) for w in trash)
        weight = float(basis.weights[strings & mask == 0].sum())
        if weight > best[0] + 1e-12:
            best = (weight, tuple(sorted(trash)))
    weight, trash = best
    mask = sum(wire_mask(w, basis.wires) for w in trash)
    letter = letter_rotation(basis)
    gates = tuple(
        Gate(g.name, tuple(w + i * basis.letter_qubits for w in g.wires), g.angles)
        for i in range(basis.block)
        for g in letter
    )
    return Encoder(
        method="drop",
        wires=basis.wires,
        kept=tuple(w for w in range(basis.wires) if w not in trash),
        trash=trash,
        scratch=(),
        gates=gates,
        kept_strings=tuple(strings[strings & mask == 0].tolist()),
        typical_weight=weight,
        unitary=sequence_matrix(gates, basis.wires),
    )
