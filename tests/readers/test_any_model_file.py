"""Whatever stands in a model file: records and remarks, and nothing else comes out."""

from driver_files import REGULAR
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from edgeplan import driver_text
from edgeplan.driver_listing import listing
from edgeplan.readers import ibis

KEYWORDS = [line for line in REGULAR.splitlines() if line.startswith("[")]
WORDS = st.sampled_from(
    ["NA", "0", "1e999", "-3.3", "5p", "1/0", "0/0", "1.2/0.4n", "full", "[", "]", "=", "|", "!",
     "R_load", "R_fixture", "V_fixture", "dV/dt_r", "C_comp", "Model_type", "I/O", "Open_drain",
     "\x00", "\xa0", "\x85", "\x1c", "é", "1e-320", "100", "1e-12n"]
)  # fmt: skip
LINES = st.one_of(
    st.sampled_from(REGULAR.splitlines()),
    st.sampled_from(KEYWORDS),
    st.lists(WORDS, max_size=6).map(" ".join),
)


def assert_it_is_read(content):
    """Read a file, evaluate and render all of it; what is wrong has a line."""
    reading = ibis.read(content, "any.ibs")
    assert all(p.row >= 1 for p in (*reading.errors, *reading.notes))
    part = reading.models.components[0] if reading.models.components else None
    found = listing(reading.models, part, 50.0)
    for render in driver_text.FORMATS.values():
        render(found)
    return reading


@settings(max_examples=150, deadline=None, derandomize=True)
@given(st.binary(max_size=400))
def test_any_bytes_are_read(content):
    assert_it_is_read(content)


@settings(max_examples=150, deadline=None, derandomize=True)
@given(st.lists(LINES, max_size=60), st.sampled_from(["\n", "\r", "\r\n"]))
def test_lines_in_any_order_are_read(lines, end):
    assert_it_is_read(end.join(lines).encode("latin-1"))


@settings(
    max_examples=300, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow]
)
@given(st.data())
def test_a_regular_file_spoilt_in_places_is_read(data):
    lines = REGULAR.splitlines()
    for _ in range(data.draw(st.integers(1, 5))):
        at = data.draw(st.integers(0, len(lines) - 1))
        words = lines[at].split() or [""]
        words[data.draw(st.integers(0, len(words) - 1))] = data.draw(WORDS)
        lines[at] = data.draw(st.sampled_from([" ".join(words), "", lines[at] * 2]))
    assert_it_is_read("\n".join(lines).encode("latin-1"))
