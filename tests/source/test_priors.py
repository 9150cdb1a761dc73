import pytest

from .documents import complaints_of, lamp, lamp_with, only, read


def counted(*counts):
    letters = [{"count": count, "amplitudes": [1, 0]} for count in counts]
    return lamp(letters=[{k: v for k, v in letter.items() if v != "missing"} for letter in letters])


def test_priors_that_do_not_sum_to_one_are_refused_with_their_sum():
    line = only(complaints_of(lamp_with(1, prior=0.4)))
    assert "letters, prior: found a sum of the priors of 0.9; accepted: 1 within 1e-06" in line


def test_a_small_drift_of_the_sum_is_scaled_away_with_a_note():
    source = read(lamp_with(1, prior=0.4999999))
    assert source.priors.sum() == pytest.approx(1, abs=1e-15)
    assert source.notes == ("letters, prior: the sum of the priors, 0.9999999, was scaled to 1",)


def test_normalise_accepts_priors_of_any_positive_sum():
    source = read({**lamp_with(1, prior=1.5), "normalise": True})
    assert source.priors.tolist() == [0.25, 0.75]


@pytest.mark.parametrize("normalise", [False, True])
def test_a_negative_prior_is_refused_even_when_the_sum_is_one(normalise):
    document = {**lamp_with(1, prior=-0.5), "normalise": normalise}
    document["letters"][0]["prior"] = 1.5
    complaints = complaints_of(document)
    assert 'lamp.json: letter 1 ("minus"), prior: found -0.5; accepted: a prior from 0 to 1' in complaints


def test_priors_that_are_all_zero_are_refused():
    document = {**lamp_with(1, prior=0), "normalise": True}
    document["letters"][0]["prior"] = 0
    assert "found a sum of the priors of 0; accepted: a positive" in only(complaints_of(document))


@pytest.mark.parametrize("value", [None, True, "0.5", [0.5], float("nan"), 10**400])
def test_a_prior_that_is_no_number_is_refused(value):
    document = lamp()
    document["letters"][1]["prior"] = value
    assert 'letter 1 ("minus"), prior: found ' in only(complaints_of(document))


def test_a_missing_prior_is_named():
    line = only(complaints_of(lamp_with(1, prior=None)))
    assert 'letter 1 ("minus"), prior: found nothing; accepted: a prior from 0 to 1' in line


def test_a_letter_of_prior_zero_is_kept_with_a_note():
    document = lamp_with(1, prior=0)
    document["letters"][0]["prior"] = 1
    source = read(document)
    assert source.priors.tolist() == [1, 0]
    assert source.notes == ('letter 1 ("minus"): its prior is zero: the source never sends it',)


def test_a_single_letter_needs_no_prior():
    assert read(lamp(letters=[{"amplitudes": [0.6, 0.8]}])).priors.tolist() == [1]


def test_a_prior_of_a_single_letter_still_has_to_be_one():
    assert "a sum of the priors of 0.5" in only(
        complaints_of(lamp(letters=[{"prior": 0.5, "amplitudes": [0.6, 0.8]}]))
    )


def test_counts_become_shares_with_a_note():
    source = read(counted(3, 0, 1))
    assert source.priors.tolist() == [0.75, 0, 0.25]
    assert source.notes[0] == "letters: the priors are shares of 4 counted letters"


@pytest.mark.parametrize("value", [-1, 1.0, True, "3", None, 10**16, "missing"])
def test_a_count_that_is_no_whole_number_from_zero_is_refused(value):
    line = only(complaints_of(counted(3, value)))
    assert 'letter 1 ("letter-1"), count: found ' in line
    assert "an integer from 0 to" in line


def test_counts_that_are_all_zero_are_refused():
    assert "letters, count: found a sum of 0; accepted: a positive sum" in only(complaints_of(counted(0, 0)))


def test_prior_in_one_letter_and_count_in_another_is_refused():
    line = only(complaints_of(lamp_with(1, prior=None, count=3)))
    assert "letters: found prior in letter 0 but count in letter 1; accepted: one of them" in line


def test_prior_and_count_in_the_same_letter_is_refused():
    assert 'letter 1 ("minus"): found both prior and count' in only(complaints_of(lamp_with(1, count=3)))
