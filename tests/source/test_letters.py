import numpy as np
import pytest

from encoder_forge.source import letters

from .documents import complaints_of, lamp, lamp_with, only, read


def basis(dimension, index=0):
    return [int(i == index) for i in range(dimension)]


def block(qubits, *dimensions):
    share = 1 / len(dimensions)
    return lamp(
        model="block",
        block_qubits=qubits,
        letters=[{"prior": share, "amplitudes": basis(dimension)} for dimension in dimensions],
    )


def test_labels_are_made_up_where_none_is_given():
    source = read(lamp(letters=[{"prior": 0.5, "amplitudes": [1, 0]}, {"prior": 0.5, "amplitudes": [0, 1]}]))
    assert [letter.label for letter in source.letters] == ["letter-0", "letter-1"]


def test_a_label_given_twice_is_refused_with_both_letters():
    line = only(complaints_of(lamp_with(1, label="plus")))
    assert (
        'letter 1 ("plus"), label: found "plus", which letter 0 has too; accepted: a label of its own' in line
    )


@pytest.mark.parametrize("label", ["", " ", "a\nb", "a\tb", "\x1b[31m", "x" * 201, 3, None, "\ud800"])
def test_a_label_that_is_no_printable_line_is_refused(label):
    document = lamp()
    document["letters"][1]["label"] = label
    assert "letter 1, label: found" in only(complaints_of(document))


def test_an_unknown_key_of_a_letter_is_named_with_the_letter_and_the_nearest_key():
    line = only(complaints_of(lamp_with(1, amplitude=[1, 0])))
    assert 'letter 1 ("minus"): found the unknown key "amplitude"; accepted: did you mean amplitudes?' in line


@pytest.mark.parametrize("value", [{}, {"label": "a"}, 3, "x", [], [1], [{"amplitudes": [1, 0]}, 2]])
def test_letters_that_are_no_list_of_tables_are_refused(value):
    line = only(complaints_of(lamp(letters=value)))
    assert "letters: found " in line
    assert "one table [[letters]] for each letter" in line


def test_letters_of_different_dimensions_are_refused_with_who_has_which():
    line = only(complaints_of(lamp_with(1, amplitudes=[1, 0, 0])))
    assert line == (
        'lamp.json: letters: found dimension 2 in letter 0 ("plus"); dimension 3 in letter 1 ("minus"); '
        "accepted: the same dimension in all letters"
    )


@pytest.mark.parametrize("dimension", [1, 9])
def test_a_letter_of_a_dimension_out_of_range_is_refused(dimension):
    line = only(complaints_of(lamp_with(1, amplitudes=basis(dimension))))
    assert (
        f'letter 1 ("minus"), amplitudes: found a state of dimension {dimension}; accepted: dimension 2 to 8'
        in line
    )


@pytest.mark.parametrize("dimension", range(2, 9))
def test_letters_of_two_to_eight_levels_are_read(dimension):
    letters = [{"prior": 0.5, "amplitudes": basis(dimension, i)} for i in range(2)]
    source = read(lamp(letters=letters))
    assert source.letter_dimension == dimension
    np.testing.assert_allclose(np.diag(source.average_state), [0.5, 0.5] + [0] * (dimension - 2))


def test_block_letters_have_the_dimension_of_the_block():
    source = read(block(4, 16, 16))
    assert source.block_qubits == 4
    assert source.letter_dimension == 16


def test_each_block_letter_of_another_dimension_is_refused():
    complaints = complaints_of(block(3, 8, 4, 16))
    assert [line.split(", amplitudes: ")[1] for line in complaints] == [
        "found a state of dimension 4; accepted: dimension 8, as block_qubits says",
        "found a state of dimension 16; accepted: dimension 8, as block_qubits says",
    ]


def test_a_state_that_is_not_normalised_is_refused_with_its_norm():
    line = only(complaints_of(lamp_with(1, amplitudes=[1, 1])))
    assert line == (
        'lamp.json: letter 1 ("minus"), amplitudes: found a norm of 1.414213562; '
        "accepted: 1 within 1e-06 (any other only with normalise = true)"
    )


def test_more_letters_than_the_limit_are_refused(monkeypatch):
    monkeypatch.setattr(letters, "LETTERS", 1)
    assert "letters: found 2 letters; accepted: up to 1" in only(complaints_of(lamp()))


def test_states_beyond_the_limit_together_are_refused(monkeypatch):
    monkeypatch.setattr(letters, "STATE_ENTRIES", 3)
    line = only(complaints_of(lamp()))
    assert 'letter 1 ("minus"), amplitudes: found more than 3 numbers in the states so far' in line
