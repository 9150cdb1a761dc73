"""Sources built by hand, without a file."""

import numpy as np

from encoder_forge.source.model import Letter, Source


def make_letter(label, prior, state):
    """A letter from a vector (pure) or a density matrix."""
    state = np.asarray(state, dtype=complex)
    if state.ndim == 1:
        return Letter(label, prior, np.ones(1), (state / np.linalg.norm(state))[None, :])
    values, vectors = np.linalg.eigh(state)
    kept = values > 1e-13
    return Letter(label, prior, values[kept][::-1].copy(), vectors[:, kept][:, ::-1].T.copy())


def make_source(states, priors=None, model="iid", block_qubits=None):
    """A source of the given states (vectors or density matrices); equal priors where none are given."""
    priors = [1 / len(states)] * len(states) if priors is None else priors
    pairs = enumerate(zip(priors, states, strict=True))
    letters = tuple(make_letter(f"letter-{i}", prior, state) for i, (prior, state) in pairs)
    return Source("by-hand", "1", model, letters, block_qubits, (), (), "0" * 64)


PLUS = np.array([1.0, 1.0]) / np.sqrt(2)
ZERO = np.array([1.0, 0.0])
TRINE = [np.array([np.cos(a), np.sin(a)]) for a in (0, np.pi / 3, 2 * np.pi / 3)]


def half_turn(prior=0.5):
    """The textbook pair |0>, |+>."""
    return make_source([ZERO, PLUS], [prior, 1 - prior])


def random_source(rng, dimension, letters, mixed=False, rank=None):
    """Random letters of random priors; `rank` confines them to a random subspace of that dimension."""
    frame = np.linalg.qr(gaussian(rng, dimension, rank or dimension))[0]

    def state():
        vectors = gaussian(rng, 2 if mixed else 1, frame.shape[1]) @ frame.T
        rho = np.einsum("ri,rj->ij", vectors, vectors.conj())
        return rho / np.trace(rho).real if mixed else vectors[0]

    return make_source([state() for _ in range(letters)], rng.dirichlet(np.ones(letters)).tolist())


def gaussian(rng, rows, columns):
    return rng.normal(size=(rows, columns)) + 1j * rng.normal(size=(rows, columns))
