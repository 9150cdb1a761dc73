import io
import pickle

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from encoder_forge.errors import InputError
from encoder_forge.source import arrays
from encoder_forge.source.arrays import parse_npy
from encoder_forge.source.complaints import Wrong
from encoder_forge.source.model import SourceFile
from encoder_forge.source.reading import read_source

from .documents import checked, complaints_of, only, read, toml_text, with_state


def npy(array, **options):
    stream = io.BytesIO()
    np.save(stream, np.asarray(array), **options)
    return stream.getvalue()


def array_file(array, name="states.npy"):
    return SourceFile(name, npy(array))


def named(row=None, name="states.npy"):
    return with_state(array={"file": name} if row is None else {"file": name, "row": row})


def on_disk(folder, document):
    path = folder / "lamp.toml"
    path.write_text(toml_text(document), encoding="utf-8")
    return path


def refusal(path):
    with pytest.raises(InputError) as caught:
        read_source(path)
    return only(checked(caught.value, str(path)))


def test_an_array_of_one_axis_is_a_state_vector():
    source = read(named(), array_file([0.8, 0.6j]))
    np.testing.assert_allclose(source.letters[1].vectors, [[0.8, 0.6j]])
    assert [file.name for file in source.files] == ["lamp.json", "states.npy"]


def test_a_row_of_a_table_is_a_state_vector():
    source = read(named(1), array_file([[1, 0], [0, 1]]))
    np.testing.assert_allclose(source.letters[1].vectors, [[0, 1]])


def test_a_row_of_three_axes_is_a_density_matrix():
    source = read(named(1), array_file([np.eye(2), np.diag([0.75, 0.25])]))
    np.testing.assert_allclose(source.letters[1].density, np.diag([0.75, 0.25]))


@pytest.mark.parametrize("kind", ["<f4", ">f8", "<c8", ">c16", "i1", "u2", "f2"])
def test_every_numeric_type_is_read(kind):
    source = read(named(0), array_file(np.array([[0, 1]], dtype=kind)))
    np.testing.assert_array_equal(source.letters[1].vectors, [[0, 1]])


def test_fortran_order_is_read():
    table = np.asfortranarray([[0.6, 0.8], [1, 0]])
    np.testing.assert_allclose(read(named(1), array_file(table)).letters[1].vectors, [[1, 0]])


@pytest.mark.parametrize(
    ("array", "row", "found"),
    [
        ([[1, 0]], None, "found no row, for an array of shape (1, 2)"),
        ([1, 0], 0, "found 0, for an array of shape (2,)"),
        (np.ones((1, 2, 3)), 0, "found 0, for an array of shape (1, 2, 3)"),
        (np.ones((1, 1, 1, 1)), 0, '"states.npy", an array of shape (1, 1, 1, 1)'),
        (np.ones((0, 2)), 0, '"states.npy", an array of shape (0, 2)'),
        (np.float64(1), None, '"states.npy", an array of shape ()'),
    ],
)
def test_a_wrong_shape_is_refused_with_the_shapes_that_serve(array, row, found):
    line = only(complaints_of(named(row), array_file(array)))
    assert 'letter 1 ("minus"), array' in line
    assert found in line
    assert "shape (d,) without row" in line


@pytest.mark.parametrize("row", [-1, 2, 0.0, True, "0", [0]])
def test_a_row_out_of_range_is_refused_with_the_range(row):
    line = only(complaints_of(named(row), array_file(np.eye(2))))
    assert 'letter 1 ("minus"), array, row: found ' in line
    assert "an integer from 0 to 1" in line


def test_a_state_vector_of_the_wrong_length_is_refused():
    assert "a state of dimension 9; accepted: dimension 2 to 8" in only(
        complaints_of(named(), array_file(np.eye(9)[0]))
    )


def test_a_pickled_array_is_refused_without_unpickling_it():
    class Trap:
        def __reduce__(self):
            return (pytest.fail, ("the array file was unpickled",))

    content = npy(np.array([Trap(), 1], dtype=object), allow_pickle=True)
    line = only(complaints_of(named(), SourceFile("states.npy", content)))
    assert '"states.npy", a pickled array' in line
    assert "real or complex numbers" in line


def test_a_bare_pickle_is_no_array_file():
    line = only(complaints_of(named(), SourceFile("states.npy", pickle.dumps([1, 0]))))
    assert "no .npy file" in line


def test_a_zip_of_arrays_is_no_array_file():
    stream = io.BytesIO()
    np.savez(stream, a=np.eye(2))
    assert "no .npy file" in only(complaints_of(named(0), SourceFile("states.npy", stream.getvalue())))


@pytest.mark.parametrize(
    "array",
    [np.array(["a"]), np.array([True]), np.array([(1, 2)], dtype="i4,i4"), np.array(["2026"], "M8[Y]")],
)
def test_an_array_of_anything_but_numbers_is_refused(array):
    assert "an array of type" in only(complaints_of(named(), array_file(array)))


@pytest.mark.parametrize("bad", [np.nan, np.inf, complex(0, np.nan)])
def test_an_array_with_a_number_that_is_not_finite_is_refused_with_its_index(bad):
    line = only(complaints_of(named(0), array_file([[1, 0], [0, bad]])))
    assert "a number that is not finite at [1, 1]" in line


def test_an_array_with_numbers_too_large_to_square_is_refused():
    assert "numbers up to 1e+100" in only(complaints_of(named(), array_file([1e200, 0])))


@pytest.mark.parametrize("change", [-1, 1])
def test_an_array_with_bytes_missing_or_left_over_is_refused(change):
    content = npy([1.0, 0.0])
    content = content[:change] if change < 0 else content + b"x"
    line = only(complaints_of(named(), SourceFile("states.npy", content)))
    assert f"{16 + change} bytes of data for the shape (2,)" in line


def test_a_header_that_claims_a_huge_array_allocates_nothing():
    content = npy([1.0, 0.0]).replace(b"'shape': (2,), }      ", b"'shape': (2222222,), }")
    assert b"2222222" in content
    assert "for the shape (2222222,)" in only(complaints_of(named(), SourceFile("states.npy", content)))


def test_a_file_that_many_letters_name_is_read_once_and_complained_of_once():
    letters = [{"prior": 0.25, "array": {"file": "gone.npy", "row": i}} for i in range(4)]
    line = only(complaints_of({**named(), "letters": letters}))
    assert 'letter 0 ("letter-0"), array, file: found "gone.npy", no such file' in line


@pytest.mark.parametrize(
    "name",
    [
        "../states.npy",
        "a/../../states.npy",
        "/states.npy",
        "..\\states.npy",
        "states.npz",
        "states",
        "",
        "a\n.npy",
    ],
)
def test_a_name_outside_the_folder_or_of_another_kind_is_refused(tmp_path, name):
    folder = tmp_path / "inner"
    folder.mkdir()
    (tmp_path / "states.npy").write_bytes(npy([1.0, 0.0]))
    line = refusal(on_disk(folder, named(name=name)))
    assert 'letter 1 ("minus"), array, file: found ' in line
    assert "a relative path to a .npy file in the source file's folder" in line


def test_an_absolute_name_is_refused_even_inside_the_folder(tmp_path):
    (tmp_path / "states.npy").write_bytes(npy([1.0, 0.0]))
    assert "outside the source file's folder" in refusal(
        on_disk(tmp_path, named(name=str(tmp_path / "states.npy")))
    )


def test_a_link_out_of_the_folder_is_refused(tmp_path):
    folder = tmp_path / "inner"
    folder.mkdir()
    (tmp_path / "states.npy").write_bytes(npy([1.0, 0.0]))
    (folder / "states.npy").symlink_to(tmp_path / "states.npy")
    assert "a link out of the source file's folder" in refusal(on_disk(folder, named()))


def test_a_linked_folder_out_of_the_folder_is_refused(tmp_path):
    folder = tmp_path / "inner"
    folder.mkdir()
    (tmp_path / "states.npy").write_bytes(npy([1.0, 0.0]))
    (folder / "tables").symlink_to(tmp_path)
    assert "a link out of" in refusal(on_disk(folder, named(name="tables/states.npy")))


def test_a_subfolder_and_a_link_inside_the_folder_serve(tmp_path):
    (tmp_path / "tables").mkdir()
    (tmp_path / "tables" / "real.npy").write_bytes(npy([1.0, 0.0]))
    (tmp_path / "tables" / "states.npy").symlink_to("real.npy")
    source = read_source(on_disk(tmp_path, named(name="./tables/states.npy")))
    assert source.files[1] == SourceFile("tables/states.npy", npy([1.0, 0.0]))


def test_a_folder_or_a_loop_of_links_in_place_of_an_array_file_is_refused(tmp_path):
    (tmp_path / "states.npy").mkdir()
    assert "no regular file" in refusal(on_disk(tmp_path, named()))
    (tmp_path / "states.npy").rmdir()
    (tmp_path / "states.npy").symlink_to("states.npy")
    assert '"states.npy", an unreadable file' in refusal(on_disk(tmp_path, named()))


def test_a_name_too_long_for_the_file_system_is_refused(tmp_path):
    assert "an unreadable file (File name too long)" in refusal(
        on_disk(tmp_path, named(name="x" * 400 + ".npy"))
    )


def test_a_state_over_the_limit_is_refused_before_it_is_converted(monkeypatch):
    monkeypatch.setattr(arrays, "STATE_ENTRIES", 3)
    line = only(complaints_of(named(0), array_file([np.eye(2, dtype="i1")])))
    assert "array, row: found a state of 4 numbers; accepted: up to 3" in line


def test_array_files_beyond_the_limit_together_are_refused(tmp_path, monkeypatch):
    content = npy([1.0, 0.0])
    monkeypatch.setattr(arrays, "ARRAY_BYTES", 2 * len(content) - 1)
    document = named(name="a.npy")
    document["letters"][0] = {"prior": 0.5, "array": {"file": "b.npy"}}
    for name in ("a.npy", "b.npy"):
        (tmp_path / name).write_bytes(content)
    assert '"a.npy", too many bytes' in refusal(on_disk(tmp_path, document))
    files = [SourceFile(name, content) for name in ("a.npy", "b.npy")]
    assert '"a.npy", too many bytes' in only(complaints_of(document, *files))


@pytest.mark.parametrize(
    "value", ["states.npy", {}, {"row": 0}, {"file": 3}, {"file": "states.npy", "rows": 1}]
)
def test_a_malformed_array_key_is_refused(value):
    assert 'letter 1 ("minus"), array' in only(
        complaints_of(with_state(array=value), *([array_file([1, 0])] if "rows" in value else []))
    )


@given(st.binary(max_size=300), st.booleans())
def test_garbage_in_an_array_file_is_only_ever_a_complaint(garbage, after_magic):
    content = b"\x93NUMPY\x01\x00" + garbage if after_magic else garbage
    with pytest.raises(Wrong):
        parse_npy(content)


@given(st.integers(0, 127), st.integers(0, 255))
def test_a_spoiled_header_is_a_complaint_or_still_an_array_of_numbers(position, value):
    content = bytearray(npy([[1.0, 0.0], [0.0, 1.0]]))
    content[position] = value
    try:
        table = parse_npy(bytes(content))
    except Wrong:
        return
    assert table.dtype.kind in "iufc"
    assert table.nbytes == 32
