"""Where the return current of a trace flows in its plane."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]


def return_current_share(half_width_m: ArrayLike, height_m: ArrayLike) -> Array:
    r"""Share of the return current within a strip of the plane under a trace.

    .. math:: \frac2\pi \arctan\frac{x}{h}

    Parameters
    ----------
    half_width_m : array_like
        Half the width of the strip, centred under the trace, x. [m]
    height_m : array_like
        Height of the trace over the plane, h. [m]

    Returns
    -------
    numpy.ndarray
        Share, 0 to 1. [-]

    Notes
    -----
    Narrow trace, wide plane, from some kilohertz on: the current flows where the loop is
    smallest. The rest is what a slot or a near side of the plane disturbs.

    Examples
    --------
    >>> print(f"{return_current_share(3e-4, 1e-4):.1%}")
    79.5%

    References
    ----------
    .. [1] C. R. Paul, "Introduction to Electromagnetic Compatibility", 2nd ed., Wiley, 2006,
       sec. 4.3 (a line current over a plane by its image).
    """
    share = np.arctan2(np.asarray(half_width_m, dtype=float), np.asarray(height_m, dtype=float))
    return np.asarray(2 / np.pi * share)
