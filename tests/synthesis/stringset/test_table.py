import numpy as np
import pytest

from encoder_forge.errors import MachineError
from encoder_forge.synthesis.stringset import table as table_module
from encoder_forge.synthesis.stringset.masks import MAX_WIRES, subcube
from encoder_forge.synthesis.stringset.table import (
    TABLE_FILE,
    ClassTable,
    class_table,
    read_table,
    write_tables,
)
from encoder_forge.synthesis.stringset.tabulate import main, tabulate

from .by_hand import controlled_x, images, least_costs, mask, orbit_counts

SIZES = [(wires, kept) for wires in range(1, MAX_WIRES + 1) for kept in range(wires + 1)]


def wrong_costs(table, forms):
    """Classes whose cost is not what Dijkstra's equation says; none anywhere proves every cost.

    With positive weights the equation cost(S) = min over moves of cost(image) + weight, and 0 for the
    subcube alone, has one solution: the shortest distances.
    """
    claimed = table.costs_of(forms).astype(int)
    through_moves = np.min(
        [
            table.costs_of(images(forms, moved)).astype(int) + weight
            for weight, moved in controlled_x(table.wires)
        ],
        axis=0,
        initial=99,
    )
    right = np.where(forms == subcube(table.kept), 0, through_moves)
    return forms[claimed != right]


@pytest.mark.parametrize("wires", range(1, MAX_WIRES + 1))
def test_table_holds_every_class(wires):
    counts = orbit_counts(wires)
    for kept in range(wires + 1):
        table = class_table(wires, kept)
        assert len(table.forms) == counts[1 << kept]
        assert (np.diff(table.forms.astype(np.int64)) > 0).all()
        assert all(int(form).bit_count() == 1 << kept for form in table.forms[:5000])


@pytest.mark.parametrize(("wires", "kept"), [size for size in SIZES if size != (5, 4)])
def test_every_cost_meets_dijkstras_equation(wires, kept):
    table = class_table(wires, kept)
    assert wrong_costs(table, table.forms).tolist() == []


def test_costs_of_five_to_four_meet_dijkstras_equation_on_a_sample():
    table = class_table(5, 4)
    picked = np.random.default_rng(0).choice(len(table.forms), size=3000, replace=False)
    few = np.flatnonzero((table.costs <= 10) | (table.costs >= 18))
    assert wrong_costs(table, table.forms[np.union1d(picked, few)]).tolist() == []


@pytest.mark.nightly
def test_every_cost_of_five_to_four_meets_dijkstras_equation():
    table = class_table(5, 4)
    for start in range(0, len(table.forms), 8192):
        assert wrong_costs(table, table.forms[start : start + 8192]).tolist() == []


@pytest.mark.parametrize("change", [-1, 1])
def test_one_corrupted_cost_is_noticed(change):
    table = class_table(5, 3)
    costs = table.costs.astype(int)
    costs[1234] += change
    corrupted = ClassTable(5, 3, table.forms, costs.astype(np.uint8))
    assert 1234 in np.searchsorted(table.forms, wrong_costs(corrupted, table.forms))


def test_a_table_lacking_a_class_is_noticed():
    table = class_table(4, 3)
    shortened = ClassTable(4, 3, np.delete(table.forms, 7), np.delete(table.costs, 7))
    with pytest.raises(KeyError, match="8 strings of 4 wires"):
        shortened.costs_of(table.forms)


@pytest.mark.parametrize("kept", [0, 1, 2, 3])
def test_costs_match_a_plain_search_over_single_sets(kept):
    plain = least_costs(3, kept)
    masks = np.array([mask(strings) for strings in plain], dtype=np.uint32)
    assert class_table(3, kept).costs_of(masks).tolist() == list(plain.values())


@pytest.mark.parametrize(("wires", "kept"), [size for size in SIZES if size != (5, 4)])
def test_tabulate_finds_the_shipped_table(wires, kept):
    found, shipped = tabulate(wires, kept), class_table(wires, kept)
    assert np.array_equal(found.forms, shipped.forms)
    assert np.array_equal(found.costs, shipped.costs)


@pytest.mark.nightly
def test_tabulate_regenerates_the_shipped_file_bit_for_bit(tmp_path, capsys):
    assert main([str(tmp_path / "again.npz")]) == 0
    assert (tmp_path / "again.npz").read_bytes() == TABLE_FILE.read_bytes()
    assert "169112 classes" in capsys.readouterr().out


def test_shipped_file_is_small():
    assert TABLE_FILE.stat().st_size < 600_000


def test_written_tables_are_read_back_and_reproducible(tmp_path):
    tables = [class_table(4, kept) for kept in range(5)]
    write_tables(tmp_path / "one.npz", tables)
    write_tables(tmp_path / "two.npz", tables)
    assert (tmp_path / "one.npz").read_bytes() == (tmp_path / "two.npz").read_bytes()
    again = read_table(tmp_path / "one.npz", 4, 3)
    assert np.array_equal(again.forms, tables[3].forms)
    assert np.array_equal(again.costs, tables[3].costs)


@pytest.mark.parametrize("damage", ["missing", "empty", "truncated", "flipped", "text", "other size"])
def test_damaged_file_is_refused_with_the_remedy(tmp_path, monkeypatch, damage):
    path = tmp_path / "minima.npz"
    write_tables(path, [class_table(4, 3)] if damage != "other size" else [class_table(3, 2)])
    content = bytearray(path.read_bytes())
    if damage == "missing":
        path.unlink()
    elif damage == "empty":
        path.write_bytes(b"")
    elif damage == "truncated":
        path.write_bytes(content[: len(content) // 2])
    elif damage == "text":
        path.write_text("not a table")
    elif damage == "flipped":
        content[len(content) // 4] ^= 0x55
        path.write_bytes(content)
    with pytest.raises(MachineError, match="tabulate"):
        read_table(path, 4, 3)
    monkeypatch.setattr(table_module, "TABLE_FILE", path)
    class_table.cache_clear()
    try:
        with pytest.raises(MachineError, match=r"minima\.npz"):
            class_table(4, 3)
    finally:
        class_table.cache_clear()
