"""Names: order, wildcards, suggestions."""

from edgeplan.names import instead, matches, natural_key, nearest


def test_numbers_in_names_sort_by_value():
    names = ["D10", "D2", "A", "D1_N", "D1", "1A", "D02"]
    assert sorted(names, key=natural_key) == ["1A", "A", "D1", "D1_N", "D02", "D2", "D10"]


def test_brackets_of_a_bus_are_plain_letters_in_a_pattern():
    assert matches("D[*]", "D[3]")
    assert not matches("D[3]", "D3")


def test_a_pattern_fits_the_whole_name_and_its_case():
    assert matches("SDR_DQ?", "SDR_DQ9")
    assert not matches("SDR_DQ?", "SDR_DQ10")
    assert not matches("sdr_*", "SDR_CLK")


def test_the_nearest_name_is_the_one_equal_but_for_case():
    assert nearest("d4f", ["D4E", "D4F"]) == "D4F"
    assert nearest("quite else", ["D4E", "D4F"]) is None


def test_a_long_list_of_names_is_cut():
    hint = instead("zzz", [f"net{number}" for number in range(40)])
    assert hint.startswith("known here: net0, net1, net2")
    assert hint.endswith("and 28 more")
