"""What the report says of a net's activity: what was credited, by how much, and what was not."""

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.activity import APART, activity_of, is_data, spread_of, toggle_hz
from edgeplan.emission_target import Target
from edgeplan.nets import NetFacts
from edgeplan.physics import detectors
from edgeplan.texts import text_db, text_frequency_hz, text_rate_bps, text_share, text_time_s

Array = NDArray[Any]

SHOWN_LINES = 6  # of a spread clock's credit


def remarks(facts: NetFacts, target: Target) -> list[str]:
    """Sentences on one net's activity.

    Parameters
    ----------
    facts : NetFacts
        One net.
    target : Target
        Range that is judged.

    Returns
    -------
    list of str
        Empty for a net that is active all the time, with equal edges and without a sweep.
    """
    if not np.isfinite(toggle_hz(facts)):
        return []
    return [text for say in _SENTENCES if (text := say(facts, target))]


def _pattern(facts: NetFacts, target: Target) -> str:
    """How a repeating pattern is judged."""
    if facts.activity != "pattern":
        return ""
    rate_bps = 2 * toggle_hz(facts)
    bits = facts.net.pattern_bits
    if bits is None:
        return (
            "its pattern states no pattern_bits: judged as a clock at half its bit rate, "
            f"{text_frequency_hz(rate_bps / 2)}"
        )
    bandwidth_hz = float(detectors.bandwidth_hz(target.lowest_hz))
    if rate_bps / bits <= detectors.noise_bandwidth_hz(bandwidth_hz):
        return f"its pattern of {bits} bits has lines too close to tell apart: read as random data"
    apart, below = text_frequency_hz(rate_bps / bits), text_db(10 * np.log10(bits))
    return (
        f"its pattern of {bits} bits is taken as pseudo-random: lines {apart} apart, "
        f"{below} below a clock; one with a rhythm of its own reads more"
    )


def _single_lines(facts: NetFacts, _: Target) -> str:
    """Why data are judged at multiples of their bit rate too."""
    skew_s = facts.interface.edge_skew_s
    own = facts.settings[facts.setting]
    if not is_data(facts) or facts.timing == "open-drain" or (own.equal_edges and not skew_s):
        return ""
    causes = [] if own.equal_edges else ["rise and fall of its driver differ"]
    causes += [f"its edges are skewed by {text_time_s(skew_s)}"] if skew_s else []
    rate = text_rate_bps(2 * toggle_hz(facts))
    return f"{' and '.join(causes)}: lines at multiples of {rate} are judged beside its data"


def _bursts(facts: NetFacts, target: Target) -> str:
    """What the pauses between bursts are worth."""
    length_s, period_s = facts.net.burst_length_s, facts.net.burst_period_s
    if length_s is None or period_s is None:
        return ""
    start = f"active {text_time_s(length_s)} of every {text_time_s(period_s)}: credited"
    words = []
    for limit in target.at(np.array([[target.lowest_hz, target.covered_to_hz]])):
        at = np.isfinite(limit.level_dbuv_per_m[0])
        frequency_hz = np.array([[target.lowest_hz, target.covered_to_hz]])[:, at]
        relief = activity_of([facts]).burst_db(limit.detector, frequency_hz, limit.limit_id)
        words.append(f"{text_db(float(-relief.max()))} {limit.detector} ({limit.limit_id})")
    return f"{start} {', '.join(words)}"


def _spread(facts: NetFacts, target: Target) -> str:
    """Credit of a spread clock line by line, or why there is none."""
    stated = [source for source in facts.sources if source.spread]
    if not stated:
        return ""
    spread = spread_of(facts)
    name = stated[0].name
    if spread is None:
        return f"the sweep of source {name} is not credited: {_why_none(facts)}"
    frequency_hz = _shown_lines(toggle_hz(facts), target)
    bandwidth_hz = detectors.bandwidth_hz(frequency_hz)
    if not frequency_hz.size or toggle_hz(facts) <= APART * bandwidth_hz.min():
        return f"the sweep of source {name} is not credited: its lines are too close to tell apart"
    read_db = activity_of([facts]).reading_db("peak", frequency_hz[None], bandwidth_hz[None])[0]
    table = ", ".join(
        f"{text_db(float(-r))} at {text_frequency_hz(float(f))}"
        for f, r in zip(frequency_hz, read_db, strict=True)
    )
    return (
        f"its source {name} sweeps by {text_share(spread.width)} in all, "
        f"{text_frequency_hz(spread.rate_hz)} triangle: credited {table}, every detector"
    )


def _why_none(facts: NetFacts) -> str:
    """Why a net of a spread source gets no credit."""
    if is_data(facts):
        return "it carries data, not a clock"
    if not facts.interface.may_spread:
        return f"interface {facts.interface.name} may not be spread; see that its clock is not"
    if len({source.spread for source in facts.sources}) > 1:
        return "its sources do not agree on one"
    return "only a triangle is"


def _shown_lines(clock_hz: float, target: Target) -> Array:
    """A few harmonics of a clock over the judged range, odd ones where there are any. [Hz]"""
    first, last = np.ceil(target.lowest_hz / clock_hz), np.floor(target.covered_to_hz / clock_hz)
    if last < first:
        return np.zeros(0)
    wanted = np.geomspace(max(first, 1), last, SHOWN_LINES)
    odd = 2 * np.round((wanted - 1) / 2) + 1
    odd = np.where(odd > last, odd - 2, np.where(odd < first, odd + 2, odd))
    return np.asarray(np.unique(np.clip(odd, first, last)) * clock_hz)


def _edge_shape(facts: NetFacts, _: Target) -> str:
    """Whose word it is that edges are smooth."""
    own = facts.settings[facts.setting]
    if own.edge_shape == "trapezoid":
        return ""
    source = own.source or facts.driver.source or "board.toml"
    return f"emission takes the raised-cosine edges stated for setting {own.setting} ({source})"


_SENTENCES: tuple[Callable[[NetFacts, Target], str], ...] = (
    _pattern,
    _single_lines,
    _bursts,
    _spread,
    _edge_shape,
)
_KINDS: dict[str, Callable[[NetFacts], bool]] = {
    "patterns without pattern_bits are judged as clocks at half their bit rate": (
        lambda f: f.activity == "pattern" and f.net.pattern_bits is None
    ),
    "patterns with pattern_bits are taken as pseudo-random": (
        lambda f: f.activity == "pattern" and f.net.pattern_bits is not None
    ),
    "bursts are credited as stated": lambda f: f.net.burst_length_s is not None,
    "a stated triangular sweep of the clock is credited": lambda f: spread_of(f) is not None,
    "a stated sweep of the clock is not credited": (
        lambda f: any(s.spread for s in f.sources) and not (is_data(f) or spread_of(f))
    ),
    "emission takes raised-cosine edges as stated": (
        lambda f: f.settings[f.setting].edge_shape != "trapezoid"
    ),
}


def assumptions(facts: Sequence[NetFacts]) -> list[str]:
    """One sentence per kind of activity, with how many nets it is true of.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.

    Returns
    -------
    list of str
        Empty where every net is a plain clock or random data all the time.
    """
    found = []
    for text, holds in _KINDS.items():
        names = [f.net.net for f in facts if holds(f)]
        if names:
            few = ", ".join(names[:3]) + (f" and {len(names) - 3} more" if names[3:] else "")
            found.append(f"{text}: {few}")
    return found
