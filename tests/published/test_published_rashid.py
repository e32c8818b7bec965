"""M. H. Rashid, Power Electronics, 4th edition: worked examples.

The inputs and the method are FOUND (the book's companion files of Scilab programs print no answers); an answer
below is that method evaluated with the companion's arithmetic, to the digits given. Example 17.1 is left out:
as coded there it adds and subtracts neighbouring pulses only, which is no superposition.
"""

import pytest

from drc_power.physics import snubber, switching, thermal


def test_example_4_2_switching_losses_of_a_bjt():
    """250 V, 100 A, V_CE(sat) 2 V, I_CEO 3 mA; t_d 0.5, t_r 1, t_s 5, t_f 3 µs; 10 kHz, duty 0.5."""
    f_hz, on_s, off_s = 10e3, 50e-6, 50e-6
    delay_w = 3e-3 * 250 * 0.5e-6 * f_hz
    rise_w = switching.resistive_edge_energy_j(250.0, 2.0, 100.0, 1e-6) * f_hz
    conducting_w = 2.0 * 100.0 * (on_s - 0.5e-6 - 1e-6) * f_hz
    storage_w = 2.0 * 100.0 * 5e-6 * f_hz
    fall_w = switching.resistive_edge_energy_j(250.0, 0.0, 100.0, 3e-6) * f_hz
    off_w = 3e-3 * 250 * (off_s - 5e-6 - 3e-6) * f_hz
    assert delay_w * 1e3 == pytest.approx(3.75, abs=0.005)
    assert rise_w == pytest.approx(42.33, abs=0.005)
    assert conducting_w == pytest.approx(97, abs=0.5)
    assert storage_w == pytest.approx(10, abs=0.5)
    assert fall_w == pytest.approx(125, abs=0.5)
    assert off_w == pytest.approx(0.315, abs=0.0005)
    assert delay_w + rise_w + conducting_w + storage_w + fall_w + off_w == pytest.approx(274.65, abs=0.005)
    assert switching.resistive_edge_peak_w(250.0, 2.0, 100.0) == pytest.approx(6300, abs=5)


def test_example_4_4_heat_sink():
    """T_j 150 °C, T_a 25 °C, 0.4 + 0.1 + 0.5 K/W: 125 W and a case at 100 °C."""
    loss_w = thermal.allowed_power_w(150.0, 25.0, 0.4 + 0.1 + 0.5)
    assert loss_w == pytest.approx(125, abs=0.5)
    assert thermal.junction_c(25.0, loss_w, 0.1 + 0.5) == pytest.approx(100, abs=0.5)


def test_example_4_5_snubber_of_a_chopper():
    """220 V, 100 A, 10 kHz, t_r 3 µs, t_f 1.2 µs; the book goes on with C rounded to 0.55 µF, this does not."""
    l_h, c_f = 220.0 * 3e-6 / 100.0, 100.0 * 1.2e-6 / 220.0
    assert l_h * 1e6 == pytest.approx(6.6, abs=0.05)
    assert c_f * 1e6 == pytest.approx(0.5455, abs=0.5e-4)
    assert snubber.critical_resistance_ohm(l_h, c_f) == pytest.approx(6.957, abs=0.5e-3)
    assert 100e-6 / 3 / c_f == pytest.approx(61.1, abs=0.05)
    assert 220.0 / (0.1 * 100.0) == pytest.approx(22, abs=0.5)
    assert switching.rc_snubber_edge_loss_w(c_f, 220.0, 10e3) == pytest.approx(132.0, abs=0.05)


def test_example_17_2_resistance_of_layers():
    """Foil 0.3 mm of 1.1 W/(m·K) on 1 cm²; copper 0.8 mm of 390 W/(m·K) on 10 mm²."""
    assert thermal.slab_rth_k_per_w(0.3e-3, 1.1, 1e-4) == pytest.approx(2.727, abs=0.5e-3)
    assert thermal.slab_rth_k_per_w(0.8e-3, 390.0, 10e-6) == pytest.approx(0.2051, abs=0.5e-4)


def test_example_17_3_snubber_of_a_recovering_diode():
    """I_R 20 A, L 50 µH, 220 V, peak 1.5 · V_s; read from the book's chart: d_0 0.75, δ_0 0.4."""
    c_f = snubber.snubber_capacitance_f(50e-6, 20.0, 220.0, 0.75)
    assert c_f * 1e6 == pytest.approx(0.7346, abs=0.5e-4)
    r_ohm = snubber.snubber_resistance_ohm(50e-6, c_f, 0.4)
    assert r_ohm == pytest.approx(6.60, abs=0.005)
    assert snubber.resonance_rad_per_s(50e-6, c_f) == pytest.approx(165_000, abs=500)
    assert r_ohm * 20.0 == pytest.approx(132, abs=0.5)
    # The chart's peak of 1.5, to the width of a line on it.
    assert snubber.recovery_peak_v(220.0, 20.0, 50e-6, c_f, r_ohm) / 220.0 == pytest.approx(1.5, abs=0.005)
    # The chart's mean dv/dt, 0.88 · V_s · ω_0.
    assert 0.88 * 220.0 * snubber.resonance_rad_per_s(50e-6, c_f) * 1e-6 == pytest.approx(31.9, abs=0.06)
