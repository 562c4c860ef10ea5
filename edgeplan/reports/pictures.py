"""The picture of one net: waveforms, spectrum and windows, as SVG or PNG."""

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from edgeplan.reports import phrases
from edgeplan.results import NetResult, Pictures, Results, Spectrum, Trace, Window

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SUFFIXES = (".svg", ".png")
_DEPTH_DB = 40.0  # how far below the budget the level axis goes at most

# One style of our own. Corners differ in lightness and in dashes, mechanisms in their markers,
# so the picture reads the same in print and without colour vision.
_CORNERS: dict[str, dict[str, Any]] = {
    "fast": {"color": "#10243e", "linestyle": "-", "linewidth": 1.6},
    "typical": {"color": "#4f7f8f", "linestyle": (0, (5, 2)), "linewidth": 1.3},
    "slow": {"color": "#c08a3e", "linestyle": (0, (1, 1.4)), "linewidth": 1.8},
}
_EXPECTED, _UP_TO = "#10243e", "#9aa5b1"
_LIMIT, _GRID = "#7a1f3d", "#d9dde2"
_STYLE: Any = {
    "font.family": "DejaVu Sans",
    "font.size": 8.5,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "axes.titlesize": 9.5,
    "axes.titlelocation": "left",
    "grid.color": _GRID,
    "grid.linewidth": 0.6,
    "legend.framealpha": 0.9,
    "legend.edgecolor": "none",
    "legend.fontsize": 7.5,
    "svg.fonttype": "none",
    "svg.hashsalt": "edgeplan",  # the same picture has the same bytes
    "text.parse_math": False,  # a dollar sign in a net name is a dollar sign
}


def draw(results: Results, suffix: str) -> bytes:
    """Draw the first net of a record.

    Parameters
    ----------
    results : Results
        The record of ``explain``.
    suffix : str
        ``.svg`` or ``.png``.

    Returns
    -------
    bytes
        The whole file; the same record gives the same bytes.

    Raises
    ------
    ValueError
        If the suffix is another one or the record has no picture.
    """
    import io
    import warnings

    from matplotlib import rc_context

    if suffix.lower() not in SUFFIXES:
        raise ValueError(f"a picture is {' or '.join(SUFFIXES)}, not {suffix!r}")
    net = results.nets[0]
    file = io.BytesIO()
    with rc_context(_STYLE), warnings.catch_warnings():
        warnings.filterwarnings("ignore", "Glyph .* missing")  # names in scripts the font lacks
        figure = _figure(net, results.emission_target.margin_db)
        metadata = {"Date": None} if suffix.lower() == ".svg" else {"Software": None}
        figure.savefig(file, format=suffix.lower()[1:], dpi=150, metadata=metadata)
    return file.getvalue()


def _figure(net: NetResult, margin_db: float) -> "Figure":
    """Lay out waveforms above spectra above windows."""
    from matplotlib.figure import Figure

    pictures = net.pictures or Pictures()
    states = _states(net, pictures)
    figure = Figure(figsize=(5.2 * len(states) + 0.6, 8.4), layout="constrained")
    grid = figure.add_gridspec(3, len(states), height_ratios=(3, 3, 1.1))
    figure.suptitle(_title(net, states), x=0.01, ha="left", weight="bold", fontsize=10)
    shared: dict[str, Any] = {"sharey": None}
    lower: dict[str, Any] = {"sharey": None}
    for column, state in enumerate(states):
        shared["sharey"] = axes = figure.add_subplot(grid[0, column], **shared)
        _waveforms(axes, state, pictures)
        if any(spectrum.state == state for spectrum in pictures.spectra):
            lower["sharey"] = axes = figure.add_subplot(grid[1, column], **lower)
            _spectrum(axes, state, pictures, margin_db)
        else:  # without scales, so it must not share those of the other state
            _no_spectrum(figure.add_subplot(grid[1, column]), net, state)
    _windows(figure.add_subplot(grid[2, :]), net, states)
    return figure


def _title(net: NetResult, states: list[str]) -> str:
    """Name the net, its verdict and what is proposed."""
    after = f"; {net.verdict_after} after: {net.proposal_text}" if "after" in states else ""
    return phrases.cut_middle(phrases.inert(f"{net.net}: {net.verdict} now{after}"), 120)


def _states(net: NetResult, pictures: Pictures) -> list[str]:
    """Return the states to draw: one when nothing changes."""
    drawn = {trace.state for trace in pictures.waveforms}
    drawn |= {spectrum.state for spectrum in pictures.spectra}
    after = net.proposal != net.candidate_now or drawn == {"after"}
    return ["now", "after"] if after else ["now"]


def _waveforms(axes: "Axes", state: str, pictures: Pictures) -> None:
    """Draw received waveforms with the thresholds."""
    traces = [trace for trace in pictures.waveforms if trace.state == state]
    for trace in traces:
        time_ns = [1e9 * time for time in trace.time_s]
        axes.plot(time_ns, trace.volt, label=_name(trace), **_CORNERS.get(trace.corner, {}))
    for name, level in pictures.thresholds_v.items():
        axes.axhline(level, color=_LIMIT, linewidth=0.9, linestyle=(0, (4, 3)))
        axes.annotate(
            phrases.inert(name), (1.0, level), xycoords=("axes fraction", "data"), ha="right",
            va="bottom", color=_LIMIT, fontsize=7.5,
        )  # fmt: skip
    axes.set(title=f"at the receiver, {state}", xlabel="time, ns", ylabel="V")
    if traces:
        axes.legend(loc="lower right")


def _name(trace: Trace) -> str:
    """Name a waveform by pin, corner and edge."""
    return phrases.inert(f"{trace.receiver_pin} {trace.corner}, {trace.edge}")


def _spectrum(axes: "Axes", state: str, pictures: Pictures, margin_db: float) -> None:
    """Draw emission as stems against limit and budget, on a logarithmic frequency axis."""
    axes.set_xscale("log")
    axes.set(title=f"emission, {state}", xlabel="frequency, MHz", ylabel="dBµV/m")
    found = [spectrum for spectrum in pictures.spectra if spectrum.state == state]
    axes.set_ylim(*_levels(pictures, margin_db))
    for number, spectrum in enumerate(found):
        _stems(axes, spectrum, margin_db, first=number == 0)
    frequencies_mhz = [f / 1e6 for spectrum in found for f in spectrum.frequency_hz]
    frequencies_mhz += [s.corner_low_hz / 1e6 for s in found if s.corner_low_hz]
    if frequencies_mhz:
        _decades(axes, min(frequencies_mhz), max(frequencies_mhz))
        axes.legend(loc="upper center", bbox_to_anchor=(0.5, -0.16), ncols=6, columnspacing=1.2)


def _no_spectrum(axes: "Axes", net: NetResult, state: str) -> None:
    """Say why there is no emission to draw, on axes without scales."""
    candidate = net.candidate_now if state == "now" else net.proposal
    reasons = dict.fromkeys(
        check.undecided_because
        for check in net.checks
        if check.check == "emission" and check.candidate == candidate and not check.decided
    )
    because = "; ".join(reason for reason in reasons if reason)
    if reasons:
        words = f"emission is undecided: {because}" if because else "emission is undecided"
    else:
        words = "no emission line of this net is judged"
    axes.set(title=f"emission, {state}", xticks=[], yticks=[])
    text = "\n".join(phrases.wrap(phrases.inert(words), 60))
    axes.text(0.5, 0.5, text, transform=axes.transAxes, ha="center", va="center")


def _levels(pictures: Pictures, margin_db: float) -> tuple[float, float]:
    """Return a level axis that holds the limit and every expected level, now and after."""
    limits = [level for spectrum in pictures.spectra for level in spectrum.limit_dbuv_per_m]
    expected = [level for spectrum in pictures.spectra for level in spectrum.expected_dbuv_per_m]
    highest = [level for spectrum in pictures.spectra for level in spectrum.up_to_dbuv_per_m]
    budget = min(limits, default=40.0) - margin_db
    # An even harmonic of a square wave is next to nothing; it must not stretch the axis.
    lowest = max(min(expected, default=budget), budget - _DEPTH_DB)
    return min(lowest, budget) - 8, max((*limits, *highest), default=60.0) + 9


def _decades(axes: "Axes", low_mhz: float, high_mhz: float) -> None:
    """Put readable numbers on the frequency axis."""
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullLocator

    marks = [m * 10.0**d for d in range(-3, 5) for m in (1, 2, 3, 5)]
    axes.set_xlim(low_mhz / 1.25, high_mhz * 1.25)
    axes.xaxis.set_major_locator(FixedLocator(marks))
    axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
    axes.xaxis.set_minor_locator(NullLocator())


def _stems(axes: "Axes", spectrum: Spectrum, margin_db: float, *, first: bool) -> None:
    """Draw one detector's lines; names go into the legend once."""
    mhz = [frequency / 1e6 for frequency in spectrum.frequency_hz]
    expected, up_to = spectrum.expected_dbuv_per_m, spectrum.up_to_dbuv_per_m
    floor = axes.get_ylim()[0]
    axes.vlines(mhz, floor, expected, color=_EXPECTED, linewidth=1.4)
    names = iter(("expected", "up to", "trace", "cable", "limit", "budget") if first else ())
    for levels, marker, colour in (
        (expected, "o", _EXPECTED),
        (up_to, "_", _UP_TO),
        (spectrum.trace_dbuv_per_m, "x", "#4f7f8f"),
        (spectrum.cable_dbuv_per_m, "s", "#c08a3e"),
    ):
        fill = colour if marker != "s" else "none"
        axes.plot(
            mhz, levels, marker, color=colour, markerfacecolor=fill, markersize=4,
            label=next(names, None),
        )  # fmt: skip
    _limit_and_budget(axes, spectrum, margin_db, names)
    _corner_marks(axes, spectrum)


def _limit_and_budget(
    axes: "Axes", spectrum: Spectrum, margin_db: float, names: Iterator[str]
) -> None:
    """Draw the limit line through its own points, and the budget below it."""
    mhz = [frequency / 1e6 for frequency in spectrum.limit_line_hz]
    limit = spectrum.limit_line_dbuv_per_m
    axes.plot(mhz, limit, color=_LIMIT, linewidth=1.8, label=next(names, None))
    axes.plot(
        mhz, [level - margin_db for level in limit], color=_LIMIT, linewidth=1.0, linestyle="--",
        label=next(names, None),
    )  # fmt: skip


def _corner_marks(axes: "Axes", spectrum: Spectrum) -> None:
    """Mark the corner frequencies of the envelope: 1/(pi tau) and 1/(pi t_r)."""
    for corner_hz, name, side, shift in (
        (spectrum.corner_low_hz, "1/(π τ)", "left", 3),
        (spectrum.corner_high_hz, "1/(π tᵣ)", "right", -3),
    ):
        if corner_hz is not None:
            axes.axvline(corner_hz / 1e6, color=_UP_TO, linewidth=0.9, linestyle=":")
            axes.annotate(
                f"{name} {phrases.engineering(corner_hz, 'Hz')}", (corner_hz / 1e6, 0.99),
                xycoords=("data", "axes fraction"), xytext=(shift, 0), textcoords="offset points",
                va="top", ha=side, fontsize=7, color="#5b6670", annotation_clip=True,
            )  # fmt: skip


def _windows(axes: "Axes", net: NetResult, states: list[str]) -> None:
    """Draw window and edge, now and after, on one time axis."""
    spans = {"now": (net.window_now, net.edge_now_s), "after": (net.window_after, net.edge_after_s)}
    longest = max(_lengths_ns(net), default=1.0) * 1.15
    for place, state in enumerate(states):
        window, edge_s = spans[state]
        start, end = _span_ns(window, longest)
        hatch = "" if start <= end else "////"
        axes.barh(
            place, abs(end - start), left=min(start, end), height=0.5, color="#d3e3e6",
            edgecolor="#4f7f8f", hatch=hatch,
        )  # fmt: skip
        words = "closed: " if hatch else ""
        axes.annotate(
            words + phrases.window_span(window), (min(start, end), place - 0.28), fontsize=7.5
        )
        edges = [value * 1e9 for value in (edge_s.fast, edge_s.typical, edge_s.slow) if value]
        axes.plot(edges, [place] * len(edges), "|-", color=_EXPECTED, markersize=9)
    axes.set_yticks(range(len(states)), states)
    axes.set(title="window (bar) and edge from fast to slow corner (line)", xlabel="edge, ns")
    axes.set(xlim=(0, longest), ylim=(len(states) - 0.6, -0.6))


def _span_ns(window: Window, longest_ns: float) -> tuple[float, float]:
    """Return both ends in nanoseconds; an open end goes to the end of the axis."""
    start = (window.fastest_acceptable.edge_s or 0.0) * 1e9
    slowest = window.slowest_allowed
    end = longest_ns if slowest.any else (slowest.edge_s or 0.0) * 1e9
    if window.fastest_acceptable.edge_s is None and not window.fastest_acceptable.any:
        start = end  # none acceptable, or undecided: no span to draw
    return start, max(end, 0.0) if slowest.edge_s is not None or slowest.any else start


def _lengths_ns(net: NetResult) -> Iterator[float]:
    """Yield every length the axis has to hold."""
    for window in (net.window_now, net.window_after):
        for end in (window.slowest_allowed, window.fastest_acceptable):
            if end.edge_s and not end.any:
                yield end.edge_s * 1e9
    for edge_s in (net.edge_now_s, net.edge_after_s):
        yield from (1e9 * v for v in (edge_s.fast, edge_s.typical, edge_s.slow) if v)
