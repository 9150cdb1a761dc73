"""The text of a source file becomes a table of keys: TOML or JSON, with every syntax error placed."""

from __future__ import annotations

import json
import re
import tomllib
from collections import Counter
from pathlib import PurePath
from typing import Any

from encoder_forge.source.complaints import Place, Report, shown
from encoder_forge.source.limits import SOURCE_BYTES

ACCEPTED = "a source in TOML or JSON (UTF-8 text)"


class JsonObject(dict[str, Any]):
    """A JSON object that remembers which of its keys were given more than once."""

    repeated: tuple[str, ...] = ()


def parse_document(name: str, content: bytes, report: Report) -> dict[str, Any] | None:
    """Return the keys of a source file, or complain and return None.

    Parameters
    ----------
    name : str
        The file's name; by its ending it is TOML or JSON, else by its first character.
    content : bytes
        The file as read.
    report : Report
        Receives the complaints.
    """
    place = Place(report)
    text = _decode(content, place)
    if text is None:
        return None
    parse = _parse_json if is_json(name, text) else _parse_toml
    try:
        return parse(text, place)
    except RecursionError:
        place.complain("values nested too deeply", ACCEPTED)
    except ValueError:
        # Both parsers hand on Python's own refusal of integers beyond 4300 digits, without a place.
        place.complain("an integer too long to read", "finite numbers of ordinary length")
    return None


def is_json(name: str, text: str) -> bool:
    """Whether a file is JSON: by its name's ending, else when its text opens with a brace."""
    ending = PurePath(name).suffix.lower()
    return ending == ".json" or (ending != ".toml" and text.lstrip().startswith("{"))


def _decode(content: bytes, place: Place) -> str | None:
    if len(content) > SOURCE_BYTES:
        place.complain(
            f"more than {SOURCE_BYTES} bytes", f"up to {SOURCE_BYTES}; put large states into an array file"
        )
        return None
    if not content.strip():
        place.complain("an empty file", ACCEPTED)
        return None
    if b"\0" in content:
        place.complain(f"a binary file (a zero byte at offset {content.index(0)})", ACCEPTED)
        return None
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        place.complain(f"a binary file (no UTF-8 at byte offset {error.start})", ACCEPTED)
        return None


def _parse_toml(text: str, place: Place) -> dict[str, Any] | None:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        message = str(error)
    reason, line, column = message, text.count("\n") + 1, len(text) - (text.rfind("\n") + 1) + 1
    if match := re.fullmatch(r"(?s)(.*) \(at (?:line (\d+), column (\d+)|end of document)\)", message):
        reason = match[1]
        line, column = (int(match[2]), int(match[3])) if match[2] else (line, column)
    _at(place, line, column).complain(f"broken TOML ({_lowered(reason)})", "TOML 1.0")
    return None


def _parse_json(text: str, place: Place) -> dict[str, Any] | None:
    try:
        # NaN and Infinity become floats here: they are refused where a number is read, with their place.
        document = json.loads(text, object_pairs_hook=_object)
    except json.JSONDecodeError as error:
        where = _at(place, error.lineno, error.colno)
        where.complain(f"broken JSON ({_lowered(error.msg)})", "JSON (RFC 8259)")
        return None
    if not isinstance(document, dict):
        place.complain(shown(document), "a JSON object with the keys of a source")
        return None
    _complain_of_repeats(document, place)
    return document


def _object(pairs: list[tuple[str, Any]]) -> JsonObject:
    result = JsonObject(pairs)
    if len(result) < len(pairs):
        times = Counter(key for key, _ in pairs)
        result.repeated = tuple(key for key in result if times[key] > 1)
    return result


def _complain_of_repeats(value: Any, place: Place) -> None:
    """Walk a JSON document and complain of every key given twice in one object."""
    if isinstance(value, JsonObject):
        for key in value.repeated:
            place.complain(f"the key {shown(key)} more than once", "each key once")
        for key, item in value.items():
            _complain_of_repeats(item, place.key(key))
    elif isinstance(value, list):
        for index, item in enumerate(value):
            _complain_of_repeats(item, place.item(index))


def _at(place: Place, line: int, column: int) -> Place:
    return place.key(f"line {line}, column {column}")


def _lowered(text: str) -> str:
    return text[:1].lower() + text[1:]
