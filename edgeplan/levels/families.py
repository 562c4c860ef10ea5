"""Logic level families: input thresholds and output levels over the supply."""

import difflib
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]


class Level(NamedTuple):
    """A level: share of the supply plus volts, at most a ceiling, at a load current."""

    share: float = 0.0
    volts: float = 0.0
    at_most_v: float = np.inf
    current_a: float = np.nan

    def at(self, supply_v: Array) -> Array:
        """Level at a supply. [V]."""
        return np.minimum(self.share * supply_v + self.volts, self.at_most_v)


UNKNOWN = Level(volts=np.nan)


@dataclass(frozen=True, slots=True, kw_only=True)
class LogicLevels:
    """Thresholds and outputs of one family.

    Parameters
    ----------
    id, standard, note : str
        Name, where the figures come from, what to know.
    supply_v : tuple of float
        Lowest, nominal and highest supply. [V]
    low, high : Level
        Highest input low and lowest input high level, relative to the reference where
        the family has one.
    reference_share : float
        Reference voltage over supply, NaN for a family without one. [-]
    ac_offset_v : float
        Distance of the ac thresholds from the reference, NaN if none. [V]
    output_low, output_high : Level
        Output levels at their load current.
    open_drain : bool
        Whether outputs only pull down.
    verified : bool
        False where the thresholds are from memory.
    unverified : tuple of str
        What else is from memory.
    """

    id: str
    standard: str
    supply_v: tuple[float, float, float]
    low: Level
    high: Level
    reference_share: float = np.nan
    ac_offset_v: float = np.nan
    output_low: Level = UNKNOWN
    output_high: Level = UNKNOWN
    open_drain: bool = False
    verified: bool = True
    unverified: tuple[str, ...] = ()
    note: str = ""

    def thresholds_v(
        self, supply_v: ArrayLike, reference_v: ArrayLike | None = None
    ) -> tuple[Array, Array]:
        """Input thresholds VIL and VIH at a supply.

        Parameters
        ----------
        supply_v : array_like
            Supply of the receiver, any shape. [V]
        reference_v : array_like, optional
            Reference voltage; the family's share of the supply when left out. [V]

        Returns
        -------
        vil_v, vih_v : numpy.ndarray
            Thresholds; NaN for a family that states none. [V]

        Examples
        --------
        35 and 65 % of 1.8 V:

        >>> low, high = family("lvcmos-1v8").thresholds_v(1.8)
        >>> print(f"{low:.2f} {high:.2f}")
        0.63 1.17
        """
        supply = np.asarray(supply_v, dtype=float)
        base = self._base_v(supply, reference_v)
        return base + self.low.at(supply), base + self.high.at(supply)

    def ac_thresholds_v(
        self, supply_v: ArrayLike, reference_v: ArrayLike | None = None
    ) -> tuple[Array, Array]:
        """Thresholds an edge must reach, of a family with a reference voltage.

        Parameters
        ----------
        supply_v, reference_v : array_like
            As in `thresholds_v`. [V]

        Returns
        -------
        vil_v, vih_v : numpy.ndarray
            Thresholds, NaN for a family without them. [V]

        Examples
        --------
        >>> low, high = family("sstl-18").ac_thresholds_v(1.8)
        >>> print(f"{low:.2f} {high:.2f}")
        0.65 1.15
        """
        base = self._base_v(np.asarray(supply_v, dtype=float), reference_v)
        return base - self.ac_offset_v, base + self.ac_offset_v

    def outputs_v(self, supply_v: ArrayLike) -> tuple[Array, Array]:
        """Output levels VOL and VOH at a supply, NaN where the family states none.

        Parameters
        ----------
        supply_v : array_like
            Supply of the driver, any shape. [V]

        Returns
        -------
        vol_v, voh_v : numpy.ndarray
            Output levels at the load current of the family. [V]

        Examples
        --------
        >>> family("i2c").outputs_v([1.8, 3.3])[0].round(2).tolist()
        [0.36, 0.4]
        """
        supply = np.asarray(supply_v, dtype=float)
        return self.output_low.at(supply), self.output_high.at(supply)

    def takes_supply(self, supply_v: ArrayLike) -> Array:
        """Whether a supply lies in the family's range.

        Parameters
        ----------
        supply_v : array_like
            Supply, any shape. [V]

        Returns
        -------
        numpy.ndarray of bool
            True inside, both ends included.

        Examples
        --------
        >>> family("lvttl-3v3").takes_supply([3.3, 5.0]).tolist()
        [True, False]
        """
        supply = np.asarray(supply_v, dtype=float)
        return (supply >= self.supply_v[0]) & (supply <= self.supply_v[2])

    def _base_v(self, supply_v: Array, reference_v: ArrayLike | None) -> Array:
        """Voltage the thresholds count from, 0 for a family without one."""
        if np.isnan(self.reference_share):
            return np.zeros_like(supply_v)
        if reference_v is None:
            return np.asarray(self.reference_share * supply_v)
        return np.asarray(reference_v, dtype=float)


def ids() -> tuple[str, ...]:
    """Ids of all shipped families.

    Returns
    -------
    tuple of str
        Ids in the order of the data file.

    Examples
    --------
    >>> "lvttl-3v3" in ids()
    True
    """
    return tuple(_shipped())


def family(family_id: str) -> LogicLevels:
    """Shipped family of an id.

    Parameters
    ----------
    family_id : str
        Id, such as ``lvcmos-1v8``.

    Returns
    -------
    LogicLevels
        Levels of the family.

    Raises
    ------
    ValueError
        For an unknown id, with those spelt alike.

    Examples
    --------
    >>> family("pci-3v3").standard
    'PCI local bus, 3.3 V signalling'
    """
    shipped = _shipped()
    if family_id not in shipped:
        raise ValueError(no_such("level family", family_id, tuple(shipped)))
    return shipped[family_id]


def stated(name: str, vil_v: float, vih_v: float, source: str = "") -> LogicLevels:
    """Family of a user's own thresholds.

    Parameters
    ----------
    name : str
        What the user calls it.
    vil_v, vih_v : float
        Thresholds at every supply. [V]
    source : str, optional
        Where they come from.

    Returns
    -------
    LogicLevels
        Levels without outputs or supply range.

    Raises
    ------
    ValueError
        Where VIL is not below VIH.

    Examples
    --------
    >>> [float(v) for v in stated("sensor", 0.5, 1.2).thresholds_v(1.8)]
    [0.5, 1.2]
    """
    if not vil_v < vih_v:
        raise ValueError(f"levels {name!r}: vil {vil_v:g} V is not below vih {vih_v:g} V")
    return LogicLevels(
        id=name,
        standard=source or "user",
        supply_v=(0.0, np.nan, np.inf),
        low=Level(volts=vil_v),
        high=Level(volts=vih_v),
    )


def no_such(kind: str, text: str, known: Sequence[str]) -> str:
    """Message for an unknown name, with those spelt alike or all of them.

    Parameters
    ----------
    kind, text : str
        What was sought and what was written.
    known : sequence of str
        Names there are.

    Returns
    -------
    str
        One sentence.

    Examples
    --------
    >>> no_such("level family", "i2s", ["i2c", "pci-3v3"])
    "no level family is called 'i2s'; did you mean i2c?"
    """
    alike = difflib.get_close_matches(text.lower(), known, n=3, cutoff=0.5)
    hint = f"did you mean {', '.join(alike)}?" if alike else f"there are {', '.join(known)}"
    return f"no {kind} is called {text!r}; {hint}"


@cache
def shipped_data() -> dict[str, Any]:
    """Package data of this room, read once.

    Returns
    -------
    dict
        Tables ``family`` and ``slow_edge``.

    Examples
    --------
    >>> sorted(shipped_data())
    ['family', 'slow_edge']
    """
    return tomllib.loads((files("edgeplan.levels") / "levels.toml").read_text(encoding="utf-8"))


@cache
def _shipped() -> Mapping[str, LogicLevels]:
    """All families by id."""
    return MappingProxyType({entry["id"]: _family(entry) for entry in shipped_data()["family"]})


def _family(entry: dict[str, Any]) -> LogicLevels:
    """One family of the data file."""
    supply = entry["supply_v"]
    share = entry.get("reference_share", np.nan)
    if "reference_v" in entry:
        share = entry["reference_v"][1] / supply[1]
    return LogicLevels(
        id=entry["id"],
        standard=entry["standard"],
        supply_v=(supply[0], supply[1], supply[2]),
        low=_level(entry.get("low")),
        high=_level(entry.get("high")),
        reference_share=share,
        ac_offset_v=entry.get("ac_offset_v", np.nan),
        output_low=_level(entry.get("output_low")),
        output_high=_level(entry.get("output_high")),
        open_drain=entry.get("open_drain", False),
        verified=entry["basis"] == "printed",
        unverified=tuple(entry.get("unverified", ())),
        note=entry.get("note", ""),
    )


def _level(entry: dict[str, float] | None) -> Level:
    """One level of the data file."""
    if entry is None:
        return UNKNOWN
    return Level(
        share=entry.get("share", 0.0),
        volts=entry.get("volts", 0.0),
        at_most_v=entry.get("at_most_v", np.inf),
        current_a=entry.get("current_ma", np.nan) * 1e-3,
    )
