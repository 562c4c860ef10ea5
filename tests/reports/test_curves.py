"""Spectra in letters: which lines are listed."""

import dataclasses

from edgeplan.reports import curves


def listed(sample, expected):
    net = sample.one_net().nets[0]
    spectrum = net.pictures.spectra[0]
    levels = [expected.get(order, -60.0) for order in spectrum.order]
    spectrum = dataclasses.replace(spectrum, expected_dbuv_per_m=levels)
    pictures = dataclasses.replace(net.pictures, spectra=[spectrum])
    return list(curves.spectra(dataclasses.replace(net, pictures=pictures), 6.0, 12))


def test_absent_even_harmonics_are_left_out(sample):
    lines = listed(sample, {1: 30.0, 3: 25.0})  # limits are 40 and 47 dBuV/m
    assert lines[1].endswith("the 2 worst lines")
    assert not any(" even " in line for line in lines)


def test_a_spectrum_far_below_its_limit_says_so(sample):
    lines = listed(sample, {})
    assert lines[1].endswith("no line within 60 dB of its limit")
