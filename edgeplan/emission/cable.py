"""Radiation of the board against its cables, driven by the trace's unbalanced voltage."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from edgeplan.emission.mechanism import Array, Cable, Mechanism, RadiationInputs
from edgeplan.physics import imbalance
from edgeplan.physics.air_lines import SPEED_OF_LIGHT_M_PER_S

# Frequency [Hz], expected level over the envelope [dB], its standard deviation [dB]: centres of
# 30-60, 60-200 and 200-1000 MHz of 480 full-wave points on a measuring site, highest of 16 to 28
# layouts (tests/reference/full_wave_site_fit.csv). The level is the median, or less where more
# than 3 % would read 6 dB above it, towards the envelope to a whole dB; below 60 MHz for all
# numbers of cables together. The deviation is the root mean square about it, rounded up to 0.5.
ONE_CABLE_LEVELS = ((40e6, -2.0, 8.0), (110e6, -3.0, 6.0), (450e6, -6.0, 5.0))
SEVERAL_CABLES_LEVELS = ((40e6, -2.0, 8.0), (110e6, -5.0, 3.5), (450e6, -6.0, 3.5))
# With several cables two of those points read 4.4 and 4.9 dB above the envelope (30 MHz, both in
# resonance); so much more is "up to", that none reads more than 3 dB above it, to a whole dB.
SEVERAL_UP_TO_DB = 2.0
SITE_TO_HZ = 1e9  # the runs end here, and so does the floor of the measuring site

MODEL = Mechanism(
    name="cable",
    version=2,
    error_db=max(row[2] for row in ONE_CABLE_LEVELS + SEVERAL_CABLES_LEVELS),
    source="imbalance along the plane, board and cable as one antenna, envelope over cable"
    " layouts; expected is the highest reading while the cables are moved: 2 dB lower to 40 MHz,"
    " 3 (one cable) or 5 dB at 110 MHz, 6 dB from 450 MHz to 1 GHz, the envelope itself above;"
    " standard deviation 8 dB to 40 MHz, 6 or 3.5 dB at 110 MHz, 5 or 3.5 dB from 450 MHz, held"
    " above 1 GHz, from 480 full-wave points on a measuring site to 1 GHz; 324 other points:"
    " expected reads 4 dB high, standard deviation 5 dB",
)
UNDECLARED = (Cable(length_m=1.5),) * 2  # nobody knows how many: the form for several
# What a good filter on all cables is worth: full-wave runs to 1 GHz, nothing known above.
UNDECLARED_FILTER_DB = ((300e6, 10.0), (450e6, 6.0), (1e9, 3.0))
CREDIT_OHM = 500.0  # with the usual 150 ohm the credit is 6 dB more than full-wave runs give


def field_per_forward_ampere(paths: RadiationInputs, frequency_hz: ArrayLike) -> Array:
    """Largest distance times field of board and cables per ampere of forward wave, peak.

    Parameters
    ----------
    paths : RadiationInputs
        N nets. One cable: it may leave either end of the board, the worse counts. Several,
        or None (two of 1.5 m without a filter): largest over the standing wave's phase,
        and the strongest cable counts. Empty: no cables, 0.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray
        Envelope over cable layouts, ``(N, F)``; `up_to_offset_db` and `expected_offset_db`
        make it the worst case and the expected level. [V/A]

    Notes
    -----
    Once per net and frequency. A filter assumed on undeclared cables multiplies the
    result: ``10 ** (-undeclared_filter_db(f) / 20)``.

    Examples
    --------
    >>> one = np.ones((1, 1))
    >>> net = RadiationInputs(
    ...     length_m=0.1 * one, height_m=0.2e-3 * one, permittivity=4.3 * one,
    ...     permittivity_effective=3.2 * one, impedance_ohm=50 * one, side_offset_m=0 * one,
    ...     board_length_m=0.15 * one, board_width_m=0.1 * one, load_reflection=one,
    ...     propagation_per_m=3.75j * one, cables=())
    >>> field_per_forward_ampere(net, np.array([1e8]))
    array([[0.]])
    """
    cables = UNDECLARED if paths.cables is None else paths.cables
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    if not cables:
        return np.zeros(np.broadcast_shapes(frequency_hz.shape, paths.load_reflection.shape))
    voltage = _one_cable if len(cables) == 1 else _several_cables
    return voltage(paths, frequency_hz) * strongest_antenna(paths, cables, frequency_hz)


def expected_offset_db(frequency_hz: ArrayLike, cables: int | None) -> Array:
    """Expected level over the envelope of `field_per_forward_ampere`.

    Parameters
    ----------
    frequency_hz : array_like
        Frequencies, any shape. [Hz]
    cables : int or None
        How many cables; None where nothing is declared, which counts as several.

    Returns
    -------
    numpy.ndarray
        Zero or less: what is added to the envelope to have the highest reading while the
        laboratory moves the cables. [dB]

    Notes
    -----
    Linear in the logarithm of frequency. Above 1 GHz 0: no run on a site reaches there, and
    with absorber in place of the floor boards with cables come within 2 dB of the envelope.
    Below 30 MHz, where nothing is judged, the lowest row holds.

    Examples
    --------
    >>> print(expected_offset_db([30e6, 1e9, 2e9], 1))
    [-2. -6.  0.]
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    return np.where(frequency_hz > SITE_TO_HZ, 0.0, _level(frequency_hz, cables, 1))


def up_to_offset_db(cables: int | None) -> float:
    """Worst case over the envelope of `field_per_forward_ampere`.

    Parameters
    ----------
    cables : int or None
        As for `expected_offset_db`.

    Returns
    -------
    float
        0 for one cable, of which the envelope is known; more for several. [dB]

    Examples
    --------
    >>> up_to_offset_db(1), up_to_offset_db(None)
    (0.0, 2.0)
    """
    return 0.0 if cables == 1 else SEVERAL_UP_TO_DB


def error_db(frequency_hz: ArrayLike, cables: int | None) -> Array:
    """Standard deviation of the expected level.

    Parameters
    ----------
    frequency_hz : array_like
        Frequencies, any shape. [Hz]
    cables : int or None
        As for `expected_offset_db`.

    Returns
    -------
    numpy.ndarray
        Linear in the logarithm of frequency, held above 1 GHz (assumed). [dB]

    Examples
    --------
    >>> print(error_db([30e6, 1e9, 2e9], 1))
    [8. 5. 5.]
    """
    return _level(np.asarray(frequency_hz, dtype=float), cables, 2)


def _level(frequency_hz: Array, cables: int | None, column: int) -> Array:
    """A column of the table for that many cables, its ends held."""
    rows = np.array(ONE_CABLE_LEVELS if cables == 1 else SEVERAL_CABLES_LEVELS)
    return np.asarray(np.interp(np.log(frequency_hz), np.log(rows[:, 0]), rows[:, column]))


def _one_cable(paths: RadiationInputs, frequency_hz: Array) -> Array:
    """Effective voltage with the cable at the worse of both board ends."""
    ends, k, ratio, height = _board(paths, frequency_hz)
    mirrored = imbalance.Ends(
        paths.board_length_m - ends.source_m, paths.board_length_m - ends.load_m
    )
    far, near = (
        imbalance.effective_voltage_one(
            k, positions, paths.board_length_m, ratio, height, paths.end_volts()
        )
        for positions in (ends, mirrored)
    )
    return np.maximum(far, near)


def _several_cables(paths: RadiationInputs, frequency_hz: Array) -> Array:
    """Effective voltage with any number of cables at any place."""
    ends, k, ratio, height = _board(paths, frequency_hz)
    return imbalance.effective_voltage_any(
        k, ends, paths.board_length_m, ratio, height, paths.end_volts()
    )


def _board(
    paths: RadiationInputs, frequency_hz: Array
) -> tuple[imbalance.Ends, Array, Array, imbalance.ImbalanceHeight]:
    """Electrical end positions, wave number, impedance ratio and imbalance of each net."""
    drawn = imbalance.centred_ends(paths.length_m, paths.board_length_m)
    if paths.start_m is not None and paths.end_m is not None:
        drawn = imbalance.Ends(paths.start_m, paths.end_m)
    ends = imbalance.Ends(
        *(imbalance.electrical_position_m(x, paths.board_length_m) for x in drawn)
    )
    height = imbalance.imbalance_height(
        paths.impedance_ohm,
        paths.permittivity_effective,
        paths.permittivity,
        paths.height_m,
        paths.side_offset_m,
        paths.board_width_m,
    )
    ratio = imbalance.impedance_ratio(paths.board_length_m, paths.board_width_m)
    return ends, 2 * np.pi * frequency_hz / SPEED_OF_LIGHT_M_PER_S, ratio, height


def strongest_antenna(
    paths: RadiationInputs, cables: Sequence[Cable], frequency_hz: Array
) -> Array:
    """Largest antenna factor after each cable's own attenuation.

    A cable that ends free counts by its own length, beside long ones too; where all end
    free, two together make the longest wire.
    """
    lengths_m = sorted((cable.length_m for cable in cables), reverse=True)
    all_float = all(cable.floating for cable in cables)
    ratio = imbalance.impedance_ratio(paths.board_length_m, paths.board_width_m)
    strongest = np.zeros(())
    for cable in cables:
        factor = imbalance.antenna_factor(frequency_hz, cable.length_m)
        if cable.floating:
            wire_m = sum(lengths_m[:2]) if all_float else cable.length_m
            factor = imbalance.floating_antenna_factor(
                frequency_hz, wire_m, paths.board_length_m, ratio
            )
        strongest = np.maximum(strongest, factor * 10 ** (-np.asarray(cable.attenuation_db) / 20))
    return strongest


def filter_credit_db(impedance_ohm: ArrayLike) -> Array:
    r"""Attenuation by a filter part in all wires of a cable, :math:`20\lg(1 + |Z|/500)`.

    Parameters
    ----------
    impedance_ohm : array_like
        Impedance of the part, complex or its magnitude. [ohm]

    Returns
    -------
    numpy.ndarray
        Attenuation of that cable's common mode. [dB]

    Notes
    -----
    500 ohm keeps the error of the cable model as it is in full-wave runs of 250 ohm to
    1 kohm; 150 ohm would call boards good that are not.

    Examples
    --------
    >>> print(f"{filter_credit_db(500j):.2f} dB")
    6.02 dB
    """
    return 20 * np.log10(1 + np.abs(impedance_ohm) / CREDIT_OHM)


def table_at(frequency_hz: ArrayLike, table: float | Sequence[tuple[float, float]]) -> Array:
    """Value of a declared table at frequencies, linear in the logarithm of frequency.

    Parameters
    ----------
    frequency_hz : array_like
        Frequencies, any shape. [Hz]
    table : float or sequence of (frequency, value)
        One number for all frequencies, or rows by rising frequency. [-] or [Hz], [-]

    Returns
    -------
    numpy.ndarray
        Value; NaN outside the rows: nothing is extrapolated.

    Examples
    --------
    Half way in the logarithm, and past the last row.

    >>> print(table_at([100e6, 300e6, 2e9], [(30e6, 0.0), (300e6, 10.0), (1e9, 4.0)]).round(2))
    [ 5.23 10.     nan]
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    if isinstance(table, int | float):
        return np.full(frequency_hz.shape, float(table))
    rows_hz, values = np.asarray(table, dtype=float).T
    inside = (frequency_hz >= rows_hz[0]) & (frequency_hz <= rows_hz[-1])
    value = np.interp(np.log(frequency_hz), np.log(rows_hz), values)
    return np.where(inside, value, np.nan)


def undeclared_filter_db(frequency_hz: ArrayLike) -> Array:
    """Attenuation by a good filter on all cables, for boards that declare nothing.

    Parameters
    ----------
    frequency_hz : array_like
        Frequencies. [Hz]

    Returns
    -------
    numpy.ndarray
        10 dB to 300 MHz, 6 at 450, 3 at 1 GHz (linear in the logarithm), 0 above. [dB]

    Notes
    -----
    Above 1 GHz no filter was ever looked at, so none is credited.

    Examples
    --------
    >>> print(undeclared_filter_db([50e6, 450e6, 2e9]))
    [10.  6.  0.]
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    flat_to_hz = UNDECLARED_FILTER_DB[0][0]
    inside = table_at(np.maximum(frequency_hz, flat_to_hz), UNDECLARED_FILTER_DB)
    return np.where(frequency_hz > UNDECLARED_FILTER_DB[-1][0], 0.0, inside)
