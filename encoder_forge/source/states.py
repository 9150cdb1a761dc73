"""A state vector or density matrix as given becomes weights and vectors, or a complaint.

What a file gives is called drift as long as it departs from a state by at most the tolerances of
`encoder_forge.tolerances`: drift is mended, with a note unless it is mere rounding.
"""

from __future__ import annotations

import numpy as np

from encoder_forge.source.complaints import Place
from encoder_forge.tolerances import DENSITY_INPUT, NORM_INPUT, NORM_SILENT

ZERO_STATE = 1e-100
"""A norm or trace below this is zero; no instrument prints such a number."""

State = tuple[np.ndarray, np.ndarray]
"""Weights of shape (r,), falling, and vectors of shape (r, d): see `model.Letter`."""


def rescaled(size: float, what: str, normalise: bool, place: Place) -> bool:
    """Judge a norm, a trace or a sum that should be one; note or complain.

    Parameters
    ----------
    size : float
        What was found.
    what : str
        Its name: "norm", "trace", "sum of the priors".
    normalise : bool
        Whether the file asks for any positive size to be accepted.
    place : Place
        Where it was found.

    Returns
    -------
    bool
        Whether the values may be divided by `size`.
    """
    drift = abs(size - 1)
    if not size > ZERO_STATE:
        place.complain(f"a {what} of {size:.10g}", f"a positive {what}")
        return False
    if drift > NORM_INPUT and not normalise:
        place.complain(
            f"a {what} of {size:.10g}", f"1 within {NORM_INPUT:g} (any other only with normalise = true)"
        )
        return False
    if drift > NORM_SILENT:
        place.note(f"the {what}, {size:.15g}, was scaled to 1")
    return True


def state_of_vector(amplitudes: np.ndarray, normalise: bool, place: Place) -> State | None:
    """Return the pure state of a vector of shape (d,), its phase kept as given."""
    norm = float(np.linalg.norm(amplitudes))
    if not rescaled(norm, "norm", normalise, place):
        return None
    return np.ones(1), (amplitudes / norm)[np.newaxis, :]


def state_of_matrix(density: np.ndarray, normalise: bool, place: Place) -> State | None:
    """Return the eigenvalues and eigenvectors of a density matrix of shape (d, d); O(d^3).

    Eigenvalues at rounding level are dropped, so that a projector becomes a pure letter. Each vector's
    phase makes its largest entry real and positive.
    """
    trace = float(np.trace(density).real)
    if not rescaled(trace, "trace", normalise, place):
        return None
    density = density / trace
    off = float(np.abs(density - density.conj().T).max())
    if off > DENSITY_INPUT:
        place.complain(
            f"a matrix that is not Hermitian: an entry differs from its mirror's conjugate by {off:.3g}",
            f"a Hermitian matrix, within {DENSITY_INPUT:g}",
        )
        return None
    if off > NORM_SILENT:
        place.note(f"the matrix, not Hermitian by {off:.3g}, was made so")
    values, vectors = np.linalg.eigh((density + density.conj().T) / 2)
    return _positive(values[::-1], vectors[:, ::-1].T, place)


def _positive(values: np.ndarray, vectors: np.ndarray, place: Place) -> State | None:
    """Drop what is zero from falling eigenvalues, of shape (d,), and eigenvectors, one a row."""
    least = float(values[-1])
    if least < -DENSITY_INPUT:
        place.complain(
            f"a matrix that is not positive: its least eigenvalue is {least:.6g}",
            f"a positive matrix: eigenvalues from 0, within {DENSITY_INPUT:g}",
        )
        return None
    if least < -NORM_SILENT:
        place.note(f"the matrix, not positive by {-least:.3g}, was made so")
    kept = values > NORM_SILENT
    if kept.sum() > 1 and values[0] >= 1 - DENSITY_INPUT:
        place.note(f"taken as mixed, though pure within {1 - values[0]:.3g}: give more digits if it is pure")
    weights = values[kept] / values[kept].sum()
    return weights, _with_leading_phase(vectors[kept])


def _with_leading_phase(vectors: np.ndarray) -> np.ndarray:
    """Turn each row so that its largest entry (the first, among equals) is real and positive."""
    sizes = np.abs(vectors)
    # A little slack: among entries equal but for rounding, the first one must win on every machine.
    leading = np.argmax(sizes >= sizes.max(axis=1, keepdims=True) * (1 - 1e-9), axis=1)
    entries = vectors[np.arange(len(vectors)), leading]
    return vectors * (entries.conj() / np.abs(entries))[:, np.newaxis]
