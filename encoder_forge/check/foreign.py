"""An encoder from anywhere: no decoder text, the exact inverse stands in for it."""

from __future__ import annotations

import numpy as np

from encoder_forge.bits import pick_bits
from encoder_forge.check.backends import BACKENDS
from encoder_forge.check.measure import eigenstring_states, leakage, measure
from encoder_forge.check.report import Measured
from encoder_forge.check.roundtrip import RoundTrip, check_width
from encoder_forge.check.strings import LetterStrings
from encoder_forge.errors import InputError
from encoder_forge.source.model import Source
from encoder_forge.spectrum.records import TypicalBasis


def measure_encoder(
    text: str,
    name: str,
    kept: tuple[int, ...],
    source: Source,
    basis: TypicalBasis,
    strings: LetterStrings,
    policy: str,
    backend: str = "statevector",
) -> Measured:
    """Measure an encoder text with its exact inverse as the decoder.

    Everything before the first measurement or reset is the unitary. Wires outside `kept` below the block's
    are trash, above them scratch (starting at zero).

    Parameters
    ----------
    text, name : str
        OpenQASM 3 text, and what to call it in a complaint.
    kept : tuple of int
        Kept wires.
    source : Source
    basis : TypicalBasis
        Of that source.
    strings : LetterStrings
    policy : str
        Under `substitute` the most probable string's own state is returned after a failure.
    backend : str

    Raises
    ------
    InputError
        If the text cannot be read, has too few wires, or `kept` names wires it does not have.
    """
    engine = BACKENDS[backend]
    program = engine.read(text, name)
    if program.wires < basis.wires:
        raise InputError(
            f"{name}: has {program.wires} wires; accepted: at least {basis.wires}, the qubits of the block"
        )
    outside = [w for w in kept if w >= program.wires]
    if outside:
        raise InputError(
            f"{name}: --kept names wire {outside[0]}; accepted: 0 to {program.wires - 1}, which the text has"
        )
    check_width(program.wires, engine)
    unitary = engine.columns(program.unitary_part, program.wires, np.eye(1 << program.wires, dtype=complex))
    trip = _with_inverse(unitary, program.wires, basis, kept, policy)
    return measure(
        trip, source, basis, strings, policy, backend, leakage(trip, basis, None), None
    )


def _with_inverse(
    unitary: np.ndarray, wires: int, basis: TypicalBasis, kept: tuple[int, ...], policy: str
) -> RoundTrip:
    """Join an encoder's matrix and its inverse under a failure policy."""
    rows = np.arange(1 << wires)
    dropped = tuple(w for w in range(wires) if w not in kept)
    trash, codes = pick_bits(rows, dropped, wires), pick_bits(rows, kept, wires)
    clean = np.flatnonzero(trash == 0)
    clean = clean[np.argsort(codes[clean])]
    scratch = wires - basis.wires
    decode = np.zeros((1 << wires, len(clean) + 1), dtype=complex)
    block_rows = np.arange(1 << basis.wires) << scratch
    decode[:, :-1] = unitary[clean].conj().T
    decode[block_rows, -1:] = eigenstring_states(basis, np.array([basis.most_probable]))
    order = np.lexsort((codes, trash))
    targets = codes[order]
    branch = trash[order]
    if policy == "substitute":
        # Each failing row is its own outcome, and comes back as the most probable string.
        failed = branch > 0
        targets = np.where(failed, len(clean), targets)
        branch = np.where(failed, np.arange(len(order)), 0)
    starts = np.flatnonzero(np.r_[True, np.diff(branch) != 0])
    return RoundTrip(
        wires=wires,
        block_wires=basis.wires,
        encode=unitary[:, block_rows],
        decode=decode,
        rows=rows[order],
        codes=targets,
        factors=np.ones(len(order), dtype=complex),
        starts=starts,
        bits=(0,) * len(starts),
        accepted=0,
        accepted_rows=trash == 0,
    )
