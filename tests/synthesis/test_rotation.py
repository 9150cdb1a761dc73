import numpy as np
import pytest

from encoder_forge.bits import flip_endian
from encoder_forge.errors import LimitError
from encoder_forge.gates import Gate, two_qubit_gates
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis import rotation
from encoder_forge.synthesis.rotation import letter_rotation, rotation_choices

CX = np.eye(4)[[0, 1, 3, 2]]


def haar(size, rng, real=False):
    matrix = rng.normal(size=(size, size)) + (0 if real else 1j * rng.normal(size=(size, size)))
    return np.linalg.qr(matrix)[0].astype(complex)


def one_letter(eigenbasis):
    size = len(eigenbasis)
    none, weights = np.zeros(size, dtype=bool), np.full(size, 1 / size)
    qubits = size.bit_length() - 1
    return TypicalBasis(1, qubits, 1, np.array(eigenbasis, complex), weights, none, ~none, 2 / size)


def qiskit_matrix(gates, qubits):
    """The gates' matrix as Qiskit sees it, in our bit order."""
    from qiskit import QuantumCircuit
    from qiskit.quantum_info import Operator

    circuit = QuantumCircuit(qubits)
    for gate in gates:
        getattr(circuit, gate.name.lower())(*gate.angles, *gate.wires)
    return flip_endian(np.asarray(Operator(circuit).data), qubits)


def validate(eigenbasis, gates, order=None):
    size = len(eigenbasis)
    made = qiskit_matrix(gates, size.bit_length() - 1) @ eigenbasis
    expected = np.zeros((size, size))
    expected[list(order or range(size)), range(size)] = 1
    assert np.allclose(np.abs(made), expected, atol=1e-12)


def local(rng):
    return np.kron(haar(2, rng), haar(2, rng))


@pytest.mark.parametrize("seed", range(15))
def test_two_qubit_letters_take_two_cx_at_most(seed):
    rng = np.random.default_rng(seed)
    for real in (False, True):
        eigenbasis = haar(4, rng, real)
        for order in (None, (0, 2, 1, 3), (3, 0, 1, 2)):
            gates = letter_rotation(one_letter(eigenbasis), order)
            validate(eigenbasis, gates, order)
            assert two_qubit_gates(gates) <= 2


@pytest.mark.parametrize("seed", range(15))
def test_one_cx_is_found_where_it_serves(seed):
    rng = np.random.default_rng(seed)
    angle = rng.uniform(0, np.pi)
    diagonal = np.diag(np.exp(1j * angle * np.array([1, -1, -1, 1])))
    middle = [local(rng) @ CX @ local(rng), CX @ local(rng), local(rng) @ CX, CX][seed % 4]
    eigenbasis = (diagonal @ middle).conj().T
    gates = letter_rotation(one_letter(eigenbasis))
    validate(eigenbasis, gates)
    assert two_qubit_gates(gates) <= 1


@pytest.mark.parametrize("seed", range(10))
def test_product_bases_take_none(seed):
    rng = np.random.default_rng(seed)
    diagonal = np.diag(np.exp(2j * np.pi * rng.uniform(size=4)))
    eigenbasis = (diagonal @ local(rng)).conj().T
    gates = letter_rotation(one_letter(eigenbasis))
    validate(eigenbasis, gates)
    assert two_qubit_gates(gates) == 0


@pytest.mark.parametrize("seed", range(10))
def test_some_order_makes_permutations_and_shuffled_products_free(seed):
    rng = np.random.default_rng(seed)
    for basis in (np.eye(4), local(rng)):
        eigenbasis = basis[:, rng.permutation(4)]
        choices = rotation_choices(one_letter(eigenbasis))
        assert len(choices) == 3
        assert min(choice.two_qubit_gates for choice in choices) == 0
        for choice in choices:
            validate(eigenbasis, choice.gates, choice.order)


def test_choices_differ_beyond_flips_and_wire_exchange():
    # What is free: X on either wire, and exchanging them. The three orders must not be equal up to that.
    def classes(order):
        flips = range(4)
        exchange = (0, 2, 1, 3)
        plain = {tuple(s ^ f for s in order) for f in flips}
        return frozenset(plain | {tuple(exchange[s] for s in labels) for labels in plain})

    choices = rotation_choices(one_letter(haar(4, np.random.default_rng(0))))
    assert len({classes(choice.order) for choice in choices}) == 3
    assert len(frozenset().union(*(classes(choice.order) for choice in choices))) == 24


def test_bell_basis_takes_one_cx():
    bell = np.array([[1, 0, 0, 1], [0, 1, 1, 0], [0, 1, -1, 0], [1, 0, 0, -1]]) / 2**0.5
    gates = letter_rotation(one_letter(bell))
    validate(bell, gates)
    assert two_qubit_gates(gates) == 1


def test_identity_and_phases_take_no_gates():
    assert letter_rotation(one_letter(np.eye(4))) == ()
    assert letter_rotation(one_letter(np.diag([1, 1j, -1, 1]))) == ()
    assert letter_rotation(one_letter(np.eye(8))) == ()


def test_three_qubit_letters_beat_the_general_unitary():
    rng = np.random.default_rng(3)
    for real in (False, True):
        eigenbasis = haar(8, rng, real)
        gates = letter_rotation(one_letter(eigenbasis))
        validate(eigenbasis, gates)
        assert two_qubit_gates(gates) <= 18  # a general three-qubit unitary takes 19


def test_three_qubit_letters_split_into_factors():
    rng = np.random.default_rng(4)
    pair, single = haar(4, rng), haar(2, rng)
    middle = np.einsum("acbd,xy->axcbyd", pair.reshape(2, 2, 2, 2), single).reshape(8, 8)
    for eigenbasis in (np.kron(pair, single), np.kron(single, pair), middle):
        gates = letter_rotation(one_letter(eigenbasis))
        validate(eigenbasis, gates)
        assert two_qubit_gates(gates) <= 2


def test_three_qubit_permutations_are_free_in_some_order():
    eigenbasis = np.eye(8)[:, [3, 1, 4, 0, 5, 7, 2, 6]]
    choices = rotation_choices(one_letter(eigenbasis))
    assert min(len(choice.gates) for choice in choices) == 0
    for choice in choices:
        validate(eigenbasis, choice.gates, choice.order)


def test_wrong_gates_are_refused(monkeypatch):
    right = rotation._rotation_gates

    def nudged(target, qubits):
        first, *rest = right(target, qubits)
        return (Gate(first.name, first.wires, tuple(a + 1e-8 for a in first.angles)), *rest)

    monkeypatch.setattr(rotation, "_rotation_gates", nudged)
    with pytest.raises(RuntimeError, match="misses its eigenvectors"):
        letter_rotation(one_letter(haar(4, np.random.default_rng(0))))


def test_wider_letters_are_refused():
    with pytest.raises(LimitError, match="up to 3 qubits, not 4"):
        letter_rotation(one_letter(np.eye(16)))
