"""`encoder-forge spectrum`: what a source's average letter says about compressing it."""

from __future__ import annotations

import click

from encoder_forge.cli.output import note, print_json, print_table


@click.command("spectrum")
@click.argument("source", metavar="SOURCE")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on stdout.")
def command(source: str, as_json: bool) -> None:
    """Show entropies and eigenvalues of SOURCE; is it compressible, and why.

    SOURCE is a TOML or JSON file, or - for standard input.
    """
    from encoder_forge.source.reading import read_source
    from encoder_forge.spectrum.letter import letter_spectrum

    read = read_source(source)
    spectrum = letter_spectrum(read)
    for text in read.notes:
        note(text)
    figures = {
        "entropy_bits": spectrum.entropy_bits,
        "prior_entropy_bits": spectrum.prior_entropy_bits,
        "holevo_bits": spectrum.holevo_bits,
        "entropy_variance_bits2": spectrum.entropy_variance_bits2,
        "purity": spectrum.purity,
    }
    if as_json:
        print_json(
            {
                "source": read.name,
                "revision": read.revision,
                "model": read.model,
                "letter_dimension": read.letter_dimension,
                "letter_qubits": read.letter_qubits,
                "letters": len(read.letters),
                **figures,
                "eigenvalues": spectrum.eigenvalues,
                "compressible": spectrum.compressible,
                "notes": spectrum.notes,
            }
        )
        return
    unit = "block" if read.model == "block" else "letter"
    click.echo(
        f"{read.name}, revision {read.revision}: {_counted(len(read.letters), unit)} of "
        f"{read.letter_dimension} levels on {_counted(read.letter_qubits, 'qubit')}"
    )
    click.echo(spectrum.notes[0])
    click.echo()
    names = ("entropy S", "prior entropy H", "Holevo quantity chi", "entropy variance V", "purity")
    units = (f"bits/{unit}", f"bits/{unit}", f"bits/{unit}", f"bits^2/{unit}", "")
    for name, value, text in zip(names, figures.values(), units, strict=True):
        click.echo(f"{name:<22}{value:>14.10f}  {text}".rstrip())
    click.echo()
    _print_eigenvalues(spectrum.eigenvalues.tolist())
    for text in spectrum.notes[1:]:
        click.echo(f"- {text}")


_SHOWN = 16


def _print_eigenvalues(values: list[float]) -> None:
    rows = [(str(i), f"{value:.10f}") for i, value in enumerate(values[:_SHOWN])]
    print_table(("level", "eigenvalue"), rows, strong=1)
    if len(values) > _SHOWN:
        click.echo(f"... {len(values) - _SHOWN} smaller ones, sum {sum(values[_SHOWN:]):.3g} (all: --json)")


def _counted(number: int, noun: str) -> str:
    return f"{number} {noun}{'s' * (number != 1)}"
