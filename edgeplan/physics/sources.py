"""Driver, stub and series resistor in closed form per candidate."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.lines import KnownLines, decay, reciprocal
from edgeplan.physics.network import Trees

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Drive:
    """Candidates of N nets: C candidates each, S intrinsic ramps each.

    Output resistance, series resistor and pad capacitance are (N, C); ``ramp_s`` (N, S)
    holds 0-100 % times of the source's own edge and ``ramp_index`` (N, C) the one that a
    candidate uses; where ``exists`` (N, C) is False nothing is computed.
    """

    resistance_ohm: Array
    series_ohm: Array
    pad_farad: Array
    ramp_s: Array
    ramp_index: Array
    exists: Array

    def take(self, index: ArrayLike) -> "Drive":
        """Candidates of the given nets, in their order.

        Parameters
        ----------
        index : array_like
            Indices of nets (M,). [-]

        Returns
        -------
        Drive
            Of M nets. [-]

        Examples
        --------
        >>> two = drive_of([[10.0], [20.0]], ramp_s=1e-9)
        >>> two.take([1]).resistance_ohm.tolist()
        [[20.0]]
        """
        index = np.asarray(index, dtype=np.intp)
        return Drive(
            resistance_ohm=self.resistance_ohm[index],
            series_ohm=self.series_ohm[index],
            pad_farad=self.pad_farad[index],
            ramp_s=self.ramp_s[index],
            ramp_index=self.ramp_index[index],
            exists=self.exists[index],
        )

    def candidate_ramp_s(self) -> Array:
        """0-100 % time of every candidate (N, C). [s].

        >>> drive_of([[10.0, 20.0]], ramp_s=1e-9).candidate_ramp_s().tolist()
        [[1e-09, 1e-09]]
        """
        return np.take_along_axis(self.ramp_s, np.asarray(self.ramp_index, np.intp), axis=1)


def drive_of(
    resistance_ohm: ArrayLike,
    *,
    ramp_s: ArrayLike,
    series_ohm: ArrayLike = 0.0,
    pad_farad: ArrayLike = 0.0,
) -> Drive:
    """Candidates that each have their own ramp; everything broadcasts to (N, C).

    Parameters
    ----------
    resistance_ohm, series_ohm : array_like
        Output resistance and series resistor. [ohm]
    ramp_s : array_like
        0-100 % time of the source's edge. [s]
    pad_farad : array_like
        Capacitance of the driver's pad. [F]

    Returns
    -------
    Drive
        All candidates exist. [-]

    Examples
    --------
    >>> drive_of([[10.0, 20.0]], ramp_s=1e-9).exists.shape
    (1, 2)
    """
    values = [
        np.array(value, dtype=float)
        for value in np.broadcast_arrays(
            np.atleast_2d(resistance_ohm), series_ohm, pad_farad, ramp_s
        )
    ]
    shape = values[0].shape
    return Drive(
        resistance_ohm=values[0],
        series_ohm=values[1],
        pad_farad=values[2],
        ramp_s=values[3],
        ramp_index=np.broadcast_to(np.arange(shape[1]), shape),
        exists=np.ones(shape, dtype=bool),
    )


def raised_cosine_spectrum(x: ArrayLike) -> Array:
    r"""Laplace transform of the slope of a raised-cosine edge of unit height.

    .. math:: P(x) = \frac{1 + e^{-x}}{2}\,\frac{\pi^2}{x^2 + \pi^2}, \qquad x = s\,t_e

    Parameters
    ----------
    x : array_like
        Complex frequency times the 0-100 % time (..., K). [-]

    Returns
    -------
    numpy.ndarray
        Spectrum, 1 at x = 0. [-]

    Notes
    -----
    At x = +-j pi (f = 1/(2 te)) both factors fail and the limit is -+j pi/4.

    Examples
    --------
    >>> print(np.abs(raised_cosine_spectrum([0, 1j * np.pi, 3j * np.pi])).round(4))
    [1.     0.7854 0.    ]

    References
    ----------
    .. [1] H. Dubner and J. Abate, "Numerical inversion of Laplace transforms by relating them
       to the finite Fourier cosine transform", J. ACM 15, 1968 (transform on a damped axis).
    """
    x = np.atleast_1d(x)
    x = x if x.dtype.kind == "c" else x.astype(complex)
    real = x.real.dtype
    bottom = x * x + real.type(np.pi**2)
    narrow = 1e-5 if real == np.float64 else 1e-3
    near = (np.abs(x.real) < narrow) & (np.abs(np.abs(x.imag) - np.pi) < narrow)
    bottom[near] = 1
    shape = (1 + decay(x)) * reciprocal(bottom)
    shape *= real.type(np.pi**2 / 2)
    if near.any():
        side = np.sign(x.imag[near])
        offset = x[near] - 1j * np.pi * side
        shape[near] = -0.25j * np.pi * side * (1 - offset / 2 - offset / (2j * np.pi * side))
    return shape


def linear_spectrum(x: ArrayLike) -> Array:
    r"""Laplace transform of the slope of a linear ramp of unit height, (1 - exp(-x))/x.

    Parameters
    ----------
    x : array_like
        Complex frequency times the 0-100 % time, not 0. [-]

    Returns
    -------
    numpy.ndarray
        Spectrum. [-]

    Notes
    -----
    Its corners ring in a finite transform: up to 16 mV/V at ten samples a ramp.

    Examples
    --------
    The first null of a ramp lies at f = 1/te:

    >>> print(f"{abs(linear_spectrum(2j * np.pi)):.4f}")
    0.0000
    """
    x = np.asarray(x)
    x = x if x.dtype.kind == "c" else x.astype(complex)
    return np.asarray((1 - decay(x)) / x)


EDGE_SHAPES: dict[str, Callable[[ArrayLike], Array]] = {
    "raised cosine": raised_cosine_spectrum,
    "linear": linear_spectrum,
}


def stub_chain(
    trees: Trees, s: Array, s_row: Array, lines: KnownLines | None = None
) -> tuple[Array, Array, Array]:
    """Chain parameters A (= D), B, C of the line between driver pad and series resistor.

    Parameters
    ----------
    trees : Trees
        G trees that have a stub. [-]
    s : numpy.ndarray
        Complex frequencies (U, K). [rad/s]
    s_row : numpy.ndarray
        Row of each tree (G,). [-]
    lines : KnownLines, optional
        What is known of the lines from calls before.

    Returns
    -------
    tuple of numpy.ndarray
        A [-], B [ohm] and C [S], each (G, K).

    Examples
    --------
    A quarter wavelength has A = 0:

    >>> from edgeplan.physics.network import point_to_point
    >>> trees = point_to_point([0.1], stub_length_m=0.01)
    >>> chain = stub_chain(trees, np.array([[2j * np.pi / 240e-12]]), np.array([0]))
    >>> print(f"{abs(chain[0].item()):.4f} {abs(chain[1].item()):.1f} ohm")
    0.0000 50.0 ohm
    """
    index, gamma, admittance = (lines or KnownLines())(trees.stub_line, s, s_row)
    length = trees.stub_length_m[:, None].astype(s.real.dtype)
    once = decay(gamma[index] * length)
    back = reciprocal(once)
    sinh = (back - once) / 2
    characteristic = admittance[index]
    return (back + once) / 2, sinh * reciprocal(admittance)[index], sinh * characteristic


def source_terms(
    admittance: Array,
    s: Array,
    *,
    chain: tuple[Array, Array, Array] | None = None,
    pad_farad: Array | None = None,
) -> Array:
    r"""Terms of the ratio D of source voltage to voltage at node 0, linear in the candidate.

    With chain parameters A, B, C of the stub and admittance Y at node 0:

    .. math::

        D = P_0 + R_s P_1 + R_o P_2 + R_o R_s P_3, \quad
        P_0 = A + BY, \quad P_1 = AY, \quad
        P_2 = s C_c P_0 + C + AY, \quad P_3 = (s C_c A + C) Y

    Parameters
    ----------
    admittance : numpy.ndarray
        Y of the tree (G, K). [S]
    s : numpy.ndarray
        Complex frequencies (G, K) or (K,). [rad/s]
    chain : tuple of numpy.ndarray, optional
        A, B, C of the stub (G, K); none means no stub. [-], [ohm], [S]
    pad_farad : numpy.ndarray, optional
        C_c of each tree (G,). Without it the pad's two terms
        s P_0 (to be weighted with R_o C_c) and s P_1 (R_o R_s C_c) follow as the
        fifth and sixth. [F]

    Returns
    -------
    numpy.ndarray
        Terms (G, 4, K) or (G, 6, K), to be weighted by :func:`source_weights`.

    Examples
    --------
    10 ohm and 40 ohm into a conductance of 1/50 S divide by 2:

    >>> terms = source_terms(np.array([[0.02 + 0j]]), np.array([1e9j]), pad_farad=np.zeros(1))
    >>> print((np.array([1, 40, 10, 400]) @ terms[0]).real)
    [2.]

    References
    ----------
    .. [1] D. M. Pozar, "Microwave Engineering", 4th ed., 2012, table 4.1 (ABCD parameters).
    """
    terms = np.empty((len(admittance), 6 if pad_farad is None else 4, s.shape[-1]), s.dtype)
    if chain is None:
        terms[:, 0], terms[:, 1], terms[:, 2], terms[:, 3] = 1, admittance, admittance, 0
    else:
        a, b, c = chain
        terms[:, 0] = a + b * admittance
        terms[:, 1] = a * admittance
        terms[:, 2] = c + terms[:, 1]
        terms[:, 3] = c * admittance
    if pad_farad is None:
        terms[:, 4:] = s[..., None, :] * terms[:, :2]
    else:
        pad = s * pad_farad[:, None].astype(s.real.dtype)
        terms[:, 2:] += pad[:, None] * terms[:, :2]
    return terms


def source_weights(
    resistance_ohm: Array, series_ohm: Array, pad_farad: Array | None = None
) -> Array:
    """Weights of the terms of :func:`source_terms`, one row a candidate.

    Parameters
    ----------
    resistance_ohm, series_ohm : numpy.ndarray
        Output resistance and series resistor, any shape. [ohm]
    pad_farad : numpy.ndarray, optional
        Pad capacitance where it differs among the candidates of a net. [F]

    Returns
    -------
    numpy.ndarray
        Weights, the shape of the arguments with 4 or 6 appended.

    Examples
    --------
    >>> source_weights(np.array(10.0), np.array(40.0)).tolist()
    [1.0, 40.0, 10.0, 400.0]
    """
    both = resistance_ohm * series_ohm
    weights = [np.ones_like(both), series_ohm, resistance_ohm, both]
    if pad_farad is not None:
        weights += [resistance_ohm * pad_farad, both * pad_farad]
    return np.stack(weights, axis=-1)
