"""Propagation on a lossy printed line, causal, at any complex frequency."""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]

REFERENCE_RAD_PER_S = 2 * np.pi * 1e9  # delay and loss tangent are stated at 1 GHz
RELAXATION_LOW_RAD_PER_S = 2 * np.pi * 1e4  # band of the Debye spread, far outside our edges
RELAXATION_HIGH_RAD_PER_S = 2 * np.pi * 1e12


class LineConstants(NamedTuple):
    """Constants of a line, per segment or per class of lines; arrays of one shape.

    ``delay_s_per_m`` and ``loss_tangent`` (of the filled line, 0 or more) belong to 1 GHz.
    """

    impedance_ohm: Array
    delay_s_per_m: Array
    resistance_dc_ohm_per_m: Array
    skin_ohm_per_m_rthz: Array
    loss_tangent: Array


def dielectric_factor(s: ArrayLike, loss_tangent: ArrayLike) -> Array:
    r"""Complex capacitance of a lossy line over its lossless capacitance at 1 GHz.

    .. math:: k \left[1 + a \ln\frac{w_2 + s}{w_1 + s}\right]

    with a and k such that the real part is 1 and the loss tangent is as stated at 1 GHz.

    Parameters
    ----------
    s : array_like
        Complex frequency, real part 0 or more. [rad/s]
    loss_tangent : array_like
        Loss tangent of the filled line at 1 GHz, 0 or more; broadcasts with ``s``. [-]

    Returns
    -------
    numpy.ndarray
        Relative capacitance, complex. [-]

    Notes
    -----
    Causal, for loss tangents up to about 0.1. The band ends are 10 kHz and 1 THz.

    Examples
    --------
    At 1 GHz the factor is 1 - j tan(d):

    >>> print(f"{dielectric_factor(2j * np.pi * 1e9, 0.02):.4f}")
    1.0000-0.0200j

    References
    ----------
    .. [1] A. R. Djordjevic et al., "Wideband frequency-domain characterization of FR-4 and
       time-domain causality", IEEE Trans. EMC 43, 2001, pp. 662-667.
    """
    low, high = RELAXATION_LOW_RAD_PER_S, RELAXATION_HIGH_RAD_PER_S
    loss = np.asarray(loss_tangent, dtype=float)
    at_reference = np.log((high + 1j * REFERENCE_RAD_PER_S) / (low + 1j * REFERENCE_RAD_PER_S))
    spread = loss / (-at_reference.imag - loss * at_reference.real)
    logarithm = np.log((high + np.asarray(s)) / (low + np.asarray(s)))
    return np.asarray((1 + spread * logarithm) / (1 + spread * at_reference.real))


def propagation(
    s: ArrayLike, line: LineConstants, filling: Array | None = None
) -> tuple[Array, Array]:
    r"""Propagation constant and characteristic impedance.

    .. math::

        Z = s L + \sqrt{R_{dc}^2 + s\,k_{hf}^2/\pi}, \qquad Y = s C\,\epsilon(s), \qquad
        \gamma = \sqrt Z \sqrt Y, \quad Z_c = \sqrt Z / \sqrt Y

    Parameters
    ----------
    s : array_like
        Complex frequency other than 0, real part 0 or more; broadcasts with the
        fields of ``line``. [rad/s]
    line : LineConstants
        Impedance [ohm], delay [s/m], resistance at dc [ohm/m], skin constant k_hf with
        R = k_hf sqrt(f) [ohm/m/sqrt(Hz)] and loss tangent [-].
    filling : numpy.ndarray, optional
        :func:`dielectric_factor` of the line where it is known. [-]

    Returns
    -------
    gamma_per_m : numpy.ndarray
        Propagation constant. [1/m]
    impedance_ohm : numpy.ndarray
        Characteristic impedance. [ohm]

    Notes
    -----
    Quasi-static: no dispersion of microstrip, no roughness of copper. The two roots
    are taken one by one: the root of the product would cross its branch cut.

    Examples
    --------
    A lossless line of 50 ohm and 6 ns/m at 1 GHz turns 2 pi 6 radians per metre:

    >>> line = LineConstants(*np.array([50.0, 6e-9, 0.0, 0.0, 0.0]))
    >>> gamma, impedance = propagation(2j * np.pi * 1e9, line)
    >>> print(f"{gamma.imag / (2 * np.pi):.3f} wavelengths/m, {impedance.real:.1f} ohm")
    6.000 wavelengths/m, 50.0 ohm

    References
    ----------
    .. [1] A. R. Djordjevic et al., IEEE Trans. EMC 43, 2001, pp. 662-667.
    """
    s = np.asarray(s, dtype=complex)
    inductance = np.asarray(line.impedance_ohm) * line.delay_s_per_m
    capacitance = np.asarray(line.delay_s_per_m) / line.impedance_ohm
    skin_squared = np.square(line.skin_ohm_per_m_rthz) / np.pi
    series = s * inductance + np.sqrt(np.square(line.resistance_dc_ohm_per_m) + s * skin_squared)
    root_series = np.sqrt(series)
    filling = dielectric_factor(s, line.loss_tangent) if filling is None else filling
    root_shunt = np.sqrt(s * capacitance * filling)
    return root_series * root_shunt, root_series / root_shunt


def decay(exponent: Array) -> Array:
    """Return exp(-exponent) of complex numbers by real functions, which run several times faster.

    >>> print(f"{complex(decay(np.array(1 + 1j * np.pi))):.4f}")
    -0.3679-0.0000j
    """
    result = np.empty_like(exponent)
    size, angle = np.exp(-exponent.real), exponent.imag.copy()
    np.multiply(size, np.cos(angle), out=result.real)
    np.multiply(-size, np.sin(angle), out=result.imag)
    return result


def reciprocal(values: Array) -> Array:
    """Return 1/z of complex numbers as ``conj(z)/|z|^2``, faster than a complex division.

    >>> print(reciprocal(np.array([3 + 4j])))
    [0.12-0.16j]
    """
    result = np.conj(values)
    size = result * (1 + 1j)
    size *= values  # |z|^2 in both parts, so that the division below runs over real numbers
    parts = result.view(result.real.dtype)
    parts /= size.view(parts.dtype)
    return np.asarray(result)


class KnownLines:
    """Propagation of lines on rows of frequencies, computed once and kept for later calls.

    Called with lines of M segments, frequencies (U, K) and the row of each segment, it
    returns the index (M,) into its two results, propagation constant [1/m] and
    characteristic admittance [S], each (Q, K). They are computed in double precision and
    kept in that of the frequencies.

    >>> line = LineConstants(*np.array([[50.0, 50.0], [6e-9, 6e-9], *np.zeros((3, 2))]))
    >>> known = KnownLines()
    >>> index, gamma, admittance = known(line, np.array([[1e9j, 2e9j]]), np.array([0, 0]))
    >>> index.tolist(), gamma.shape, admittance[0].real.round(3).tolist()
    ([0, 0], (1, 2), [0.02, 0.02])
    """

    most = 8192  # rows kept, 17 MB at 256 samples; a board with more hardly repeats its lines

    def __init__(self) -> None:
        self.rows: dict[tuple[bytes, bytes], tuple[Array, Array]] = {}

    def __call__(self, line: LineConstants, s: Array, s_row: Array) -> tuple[Array, Array, Array]:
        """Look up what is known and compute the rest."""
        first, index = _distinct((np.asarray(s_row), *line))
        kind = np.stack([np.asarray(field)[first] for field in line], axis=1).astype(float)
        row = np.asarray(s_row)[first]
        of_row = [frequencies.tobytes() for frequencies in s]
        keys = [(of_row[r], own.tobytes()) for r, own in zip(row, kind, strict=True)]
        known = {key: self.rows[key] for key in keys if key in self.rows}
        new = [i for i, key in enumerate(keys) if key not in known]
        lines = LineConstants(*kind[new].T[..., None])
        some, same = _distinct((row[new], lines.loss_tangent[:, 0]))
        filling = dielectric_factor(s[row[new][some]], lines.loss_tangent[some])[same]
        gamma, impedance = propagation(s[row[new]], lines, filling)
        found = (gamma.astype(s.dtype), reciprocal(impedance).astype(s.dtype))
        known.update(zip([keys[i] for i in new], zip(*found, strict=True), strict=True))
        if len(self.rows) + len(new) > self.most:
            self.rows.clear()
        if len(known) <= self.most:
            self.rows.update(known)
        pairs = [known[key] for key in keys]
        shape = (len(pairs), s.shape[1])
        gamma, admittance = (
            np.concatenate(part).reshape(shape) for part in zip(*pairs, strict=True)
        )
        return index, gamma, admittance


def _distinct(columns: tuple[Array, ...]) -> tuple[Array, Array]:
    """First row of each distinct row of a table given by columns, and the group of every row."""
    order = np.lexsort(columns)
    new = np.zeros(len(order), dtype=bool)
    new[:1] = True
    for column in columns:
        ordered = column[order]
        new[1:] |= ordered[1:] != ordered[:-1]
    index = np.empty(len(order), dtype=np.intp)
    index[order] = np.cumsum(new) - 1
    return order[new], index
