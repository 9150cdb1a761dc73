"""Averages over all letter strings of an iid source, without listing the strings.

The fidelity of a letter string is a product form, contracted with vectors over eigenstrings. Its average
factorises letter by letter, so that one small matrix, applied to each place of the block, replaces the sum
over letters^block strings.
"""

from __future__ import annotations

import numpy as np


def mean_products(left: np.ndarray, right: np.ndarray, table: np.ndarray, priors: np.ndarray) -> np.ndarray:
    """Return, for each letter l, the mean of conj(f(left)) f(right) over strings with l at a random place.

    Here f(u) = sum over s of x[s] u[s] for the product x of the letters' rows of `table`. The mean over all
    strings is `priors @` the result.

    Parameters
    ----------
    left, right : ndarray, shape (D^n,) or (b, D^n)
        A leading axis is summed over.
    table : ndarray, shape (letters, D)
    priors : ndarray, shape (letters,)

    Returns
    -------
    ndarray of float, shape (letters,)

    Notes
    -----
    With G[a,b] = sum_l p_l conj(x_l[a]) x_l[b], the form is left^* G^{(x)n} right; leaving one place open
    gives the letters there. Halving the places in turn shares the work: O(b n log n D^(n+1)).

    Examples
    --------
    Two letters, orthogonal, with prior 3/4 and 1/4; `left` and `right` pick the string 00:

    >>> pick = np.array([1.0, 0, 0, 0])
    >>> mean_products(pick, pick, np.eye(2), np.array([0.75, 0.25])).tolist()
    [0.75, 0.0]
    """
    size = table.shape[1]
    shape = (-1, *_places(left.shape[-1], size))
    left, right = left.reshape(shape), right.reshape(shape)
    gram = np.einsum("l,la,lb->ab", priors, table.conj(), table)
    opened = _opened(left, right, gram, range(1, left.ndim))
    means: np.ndarray = np.einsum("la,ab,lb->l", table.conj(), opened, table).real / (left.ndim - 1)
    return means


def _opened(left: np.ndarray, right: np.ndarray, gram: np.ndarray, places: range) -> np.ndarray:
    """Return the form with one place left open, summed over `places`; `right` has `gram` on all others."""
    if len(places) == 1:
        rest = [axis for axis in range(left.ndim) if axis != places[0]]
        single: np.ndarray = np.tensordot(left.conj(), right, axes=(rest, rest))
        return single
    middle = places.start + len(places) // 2
    halves = range(places.start, middle), range(middle, places.stop)
    return _opened(left, _spread(right, gram, halves[1]), gram, halves[0]) + _opened(
        left, _spread(right, gram, halves[0]), gram, halves[1]
    )


def _spread(vector: np.ndarray, gram: np.ndarray, places: range) -> np.ndarray:
    """Apply `gram` to some places of a vector."""
    for place in places:
        vector = np.moveaxis(np.tensordot(gram, vector, axes=(1, place)), 0, place)
    return vector


def _places(length: int, size: int) -> tuple[int, ...]:
    """Return the shape (size,) * n of a vector over n places."""
    block = round(np.log(length) / np.log(size))
    return (size,) * block
