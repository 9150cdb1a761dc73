import numpy as np
import pytest

from encoder_forge.source.complaints import Place, Report
from encoder_forge.source.states import state_of_matrix, state_of_vector
from encoder_forge.tolerances import NORM_INPUT, NORM_SILENT


@pytest.fixture
def place():
    return Place(Report("a.toml"), "state")


def test_a_vector_keeps_its_phase(place):
    vector = np.array([0.6j, -0.8])
    weights, vectors = state_of_vector(vector, False, place)
    np.testing.assert_array_equal(weights, [1])
    np.testing.assert_allclose(vectors, [vector], atol=1e-15)
    assert not place.report.notes


def test_drift_within_tolerance_is_scaled_away_with_a_note(place):
    _, vectors = state_of_vector(np.array([0.6, 0.8]) * (1 + NORM_INPUT / 2), False, place)
    assert np.linalg.norm(vectors) == pytest.approx(1, abs=1e-15)
    assert place.report.notes == ["state: the norm, 1.0000005, was scaled to 1"]
    assert not place.report.complaints


def test_drift_at_rounding_level_needs_no_note(place):
    assert state_of_vector(np.array([0.6, 0.8]) * (1 + NORM_SILENT / 2), False, place) is not None
    assert not place.report.notes


def test_a_norm_just_over_tolerance_is_refused(place):
    assert state_of_vector(np.array([0.6, 0.8]) * (1 + 2 * NORM_INPUT), False, place) is None
    assert "a norm of 1.000002; accepted: 1 within 1e-06" in place.report.complaints[0]


def test_normalise_accepts_any_positive_norm_with_a_note(place):
    _, vectors = state_of_vector(np.array([3e60, 4e60j]), True, place)
    np.testing.assert_allclose(vectors, [[0.6, 0.8j]], atol=1e-15)
    assert place.report.notes == ["state: the norm, 5e+60, was scaled to 1"]


@pytest.mark.parametrize("normalise", [True, False])
def test_the_zero_state_is_always_refused(place, normalise):
    assert state_of_vector(np.zeros(2, dtype=complex), normalise, place) is None
    assert state_of_matrix(np.zeros((2, 2), dtype=complex), normalise, place) is None
    assert place.report.complaints == [
        "a.toml: state: found a norm of 0; accepted: a positive norm",
        "a.toml: state: found a trace of 0; accepted: a positive trace",
    ]


def test_eigenvalues_fall_and_vectors_give_the_matrix_back(place):
    rng = np.random.default_rng(7)
    root = rng.normal(size=(5, 3)) + 1j * rng.normal(size=(5, 3))
    density = root @ root.conj().T
    density /= np.trace(density)
    weights, vectors = state_of_matrix(density, False, place)
    assert weights.shape == (3,)
    assert vectors.shape == (3, 5)
    assert np.all(np.diff(weights) <= 0)
    np.testing.assert_allclose((vectors.T * weights) @ vectors.conj(), density, atol=1e-14)


def test_the_largest_entry_of_each_eigenvector_is_real_and_positive(place):
    for vector in np.array([[0.36j, -0.48, 0.8j], [0.8j, 0.48, 0.36], [0.48, 0.8j, -0.36j]]):
        _, vectors = state_of_matrix(np.outer(vector, vector.conj()), False, place)
        np.testing.assert_allclose(vectors, [vector / 1j], atol=1e-12)


def test_among_equal_largest_entries_the_first_is_real_and_positive(place):
    vector = np.array([1j, 1, 1]) / np.sqrt(3)
    _, vectors = state_of_matrix(np.outer(vector, vector.conj()), False, place)
    np.testing.assert_allclose(vectors, [vector / 1j], atol=1e-12)


def test_a_projector_becomes_a_pure_state(place):
    weights, _ = state_of_matrix(np.full((2, 2), 0.5, dtype=complex), False, place)
    np.testing.assert_array_equal(weights, [1])


def test_a_barely_mixed_state_stays_mixed_with_a_note(place):
    weights, _ = state_of_matrix(np.diag([1 - 1e-7, 1e-7]).astype(complex), False, place)
    np.testing.assert_allclose(weights, [1 - 1e-7, 1e-7], rtol=1e-6)
    assert "pure within 1e-07" in place.report.notes[0]


def test_a_matrix_that_is_not_hermitian_is_refused_with_how_far_off(place):
    assert state_of_matrix(np.array([[0.5, 0.2], [0.1, 0.5]], dtype=complex), False, place) is None
    assert "not Hermitian: an entry differs from its mirror's conjugate by 0.1;" in place.report.complaints[0]


def test_an_imaginary_diagonal_is_not_hermitian(place):
    assert state_of_matrix(np.diag([0.5 + 0.1j, 0.5]), False, place) is None
    assert "not Hermitian" in place.report.complaints[0]


def test_a_matrix_that_is_not_positive_is_refused_with_its_least_eigenvalue(place):
    assert state_of_matrix(np.diag([1.25, -0.25]).astype(complex), False, place) is None
    assert "not positive: its least eigenvalue is -0.25;" in place.report.complaints[0]


def test_a_trace_other_than_one_is_refused_unless_normalised(place):
    assert state_of_matrix(np.diag([1.0, 1.0]).astype(complex), False, place) is None
    assert "found a trace of 2; accepted: 1 within 1e-06" in place.report.complaints[0]
    weights, _ = state_of_matrix(np.diag([1.0, 3.0]).astype(complex), True, place)
    np.testing.assert_allclose(weights, [0.75, 0.25])


def test_small_departures_of_a_matrix_are_mended_with_notes(place):
    density = np.array([[1 + 4e-7, 3e-7], [0, -4e-7]], dtype=complex)
    weights, _ = state_of_matrix(density, False, place)
    assert weights.sum() == pytest.approx(1, abs=1e-15)
    assert weights.min() > 0
    assert [note.split(",")[0] for note in place.report.notes] == ["state: the matrix", "state: the matrix"]
