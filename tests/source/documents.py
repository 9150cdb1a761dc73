"""Source documents for the tests: a small valid one to spoil, a TOML writer, and hypothesis strategies."""

import json
import math

import numpy as np
import pytest
from hypothesis import strategies as st

from encoder_forge.errors import InputError
from encoder_forge.source.model import SourceFile
from encoder_forge.source.reading import source_from_files


def lamp(**changes):
    """A valid document of two letters; keyword arguments replace top-level keys (None removes one)."""
    document = {
        "schema": 1,
        "name": "lamp",
        "revision": "a",
        "model": "iid",
        "letters": [
            {"label": "plus", "prior": 0.5, "amplitudes": [0.6, 0.8]},
            {"label": "minus", "prior": 0.5, "amplitudes": [0.6, -0.8]},
        ],
    }
    document.update(changes)
    return {key: value for key, value in document.items() if value is not None}


def lamp_with(index=1, **changes):
    """The document with keys of one letter replaced (None removes one)."""
    document = lamp()
    letter = {**document["letters"][index], **changes}
    document["letters"][index] = {key: value for key, value in letter.items() if value is not None}
    return document


def with_state(**state):
    """The document whose letter 1 has this state in place of its amplitudes."""
    return lamp_with(1, **{"amplitudes": None, **state})


def read(document, *arrays):
    """Read a document through its JSON text."""
    content = json.dumps(document).encode()
    return source_from_files((SourceFile("lamp.json", content), *arrays))


def complaints_of(document, *arrays):
    """The complaints that reading a document raises; each is one line that names file, found and accepted."""
    with pytest.raises(InputError) as caught:
        read(document, *arrays)
    return checked(caught.value, "lamp.json")


def checked(error, file):
    """The complaints of an error, once they are known to have the form that every complaint has."""
    assert error.exit_code == 2
    for line in error.complaints:
        assert line.startswith(f"{file}: ")
        assert "found " in line
        assert "; accepted: " in line
        assert line.isprintable()
        assert "np." not in line
        assert "array(" not in line
    return error.complaints


def only(complaints):
    """The one complaint of a list of one."""
    assert len(complaints) == 1, complaints
    return complaints[0]


def toml_text(document):
    """Write a document as TOML: inline values, letters as tables."""
    lines = [f"{key} = {_toml(value)}" for key, value in document.items() if key != "letters"]
    for letter in document.get("letters", []):
        lines += ["[[letters]]", *(f"{key} = {_toml(value)}" for key, value in letter.items())]
    return "\n".join(lines) + "\n"


def _toml(value):
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key} = {_toml(item)}" for key, item in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(_toml(item) for item in value) + "]"
    return json.dumps(value, ensure_ascii=False)


reals = st.floats(-1, 1).map(lambda x: round(x, 6))


@st.composite
def amplitudes(draw, dimension):
    """A state vector in a random mixture of the three kinds of numbers, and the vector it means."""
    parts = draw(st.lists(st.tuples(reals, reals), min_size=dimension, max_size=dimension))
    vector = np.array([complex(*part) for part in parts])
    norm = np.linalg.norm(vector)
    if norm < 0.1:
        vector, norm = np.eye(dimension, dtype=complex)[0], 1.0
    vector = vector / norm
    return [draw(st.sampled_from(KINDS))(complex(entry)) for entry in vector], vector


KINDS = (
    lambda z: [z.real, z.imag],
    lambda z: f"{z.real!r}{z.imag:+.17g}j",
    lambda z: z.real if z.imag == 0 else [z.real, z.imag],
)


@st.composite
def documents(draw):
    """A random valid iid document, and for each letter the density matrix that it means."""
    dimension = draw(st.integers(2, 4))
    labels = draw(
        st.lists(
            st.text(st.characters(exclude_categories=["C", "Z"]), min_size=1, max_size=12).filter(
                str.isprintable
            ),
            min_size=1,
            max_size=5,
            unique=True,
        )
    )
    counts = draw(st.lists(st.integers(0, 50), min_size=len(labels), max_size=len(labels)))
    counts[0] += 1
    counted = draw(st.booleans())
    letters, densities = [], []
    for label, count in zip(labels, counts, strict=True):
        form, density = draw(states(dimension))
        letters.append({"label": label, ("count" if counted else "prior"): count, **form})
        densities.append(density)
    if not counted:
        for letter in letters:
            letter["prior"] /= sum(counts)
    document = {"schema": 1, "name": "random", "revision": "r", "model": "iid", "letters": letters}
    return document, np.array(counts) / sum(counts), densities


@st.composite
def states(draw, dimension):
    """A state in one of the forms that its dimension has, and its density matrix."""
    form = draw(st.sampled_from(("amplitudes", "density", "angles_deg", "bloch")))
    if dimension == 2 and form == "angles_deg":
        theta, phi = draw(st.floats(0, 180)), draw(st.floats(-360, 360))
        half, turn = math.radians(theta) / 2, math.radians(phi)
        vector = np.array([math.cos(half), np.exp(1j * turn) * math.sin(half)])
        return {form: {"theta": theta, "phi": phi}}, np.outer(vector, vector.conj())
    if dimension == 2 and form == "bloch":
        x, y, z = (draw(reals) / 2 for _ in range(3))
        return {form: [x, y, z]}, np.array([[1 + z, x - 1j * y], [x + 1j * y, 1 - z]]) / 2
    entries, vector = draw(amplitudes(dimension))
    projector = np.outer(vector, vector.conj())
    if form == "density":
        share = draw(st.floats(0, 1))
        density = share * projector + (1 - share) * np.eye(dimension) / dimension
        return {form: [[[z.real, z.imag] for z in row] for row in density.tolist()]}, density
    return {"amplitudes": entries}, projector
