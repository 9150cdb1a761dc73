"""The shipped table: every class of 2^m-element sets of up to five wires with its least cost.

169,112 classes for (5, 4), 3,779 for (5, 3) and a few hundred others: small enough to ship whole, so that no
source of up to five wires ever waits for a search. `python -m encoder_forge.synthesis.stringset.tabulate`
regenerates the file; `python -m encoder_forge.synthesis.stringset.prove` searches again without it.
"""

from __future__ import annotations

import zipfile
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np

from encoder_forge.errors import MachineError
from encoder_forge.synthesis.stringset.canonical import canonical

TABLE_FILE = Path(__file__).with_name("minima.npz")


@dataclass(frozen=True, eq=False)
class ClassTable:
    """Least cost of every class of sets of one size.

    Attributes
    ----------
    wires, kept : int
        n and m: sets of 2^m strings of n wires, to be carried onto a subcube.
    forms : ndarray of uint32
        Canonical forms, rising.
    costs : ndarray of uint8, same shape
        Two-qubit gates of the cheapest circuit (CX 1, relative-phase Toffoli 3, three-control 6).
    """

    wires: int
    kept: int
    forms: np.ndarray
    costs: np.ndarray

    def __post_init__(self) -> None:
        self.forms.setflags(write=False)
        self.costs.setflags(write=False)

    def costs_of(self, masks: np.ndarray) -> np.ndarray:
        """Return the least cost of each set; O(log classes) each.

        Raises
        ------
        KeyError
            If a set does not have 2^m strings of n wires.
        """
        forms = canonical(masks, self.wires)
        places = np.minimum(np.searchsorted(self.forms, forms), len(self.forms) - 1)
        strangers = self.forms[places] != forms
        if strangers.any():
            mask = int(np.asarray(masks)[strangers][0])
            raise KeyError(f"mask {mask:#x} is no set of {1 << self.kept} strings of {self.wires} wires")
        return self.costs[places]

    def layer(self, cost: int) -> np.ndarray:
        """Return the classes of one cost, rising."""
        return self.forms[self.costs == cost]

    @property
    def largest_cost(self) -> int:
        """Cost of the dearest class."""
        return int(self.costs.max())


@cache
def class_table(wires: int, kept: int) -> ClassTable:
    """Return the table for sets of 2^kept strings of `wires` wires, read once a process.

    Raises
    ------
    MachineError
        If the shipped file is missing, damaged or lacks the size asked for.

    Examples
    --------
    >>> table = class_table(4, 3)
    >>> len(table.forms), table.largest_cost
    (74, 10)
    """
    return read_table(TABLE_FILE, wires, kept)


def read_table(path: Path, wires: int, kept: int) -> ClassTable:
    """Read the table of one size from a file that `write_tables` wrote."""
    try:
        with np.load(path, allow_pickle=False) as arrays:
            gaps, costs = arrays[_key(wires, kept, "gaps")], arrays[_key(wires, kept, "costs")]
    except (OSError, ValueError, KeyError, EOFError, zipfile.BadZipFile) as error:
        raise MachineError(
            f"{path.name}: no usable table for {wires} wires and {kept} kept ({error}); "
            "regenerate it with python -m encoder_forge.synthesis.stringset.tabulate"
        ) from error
    return ClassTable(wires, kept, np.cumsum(gaps, dtype=np.uint32), costs)


def write_tables(path: Path, tables: list[ClassTable]) -> None:
    """Write tables to one compressed file; the same tables give the same bytes.

    The canonical forms are stored as gaps, which are small: smallest representatives crowd together.
    """
    arrays: dict[str, np.ndarray] = {}
    for table in tables:
        arrays[_key(table.wires, table.kept, "gaps")] = np.diff(table.forms, prepend=np.uint32(0))
        arrays[_key(table.wires, table.kept, "costs")] = table.costs
    with path.open("wb") as stream:
        np.savez_compressed(stream, allow_pickle=False, **arrays)


def _key(wires: int, kept: int, part: str) -> str:
    return f"wires{wires}_kept{kept}_{part}"
