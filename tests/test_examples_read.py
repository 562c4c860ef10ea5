"""The demo board: what a reviewer would look up in it, held against its own tables."""

from collections import Counter
from math import hypot
from pathlib import Path

import pytest

from edgeplan.readers import read_board

EXAMPLES = Path(__file__).parents[1] / "examples"


@pytest.fixture(scope="module")
def board():
    return read_board(EXAMPLES / "saltmarsh")


@pytest.fixture(scope="module")
def nets(board):
    return {net.net: net for net in board.nets}


def test_the_demo_has_40_driven_nets_and_two_open_drain_ones(board):
    classes = {interface.name: interface.timing for interface in board.file.interface}
    kinds = Counter(classes[net.interface] == "open-drain" for net in board.nets)
    assert kinds == {False: 40, True: 2}


def test_the_demo_uses_every_timing_class(board):
    used = {net.interface for net in board.nets}
    assert {i.timing for i in board.file.interface if i.name in used} == {
        "common-clock",
        "source-synchronous",
        "clock",
        "strobe",
        "asynchronous",
        "open-drain",
    }


def test_every_net_names_an_interface_a_driver_and_a_receiver(board):
    for net in board.nets:
        assert net.interface
        assert net.driver
        assert net.receiver
        assert net.length_m
        assert net.side_distance_m


def test_units_of_the_demo_are_si(nets, board):
    assert nets["SDR_CLK"].length_m == 0.031
    assert nets["SDR_CLK"].clock_hz == 100e6
    assert nets["UART_TX"].data_bps == 921e3
    assert nets["RESET_N"].data_bps == pytest.approx(10)
    assert nets["I2C_SCL"].pull_up_ohm == 4700
    assert nets["I2C_SCL"].bus_capacitance_f == pytest.approx(180e-12)
    assert board.file.board.size_m == (0.096, 0.072)


def test_nets_near_a_side_are_three_millimetres_from_it(nets):
    near = {name for name, net in nets.items() if net.side_distance_m == pytest.approx(3e-3)}
    assert near == {"SD_CLK", "SD_CMD", "SD_D0", "CAM_PCLK", "EXP_CLK"}


def test_the_camera_states_no_fastest_edge(board):
    (camera,) = [driver for driver in board.file.driver if driver.name == "cm1"]
    assert camera.settings[0].edge_s.min is None
    assert camera.settings[0].edge_s.max == 1.5e-9


def test_the_two_bent_clocks_have_routes_as_long_as_their_nets(board, nets):
    assert {segment.net for segment in board.routes} == {"CAM_PCLK", "EXP_CLK"}
    for name in ("CAM_PCLK", "EXP_CLK"):
        pieces = [segment for segment in board.routes if segment.net == name]
        assert sum(piece.length_m for piece in pieces) == pytest.approx(nets[name].length_m)


def test_the_pieces_of_a_route_meet_and_stay_on_the_board(board):
    width_m, height_m = board.file.board.size_m
    for segment in board.routes:
        (x1, y1), (x2, y2) = segment.start_m, segment.end_m
        assert hypot(x2 - x1, y2 - y1) == pytest.approx(segment.length_m, abs=1e-6)
        assert min(x1, x2, y1, y2) >= 0
        assert max(x1, x2) <= width_m
        assert max(y1, y2) <= height_m
    for before, after in zip(board.routes, board.routes[1:], strict=False):
        if before.net == after.net:
            assert before.end_m == after.start_m


def test_members_of_an_array_share_one_value(board):
    values = {}
    for net in board.nets:
        if net.array:
            values.setdefault(net.array, set()).add(net.resistor_ohm)
    assert {array: len(found) for array, found in values.items()} == {"RN1": 1, "RN2": 1, "RN3": 1}


def test_nothing_of_the_demo_is_left_unexplained(board):
    assert board.notes == ()
    assert [file.path for file in board.inputs] == ["board.toml", "nets.csv", "routes.csv"]
