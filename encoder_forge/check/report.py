"""The records of a check: what was claimed, what was measured, what does not match."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Measured:
    """Figures read off the simulated texts.

    Attributes
    ----------
    typical_weight : float
        Trace of the encoded block state on trash = scratch = 0.
    entanglement_fidelity : float
        |Tr(A sigma)|^2 of the accepted branch A alone.
    entanglement_fidelity_total : float or None
        Summed over all branches; None where no decoder text was run.
    ensemble_fidelity : float or None
        Average over letter strings under the failure policy (for `herald`: accepted blocks count, others
        count zero); None, with a note, where out of reach.
    ensemble_fidelity_accepted, herald_probability : float or None
        For `herald`: the average given acceptance, and the probability of a raised flag.
    letter_fidelity : tuple of (str, float), or None
        For each letter label, the average over strings given that letter at a place drawn at random.
    worst_string : tuple of str, or None
        Labels of the string with the lowest fidelity, `worst_fidelity` its value.
    string_fidelities : tuple of float, or None
        Fidelity of each string checked.
    backend, evidence : str
    evidence_samples : int or None
    evidence_interval : tuple of float, or None
        For sampled evidence: 95 % interval of the ensemble fidelity.
    leakage : float
        Largest norm outside trash = scratch = 0 over the states that every optimal set holds.
    round_trip_error : float or None
        Largest departure of the accepted round trip from the identity on the kept states, up to one phase.
    notes : tuple of str
    """

    typical_weight: float
    entanglement_fidelity: float
    entanglement_fidelity_total: float | None
    ensemble_fidelity: float | None
    ensemble_fidelity_accepted: float | None
    herald_probability: float | None
    letter_fidelity: tuple[tuple[str, float], ...] | None
    worst_string: tuple[str, ...] | None
    worst_fidelity: float | None
    string_fidelities: tuple[float, ...] | None
    backend: str
    evidence: str
    evidence_samples: int | None
    evidence_interval: tuple[float, float] | None
    leakage: float
    round_trip_error: float | None
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class CheckReport:
    """Measured against analytic.

    Attributes
    ----------
    analytic : dict
        Figure name to expected value, None where it has none.
    measured : Measured
    deviation : float
        Largest difference among typical weight, entanglement fidelity and ensemble fidelity.
    complaints : tuple of str
        Which figure fails and by how much; empty when everything matches.
    """

    analytic: dict[str, float | None]
    measured: Measured
    deviation: float
    complaints: tuple[str, ...]

    @property
    def passed(self) -> bool:
        """Whether nothing is to be complained about."""
        return not self.complaints
