"""Capacitance of printed lines by finite differences, a second method beside the charged panels.

    cd tests/reference
    python finite_differences_of_lines.py > lines_by_finite_differences.csv

Right half of the cross-section, graded meshes whose lines pass through every corner, energy of the
field. The energy of a finite mesh is too high; two meshes are extrapolated to none. Nothing of the
program is used.
"""

import sys
from itertools import pairwise

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.linalg import spsolve

MESH = 2  # of the coarser mesh: steps grow by 1.3 ** (1/MESH)
SPEED_OF_LIGHT = 299_792_458.0
VACUUM = 8.8541878128e-12
HEADER = """
# Printed lines by finite differences, made for this table by finite_differences_of_lines.py;
# nothing of the program enters. Graded meshes, energy of the field, two meshes extrapolated;
# good to about 0.3 %, worst at bare corners of copper on a laminate.
# Lengths in um. Spacing 0: a single strip. A cover lies flat over the laminate up to cover_um above
# it; a coating follows copper and laminate. Gap 0: open above. Mode 1 is even, -1 odd.
"""
COLUMNS = (
    "width_um thickness_um height_um permittivity cover_um cover_permittivity coating_um "
    "coating_permittivity gap_um spacing_um mode impedance_ohm permittivity_effective"
)
CASES = [  # w, t, h, er, cover, er, coating, er, gap, spacing
    (180, 35, 110, 4.2, 0, 1.0, 0, 1.0, 0, 0),
    (180, 35, 110, 4.2, 0, 1.0, 20, 3.5, 0, 0),
    (100, 50, 80, 4.4, 0, 1.0, 30, 3.8, 0, 0),
    (400, 18, 200, 3.6, 0, 1.0, 15, 3.3, 0, 0),
    (150, 18, 120, 4.2, 100, 4.2, 0, 1.0, 0, 0),
    (150, 18, 120, 4.6, 200, 3.4, 0, 1.0, 0, 0),
    (150, 18, 150, 4.6, 268, 3.0, 0, 1.0, 418, 0),
    (120, 35, 100, 3.2, 335, 4.5, 0, 1.0, 435, 0),
    (150, 35, 110, 4.2, 0, 1.0, 0, 1.0, 0, 150),
    (150, 35, 110, 4.2, 0, 1.0, 20, 3.5, 0, 150),
    (120, 18, 150, 4.2, 318, 4.2, 0, 1.0, 468, 100),
]


def mesh(corners, finest, growth):
    """Lines through every corner, fine at each and growing between them."""
    lines = [corners[0]]
    for start, stop in pairwise(corners):
        sizes, left = [], stop - start
        half, size = left / 2, finest
        while sum(sizes) < half:
            sizes.append(size)
            size *= growth
        steps = np.array(sizes + sizes[::-1])
        lines.extend(start + np.cumsum(steps) * left / steps.sum())
    return np.array(lines)


def energy(x, y, er, copper, zero_sides):
    """Capacitance over the permittivity of vacuum of one half, from the energy at one volt."""
    nx, ny = len(x), len(y)
    dx, dy = np.diff(x), np.diff(y)
    number = np.arange(nx * ny).reshape(nx, ny)
    wide = np.zeros((nx - 1, ny))  # conductance of links along x
    wide[:, :-1] += er * dy / 2
    wide[:, 1:] += er * dy / 2
    wide /= dx[:, None]
    tall = np.zeros((nx, ny - 1))
    tall[:-1] += er * dx[:, None] / 2
    tall[1:] += er * dx[:, None] / 2
    tall /= dy
    one = np.concatenate([number[:-1].ravel(), number[:, :-1].ravel()])
    two = np.concatenate([number[1:].ravel(), number[:, 1:].ravel()])
    link = np.concatenate([wide.ravel(), tall.ravel()])
    rows = np.concatenate([one, two, one, two])
    cols = np.concatenate([one, two, two, one])
    matrix = coo_matrix((np.concatenate([link, link, -link, -link]), (rows, cols))).tocsr()
    volt = np.where(copper, 1.0, 0.0).ravel()
    free = ~(copper | zero_sides).ravel()
    volt[free] = spsolve(matrix[free][:, free], -(matrix[free] @ volt))
    return volt @ (matrix @ volt)


def capacitances(case, mode, finest, growth):
    """With and without dielectrics on one mesh; both ways to end the box are averaged."""
    w, t, h, er, cover, er_cover, coating, er_coating, gap, spacing = case
    x_0, x_1 = (spacing / 2, spacing / 2 + w) if spacing else (0.0, w / 2)
    top = gap or 60 * (h + t)
    side = x_1 + 60 * (h + t) if not gap else x_1 + 8 * gap
    xs = {0.0, x_0, x_1, side}
    ys = {0.0, h, h + t, top, h + cover}
    if coating:
        xs |= {x_1 + coating} | ({x_0 - coating} if x_0 > coating else set())
        ys |= {h + coating, h + coating + t}
    x = mesh(sorted(xs), finest, growth)
    y = mesh(sorted(ys), finest, growth)
    mx, my = ((x[1:] + x[:-1]) / 2)[:, None], ((y[1:] + y[:-1]) / 2)[None, :]
    fill = np.where(my < h, er, 1.0) + 0 * mx
    fill = np.where((my >= h) & (my < h + cover), er_cover, fill)
    if coating:
        over = (my >= h) & (my < h + coating)
        on = (mx > x_0 - coating) & (mx < x_1 + coating) & (my >= h) & (my < h + t + coating)
        fill = np.where(over | on, er_coating, fill)
    copper = ((x[:, None] >= x_0) & (x[:, None] <= x_1)) & ((y >= h) & (y <= h + t))
    found = []
    for ended in (True, False):
        zero = np.zeros(copper.shape, dtype=bool)
        zero[:, 0] = True
        zero[:, -1] = bool(gap) or ended
        zero[-1] = ended
        if mode < 0:
            zero[0] = True
        found.append([energy(x, y, e, copper, zero) for e in (fill, np.ones(fill.shape))])
    return np.mean(found, axis=0)


def row(case, mode):
    """Impedance and effective permittivity, extrapolated from two meshes."""
    size = min(case[1], 30) / 12
    coarse, fine = (capacitances(case, mode, size / k**2, 1.3 ** (1 / k)) for k in (MESH, 2 * MESH))
    filled, air = (4 * fine - coarse) / 3
    strips = 1 if case[-1] else 2
    ohm = 1 / (SPEED_OF_LIGHT * VACUUM * strips * np.sqrt(filled * air))
    return ohm, filled / air


def main():
    """Write the table."""
    lines = [HEADER.strip(), COLUMNS.replace(" ", ",")]
    for case in CASES:
        for mode in (1, -1) if case[-1] else (1,):
            ohm, permittivity = row(case, mode)
            sizes = ",".join(f"{v:g}" for v in (*case, mode))
            lines.append(f"{sizes},{ohm:.3f},{permittivity:.4f}")
    sys.stdout.write("\n".join(lines) + "\n")


if __name__ == "__main__":
    main()
