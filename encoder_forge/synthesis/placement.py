"""Where the kept register lies: moved to the leading wires when the user asks for it, swaps counted."""

from __future__ import annotations

from dataclasses import replace

from encoder_forge.gates import Gate
from encoder_forge.synthesis.encoder import Encoder
from encoder_forge.synthesis.matrices import sequence_matrix


def with_kept_leading(encoder: Encoder) -> Encoder:
    """Append swaps that bring the kept wires to the front.

    Parameters
    ----------
    encoder : Encoder

    Returns
    -------
    Encoder
        The same subspace, kept wires 0 ... m-1; each swap counts three two-qubit gates.
    """
    m = len(encoder.kept)
    outside = [w for w in encoder.kept if w >= m]
    inside = [w for w in range(m) if w not in encoder.kept]
    swaps = tuple(Gate("swap", (a, b)) for a, b in zip(inside, outside, strict=True))
    if not swaps:
        return replace(encoder, kept=tuple(range(m)))
    moved = dict(zip(outside, inside, strict=True)) | dict(zip(inside, outside, strict=True))
    unitary = encoder.unitary
    return replace(
        encoder,
        gates=encoder.gates + swaps,
        kept=tuple(range(m)),
        trash=tuple(sorted(moved.get(w, w) for w in encoder.trash)),
        scratch=tuple(sorted(moved.get(w, w) for w in encoder.scratch)),
        unitary=None if unitary is None else sequence_matrix(swaps, encoder.wires) @ unitary,
    )
