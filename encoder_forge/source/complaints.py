"""Collects what is wrong with a file, so that a user hears all of it at once."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, field
from difflib import get_close_matches

from encoder_forge.errors import InputError
from encoder_forge.source.limits import TEXT_LENGTH

LISTED = 8
"""Complaints of one kind about one list or table before the rest is only counted."""


class Wrong(Exception):  # noqa: N818 (never leaves this package: a finding on its way to its place)
    """A finding whose place only the caller knows.

    Parameters
    ----------
    found, accepted : str
        As for `Place.complain`.
    """

    def __init__(self, found: str, accepted: str) -> None:
        self.found = found
        self.accepted = accepted
        super().__init__(f"found {found}; accepted: {accepted}")


@dataclass
class Report:
    """The complaints and notes about one file.

    Attributes
    ----------
    file : str
        The file as the user named it.
    complaints, notes : list of str
        One line each, in the order of the file.
    """

    file: str
    complaints: list[str] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    def raise_complaints(self) -> None:
        """Raise one `InputError` with all complaints, if there are any."""
        if self.complaints:
            raise InputError(self.complaints)


@dataclass(frozen=True)
class Place:
    """A place in a file: complaints made here name it.

    Attributes
    ----------
    report : Report
        Where complaints and notes go.
    path : str
        The place in words, empty for the file as a whole.

    Examples
    --------
    >>> report = Report("lamp.toml")
    >>> place = Place(report, 'letter 0 ("dim")').key("amplitudes").item(1)
    >>> place.complain(shown("0,3"), "a number")
    >>> report.complaints
    ['lamp.toml: letter 0 ("dim"), amplitudes[1]: found "0,3"; accepted: a number']
    """

    report: Report
    path: str = ""

    def key(self, name: str) -> Place:
        """Return the place of a key inside this one."""
        return Place(self.report, f"{self.path}, {name}" if self.path else name)

    def item(self, *indices: int) -> Place:
        """Return the place of a list's item."""
        return Place(self.report, self.path + "".join(f"[{i}]" for i in indices))

    def complain(self, found: str, accepted: str) -> None:
        """Record that `found` stands here where only `accepted` may."""
        where = f"{self.path}: " if self.path else ""
        line = f"{self.report.file}: {where}found {found}; accepted: {accepted}"
        self.report.complaints.append(one_line(line))

    def note(self, text: str) -> None:
        """Record what was mended here without asking."""
        self.report.notes.append(one_line(f"{self.path}: {text}" if self.path else text))


def check_keys(table: dict[str, object], accepted: Iterable[str], place: Place) -> None:
    """Complain of every key of `table` that is not accepted, suggesting the nearest one that is."""
    names = list(accepted)
    unknown = [key for key in table if key not in names]
    for key in unknown[:LISTED]:
        near = get_close_matches(key[:TEXT_LENGTH].lower(), names, n=1, cutoff=0.6)
        hint = f"did you mean {near[0]}? " if near else ""
        place.complain(f"the unknown key {shown(key)}", f"{hint}the keys {', '.join(names)}")
    if len(unknown) > LISTED:
        place.complain(f"{len(unknown) - LISTED} more unknown keys", f"the keys {', '.join(names)}")


def shown(value: object) -> str:
    """Show a value of a source file in a complaint: short, on one line, never a Python type's name.

    Examples
    --------
    >>> shown(True), shown(-0.5), shown([1, 2]), shown({"theta": 1})
    ('true', '-0.5', '[1, 2]', 'a table with the keys theta')
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        return str(value) if value.bit_length() <= 128 else f"an integer of {value.bit_length()} bits"
    if isinstance(value, float):
        return f"{value!r}" if math.isfinite(value) else f"the non-finite number {value}"
    if isinstance(value, str):
        text = value if len(value) <= 60 else value[:57] + "..."
        return '"' + one_line(text).replace('"', '\\"') + '"'
    if isinstance(value, list):
        simple = len(value) <= 4 and all(isinstance(v, bool | int | float | str) for v in value)
        items = ", ".join(shown(v) for v in value) if simple else ""
        return f"[{items}]" if simple else f"a list of {counted(len(value), 'item')}"
    if isinstance(value, dict):
        keys = ", ".join(one_line(str(key)) for key in list(value)[:6])
        return f"a table with the keys {keys}" if value else "an empty table"
    return "nothing (null)" if value is None else "a date or time"


def counted(number: int, noun: str) -> str:
    """Write a number with its noun: "1 item", "2 items"."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def one_line(text: str) -> str:
    """Escape what would not print, so that a message stays one line on any terminal."""
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode("ascii") for c in text)
