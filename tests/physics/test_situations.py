"""Situations read together against each of them read by itself."""

import numpy as np
import pytest

from edgeplan.physics.network import point_to_point
from edgeplan.physics.situations import Situation, joined_trees, read_together
from edgeplan.physics.sources import drive_of
from edgeplan.physics.waveform_readings import Readings, levels_of
from edgeplan.physics.waveforms import read


def situation(seed, nets, candidates=5):
    """Random lines with stubs, and their candidates."""
    rng = np.random.default_rng(seed)
    trees = point_to_point(
        rng.uniform(0.02, 0.2, nets),
        receiver_farad=rng.uniform(1e-12, 8e-12, nets),
        stub_length_m=rng.choice([0.0, 4e-3], nets),
    )
    drive = drive_of(
        rng.uniform(10, 60, (nets, candidates)),
        ramp_s=rng.uniform(0.3e-9, 3e-9, (nets, candidates)),
        series_ohm=rng.uniform(0, 68, (nets, candidates)),
        pad_farad=rng.uniform(0, 5e-12, (nets, candidates)),
    )
    levels = levels_of(rng.uniform(0.2, 0.4, nets), rng.uniform(0.6, 0.8, nets), nets)
    return Situation(trees, drive, levels, rng.uniform(2e-9, 2e-8, nets))


def test_each_situation_reads_as_it_does_by_itself():
    # single precision of the spectra: a millionth of the swing moves a crossing by femtoseconds
    situations = [situation(seed, nets) for seed, nets in ((1, 12), (2, 7), (3, 20))]
    for own, found in zip(situations, read_together(situations), strict=True):
        alone = read(*own)
        assert found.half_s.shape == own.drive.exists.shape
        same = alone.guarded == found.guarded
        assert same.mean() > 0.98
        for name in set(Readings.__slots__) - {"guarded"}:
            tolerance = 1e-13 if name.endswith("_s") and name != "slope_min_per_s" else 1e-4
            ours, theirs = getattr(found, name)[same], getattr(alone, name)[same]
            assert ours == pytest.approx(theirs, abs=tolerance, rel=1e-3, nan_ok=True), name


def test_joined_trees_keep_the_count_and_the_parts_of_each():
    parts = [situation(seed, nets).trees for seed, nets in ((4, 3), (5, 1), (6, 2))]
    whole = joined_trees(parts)
    assert len(whole) == 6
    assert whole.take([3]).length_m.tolist() == parts[1].length_m.tolist()
    assert whole.take([4, 5]).stub_length_m.tolist() == parts[2].stub_length_m.tolist()
