from itertools import combinations, pairwise

import numpy as np
import pytest

from encoder_forge.gates import Gate, two_qubit_gates
from encoder_forge.synthesis.stringset import circuit
from encoder_forge.synthesis.stringset.circuit import descend, run_strings, write_gates
from encoder_forge.synthesis.stringset.masks import moves
from encoder_forge.synthesis.stringset.table import ClassTable, class_table

from .by_hand import mask, run


def check(strings, wires, kept):
    """Write the gates for a set and run every string of the block through a plain simulator."""
    path = descend(mask(strings), wires, kept)
    cost = int(class_table(wires, kept).costs_of(np.array([mask(strings)], dtype=np.uint32))[0])
    origin = min(strings)
    gates = write_gates(path, wires, origin)
    assert two_qubit_gates(gates) == sum(move.weight for move in path) == cost
    images = {}
    for string in range(1 << wires):
        state = run(gates, {string: 1.0}, wires)
        big = {s: a for s, a in state.items() if abs(a) > 1e-9}
        assert len(big) == 1, "a monomial circuit sends strings to strings"
        images[string] = next(iter(big))
    assert run_strings(gates, np.arange(1 << wires), wires).tolist() == list(images.values())
    assert images[origin] == 0
    union = 0
    for string in strings:
        union |= images[string]
    assert union.bit_count() == kept  # the other wires are trash and read zero
    return gates


@pytest.mark.parametrize("kept", [1, 2])
def test_every_set_of_three_wires(kept):
    for strings in combinations(range(8), 1 << kept):
        check(strings, 3, kept)


@pytest.mark.parametrize(
    ("wires", "kept", "count"), [(4, 2, 60), (4, 3, 60), (5, 2, 20), (5, 3, 20), (5, 4, 30)]
)
def test_random_sets(wires, kept, count):
    rng = np.random.default_rng(wires + kept)
    for _ in range(count):
        strings = rng.choice(1 << wires, size=1 << kept, replace=False)
        check([int(s) for s in strings], wires, kept)


@pytest.mark.parametrize("wires", [3, 4, 5])
def test_gates_are_the_moves_up_to_flips(wires):
    rng = np.random.default_rng(wires)
    choices = moves(wires)
    strings = np.arange(1 << wires)
    for _ in range(40):
        path = tuple(choices[i] for i in rng.integers(0, len(choices), size=8))
        origin = int(rng.integers(0, 1 << wires))
        gates = write_gates(path, wires, origin)
        plain = strings.copy()
        for move in path:
            target = 1 << (wires - 1 - move.target)
            for string in strings:
                here = int(plain[string])
                bits = tuple((here >> (wires - 1 - c)) & 1 for c in move.controls)
                plain[string] = here ^ target if bits == move.polarities else here
        ours = run_strings(gates, strings, wires)
        assert ours[origin] == 0
        assert len(set((ours ^ plain).tolist())) == 1
        assert not any(a.name == b.name == "x" and a == b for a, b in pairwise(gates))


def test_subcubes_take_no_entangling_gate():
    assert check([0b01001, 0b01011, 0b11001, 0b11011], 5, 2) == (Gate("x", (1,)), Gate("x", (4,)))


def test_the_dearest_class_is_reached():
    table = class_table(5, 4)
    dearest = int(table.forms[int(np.argmax(table.costs))])
    assert len(check([s for s in range(32) if dearest >> s & 1], 5, 4)) >= 7


def test_a_wrong_table_is_noticed_on_the_way_down(monkeypatch):
    table = class_table(4, 3)
    costs = table.costs.astype(int)
    costs[table.costs > 0] += 1
    wrong = ClassTable(4, 3, table.forms, costs.astype(np.uint8))
    monkeypatch.setattr(circuit, "class_table", lambda wires, kept: wrong)
    subcube_neighbour = int(wrong.forms[table.costs == 1][0])
    with pytest.raises(RuntimeError, match="no move leads down"):
        descend(subcube_neighbour, 4, 3)
