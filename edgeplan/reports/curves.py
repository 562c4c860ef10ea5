"""Spectrum and waveforms of one net in letters, for a reader without a picture."""

from collections.abc import Iterator
from itertools import pairwise

from edgeplan.reports import phrases
from edgeplan.results import NetResult, Spectrum, Trace

_BAR = 30  # columns of a bar
_BAR_SPAN_DB = 30.0  # from the left end of a bar to its right end
_FAR_BELOW_DB = 60.0  # a line further below its limit is absent, such as an even harmonic
_PLOT_COLUMNS = 72
_PLOT_ROWS = 12


def spectra(net: NetResult, margin_db: float, worst: int) -> Iterator[str]:
    """Yield the worst lines of each spectrum: level, mechanisms, parity, excess and a bar.

    Parameters
    ----------
    net : NetResult
        A net with pictures; nothing is written without.
    margin_db : float
        What the limit is lowered by. [dB]
    worst : int
        How many lines of each spectrum are shown. [-]

    Yields
    ------
    str
        Lines without a line feed.
    """
    for spectrum in net.pictures.spectra if net.pictures else ():
        shown = _worst(spectrum, worst)
        yield from ("", f"Spectrum {spectrum.state}, {spectrum.detector}, {_count(len(shown))}")
        yield (
            "   frequency  harmonic      expected   up to   trace   cable   limit  budget    over"
            f"   over the budget by -{_BAR_SPAN_DB / 2:.0f} to +{_BAR_SPAN_DB / 2:.0f} dB"
        )
        for index in shown:
            yield _spectrum_line(spectrum, index, margin_db)
        yield from _corner_note(spectrum)
        yield from _changes(spectrum, worst)


def _count(lines: int) -> str:
    """Tell how many lines follow.

    >>> _count(12), _count(0)
    ('the 12 worst lines', 'no line within 60 dB of its limit')
    """
    if lines == 0:
        return f"no line within {_FAR_BELOW_DB:.0f} dB of its limit"
    return f"the {lines} worst lines" if lines > 1 else "the worst line"


def _changes(spectrum: Spectrum, worst: int) -> Iterator[str]:
    """Tell what the proposal does to each line, and whether its edge or its current does it."""
    if not spectrum.change_by_edge_db:
        return
    yield ""
    yield "What the proposal changes, in dB"
    yield "   frequency  harmonic     by the edge  by the current     both"
    for index in _worst(spectrum, worst):
        edge, current = spectrum.change_by_edge_db[index], spectrum.change_by_current_db[index]
        if edge == current == 0:
            continue
        frequency = phrases.engineering(spectrum.frequency_hz[index], "Hz")
        numbers = f"{edge + 0.0:+12.1f}{current + 0.0:+16.1f}{edge + current + 0.0:+9.1f}"
        yield f"  {frequency:>10}  {_harmonic(spectrum.order[index]):9}   {numbers}"


def _worst(spectrum: Spectrum, worst: int) -> list[int]:
    """Return the lines that come closest to the limit, by frequency; absent ones left out."""
    levels = zip(spectrum.expected_dbuv_per_m, spectrum.limit_dbuv_per_m, strict=True)
    excess = [level - limit for level, limit in levels]
    present = (index for index, over in enumerate(excess) if over >= -_FAR_BELOW_DB)
    order = sorted(present, key=lambda index: -excess[index])
    return sorted(order[:worst])


def _spectrum_line(spectrum: Spectrum, index: int, margin_db: float) -> str:
    """Write one line of a spectrum; levels are in dBµV/m."""
    harmonic = _harmonic(spectrum.order[index])
    limit = spectrum.limit_dbuv_per_m[index]
    expected = spectrum.expected_dbuv_per_m[index]
    over = expected - limit + margin_db
    levels = (
        expected,
        spectrum.up_to_dbuv_per_m[index],
        spectrum.trace_dbuv_per_m[index],
        spectrum.cable_dbuv_per_m[index],
        limit,
        limit - margin_db,
    )
    frequency = phrases.engineering(spectrum.frequency_hz[index], "Hz")
    numbers = "".join(f"{level:8.1f}" for level in levels)
    return f"  {frequency:>10}  {harmonic:9}    {numbers}{over:+8.1f}   {_bar(over)}".rstrip()


def _harmonic(order: int) -> str:
    """Write a harmonic and its parity; data have power in the band and no harmonics.

    >>> _harmonic(7), _harmonic(12), _harmonic(0)
    ('   7 odd', '  12 even', '  in band')
    """
    if order == 0:
        return "  in band"
    return f"{order:>4} {'odd' if order % 2 else 'even'}"


def _bar(over_db: float) -> str:
    """Draw the excess over the budget as a bar with the budget in its middle.

    >>> _bar(3.0)
    '==============|###'
    """
    half = _BAR // 2
    columns = round((over_db + _BAR_SPAN_DB / 2) / _BAR_SPAN_DB * _BAR)
    columns = max(0, min(_BAR, columns))
    inside = "=" * min(columns, half - 1)
    return f"{inside}|{'#' * (columns - half)}" if columns >= half else inside


def _corner_note(spectrum: Spectrum) -> Iterator[str]:
    """Tell the corner frequencies of the trapezoid's envelope."""
    low, high = spectrum.corner_low_hz, spectrum.corner_high_hz
    if low is not None and high is not None:
        corners = f"{phrases.engineering(low, 'Hz')} and {phrases.engineering(high, 'Hz')}"
        yield f"  envelope falls 20 dB per decade from {corners.replace(' and ', ', 40 from ')}"


def waveforms(net: NetResult) -> Iterator[str]:
    """Yield each received waveform in numbers, and one picture in letters per state.

    Parameters
    ----------
    net : NetResult
        A net with pictures; nothing is written without.

    Yields
    ------
    str
        Lines without a line feed.
    """
    if net.pictures is None or not net.pictures.waveforms:
        return
    levels = net.pictures.thresholds_v
    named = ", ".join(f"{name} {phrases.engineering(v, 'V')}" for name, v in levels.items())
    yield from ("", f"Waveforms at the receiver ({phrases.inert(named)})")
    yield (
        "  state  receiver      corner   edge      from      to  lowest highest"
        "     between the thresholds"
    )
    for trace in net.pictures.waveforms:
        yield _trace_line(trace, sorted(levels.values()))
    drawn: set[str] = set()
    for trace in net.pictures.waveforms:
        if trace.corner == "fast" and trace.state not in drawn:
            drawn.add(trace.state)
            yield from (
                "",
                f"  {trace.state}, {phrases.inert(trace.receiver_pin)}, fast, {trace.edge}",
            )
            yield from _plot(trace, levels)


def _trace_line(trace: Trace, levels: list[float]) -> str:
    """Write a waveform's ends, extremes and time between the thresholds."""
    volt = trace.volt
    numbers = "".join(f"{v:8.2f}" for v in (volt[0], volt[-1], min(volt), max(volt)))
    pin = phrases.cut_middle(phrases.inert(trace.receiver_pin), 12)
    between = phrases.engineering(_between(trace, levels), "s")
    return f"  {trace.state:5}  {pin:12}  {trace.corner:7}  {trace.edge:7}{numbers} V   {between}"


def _between(trace: Trace, levels: list[float]) -> float | None:
    """Return the time from the first crossing of one threshold to that of the other. [s]."""
    if len(levels) < 2:
        return None
    times = [_first_crossing(trace, level) for level in (levels[0], levels[-1])]
    return None if times[0] is None or times[1] is None else abs(times[1] - times[0])


def _first_crossing(trace: Trace, level: float) -> float | None:
    """Return when a waveform first passes a level, by a straight line between samples. [s]."""
    pairs = list(zip(trace.time_s, trace.volt, strict=True))
    for (t0, v0), (t1, v1) in pairwise(pairs):
        if (v0 - level) * (v1 - level) <= 0 and v0 != v1:
            return t0 + (level - v0) / (v1 - v0) * (t1 - t0)
    return None


def _plot(trace: Trace, levels: dict[str, float]) -> Iterator[str]:
    """Draw a waveform in letters, its thresholds dotted."""
    low = min(*trace.volt, *levels.values())
    high = max(*trace.volt, *levels.values())
    step = (high - low) / (_PLOT_ROWS - 1) or 1.0
    grid = [[" "] * _PLOT_COLUMNS for _ in range(_PLOT_ROWS)]
    for level in levels.values():
        grid[round((high - level) / step)] = ["."] * _PLOT_COLUMNS
    start, span = trace.time_s[0], (trace.time_s[-1] - trace.time_s[0]) or 1.0
    for time, volt in zip(trace.time_s, trace.volt, strict=True):
        column = round((time - start) / span * (_PLOT_COLUMNS - 1))
        grid[round((high - volt) / step)][column] = "*"
    for row, line in enumerate(grid):
        yield f"  {round(high - row * step, 2) + 0.0:7.2f} V |{''.join(line)}".rstrip()
    begin, end = phrases.engineering(start, "s"), phrases.engineering(trace.time_s[-1], "s")
    yield f"  {'':9} +{'-' * _PLOT_COLUMNS}"
    yield f"  {'':11}{begin}{end:>{_PLOT_COLUMNS - len(begin)}}"
