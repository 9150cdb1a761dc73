import math

import numpy as np
import pytest

from encoder_forge.source.forms import FORMS

from .documents import complaints_of, lamp_with, only, read, with_state


def density(**state):
    return read(with_state(**state)).letters[1].density


@pytest.mark.parametrize(
    "state",
    [
        {"amplitudes": ["0.8", "0.6j"]},
        {"angles_deg": {"theta": 2 * math.degrees(math.asin(0.6)), "phi": 90}},
        {"bloch": [0, 0.96, 0.28]},
        {"density": [[0.64, "-0.48j"], [[0, 0.48], 0.36]]},
    ],
)
def test_the_same_state_in_each_form_is_the_same_pure_letter(state):
    source = read(with_state(**state))
    assert source.letters[1].pure
    np.testing.assert_allclose(source.letters[1].density, [[0.64, -0.48j], [0.48j, 0.36]], atol=1e-12)


@pytest.mark.parametrize(
    ("theta", "phi", "vector"),
    [
        (0, 45, [1, 0]),
        (180, 0, [0, 1]),
        (180, 90, [0, 1j]),
        (360, 0, [-1, 0]),
        (-180, 0, [0, -1]),
        (180, -180, [0, -1]),
    ],
)
def test_right_angles_come_out_exact(theta, phi, vector):
    letter = read(with_state(angles_deg={"theta": theta, "phi": phi})).letters[1]
    np.testing.assert_array_equal(letter.vectors, [vector])


def test_a_bloch_vector_inside_the_ball_is_a_mixed_letter():
    letter = read(with_state(bloch=[0, 0, 0.5])).letters[1]
    assert not letter.pure
    np.testing.assert_allclose(letter.weights, [0.75, 0.25])


def test_the_centre_of_the_ball_is_the_maximally_mixed_letter():
    np.testing.assert_allclose(density(bloch=[0, 0, 0]), np.eye(2) / 2)


def test_a_bloch_vector_outside_the_ball_is_refused_with_its_length():
    line = only(complaints_of(with_state(bloch=[1, 0, 0.75])))
    assert line == (
        'lamp.json: letter 1 ("minus"), bloch: found a vector of length 1.25, outside the ball; '
        "accepted: three numbers [x, y, z] of length at most 1"
    )


def test_normalise_does_not_pull_a_bloch_vector_into_the_ball():
    document = {**with_state(bloch=[1, 0, 0.75]), "normalise": True}
    assert "outside the ball" in only(complaints_of(document))


def test_a_bloch_vector_barely_outside_the_ball_is_scaled_with_a_note():
    source = read(with_state(bloch=[0, 0, 1 + 5e-7]))
    assert source.letters[1].pure
    assert source.notes == ('letter 1 ("minus"), bloch: the length, 1.0000005, was scaled to 1',)


@pytest.mark.parametrize(
    "value", [[0, 0], [0, 0, 0, 1], 1, "x", {}, [0, 0, "1"], [0, [1, 0], 0], [0, True, 0]]
)
def test_a_malformed_bloch_vector_is_refused(value):
    assert 'letter 1 ("minus"), bloch' in only(complaints_of(with_state(bloch=value)))


@pytest.mark.parametrize("missing", ["theta", "phi"])
def test_a_missing_angle_is_named(missing):
    angles = {"theta": 10, "phi": 20}
    del angles[missing]
    assert f"angles_deg, {missing}: found nothing" in only(complaints_of(with_state(angles_deg=angles)))


def test_an_unknown_key_among_the_angles_is_refused():
    line = only(complaints_of(with_state(angles_deg={"theta": 1, "phi": 2, "psi": 3})))
    assert 'letter 1 ("minus"), angles_deg: found the unknown key "psi"; accepted: did you mean phi?' in line


def test_angles_in_no_table_are_refused():
    assert "angles_deg: found [90, 0]; accepted: a table" in only(
        complaints_of(with_state(angles_deg=[90, 0]))
    )


@pytest.mark.parametrize("angle", [361, -1000.0, float("nan"), "90", [1, 2]])
def test_an_angle_beyond_a_full_turn_or_no_number_is_refused(angle):
    assert "angles_deg, theta: found" in only(
        complaints_of(with_state(angles_deg={"theta": angle, "phi": 0}))
    )


def test_nan_among_the_amplitudes_is_refused_with_its_place():
    line = only(complaints_of(lamp_with(1, amplitudes=[float("nan"), 1])))
    assert 'letter 1 ("minus"), amplitudes[0]: found the non-finite number nan; accepted: finite' in line


@pytest.mark.parametrize("value", [[], "0.6", 1, {"re": 1}, None])
def test_amplitudes_that_are_no_list_are_refused(value):
    document = with_state()
    document["letters"][1]["amplitudes"] = value
    assert 'letter 1 ("minus"), amplitudes: found' in only(complaints_of(document))


def test_a_letter_without_a_state_is_refused_with_the_five_forms():
    line = only(complaints_of(lamp_with(1, amplitudes=None)))
    assert f'letter 1 ("minus"): found no state; accepted: exactly one of the keys {", ".join(FORMS)}' in line


def test_a_letter_with_two_states_is_refused():
    line = only(complaints_of(lamp_with(1, bloch=[0, 0, 1])))
    assert 'letter 1 ("minus"): found amplitudes and bloch; accepted: exactly one' in line
