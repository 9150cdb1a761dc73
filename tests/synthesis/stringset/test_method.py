import json
import subprocess
import sys

import numpy as np
import pytest

from encoder_forge.errors import LimitError
from encoder_forge.synthesis.stringset import method
from encoder_forge.synthesis.stringset.method import known_gates, synthesise
from encoder_forge.synthesis.stringset.prove import prove

from .by_hand import eigenstate, haar, run, typical_basis

MINIMA = {(3, 2): 5, (4, 3): 5, (4, 2): 5, (5, 3): 10, (5, 4): 18}


def validate(basis, encoder):
    """Hold an encoder to its promises by a plain simulation of every eigenstring."""
    assert encoder.wires == basis.wires
    assert sorted(encoder.kept + encoder.trash) == list(range(basis.wires))
    assert (len(encoder.kept), encoder.scratch) == (basis.kept_qubits, ())
    assert list(encoder.kept_strings) == sorted(set(encoder.kept_strings))
    assert len(encoder.kept_strings) == basis.dimension
    assert basis.most_probable in encoder.kept_strings
    assert all(s in encoder.kept_strings or not basis.required[s] for s in range(1 << basis.wires))
    assert not any(basis.forbidden[s] for s in encoder.kept_strings)
    assert encoder.typical_weight == pytest.approx(basis.optimal_weight, abs=1e-13)
    trash = sum(1 << (basis.wires - 1 - w) for w in encoder.trash)
    landed = set()
    for string in range(1 << basis.wires):
        start = eigenstate(basis, string)
        final = run(encoder.gates, start, basis.wires)
        declared = encoder.unitary @ [start.get(i, 0) for i in range(1 << basis.wires)]
        assert np.allclose([final.get(i, 0) for i in range(1 << basis.wires)], declared, atol=1e-12)
        big = {s: a for s, a in final.items() if abs(a) > 1e-12}
        # A letter's eigenvector goes to one basis state and the rest permutes strings.
        assert len(big) == 1
        code = next(iter(big))
        if string in encoder.kept_strings:
            assert code & trash == 0
            landed.add(code)
        else:
            assert code & trash != 0
        if string == basis.most_probable:
            assert code == 0
    assert len(landed) == basis.dimension


@pytest.mark.parametrize("block", [1, 2, 3, 4, 5])
@pytest.mark.parametrize("real", [True, False])
def test_two_level_letters(block, real):
    rng = np.random.default_rng(block)
    for kept in range(block + 1):
        basis = typical_basis(haar(2, rng, real), np.array([0.9, 0.1]), block, kept)
        encoder = synthesise(basis)
        validate(basis, encoder)
        assert encoder.two_qubit_gates == MINIMA.get((block, kept), encoder.two_qubit_gates)
        assert encoder.two_qubit_gates == known_gates(block, kept)
        assert encoder.minimum.startswith("minimum in the gate model")
        assert {gate.name for gate in encoder.gates[:block]} == ({"ry"} if real else {"U"})


@pytest.mark.parametrize("case", MINIMA)
def test_known_minima(case):
    assert known_gates(*case) == MINIMA[case] == prove(*case).minimum


def test_known_gates_ends_where_the_table_ends():
    assert known_gates(6, 3) is None
    assert known_gates(3, 4) is None
    assert [known_gates(5, kept) for kept in (0, 1, 5)] == [0, 0, 0]


@pytest.mark.parametrize(
    ("eigenbasis", "names"),
    [
        (np.eye(2), []),
        (np.diag([1j, -1]), []),
        (np.array([[0, 1j], [1, 0]]), ["x"]),
        (np.array([[1, 1], [1, -1]]) / 2**0.5, ["h"]),
        (np.array([[0.6, 0.8], [0.8, -0.6]]), ["ry"]),
        (np.array([[0.6, 0.8], [0.8j, -0.6j]]), ["U"]),
    ],
    ids=["identity", "diagonal", "swapped", "hadamard", "real", "complex"],
)
def test_rotations_of_one_qubit_are_as_plain_as_they_can_be(eigenbasis, names):
    basis = typical_basis(eigenbasis, np.array([0.8, 0.2]), 2, 1)
    encoder = synthesise(basis)
    validate(basis, encoder)
    assert [gate.name for gate in encoder.gates] == 2 * names


@pytest.mark.parametrize(("block", "kept"), [(1, 0), (2, 1), (3, 1), (4, 3), (5, 4)])
@pytest.mark.parametrize("eigenvalues", [(1.0, 0.0), (0.5, 0.5)], ids=["pure", "mixed"])
def test_equal_weights_are_spent_for_cost(block, kept, eigenvalues):
    basis = typical_basis(haar(2, np.random.default_rng(1)), np.array(eigenvalues), block, kept)
    encoder = synthesise(basis)
    validate(basis, encoder)
    assert encoder.two_qubit_gates == 0


@pytest.mark.parametrize("kept", [1, 2, 3])
@pytest.mark.parametrize("kind", ["complex", "real", "permuted", "product", "block"])
def test_letters_of_three_levels(kept, kind):
    rng = np.random.default_rng(4)
    eigenbasis = {
        "complex": np.block([[haar(3, rng), np.zeros((3, 1))], [np.zeros((1, 3)), np.eye(1)]]),
        "real": np.block([[haar(3, rng, real=True), np.zeros((3, 1))], [np.zeros((1, 3)), np.eye(1)]]),
        "permuted": np.eye(4)[:, [2, 0, 1, 3]],
        "product": np.kron(haar(2, rng), haar(2, rng)),
        "block": haar(4, rng),
    }[kind]
    basis = typical_basis(eigenbasis, np.array([0.6, 0.3, 0.1, 0.0]), 2, kept)
    encoder = synthesise(basis)
    validate(basis, encoder)
    rotation = encoder.two_qubit_gates - encoder.details["set_cost"]
    assert rotation == (0 if kind in ("permuted", "product") else 4)
    assert "not proven minimal" in encoder.minimum


def test_order_of_eigenvectors_is_chosen_for_the_set(monkeypatch):
    # The strings 00, 01, 02, 10: with another order in one letter they need a CX less.
    eigenbasis = haar(4, np.random.default_rng(8))
    basis = typical_basis(eigenbasis, np.array([0.45, 0.29, 0.23, 0.03]), 2, 2)
    encoder = synthesise(basis)
    validate(basis, encoder)
    every_order = method.rotation_choices
    monkeypatch.setattr(method, "rotation_choices", lambda basis: every_order(basis)[:1])
    assert encoder.two_qubit_gates == synthesise(basis).two_qubit_gates - 1 == 8


def test_shuffled_product_bases_have_a_plan_without_rotation_gates():
    rng = np.random.default_rng(9)
    eigenbasis = np.kron(haar(2, rng), haar(2, rng))[:, [0, 3, 1, 2]]
    basis = typical_basis(eigenbasis, np.array([0.5, 0.3, 0.15, 0.05]), 2, 3)
    encoder = synthesise(basis)
    validate(basis, encoder)
    local = [plan for plan in method._plans(basis) if not any(r.two_qubit_gates for r in plan.rotations)]
    assert len(local) == 1
    assert encoder.two_qubit_gates <= local[0].choice.cost


def test_letters_of_three_qubits():
    rng = np.random.default_rng(5)
    for kept in (1, 2):
        basis = typical_basis(haar(8, rng), np.array([0.3, 0.2, 0.2, 0.1, 0.1, 0.1, 0, 0]), 1, kept)
        validate(basis, synthesise(basis))


def test_most_probable_string_is_kept_even_when_all_weights_tie():
    eigenbasis = np.eye(8)[:, [3, 1, 4, 0, 5, 7, 2, 6]]
    basis = typical_basis(eigenbasis, np.full(8, 1 / 8), 1, 1)
    validate(basis, synthesise(basis))


def test_same_problem_gives_the_same_gates():
    basis = typical_basis(haar(4, np.random.default_rng(6)), np.array([0.4, 0.4, 0.1, 0.1]), 2, 2)
    assert synthesise(basis).gates == synthesise(basis).gates


def test_too_wide_a_block_is_refused():
    basis = typical_basis(np.eye(2), np.array([0.9, 0.1]), 6, 3)
    with pytest.raises(LimitError, match="accepted for this source: --block 5"):
        synthesise(basis)
    with pytest.raises(LimitError, match="up to 3 qubits"):
        synthesise(typical_basis(np.eye(16), np.full(16, 1 / 16), 1, 2))


def test_wrong_gates_are_noticed(monkeypatch):
    right = method.write_gates
    monkeypatch.setattr(method, "write_gates", lambda *args: right(*args)[1:])
    with pytest.raises(RuntimeError, match="the gates are wrong"):
        synthesise(typical_basis(np.eye(2), np.array([0.9, 0.1]), 4, 3))


def test_two_level_letters_need_no_qiskit_and_under_a_second():
    code = (
        "import sys, time, json; start = time.perf_counter();"
        "from encoder_forge.synthesis.stringset.method import known_gates;"
        "found = [known_gates(n, m) for n in range(1, 6) for m in range(n + 1)];"
        "print(json.dumps([time.perf_counter() - start, 'qiskit' in sys.modules, found[-2]]))"
    )
    run_out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    seconds, qiskit, gates = json.loads(run_out.stdout)
    assert (qiskit, gates) == (False, 18)
    assert seconds < 1
