"""Measured figures held against analytic ones."""

from __future__ import annotations

import numpy as np

from encoder_forge.check.report import CheckReport, Measured
from encoder_forge.tolerances import DEVIATION, LEAKAGE

COMPARED = ("typical_weight", "entanglement_fidelity", "ensemble_fidelity")
"""The three figures whose largest difference is the deviation."""
ALSO_COMPARED = ("entanglement_fidelity_total", "ensemble_fidelity_accepted", "herald_probability")


def compare(
    measured: Measured,
    analytic: dict[str, float | None],
    string_fidelities: np.ndarray | None,
    must_be_clean: bool = True,
) -> CheckReport:
    """Hold measured figures against analytic ones.

    Parameters
    ----------
    measured : Measured
    analytic : dict
        Figure name to expected value; None or absent where there is none.
    string_fidelities : ndarray or None
        Expected fidelity of each checked letter string, in the measured order. Sampled strings are judged
        each against its own value, never by an interval.
    must_be_clean : bool
        Whether leakage and round-trip error are judged: they are for an encoder on its own source.

    Returns
    -------
    CheckReport
    """
    complaints: list[str] = []
    deviations: list[float] = []
    for key in COMPARED + ALSO_COMPARED:
        expected, found = analytic.get(key), getattr(measured, key)
        if expected is None or found is None or (key.startswith("ensemble") and _sampled(measured)):
            continue
        deviation = abs(found - expected)
        if key in COMPARED:
            deviations.append(deviation)
        if not deviation <= DEVIATION:
            complaints.append(_figure_complaint(key, found, expected))
    if string_fidelities is not None and measured.string_fidelities is not None:
        differences = abs(np.array(measured.string_fidelities) - string_fidelities)
        worst = int(np.argmax(differences))
        if _sampled(measured):
            deviations.append(float(differences[worst]))
        if not differences[worst] <= DEVIATION:
            complaints.append(
                _figure_complaint(
                    f"fidelity of letter string {worst}",
                    measured.string_fidelities[worst],
                    float(string_fidelities[worst]),
                )
            )
    if must_be_clean:
        complaints += _purity_complaints(measured)
    return CheckReport(dict(analytic), measured, max(deviations, default=0.0), tuple(complaints))


def _sampled(measured: Measured) -> bool:
    return measured.evidence == "sampled"


def _figure_complaint(name: str, found: float, expected: float) -> str:
    return (
        f"{name}: measured {found:.12f}, analytic {expected:.12f}, "
        f"off by {abs(found - expected):.3g} (accepted: {DEVIATION:g})"
    )


def _purity_complaints(measured: Measured) -> list[str]:
    complaints = []
    if not measured.leakage <= LEAKAGE:
        complaints.append(
            f"leakage: a kept state has amplitude {measured.leakage:.3g} outside trash = scratch = 0 "
            f"(accepted: {LEAKAGE:g})"
        )
    if measured.round_trip_error is not None and not measured.round_trip_error <= LEAKAGE:
        complaints.append(
            f"round trip: a kept state comes back off by {measured.round_trip_error:.3g} in norm "
            f"(accepted: {LEAKAGE:g})"
        )
    return complaints
