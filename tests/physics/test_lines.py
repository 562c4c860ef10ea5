"""Propagation on lines against scikit-rf and against causality."""

import numpy as np
import pytest
import skrf
from skrf.media import DistributedCircuit

from edgeplan.physics.lines import (
    KnownLines,
    LineConstants,
    decay,
    dielectric_factor,
    propagation,
)

FR4 = LineConstants(*np.array([52.0, 6.9e-9, 6.0, 1.1e-3, 0.02]))


def test_propagation_is_that_of_the_distributed_circuit():
    frequency = skrf.Frequency(1e6, 10e9, 201, "hz")
    omega = 2 * np.pi * frequency.f
    inductance, capacitance = 52.0 * 6.9e-9, 6.9e-9 / 52.0
    series = 1j * omega * inductance + np.sqrt(6.0**2 + 1j * omega * 1.1e-3**2 / np.pi)
    shunt = 1j * omega * capacitance * dielectric_factor(1j * omega, 0.02)
    media = DistributedCircuit(
        frequency,
        L=series.imag / omega,
        R=series.real,
        C=shunt.imag / omega,
        G=shunt.real,
    )
    gamma, impedance = propagation(1j * omega, FR4)
    np.testing.assert_allclose(gamma, media.gamma, rtol=1e-9)
    np.testing.assert_allclose(impedance, media.z0, rtol=1e-9)


def test_dielectric_has_the_stated_loss_tangent_at_one_gigahertz():
    factor = dielectric_factor(2j * np.pi * 1e9, np.array([0.0, 0.005, 0.02, 0.1]))
    np.testing.assert_allclose(factor.real, 1, rtol=1e-12)
    np.testing.assert_allclose(-factor.imag / factor.real, [0.0, 0.005, 0.02, 0.1], atol=1e-12)


def test_loss_tangent_is_nearly_flat_over_the_decades_of_digital_edges():
    factor = dielectric_factor(2j * np.pi * np.geomspace(1e7, 1e10, 31), 0.02)
    np.testing.assert_allclose(-factor.imag / factor.real, 0.02, rtol=0.06)


def test_resistance_tends_to_skin_constant_times_root_of_frequency():
    line = LineConstants(*np.array([50.0, 6e-9, 4.0, 1e-3, 0.0]))
    s = 2j * np.pi * 1e12
    gamma, impedance = propagation(s, line)
    resistance = (gamma * impedance).real
    assert resistance == pytest.approx(1e-3 * np.sqrt(1e12), rel=1e-4)


def test_resistance_at_low_frequency_is_that_of_direct_current():
    gamma, impedance = propagation(2j * np.pi * 1.0, FR4)
    assert (gamma * impedance).real == pytest.approx(6.0, rel=1e-6)


def test_attenuation_is_positive_and_impedance_has_a_positive_real_part():
    s = np.geomspace(1e3, 1e12, 400)[:, None] * np.exp(1j * np.linspace(0, np.pi / 2, 7))
    gamma, impedance = propagation(s, FR4)
    assert (gamma.real > 0).all()
    assert (impedance.real > 0).all()


def test_nothing_arrives_before_the_wave():
    samples, step, length = 2048, 5e-12, 0.3
    s = (6 + 2j * np.pi * np.arange(samples // 2 + 1)) / (samples * step)
    ramp = np.pi**2 / ((s * 100e-12) ** 2 + np.pi**2) * (1 + np.exp(-s * 100e-12)) / 2
    gamma, _ = propagation(s, FR4)
    # Delay at infinite frequency, where dielectric and skin lag have died away.
    front = length * 6.9e-9 * np.sqrt(dielectric_factor(1e15, 0.02).real)
    wave = np.fft.irfft(ramp / s * np.exp(-gamma * length), samples)
    wave *= np.exp(6 * np.arange(samples) / samples) / step
    wave -= 1 / np.expm1(6)
    before = wave[: int(front / step)]
    assert np.abs(before).max() < 1e-4


def test_lossless_line_is_lossless():
    line = LineConstants(*np.array([50.0, 6e-9, 0.0, 0.0, 0.0]))
    gamma, impedance = propagation(2j * np.pi * np.array([1e6, 1e9]), line)
    np.testing.assert_allclose(gamma, 2j * np.pi * np.array([1e6, 1e9]) * 6e-9, rtol=1e-12)
    np.testing.assert_allclose(impedance, 50.0, rtol=1e-12)


def test_decay_is_the_exponential_of_the_negative():
    exponent = np.random.default_rng(1).normal(size=(50, 2)) @ np.array([1, 3j])
    np.testing.assert_allclose(decay(exponent), np.exp(-exponent), rtol=1e-14)


def test_known_lines_give_each_segment_its_own_line_and_row():
    rng = np.random.default_rng(2)
    line = LineConstants(*(rng.choice(field * np.array([1.0, 1.1]), 40) for field in FR4))
    s = np.array([[1e9, 1e9j], [2e9, 3e9 + 1e9j]])
    known = KnownLines()
    for row in (rng.integers(0, 2, 40), np.zeros(40, dtype=int), np.ones(40, dtype=int)):
        index, gamma, admittance = known(line, s, row)
        own = propagation(s[row], LineConstants(*(field[:, None] for field in line)))
        np.testing.assert_allclose(gamma[index], own[0], rtol=1e-13)
        np.testing.assert_allclose(admittance[index], 1 / own[1], rtol=1e-13)


def test_known_lines_forget_when_there_are_too_many(monkeypatch):
    monkeypatch.setattr(KnownLines, "most", 3)
    known = KnownLines()
    line = LineConstants(*(np.full(3, field) for field in FR4))
    for _ in range(3):
        known(
            line._replace(impedance_ohm=np.array([40.0, 50.0, 60.0])),
            np.array([[1e9j]]),
            np.zeros(3, int),
        )
        index, _, admittance = known(line, np.array([[1e9j]]), np.zeros(3, int))
        assert len(known.rows) <= 3
    np.testing.assert_allclose(1 / admittance[index], propagation(1e9j, FR4)[1], rtol=1e-13)
