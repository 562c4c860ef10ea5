"""A limit line: levels over frequency for each detector, at one distance."""

from dataclasses import dataclass
from typing import Any, Literal, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]

Basis = Literal["printed", "indirect", "derived", "memory", "user"]
Detector = Literal["quasi-peak", "average", "peak"]

DETECTORS: tuple[Detector, ...] = get_args(Detector)
MICROVOLT_PER_M = 1e-6
TOUCHING = 1e-12  # relative: 230e6 reached by another sum is still the border at 230 MHz


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Band:
    """Limit of one detector over one stretch of frequency.

    Between its points the level is a straight line over log frequency; two points at
    one frequency are a step.
    """

    detector: Detector
    bandwidth_hz: float
    frequency_hz: Array
    level_dbuv_per_m: Array
    basis: Basis = "printed"
    service: str = ""

    def level_at(self, frequency_hz: Array) -> Array:
        """Level at frequencies, the lower one on a step, NaN outside the band."""
        level = np.full(frequency_hz.shape, np.nan)
        ends = zip(
            self.frequency_hz[:-1],
            self.frequency_hz[1:],
            self.level_dbuv_per_m[:-1],
            self.level_dbuv_per_m[1:],
            strict=True,
        )
        for start_hz, stop_hz, first, last in ends:
            if stop_hz > start_hz:
                inside = frequency_hz >= start_hz * (1 - TOUCHING)
                inside &= frequency_hz <= stop_hz * (1 + TOUCHING)
                share = np.log(frequency_hz[inside] / start_hz) / np.log(stop_hz / start_hz)
                level[inside] = np.fmin(level[inside], first + share * (last - first))
        return level


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LimitLine:
    """Limit line of one standard, class and distance.

    Parameters
    ----------
    id, title, source, note : str
        How it is called, what it is, where its figures come from, what to know.
    distance_m : float
        Measuring distance the levels hold for; nothing converts it. [m]
    basis : str
        How the figures are known: printed, indirect, derived, memory or user.
    bands : tuple of Band
        Levels for each detector.
    continues_as : str
        Id of the line that goes on above the last frequency, or empty.
    """

    id: str
    title: str
    source: str
    distance_m: float
    basis: Basis
    bands: tuple[Band, ...]
    continues_as: str = ""
    note: str = ""

    @property
    def verified(self) -> bool:
        """False where any of the figures is from memory."""
        return self.basis != "memory" and all(band.basis != "memory" for band in self.bands)

    @property
    def detectors(self) -> tuple[Detector, ...]:
        """Detectors the line has levels for."""
        return tuple(d for d in DETECTORS if any(band.detector == d for band in self.bands))

    @property
    def lowest_hz(self) -> float:
        """Frequency the line starts at. [Hz]."""
        return float(min(band.frequency_hz[0] for band in self.bands))

    @property
    def highest_hz(self) -> float:
        """Frequency the line ends at. [Hz]."""
        return float(max(band.frequency_hz[-1] for band in self.bands))

    def level_dbuv_per_m(self, frequency_hz: ArrayLike, detector: str = "") -> Array:
        """Level of the line; where bands touch or overlap, the lower one.

        Parameters
        ----------
        frequency_hz : array_like
            Frequencies, any shape. [Hz]
        detector : str, optional
            ``quasi-peak``, ``average`` or ``peak``; the lowest of all when left out.

        Returns
        -------
        numpy.ndarray
            Level, NaN where the line says nothing. [dBuV/m]

        Raises
        ------
        ValueError
            For a word that is no detector.

        Examples
        --------
        >>> from edgeplan import limits
        >>> line = limits.line("cispr32-class-b-3m")
        >>> line.level_dbuv_per_m([29e6, 230e6, 231e6], "quasi-peak").tolist()
        [nan, 40.0, 47.0]
        """
        return self._tightest(frequency_hz, detector)[0]

    def bandwidth_hz(self, frequency_hz: ArrayLike, detector: str = "") -> Array:
        """Receiver bandwidth that belongs to the level, NaN where there is none.

        Parameters
        ----------
        frequency_hz : array_like
            Frequencies, any shape. [Hz]
        detector : str, optional
            As in `level_dbuv_per_m`.

        Returns
        -------
        numpy.ndarray
            Bandwidth of the receiver. [Hz]

        Examples
        --------
        >>> from edgeplan import limits
        >>> line = limits.line("fcc-15-109-class-b-3m")
        >>> line.bandwidth_hz([100e6, 2e9], "average").tolist()
        [nan, 1000000.0]
        """
        return self._tightest(frequency_hz, detector)[1]

    def field_v_per_m(self, frequency_hz: ArrayLike, detector: str = "") -> Array:
        """Level of the line as a field strength.

        Parameters
        ----------
        frequency_hz : array_like
            Frequencies, any shape. [Hz]
        detector : str, optional
            As in `level_dbuv_per_m`.

        Returns
        -------
        numpy.ndarray
            Field strength. [V/m]

        Examples
        --------
        47 CFR 15.109(a) prints 150 microvolts per metre between 88 and 216 MHz.

        >>> from edgeplan import limits
        >>> line = limits.line("fcc-15-109-class-b-3m")
        >>> print(f"{line.field_v_per_m(100e6) * 1e6:.1f}")
        150.0
        """
        level = self.level_dbuv_per_m(frequency_hz, detector)
        return np.asarray(MICROVOLT_PER_M * 10 ** (level / 20))

    def _tightest(self, frequency_hz: ArrayLike, detector: str) -> tuple[Array, Array]:
        """Lowest level of the bands of a detector, and the bandwidth of that band."""
        if detector and detector not in DETECTORS:
            raise ValueError(f"{detector!r} is no detector; one of {', '.join(DETECTORS)}")
        frequency = np.asarray(frequency_hz, dtype=float)
        level = np.full(frequency.shape, np.nan)
        bandwidth = np.full(frequency.shape, np.nan)
        for band in self.bands:
            if detector in ("", band.detector):
                here = band.level_at(frequency)
                tighter = np.isfinite(here) & ~(here >= level)
                level = np.where(tighter, here, level)
                bandwidth = np.where(tighter, band.bandwidth_hz, bandwidth)
        return level, bandwidth
