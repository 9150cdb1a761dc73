"""The Gaussian estimate of how many qubits a long block needs, shown beside the exact sum."""

from __future__ import annotations

import math
from statistics import NormalDist
from typing import Literal

By = Literal["entanglement", "weight", "ensemble"]


def second_order_qubits(
    entropy_bits: float, entropy_variance_bits2: float, block: int, fidelity: float, by: By = "entanglement"
) -> float | None:
    """Return the second-order estimate of log2 K for a block that is to reach a fidelity.

    Parameters
    ----------
    entropy_bits, entropy_variance_bits2 : float
        S and V of the average letter.
    block : int
        Letters n.
    fidelity : float
        Required figure F, between zero and one.
    by : "entanglement", "weight" or "ensemble"
        Which figure F is.

    Returns
    -------
    float or None
        n S + sqrt(n V) Phi^{-1}(P) with Phi the normal distribution function and P the typical weight that F
        asks for: sqrt(F) for the entanglement fidelity, F for the weight. None for the ensemble fidelity,
        which is no function of P.

    Notes
    -----
    Datta and Leditzky (2015); Abdelhadi and Renes (2020). The error grows like log n: some qubits at a
    hundred letters. It is an estimate, never used in place of the sum over types.

    Examples
    --------
    The pair |0>, |+>, a hundred letters at weight 0.9; the exact sum says 66.935:

    >>> round(second_order_qubits(0.6008760366928562, 0.808423901393146, 100, 0.9, by="weight"), 3)
    71.61
    """
    if by == "ensemble":
        return None
    weight = math.sqrt(fidelity) if by == "entanglement" else fidelity
    spread = math.sqrt(block * entropy_variance_bits2)
    return block * entropy_bits + (spread * NormalDist().inv_cdf(weight) if spread > 0 else 0.0)
