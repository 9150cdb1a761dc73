"""Array files: `.npy` tables of states beside the source file, never outside its folder, never pickled."""

from __future__ import annotations

import io
import math
import stat
import warnings
from collections.abc import Callable
from pathlib import Path, PurePosixPath

import numpy as np

from encoder_forge.source.complaints import Place, Wrong, check_keys, counted, one_line, shown
from encoder_forge.source.limits import ARRAY_BYTES, MAGNITUDE, STATE_ENTRIES
from encoder_forge.source.model import SourceFile

NUMERIC = "a .npy file of real or complex numbers"
SHAPES = "shape (d,) without row; (rows, d) with row, a state vector; (rows, d, d) with row, a density matrix"

Fetch = Callable[[str, int], bytes]
"""Returns a file's bytes by its name relative to the source; given the most bytes allowed; raises Wrong."""


class ArrayStore:
    """The array files of one source, each read once.

    Parameters
    ----------
    fetch : callable
        Where the bytes come from.
    """

    def __init__(self, fetch: Fetch) -> None:
        self._fetch = fetch
        self._tables: dict[str, np.ndarray | None] = {}
        self._files: list[SourceFile] = []

    @property
    def files(self) -> tuple[SourceFile, ...]:
        """The files read so far, in the order of their first mention."""
        return tuple(self._files)

    def read_state(self, value: object, place: Place) -> np.ndarray | None:
        """Return the state that `{ file, row }` names, of shape (d,) or (d, d), or complain."""
        if not isinstance(value, dict):
            place.complain(shown(value), 'a table such as { file = "letters.npy", row = 0 }')
            return None
        check_keys(value, ("file", "row"), place)
        if "file" not in value:
            place.key("file").complain("nothing", "the name of a .npy file beside the source file")
            return None
        table = self._table(value["file"], place.key("file"))
        return None if table is None else _row(table, value.get("row"), place.key("row"))

    def _table(self, name: object, place: Place) -> np.ndarray | None:
        """Return a file's array; a file that is bad is complained of at its first mention only."""
        try:
            clean = clean_name(name)
        except Wrong as wrong:
            place.complain(wrong.found, wrong.accepted)
            return None
        if clean not in self._tables:
            self._tables[clean] = None
            try:
                left = ARRAY_BYTES - sum(len(file.content) for file in self._files)
                content = self._fetch(clean, left)
                self._files.append(SourceFile(clean, content))
                self._tables[clean] = parse_npy(content)
            except Wrong as wrong:
                place.complain(f"{shown(clean)}, {wrong.found}", wrong.accepted)
        return self._tables[clean]


def clean_name(name: object) -> str:
    """Return an array file's name in its shortest form.

    Raises
    ------
    Wrong
        When the name is absolute, leads out of the folder, or does not end in `.npy`.

    Examples
    --------
    >>> clean_name("./tables//letters.npy")
    'tables/letters.npy'
    """
    accepted = "a relative path to a .npy file in the source file's folder, with forward slashes"
    if not isinstance(name, str) or not name.isprintable() or len(name) > 1000:
        raise Wrong(shown(name), accepted)
    path = PurePosixPath(name)
    if path.is_absolute() or ".." in path.parts or "\\" in name:
        raise Wrong(f"{shown(name)}, outside the source file's folder", accepted)
    if path.suffix.lower() != ".npy":
        raise Wrong(shown(name), accepted)
    return str(path)


def fetch_from_folder(folder: Path) -> Fetch:
    """Return a fetch that reads files inside a folder, links out of it refused."""

    def fetch(name: str, most: int) -> bytes:
        accepted = f"a regular file inside the source file's folder, up to {ARRAY_BYTES} bytes in all"
        try:
            root = folder.resolve(strict=True)
            path = (root / name).resolve(strict=True)
            if not path.is_relative_to(root):
                raise Wrong("a link out of the source file's folder", accepted)
            if not stat.S_ISREG(path.stat().st_mode):
                raise Wrong("no regular file", accepted)
            with path.open("rb") as stream:
                content = stream.read(most + 1)
        except FileNotFoundError:
            raise Wrong("no such file", accepted) from None
        except (OSError, RuntimeError) as error:
            raise Wrong(f"an unreadable file ({_reason(error)})", accepted) from None
        if len(content) > most:
            raise Wrong("too many bytes", accepted)
        return content

    return fetch


def fetch_from_memory(files: tuple[SourceFile, ...]) -> Fetch:
    """Return a fetch that looks among files already read."""
    contents = {file.name: file.content for file in files}

    def fetch(name: str, most: int) -> bytes:
        if name not in contents:
            raise Wrong("no such file", "one of the files handed over with the source")
        if len(contents[name]) > most:
            raise Wrong("too many bytes", f"up to {ARRAY_BYTES} bytes in all array files")
        return contents[name]

    return fetch


def refuse_all(name: str, most: int) -> bytes:
    """Refuse every file: for a source without a folder."""
    raise Wrong("beside standard input", "no array file here: array files need a source file on disk")


def parse_npy(content: bytes) -> np.ndarray:
    """Return the array of a `.npy` file, of one to three axes, without ever unpickling.

    Raises
    ------
    Wrong
        When the bytes are no `.npy` file, hold objects, other than numbers, or less or more than the
        header says, or a number that is not finite.
    """
    shape, fortran_order, dtype, start = _header(content)
    if dtype.hasobject:
        raise Wrong("a pickled array (of Python objects)", NUMERIC)
    if dtype.kind not in "iufc":
        raise Wrong(f"an array of type {one_line(str(dtype))[:60]}", NUMERIC)
    if any(size < 0 for size in shape) or math.prod(shape) * dtype.itemsize != len(content) - start:
        raise Wrong(f"{counted(len(content) - start, 'byte')} of data for the shape {shape}", NUMERIC)
    if 0 in shape or not 1 <= len(shape) <= 3:
        raise Wrong(f"an array of shape {shape}", SHAPES)
    flat = np.frombuffer(content, dtype=dtype, offset=start)
    table = flat.reshape(shape, order="F" if fortran_order else "C")
    bad = ~np.isfinite(table)
    if bad.any():
        first = [int(i) for i in np.argwhere(bad)[0]]
        raise Wrong(f"a number that is not finite at {first}", "finite numbers")
    return table


def _header(content: bytes) -> tuple[tuple[int, ...], bool, np.dtype, int]:
    """Return shape, whether in Fortran order, type, and where the data start."""
    readers = {(1, 0): np.lib.format.read_array_header_1_0, (2, 0): np.lib.format.read_array_header_2_0}
    stream = io.BytesIO(content)
    try:
        version = np.lib.format.read_magic(stream)
        if version not in readers:
            raise Wrong(f"a .npy file of version {version[0]}.{version[1]}", f"{NUMERIC}, version 1.0 or 2.0")
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            shape, fortran_order, dtype = readers[version](stream)
    except Wrong:
        raise
    except Exception:
        # The header is a Python literal: garbage there raises a dozen kinds of errors, all with one meaning.
        raise Wrong("no .npy file (its header does not read)", NUMERIC) from None
    return tuple(int(size) for size in shape), bool(fortran_order), dtype, stream.tell()


def _row(table: np.ndarray, row: object, place: Place) -> np.ndarray | None:
    if row is None:
        if table.ndim == 1:
            return _complex(table, place)
        place.complain(f"no row, for an array of shape {table.shape}", SHAPES)
        return None
    if table.ndim not in (2, 3) or (table.ndim == 3 and table.shape[1] != table.shape[2]):
        place.complain(f"{shown(row)}, for an array of shape {table.shape}", SHAPES)
        return None
    if isinstance(row, bool) or not isinstance(row, int) or not 0 <= row < len(table):
        place.complain(
            shown(row), f"an integer from 0 to {len(table) - 1} (the array has shape {table.shape})"
        )
        return None
    return _complex(table[row], place)


def _complex(state: np.ndarray, place: Place) -> np.ndarray | None:
    """Convert a state to complex numbers only now: a table of small integers would grow sixteenfold."""
    if state.size > STATE_ENTRIES:
        place.complain(f"a state of {state.size} numbers", f"up to {STATE_ENTRIES}")
        return None
    with np.errstate(over="ignore"):
        result = state.astype(complex)
    if max(np.abs(result.real).max(), np.abs(result.imag).max()) > MAGNITUDE:
        place.complain("a number beyond double precision's square", f"numbers up to {MAGNITUDE:g}")
        return None
    return result


def _reason(error: Exception) -> str:
    return one_line(error.strerror if isinstance(error, OSError) and error.strerror else "a loop of links")
