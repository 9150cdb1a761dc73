"""A source file becomes a `Source`, or one error that holds every complaint about it."""

from __future__ import annotations

import hashlib
import sys
from collections.abc import Iterable
from pathlib import Path
from typing import Any, BinaryIO, get_args

from encoder_forge.errors import InputError
from encoder_forge.source.arrays import (
    ArrayStore,
    Fetch,
    clean_name,
    fetch_from_folder,
    fetch_from_memory,
    refuse_all,
)
from encoder_forge.source.complaints import Place, Report, Wrong, check_keys, one_line, shown
from encoder_forge.source.document import is_json, parse_document
from encoder_forge.source.letters import TABLES, read_letters, read_text
from encoder_forge.source.limits import BLOCK_QUBITS, LETTER_DIMENSION, SOURCE_BYTES
from encoder_forge.source.model import Letter, Model, Source, SourceFile

SCHEMA = 1
KEYS = ("schema", "name", "revision", "model", "block_qubits", "normalise", "letters")
MODELS: tuple[Model, ...] = get_args(Model)


def read_source(path: str | Path, stdin: BinaryIO | None = None) -> Source:
    """Read a source file with its array files.

    Parameters
    ----------
    path : str or Path
        A TOML or JSON file; "-" reads one from standard input, where array files are refused.
    stdin : binary stream, optional
        Stands in for the process's standard input.

    Raises
    ------
    InputError
        With every complaint about the file: place, what was found, what is accepted.
    """
    if str(path) == "-":
        content = _read_stdin(stdin if stdin is not None else getattr(sys.stdin, "buffer", None))
        text = content.decode("utf-8", errors="replace").removeprefix("\ufeff")
        name = "source.json" if is_json("", text) else "source.toml"
        return _build("standard input", SourceFile(name, content), refuse_all)
    path = Path(path)
    content = _read_bytes(path)
    return _build(one_line(str(path)), SourceFile(path.name, content), fetch_from_folder(path.parent))


def source_from_files(files: tuple[SourceFile, ...]) -> Source:
    """Build a source from files in memory: the source file first, then its array files.

    Raises
    ------
    InputError
        As for `read_source`; also when an array file is handed over that no letter names.
    """
    if not files:
        raise InputError("no files: found nothing; accepted: a source file, then its array files")
    head, *rest = files
    for file in rest:
        try:
            clean = clean_name(file.name) == file.name
        except Wrong:
            clean = False
        if not clean:
            raise InputError(
                f"{one_line(head.name)}: found the array file {shown(file.name)}; "
                "accepted: a relative path to a .npy file, without . or .."
            )
    source = _build(one_line(head.name), head, fetch_from_memory(tuple(rest)))
    unused = {file.name for file in rest} - {file.name for file in source.files}
    if unused or len(source.files) != len(files):
        names = ", ".join(shown(name) for name in sorted(unused or {file.name for file in rest}))
        raise InputError(
            f"{one_line(head.name)}: found array files that no letter names, or twice: {names}; "
            "accepted: those that letters name, once each"
        )
    return source


def digest_of(files: Iterable[SourceFile]) -> str:
    """Return the digest of a source: SHA-256 in hexadecimal.

    Digested are, file by file in order, the name in UTF-8, a zero byte, the length of the content in decimal
    ASCII, a zero byte, and the content. The source file comes first, with an empty name: what it is called
    on disk does not change the source; array files follow in the order of their first mention.

    Examples
    --------
    >>> first = digest_of([SourceFile("lamp.toml", b"schema = 1")])
    >>> first == digest_of([SourceFile("renamed.toml", b"schema = 1")])
    True
    """
    digest = hashlib.sha256()
    for index, file in enumerate(files):
        name = file.name if index else ""
        digest.update(name.encode() + b"\0" + str(len(file.content)).encode() + b"\0" + file.content)
    return digest.hexdigest()


def _read_stdin(stream: BinaryIO | None) -> bytes:
    try:
        return stream.read(SOURCE_BYTES + 1) if stream is not None else b""
    except (OSError, ValueError):
        raise InputError("standard input: found a closed stream; accepted: a source") from None


def _read_bytes(path: Path) -> bytes:
    shown_path = one_line(str(path))
    accepted = "a source file, or - for standard input"
    try:
        with path.open("rb") as stream:
            return stream.read(SOURCE_BYTES + 1)
    except FileNotFoundError:
        reason = "no such file"
    except IsADirectoryError:
        reason = "a directory"
    except OSError as error:
        reason = f"an unreadable file ({error.strerror or 'no reason given'})"
    except ValueError:
        reason = "a name that no file can have"
    raise InputError(f"{shown_path}: found {reason}; accepted: {accepted}")


def _build(shown_name: str, head: SourceFile, fetch: Fetch) -> Source:
    report = Report(shown_name)
    document = parse_document(head.name, head.content, report)
    if document is None:
        report.raise_complaints()
    arrays = ArrayStore(fetch)
    fields = _read_fields(document or {}, Place(report), arrays)
    report.raise_complaints()
    files = (head, *arrays.files)
    return Source(**fields, notes=tuple(report.notes), files=files, sha256=digest_of(files))


def _read_fields(document: dict[str, Any], place: Place, arrays: ArrayStore) -> dict[str, Any]:
    check_keys(document, KEYS, place)
    _check_schema(document, place)
    name = _required_text(document, "name", place)
    revision = _required_text(document, "revision", place)
    model = _read_model(document, place)
    block_qubits = _read_block_qubits(document, model, place)
    normalise = document.get("normalise", False)
    if not isinstance(normalise, bool):
        place.key("normalise").complain(shown(normalise), "true or false")
        normalise = False
    return {
        "name": name,
        "revision": revision,
        "model": model,
        "letters": _read_letters(document, model, block_qubits, normalise, place, arrays),
        "block_qubits": block_qubits,
    }


def _check_schema(document: dict[str, Any], place: Place) -> None:
    schema = document.get("schema")
    if isinstance(schema, bool) or not isinstance(schema, int) or schema != SCHEMA:
        place.key("schema").complain(shown(schema) if "schema" in document else "nothing", f"{SCHEMA}")


def _required_text(document: dict[str, Any], key: str, place: Place) -> str | None:
    if key not in document:
        place.key(key).complain("nothing", "text on one line")
        return None
    return read_text(document[key], place.key(key))


def _read_model(document: dict[str, Any], place: Place) -> Model | None:
    model = document.get("model")
    if isinstance(model, str) and model in MODELS:
        return model
    found = shown(model) if "model" in document else "nothing"
    place.key("model").complain(found, "one of " + ", ".join(f'"{name}"' for name in MODELS))
    return None


def _read_block_qubits(document: dict[str, Any], model: Model | None, place: Place) -> int | None:
    place = place.key("block_qubits")
    accepted = f"an integer from 1 to {BLOCK_QUBITS}"
    if "block_qubits" not in document:
        if model == "block":
            place.complain("nothing", accepted)
        return None
    value = document["block_qubits"]
    if model is not None and model != "block":
        place.complain(shown(value), f'no such key in the model "{model}", only in "block"')
        return None
    if isinstance(value, bool) or not isinstance(value, int) or not 1 <= value <= BLOCK_QUBITS:
        place.complain(shown(value), accepted)
        return None
    return value


def _read_letters(
    document: dict[str, Any],
    model: Model | None,
    block_qubits: int | None,
    normalise: bool,
    place: Place,
    arrays: ArrayStore,
) -> tuple[Letter, ...]:
    place = place.key("letters")
    value = document.get("letters")
    if model == "copies" and (value is None or value == []):
        return ()
    if "letters" not in document:
        place.complain("nothing", TABLES)
        return ()
    return read_letters(value, place, _dimensions(model, block_qubits), normalise, arrays)


def _dimensions(model: Model | None, block_qubits: int | None) -> range:
    """Return the dimensions a letter may have; any, where the model itself is in doubt."""
    if model == "block" and block_qubits is not None:
        return range(2**block_qubits, 2**block_qubits + 1)
    if model in ("iid", "copies"):
        return range(2, LETTER_DIMENSION + 1)
    return range(2, 2**BLOCK_QUBITS + 1)
