import numpy as np
import pytest

from encoder_forge.synthesis.stringset.canonical import canonical, group_positions, orbit
from encoder_forge.synthesis.stringset.masks import delta_swap, moves

from .by_hand import controlled_x, group, images


def sample(wires, count, seed=0):
    rng = np.random.default_rng(seed)
    masks = rng.integers(0, 1 << (1 << wires), size=count, dtype=np.uint64).astype(np.uint32)
    # Thin and structured sets too, whose halves have large stabilisers.
    thin = [sum({1 << int(s) for s in rng.integers(0, 1 << wires, size=k % 9)}) for k in range(count // 4)]
    full = (1 << (1 << wires)) - 1
    return np.concatenate([masks, np.array([0, 1, full, full >> 1, *thin], dtype=np.uint32)])


@pytest.mark.parametrize("wires", [1, 2, 3, 4, 5])
def test_canonical_form_is_the_smallest_of_all_images(wires):
    masks = sample(wires, 60)
    smallest = np.min([images(masks, element) for element in group(wires)], axis=0)
    assert canonical(masks, wires).tolist() == smallest.tolist()


@pytest.mark.parametrize("wires", [3, 4, 5])
def test_canonical_form_is_blind_to_wire_order_and_flips(wires):
    masks = sample(wires, 20_000, seed=1)
    elements = group(wires)
    for pick in np.random.default_rng(2).integers(0, len(elements), size=10):
        assert np.array_equal(canonical(images(masks, elements[pick]), wires), canonical(masks, wires))


def test_canonical_form_tells_classes_apart():
    # Two strings of five wires are classed by their distance alone.
    pairs = np.array([1 | 1 << s for s in range(1, 32)], dtype=np.uint32)
    forms = canonical(pairs, 5)
    for distance in range(1, 6):
        same = forms[[s.bit_count() == distance for s in range(1, 32)]]
        assert len(set(same.tolist())) == 1
    assert len(set(forms.tolist())) == 5


def test_orbit_and_group_match_the_plain_ones():
    assert sorted(map(tuple, group_positions(3).tolist())) == sorted(map(tuple, group(3)))
    mask = 0x0117
    assert set(orbit(mask, 4).tolist()) == {
        int(images(np.array([mask], dtype=np.uint32), element)[0]) for element in group(4)
    }


@pytest.mark.parametrize("wires", [2, 3, 4, 5])
def test_moves_are_all_controlled_x_up_to_flips(wires):
    ours = set()
    for move in moves(wires):
        moved = np.arange(1 << wires)
        low = np.array([s for s in range(1 << wires) if move.mask >> s & 1])
        moved[low], moved[low + move.shift] = low + move.shift, low
        ours.add((move.weight, tuple(moved.tolist())))
    plain = {(weight, tuple(moved)) for weight, moved in controlled_x(wires)}
    # Left out are only the CX with negative control: a CX and an X.
    assert ours <= plain
    assert len(plain) - len(ours) == wires * (wires - 1)
    assert {weight for weight, _ in plain - ours} == {1}


@pytest.mark.parametrize("wires", [2, 5])
def test_delta_swaps_act_as_the_permutation(wires):
    masks = sample(wires, 50, seed=3)
    for move in moves(wires):
        touched = move.mask | move.mask << move.shift
        moved = [s ^ move.shift if touched >> s & 1 else s for s in range(1 << wires)]
        assert delta_swap(masks, move.shift, move.mask).tolist() == images(masks, moved).tolist()


def test_six_wires_are_refused():
    with pytest.raises(ValueError, match="5 wires"):
        canonical(np.array([1], dtype=np.uint32), 6)
