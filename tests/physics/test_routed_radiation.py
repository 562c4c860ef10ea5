"""routed_radiation against dipoles summed by brute force, and against the straight form."""

import numpy as np
import pytest

from edgeplan.physics import network, radiation
from edgeplan.physics.lines import LineConstants, propagation
from edgeplan.physics.routed_radiation import SEARCH_DB, Layout, routed_field_per_volt
from edgeplan.physics.tree_currents import end_states

SPEED = 299_792_458.0
ETA = 4e-7 * np.pi * SPEED
BAND_HZ = np.geomspace(30e6, 3e9, 30)

SHAPES_MM = {
    "straight": [(0, 0), (80, 0)],
    "L": [(0, 0), (60, 0), (60, 45)],
    "Z": [(0, 0), (40, 0), (40, 30), (90, 30)],
    "U": [(0, 0), (70, 0), (70, 6), (0, 6)],
    "slanted": [(10, 5), (30, 40), (80, 55)],
    "serpentine": [(0, 0), (40, 0), (40, 4), (0, 4), (0, 8), (40, 8), (40, 12), (0, 12)],
}
LOADS = {"5 pF": (5e-12, 0.0), "50 ohm": (0.0, 1 / 50), "1 ohm": (0.0, 1.0)}


def routed(points_mm, parent=None, *, farad=0.0, siemens=0.0, delay=6e-9, er=4.3, height=2e-4):
    """One tree through points; the first point is node 0, the load sits at the last."""
    origin, *ends = np.array(points_mm, dtype=float) * 1e-3
    ends, count = np.array(ends), len(ends)
    parent = np.arange(count) - 1 if parent is None else np.array(parent)
    starts = np.array([origin if p < 0 else ends[p] for p in parent])
    last = np.arange(count) == count - 1
    trees = network.Trees(
        segment_offset=np.array([0, count]),
        parent=parent,
        length_m=np.hypot(*(ends - starts).T),
        line=LineConstants(*(np.full(count, v) for v in (50.0, delay, 2.0, 1e-3, 0.01))),
        node_farad=last * farad,
        node_siemens=last * siemens,
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([count - 1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    heights = np.broadcast_to(np.asarray(height, dtype=float), count)
    layout = Layout(origin[None], ends, heights, np.full(count, er), trees.segment_offset)
    return trees, layout


def brute_force(trees, layout, frequency_hz):
    """Largest component of the field of 40 short dipoles a segment on a fine grid of directions.

    Balanis, "Antenna Theory", ch. 4: a short current moment radiates j k eta/(4 pi r) times its
    part across the direction; the plane doubles horizontal moments into a loop of height 2h and
    vertical ones by 2; the layer divides vertical polarisation by er (reciprocity). Currents
    come from the chain matrix, the field by the sum alone: no closed form is shared.
    """
    k = 2 * np.pi * frequency_hz / SPEED
    sine = np.sin(np.radians(np.linspace(0, 90, 46)))[:, None]
    phi = np.radians(np.arange(0, 360, 4))[None, :]
    cosine = np.sqrt(1 - sine**2)
    state = end_states(trees, [2j * np.pi * frequency_hz])
    along, across = np.zeros((2, 46, 90), dtype=complex)
    share = (np.arange(40) + 0.5) / 40
    for i, parent in enumerate(trees.parent):
        start = layout.origin_m[0] if parent < 0 else layout.end_m[parent]
        step, length = layout.end_m[i] - start, trees.length_m[i]
        line = LineConstants(*(field[i] for field in trees.line))
        gamma, z = propagation(2j * np.pi * frequency_hz, line)
        volt, ampere = state.far_volt[0, i, 0], state.far_ampere[0, i, 0]
        back = (1 - share) * length
        current = ampere * np.cosh(gamma * back) + volt / z * np.sinh(gamma * back)
        h, er = layout.height_m[i], layout.permittivity[i]
        places = start + share[:, None] * step
        ends = (
            (state.near_ampere[0, i, 0], start, 1),
            (state.far_ampere[0, i, 0], layout.end_m[i], -1),
        )
        for amp, place in zip(current, places, strict=True):
            turn = np.exp(1j * k * sine * (place[0] * np.cos(phi) + place[1] * np.sin(phi)))
            moment = 1j * k * h * amp * turn / 40
            radial = step[0] * np.cos(phi) + step[1] * np.sin(phi)
            along += moment * radial * (1 - sine**2 / er)
            across += moment * cosine * (step[1] * np.cos(phi) - step[0] * np.sin(phi))
        for amp, place, sign in ends:
            turn = np.exp(1j * k * sine * (place[0] * np.cos(phi) + place[1] * np.sin(phi)))
            along -= sign * sine * h / er * amp * turn
    return k * ETA / (2 * np.pi) * max(np.abs(along).max(), np.abs(across).max())


def level_db(ratio):
    return 20 * np.log10(ratio)


@pytest.mark.parametrize("load", LOADS)
@pytest.mark.parametrize("shape", SHAPES_MM)
def test_the_field_is_that_of_short_dipoles_summed_up(shape, load):
    farad, siemens = LOADS[load]
    net = routed(SHAPES_MM[shape], farad=farad, siemens=siemens)
    frequency_hz = np.array([30e6, 700e6, 2.7e9])
    field = routed_field_per_volt(*net, frequency_hz)[0]
    brute = np.array([brute_force(*net, f) for f in frequency_hz])
    difference_db = level_db(field / brute)
    assert np.all(difference_db > -SEARCH_DB)
    assert np.all(difference_db < 0.15)


def test_a_branching_net_and_another_height_are_summed_too():
    points = [(0, 0), (30, 0), (60, 20), (30, 40), (70, 40)]
    heights = [2e-4, 2e-4, 2e-4, 5e-4]
    net = routed(points, parent=[-1, 0, 0, 2], farad=4e-12, height=heights)
    for frequency_hz in (100e6, 800e6, 2e9):
        field = routed_field_per_volt(*net, [frequency_hz])[0, 0]
        assert -SEARCH_DB < level_db(field / brute_force(*net, frequency_hz)) < 0.15


@pytest.mark.parametrize("load", LOADS)
@pytest.mark.parametrize("er", [1.0, 4.3])
def test_a_straight_segment_in_any_direction_is_the_straight_form(er, load):
    farad, siemens = LOADS[load]
    delay = 1 / SPEED if er == 1 else 6e-9
    for turn in (0.0, 0.3, 1.4):
        points = [(0, 0), (90 * np.cos(turn), 90 * np.sin(turn))]
        trees, layout = routed(points, farad=farad, siemens=siemens, delay=delay, er=er)
        s = 2j * np.pi * BAND_HZ
        line = LineConstants(*(field[:, None] for field in trees.line))
        gamma, z = propagation(s, line)
        load_siemens = s * farad + siemens
        reflection = (1 / z - load_siemens) / (1 / z + load_siemens)
        forward = (1 / z + end_states(trees, s).near_ampere[:, 0]) / 2
        straight = np.abs(forward) * radiation.trace_field_per_ampere(
            BAND_HZ, 0.09, 2e-4, er, gamma, reflection
        )
        field = routed_field_per_volt(trees, layout, BAND_HZ)
        difference_db = level_db(field / straight)
        # each search may be low, the straight one by 0.13 dB
        assert np.all(difference_db > -SEARCH_DB)
        assert np.all(difference_db < 0.14)


def test_cutting_a_segment_in_pieces_changes_nothing():
    whole = routed([(0, 0), (80, 0)], farad=5e-12)
    cut = routed([(0, 0), (13, 0), (50, 0), (80, 0)], farad=5e-12)
    field = routed_field_per_volt(*cut, BAND_HZ)
    np.testing.assert_allclose(field, routed_field_per_volt(*whole, BAND_HZ), rtol=1e-6)


def test_place_and_mirror_image_of_a_net_change_nothing():
    points = np.array(SHAPES_MM["Z"])
    net = routed(points, farad=5e-12)
    for other in (points + np.array([200, -90]), points * (1, -1), points[:, ::-1]):
        moved = routed_field_per_volt(*routed(other, farad=5e-12), BAND_HZ)
        difference_db = level_db(moved / routed_field_per_volt(*net, BAND_HZ))
        assert np.all(np.abs(difference_db) < 0.05)


def test_a_higher_plane_distance_radiates_in_proportion():
    low, high = (routed(SHAPES_MM["U"], siemens=0.02, height=h) for h in (1e-4, 3e-4))
    np.testing.assert_allclose(
        routed_field_per_volt(*high, BAND_HZ), 3 * routed_field_per_volt(*low, BAND_HZ)
    )


def test_short_of_a_wave_a_longer_trace_radiates_more():
    frequency_hz = np.array([30e6, 100e6])
    fields = [
        routed_field_per_volt(*routed([(0, 0), (a, 0), (a, a)], farad=5e-12), frequency_hz)
        for a in (5, 10, 20, 40)
    ]
    assert np.all(np.diff(np.concatenate(fields), axis=0) > 0)


def test_a_serpentine_hides_from_its_straight_equivalent_at_high_frequency():
    # the design's trap: straightening is no bound, up to 17 dB low on a serpentine
    drawn_out = [(0, 0), (7 * 40, 0)]
    straight = routed_field_per_volt(*routed(drawn_out, siemens=0.02), BAND_HZ)
    bent = routed_field_per_volt(*routed(SHAPES_MM["serpentine"], siemens=0.02), BAND_HZ)
    excess_db = level_db(bent / straight)
    assert np.all(excess_db[0, BAND_HZ < 100e6] < 0)
    assert excess_db.max() > 2


def test_segments_between_planes_radiate_nothing_but_their_ends_do():
    points = [(0, 0), (3, 0), (60, 0), (63, 0)]
    open_net = routed(points, farad=5e-12)
    hidden = routed(points, farad=5e-12, height=[2e-4, 0.0, 2e-4])
    nothing = routed(points, farad=5e-12, height=0.0)
    field = routed_field_per_volt(*hidden, BAND_HZ)
    assert np.all(field < routed_field_per_volt(*open_net, BAND_HZ))
    assert np.all(field > 0)
    np.testing.assert_array_equal(routed_field_per_volt(*nothing, BAND_HZ), 0.0)


def test_nets_of_several_shapes_keep_their_rows_and_an_unknown_one_stays_alone():
    nets = [
        routed(SHAPES_MM["L"], farad=5e-12),
        routed(SHAPES_MM["straight"], farad=5e-12, height=np.nan),
        routed(SHAPES_MM["Z"], siemens=0.02),
    ]
    lines = zip(*(trees.line for trees, _ in nets), strict=True)
    counts = [len(trees.parent) for trees, _ in nets]
    offset = np.concatenate([[0], np.cumsum(counts)])
    flat = {
        name: np.concatenate([getattr(trees, name) for trees, _ in nets])
        for name in ("parent", "length_m", "node_farad", "node_siemens", "receiver_segment")
    }
    trees = network.Trees(
        segment_offset=offset,
        line=LineConstants(*(np.concatenate(parts) for parts in lines)),
        receiver_offset=np.arange(4),
        stub_length_m=np.zeros(3),
        stub_line=LineConstants(*np.ones((5, 3))),
        **flat,
    )
    parts = zip(*(layout[:4] for _, layout in nets), strict=True)
    layout = Layout(*(np.concatenate(part) for part in parts), offset)
    frequency_hz = np.array([[30e6, 90e6], [50e6, 250e6], [125e6, 1e9]])
    field = routed_field_per_volt(trees, layout, frequency_hz)
    assert np.all(np.isnan(field[1]))
    for row in (0, 2):
        alone = routed_field_per_volt(*nets[row], frequency_hz[row])
        np.testing.assert_allclose(field[row], alone[0])
