"""Figures read off a simulated round trip."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from encoder_forge.check.report import Measured
from encoder_forge.check.roundtrip import RoundTrip
from encoder_forge.check.strings import LetterStrings, pure_states, sample_interval, string_components
from encoder_forge.source.model import Source
from encoder_forge.spectrum.records import TypicalBasis

MAX_MIXED_QUBITS = 6
_CHUNK = 512


def eigenstring_states(basis: TypicalBasis, strings: np.ndarray) -> np.ndarray:
    """Return eigenstrings as states on the block's wires, shape (2^wires, x), one a column."""
    q = basis.letter_qubits
    states = np.ones((1, len(strings)), dtype=complex)
    for letter in range(basis.block):
        digit = (strings >> (q * (basis.block - 1 - letter))) & ((1 << q) - 1)
        states = np.einsum("ax,bx->abx", states, basis.rotation[:, digit]).reshape(-1, len(strings))
    return states


def leakage(trip: RoundTrip, basis: TypicalBasis, kept_strings: tuple[int, ...] | None) -> float:
    """Return the largest norm that falls on the wrong side of trash = scratch = 0.

    Over the kept strings where they are declared; else over the strings that every optimal set holds, and
    those that none does.
    """
    if kept_strings is not None:
        inside, outside = np.array(kept_strings), np.array([], dtype=int)
    else:
        inside, outside = np.flatnonzero(basis.required), np.flatnonzero(basis.forbidden)
    sent_in = trip.encode @ eigenstring_states(basis, inside)
    sent_out = trip.encode @ eigenstring_states(basis, outside)
    norms = np.concatenate(
        [
            np.linalg.norm(sent_in[~trip.accepted_rows], axis=0),
            np.linalg.norm(sent_out[trip.accepted_rows], axis=0),
        ]
    )
    return float(norms.max(initial=0.0))


def round_trip_error(trip: RoundTrip, basis: TypicalBasis, kept_strings: tuple[int, ...]) -> float:
    """Return the largest departure of the accepted round trip from the identity on the kept strings.

    One common phase is free; scratch must come back at zero.
    """
    states = eigenstring_states(basis, np.array(kept_strings))
    expected = np.zeros((1 << trip.wires, states.shape[1]), dtype=complex)
    expected[np.arange(len(states)) << (trip.wires - trip.block_wires)] = states
    out = trip.accepted_output(states)
    overlap = np.vdot(expected, out)
    phase = overlap / abs(overlap) if abs(overlap) > 0 else 1.0
    return float(np.linalg.norm(out - phase * expected, axis=0).max())


def measure(
    trip: RoundTrip,
    source: Source,
    basis: TypicalBasis,
    strings: LetterStrings,
    policy: str,
    backend: str,
    leak: float,
    trip_error: float | None,
) -> Measured:
    """Measure every figure of a round trip on a source.

    Parameters
    ----------
    trip : RoundTrip
    source : Source
        The source that feeds the block.
    basis : TypicalBasis
        Of that source: its eigenstrings and weights make the block state.
    strings : LetterStrings
        The letter strings for the ensemble figures.
    policy : str
    backend : str
    leak, trip_error : float
        From `leakage` and `round_trip_error`.
    """
    weighty = np.flatnonzero(basis.weights > 0)
    eigenstates, weights = eigenstring_states(basis, weighty), basis.weights[weighty]
    sent = trip.encode @ eigenstates
    weight = float(weights @ np.sum(abs(sent[trip.accepted_rows]) ** 2, axis=0))
    traces = trip.amplitudes(eigenstates, eigenstates) @ weights
    total = float(np.sum(abs(traces) ** 2))
    accepted = float(np.sum(abs(traces[trip.accepted]) ** 2))
    figures = _ensemble(trip, source, strings, policy)
    fidelities = figures.fidelities
    ensemble = None if fidelities is None else float(strings.weights @ fidelities)
    return Measured(
        typical_weight=weight,
        entanglement_fidelity=accepted,
        entanglement_fidelity_total=total,
        ensemble_fidelity=ensemble,
        ensemble_fidelity_accepted=None if policy != "herald" or ensemble is None else ensemble / weight,
        herald_probability=1 - weight if policy == "herald" else None,
        letter_fidelity=figures.by_letter,
        worst_string=figures.worst,
        worst_fidelity=figures.worst_value,
        string_fidelities=None if fidelities is None else tuple(fidelities.tolist()),
        backend=backend,
        evidence="exact" if strings.exact else "sampled",
        evidence_samples=None if strings.exact else strings.samples,
        evidence_interval=(
            None
            if strings.exact or fidelities is None
            else sample_interval(fidelities, strings.weights, strings.samples)
        ),
        leakage=leak,
        round_trip_error=trip_error,
        notes=figures.notes,
    )


@dataclass(frozen=True, slots=True)
class _EnsembleFigures:
    fidelities: np.ndarray | None
    by_letter: tuple[tuple[str, float], ...] | None
    worst: tuple[str, ...] | None
    worst_value: float | None
    notes: tuple[str, ...]


def _ensemble(trip: RoundTrip, source: Source, strings: LetterStrings, policy: str) -> _EnsembleFigures:
    if not source.pure and trip.block_wires > MAX_MIXED_QUBITS:
        text = (
            f"letters are mixed and the block has {trip.block_wires} qubits: the ensemble fidelity "
            f"(Uhlmann, by brute force) is computed up to {MAX_MIXED_QUBITS} block qubits"
        )
        return _EnsembleFigures(None, None, None, None, (text,))
    accepted_only = policy == "herald"
    if source.pure:
        fidelities = _pure_fidelities(trip, source, strings.letters, accepted_only)
    else:
        fidelities = np.array([_uhlmann(trip, source, x, accepted_only) for x in strings.letters])
    by_letter = []
    for number, letter in enumerate(source.letters):
        share = strings.weights * np.mean(strings.letters == number, axis=1)
        if share.sum() > 0:
            by_letter.append((letter.label, float(share @ fidelities / share.sum())))
    possible = np.flatnonzero(strings.weights > 0)
    worst = possible[np.argmin(fidelities[possible])]
    labels = tuple(source.letters[i].label for i in strings.letters[worst])
    notes = () if strings.exact else ("the worst string is the worst among the sampled ones",)
    return _EnsembleFigures(fidelities, tuple(by_letter), labels, float(fidelities[worst]), notes)


def _pure_fidelities(
    trip: RoundTrip, source: Source, letters: np.ndarray, accepted_only: bool
) -> np.ndarray:
    parts = []
    for start in range(0, len(letters), _CHUNK):
        states = pure_states(source, letters[start : start + _CHUNK])
        amplitudes = trip.amplitudes(states, states)
        if accepted_only:
            amplitudes = amplitudes[trip.accepted : trip.accepted + 1]
        parts.append(np.sum(abs(amplitudes) ** 2, axis=(0, 1)))
    return np.concatenate(parts)


def _uhlmann(trip: RoundTrip, source: Source, letters: np.ndarray, accepted_only: bool) -> float:
    """Return Uhlmann's squared fidelity between a string's state and what comes back.

    With rho = V V^dagger and the output Y Y^dagger, sqrt(F) is the sum of the singular values of V^dagger Y
    (Uhlmann 1976; Jozsa, J. Mod. Opt. 41, 2315 (1994)).
    """
    states, weights = string_components(source, letters)
    root = states * np.sqrt(weights)
    if accepted_only:
        out = trip.accepted_output(root).reshape(len(root), -1)
    else:
        out = trip.outputs(root).reshape(len(root), -1)
    overlap = root.conj().T @ out
    return float(np.sum(np.linalg.svd(overlap, compute_uv=False)) ** 2)
