"""Every tolerance of the project, each with its reason."""

from __future__ import annotations

NORM_INPUT = 1e-6
"""A norm or prior sum in a source file off by more is refused; smaller drift is renormalised with a note.
Six digits are what people copy from an instrument's printout."""

NORM_SILENT = 1e-12
"""Drift below this is rounding of the file's own decimals and needs no note."""

DENSITY_INPUT = 1e-6
"""Largest accepted departure of a given density matrix from Hermitian and positive, as for norms."""

EIGENVALUE_ZERO = 1e-14
"""An eigenvalue of the average state (trace one) below this is zero: LAPACK's symmetric solvers err by a
small multiple of machine epsilon times the norm, which is at most one here."""

EIGENVALUE_TIE = 1e-12
"""Eigenvalues, and block weights relative to the larger, closer than this count as equal. The loss from
treating them as ties is below it, three orders under DEVIATION."""

COMPRESSIBLE = 1e-9
"""A source is compressible when its entropy lies below its letters' qubits by more than this (bits)."""

DEVIATION = 1e-9
"""Largest accepted difference between a measured and an analytic figure."""

LEAKAGE = 1e-9
"""Largest accepted norm of the part of an encoded typical state outside trash = scratch = 0, and of the
round trip's departure from the identity on the typical subspace. Weight alone is second order in an error
and would pass a wrong angle of 3e-5. Rounding stays far below: each of 1e5 gates adds about 1e-16."""

BRANCH_ZERO = 1e-30
"""Squared norm under which a branch of a simulated measurement is taken as never happening."""
