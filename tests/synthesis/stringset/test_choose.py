from itertools import combinations
from math import comb

import numpy as np
import pytest

from encoder_forge.synthesis.stringset import choose
from encoder_forge.synthesis.stringset.choose import cheapest_set, subsets

from .by_hand import least_costs, mask


def problem(rng, wires, kept):
    """Random required and free strings that leave at least one set."""
    size = 1 << kept
    order = rng.permutation(1 << wires).tolist()
    required = int(rng.integers(0, size + 1))
    free = int(rng.integers(size - required, (1 << wires) - required + 1))
    return order[:required], order[required : required + free]


@pytest.mark.parametrize("kept", [0, 1, 2, 3])
def test_cheapest_set_matches_brute_force_on_three_wires(kept):
    costs = {mask(strings): cost for strings, cost in least_costs(3, kept).items()}
    rng = np.random.default_rng(kept)
    for _ in range(150):
        required, free = problem(rng, 3, kept)
        found = cheapest_set(mask(required), mask(free), 3, kept)
        admissible = [
            mask(required) | mask(extra) for extra in combinations(free, (1 << kept) - len(required))
        ]
        best = min(costs[m] for m in admissible)
        assert (found.cost, found.mask) == (best, min(m for m in admissible if costs[m] == best))


@pytest.mark.parametrize(("wires", "kept"), [(3, 2), (4, 2), (4, 3), (5, 2), (5, 3)])
def test_walking_classes_finds_what_enumeration_finds(monkeypatch, wires, kept):
    rng = np.random.default_rng(10 * wires + kept)
    for _ in range(8):
        required, free = problem(rng, wires, kept)
        if comb(len(free), (1 << kept) - len(required)) > choose.ENUMERATED:
            continue
        listed = cheapest_set(mask(required), mask(free), wires, kept)
        with monkeypatch.context() as patch:
            patch.setattr(choose, "ENUMERATED", 0)
            walked = cheapest_set(mask(required), mask(free), wires, kept)
        assert (walked.mask, walked.cost) == (listed.mask, listed.cost)


def test_very_many_ties_are_settled_by_walking_classes():
    everything = (1 << 32) - 1
    found = cheapest_set(1, everything ^ 1, 5, 4)  # 300 million sets
    assert (found.mask, found.cost) == (0xFFFF, 0)
    # 16 of 30 strings, and the two antipodes must both be among them: no half space holds them.
    antipodes = 1 | 1 << 31
    found = cheapest_set(antipodes, everything ^ antipodes, 5, 4)
    assert found.cost == 1
    assert found.mask & antipodes == antipodes


def test_ties_make_blocks_cheaper():
    # Eight strings of lowest weight in five wires: which two of weight two join decides the cost.
    below = mask(s for s in range(32) if s.bit_count() < 2)
    level = mask(s for s in range(32) if s.bit_count() == 2)
    costs = {cheapest_set(int(m) | below, 0, 5, 3).cost for m in subsets(level, 2)}
    assert min(costs) == 10 == cheapest_set(below, level, 5, 3).cost
    assert max(costs) > 10


@pytest.mark.parametrize(
    ("required", "free"),
    [(0b111, 0b1000), (0b1, 0), (0b11, 0b10)],
    ids=["too many required", "too few free", "overlapping"],
)
def test_impossible_conditions_are_refused(required, free):
    with pytest.raises(ValueError, match="no set of 2 strings"):
        cheapest_set(required, free, 3, 1)


def test_subsets_are_all_of_them_in_order():
    plain = sorted(mask(c) for c in combinations([0, 2, 3, 17, 31], 3))
    assert subsets(mask([0, 2, 3, 17, 31]), 3).tolist() == plain
    assert subsets(0b101, 0).tolist() == [0]
    assert subsets(0b101, 3).tolist() == []
