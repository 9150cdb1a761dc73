import pytest

from encoder_forge.errors import InputError
from encoder_forge.source import document
from encoder_forge.source.model import SourceFile
from encoder_forge.source.reading import source_from_files

from .documents import checked, lamp, only, toml_text


def refusal(name, content):
    content = content.encode() if isinstance(content, str) else content
    with pytest.raises(InputError) as caught:
        source_from_files((SourceFile(name, content),))
    return only(checked(caught.value, name))


@pytest.mark.parametrize("name", ["a.toml", "a.json", "a"])
@pytest.mark.parametrize("content", [b"", b" \n\t\n"])
def test_an_empty_file_is_refused(name, content):
    assert refusal(name, content) == (
        f"{name}: found an empty file; accepted: a source in TOML or JSON (UTF-8 text)"
    )


def test_a_file_with_a_zero_byte_is_binary():
    assert "found a binary file (a zero byte at offset 4)" in refusal("a.toml", b"abcd\0")


def test_a_file_that_is_not_utf_8_is_binary():
    assert "found a binary file (no UTF-8 at byte offset 2)" in refusal("a.json", b"{}\xff")


def test_a_file_over_the_limit_is_refused_with_the_limit(monkeypatch):
    monkeypatch.setattr(document, "SOURCE_BYTES", 10)
    assert "found more than 10 bytes; accepted: up to 10" in refusal("a.toml", "schema = 1 # long")


def test_broken_toml_is_refused_with_line_and_column():
    line = refusal("a.toml", 'schema = 1\nname = "x\nrevision = "y"\n')
    assert line.startswith("a.toml: line 2, column 10: found broken TOML (")


def test_toml_that_breaks_off_is_refused_with_its_last_line():
    assert refusal("a.toml", "schema = 1\nletters = [").startswith(
        "a.toml: line 2, column 12: found broken TOML"
    )


def test_a_key_given_twice_in_toml_is_refused_with_its_line():
    assert refusal("a.toml", "schema = 1\nschema = 1\n").startswith("a.toml: line 2,")


def test_broken_json_is_refused_with_line_and_column():
    line = refusal("a.json", '{"schema": 1,\n "name" "x"}')
    assert line.startswith("a.json: line 2, column 9: found broken JSON (expecting ':' delimiter)")


def test_json_that_is_no_object_is_refused():
    assert "found [1]; accepted: a JSON object" in refusal("a.json", "[1]")


def test_a_key_given_twice_in_json_is_refused_wherever_it_stands():
    content = (
        '{"schema": 1, "name": "x", "revision": "a", "model": "iid", "name": "y", '
        '"letters": [{"amplitudes": [1, 0], "amplitudes": [0, 1]}]}'
    )
    with pytest.raises(InputError) as caught:
        source_from_files((SourceFile("a.json", content.encode()),))
    assert checked(caught.value, "a.json") == (
        'a.json: found the key "name" more than once; accepted: each key once',
        'a.json: letters[0]: found the key "amplitudes" more than once; accepted: each key once',
    )


@pytest.mark.parametrize("constant", ["NaN", "Infinity", "-Infinity", "1e999"])
def test_json_numbers_that_are_not_finite_are_refused_with_their_place(constant):
    content = (
        '{"schema": 1, "name": "x", "revision": "a", "model": "iid", '
        f'"letters": [{{"prior": {constant}, "amplitudes": [1, 0]}}]}}'
    )
    assert 'letter 0 ("letter-0"), prior: found the non-finite number' in refusal("a.json", content)


@pytest.mark.parametrize(("name", "opening"), [("a.toml", "x = "), ("a.json", '{"x": ')])
def test_values_nested_too_deeply_are_refused(name, opening):
    assert "found values nested too deeply" in refusal(name, opening + "[" * 100_000)


@pytest.mark.parametrize(
    ("name", "opening", "closing"), [("a.toml", "schema = ", ""), ("a.json", '{"schema": ', "}")]
)
def test_an_integer_of_thousands_of_digits_is_refused(name, opening, closing):
    assert "found an integer too long to read" in refusal(name, opening + "1" * 5000 + closing)


@pytest.mark.parametrize("name", ["lamp", "lamp.txt", "lamp.json", "LAMP.JSON"])
def test_a_file_of_any_other_name_is_json_when_it_opens_with_a_brace(name):
    content = '\n {"schema": 1, "name": "x", "revision": "a", "model": "copies"}'
    assert source_from_files((SourceFile(name, content.encode()),)).name == "x"


@pytest.mark.parametrize("name", ["lamp", "lamp.txt", "lamp.toml", "LAMP.TOML"])
def test_a_file_of_any_other_name_is_else_toml(name):
    content = toml_text(lamp()).encode()
    assert source_from_files((SourceFile(name, content),)).name == "lamp"


def test_a_byte_order_mark_and_windows_line_ends_do_no_harm():
    content = b"\xef\xbb\xbf" + toml_text(lamp()).replace("\n", "\r\n").encode()
    assert source_from_files((SourceFile("a.toml", content),)).name == "lamp"
