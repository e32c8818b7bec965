"""Avalanche and inrush of makers' notes.

Toshiba FAQ on avalanche energy, IRF AN-1005, Vishay 91015 note b (inputs), Texas Instruments CSD19535KTT and
LM5069 as marked; numbers are recomputed in plain arithmetic.
"""

import math

import pytest

from drc_power.physics import avalanche, inrush


def test_rated_energy_of_a_data_sheet():
    """CSD19535KTT: 95 A, 0.1 mH, 451 mJ printed (FOUND)."""
    assert avalanche.stored_energy_j(0.1e-3, 95.0) * 1e3 == pytest.approx(451, abs=0.5)


def test_energy_with_and_without_the_supply():
    """V_DD 25 V, 4.8 mH, 5.6 A of Vishay 91015 note b (inputs FOUND), BV 100 V: 75.3 and 100.4 mJ."""
    plain_mj = avalanche.stored_energy_j(4.8e-3, 5.6) * 1e3
    assert plain_mj == pytest.approx(75.3, abs=0.05)
    whole_mj = avalanche.turn_off_energy_j(4.8e-3, 5.6, 100.0, 25.0) * 1e3
    assert whole_mj == pytest.approx(plain_mj * 100 / (100 - 25), rel=1e-12)
    assert whole_mj == pytest.approx(100.4, abs=0.05)


def test_repetitive_avalanche_of_an_1005():
    """P = 0.5 · 1.3 · BV · I = ΔT/Z, I = 2 ΔT/(1.3 · BV · Z): FOUND, numbers by hand."""
    assert avalanche.repetitive_current_a(50.0, 40.0, 0.033) == pytest.approx(2 * 50 / (1.3 * 40 * 0.033))
    assert avalanche.repetitive_pulse_w(58.0, 40.0) == pytest.approx(0.5 * 1.3 * 40 * 58)


def test_peak_of_a_triangle_at_half_its_length():
    """AN10273 (MEMORY): 2/3 · V · I · Z(t/2), with Z ~ √t 0.4714 of V · I · Z(t)."""
    assert avalanche.peak_rise_k(1.0, 1.0, math.sqrt(0.5)) == pytest.approx(0.4714, abs=0.5e-4)


def test_slew_limited_inrush():
    """1000 µF, 24 V, 1 V/ms: 1 A, 24 ms, 24 W peak, 288 mJ, t_eq 12 ms (algebra; shape of SLVA673A figure 7)."""
    i_a = inrush.slew_current_a(1000e-6, 1000.0)
    assert i_a == pytest.approx(1.0)
    assert inrush.charge_time_s(1000e-6, 24.0, i_a) * 1e3 == pytest.approx(24)
    _, v_v, path_a = inrush.charge_path(1000e-6, 24.0, i_a)
    assert (v_v * path_a).max() == pytest.approx(24)
    energy_j = inrush.charge_energy_j(1000e-6, 24.0, i_a)
    assert energy_j * 1e3 == pytest.approx(288)
    assert energy_j / 24.0 * 1e3 == pytest.approx(12)


def test_power_then_current_limited_inrush():
    """LM5069 (MEMORY, re-derived): t = C/2 · (V²/P + P/I²)."""
    expected_s = 1e-3 / 2 * (48**2 / 60 + 60 / 8**2)
    assert inrush.power_limited_time_s(1e-3, 48.0, 60.0, 8.0) == pytest.approx(expected_s, rel=1e-12)


def test_share_of_the_energy_lost_into_a_bank_that_holds_charge():
    """8.3 % from 40 to 48 V, 50 % from 0 V: FOUND-2nd."""
    assert inrush.lost_share(40.0, 48.0) * 100 == pytest.approx(8.3, abs=0.05)
    assert inrush.lost_share(0.0, 48.0) * 100 == pytest.approx(50)
