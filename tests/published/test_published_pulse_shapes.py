"""Shapes of pulses on a half space, Z_th = K · √t: exact integrals, and the two rules of the trade beside them.

The exact peaks are recomputed here by scipy's quadrature of Duhamel's integral. The 0.7 rule is Motorola
AN569/AN1040 (MEMORY); the equal-energy rule is Texas Instruments SLVA673A, eq. 7 (FOUND-2nd).
"""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from drc_power.physics import transient
from drc_power.physics.impedance import table_zth_integral_k_s_per_w, table_zth_k_per_w

SHAPES = {
    "falling triangle": (lambda t: 1 - t, [0.0, 1.0], [1.0, 0.0], 0.4714, 0.5),
    "rising triangle": (lambda t: t, [0.0, 1.0], [0.0, 1.0], 0.6667, 1.0),
    "symmetric triangle": (lambda t: 1 - abs(2 * t - 1), [0.0, 0.5, 1.0], [0.0, 1.0, 0.0], 0.5443, 2 / 3),
    "half sine": (lambda t: np.sin(np.pi * t), None, None, 0.6711, 0.731),
}


def exact_rise(power, t):
    """∫ P(t − s) · dZ/ds ds with s = u²: dZ = du."""
    return quad(lambda u: power(t - u * u), 0, np.sqrt(t), limit=200, points=[np.sqrt(max(t - 0.5, 0))])[0]


@pytest.mark.parametrize("name", SHAPES)
def test_exact_peak(name):
    power, times, powers, peak, when = SHAPES[name]
    found = minimize_scalar(
        lambda t: -exact_rise(power, t), bounds=(0.1, 1.0), method="bounded", options={"xatol": 1e-7}
    )
    assert -found.fun == pytest.approx(peak, abs=0.5e-4)
    assert found.x == pytest.approx(when, abs=0.5e-3)
    if times is None:
        times = np.linspace(0, 1, 401)
        powers = power(times)
    zth, integral = (
        (lambda t: table_zth_k_per_w(t, [1.0], [1.0])),
        (lambda t: table_zth_integral_k_s_per_w(t, [1.0], [1.0])),
    )
    ours = transient.superposed_rise_k([when, found.x], times, powers, zth, integral)
    assert ours == pytest.approx(-found.fun, rel=2e-5)


@pytest.mark.parametrize(
    ("name", "energy", "equal_energy", "over"),
    [
        ("falling triangle", 1 / 2, 0.7071, 0.50),
        ("rising triangle", 1 / 2, 0.7071, 0.06),
        ("half sine", 2 / np.pi, 0.7979, 0.19),
    ],
)
def test_equal_energy_rule_reads_high(name, energy, equal_energy, over):
    length_s = transient.equivalent_length_s(energy, 1.0)
    assert np.sqrt(length_s) == pytest.approx(equal_energy, abs=0.5e-4)
    assert np.sqrt(length_s) / SHAPES[name][3] - 1 == pytest.approx(over, abs=0.005)


def test_equal_energy_of_the_note():
    """180 mJ at 40.32 W: 4.46 ms."""
    assert transient.equivalent_length_s(0.18, 40.32) * 1e3 == pytest.approx(4.46, abs=0.005)
