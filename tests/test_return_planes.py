"""Findings about return planes: where, within what distance to join them, and what they change."""

import json
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from build import board, net, nets_of, segment

from edgeplan import plan
from edgeplan.reports import render
from edgeplan.return_planes import plane_findings

STARTER = Path(__file__).parents[1] / "examples" / "starter"
LAMINATE = {"kind": "dielectric", "thickness_m": 0.2e-3, "permittivity": 4.2}
CORE = {"kind": "dielectric", "thickness_m": 0.8e-3, "permittivity": 4.4}
PLANE = {"kind": "plane", "thickness_m": 18e-6}
SIGNAL = {"kind": "signal", "thickness_m": 18e-6}
# L1 over L2, L3 between L2 and L4, L5 under L4
STACK = [
    SIGNAL | {"layer": "L1"},
    LAMINATE | {"layer": "D1"},
    PLANE | {"layer": "L2"},
    LAMINATE | {"layer": "D2"},
    SIGNAL | {"layer": "L3"},
    LAMINATE | {"layer": "D3"},
    PLANE | {"layer": "L4"},
    CORE | {"layer": "D4"},
    PLANE | {"layer": "L5"},
    LAMINATE | {"layer": "D5"},
    SIGNAL | {"layer": "L6"},
]


def findings(*routes, highest_hz=1e9, **changes):
    made = board(net(length_m=0.06, **changes), stack=STACK, routes=routes)
    return plane_findings(made, nets_of(made).facts[0], highest_hz)


def test_a_changed_return_plane_is_told_with_its_place_and_the_distance_of_a_joint():
    """lambda/20 at 1 GHz in er 4.4: 299.8 mm/2.098/20 = 7.1 mm."""
    first = segment("U1.1", "via", 0.03, start_m=(0.01, 0.04), end_m=(0.04, 0.04))
    last = segment("via", "U2.1", 0.03, layer="L6", start_m=(0.04, 0.04), end_m=(0.07, 0.04))
    (found,) = findings(first, last)
    assert found.rule == "return-plane-changes"
    assert "from plane L2 to L5 at via (40, 40) mm, 30 mm from the driver" in found.text
    assert "within 7.1 mm" in found.text
    assert "not judged and not zero" in found.text
    (higher,) = findings(first, last, highest_hz=2e9)
    assert "within 3.6 mm" in higher.text


def test_without_positions_the_place_is_a_name_and_a_distance():
    (found,) = findings(segment("U1.1", "via", 0.02), segment("via", "U2.1", 0.04, layer="L6"))
    assert "to L5 at via, 20 mm from the driver" in found.text
    lengths = (("L1", 0.025, None), ("L6", 0.035, None))
    (listed,) = findings(layer_lengths_m=lengths, layer=None)
    assert "to L5 about 25 mm from the driver" in listed.text


def test_lines_that_share_a_plane_change_nothing():
    assert findings(segment("U1.1", "via", 0.02), segment("via", "U2.1", 0.04, layer="L3")) == []


def test_every_piece_is_held_against_the_one_it_hangs_on_not_the_row_before():
    """The first branch changes down and back; the second one stays on L1."""
    rows = [
        segment("U1.1", "tee", 0.02),
        segment("tee", "via", 0.01),
        segment("via", "U2.1", 0.01, layer="L6"),
        segment("tee", "U3.1", 0.02),
    ]
    both = {"receiver": ("in", "in"), "receiver_pin": ("U2.1", "U3.1")}
    (found,) = findings(*rows, **both)
    assert "at via, 30 mm from the driver" in found.text


def test_a_change_at_the_resistor_is_seen():
    rows = [segment("U1.1", "site", 0.005), segment("site", "U2.1", 0.05, layer="L6")]
    (found,) = findings(*rows, site="fitted", resistor_ohm=33.0)
    assert "at the resistor, 5 mm from the driver" in found.text


@pytest.mark.parametrize(
    ("y_m", "count"),
    [
        (0.04, 0),  # the middle of planes 80 mm wide
        (0.0006, 0),  # 0.6 mm less 0.09 mm of strip is more than a quarter of 0.418 mm
        (0.0001, 1),
    ],
)
def test_a_piece_between_planes_nearer_to_a_side_than_the_fit_is_told(y_m, count):
    row = segment("U1.1", "U2.1", 0.04, layer="L3", start_m=(0.02, y_m), end_m=(0.06, y_m))
    found = findings(row)
    assert [f.rule for f in found] == ["inner-layer-out-of-range"] * count
    assert all("of planes 80 mm wide" in f.text for f in found)


@pytest.mark.parametrize(
    ("strip_m", "y_m", "count"),
    [
        (0.0200e-3, 0.6e-3, 1),  # planes 0.418 mm apart: 0.05 of that is 0.0209 mm
        (0.0215e-3, 0.6e-3, 0),
        (0.82e-3, 0.6e-3, 0),  # 2 of that are 0.836 mm
        (0.85e-3, 0.6e-3, 1),
        (0.85e-3, 2e-3, 0),  # more than three spacings inside
        (0.18e-3, 0.2e-3, 0),  # 0.2 mm less half the strip is more than a quarter, 0.1045 mm
        (0.20e-3, 0.2e-3, 1),
    ],
)
def test_a_strip_between_planes_is_held_against_the_widths_checked(strip_m, y_m, count):
    ends = {"start_m": (0.02, y_m), "end_m": (0.06, y_m)}
    found = findings(segment("U1.1", "U2.1", 0.04, layer="L3", width_m=strip_m, **ends))
    assert [f.rule for f in found] == ["inner-layer-out-of-range"] * count
    assert all(f.text.startswith(f"runs {strip_m * 1e3:.3g} mm wide between") for f in found)


def test_an_inner_net_without_positions_counts_by_its_stated_distance():
    assert len(findings(layer="L3", side_distance_m=0.05e-3)) == 1
    assert findings(layer="L3", side_distance_m=5e-3) == []
    assert findings(layer="L3") == []


@pytest.fixture
def changing(tmp_path):
    """The starter board with a net that changes from L1 to L4, whose planes have none in common."""
    folder = tmp_path / "board"
    shutil.copytree(STARTER, folder)
    rows = "net,from,to,length_mm,layer\nLAMP_EN,U1.21,via,20,L1\nLAMP_EN,via,U2.9,27,L4\n"
    (folder / "routes.csv").write_text(rows, encoding="utf-8")
    return folder


def test_the_finding_is_listed_and_counted_in_every_report_and_leaves_verdict_and_exit(changing):
    before, after = plan.plan(STARTER), plan.plan(changing)
    own = [f for f in after.findings if f.rule == "return-plane-changes"]
    assert [f.net for f in own] == ["LAMP_EN"]
    (net_after,) = [n for n in after.nets if n.net == "LAMP_EN"]
    assert net_after.verdict_after == "inside"
    assert any("not judged and not zero" in note for note in net_after.notes)
    for form in ("table", "markdown"):
        text = " ".join(render(after, form).split())
        assert "1 finding without a level; the exit code does not count them" in text
        assert "LAMP_EN: its return changes from plane L2 to L3 at via, 20 mm from" in (
            text.replace("&#95;", "_")
        )
        assert "without a level" not in " ".join(render(before, form).split())
    record = json.loads(render(after, "json"))
    (listed,) = [f for f in record["findings"] if f["rule"] == "return-plane-changes"]
    assert len(listed["fingerprint"]) == 16
    codes = [
        subprocess.run(
            [sys.executable, "-m", "edgeplan", "plan", str(folder), "-q"],
            capture_output=True,
            check=False,
        ).returncode
        for folder in (STARTER, changing)
    ]
    assert codes[0] == codes[1] == 0
