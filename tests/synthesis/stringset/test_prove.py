import numpy as np
import pytest

from encoder_forge.synthesis.stringset import prove as prove_module
from encoder_forge.synthesis.stringset.canonical import canonical
from encoder_forge.synthesis.stringset.layers import LayeredSearch
from encoder_forge.synthesis.stringset.masks import subcube
from encoder_forge.synthesis.stringset.prove import main, prove
from encoder_forge.synthesis.stringset.table import class_table

from .by_hand import least_costs

MINIMA = {(3, 2): 5, (4, 3): 5, (4, 2): 5, (5, 3): 10, (5, 4): 18}


@pytest.mark.parametrize("case", MINIMA)
def test_cold_search_reaches_the_known_minima(case):
    proof = prove(*case)
    assert proof.minimum == MINIMA[case]
    # Both sides must have gone far enough for the stopping rule to be a proof, unless nothing was left.
    reach = len(proof.typical_layers) + len(proof.subcube_layers) - 2
    exhausted = sum(proof.subcube_layers) == len(class_table(*case).forms)
    assert reach - 5 >= proof.minimum or exhausted


def test_layers_agree_with_the_table():
    proof = prove(5, 4)
    costs = class_table(5, 4).costs
    assert proof.subcube_layers == tuple(int((costs == c).sum()) for c in range(len(proof.subcube_layers)))


def test_every_block_and_kept_agrees_with_a_plain_search_over_sets():
    for kept in range(4):
        plain = least_costs(3, kept)
        ranks = sorted(range(8), key=lambda s: s.bit_count())
        level = ranks[(1 << kept) - 1].bit_count()
        below = {s for s in ranks if s.bit_count() < level}
        best = min(
            cost
            for strings, cost in plain.items()
            if below <= strings and all(s.bit_count() <= level for s in strings)
        )
        assert prove(3, kept).minimum == best


def test_output_shows_empty_layers_and_agrees(capsys):
    assert main() == 0
    text = capsys.readouterr().out
    assert text.count("agrees") == 5
    assert "3 -> 2: 5 two-qubit gates" in text
    assert "     3        0        1" in text  # no class at cost 3 from the typical set of three wires


def test_exit_1_when_search_and_table_differ(monkeypatch, capsys):
    monkeypatch.setattr(prove_module, "CASES", ((3, 2),))
    monkeypatch.setattr(prove_module, "known_gates", lambda wires, kept: 4)
    assert main() == 1
    assert "DIFFERS" in capsys.readouterr().out


@pytest.mark.parametrize("wires", [3, 4])
def test_stopping_rule_never_stops_early(wires):
    # From every class as the start, the two-sided search must find what the one-sided one knows.
    for kept in range(1, wires):
        table = class_table(wires, kept)
        for form, cost in zip(table.forms[::3], table.costs[::3], strict=True):
            outward = LayeredSearch(np.array([form]), wires)
            inward = LayeredSearch(np.array([subcube(kept)], dtype=np.uint32), wires)
            assert prove_module.least_cost(outward, inward) == cost


@pytest.mark.parametrize(("wires", "kept"), [(3, 2), (4, 2), (4, 3)])
def test_search_passes_over_empty_layers(wires, kept):
    table = class_table(wires, kept)
    gaps = 0
    for form in table.forms:
        search = LayeredSearch(np.array([form]), wires)
        search.run()
        assert len(search.settled) == len(table.forms)
        assert len(search.layers[-1])
        gaps += any(not len(layer) for layer in search.layers)
    assert gaps


def test_search_from_two_starts_takes_the_nearer():
    table = class_table(4, 3)
    starts = table.forms[[5, 40]]
    search = LayeredSearch(starts, 4)
    search.run()
    alone = []
    for start in starts:
        single = LayeredSearch(np.array([start]), 4)
        single.run()
        alone.append(single.costs())
    assert np.array_equal(search.costs(), np.minimum(*alone))
    assert np.array_equal(canonical(search.settled, 4), table.forms)
