import hashlib
import io
import json

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from encoder_forge.errors import InputError
from encoder_forge.source.limits import SOURCE_BYTES
from encoder_forge.source.model import SourceFile
from encoder_forge.source.reading import read_source, source_from_files

from .documents import checked, complaints_of, documents, lamp, only, read, toml_text, with_state


def refusal(path, **options):
    with pytest.raises(InputError) as caught:
        read_source(path, **options)
    file = "standard input" if str(path) == "-" else str(path)
    return only(checked(caught.value, file))


@pytest.mark.parametrize("key", ["schema", "name", "revision", "model", "letters"])
def test_a_missing_key_is_named_with_what_it_takes(key):
    line = only(complaints_of(lamp(**{key: None})))
    assert line.startswith(f"lamp.json: {key}: found nothing; accepted: ")


def test_an_unknown_key_is_refused_with_the_nearest_one():
    line = only(complaints_of(lamp(normalize=True)))
    assert 'found the unknown key "normalize"; accepted: did you mean normalise?' in line


@pytest.mark.parametrize("schema", [0, 2, "1", 1.0, True, [1]])
def test_any_other_schema_is_refused(schema):
    assert "schema: found" in only(complaints_of(lamp(schema=schema)))


@pytest.mark.parametrize("key", ["name", "revision"])
@pytest.mark.parametrize("value", ["", "a\nb", 3, "x" * 201, ["a"]])
def test_a_name_or_revision_that_is_no_printable_line_is_refused(key, value):
    line = only(complaints_of(lamp(**{key: value})))
    assert f"lamp.json: {key}: found" in line
    assert "printable text on one line" in line


@pytest.mark.parametrize("model", ["IID", "markov", 3, ["iid"]])
def test_an_unknown_model_is_refused_with_the_three_known(model):
    assert 'accepted: one of "iid", "copies", "block"' in only(complaints_of(lamp(model=model)))


@pytest.mark.parametrize("value", ["true", 1, "yes"])
def test_normalise_takes_true_or_false_only(value):
    assert "normalise: found" in only(complaints_of(lamp(normalise=value)))


def test_a_block_source_needs_block_qubits():
    line = only(complaints_of(lamp(model="block")))
    assert "block_qubits: found nothing; accepted: an integer from 1 to 12" in line


@pytest.mark.parametrize("value", [0, 13, -1, 1.0, "1", True])
def test_block_qubits_out_of_range_are_refused(value):
    assert "block_qubits: found" in only(complaints_of(lamp(model="block", block_qubits=value)))


@pytest.mark.parametrize("model", ["iid", "copies"])
def test_block_qubits_are_refused_for_the_other_models(model):
    line = only(complaints_of(lamp(model=model, block_qubits=1)))
    assert f'no such key in the model "{model}"' in line


@pytest.mark.parametrize("letters", [None, []])
def test_copies_without_letters_are_of_an_unknown_qubit(letters):
    source = read(lamp(model="copies", letters=letters))
    assert source.letters == ()
    assert source.letter_dimension == 2


def test_an_iid_source_without_letters_is_refused():
    assert "letters: found an empty list" in only(complaints_of(lamp(letters=[])))


def test_all_complaints_of_a_file_come_at_once():
    document = {
        "schema": 2,
        "name": "",
        "modle": "iid",
        "letters": [
            {"label": "a", "prior": 0.5, "amplitudes": [1, "x"]},
            {"label": "a", "prior": -0.5, "bloch": [1, 1, 1]},
            {"prior": 1, "density": [[1, 1], [0, 0]], "colour": "red"},
        ],
    }
    places = [line.split(": found")[0].removeprefix("lamp.json") for line in complaints_of(document)]
    assert places == [
        "",
        ": schema",
        ": name",
        ": revision",
        ": model",
        ': letter 1 ("a"), label',
        ': letter 2 ("letter-2")',
        ': letter 0 ("a"), amplitudes[1]',
        ': letter 1 ("a"), bloch',
        ': letter 2 ("letter-2"), density',
        ': letter 1 ("a"), prior',
    ]


def test_a_file_that_does_not_exist_is_refused(tmp_path):
    path = tmp_path / "gone.toml"
    assert refusal(path) == f"{path}: found no such file; accepted: a source file, or - for standard input"


def test_a_folder_is_refused(tmp_path):
    assert "found a directory" in refusal(tmp_path)


def test_a_file_that_cannot_be_opened_is_refused(tmp_path):
    path = tmp_path / "loop.toml"
    path.symlink_to("loop.toml")
    assert "found an unreadable file (" in refusal(path)


def test_a_name_that_no_file_can_have_is_refused():
    with pytest.raises(InputError) as caught:
        read_source("a\0b.toml")
    assert "a name that no file can have" in only(checked(caught.value, "a\\x00b.toml"))


@pytest.mark.parametrize(("ending", "write"), [("toml", toml_text), ("json", json.dumps)])
def test_standard_input_is_read_in_either_format(ending, write):
    source = read_source("-", io.BytesIO(write(lamp()).encode()))
    assert source.name == "lamp"
    assert [file.name for file in source.files] == [f"source.{ending}"]


def test_standard_input_refuses_array_files():
    content = toml_text(with_state(array={"file": "states.npy"})).encode()
    line = refusal("-", stdin=io.BytesIO(content))
    assert line == (
        'standard input: letter 1 ("minus"), array, file: found "states.npy", beside standard input; '
        "accepted: no array file here: array files need a source file on disk"
    )


def test_standard_input_without_end_is_read_to_the_limit_only():
    class Endless(io.RawIOBase):
        def read(self, size=-1):
            assert 0 < size <= SOURCE_BYTES + 1
            return b"#" * size

    assert f"found more than {SOURCE_BYTES} bytes" in refusal("-", stdin=Endless())


def test_a_closed_standard_input_is_refused():
    stream = io.BytesIO()
    stream.close()
    assert "found a closed stream" in refusal("-", stdin=stream)


def test_a_source_read_back_from_its_own_files_is_the_same(tmp_path):
    np.save(tmp_path / "states.npy", np.eye(2))
    path = tmp_path / "lamp.toml"
    path.write_text(toml_text(with_state(array={"file": "states.npy", "row": 1})))
    source = read_source(path)
    again = source_from_files(source.files)
    assert again.files == source.files
    assert again.sha256 == source.sha256
    assert again.notes == source.notes
    np.testing.assert_array_equal(again.average_state, source.average_state)


def test_the_digest_is_the_documented_one_and_sees_every_byte():
    array = SourceFile("s.npy", read_npy())
    document = with_state(array={"file": "s.npy"})
    source = read(document, array)
    text = json.dumps(document).encode()
    expected = b"\0%d\0" % len(text) + text + b"s.npy\0%d\0" % len(array.content) + array.content
    assert source.sha256 == hashlib.sha256(expected).hexdigest()
    other = SourceFile("s.npy", read_npy([0.0, 1.0]))
    assert read(document, other).sha256 != source.sha256


def read_npy(vector=(1.0, 0.0)):
    stream = io.BytesIO()
    np.save(stream, np.array(vector))
    return stream.getvalue()


def test_files_that_no_letter_names_are_refused():
    assert 'array files that no letter names, or twice: "s.npy"' in only(
        complaints_of(lamp(), SourceFile("s.npy", read_npy()))
    )


@pytest.mark.parametrize("name", ["../s.npy", "/s.npy", "./s.npy", "s.txt"])
def test_files_handed_over_under_a_name_that_no_letter_could_use_are_refused(name):
    assert "found the array file" in only(complaints_of(lamp(), SourceFile(name, read_npy())))


def test_no_files_at_all_are_refused():
    with pytest.raises(InputError):
        source_from_files(())


def test_the_arrays_of_a_source_cannot_be_changed():
    letter = read(lamp()).letters[0]
    with pytest.raises(ValueError, match="read-only"):
        letter.vectors[0, 0] = 1


@settings(max_examples=60, deadline=None)
@given(documents())
def test_random_sources_mean_the_same_through_toml_and_json(case):
    document, priors, densities = case
    for name, text in (("a.toml", toml_text(document)), ("a.json", json.dumps(document))):
        source = source_from_files((SourceFile(name, text.encode()),))
        assert [letter.label for letter in source.letters] == [
            letter["label"] for letter in document["letters"]
        ]
        np.testing.assert_allclose(source.priors, priors, atol=1e-12)
        for letter, density in zip(source.letters, densities, strict=True):
            np.testing.assert_allclose(letter.density, density, atol=2e-6)
            np.testing.assert_allclose(
                letter.vectors @ letter.vectors.conj().T, np.eye(len(letter.weights)), atol=1e-12
            )
        assert np.trace(source.average_state).real == pytest.approx(1, abs=1e-12)


@settings(max_examples=150, deadline=None)
@given(st.sampled_from(["a.toml", "a.json", "a"]), st.binary(max_size=200))
@example("a.json", b'{"schema": 1, "schema": NaN}')
@example("a.toml", b"a = 1979-05-27T07:32:00Z")
def test_garbage_is_only_ever_a_complaint(name, content):
    with pytest.raises(InputError) as caught:
        source_from_files((SourceFile(name, content),))
    checked(caught.value, name)


values = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=5) | st.just("0.6"),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=4), inner, max_size=3),
    max_leaves=6,
)
KEYS = ("schema", "name", "revision", "model", "block_qubits", "normalise", "letters")
LETTER_KEYS = ("label", "prior", "count", "amplitudes", "angles_deg", "bloch", "density", "array")


@settings(max_examples=200, deadline=None)
@given(
    st.dictionaries(st.sampled_from(KEYS), values, max_size=2),
    st.dictionaries(st.sampled_from(LETTER_KEYS), values, max_size=3),
)
def test_any_value_under_any_key_is_read_or_complained_of(changes, letter_changes):
    document = lamp()
    document["letters"][0].update(letter_changes)
    document.update(changes)
    content = json.dumps(document).encode()
    try:
        source = source_from_files((SourceFile("a.json", content),))
    except InputError as error:
        checked(error, "a.json")
    else:
        assert not source.letters or source.priors.sum() == pytest.approx(1)
