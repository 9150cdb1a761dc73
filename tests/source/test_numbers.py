import pytest
from hypothesis import given
from hypothesis import strategies as st

from encoder_forge.source.complaints import LISTED, Place, Report, Wrong
from encoder_forge.source.numbers import parse_complex, parse_real, read_matrix, read_vector

finite = st.floats(-1e99, 1e99)


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1", 1),
        ("-0.5", -0.5),
        ("+.5", 0.5),
        ("2.", 2),
        ("1e-3", 1e-3),
        ("1E+2", 100),
        ("0.3-0.1j", 0.3 - 0.1j),
        ("-0.5j", -0.5j),
        ("1e-3+2e-4j", 1e-3 + 2e-4j),
    ],
)
def test_decimal_text_is_read(text, value):
    assert parse_complex(text) == value


@pytest.mark.parametrize(
    "text",
    [
        *("", "j", "0.5+j", "0.3 - 0.1j", " 1", "1\n", "0,3", "(1+1j)", "nan", "inf", "1i", "1_0", "0x1"),
        *("1j+1", "0.3.1j", "٣", "1+1", "1e", ".", "sqrt(0.9)", "1/2", "1" * 101),
    ],
)
def test_any_other_text_is_refused(text):
    with pytest.raises(Wrong) as caught:
        parse_complex(text)
    assert '"0.3-0.1j"' in caught.value.accepted


@given(finite, finite)
def test_pairs_and_text_mean_the_same_number(real, imaginary):
    assert parse_complex([real, imaginary]) == complex(real, imaginary)
    assert parse_complex(f"{real!r}{imaginary:+.17g}j") == complex(real, imaginary)


@pytest.mark.parametrize(
    "value", [float("nan"), float("inf"), -float("inf"), 1e101, 10**400, "1e999", "1e101j"]
)
def test_numbers_that_are_not_finite_or_too_large_are_refused(value):
    with pytest.raises(Wrong) as caught:
        parse_complex(value)
    assert caught.value.accepted.startswith("finite numbers between")


@pytest.mark.parametrize("value", [True, None, {}, [], [1], [1, 2, 3], [True, 0], ["1", "2"], [[1], 2]])
def test_what_is_no_number_is_refused(value):
    with pytest.raises(Wrong):
        parse_complex(value)


@pytest.mark.parametrize("value", [True, "0.5", [1, 0], None])
def test_a_real_number_is_never_true_text_or_a_pair(value):
    with pytest.raises(Wrong):
        parse_real(value)


def test_each_bad_entry_of_a_vector_is_placed():
    report = Report("a.toml")
    assert read_vector([1, "x", 0, None], Place(report, "amplitudes")) is None
    assert [line.split(": found")[0] for line in report.complaints] == [
        "a.toml: amplitudes[1]",
        "a.toml: amplitudes[3]",
    ]


def test_beyond_a_few_bad_entries_the_rest_is_counted():
    report = Report("a.toml")
    read_vector(["x"] * (LISTED + 4), Place(report, "amplitudes"))
    assert len(report.complaints) == LISTED + 1
    assert "found 4 more such entries" in report.complaints[-1]


def test_a_bad_entry_of_a_matrix_is_placed_by_row_and_column():
    report = Report("a.toml")
    assert read_matrix([[1, 0], ["?", 0]], Place(report, "density")) is None
    assert report.complaints[0].startswith('a.toml: density[1][0]: found "?"')


def test_a_matrix_that_is_not_square_is_refused_with_the_row():
    report = Report("a.toml")
    assert read_matrix([[1, 0], [0]], Place(report, "density")) is None
    assert "found 2 rows, of which row 1 has 1 entry; accepted: a square matrix" in report.complaints[0]


@pytest.mark.parametrize("value", [None, "1", 1, [], {}, [1, 2]])
def test_what_is_no_list_of_rows_is_no_matrix(value):
    report = Report("a.toml")
    assert read_matrix(value, Place(report, "density")) is None
    assert len(report.complaints) == 1
