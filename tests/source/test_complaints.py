import datetime

import pytest

from encoder_forge.errors import InputError
from encoder_forge.source.complaints import LISTED, Place, Report, check_keys, shown


def test_a_report_without_complaints_raises_nothing():
    Report("a.toml").raise_complaints()


def test_all_complaints_are_raised_at_once_in_the_order_of_the_file():
    report = Report("a.toml")
    Place(report, "name").complain("1", "text")
    Place(report).complain("2", "3")
    with pytest.raises(InputError) as caught:
        report.raise_complaints()
    assert caught.value.complaints == (
        "a.toml: name: found 1; accepted: text",
        "a.toml: found 2; accepted: 3",
    )


@pytest.mark.parametrize(
    ("key", "near"),
    [("amplitude", "amplitudes"), ("Prior", "prior"), ("lable", "label"), ("densty", "density")],
)
def test_an_unknown_key_is_named_with_the_nearest_accepted_one(key, near):
    report = Report("a.toml")
    check_keys({key: 1}, ("label", "prior", "amplitudes", "density"), Place(report))
    assert f'the unknown key "{key}"; accepted: did you mean {near}?' in report.complaints[0]


def test_an_unknown_key_like_no_other_is_named_with_all_accepted_ones():
    report = Report("a.toml")
    check_keys({"zzz": 1}, ("label", "prior"), Place(report))
    assert report.complaints == ['a.toml: found the unknown key "zzz"; accepted: the keys label, prior']


def test_beyond_a_few_unknown_keys_the_rest_is_counted():
    report = Report("a.toml")
    check_keys({f"zz{i}": 1 for i in range(LISTED + 3)}, ("label",), Place(report))
    assert len(report.complaints) == LISTED + 1
    assert "3 more unknown keys" in report.complaints[-1]


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (None, "nothing (null)"),
        (float("nan"), "the non-finite number nan"),
        (10**100, "an integer of 333 bits"),
        ("a\nb", '"a\\nb"'),
        ("\ud800", '"\\ud800"'),
        ("x" * 100, '"' + "x" * 57 + '..."'),
        ([1] * 9, "a list of 9 items"),
        ([[1]], "a list of 1 item"),
        ({}, "an empty table"),
        (datetime.date(2026, 11, 30), "a date or time"),
    ],
)
def test_values_are_shown_short_on_one_line_and_without_type_names(value, text):
    assert shown(value) == text


def test_a_complaint_stays_on_one_line_whatever_the_file_is_called():
    report = Report("bad\nname\x1b[31m.toml")
    Place(report).complain("x", "y")
    assert report.complaints[0].isprintable()
