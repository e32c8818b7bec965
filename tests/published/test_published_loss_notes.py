"""Makers' notes on losses: formulas FOUND or FOUND-2nd as marked, numbers worked out by hand beside each.

ROHM 64AN035E Rev.002 (2021) FOUND; Infineon, MOSFET Power Losses Calculation Using the Data-Sheet Parameters
(2006) FOUND-2nd; Texas Instruments SCAA035B FOUND; LM317 and LM1117 data sheets FOUND.
"""

import numpy as np
import pytest

from drc_power.physics import losses, switching, thermal


def test_buck_conduction_rohm_eq_1_and_2():
    """High side I² · R · D, low side I² · R · (1 − D): 10 A, 8 mohm, D 0.25 give 0.2 and 0.6 W."""
    assert losses.conduction_loss_w(10.0 * np.sqrt(0.25), 8e-3) == pytest.approx(0.2)
    assert losses.conduction_loss_w(10.0 * np.sqrt(0.75), 8e-3) == pytest.approx(0.6)


def test_on_resistance_infineon_eq_3():
    """R_25 · (1 + a · (T − 25)): 10 mohm, 0.4 %/K at 125 °C is 14 mohm."""
    assert losses.resistance_ohm(125.0, 10e-3, 0.004) == pytest.approx(14e-3)


def test_hard_switching_infineon_eq_7():
    """E_on = V · I · (t_ri + t_fu)/2 + Q_rr · V, E_off = V · I · (t_ru + t_fi)/2: 48 V, 10 A, 20 and 15 ns, 200 kHz."""
    edges_w = switching.overlap_loss_w(48.0, 10.0, 10.0, 20e-9, 15e-9, 200e3)
    assert edges_w == pytest.approx(1.680, abs=0.5e-3)
    assert switching.recovery_loss_w(100e-9, 400.0, 100e3) == pytest.approx(4.00, abs=0.005)


def test_gate_charge_output_capacitance_and_dead_time():
    """Items of ROHM's list (FOUND), formulas MEMORY: 0.240 W, 2.40 W, 0.096 W."""
    assert switching.gate_loss_w(100e-9, 12.0, 200e3) == pytest.approx(0.240, abs=0.5e-3)
    assert switching.output_capacitance_loss_w(300e-12, 400.0, 100e3) == pytest.approx(2.40, abs=0.005)
    assert switching.dead_time_loss_w(0.8, 10.0, 60e-9, 200e3) == pytest.approx(0.096, abs=0.5e-3)


def test_cmos_scaa035b():
    """C_pd 20 pF and C_L 50 pF at 5 V and 10 MHz: 5.0 + 12.5 mW."""
    assert losses.cmos_loss_w(20e-12, 0.0, 5.0, 10e6, 10e6) * 1e3 == pytest.approx(5.0, abs=0.05)
    assert losses.cmos_loss_w(0.0, 50e-12, 5.0, 10e6, 10e6) * 1e3 == pytest.approx(12.5, abs=0.05)


def test_linear_regulator_data_sheets():
    """P = (V_in − V_out) · I_out + V_in · I_G and θ_JA ≤ (T_j − T_a)/P: 12 V to 5 V, 0.5 A, 5 mA, 125 °C over 50 °C."""
    loss_w = losses.linear_regulator_loss_w(12.0, 5.0, 0.5, 5e-3)
    assert loss_w == pytest.approx(3.56)
    assert thermal.junction_c(50.0, loss_w, 75.0 / 3.56) == pytest.approx(125.0)


def test_electrothermal_loop():
    """Algebra: 20 A, 4 mohm, 0.005 /K, 40 K/W, 50 °C: gain 0.32, 2.647 W, 155.9 °C; solved here by repetition."""
    tj_c = 50.0
    for _ in range(200):
        tj_c = 50.0 + 40.0 * 400 * 4e-3 * (1 + 0.005 * (tj_c - 25))
    assert tj_c == pytest.approx(155.9, abs=0.05)
    loss_w = thermal.linear_equilibrium_w(400 * 4e-3, 0.005, 40.0, 50.0)
    assert loss_w == pytest.approx(2.647, abs=0.5e-3)
    assert thermal.junction_c(50.0, loss_w, 40.0) == pytest.approx(tj_c, rel=1e-9)
    assert thermal.linear_loop_gain(400 * 4e-3, 0.005, 40.0) == pytest.approx(0.32, abs=0.005)
