"""`encoder-forge budget`: how short a register a block fits into, and what that costs in fidelity."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, cast

import click

from encoder_forge.cli.output import note, print_json, print_table

if TYPE_CHECKING:
    from encoder_forge.source.model import Source
    from encoder_forge.spectrum.budget import Budget, BudgetRow
    from encoder_forge.spectrum.records import Spectrum
    from encoder_forge.spectrum.second_order import By

BY = ("entanglement", "weight", "ensemble")


@click.command("budget")
@click.argument("source", metavar="SOURCE")
@click.option("--max-block", type=int, help="Longest block in the table, in letters.")
@click.option("--block", type=int, help="One block length, in letters.")
@click.option("--keep", type=int, help="One number of kept qubits.")
@click.option("--kept-dimension", type=int, help="One kept dimension K, no power of two needed.")
@click.option("--fidelity", type=float, help="Show the least kept qubits that reach this.")
@click.option(
    "--by",
    type=click.Choice(BY),
    default="entanglement",
    show_default=True,
    help="Which figure --fidelity means.",
)
@click.option("--all", "every", is_flag=True, help="All numbers of kept qubits.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on stdout.")
def command(
    source: str,
    max_block: int | None,
    block: int | None,
    keep: int | None,
    kept_dimension: int | None,
    fidelity: float | None,
    by: str,
    every: bool,
    as_json: bool,
) -> None:
    """List block length x kept qubits of SOURCE: typical weight, fidelities, rate.

    All figures are exact and noiseless. SOURCE is a TOML or JSON file, or - for standard input.
    """
    from encoder_forge.source.reading import read_source
    from encoder_forge.spectrum.budget import BudgetRequest, make_budget
    from encoder_forge.spectrum.letter import letter_spectrum
    from encoder_forge.synthesis.stringset.method import known_gates

    request = BudgetRequest(max_block, block, keep, kept_dimension, fidelity, cast("By", by), every)
    read = read_source(source)
    for text in read.notes:
        note(text)
    spectrum = letter_spectrum(read)
    with _progress_bar() as progress:
        budget = make_budget(read, spectrum, request, known_gates, progress)
    if as_json:
        print_json(_document(read, spectrum, request.fidelity, by, budget))
        return
    unit = "block" if read.model == "block" else "letter"
    click.echo(
        f"{read.name}, revision {read.revision}: S = {spectrum.entropy_bits:.6g} bits a {unit} on "
        f"{read.letter_qubits} qubit{'s' * (read.letter_qubits != 1)}"
    )
    click.echo("fidelities noiseless; ensemble under policy substitute")
    if budget.rows:
        click.echo()
        _print_rows(budget.rows, unit, fidelity, by)
    for text in budget.notes:
        note(text)


def _document(
    source: Source, spectrum: Spectrum, fidelity: float | None, by: str, budget: Budget
) -> dict[str, object]:
    return {
        "source": source.name,
        "revision": source.revision,
        "model": source.model,
        "letter_qubits": source.letter_qubits,
        "entropy_bits": spectrum.entropy_bits,
        "fidelity": fidelity,
        "by": by if fidelity is not None else None,
        "rows": [_row_document(row, fidelity is not None) for row in budget.rows],
        "notes": budget.notes,
    }


def _row_document(row: BudgetRow, required: bool) -> dict[str, object]:
    document: dict[str, object] = {
        "block": row.block,
        "kept": row.kept,
        "kept_dimension": row.kept_dimension,
        "kept_dimension_log2": row.kept_dimension_log2,
        "rate": row.rate,
        "typical_weight": row.typical_weight,
        "entanglement_fidelity": row.entanglement_fidelity,
        "ensemble_fidelity_substitute": row.ensemble_fidelity_substitute,
        "two_qubit_gates": row.two_qubit_gates,
    }
    if required:
        document |= {"least_kept": row.least_kept, "second_order": row.second_order}
    return document


def _print_rows(rows: tuple[BudgetRow, ...], unit: str, fidelity: float | None, by: str) -> None:
    columns: dict[str, Callable[[BudgetRow], str]] = {
        f"{unit}s": lambda row: str(row.block),
        "kept qubits": lambda row: str(row.kept),
    }
    if any(row.kept_dimension != 1 << row.kept for row in rows if row.kept_dimension is not None):
        columns["dimension"] = lambda row: str(row.kept_dimension)
    if fidelity is not None:
        if any(row.kept != row.least_kept for row in rows):
            columns["least kept"] = lambda row: _count(row.least_kept)
        columns["second order"] = lambda row: "-" if row.second_order is None else f"{row.second_order:.2f}"
    columns |= {
        f"qubits/{unit}": lambda row: f"{row.rate:.6f}",
        "weight": lambda row: _figure(row.typical_weight),
        "entanglement": lambda row: _figure(row.entanglement_fidelity),
        "ensemble": lambda row: _figure(row.ensemble_fidelity_substitute),
    }
    if any(row.two_qubit_gates is not None for row in rows):
        columns["2-qubit gates"] = lambda row: _count(row.two_qubit_gates)
    cells = [[show(row) for show in columns.values()] for row in rows]
    print_table(list(columns), cells, strong=list(columns).index(by))


def _count(value: int | None) -> str:
    return "-" if value is None else str(value)


def _figure(value: float | None) -> str:
    """Show ten digits, but a figure just below one by what it lacks.

    >>> _figure(0.94194173824159), _figure(1 - 1e-12), _figure(1.0)
    ('0.9419417382', '1 - 1e-12', '1.0000000000')
    """
    if value is None:
        return "-"
    shown = f"{value:.10f}"
    lacking = 1 - value
    return f"1 - {lacking:.0e}" if shown.startswith("1.") and lacking > 1e-14 else shown


_BAR_AFTER_SECONDS = 1.0


@contextmanager
def _progress_bar() -> Iterator[Callable[[int, int], None] | None]:
    """Offer a bar on stderr, on a terminal only, that appears when the work takes long."""
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import Progress

    bar = Progress(console=Console(stderr=True), transient=True)
    task = bar.add_task("block lengths", total=None)
    started = time.monotonic()

    def show(done: int, total: int) -> None:
        if time.monotonic() - started > _BAR_AFTER_SECONDS:
            bar.start()
        bar.update(task, completed=done, total=total)

    try:
        yield show
    finally:
        bar.stop()
