"""Files of invented drivers: tables and waveforms made by integrating a circuit with scipy.

The driver is two transistors of the square-law kind that hand over to each other as a raised
cosine, on a pad of some capacitance. All columns follow from three supplies and strengths.
"""

from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp

# One component with everything that is read: resistors of 25 ohm up and 20 ohm down, straight
# ramps of 1 ns into 50 ohm.
REGULAR = """\
[IBIS Ver]     3.2
[File Name]    qx1.ibs
[Component]    QX-1
[Manufacturer] invented
[Package]
R_pkg  50m    40m    60m
L_pkg  2.0nH  1.0nH  3.0nH
C_pkg  0.5pF  0.4pF  0.6pF
[Pin]  signal_name  model_name  R_pin  L_pin  C_pin
A1     DQ0          dq          60m    2.2nH  0.7pF
A2     DQ1          dq          NA     NA     NA
A3     CLK          in
A4     VDD          POWER
[Model Selector] dq
full   all of it
half   one half of it
[Model] full
Model_type  I/O
Polarity    Non-Inverting
Enable      Active-Low
Vinl = 0.8V
Vinh = 2.0V
Vmeas = 1.5V
Cref = 30pF
C_comp  5.0pF  4.0pF  6.0pF
[Temperature Range]  25  85  0
[Voltage Range]  3.3V  3.0V  3.6V
[Pulldown]
-3.3  -165mA  -132mA  -206mA
 0.0    0mA     0mA     0mA
 6.6   330mA   264mA   412mA
[Pullup]
-3.3   132mA   110mA   165mA
 0.0    0mA     0mA     0mA
 6.6  -264mA  -220mA  -330mA
[GND Clamp]
-3.3  -1mA  NA  NA
 0.0   0    NA  NA
[POWER Clamp]
-3.3   1mA  NA  NA
 0.0   0    NA  NA
[Ramp]
dV/dt_r  1.32/0.60n  1.12/0.61n  1.54/0.59n
dV/dt_f  1.41/0.60n  1.20/0.61n  1.64/0.59n
R_load = 50
[Rising Waveform]
R_fixture = 50
V_fixture = 0.0
0.0n  0.0  0.0  0.0
1.0n  2.2  1.88 2.57
9.0n  2.2  1.88 2.57
[Falling Waveform]
R_fixture = 50
V_fixture = 3.3
V_fixture_min = 3.0
V_fixture_max = 3.6
0.0n  3.3  3.0  3.6
1.0n  0.94 1.0  0.87
9.0n  0.94 1.0  0.87
[Model] in
Model_type Input
C_comp 3pF 2pF 4pF
[End]
"""
COLUMNS = ("typ", "min", "max")


@dataclass(frozen=True)
class Corner:
    """Supply, triode resistance and saturation current of both transistors, handover, pad."""

    supply_v: float = 3.3
    ohm: float = 20.0
    saturation_a: float = 0.08
    handover_s: float = 1e-9
    pad_f: float = 4e-12

    def transistor_a(self, volt):
        """Current of a square-law transistor over its voltage; linear for negative ones."""
        knee = 2 * self.saturation_a * self.ohm
        inside = volt / self.ohm * (1 - volt / (2 * knee))
        return np.where(volt < 0, volt / self.ohm, np.where(volt < knee, inside, self.saturation_a))

    def pad_a(self, volt, time, *, rising):
        """Current into the pad while one transistor hands over to the other."""
        on = 0.5 * (1 - np.cos(np.pi * np.clip(time / self.handover_s, 0, 1)))
        up = on if rising else 1 - on
        return (1 - up) * self.transistor_a(volt) - up * self.transistor_a(self.supply_v - volt)

    def waveform(self, load_ohm, load_v, *, rising, end_s=None, points=200):
        """Pad voltage from rest into a resistor, integrated. (K,), (K,)"""
        end_s = end_s or 4 * self.handover_s
        time = np.linspace(0, end_s, points)

        def slope(t, v):
            return -(self.pad_a(v, t, rising=rising) + (v - load_v) / load_ohm) / self.pad_f

        found = solve_ivp(slope, (0, end_s), [load_v], t_eval=time, rtol=1e-8, atol=1e-9,
                          max_step=self.handover_s / 50)  # fmt: skip
        return time, found.y[0]


CORNERS = {
    "typ": Corner(),
    "min": Corner(supply_v=3.0, ohm=28.0, saturation_a=0.055, handover_s=1.5e-9),
    "max": Corner(supply_v=3.6, ohm=14.0, saturation_a=0.11, handover_s=0.7e-9),
}


def model_text(
    name, corners=CORNERS, kind="Output", fixture_ohm=50.0, waveforms=True, rows=(97, 240)
):
    """Write one model, with so many rows of current and of voltage."""
    supply = [corners[c].supply_v for c in COLUMNS]
    volts = np.linspace(-supply[0], 2 * supply[0], rows[0])
    lines = [
        f"[Model] {name}",
        f"Model_type {kind}",
        f"C_comp {corners['typ'].pad_f * 1e12:.3f}pF NA NA",
        "[Voltage Range] " + " ".join(f"{v:.2f}V" for v in supply),
    ]
    for keyword, sign in (("[Pulldown]", 1), ("[Pullup]", -1)):
        lines.append(keyword)
        for volt in volts:
            cells = [f"{sign * float(corners[c].transistor_a(volt)):.6e}" for c in COLUMNS]
            lines.append(f"{volt:.5f} {' '.join(cells)}")
    lines += _ramp(corners, fixture_ohm)
    for rising in (True, False) if waveforms else ():
        lines += _waveform(corners, fixture_ohm, rising, rows[1])
    return "\n".join(lines) + "\n"


def _levels(corner, fixture_ohm, rising):
    """Pad voltage of a corner into the fixture that a line is to the edge."""
    return corner.waveform(fixture_ohm, 0.0 if rising else corner.supply_v, rising=rising)


def _ramp(corners, fixture_ohm):
    """Write 20 to 80 % of the integrated waveforms."""
    lines = ["[Ramp]"]
    for word, rising in (("r", True), ("f", False)):
        cells = []
        for column in COLUMNS:
            time, volt = _levels(corners[column], fixture_ohm, rising)
            share = (volt - volt[0]) / (volt[-1] - volt[0])
            span = np.interp(0.8, share, time) - np.interp(0.2, share, time)
            cells.append(f"{0.6 * abs(volt[-1] - volt[0]):.5f}/{span * 1e9:.5f}n")
        lines.append(f"dV/dt_{word} {' '.join(cells)}")
    return [*lines, f"R_load = {fixture_ohm:g}"]


def _waveform(corners, fixture_ohm, rising, rows):
    """Write a waveform table."""
    waves = [_levels(corners[c], fixture_ohm, rising) for c in COLUMNS]
    end = max(time[-1] for time, _ in waves)
    time = np.linspace(0, end, rows)
    volts = [np.interp(time, *wave) for wave in waves]
    rail = 0.0 if rising else corners["typ"].supply_v
    lines = [
        f"[{'Rising' if rising else 'Falling'} Waveform]",
        f"R_fixture = {fixture_ohm:g}",
        f"V_fixture = {rail:.2f}",
    ]
    if not rising:
        lines += [f"V_fixture_min = {corners['min'].supply_v:.2f}",
                  f"V_fixture_max = {corners['max'].supply_v:.2f}"]  # fmt: skip
    return lines + [
        f"{t * 1e9:.5f}n {' '.join(f'{v[k]:.6f}' for v in volts)}" for k, t in enumerate(time)
    ]


def file_text(*models, pins=(), selectors=(), package=""):
    """Write a whole file."""
    lines = ["[IBIS Ver] 4.1", "[File Name] invented.ibs", "[Component] QX-1"]
    lines += ["[Package]", package or "R_pkg 0 NA NA"]
    if pins:
        lines += ["[Pin] signal_name model_name R_pin L_pin C_pin", *pins]
    for name, entries in selectors:
        lines += [f"[Model Selector] {name}", *entries]
    return "\n".join(lines) + "\n" + "".join(models) + "[End]\n"
