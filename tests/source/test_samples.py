import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from encoder_forge.source.reading import read_source, source_from_files

SAMPLES = Path(__file__).parents[2] / "samples"
FILES = sorted(path for path in SAMPLES.iterdir() if path.suffix in (".toml", ".json"))


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.name)
def test_a_sample_reads_and_reads_back_from_its_files(path):
    source = read_source(path)
    assert source.name == path.stem
    assert source.priors.sum() == pytest.approx(1, abs=1e-12)
    assert source_from_files(source.files).sha256 == source.sha256


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.name)
def test_a_sample_needs_no_mending_that_it_does_not_ask_for(path):
    notes = [
        note for note in read_source(path).notes if "shares of" not in note and "never sends" not in note
    ]
    assert not notes or "normalise = true" in path.read_text(encoding="utf-8")


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.name)
def test_a_sample_is_listed_in_the_table_of_samples(path):
    assert f"`{path.name}`" in (SAMPLES / "README.md").read_text(encoding="utf-8")


def test_the_samples_cover_the_models_forms_and_formats():
    sources = [read_source(path) for path in FILES]
    assert {source.model for source in sources} >= {"iid", "block"}
    assert {source.letter_dimension for source in sources} >= {2, 3, 8}
    assert {source.pure for source in sources} == {True, False}
    text = "".join(path.read_text(encoding="utf-8") for path in FILES)
    for key in ("amplitudes", "angles_deg", "bloch", "density", "array", "count", "normalise"):
        assert key in text


def test_the_lamp_has_the_average_state_its_story_tells():
    np.testing.assert_allclose(
        read_source(SAMPLES / "tern-island-lamp.toml").average_state, np.diag([0.9, 0.1]), atol=1e-12
    )


def test_the_fog_keeps_the_lamp_s_average_state_but_mixes_its_letters():
    source = read_source(SAMPLES / "tern-island-fog.toml")
    assert not any(letter.pure for letter in source.letters)
    np.testing.assert_allclose(source.average_state, np.diag([0.9, 0.1]), atol=1e-12)


def test_two_kept_qubits_hold_most_of_the_words_weight():
    eigenvalues = np.linalg.eigvalsh(read_source(SAMPLES / "tern-island-words.toml").average_state)
    assert 0.98 < eigenvalues[-4:].sum() < 0.999


def test_the_script_makes_the_array_file_again_byte_for_byte(tmp_path):
    subprocess.run([sys.executable, SAMPLES / "make_samples.py", tmp_path], check=True)
    made = (tmp_path / "tern-island-words.npy").read_bytes()
    assert made == (SAMPLES / "tern-island-words.npy").read_bytes()
