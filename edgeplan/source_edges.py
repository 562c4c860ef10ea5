"""What the edges of every candidate leave of each line of its spectrum."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates, setting_table
from edgeplan.drives import DIRECTIONS, SettingCorners
from edgeplan.emission_lines import EmissionLines
from edgeplan.nets import NetFacts, Nets
from edgeplan.physics.edge_factor import null_free_edge_factor
from edgeplan.physics.edge_shapes import largest_difference, shape_factor

Array = NDArray[Any]

RAISED_COSINE = "raised-cosine"


def edge_shares(nets: Nets, candidates: Candidates, lines: EmissionLines) -> Array:
    """Level of every line over that with edges of no length, fast corner, free of nulls.

    Parameters
    ----------
    nets, candidates : Nets, Candidates
        N nets, C candidates.
    lines : EmissionLines
        F judged lines of the same nets.

    Returns
    -------
    numpy.ndarray
        (N, C, F), 0 to 1; NaN where a setting states no minimum edge. [-]

    Notes
    -----
    Equal edges: the null-free factor g of their shape. Edges that differ: for a clock
    min(g_r + g_f, (g_r + g_f) S + D C)/2 with the duty's S and C; for random data
    sqrt((g_r^2 + g_f^2)/2); for the lines of a pattern the larger g; for the single lines of
    data at multiples of the bit rate min(g_r + g_f, hypot(D, (g_r + g_f) S))/2, S by the skew.
    D bounds the difference of both edges.
    """
    open_drain = all(f.timing == "open-drain" for f in nets.facts)
    first = DIRECTIONS[1] if open_drain else DIRECTIONS[0]
    at = np.arange(len(nets))[:, None], candidates.setting
    ramp_s = setting_table(nets, "trapezoid_s", "fast", first)[at] * candidates.ramp_factor
    share = null_free_edge_factor(lines.frequency_hz[:, None, :] * ramp_s[:, :, None])
    differs = np.array([_differs(f) for f in nets.facts], dtype=bool)
    rows = np.flatnonzero(differs | lines.discrete.any(axis=1))
    if rows.size:
        facts, few = [nets.facts[i] for i in rows], candidates.take(rows)
        share[rows] = _of_both_edges(_Edges.of(facts, few, open_drain), lines, rows)
    return np.asarray(share)


def _differs(facts: NetFacts) -> bool:
    """Whether a net needs more than the factor of one straight ramp."""
    return any(not s.symmetric or s.edge_shape == RAISED_COSINE for s in facts.settings)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Edges:
    """Both edges of the candidates of some nets, 0-100 % of their shape. (M, C)"""

    rise_s: Array
    fall_s: Array
    slowest_s: Array
    log_ratio: Array
    smooth: Array
    strong_alike: Array

    @classmethod
    def of(cls, facts: Sequence[NetFacts], candidates: Candidates, open_drain: bool) -> "_Edges":
        """Look up the settings; of an open-drain output the falling edge stands for both."""
        at = np.arange(len(facts))[:, None], candidates.setting
        rise, fall = ("falling" if open_drain else "rising"), "falling"
        fast = [_table(facts, d, "fast")[at] * candidates.ramp_factor for d in (rise, fall)]
        slow = [_table(facts, d, "slow")[at] * candidates.ramp_factor for d in (rise, fall)]
        with np.errstate(divide="ignore", invalid="ignore"):
            apart = [np.abs(np.log(pair[1] / pair[0])) for pair in (fast, slow)]
        equal = [pair[0] == pair[1] for pair in (fast, slow)]
        log_ratio = np.fmax(*(np.where(e, 0.0, a) for e, a in zip(equal, apart, strict=True)))
        return cls(
            rise_s=fast[0],
            fall_s=fast[1],
            slowest_s=np.maximum(*slow),
            log_ratio=np.nan_to_num(log_ratio, nan=0.0, posinf=np.inf),
            smooth=_settings(facts, lambda s: s.edge_shape == RAISED_COSINE)[at],
            strong_alike=_settings(facts, lambda s: s.equal_resistance and not open_drain)[at],
        )


def _table(facts: Sequence[NetFacts], direction: str, corner: str) -> Array:
    """Duration of one edge of all settings, by the shape of its spectrum. (M, S) [s]"""

    def duration_s(setting: SettingCorners) -> float:
        smooth = setting.edge_shape == RAISED_COSINE
        return (setting.ramp_s if smooth else setting.trapezoid_s)[direction].at(corner)

    return _settings(facts, duration_s, np.nan)


def _settings(facts: Sequence[NetFacts], value: Any, fill: Any = False) -> Array:
    """One value of all settings, padded. (M, S)"""
    width = max(len(f.settings) for f in facts)
    rows = [[value(s) for s in f.settings] for f in facts]
    return np.array([row + [fill] * (width - len(row)) for row in rows])


def _of_both_edges(edges: _Edges, lines: EmissionLines, rows: Array) -> Array:
    """Share of every line by both edges. (M, C, F)"""
    frequency = lines.frequency_hz[rows][:, None, :]
    smooth, log_ratio = edges.smooth[:, :, None], edges.log_ratio[:, :, None]
    rise = shape_factor(frequency * edges.rise_s[:, :, None], smooth)
    fall = shape_factor(frequency * edges.fall_s[:, :, None], smooth)
    both, data = rise + fall, lines.activity.is_data[rows][:, None, None]
    pattern = np.isfinite(lines.activity.pattern_bits[rows])[:, None, None]
    sine, cosine = lines.sine[rows][:, None, :], lines.cosine[rows][:, None, :]
    steepest = np.minimum(both, largest_difference(log_ratio, np.inf, smooth))
    clock = np.minimum(both, both * sine + steepest * cosine) / 2
    clock = np.where(edges.strong_alike[:, :, None], clock, both / 2)
    noise = np.where(pattern, np.maximum(rise, fall), np.sqrt((rise**2 + fall**2) / 2))
    shares = np.where(data, noise, clock)
    discrete = lines.discrete[rows][:, None, :]
    if not discrete.any():
        return np.asarray(shares)
    slowest_x = frequency * edges.slowest_s[:, :, None]
    apart = np.minimum(both, largest_difference(log_ratio, slowest_x, smooth))
    single = np.minimum(both, np.hypot(apart, both * sine)) / 2
    return np.asarray(np.where(discrete, single, shares))
