"""`python -m encoder_forge`, the same as the `encoder-forge` command."""

from encoder_forge.cli.main import run

if __name__ == "__main__":
    run()
