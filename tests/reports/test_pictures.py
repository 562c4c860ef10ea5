"""The picture of one net: same bytes, its levels and names in it."""

import dataclasses
import subprocess
import sys
from xml.etree import ElementTree as ET

import pytest

from edgeplan.reports import pictures

NAME = r"SDR_CLK$\frac{B$"  # a formula, were it read as one


@pytest.fixture(scope="module")
def record(sample):
    whole = sample.one_net()
    return dataclasses.replace(whole, nets=[dataclasses.replace(whole.nets[0], net=NAME)])


@pytest.fixture(scope="module")
def svg(record):
    return pictures.draw(record, ".svg")


def test_the_same_record_gives_the_same_bytes(svg, record):
    assert pictures.draw(record, ".svg") == svg
    assert b"<dc:date>" not in svg


def test_svg_is_well_formed_and_names_what_it_shows(svg):
    text = " ".join(ET.fromstring(svg).itertext())  # noqa: S314 - our own bytes
    for word in (NAME, "VIH", "limit", "budget", "expected", "cable", "450 MHz", "1.90–2.10"):
        assert word in text


def test_suffix_chooses_the_format_and_nothing_else_is_drawn(record):
    assert pictures.draw(record, ".PNG").startswith(b"\x89PNG")
    with pytest.raises(ValueError, match=r"\.svg or \.png"):
        pictures.draw(record, ".pdf")


@pytest.mark.parametrize("number", [4, 7])
def test_closed_and_unknown_windows_can_be_drawn(number, results):
    only = dataclasses.replace(results, nets=[results.nets[number]])
    assert b"<svg" in pictures.draw(only, ".svg")


def test_matplotlib_is_loaded_only_to_draw():
    code = "import sys; import edgeplan.reports.pictures; print('matplotlib' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, check=True)
    assert done.stdout.split() == [b"False"]


def test_a_net_without_spectrum_says_why_on_an_axis_without_scales(record, sample):
    net = record.nets[0]
    waves = dataclasses.replace(net.pictures, spectra=[])
    checks = [sample.undecided("emission", "smallest edge")]
    net = dataclasses.replace(net, pictures=waves, checks=checks, candidate_now=0)
    text = " ".join(ET.fromstring(drawn(record, net)).itertext())  # noqa: S314 - our own bytes
    assert "emission is undecided: smallest edge" in text
    assert "mathdefault" not in text
    assert "frequency, MHz" not in text


def test_a_spectrum_keeps_its_scales_beside_a_state_without_one(record):
    net = record.nets[0]
    only_after = [s for s in net.pictures.spectra if s.state == "after"]
    pictures_after = dataclasses.replace(net.pictures, spectra=only_after)
    text = " ".join(
        ET.fromstring(drawn(record, dataclasses.replace(net, pictures=pictures_after))).itertext()  # noqa: S314
    )
    assert "frequency, MHz" in text
    assert "450 MHz" in text


def drawn(record, net):
    return pictures.draw(dataclasses.replace(record, nets=[net]), ".svg")
