"""Make the array file of the sample source tern-island-words.

Each word is a product of dim-plus and dim-minus pulses (`PULSES`), disturbed by an afterglow: a fixed share
of the pulse before leaks into each amplitude, and a small random part is added. Run from anywhere:

    python samples/make_samples.py [FOLDER]

The file comes out the same, byte for byte, on every machine: the random numbers are those of Python's own
generator, whose sequence is guaranteed, and only sums, products and square roots follow.
"""

from __future__ import annotations

import math
import random
import sys
from pathlib import Path

import numpy as np

SEED = 20261205
WORDS = ("+++", "++-", "+-+", "-++", "+--", "--+")
PULSES = {"+": (math.sqrt(0.9), math.sqrt(0.1)), "-": (math.sqrt(0.9), -math.sqrt(0.1))}
AFTERGLOW = 0.15
NOISE = 0.04


def word_state(word: str, rng: random.Random) -> list[complex]:
    """Return the disturbed state of one word: 2^len(word) amplitudes of norm one, first pulse leftmost."""
    state = [1.0]
    for pulse in word:
        state = [a * b for a in state for b in PULSES[pulse]]
    glowing = [a + AFTERGLOW * state[index >> 1] for index, a in enumerate(state)]
    noisy = [complex(a + NOISE * (2 * rng.random() - 1), NOISE * (2 * rng.random() - 1)) for a in glowing]
    norm = math.sqrt(sum(a.real * a.real + a.imag * a.imag for a in noisy))
    return [complex(a.real / norm, a.imag / norm) for a in noisy]


def main(folder: Path) -> None:
    """Write tern-island-words.npy into a folder."""
    rng = random.Random(SEED)
    states = np.array([word_state(word, rng) for word in WORDS], dtype="<c16")
    np.save(folder / "tern-island-words.npy", states, allow_pickle=False)


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
