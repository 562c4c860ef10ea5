"""Sets of comparisons: model over full-wave reference in dB, by what was compared."""

from collections.abc import Callable
from typing import Any

import full_wave_models as models
import numpy as np
from full_wave_models import Table, excess_db
from numpy.typing import NDArray

from edgeplan.emission import cable, trace
from edgeplan.emission.mechanism import Cable

Array = NDArray[Any]
LOW = 0.2  # k h up to which the trace's error is stated
FORMER_OFFSET_DB = -5.5  # at all frequencies and any number of cables, until the fit table
ON_FLOOR = Cable(length_m=models.SITE_CABLE_M)
IN_AIR = Cable(length_m=models.FREE_CABLE_M)


def wave_height(table: Table) -> Array:
    """Wave number times height of each row."""
    return np.asarray(2 * np.pi * table["frequency_hz"] / models.SPEED_M_PER_S * table["height_m"])


def trace_sets() -> dict[str, Array]:
    """Traces over an infinite plane."""
    table = models.read_table("trace")
    excess = excess_db(models.over_plane_v(table), table["field_v"])
    low = wave_height(table) < LOW
    kinds = [f"trace, k h < 0.2, {load}" for load in np.unique(table["load"])]
    by_load = {
        kind: excess[low & (table["load"] == load)]
        for kind, load in zip(kinds, np.unique(table["load"]), strict=True)
    }
    return {"trace, k h < 0.2": excess[low], **by_load, "trace, k h to 0.63": excess}


def cable_sets() -> dict[str, Array]:
    """One cable, its end known and not; two and three cables: in free space."""
    one, several = models.read_table("one_cable"), models.read_table("two_cables")
    known_v = np.hypot(models.cable_at_known_end_v(one), models.trace_v(one))
    any_end = excess_db(field_v(one, IN_AIR), one["field_v"])
    sets = {
        "one cable, at the end where it is": excess_db(known_v, one["field_v"]),
        "one cable, at the worse end (up to)": any_end,
    }
    up_to = excess_db(field_v(several, IN_AIR, up_to_db(several)), several["field_v"])
    for count in (2, 3):
        sets[f"{count} cables, up to over highest of 16 layouts"] = up_to[
            several["cables"] == count
        ]
    return sets


def field_v(table: Table, each_cable: Cable, cable_db: Array | float = 0.0) -> Array:
    """Trace and cables, these with so many dB added, together as distance times field."""
    cables_v = models.cables_v(table, each_cable) * 10 ** (np.asarray(cable_db) / 20)
    return np.asarray(np.hypot(models.trace_v(table), cables_v))


def site_excess_db(table: Table, cable_db: Array | float) -> Array:
    """Level on the site over the highest reading of all layouts."""
    level = models.on_site_v_per_m(table, field_v(table, ON_FLOOR, cable_db))
    return excess_db(level, table["field_v_per_m"])


def offset_db(table: Table) -> Array:
    """Expected level of each row's cables over their envelope."""
    return _by_count(table, cable.expected_offset_db)


def stated_db(table: Table) -> Array:
    """Stated error of each row's expected level: of trace and cables by share of the power."""
    cables_v = models.cables_v(table, ON_FLOOR) * 10 ** (offset_db(table) / 20)
    share = cables_v**2 / (cables_v**2 + models.trace_v(table) ** 2)
    of_cables = _by_count(table, cable.error_db)
    return np.asarray(share * of_cables + (1 - share) * trace.MODEL.error_db)


def _by_count(table: Table, levels: Callable[[Array, int], Array]) -> Array:
    """What is said for each row's frequency and number of cables."""
    frequency_hz = table["frequency_hz"]
    return np.where(table["cables"] == 1, levels(frequency_hz, 1), levels(frequency_hz, 2))


def falsely_green(excess: Array, margin_db: float) -> float:
    """Share of cases that read above a limit which the expected level plus margin just meets."""
    return float(np.mean(excess < -margin_db))


def up_to_db(table: Table) -> Array:
    """Worst case over the envelope of each row."""
    return np.array([cable.up_to_offset_db(int(count)) for count in table["cables"]])


def cables_rule(table: Table) -> Array:
    """Rows whose envelope of the cables is above their trace: these say something of cables."""
    return np.asarray(models.cables_v(table, ON_FLOOR) > models.trace_v(table))


def site_sets() -> dict[str, Array]:
    """Worst case on the site, and expected level by number of cables, now and before."""
    table = models.read_table("site")
    sets = {"site, up to over highest of 12 layouts": site_excess_db(table, up_to_db(table))}
    for name, offset in (("expected", offset_db(table)), ("5.5 dB", FORMER_OFFSET_DB)):
        excess = site_excess_db(table, offset)
        sets[f"site, {name}, over highest of 12 layouts"] = excess
        for count in (1, 2, 3):
            sets[f"site, {name}, {count} cable(s)"] = excess[table["cables"] == count]
    return sets


def site_risks() -> dict[str, tuple[float, ...]]:
    """Percent of site cases falsely green at 6 dB and at no margin: before, now, by cables."""
    table = models.read_table("site")
    groups = {"all": table["cables"] > 0}
    groups |= {f"{count} cable(s)": table["cables"] == count for count in (1, 2, 3)}
    risks = {}
    for name, rows in groups.items():
        levels = [site_excess_db(table, db)[rows] for db in (FORMER_OFFSET_DB, offset_db(table))]
        risks[name] = tuple(
            100 * falsely_green(excess, margin_db) for margin_db in (6.0, 0.0) for excess in levels
        )
    return risks


def filter_sets() -> dict[str, Array]:
    """Credit of a filter over its worth, and the expected level with it over the reading."""
    table = models.read_table("filter")
    in_all = (table["cables"] == 1) | (table["where"] == "all")
    part_ohm = np.hypot(table["filter_real_ohm"], table["filter_imag_ohm"])
    credit_db = np.where(in_all, cable.filter_credit_db(part_ohm), 0.0)
    worth_db = excess_db(table["bare_v_per_m"], table["field_v_per_m"])
    level = site_excess_db(table, offset_db(table) - credit_db)
    return {
        "filter in all cables, credit over worth": (credit_db - worth_db)[in_all],
        "filter in all cables, expected over highest": level[in_all],
        "filter in one of 3, credit (none) over worth": (credit_db - worth_db)[~in_all],
        "filter in one of 3, expected over highest": level[~in_all],
    }


def all_sets() -> dict[str, Array]:
    """Every set by its name."""
    return trace_sets() | cable_sets() | site_sets() | filter_sets()
