"""The check proper: texts and a claim in, a report out."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from encoder_forge.check.backends import BACKENDS
from encoder_forge.check.compare import compare
from encoder_forge.check.measure import leakage, measure, round_trip_error
from encoder_forge.check.report import CheckReport
from encoder_forge.check.roundtrip import RoundTrip, run_round_trip
from encoder_forge.check.strings import LetterStrings
from encoder_forge.errors import CheckFailedError
from encoder_forge.qasm.program import Program
from encoder_forge.source.model import Source
from encoder_forge.spectrum.records import TypicalBasis


@dataclass(frozen=True, slots=True, eq=False)
class Claim:
    """What texts are said to do.

    Attributes
    ----------
    source : Source
        What feeds the block.
    basis : TypicalBasis
        Of that source.
    kept_basis : TypicalBasis
        The basis the kept strings are spelled in: `basis` itself, or, for an encoder on another source, that
        of the source it was made for.
    kept_strings : tuple of int
    kept : tuple of int
        Kept wires.
    policy : str
    strings : LetterStrings
    analytic : dict
        Figure name to value, see `compare.compare`.
    string_fidelities : ndarray or None
        Expected fidelity of each of `strings`.
    """

    source: Source
    basis: TypicalBasis
    kept_basis: TypicalBasis
    kept_strings: tuple[int, ...]
    kept: tuple[int, ...]
    policy: str
    strings: LetterStrings
    analytic: dict[str, float | None]
    string_fidelities: np.ndarray | None


def check_texts(encoder: str, decoder: str, claim: Claim, backend: str = "statevector") -> CheckReport:
    """Run encoder and decoder texts and hold what is measured against a claim.

    Parameters
    ----------
    encoder, decoder : str
        OpenQASM 3 text, nothing else: no circuit object enters the check.
    claim : Claim
    backend : str
        A name in `backends.BACKENDS`.

    Returns
    -------
    CheckReport

    Raises
    ------
    InputError
        If a text cannot be read.
    CheckFailedError
        If the texts do not have an encoder's and a decoder's form.
    """
    engine = BACKENDS[backend]
    first, second = engine.read(encoder, "encoder.qasm"), engine.read(decoder, "decoder.qasm")
    _require_wires(first, claim)
    trip = run_round_trip(first, second, engine, claim.basis.wires, claim.kept)
    if claim.policy == "herald":
        _require_flag(first, trip)
    leak = leakage(trip, claim.kept_basis, claim.kept_strings)
    error = round_trip_error(trip, claim.kept_basis, claim.kept_strings)
    measured = measure(
        trip, claim.source, claim.basis, claim.strings, claim.policy, backend, leak, error
    )
    return compare(measured, claim.analytic, claim.string_fidelities)


def _require_wires(encoder: Program, claim: Claim) -> None:
    if encoder.wires < claim.basis.wires or any(w >= encoder.wires for w in claim.kept):
        raise CheckFailedError(
            f"encoder.qasm has {encoder.wires} wires; the block needs {claim.basis.wires}, "
            f"kept wires are {', '.join(map(str, claim.kept))}"
        )


def _require_flag(encoder: Program, trip: RoundTrip) -> None:
    """Require that the bit `flag` is zero for accepted blocks and one for all others."""
    register = encoder.registers.get("flag")
    if register is None or len(register) != 1:
        raise CheckFailedError("policy herald, but encoder.qasm declares no `bit[1] flag`")
    for number, bits in enumerate(trip.bits):
        raised = bool((bits >> register[0]) & 1)
        if raised == (number == trip.accepted):
            raise CheckFailedError(
                "policy herald: the bit `flag` does not tell blocks with trash at zero from the others"
            )
