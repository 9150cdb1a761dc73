"""The exception types of the project.

One root, grouped by meaning; each carries the exit code that the command line returns for it. They are
raised where the fact is known, with place and remedy in the message; only the command line turns them into
text on a screen.
"""

from __future__ import annotations

from collections.abc import Sequence


class EncoderForgeError(Exception):
    """Root of every error that a user may see; `exit_code` is the process's answer."""

    exit_code = 3


class InputError(EncoderForgeError, ValueError):
    """Bad usage or bad input (exit 2).

    Parameters
    ----------
    complaints : str or sequence of str
        Every complaint about one input, each naming place, what was found and what is accepted.
    """

    exit_code = 2

    def __init__(self, complaints: str | Sequence[str]) -> None:
        self.complaints: tuple[str, ...] = (complaints,) if isinstance(complaints, str) else tuple(complaints)
        super().__init__("\n".join(self.complaints))


class LimitError(InputError):
    """A request over a stated limit (exit 2); the message gives value, limit and nearest feasible request."""


class NotYetError(InputError):
    """A request that a later version will serve (exit 2)."""


class CheckFailedError(EncoderForgeError):
    """A measured figure does not match the analytic one, or a comparison failed (exit 1).

    Parameters
    ----------
    complaints : sequence of str
        What failed and by how much.
    """

    exit_code = 1

    def __init__(self, complaints: str | Sequence[str]) -> None:
        self.complaints: tuple[str, ...] = (complaints,) if isinstance(complaints, str) else tuple(complaints)
        super().__init__("\n".join(self.complaints))


class MachineError(EncoderForgeError, OSError):
    """The machine refuses: a file that cannot be written, too little memory (exit 3)."""

    exit_code = 3
