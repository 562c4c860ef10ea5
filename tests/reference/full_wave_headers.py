"""What the headers of the full-wave tables say of how each was made."""

import fit_cases as fit

_WIRES = """wire radius = spacing / 2 pi; trace: wire of radius height / 10 with a vertical wire
at each end; cables: radius 1 mm, segments growing up to 1/20 wavelength. line_ohm: of the wire
over a plane; port_ohm, port_length_m: of the line as this reference has it (grid, end wires),
by its port admittances at 100 MHz."""
_COARSE = f"""Board: wire grid, pitch 1.5 trace heights (15 mm), half a height beside the trace;
{_WIRES}"""
_FINE = f"""Board: wire grid, rows 1.5 trace heights apart (4.5 or 7.5 mm), half a height beside the
trace, columns one height apart;
{_WIRES}"""
_PLACES = """Perfect floor, board 0.8 m over it, receiver 3 m from the board's middle, near field;
heights 1 to 4 m in steps of 0.2 m, azimuths every 22.5 (to 150 MHz), 11.25 (to 400 MHz), 5.6
degrees; the larger of the horizontal and the vertical part."""
_LAYOUTS = "level, draped to 0.4 m, down to the floor and bonded, or down and along it"
_SITE = f"""{_PLACES} Twelve random layouts: cables
{_LAYOUTS}; up to 1.5 m."""
ABOUT = {
    "trace": """Traces over an infinite perfect plane in air: wire of radius height / 10, three
segments per height, a vertical wire at each end. field_v: distance times the larger field
component, largest over directions (2 degrees by 4 degrees).""",
    "one_cable": f"""{_FINE}
One straight cable along x from the end x = length, in free space. field_v: distance times the
larger component, largest over directions (5 degrees) and cable lengths up to 2 m, no further
apart than 0.04 wavelengths over the last 1.5 wavelengths; at_cable_m: where, by the mesh of the
other tables, which gives coarse_v_per_height [V/m] with a trace twice as high.""",
    "two_cables": f"""{_COARSE}
Two and three cables in free space, straight, 0.5 to 2 m, 16 random layouts. field_v: distance
times the larger component, largest over directions (5 degrees) and layouts; median_v: of the
layouts. The sum of all layouts is not covered: the highest of 16 lies below it.""",
    "filter": f"""{_COARSE}
{_SITE}
An impedance in the first segment of one cable or of all. field_v_per_m: highest reading of the
layouts; bare_v_per_m: the same without it.""",
    "site": f"""{_COARSE}
{_SITE}
layout_N_v_per_m: highest reading of one layout; field_v_per_m: of all.""",
    "site_fit": f"""Served to choose the expected level of the cables; told as an error nowhere.
Board: wire grid, pitch 1.5 trace heights (9, 12 or 15 mm), half a height beside the trace;
{_WIRES}
{_PLACES} Every point has its own random
layouts, {fit.LAYOUTS} with cables up to 1.5 m (short_v_per_m: highest; half_v_per_m: of the first
half) and below 100 MHz {fit.LONG_LAYOUTS} more with cables up to 2.2 m, none farther than 1.4 m
towards the receiver; cables do not touch:
{_LAYOUTS}.
field_v_per_m: highest of all, median_v_per_m: median. Convergence: of the highest of 8 layouts.""",
}
