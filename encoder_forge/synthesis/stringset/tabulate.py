"""Regenerate the shipped table: `python -m encoder_forge.synthesis.stringset.tabulate [FILE]`.

One search outwards from the subcube for each size (n, m), n <= 5, until no class is left; about ten seconds
on one core, nearly all of it for (5, 4). Gates are their own inverses as moves on sets, so the cost from the
subcube to a class is the cost from the class to the subcube.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np

from encoder_forge.synthesis.stringset.layers import LayeredSearch
from encoder_forge.synthesis.stringset.masks import MAX_WIRES, subcube
from encoder_forge.synthesis.stringset.table import TABLE_FILE, ClassTable, write_tables


def tabulate(wires: int, kept: int) -> ClassTable:
    """Search all classes of sets of 2^kept strings of `wires` wires.

    >>> tabulate(3, 2).costs.tolist()
    [0, 5, 4, 3, 1, 2]
    """
    search = LayeredSearch(np.array([subcube(kept)], dtype=np.uint32), wires)
    search.run()
    return ClassTable(wires, kept, search.settled, search.costs())


def main(arguments: list[str]) -> int:
    """Write the table of every size to the file named, or to the one in the package."""
    path = Path(arguments[0]) if arguments else TABLE_FILE
    tables = []
    for wires in range(1, MAX_WIRES + 1):
        for kept in range(wires + 1):
            start = time.perf_counter()
            table = tabulate(wires, kept)
            tables.append(table)
            print(
                f"{wires} -> {kept}: {len(table.forms):6d} classes, dearest {table.largest_cost:2d}, "
                f"{time.perf_counter() - start:5.2f} s"
            )
    write_tables(path, tables)
    print(f"{path}: {path.stat().st_size} bytes")
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
