"""How commands print: JSON documents, aligned tables, notes on stderr."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterable, Sequence
from typing import Any

import click
import numpy as np


def plain(value: Any) -> Any:
    """Turn numpy scalars and arrays, tuples and NaN into what JSON has (NaN and infinities become null)."""
    if isinstance(value, dict):
        return {str(k): plain(v) for k, v in value.items()}
    if isinstance(value, list | tuple):
        return [plain(v) for v in value]
    if isinstance(value, np.ndarray):
        return plain(value.tolist())
    if isinstance(value, bool | np.bool_):
        return bool(value)
    if isinstance(value, int | np.integer):
        return int(value)
    if isinstance(value, float | np.floating):
        return float(value) if np.isfinite(value) else None
    return value


def print_json(document: dict[str, Any]) -> None:
    """Print one JSON document on stdout."""
    click.echo(json.dumps(plain(document), indent=2, allow_nan=False, ensure_ascii=False))


def note(text: str) -> None:
    """Print a remark on stderr."""
    click.echo(f"note: {text}", err=True)


def print_table(head: Sequence[str], rows: Iterable[Sequence[str]], strong: int | None = None) -> None:
    """Print right-aligned columns under a head; on a terminal the column `strong` stands out.

    Parameters
    ----------
    head : sequence of str
        Column titles, units included.
    rows : iterable of sequences of str
        Cells, already formatted.
    strong : int, optional
        Index of the column that the user came for.
    """
    cells = [list(head), *(list(row) for row in rows)]
    widths = [max(len(row[i]) for row in cells) for i in range(len(head))]
    for number, row in enumerate(cells):
        parts = [cell.rjust(width) for cell, width in zip(row, widths, strict=True)]
        if strong is not None and number and sys.stdout.isatty():
            parts[strong] = click.style(parts[strong], bold=True)
        click.echo("  ".join(parts).rstrip())
