"""The priors of a source: given as such, or as counts whose shares they are."""

from __future__ import annotations

import math
from collections.abc import Sequence

from encoder_forge.source.complaints import Place, shown
from encoder_forge.source.numbers import read_real
from encoder_forge.source.states import rescaled
from encoder_forge.tolerances import NORM_INPUT

MOST_COUNTS = 10**15
"""Largest count of one letter: a double still holds it exactly."""

PRIOR = "a prior from 0 to 1"
COUNT = f"a count, an integer from 0 to {MOST_COUNTS}"


def read_priors(
    letters: Sequence[dict[str, object]], places: Sequence[Place], whole: Place, normalise: bool
) -> list[float] | None:
    """Return the priors of all letters, summing to one, or complain and return None.

    Parameters
    ----------
    letters : sequence of dict
        The letters' tables.
    places : sequence of Place
        Where each stands.
    whole : Place
        Where all of them stand: for complaints about their sum.
    normalise : bool
        Whether priors of any positive sum are accepted.
    """
    styles = {key: [i for i, letter in enumerate(letters) if key in letter] for key in ("prior", "count")}
    both = [i for i in styles["prior"] if i in styles["count"]]
    for i in both:
        places[i].complain("both prior and count", "one of them, the same for all letters")
    if styles["prior"] and styles["count"]:
        if not both:
            found = f"prior in {_numbers(styles['prior'])} but count in {_numbers(styles['count'])}"
            whole.complain(found, "one of them, the same for all letters")
        return None
    if len(letters) == 1 and not styles["prior"] and not styles["count"]:
        return [1.0]
    if styles["count"]:
        priors = _shares(letters, places, whole)
    else:
        priors = _priors(letters, places, whole, normalise)
    for place, prior in zip(places, priors or [], strict=False):
        if prior == 0:
            place.note("its prior is zero: the source never sends it")
    return priors


def _priors(
    letters: Sequence[dict[str, object]], places: Sequence[Place], whole: Place, normalise: bool
) -> list[float] | None:
    priors = []
    for letter, place in zip(letters, places, strict=True):
        if "prior" not in letter:
            place.key("prior").complain("nothing", f"{PRIOR} (or count, in all letters)")
            continue
        prior = read_real(letter["prior"], place.key("prior"))
        if prior is not None and (prior < 0 or (prior > 1 + NORM_INPUT and not normalise)):
            place.key("prior").complain(shown(letter["prior"]), PRIOR)
        elif prior is not None:
            priors.append(prior)
    if len(priors) < len(letters):
        return None
    total = math.fsum(priors)
    if not rescaled(total, "sum of the priors", normalise, whole.key("prior")):
        return None
    return [prior / total for prior in priors]


def _shares(
    letters: Sequence[dict[str, object]], places: Sequence[Place], whole: Place
) -> list[float] | None:
    counts = []
    for letter, place in zip(letters, places, strict=True):
        count = letter.get("count")
        if isinstance(count, int) and not isinstance(count, bool) and 0 <= count <= MOST_COUNTS:
            counts.append(count)
        else:
            place.key("count").complain(shown(count) if "count" in letter else "nothing", COUNT)
    if len(counts) < len(letters):
        return None
    total = sum(counts)
    if total == 0:
        whole.key("count").complain("a sum of 0", "a positive sum")
        return None
    whole.note(f"the priors are shares of {total} counted letters")
    return [count / total for count in counts]


def _numbers(indices: Sequence[int]) -> str:
    named = ", ".join(str(i) for i in indices[:8])
    more = f" and {len(indices) - 8} more" if len(indices) > 8 else ""
    return f"letter {named}" if len(indices) == 1 else f"letters {named}{more}"
