"""Transistors in linear mode: Infineon, Linear Mode Operation and Safe Operating Diagram of Power-MOSFETs, V1.1 (2017),
section 2.1 FOUND-2nd; Spirito et al. 2002 MEMORY; onsemi 2N3055 and 2N6052 data sheets FOUND.
"""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from drc_power.physics import envelope


def test_power_line():
    """I = (T_jmax − T_c)/(Z_thJC · V_DS): 150 K over 0.5 K/W at 30 V are 10 A; half of it with the case at 100 °C."""
    assert envelope.power_line_a(30.0, 0.5, 25.0, 175.0) == pytest.approx(10.0)
    assert envelope.power_line_a(30.0, 0.5, 100.0, 175.0) == pytest.approx(5.0)


@pytest.mark.parametrize(("alpha_a_per_k", "runs_away"), [(0.030, False), (0.040, False), (0.043, True), (0.060, True)])
def test_the_criterion_parts_what_settles_from_what_runs_away(alpha_a_per_k, runs_away):
    """V_DS · Z_th · dI_D/dT > 1 is unstable. Simulated: 24 V, 1 K/W and 0.1 s, 2 A at the start, 20 time constants."""
    rates = lambda _, y: [((24.0 * (2.0 + alpha_a_per_k * y[0])) * 1.0 - y[0]) / 0.1]  # noqa: E731
    rise_k = solve_ivp(rates, [0, 2], [0.0], t_eval=[0, 1, 2], rtol=1e-8).y[0]
    assert (np.diff(rise_k, 2)[0] > 0) == runs_away, "the second second heats more than the first"
    assert (envelope.instability_gain(24.0, 1.0, alpha_a_per_k) > 1.0) == runs_away


def test_second_breakdown_in_both_styles():
    """2N3055, drawn for a case at 25 °C: 2.87 A at 40 V for 1 s is the thermal line (1.52 K/W, 200 °C), so it falls
    with it. 2N6052, drawn for the peak junction: second breakdown stays, heat takes over when hot."""
    case_c = np.array([25.0, 112.5, 200.0])
    thermal_a = envelope.power_line_a(40.0, 1.52, case_c, 200.0)
    derated = envelope.second_breakdown_factor(case_c, 200.0, 0.4)
    by_case = envelope.bjt_safe_current_a(2.87, derated, thermal_a)
    np.testing.assert_allclose(by_case, [2.87, 2.878 / 2, 0.0], rtol=1e-3, atol=1e-12)
    by_junction = envelope.bjt_safe_current_a(1.0, envelope.second_breakdown_factor(case_c, 200.0, 1.0), thermal_a)
    np.testing.assert_allclose(by_junction, [1.0, 1.0, 0.0], atol=1e-12)
