"""One net in full."""

import dataclasses

import pytest

from edgeplan import reports


@pytest.fixture
def text(sample):
    return reports.render(sample.one_net(), "text")


def test_each_input_stands_with_its_provenance(text):
    assert "side distance       centred                     assumed    no value given" in text


def test_both_windows_name_what_sets_their_ends(text):
    assert "fastest acceptable  1.90 ns  emission at 200 MHz" in text
    assert "slowest allowed     2.00 ns  setup" in text


def test_each_candidate_says_why_it_was_rejected(text):
    assert "1 setting                   -0.60  emission 4.0 dB over" in text
    assert "proposed; passes every check" in text


def test_a_candidate_without_a_sentence_names_the_checks_it_fails(sample):
    net = sample.memory_clock()
    dumb = [dataclasses.replace(entry, why_rejected="") for entry in net.candidates]
    record = sample.record("explain", [dataclasses.replace(net, candidates=dumb)])
    assert "fails overshoot" in reports.render(record, "text")


def test_each_mechanism_of_an_emission_level_has_its_error(text):
    """41.3 less 0.6 is 40.7, less and plus 3.4."""
    assert "  cable          40.7   46.2    37.3 to 44.1                87 %" in text
    assert "-7.3 dB ±3.4 dB" in text


def test_each_change_tells_its_level_and_the_line_that_then_binds(text):
    lines = [line.split("  ") for line in text.splitlines()]
    cells = {line[1]: [cell.strip() for cell in line[2:] if cell] for line in lines if line[1:]}
    assert cells["fit 10 Ω at R17 (was a link)"] == [
        "39.9", "-1.4", "over by 5.9", "the same line",
    ]  # fmt: skip
    assert cells["10 dB more on every cable"] == [
        "34.0", "-7.3", "under by < 0.1", "900 MHz (9th), over by 1.4",
    ]  # fmt: skip
    assert cells["setting D1S (bank sdr)"] == ["?", "?", "not known"]
    assert cells["setting D3F, fit 47 Ω at R17"][:2] == ["32.8", "0.0"]


def test_a_note_of_both_states_is_printed_once(sample):
    net = sample.memory_clock(sample.pictures())
    twice = [dataclasses.replace(entry, notes=["once"]) for entry in net.emission_at_line]
    record = sample.record("explain", [dataclasses.replace(net, emission_at_line=twice)])
    assert reports.render(record, "text").splitlines().count("  once") == 1


def test_spectrum_tells_parity_parts_and_excess(text):
    line = next(line for line in text.splitlines() if line.lstrip().startswith("200 MHz"))
    assert " 2 even        37.2    42.2    31.2    36.5    40.0    34.0    +3.2   ====" in line


def test_only_the_worst_lines_of_a_long_spectrum_are_shown(sample):
    record = sample.one_net()
    spectrum = record.nets[0].pictures.spectra[0]
    many = {
        field: getattr(spectrum, field) * 4
        for field in (
            "frequency_hz", "order", "expected_dbuv_per_m", "up_to_dbuv_per_m",
            "trace_dbuv_per_m", "cable_dbuv_per_m", "limit_dbuv_per_m",
        )
    }  # fmt: skip
    pictures = dataclasses.replace(
        record.nets[0].pictures, spectra=[dataclasses.replace(spectrum, **many)]
    )
    net = dataclasses.replace(record.nets[0], pictures=pictures)
    text = reports.render(dataclasses.replace(record, nets=[net]), "text")
    shown = [line for line in text.splitlines() if " odd " in line or " even " in line]
    assert len(shown) == 12


def test_waveform_is_read_between_its_thresholds(sample):
    """A straight line from 0 V to 3.3 V in 3.3 ns passes 0.8 V and 2.0 V 1.2 ns apart."""
    record = sample.one_net()
    ramp = dataclasses.replace(
        record.nets[0].pictures.waveforms[0], time_s=[0.0, 3.3e-9], volt=[0.0, 3.3]
    )
    pictures = dataclasses.replace(record.nets[0].pictures, waveforms=[ramp])
    net = dataclasses.replace(record.nets[0], pictures=pictures)
    text = reports.render(dataclasses.replace(record, nets=[net]), "text")
    line = next(line for line in text.splitlines() if line.startswith("  now    U7.F2"))
    assert line.endswith("1.20 ns")


def test_a_net_without_pictures_is_explained_all_the_same(results):
    text = reports.render(results, "text")
    assert "Spectrum" not in text
    assert "EXP_STB" in text


def test_a_candidate_that_passes_says_why_another_was_taken(sample):
    net = sample.memory_clock()
    more = [
        sample.candidate(4, "D2S", 33, passes=True, share=0.2, new_site=1),
        sample.candidate(5, "D1S", 33, passes=True, share=0.1, setting=1, link_to_value=1),
        sample.candidate(6, "D3F", 22, passes=True, share=0.9, setting=1),
    ]
    record = sample.record(
        "explain", [dataclasses.replace(net, candidates=[*net.candidates, *more])]
    )
    lines = reports.render(record, "text").splitlines()
    outcomes = [line for line in lines if line.lstrip().startswith(("4 ", "5 ", "6 "))]
    assert [line.rpartition("  ")[2] for line in outcomes] == [
        "passes, dearer change",
        "passes, smaller share",
        "passes by itself, not with the other nets",
    ]
