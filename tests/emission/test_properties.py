"""What holds for every net: more attenuation, less height and less length never radiate more."""

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from edgeplan.emission import cable, trace
from edgeplan.emission.mechanism import Cable, RadiationInputs
from edgeplan.physics import imbalance

SPEED = 299_792_458.0
BAND_HZ = np.geomspace(30e6, 1e9, 20)


@st.composite
def nets(draw):
    """One straight net, short or long, low or high, loaded or not, anywhere across its board."""
    one = np.ones((1, 1))
    board_m, width_m = draw(st.floats(0.04, 0.3)), draw(st.floats(0.04, 0.2))
    effective = draw(st.floats(1.5, 4.0))
    load = 1j * 2 * np.pi * BAND_HZ * draw(st.floats(0, 20e-12)) + draw(st.floats(0, 0.1))
    own = 1 / draw(st.floats(30, 90))
    return RadiationInputs(
        length_m=draw(st.floats(1e-3, 0.2)) * one,
        height_m=draw(st.floats(0.05e-3, 0.5e-3)) * one,
        permittivity=(effective + draw(st.floats(0.1, 1.5))) * one,
        permittivity_effective=effective * one,
        impedance_ohm=one / own,
        side_offset_m=draw(st.floats(0, 0.45)) * width_m * one,
        board_length_m=board_m * one,
        board_width_m=width_m * one,
        load_reflection=((own - load) / (own + load))[None],
        propagation_per_m=(2j * np.pi * BAND_HZ / SPEED * np.sqrt(effective))[None],
        cables=(Cable(length_m=draw(st.floats(0.2, 10))),) * draw(st.integers(1, 3)),
    )


def both(net):
    return [part.field_per_forward_ampere(net, BAND_HZ) for part in (trace, cable)]


@settings(deadline=None, derandomize=True)
@given(nets(), st.floats(0, 40))
def test_attenuation_on_all_cables_takes_their_part_db_for_db_and_the_traces_not_at_all(net, more):
    filtered = tuple(dataclasses.replace(c, attenuation_db=more) for c in net.cables)
    (trace_1, cable_1), (trace_2, cable_2) = (
        both(net),
        both(dataclasses.replace(net, cables=filtered)),
    )
    np.testing.assert_allclose(cable_2, cable_1 * 10 ** (-more / 20), rtol=1e-9)
    np.testing.assert_array_equal(trace_1, trace_2)


@settings(deadline=None, derandomize=True)
@given(nets())
def test_without_cables_the_trace_is_left_as_it_was(net):
    trace_1, cable_2 = both(net)[0], both(dataclasses.replace(net, cables=()))[1]
    np.testing.assert_array_equal(trace_1, both(dataclasses.replace(net, cables=()))[0])
    np.testing.assert_array_equal(cable_2, 0.0)


@settings(deadline=None, derandomize=True)
@given(nets(), st.floats(1, 3))
def test_with_its_impedance_held_a_line_farther_from_its_plane_never_radiates_less(net, factor):
    """The trace's loop grows with the height; the share that unbalances the plane does too."""
    higher = dataclasses.replace(net, height_m=net.height_m * factor)
    (trace_1, cable_1), (trace_2, cable_2) = both(net), both(higher)
    np.testing.assert_allclose(trace_2, trace_1 * factor, rtol=1e-9)
    assert np.all(cable_2 >= cable_1 * (1 - 1e-9))


@settings(deadline=None, derandomize=True)
@given(nets(), st.floats(1, 3))
def test_far_below_its_first_resonance_a_longer_trace_into_a_low_impedance_never_radiates_less(
    net, factor
):
    """Only there: a longer line may have a null or a weaker current at some frequency."""
    k = 2 * np.pi * BAND_HZ[0] / SPEED
    short = dataclasses.replace(
        net, length_m=np.full((1, 1), 0.02 / k), load_reflection=np.full((1, BAND_HZ.size), -1.0)
    )
    longer = dataclasses.replace(short, length_m=short.length_m * factor)
    for one, other in zip(both(short), both(longer), strict=True):
        assert other[0, 0] >= one[0, 0] * (1 - 1e-9)


@pytest.mark.parametrize("free_m", [0.05, 0.2])
def test_a_short_free_cable_beside_a_long_filtered_one_counts_by_its_own_length(free_m):
    """The long one is filtered by 80 dB: what is left is the free one's own roll-off."""
    net = _plain()
    pair = (Cable(length_m=2.0, attenuation_db=80.0), Cable(length_m=free_m, floating=True))
    laid = (pair[0], Cable(length_m=free_m))
    levels = [both(dataclasses.replace(net, cables=c))[1] for c in (pair, laid)]
    ratio = imbalance.impedance_ratio(0.15, 0.1)
    own = imbalance.floating_antenna_factor(BAND_HZ, free_m, 0.15, ratio)
    expected = own / imbalance.antenna_factor(BAND_HZ, free_m)
    np.testing.assert_allclose(levels[0] / levels[1], expected[None], rtol=1e-9)
    assert levels[0][0, 0] < 0.1 * levels[1][0, 0]


def test_the_long_one_counts_in_full_beside_the_free_one():
    long, free = Cable(length_m=2.0), Cable(length_m=0.1, floating=True)
    net = _plain()
    with_free = both(dataclasses.replace(net, cables=(long, free)))[1]
    alone = both(dataclasses.replace(net, cables=(long, long)))[1]
    np.testing.assert_allclose(with_free, alone)


def _plain():
    """A net of 50 ohm, 0.2 mm over a board of 150 x 100 mm, open at its end."""
    one = np.ones((1, 1))
    return RadiationInputs(
        length_m=0.1 * one,
        height_m=0.2e-3 * one,
        permittivity=4.3 * one,
        permittivity_effective=3.2 * one,
        impedance_ohm=50 * one,
        side_offset_m=0 * one,
        board_length_m=0.15 * one,
        board_width_m=0.1 * one,
        load_reflection=np.ones((1, BAND_HZ.size)),
        propagation_per_m=(2j * np.pi * BAND_HZ / SPEED * np.sqrt(3.2))[None],
    )
